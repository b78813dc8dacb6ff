"""Runs of every kind that pictures meet, each written once for all tests."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from pictured_run import ALL_LOST, NONE, STOPPED, Charges, charges, lost, passed, pictured_run

from driftwell.record.reader import Run

TIMES = np.linspace(0.0, 200e-6, 41)


def _trap(folder: Path) -> Run:
    """A cloud that breathes and keeps its place."""
    start = charges(300)
    return pictured_run(
        folder,
        [
            (float(t), Charges(start.position * (1.0 + 0.3 * np.sin(2e5 * t)), start.velocity))
            for t in TIMES
        ],
        ledger={
            "energy_residual": np.where(TIMES > 0.0, 1e-6 * (1.0 + TIMES / 1e-4), 0.0),
            "momentum_residual": 1e-16 * (1.0 + np.arange(TIMES.size) % 3),
        },
    )


def _beam(folder: Path) -> Run:
    """Two clouds that fly a metre along z, lose a third on two walls and pass two detectors."""
    start = charges(900, (2e-3, 1e-3, 5e-3), (2e3, 1e3, 300.0), drift=(0.0, 0.0, 2e6), clouds=2)
    records = []
    for t in np.linspace(0.0, 500e-9, 26):
        stay = start.id % 3 > 0 if t > 250e-9 else start.id >= 0
        records.append(
            (
                float(t),
                Charges(
                    (start.position + t * start.velocity)[stay],
                    start.velocity[stay],
                    start.cloud[stay],
                    start.id[stay],
                ),
            )
        )
    draw = np.random.default_rng(3)
    gone = start.id[start.id % 3 == 0]
    angle = draw.uniform(0.0, 6.28, gone.size)
    places = np.stack(
        [5e-3 * np.cos(angle), 5e-3 * np.sin(angle), draw.uniform(0.3, 0.5, gone.size)], axis=1
    )
    seen = np.concatenate([draw.normal(size=(900, 2)) * 1e-3, np.full((900, 1), 0.9)], axis=1)
    return pictured_run(
        folder,
        records,
        losses=lost(
            draw.uniform(150e-9, 250e-9, gone.size), places, gone % 2, gone, start.cloud[gone]
        ),
        crossings=passed(
            450e-9 + draw.normal(size=900) * 1e-9, seen, np.arange(900) % 2, [1, 1, -1] * 300
        ),
    )


def _two(folder: Path) -> Run:
    """Two charges that come near each other on a line, of clouds with awkward names."""
    records = []
    for t in np.linspace(0.0, 20e-9, 30):
        z = 1e-3 - 1e5 * t
        place, speed = np.array([[0.0, 0.0, -z], [0.0, 1e-6, z]]), np.array([0.0, 0.0, 1e5])
        records.append((float(t), Charges(place, np.array([speed, -speed]), np.array([0, 1]))))
    return pictured_run(folder, records, names=("_hidden", "$x_1"))


def _line(folder: Path) -> Run:
    """Ten charges on the z axis, at rest: no width in x and y, no velocity."""
    place = np.zeros((10, 3))
    place[:, 2] = np.linspace(-30e-6, 30e-6, 10)
    return pictured_run(folder, [(t, Charges(place, np.zeros((10, 3)))) for t in (0.0, 1e-6, 2e-6)])


def _one(folder: Path) -> Run:
    """A single charge at rest at the origin."""
    held = Charges(np.zeros((1, 3)), np.zeros((1, 3)))
    return pictured_run(folder, [(0.0, held), (1e-3, held)])


def _all_lost(folder: Path) -> Run:
    """A cloud of which nothing is left at the end; its tracked charges ended on the plate."""
    start = charges(200, drift=(0.0, 0.0, 1e4))
    places = np.concatenate([start.position[:, :2], np.full((200, 1), 0.01)], axis=1)
    return pictured_run(
        folder,
        [(0.0, start), (0.5e-6, start), (1e-6, NONE)],
        losses=lost(np.full(200, 0.9e-6), places, 1),
        outcome=ALL_LOST,
    )


def _stopped(folder: Path) -> Run:
    """A run stopped between two snapshots: only the start has one."""
    start = charges(100)
    return pictured_run(
        folder,
        [(0.0, start), (1e-6, start), (2e-6, Charges(2.0 * start.position, start.velocity))],
        snapshots=(0,),
        outcome=STOPPED,
    )


def _exploding(folder: Path) -> Run:
    """A cloud that grows a thousand times."""
    start = charges(200, (1e-6, 1e-6, 1e-6), (0.0, 0.0, 0.0))
    return pictured_run(
        folder,
        [
            (t, Charges(start.position * growth, start.position * growth * 1e5))
            for t, growth in ((0.0, 1.0), (1e-6, 30.0), (2e-6, 1000.0))
        ],
    )


def _odd(folder: Path) -> Run:
    """Names and a title that mean something to those who set mathematics, or that no font has."""
    start = charges(60, clouds=2)
    return pictured_run(
        folder,
        [(0.0, start), (1e-6, start)],
        losses=lost(np.array([0.5e-6]), np.array([[1e-3, 0.0, 0.0]])),
        crossings=passed(np.array([0.4e-6]), np.array([[1e-3, 0.0, 0.0]])),
        title=r"$5 for \frac{1}{2} of {x}_1, 一万 charges 🚀 $ % & # ^ ~ <b>" + " long" * 24,
        names=(r"$\alpha$", "_under_{score} " + "w" * 45),
        walls=("$bore_1", "plate"),
        detectors=("_exit$" + "x" * 50, "far"),
    )


def _many(folder: Path) -> Run:
    """A hundred thousand charges."""
    start = charges(100_000)
    return pictured_run(folder, [(0.0, start), (1e-6, start)], tracks=3)


def _channel(folder: Path) -> Run:
    """A beam of one cloud that is being focused: narrow in x at one end, in y at the other."""
    count = 6000
    start = charges(count, (1e-3, 1e-3, 1.0), (1e3, 1e3, 1e3), drift=(0.0, 0.0, 1e6))
    along = np.linspace(-20e-3, 20e-3, count)
    place = start.position.copy()
    place[:, 2] = along
    later = place * np.stack([1.5 + 40.0 * along, 1.5 - 40.0 * along, np.ones(count)], axis=1)
    later[:, 2] += 0.1
    return pictured_run(
        folder, [(0.0, Charges(place, start.velocity)), (1e-7, Charges(later, start.velocity))]
    )


def _traced(folder: Path) -> Run:
    """A cloud whose centre and charges were traced: lines apart, lines close, lost, at rest."""
    start = charges(50)
    time = np.arange(4096) * 1e-8
    noise = 1e-9 * np.random.default_rng(5).normal(size=(2, time.size))
    slow, fast, drive = (np.cos(2.0 * np.pi * f * time) for f in (1e6, 1.06e6, 48e6))
    return pictured_run(
        folder,
        [(0.0, start), (5e-5, start)],
        traces={
            "load centre x": 1e-5 * slow + 3e-7 * drive + noise[0],
            "load charge 0 y": np.where(time < 2e-5, 1e-5 * slow + 8e-6 * fast + noise[1], np.nan),
            "load charge 1 z": np.full(time.size, 1e-3),
            "load charge 2 z": np.full(time.size, np.nan),
        },
        sampled=time,
    )


MAKERS: dict[str, Callable[[Path], Run]] = {
    "trap": _trap,
    "beam": _beam,
    "two": _two,
    "line": _line,
    "one": _one,
    "all lost": _all_lost,
    "stopped": _stopped,
    "exploding": _exploding,
    "odd": _odd,
    "many": _many,
    "channel": _channel,
    "traced": _traced,
}


@pytest.fixture(scope="session")
def run_of(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], Run]:
    """A run of this kind; it is not to be changed."""
    made: dict[str, Run] = {}

    def run(kind: str) -> Run:
        if kind not in made:
            made[kind] = MAKERS[kind](tmp_path_factory.mktemp("run") / "run")
        return made[kind]

    return run
