"""Pictures of a run in words: a caption that says how to read one, and what is to be seen in it."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from driftwell.report.page.numbers import amount, count_of, electronvolts, residual
from driftwell.report.pictures.scene import Scene
from driftwell.report.pictures.sizes import LEAST, records_where, rms_sizes, temperatures
from driftwell.report.pictures.spectrum import spectrum, traced_motions

Seen = Callable[[Scene], str]

_MOST_LINES = 6
"""Traced motions that are told."""


def captioned(name: str, scene: Scene) -> tuple[str, str]:
    """Caption, and what is seen, of the picture of this name."""
    caption, seen = _WORDS[name]
    return caption, seen(scene)


def _views(scene: Scene) -> list[str]:
    """Number and rms sizes at start and end."""
    told = []
    for word, view in scene.views:
        size = _axes(view.position.std(axis=0), "m") if len(view.id) >= LEAST else "no size"
        time = amount(view.time, "s")
        told.append(f"At the {word}, t = {time}: {count_of(len(view.id), 'charge')}, rms {size}.")
    return told


def _cloud(scene: Scene) -> str:
    return " ".join(["The cloud from the side and along z.", *_views(scene)])


def _phase_space(scene: Scene) -> str:
    told = ["Place and velocity along each axis."]
    for word, view in scene.views:
        if len(view.id) >= LEAST:
            spread = _axes(view.velocity.std(axis=0), "m/s")
            told.append(f"Rms proper velocity at the {word} {spread}.")
    return " ".join(told)


def _sizes(scene: Scene) -> str:
    told = []
    for cloud, moments in zip(scene.clouds, scene.moments, strict=True):
        known = records_where(moments, moments.count >= LEAST)
        if not known.time.size:
            continue
        size, warmth = rms_sizes(cloud, known), temperatures(cloud, known)
        began, ended = (amount(float(known.time[k]), "s") for k in (0, -1))
        told.append(
            f"{cloud.name}: rms size {_axes(size[0], 'm')} at {began}, {_axes(size[-1], 'm')}"
            f" at {ended}; temperature {_axes(warmth[0], 'K')}, then {_axes(warmth[-1], 'K')}"
            f"; charges left {moments.count[0]}, then {moments.count[-1]}."
        )
    return " ".join(["Rms sizes, temperatures and number of charges in time.", *told])


def _envelope(scene: Scene) -> str:
    return " ".join(["The beam's width along its way, slice by slice.", *_views(scene)])


def _spectrum(scene: Scene) -> str:
    told = []
    for name, time, value in traced_motions(scene.run)[:_MOST_LINES]:
        if time.size:
            frequency, size = spectrum(time, value)
            strongest = amount(float(frequency[size.argmax()]), "Hz")
            told.append(f"{name}: strongest line at {strongest}.")
    return " ".join(["Amplitude over frequency of each traced motion.", *told])


def _trajectories(scene: Scene) -> str:
    tracked = len(scene.run.header.tracked)
    lost = int(np.isin(scene.losses["id"], scene.run.header.tracked).sum())
    return (
        f"Ways of a few of {count_of(tracked, 'tracked charge')}, each coordinate in time, and in "
        f"space; {lost} of the tracked ones were lost."
    )


def _losses(scene: Scene) -> str:
    losses = scene.losses
    names = scene.run.header.walls
    told = []
    for wall in np.unique(losses["wall"]):
        own = losses[losses["wall"] == wall]
        name = names[wall] if wall < len(names) else f"surface {wall + 1}"
        told.append(f"{name} took {count_of(len(own), 'charge')}, {_between(own['time'])}.")
    return " ".join(["Where and when charges were lost.", *told])


def _arrivals(scene: Scene) -> str:
    told = []
    for number, name in enumerate(scene.run.detectors):
        own = scene.crossings[scene.crossings["detector"] == number]
        if len(own):
            told.append(f"{name}: {count_of(len(own), 'passage')}, {_between(own['time'])}.")
    return " ".join(["Spot and arrival times at the detectors.", *told])


def _ledger(scene: Scene) -> str:
    rows = scene.run.ledger
    worst = residual(float(np.abs(rows["energy_residual"]).max()))
    kinetic = rows["kinetic"]
    return (
        f"Residuals of the account in time; that of energy is {worst} at most. Kinetic energy of "
        f"all charges {electronvolts(float(kinetic[0]))} at the start, "
        f"{electronvolts(float(kinetic[-1]))} at the end."
    )


def _axes(values: NDArray[np.float64], unit: str) -> str:
    """One value along each axis."""
    return ", ".join(
        f"{axis} {amount(float(value), unit, 3)}" for axis, value in zip("xyz", values, strict=True)
    )


def _between(times: NDArray[np.float64]) -> str:
    low, high = amount(float(times.min()), "s", 3), amount(float(times.max()), "s", 3)
    return f"at {low}" if low == high else f"from {low} to {high}"


_WORDS: dict[str, tuple[str, Seen]] = {
    "cloud": ("Charges at the start and at the end, on the same axes where they compare.", _cloud),
    "sizes": ("How large, how warm and how many the charges are, record by record.", _sizes),
    "phase-space": (
        "Phase space along each axis; the ellipse is that of the second moments (rms).",
        _phase_space,
    ),
    "envelope": ("Width of the beam along its way, and charge per length.", _envelope),
    "spectrum": ("Which frequencies the traced motions hold; the strongest lines are named.",
                 _spectrum),
    "trajectories": (
        "Single charges: what is faster than the records shows as points, not as lines.",
        _trajectories,
    ),
    "losses": ("Where charges touched a surface, when, and which part of all that is.", _losses),
    "arrivals": ("What each detector saw: the spot, and passages per stretch of time.", _arrivals),
    "ledger": (
        "How well the account closes at each record (above), and the energies in it (below).",
        _ledger,
    ),
}  # fmt: skip
