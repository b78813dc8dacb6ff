"""``driftwell doctor``: looks at the machine, and says what to do.

Nothing that is missing or broken here may end it: libraries are loaded by the checks themselves,
and what a check cannot cope with is told in its place.
"""

from __future__ import annotations

import os
import textwrap
from collections.abc import Iterable, Iterator, Mapping

from driftwell.cli.doctor.extras import extras, programs
from driftwell.cli.doctor.kept import compiled_code, solved_fields
from driftwell.cli.doctor.line import FAULT, NOTE, Check, Line
from driftwell.cli.doctor.output import output
from driftwell.cli.doctor.processor import DISABLED, THREADS, compiler, cores
from driftwell.cli.doctor.room import disk, memory
from driftwell.cli.doctor.versions import libraries, package, python
from driftwell.cli.terminal.printing import answer, tell, width
from driftwell.cli.terminal.thread_limit import limited_threads
from driftwell.exit_codes import FINISHED, UNUSABLE

_WORD, _WHAT = 7, 17
"""Letters of the first two columns."""


def doctor_command() -> int:
    """Look, and say what was found; returns the exit code."""
    tell("looking at this machine: some seconds")
    return report(groups())


def report(checks: Mapping[str, Iterable[Check]]) -> int:
    """Print what the checks find, group by group; returns the exit code."""
    wide = width()
    lines: list[str] = []
    found: list[Line] = []
    for name, group in checks.items():
        lines.append(name)
        for check in group:
            for line in _looked(check):
                found.append(line)
                lines += told(line, wide)
        lines.append("")
    written = answer([*lines, *textwrap.wrap(verdict(found), wide)])
    sick = any(line.word == FAULT for line in found)
    return UNUSABLE if sick or not written else FINISHED


def groups() -> dict[str, tuple[Check, ...]]:
    """All checks by the names of their groups."""
    said, disabled = os.environ.get(THREADS), os.environ.get(DISABLED)
    limited_threads(None)  # as a run would, so that a number that is none stops nothing
    return {
        "versions": (package, python, libraries),
        "processor": (lambda: cores(said), lambda: compiler(disabled)),
        "kept between runs": (compiled_code, solved_fields),
        "room": (memory, disk),
        "output": (output,),
        "extras": (extras, programs),
    }


def told(line: Line, wide: int) -> list[str]:
    """A line of findings, and below it what to do."""
    indent = " " * (2 + _WORD + _WHAT)
    found = textwrap.wrap(
        line.found,
        wide,
        initial_indent=f"  {line.word:{_WORD}}{line.what:{_WHAT}}",
        subsequent_indent=indent,
        break_on_hyphens=False,
    )
    remedy = textwrap.wrap(
        line.remedy,
        wide,
        initial_indent=f"{indent}-> ",
        subsequent_indent=f"{indent}   ",
        break_on_hyphens=False,
        break_long_words=False,
    )
    return [*found, *remedy]


def verdict(found: Iterable[Line]) -> str:
    """The last sentence."""
    words = [line.word for line in found]
    faults, notes = words.count(FAULT), words.count(NOTE)
    noted = f"{notes} note{'s' * (notes != 1)}" if notes else "nothing to note"
    if not faults:
        return f"Runs can go on here; {noted}."
    stops = "1 fault stops" if faults == 1 else f"{faults} faults stop"
    return f"{stops} runs here; {noted}. Do what stands behind ->, then look again."


def _looked(check: Check) -> Iterator[Line]:
    """What a check finds; a note where it cannot cope with the machine."""
    name = getattr(check, "__name__", "").replace("_", " ").strip("<>") or "a check"
    try:
        yield from check()
    except ImportError:
        yield Line(NOTE, name, "can be looked at once all libraries load")
    except Exception as fault:  # an odd machine must not end the look at the rest
        yield Line(NOTE, name, f"cannot be looked at here ({type(fault).__name__}: {fault})")
