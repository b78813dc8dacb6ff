"""The automatic choice of the step: the fastest motion in the scenario decides, and is named.

Rates (rad/s) come from the fields (drive, secular, cyclotron, ...), from the cloud's density
(plasma frequency) and from the closest pairs. A step is the period of the fastest divided by
`steps_per_period`; a close pair turns once and is gone, so a fifth of that number serves it.

Second-order steps err by (omega h)^2 / 24 in a frequency omega: 1.6e-4 at 100 steps a period.
Rare hard encounters later in a run may be faster than anything known at its start; the ledger's
energy residual shows them.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import cKDTree

from driftwell.constants import COULOMB_CONSTANT, ELECTRIC_CONSTANT
from driftwell.forms import spelled
from driftwell.particles.state import Particles

FEW = 64
"""Up to this many charges every pair is followed to its closest approach."""
_PAIR_SHARE = 0.2
_SAMPLE = 5000
"""So many charges are asked for their nearest neighbour first."""
_MOST_PAIRS = 2_000_000


@dataclass(frozen=True, slots=True)
class Rate:
    """One motion a step must follow: its name, rad/s, and the share of `steps_per_period`."""

    name: str
    rate: float
    share: float = 1.0


@dataclass(frozen=True, slots=True)
class StepChoice:
    """The step, s, and in words what decided it."""

    step: float
    because: str


def chosen_step(
    rates: Iterable[Rate], steps_per_period: float, duration: float, shortest_mark: float
) -> StepChoice:
    """The longest step that follows all rates; where nothing moves fast, 100 steps a record.

    shortest_mark : s, the time between records or samples.
    """
    slow = StepChoice(
        min(shortest_mark, duration / 100.0), "the time between records: nothing moves faster"
    )
    best = slow
    for rate in rates:
        if rate.rate <= 0.0:
            continue
        steps = max(steps_per_period * rate.share, 1.0)
        step = 2.0 * math.pi / (rate.rate * steps)
        if step < best.step:
            period = 2.0 * math.pi / rate.rate
            best = StepChoice(
                step,
                f"the {rate.name} ({spelled(period, 's', 3)} a period, {steps:.4g} steps each)",
            )
    return best


def plasma_rates(particles: Particles) -> list[Rate]:
    """Plasma frequency of every cloud, from its density at the start.

    The density is that of the uniform ellipsoid with the cloud's second moments; clouds without
    volume have none.
    """
    rates = []
    # charges stand in the order of their clouds
    bounds = np.flatnonzero(np.diff(particles.cloud, prepend=-1, append=-1))
    for first, last in pairwise(bounds):
        member = slice(first, last)
        size = particles.position[:, member].std(axis=1)
        volume = 4.0 / 3.0 * math.pi * math.prod(math.sqrt(5.0) * size)
        if last - first < 2 or volume <= 0.0:
            continue
        charge = (particles.charge * particles.weight)[member]
        ratio = np.abs(particles.charge / particles.mass)[member].max()
        density = np.abs(charge).sum() / volume  # C/m^3
        rates.append(Rate("plasma oscillation", math.sqrt(density * ratio / ELECTRIC_CONSTANT)))
    return rates


def closest_pair_rates(particles: Particles, softening: float) -> list[Rate]:
    """The fastest pair's own rate: now for many charges, at its closest approach for few."""
    n = len(particles)
    if n < 2:
        return []
    x = particles.position.T
    if n <= FEW:
        first, second = np.triu_indices(n, 1)
        ahead = _closest_approach(particles, first, second)
    else:
        first, second = _near_pairs(particles, softening)
        ahead = np.sqrt(((x[first] - x[second]) ** 2).sum(axis=1))
    rate2 = _rate2(_strength(particles, first, second), ahead, softening)
    return [Rate("closest approach of two charges", math.sqrt(float(rate2.max())), _PAIR_SHARE)]


def _rate2(
    strength: NDArray[np.float64], distance: NDArray[np.float64], softening: float
) -> NDArray[np.float64]:
    """Squared rates of pairs, 1/s^2; 0 for two at one place without softening."""
    softened = (distance**2 + softening**2) ** 1.5
    return np.divide(strength, softened, out=np.zeros_like(strength), where=softened > 0.0)


def _near_pairs(
    particles: Particles, softening: float
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Pairs among which the fastest is.

    Some charges' nearest neighbours give a rate; a pair that is to be faster must be nearer than
    the strongest pair of that rate. Where that leaves too many, as among charges of very different
    strength, every charge with its nearest neighbour.
    """
    x = particles.position.T
    n = len(particles)
    tree = cKDTree(x, balanced_tree=False)
    sample = np.linspace(0, n - 1, min(n, _SAMPLE)).astype(np.int64)
    distance, neighbour = map(np.asarray, tree.query(x[sample], k=2))
    other = np.where(neighbour[:, 0] == sample, neighbour[:, 1], neighbour[:, 0])
    rate2 = float(_rate2(_strength(particles, sample, other), distance[:, 1], softening).max())
    if n > _SAMPLE and rate2 > 0.0:
        pushed = np.abs(particles.charge * particles.weight).max()
        strongest = (
            2.0 * COULOMB_CONSTANT * pushed * np.abs(particles.charge / particles.mass).max()
        )
        reach = math.sqrt((strongest / rate2) ** (2.0 / 3.0) - softening**2) * (1.0 + 1e-9)
        around = tree.query_ball_point(x[sample[::10]], reach, return_length=True)
        if float(np.mean(around)) - 1.0 < _MOST_PAIRS / n:
            pairs = tree.query_pairs(reach, output_type="ndarray")
            return pairs[:, 0], pairs[:, 1]
    elif n <= _SAMPLE:
        return sample, other
    neighbour = np.asarray(tree.query(x, k=2)[1])
    own = np.arange(n)
    return own, np.where(neighbour[:, 0] == own, neighbour[:, 1], neighbour[:, 0])


def _strength(
    particles: Particles, first: NDArray[np.int64], second: NDArray[np.int64]
) -> NDArray[np.float64]:
    """|Q_i q_j| / (4 pi eps0 mu) of pairs, m^3/s^2; weights act on the charge that pushes."""
    pushed = np.abs(particles.charge * particles.weight)
    ratio = np.abs(particles.charge / particles.mass)
    return COULOMB_CONSTANT * (pushed[first] * ratio[second] + pushed[second] * ratio[first])


def _closest_approach(
    particles: Particles, first: NDArray[np.int64], second: NDArray[np.int64]
) -> NDArray[np.float64]:
    """Distance of closest approach of each pair alone, m (L. D. Landau and E. M. Lifshitz,
    Mechanics, sec. 15: r_min = b90 + sqrt(b90^2 + b^2) for repulsion, minus b90 for attraction)."""
    r = particles.position[:, first] - particles.position[:, second]
    v = particles.velocity[:, first] - particles.velocity[:, second]
    now = np.sqrt((r**2).sum(axis=0))
    sign = np.sign(particles.charge[first] * particles.charge[second])
    strength = sign * _strength(particles, first, second)
    with np.errstate(divide="ignore", invalid="ignore"):
        energy = 0.5 * (v**2).sum(axis=0) + strength / now  # per reduced mass
        spin2 = (np.cross(r.T, v.T) ** 2).sum(axis=1)
        # energy r^2 - strength r - spin2 / 2 = 0 at the turning points
        root = np.sqrt(np.maximum(strength**2 + 2.0 * energy * spin2, 0.0))
        turning = np.where(
            energy != 0.0, (strength + root) / (2.0 * energy), spin2 / (2.0 * np.abs(strength))
        )
    approaching = ((r * v).sum(axis=0) < 0.0) | (strength < 0.0)
    usable = approaching & np.isfinite(turning) & (turning > 0.0)
    return np.where(usable, np.minimum(turning, now), now)
