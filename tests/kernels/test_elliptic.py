"""Complete elliptic integrals against independent ones, at both ends of the modulus too."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest
from scipy.special import ellipe, ellipkm1

from driftwell.kernels import kernel
from driftwell.kernels.elliptic import associated, first_and_second, third

COMPLEMENTS = np.concatenate(
    [np.logspace(-20, -1, 20), np.linspace(0.1, 1.0, 20), 1.0 - np.logspace(-15, -2, 14)]
)


@kernel
def _first_and_second(kc: float) -> tuple[float, float]:
    return first_and_second(kc)


@kernel
def _associated(kc: float) -> tuple[float, float]:
    return associated(kc)


@kernel
def _third(kc: float, p: float, a: float, b: float) -> float:
    return third(kc, p, a, b)


@pytest.fixture(autouse=True)
def many_digits():
    with mpmath.workdps(80):
        yield


def parameter(kc: float) -> mpmath.mpf:
    """m = 1 - kc^2, to many digits."""
    return 1 - mpmath.mpf(kc) ** 2


@pytest.mark.parametrize("kc", COMPLEMENTS)
def test_integrals_of_all_kinds_agree_with_mpmath_to_a_few_roundings(kc: float) -> None:
    """B = K - D, D = (K - E)/m, C = (D - B)/m (E. Jahnke, F. Emde, Tables of Functions, ch. V, from
    memory); 8 units in the last place leave room for the roundings of 5 to 9 steps."""
    m = parameter(kc)
    k, e = mpmath.ellipk(m), mpmath.ellipe(m)
    d = (k - e) / m if m else mpmath.pi / 4
    b = k - d
    c = (d - b) / m if m else mpmath.pi / 16
    expected = [float(value) for value in (k, e, b, c)]
    found = [*_first_and_second(kc), *_associated(kc)]
    assert expected == pytest.approx(found, rel=8 * 2.3e-16, abs=0.0)
    for p in (1e-8, 0.02, 0.7, 3.0):
        pi = float(mpmath.ellippi(1 - mpmath.mpf(p), m))
        assert pi == pytest.approx(_third(kc, p, 1.0, 1.0), rel=8 * 2.3e-16, abs=0.0)


def test_integrals_agree_with_scipy() -> None:
    """ellipkm1 takes 1 - m, so that it is good near m = 1 too."""
    found = np.array([_first_and_second(kc) for kc in COMPLEMENTS])
    assert ellipkm1(COMPLEMENTS**2) == pytest.approx(found[:, 0], rel=2e-15, abs=0.0)
    assert ellipe(1.0 - COMPLEMENTS**2) == pytest.approx(found[:, 1], rel=2e-15, abs=0.0)


def test_general_integral_agrees_with_quadrature() -> None:
    """Its definition, integrated by mpmath."""
    kc, p, a, b = 0.3, 0.6, -1.2, 0.4

    def integrand(t: mpmath.mpf) -> mpmath.mpf:
        c2, s2 = mpmath.cos(t) ** 2, mpmath.sin(t) ** 2
        return (a * c2 + b * s2) / ((c2 + p * s2) * mpmath.sqrt(c2 + kc**2 * s2))

    with mpmath.workdps(20):
        expected = float(mpmath.quad(integrand, [0, mpmath.pi / 2]))
    assert expected == pytest.approx(_third(kc, p, a, b), rel=1e-14, abs=0.0)


def test_integrals_end_at_their_limits_and_with_numbers_that_are_none() -> None:
    """No iteration goes on for ever."""
    assert (math.inf, 1.0) == _first_and_second(0.0)
    assert (1.0, math.inf) == _associated(0.0)
    assert math.inf == _third(0.0, 0.5, 1.0, 1.0)
    assert np.all(np.isnan([*_first_and_second(math.nan), *_associated(math.nan)]))
    assert np.all(np.isnan([_third(math.nan, 0.5, 1.0, 1.0), _third(0.5, math.nan, 1.0, 1.0)]))
    assert not math.isfinite(_associated(math.inf)[1])
    near = math.log(4.0) + 300.0 * math.log(10.0)  # K -> ln(4/kc)
    assert near == pytest.approx(_first_and_second(1e-300)[0], rel=1e-14, abs=0.0)
