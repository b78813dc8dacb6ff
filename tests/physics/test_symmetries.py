"""What isolated charges keep, and what must not matter: Newton's third law and Noether's theorem.

50 unlike ions, 1 to 200 u and -3 to 5 e, in a box of 50 um, none nearer than 2 um to another.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import NamedTuple

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS
from driftwell.record.reader import Run
from tests.running import Floats, Track, carried_out, points, quantity, species, track

COUNT, BOX, STEP = 50, 50e-6, 0.2e-9


class Cluster(NamedTuple):
    """mass (n,) in u; charge (n,) in e; position and velocity (n, 3)."""

    mass: Floats
    charge: Floats
    position: Floats
    velocity: Floats


def cluster() -> Cluster:
    """Fifty ions in their places."""
    random = np.random.default_rng(11)
    place = [random.uniform(-0.5 * BOX, 0.5 * BOX, 3)]
    while len(place) < COUNT:
        new = random.uniform(-0.5 * BOX, 0.5 * BOX, 3)
        if np.linalg.norm(np.array(place) - new, axis=1).min() > 2e-6:
            place.append(new)
    charge = random.choice([-3.0, -2.0, -1.0, 1.0, 2.0, 3.0, 4.0, 5.0], COUNT)
    velocity = random.normal(scale=30.0, size=(COUNT, 3))
    return Cluster(random.uniform(1.0, 200.0, COUNT), charge, np.array(place), velocity)


def moved(folder: Path, start: Cluster, steps: int = 500, order: Floats | None = None) -> Run:
    """The cluster after some steps of 0.2 ns; `order` is that of the clouds in the file."""
    names = [f"ion{k}" for k in (range(COUNT) if order is None else order)]
    return carried_out(
        folder,
        steps * STEP,
        species={
            f"ion{k}": species(start.mass[k] * ATOMIC_MASS, quantity(start.charge[k], "e"))
            for k in range(COUNT)
        },
        cloud=[
            points(name, name, start.position[k], start.velocity[k])
            for name in names
            for k in [int(name[3:])]
        ],
        stepping={"step": quantity(STEP, "s")},
    )


@pytest.fixture(scope="module")
def plain(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """500 steps of the cluster as it is."""
    return moved(tmp_path_factory.mktemp("plain"), cluster())


def after(found: Run) -> Track:
    """Start and end of all ions."""
    return track(found)


def test_momentum_energy_and_angular_momentum_are_kept(plain: Run) -> None:
    """Momentum to 1e-14, angular momentum to 1e-13, energy to the step's 1e-5; all move much.

    Leap-frog keeps the first two exactly (E. Hairer, C. Lubich, G. Wanner, Geometric Numerical
    Integration (2006), sec. IV.1, from memory): rounding alone is left.
    """
    first, last = plain.ledger[0], plain.ledger[-1]
    scale = cluster()
    mass = scale.mass * ATOMIC_MASS
    push = (mass[:, None] * np.abs(after(plain).velocity[-1])).sum()
    assert list(first["momentum"]) == pytest.approx(last["momentum"], abs=1e-14 * push)
    spin = push * BOX
    assert list(first["angular_momentum"]) == pytest.approx(
        last["angular_momentum"], abs=1e-13 * spin
    )
    energy = [each["kinetic"] + each["coulomb"] for each in (first, last)]
    assert energy[0] == pytest.approx(energy[1], rel=1e-5, abs=0.0)
    assert abs(last["kinetic"] / first["kinetic"] - 1.0) > 0.1
    assert last["momentum_residual"] <= 1e-14
    assert last["angular_residual"] <= 1e-13


def test_turned_back_in_time_the_ions_return(tmp_path: Path, plain: Run) -> None:
    """With all velocities turned round, 500 steps lead back to within 1e-9 of the box."""
    start, end = cluster(), after(plain)
    back = after(
        moved(tmp_path, start._replace(position=end.position[-1], velocity=-end.velocity[-1]))
    )
    assert 0.0 == pytest.approx(np.abs(back.position[-1] - start.position).max(), abs=1e-9 * BOX)
    assert 0.0 == pytest.approx(np.abs(back.velocity[-1] + start.velocity).max(), abs=1e-6)
    assert np.abs(end.position[-1] - start.position).max() > 0.1 * BOX


def test_a_turned_cluster_moves_alike_in_turned_directions(tmp_path: Path, plain: Run) -> None:
    """By 1 rad about (1, 2, 3): the same path, turned, to 1e-9 of the box."""
    axis = np.array([1.0, 2.0, 3.0]) / math.sqrt(14.0)
    across = np.cross(axis, np.eye(3)).T
    turn = np.eye(3) + math.sin(1.0) * across + (1.0 - math.cos(1.0)) * across @ across
    start, end = cluster(), after(plain)
    turned = start._replace(position=start.position @ turn.T, velocity=start.velocity @ turn.T)
    found = after(moved(tmp_path, turned))
    gap = found.position[-1] - end.position[-1] @ turn.T
    assert 0.0 == pytest.approx(np.abs(gap).max(), abs=1e-9 * BOX)


def test_a_shifted_and_moving_cluster_moves_alike(tmp_path: Path, plain: Run) -> None:
    """Galileo: 10 um aside and 200 m/s faster, all ions end 200 m/s t farther, to 1e-9 of the box.

    The change of 1/gamma by 200 m/s is of order 1e-12.
    """
    start, end = cluster(), after(plain)
    shift, boost = np.array([1e-5, -1e-5, 1e-5]), np.array([200.0, 100.0, -200.0])
    found = after(
        moved(
            tmp_path,
            start._replace(position=start.position + shift, velocity=start.velocity + boost),
        )
    )
    expected = end.position[-1] + shift + boost * (500 * STEP)
    assert 0.0 == pytest.approx(np.abs(found.position[-1] - expected).max(), abs=1e-9 * BOX)


def test_the_order_of_the_ions_does_not_matter(tmp_path: Path, plain: Run) -> None:
    """Listed the other way round they end at the same places to 1e-9 of the box."""
    end = after(plain)
    order = np.arange(COUNT)[::-1]
    found = after(moved(tmp_path, cluster(), order=order))
    gap = found.position[-1][::-1] - end.position[-1]
    assert 0.0 == pytest.approx(np.abs(gap).max(), abs=1e-9 * BOX)
