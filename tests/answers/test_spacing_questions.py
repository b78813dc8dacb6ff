"""Peak density and nearest-neighbour distance."""

from __future__ import annotations

import numpy as np
import pytest
from recorded_by_hand import Recorded, asked, facts, near, one_cloud
from scipy.stats import special_ortho_group

SIGMA = np.array([40e-6, 60e-6, 900e-6])


def gaussian(count: int, seed: int) -> np.ndarray:
    """Positions of a long Gaussian cloud that lies askew."""
    random = np.random.default_rng(seed)
    turn = special_ortho_group.rvs(3, random_state=2)
    return random.normal(size=(count, 3)) * SIGMA @ turn.T + 1e-3


def test_peak_density_of_a_gaussian_is_the_closed_form() -> None:
    """n0 = N / ((2 pi)^(3/2) s_x s_y s_z): the normal distribution; common practice, no source."""
    found = asked("peak-density").answer(one_cloud(gaussian(20_000, 3), weight=5.0))
    expected = 5.0 * 20_000 / ((2.0 * np.pi) ** 1.5 * np.prod(SIGMA))
    assert found.error is not None
    assert found.error < 0.07 * expected
    assert expected == pytest.approx(found.value, abs=2.5 * found.error)
    assert found.unit == "1/m^3"


def test_peak_density_of_a_uniform_ball_is_its_density() -> None:
    random = np.random.default_rng(4)
    ball = random.normal(size=(10_000, 3))
    ball *= (random.uniform(size=10_000) ** (1 / 3) / np.linalg.norm(ball, axis=1))[:, None]
    found = asked("peak-density").answer(one_cloud(1e-3 * ball))
    expected = 10_000 / (4.0 / 3.0 * np.pi * 1e-9)
    assert found.error is not None
    assert expected == pytest.approx(found.value, abs=2.5 * found.error)


def test_peak_density_finds_a_core_within_a_halo() -> None:
    """Half the charges in a core a fifth as wide, off the middle of the halo."""
    random = np.random.default_rng(5)
    halo, core = random.normal(size=(2, 8000, 3))
    both = 1e-3 * np.stack([halo, 0.2 * core + [0.7, 0.0, -0.3]], axis=1).reshape(-1, 3)
    found = asked("peak-density").answer(one_cloud(both))
    at_core = 8000 / (2.0 * np.pi) ** 1.5 * (125.0 + np.exp(-0.5 * (0.49 + 0.09))) * 1e9
    assert at_core == near(found.value, rel=0.2)


def test_peak_density_does_not_depend_on_place_direction_or_scale() -> None:
    cloud = gaussian(1000, 6)
    turn = special_ortho_group.rvs(3, random_state=7)
    first = asked("peak-density").answer(one_cloud(cloud))
    second = asked("peak-density").answer(one_cloud(10.0 * cloud @ turn.T - 0.3))
    assert first.value == near(1e3 * second.value, rel=1e-6)


def test_peak_density_needs_a_volume_and_enough_charges() -> None:
    flat = gaussian(200, 8) * [1.0, 1.0, 0.0]
    with pytest.raises(Exception, match="no volume density"):
        asked("peak-density").answer(one_cloud(flat))
    with pytest.raises(Exception, match="needs at least 50 charges, there are 49"):
        asked("peak-density").answer(one_cloud(gaussian(49, 8)))


def test_nearest_neighbour_of_a_line_is_the_smaller_gap() -> None:
    line = np.zeros((4, 3))
    line[:, 2] = [0.0, 1e-6, 4e-6, 9e-6]
    found = asked("nearest-neighbour").answer(one_cloud(line))
    assert near((1.0 + 1.0 + 3.0 + 5.0) / 4.0 * 1e-6, rel=1e-12) == found.value
    assert found.error is not None


def test_neighbours_of_other_clouds_count() -> None:
    load, other = facts(count=2), facts("other", count=1, index=1, first_id=2)
    rest = np.zeros((2, 3))
    recorded = Recorded().at(
        1e-3,
        (load, np.arange(2), np.array([[0.0, 0.0, 0.0], [10e-6, 0.0, 0.0]]), rest),
        (other, np.arange(1), np.array([[8e-6, 0.0, 0.0]]), rest[:1]),
    )
    assert near(5e-6, rel=1e-12) == asked("nearest-neighbour").answer(recorded).value


def test_a_charge_alone_has_no_neighbour() -> None:
    with pytest.raises(Exception, match="there is no other charge"):
        asked("nearest-neighbour").answer(one_cloud(np.zeros((1, 3))))
