"""What happens when: one finder a kind, one shared search, the catalogue that runs them, and seasons."""
