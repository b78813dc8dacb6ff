"""Flight times of a two-stage source, and its first-order space focus.

W. C. Wiley and I. H. McLaren, Rev. Sci. Instrum. 26 (1955) 1150: 20 kV/m from 5 mm before the first
grid, 100 kV/m over 10 mm, then 0.31386298155127 m without field, where ions that start a little
earlier or later arrive together. m = 1.6605e-25 kg, closed form worked out with CODATA 2022. The
step that passes a grid errs by half of v h times the jump of the force: 4 ps in the arrival here.
"""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from tests.running import carried_out, points, species

FIRST, SECOND, FREE = 5e-3, 10e-3, 0.31386298155127323


def flights(folder: Path, starts: list[float], speeds: list[float]) -> np.ndarray:
    """Arrival times, s, of ions that start so far before the first grid and so fast, m and m/s."""
    place = np.array([[k * 1e-3, 0.0, -start] for k, start in enumerate(starts)])
    speed = np.array([[0.0, 0.0, each] for each in speeds])
    run = carried_out(
        folder,
        8e-6,
        species={"ion": species(1.6605e-25)},
        cloud=[points("ions", "ion", place, speed)],
        field=[
            {
                "name": "first stage",
                "kind": "gridded-gap",
                "length": "20 mm",
                "voltage": "-400 V",
                "centre": ["0 m", "0 m", "-20 mm"],
            },
            {
                "name": "second stage",
                "kind": "gridded-gap",
                "length": f"{SECOND!r} m",
                "voltage": "-1000 V",
            },
        ],
        detector=[
            {"name": "end", "kind": "plane", "at": ["0 m", "0 m", f"{SECOND + FREE!r} m"]},
        ],
        coulomb={"method": "off"},
        stepping={"step": "0.5 ps"},
    )
    rows = np.sort(run.crossings(), order="id")
    assert len(starts) == len(rows)
    return np.asarray(rows["time"])


def test_ions_that_start_apart_arrive_together(tmp_path: Path) -> None:
    """7.8656800 us from the middle; 0.4813 and 0.5505 ns less from 0.5 mm farther and nearer."""
    found = flights(tmp_path, [FIRST, FIRST + 5e-4, FIRST - 5e-4], [0.0, 0.0, 0.0])
    assert 7.865680000179727e-06 == pytest.approx(found[0], rel=1e-6, abs=0.0)
    early = (found[1:] - found[0]) * 1e9
    assert [-0.48134470828505277, -0.5504934956518408] == pytest.approx(early.tolist(), abs=0.01)


def test_an_ion_that_flies_the_other_way_first_comes_later_by_the_turn_around_time(
    tmp_path: Path,
) -> None:
    """25 meV towards and away from the grid: 22.7640350313187 ns between them."""
    speed = float(np.sqrt(2.0 * 0.025 * 1.602176634e-19 / 1.6605e-25))
    found = flights(tmp_path, [FIRST, FIRST], [speed, -speed])
    assert 7.854297979454167e-06 == pytest.approx(found[0], rel=1e-6, abs=0.0)
    assert 22.7640350313187e-9 == pytest.approx(found[1] - found[0], abs=1e-11)
