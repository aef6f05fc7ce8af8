"""Small packaged data: bright stars and published values, with the scripts that made them."""
