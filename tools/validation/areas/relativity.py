"""Fast charges: exact orbits, and what the speed takes from their repulsion."""

from __future__ import annotations

import math

from scipy.constants import c, e, epsilon_0, m_e

from validation.case import COMPUTED, Case, Check, Published, computed, halved
from validation.reading import at_end

K = 1.0 / (4.0 * math.pi * epsilon_0)
GYRATION = "J. D. Jackson, Classical Electrodynamics (3rd ed.) sec. 12.2"
HYPERBOLIC = "L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 20"
CROSSED = "J.-L. Vay, Phys. Plasmas 15 (2008) 056701: E + v x B = 0 (from memory)"
BETATRON = "M. Reiser, Theory and Design of Charged Particle Beams (1994): betatron motion"
MOVING = (
    "a moving pair's clock is slow by gamma: Lorentz transformation of the radial Kepler problem"
)

_momentum = 1e7 * e * 1e-9 / (m_e * c)
_gamma = math.sqrt(1.0 + _momentum**2)

CASES: tuple[Case, ...] = (
    Case(
        "fast-gyration",
        "relativity",
        "An electron of gamma = 10 in 0.1 T, after 100 turns.",
        (
            Check(
                "from its start along x",
                "um",
                Published(0.0, 1e-6, GYRATION, COMPUTED),
                at_end(0, 0, 1e6),
            ),
            Check(
                "from its start along y",
                "um",
                Published(0.0, 1e-6, GYRATION, COMPUTED),
                at_end(0, 1, 1e6),
            ),
            Check(
                "distance across the circle",
                "mm",
                computed(2e3 * 10.0 * math.sqrt(0.99) * m_e * c / (0.1 * e), GYRATION, 1e-10),
                "across",
                -1e3,
            ),
        ),
        (halved("36 ps"),),
        quick=True,
    ),
    Case(
        "from-rest-to-light",
        "relativity",
        "An electron from rest in 10 MV/m, after 1 ns.",
        (
            Check(
                "way",
                "mm",
                computed(1e3 * m_e * c**2 / (1e7 * e) * (_gamma - 1.0), HYPERBOLIC),
                "way",
                1e3,
            ),
            Check(
                "kinetic energy",
                "MeV",
                computed(1e-6 * (_gamma - 1.0) * m_e * c**2 / e, HYPERBOLIC),
                "energy",
                1e-6,
            ),
        ),
        (halved("2 ps"),),
    ),
    Case(
        "crossed-fields",
        "relativity",
        "An electron of gamma = 100 where electric and magnetic push cancel: 1 m straight on.",
        (
            Check(
                "off the straight line",
                "nm",
                Published(0.0, 1e-3, CROSSED, COMPUTED),
                "aside",
                1e9,
            ),
        ),
        axes=(halved("7 ps"),),
    ),
    Case(
        "betatron-motion",
        "relativity",
        "Electrons of gamma = 50 in a transverse well of 2e10/s: their oscillation "
        "is slower by its root.",
        (
            Check(
                "frequency",
                "MHz",
                computed(2e4 / math.sqrt(50.0) / (2.0 * math.pi), BETATRON, 1e-6),
                "betatron",
                1e-6,
            ),
        ),
        remark="Of leading order in the amplitude: so much is in the published error.",
        converged=True,
    ),
    Case(
        "fast-pair",
        "relativity",
        "Two charges side by side at gamma = 5 push each other apart as slowly as "
        "their clock goes.",
        (
            Check(
                "distance when doubled at rest, times gamma",
                "um",
                computed(20.0, MOVING, 1e-9),
                "half the distance",
                2e6,
            ),
        ),
        converged=True,
    ),
)
