"""Forces and energies of charges at rest, and two charges that move by them."""

from __future__ import annotations

import math

from scipy.constants import e, epsilon_0

from validation.case import READ, Axis, Case, Check, Published, computed, halved
from validation.reading import angle_at_end, at_end, closest, ledger_at_start

K = 1.0 / (4.0 * math.pi * epsilon_0)
COULOMB = "Coulomb's law, F = q1 q2/(4 pi eps0 r^2)"
ION = 6.6359e-26

HEAD_ON = (
    "radial Kepler problem, repulsive: Goldstein, Poole & Safko, Classical Mechanics (2002) ch. 3"
)
RUTHERFORD = "E. Rutherford, Phil. Mag. 21 (1911) 669; Goldstein et al. (2002) eq. 3.101"
KEPLER = (
    "Kepler's equation: Goldstein et al. (2002) sec. 3.7 and 3.8; Landau & "
    "Lifshitz, Mechanics, sec. 15"
)
IMAGE = "method of images: J. D. Jackson, Classical Electrodynamics (3rd ed.) sec. 2.1"
CUBE = "integral of 1/r over pairs of points of a cube: OEIS A336274, 2 x 0.94115632219483"


def _ellipse(turned: float) -> tuple[float, float]:
    """Place on the ellipse of semi-axis 1 um, eccentricity 0.5, so many turns after its far end."""
    mean = math.pi + 2.0 * math.pi * turned
    angle = mean
    for _ in range(60):
        angle -= (angle - 0.5 * math.sin(angle) - mean) / (1.0 - 0.5 * math.cos(angle))
    return -(math.cos(angle) - 0.5), -math.sqrt(0.75) * math.sin(angle)


def _head_on() -> tuple[float, float]:
    """Least distance (m) and its time (s) of two ions that meet at 60 m/s each from 100 um."""
    mu = ION / 2.0
    strength = K * e**2
    energy = 0.5 * mu * 120.0**2 + strength / 1e-4
    least = strength / energy
    ratio = 1e-4 / least
    fast = math.sqrt(2.0 * energy / mu)
    time = least / fast * (math.sqrt(ratio * (ratio - 1.0)) + math.acosh(math.sqrt(ratio)))
    return least, time


def _pair_at(distance: float) -> Check:
    return Check(
        f"force at {distance * 1e3:g} mm",
        "aN",
        computed(1e18 * K * (100.0 * e) ** 2 / distance**2, COULOMB),
        f"at {distance * 1e3:g} mm",
        1e18,
    )


_least, _when = _head_on()
_x4, _y4 = _ellipse(0.25)
_nearest, _when_nearest = closest(0, 1)

CASES: tuple[Case, ...] = (
    Case(
        "two-carriages",
        "statics",
        "The force between two charges at four distances.",
        tuple(_pair_at(distance) for distance in (1e-3, 3e-3, 10e-3, 100e-3)),
        (halved("0.5 s"),),
        quick=True,
    ),
    Case(
        "salt-cube",
        "statics",
        "Energy of eight charges of alternating sign on the corners of a cube.",
        (
            Check(
                "energy",
                "k q^2/a",
                computed(-12.0 + 12.0 / math.sqrt(2.0) - 4.0 / math.sqrt(3.0), COULOMB),
                ledger_at_start("coulomb", 1e-3 / (K * e**2)),
            ),
        ),
        (halved("0.5 ns"),),
    ),
    Case(
        "salt-chain",
        "statics",
        "Energy of an endless chain of charges of alternating sign: the sum over all "
        "repeats of a cell.",
        (
            Check(
                "energy of a pair",
                "k q^2/d",
                computed(
                    -2.0 * math.log(2.0),
                    "Madelung's constant in one dimension, 2 ln 2: C. Kittel, "
                    "Introduction to Solid "
                    "State Physics, ch. 3 (from memory)",
                ),
                ledger_at_start("coulomb", 1e-3 / (K * e**2)),
            ),
        ),
        (Axis("cell", ("cell.start=-0.25 mm",)),),
    ),
    Case(
        "random-cube",
        "statics",
        "Energy of 4000 charges placed at random in a cube: the mean of 1/r over its "
        "pairs of points.",
        (
            Check(
                "mean of a/r",
                "1",
                Published(1.88231264438966, 1e-13, CUBE, READ),
                ledger_at_start("coulomb", 1e-3 / (K * e**2 * 4000 * 3999 / 2)),
            ),
        ),
        (Axis("precision", ("coulomb.precision=mixed",)),),
        seeds=5,
    ),
    Case(
        "head-on",
        "statics",
        "Two ions fly at each other: how near they come, and when.",
        (
            Check("least distance", "nm", computed(1e9 * _least, HEAD_ON), _nearest, 1e9),
            Check("time of it", "ns", computed(1e9 * _when, HEAD_ON), _when_nearest, 1e9),
        ),
        (halved("0.1 ns"),),
    ),
    Case(
        "deflection",
        "statics",
        "Two free ions pass each other at the impact parameter of 90 degrees, from 200 times that "
        "distance on and back to it.",
        (
            Check(
                "deflection until then",
                "deg",
                computed(89.99855313688084, RUTHERFORD + "; hyperbolic Kepler equation", 1e-12),
                angle_at_end(0, 1),
            ),
            Check(
                "place across at the end",
                "um",
                computed(
                    0.5 * 34.766174400248446, RUTHERFORD + "; hyperbolic Kepler equation", 1e-11
                ),
                at_end(1, 1, 1e6),
            ),
        ),
        (halved("0.1 ns"),),
    ),
    Case(
        "bound-pair",
        "statics",
        "A proton and a heavy ion of the opposite sign on an ellipse of eccentricity 0.5.",
        (
            Check(
                "x after a quarter of the period",
                "um",
                computed(_x4, KEPLER, 1e-10),
                "x apart at a quarter",
                1e6 * (1.0 + 1.6726e-27 / 5.8e-26),
            ),
            Check(
                "y after a quarter of the period",
                "um",
                computed(_y4, KEPLER, 1e-10),
                "y apart at a quarter",
                1e6 * (1.0 + 1.6726e-27 / 5.8e-26),
            ),
            Check(
                "x after four periods",
                "um",
                computed(1.5, KEPLER, 1e-10),
                "x apart at the end",
                1e6 * (1.0 + 1.6726e-27 / 5.8e-26),
            ),
        ),
        (halved("4 ps"),),
    ),
    Case(
        "released-pair",
        "statics",
        "Two ions let go 10 um apart: where they are, and how fast, when that has doubled.",
        (
            Check(
                "distance at 1.12084 us",
                "um",
                computed(20.0, "energy integral of the radial Kepler problem, as head-on"),
                "place of the right one",
                2e6,
            ),
            Check(
                "energy of one then",
                "ueV",
                computed(1e6 * K * e / 4e-5, "half of the pair's energy has become motion"),
                "energy of the right one",
                1e6,
            ),
        ),
        (halved("2 ns"),),
    ),
    Case(
        "fall-on-image",
        "statics",
        "An ion let go 1 um above a conducting plane falls on its own image: half way down.",
        (
            Check(
                "height at 30.82986 ns",
                "um",
                computed(0.5, IMAGE + "; radial Kepler integral"),
                "height",
                1e6,
            ),
            Check(
                "energy there",
                "ueV",
                computed(1e6 * K * e / 4e-6, IMAGE),
                "energy",
                1e6,
            ),
        ),
        (halved("0.1 ns"),),
    ),
)
