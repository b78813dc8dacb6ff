"""Operations on eight numbers at a time against numpy, inverse powers against mpmath."""

from __future__ import annotations

import ctypes
import math
import mmap
from collections.abc import Callable
from typing import Any

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.kernels import kernel
from driftwell.kernels.lanes import (
    ROUGH_SCALE,
    below_zero,
    fused,
    inverse_cube,
    inverse_root,
    lanes,
    larger,
    least,
    load,
    load_one,
    load_some,
    lowest_bit,
    most,
    picked_above,
    positive,
    put_some,
    root,
    rough_inverse_cube,
    scaled_rough_inverse_cube,
    smaller,
    some,
    store,
    store_some,
    total,
    totals,
    where_above,
    without,
)

Floats = NDArray[np.float64]
ROUNDING = 2.0**-53


@kernel
def _plus(a: Any, b: Any, out: Any) -> None:
    store(out, 0, load(a, 0) + load(b, 0))


@kernel
def _minus(a: Any, b: Any, out: Any) -> None:
    store(out, 0, load(a, 0) - load(b, 0))


@kernel
def _times(a: Any, b: Any, out: Any) -> None:
    store(out, 0, load(a, 0) * load(b, 0))


@kernel
def _over(a: Any, b: Any, out: Any) -> None:
    store(out, 0, load(a, 0) / load(b, 0))


@kernel
def _smaller(a: Any, b: Any, out: Any) -> None:
    store(out, 0, smaller(load(a, 0), load(b, 0)))


@kernel
def _larger(a: Any, b: Any, out: Any) -> None:
    store(out, 0, larger(load(a, 0), load(b, 0)))


@kernel
def _fused(a: Any, b: Any, c: Any, out: Any) -> None:
    store(out, 0, fused(load(a, 0), load(b, 0), load(c, 0)))


@kernel
def _positive(a: Any, out: Any) -> None:
    store(out, 0, positive(load(a, 0)))


@kernel
def _where_above(a: Any, b: Any, value: Any, out: Any) -> None:
    store(out, 0, where_above(load(a, 0), load(b, 0), load(value, 0)))


@kernel
def _picked_above(a: Any, b: Any, value: Any, other: Any, out: Any) -> None:
    store(out, 0, picked_above(load(a, 0), load(b, 0), load(value, 0), load(other, 0)))


@kernel
def _square_root(a: Any, out: Any) -> None:
    store(out, 0, root(load(a, 0)))


@kernel
def _copied_some(a: Any, first: int, count: int, out: Any) -> None:
    put_some(out, first, count, some(a, first, count))


@kernel
def _without(a: Any, lane: int, out: Any) -> None:
    store(out, 0, without(load(a, 0), lane))


@kernel
def _repeated(array: Any, index: int, number: float, out: Any) -> None:
    store(out, 0, load_one(array, index))
    store(out, 8, lanes(number))


@kernel
def _copied(array: Any, first: int, count: int, out: Any, at: int) -> None:
    store_some(out, at, count, load(array, first))


@kernel
def _some(array: Any, first: int, count: int, out: Any) -> None:
    store(out, 0, load_some(array, first, count))


@kernel
def _over_all(a: Any, out: Any) -> None:
    out[0] = total(load(a, 0))
    out[1] = least(load(a, 0))
    out[2] = most(load(a, 0))


@kernel
def _totals(array: Any, first: int, out: Any) -> None:
    store(out, 0, totals(array, first))


@kernel
def _inverse_cubes(a: Any, out: Any) -> None:
    for i in range(0, a.size, 8):
        store(out, i, inverse_cube(load(a, i)))


@kernel
def _rough_inverse_cubes(a: Any, out: Any) -> None:
    for i in range(0, a.size, 8):
        store(out, i, rough_inverse_cube(load(a, i)))


@kernel
def _scaled_rough_inverse_cubes(a: Any, out: Any) -> None:
    for i in range(0, a.size, 8):
        store(out, i, lanes(ROUGH_SCALE) * scaled_rough_inverse_cube(load(a, i)))


@kernel
def _inverse_roots(a: Any, out: Any) -> None:
    for i in range(0, a.size, 8):
        store(out, i, inverse_root(load(a, i)))


def found(function: Callable[..., None], *arguments: Any) -> Floats:
    """The eight numbers a kernel stores."""
    out = np.full(8, -7.0)
    function(*arguments, out)
    return out


def numbers(seed: int, count: int = 8) -> Floats:
    """Numbers of both signs and many sizes."""
    random = np.random.default_rng(seed)
    return random.normal(size=count) * 10.0 ** random.uniform(-9.0, 9.0, count)


@pytest.mark.parametrize(
    ("function", "expected"),
    [
        (_plus, np.add),
        (_minus, np.subtract),
        (_times, np.multiply),
        (_over, np.divide),
        (_smaller, np.minimum),
        (_larger, np.maximum),
    ],
)
def test_operators_are_those_of_numpy_bit_by_bit(function: Any, expected: Any) -> None:
    """Lane by lane, rounded as each number alone."""
    for seed in range(20):
        a, b = numbers(seed), numbers(seed + 100)
        assert (expected(a, b) == found(function, a, b)).all()


def test_numbers_that_are_none_pass_the_operators() -> None:
    a, b = np.full(8, 2.0), np.full(8, 3.0)
    a[3], b[5] = np.nan, np.inf
    for function in (_plus, _minus, _times):
        result = found(function, a, b)
        assert math.isnan(result[3])
        assert math.isinf(result[5])
        assert np.isfinite(result[[0, 1, 2, 4, 6, 7]]).all()


def test_a_product_is_added_with_one_rounding_or_two() -> None:
    """Which of them, the processor decides; nothing else is right."""
    for seed in range(20):
        a, b, c = (numbers(seed + k) for k in (0, 100, 200))
        result = found(_fused, a, b, c)
        with mpmath.workdps(60):
            once = [
                float(mpmath.mpf(x) * mpmath.mpf(y) + mpmath.mpf(z))
                for x, y, z in zip(a, b, c, strict=True)
            ]
        assert ((result == once) | (result == a * b + c)).all()


def test_positive_takes_one_for_what_is_not() -> None:
    """And hides no NaN: a charge that is nowhere must be seen."""
    a = np.array([3.0, 0.0, -0.0, -2.0, 5e-324, np.inf, -np.inf, np.nan])
    expected = [3.0, 1.0, 1.0, 1.0, 5e-324, np.inf, 1.0, np.nan]
    assert np.array_equal(expected, found(_positive, a), equal_nan=True)


def test_where_above_takes_nothing_for_what_is_not() -> None:
    """At the border 0; a comparison with NaN hides nothing."""
    a = np.array([3.0, 1.0, 0.5, -2.0, np.nextafter(1.0, 2.0), np.inf, np.nan, 3.0])
    value = np.array([10.0, 11.0, 12.0, 13.0, 14.0, 15.0, 16.0, np.nan])
    expected = [10.0, 0.0, 0.0, 0.0, 14.0, 15.0, 16.0, np.nan]
    assert np.array_equal(expected, found(_where_above, a, np.ones(8), value), equal_nan=True)


def test_picked_above_takes_the_other_for_what_is_not() -> None:
    """At the border the other; a comparison with NaN takes the first, which shows it."""
    a = np.array([3.0, 1.0, 0.5, -2.0, np.nextafter(1.0, 2.0), np.inf, np.nan, 3.0])
    value, other = np.arange(10.0, 18.0), np.arange(20.0, 28.0)
    expected = [10.0, 21.0, 22.0, 23.0, 14.0, 15.0, 16.0, 17.0]
    assert expected == found(_picked_above, a, np.ones(8), value, other).tolist()


def test_a_root_is_the_nearest_number_to_it() -> None:
    """As numpy's is, by IEEE 754; of what has none comes no number."""
    a = np.array([2.0, 0.25, 1e300, 5e-324, 0.0, np.inf, -1.0, np.nan])
    with np.errstate(invalid="ignore"):
        expected = np.sqrt(a)
    assert np.array_equal(expected, found(_square_root, a), equal_nan=True)


@pytest.mark.parametrize("count", range(1, 9))
def test_all_or_some_lanes_are_copied_and_nothing_else_is_touched(count: int) -> None:
    array, out = numbers(4, 12), np.full(12, -7.0)
    _copied_some(array, 2, count, out)
    expected = np.full(12, -7.0)
    expected[2 : 2 + count] = array[2 : 2 + count]
    assert (expected == out).all()


@pytest.mark.parametrize("lane", range(8))
def test_one_lane_can_be_left_out(lane: int) -> None:
    a = numbers(1)
    expected = a.copy()
    expected[lane] = 0.0
    assert (expected == found(_without, a, lane)).all()


def test_one_number_goes_to_all_lanes() -> None:
    a, out = numbers(2), np.zeros(16)
    _repeated(a, 5, 2.5, out)
    assert (np.repeat([a[5], 2.5], 8) == out).all()


@pytest.mark.parametrize("count", range(10))
@pytest.mark.parametrize("first", [0, 1, 3])
def test_some_lanes_are_loaded_and_stored_and_nothing_else_is_touched(
    first: int, count: int
) -> None:
    """From any place, aligned or not; of more than eight, eight."""
    array, out = numbers(3, 12), np.full(16, -7.0)
    expected = np.zeros(8)
    expected[:count] = array[first : first + min(count, 8)]
    assert (expected == found(_some, array, first, count)).all()
    _copied(array, first, count, out, 2)
    expected = np.full(16, -7.0)
    expected[2 : 2 + min(count, 8)] = array[first : first + min(count, 8)]
    assert (expected == out).all()


def forbid(address: int, size: int) -> None:
    """Forbid any access to whole pages of memory."""
    library = ctypes.CDLL(None, use_errno=True)
    library.mprotect.argtypes = (ctypes.c_void_p, ctypes.c_size_t, ctypes.c_int)
    assert 0 == library.mprotect(address, size, 0)


def test_a_load_of_some_reads_nothing_beyond_the_end_of_memory() -> None:
    """The last numbers of the last page that may be read."""
    pages = mmap.mmap(-1, 2 * mmap.PAGESIZE)
    array = np.frombuffer(pages, dtype=np.float64)[: mmap.PAGESIZE // 8]
    forbid(array.ctypes.data + mmap.PAGESIZE, mmap.PAGESIZE)
    for count in range(8):
        assert (0.0 == found(_some, array, array.size - count, count)).all()
        _copied(np.zeros(8), 0, count, array, array.size - count)


def test_lanes_are_summed_by_halves() -> None:
    """((a0 + a4) + (a2 + a6)) + ((a1 + a5) + (a3 + a7)), of one vector and of eight at once."""
    for seed in range(10):
        table = numbers(seed, 3 + 64)
        rows = table[3:].reshape(8, 8)
        half = rows[:, :4] + rows[:, 4:]
        quarter = half[:, :2] + half[:, 2:]
        expected = quarter[:, 0] + quarter[:, 1]
        assert (expected == found(_totals, table, 3)).all()
        assert [expected[2], rows[2].min(), rows[2].max()] == found(_over_all, rows[2])[:3].tolist()


def relative_errors(function: Any, a: Floats, power: Any) -> Floats:
    """|found - a^power| / a^power, by 40 digits."""
    out = np.full_like(a, np.nan)
    function(a, out)
    with mpmath.workdps(40):
        exact = [mpmath.mpf(each) ** power for each in a]
        return np.array([float(abs(f / e - 1)) for f, e in zip(out, exact, strict=True)])


def over_the_range(least_power: float, most_power: float) -> Floats:
    """Numbers from 10^least to 10^most, and some in all of an octave, whose steps matter."""
    random = np.random.default_rng(4)
    wide = 10.0 ** np.linspace(least_power, most_power, 2000)
    octave = np.concatenate([random.uniform(1.0, 4.0, 3000), [1.0, 2.0, 4.0, 1.0 + 2e-16]])
    edges = np.nextafter(4.0 ** np.arange(-40.0, 41.0), 0.0)
    every = np.concatenate([wide, octave, edges])
    return np.resize(every, -(-every.size // 8) * 8)


THREE_HALVES = mpmath.mpf(-3) / 2


def test_inverse_cubes_are_right_to_three_roundings() -> None:
    """From 1e-203 to 1e203: beyond, a^(-3/2) itself is no normal number.

    The last three steps round; what the series leaves is less.
    """
    error = relative_errors(_inverse_cubes, over_the_range(-203.0, 203.0), THREE_HALVES)
    assert error.max() <= 3.0 * ROUNDING
    assert error.mean() <= ROUNDING
    assert error.max() > 0.5 * ROUNDING


@pytest.mark.parametrize("function", [_rough_inverse_cubes, _scaled_rough_inverse_cubes])
def test_rough_inverse_cubes_err_by_three_in_a_hundred_million(function: Any) -> None:
    """At most; and they are no better on processors that estimate: something is saved."""
    error = relative_errors(function, over_the_range(-203.0, 203.0), THREE_HALVES)
    assert error.max() <= 3e-8
    assert error.max() > 1e-12


def test_inverse_roots_are_right_to_two_roundings() -> None:
    """From 1e-300 to 1e300."""
    a = over_the_range(-300.0, 300.0)
    error = relative_errors(_inverse_roots, a, mpmath.mpf(-1) / 2)
    assert error.max() <= 2.0 * ROUNDING + 1e-16
    assert error.mean() <= ROUNDING


CUBES = [_inverse_cubes, _rough_inverse_cubes, _scaled_rough_inverse_cubes]


@pytest.mark.parametrize("function", [*CUBES, _inverse_roots])
def test_of_nan_and_of_what_is_no_normal_number_comes_no_plausible_power(function: Any) -> None:
    """NaN stays NaN; of 0, of infinity and of subnormal numbers comes nothing finite."""
    a = np.array([np.nan, 0.0, np.inf, 5e-324, 1e-310, 1.0, 1.0, np.nan])
    result = found(function, a)
    assert np.isnan(result[[0, 7]]).all()
    assert not np.isfinite(result[:5]).any()
    assert [1.0, 1.0] == pytest.approx(result[5:7], rel=3e-8, abs=0.0)


@pytest.mark.parametrize("function", CUBES)
def test_cubes_out_of_range_are_not_finite_or_vanish(function: Any) -> None:
    """As the number itself: at the ends of the normal numbers and where a^(-3/2) leaves them."""
    a = np.array([2.3e-308, 1e-300, 1e-206, 1e-205, 1e205, 1e207, 1e217, 1.7e308])
    result = found(function, a)
    assert not np.isfinite(result[:3]).any()
    assert (0.0 == result[6:]).all()
    assert a[3:6] ** -1.5 == pytest.approx(result[3:6], rel=1e-7, abs=1e-320)


@kernel
def _lanes_below_zero(a: Any) -> int:
    return below_zero(load(a, 0))


@kernel
def _lowest(bits: int) -> int:
    return lowest_bit(bits)


def test_lanes_below_zero_are_bits_and_what_is_no_number_is_none_of_them() -> None:
    values = np.array([-1.0, 0.0, -0.0, 2.0, np.nan, -np.inf, -5e-324, np.inf])
    assert 0b01100001 == _lanes_below_zero(values)
    assert 0b10000000 == _lanes_below_zero(np.append(np.ones(7), -1.0))


def test_the_lowest_bit_is_found() -> None:
    assert [0, 1, 2, 31, 40, 64] == [_lowest(bits) for bits in (7, 6, 12, 1 << 31, 3 << 40, 0)]
