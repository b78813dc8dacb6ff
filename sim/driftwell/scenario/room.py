"""The room a run needs, in memory and on the disk, against what there is: refused before it begins.

A machine that runs out of memory ends the program without a word, and a disk that fills up ends a
run half-way; both can be seen coming. What a charge takes was measured with 3e5 to 3e6 of them: 650
bytes in a run without walls and Coulomb sum, 700 to 730 with two surfaces, where this counts 800.
Whoever knows better than this count can have the refusals said as warnings.
"""

from __future__ import annotations

import shutil
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.summation import room_in_bytes
from driftwell.errors import DriftwellError, RecordError, ScenarioError
from driftwell.record.form import DEFAULT_RECORDS, DEFAULT_TRACKS
from driftwell.record.layout import dtype
from driftwell.record.sealing import segments_of
from driftwell.scenario.model import Scenario

BASE = 500_000_000
"""Bytes of the program itself: 250 MB, and up to 600 MB in the run that compiles."""
PER_CHARGE = 700
"""Bytes of each charge: its state, the loop's work space, two copies for the record."""
PER_SURFACE = 50
"""Bytes of each charge for each wall and detector."""
PER_PROCESS, STATE_PROCESS = 50, 16
"""Bytes of each charge for each process, in memory and on the disk: its clock."""
PER_TRACKED = 220
"""Bytes of each tracked charge while a segment is made."""
PER_MARK = 100
"""Bytes of each record, sample and break of a waveform in the schedule."""

STATE, STATE_SURFACE = 104, 8
"""Bytes on the disk of each charge's state, and of the side it is on of each wall and detector."""
SNAPSHOT, SNAPSHOT_BASE = 96, 6000
"""Bytes on the disk of each charge in a snapshot, and of HDF5's structures around it."""
SEGMENT = 36_000
"""Bytes on the disk of HDF5's structures in a segment, and of its scenario."""
MASTER, MASTER_SEGMENT = 28_000, 800
"""Bytes on the disk of master and answers, and of what the master says of each segment."""

Warn = Callable[[str], None]

_LIMITS = ("/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory/memory.limit_in_bytes")


@dataclass(frozen=True, slots=True)
class Extent:
    """How much a run is: numbers of things, and how the charges' own force is summed.

    surfaces : walls, detectors, and one for all electrodes; detectors : those among them
    images : bytes that sums over images take; cell : whether everything repeats
    births : charges, of all, that are born on the way; processes : what else acts
    """

    charges: int
    tracked: int
    clouds: int
    surfaces: int
    records: int
    samples: int
    traces: int
    snapshots: int
    coulomb: Coulomb
    detectors: int = 0
    images: int = 0
    births: int = 0
    cell: bool = False
    processes: int = 0

    def memory(self) -> int:
        """Bytes of memory at the busiest time, within a third."""
        sums = room_in_bytes(self.coulomb, self.charges, self.cell)
        moments = self.records * self.clouds * dtype("moments").itemsize
        traces = self.samples * (self.traces + 1) * 8
        return (
            BASE
            + sums
            + self.images
            + self.charges * (PER_CHARGE + self.surfaces * PER_SURFACE)
            + self.charges * self.processes * PER_PROCESS
            + self.tracked * PER_TRACKED
            + (self.records + self.samples) * PER_MARK
            + 3 * (moments + traces)
        )

    def rows(self) -> int:
        """Bytes of all that is recorded, without what is lost or passes a detector."""
        return (
            self.records * (8 + self.tracked * 48)
            + self.records * self.clouds * dtype("moments").itemsize
            + (self.records + self.snapshots) * (dtype("ledger").itemsize + 64 * self.processes)
            + self.samples * (self.traces + 1) * 8
            + self.snapshots * (self.charges * SNAPSHOT + SNAPSHOT_BASE)
            + self.births * dtype("births").itemsize
        )

    def state(self) -> int:
        """Bytes of the state that ends each segment, while no charge is lost."""
        clocks = self.processes * STATE_PROCESS
        return self.charges * (STATE + self.surfaces * STATE_SURFACE + clocks)

    def segments(self, seconds: float = 0.0) -> int:
        """Segments of a run that lasts so many seconds by the clock; 0 s: as few as can be."""
        return segments_of(seconds, self.records, self.rows(), self.state())

    def disk(self, seconds: float = 0.0) -> int:
        """Bytes of the record, without what is lost or passes a detector.

        seconds : s the run lasts by the clock, which says how often its state is written; 0: as
        seldom as can be
        """
        ids = self.tracked * 8
        segments = self.segments(seconds)
        return (
            self.rows() + segments * (self.state() + ids + SEGMENT + MASTER_SEGMENT) + ids + MASTER
        )

    def events(self) -> int:
        """Bytes on the disk if every charge passes every detector once, and all are lost."""
        crossing, loss = dtype("crossings").itemsize, dtype("losses").itemsize
        walls = min(self.surfaces - self.detectors, 1)
        return self.charges * (self.detectors * crossing + walls * loss)


def extent_of(
    scenario: Scenario, charges: int, samples: int = 0, traces: int = 0, births: int = 0
) -> Extent:
    """How much a run of so many charges is, with so many samples of so many traces.

    births : how many of the charges are born on the way
    """
    duration, record = scenario.duration, scenario.record
    return Extent(
        charges=charges,
        tracked=min(charges, DEFAULT_TRACKS if record.tracks is None else record.tracks),
        clouds=len(scenario.cloud) + len(scenario.source),
        surfaces=len(scenario.wall) + len(scenario.detector) + bool(scenario.electrode),
        records=int(duration / (record.every or duration / DEFAULT_RECORDS)) + 2,
        samples=samples,
        traces=traces,
        snapshots=int(duration / (record.snapshots or duration)) + 1,
        coulomb=scenario.coulomb,
        detectors=len(scenario.detector),
        images=0 if scenario.images is None else scenario.images.room_in_bytes(charges),
        births=births,
        cell=scenario.cell is not None,
        processes=len(scenario.process),
    )


def refuse_beyond_memory(extent: Extent, warn: Warn | None = None) -> bool:
    """Raise ScenarioError where a run needs more memory than is free.

    warn : where given, it is called with what there is to say instead

    Returns whether it was.
    """
    needed, free = extent.memory(), free_memory()
    if free is None or needed <= free:
        return False
    return _refuse(
        ScenarioError(
            f"The run needs about {in_words(needed)} of memory, and {in_words(free)} are free: it "
            f"has {extent.charges} charges, {extent.records} records of {extent.clouds} clouds and "
            f"{extent.samples} samples. Take fewer charges of more weight each, or record less "
            "often."
        ),
        "should memory run out, the system ends it without a word",
        warn,
    )


def refuse_beyond_disk(extent: Extent, folder: Path, warn: Warn | None = None) -> bool:
    """Raise RecordError where a record needs more space than the disk of `folder` has.

    warn, and what is returned : as for :func:`refuse_beyond_memory`
    """
    needed, space, states = extent.disk(), free_space(folder), extent.segments()
    if space is None or needed <= space:
        return False
    return _refuse(
        RecordError(
            f"{folder}: the record needs at least {in_words(needed)}, and the disk has "
            f"{in_words(space)}: {extent.records} records of {extent.tracked} tracked charges, "
            f"{extent.snapshots} snapshots of {extent.charges}, {states} state"
            f"{'s' * (states != 1)}. Record less often, track fewer charges, or name a folder on a "
            "larger disk with -o."
        ),
        "should the disk fill up, it ends there, and what was sealed before is kept",
        warn,
    )


def _refuse(fault: DriftwellError, otherwise: str, warn: Warn | None) -> bool:
    """Raise the fault, or say it and what may come of going on all the same."""
    if warn is None:
        raise fault
    warn(f"Warning: {fault} The run begins all the same, as --force says; {otherwise}.")
    return True


def free_memory() -> int | None:
    """Bytes the program may still take; None where the system does not say."""
    found: list[int] = []
    with suppress(OSError, ValueError, IndexError):
        found += [
            1024 * int(line.split()[1])
            for line in Path("/proc/meminfo").read_text().splitlines()
            if line.startswith("MemAvailable:")
        ]
    for name in _LIMITS:
        with suppress(OSError, ValueError):  # "max": no limit
            found.append(int(Path(name).read_text()))
    return min(found, default=None)


def free_space(folder: Path) -> int | None:
    """Bytes free on the disk of `folder`, made or not; None where the system does not say."""
    for place in (folder, *folder.absolute().parents):
        with suppress(OSError):
            usage = shutil.disk_usage(place)
            return usage.free if usage.total else None
    return None


def in_words(count: int) -> str:
    """Bytes in words, e.g. ``"4.81 GB"``."""
    for unit, scale in (("TB", 1e12), ("GB", 1e9), ("MB", 1e6), ("kB", 1e3)):
        if count >= scale:
            return f"{count / scale:.3g} {unit}"
    return f"{count} bytes"
