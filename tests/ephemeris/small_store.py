"""A small kernel's store of two blocks: what it must answer, and what it tells."""

from __future__ import annotations

from pathlib import Path

import numpy as np

from wanderers.arrays import Floats
from wanderers.ephemeris.store import TrackStore
from wanderers.ephemeris.tracks import POSITION, ROTATION

FIRST, SECOND = 17, 18
"""The two blocks that the small kernel reaches into; the seam is at JD 2451920.5."""
SEAM_JD = 2_451_920.5
JD_TT = np.linspace(SEAM_JD - 200.0, SEAM_JD + 200.0, 333)


def answers(store: TrackStore) -> Floats:
    """Positions and rotations on both sides of the seam, as one array."""
    tracks = store.tracks(float(JD_TT[0]), float(JD_TT[-1]))
    parts = [tracks.evaluate(body, JD_TT, POSITION, 2) for body in store.kernel.bodies]
    return np.concatenate([*parts, tracks.observer.evaluate(0, JD_TT, ROTATION, 2)], axis=1)


def block_files(folder: Path) -> list[Path]:
    return sorted(folder.glob("tracks/*/*"))


class Told:
    """Collects warnings."""

    def __init__(self) -> None:
        self.lines: list[str] = []

    def __call__(self, line: str) -> None:
        self.lines.append(line)
