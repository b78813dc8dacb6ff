"""The tables of a run: plain columns, each with a unit, a batch of rows at a time.

Places are columns x, y, z, proper velocities ux, uy, uz, times t, all in SI units; clouds, species,
walls and detectors stand there by name. What a scenario reads as initial particles has the same
names (:mod:`driftwell.particles.charge_columns`), so that what goes out can come in again.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import Snapshot
from driftwell.exports.names import TABLES
from driftwell.exports.states import cloud_by_index, states
from driftwell.exports.wanted import Times, Wanted
from driftwell.record.layout import ANSWERS, Column, dataset
from driftwell.record.reader import Run

Kind = Literal["float64", "int64", "text"]
AXES = ("x", "y", "z")
SIX = ("x", "y", "z", "ux", "uy", "uz")


@dataclass(frozen=True, slots=True)
class Field:
    """One column; `unit` : as in "m/s", "1" for a pure number, empty for a text."""

    name: str
    kind: Kind
    unit: str
    help: str


@dataclass(frozen=True, slots=True)
class Labels:
    """A column of texts that are few: which of the `names` each row has."""

    place: NDArray[np.int64]
    names: Sequence[str]

    def texts(self) -> list[str]:
        """The text of each row."""
        names = list(self.names)
        return [names[k] for k in self.place.tolist()]


Batch = list["NDArray[Any] | Labels"]


@dataclass(frozen=True, slots=True)
class Table:
    """A table: its columns, and its rows in batches."""

    name: str
    help: str
    fields: tuple[Field, ...]
    batches: Callable[[], Iterator[Batch]]


def tables(run: Run, wanted: Wanted) -> list[Table]:
    """The tables asked for; where none is, all that have rows."""
    if wanted.what:
        return [_table(run, name, wanted.times) for name in wanted.what]
    return [_table(run, name, wanted.times) for name in TABLES if _has_rows(run, name)]


def _has_rows(run: Run, name: str) -> bool:
    if name == "snapshots":
        return bool(run.snapshots)
    if name == "answers":
        return bool(run.answers)
    if name == "exchange":
        return bool(run.header.processes)
    if name == "clouds":
        return True
    path = {"trajectory": "trajectory/time", "traces": "trace/time"}.get(name, name)
    return any(facts.rows[str(dataset(path).shape[0])] for facts in run.segments)


def _table(run: Run, name: str, times: Times) -> Table:
    if name in ("snapshots", "trajectory"):
        return _charges(run, name, times)
    if name == "answers":
        return _answers(run)
    if name == "clouds":
        return _clouds(run)
    if name == "traces":
        return _traces(run, times)
    if name == "exchange":
        return _exchange(run, times)
    return _rows(run, name, times)


def _charges(run: Run, what: str, times: Times) -> Table:
    fields = [
        Field("t", "float64", "s", "time"),
        Field("id", "int64", "1", "id of the charge"),
        Field("cloud", "text", "", "its cloud or source"),
        Field("species", "text", "", "its species"),
        *_spread(Column("position", "float64", "m", "place", (3,))),
        *_spread(Column("velocity", "float64", "m/s", "proper velocity gamma v", (3,))),
        Field("charge", "float64", "C", "of one real particle"),
        Field("mass", "float64", "kg", "of one real particle"),
        Field("weight", "float64", "1", "real particles it stands for"),
    ]
    names = {k: (cloud.name, cloud.species) for k, cloud in cloud_by_index(run).items()}

    def batch(state: Snapshot) -> Batch:
        return [
            np.full(state.id.shape, state.time),
            state.id,
            _labels(state.cloud, {k: cloud for k, (cloud, _) in names.items()}),
            _labels(state.cloud, {k: species for k, (_, species) in names.items()}),
            *state.position.T,
            *state.velocity.T,
            state.charge,
            state.mass,
            state.weight,
        ]

    told = "every charge alive at each snapshot" if what == "snapshots" else "the tracked charges"
    return Table(what, told, tuple(fields), lambda: map(batch, states(run, what, times)))


def _rows(run: Run, path: str, times: Times) -> Table:
    """A table of the record's layout, its columns of several numbers spread out."""
    header = run.header
    names: dict[str, dict[int, str]] = {
        "cloud": {k: cloud.name for k, cloud in cloud_by_index(run).items()},
        "wall": dict(enumerate(header.walls)),
        "detector": dict(enumerate(header.detectors)),
    }
    entry = dataset(path)

    def batches() -> Iterator[Batch]:
        rows = run.rows(path)
        rows = rows[times.taken(rows["time"])]
        made: Batch = []
        for column in entry.columns:
            values: Any = rows[column.name]
            if column.name in names:
                made.append(_labels(values, names[column.name]))
            else:
                made += [values[(..., *place)] for place in _places(column)]
        yield made

    fields: list[Field] = []
    for column in entry.columns:
        if column.name in names:
            fields.append(Field(column.name, "text", "", f"name of the {column.name}"))
        else:
            fields += _spread(column)
    return Table(path, entry.help, tuple(fields), batches)


def _exchange(run: Run, times: Times) -> Table:
    fields = (
        Field("t", "float64", "s", "time of the row of the ledger"),
        Field("process", "text", "", "name of the process"),
        Field("energy", "float64", "J", "given to the charges so far, weights included"),
        *(Field(f"momentum_{x}", "float64", "kg m/s", "given so far") for x in AXES),
        *(Field(f"angular_momentum_{x}", "float64", "kg m^2/s", "given so far") for x in AXES),
        Field("events", "float64", "1", "how many there were"),
    )
    names = run.header.processes

    def batches() -> Iterator[Batch]:
        time = run.rows("ledger")["time"]
        rows = run.rows("exchange")
        kept = times.taken(time)
        time, rows = time[kept], rows[kept]
        which = np.tile(np.arange(len(names), dtype=np.int64), len(time))
        yield [np.repeat(time, len(names)), Labels(which, names), *rows.reshape(-1, 8).T]

    return Table("exchange", "what each process has given to the charges", fields, batches)


def _traces(run: Run, times: Times) -> Table:
    fields = [Field("t", "float64", "s", "time of the sample")]
    fields += [Field(name, "float64", "m", "traced coordinate") for name in run.header.traces]

    def batches() -> Iterator[Batch]:
        time, value = run.rows("trace/time"), run.rows("trace/value")
        kept = times.taken(time)
        yield [time[kept], *value[kept].T]

    return Table("traces", "coordinates traced between the records", tuple(fields), batches)


def _answers(run: Run) -> Table:
    fields = tuple(
        Field(column.name, column.kind if column.kind != "texts" else "text", "", column.help)
        for column in ANSWERS.columns
    )

    def batches() -> Iterator[Batch]:
        rows = run.answers
        made: Batch = []
        for field in fields:
            values = [getattr(answer, field.name) for answer in rows]
            made.append(
                _texts(values)
                if field.kind == "text"
                else np.array([np.nan if v is None else v for v in values], np.float64)
            )
        yield made

    return Table("answers", "what the run says to its questions", fields, batches)


def _clouds(run: Run) -> Table:
    fields = tuple(
        Field(c.name, c.kind if c.kind != "texts" else "text", c.unit, c.help)
        for c in dataset("clouds").columns
    )

    def batches() -> Iterator[Batch]:
        rows = run.header.clouds
        made: Batch = []
        for field in fields:
            values = [getattr(cloud, field.name) for cloud in rows]
            made.append(_texts(values) if field.kind == "text" else np.array(values, field.kind))
        yield made

    return Table("clouds", dataset("clouds").help, fields, batches)


def _texts(values: Sequence[str]) -> Labels:
    return Labels(np.arange(len(values), dtype=np.int64), values)


def _labels(numbers: NDArray[np.int64], names: dict[int, str]) -> Labels:
    """Names for numbers; a number without one stands as itself."""
    found, place = np.unique(numbers, return_inverse=True)
    return Labels(
        np.asarray(place, np.int64).reshape(-1), [names.get(k, str(k)) for k in found.tolist()]
    )


def _spread(column: Column) -> list[Field]:
    """The plain columns that one of the layout becomes."""
    kind: Kind = "int64" if column.kind == "int64" else "float64"
    if column.name == "time":
        return [Field("t", kind, "s", column.help)]
    if not column.shape:
        return [Field(column.name, kind, column.unit, column.help)]
    if column.name == "position":
        return [Field(x, kind, "m", column.help) for x in AXES]
    if column.name == "velocity":
        return [Field(f"u{x}", kind, "m/s", column.help) for x in AXES]
    if column.shape == (6,):
        return [Field(f"{column.name}_{a}", kind, _unit(a), column.help) for a in SIX]
    if column.shape == (6, 6):
        return [
            Field(
                f"{column.name}_{SIX[i]}_{SIX[k]}", kind, _PRODUCTS[(i > 2) + (k > 2)], column.help
            )
            for i, k in _places(column)
        ]
    return [Field(f"{column.name}_{x}", kind, column.unit, column.help) for x in AXES]


def _places(column: Column) -> list[tuple[int, ...]]:
    """Where the plain columns lie in a row of one of the layout; of a symmetric one, half of it."""
    if column.shape == (6, 6):
        return [(i, k) for i in range(6) for k in range(i, 6)]
    return [(k,) for k in range(column.shape[0])] if column.shape else [()]


_PRODUCTS = ("m^2", "m^2/s", "m^2/s^2")


def _unit(coordinate: str) -> str:
    return "m/s" if coordinate.startswith("u") else "m"
