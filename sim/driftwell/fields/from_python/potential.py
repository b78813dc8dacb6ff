"""An electric field that a user gives as a function, from Python only.

    phi(x, t) = w(t) g(x),    E = -w grad g                                                 (1)

The function gives g and -grad g together, so that the ledger has what it needs; before a run the
two are compared at the charges' places (:meth:`PotentialFromPython.disagreement`).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import PackedField, Role
from driftwell.fields.from_python.form import FieldFromPython, differences, local, nudge
from driftwell.fields.from_python.functions import Gives
from driftwell.fields.rates import linear_rates
from driftwell.forms.body import Body
from driftwell.forms.waveforms import frequency_scale, packed_waveform

Floats = NDArray[np.float64]

POTENTIAL_FROM_PYTHON = 75
AGREES = 1e-6
"""Difference of force and slope, as part of the largest force, that is rounding and differences."""
_STEADY = 3.0
"""Times what differences of half the step differ by: how far their slope may be off."""


class PotentialFromPython(FieldFromPython):
    """A potential, and the field that is minus its gradient, as a function given from Python."""

    kind: Literal["python-potential"]

    def gives(self) -> Gives:
        return "potential"

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        unused = (0.0,) * 11
        return PackedField(
            Role.ELECTRIC,
            POTENTIAL_FROM_PYTHON,
            (*self.centre, *unused, *self.given().addresses()),
            packed_waveform(self.scale),
            self.numbers(),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        drive = 2.0 * math.pi * frequency_scale(self.scale)
        return {"drive": drive} if drive else {}

    def rates_at(self, body: Body, position: Floats) -> dict[str, float]:
        """By the field's steepest change at the places."""
        place = local(self.centre, position)
        if place.shape[1] == 0:
            return {}
        found, data = self.given(), self.numbers()
        slopes = differences(lambda at: found.potential(at, data)[1], place, nudge(place))
        slopes = slopes.transpose(1, 0, 2)  # (n, 3, 3)
        whole = np.nan_to_num(0.5 * (slopes + slopes.transpose(0, 2, 1)))
        steepest = float(np.abs(np.linalg.eigvalsh(whole)).max())
        return linear_rates({"oscillation": abs(body.charge_to_mass) * steepest}, self.scale)

    def disagreement(self, position: Floats) -> str:
        """What is wrong with the function at places (3, n), m, in words; empty where nothing is.

        Central differences of order 4 are compared with the force, and with those of half the step,
        which say how far they can be trusted.
        """
        place = local(self.centre, position)
        found, data = self.given(), self.numbers()
        g, field = found.potential(place, data)
        bad = ~(np.isfinite(g) & np.isfinite(field).all(axis=0))
        if bad.any():
            return f"gives no number at {_place(place[:, int(np.argmax(bad))])}"
        step = nudge(place)
        slope, finer = (
            differences(lambda at: found.potential(at, data)[0], place, each)
            for each in (step, 0.5 * step)
        )
        largest = float(np.abs(field).max(initial=0.0))
        rounding = 1e-14 * float(np.abs(g).max(initial=0.0)) / step
        allowed = AGREES * largest + rounding + _STEADY * np.abs(slope - finer)
        off = np.abs(field.T + finer) - allowed
        if not np.isfinite(finer).all() or not (off > 0.0).any():
            return ""
        n, axis = np.unravel_index(int(np.argmax(off)), off.shape)
        return (
            f"its force is not minus the gradient of its potential: at {_place(place[:, n])} it "
            f"gives E{'xyz'[axis]} = {field[axis, n]:.6g} V/m, and its potential falls by "
            f"{-finer[n, axis]:.6g} V/m along {'xyz'[axis]}. The ledger would not close; mend the "
            "function (signs, factors, units)."
        )


def _place(place: Floats) -> str:
    return f"({', '.join(f'{x:.6g}' for x in place)}) m"
