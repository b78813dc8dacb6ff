"""Which clouds are summed in a rest frame of their own, and what a user should be told of it.

The plain sum takes charges as at rest. Of charges that move together it misses the magnetic force,
a share beta^2 = 1 - 1/Gamma^2 of the push across their motion. Summed in the mean rest frame of
their bunch (frame_sum.py) the forces err only by what moves within it:

    share missed in the laboratory = <v^2>/c^2                                                (1)
    share missed in a frame = beta w/c + (w/c)^2,    w the rms velocity within the frame      (2)

both for a charge by itself. In (2) the terms of first order have either sign and cancel in what
many charges with velocities in all directions do together.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), eqs. 11.31, 11.149 (from memory); (2) is
their expansion in w, worked out here.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.coulomb.form import Coulomb

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_BETTER = 0.5
"""An own frame is taken by itself only where it misses less than so much of what is missed now."""


@dataclass(frozen=True, slots=True)
class Moving:
    """How charges move together.

    proper : (3,) m/s, mass-weighted mean of the proper velocities; lorentz : its Gamma
    square : mass-weighted mean of v^2/c^2 in the laboratory
    along, across : rms velocities along the mean one and across, in its frame, over c
    """

    proper: Floats
    lorentz: float
    square: float
    along: float
    across: float

    @property
    def beta(self) -> float:
        """Speed of the frame over c."""
        return math.sqrt(float(self.proper @ self.proper)) / (self.lorentz * SPEED_OF_LIGHT)

    @property
    def missed(self) -> float:
        """Share of the forces that a sum in the mean rest frame misses, eq. (2)."""
        w = math.hypot(self.along, self.across)
        return self.beta * w + w * w


def moving(velocity: Floats, mass: Floats) -> Moving:
    """The motion of charges with proper velocities (3, n), m/s, and masses (n,), at least one."""
    c2 = SPEED_OF_LIGHT**2
    weight = mass / mass.sum()
    proper = velocity @ weight
    lorentz = math.sqrt(1.0 + float(proper @ proper) / c2)
    gamma = np.sqrt(1.0 + (velocity**2).sum(axis=0) / c2)
    inner = velocities_within(velocity, proper)
    slow = inner / np.sqrt(1.0 + (inner**2).sum(axis=0) / c2) / SPEED_OF_LIGHT
    speed = math.sqrt(float(proper @ proper))
    forward = slow.T @ (proper / speed) if speed > 0.0 else np.zeros(mass.size)
    along2 = float((forward**2) @ weight)
    whole2 = float((slow**2).sum(axis=0) @ weight)
    return Moving(
        proper,
        lorentz,
        float(((velocity / gamma) ** 2).sum(axis=0) @ weight) / c2,
        math.sqrt(along2),
        math.sqrt(max(whole2 - along2, 0.0)),
    )


def velocities_within(velocity: Floats, proper: Floats) -> Floats:
    """Proper velocities (3, n), m/s, as seen in a frame that moves with `proper` (3,)."""
    c2 = SPEED_OF_LIGHT**2
    lorentz = math.sqrt(1.0 + float(proper @ proper) / c2)
    gamma = np.sqrt(1.0 + (velocity**2).sum(axis=0) / c2)
    return np.asarray(
        velocity - np.outer(proper, gamma - (proper @ velocity) / (c2 * (lorentz + 1.0)))
    )


def places_within(position: Floats, proper: Floats) -> Floats:
    """Places (3, n), m, stretched along `proper` (3,), m/s, as in its frame at one time there."""
    c2 = SPEED_OF_LIGHT**2
    lorentz = math.sqrt(1.0 + float(proper @ proper) / c2)
    return np.asarray(position + np.outer(proper, (proper @ position) / (c2 * (lorentz + 1.0))))


@dataclass(frozen=True, slots=True)
class BunchFrames:
    """The bunches of a run.

    clouds : names, in the order of their numbers
    bunch : (clouds,) to which bunch each belongs; empty where all are summed in the laboratory
    because : what is to be said of the choice at the start; empty: nothing
    """

    clouds: tuple[str, ...]
    bunch: tuple[int, ...] = ()
    because: str = ""

    @property
    def count(self) -> int:
        """Number of bunches with a frame."""
        return max(self.bunch, default=-1) + 1

    @property
    def numbers(self) -> Ints | None:
        """The bunch of each cloud as the time loop takes it; None in the laboratory."""
        return np.array(self.bunch, dtype=np.int64) if self.bunch else None

    def members(self, number: int) -> tuple[str, ...]:
        """Names of a bunch's clouds."""
        return tuple(
            name for name, own in zip(self.clouds, self.bunch, strict=True) if own == number
        )


def grouped(clouds: Sequence[str], groups: Sequence[Sequence[str]]) -> tuple[int, ...]:
    """The bunch of each cloud, where those of a group share one and others have their own."""
    shared = {name: k for k, group in enumerate(groups) for name in group}
    seen: dict[object, int] = {}
    return tuple(seen.setdefault(shared.get(name, name), len(seen)) for name in clouds)


def chosen_frames(
    form: Coulomb,
    clouds: Sequence[str],
    cloud: Ints,
    velocity: Floats,
    mass: Floats,
    unfit: bool = False,
) -> BunchFrames:
    """The frames of a run that begins with these charges.

    cloud : (n,) numbers of clouds; velocity : (3, n), m/s, proper; mass : (n,), kg
    unfit : whether something in the scenario does not go with frames, so that none is taken unasked
    """
    names = tuple(clouds)
    if form.method == "off" or form.frame == "laboratory" or mass.size < 2:
        return BunchFrames(names)
    if form.frame == "bunch":
        bunch = grouped(names, form.share_frame)
        return BunchFrames(names, bunch, _as_asked(bunch))
    now = moving(velocity, mass)
    if unfit or not now.square > form.accuracy or not now.missed < _BETTER * now.square:
        return BunchFrames(names)
    return BunchFrames(
        names,
        (0,) * len(names),
        f"The charges move together at {now.beta:.4g} c: they are summed in their own rest frame, "
        f"Gamma = {now.lorentz:.6g}, where a sum in the laboratory would miss a share of "
        f"{now.square:.1e} of their forces (coulomb.frame)",
    )


def _as_asked(bunch: Sequence[int]) -> str:
    count = max(bunch) + 1
    if count == 1:
        return "The charges are summed in the mean rest frame of them all, as the scenario says"
    return (
        f"The charges are summed in {count} bunches' own rest frames, as the scenario says: that "
        f"takes {count} sums in the place of one, and the ledger has what bunches do to each other "
        "as work, not as energy"
    )


class FrameWatch:
    """Looks at records whether the sum misses more of the forces than asked for; tells so once."""

    def __init__(self, frames: BunchFrames, accuracy: float) -> None:
        self._frames, self._accuracy = frames, accuracy
        self._told: set[int] = set()

    def look(self, velocity: Floats, mass: Floats, charge: Floats, cloud: Ints) -> list[str]:
        """What should be said of charges as they move now; arrays as of the time loop."""
        largest = float(np.abs(velocity).max(initial=0.0)) / SPEED_OF_LIGHT
        there = charge != 0.0
        if 3.0 * largest**2 <= self._accuracy or np.count_nonzero(there) < 2:
            return []
        framed = bool(self._frames.bunch)
        own = np.array(self._frames.bunch if framed else range(len(self._frames.clouds)))
        found = []
        for number in range(int(own.max(initial=-1)) + 1):
            those = there & (own[cloud] == number)
            if number in self._told or not those.any():
                continue
            now = moving(velocity[:, those], mass[those])
            wrong = now.missed if framed else now.square
            if wrong > self._accuracy:
                self._told.add(number)
                found.append(self._framed(number, now) if framed else self._plain(number, now))
        return found

    def _plain(self, number: int, now: Moving) -> str:
        name = self._frames.clouds[number]
        text = (
            f'The Coulomb sum takes charges as at rest, but "{name}" moves at '
            f"{math.sqrt(now.square):.3g} c"
        )
        if now.missed < _BETTER * now.square:
            return (
                f"{text}: magnetic forces take a share of {1.0 - now.lorentz**-2:.2g} "
                "(1 - 1/Gamma^2) off the push across its motion, which is left out. "
                'Set coulomb.frame = "bunch" to have it.'
            )
        return (
            f"{text} (rms) in all directions: its forces err by about {now.square:.2g} for that, "
            f"more than coulomb.accuracy = {self._accuracy:g}, and no frame mends it."
        )

    def _framed(self, number: int, now: Moving) -> str:
        names = " and ".join(f'"{name}"' for name in self._frames.members(number))
        proper = now.beta * now.lorentz
        causes = ""
        if proper > 0.0:
            angle = now.across / proper
            energy = now.beta * now.along * now.lorentz / (now.lorentz - 1.0)
            if angle < 1.0 and energy < 1.0:
                causes = f" (angles of {1e3 * angle:.2g} mrad, kinetic energies of {energy:.1%})"
        return (
            f"In the rest frame of {names} the charges move at "
            f"{math.hypot(now.along, now.across):.1e} c, rms{causes}: the force on each errs by "
            f"about {now.missed:.2e} for that, more than coulomb.accuracy = "
            f"{self._accuracy:g}; much of it cancels where they move in all directions."
        )
