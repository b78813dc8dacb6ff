"""When a segment is sealed: often, so that little is lost, yet hundreds of files, not thousands.

Every segment ends with the state, 104 bytes a charge and more. A large one waits until the rows are
half as many bytes, so that states never fill a disk; or for a time in proportion to its size, some
minutes at most.
"""

from __future__ import annotations

import math

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


def segments_of(seconds: float, records: int, rows: int, state: int) -> int:
    """Segments into which a run is cut, the last one at its end.

    seconds : s that the run lasts by the clock; 0 where only its bytes are to cut it
    records : times at which it may be sealed; rows : bytes of all of them; state : of one state

    What is recorded is taken to come evenly.
    """
    if records <= 0:
        return 1
    record, pace = rows / records, seconds / records
    count, at, sealed = 0, 0, 0.0
    while True:
        elapsed = at * pace
        by_time = longest_wait(elapsed, state) / pace if pace > 0.0 else math.inf
        by_bytes = most_bytes(int(sealed), state) / record if record > 0.0 else math.inf
        span = max(min(by_time, by_bytes), 1.0)
        left = records - at
        if span > left:
            return count + 1
        step = math.ceil(span)
        if by_time <= by_bytes and elapsed >= SHARE * LONGEST:  # from here on the wait is the same
            return count + left // step + 1
        count, at = count + 1, at + step
        sealed += step * record + state
