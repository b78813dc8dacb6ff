"""What an earlier process left in a run's folder: a run, cut off or ended, or nothing."""

from __future__ import annotations

from hashlib import file_digest
from importlib.metadata import version
from pathlib import Path

import numpy as np

from driftwell._version import __version__
from driftwell.errors import RecordError
from driftwell.kernels.processor import processor
from driftwell.record.claim import SCENARIO_FILE
from driftwell.record.commit import remove_parts
from driftwell.record.index import SEGMENTS, sealed_numbers
from driftwell.record.layout import FORMAT_VERSION
from driftwell.record.lock import held
from driftwell.record.master import MASTER
from driftwell.record.reader import Run, open_run

_AGAIN = "--fresh puts the old run aside and starts over; -o names another folder."


def earlier_run(folder: Path, scenario: bytes, digest: str) -> Run | None:
    """The run that was begun in a folder, held by the caller; None where it sealed nothing.

    Raises RecordError where it cannot be gone on with: of another scenario or another driftwell, or
    damaged; the text says what is the matter and what to do. Nothing is changed.
    """
    run = open_run(folder) if (folder / MASTER).exists() or sealed_numbers(folder) else None
    if run is None or not run.segments:
        text = folder / SCENARIO_FILE
        if text.exists() and text.read_bytes() != scenario:
            raise _another(folder, "its scenario.toml is not this one")
        return None
    header = run.header
    if header.digest != digest:
        same_text = header.scenario.encode() == scenario
        settings = ", ".join(header.settings) or "none"
        raise _another(
            folder,
            f"the settings differ (there: {settings}), or a file it names does"
            if same_text
            else f'it is of "{header.title}", and the scenario has changed since {header.created}',
        )
    if header.driftwell_version != __version__:
        raise RecordError(
            f"{folder}: begun by driftwell {header.driftwell_version}, and this is {__version__}, "
            f"whose steps may differ. Go on with that version, or begin anew: {_AGAIN}"
        )
    if header.format_version != FORMAT_VERSION:
        raise RecordError(
            f"{folder}: recorded in format {header.format_version}, and this driftwell writes "
            f"{FORMAT_VERSION}. It can be read, but not gone on with; begin anew: {_AGAIN}"
        )
    _refuse_damaged(run)
    return run


def differences(run: Run, field_digest: str = "") -> list[str]:
    """What may change last digits where this process goes on with a run, one sentence each.

    field_digest : of the electrodes' solved field in this process, "" without electrodes
    """
    header = run.header
    found = [
        (name, then, now)
        for name, then, now in (
            ("numpy", header.numpy_version, np.__version__),
            ("numba", header.numba_version, version("numba")),
            ("the processor", header.processor, processor()),
            ("a solved field of digest", header.field_digest, field_digest),
        )
        if then != now
    ]
    return [
        f"Begun with {name} {then}, gone on with {now}: from here on the last digits may not be "
        "those of an unbroken run."
        for name, then, now in found
    ]


def clear_unsealed(folder: Path) -> None:
    """Remove what a run left that ended before it sealed anything."""
    remove_parts(folder)
    (folder / MASTER).unlink(missing_ok=True)
    if (folder / SEGMENTS).exists():
        (folder / SEGMENTS).rmdir()


def put_aside(folder: Path) -> Path:
    """Give the folder of an old run another name, and return that.

    Raises BusyError where another process works in it.
    """
    with held(folder):
        pass
    number = 1
    while (aside := folder.with_name(f"{folder.name}-before-{number}")).exists():
        number += 1
    try:
        folder.rename(aside)
    except OSError as fault:
        raise RecordError(
            f"{folder}: the old run cannot be put aside as {aside.name} ({fault.strerror}). Move "
            "it away, or name another folder with -o."
        ) from fault
    return aside


def _another(folder: Path, why: str) -> RecordError:
    return RecordError(f"{folder}: holds another run: {why}. Nothing was touched. {_AGAIN}")


def _refuse_damaged(run: Run) -> None:
    """See that no segment is missing or cut short, and that the last one is whole to the byte."""
    numbers = [facts.number for facts in run.segments]
    faults = run.damage() if numbers == list(range(1, len(numbers) + 1)) else ["segments missing"]
    last = run.segments[-1]
    if not faults and last.sha256:
        with (run.folder / last.name).open("rb") as file:
            if file_digest(file, "sha256").hexdigest() != last.sha256:
                faults = [f"{run.folder / last.name}: damaged; {MASTER} notes another digest"]
    if faults:
        raise RecordError(
            f"{faults[0]} The run cannot be gone on with as it is. Put the file back from a copy, "
            f"or begin anew: {_AGAIN}"
        )
