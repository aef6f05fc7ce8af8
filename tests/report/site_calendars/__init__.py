"""Tests of calendars of a site."""
