"""The dossier of a retrograde season: one page with what a script or a campaign needs."""
