"""What the splittings must be to be symmetric in time and of their order."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.stepping.form import Stepping
from driftwell.stepping.schemes import ORDER, SCHEMES


@pytest.mark.parametrize("name", SCHEMES)
def test_kicks_and_drifts_read_the_same_backwards_and_fill_the_step(name: str) -> None:
    """Palindromes whose parts add up to one; a kick before and after every drift."""
    scheme = SCHEMES[name]
    assert len(scheme.kick) == len(scheme.drift) + 1 == len(scheme.node)
    assert list(scheme.kick) == pytest.approx(list(scheme.kick[::-1]), rel=1e-15, abs=0.0)
    assert list(scheme.drift) == list(scheme.drift[::-1])
    assert 1.0 == pytest.approx(scheme.kick.sum(), abs=1e-15)
    assert 1.0 == pytest.approx(scheme.drift.sum(), abs=1e-15)


@pytest.mark.parametrize("name", SCHEMES)
def test_the_forces_are_taken_when_their_kick_is_due(name: str) -> None:
    """A kick's node is the part of the step drifted before it; the last is the end exactly."""
    scheme = SCHEMES[name]
    assert 0.0 == scheme.node[0]
    assert 1.0 == scheme.node[-1]
    assert list(np.cumsum(scheme.drift)) == pytest.approx(list(scheme.node[1:]), abs=1e-15)


@pytest.mark.parametrize("name", SCHEMES)
def test_the_parts_cancel_the_errors_of_lower_orders(name: str) -> None:
    """Sums of the odd powers of the parts vanish: of cubes for order 4, of fifths for order 6.

    M. Suzuki, Phys. Lett. A 146 (1990) 319; H. Yoshida, Phys. Lett. A 150 (1990) 262, whose
    coefficients have 15 digits. One condition of order 6 is not a sum of powers: the fitted order
    in tests/order is the check of that.
    """
    drift = SCHEMES[name].drift
    for power in range(3, ORDER[name], 2):
        assert 0.0 == pytest.approx((drift**power).sum(), abs=1e-13)
    assert abs((drift ** (ORDER[name] + 1)).sum()) > 1e-4


def test_every_scheme_a_scenario_may_name_is_there() -> None:
    """And has an order."""
    options = Stepping.model_fields["scheme"].annotation.__args__
    assert set(options) == set(SCHEMES) == set(ORDER)
