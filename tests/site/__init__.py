"""Tests of what is seen from a site."""
