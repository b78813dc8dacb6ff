"""How a figure is asked for: what may be chosen, and how values with units are read.

A value is a text as a scenario has it, such as "35 us", or a number in SI; a stretch is two of
them, such as "-2 mm..2 mm".
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any

from driftwell.errors import DriftwellError
from driftwell.forms import Frequency, Length, Time, read_quantity
from driftwell.forms.faults import nearest
from driftwell.record.reader import TIME_TOLERANCE, Run

Value = str | float
Stretch = str | tuple[float, float]

AXES = "xyz"
PLANES = ("zx", "zy", "xy", "yx", "xz", "yz")
BETWEEN = ".."
"""Between the ends of a stretch, such as ``-2 mm..2 mm``."""
COLUMN, PAGE = 0.085, 0.175
"""Widths of a column and of a page, m."""
NARROWEST, WIDEST = 0.03, 1.0
MOST_LISTED = 16
_DECLARED = {"m": Length, "s": Time, "Hz": Frequency}


class FigureError(DriftwellError):
    """A figure or a movie cannot be made as it was asked for."""


@dataclass(frozen=True, slots=True)
class FigureOptions:
    """What a user may choose; each kind of figure looks at what has a meaning for it.

    of : names of clouds; empty: all of them
    at : the time of a snapshot, "start" or "end"; of a field, any time
    axis : "x", "y" or "z"
    plane : letters across and up, such as "zx"
    through : place of the plane along the third axis
    detector : its name
    trace : name of a traced coordinate
    across, up : limits of the axes; None: what holds all there is to show
    width : "column", "page", or a length; height : a length. None: what suits the figure
    title : whether the run's title stands above
    """

    of: tuple[str, ...] = ()
    at: Value | None = None
    axis: str | None = None
    plane: str | None = None
    through: Value = 0.0
    detector: str | None = None
    trace: str | None = None
    across: Stretch | None = None
    up: Stretch | None = None
    width: Value | None = None
    height: Value | None = None
    title: bool = False


def known(word: str, names: Iterable[str], what: str) -> str:
    """`word`, if it is one of the names; `what` : what they are names of, such as "cloud".

    Raises FigureError that names the nearest, and those there are.
    """
    there = list(dict.fromkeys(names))
    if word in there:
        return word
    meant = nearest(word, there)
    hint = f'did you mean "{meant}"? There' if meant is not None else "there"
    raise FigureError(f'{what}: no {what} is called "{word}"; {hint} is {listed(there)}.')


def listed(names: Iterable[str]) -> str:
    """Names in words, a few of them."""
    shown = [f'"{name}"' for name in names]
    if len(shown) > MOST_LISTED:
        shown = [*shown[:MOST_LISTED], f"and {len(shown) - MOST_LISTED} more"]
    return ", ".join(shown) or "none"


def value(given: Value, unit: str, what: str) -> float:
    """A value in SI, from a text with a unit or from a number; `unit` : m, s or Hz."""
    if not isinstance(given, str):
        return float(given)
    try:
        return read_quantity(_DECLARED[unit], given.strip())
    except ValueError as fault:
        raise FigureError(f'{what}: "{given}" cannot be read: {fault}.') from fault


def stretch(given: Stretch | None, unit: str, what: str) -> tuple[float, float] | None:
    """The ends of a stretch in SI; None where none was asked for."""
    if given is None:
        return None
    ends: tuple[Any, ...] = tuple(given.split(BETWEEN)) if isinstance(given, str) else given
    if len(ends) != 2:
        raise FigureError(
            f'{what}: "{given}" is no stretch; needs two values with {BETWEEN} between them, such '
            f"as 1 {unit}{BETWEEN}2 {unit}."
        )
    low, high = (value(end, unit, what) for end in ends)
    if not low < high:
        raise FigureError(f'{what}: "{given}" ends before it begins; needs the lower value first.')
    return low, high


def axis_number(given: str | None, default: int) -> int:
    """0, 1 or 2 for x, y or z."""
    return default if given is None else AXES.index(known(given, AXES, "axis"))


def plane_axes(given: str) -> tuple[int, int]:
    """Numbers of the axes across and up of a plane such as "zx"."""
    letters = known(given.replace("-", ""), PLANES, "plane")
    return AXES.index(letters[0]), AXES.index(letters[1])


def snapshot_time(run: Run, given: Value | None) -> float:
    """The time of a snapshot, s; raises FigureError that names the nearest where none is there."""
    times = run.snapshots
    if not times:
        raise FigureError(f"{run.folder}: the run kept no snapshot; this figure needs one.")
    if given is None or given == "end":
        return times[-1]
    wanted = times[0] if given == "start" else value(given, "s", "at")
    found = min(times, key=lambda time: abs(time - wanted))
    if abs(found - wanted) > TIME_TOLERANCE * run.header.duration:
        raise FigureError(
            f"at: no snapshot at {wanted:.6g} s; the nearest is at {found:.6g} s, and there are "
            f"{len(times)} from {times[0]:.6g} s to {times[-1]:.6g} s. A question `at` a time, or "
            "`snapshots` in [record], keeps more of them."
        )
    return found


def width_of(options: FigureOptions, usual: float) -> float:
    """Width of the figure, m."""
    given = options.width
    if given is None:
        return usual
    if given in ("column", "page"):
        return COLUMN if given == "column" else PAGE
    return _within(value(given, "m", "width"), "width")


def height_of(options: FigureOptions, usual: float) -> float:
    """Height of the figure, m."""
    if options.height is None:
        return usual
    return _within(value(options.height, "m", "height"), "height")


def _within(length: float, what: str) -> float:
    if not NARROWEST <= length <= WIDEST:
        raise FigureError(
            f"{what}: {length:.4g} m is no size for a figure; needs {NARROWEST:g} m to "
            f"{WIDEST:g} m."
        )
    return length
