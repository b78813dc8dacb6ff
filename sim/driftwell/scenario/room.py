"""The room a run needs, in memory and on the disk, against what there is: refused before it begins.

A machine that runs out of memory ends the program without a word, and a disk that fills up ends a
run half-way; both can be seen coming. What a charge takes was measured with 3e5 to 3e6 of them: 650
bytes in a run without walls and Coulomb sum, 700 to 730 with two surfaces, where this counts 800.
"""

from __future__ import annotations

import shutil
from contextlib import suppress
from dataclasses import dataclass
from pathlib import Path

from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.summation import room_in_bytes
from driftwell.errors import RecordError, ScenarioError
from driftwell.record.form import DEFAULT_RECORDS, DEFAULT_TRACKS
from driftwell.record.layout import dtype
from driftwell.scenario.model import Scenario

BASE = 500_000_000
"""Bytes of the program itself: 250 MB, and up to 600 MB in the run that compiles."""
PER_CHARGE = 700
"""Bytes of each charge: its state, the loop's work space, two copies for the record."""
PER_SURFACE = 50
"""Bytes of each charge for each wall and detector."""
PER_TRACKED = 220
"""Bytes of each tracked charge while a segment is made."""
PER_MARK = 100
"""Bytes of each record, sample and break of a waveform in the schedule."""

_LIMITS = ("/sys/fs/cgroup/memory.max", "/sys/fs/cgroup/memory/memory.limit_in_bytes")


@dataclass(frozen=True, slots=True)
class Extent:
    """How much a run is: numbers of things, and how the charges' own force is summed."""

    charges: int
    tracked: int
    clouds: int
    surfaces: int
    records: int
    samples: int
    traces: int
    snapshots: int
    coulomb: Coulomb

    def memory(self) -> int:
        """Bytes of memory at the busiest time, within a third."""
        sums = room_in_bytes(self.coulomb, self.charges)
        moments = self.records * self.clouds * dtype("moments").itemsize
        traces = self.samples * (self.traces + 1) * 8
        return (
            BASE
            + sums
            + self.charges * (PER_CHARGE + self.surfaces * PER_SURFACE)
            + self.tracked * PER_TRACKED
            + (self.records + self.samples) * PER_MARK
            + 3 * (moments + traces)
        )

    def disk(self) -> int:
        """Bytes of the record, without what is lost or passes a detector."""
        return (
            self.records * self.tracked * 48
            + self.records * self.clouds * dtype("moments").itemsize
            + self.records * dtype("ledger").itemsize
            + self.samples * (self.traces + 1) * 8
            + self.snapshots * self.charges * 96
        )


def extent_of(scenario: Scenario, charges: int, samples: int = 0, traces: int = 0) -> Extent:
    """How much a run of so many charges is, with so many samples of so many traces."""
    duration, record = scenario.duration, scenario.record
    return Extent(
        charges=charges,
        tracked=min(charges, DEFAULT_TRACKS if record.tracks is None else record.tracks),
        clouds=len(scenario.cloud),
        surfaces=len(scenario.wall) + len(scenario.detector),
        records=int(duration / (record.every or duration / DEFAULT_RECORDS)) + 2,
        samples=samples,
        traces=traces,
        snapshots=int(duration / (record.snapshots or duration)) + 1,
        coulomb=scenario.coulomb,
    )


def refuse_beyond_memory(extent: Extent) -> None:
    """Raise ScenarioError where a run needs more memory than is free."""
    needed, free = extent.memory(), free_memory()
    if free is not None and needed > free:
        raise ScenarioError(
            f"The run needs about {in_words(needed)} of memory, and {in_words(free)} are free: it "
            f"has {extent.charges} charges, {extent.records} records of {extent.clouds} clouds and "
            f"{extent.samples} samples. Take fewer charges of more weight each, or record less "
            "often."
        )


def refuse_beyond_disk(extent: Extent, folder: Path) -> None:
    """Raise RecordError where a record needs more space than the disk of `folder` has."""
    needed, space = extent.disk(), free_space(folder)
    if space is not None and needed > space:
        raise RecordError(
            f"{folder}: the record needs at least {in_words(needed)}, and the disk has "
            f"{in_words(space)}: {extent.records} records of {extent.tracked} tracked charges, "
            f"{extent.snapshots} snapshots of {extent.charges}. Record less often, track fewer "
            "charges, or name a folder on a larger disk with -o."
        )


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
