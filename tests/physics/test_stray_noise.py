"""How fast a noisy field heats an ion in a harmonic trap."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.forms.noise import with_noise_drawn
from tests.cases import field
from tests.moving import accounts, ions, loop

DENSITY = 1e-6  # V^2/m^2/Hz
DURATION = 0.2e-3  # s
COUNT = 200


def test_a_noisy_field_heats_ions_by_its_density_at_their_frequency() -> None:
    """d<E>/dt = q^2 S(f) / (4 m), with S one-sided, per hertz, of the field.

    Q. A. Turchette et al., Phys. Rev. A 61 (2000) 063418; M. Brownnutt et al., Rev. Mod. Phys. 87
    (2015) 1419 (both from memory). The mean is over 200 ions whose frequencies, from 0.5 to
    1.5 MHz, lie farther apart than 1/duration, so that each sees noise of its own, and over three
    seeds. The energy of each is exponentially distributed: 600 of them leave 4 %. The drive's work
    closes the account.
    """
    frequency = np.linspace(0.5e6, 1.5e6, COUNT)
    trap = field("static-quadrupole", axial_frequency={"species": "barium", "value": "1 MHz"})
    mass = 137.905 * (1e6 / frequency) ** 2
    shares = []
    for seed in (1, 2, 3):
        noise = field(
            "uniform-electric",
            along=[0, 0, 1],
            strength={
                "kind": "noise",
                "density": f"{DENSITY} V^2/m^2/Hz",
                "lowest": "0.4 MHz",
                "highest": "1.6 MHz",
                "lines": 1200,
            },
        )
        stray = with_noise_drawn(noise, seed, "stray")
        moving = loop(
            ions(np.zeros((COUNT, 3)), mass=mass), DURATION, 1e-6 / 40.0, fields=[trap, stray]
        )
        last = accounts(moving)[-1]
        assert abs(last.energy_residual) < 1e-2
        assert last.momentum_residual < 1e-12
        rate = 2.0 * math.pi * frequency
        swing = moving.charges.velocity[2] ** 2 + (rate * moving.charges.position[2]) ** 2
        energy = 0.5 * moving.charges.mass * swing
        kilograms = mass * ATOMIC_MASS
        assert kilograms == pytest.approx(moving.charges.mass, rel=1e-12, abs=0.0)
        shares.append(energy / (ELEMENTARY_CHARGE**2 * DENSITY / (4.0 * kilograms) * DURATION))
    found = np.concatenate(shares)
    assert 1.0 == pytest.approx(float(found.mean()), abs=0.13)
    assert 1.0 == pytest.approx(float(found.std()), abs=0.2)
