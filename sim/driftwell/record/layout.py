"""Everything a run folder holds, in one table: each dataset, column and attribute.

The writer, the reader and docs/record-format.md follow this table; nothing else knows the names.
Numbers are SI throughout.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any, Literal

import h5py
import numpy as np
from numpy.typing import NDArray

FORMAT_VERSION = 4

Kind = Literal["float64", "int64", "text", "texts"]

_NUMBERS = {"float64": "<f8", "int64": "<i8"}


@dataclass(frozen=True, slots=True)
class Attribute:
    """One attribute: a number, a text, or a list of texts; `since` : the first format with it."""

    name: str
    kind: Kind
    unit: str
    help: str
    since: int = 1

    @property
    def is_text(self) -> bool:
        """Whether it is one text or a list of them."""
        return self.kind in ("text", "texts")


@dataclass(frozen=True, slots=True)
class Column:
    """One field of a table; `shape` is what each row holds of it."""

    name: str
    kind: Kind
    unit: str
    help: str
    shape: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class Dataset:
    """One dataset: plain numbers of one `kind` and `unit`, or a table of `columns`.

    shape : a word stands for a length that differs from run to run
    """

    path: str
    shape: tuple[str | int, ...]
    help: str
    kind: Kind = "float64"
    unit: str = ""
    columns: tuple[Column, ...] = ()

    def dtype(self, text_sizes: Mapping[str, int] | None = None) -> np.dtype[Any]:
        """The numpy type; columns of text need their sizes in bytes."""
        if not self.columns:
            return np.dtype(_NUMBERS[self.kind])
        sizes = text_sizes or {}
        return np.dtype(
            [
                (column.name, h5py.string_dtype("utf-8", sizes[column.name]))
                if column.kind == "text"
                else (column.name, _NUMBERS[column.kind], column.shape)
                for column in self.columns
            ]
        )

    def row_shape(self, sizes: Mapping[str, int]) -> tuple[int, ...]:
        """Shape of one row, the words replaced by `sizes`."""
        return tuple(sizes[part] if isinstance(part, str) else part for part in self.shape[1:])


# The largest chunk of trajectories: quick for one charge's track and for all charges at one time.
CHUNK_RECORDS = 100
CHUNK_CHARGES = 200
CHUNK_BYTES = 1_000_000

ROWS = (
    Dataset("trajectory/time", ("records",), "time of each record", unit="s"),
    Dataset(
        "trajectory/state",
        ("records", "tracked", 6),
        "position x, y, z and proper velocity ux, uy, uz of the tracked charges; "
        "not a number once lost",
        unit="m, m, m, m/s, m/s, m/s",
    ),
    Dataset(
        "moments",
        ("moments",),
        "one row for each cloud at each record, over its charges alive; not a number where none is",
        columns=(
            Column("time", "float64", "s", "time of the record"),
            Column("cloud", "int64", "1", "index in `clouds`"),
            Column("count", "int64", "1", "simulated charges alive"),
            Column("centre", "float64", "m (3), m/s (3)", "mean of (x, y, z, ux, uy, uz)", (6,)),
            Column(
                "covariance",
                "float64",
                "products of the units of centre",
                "of the same six, about the mean, divided by the count",
                (6, 6),
            ),
            Column("kinetic_energy", "float64", "J", "mean of one real particle"),
            Column("kinetic_variance", "float64", "J^2", "its variance, divided by the count"),
        ),
    ),
    Dataset(
        "ledger",
        ("ledger",),
        "the account of what is conserved, one row each time it is closed; weights included",
        columns=(
            Column("time", "float64", "s", "time of the row"),
            Column("kinetic", "float64", "J", "kinetic energy of all charges alive"),
            Column("field", "float64", "J", "their potential energy in the fields"),
            Column("coulomb", "float64", "J", "potential energy of all their pairs"),
            Column("work_drive", "float64", "J", "work done by potentials that change in time"),
            Column("work_induced", "float64", "J", "work done by induced electric fields"),
            Column("energy_walls", "float64", "J", "kinetic and potential, of charges lost"),
            Column("energy_residual", "float64", "1", "closing error of the energy, relative"),
            Column("momentum", "float64", "kg m/s", "of all charges alive", (3,)),
            Column("impulse_fields", "float64", "kg m/s", "given by electric fields", (3,)),
            Column("impulse_magnets", "float64", "kg m/s", "given by magnetic fields", (3,)),
            Column("momentum_walls", "float64", "kg m/s", "taken by walls", (3,)),
            Column("momentum_residual", "float64", "1", "closing error of the momentum, relative"),
            Column(
                "angular_momentum", "float64", "kg m^2/s", "of all charges, about the origin", (3,)
            ),
            Column("torque_fields", "float64", "kg m^2/s", "given by electric fields", (3,)),
            Column("torque_magnets", "float64", "kg m^2/s", "given by magnetic fields", (3,)),
            Column("angular_walls", "float64", "kg m^2/s", "taken by walls", (3,)),
            Column(
                "angular_residual", "float64", "1", "closing error of angular momentum, relative"
            ),
            Column("charge", "float64", "C", "charge alive"),
            Column("charge_walls", "float64", "C", "charge taken by walls"),
            Column("charge_residual", "float64", "1", "closing error of the charge, relative"),
            Column("count", "float64", "1", "real particles alive"),
            Column("count_lost", "float64", "1", "real particles lost"),
            Column("count_residual", "float64", "1", "closing error of the count, relative"),
            Column(
                "third_law_residual",
                "float64",
                "1",
                "|sum of the Coulomb forces| / sum of their magnitudes",
            ),
            Column(
                "torque_residual",
                "float64",
                "1",
                "|sum of their torques about the origin| / sum of |place| |force|",
            ),
            Column(
                "angular_allowance",
                "float64",
                "1",
                "angular residual that these torques, over the time so far, may have made",
            ),
            Column(
                "coulomb_error",
                "float64",
                "1",
                "rms relative force error of the Coulomb sum, last measured; 0 for the direct sum",
            ),
            Column("image", "float64", "J", "energy with the charges that conductors answer with"),
            Column("impulse_images", "float64", "kg m/s", "given by these", (3,)),
            Column("torque_images", "float64", "kg m^2/s", "given by these", (3,)),
            Column("energy_sources", "float64", "J", "kinetic and potential, of charges born"),
            Column("momentum_sources", "float64", "kg m/s", "brought by charges born", (3,)),
            Column("angular_sources", "float64", "kg m^2/s", "brought by charges born", (3,)),
            Column("charge_sources", "float64", "C", "charge born"),
            Column("count_born", "float64", "1", "real particles born after the start"),
            Column("energy_processes", "float64", "J", "given by gas, drag, lasers, ..."),
            Column("momentum_processes", "float64", "kg m/s", "given by these", (3,)),
            Column("angular_processes", "float64", "kg m^2/s", "given by these", (3,)),
            Column("work_frames", "float64", "J", "given by the field of moving bunches as such"),
            Column("impulse_frames", "float64", "kg m/s", "given by the same", (3,)),
            Column("torque_frames", "float64", "kg m^2/s", "given by the same", (3,)),
            Column("energy_cell", "float64", "J", "in the fields, by re-entry of a periodic cell"),
            Column("angular_cell", "float64", "kg m^2/s", "by the same", (3,)),
        ),
    ),
    Dataset(
        "exchange",
        ("ledger", "processes", 8),
        "what each process has given to the charges by each row of the ledger, weights included: "
        "energy, momentum (3), angular momentum (3), and how many events there were of it; the "
        "processes are those of the attribute `processes`",
        unit="J, kg m/s (3), kg m^2/s (3), 1",
    ),
    Dataset(
        "losses",
        ("losses",),
        "one row for each charge lost, where it touched the wall",
        columns=(
            Column("time", "float64", "s", "time of the loss"),
            Column("id", "int64", "1", "id of the charge"),
            Column("cloud", "int64", "1", "index in `clouds`"),
            Column("wall", "int64", "1", "index in the attribute `walls`"),
            Column("position", "float64", "m", "place of the loss", (3,)),
            Column("velocity", "float64", "m/s", "proper velocity at the loss", (3,)),
            Column("kinetic_energy", "float64", "J", "of one real particle"),
            Column("weight", "float64", "1", "real particles the charge stands for"),
        ),
    ),
    Dataset(
        "crossings",
        ("crossings",),
        "one row for each passage through a detector",
        columns=(
            Column("time", "float64", "s", "time of the passage"),
            Column("id", "int64", "1", "id of the charge"),
            Column("cloud", "int64", "1", "index in `clouds`"),
            Column("detector", "int64", "1", "index in the attribute `detectors`"),
            Column("direction", "int64", "1", "+1 along the detector's normal, -1 against it"),
            Column("position", "float64", "m", "place of the passage", (3,)),
            Column("velocity", "float64", "m/s", "proper velocity at the passage", (3,)),
            Column("weight", "float64", "1", "real particles the charge stands for"),
        ),
    ),
    Dataset(
        "births",
        ("births",),
        "one row for each charge that a source bore",
        columns=(
            Column("time", "float64", "s", "time of the birth"),
            Column("id", "int64", "1", "id of the charge"),
            Column("cloud", "int64", "1", "index in `clouds`"),
            Column("position", "float64", "m", "place of the birth", (3,)),
            Column("velocity", "float64", "m/s", "proper velocity at the birth", (3,)),
            Column("weight", "float64", "1", "real particles the charge stands for"),
        ),
    ),
    Dataset("trace/time", ("samples",), "time of each sample of the traces", unit="s"),
    Dataset(
        "trace/value",
        ("samples", "traces"),
        "the traced coordinates; their names are in its attribute `names`",
        unit="m",
    ),
)
"""Datasets that grow: each segment holds the next rows, the master shows them in one piece."""

COUNTERS = ("records", "moments", "ledger", "losses", "crossings", "births", "samples")
"""The lengths of the datasets that grow, by the word that stands for them in their shapes."""

FIXED = (
    Dataset("trajectory/id", ("tracked",), "ids of the tracked charges", kind="int64", unit="1"),
    Dataset(
        "clouds",
        ("clouds",),
        "the clouds at their start, then the sources; ids are first_id <= id < first_id + count",
        columns=(
            Column("name", "text", "", "name in the scenario"),
            Column("index", "int64", "1", "index wherever a cloud is named by number"),
            Column("species", "text", "", "name of its species"),
            Column("mass", "float64", "kg", "of one real particle"),
            Column("charge", "float64", "C", "of one real particle"),
            Column("weight", "float64", "1", "real particles each simulated one stands for"),
            Column("first_id", "int64", "1", "lowest id"),
            Column("count", "int64", "1", "simulated charges; of a source all it may bear"),
            Column("emitted", "int64", "1", "1 for a source, whose charges are born in the run"),
        ),
    ),
)
"""Datasets that are the same in every segment and in the master."""

SNAPSHOT = (
    Dataset("time", (), "time of the snapshot", unit="s"),
    Dataset("id", ("alive",), "ids, ascending", kind="int64", unit="1"),
    Dataset("cloud", ("alive",), "index in `clouds`", kind="int64", unit="1"),
    Dataset("species", ("alive",), "index in the attribute `species`", kind="int64", unit="1"),
    Dataset("position", ("alive", 3), "position", unit="m"),
    Dataset("velocity", ("alive", 3), "proper velocity", unit="m/s"),
    Dataset("charge", ("alive",), "of one real particle", unit="C"),
    Dataset("mass", ("alive",), "of one real particle", unit="kg"),
    Dataset("weight", ("alive",), "real particles each one stands for", unit="1"),
)
"""What one group ``snapshot/<number>`` holds: every charge alive at one time."""

INDEX = (
    Dataset(
        "index/segment",
        ("segments",),
        "the sealed segments, in order (master only)",
        columns=(
            Column("number", "int64", "1", "number in the file's name, counted from 1"),
            Column("bytes", "int64", "1", "size of the file"),
            Column("sha256", "text", "", "digest of the file"),
            Column("start", "float64", "s", "time of its first record"),
            Column("end", "float64", "s", "time of its last record"),
            *(
                Column(f"rows_{counter}", "int64", "1", f"rows along `{counter}`")
                for counter in COUNTERS
            ),
        ),
    ),
    Dataset(
        "index/snapshot",
        ("snapshots",),
        "the snapshots, in order (master only)",
        columns=(
            Column("number", "int64", "1", "number of the group, counted from 1"),
            Column("time", "float64", "s", "time of the snapshot"),
            Column("segment", "int64", "1", "number of the segment that holds it"),
        ),
    ),
)
"""What the master adds: which file holds what."""

ANSWERS = Dataset(
    "answers",
    ("questions",),
    "one row for each question (in answers.h5)",
    columns=(
        Column("name", "text", "", "name of the question"),
        Column("ask", "text", "", "what it asks"),
        Column("value", "float64", "in the row's unit", "the answer; not a number where none"),
        Column("unit", "text", "", "unit of value and error"),
        Column("error", "float64", "in the row's unit", "sampling error; not a number if unknown"),
        Column(
            "coulomb_error",
            "float64",
            "1",
            "largest rms relative error of the Coulomb forces behind it; not in `error`",
        ),
        Column(
            "field_error",
            "float64",
            "1",
            "relative rms error of the electrodes' solved field behind it; not in `error`",
        ),
        Column("note", "text", "", "what else to know of the answer"),
    ),
)

HEADER = (
    Attribute("format_version", "int64", "1", "version of this layout"),
    Attribute("driftwell_version", "text", "", "version of driftwell"),
    Attribute("python_version", "text", "", "version of Python"),
    Attribute("numpy_version", "text", "", "version of numpy"),
    Attribute("numba_version", "text", "", "version of numba"),
    Attribute("h5py_version", "text", "", "version of h5py"),
    Attribute("processor", "text", "", "the machine's processor, by name"),
    Attribute("cores", "int64", "1", "processors the machine shows"),
    Attribute("created", "text", "", "when the run began, UTC"),
    Attribute("title", "text", "", "title of the scenario"),
    Attribute("scenario", "text", "", "the scenario file, as given"),
    Attribute("scenario_sha256", "text", "", "digest of the scenario's text (UTF-8)"),
    Attribute("settings", "texts", "", "key=value given beside the file, in order"),
    Attribute(
        "digest",
        "text",
        "",
        "digest of what was simulated: every value in SI units, with settings and files named",
    ),
    Attribute("command", "text", "", "the command that makes the same run again"),
    Attribute("threads", "int64", "1", "threads the run used; they change no bit of it"),
    Attribute("seed", "int64", "1", "seed of all random numbers"),
    Attribute("duration", "float64", "s", "how long the run was to last"),
    Attribute("step", "float64", "s", "length of a step"),
    Attribute("scheme", "text", "", "scheme of the steps"),
    Attribute("motion", "text", "", "fastest motion in the fields that a step must follow", 4),
    Attribute("motion_rate", "float64", "rad/s", "its rate; 0 where the fields have none", 4),
    Attribute("softening", "float64", "m", "softening length of the Coulomb sum"),
    Attribute("coulomb_method", "text", "", "direct, tree or off: what the run began with"),
    Attribute("coulomb_because", "text", "", "why, in words"),
    Attribute("coulomb_accuracy", "float64", "1", "rms relative force error asked of the tree"),
    Attribute("field_error", "float64", "1", "relative rms error of the electrodes' field", 2),
    Attribute("field_digest", "text", "", "digest of that field's numbers", 2),
    Attribute("images", "text", "", "conductors that answer to the charges; empty: none", 2),
    Attribute(
        "images_closest",
        "float64",
        "m",
        "distance from them within which the images' force stops growing; 0: it does not stop",
        4,
    ),
    Attribute("species", "texts", "", "names of the species, in order"),
    Attribute("walls", "texts", "", "names of what takes charges: walls, electrodes, processes"),
    Attribute("processes", "texts", "", "names of what else acts on charges, in order", 3),
    Attribute("cell_axis", "text", "", "x, y or z: along it all repeats; empty: nothing does", 3),
    Attribute("cell_length", "float64", "m", "period of what repeats; 0 where nothing does", 3),
    Attribute("detectors", "texts", "", "names of the detectors, in order"),
    Attribute("traces", "texts", "", "names of the traces, in order"),
)
"""Attributes of the master and of every segment."""

TRACE = (Attribute("names", "texts", "", "names of the columns, in order"),)
"""Attributes of the dataset ``trace/value`` besides its unit and help."""

SEGMENT = (
    Attribute("segment", "int64", "1", "number of this segment, counted from 1"),
    Attribute("start", "float64", "s", "time of its first record"),
    Attribute("end", "float64", "s", "time of its last record"),
)
"""Attributes a segment has besides."""

OUTCOME = (
    Attribute("word", "text", "", "how the run ended, in a word or two"),
    Attribute("sentence", "text", "", "how the run ended, in a sentence"),
    Attribute("exit_code", "int64", "1", "exit code of the command"),
    Attribute("wall_time", "float64", "s", "time the run took by the clock"),
    Attribute("steps", "int64", "1", "steps taken"),
)
"""Attributes of the group ``outcome`` in answers.h5."""


def datasets() -> Iterator[Dataset]:
    """Every dataset that stands at a path of its own."""
    yield from (*ROWS, *FIXED, *INDEX, ANSWERS)


def dataset(path: str) -> Dataset:
    """The entry at `path`; KeyError where the layout has none."""
    for entry in datasets():
        if entry.path == path:
            return entry
    raise KeyError(path)


def unit(path: str, column: str = "") -> str:
    """SI unit of a dataset, or of one column of a table ("1": a pure number)."""
    entry = dataset(path)
    if not column:
        return entry.unit
    for each in entry.columns:
        if each.name == column:
            return each.unit
    raise KeyError(f"{path}: {column}")


def dtype(path: str) -> np.dtype[Any]:
    """The numpy type of a dataset's rows, for those that hold numbers only."""
    return dataset(path).dtype()


def rows(path: str, count: int) -> NDArray[Any]:
    """`count` rows of a table, all zero, to be filled by the names of their columns."""
    return np.zeros(count, dtype(path))
