"""Which bunches get frames of their own, and what is told of fast charges."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.coulomb.bunch_frames import (
    BunchFrames,
    FrameWatch,
    chosen_frames,
    grouped,
    moving,
    places_within,
    velocities_within,
)
from driftwell.coulomb.form import Coulomb
from driftwell.particles.proper_velocity import carried

C = SPEED_OF_LIGHT
ONES = np.ones(200)
FIRST = np.zeros(200, dtype=np.int64)


def flying(beta: float, spread: float = 0.0) -> np.ndarray:
    """Proper velocities (3, 200) of charges that go at beta c along z, random ones within."""
    inner = spread * C * np.random.default_rng(2).normal(size=(3, 200))
    by = np.zeros((3, 200))
    by[2] = beta * C / math.sqrt(1.0 - beta**2)
    return carried(inner, by)


def test_velocities_within_a_frame_are_those_that_were_carried_along() -> None:
    inner = 0.1 * C * np.random.default_rng(3).normal(size=(3, 50))
    proper = C * np.array([1.0, -2.0, 0.5])
    seen = carried(inner, np.repeat(proper[:, None], 50, axis=1))
    assert 0.0 == pytest.approx(
        np.abs(velocities_within(seen, proper) - inner).max() / C, abs=1e-14
    )


def test_places_are_stretched_along_the_motion_by_gamma() -> None:
    proper = C * np.array([0.0, 3.0, 4.0])  # gamma^2 = 26
    along, across = np.array([[0.0], [0.6], [0.8]]), np.array([[0.0], [0.8], [-0.6]])
    assert math.sqrt(26.0) == pytest.approx(
        float(np.linalg.norm(places_within(along, proper))), rel=1e-14, abs=0.0
    )
    assert across == pytest.approx(places_within(across, proper), abs=1e-15)


def test_what_moves_within_a_frame_is_measured() -> None:
    """Spread 1e-3 c in each direction about 0.6 c: 1 along, sqrt 2 across; 5 % of 200 charges."""
    now = moving(flying(0.6, 1e-3), ONES)
    assert 0.6 == pytest.approx(now.beta, rel=1e-3, abs=0.0)
    assert 1e-3 == pytest.approx(now.along, rel=0.1, abs=0.0)
    assert math.sqrt(2.0) * 1e-3 == pytest.approx(now.across, rel=0.1, abs=0.0)
    assert 0.36 == pytest.approx(now.square, rel=1e-2, abs=0.0)
    assert 0.6 * math.sqrt(3.0) * 1e-3 == pytest.approx(now.missed, rel=0.1, abs=0.0)


def test_clouds_of_a_group_share_a_bunch_and_others_have_their_own() -> None:
    assert (0, 1, 0, 2) == grouped(("a", "b", "c", "d"), (("a", "c"),))
    assert (0, 1) == grouped(("a", "b"), ())


@pytest.mark.parametrize(
    ("velocity", "bunch"),
    [
        (flying(5e-3, 1e-5), ()),  # a share of 2.5e-5, less than 1e-4
        (flying(0.02, 1e-5), (0, 0)),
        (flying(0.9, 1e-3), (0, 0)),
        (flying(0.0, 0.1), ()),  # fast, but in all directions
    ],
)
def test_one_frame_is_taken_unasked_where_charges_move_fast_together(
    velocity: np.ndarray, bunch: tuple[int, ...]
) -> None:
    cloud = np.repeat([0, 1], 100)
    found = chosen_frames(Coulomb(), ("a", "b"), cloud, velocity, ONES)
    assert bunch == found.bunch
    assert bool(bunch) == ("Gamma" in found.because)


def test_no_frame_is_taken_unasked_where_something_forbids_it_or_bunches_go_apart() -> None:
    fast = flying(0.5, 1e-4)
    assert not chosen_frames(Coulomb(), ("a",), FIRST, fast, ONES, unfit=True).bunch
    assert not chosen_frames(Coulomb(frame="laboratory"), ("a",), FIRST, fast, ONES).bunch
    assert not chosen_frames(Coulomb(method="off"), ("a",), FIRST, fast, ONES).bunch
    fast[2, :100] *= -1.0
    assert not chosen_frames(Coulomb(), ("a",), FIRST, fast, ONES).bunch


def test_a_frame_asked_for_is_taken_however_slow() -> None:
    form = Coulomb(frame="bunch", share_frame=(("a", "b"),))
    found = chosen_frames(form, ("a", "b"), FIRST, flying(1e-6), ONES)
    assert (0, 0) == found.bunch
    assert ("a", "b") == found.members(0)


def told(frames: BunchFrames, velocity: np.ndarray, accuracy: float = 1e-4) -> list[str]:
    """What a watch says at two records, one after the other."""
    watch = FrameWatch(frames, accuracy)
    first = watch.look(velocity, ONES, ONES, FIRST)
    assert [] == watch.look(velocity, ONES, ONES, FIRST)
    return first


def test_a_plain_sum_of_a_fast_cloud_is_told_of_once() -> None:
    (text,) = told(BunchFrames(("pulse",)), flying(0.328, 1e-4))
    assert '"pulse" moves at 0.328 c: magnetic forces take a share of 0.11' in text
    assert 'Set coulomb.frame = "bunch"' in text


def test_slow_ions_are_not_spoken_of() -> None:
    """Protons of 30 keV: a share of 6.4e-5."""
    assert [] == told(BunchFrames(("ions",)), flying(0.008, 1e-5))
    assert [] == told(BunchFrames(("ions",), (0,)), flying(0.008, 1e-5))


def test_hot_charges_that_no_frame_helps_are_told_of() -> None:
    (text,) = told(BunchFrames(("gas",)), flying(0.0, 0.1))
    assert "no frame mends it" in text


def test_what_moves_within_a_frame_is_told_of_with_its_causes() -> None:
    """1e-3 c in each direction at 0.6 c: sqrt(2)/750 rad across, 0.6 1.25/0.25 1e-3 in energy."""
    (text,) = told(BunchFrames(("pulse",), (0,)), flying(0.6, 1e-3))
    assert 'In the rest frame of "pulse" the charges move at 1.7e-03 c' in text
    assert "angles of 1.9 mrad, kinetic energies of 0.3%" in text
    assert [] == told(BunchFrames(("pulse",), (0,)), flying(0.6, 1e-5))
