"""How many threads parallel kernels run on. The bits of their results do not depend on it."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

import numba

from driftwell.errors import DriftwellError


def threads_now() -> int:
    """How many threads parallel kernels run on now."""
    settings: Any = numba.config
    return int(numba.get_num_threads()) if int(settings.NUMBA_NUM_THREADS) > 1 else 1


@contextmanager
def on_threads(count: int) -> Iterator[int]:
    """Within it, parallel kernels run on `count` threads; gives how many they really get.

    More than ``NUMBA_NUM_THREADS``, which is fixed when numba is imported, cannot be had; left
    unset it is the number of cores.

    Raises DriftwellError where threads cannot be started, or compilation is switched off.
    """
    settings: Any = numba.config
    if settings.DISABLE_JIT:
        raise DriftwellError(
            "NUMBA_DISABLE_JIT is set, so nothing can be compiled; needs it unset: "
            "`unset NUMBA_DISABLE_JIT`, then run again."
        )
    most = int(settings.NUMBA_NUM_THREADS)
    possible = min(count, most)
    if most == 1:
        yield possible
        return
    try:
        before = numba.get_num_threads()
        numba.set_num_threads(possible)
    except (ValueError, RuntimeError, ImportError) as fault:
        why = " ".join(str(fault).split())
        raise DriftwellError(
            f"{possible} threads cannot be started ({why}). Unset NUMBA_THREADING_LAYER, or run on "
            "one thread with --threads 1."
        ) from fault
    try:
        yield possible
    finally:
        numba.set_num_threads(before)
