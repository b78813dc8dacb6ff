"""A flying cloud or source as a round beam: current, perveance, edge, emittance, length.

    I = |Q| v / L,   K = 2 I / (I0 (beta gamma)^3),   I0 = 4 pi eps0 m c^3 / |q|              (1)

L is the length of the evenly filled bunch with the same rms length. Edge and emittance are those
of the uniform round beam with the same moments: twice the rms radius along one axis, four times
the rms emittance.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from driftwell.constants import ELECTRIC_CONSTANT, SPEED_OF_LIGHT
from driftwell.forms.body import Body
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene
from driftwell.walls.plane import PlaneDetector

LONG = 20.0
"""Length over radius from which a bunch is a beam, whose ends count little."""
STRAIGHT = 0.05
"""Spread of directions over which a cloud is no beam, rad rms."""


@dataclass(frozen=True, slots=True)
class Beam:
    """A round beam at the start.

    axis : 0, 1 or 2, along which it flies; sense : +1 or -1
    edge, slope : m and rad, of the envelope; emittance : m rad, of the edge
    length : m; perveance : K of (1)
    """

    group: Group
    axis: int
    sense: float
    edge: float
    slope: float
    emittance: float
    length: float
    current: float
    perveance: float


def generalised_perveance(current: float, body: Body, momentum: float) -> float:
    """K of equation (1); momentum : beta gamma."""
    unit = 4.0 * math.pi * ELECTRIC_CONSTANT * body.mass * SPEED_OF_LIGHT**3 / abs(body.charge)
    return 2.0 * current / unit / momentum**3


def beam_of(group: Group) -> Beam | None:
    """The beam that a cloud is; None where it does not fly along an axis, or has no length."""
    drift = group.drift
    speed = float(np.linalg.norm(drift))
    if speed == 0.0 or group.count < 2:
        return None
    axis = int(np.argmax(np.abs(drift)))
    if abs(drift[axis]) < 0.999 * speed:
        return None
    across = [k for k in range(3) if k != axis]
    place = group.position[across] - group.position[across].mean(axis=1, keepdims=True)
    slope = group.velocity[across] / group.velocity[axis]
    slope = slope - slope.mean(axis=1, keepdims=True)
    if not np.isfinite(slope).all() or float(slope.std()) > STRAIGHT:
        return None
    squares, cross, angles = (float(np.mean(each)) for each in (place**2, place * slope, slope**2))
    length = math.sqrt(12.0) * group.size[axis]
    if squares <= 0.0 or length <= 0.0:
        return None
    sizes = [group.size[k] for k in across]
    edge = 2.0 * math.sqrt(0.5 * (sizes[0] ** 2 + sizes[1] ** 2))
    emittance = 4.0 * math.sqrt(max(squares * angles - cross**2, 0.0))
    current = abs(group.charge) * group.speed / length
    return Beam(
        group,
        axis,
        math.copysign(1.0, drift[axis]),
        edge,
        edge * cross / squares,
        emittance,
        length,
        current,
        generalised_perveance(current, group.body, speed / SPEED_OF_LIGHT),
    )


def flight_to(beam: Beam, detector: PlaneDetector) -> float | None:
    """Distance from the beam's middle to a detector across its way, m; None where it misses it."""
    normal = np.array(detector.normal) / math.hypot(*detector.normal)
    if abs(normal[beam.axis]) < 0.999:
        return None
    middle = float(beam.group.middle[beam.axis])
    away = beam.sense * (detector.at[beam.axis] - middle)
    return away if away > 0.0 else None


def why_not_free(scene: Scene, beam: Beam, widest: float) -> list[str]:
    """Why the cloud is not a long beam by itself in free space; widest : its largest edge, m."""
    reasons = []
    if scene.scenario.field or scene.scenario.electrode:
        reasons.append("fields act on it")
    if scene.scenario.process:
        reasons.append("a gas or light acts on it")
    if not scene.alone(beam.group):
        off = scene.scenario.coulomb.method == "off"
        reasons.append("charges do not push each other" if off else "other charges are there")
    if scene.scenario.images is not None:
        reasons.append("images act on it")
    if beam.length < LONG * widest:
        ratio = beam.length / widest
        reasons.append(f"the bunch is {ratio:.2g} times as long as its radius: its ends count")
    return reasons
