"""Sampling errors mean what they say: over many draws, values scatter by their errors."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from recorded_by_hand import (
    CHARGE,
    LOSS,
    MASS,
    Recorded,
    facts,
    in_time,
    one_cloud,
    passing,
    table,
)
from scipy.signal import lfilter
from scores import scores

from driftwell.answers.moments import MomentsRow
from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT

COUNT = 400
KELVIN = 300.0
SPREAD = float(np.sqrt(BOLTZMANN * KELVIN / MASS))
SPEED = 5000.0
SIGMA = 1e-4
GAUSSIAN = 2.354820045


def thermal(random: np.random.Generator) -> Recorded:
    """A Gaussian cloud that flies along z, its slopes correlated with its places."""
    place, velocity = random.normal(size=(2, COUNT, 3))
    velocity = SPREAD * (velocity + 1.5 * place) + [0.0, 0.0, SPEED]
    return one_cloud(SIGMA * place, velocity)


def resting(random: np.random.Generator) -> Recorded:
    """A thermal gas as a whole at rest."""
    return one_cloud(
        SIGMA * random.normal(size=(COUNT, 3)), SPREAD * random.normal(size=(COUNT, 3))
    )


def pulse(random: np.random.Generator) -> Recorded:
    """A Gaussian pulse on a detector."""
    return passing(1e-5 + 1e-8 * random.normal(size=COUNT))


def lopsided(random: np.random.Generator) -> Recorded:
    """A pulse with a tail."""
    return passing(1e-5 + 1e-8 * random.gamma(2.0, 1.0, size=COUNT))


HOT = KELVIN * (1.0 + 1.5**2)

CASES: list[tuple[str, dict[str, Any], Any, float | None, float]] = [
    ("centre", {"ask": "centre", "axis": "x"}, thermal, 0.0, 0.25),
    ("size", {"ask": "rms-size", "axis": "x"}, thermal, SIGMA, 0.25),
    ("temperature", {"ask": "temperature", "axis": "z"}, thermal, HOT, 0.25),
    ("mean temperature", {"ask": "temperature"}, thermal, HOT, 0.25),
    ("energy", {"ask": "kinetic-energy"}, resting, 1.5 * BOLTZMANN * KELVIN / CHARGE, 0.25),
    (
        "energy spread",
        {"ask": "kinetic-energy-spread"},
        resting,
        1.5**0.5 * BOLTZMANN * KELVIN / CHARGE,
        0.5,  # skewed: small values come with small errors
    ),
    (
        "normalised emittance",
        {"ask": "emittance", "plane": "x", "normalised": True},
        thermal,
        SIGMA * SPREAD / SPEED_OF_LIGHT,
        0.25,
    ),
    ("emittance", {"ask": "emittance", "plane": "x"}, thermal, None, 0.25),
    ("arrival", {"ask": "arrival-time", "of": "exit"}, pulse, 1e-5, 0.25),
    (
        "arrival spread",
        {"ask": "arrival-time", "of": "exit", "statistic": "rms"},
        pulse,
        1e-8,
        0.25,
    ),
    (
        "arrival width",
        {"ask": "arrival-time", "of": "exit", "statistic": "fwhm"},
        pulse,
        1e-8 * GAUSSIAN,
        0.4,  # low by a third of the error
    ),
    (
        "lopsided width",
        {"ask": "arrival-time", "of": "exit", "statistic": "fwhm"},
        lopsided,
        2.446386e-8,
        0.6,
    ),
    (
        "peak density",
        {"ask": "peak-density"},
        resting,
        COUNT / ((2.0 * np.pi) ** 1.5 * SIGMA**3),
        0.6,  # the peak is smoothed: documented to be low by 5 %
    ),
    ("neighbour", {"ask": "nearest-neighbour"}, resting, None, 0.25),
]


@pytest.mark.parametrize(
    ("question", "draw", "truth", "bias"), [case[1:] for case in CASES], ids=[c[0] for c in CASES]
)
def test_errors_of_draws_are_their_scatter(
    question: dict[str, Any],
    draw: Callable[[np.random.Generator], Recorded],
    truth: float | None,
    bias: float,
) -> None:
    found = scores(question, draw, truth)
    assert 0.8 < found.std() < 1.25
    assert abs(found.mean()) < bias


@pytest.mark.parametrize("part", [0.5, 0.93])
def test_errors_of_fractions_are_their_scatter(part: float) -> None:
    def draw(random: np.random.Generator) -> Recorded:
        lost = np.flatnonzero(random.uniform(size=COUNT) > part)
        rows = [(1e-4, i, 0) for i in lost]
        return Recorded({"load": facts(count=COUNT)}, lost=table(LOSS, rows))

    found = scores({"ask": "fraction-left"}, draw, part)
    assert 0.8 < found.std() < 1.25
    assert abs(found.mean()) < 0.25


@pytest.mark.parametrize("memory", [0.0, 0.9])
def test_errors_of_windows_know_the_memory_of_the_series(memory: float) -> None:
    """Temperatures whose correlation falls by `memory` from record to record."""
    time = np.linspace(0.0, 1e-3, 600)

    def draw(random: np.random.Generator) -> Recorded:
        noise = random.normal(size=time.size + 200)
        wander = lfilter([1.0], [1.0, -memory], noise)[200:] * np.sqrt(1.0 - memory**2)
        rows = []
        for kelvin in KELVIN * (1.0 + 0.1 * wander):
            covariance = np.zeros((6, 6))
            covariance[5, 5] = BOLTZMANN * kelvin / MASS * 99 / 100
            rows.append(MomentsRow(100, np.zeros(6), covariance, 0.0, 0.0))
        return in_time(time, rows)

    question = {"ask": "temperature", "axis": "z", "over": ["0 s", "1 ms"]}
    found = scores(question, draw, KELVIN)
    assert 0.8 < found.std() < 1.25
    assert abs(found.mean()) < 0.25
