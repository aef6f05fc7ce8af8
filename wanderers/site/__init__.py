"""From a place on the Earth: when bodies rise and set there, how high they stand, what can be seen."""
