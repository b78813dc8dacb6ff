"""``driftwell fields``: the field of electrodes told and drawn; what is said where none is."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.cli.main import main
from tests.scenario.good_scenarios import toml_file

RODS = [
    {
        "name": name,
        "voltage": {"amplitude": amplitude, "frequency": "1 MHz"},
        "shape": [
            {"kind": "circle", "centre": centre, "radius": "4.58 mm"},
            {
                "kind": "circle",
                "centre": [f"-{x}" if x != "0 mm" else x for x in centre],
                "radius": "4.58 mm",
            },
        ],
    }
    for name, amplitude, centre in (
        ("x rods", "100 V", ["8.58 mm", "0 mm"]),
        ("y rods", "-100 V", ["0 mm", "8.58 mm"]),
    )
]


def scenario(folder: Path, **changes: object) -> str:
    table = {
        "title": "four round rods",
        "duration": "1 us",
        "cloud": [
            {
                "name": "ion",
                "species": "proton",
                "shape": {"kind": "points", "positions": [["0 mm", "0 mm", "0 mm"]]},
            }
        ],
        "electrodes": {"geometry": "planar", "field_accuracy": 1e-3},
        "electrode": RODS,
    }
    path = folder / "rods.toml"
    path.write_text(toml_file({name: each for name, each in (table | changes).items() if each}))
    return str(path)


def test_the_table_and_the_pictures_of_a_planar_field(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """W. Paul, Rev. Mod. Phys. 62 (1990) 531: phi = V (x^2 - y^2)/r0^2 between hyperbolic rods.

    Round ones of 1.145 r0 come within some thousandths of it, and have hardly a dodecapole.
    """
    assert 0 == main(["fields", scenario(tmp_path), "-o", str(tmp_path / "drawn")])
    said = capsys.readouterr()
    lines = said.out.splitlines()
    assert "four round rods" in said.err
    assert any(line.startswith("x rods") and "pF/m" in line for line in lines)
    (quadrupole,) = [float(line.split()[2]) for line in lines if "quadrupole " in line][:1]
    assert 100.0 * 0.25 == pytest.approx(quadrupole, rel=5e-3)
    assert not any("hexapole" in line for line in lines)
    assert any(line.startswith("region: x from") for line in lines)
    pictures = {path.name for path in (tmp_path / "drawn" / "pictures").iterdir()}
    assert {"equipotentials.png", "axis-potential.png", "surface-charge.png"} == pictures
    assert all(path.stat().st_size > 10_000 for path in (tmp_path / "drawn/pictures").iterdir())


def test_a_scenario_without_electrodes_is_refused_in_words(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = scenario(tmp_path, electrode=None, electrodes=None)
    assert 2 == main(["fields", path, "--no-pictures"])
    assert "has no [[electrode]]" in capsys.readouterr().err


def test_electrodes_that_touch_are_refused_by_name(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    wide = [{**RODS[0]}, {**RODS[1], "shape": [{**RODS[1]["shape"][0], "radius": "9 mm"}]}]
    assert 2 == main(["fields", scenario(tmp_path, electrode=wide), "--no-pictures"])
    said = capsys.readouterr().err
    assert '"x rods"' in said
    assert '"y rods"' in said


def test_a_folder_that_cannot_be_written_is_said(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "file").touch()
    code = main(["fields", scenario(tmp_path), "-o", str(tmp_path / "file" / "drawn")])
    said = capsys.readouterr()
    assert 2 == code
    assert "Traceback" not in said.err
    assert "cannot be written" in said.err
