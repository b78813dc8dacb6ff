"""The table of usual units says to the last bit what the units library says."""

from __future__ import annotations

from decimal import Decimal

import pytest

from driftwell.forms import units
from driftwell.forms.usual_units import USUAL


def test_every_usual_unit_has_the_factor_of_the_units_library(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(units, "USUAL", {})
    asked = units.to_si.__wrapped__
    for (unit, si_unit), factor in USUAL.items():
        assert (factor, Decimal(0)) == asked(unit, si_unit), unit


def test_a_unit_that_is_not_usual_or_of_another_dimension_is_left_to_the_library() -> None:
    assert Decimal("1E-10") == units.to_si("angstrom", "m")[0]
    with pytest.raises(ValueError, match="a unit of length"):
        units.to_si("mm", "s")
