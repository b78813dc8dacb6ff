"""Random numbers of a cloud: reproducible, and independent of everything else."""

from __future__ import annotations

import hashlib

import numpy as np
import pytest
from scipy.stats import kstest

from driftwell.particles.draws import Draws


def test_a_stream_is_philox_keyed_by_the_digest_of_seed_name_and_purpose() -> None:
    digest = hashlib.sha256(b"7\0load\0temperature").digest()
    key = np.frombuffer(digest[:16], dtype="<u8").astype(np.uint64)
    expected = np.random.Philox(key=key).random_raw(5)
    found = Draws(7, "load").stream("temperature").bit_generator.random_raw(5)
    assert expected.tolist() == found.tolist()


def test_seed_name_and_purpose_each_change_every_number() -> None:
    base = Draws(7, "load").stream("place").random(50)
    for other in (
        Draws(8, "load").stream("place"),
        Draws(7, "loads").stream("place"),
        Draws(7, "load").stream("temperature"),
    ):
        assert not np.any(base == other.random(50))


def test_streams_of_two_clouds_are_uncorrelated() -> None:
    a = Draws(7, "a").unit_points("place", 100_000, 1)[0]
    b = Draws(7, "b").unit_points("place", 100_000, 1)[0]
    assert abs(np.corrcoef(a, b)[0, 1]) < 4.0 / np.sqrt(100_000)  # 4 standard errors


@pytest.mark.parametrize("placing", ["random", "even"])
def test_points_are_uniform_and_lie_inside_the_open_unit_cube(placing: str) -> None:
    points = Draws(7, "load").unit_points("place", 20_000, 3, placing)
    assert (3, 20_000) == points.shape
    assert 0.0 < points.min() < points.max() < 1.0
    for coordinate in points:
        assert kstest(coordinate, "uniform").pvalue > 1e-3


@pytest.mark.parametrize("placing", ["random", "even"])
def test_more_points_begin_with_the_same_points(placing: str) -> None:
    few = Draws(7, "load").unit_points("place", 1000, 3, placing)
    many = Draws(7, "load").unit_points("place", 1500, 3, placing)
    assert few.tolist() == many[:, :1000].tolist()


@pytest.mark.parametrize("placing", ["random", "even"])
@pytest.mark.parametrize("count", [0, 1, 2, 3])
def test_a_few_points_are_drawn_as_well(placing: str, count: int) -> None:
    assert (2, count) == Draws(7, "load").unit_points("place", count, 2, placing).shape


def test_even_points_fill_small_cubes_much_more_evenly_than_random_ones() -> None:
    """1024 points in 8 x 8 x 8 cells: the variance of a cell's count is 2 (1 - 1/512) at random."""
    spread = {}
    for placing in ("random", "even"):
        points = Draws(7, "load").unit_points("place", 1024, 3, placing)
        counts, _ = np.histogramdd(points.T, bins=8, range=[(0.0, 1.0)] * 3)
        spread[placing] = counts.var()
    assert (
        pytest.approx(2.0, rel=0.25, abs=0.0) == spread["random"]
    )  # 4 standard errors of 512 cells
    assert spread["even"] < 0.4
