"""A circular current loop, thin against all distances.

With rho and z counted from the centre along and away from the axis, s^2 = (a + rho)^2 + z^2 and
d = (a - rho)^2 + z^2, m = 4 a rho/s^2 and kc^2 = d/s^2,

    A_phi = 4 mu0 I a^2 rho C / (pi s^3)                                                        (1)
    B_rho = 4 mu0 I a^2 rho z (B - kc^2 C) / (pi s^3 d)                                         (2)
    B_z   = (mu0 I a^2/(pi s^3)) (2 (a^2 + z^2 - rho^2) B / d + 4 rho (a + rho) C / s^2)        (3)

with the integrals B and C of kernels/elliptic.py. These are the textbook's combinations of K and
E, put together so that nothing cancels near the axis or far away; the axis is no special case. I
is the current times the turns; positive, it turns right-handed about `along`. On the wire itself
the field is infinite: a charge there stops the run as not finite.

References
----------
W. R. Smythe, Static and Dynamic Electricity, 3rd ed. (1968), sec. 7.10 (from memory).
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 5.5 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.constants import MAGNETIC_CONSTANT
from driftwell.fields.form import PackedField, Role
from driftwell.fields.magnets.axis import about_axis
from driftwell.fields.magnets.form import AboutAxis, turning_rates
from driftwell.forms import Length, Positive, Real, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    CurrentWave,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import kernel
from driftwell.kernels.elliptic import associated

CURRENT_LOOP = 64


class CurrentLoop(AboutAxis):
    """Circular coil whose winding is thin against its radius, as one loop."""

    kind: Literal["current-loop"]
    radius: Positive[Length] = key("radius of the loop, a", example="50 mm")
    current: CurrentWave = key(
        "current in the wire; positive turns right-handed about `along`", example="10 A"
    )
    turns: Positive[Real] = key("number of turns, all taken at `radius`", default=1.0)

    def waveform(self) -> AnyWaveform:
        return self.current

    def strongest(self) -> float:
        """The field at the centre, T; it grows without end towards the wire."""
        amperes = self.turns * largest_value(self.current)
        return MAGNETIC_CONSTANT * amperes / (2.0 * self.radius)

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        strength = MAGNETIC_CONSTANT * self.turns / math.pi
        return PackedField(
            Role.MAGNETIC,
            CURRENT_LOOP,
            (*self.centre, *self.along, self.radius, strength),
            packed_waveform(self.current),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that at the centre, the fastest on the axis.

        In the plane of the loop the field is 1.3 times that at half the radius, 2.9 times at 0.9:
        give the step where charges come near the wire.
        """
        return turning_rates(body, self.strongest(), self.current)

    def words(self) -> str:
        turns = f"{self.turns:.6g} turns, " if self.turns != 1.0 else ""
        return (
            f"current loop{self.axis_words()} of radius {spelled(self.radius, 'm')}, {turns}"
            f"{waveform_words(self.current, 'A')}{self.where()}"
        )


@kernel
def current_loop(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), axis (3), a, mu0/pi times turns."""
    a, strength = p[6], w * p[7]
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        wide, thin = a + rho, a - rho
        s2 = wide * wide + z * z
        d = thin * thin + z * z
        b, c = associated(math.sqrt(d / s2))
        scale = strength * a * a / (s2 * math.sqrt(s2))
        away = scale * 4.0 * z * (b / d - c / s2)  # (2)
        inside = a * a + z * z - rho * rho
        up = scale * (2.0 * inside * b / d + 4.0 * rho * wide * c / s2)  # (3)
        out_b[0, i] += up * p[3] + away * ax
        out_b[1, i] += up * p[4] + away * ay
        out_b[2, i] += up * p[5] + away * az


@kernel
def current_loop_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E_phi = -dA_phi/dt to `out_e`; p as in :func:`current_loop`."""
    a, strength = p[6], rate * p[7]
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        wide, thin = a + rho, a - rho
        s2 = wide * wide + z * z
        _, c = associated(math.sqrt((thin * thin + z * z) / s2))
        around = 4.0 * strength * a * a * c / (s2 * math.sqrt(s2))  # (1) over rho
        out_e[0, i] -= around * (p[4] * az - p[5] * ay)
        out_e[1, i] -= around * (p[5] * ax - p[3] * az)
        out_e[2, i] -= around * (p[3] * ay - p[4] * ax)
