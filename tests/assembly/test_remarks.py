"""What a run says before it begins of images that hold what a source bears."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from driftwell.assembly import assembled, remarks
from driftwell.scenario.read import read_scenario
from tests.scenario.good_scenarios import toml_file


def said(folder: Path, weight: float, voltage: str = "1 kV", without: str = "") -> list[str]:
    """The remarks on a diode of 5 mm with charges softened within 0.1 mm."""
    table: dict[str, Any] = {
        "title": "a diode",
        "duration": "1 ns",
        "source": [
            {
                "name": "cathode",
                "species": "electron",
                "current": "0.1 A",
                "weight": weight,
                "emitter": {"kind": "disc", "radius": "5 mm"},
                "emission_temperature": "1300 K",
            }
        ],
        "field": [
            {"name": "anode", "kind": "gridded-gap", "voltage": voltage, "length": "5 mm"},
        ],
        "images": {"kind": "gap", "at": ["0 m", "0 m", "0 m"], "distance": "5 mm"},
        "coulomb": {"softening": "0.1 mm"},
        "stepping": {"step": "5 ps"},
    }
    table.pop(without, None)
    path = folder / "diode.toml"
    path.write_text(toml_file(table))
    return [each for each in remarks(assembled(read_scenario(path))) if "own image" in each]


def test_a_charge_so_heavy_that_its_own_image_holds_it_is_spoken_of(tmp_path: Path) -> None:
    """For each 1e5, 0.3849 e 1e5/(4 pi eps0 (0.1 mm)^2) = 5.54 kV/m, of 200 kV/m 2.8 %."""
    (told,) = said(tmp_path, 5e6)
    assert 'source "cathode" stands for 5e+06' in told
    assert "277 kV/m, 139% of the field that draws there" in told
    assert "smaller `weight`" in told
    assert [] == said(tmp_path, 1e5)


def test_where_the_field_pushes_back_any_image_holds(tmp_path: Path) -> None:
    """No share can be told."""
    (told,) = said(tmp_path, 1e3, voltage="-1 kV")
    assert "and no field draws there" in told


@pytest.mark.parametrize("section", ["images", "coulomb"])
def test_without_images_or_softening_there_is_nothing_to_say(tmp_path: Path, section: str) -> None:
    """Images of unsoftened charges hold every charge next to the surface, as real ones do."""
    assert [] == said(tmp_path, 5e6, without=section)
