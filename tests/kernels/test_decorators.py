"""What the decorators let the compiler do to sums, and kernels handed over as pointers."""

from __future__ import annotations

import itertools
import math

import numpy as np
import pytest
from numba.core.bytecode import FunctionIdentity

from driftwell.kernels import kernel, pair_kernel, pointed_kernel
from driftwell.kernels.compiled import PAIR_FLAGS, SUM_FLAGS
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.status import (
    COLLAPSE,
    DONE,
    EVENTS_FULL,
    NOT_FINITE,
    OVERFLOW,
    PAUSED,
    RUNAWAY,
)


@kernel
def _as_written(x: np.ndarray) -> float:
    total = 0.0
    for i in range(x.size):
        total += x[i]
    return total


@pair_kernel
def _reordered(x: np.ndarray) -> float:
    total = 0.0
    for i in range(x.size):
        total += x[i]
    return total


@kernel
def _doubled(x: float) -> float:
    return 2.0 * x


@kernel
def _squared(x: float) -> float:
    return x * x


@kernel
def _applied(function, x):
    return function(x) + 1.0


@kernel
def _divided(x: float, y: float) -> float:
    return x / y


def test_kernels_sum_in_the_order_written() -> None:
    """To the last bit of a loop in Python, whatever the length."""
    x = np.random.default_rng(1).normal(size=1001)
    expected = 0.0
    for each in x:
        expected += each
    assert expected == _as_written(x)


@pytest.mark.parametrize("sum_of", [_as_written, _reordered])
def test_numbers_that_are_none_survive_every_sum(sum_of) -> None:
    """Fast sums keep NaN and infinity too."""
    x = np.ones(100)
    assert 100.0 == sum_of(x)
    x[40] = math.inf
    assert math.inf == sum_of(x)
    x[60] = -math.inf
    assert math.isnan(sum_of(x))


def test_no_flag_lets_the_compiler_forget_numbers_that_are_none() -> None:
    """Neither set holds one of the flags that assume them away, or approximate."""
    assert set() == (PAIR_FLAGS | SUM_FLAGS) & {"nnan", "ninf", "afn", "fast"}


def test_kernels_divide_by_zero_as_ieee_754_says() -> None:
    """They never raise."""
    assert math.inf == _divided(1.0, 0.0)
    assert math.isnan(_divided(0.0, 0.0))


def test_a_caller_is_compiled_once_for_all_functions_of_a_signature() -> None:
    """The function is a pointer to it: results differ, compiled code does not."""
    doubled = CompiledFunction(_doubled, "float64(float64)")
    squared = CompiledFunction(_squared, "float64(float64)")
    assert [11.0, 26.0] == [_applied(doubled, 5.0), _applied(squared, 5.0)]
    assert 1 == len(_applied.overloads)
    assert [10.0, 25.0] == [doubled(5.0), squared(5.0)]
    assert doubled.signature() == squared.signature()
    assert doubled.__wrapper_address__() != squared.__wrapper_address__()


def _times(factor: int) -> CompiledFunction:
    """A kernel that closes over a number."""

    @pointed_kernel
    def product(x: float) -> float:
        return factor * x

    return CompiledFunction(product, "float64(float64)")


def _at(function: CompiledFunction) -> int:
    return function.__wrapper_address__()


def test_kernels_that_close_over_different_numbers_are_never_taken_for_one_another(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Not even where two processes made them, each the first of its own count of functions."""
    monkeypatch.setattr(FunctionIdentity, "_unique_ids", itertools.count(10**9))
    by_two = _times(2)
    monkeypatch.setattr(FunctionIdentity, "_unique_ids", itertools.count(10**9))
    by_three = _times(-3)
    assert _at(by_two) != _at(by_three)
    assert [10.0, -15.0] == [_applied(by_two, 5.0) - 1.0, _applied(by_three, 5.0) - 1.0]


def test_a_kernel_may_not_close_over_what_its_name_cannot_carry() -> None:
    """Two of one name could be taken for one another."""
    table = np.ones(3)

    def looked_up(k: int) -> float:
        return float(table[k])

    with pytest.raises(TypeError, match="a kernel may close over whole numbers"):
        kernel(looked_up)


def test_every_status_is_its_own_number() -> None:
    """And only the first means that the asked time is behind us."""
    every = [DONE, PAUSED, EVENTS_FULL, NOT_FINITE, RUNAWAY, COLLAPSE, OVERFLOW]
    assert list(range(7)) == sorted(every)
    assert 0 == DONE
