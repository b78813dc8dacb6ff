"""Fast bunches summed in their own rest frames, against the fields of charges in uniform motion.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), eq. 11.154: field of a charge in uniform
motion; B = v x E / c^2 (from memory). M. Reiser, Theory and Design of Charged Particle Beams
(1994), sec. 4.3: spread of a uniform beam, generalised perveance K = 2 I / (I_A beta^3 gamma^3)
(from memory).
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.special import dawsn

from driftwell.constants import (
    ATOMIC_MASS,
    COULOMB_CONSTANT,
    ELECTRON_MASS,
    ELEMENTARY_CHARGE,
    SPEED_OF_LIGHT,
)
from driftwell.coulomb.bunch_frames import BunchFrames, moving
from driftwell.coulomb.form import Coulomb
from driftwell.ledger.ledger import LedgerRow
from driftwell.particles.proper_velocity import carried
from driftwell.particles.state import Particles
from driftwell.stepping.loop import TimeLoop
from tests.cases import field
from tests.moving import DIRECT, TREE, accounts, ions, loop, to_end
from tests.pair_sums import rms_error

Floats = NDArray[np.float64]

C = SPEED_OF_LIGHT
ELECTRON = ELECTRON_MASS / ATOMIC_MASS
ONE = BunchFrames(("bunch",), (0,))
TWO = BunchFrames(("head", "tail"), (0, 1))


def forces(particles: Particles, frames: BunchFrames, coulomb: Coulomb = DIRECT) -> Floats:
    """The charges' forces on each other (3, n), N, as a run begins with them."""
    begun = loop(particles, 1e-12, 1e-12, coulomb=coulomb, frames=frames)
    return np.asarray(begun.charges.charge * begun.work.coulomb)


def of_uniform_motion(particles: Particles) -> Floats:
    """The same by the field of every charge as one in uniform motion, eq. 11.154."""
    x, u = particles.position, particles.velocity
    q = particles.charge * particles.weight
    v = u / np.sqrt(1.0 + (u**2).sum(axis=0) / C**2)
    total = np.zeros_like(x)
    for i in range(q.size):
        for j in range(q.size):
            if i == j:
                continue
            r, beta = x[:, i] - x[:, j], v[:, j] / C
            length, beta2 = math.sqrt(r @ r), beta @ beta
            sine2 = 1.0 - (r @ beta) ** 2 / (length**2 * beta2)
            e = COULOMB_CONSTANT * q[j] * r * (1.0 - beta2)
            e /= length**3 * (1.0 - beta2 * sine2) ** 1.5
            total[:, i] += q[i] * (e + np.cross(v[:, i], np.cross(v[:, j], e)) / C**2)
    return total


def scattered(count: int, proper: Floats, spread: float = 0.0) -> Particles:
    """Electrons, 1000 each, at random in a cube of 1 mm far from the origin."""
    random = np.random.default_rng(count)
    place = random.uniform(-0.5e-3, 0.5e-3, (count, 3)) + np.array([0.02, -0.01, 0.1])
    velocity = proper + spread * random.normal(size=(count, 3))
    return ions(place, velocity, charge=-1.0, mass=ELECTRON, weight=1000.0)


def test_charges_that_move_together_push_each_other_as_moving_charges_do() -> None:
    """40 electrons of gamma 4.2 in an odd direction, each force against the sum of exact ones.

    Places are known to 1e-17 m, and their differences, down to 0.1 mm, to 1e-13.
    """
    bunch = scattered(40, C * np.array([1.5, -2.0, 3.2]))
    expected = of_uniform_motion(bunch)
    found = forces(bunch, ONE)
    assert 0.0 == pytest.approx(np.abs(found - expected).max() / np.abs(expected).max(), abs=3e-12)
    assert 0.0 == pytest.approx(np.abs(found.sum(axis=1)).max() / np.abs(found).sum(), abs=1e-15)


def test_two_bunches_push_each_other_with_the_fields_of_moving_charges() -> None:
    """One electron each, on their own ways: the field carries momentum, so forces do not cancel."""
    pair = scattered(2, np.zeros(3), C)
    pair.cloud[1] = 1
    expected = of_uniform_motion(pair)
    found = forces(pair, TWO)
    assert 0.0 == pytest.approx(np.abs(found - expected).max() / np.abs(expected).max(), abs=1e-14)
    assert np.abs(found.sum(axis=1)).max() > 0.1 * np.abs(found).max()


@pytest.mark.parametrize("spread", [1e-3, 3e-2])
def test_what_moves_within_a_frame_is_missed_in_first_order(spread: float) -> None:
    """Gamma 1.5: as large as the estimate beta w + w^2 says, of forces on 40 electrons.

    Against the sum of fields in uniform motion, each charge with its own velocity. 40 charges and
    one draw of their velocities leave a third.
    """
    random, gamma = np.random.default_rng(1), 1.5
    inner = spread * C / math.sqrt(3.0) * random.normal(size=(3, 40))
    by = np.zeros((3, 40))
    by[2] = C * math.sqrt(gamma**2 - 1.0)
    velocity = carried(inner, by)
    place = random.normal(size=(40, 3)) * [1e-3, 1e-3, 1e-3 / gamma]
    bunch = ions(place, velocity.T, charge=-1.0, mass=ELECTRON)
    estimate = moving(velocity, np.ones(40)).missed
    error = rms_error(of_uniform_motion(bunch), forces(bunch, ONE))
    assert estimate == pytest.approx(error, rel=0.35, abs=0.0)
    assert rms_error(of_uniform_motion(bunch), forces(bunch, BunchFrames(("bunch",)))) > 0.3


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_a_ball_in_its_frame_pushes_across_by_one_over_gamma_less(method: str) -> None:
    """2000 charges, a ball in their frame, gamma 3: (E'_par, E'_perp / gamma) of the ball at rest.

    The direct sum to rounding; the tree, which sorts the stretched places alike, to its accuracy.
    """
    random, gamma = np.random.default_rng(3), 3.0
    rest = random.normal(size=(2000, 3))
    rest *= (
        1e-3
        * random.uniform(size=(2000, 1)) ** (1 / 3)
        / np.linalg.norm(rest, axis=1, keepdims=True)
    )
    flat = rest * [1.0, 1.0, 1.0 / gamma]
    speed = [0.0, 0.0, C * math.sqrt(gamma**2 - 1.0)]
    expected = forces(ions(rest), BunchFrames(("bunch",))) / [[gamma], [gamma], [1.0]]
    found = forces(ions(flat, speed), ONE, DIRECT if method == "direct" else TREE)
    error = math.sqrt(((found - expected) ** 2).sum() / (expected**2).sum())
    assert 0.0 == pytest.approx(error, abs=1e-13 if method == "direct" else 1e-2)
    # and of a uniform ball: k Q r / R^3, times the share within r; 1 % of shot noise
    charge = 2000 * ELEMENTARY_CHARGE
    inward = (found[0] * rest[:, 0] + found[1] * rest[:, 1]).mean() * gamma
    across = (rest[:, 0] ** 2 + rest[:, 1] ** 2).mean()
    even = COULOMB_CONSTANT * charge * ELEMENTARY_CHARGE / 1e-9
    assert even * across == pytest.approx(inward, rel=0.02, abs=0.0)


def test_the_push_across_a_long_beam_is_weaker_by_gamma_squared() -> None:
    """A tube of charges of 1 mm radius, 300 mm long, on a charge 3 mm off its axis: gamma 2.

    Against the same places at rest, where the ends weaken it by (3/150)^2 / 2.
    """
    angle = np.arange(8) * math.pi / 4.0
    along = np.linspace(-150e-3, 150e-3, 601)
    tube = [[1e-3 * math.cos(a), 1e-3 * math.sin(a), z] for z in along for a in angle]
    place = [[3e-3, 0.0, 0.0], *tube]
    gamma = 2.0
    speed = [0.0, 0.0, C * math.sqrt(gamma**2 - 1.0)]
    slow = forces(ions(place), BunchFrames(("bunch",)))[0, 0]
    fast = forces(ions(place, speed), ONE)[0, 0]
    line = 8 * ELEMENTARY_CHARGE / 0.5e-3  # C/m
    endless = 2.0 * COULOMB_CONSTANT * line * ELEMENTARY_CHARGE / 3e-3
    assert endless == pytest.approx(slow, rel=4e-4, abs=0.0)
    assert endless / gamma**2 == pytest.approx(fast, rel=4e-4, abs=0.0)


def exploded(gamma: float, duration: float) -> TimeLoop:
    """The ball of reference case B1, of 300 macro-charges, as its own frame has it."""
    random = np.random.default_rng(8)
    rest = random.normal(size=(300, 3))
    rest *= (
        1e-3
        * random.uniform(size=(300, 1)) ** (1 / 3)
        / np.linalg.norm(rest, axis=1, keepdims=True)
    )
    ball = ions(
        rest * [1.0, 1.0, 1.0 / gamma],
        [0.0, 0.0, C * math.sqrt(gamma**2 - 1.0)],
        mass=1.6605e-25 / ATOMIC_MASS,
        weight=1e6 / 300,
    )
    frames = ONE if gamma > 1.0 else BunchFrames(("bunch",))
    time = gamma * duration
    return to_end(loop(ball, time, time / 100, coulomb=DIRECT, frames=frames, extent="1000 km"))


def test_a_flying_ball_explodes_later_by_gamma() -> None:
    """Case B1 until it has doubled, 1.3771 us, at rest and with gamma 5 in 5 times that time.

    The ions reach 4e-6 c: what is left out is of that order, and of either sign. The shot noise,
    1/sqrt(300), is the same in both.
    """
    rest, fast = exploded(1.0, 1.3771052387309169e-06), exploded(5.0, 1.3771052387309169e-06)
    for axis in (0, 1):
        expected, found = rest.particles.position[axis], fast.particles.position[axis]
        assert expected.std() == pytest.approx(found.std(), rel=1e-7, abs=0.0)
        assert 0.0 == pytest.approx(np.abs(found - expected).max() / expected.std(), abs=2e-5)
    length = fast.particles.position[2].std() * 5.0
    assert rest.particles.position[2].std() == pytest.approx(length, rel=1e-5, abs=0.0)
    assert 2.0 == pytest.approx(fast.particles.position[0].std() / 1e-3 * math.sqrt(5), rel=0.1)


def test_a_fast_beam_spreads_by_its_generalised_perveance() -> None:
    """Electrons of gamma 2.5: the radius has doubled after R0 G(2) / sqrt(2 K).

    3000 charges over 20 radii, 50 in their frame, of which the middle fifth is looked at: ends and
    shot noise leave 1.5 %. With K of beta^3 gamma alone it would have doubled in 40 % of the way.
    """
    random, gamma, radius, count = np.random.default_rng(5), 2.5, 1e-3, 3000
    beta = math.sqrt(1.0 - gamma**-2)
    length, current = 20.0 * radius, 30.0
    weight = current * length / (beta * C) / ELEMENTARY_CHARGE / count
    z = (np.arange(count) + 0.5) / count * length - 0.5 * length
    angle = random.permutation(count) * math.pi * (3.0 - math.sqrt(5.0))
    rho = radius * np.sqrt((random.permutation(count) + 0.5) / count)
    place = np.stack([rho * np.cos(angle), rho * np.sin(angle), z], axis=1)
    beam = ions(place, [0.0, 0.0, beta * gamma * C], charge=-1.0, mass=ELECTRON, weight=weight)
    alfven = ELECTRON_MASS * C**3 / (COULOMB_CONSTANT * ELEMENTARY_CHARGE)
    perveance = 2.0 * current / (alfven * beta**3 * gamma**3)
    way = radius * 2.0 * 2.0 * dawsn(math.sqrt(math.log(2.0))) / math.sqrt(2.0 * perveance)
    time = way / (beta * C)
    soft = Coulomb(method="direct", softening="0.1 mm")
    middle = np.abs(z) < 0.1 * length
    before = math.hypot(*place.T[:2, middle].std(axis=1))
    moved = to_end(loop(beam, time, time / 60, coulomb=soft, frames=ONE))
    after = math.hypot(*moved.particles.position[:2, middle].std(axis=1))
    assert 2.0 == pytest.approx(after / before, rel=0.015, abs=0.0)


def accelerated(steps: int, softening: str = "0 mm", **keys: str) -> list[LedgerRow]:
    """Accounts of 20 electrons from gamma 1.2 to about 3, in a field oblique to their way."""
    proper = math.sqrt(1.2**2 - 1.0) * C
    bunch = scattered(20, np.array([0.0, 0.0, proper]), 2e-3 * C)
    bunch.weight *= 2e4
    pushed = field("uniform-electric", strength="-2 MV/m", along=[0.5, 0.2, 1.0])
    time = 2.4e-9
    form = Coulomb(method="direct", softening=softening)
    begun = loop(bunch, time, time / steps, fields=[pushed], coulomb=form, frames=ONE, **keys)
    return accounts(begun)


@pytest.mark.parametrize("softening", ["0 mm", "0.3 mm"])
def test_the_ledger_closes_while_a_bunch_is_accelerated_and_turned(softening: str) -> None:
    """Energy to the second order of the steps; momentum and angular momentum to rounding.

    The change of the energy W by that of the frame is larger than what is left open, and the torque
    of stretched forces is there: without these accounts nothing would close.
    """
    rows = [accelerated(steps, softening)[-1] for steps in (100, 200, 400)]
    gaps = np.abs([row.energy_residual for row in rows])
    assert [4.0, 4.0] == pytest.approx(gaps[:-1] / gaps[1:], rel=0.1, abs=0.0)
    last = rows[-1]
    energy = last.kinetic + abs(last.field) + last.coulomb
    assert abs(last.work_frames) > 10.0 * gaps[-1] * energy
    assert abs(last.work_frames) > 0.1 * last.coulomb
    twist = float(np.linalg.norm(last.torque_frames) / np.linalg.norm(last.angular_momentum))
    assert twist > 1e-9
    for row in rows:
        assert 0.0 == pytest.approx(row.momentum_residual, abs=1e-13)
        assert 0.0 == pytest.approx(row.angular_residual, abs=1e-13)
        assert 0.0 == pytest.approx(row.third_law_residual, abs=1e-13)
        assert 0.0 == pytest.approx(row.torque_residual, abs=1e-11)
        assert 0.0 == row.angular_allowance


def test_composed_schemes_keep_their_order_with_frames() -> None:
    """composed-4: the energy's gap falls by sixteen, far below the work of changing frames."""
    rows = [accelerated(n, "0.3 mm", scheme="composed-4")[-1] for n in (100, 200)]
    gaps = [abs(row.energy_residual) for row in rows]
    assert 16.0 == pytest.approx(gaps[0] / gaps[1], rel=0.1, abs=0.0)
    assert abs(rows[1].work_frames) > 1e4 * gaps[1] * rows[1].kinetic
