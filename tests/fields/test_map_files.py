"""Fields from files of grid nodes: what they give, and what is refused."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.errors import ScenarioError
from driftwell.fields.evaluation import FieldValues, evaluate
from driftwell.fields.form import FieldForm
from driftwell.forms.faults import read_form
from driftwell.scenario.read import read_scenario
from tests.cases import BODIES, field
from tests.grid_files import grids, nodes, round_polynomial, write_csv, write_hdf5
from tests.potential_sources import PointCharges, Ring
from tests.running import points, species
from tests.scenario.good_scenarios import toml_file

HALF, WHOLE = np.linspace(0.0, 4.0, 41), np.linspace(-4.0, 4.0, 81)
RNG = np.random.default_rng


def of(folder: Path, kind: str, path: str, **keys: Any) -> FieldForm:
    return field(kind, path=path, **keys).found_in(folder)


def at(form: FieldForm, places: np.ndarray, time: float = 0.0) -> FieldValues:
    return evaluate([form], BODIES, places, time)


def inside(count: int, reach: float = 3.0) -> np.ndarray:
    """Places within `reach` mm of the origin along each axis, m."""
    return 1e-3 * RNG(3).uniform(-reach, reach, (count, 3)) * (0.7, 0.7, 1.0)


def told(form: FieldForm) -> list[str]:
    """What is wrong with a form's file, one line for each fault."""
    faults = form.faults()
    assert {("path",)} >= {fault.path for fault in faults}
    return [fault.needed for fault in faults]


# -- what a file holds ------------------------------------------------------------------------


def test_a_potential_map_gives_the_potential_of_its_file(tmp_path: Path) -> None:
    """A charged ring of 6 mm radius, nodes every 0.1 mm."""
    ring = Ring(6.0, 1.0)
    place = nodes(r=HALF, z=WHOLE)
    points = np.stack([place["r"], place["z"]], axis=1)
    write_csv(tmp_path / "ring.csv", {**place, "V": ring.potential(points)[0]})
    where = inside(200)
    r, z = 1e3 * np.hypot(where[:, 0], where[:, 1]), 1e3 * where[:, 2]
    values = at(of(tmp_path, "potential-map", "ring.csv"), where)
    expected = ring.field(np.stack([r, z], axis=1))[0] * 1e3
    radial = np.sum(values.electric[:, :2] * where[:, :2], axis=1) / (1e-3 * r)
    assert ring.potential(np.stack([r, z], axis=1))[0] == pytest.approx(values.potential, rel=1e-9)
    assert expected[:, 0] == pytest.approx(radial, abs=1e-7 * np.abs(expected).max())
    assert expected[:, 1] == pytest.approx(values.electric[:, 2], abs=1e-7 * np.abs(expected).max())


def test_rows_come_in_any_order_and_both_formats_give_the_same(tmp_path: Path) -> None:
    place = nodes(r=HALF[::5], z=WHOLE[::5])
    value = round_polynomial(**place)[0]
    order = RNG(1).permutation(value.size)
    mixed = {name: column[order] for name, column in {**place, "V": value}.items()}
    write_csv(tmp_path / "sorted.csv", {**place, "V": value})
    write_csv(tmp_path / "mixed.csv", dict(reversed(mixed.items())))
    write_hdf5(tmp_path / "mixed.h5", mixed)
    where = inside(30)
    first = at(of(tmp_path, "potential-map", "sorted.csv"), where)
    for path in ("mixed.csv", "mixed.h5"):
        again = at(of(tmp_path, "potential-map", path), where)
        assert first.electric == pytest.approx(again.electric, rel=1e-12)


def test_an_electric_map_is_the_slope_of_one_potential_near_to_its_file(tmp_path: Path) -> None:
    """Point charges 7 mm away, nodes every 0.25 mm: their field to 1e-5."""
    charges = PointCharges([(7.0, 1.0, 0.0), (-1.0, -6.0, 3.0)])
    axis = np.linspace(-4.0, 4.0, 33)
    place = nodes(x=axis, y=axis, z=axis)
    points = np.stack(list(place.values()), axis=1)
    parts = charges.field(points).sum(axis=0).T
    write_hdf5(tmp_path / "e.h5", {**place, **dict(zip(("Ex", "Ey", "Ez"), parts, strict=True))})
    form = of(tmp_path, "electric-map", "e.h5")
    where = inside(300)
    expected = charges.field(1e3 * where).sum(axis=0) * 1e3
    assert expected == pytest.approx(at(form, where).electric, abs=1e-5 * np.abs(expected).max())


def test_noise_on_an_electric_map_is_left_over_and_told(tmp_path: Path) -> None:
    place = nodes(r=HALF[::2], z=WHOLE[::2])
    _, along_r, along_z = round_polynomial(**place)
    size = np.sqrt(np.mean(along_r**2 + along_z**2))
    noisy = [
        -slope + 0.005 * size / np.sqrt(2.0) * RNG(i).normal(size=slope.size)
        for i, slope in enumerate((along_r, along_z))
    ]
    write_csv(tmp_path / "noisy.csv", {**place, "Er": noisy[0], "Ez": noisy[1]})
    form = of(tmp_path, "electric-map", "noisy.csv")
    assert [] == told(form)
    where = inside(100)
    clean = at(field("electric-map", path="round-e.csv").found_in(grids()), where).electric
    found = at(form, where).electric
    error = np.sqrt(np.mean((found - clean) ** 2) / np.mean(clean**2))
    assert 2e-4 < error < 5e-3
    assert "0.00" in form.words()
    assert "left over" in form.words()


def test_a_field_that_has_a_curl_is_refused(tmp_path: Path) -> None:
    place = nodes(r=HALF[::5], z=WHOLE[::5])
    _, along_r, along_z = round_polynomial(**place)
    write_csv(tmp_path / "e.csv", {**place, "Er": along_r, "Ez": -along_z})
    (line,) = told(of(tmp_path, "electric-map", "e.csv"))
    assert line.startswith("e.csv: ")
    assert "% of the field (rms) is not the slope of any potential; needs at most 2 %" in line
    assert [] == told(of(tmp_path, "electric-map", "e.csv", tolerance=1.0))


class Dipole:
    """A magnetic dipole on the axis at z0, along z: A = m r / s^3 along the azimuth.

    J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), eqs. 5.55 and 5.56 (from memory).
    """

    def __init__(self, height: float) -> None:
        self.height = height

    def potential(self, r: np.ndarray, z: np.ndarray) -> np.ndarray:
        return r / np.hypot(r, z - self.height) ** 3

    def field(self, r: np.ndarray, z: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        z = z - self.height
        s = np.hypot(r, z)
        return 3.0 * r * z / s**5, (3.0 * z**2 / s**2 - 1.0) / s**3


def dipole_file(folder: Path, sign: float = 1.0) -> Dipole:
    dipole = Dipole(-9.0)
    place = nodes(r=HALF[::2], z=WHOLE[::2])
    radial, axial = dipole.field(**place)
    write_csv(folder / "b.csv", {**place, "Br": sign * radial, "Bz": axial})
    return dipole


def test_a_magnetic_map_gives_the_field_of_its_file_and_what_its_change_induces(
    tmp_path: Path,
) -> None:
    dipole = dipole_file(tmp_path)
    wave = {"kind": "ramp", "before": 1.0, "after": 3.0, "start": "0 s", "end": "1 us"}
    values = at(of(tmp_path, "magnetic-map", "b.csv", scale=wave), inside(200), 0.5e-6)
    where = inside(200)
    r, z = np.hypot(where[:, 0], where[:, 1]), 1e3 * where[:, 2]
    radial, axial = dipole.field(1e3 * r, z)
    sine = where[:, :2] / r[:, None]
    found = np.sum(values.magnetic[:, :2] * sine, axis=1)
    size = 2e-3 * np.abs(axial).max()  # the file is in mT, the scale is 2
    assert 2e-3 * radial == pytest.approx(found, abs=1e-6 * size)
    assert 2e-3 * axial == pytest.approx(values.magnetic[:, 2], abs=1e-6 * size)
    induced = values.electric[:, 1] * sine[:, 0] - values.electric[:, 0] * sine[:, 1]
    expected = -(2.0 / 1e-6) * 1e-6 * dipole.potential(1e3 * r, z)  # mT mm = 1e-6 T m
    assert expected == pytest.approx(induced, abs=1e-6 * np.abs(expected).max())


def test_a_magnetic_field_that_would_need_sources_is_refused(tmp_path: Path) -> None:
    dipole_file(tmp_path, sign=-1.0)
    (line,) = told(of(tmp_path, "magnetic-map", "b.csv"))
    assert "% of the field (rms) would need sources, which a magnetic field has not" in line
    place = nodes(x=WHOLE[::10], y=WHOLE[::10], z=WHOLE[::10])
    parts = {"Bx": place["x"], "By": place["y"], "Bz": place["z"]}
    write_csv(tmp_path / "space.csv", {**place, **parts})
    (line,) = told(of(tmp_path, "magnetic-map", "space.csv"))
    assert line.startswith("space.csv: 100 % of the field's slopes (rms) would need sources")


def test_an_even_magnetic_field_in_space_has_no_slopes_to_complain_of(tmp_path: Path) -> None:
    place = nodes(x=WHOLE[::10], y=WHOLE[::10], z=WHOLE[::10])
    one = np.ones(place["x"].size)
    write_csv(tmp_path / "even.csv", {**place, "Bx": one, "By": 0.0 * one, "Bz": 2.0 * one})
    form = of(tmp_path, "magnetic-map", "even.csv")
    assert [] == told(form)
    assert np.tile([1e-3, 0.0, 2e-3], (5, 1)) == pytest.approx(at(form, inside(5)).magnetic)


def test_a_magnetic_map_in_space_must_be_constant() -> None:
    form = field("magnetic-map", path="space-b.h5", scale={"amplitude": 1.0, "frequency": "1 kHz"})
    (fault,) = form.found_in(grids()).faults()
    assert ("scale",) == fault.path
    assert fault.needed.startswith("must be constant: what a changing magnetic field in (x, y, z)")


def test_a_map_says_where_it_is_known() -> None:
    form = field("potential-map", path="round.csv").found_in(grids())
    region = form.region()
    assert region is not None
    assert "axisymmetric" == region.geometry
    assert np.array([[-4e-3, 4e-3], [-4e-3, 4e-3]]) == pytest.approx(np.array(region.ends))
    assert field("rf-quadrupole", radius="1 mm", voltage="1 V").region() is None


def test_a_charge_swings_in_a_map_as_the_curvature_says() -> None:
    """phi = z^2 - r^2/2 and more, in V/mm^2: along z the curvature is 2e6 V/m^2 or more."""
    form = field("potential-map", path="round.csv").found_in(grids())
    rate = form.rates(BODIES["barium"], BODIES)["oscillation"]
    least = np.sqrt(abs(BODIES["barium"].charge_to_mass) * 2e6)
    assert least < rate < 3.0 * least


# -- what is refused --------------------------------------------------------------------------

SIX = np.arange(6.0)
RZ = nodes(r=SIX, z=SIX)
ONES = np.ones(36)


def without(rows: list[int]) -> dict[str, np.ndarray]:
    return {name: np.delete(column, rows) for name, column in {**RZ, "V": ONES}.items()}


@pytest.mark.parametrize(
    ("columns", "words"),
    [
        (without([8, 20]), ": there is no row for r = 1 mm, z = 2 mm; 2 of 36 nodes are missing"),
        (
            {name: np.append(column, column[7]) for name, column in {**RZ, "V": ONES}.items()},
            ":38: r = 1 mm, z = 1 mm has a row already (9)",
        ),
        (
            {**nodes(r=SIX, z=[0, 1, 2, 3, 4.5, 5]), "V": ONES},
            ": the values of z are not evenly spaced: 1.5 mm lie between 3 mm and 4.5 mm, "
            "1 mm between most",
        ),
        ({**nodes(r=SIX[:5], z=SIX), "V": ONES[:30]}, ": has 5 values of r; needs at least 6"),
        ({**nodes(r=SIX - 1.0, z=SIX), "V": ONES}, ": r begins at -1 mm; a distance is not"),
        ({**RZ, "V": np.append(ONES[1:], np.nan)}, ':37: "nan" in column "V" must be a finite'),
        ({**RZ}, ':1: column "V" is missing beside r, z'),
        ({"r": RZ["r"], "y": RZ["z"], "V": ONES}, ":1: needs the columns r, z, V or x, y, V or"),
        ({**RZ, "V": ONES, "Er": ONES}, ':1: unknown column "Er"'),
    ],
)
def test_a_file_that_is_no_grid_is_refused_with_the_line_or_the_node(
    tmp_path: Path, columns: dict[str, np.ndarray], words: str
) -> None:
    write_csv(tmp_path / "v.csv", columns)
    lines = told(of(tmp_path, "potential-map", "v.csv"))
    assert lines[0].startswith(f"v.csv{words}")


def test_columns_of_other_coordinates_are_refused(tmp_path: Path) -> None:
    write_csv(tmp_path / "e.csv", {**RZ, "Er": ONES, "Ez": ONES, "Ex": ONES})
    assert ['e.csv:1: column "Ex" does not belong to r, z'] == told(
        of(tmp_path, "electric-map", "e.csv")
    )


def test_a_mirrored_axis_begins_at_zero(tmp_path: Path) -> None:
    write_csv(tmp_path / "v.csv", {**nodes(r=SIX, z=SIX - 2.0), "V": ONES})
    (line,) = told(of(tmp_path, "potential-map", "v.csv", mirrors=["z"]))
    assert line == "v.csv: z begins at -2 mm; a mirrored axis begins at 0 m"


def test_a_magnetic_map_needs_the_axis(tmp_path: Path) -> None:
    write_csv(tmp_path / "b.csv", {**nodes(r=SIX + 1.0, z=SIX), "Br": 0.0 * ONES, "Bz": ONES})
    (line,) = told(of(tmp_path, "magnetic-map", "b.csv"))
    assert line == "b.csv: r begins at 1 mm; needs to begin at 0 m"


@pytest.mark.parametrize(
    ("path", "words"),
    [
        ("../v.csv", "must lead to a file in the scenario's own folder"),
        ("/etc/v.csv", "must lead to a file in the scenario's own folder"),
        ("v.txt", "must end in .csv, .h5, .hdf5"),
    ],
)
def test_paths_stay_within_the_scenarios_folder(path: str, words: str) -> None:
    form = type(field("potential-map", path="v.csv"))
    keys = {"kind": "potential-map", "name": "map", "path": path}
    (fault,) = read_form(form, keys)[1]
    assert words in fault.needed


# -- in a scenario ----------------------------------------------------------------------------


def scenario(folder: Path, **keys: Any) -> Path:
    file = folder / "trap.toml"
    one = {"name": "map", "kind": "potential-map", "path": "v.csv", **keys}
    cloud = points("one", "barium", [[0.0, 0.0, 2.5e-3]])
    sections = {"field": [one], "cloud": [cloud], "species": {"barium": species(2.3e-25)}}
    file.write_text(toml_file({"title": "a map", "duration": "1 us", **sections}))
    return file


def test_a_fault_of_a_file_is_told_with_the_scenarios_line(tmp_path: Path) -> None:
    file = scenario(tmp_path)
    with pytest.raises(ScenarioError, match=r"v\.csv: there is no such file in the scenario's"):
        read_scenario(file)
    write_csv(tmp_path / "v.csv", without([8]))
    with pytest.raises(
        ScenarioError, match=r'trap\.toml:\d+ .*"map" path = "v\.csv": v\.csv: ther'
    ):
        read_scenario(file)


def test_the_digest_of_a_scenario_covers_the_files_of_its_fields(tmp_path: Path) -> None:
    file = scenario(tmp_path)
    write_csv(tmp_path / "v.csv", {**RZ, "V": ONES})
    first = read_scenario(file)
    again = read_scenario(file)
    write_csv(tmp_path / "v.csv", {**RZ, "V": 1.5 * ONES})
    changed = read_scenario(file)
    assert first.digest == again.digest
    assert first.digest != changed.digest
    potential = [
        evaluate(loaded.scenario.field, BODIES, [[1e-3, 0.0, 2e-3]], 0.0).potential[0]
        for loaded in (again, changed)
    ]
    assert [1.5, 1.5] == pytest.approx(potential)  # the file is read when it is needed
