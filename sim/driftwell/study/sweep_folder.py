"""The folder of a sweep: what lies where, that it is one, and that no other sweep works in it."""

from __future__ import annotations

import codecs
from collections.abc import Iterable, Iterator
from contextlib import ExitStack, contextmanager
from pathlib import Path

from driftwell.errors import RecordError
from driftwell.record.claim import SCENARIO_FILE, unwritable
from driftwell.record.commit import commit
from driftwell.record.index import SEGMENTS
from driftwell.record.lock import held
from driftwell.record.master import MASTER

STUDY_FILE = "study.toml"
CATALOGUE_FILE = "catalogue.sqlite"
SUMMARY_FILE = "summary.txt"
RUNS = "runs"
_DIGITS = 16
"""Digits of a run's digest that name its folder."""


def run_folder(folder: Path, digest: str) -> Path:
    """Where the run with this digest lies in the sweep's folder."""
    return folder / RUNS / digest[:_DIGITS]


def keep_summary(folder: Path, lines: Iterable[str]) -> None:
    """Write what was said at the end into the folder; raises RecordError where it cannot be."""
    text = "".join(f"{line}\n" for line in lines)
    try:
        commit(folder / SUMMARY_FILE, text.encode(errors="backslashreplace"))
    except OSError as fault:
        raise unwritable(folder, fault) from fault


@contextmanager
def taken(folder: Path, study: str, scenario: str) -> Iterator[bool]:
    """The folder, made where it is missing, for one sweep alone; holds the texts as given.

    Gives whether an earlier sweep in it had other texts.

    Raises
    ------
    BusyError
        Another sweep works in it.
    RecordError
        It holds something else, or cannot be written.
    """
    if "\0" in str(folder):
        raise unwritable(folder, "its name holds a null character")
    with ExitStack() as holding:
        try:
            _refuse_others(folder, study, scenario)
            (folder / RUNS).mkdir(parents=True, exist_ok=True)
            holding.enter_context(held(folder))
            changed = _keep(folder / STUDY_FILE, study) | _keep(folder / SCENARIO_FILE, scenario)
        except OSError as fault:
            raise unwritable(folder, fault) from fault
        yield changed


def _refuse_others(folder: Path, study: str, scenario: str) -> None:
    """Refuse a folder that holds what a sweep would overwrite or mix up."""
    if folder.exists() and not folder.is_dir():
        raise RecordError(f"{folder}: is a file; a sweep needs a folder. Name another with -o.")
    if (folder / CATALOGUE_FILE).exists():
        return
    found = [name for name in (MASTER, SEGMENTS) if (folder / name).exists()]
    texts = ((STUDY_FILE, study), (SCENARIO_FILE, scenario))
    found += [f"another {name}" for name, text in texts if _differs(folder / name, text)]
    if found:
        raise RecordError(
            f"{folder}: holds {' and '.join(found)} already, and no sweep; a sweep needs a folder "
            "of its own. Name a new folder with -o."
        )


def _differs(path: Path, text: str) -> bool:
    return path.exists() and path.read_bytes().removeprefix(codecs.BOM_UTF8) != text.encode()


def _keep(path: Path, text: str) -> bool:
    """Write a text where it does not stand yet; whether another stood there."""
    differs = _differs(path, text)
    if differs or not path.exists():
        commit(path, text.encode())
    return differs
