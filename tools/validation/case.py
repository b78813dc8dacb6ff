"""What is compared: a case is a scenario, and checks of what its run says."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from driftwell.record.reader import Run

if TYPE_CHECKING:
    from validation.bench import Bench

AREAS = (
    "statics",
    "traps",
    "crystals",
    "beams",
    "plasmas",
    "sources",
    "gas",
    "electrodes",
    "magnets",
    "relativity",
)

COMPUTED = "computed"
READ = "read"
FROM_MEMORY = "from memory"


@dataclass(frozen=True, slots=True)
class Published:
    """A value that is known from elsewhere.

    value, error : in the check's unit; `error` holds its digits and what else it is good for
    source : where it is from
    known : how it is known: computed from the formula named, read in the source, from memory
    """

    value: float
    error: float
    source: str
    known: str


@dataclass(frozen=True, slots=True)
class Reading:
    """A value read from a run, with its sampling error; 0 where nothing was drawn."""

    value: float
    error: float = 0.0


Reader = Callable[[Run], Reading]


@dataclass(frozen=True, slots=True)
class Check:
    """One value of a case.

    what, unit : in words
    published : what it should be
    read : the question that gives it, by name, or a function of the run
    scale : what the answer in SI units is multiplied by for `unit`
    """

    what: str
    unit: str
    published: Published
    read: str | Reader
    scale: float = 1.0


@dataclass(frozen=True, slots=True)
class Axis:
    """The scenario with something of its arithmetic altered: what that changes is an error."""

    name: str
    settings: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Curve:
    """What a case shows besides: measured points, and the published line or points."""

    x_name: str
    y_name: str
    x: list[float]
    y: list[float]
    error: list[float]
    published_x: list[float]
    published_y: list[float]
    log_y: bool = False


@dataclass(frozen=True, slots=True)
class Found:
    """A check with what driftwell says.

    errors : by what makes them, in the check's unit; "sampling" and the axes
    """

    what: str
    unit: str
    published: Published
    value: float
    errors: Mapping[str, float]

    @property
    def error(self) -> float:
        """The combined error, with the last digits of double precision."""
        return math.hypot(4e-15 * abs(self.value), *self.errors.values())

    @property
    def bars(self) -> float:
        """Distance to the published value, in combined errors of both, with its sign."""
        apart = self.value - self.published.value
        both = math.hypot(self.error, self.published.error)
        return apart / both if both > 0.0 else (0.0 if apart == 0.0 else math.inf)


Files = Callable[[Path], None]


@dataclass(frozen=True, slots=True)
class Case:
    """One scenario and what it is compared with.

    name : of the case, of its scenario in cases/ and of its picture
    area, title : where it belongs; what is done, in a sentence
    checks : what is compared
    axes : what is altered to know the error; each is run beside the scenario itself
    seeds : how often it is run with another seed, the scatter being the sampling error
    settings : given beside the scenario
    scenario : name of its file, where this is not the case's own
    files : writes what the scenario reads into its folder
    remark : what must be known to judge it, or why it is beyond two error bars
    quick : whether it is one of the few that take seconds together
    curve : what its picture shows besides
    converged : its errors are those of `driftwell converge`; all of its checks are questions
    measured : finds the values, where it takes other runs than those of `axes` and `seeds`
    """

    name: str
    area: str
    title: str
    checks: tuple[Check, ...]
    axes: tuple[Axis, ...] = ()
    seeds: int = 1
    settings: tuple[str, ...] = ()
    scenario: str = ""
    files: Files | None = None
    remark: str = ""
    quick: bool = False
    curve: Callable[[list[Found]], Curve] | None = None
    converged: bool = False
    measured: Callable[[Case, Bench], list[Found]] | None = None


def computed(value: float, source: str, relative: float = 1e-12) -> Published:
    """A value worked out here from the formula of `source`, to so many digits."""
    return Published(value, relative * abs(value), source, COMPUTED)


def halved(step: str) -> Axis:
    """The case at another step, twice as long as the scenario's own."""
    return Axis("step", (f"stepping.step={step}",))
