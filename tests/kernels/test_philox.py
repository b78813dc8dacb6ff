"""The counter-based random stream: known answers, and the same bits as numpy's."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.stats import kstest

from driftwell.kernels import kernel
from driftwell.kernels.circle import circle
from driftwell.kernels.philox import exponential, fill_words, normals, stream_key, uniforms

ONES = 2**64 - 1
KNOWN = [
    (
        (0, 0, 0, 0),
        (0, 0),
        "16554d9eca36314c db20fe9d672d0fdc d7e772cee186176b 7e68b68aec7ba23b",
    ),
    (
        (ONES, ONES, ONES, ONES),
        (ONES, ONES),
        "87b092c3013fe90b 438c3c67be8d0224 9cc7d7c69cd777b6 a09caebf594f0ba0",
    ),
    (
        (0x243F6A8885A308D3, 0x13198A2E03707344, 0xA4093822299F31D0, 0x082EFA98EC4E6C89),
        (0x452821E638D01377, 0xBE5466CF34E90C6C),
        "a528f45403e61d95 38c72dbd566e9788 a5a1610e72fd18b5 57bd43b5e52b7fe6",
    ),
]
"""Counter, key and words: known-answer vectors of the published random library (from memory)."""


def blocks(key: NDArray[np.uint64], counters: NDArray[np.uint64]) -> NDArray[np.uint64]:
    found = np.empty_like(counters)
    fill_words(key, counters, found)
    return found


@pytest.mark.parametrize(("counter", "key", "words"), KNOWN)
def test_blocks_are_the_published_ones(
    counter: tuple[int, ...], key: tuple[int, ...], words: str
) -> None:
    """Source: the known-answer vectors of J. K. Salmon et al.'s library (from memory)."""
    found = blocks(np.array(key, np.uint64), np.array([counter], np.uint64))
    assert words == " ".join(f"{int(each):016x}" for each in found[0])


@pytest.mark.parametrize("key", [0, 1, 2**64 - 1, 2**127 + 12345])
def test_a_stream_has_the_bits_of_numpys(key: int) -> None:
    """numpy counts up before it draws: its first block is that of the counter after the given."""
    first = np.array([7, 2**63, 5, 2**62 + 1], np.uint64)
    expected = np.random.Philox(key=key, counter=first).random_raw(4 * 50).reshape(50, 4)
    counters = np.tile(first, (50, 1))
    counters[:, 0] += np.arange(1, 51, dtype=np.uint64)
    halves = np.array([key % 2**64, key >> 64], np.uint64)
    assert expected.tolist() == blocks(halves, counters).tolist()


@kernel
def draw(key: np.ndarray, who: int, out_uniform: np.ndarray, out_normal: np.ndarray) -> None:
    """Four numbers of each kind for every event."""
    for k in range(out_uniform.shape[0]):
        a, b, c, d = uniforms(key, who, k, 1, 2)
        out_uniform[k, 0], out_uniform[k, 1], out_uniform[k, 2], out_uniform[k, 3] = a, b, c, d
        a, b, c, d = normals(key, who, k, 3, 4)
        out_normal[k, 0], out_normal[k, 1], out_normal[k, 2], out_normal[k, 3] = a, b, c, d


def test_uniforms_normals_and_exponentials_follow_their_laws() -> None:
    """1e5 numbers of each place of a block, by Kolmogorov and Smirnov; places do not correlate."""
    uniform, normal = np.empty((100_000, 4)), np.empty((100_000, 4))
    draw(stream_key(3, "gas", "events"), 11, uniform, normal)
    assert 0.0 < uniform.min() < 1e-4
    assert 1.0 - 1e-4 < uniform.max() < 1.0
    for place in range(4):
        assert kstest(uniform[:, place], "uniform").pvalue > 1e-3
        assert kstest(normal[:, place], "norm").pvalue > 1e-3
    assert kstest(-np.log(uniform[:, 0]), "expon").pvalue > 1e-3
    for numbers in (uniform, normal):
        assert np.abs(np.corrcoef(numbers.T) - np.eye(4)).max() < 5.0 / np.sqrt(1e5)


def test_the_ends_of_the_words_stay_within_the_open_interval() -> None:
    """A draw of exactly 0 or 1 would be an infinite exponential, or none."""
    from driftwell.kernels import philox

    ends = [philox._unit.py_func(word) for word in (np.uint64(0), np.uint64(ONES))]
    assert ends == [2.0**-53, 1.0 - 2.0**-53]
    assert [exponential.py_func(each) for each in ends] == pytest.approx(
        [53.0 * np.log(2.0), 2.0**-53], rel=1e-12, abs=0.0
    )


def test_keys_differ_by_seed_name_and_purpose() -> None:
    asked = [(1, "gas", "a"), (2, "gas", "a"), (1, "air", "a"), (1, "gas", "b")]
    assert 4 == len({stream_key(*each).tobytes() for each in asked})


def test_points_of_the_circle_are_those_of_sine_and_cosine() -> None:
    """Against numpy's, at 1e4 places and the corners between the pieces; to two last places."""
    places = np.append(np.linspace(0.0, 1.0, 10_001), np.arange(9) / 8.0)
    found = np.array([circle(place) for place in places])
    angle = 2.0 * np.pi * places
    assert np.stack([np.cos(angle), np.sin(angle)], axis=1) == pytest.approx(
        found, rel=0.0, abs=1e-15
    )
