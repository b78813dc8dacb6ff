"""Invented runs to be recorded: nothing in them is physics, every bit of them is compared."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import CloudFacts
from driftwell.particles.state import Particles
from driftwell.record.header import Header
from driftwell.record.layout import COUNTERS, ROWS, dataset
from driftwell.record.outcome import Outcome
from driftwell.record.writer import RunWriter

FINISHED = Outcome("finished", "The run reached its end.", 0, 1.5, 2000)
ANSWERS = (
    Answer("held fraction", "fraction-left", 0.97, "", 0.004, ""),
    Answer("Wärme", "temperature", 301.25, "K", None, "no error is known; µ and é stay whole"),
)


def invented_header(tracked: int = 3, clouds: int = 2, traces: int = 2) -> Header:
    """A header with names that are not all ASCII."""
    return Header(
        scenario='title = "invented"\n# Größe: 3 µm\n',
        title="Invented cloud, Größe 3 µm",
        seed=7,
        duration=1.0,
        step=1e-9,
        scheme="kick-drift-kick",
        softening=5e-6,
        clouds=tuple(
            CloudFacts(f"wölk {k}", k, "barium", 2.29e-25, 1.602e-19, 1.0 + k, 100 * k, 100)
            for k in range(clouds)
        ),
        species=("barium", "électron"),
        walls=("bore", "plate"),
        processes=("gås", "light"),
        detectors=("exit",),
        tracked=tuple(range(0, 2 * tracked, 2)),
        traces=tuple(f"wölk 0 charge {k} z" for k in range(traces)),
        settings=("duration=1 s", "seed=7"),
        digest="0123456789abcdef",
        command="driftwell run invented.toml --set 'duration=1 s' --set seed=7",
        threads=2,
    )


def invented_particles(count: int, seed: int = 1) -> Particles:
    """Particles with random values in every array."""
    draw = np.random.default_rng(seed)
    return Particles(
        draw.normal(size=(3, count)),
        draw.normal(size=(3, count)),
        *(draw.normal(size=count) for _ in range(3)),
        np.sort(draw.permutation(10 * count)[:count]).astype(np.int64),
        *(draw.integers(0, 2, count) for _ in range(2)),
        draw.normal(size=count),
    )


def random_rows(path: str, count: int, sizes: dict[str, int], seed: int) -> np.ndarray:
    """Rows of a dataset with random bits: any float, "not a number" and infinities among them."""
    entry = dataset(path)
    shape = (count, *entry.row_shape(sizes))
    size = int(np.prod(shape)) * entry.dtype().itemsize
    words = np.frombuffer(np.random.default_rng(seed).bytes(size), np.uint64).copy()
    for k, special in enumerate((np.nan, -np.nan, np.inf, -0.0, 5e-324)):
        words[k::17] = np.float64(special).view(np.uint64)
    words[5::17] = 0x7FF8_0000_DEAD_BEEF  # "not a number" with bits of its own
    return words.view(entry.dtype()).reshape(shape)


@dataclass
class Recorded:
    """What was given to a writer, dataset by dataset."""

    rows: dict[str, list[np.ndarray]] = field(
        default_factory=lambda: {entry.path: [] for entry in ROWS}
    )
    snapshots: list[tuple[float, Particles]] = field(default_factory=list)
    states: list[dict[str, Any]] = field(default_factory=list)

    def all_rows(self, path: str) -> np.ndarray:
        return np.concatenate(self.rows[path])


def record_segment(
    writer: RunWriter,
    recorded: Recorded,
    counts: dict[str, int],
    snapshots: Sequence[int] = (),
    first: float = 0.0,
    seed: int = 0,
) -> None:
    """Give the writer `counts` rows of each kind, in time from `first` on, and seal them."""
    sizes = writer.header.sizes
    made = {
        entry.path: random_rows(entry.path, counts[str(entry.shape[0])], sizes, seed + k).copy()
        for k, entry in enumerate(ROWS)
    }
    for rows in made.values():
        if rows.dtype.names and "time" in rows.dtype.names:
            rows["time"] = first + 1e-3 * np.arange(len(rows))
    for path in ("trajectory/time", "trace/time"):
        made[path] = first + 1e-3 * np.arange(len(made[path]))
    clouds = len(writer.header.clouds)
    # moments are recorded for all clouds at once
    kept = made["moments"][: len(made["moments"]) // max(clouds, 1) * clouds]
    for k in range(len(kept) // max(clouds, 1)):
        rows = kept[k * clouds : (k + 1) * clouds]
        rows["time"] = first + 1e-3 * k
        rows["cloud"] = np.arange(clouds)
        writer.moments(first + 1e-3 * k, rows)
    made["moments"] = kept
    for time, state in zip(made["trajectory/time"], made["trajectory/state"], strict=True):
        writer.trajectory(float(time), state)
    for row, given in zip(made["ledger"], made["exchange"], strict=True):
        writer.ledger(row, given)
    writer.losses(made["losses"])
    writer.crossings(made["crossings"])
    writer.births(made["births"])
    writer.trace(made["trace/time"], made["trace/value"])
    for k, alive in enumerate(snapshots):
        particles = invented_particles(alive, seed + k)
        time = first + 0.1 * k
        writer.snapshot(time, particles)
        recorded.snapshots.append((time, particles))
    state = {"schedule/step": seed, "accounts/work": np.array([1e-300, -0.0, np.nan])}
    for path, rows in made.items():
        recorded.rows[path].append(rows)
    recorded.states.append(state)
    writer.seal(state)


def invented_run(folder: Path, segments: int = 3, rows: int = 5) -> tuple[RunWriter, Recorded]:
    """A run with `segments` segments of unequal sizes, not finished."""
    writer = RunWriter.create(folder, invented_header())
    recorded = Recorded()
    for k in range(segments):
        counts = {counter: rows * (k + 1) + place for place, counter in enumerate(COUNTERS)}
        record_segment(writer, recorded, counts, (4 + k,), first=float(k), seed=100 * k)
    return writer, recorded
