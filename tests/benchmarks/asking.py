"""Asking the catalogue with nothing in memory, as a command does."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import polars as pl

from wanderers.ephemeris.kernels import find_kernel, inspect_kernel
from wanderers.ephemeris.store import TrackStore
from wanderers.events.catalogue import Query


def fresh_store(folder: Path) -> TrackStore:
    """Return a store with nothing in memory."""
    kernel = inspect_kernel(find_kernel(None, folder, {}), folder)
    return TrackStore(kernel, folder)


def asked(table: Callable[[TrackStore, Query], pl.DataFrame], folder: Path, query: Query) -> int:
    """Ask an almanac of a store with nothing in memory, and return how many events it has."""
    return table(fresh_store(folder), query).height
