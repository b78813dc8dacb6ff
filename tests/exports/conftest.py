"""A small run to be exported, written by hand: two clouds, some charges lost. Numbers invented."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.record.reader import Run
from tests.report.pictured_run import Charges, charges, lost, pictured_run

TIMES = (0.0, 1e-6 / 3.0, 2e-6)
CLOUDS = ('hot, "load"', "=other")


def _after(first: Charges, step: float, kept: np.ndarray) -> Charges:
    return Charges(
        (first.position + step * first.velocity)[kept],
        first.velocity[kept] * 1.1,
        first.cloud[kept],
        first.id[kept],
    )


@pytest.fixture(scope="session")
def run(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """12 charges at first, 11 then, 9 at the end; snapshots at the first and the last of three."""
    first = charges(12, clouds=2, speed=(1e7, 1e7, 1e7))
    second = _after(first, TIMES[1], first.id != 3)
    third = _after(first, TIMES[2], ~np.isin(first.id, [0, 3, 11]))
    gone = lost(np.array([1e-7, 5e-7, 1e-6]), first.position[[3, 0, 11]])
    gone["id"], gone["cloud"], gone["wall"] = [3, 0, 11], [0, 0, 1], [0, 1, 1]
    return pictured_run(
        tmp_path_factory.mktemp("exported") / "run",
        list(zip(TIMES, (first, second, third), strict=True)),
        losses=gone,
        names=CLOUDS,
        weight=2.5,
        title="An invented cloud, µ",
        traces={"load centre x": np.array([1.0, 2.0])},
        sampled=np.array([0.0, 1e-6]),
    )
