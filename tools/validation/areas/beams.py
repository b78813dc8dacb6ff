"""Beams under their own charge, by a stretch of an endless one."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
from scipy.integrate import solve_ivp
from scipy.special import dawsn

from driftwell.record.reader import Run
from validation.case import COMPUTED, Axis, Case, Check, Published, Reading, computed, halved
from validation.wells import well

PROTON = 1.6726e-27
SPEED = 2397368.3960946277
SPREAD = (
    "M. Reiser, Theory and Design of Charged Particle Beams (1994) sec. 4.3; J. R. Pierce (1949): "
    "z sqrt(2K)/R0 = 2 chi D(sqrt(ln chi)), D Dawson's function"
)
ENVELOPE = (
    "envelope equation: M. Reiser, Theory and Design of Charged Particle Beams (1994) eq. 4.191"
)
MATCHED = (
    "I. M. Kapchinskij, V. V. Vladimirskij (1959); M. Reiser (1994) sec. 4.3 and "
    "5.3; J. Struckmeier, "
    "M. Reiser, Part. Accel. 14 (1984) 227"
)
DISTRIBUTIONS = "M. Reiser (1994) sec. 5.3.4: a Gaussian in one plane"

K0, STRENGTH, EMITTANCE = math.radians(60.0), 2e-5, 2e-5
_square = (STRENGTH + math.sqrt(STRENGTH**2 + 4.0 * K0**2 * EMITTANCE**2)) / (2.0 * K0**2)
_depressed = EMITTANCE / _square / K0


def _ratio(run: Run) -> Reading:
    """rms size across at the end over that at the start."""
    covariance = run.moments("beam").covariance
    across = np.sqrt(covariance[:, 0, 0] + covariance[:, 1, 1])
    return Reading(float(across[-1] / across[0]))


def _kept(run: Run) -> Reading:
    """rms size across, m: the root of the mean square over all records."""
    square = run.moments("beam").covariance[:, (0, 1), (0, 1)].mean(axis=1)
    scatter = float(square.std()) / math.sqrt(square.size) / (2.0 * math.sqrt(square.mean()))
    return Reading(math.sqrt(float(square.mean())), scatter)


def _envelope(way: float) -> float:
    """Radius over the waist of 2 mm after so many m, K = 5e-4, eps = 10 mm mrad."""
    found = solve_ivp(
        lambda _, y: [y[1], 5e-4 / y[0] + 1e-10 / y[0] ** 3],
        (0.0, way),
        [2e-3, 0.0],
        method="DOP853",
        rtol=1e-12,
        atol=1e-15,
    )
    return float(found.y[0, -1]) / 2e-3


def _inside(run: Run) -> Reading:
    """Part of the charges within the ellipse of four rms emittances, in x and its slope."""
    start = run.snapshot(0.0)
    plane = np.stack([start.position[:, 0], start.velocity[:, 0]])
    plane -= plane.mean(axis=1, keepdims=True)
    form = np.einsum("in,ij,jn->n", plane, np.linalg.inv(np.cov(plane)), plane)
    part = float(np.mean(form < 4.0))
    return Reading(part, math.sqrt(part * (1.0 - part) / form.size))


def _channel(folder: Path) -> None:
    well(folder / "channel.csv", PROTON, K0 * SPEED / (2.0 * math.pi), 0.0, 12e-3, 0.12)


_fewer = Axis("weight", ("cloud.beam.count=500",))
_z_double = (
    5e-3
    * 2.0
    * 2.0
    * float(dawsn(math.sqrt(math.log(2.0))))
    / math.sqrt(2.0 * 0.0012496413151481351)
)

CASES: tuple[Case, ...] = (
    Case(
        "spreading-beam",
        "beams",
        "A cold round proton beam of 10 mA and 30 keV, after the way on which its "
        "own charge doubles it.",
        (Check("radius, of that at the start", "1", computed(2.0, SPREAD), _ratio),),
        (halved("2 ns"), _fewer),
        settings=(f"duration={_z_double / SPEED!r} s",),
        remark="1000 charges stand for 10 mm of the beam; what halving their number "
        "changes is the error.",
    ),
    Case(
        "beam-from-waist",
        "beams",
        "A proton beam with emittance and space charge opens from a waist of 2 mm, over 0.1 m.",
        (Check("radius, of that at the waist", "1", computed(_envelope(0.1), ENVELOPE), _ratio),),
        (halved("2 ns"), _fewer),
        settings=(f"duration={0.1 / SPEED!r} s",),
    ),
    Case(
        "matched-beam",
        "beams",
        "A matched proton beam in an even channel of 60 degrees a metre: its charges "
        "swing more slowly "
        "by their own repulsion.",
        (
            Check("frequency, of that of one alone", "1", computed(_depressed, MATCHED), "slowed"),
            Check("rms size across", "mm", computed(0.5e3 * math.sqrt(_square), MATCHED), _kept, 1e3),
        ),
        (
            halved("40 ns"),
            Axis("weight", ("cloud.beam.count=600",)),
            Axis("softening", ("coulomb.softening=0.4 mm",)),
        ),
        files=_channel,
    ),
    Case(
        "gaussian-beam",
        "beams",
        "A Gaussian beam: its rms emittance, and what lies within four times that.",
        (
            Check(
                "rms emittance",
                "mm mrad",
                Published(5.0, 1e-12, "what the scenario asks for", COMPUTED),
                "emittance",
                1e6,
            ),
            Check(
                "part within four rms emittances",
                "1",
                computed(1.0 - math.exp(-2.0), DISTRIBUTIONS),
                _inside,
            ),
        ),
        (),
        quick=True,
    ),
)
