"""The decorators of all compiled code: they fix the flags and where the machine code is kept.

Numba's cache notices an edit of the decorated function's own file, but not of the functions it
calls: a cached caller would go on with the old callee. So the cache lives in a folder named by a
digest of all sources of the package that compiled code may be made from; an edit of these or an
upgrade begins a new folder. Folders not used for a month are removed.
"""

from __future__ import annotations

import hashlib
import os
import re
import shutil
import stat
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar, cast

import numba

from driftwell._version import __version__

PAIR_FLAGS = frozenset({"reassoc", "contract", "arcp", "nsz"})
"""What pair and expansion kernels may do to sums; never `nnan` or `ninf`: NaN must survive."""
SUM_FLAGS = frozenset({"reassoc", "contract"})
"""What sums over the charges may do: take them in lanes, in an order fixed by their number."""

ABOVE = frozenset(
    {
        "api",
        "assembly",
        "cli",
        "counted.py",
        "estimate.py",
        "exports",
        "hand",
        "judgement",
        "report",
        "run.py",
        "study",
        "timed_run.py",
    }
)
"""The layers above all that hold compiled code: imports go downward only, so none needs them."""

_MONTH = 30 * 24 * 3600.0
_PACKAGE = Path(__file__).resolve().parent.parent

F = TypeVar("F", bound=Callable[..., Any])


def sources_digest(package: Path = _PACKAGE) -> str:
    """Twelve hex digits that change with the source files compiled code may be made from."""
    digest = hashlib.sha256()
    for path in sorted(package.rglob("*.py")):
        within = path.relative_to(package)
        if within.parts[0] in ABOVE:
            continue
        digest.update(within.as_posix().encode())
        digest.update(path.read_bytes())
    return digest.hexdigest()[:12]


def _user_cache() -> Path:
    """The user's cache folder, or DRIFTWELL_CACHE where that is set."""
    named = os.environ.get("DRIFTWELL_CACHE")
    if named:
        return Path(named).absolute()
    base = os.environ.get("XDG_CACHE_HOME")
    return (Path(base) if base else Path.home() / ".cache") / "driftwell"


def _usable(folder: Path) -> bool:
    """Whether a file can be made in `folder`, which is made where it is missing."""
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder) as probe:
            probe.write(b"0" * 4096)
    except OSError:
        return False
    return True


def _private(folder: Path) -> bool:
    """Whether `folder`, made where it is missing, is the user's own and nobody else's to write in.

    Machine code read from it is run, and anybody may make a folder where temporary files live.
    """
    try:
        folder.mkdir(mode=0o700, exist_ok=True)
        status = folder.lstat()
    except OSError:
        return False
    return (
        stat.S_ISDIR(status.st_mode)
        and status.st_uid == os.getuid()
        and not (status.st_mode & (stat.S_IWGRP | stat.S_IWOTH))
    )


def _prune(parent: Path, keep: Path) -> None:
    """Remove machine code of other versions not used for a month."""
    now = time.time()
    for folder in parent.glob("kernels-*"):
        try:
            if folder != keep and now - folder.stat().st_mtime > _MONTH:
                shutil.rmtree(folder, ignore_errors=True)
        except OSError:
            continue


def cache_folder() -> Path:
    """Where machine code is kept: the user's cache folder, else a temporary one."""
    name = f"kernels-{__version__}-{sources_digest()}"
    try:
        parent = _user_cache()
    except RuntimeError:  # no home folder
        parent = None
    if parent is not None and _usable(parent / name):
        os.utime(parent / name)
        _prune(parent, parent / name)
        return parent / name
    fallback = Path(tempfile.gettempdir()) / f"driftwell-{os.getuid()}"
    if _private(fallback) and _usable(fallback / name):
        return fallback / name
    return Path(tempfile.mkdtemp(prefix="driftwell-"))


_FOLDER = cache_folder()


def kept_in() -> Path:
    """The folder of this version's machine code, and of what was measured of it on this machine."""
    return _FOLDER


def _compiled(function: F, **options: Any) -> F:
    """`function` under numba, its machine code kept in the folder of this version's sources."""
    _name_by_closure(function)
    settings: Any = numba.config
    before = settings.CACHE_DIR
    settings.CACHE_DIR = str(_FOLDER)  # read when the function is decorated, by its cache
    try:
        made: F = numba.njit(cache=True, error_model="numpy", nogil=True, **options)(function)
    finally:
        settings.CACHE_DIR = before
    _take_constants_as_values(made)
    return made


def _name_by_closure(function: Callable[..., Any]) -> None:
    """Put the numbers a function closes over into its name.

    Machine code is linked by name. Numba tells functions of one name apart by a count that each
    process begins anew: two that differ in what they close over, kept in the cache by different
    processes, would be taken for one another.
    """
    held = [cell.cell_contents for cell in function.__closure__ or ()]
    for each in held:
        if not isinstance(each, int):
            raise TypeError(
                f"{function.__qualname__} closes over {each!r}; a kernel may close over whole"
                " numbers and truths only, which its name can carry"
            )
    if held:
        suffix = "_".join(re.sub(r"\W", "m", repr(each)) for each in held)
        function.__qualname__ = f"{function.__qualname__}_{suffix}"


def _take_constants_as_values(made: Any) -> None:
    """Let calls with constants and with variables use one compiled version.

    Left to itself numba compiles a function anew for each constant another calls it with, and all
    that it calls in turn: the tree's kernels took two and a half times as long.
    """
    with_constants = getattr(made, "get_call_template", None)
    if with_constants is None:  # numba is switched off, which the command line refuses
        return

    def with_values(args: Any, kws: Any) -> Any:
        plain: Any = numba.types.unliteral
        return with_constants([plain(a) for a in args], {k: plain(a) for k, a in kws.items()})

    made.get_call_template = with_values


# Serial kernels neither allocate nor return arrays, so they run without numba's reference counts
# (`_nrt=False`): the atomic counting of every row they look at took two thirds of a step's time.


def kernel(function: F) -> F:
    """Compile exactly as written: no reordering of sums."""
    return _compiled(function, _nrt=False)


def given_kernel(function: F) -> F:
    """A function that a user gives to this process, compiled as written and kept in no cache.

    Like an :func:`inlined_kernel`, but it may close over anything that compiled code may.
    """
    made: Any = numba.njit(error_model="numpy", nogil=True)(function)
    return cast(F, made)


def inlined_kernel(function: F) -> F:
    """A :func:`kernel` made part of each caller, with a way in from Python."""
    return _compiled(function, _nrt=False, forceinline=True)


def inner_kernel(function: F) -> F:
    """A :func:`kernel` that only other kernels call: made part of each, no way in from Python.

    The arguments of a call (dozens of arrays) cost more than a small trap's step; inlining saves
    them, and leaving out the wrappers for Python saves a third of the compilation.
    """
    return _compiled(
        function, _nrt=False, forceinline=True, no_cpython_wrapper=True, no_cfunc_wrapper=True
    )


def inner_sum_kernel(function: F) -> F:
    """An :func:`inner_kernel` whose sums over the charges run in lanes, so that it vectorises."""
    return _compiled(
        function,
        _nrt=False,
        forceinline=True,
        no_cpython_wrapper=True,
        no_cfunc_wrapper=True,
        fastmath=set(SUM_FLAGS),
    )


def threaded_kernel(function: F) -> F:
    """A :func:`kernel` whose outer `prange` runs on all threads; a pass writes only its own."""
    return _compiled(function, parallel=True)


def outer_kernel(function: F) -> F:
    """A :func:`kernel` that only other kernels call, seldom: kept out of its callers."""
    return _compiled(function, _nrt=False, no_cpython_wrapper=True, no_cfunc_wrapper=True)


def inner_pair_kernel(function: F) -> F:
    """A :func:`pair_kernel` made part of each caller."""
    return _compiled(
        function,
        _nrt=False,
        forceinline=True,
        no_cpython_wrapper=True,
        no_cfunc_wrapper=True,
        fastmath=set(PAIR_FLAGS),
    )


def pair_kernel(function: F) -> F:
    """Compile a pair or expansion sum: the compiler may reorder and contract its additions."""
    return _compiled(function, _nrt=False, fastmath=set(PAIR_FLAGS))


def threaded_pair_kernel(function: F) -> F:
    """Compile a pair sum whose outer `prange` runs on all threads; a pass writes only its own."""
    return _compiled(function, fastmath=set(PAIR_FLAGS), parallel=True)


def view_kernel(function: F) -> F:
    """A part of a threaded kernel that takes views of arrays, which needs reference counts."""
    return _compiled(function, no_cpython_wrapper=True, no_cfunc_wrapper=True)


def pointed_kernel(function: F) -> F:
    """A :func:`view_kernel` that is called by its address: its callers do not carry its code."""
    return _compiled(function, no_cpython_wrapper=True)
