"""What every kind of process declares, and the numbers it packs for compiled code."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Self

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import (
    Form,
    Length,
    Name,
    NonNegative,
    Positive,
    Time,
    checked,
    key,
    refuse,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault

FLOW, RATE, SLOPE = 2, 0, 1
"""Where in a row of parameters stand the velocity (3), m/s, that a charge's own is counted from,
and for what comes in events their largest rate: RATE + SLOPE |velocity|, 1/s and 1/m."""
OWN = 5
"""Where a kind's own parameters begin."""
BOX = 8
"""Numbers of a region: 1 where there is one, from and to along x, y and z, radius squared."""

Interval = tuple[Length, Length]


class Region(Form):
    """The part of space in which a process acts; what is left out is not bounded."""

    x: Interval | None = key("from and to along x", default=None, example=["-1 mm", "1 mm"])
    y: Interval | None = key("from and to along y", default=None)
    z: Interval | None = key("from and to along z", default=None)
    radius: Positive[Length] | None = key("largest distance from the z axis", default=None)

    @checked
    def _ordered(self) -> Self:
        for name, interval in (("x", self.x), ("y", self.y), ("z", self.z)):
            if interval is not None and not interval[0] < interval[1]:
                raise refuse(f"`{name}` must go from the smaller to the larger")
        return self

    def packed(self) -> tuple[float, ...]:
        """The region as numbers for compiled code."""
        ends = [
            (-math.inf, math.inf) if each is None else each for each in (self.x, self.y, self.z)
        ]
        radius = math.inf if self.radius is None else self.radius
        return (1.0, *ends[0], *ends[1], *ends[2], radius * radius)

    def words(self) -> str:
        """Where it is, to end a sentence with."""
        parts = [
            f"{spelled(ends[0], 'm')} < {name} < {spelled(ends[1], 'm')}"
            for name, ends in (("x", self.x), ("y", self.y), ("z", self.z))
            if ends is not None
        ]
        if self.radius is not None:
            parts.append(f"within {spelled(self.radius, 'm')} of the z axis")
        return ", ".join(parts) or "everywhere"


@dataclass(frozen=True, slots=True)
class PackedProcess:
    """How a process acts on one body, as numbers for compiled code.

    kind : number of the kernel; rate, slope : 1/s and 1/m, see :data:`RATE`
    flow : m/s; own : the kind's own numbers
    """

    kind: int
    own: tuple[float, ...]
    rate: float = 0.0
    slope: float = 0.0
    flow: tuple[float, float, float] = (0.0, 0.0, 0.0)

    def row(self, size: int) -> NDArray[np.float64]:
        """One row of parameters."""
        made = np.zeros(size)
        made[RATE], made[SLOPE], made[FLOW : FLOW + 3] = self.rate, self.slope, self.flow
        made[OWN : OWN + len(self.own)] = self.own
        return made


class ProcessForm(Form):
    """Base of all processes."""

    name: Name = key("what the process is called in messages and results")
    of: tuple[Name, ...] | None = key(
        "clouds, sources and species it acts on, by name; left out: every charge",
        default=None,
        example=["load"],
    )
    start: NonNegative[Time] = key("when it begins to act", default=0.0)
    end: Positive[Time] | None = key(
        "when it ceases to act; left out: never", default=None, example="1 ms"
    )
    region: Region | None = key("where it acts; left out: everywhere", default=None)

    @checked
    def _in_time(self) -> Self:
        if self.end is not None and self.end <= self.start:
            raise refuse("`end` must be later than `start`")
        return self

    def acts_on(self, cloud: str, species: str) -> bool:
        """Whether it acts on the charges of a cloud."""
        return self.of is None or cloud in self.of or species in self.of

    def packed(self, body: Body) -> PackedProcess:
        """How it acts on one body, as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def faults(self, bodies: tuple[Body, ...]) -> list[Fault]:
        """What does not fit the bodies it acts on; paths of keys count from the process's table."""
        return []

    def is_continuous(self) -> bool:
        """Whether it acts all the time, as drag does, not in events."""
        return False

    def takes_charges(self) -> bool:
        """Whether charges may be lost to it."""
        return False

    def breaks(self, duration: float) -> list[float]:
        """Times within the run at which it begins or ceases to act, s."""
        times = (self.start, math.inf if self.end is None else self.end)
        return [time for time in times if 0.0 < time < duration]

    def words(self) -> str:
        """What it does, for `driftwell check`."""
        raise TypeError(f"{type(self).__name__} must describe itself")

    def bounded_words(self) -> str:
        """What it does, on whom, where and when."""
        parts = [self.words()]
        if self.of is not None:
            parts.append(f"on {', '.join(self.of)}")
        if self.region is not None:
            parts.append(self.region.words())
        if self.start > 0.0:
            parts.append(f"from {spelled(self.start, 's')}")
        if self.end is not None:
            parts.append(f"until {spelled(self.end, 's')}")
        return ", ".join(parts)
