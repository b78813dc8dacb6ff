"""What a user should know of a run before it begins: frames, images left out, images that hold.

A charge softened within the length e is drawn back to a plane by its own image with

    E_own(d) = |Q|/(4 pi eps0) 2d/(4 d^2 + e^2)^(3/2)  <=  2/27^(1/2) |Q|/(4 pi eps0 e^2)        (1)

at the height d above it. Q is all that a simulated charge stands for, so the pull grows with the
weight, and where it is more than the field that draws at the surface no charge leaves.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import partial

import numpy as np
from numpy.typing import NDArray

from driftwell.assembly.parts import Assembly
from driftwell.constants import COULOMB_CONSTANT
from driftwell.fields.evaluation import evaluate
from driftwell.forms import spelled
from driftwell.geometry.distance import distances
from driftwell.images.form import ClosedForm, MirrorForm, lost_part
from driftwell.images.importance import importance, remark
from driftwell.scenario.conductors import Conductors

HELD = 0.5
"""The share of the drawing field from which an own image's pull is spoken of."""
_STEEPEST = 2.0 / math.sqrt(27.0)
_TOLD = 1e-4
"""The part of an image force whose loss is put in figures."""
_SAMPLE = 64
"""So many births of a source are looked at."""


def remarks(parts: Assembly) -> Iterator[str]:
    """All that is to be said, a sentence or a few each."""
    yield from filter(None, (parts.frame_remark(), _of_images(parts)))
    yield from _of_closest(parts)
    yield from _of_own_images(parts)


def _of_images(parts: Assembly) -> str | None:
    """What is to be said of images that are left out, or taken without need; None: nothing."""
    form = parts.scenario.images
    if isinstance(form, ClosedForm):
        distance = partial(_distance_from, form)
    elif parts.conductors.names:
        distance = partial(_distance_between, parts.conductors)
    else:
        return None
    estimates = []
    for cloud in parts.clouds:
        if cloud.emitted:
            continue
        own = parts.particles.kept(parts.particles.cloud == cloud.index)
        estimates.append(
            importance(
                cloud.name,
                own.position,
                own.charge * own.weight,
                own.mass * own.weight,
                distance,
                parts.scenario.duration,
            )
        )
    return remark(estimates, form is not None)


def _of_closest(parts: Assembly) -> Iterator[str]:
    """What came of ``closest = "auto"``, and what it takes of the images' force at the start."""
    form, softening = parts.scenario.images, parts.scenario.coulomb.softening
    if not isinstance(form, MirrorForm) or form.closest != "auto" or parts.closest <= 0.0:
        return
    blur = 2.0 * parts.closest
    if blur <= softening:
        yield (
            '[images] closest = "auto": no more than half of coulomb.softening, '
            f"{spelled(parts.closest, 'm', 3)}, is needed; images are as blurred as their charges."
        )
        return
    kick = parts.choice.step * parts.scenario.stepping.coulomb_every
    mirrored = np.maximum(form.mirrored(parts.everyone.position), 0.0)
    part = float(np.median(lost_part(mirrored, blur, softening)))
    weaker = "" if part < _TOLD else f"; where half of them begin it is {_percent(part)} too weak"
    yield (
        f'[images] closest = "auto": the images\' force stops growing '
        f"{spelled(parts.closest, 'm', 3)} from the conductor, which is what steps of "
        f"{spelled(kick, 's', 3)} can follow of these charges{weaker}."
    )


def _percent(part: float) -> str:
    return f"{100.0 * part:.2g} %"


def _of_own_images(parts: Assembly) -> Iterator[str]:
    """Of each source whose charges' own images hold them by (1); see the sources' surfaces."""
    form, softening = parts.scenario.images, parts.scenario.coulomb.softening
    if parts.unborn is None or not isinstance(form, ClosedForm) or softening <= 0.0:
        return
    packed = [] if parts.acting is None else parts.acting.packed()
    born = parts.unborn.particles
    for cloud in parts.clouds:
        own = np.flatnonzero(born.cloud == cloud.index)[:_SAMPLE]
        own = own[form.depth(born.position[:, own]) < softening]
        place, normal = born.position[:, own], parts.unborn.normal[:, own]
        if not normal.any():
            continue
        field = evaluate(
            parts.scenario.field, parts.bodies, place.T, float(born.birth_time[own[0]]), more=packed
        )
        charge = abs(cloud.charge) * cloud.weight
        drawing = float(np.median((field.electric.T * normal).sum(axis=0))) * np.sign(cloud.charge)
        pull = _STEEPEST * COULOMB_CONSTANT * charge / softening**2
        if pull <= HELD * drawing:
            continue
        against = (
            f"{pull / drawing:.0%} of the field that draws there"
            if drawing > 0.0
            else "and no field draws there"
        )
        yield (
            f'A simulated charge of source "{cloud.name}" stands for {cloud.weight:.6g}: its own '
            f"image pulls it back to the surface with up to {spelled(pull, 'V/m', 3)}, {against} "
            "as the first are born. It is held longer than a real charge, or for good. Give the "
            "source a smaller `weight`, or [coulomb] a longer `softening`."
        )


def _distance_from(form: ClosedForm, points: NDArray[np.float64]) -> NDArray[np.float64]:
    """Distances of points (n, 3) from the one conductor, m."""
    return form.depth(points.T)


def _distance_between(conductors: Conductors, points: NDArray[np.float64]) -> NDArray[np.float64]:
    """Distances of points (n, 3) from the nearest electrode, m."""
    return distances(conductors.table, points)[0]
