"""Whether charges that stand for many collide, or heat each other, as the real ones do not.

Simulated charges of weight w push each other as w times as few and w times as strong. Their
coupling and their rate of collisions are

    Gamma_s = w q^2/(4 pi eps0 (a^2 + e^2)^(1/2) kT)                                          (1)
    nu_s = w (4 pi^(1/2)/3) n q^4 L/((4 pi eps0)^2 m^(1/2) (kT)^(3/2)),
    L = ln(1 + (lambda/b)^2)/2,   b = max(w q^2/(4 pi eps0 3 kT), e)                          (2)

a being their mean distance, n the density of real particles, e the softening and lambda the Debye
length, or the cloud's size where that is smaller. Where (1) is above 1, what heat there is comes
from the graininess of the load; where it is below, (2) says how often a charge is turned.

References
----------
S. Ichimaru, Rev. Mod. Phys. 54 (1982) 1017 (eq. 1). NRL Plasma Formulary (J. D. Huba, 2019),
collisions of like ions (eq. 2). From memory; w in both worked out here. The limits are common
practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from driftwell.answers.evidence import CloudFacts
from driftwell.constants import BOLTZMANN, COULOMB_CONSTANT
from driftwell.judgement.cloud_state import CloudState, cloud_state
from driftwell.judgement.finding import Finding, about, plain
from driftwell.judgement.subject import Subject

COUPLED = 1.0
"""Of eq. (1): from which on heat is that of the graininess."""
TURNED = 0.1
"""Collisions of a charge in the run that real ones do not have."""
HEATED = frozenset(
    {
        "temperature",
        "emittance",
        "brightness",
        "heating-rate",
        "debye-length",
        "coupling-parameter",
    }
)
"""Questions whose answers the heat decides."""


def heavy_charges(subject: Subject) -> Iterator[Finding]:
    """Every cloud of weight, as it was when its charges troubled each other least."""
    if not subject.summed or subject.scenario is None:
        return
    if not HEATED & {each.ask for each in subject.scenario.question}:
        return
    softening = subject.run.header.softening
    for cloud in subject.run.header.clouds:
        if cloud.weight <= 1.0 or cloud.charge == 0.0:
            continue
        states = [cloud_state(subject.named(look, cloud)) for look in subject.looks]
        known = [each for each in states if each is not None and each.density and each.heat]
        if not known:
            continue
        gamma = min(coupling(each, cloud, softening) for each in known)
        if gamma > COUPLED:
            yield _coupled(subject, cloud, gamma, known)
            continue
        rate = min(collisions(each, cloud, softening) / each.lorentz for each in known)
        turns = rate * subject.run.end_time
        if turns > TURNED > turns / cloud.weight:
            yield _turned(subject, cloud, turns, known)


def coupling(state: CloudState, cloud: CloudFacts, softening: float) -> float:
    """Eq. (1)."""
    apart = math.hypot(state.spacing, softening)
    return cloud.weight * COULOMB_CONSTANT * cloud.charge**2 / (apart * state.heat)


def collisions(state: CloudState, cloud: CloudFacts, softening: float) -> float:
    """Eq. (2), 1/s."""
    square = COULOMB_CONSTANT * cloud.charge**2
    real = state.density * cloud.weight
    debye = math.sqrt(state.heat / (4.0 * math.pi * square * real))
    close = max(cloud.weight * square / (3.0 * state.heat), softening)
    logarithm = 0.5 * math.log1p((min(debye, state.sizes[0]) / close) ** 2)
    single = 4.0 * math.sqrt(math.pi) / 3.0 * real * square**2 * logarithm
    return float(cloud.weight * single / (math.sqrt(cloud.mass) * state.heat**1.5))


def _coupled(subject: Subject, cloud: CloudFacts, gamma: float, known: list[CloudState]) -> Finding:
    state = known[-1]
    factor = (gamma / COUPLED) ** 1.5
    kelvin = state.heat / BOLTZMANN
    return Finding(
        "charges that stand for many",
        f'the charges of "{cloud.name}", each standing for {plain(cloud.weight)}, push each other '
        f"with {plain(gamma)} times the energy of their heat, {about(kelvin, 'K')}; at most "
        f"{COUPLED:g} is wanted: the heat in it, and what is asked of it, is that of "
        f"the simulated charges, {plain(cloud.weight ** (2.0 / 3.0))} times what real ones give "
        "each other",
        gamma,
        COUPLED,
        f"Set {subject.finer(cloud, factor)}, or coulomb.softening = "
        f'"{about(state.spacing, "m")}", their mean distance, and look whether the answers '
        "stay.",
    )


def _turned(subject: Subject, cloud: CloudFacts, turns: float, known: list[CloudState]) -> Finding:
    state = known[-1]
    return Finding(
        "charges that stand for many",
        f'the charges of "{cloud.name}", each standing for {plain(cloud.weight)}, turn each other '
        f"{plain(turns)} times in the run by collisions, real ones {turns / cloud.weight:.1g} "
        f"times; {TURNED:g} is the most that leaves temperatures and emittances alone",
        turns,
        TURNED,
        f"Set {subject.finer(cloud, turns / TURNED)}, or coulomb.softening = "
        f'"{about(state.spacing, "m")}", their mean distance, and look whether the answers '
        "stay.",
    )
