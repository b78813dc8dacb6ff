"""Times as a person reads them: how long something lasts, and what the clock shows at its end."""

from __future__ import annotations

from datetime import datetime, timedelta

_MINUTE, _HOUR, _DAY, _YEAR = 60.0, 3600.0, 86400.0, 3.156e7


def by_the_clock(rest: float) -> str:
    """What the clock will show `rest` s from now: the time, the day and time, or the date."""
    try:
        done = datetime.now() + timedelta(seconds=rest)
    except (OverflowError, ValueError):
        return "in no time that can be told"
    if rest < 12 * _HOUR:
        return f"{done:%H:%M:%S}"
    return f"{done:%a %H:%M}" if rest < 6 * _DAY else f"{done:%Y-%m-%d}"


def lasting(seconds: float) -> str:
    """A length of time to two digits or so, e.g. ``"3 h 20 min"``."""
    if seconds < 10.0:
        return f"{seconds:.2g} s"
    if seconds < 2.0 * _MINUTE:
        return f"{seconds:.0f} s"
    for small, large, units in ((1.0, _MINUTE, "min s"), (_MINUTE, _HOUR, "h min")):
        if seconds < 60.0 * large:
            whole, part = divmod(round(seconds / small), 60)
            first, second = units.split()
            if whole >= 10 or not part:
                return f"{round(seconds / large)} {first}"
            return f"{whole} {first} {part} {second}"
    if seconds < 2.0 * _YEAR:
        return f"{seconds / _DAY:.2g} days" if seconds < 10 * _DAY else f"{seconds / _DAY:.0f} days"
    return f"{float(f'{seconds / _YEAR:.1e}'):g} years"
