"""How strongly a cloud's image in the nearest conductor pulls it, as one charge would be pulled.

plane, at the height d      E = |Q| / (16 pi eps0 d^2)                                    (1)
sphere of radius a, at s    E = (|Q| / (4 pi eps0)) a s / (a^2 - s^2)^2                   (2)
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.constants import COULOMB_CONSTANT
from driftwell.forms import spelled
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene
from driftwell.images.plane import PlaneImages
from driftwell.images.sphere import SphereImages

PLANE = Formula(
    "image force at a plane",
    "E = |Q|/(16 pi eps0 d^2)",
    "J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 2.1",
    "a cloud small against its height d above a grounded plane",
)
SPHERE = Formula(
    "image force in a sphere",
    "E = (|Q|/(4 pi eps0)) a s/(a^2 - s^2)^2",
    "J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 2.2",
    "a cloud small against its distance from a grounded sphere around it",
)
SMALL = 0.3
"""Rms size over the distance up to which a cloud is small."""


def in_sphere(charge: float, radius: float, away: float) -> float:
    """Equation (2), V/m."""
    return COULOMB_CONSTANT * abs(charge) * radius * away / (radius**2 - away**2) ** 2


def values(scene: Scene) -> Values:
    """Of every cloud, where such a conductor answers to it."""
    form = scene.scenario.images
    for group in scene.groups:
        middle = group.middle
        if isinstance(form, PlaneImages):
            height = float(form.depth(middle[:, None])[0])
            if height > 0.0:
                pull = COULOMB_CONSTANT * abs(group.charge) / (4.0 * height**2)
                yield _value(PLANE, group, pull, height)
        elif isinstance(form, SphereImages):
            away = float(np.linalg.norm(middle - np.array(form.centre)))
            if away < form.radius:
                pull = in_sphere(group.charge, form.radius, away)
                yield _value(SPHERE, group, pull, form.radius - away)


def _value(formula: Formula, group: Group, pull: float, away: float) -> HandValue:
    size = math.sqrt(sum(each**2 for each in group.size))
    inside = size < SMALL * away
    why = f"rms {spelled(size, 'm', 3)} large, {spelled(away, 'm', 3)} from the conductor"
    what = f"pull of the image {group.named}"
    return HandValue(formula, what, pull, "V/m", inside, why)


KIND = HandKind((PLANE, SPHERE), values)
