"""Cores, threads and vector instructions: what decides how fast the sums over all pairs are."""

from __future__ import annotations

import argparse
import os
import platform
from collections.abc import Iterator
from contextlib import suppress
from pathlib import Path

from driftwell.cli.doctor.line import FAULT, NOTE, OK, Line
from driftwell.cli.options.types import threads as number_of_threads
from driftwell.cli.terminal.thread_limit import usable_cores

THREADS, DISABLED = "NUMBA_NUM_THREADS", "NUMBA_DISABLE_JIT"
_QUOTA = Path("/sys/fs/cgroup/cpu.max")
_VECTORS = (("avx512f", "AVX-512"), ("avx2", "AVX2"), ("avx", "AVX"), ("neon", "NEON"))
"""Names of the compiler's library for kinds of vector instructions, the widest first."""
_SLOW = ("avx",)
_CPU, _FEATURES = "NUMBA_CPU_NAME", "NUMBA_CPU_FEATURES"


def cores(said: str | None = None) -> Iterator[Line]:
    """How many threads a run has, and whether that suits the cores it may use.

    said : what NUMBA_NUM_THREADS said as the program began; None where it was not set
    """
    usable, all_cores = usable_cores(), os.cpu_count() or 1
    told = f"{usable} usable of {all_cores}" if usable != all_cores else f"{usable}"
    yield Line(OK, "cores", told)
    yield _threads(said, usable)
    quota = _quota()
    if quota is not None and quota < usable - 0.5:
        yield Line(
            NOTE,
            "share of cores",
            f"a container or batch system allows the work of {quota:.3g} cores: more threads wait "
            "for each other",
            f"export {THREADS}={max(1, int(quota))}",
        )


def compiler(disabled: str | None = None) -> Iterator[Line]:
    """Whether anything may be compiled, and with which vector instructions.

    disabled : what NUMBA_DISABLE_JIT says
    """
    if disabled not in {None, "", "0"}:
        yield Line(
            FAULT,
            "compiler",
            f"{DISABLED} is set: nothing can be compiled",
            f"unset {DISABLED}",
        )
    from llvmlite import binding

    forced = [name for name in (_CPU, _FEATURES) if os.environ.get(name)]
    if os.environ.get(_FEATURES):
        said = os.environ[_FEATURES].split(",")
        features = {each[1:] for each in said if each.startswith("+")}
    else:
        features = {name for name, there in binding.get_host_cpu_features().items() if there}
    name = os.environ.get(_CPU) or binding.get_host_cpu_name()
    kind = next((kind for kind in _VECTORS if kind[0] in features), None)
    where = f"{name}, {platform.machine()}"
    if kind is None or kind[0] in _SLOW:
        what = "none known" if kind is None else f"only {kind[1]}"
        yield Line(
            NOTE,
            "vectors",
            f"{what} ({where}): Coulomb sums are slower than with AVX2, AVX-512 or NEON",
            f"unset {' '.join(forced)}" if forced else "Take another machine for long runs.",
        )
    else:
        yield Line(OK, "vectors", f"{kind[1]} ({where})")


def _threads(said: str | None, usable: int) -> Line:
    """What a run without --threads takes."""
    if said is None:
        return Line(OK, "threads", f"{usable}, one for each core ({THREADS} is not set)")
    try:
        number = number_of_threads(said)
    except argparse.ArgumentTypeError:
        return Line(
            NOTE,
            "threads",
            f"{THREADS}={said[:20]!r} is not a number of threads: {usable} are taken",
            f"unset {THREADS}",
        )
    if number > usable:
        return Line(
            NOTE,
            "threads",
            f"{number}, as {THREADS} says, on {usable} core{'s' * (usable != 1)}: no faster",
            f"unset {THREADS}, or export {THREADS}={usable}",
        )
    if number < usable:
        return Line(
            NOTE,
            "threads",
            f"{number}, as {THREADS} says, of {usable} cores",
            f"To use all: unset {THREADS}, or give --threads {usable}",
        )
    return Line(OK, "threads", f"{number}, as {THREADS} says")


def _quota() -> float | None:
    """Cores' worth of work that the system allows in the mean; None without a bound."""
    with suppress(OSError, ValueError, ZeroDivisionError):
        share, period = _QUOTA.read_text().split()
        return float(share) / float(period)  # ValueError: "max"
    return None
