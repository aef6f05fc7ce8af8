"""What clouds leave of a plan, when each night is lost by chance and by itself.

Nights are taken as independent. Real clouds come in spells, so real chances of neighbouring nights are worse
than these; nights weeks apart are nearly independent.
"""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations

import numpy as np

from wanderers.arrays import Floats, Ints


def chance_of_any(cloudy: float, tries: Ints) -> Floats:
    """Return the chance that at least one of so many nights is clear, shape (n,): 1 - p^k."""
    return np.asarray(1.0 - cloudy**tries)


def chance_of_all(cloudy: float, groups: Sequence[frozenset[str]]) -> float:
    """Return the chance that every group of nights holds a clear one; groups may share nights.

    By inclusion and exclusion over the groups, of which there are few.

    Args:
        cloudy: chance that a night is lost.
        groups: the nights of each; a group without nights is never served.
    """
    total = 0.0
    for size in range(len(groups) + 1):
        for some in combinations(groups, size):
            lost = frozenset().union(*some)
            total += (-1) ** size * cloudy ** len(lost)
    return min(max(total, 0.0), 1.0)


def expected_count(clear: Floats) -> float:
    """Return the expected number of clear nights, from the chance of each, shape (n,)."""
    return float(np.sum(clear))


def longest_hole(position: Floats, start: float, end: float) -> float:
    """Return the longest stretch without a night, the ends' included.

    Args:
        position: of each night, never falling, shape (n,).
        start: position of the beginning.
        end: of the end.
    """
    return float(np.max(np.diff(np.concatenate([[start], position, [end]]))))


def expected_longest_hole(position: Floats, clear: Floats, start: float, end: float) -> float:
    """Return the expected length of the longest stretch without a clear night, the ends' included.

    For each possible length g, the chance that no hole is longer: summed over the last clear night so far,
    each within g of the clear night before it and all between lost. The expectation follows from those.

    Args:
        position: of each night, never falling, shape (n,).
        clear: the chance that each is clear, shape (n,).
        start: position of the beginning.
        end: of the end.
    """
    stops = np.concatenate([[start], position, [end]])
    holds = np.concatenate([[1.0], clear, [1.0]])
    lengths = np.unique(np.subtract.outer(stops, stops)[np.tril_indices(stops.size, -1)])
    reached = np.zeros((lengths.size, stops.size))
    reached[:, 0] = 1.0
    for stop in range(1, stops.size):
        # Chance that all nights between an earlier stop and this one are lost.
        lost = np.append(np.cumprod((1.0 - holds[1:stop])[::-1])[::-1], 1.0)
        near = stops[stop] - stops[:stop] <= lengths[:, None]
        reached[:, stop] = holds[stop] * np.sum(reached[:, :stop] * lost * near, axis=1)
    at_most = reached[:, -1]
    chance = np.diff(np.concatenate([[0.0], at_most]))
    return float(np.sum(lengths * chance))
