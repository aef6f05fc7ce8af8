"""A season turned into a plan: which nights, which frame, which stars."""
