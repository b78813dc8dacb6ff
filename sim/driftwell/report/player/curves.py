"""What the charts beside the player show: curves in time, of all charges and of each cloud."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.record.reader import Run
from driftwell.report.player.choice import evenly
from driftwell.report.player.packing import block

Floats = NDArray[np.float64]

MOST_POINTS = 2000
"""More records than these are thinned evenly."""


def curves_of(run: Run) -> dict[str, Any]:
    """Curves for the page.

    time : s; every : each how many records a point stands for; groups : all charges together,
    where there are several clouds, then each cloud: name, number alive, rms sizes along x, y and
    z, m, and mean kinetic energy of one particle, eV; ledger : its time, and the closing error of
    the energy.
    """
    clouds = run.header.clouds
    moments = [run.moments(cloud.name) for cloud in clouds]
    if not moments or not len(moments[0].time):
        return {"time": block([], "f8"), "every": 1, "groups": [], "ledger": _ledger(run)}
    count = len(moments[0].time)
    some = evenly(count, MOST_POINTS)
    groups = [_group(cloud.name, found, some) for cloud, found in zip(clouds, moments, strict=True)]
    if len(groups) > 1:
        groups.insert(0, _group("", together(clouds, moments), some))
    return {
        "time": block(moments[0].time[some], "f8"),
        "every": max(1, round(count / len(some))),
        "groups": groups,
        "ledger": _ledger(run),
    }


def together(clouds: tuple[CloudFacts, ...], moments: list[Moments]) -> Moments:
    """Moments of several clouds as one; each charge counts with its weight.

    The number alive is that of simulated charges.
    """
    weight = np.array([cloud.weight for cloud in clouds])
    real = np.stack([found.count for found in moments]) * weight[:, None]
    total = np.maximum(real.sum(axis=0), np.finfo(np.float64).tiny)
    share = real / total

    def mean(parts: list[Floats]) -> Floats:
        known = np.stack([np.where(part == part, part, 0.0) for part in parts])
        return np.asarray(np.einsum("ck...,ck->k...", known, share))

    centre = mean([found.centre for found in moments])
    spread = [
        found.covariance + (found.centre - centre)[:, :, None] * (found.centre - centre)[:, None]
        for found in moments
    ]
    gone = real.sum(axis=0) == 0.0
    covariance = mean(spread)
    energy = mean([found.kinetic_energy for found in moments])
    centre[gone], covariance[gone], energy[gone] = np.nan, np.nan, np.nan
    number = np.asarray(np.stack([found.count for found in moments]).sum(axis=0), np.int64)
    return Moments(moments[0].time, number, centre, covariance, energy, np.full_like(energy, np.nan))


def _group(name: str, found: Moments, some: NDArray[np.int64]) -> dict[str, Any]:
    size = np.sqrt(np.diagonal(found.covariance[some, :3, :3], axis1=1, axis2=2))
    return {
        "name": name,
        "alive": block(found.count[some], "i4"),
        "size": [block(size[:, axis], "f4") for axis in range(3)],
        "energy": block(found.kinetic_energy[some] / ELEMENTARY_CHARGE, "f4"),
    }


def _ledger(run: Run) -> dict[str, Any]:
    rows = run.ledger
    some = evenly(len(rows), MOST_POINTS) if len(rows) else np.zeros(0, np.int64)
    return {
        "time": block(rows["time"][some], "f8"),
        "residual": block(np.abs(rows["energy_residual"][some]), "f4"),
    }
