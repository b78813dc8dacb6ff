"""Times by the clock as people write them: ``7h30m``, ``90 s``, ``1 d 12 h``, ``45 min``."""

from __future__ import annotations

import re

_SECONDS = {"d": 86400.0, "h": 3600.0, "min": 60.0, "m": 60.0, "s": 1.0}
_PART = re.compile(r"\s*(\d+(?:\.\d+)?)\s*(d|h|min|m|s)\s*", re.ASCII)


def seconds_of(text: str) -> float:
    """Seconds of such a text. Raises ValueError, saying what is needed, where it is none."""
    total, at = 0.0, 0
    while part := _PART.match(text, at):
        total += float(part[1]) * _SECONDS[part[2]]
        at = part.end()
    if at == 0 or at != len(text) or total <= 0.0:
        raise ValueError(f"{text[:40]!r} is no time such as 7h30m, 45 min or 90 s")
    return total
