"""What surfaces took, and what detectors saw: in charges, in coulombs, in joules."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.report.page.markup import Markup, tag, together
from driftwell.report.page.numbers import amount, electronvolts
from driftwell.report.page.section import Section
from driftwell.report.page.table import Column, table
from driftwell.report.run_page.matter import Matter

Rows = NDArray[np.void]


def surfaces(matter: Matter) -> Section:
    """Clouds and sources, losses on each surface, crossings of each detector."""
    parts = [_clouds(matter)]
    parts.append(_losses(matter) if len(matter.scene.losses) else tag("p", "No charge was lost."))
    if matter.run.detectors:
        parts.append(_crossings(matter))
    return Section("surfaces", "Charges, losses and detectors", together(*parts))


def _clouds(matter: Matter) -> Markup:
    losses = matter.scene.losses
    rows = []
    for cloud in matter.scene.clouds:
        lost = int(np.count_nonzero(losses["cloud"] == cloud.index))
        rows.append(
            [
                cloud.name,
                "source" if cloud.emitted else "cloud",
                cloud.species,
                str(cloud.count),
                amount(cloud.weight, "", 6),
                amount(cloud.count * cloud.weight * cloud.charge, "C"),
                str(lost),
                str(cloud.count - lost),
            ]
        )
    columns = [
        Column("cloud or source"),
        Column("kind"),
        Column("species"),
        Column("charges", True),
        Column("real particles each", True),
        Column("charge in all", True),
        Column("lost", True),
        Column("left", True),
    ]
    return table("What moved: simulated charges, and what they stand for.", columns, rows)


def _losses(matter: Matter) -> Markup:
    """One row for each surface and cloud; a sum where there are several."""
    losses, clouds = matter.scene.losses, matter.run.header.clouds
    names = matter.run.header.walls
    rows = []
    for wall in np.unique(losses["wall"]):
        for cloud in clouds:
            own = losses[(losses["wall"] == wall) & (losses["cloud"] == cloud.index)]
            if len(own):
                rows.append([_name(names, int(wall)), cloud.name, *_taken(own, cloud.charge)])
    if len(rows) > 1:
        charges = np.array([cloud.charge for cloud in clouds])[losses["cloud"]]
        rows.append(["all", "", *_taken(losses, charges)])
    columns = [
        Column("surface"),
        Column("cloud or source"),
        Column("charges", True),
        Column("real particles", True),
        Column("charge", True),
        Column("energy deposited", True),
        Column("mean energy", True),
        Column("from", True),
        Column("to", True),
    ]
    caption = (
        "What each surface took: kinetic energy as the charges touched it, and the time of the "
        "first and the last."
    )
    return table(caption, columns, rows)


def _taken(own: Rows, charge: float | NDArray[np.float64]) -> list[str]:
    real = float(own["weight"].sum())
    energy = float((own["kinetic_energy"] * own["weight"]).sum())
    return [
        str(len(own)),
        amount(real, "", 6),
        amount(float((own["weight"] * charge).sum()), "C"),
        amount(energy, "J"),
        electronvolts(energy / real) if real else "none",
        amount(float(own["time"].min()), "s"),
        amount(float(own["time"].max()), "s"),
    ]


def _crossings(matter: Matter) -> Markup:
    crossings, clouds = matter.scene.crossings, matter.run.header.clouds
    rows = []
    for number, name in enumerate(matter.run.detectors):
        seen = crossings[crossings["detector"] == number]
        if not len(seen):
            rows.append([name, "", "0", *[""] * 6])
        for cloud in clouds:
            own = seen[seen["cloud"] == cloud.index]
            if len(own):
                rows.append([name, cloud.name, *_seen(own, cloud.charge, cloud.mass)])
    columns = [
        Column("detector"),
        Column("cloud or source"),
        Column("passages", True),
        Column("against its normal", True),
        Column("charge", True),
        Column("mean energy", True),
        Column("from", True),
        Column("mean time", True),
        Column("to", True),
    ]
    return table(
        "Passages through detectors. A charge may pass several times; the charge is that of all "
        "passages, without sign of direction.",
        columns,
        rows,
    )


def _seen(own: Rows, charge: float, mass: float) -> list[str]:
    weight, time = own["weight"], own["time"]
    square = (own["velocity"] ** 2).sum(axis=1)
    gamma = np.sqrt(1.0 + square / SPEED_OF_LIGHT**2)
    energy = mass * square / (1.0 + gamma)
    real = float(weight.sum())
    return [
        str(len(own)),
        str(int((own["direction"] < 0).sum())),
        amount(real * charge, "C"),
        electronvolts(float((energy * weight).sum()) / real) if real else "none",
        amount(float(time.min()), "s"),
        amount(float((time * weight).sum()) / real, "s") if real else "none",
        amount(float(time.max()), "s"),
    ]


def _name(names: tuple[str, ...], number: int) -> str:
    return names[number] if number < len(names) else f"surface {number + 1}"
