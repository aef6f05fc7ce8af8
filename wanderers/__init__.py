"""Apparent motion of the planets: stations, retrograde seasons, conjunctions, from a JPL kernel."""

from __future__ import annotations

from importlib.metadata import version

__version__ = version("wanderers")
__all__ = ["__version__"]
