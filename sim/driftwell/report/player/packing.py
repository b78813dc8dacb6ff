"""Arrays as text in a page, and places as integers of 16 bits.

Each charge's places are counted along each axis in 65534ths of the length it covers itself along
that axis, so that one charge that flies far away costs the others nothing: no place shown is
farther from the recorded one than 1/131068 of that length.
"""

from __future__ import annotations

import json
from base64 import b64encode
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.constants import SPEED_OF_LIGHT

Floats = NDArray[np.float64]

STEPS = 65534
"""Steps over a charge's own span; one number more says that it is not there."""
SHADES = 254
KINDS = {"u1": "<u1", "i1": "<i1", "u2": "<u2", "i4": "<i4", "f4": "<f4", "f8": "<f8"}


def block(values: ArrayLike, kind: str) -> dict[str, str]:
    """An array for the page: its kind of number, and its bytes, little-endian, as base64."""
    array = np.ascontiguousarray(values, dtype=KINDS[kind])
    return {"kind": kind, "bytes": b64encode(array.tobytes()).decode("ascii")}


def page_json(value: Any) -> str:
    """JSON that can stand in a script element: nothing in it ends the element or the line."""
    text = json.dumps(value, ensure_ascii=True, allow_nan=False, separators=(",", ":"))
    for sign in "<>&":
        text = text.replace(sign, f"\\u{ord(sign):04x}")
    return text


@dataclass(frozen=True, slots=True)
class Quantised:
    """Places as integers.

    number : (n, k, 3) uint16, 65535 where there is none; low, span : (n, 3) m
    """

    number: NDArray[np.uint16]
    low: Floats
    span: Floats


def quantised(places: Floats) -> Quantised:
    """Places (n, k, 3), m, in parts of what each charge covers."""
    known = np.isfinite(places)
    low = np.where(known, places, np.inf).min(axis=1)
    high = np.where(known, places, -np.inf).max(axis=1)
    some = np.isfinite(low)
    low, span = np.where(some, low, 0.0), np.where(some, high - low, 0.0)
    part = (places - low[:, None]) / np.where(span > 0.0, span, 1.0)[:, None]
    number = np.where(known, np.rint(np.where(known, part, 0.0) * STEPS), STEPS + 1)
    return Quantised(number.astype(np.uint16), low, span)


def kinetic_energies(velocity: Floats, mass: Floats) -> Floats:
    """Of one real particle, J: velocity (n, k, 3) proper, m/s; mass (n,) kg.

    (gamma - 1) m c^2 = m u^2 / (1 + gamma), without cancellation.
    """
    square = np.sum(velocity**2, axis=2)
    gamma = np.sqrt(1.0 + square / SPEED_OF_LIGHT**2)
    return np.asarray(mass[:, None] * square / (1.0 + gamma))


def speeds(velocity: Floats) -> Floats:
    """m/s, of proper velocities (n, k, 3): u / gamma."""
    proper = np.sqrt(np.sum(velocity**2, axis=2))
    return np.asarray(proper / np.hypot(1.0, proper / SPEED_OF_LIGHT))


@dataclass(frozen=True, slots=True)
class Shaded:
    """Values in 254 steps from `low` to `high`; 255 where there is none."""

    number: NDArray[np.uint8]
    low: float
    high: float


def shaded(values: Floats) -> Shaded:
    """Values in steps of colour; the few lowest and highest are shown at the ends."""
    known = np.isfinite(values)
    if not known.any():
        return Shaded(np.full(values.shape, SHADES + 1, np.uint8), 0.0, 0.0)
    low, high = (float(x) for x in np.quantile(values[known], (0.005, 0.995)))
    if not high > low:
        low, high = float(values[known].min()), float(values[known].max())
    part = np.clip((np.where(known, values, low) - low) / ((high - low) or 1.0), 0.0, 1.0)
    number = np.where(known, np.rint(part * SHADES), SHADES + 1)
    return Shaded(number.astype(np.uint8), low, high)
