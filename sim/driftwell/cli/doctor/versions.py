"""Python and the libraries, against what driftwell's own metadata want; and whether they load.

A library that is there may still not load: numba, for one, refuses a numpy newer than itself.
"""

from __future__ import annotations

import importlib.util
import platform
import sys
from collections.abc import Iterator
from importlib.metadata import PackageNotFoundError, metadata, version

from driftwell._version import __version__
from driftwell.cli.doctor.line import FAULT, NOTE, OK, Line

PACKAGE = "driftwell"
LIBRARIES = (
    *("numpy", "numba", "scipy", "h5py", "tqdm", "matplotlib", "contourpy", "pydantic", "pint"),
    "shtab",
)
"""What must load before anything runs; their modules have the names of their packages."""

COMPARING = "packaging"
"""The library that compares versions; it comes with matplotlib."""


def package() -> Iterator[Line]:
    """Which driftwell this is, and whether it was installed."""
    try:
        installed = version(PACKAGE)
    except PackageNotFoundError:
        yield Line(
            NOTE,
            PACKAGE,
            f"{__version__}, not installed by pip: what it wants of libraries is not known",
            "In its folder: pip install .",
        )
        return
    if installed == __version__:
        yield Line(OK, PACKAGE, __version__)
        return
    yield Line(
        NOTE,
        PACKAGE,
        f"{__version__} runs, and {installed} is installed: two versions are mixed",
        "In the folder of the one you mean: pip install --force-reinstall --no-deps .",
    )


def python() -> Iterator[Line]:
    """The interpreter."""
    here = platform.python_version()
    wanted = _python_wanted()
    if not wanted or _is_in(sys.version_info[:3], wanted):
        told = f"{here}; wanted {wanted}" if wanted else here
        yield Line(OK, "Python", f"{told} ({sys.executable})")
        return
    yield Line(
        FAULT,
        "Python",
        f"{here}, where driftwell wants {wanted}",
        "In driftwell's folder, with a Python that suits: python3.12 -m venv .venv && "
        ".venv/bin/pip install .",
    )


def libraries() -> Iterator[Line]:
    """Every library that driftwell cannot do without: its version, and whether it loads."""
    if not comparable():
        yield Line(
            FAULT,
            COMPARING,
            "not installed; matplotlib needs it, and versions are not compared without it",
            f"pip install {COMPARING}",
        )
    bounds = wanted()
    for name in dict.fromkeys((*LIBRARIES, *bounds)):
        yield _library(name, bounds.get(name, ""))


def wanted(extra: str = "") -> dict[str, str]:
    """Bounds of the versions of libraries by name; of an extra's, where one is named.

    Empty where driftwell is not installed, or nothing can be compared.
    """
    if not comparable():
        return {}
    from packaging.requirements import Requirement

    found = {}
    for text in _requirements():
        each = Requirement(text)
        always = each.marker is None or each.marker.evaluate({"extra": ""})
        if always == (not extra) and (
            not extra or (each.marker is not None and each.marker.evaluate({"extra": extra}))
        ):
            found[each.name] = str(each.specifier)
    return found


def suits(found: str, bounds: str) -> bool:
    """Whether a version is within bounds such as ``>=2.0``; True where nothing can be compared."""
    if not comparable():
        return True
    from packaging.specifiers import SpecifierSet

    return SpecifierSet(bounds).contains(found, prereleases=True)


def _library(name: str, bounds: str) -> Line:
    """One library."""
    install = f"pip install '{name}{bounds}'"
    try:
        found = version(name)
    except PackageNotFoundError:
        return Line(FAULT, name, f"not installed; wanted {bounds or 'any'}", install)
    if not suits(found, bounds):
        return Line(FAULT, name, f"{found}, where driftwell wants {bounds}", install)
    if name in LIBRARIES:
        try:
            importlib.import_module(name)
        except Exception as fault:  # whatever a broken library raises
            return Line(
                FAULT,
                name,
                f"{found} does not load ({_first_line(fault)})",
                f"pip install --upgrade --force-reinstall '{name}{bounds}'",
            )
    return Line(OK, name, f"{found}; wanted {bounds}" if bounds else found)


def comparable() -> bool:
    """Whether versions can be compared."""
    return importlib.util.find_spec(COMPARING) is not None


def _requirements() -> list[str]:
    """What driftwell's metadata say of libraries."""
    try:
        return metadata(PACKAGE).get_all("Requires-Dist") or []
    except PackageNotFoundError:
        return []


def _python_wanted() -> str:
    try:
        return str((metadata(PACKAGE).get_all("Requires-Python") or [""])[0])
    except PackageNotFoundError:
        return ""


def _is_in(here: tuple[int, ...], bounds: str) -> bool:
    return suits(".".join(map(str, here)), bounds)


def _first_line(fault: Exception) -> str:
    lines = str(fault).strip().splitlines() or [""]
    return f"{type(fault).__name__}: {lines[0][:160]}"
