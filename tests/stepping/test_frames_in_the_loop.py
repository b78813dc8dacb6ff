"""Bunches in their own frames in the time loop: accounts, losses, pauses, resumes, threads."""

from __future__ import annotations

import math

import numba
import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, SPEED_OF_LIGHT
from driftwell.coulomb.bunch_frames import BunchFrames
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.frame_table import frame_table
from driftwell.errors import StepError
from driftwell.kernels.threads import on_threads
from driftwell.particles.state import Particles
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.motion import CURSOR_FRESH
from tests.cases import field, wall
from tests.moving import DIRECT, TREE, accounts, always, ions, loop, to_end
from tests.running import quantity

C = SPEED_OF_LIGHT
ONE = BunchFrames(("bunch",), (0,))
TWO = BunchFrames(("head", "tail"), (0, 1))
DURATION = 2e-10
SOFT = Coulomb(method="direct", softening="0.3 mm")


def electrons(count: int, gamma: float = 2.0) -> Particles:
    """Bunches of 500 electrons each in a cube of 1 mm, two clouds of them in turn halves."""
    random = np.random.default_rng(count)
    place = random.uniform(-0.5e-3, 0.5e-3, (count, 3))
    velocity = 3e-3 * C * random.normal(size=(count, 3))
    velocity[:, 2] += C * math.sqrt(gamma**2 - 1.0)
    cloud = (np.arange(count) >= count // 2).astype(np.int64)
    velocity[cloud == 1, 0] += 0.2 * C
    return ions(
        place,
        velocity,
        charge=-1.0,
        mass=ELECTRON_MASS / ATOMIC_MASS,
        weight=500.0,
        cloud=cloud,
    )


def flown(frames: BunchFrames, count: int = 30, steps: int = 100, **keys: object) -> TimeLoop:
    """A loop of electrons in an oblique field, at its start."""
    pushed = field("uniform-electric", strength="-5 MV/m", along=[0.5, 0.2, 1.0])
    settings = {"coulomb": SOFT, "fields": [pushed], **keys}
    clouds = electrons(count)
    if frames.count == 1:
        clouds.cloud[:] = 0
    return loop(clouds, DURATION, DURATION / steps, frames=frames, **settings)  # type: ignore[arg-type]


def bits(moving: TimeLoop) -> tuple[bytes, ...]:
    """All that a run is of."""
    work = moving.work
    return tuple(
        each.tobytes()
        for each in (
            moving.particles.position,
            moving.particles.velocity,
            work.total,
            work.carry,
            work.frames,
            work.coulomb,
        )
    )


def test_two_bunches_have_accounts_that_close() -> None:
    """Momentum and angular momentum to rounding, energy to the second order of the steps."""
    rows = [accounts(flown(TWO, steps=steps))[-1] for steps in (50, 100, 200)]
    gaps = np.abs([row.energy_residual for row in rows])
    assert [4.0, 4.0] == pytest.approx(gaps[:-1] / gaps[1:], rel=0.1, abs=0.0)
    for row in rows:
        assert 0.0 == pytest.approx(row.momentum_residual, abs=1e-14)
        assert 0.0 == pytest.approx(row.angular_residual, abs=1e-14)
        assert 0.0 == pytest.approx(row.third_law_residual, abs=1e-14)
    given = np.linalg.norm(rows[-1].impulse_frames)
    assert given > 1e-9 * np.linalg.norm(rows[-1].momentum)


def test_a_bunch_without_charges_is_as_if_at_rest() -> None:
    """Of three, the first and the last are empty: the forces of the one that is there alone."""
    alone, three = flown(ONE), flown(BunchFrames(("a", "b", "c"), (0, 1, 2)))
    three.charges.cloud[:] = 1
    three.work.cursor[CURSOR_FRESH] = 0
    three.work.frames[:] = frame_table(3)
    three.to_mark(1, iter([True, False]).__next__)
    alone.to_mark(1, iter([True, False]).__next__)
    assert 1 == alone.steps_done == three.steps_done
    assert np.abs(alone.work.coulomb).max() > 0.0
    assert alone.work.coulomb.tobytes() == three.work.coulomb.tobytes()


@pytest.mark.parametrize(
    "keys", [{"coulomb_every": 5}, {"scheme": "composed-4"}, {"scheme": "midpoint-rotation"}]
)
def test_frames_go_with_every_way_to_step(keys: dict[str, object]) -> None:
    """The Coulomb kick every fifth step; steps backwards; all forces in the middle of a step."""
    row = accounts(flown(ONE, **keys))[-1]
    assert 0.0 == pytest.approx(row.energy_residual, abs=1e-6)
    assert 0.0 == pytest.approx(row.angular_residual, abs=1e-14)


def test_magnets_turn_a_frame_and_the_energy_still_closes() -> None:
    """A bunch turned by half a radian in a uniform magnet: the second order of the steps."""
    bent = [field("uniform-magnetic", strength="30 mT", along=[1.0, 0.3, 0.0])]
    rows = [accounts(flown(ONE, steps=steps, fields=bent))[-1] for steps in (50, 100)]
    gaps = [abs(row.energy_residual) for row in rows]
    assert 4.0 == pytest.approx(gaps[0] / gaps[1], rel=0.1, abs=0.0)
    assert abs(rows[1].work_frames) > 20.0 * gaps[1] * rows[1].kinetic


@pytest.mark.parametrize("frames", [ONE, TWO])
def test_charges_lost_on_the_way_take_their_energy_in_the_frame(frames: BunchFrames) -> None:
    """A wall takes half of them; the account stays as open as the steps are long.

    The energy they take against the others is a hundred times the gap.
    """
    ends = to_end(flown(frames, fields=())).particles.position[2]
    there = ["0 m", "0 m", quantity(np.median(ends), "m")]
    stop = [wall("plane", at=there, normal=[0.0, 0.0, 1.0])]
    times = np.linspace(0.0, DURATION, 81)
    gaps = []
    for steps in (80, 160):
        rows = accounts(flown(frames, steps=steps, walls=stop, fields=(), records=times[75:80]))
        last = rows[-1]
        assert 15 * 500 == last.count_lost
        gaps.append(abs(last.energy_residual) * rows[0].kinetic)
        assert gaps[-1] < 0.01 * rows[-1].coulomb < 0.01 * rows[0].coulomb
        assert 0.0 == pytest.approx(last.momentum_residual, abs=1e-13)
        assert 0.0 == pytest.approx(last.angular_residual, abs=1e-13)


@pytest.mark.parametrize("frames", [ONE, TWO])
def test_a_pause_or_a_resume_leaves_every_bit_as_it_is(frames: BunchFrames) -> None:
    """Stopped after some calls, and taken up from its state in a new loop."""
    whole = to_end(flown(frames))
    stopped = flown(frames)
    calls = iter([True, True, True])
    assert not stopped.to_mark(len(stopped.schedule.steps), lambda: next(calls, False))
    assert 0 < stopped.steps_done < 100
    state, particles = stopped.state(), stopped.particles
    kept = particles.kept(np.ones(len(particles), dtype=np.bool_))
    pushed = field("uniform-electric", strength="-5 MV/m", along=[0.5, 0.2, 1.0])
    again = loop(
        kept, DURATION, DURATION / 100, coulomb=SOFT, fields=[pushed], frames=frames, state=state
    )
    assert bits(whole) == bits(to_end(stopped)) == bits(to_end(again))


@pytest.mark.skipif(numba.config.NUMBA_NUM_THREADS < 2, reason="needs two threads")
@pytest.mark.parametrize("form", [SOFT, TREE])
def test_frames_have_the_same_bits_on_one_thread_and_two(form: Coulomb) -> None:
    """Direct and by the tree, two bunches of 300."""
    found = []
    for threads in (1, 2):
        with on_threads(threads) as given:
            moving = flown(TWO, count=600, steps=4, coulomb=form, threads=given)
            moving.keep_accuracy()
            found.append(bits(to_end(moving)))
    assert found[0] == found[1]


def test_the_tree_is_measured_and_mended_in_the_frame() -> None:
    """A tree that errs too much is tightened; the forces at hand are then those in the frame."""
    moving = flown(ONE, count=600, steps=4, coulomb=TREE)
    error, told = moving.keep_accuracy()
    assert 1e-5 < error < 1e-2
    assert "measured against the direct one" in told[0]
    exact = flown(ONE, count=600, steps=4, coulomb=DIRECT)
    gap = np.linalg.norm(moving.work.pairs - exact.work.pairs, axis=0)
    usual = np.linalg.norm(exact.work.pairs, axis=0)
    assert math.sqrt(((gap / usual) ** 2).mean()) == pytest.approx(error, rel=0.3, abs=0.0)
    plain = loop(electrons(600), DURATION, DURATION / 4, coulomb=DIRECT)
    apart = np.linalg.norm(moving.work.pairs - plain.work.pairs, axis=0)
    assert (apart / usual).mean() > 0.3


def test_opposite_charges_that_fall_together_are_watched_in_their_own_time() -> None:
    """A pair 2 um apart across its way, of a rate of 8e9 /s: too fast for steps of 0.1 ns at rest.

    With gamma 20 it takes 20 times as long, and may go on.
    """
    place = [[0.0, 0.0, 0.0], [2e-6, 0.0, 0.0]]

    def pair(gamma: float) -> TimeLoop:
        speed = C * math.sqrt(gamma**2 - 1.0)
        mass = ELECTRON_MASS / ATOMIC_MASS
        two = ions(place, [0.0, 0.0, speed], charge=[1.0, -1.0], mass=mass)
        return loop(two, 1e-10, 1e-10, coulomb=DIRECT, frames=ONE)

    with pytest.raises(StepError, match="falls towards an opposite charge"):
        pair(1.0).to_mark(1, always)
    assert pair(20.0).to_mark(1, always)
