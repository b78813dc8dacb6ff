"""When a segment is sealed: often, so that little is lost, yet hundreds of files, not thousands.

Every segment ends with the state, 104 bytes a charge and more. A large one waits until the rows are
half as many bytes, so that states never fill a disk; or for a time in proportion to its size, some
minutes at most.
"""

from __future__ import annotations

SHORTEST = 10.0
LONGEST = 60.0
"""s, bounds of the time between two segments."""

SMALLEST = 32_000_000
LARGEST = 128_000_000
"""Bounds of the bytes collected for one segment."""

STATE_RATE = 500_000
"""Bytes of state a second that are written in a long run; 1e6 charges are sealed every 208 s."""
MOST_PATIENT = 900.0
"""s, the longest wait for a large state, whatever its size."""

SHARE = 100
"""Segments in which a run's time, or its bytes, would be cut if the bounds did not bind."""


def longest_wait(elapsed: float, state: int) -> float:
    """Time after which a segment is sealed, s.

    elapsed : s since the run began; state : bytes of the state
    """
    wait = min(max(elapsed / SHARE, SHORTEST), LONGEST)
    return max(wait, min(state / STATE_RATE, MOST_PATIENT))


def most_bytes(sealed: int, state: int) -> int:
    """Bytes collected at which a segment is sealed.

    sealed : bytes of the segments before; state : bytes of the state
    """
    return max(min(max(sealed // SHARE, SMALLEST), LARGEST), state // 2)
