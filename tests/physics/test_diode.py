"""Emission limited by space charge between two plates: Child's law, from below and from above.

C. D. Child, Phys. Rev. 32 (1911) 492; I. Langmuir, Phys. Rev. 2 (1913) 450: between endless plates
at the distance d and the voltage V flows at most J = (4 eps0/9) sqrt(2 q/m) V^1.5/d^2. From a disc
of radius R it is more by about d/(4 R): Y. Y. Lau, Phys. Rev. Lett. 87 (2001) 278301 (from memory).
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np

from driftwell.constants import ELECTRIC_CONSTANT, ELECTRON_MASS, ELEMENTARY_CHARGE
from driftwell.record.reader import Run
from tests.running import carried_out, quantity

GAP, VOLTS, RADIUS = 5e-3, 1e3, 5e-3
ORIGIN = ["0 m", "0 m", "0 m"]
RATIO = ELEMENTARY_CHARGE / ELECTRON_MASS
DENSITY = 4.0 * ELECTRIC_CONSTANT / 9.0 * math.sqrt(2.0 * RATIO) * VOLTS**1.5 / GAP**2
CHILD = DENSITY * math.pi * RADIUS**2
TRANSIT = 3.0 * GAP / math.sqrt(2.0 * RATIO * VOLTS)
COUNT = 200
"""Simulated charges that the whole gap would hold by Child's law, 4/3 eps0 V/d A."""


def diode(folder: Path, supply: float) -> Run:
    """The diode of the reference cases, which is supplied with so many times Child's current."""
    held = 4.0 / 3.0 * ELECTRIC_CONSTANT * VOLTS / GAP * math.pi * RADIUS**2
    plane: dict[str, Any] = {"kind": "plane", "at": ORIGIN}
    return carried_out(
        folder,
        2.2 * TRANSIT,
        source=[
            {
                "name": "cathode",
                "species": "electron",
                "emitter": {"kind": "disc", "radius": quantity(RADIUS, "m")},
                "current": quantity(supply * CHILD, "A"),
                "weight": held / ELEMENTARY_CHARGE / COUNT,
                "space_charge_limited": True,
            }
        ],
        field=[
            {
                "name": "voltage",
                "kind": "uniform-electric",
                "strength": quantity(-VOLTS / GAP, "V/m"),
            }
        ],
        images={"kind": "gap", "at": ORIGIN, "distance": quantity(GAP, "m")},
        wall=[
            plane | {"name": "cathode plane"},
            plane | {"name": "anode", "at": ["0 m", "0 m", quantity(GAP, "m")]},
        ],
        coulomb={"method": "direct", "softening": "0.1 mm"},
        stepping={"step": quantity(TRANSIT / 60.0, "s")},
    )


def current(run: Run) -> float:
    """What arrives at the anode once the flow is steady, as part of Child's current."""
    losses = run.losses()
    begin = 1.2 * TRANSIT
    late = (losses["wall"] == 1) & (losses["time"] > begin)
    return float(losses["weight"][late].sum()) * ELEMENTARY_CHARGE / (TRANSIT * CHILD)


def test_a_diode_passes_what_is_supplied_until_space_charge_limits_it(tmp_path: Path) -> None:
    """At a third of Child's current all is let go; at three times and six times the same flows.

    With 200 charges in the gap and a softening of a fiftieth of it, which by a model in one
    dimension brings 8 % too much, on top of the 25 % for the disc; 6 % for so few arrivals.
    """
    scarce, ample, abundant = (diode(tmp_path, supply) for supply in (0.3, 3.0, 6.0))
    due = 0.3 * CHILD * 2.2 * TRANSIT / ELEMENTARY_CHARGE
    weight = scarce.clouds["cathode"].weight
    assert scarce.clouds["cathode"].count == len(scarce.births())
    assert abs(weight * len(scarce.births()) - due) < 3.0 * math.sqrt(due * weight)
    low, high = current(ample), current(abundant)
    assert np.mean(ample.losses()["wall"] == 1) > 0.8
    assert 1.1 < low < 1.4
    assert abs(high - low) < 0.12 * low
    assert len(ample.births()) < 0.6 * ample.clouds["cathode"].count
