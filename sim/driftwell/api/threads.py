"""How many threads a run from Python has."""

from __future__ import annotations

import os

from driftwell.errors import DriftwellError


def usable_threads(asked: int | None) -> int:
    """As asked, or as the environment says, or one for each core.

    Raises DriftwellError where it is no number of threads.
    """
    if asked is None:
        named = os.environ.get("NUMBA_NUM_THREADS", "")
        if named.isdigit() and int(named) > 0:
            return int(named)
        return len(os.sched_getaffinity(0))
    if isinstance(asked, bool) or not isinstance(asked, int) or asked < 1:
        raise DriftwellError(f"threads = {asked!r}: needs a whole number of 1 or more")
    return asked
