"""A permanent magnet shaped as a rectangular block, magnetised uniformly in any direction.

With N the Newtonian potential of the block of unit density, and u, v, w the distances of a place
from the planes of its faces in its own axes, R the distance from a corner, s the corner's sign,

    d2N/dx2 = -sum s atan(v w / (u R)),    d2N/dx dy = sum s ln(w + R)                          (1)
    dN/dx   = sum s (v ln(w + R) + w ln(v + R) - u atan(v w / (u R)))                           (2)
    B = (grad grad N) J / (4 pi), and J more inside,    A = grad N x J / (4 pi)                 (3)

and so in turn; J is the remanence, mu0 times the magnetisation. The logarithms of both ends of an
edge of length L are taken together, as 2 artanh(L / (R1 + R2)), which holds everywhere but on the
edge itself, where the field is infinite. B includes the magnetisation inside; on a face it is the
mean of both sides. The remanence is the same everywhere and does not depend on the field: right
for hard magnets far from demagnetisation. Charges that reach the magnet are for a wall to stop.

References
----------
W. D. MacMillan, The Theory of the Potential (1930), sec. 43 (from memory): N of a block.
Z. J. Yang, T. H. Johansen, H. Bratsberg, G. Helgesen, A. T. Skjeltorp, Supercond. Sci. Technol. 3
(1990) 591 (from memory): the field of a uniformly magnetised block.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.magnets.form import turning_rates
from driftwell.forms import Angle, Direction, Length, NonNegative, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    MagneticFieldWave,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_kernel, kernel

MAGNET_BLOCK = 67


class MagnetBlock(FieldForm):
    """Uniformly magnetised rectangular block about `centre`."""

    kind: Literal["magnet-block"]
    size: tuple[Positive[Length], Positive[Length], Positive[Length]] = key(
        "lengths along the block's own x, y and z", example=["20 mm", "10 mm", "5 mm"]
    )
    remanence: MagneticFieldWave = key(
        "remanent flux density: mu0 times the magnetisation", example="1.2 T"
    )
    magnetised_along: Direction = key(
        "direction of the magnetisation in the block's own axes", default=(0.0, 0.0, 1.0)
    )
    rotation: tuple[Angle, Angle, Angle] = key(
        "turns of the block about x, then about y, then about z of the scenario",
        default=(0.0, 0.0, 0.0),
    )
    clearance: NonNegative[Length] = key(
        "distance from the magnet that charges keep; only the automatic step depends on it",
        default=0.0,
    )

    def waveform(self) -> AnyWaveform:
        return self.remanence

    def axes(self) -> NDArray[np.float64]:
        """The block's own x, y and z as rows, in the scenario's coordinates."""
        turned = np.eye(3)
        for axis, angle in enumerate(self.rotation):
            cosine, sine = math.cos(angle), math.sin(angle)
            turn = np.eye(3)
            i, j = (axis + 1) % 3, (axis + 2) % 3
            turn[i, i] = turn[j, j] = cosine
            turn[j, i], turn[i, j] = sine, -sine
            turned = turn @ turned
        return np.ascontiguousarray(turned.T)

    def strongest(self) -> float:
        """The field at the clearance, T, before the middle of the face where it is strongest."""
        found = []
        for axis, part in enumerate(self.magnetised_along):
            depth = self.size[axis]
            wide, high = self.size[(axis + 1) % 3], self.size[(axis + 2) % 3]
            near = _pole(wide, high, self.clearance) - _pole(wide, high, self.clearance + depth)
            found.append(abs(part) * near)
        return largest_value(self.remanence) * max(found)

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.MAGNETIC,
            MAGNET_BLOCK,
            (*self.centre, *(0.5 * length for length in self.size), *self.magnetised_along),
            packed_waveform(self.remanence),
            tuple(float(number) for number in self.axes().ravel()),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that before the middle of a face, at the `clearance`."""
        return turning_rates(body, self.strongest(), self.remanence)

    def words(self) -> str:
        size = " x ".join(spelled(length, "m") for length in self.size)
        direction = ", ".join(f"{component:.6g}" for component in self.magnetised_along)
        turned = ""
        if any(self.rotation):
            angles = ", ".join(f"{math.degrees(angle):.6g} deg" for angle in self.rotation)
            turned = f", turned by ({angles})"
        return (
            f"block magnet of {size} magnetised along ({direction}){turned}, remanence "
            f"{waveform_words(self.remanence, 'T')}{self.where()}"
        )


def _pole(wide: float, high: float, distance: float) -> float:
    """Field of a face of unit J, at a distance before its middle."""
    if distance == 0.0:
        return 0.5
    diagonal = math.sqrt(4.0 * distance**2 + wide**2 + high**2)
    return math.atan(wide * high / (2.0 * distance * diagonal)) / math.pi


@inner_kernel
def _angle(u: float, v: float, w: float, r: float) -> float:
    """atan(v w/(u R)); 0, the mean of both sides, where u = 0."""
    below = u * r
    return math.atan(v * w / below) if below != 0.0 else 0.0


@inner_kernel
def _angles(u: float, v0: float, v1: float, w0: float, w1: float, half: float) -> float:
    """Sum of s atan(v w/(u R)) over the corners of both faces across u."""
    total = 0.0
    for k in range(2):
        c = u + half if k == 0 else u - half
        r00 = math.sqrt(c * c + v0 * v0 + w0 * w0)
        r01 = math.sqrt(c * c + v0 * v0 + w1 * w1)
        r10 = math.sqrt(c * c + v1 * v1 + w0 * w0)
        r11 = math.sqrt(c * c + v1 * v1 + w1 * w1)
        face = _angle(c, v0, w0, r00) - _angle(c, v0, w1, r01)
        face += _angle(c, v1, w1, r11) - _angle(c, v1, w0, r10)
        total += face if k == 0 else -face
    return total


@inner_kernel
def _edge(v: float, w: float, low: float, high: float) -> float:
    """ln((u0 + R0)/(u1 + R1)) / 2 of an edge along u, v and w away; u = low - and high."""
    across = v * v + w * w
    ends = math.sqrt(low * low + across) + math.sqrt(high * high + across)
    return math.atanh((low - high) / ends)


@inner_kernel
def _edges(
    u0: float, u1: float, v0: float, v1: float, w0: float, w1: float
) -> tuple[float, float, float, float]:
    """Half the logarithms of the four edges along u: at v0 w0, v0 w1, v1 w0, v1 w1."""
    return (
        _edge(v0, w0, u0, u1),
        _edge(v0, w1, u0, u1),
        _edge(v1, w0, u0, u1),
        _edge(v1, w1, u0, u1),
    )


@kernel
def magnet_block(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), half sizes (3), unit magnetisation (3); data = axes (9).

    w is the remanence, T.
    """
    hx, hy, hz = p[3], p[4], p[5]
    scale = w / (4.0 * math.pi)
    mx, my, mz = scale * p[6], scale * p[7], scale * p[8]
    for i in range(first, last):
        dx, dy, dz = position[0, i] - p[0], position[1, i] - p[1], position[2, i] - p[2]
        x = data[0] * dx + data[1] * dy + data[2] * dz
        y = data[3] * dx + data[4] * dy + data[5] * dz
        z = data[6] * dx + data[7] * dy + data[8] * dz
        x0, x1, y0, y1, z0, z1 = x + hx, x - hx, y + hy, y - hy, z + hz, z - hz
        xx = -_angles(x, y0, y1, z0, z1, hx)
        yy = -_angles(y, z0, z1, x0, x1, hy)
        zz = -_angles(z, x0, x1, y0, y1, hz)
        a, b, c, d = _edges(x0, x1, y0, y1, z0, z1)
        yz = 2.0 * (a - b - c + d)
        a, b, c, d = _edges(y0, y1, z0, z1, x0, x1)
        zx = 2.0 * (a - b - c + d)
        a, b, c, d = _edges(z0, z1, x0, x1, y0, y1)
        xy = 2.0 * (a - b - c + d)
        inside = -(xx + yy + zz)  # Poisson's equation: 4 pi inside, 0 outside
        bx = (xx + inside) * mx + xy * my + zx * mz
        by = xy * mx + (yy + inside) * my + yz * mz
        bz = zx * mx + yz * my + (zz + inside) * mz
        out_b[0, i] += data[0] * bx + data[3] * by + data[6] * bz
        out_b[1, i] += data[1] * bx + data[4] * by + data[7] * bz
        out_b[2, i] += data[2] * bx + data[5] * by + data[8] * bz


@kernel
def magnet_block_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E = -dA/dt to `out_e`; p and data as in :func:`magnet_block`."""
    hx, hy, hz = p[3], p[4], p[5]
    scale = rate / (4.0 * math.pi)
    mx, my, mz = scale * p[6], scale * p[7], scale * p[8]
    for i in range(first, last):
        dx, dy, dz = position[0, i] - p[0], position[1, i] - p[1], position[2, i] - p[2]
        x = data[0] * dx + data[1] * dy + data[2] * dz
        y = data[3] * dx + data[4] * dy + data[5] * dz
        z = data[6] * dx + data[7] * dy + data[8] * dz
        gx = _pull(x, y, z, hx, hy, hz)
        gy = _pull(y, z, x, hy, hz, hx)
        gz = _pull(z, x, y, hz, hx, hy)
        ex, ey, ez = gz * my - gy * mz, gx * mz - gz * mx, gy * mx - gx * my
        out_e[0, i] += data[0] * ex + data[3] * ey + data[6] * ez
        out_e[1, i] += data[1] * ex + data[4] * ey + data[7] * ez
        out_e[2, i] += data[2] * ex + data[5] * ey + data[8] * ez


@inner_kernel
def _pull(u: float, v: float, w: float, hu: float, hv: float, hw: float) -> float:
    """dN/du, equation (2)."""
    u0, u1, v0, v1, w0, w1 = u + hu, u - hu, v + hv, v - hv, w + hw, w - hw
    a, b, c, d = _edges(w0, w1, u0, u1, v0, v1)
    total = 2.0 * (v0 * (a - c) - v1 * (b - d))
    a, b, c, d = _edges(v0, v1, w0, w1, u0, u1)
    total += 2.0 * (w0 * (a - b) - w1 * (c - d))
    for k in range(2):
        c = u0 if k == 0 else u1
        if c == 0.0:
            continue
        face = math.atan(v0 * w0 / (c * math.sqrt(c * c + v0 * v0 + w0 * w0)))
        face -= math.atan(v0 * w1 / (c * math.sqrt(c * c + v0 * v0 + w1 * w1)))
        face -= math.atan(v1 * w0 / (c * math.sqrt(c * c + v1 * v1 + w0 * w0)))
        face += math.atan(v1 * w1 / (c * math.sqrt(c * c + v1 * v1 + w1 * w1)))
        total -= c * face if k == 0 else -c * face
    return total
