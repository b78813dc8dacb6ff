"""When a segment is sealed: often, so that little is lost, yet hundreds of files, not thousands."""

from __future__ import annotations

SHORTEST = 10.0
LONGEST = 60.0
"""s, bounds of the time between two segments."""

SMALLEST = 32_000_000
LARGEST = 128_000_000
"""Bounds of the bytes collected for one segment."""

SHARE = 100
"""Segments in which a run's time, or its bytes, would be cut if the bounds did not bind."""


def longest_wait(elapsed: float) -> float:
    """Time after which a segment is sealed, s; `elapsed` : s since the run began."""
    return min(max(elapsed / SHARE, SHORTEST), LONGEST)


def most_bytes(sealed: int) -> int:
    """Bytes collected at which a segment is sealed; `sealed` : bytes of the segments before."""
    return min(max(sealed // SHARE, SMALLEST), LARGEST)
