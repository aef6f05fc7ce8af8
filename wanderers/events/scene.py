"""What every finder is given: the sky of a stretch of time, sampled once, and what is asked of it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import combinations
from typing import Final

import numpy as np

from wanderers.arrays import Floats, Ints
from wanderers.ephemeris.bodies import BODIES, INNER, PLANETS, Body
from wanderers.ephemeris.frames import Frame
from wanderers.ephemeris.sky import FIRST_STAR, Sky
from wanderers.events.sampling import Samples

STEP_DAYS: Final = 2.0
"""Step of the common grid. No apparent motion turns twice within two days: the quickest, Mercury near
inferior conjunction and the Moon's latitude, turn over days and a week; the dense search of the tests
bears it out."""


@dataclass(frozen=True, slots=True)
class Limits:
    """Largest separations at which approaches count, degrees.

    Attributes:
        planets_deg: appulses of two planets.
        moon_deg: appulses with the Moon.
        stars_deg: appulses with a star.
        gathering_deg: diameter of the circle around a gathering.
    """

    planets_deg: float = 10.0
    moon_deg: float = 6.0
    stars_deg: float = 5.0
    gathering_deg: float = 10.0

    def of(self, body: Ints, other: Ints) -> Floats:
        """Return the limit of each pair of targets, shape (n,)."""
        without_star = np.where(body == Body.MOON.order, self.moon_deg, self.planets_deg)
        return np.where(other >= FIRST_STAR, self.stars_deg, without_star)


@dataclass(frozen=True, slots=True)
class Choice:
    """Which bodies are wanted.

    Attributes:
        bodies: the bodies; one alone stands for itself and everything it meets, several also limit whom
            they meet to each other.
        stars_for: bodies whose meetings with stars are wanted.
        limits: see :class:`Limits`.
        fewest_gathered: fewest bodies that make a gathering.
    """

    bodies: tuple[Body, ...] = BODIES
    stars_for: tuple[Body, ...] = BODIES[1:]
    limits: Limits = field(default_factory=Limits)
    fewest_gathered: int = 3

    def concerned(self) -> tuple[Body, ...]:
        """Return the bodies whose motion matters: the Sun's always does, for elongations."""
        return BODIES if len(self.bodies) == 1 else tuple(b for b in BODIES if b in (Body.SUN, *self.bodies))

    def among(self, allowed: Sequence[Body]) -> Ints:
        """Return the target numbers of the chosen bodies among some, in written order."""
        return np.array([body.order for body in allowed if body in self.bodies], dtype=np.int64)

    def pairs(self, allowed: Sequence[Body]) -> Ints:
        """Return pairs of target numbers among some bodies, shape (2, pairs), in written order."""
        lone = len(self.bodies) == 1
        wanted = [
            (a.order, b.order)
            for a, b in combinations(allowed, 2)
            if (a in self.bodies or b in self.bodies if lone else a in self.bodies and b in self.bodies)
        ]
        return np.array(wanted, dtype=np.int64).reshape(-1, 2).T


@dataclass(frozen=True, slots=True)
class Scene:
    """A stretch of sky to be searched.

    Attributes:
        sky: tracks and stars.
        samples: all bodies held, on the common grid.
        choice: what is wanted.
        frames: in which stations and conjunctions are wanted.
        approaches: whether the least separations of all pairs are wanted; else only those are found without
            which conjunctions cannot be named.
    """

    sky: Sky
    samples: Samples
    choice: Choice
    frames: frozenset[Frame] = frozenset(Frame)
    approaches: bool = True

    def planets(self) -> Ints:
        """Return the target numbers of the chosen planets the kernel holds."""
        return self.held(self.choice.among(PLANETS))

    def held(self, targets: Ints) -> Ints:
        """Return those of the targets that were sampled."""
        return np.array([t for t in targets.tolist() if t in self.samples.directions], dtype=np.int64)

    def held_pairs(self, allowed: Sequence[Body]) -> Ints:
        """Return the chosen pairs both of whose bodies were sampled, shape (2, pairs)."""
        pairs = self.choice.pairs(allowed)
        held = [pair for pair in pairs.T.tolist() if all(t in self.samples.directions for t in pair)]
        return np.array(held, dtype=np.int64).reshape(-1, 2).T

    def named_by_approaches(self, pairs: Ints) -> Ints:
        """Return the pairs whose meetings are told apart by approaches and conjunctions of both frames.

        Those that lap each other are told apart by laps; Mercury and Venus never do.
        """
        inner = [body.order for body in INNER]
        return pairs[:, np.isin(pairs, inner).all(axis=0)]
