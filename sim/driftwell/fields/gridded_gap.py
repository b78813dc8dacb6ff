"""Uniform field between two ideal grids, and none outside: an acceleration gap.

    phi(x, t) = V(t) min(max(s / d, 0), 1),    s = n . (x - centre)                          (1)

with n the unit vector of `along` and d the length. The grids are thin, endless and let everything
pass. The potential is continuous across them, the force is not: the step of length h that passes
one errs in energy by up to half of v h times the jump of the force, of first order in the step.

References
----------
W. C. Wiley and I. H. McLaren, Rev. Sci. Instrum. 26 (1955) 1150 (gaps of this kind in a source).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.forms import Direction, Length, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    VoltageWave,
    frequency_scale,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import kernel

GRIDDED_GAP = 74


class GriddedGap(FieldForm):
    """A uniform field between two ideal grids, the first of them through `centre`."""

    kind: Literal["gridded-gap"]
    voltage: VoltageWave = key(
        "potential of the second grid and all beyond it; the first is at zero", example="-200 V"
    )
    length: Positive[Length] = key(
        "distance between the grids; a step should cover far less, for the one that passes a grid "
        "errs in energy by up to half its way times the jump of the field",
        example="10 mm",
    )
    along: Direction = key(
        "direction from the first grid to the second; any length but zero",
        default=(0.0, 0.0, 1.0),
    )

    def waveform(self) -> AnyWaveform:
        return self.voltage

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            GRIDDED_GAP,
            (*self.centre, *self.along, self.length),
            packed_waveform(self.voltage),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The drive's, and that of a crossing: from grid to grid, from rest at the first."""
        pull = abs(body.charge_to_mass) * largest_value(self.voltage)
        crossing = 2.0 * math.pi * math.sqrt(0.5 * pull) / self.length
        drive = 2.0 * math.pi * frequency_scale(self.voltage)
        return {name: rate for name, rate in (("crossing", crossing), ("drive", drive)) if rate}

    def words(self) -> str:
        direction = ", ".join(f"{component:.6g}" for component in self.along)
        return (
            f"uniform field in a gap of {spelled(self.length, 'm')} between two ideal grids along "
            f"({direction}), {waveform_words(self.voltage, 'V')}{self.where()}"
        )


@kernel
def gridded_gap(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E of (1); return the sum of charge times phi/V; p = centre, n, d."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    inverse = 1.0 / p[6]
    push = -w * inverse
    total = 0.0
    for i in range(first, last):
        s = p[3] * (x[i] - p[0]) + p[4] * (y[i] - p[1]) + p[5] * (z[i] - p[2])
        part = s * inverse
        if part >= 1.0:
            total += charge[i]
        elif part > 0.0:
            ex[i] += push * p[3]
            ey[i] += push * p[4]
            ez[i] += push * p[5]
            total += charge[i] * part
    return total
