"""Solved fields of electrodes, and what charges induce in conductors."""

from __future__ import annotations

import math

import numpy as np
from scipy.constants import e, epsilon_0
from scipy.integrate import quad
from scipy.special import digamma, iv, j1, jn_zeros, kv

from validation.case import FROM_MEMORY, READ, Axis, Case, Check, Published, computed
from validation.reading import ledger_at_start

K = 1.0 / (4.0 * math.pi * epsilon_0)
SPHERE = "Coulomb's law outside of a charged ball"
TUBES = (
    "S. Bertram, Proc. IRE 28 (1940) 418; F. Gray, Bell Syst. Tech. J. 18 (1939) 1: sum over the "
    "zeros of J0"
)
CUBE = (
    "capacitance of a cube, 0.66067815 a: C.-O. Hwang, M. Mascagni, J. Appl. Phys. 95 (2004) 3798; "
    "F. H. Read, J. Comput. Phys. 133 (1997) 1"
)
COAXIAL = "coaxial cylinders: J. D. Jackson, Classical Electrodynamics (3rd ed.) problem 1.6"
IMAGES = "J. D. Jackson, Classical Electrodynamics (3rd ed.) ch. 2 and problem 3.23"
SALT = "the images are a lattice of NaCl, Madelung's constant 1.7475645946: OEIS A085469"


def _between_tubes(u: float) -> float:
    """Axial potential between two tubes of radius 1 at -1 and 1, u from the narrow gap."""
    zeros = jn_zeros(0, 400)
    return 1.0 - 2.0 * float(np.sum(np.exp(-zeros * u) / (zeros * j1(zeros))))


def _from_middle(u: float) -> float:
    """The same on either side of the gap: below 0 before it."""
    return math.copysign(_between_tubes(abs(u)), u)


def _in_tube(ratio: float) -> float:
    """Potential that a charge at so many radii from the axis of an earthed tube induces, k q/a."""

    def part(m: int) -> float:
        value, _ = quad(lambda x: kv(m, x) / iv(m, x) * iv(m, x * ratio) ** 2, 0.0, 60.0, limit=400)
        return float(value) * (1.0 if m == 0 else 2.0)

    return -2.0 / math.pi * sum(part(m) for m in range(28))


def _image_energy(what: str, source: str, per_unit: float, charge: float, size: float) -> Check:
    """Energy of a charge with its image, q phi/2, in k q^2/size."""
    return Check(
        what,
        "k q^2/a",
        computed(0.5 * per_unit, source, 1e-9),
        ledger_at_start("image", size / (K * charge**2)),
    )


CASES: tuple[Case, ...] = (
    Case(
        "charged-ball",
        "electrodes",
        "An ion is pushed off from a ball of 10 mm at 1 kV: its energy at three distances.",
        tuple(
            Check(
                f"energy at {z} mm",
                "eV",
                computed(1e4 * (1.0 / 12.0 - 1.0 / z), SPHERE),
                f"at {z} mm",
            )
            for z in (15, 20, 40)
        ),
        converged=True,
    ),
    Case(
        "two-tubes",
        "electrodes",
        "An ion on the axis of two tubes of 10 mm radius, 1 kV apart: its energy along the axis.",
        tuple(
            Check(
                f"energy at {z} mm",
                "eV",
                computed(
                    1000.0
                    + 500.0
                    * (_between_tubes(4.0) + math.copysign(_between_tubes(abs(z) / 10.0), z)),
                    TUBES,
                    1e-6,
                ),
                f"at {z} mm",
            )
            for z in (-5, 5, 10)
        ),
        remark="The formula is for a gap of no width. Here it is 0.02 mm, 2e-3 "
        "radii; the tubes are 100 mm "
        "long.",
        converged=True,
    ),
    Case(
        "charged-cube",
        "electrodes",
        "An ion is pushed off from a cube of 10 mm at 1 kV: far away only its capacitance counts.",
        (
            Check(
                "energy from 60 mm to 100 mm",
                "eV",
                Published(
                    1000.0 * 6.6067815 * (1.0 / 60.0 - 1.0 / 100.0), 0.003, CUBE, FROM_MEMORY
                ),
                "far away",
            ),
        ),
        remark="By symmetry the next term of the potential falls with the fifth "
        "power of the distance; "
        "3e-6 V for each volt is allowed for it.",
        converged=True,
    ),
    Case(
        "coaxial-cylinders",
        "electrodes",
        "An ion falls from one of two coaxial electrodes towards the other, drawn in a plane.",
        (
            Check(
                "energy at half way",
                "eV",
                computed(100.0 * math.log(15.0 / 11.0) / math.log(2.0), COAXIAL),
                "half way",
            ),
        ),
        converged=True,
    ),
    Case(
        "image-in-ball",
        "electrodes",
        "The energy of a charge with its image, half way from the middle of an earthed ball.",
        (_image_energy("energy", IMAGES, -1.0 / (1.0 - 0.25), e, 10e-3),),
        (Axis("step", ("stepping.step=0.5 ns",)),),
    ),
    Case(
        "image-in-gap",
        "electrodes",
        "The energy of a charge with all its images, a fifth of the way between two plates.",
        (
            _image_energy(
                "energy",
                IMAGES,
                0.5 * float(digamma(0.2) + digamma(0.8) + 2.0 * np.euler_gamma),
                e,
                10e-3,
            ),
        ),
        (Axis("step", ("stepping.step=0.5 ns",)),),
    ),
    Case(
        "image-in-tube",
        "electrodes",
        "The energy of a charge with its image, on the axis of an earthed tube and off it.",
        (_image_energy("energy at 0.6 radii", IMAGES, _in_tube(0.6), e, 10e-3),),
        (Axis("reach", ("images.reach=0.95",)),),
    ),
    Case(
        "image-in-box",
        "electrodes",
        "The energy of a charge in the middle of an earthed cube, cut into triangles.",
        (
            Check(
                "energy",
                "k q^2/a",
                Published(-0.5 * 1.7475645946, 5e-11, SALT, READ),
                ledger_at_start("image", 10e-3 / (K * e**2)),
            ),
        ),
        (Axis("panels", ("images.panels=1000",)),),
    ),
)
