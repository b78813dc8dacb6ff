"""A magnetic field that a user gives as a function, from Python only.

    B(x) = w b(x),    div b = 0                                                              (1)

It must be constant in time: what its change would induce is not known from b. Before a run the
divergence is looked at where charges begin (:meth:`FluxFromPython.disagreement`).
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import PackedField, Role
from driftwell.fields.from_python.form import FieldFromPython, differences, local, nudge
from driftwell.fields.from_python.functions import Gives
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveforms import largest_value, packed_waveform

Floats = NDArray[np.float64]

FLUX_FROM_PYTHON = 76
SOURCES = 1e-4
"""Divergence, as part of the largest slope, that is rounding and differences."""


class FluxFromPython(FieldFromPython):
    """A magnetic field, constant in time, as a function given from Python."""

    kind: Literal["python-flux"]

    def gives(self) -> Gives:
        return "flux"

    def faults(self) -> list[Fault]:
        if not isinstance(self.scale, WaveformForm):
            return []
        text = (
            "must be constant: what a changing magnetic field induces is not known from the field "
            "alone"
        )
        return [Fault(("scale",), "", text)]

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        unused = (0.0,) * 11
        return PackedField(
            Role.MAGNETIC,
            FLUX_FROM_PYTHON,
            (*self.centre, *unused, *self.given().addresses()),
            packed_waveform(self.scale),
            self.numbers(),
        )

    def rates_at(self, body: Body, position: Floats) -> dict[str, float]:
        """The cyclotron motion in the largest field at the places."""
        place = local(self.centre, position)
        if place.shape[1] == 0:
            return {}
        b = np.nan_to_num(self.given().flux(place, self.numbers()))
        largest = float(np.sqrt((b**2).sum(axis=0)).max()) * largest_value(self.scale)
        return {"cyclotron": abs(body.charge_to_mass) * largest} if largest else {}

    def disagreement(self, position: Floats) -> str:
        """What is wrong with the function at places (3, n), m, in words; empty where nothing is."""
        place = local(self.centre, position)
        found, data = self.given(), self.numbers()
        b = found.flux(place, data)
        bad = ~np.isfinite(b).all(axis=0)
        if bad.any():
            at = ", ".join(f"{x:.6g}" for x in place[:, int(np.argmax(bad))])
            return f"gives no number at ({at}) m"
        step = nudge(place)
        slopes = differences(lambda at: found.flux(at, data), place, step)  # (3, n, 3)
        divergence = np.abs(slopes[0, :, 0] + slopes[1, :, 1] + slopes[2, :, 2])
        rounding = 1e-14 * float(np.abs(b).max(initial=0.0)) / step
        largest = float(np.nan_to_num(np.abs(slopes)).max(initial=0.0))
        if not (divergence > SOURCES * largest + 10.0 * rounding).any():
            return ""
        return (
            f"its divergence is up to {np.nanmax(divergence):.3g} T/m where its slopes are at most "
            f"{largest:.3g} T/m; a magnetic field has no sources. Mend the function (signs, "
            "factors, units)."
        )
