"""Whether images were weakened where charges were, by the length within which their force stops.

With `closest = "auto"` that length is what steps can follow (images/form.py): it grows with the
step, and with the charge a simulated one stands for. The force on charge i,

    E_i = K sum_j q_j (D_i + D_j) / 2 / (|x_i - x_j|^2 + D_i D_j + s^2)^(3/2)                (1)

is that of a plane, exactly, and of the nearer plane of a gap; of a sphere nearly. It is taken with
s = 2 c and with the pairs' own softening, which is the law that was asked for. It is told only of
clouds on which images matter at all (images/importance.py).
"""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.forms import spelled
from driftwell.images.form import MirrorForm
from driftwell.images.importance import importance
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject
from driftwell.particles.state import Particles

Floats = NDArray[np.float64]

LIMIT = 0.01
"""Of the images' force, the part that is lost on the average."""
_LOOKED_AT = 300


def images_weakened(subject: Subject) -> Iterator[Finding]:
    """The cloud and the time at which most of the images' force was lost."""
    header, scenario = subject.run.header, subject.scenario
    form = None if scenario is None else scenario.images
    blur, softening = 2.0 * header.images_closest, header.softening
    if not isinstance(form, MirrorForm) or blur <= softening:
        return
    worst, when, name = 0.0, 0.0, ""
    for k, look in enumerate(subject.looks):
        span = look.time - subject.looks[k - 1].time if k else header.duration
        for cloud in header.clouds:
            own = subject.named(look, cloud)
            if not _matters(form, cloud, own, span):
                continue
            lost = part_lost(form, own, blur, softening)
            if lost > worst:
                worst, when, name = lost, look.time, cloud.name
    if worst <= LIMIT:
        return
    wanted = header.images_closest * math.sqrt(LIMIT / worst)
    automatic = isinstance(form.closest, str)
    stated = ' (images.closest = "auto")' if automatic else ""
    shorter = (
        f"charges nearer than {about(header.images_closest, 'm')} then are not followed on; "
        "or take a shorter step, with which the distance becomes shorter by itself."
        if automatic
        else "take a step that follows charges there."
    )
    yield Finding(
        "images weakened near the conductor",
        f'at t = {spelled(when, "s", 3)} "{name}" was so near the conductor that its images, whose '
        f"force stops growing within {spelled(header.images_closest, 'm', 3)} of it{stated}, "
        f"pulled {worst:.1%} too weakly on the average; {LIMIT:.0%} may be lost",
        worst,
        LIMIT,
        f'Set images.closest = "{about(wanted, "m")}": {shorter}',
    )


def part_lost(form: MirrorForm, own: Particles, blur: float, softening: float) -> float:
    """Mean part of the force (1) on charges that the length `blur` takes, of 1."""
    n = len(own)
    chosen = np.unique(np.linspace(0, n - 1, min(n, _LOOKED_AT)).round().astype(np.int64))
    charge = (own.charge * own.weight)[chosen]
    place = own.position[:, chosen]
    mirrored = form.mirrored(place)
    there = mirrored > 0.0
    charge, place, mirrored = charge[there], place[:, there].T, mirrored[there]
    if not charge.any():
        return 0.0
    apart = np.sum((place[:, None, :] - place[None, :, :]) ** 2, axis=2)
    square = apart + mirrored[:, None] * mirrored[None, :]
    towards = 0.5 * (mirrored[:, None] + mirrored[None, :])
    asked = (towards / (square + softening**2) ** 1.5) @ charge
    taken = (towards / (square + blur**2) ** 1.5) @ charge
    return float(np.mean(np.abs(1.0 - taken / asked)))


def _matters(form: MirrorForm, cloud: CloudFacts, own: Particles, span: float) -> bool:
    """Whether images do something to a cloud in so many seconds."""
    if len(own) == 0 or cloud.charge == 0.0:
        return False
    weight = own.weight
    return importance(
        cloud.name,
        own.position,
        own.charge * weight,
        own.mass * weight,
        lambda points: form.depth(points.T),
        span,
    ).matters()
