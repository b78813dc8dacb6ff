"""All that the player's script is given, as one value that turns into JSON."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.record.reader import Run
from driftwell.report.again import read_again
from driftwell.report.player.curves import curves_of
from driftwell.report.player.fates import Fates, fates_of
from driftwell.report.player.packing import (
    Shaded,
    block,
    kinetic_energies,
    quantised,
    shaded,
    speeds,
)
from driftwell.report.player.surfaces.all import Surfaces, surfaces_of
from driftwell.report.player.surfaces.mesh import Drawable
from driftwell.report.player.ways import Ways
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario

Floats = NDArray[np.float64]

CORE = 0.04
"""Part of the places left out at either side where the camera looks at most of the charges."""
JAGGED = 0.5
"""Ways that turn by more than this part of a step between records are no lines to the eye."""


def player_data(run: Run, ways: Ways, scenario: LoadedScenario | None) -> dict[str, Any]:
    """What is shown: charges, their fates, surfaces, curves."""
    fates = fates_of(run, ways)
    places = ways.state[:, :, :3]
    every = np.concatenate([places.reshape(-1, 3), fates.birthplace, fates.end])
    every = every[np.isfinite(every).all(axis=1)]
    low, high = every.min(axis=0), every.max(axis=0)
    core = np.quantile(every, (CORE, 0.5, 1.0 - CORE), axis=0)
    surroundings = _surroundings(run, scenario, low, high, core[1])
    return {
        "title": run.header.title,
        "source": ways.source,
        "clouds": _clouds(run, ways),
        "walls": list(run.header.walls),
        "cell": _cell(run),
        "box": {"low": low.tolist(), "high": high.tolist(), "core": core[[0, 2]].tolist()},
        "jagged": jagged(places),
        **_charges(run, ways, fates),
        **surroundings,
        "curves": curves_of(run),
    }


def _charges(run: Run, ways: Ways, fates: Fates) -> dict[str, Any]:
    clouds = run.header.clouds
    mass = np.array([clouds[number].mass for number in ways.cloud])
    velocity = ways.state[:, :, 3:]
    energy = kinetic_energies(velocity, mass) / ELEMENTARY_CHARGE
    packed = quantised(ways.state[:, :, :3])
    return {
        "time": block(ways.time, "f8"),
        "id": block(ways.id, "i4"),
        "cloud": block(ways.cloud, "i4"),
        "place": {
            "number": block(packed.number, "u2"),
            "low": block(packed.low, "f8"),
            "span": block(packed.span, "f8"),
        },
        "tones": {
            "energy": _tones(shaded(energy), "kinetic energy of one particle", "eV"),
            "speed": _tones(shaded(speeds(velocity)), "speed", "m/s"),
        },
        "born": block(fates.born, "f8"),
        "birthplace": block(fates.birthplace, "f8"),
        "lost": block(fates.lost, "f8"),
        "end": block(fates.end, "f8"),
        "wall": block(fates.wall, "i4"),
    }


def _tones(found: Shaded, title: str, unit: str) -> dict[str, Any]:
    """Steps of colour, and what stands at their scale."""
    number = block(found.number, "u1")
    return {"number": number, "low": found.low, "high": found.high, "title": title, "unit": unit}


def _clouds(run: Run, ways: Ways) -> list[dict[str, Any]]:
    return [
        {
            "name": cloud.name,
            "species": cloud.species,
            "shown": int(np.sum(ways.cloud == cloud.index)),
            "count": run.born(cloud.name),
        }
        for cloud in run.header.clouds
    ]


def _cell(run: Run) -> dict[str, Any] | None:
    header = run.header
    if not header.cell_axis:
        return None
    return {"axis": "xyz".index(header.cell_axis), "length": header.cell_length}


def jagged(places: Floats) -> bool:
    """Whether straight lines between the places shown, (n, k, 3), look like anything but a way."""
    if places.shape[1] < 4:
        return True
    step = np.diff(places, axis=1)
    turn = np.linalg.norm(np.diff(step, axis=1), axis=2)
    length = np.linalg.norm(step, axis=2)
    if not np.isfinite(turn).any():
        return True
    return bool(np.nanmedian(turn) > JAGGED * np.nanmedian(length))


def _surroundings(
    run: Run, loaded: LoadedScenario | None, low: Floats, high: Floats, middle: Floats
) -> dict[str, Any]:
    """Surfaces as far as they can be made, and one sentence for each thing that is not drawn."""
    scenario: Scenario | None
    folder: Path
    why = ""
    if loaded is not None:
        scenario, folder = loaded.scenario, loaded.folder
    else:
        again = read_again(run)
        scenario, why = again.scenario, again.why
        folder = run.folder if again.loaded is None else again.loaded.folder
        if again.loaded is not None:
            scenario = again.loaded.scenario
    if scenario is None:
        return {
            "surfaces": [],
            "missing": [["surfaces", why]],
            "spine": {"point": middle.tolist(), "axis": -1},
        }
    found = surfaces_of(scenario, folder, low, high, middle)
    return _packed(found)


def _packed(found: Surfaces) -> dict[str, Any]:
    point, axis = found.spine
    return {
        "surfaces": [_surface(each) for each in found.drawn],
        "missing": [list(each) for each in found.missing],
        "spine": {"point": np.asarray(point).tolist(), "axis": axis},
    }


def _surface(drawn: Drawable) -> dict[str, Any]:
    return {
        "name": drawn.name,
        "kind": drawn.kind,
        "vertices": block(drawn.vertices, "f4"),
        "triangles": block(drawn.triangles, "u2"),
        "normals": block(np.rint(127.0 * drawn.normals), "i1"),
        "edges": block(drawn.edges, "u2"),
        "sharp": drawn.sharp,
    }
