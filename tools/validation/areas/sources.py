"""Births: temperatures, emittances, currents, and flight times from a source."""

from __future__ import annotations

import math

import numpy as np
from scipy.constants import atomic_mass, e, epsilon_0, k, m_e

from driftwell.record.reader import Run
from validation.case import FROM_MEMORY, Case, Check, Published, Reading, computed, halved

MAXWELL = "Maxwell's distribution: kinetic theory"
EFFUSION = "M. Knudsen's cosine law: kinetic theory of what passes a plane"
FOCUS = "W. C. Wiley, I. H. McLaren, Rev. Sci. Instrum. 26 (1955) 1150"
CHILD = (
    "C. D. Child, Phys. Rev. 32 (1911) 492; I. Langmuir, Phys. Rev. 2 (1913) 450; "
    "the field of a disc "
    "by Y. Y. Lau, Phys. Rev. Lett. 87 (2001) 278301"
)
SCHOTTKY = "W. Schottky, Ann. Phys. 362 (1918) 541: variance of a count equals its mean"


def _velocities(run: Run) -> tuple[np.ndarray, np.ndarray]:
    births = run.births()
    return births["velocity"], births["velocity"][:, 2]


def _mean(values: np.ndarray) -> Reading:
    return Reading(float(values.mean()), float(values.std() / math.sqrt(values.size)))


def _energy(run: Run) -> Reading:
    velocity, _ = _velocities(run)
    return _mean(0.5 * 100.0 * atomic_mass * (velocity**2).sum(axis=1) / e)


def _cosine(run: Run) -> Reading:
    velocity, along = _velocities(run)
    return _mean(along / np.sqrt((velocity**2).sum(axis=1)))


def _forward(run: Run) -> Reading:
    return _mean(_velocities(run)[1])


def _scatter(run: Run) -> Reading:
    """Variance over mean of the births counted in 200 equal stretches of time."""
    counts, _ = np.histogram(run.births()["time"], 200, (0.0, run.header.duration))
    return Reading(float(counts.var(ddof=1) / counts.mean()), math.sqrt(2.0 / 199.0))


def _flight(start: float) -> float:
    """Time of flight (s) from so far (m) before the first grid, by uniform accelerations."""
    m, es, ed, d, way = 1.6605e-25, 2e4, 1e5, 0.01, 0.31386298155127523
    a1, a2 = e * es / m, e * ed / m
    v1 = math.sqrt(2.0 * a1 * start)
    v2 = math.sqrt(v1**2 + 2.0 * a2 * d)
    return v1 / a1 + (v2 - v1) / a2 + way / v2


_child = 4.0 * epsilon_0 / 9.0 * math.sqrt(2.0 * e / m_e) * 1e3**1.5 / 25e-6 * math.pi * 25e-6
_transit = 3.0 * 5e-3 / math.sqrt(2.0 * e / m_e * 1e3)


def _limited(run: Run) -> Reading:
    """What arrives at the anode once the flow is steady, as part of Child's current."""
    losses = run.losses()
    late = (losses["wall"] == 1) & (losses["time"] > 1.2 * _transit)
    count = int(late.sum())
    charge = float(losses["weight"][late].sum()) * e
    part = charge / ((run.header.duration - 1.2 * _transit) * _child)
    return Reading(part, part / math.sqrt(max(count, 1)))


CASES: tuple[Case, ...] = (
    Case(
        "warm-cloud",
        "sources",
        "Ions of 500 K at their birth: mean energy and its spread.",
        (
            Check("mean energy", "meV", computed(1.5e3 * k * 500.0 / e, MAXWELL), "energy", 1e3),
            Check(
                "spread of it",
                "meV",
                computed(1e3 * math.sqrt(1.5) * k * 500.0 / e, MAXWELL),
                "spread",
                1e3,
            ),
        ),
        (),
    ),
    Case(
        "thermal-surface",
        "sources",
        "A disc of 500 K emits ions of 100 u: the energy, the direction, the speed "
        "along its normal; and "
        "how many in equal times.",
        (
            Check("mean energy", "meV", computed(2e3 * k * 500.0 / e, EFFUSION), _energy, 1e3),
            Check("mean cosine", "1", computed(2.0 / 3.0, EFFUSION), _cosine),
            Check(
                "speed along the normal",
                "m/s",
                computed(math.sqrt(math.pi * k * 500.0 / (200.0 * atomic_mass)), EFFUSION),
                _forward,
            ),
            Check("variance of counts over mean", "1", computed(1.0, SCHOTTKY), _scatter),
        ),
        (),
    ),
    Case(
        "two-stage-source",
        "sources",
        "Ions start at rest at three places of a two-stage source: their times of "
        "flight to its focus.",
        (
            Check("from the middle", "us", computed(1e6 * _flight(5e-3), FOCUS), "middle", 1e6),
            Check(
                "0.5 mm behind, earlier by",
                "ns",
                computed(1e9 * (_flight(5e-3) - _flight(5.5e-3)), FOCUS, 1e-10),
                lambda run: _earlier(run, "behind"),
                1e9,
            ),
            Check(
                "0.5 mm before, earlier by",
                "ns",
                computed(1e9 * (_flight(5e-3) - _flight(4.5e-3)), FOCUS, 1e-10),
                lambda run: _earlier(run, "before"),
                1e9,
            ),
        ),
        tuple(halved(step) for step in ("0.03 ns", "0.04 ns", "0.05 ns", "0.07 ns")),
        remark="The step that passes a grid errs in energy by up to half its way times the jump of "
        "the field, now more and now less: the largest change of four steps is the error.",
    ),
    Case(
        "space-charge-limit",
        "sources",
        "A cathode that could give three times as much, between plates: what its own "
        "charge lets pass.",
        (
            Check(
                "of Child's current",
                "1",
                Published(1.25, 0.04, CHILD, FROM_MEMORY),
                _limited,
            ),
        ),
        (halved("26.6 ps"),),
        remark="200 charges stand for those in the gap; each is held back by its own image within "
        "0.1 mm of the cathode, which finer steps would show: the softening blunts "
        "it. The cathode is a disc as wide as the gap: more than Child's current by "
        "about d/(4 R), a "
        "quarter, of which terms of higher order (3 %) are in the published error.",
    ),
)


def _earlier(run: Run, name: str) -> Reading:
    times = {answer.name: answer.value for answer in run.answers}
    return Reading(times["middle"] - times[name])
