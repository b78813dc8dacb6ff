"""The catalogue of a sweep: which runs there are, how each ended, what it answered.

An SQLite file with one writer, the process that drives the sweep. Runs go by the digest of their
scenario, so that one that is finished is found whatever the study is called or has come to be;
cases are numbers of the study and point to runs. While it is written, others may read it. What a
transaction has committed outlives a kill and, as far as the disk keeps its word, a loss of power.

Schema, version 1 (``PRAGMA user_version``; ``PRAGMA application_id`` is 0x64726677, "drfw"):

``runs``
    id; digest (64 hexadecimal digits); word (waiting, running, or how the run ended); sentence;
    wall_time (s, empty until it ended); starts (how often it was begun, resumed or not);
    began, ended (UTC, text)
``cases``
    number (of the study, from 1); run (id); settings (JSON list of ``key=value``)
``questions``
    id; name; ask; unit
``answers``
    run, question (ids); value, error (empty: not a number, not known); coulomb_error, field_error;
    note
"""

from __future__ import annotations

import json
import math
import sqlite3
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from types import TracebackType
from typing import Any, Self

from driftwell.answers.answer import Answer
from driftwell.errors import RecordError

CATALOGUE_VERSION = 1
APPLICATION = 0x64726677
WAITING = "waiting"
RUNNING = "running"

_PATIENCE = 10.0  # s, for another process that is about to write
_SCHEMA = f"""
CREATE TABLE runs (
    id INTEGER PRIMARY KEY,
    digest TEXT NOT NULL UNIQUE,
    word TEXT NOT NULL DEFAULT '{WAITING}',
    sentence TEXT NOT NULL DEFAULT '',
    wall_time REAL,
    starts INTEGER NOT NULL DEFAULT 0,
    began TEXT,
    ended TEXT
);
CREATE TABLE cases (
    number INTEGER PRIMARY KEY,
    run INTEGER NOT NULL REFERENCES runs (id),
    settings TEXT NOT NULL
);
CREATE INDEX cases_of_run ON cases (run);
CREATE TABLE questions (
    id INTEGER PRIMARY KEY,
    name TEXT NOT NULL,
    ask TEXT NOT NULL,
    unit TEXT NOT NULL,
    UNIQUE (name, ask, unit)
);
CREATE TABLE answers (
    run INTEGER NOT NULL REFERENCES runs (id),
    question INTEGER NOT NULL REFERENCES questions (id),
    value REAL,
    error REAL,
    coulomb_error REAL NOT NULL,
    field_error REAL NOT NULL,
    note TEXT NOT NULL,
    PRIMARY KEY (run, question)
) WITHOUT ROWID;
PRAGMA application_id = {APPLICATION};
PRAGMA user_version = {CATALOGUE_VERSION};
"""


@dataclass(frozen=True, slots=True)
class Row:
    """One case and its run.

    word : waiting, running, or the outcome's word
    wall_time : s; None until the run has ended
    starts : how often the run was begun
    """

    number: int
    digest: str
    settings: tuple[str, ...]
    word: str
    sentence: str
    wall_time: float | None
    starts: int
    answers: tuple[Answer, ...]


class Catalogue:
    """The catalogue at `path`, made where there is none.

    read_only : only looked at, while another process may write it

    Raises
    ------
    RecordError
        The file is no catalogue, is of a newer version, is damaged, or the disk refuses; every
        method raises it too. A change that was refused has changed nothing.
    """

    def __init__(self, path: str | Path, *, read_only: bool = False) -> None:
        self.path = Path(path)
        self._read_only = read_only
        with self._told():
            self._base = self._opened()
        try:
            with self._told():
                self._prepare()
        except BaseException:
            self._base.close()
            raise

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        fault: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """Close the catalogue; it is one file then, which can be copied and read anywhere."""
        if not self._read_only:
            with suppress(sqlite3.Error):  # another process still reads it
                self._base.execute("PRAGMA busy_timeout = 0")
                self._base.execute("PRAGMA journal_mode = DELETE")
        self._base.close()

    def add(self, digest: str, number: int, settings: Sequence[str]) -> None:
        """Note the case `number` and its run, which waits unless it is known already."""
        with self._change():
            self._add(digest, number, settings)

    def add_all(self, cases: Iterable[tuple[str, int, Sequence[str]]]) -> None:
        """Note all cases of a study, each as (digest, number, settings), in one transaction.

        Cases noted before are forgotten; their runs are not.
        """
        with self._change():
            self._base.execute("DELETE FROM cases")
            for digest, number, settings in cases:
                self._add(digest, number, settings)

    def began(self, digest: str) -> None:
        """Note that the run is going on now."""
        with self._change():
            self._one_run(
                digest,
                "UPDATE runs SET word = ?, sentence = '', wall_time = NULL, starts = starts + 1, "
                "began = ?, ended = NULL WHERE digest = ?",
                (RUNNING, _now(), digest),
            )

    def ended(
        self,
        digest: str,
        word: str,
        sentence: str,
        wall_time: float | None,
        answers: Sequence[Answer] = (),
    ) -> None:
        """Note how the run ended and what it answered, in place of what was noted before."""
        with self._change():
            self._one_run(
                digest,
                "UPDATE runs SET word = ?, sentence = ?, wall_time = ?, ended = ? WHERE digest = ?",
                (word, sentence, wall_time, _now(), digest),
            )
            run = self._run_id(digest)
            self._base.execute("DELETE FROM answers WHERE run = ?", (run,))
            self._base.executemany(
                "INSERT INTO answers VALUES (?, ?, ?, ?, ?, ?, ?)",
                [
                    (
                        *(run, self._question_id(each), each.value, each.error),
                        *(each.coulomb_error, each.field_error, each.note),
                    )
                    for each in answers
                ],
            )

    def find(self, digest: str) -> Row | None:
        """A case of the run with this digest (the first), however many runs there are."""
        with self._told():
            found = self._base.execute(
                f"{_ROWS} WHERE runs.digest = ? ORDER BY number LIMIT 1", (digest,)
            ).fetchone()
            if found is None:
                return None
            answers = self._base.execute(f"{_ANSWERS} WHERE run = ? ORDER BY question", found[:1])
            return _row(found, [_answer(each) for each in answers])

    def rows(self) -> tuple[Row, ...]:
        """All cases by number, as they are at one instant."""
        with self._look():
            answers: dict[int, list[Answer]] = {}
            for each in self._base.execute(f"{_ANSWERS} ORDER BY run, question"):
                answers.setdefault(each[0], []).append(_answer(each))
            found = self._base.execute(f"{_ROWS} ORDER BY number")
            return tuple(_row(each, answers.get(each[0], ())) for each in found)

    def counts(self) -> dict[str, int]:
        """How many cases are waiting, running, finished, ..., by their words."""
        with self._told():
            return dict(
                self._base.execute(
                    "SELECT word, count(*) FROM cases JOIN runs ON runs.id = cases.run "
                    "GROUP BY word ORDER BY word"
                ).fetchall()
            )

    def _opened(self) -> sqlite3.Connection:
        mode = "ro" if self._read_only else "rwc"
        address = f"{self.path.absolute().as_uri()}?mode={mode}"
        return sqlite3.connect(address, timeout=_PATIENCE, isolation_level=None, uri=True)

    def _prepare(self) -> None:
        application = self._base.execute("PRAGMA application_id").fetchone()[0]
        version = self._base.execute("PRAGMA user_version").fetchone()[0]
        tables = self._base.execute("SELECT count(*) FROM sqlite_schema").fetchone()[0]
        if (tables or self._read_only) and application != APPLICATION:
            raise RecordError(f"{self.path}: is not the catalogue of a sweep; name another folder.")
        if version > CATALOGUE_VERSION:
            raise RecordError(
                f"{self.path}: is of version {version}, and this driftwell reads up to "
                f"{CATALOGUE_VERSION}; use the newer driftwell that wrote it."
            )
        if self._read_only:
            return
        self._base.execute("PRAGMA journal_mode = WAL")
        self._base.execute("PRAGMA synchronous = FULL")
        if not tables:
            self._base.executescript(f"BEGIN IMMEDIATE; {_SCHEMA} COMMIT;")

    def _add(self, digest: str, number: int, settings: Sequence[str]) -> None:
        self._base.execute("INSERT OR IGNORE INTO runs (digest) VALUES (?)", (digest,))
        self._base.execute(
            "INSERT OR REPLACE INTO cases VALUES (?, ?, ?)",
            (number, self._run_id(digest), json.dumps(list(settings), ensure_ascii=False)),
        )

    def _one_run(self, digest: str, change: str, values: tuple[Any, ...]) -> None:
        if self._base.execute(change, values).rowcount != 1:
            raise RecordError(f"{self.path}: knows no run with the digest {digest}.")

    def _run_id(self, digest: str) -> int:
        found = self._base.execute("SELECT id FROM runs WHERE digest = ?", (digest,)).fetchone()
        return int(found[0])

    def _question_id(self, answer: Answer) -> int:
        what = (answer.name, answer.ask, answer.unit)
        self._base.execute(
            "INSERT OR IGNORE INTO questions (name, ask, unit) VALUES (?, ?, ?)", what
        )
        found = self._base.execute(
            "SELECT id FROM questions WHERE name = ? AND ask = ? AND unit = ?", what
        )
        return int(found.fetchone()[0])

    @contextmanager
    def _change(self) -> Iterator[None]:
        """A transaction: all of it or nothing."""
        with self._told():
            self._base.execute("BEGIN IMMEDIATE")
            try:
                yield
                self._base.execute("COMMIT")
            except BaseException:
                with suppress(sqlite3.Error):  # a full disk has rolled it back already
                    self._base.execute("ROLLBACK")
                raise

    @contextmanager
    def _look(self) -> Iterator[None]:
        """One instant, over several queries."""
        with self._told():
            self._base.execute("BEGIN")
            try:
                yield
            finally:
                with suppress(sqlite3.Error):
                    self._base.execute("ROLLBACK")

    @contextmanager
    def _told(self) -> Iterator[None]:
        try:
            yield
        except sqlite3.Error as fault:
            raise RecordError(f"{self.path}: {_in_words(fault)}") from fault


_ROWS = (
    "SELECT runs.id, number, digest, settings, word, sentence, wall_time, starts "
    "FROM cases JOIN runs ON runs.id = cases.run"
)
_ANSWERS = (
    "SELECT run, name, ask, value, unit, error, note, coulomb_error, field_error "
    "FROM answers JOIN questions ON questions.id = answers.question"
)


def _row(found: tuple[Any, ...], answers: Iterable[Answer]) -> Row:
    _, number, digest, settings, word, sentence, wall_time, starts = found
    texts = tuple(json.loads(settings))
    return Row(number, digest, texts, word, sentence, wall_time, starts, tuple(answers))


def _answer(found: tuple[Any, ...]) -> Answer:
    _, name, ask, value, unit, error, note, *errors = found
    return Answer(name, ask, math.nan if value is None else value, unit, error, note, *errors)


def _now() -> str:
    return datetime.now(UTC).isoformat(timespec="seconds")


def _in_words(fault: sqlite3.Error) -> str:
    """What SQLite's fault means, and what to do."""
    name = getattr(fault, "sqlite_errorname", "")
    if "FULL" in name:
        return "the disk is full; nothing is lost: make space, and run the sweep again."
    if "BUSY" in name or "LOCKED" in name:
        return "another process writes to it; only one sweep at a time may use its folder."
    if "CORRUPT" in name or "NOTADB" in name:
        return (
            "is damaged or not a catalogue; move it away, and run the sweep again: runs that are "
            "finished are found by their folders."
        )
    return f"cannot be used ({fault})."
