"""What collisions with a gas cost: whole runs in a rod trap with and without it."""

from __future__ import annotations

import ctypes
import statistics
from typing import Any

from bench_cases.timing import driftwell_run
from bench_cases.trap import DRIVE, ION_MASS_U, trap

COLLISIONS = 10.0
"""Of each charge in 1000 steps."""
GAS = """
[[process]]
name = "helium"
kind = "gas-collisions"
mass = "4.0026 u"
pressure = "{pressure!r} Pa"
collision = {model}
"""
DIPOLE = '{ kind = "induced-dipole", polarisability = "0.205 angstrom^3" }'
SPHERES = '{ kind = "hard-sphere", cross_section = "1e-18 m^2" }'
SIZES = ((8, True, 4_000_000), (64, True, 200_000), (500, True, 3000), (2000, False, 80_000))
"""Ions, whether they feel each other, steps: enough for start and record not to count."""


def gas(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """Ions in a rod trap with 10 collisions each in 1000 steps, against the same without a gas.

    `ratio` is the time without over the time with gas, of 8 ions with their Coulomb sum that are
    met as induced dipoles; `cost` in the table is what gas adds to a step, 0.3 being 30 %.
    """
    rows, first = [], None
    for n, coulomb, steps in SIZES:
        for name, model in (("induced dipole", DIPOLE), ("hard spheres", SPHERES)):
            plain, with_gas = _texts(n, coulomb, steps, model)
            pairs = []
            for k in range(max(2, repeats) + 1):
                pair = (driftwell_run(with_gas)[0], driftwell_run(plain)[0])
                if k > 0:  # the first compiles
                    pairs.append(pair)
            ours, theirs = (min(each) for each in zip(*pairs, strict=True))
            ratios = [without / with_it for with_it, without in pairs]
            rows.append(
                {
                    "ions": n,
                    "Coulomb": "direct" if coulomb else "off",
                    "atoms": name,
                    "ns_a_charge_and_step": theirs / steps / n * 1e9,
                    "with_gas": ours / steps / n * 1e9,
                    "cost": ours / theirs - 1.0,
                }
            )
            if first is None:
                first = {
                    "ratio": statistics.median(ratios),
                    "ratio_least": min(ratios),
                    "ratio_most": max(ratios),
                    "seconds": ours,
                    "reference_seconds": theirs,
                }
    assert first is not None
    return {**first, "threads": 1, "reference": "the same run without gas", "rows": rows}


def _texts(n: int, coulomb: bool, steps: int, model: str) -> tuple[str, str]:
    """Scenarios without and with gas."""
    step = 1.0 / (DRIVE * 100.0)
    plain = trap(n, steps * step, step, records=4)
    if not coulomb:
        plain = plain.replace("[stepping]", '[coulomb]\nmethod = "off"\n\n[stepping]')
    pressure = COLLISIONS / 1000.0 / step / _rate_at_one_pascal(model)
    return plain, plain + GAS.format(pressure=pressure, model=model)


def _rate_at_one_pascal(model: str) -> float:
    """Collisions of an ion in a second at 1 Pa; hard spheres: of one as hot as the gas."""
    import math
    import tomllib

    from driftwell.constants import ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE
    from driftwell.forms.body import Body
    from driftwell.processes.gas_collisions import GasCollisions, InducedDipole

    body = Body("ion", ION_MASS_U * ATOMIC_MASS, ELEMENTARY_CHARGE)
    table = tomllib.loads(GAS.format(pressure=1.0, model=model))["process"][0]
    form = GasCollisions(**table)
    if isinstance(form.collision, InducedDipole):
        return form.density() * form.capture_rate(body, form.collision.polarisability)
    reduced = body.mass * form.mass / (body.mass + form.mass)
    mean = math.sqrt(8.0 * BOLTZMANN * form.temperature / (math.pi * reduced))
    return form.density() * form.collision.cross_section * mean
