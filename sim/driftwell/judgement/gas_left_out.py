"""Whether ions fly so long that the gas of an ordinary vacuum would meet them.

The rate is the larger of capture by the induced dipole and of hard spheres, of nitrogen at 300 K,

    nu = n max( q/(2 eps0) (alpha/mu)^(1/2), sigma v ),   sigma = pi d^2, d = 364 pm          (1)

and a collision changes a velocity by at most the part 2 M/(m + M). Kinetic diameter 364 pm and
polarisability volume 1.74 angstrom^3 of nitrogen: from memory. The pressure and the limit are
common practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from driftwell.answers.evidence import CloudFacts
from driftwell.constants import ATOMIC_MASS, BOLTZMANN, COULOMB_CONSTANT, ELECTRON_MASS
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject

PRESSURE = 1e-6
"""Pa, of a good vacuum without baking."""
LIMIT = 0.1
"""Collisions in the run, weighed by what each changes."""
_NITROGEN, _POLARISABILITY = 28.0 * ATOMIC_MASS, 1.74e-30
_SECTION = math.pi * 364e-12**2


def gas_left_out(subject: Subject) -> Iterator[Finding]:
    """The cloud that would meet most, in a scenario without any process."""
    scenario = subject.scenario
    if scenario is None or scenario.process:
        return
    worst, name = 0.0, ""
    for cloud in subject.run.header.clouds:
        met = _met(subject, cloud)
        if met > worst:
            worst, name = met, cloud.name
    if worst <= LIMIT:
        return
    yield Finding(
        "gas left out",
        f'in {spelled(subject.run.end_time, "s", 3)} an ion of "{name}" would meet about '
        f"{worst:.2g} molecules in a vacuum of {PRESSURE:g} Pa, and there is no gas in the "
        f"scenario; up to {LIMIT:g} may be left out",
        worst,
        LIMIT,
        f"Be sure of a pressure below {about(PRESSURE * LIMIT / worst, 'Pa')}, or add a "
        '[[process]] of kind = "gas-collisions" with your pressure.',
    )


def _met(subject: Subject, cloud: CloudFacts) -> float:
    """Collisions of a charge in the run, each weighed by what it changes."""
    if cloud.charge == 0.0 or cloud.mass < 100.0 * ELECTRON_MASS:
        return 0.0
    energy = subject.run.moments(cloud.name).kinetic_energy
    if not np.isfinite(energy).any():
        return 0.0
    speed = math.sqrt(2.0 * float(np.nanmean(energy)) / cloud.mass)
    reduced = cloud.mass * _NITROGEN / (cloud.mass + _NITROGEN)
    capture = (
        2.0 * math.pi * abs(cloud.charge) * math.sqrt(COULOMB_CONSTANT * _POLARISABILITY / reduced)
    )
    density = PRESSURE / (BOLTZMANN * 300.0)
    changes = min(1.0, 2.0 * _NITROGEN / (cloud.mass + _NITROGEN))
    return density * max(capture, _SECTION * speed) * subject.run.end_time * changes
