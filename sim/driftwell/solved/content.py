"""The multipole content of the electrodes' field about their centre, in words and numbers."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.boundary.multipoles import planar_content, round_content, spatial_content
from driftwell.forms import spelled
from driftwell.forms.waveforms import AnyWaveform, Sine, waveform_words
from driftwell.solved.acting import ActingField

Floats = NDArray[np.float64]

NAMES = ("constant", "dipole", "quadrupole", "hexapole", "octopole", "decapole", "dodecapole")
"""By order; of higher ones the number of poles is their name."""
_HIGHEST = 10
_OF_RADIUS = 0.5
"""Part of the distance to the nearest electrode that the content is given for."""


class Term(NamedTuple):
    """One order of one course: its amplitude at the radius, and error, V."""

    order: int
    amplitude: float
    error: float


class Content(NamedTuple):
    """Multipoles of all voltages that follow one course in time.

    course : w(t), a plain number in time; radius : m
    terms : of the orders 0 to 10 (in space 6); of several terms of one order the root of the sum
        of squares, else with its sign
    """

    course: AnyWaveform
    radius: float
    terms: tuple[Term, ...]


def contents(acting: ActingField, radius: float | None) -> list[Content]:
    """The content of each course; none where the centre lies inside an electrode.

    radius : m; None: half the distance to the nearest electrode
    """
    axes = acting.solved.map.grid.axes
    clear = float(acting.nearest(np.zeros((1, axes)))[0][0])
    if clear <= 0.0:
        return []
    r0 = radius or _OF_RADIUS * clear
    amplitude, error = _terms(acting, r0)
    return [
        Content(
            course.waveform,
            r0,
            tuple(
                Term(order, *values)
                for order, values in enumerate(_of(course.weight, amplitude, error))
            ),
        )
        for course in acting.courses
    ]


def _terms(acting: ActingField, radius: float) -> tuple[Floats, Floats]:
    """Amplitudes of every unit solution and their errors, (e, orders, terms of an order)."""
    solution = acting.solved.solution
    geometry = acting.solved.geometry
    if geometry == "axisymmetric":
        found = round_content(solution.potential, radius)
        return found.zonal[:, :, None], found.error[:, :, None]
    if geometry == "planar":
        planar = planar_content(solution.potential, radius)
        both = np.stack([planar.cosine, planar.sine], axis=2)
        return both, np.repeat(planar.error[:, :, None], 2, axis=2)
    spatial = spatial_content(solution.potential, radius)
    highest = max(order for order, _ in spatial.terms)
    shape = (len(spatial.harmonic), highest + 1, 2 * highest + 1)
    amplitude, error = np.zeros(shape), np.zeros(shape)
    for k, (order, m) in enumerate(spatial.terms):
        amplitude[:, order, m + highest] = spatial.harmonic[:, k]
        error[:, order, m + highest] = spatial.error[:, k]
    return amplitude, error


def _of(weight: Floats, amplitude: Floats, error: Floats) -> Iterator[tuple[float, float]]:
    """Amplitude and error of each order with so many volts on each electrode."""
    weight = weight[: len(amplitude)]
    total = np.tensordot(weight, amplitude, axes=1)
    doubt = np.tensordot(np.abs(weight), error, axes=1)
    for order in range(min(len(total), _HIGHEST + 1)):
        parts = total[order]
        alone = np.abs(parts) > 1e-9 * np.abs(parts).max(initial=0.0)
        signed = float(parts[alone][0]) if alone.sum() == 1 else float(np.linalg.norm(parts))
        yield signed, float(np.linalg.norm(doubt[order]))


def _course(course: AnyWaveform) -> str:
    """The voltages that follow a course, in words."""
    if isinstance(course, float):
        return "constant voltages"
    if isinstance(course, Sine):
        phase = f", phase {math.degrees(course.phase):.4g} deg" if course.phase else ""
        return f"amplitudes at {spelled(course.frequency, 'Hz')}{phase}"
    return f"whole swings of what follows {waveform_words(course, 'V')}"


def content_lines(found: Content) -> list[str]:
    """One line for each order: volts at the radius, and as part of the quadrupole."""
    at = spelled(found.radius, "m", 4)
    lines = [f"multipoles of the {_course(found.course)}, at {at} from the centre:"]
    quadrupole = found.terms[2].amplitude if len(found.terms) > 2 else 0.0
    largest = max(abs(term.amplitude) for term in found.terms)
    for term in found.terms:
        if abs(term.amplitude) <= max(term.error, 1e-12 * largest):
            continue
        name = NAMES[term.order] if term.order < len(NAMES) else f"{2 * term.order}-pole"
        line = f"  {term.order:>2}  {name:<11} {term.amplitude: .6e} V"
        if term.order > 2 and abs(quadrupole) > found.terms[2].error:
            line += f"   {term.amplitude / quadrupole: .3e} of the quadrupole"
        lines.append(line)
    return lines
