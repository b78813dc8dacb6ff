"""What does not go together with a cell that repeats is told in words."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from driftwell.assembly import assembled
from driftwell.coulomb.cell import Cell
from driftwell.errors import ScenarioError
from driftwell.scenario.cell_checks import folded
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario

BEAM = """\
title = "An endless beam"
duration = "1 us"

[species.barium]
mass = "137.905 u"
charge = "1 e"

[[cloud]]
name = "beam"
species = "barium"
count = 50
shape = { kind = "box", size = ["1 mm", "1 mm", "10 mm"] }

[cell]
length = "10 mm"

[[question]]
name = "left"
ask = "fraction-left"
of = "beam"
"""


def written(folder: Path, more: str = "", old: str = "", new: str = "") -> Path:
    path = folder / "s.toml"
    path.write_text((BEAM + more).replace(old, new) if old else BEAM + more)
    return path


@pytest.mark.parametrize(
    ("more", "old", "new", "expected"),
    [
        (
            '[images]\nkind = "cylinder"\nradius = "5 mm"\n',
            "",
            "",
            "images of a cell that repeats are not summed; leave out [images] or [cell].",
        ),
        (
            '[[electrode]]\nname = "ring"\nvoltage = "1 V"\n'
            'shape = [{ kind = "circle", radius = "1 mm", centre = ["9 mm", "0 mm"] }]\n',
            "",
            "",
            'needs planar electrodes and axis = "z", along which they are endless, or a [[field]] '
            "that repeats.",
        ),
        (
            '[coulomb]\nsoftening = "6 mm"\n',
            "",
            "",
            "must be less than half the length of [cell], 5 mm.",
        ),
        (
            '[stepping]\nextent = "4 mm"\n',
            "",
            "",
            "reaches beyond [stepping] extent, 4 mm.",
        ),
        (
            '[[detector]]\nname = "far"\nkind = "plane"\nat = ["0 mm", "0 mm", "5.1 mm"]\n',
            "",
            "",
            "lies outside the cell, which repeats along z, period 10 mm, -5 mm to 5 mm: no charge "
            "comes there.",
        ),
        ("", 'length = "10 mm"', 'length = "-1 mm"', "must be greater than 0."),
        ("", 'length = "10 mm"', 'length = "1 mm"\naxis = "w"', 'axis = "w"'),
    ],
)
def test_what_does_not_go_together_is_told_where_it_is(
    tmp_path: Path, more: str, old: str, new: str, expected: str
) -> None:
    """Each at its own key, with what to do."""
    with pytest.raises(ScenarioError) as told:
        read_scenario(written(tmp_path, more, old, new))
    assert expected in str(told.value)


def test_a_detector_at_an_end_and_a_plane_along_the_axis_are_fine(tmp_path: Path) -> None:
    """Only planes across the axis can lie outside."""
    more = (
        '[[detector]]\nname = "end"\nkind = "plane"\nat = ["0 mm", "0 mm", "5 mm"]\n'
        '[[wall]]\nname = "side"\nkind = "plane"\nat = ["20 mm", "0 mm", "0 mm"]\n'
        "normal = [1.0, 0.0, 0.0]\n"
    )
    assert read_scenario(written(tmp_path, more)).scenario.cell is not None


def test_the_cell_is_explained(tmp_path: Path) -> None:
    """With its axis, period and ends."""
    lines = " ".join(explain(read_scenario(written(tmp_path))))
    assert "repeats along z, period 10 mm, -5 mm to 5 mm" in lines


def test_charges_outside_are_put_into_the_cell_and_it_is_told(tmp_path: Path) -> None:
    """Half of a cloud twice as long as the cell."""
    told: list[str] = []
    loaded = read_scenario(written(tmp_path, "", '"10 mm"] }', '"20 mm"] }'))
    found = assembled(loaded, told=told.append).particles.position[2]
    assert ((found >= -5e-3) & (found < 5e-3)).all()
    assert 1 == len(told)
    number = int(told[0].split()[0])
    assert 10 < number < 40
    assert f"{number} of 50 charges begin outside the cell and are put back into it." == told[0]


def test_a_beam_far_wider_than_its_cell_is_refused(tmp_path: Path) -> None:
    """Its images would not be summed well."""
    loaded = read_scenario(written(tmp_path, "", 'length = "10 mm"', 'length = "0.2 mm"'))
    with pytest.raises(ScenarioError, match="Take a longer cell with more charges"):
        assembled(loaded)


def test_places_are_folded_by_whole_periods() -> None:
    """Into the half-open cell, rounding included."""
    cell = Cell(axis="x", length="2 m", start="-1 m")
    places = np.array([[-1.0, 7.0, 8.0], [1.0, 0.0, 0.0], [4.5, 0.0, 0.0], [-1.0 - 1e-17, 0, 0]])
    expected = np.array([-1.0, -1.0, 0.5, -1.0])
    assert pytest.approx(expected, rel=1e-15, abs=0.0) == folded(cell, places)[:, 0]
    assert places[:, 1:].tobytes() == folded(cell, places)[:, 1:].tobytes()
    assert folded(None, places) is places
