"""A trap in which everything happens that a loop may have to keep in mind."""

from __future__ import annotations

from typing import Any

import numpy as np

from driftwell.geometry.outline import circle, rectangle
from driftwell.geometry.solid import Extruded, Frame, Revolved
from driftwell.particles.state import Particles
from driftwell.stepping.happenings import Traced
from driftwell.stepping.loop import TimeLoop
from tests.cases import detector, field, wall
from tests.moving import ions, loop

RODS = field("rf-quadrupole", radius="2 mm", voltage={"amplitude": "60 V", "frequency": "1 MHz"})
PULSED = field(
    "uniform-electric",
    strength={
        "kind": "pulses",
        "low": "0 V/m",
        "high": "400 V/m",
        "start": "2.3 us",
        "width": "1 us",
    },
)
COIL = field("uniform-magnetic", strength={"amplitude": "20 mT", "frequency": "300 kHz"})


def load() -> Particles:
    """70 ions, of which some are lost within the time."""
    random = np.random.default_rng(2)
    return ions(random.normal(scale=2e-4, size=(70, 3)), random.normal(scale=100.0, size=(70, 3)))


ROD = Extruded(circle((0.0, 0.0), 0.3e-3), np.inf, Frame(np.array([0.9e-3, 0.5e-3, 0.0])))
SHEET = Extruded(rectangle((0.1e-3, -1e-3), (1e-3, 1e-3)), 0.0, Frame(np.array([0, 0, 0.8e-3])))
RING = Revolved(rectangle((0.8e-3, -0.1e-3), (0.85e-3, 0.1e-3)))


def busy_trap(particles: Particles, **options: Any) -> TimeLoop:
    """Ions in rods, a pulse and a coil, within walls that take and walls that turn back.

    And electrodes that take them: a rod, a thin sheet, a ring.
    """
    return loop(
        particles,
        8e-6,
        20e-9,
        fields=[RODS, PULSED, COIL],
        walls=[
            wall("cylinder", radius="0.9 mm"),
            wall("plane", at=["0", "0", "-1 mm"], effect="reflect"),
        ],
        detectors=[detector("plane", at=["0", "0", "0.4 mm"])],
        bodies=[[ROD], [SHEET, RING]],
        records=[2e-6, 4e-6, 6e-6],
        samples=np.arange(0.0, 8e-6, 0.1e-6),
        traced=[Traced(0, None, 0), Traced(0, 3, 2)],
        **options,
    )
