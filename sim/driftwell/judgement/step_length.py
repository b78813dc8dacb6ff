"""Whether the step follows the fastest motion that was met.

A motion of angular rate omega has 2 pi/(omega h) steps in a period. With n of them a scheme of
second order errs in a frequency by (2 pi/n)^2/24: 0.4 % at n = 20. Between two Coulomb sums the
charges' own motion, the plasma oscillation and the turning of close pairs, has `coulomb_every`
steps less. A pair that turns within few steps gains or loses energy; few such pairs among many
charges do not show in what is asked, so a share of the charges is looked at.

References
----------
C. K. Birdsall, A. B. Langdon, Plasma Physics via Computer Simulation (1985), ch. 4 (the error in
frequency; from memory). The limits are common practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from scipy.spatial import cKDTree

from driftwell.constants import COULOMB_CONSTANT
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject
from driftwell.particles.state import Particles
from driftwell.stepping.schemes import ORDER
from driftwell.stepping.step_choice import plasma_rates

LEAST = {2: 20.0, 4: 12.0, 6: 10.0}
"""Steps in a period, by the order of the scheme."""
LEAST_OF_PAIR = 5.0
"""Steps in which a close pair turns about itself once."""
SHARE = 0.01
"""Of the charges, that may be in pairs faster than that."""
_LOOKED_AT = 20_000


def step_length(subject: Subject) -> Iterator[Finding]:
    """The fields' motion, the plasma oscillation and close pairs, at every look."""
    header = subject.run.header
    least = LEAST[ORDER.get(header.scheme, 2)]
    if header.motion_rate > 0.0:
        steps = 2.0 * math.pi / (header.motion_rate * subject.step)
        if steps < least:
            yield _too_long(subject, header.motion, steps, least, subject.step)
    if subject.summed:
        yield from _plasma(subject, least)
        yield from _pairs(subject)


def _too_long(subject: Subject, motion: str, steps: float, least: float, step: float) -> Finding:
    """A finding of the step against the period of a motion."""
    wanted = subject.step * steps / least
    error = (2.0 * math.pi / steps) ** 2 / 24.0
    so_much = f", so that its frequency errs by {error:.1%}" if steps > 4.0 else ""
    if ORDER.get(subject.run.header.scheme, 2) > 2:
        so_much = ""
    return Finding(
        "step against the fastest motion",
        f"a step of {spelled(step, 's', 3)} has {steps:.3g} in a period of the {motion}"
        f"{so_much}; {least:g} or more are needed",
        steps,
        least,
        f'Set stepping.step = "{about(wanted, "s")}" or less, or leave it to "auto".',
    )


def _plasma(subject: Subject, least: float) -> Iterator[Finding]:
    slowest, when = math.inf, 0.0
    for look in subject.looks:
        rate = max((each.rate for each in plasma_rates(subject.everyone(look))), default=0.0)
        steps = 2.0 * math.pi / (rate * subject.kick) if rate > 0.0 else math.inf
        if steps < slowest:
            slowest, when = steps, look.time
    if slowest < least:
        name = f"plasma oscillation at t = {spelled(when, 's', 3)}"
        yield _too_long(subject, name, slowest, least, subject.kick)


def _pairs(subject: Subject) -> Iterator[Finding]:
    worst, when, steps = 0.0, 0.0, math.inf
    for look in subject.looks:
        turns = steps_of_pairs(subject.everyone(look), subject.run.header.softening, subject.kick)
        share = float(np.mean(turns < LEAST_OF_PAIR)) if turns.size else 0.0
        if share > worst:
            worst, when, steps = share, look.time, float(turns.min())
    if worst <= SHARE:
        return
    wanted = subject.step * steps / LEAST_OF_PAIR
    yield Finding(
        "step against close pairs",
        f"at t = {spelled(when, 's', 3)} {worst:.1%} of the charges have a neighbour about which "
        f"they turn within fewer than {LEAST_OF_PAIR:g} steps, the fastest within {steps:.2g}; "
        f"{SHARE:.0%} may",
        worst,
        SHARE,
        f'Set stepping.step = "{about(wanted, "s")}", or, where charges stand for many, '
        "coulomb.softening to their mean distance.",
    )


def steps_of_pairs(particles: Particles, softening: float, step: float) -> np.ndarray:
    """Steps in which charges turn about their nearest neighbour, (k,): a sample of large clouds.

    Rate omega^2 = |Q q|/(4 pi eps0 mu (r^2 + e^2)^(3/2)), as the automatic step takes it.
    """
    n = len(particles)
    if n < 2:
        return np.zeros(0)
    which = np.linspace(0, n - 1, min(n, _LOOKED_AT)).astype(np.int64)
    places = particles.position.T
    distance, near = map(np.asarray, cKDTree(places, balanced_tree=False).query(places[which], k=2))
    own = near[:, 0] == which
    other = np.where(own, near[:, 1], near[:, 0])
    apart = np.where(own, distance[:, 1], distance[:, 0])
    pushed = np.abs(particles.charge * particles.weight)
    ratio = np.abs(particles.charge / particles.mass)
    strength = COULOMB_CONSTANT * (pushed[which] * ratio[other] + pushed[other] * ratio[which])
    softened = (apart**2 + softening**2) ** 1.5
    with np.errstate(divide="ignore"):
        rate = np.sqrt(np.where(strength > 0.0, strength / softened, 0.0))
        return np.asarray(2.0 * math.pi / (rate * step))
