"""``driftwell new KIND``: writes a commented starting scenario, over no other file."""

from __future__ import annotations

import difflib
import shlex
from contextlib import suppress
from pathlib import Path

from driftwell.cli.templates import ENDING, Template, templates
from driftwell.cli.terminal.printing import answer, tell
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE


def list_kinds() -> int:
    """Print every kind with its line; returns the exit code."""
    known = templates()
    wide = max(len(kind) for kind in known)
    lines = [f"{kind:{wide}}  {each.line}" for kind, each in known.items()]
    lines += [
        "",
        "driftwell new KIND writes KIND.toml here; its comments say what to change.",
    ]
    return FINISHED if answer(lines) else UNUSABLE


def new_scenario(kind: str, output: Path | None) -> int:
    """Write the scenario of a kind, and that which a study needs; returns the exit code."""
    known = templates()
    path = Path(f"{kind}{ENDING}") if output is None else output
    try:
        template = known.get(kind)
        if template is None:
            raise DriftwellError(_unknown(kind, list(known)))
        written = _written(template, path, known)
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    named = shlex.quote(str(path))
    verb = "run" if template.scenario is None else kind
    lines = [
        *written,
        "Its values are invented: put in your own. Then:",
        f"  driftwell check {named}",
        f"  driftwell {verb} {named}",
    ]
    return FINISHED if answer(lines) else UNUSABLE


def _written(template: Template, path: Path, known: dict[str, Template]) -> list[str]:
    """What was written where, in words.

    Raises DriftwellError where a file is there already, or cannot be made.
    """
    told = [f"{path}: {template.line}"]
    if template.scenario is None:
        _write(path, template.text)
        return told
    beside = path.with_name(template.scenario)
    if beside == path:
        raise DriftwellError(
            f"{path}: is the name of the scenario that the study varies; name another with -o."
        )
    _write(path, template.text)
    if beside.exists():
        return [*told, f"{beside}: there already, left as it is; the study varies it"]
    try:
        _write(beside, known[template.scenario.removesuffix(ENDING)].text)
    except DriftwellError:
        path.unlink()
        raise
    return [*told, f"{beside}: the scenario that the study varies"]


def _write(path: Path, text: str) -> None:
    """Make a new file; nothing half-written stays where the disk refuses it."""
    try:
        file = path.open("x", encoding="utf-8")
    except FileExistsError as fault:
        raise DriftwellError(
            f"{path}: there already, and nothing is written over; name another with -o."
        ) from fault
    except (OSError, ValueError) as fault:
        raise DriftwellError(_refused(path, fault)) from fault
    try:
        with file:
            file.write(text)
    except OSError as fault:
        with suppress(OSError):
            path.unlink()
        raise DriftwellError(_refused(path, fault)) from fault


def _refused(path: Path, fault: OSError | ValueError) -> str:
    why = getattr(fault, "strerror", None) or str(fault)
    return f"{path}: cannot be written ({why}); name a file in a folder that can be, with -o."


def _unknown(kind: str, known: list[str]) -> str:
    near = difflib.get_close_matches(kind, known, n=1)
    meant = f" Did you mean {near[0]}?" if near else ""
    return f"{kind[:40]!r} is no kind of starting scenario; needs one of {', '.join(known)}.{meant}"
