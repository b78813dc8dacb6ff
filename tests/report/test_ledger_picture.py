"""The picture of the ledger: residuals on a logarithmic axis that has a place for zero."""

from __future__ import annotations

import numpy as np
import pytest
from pictured_run import MASS, NONE, charges, pictured_run

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.ledger import ledger_picture
from driftwell.report.pictures.scene import scene_of


def drawn(run):
    with style():
        figure = ledger_picture(scene_of(run))
        if figure is not None:
            figure.draw_without_rendering()
        return figure


def run_with(folder, alive=None, **ledger):
    start = charges(10) if alive is None else alive
    return pictured_run(folder, [(0.0, start), (1e-6, start), (2e-6, start)], ledger=ledger)


def numbers(axes):
    low, high = axes.get_ylim()
    ticks = axes.yaxis.get_major_ticks()
    return {t.get_loc(): t.label1.get_text() for t in ticks if low <= t.get_loc() <= high}


def key(axes):
    return [text.get_text() for text in axes.get_legend().get_texts()]


def test_residuals_are_magnitudes_on_a_logarithmic_axis(tmp_path):
    run = run_with(tmp_path / "run", energy_residual=[1e-9, -2e-6, 1e-5])
    axes = drawn(run).axes[0]
    assert "log" == axes.get_yscale()
    np.testing.assert_array_equal([1e-9, 2e-6, 1e-5], axes.lines[0].get_ydata())
    assert "energy: 1.0e-05 at most" == key(axes)[0]


def test_zeros_stand_on_the_lowest_number_which_is_zero(tmp_path):
    axes = drawn(run_with(tmp_path / "run", energy_residual=[0.0, 3e-7, 1e-5])).axes[0]
    places = numbers(axes)
    floor = min(places)
    assert "0" == places[floor]
    assert ["1e−7", "1e−6", "1e−5"] == [places[each] for each in sorted(places)[1:]]
    assert [floor] == axes.lines[1].get_ydata().tolist()
    assert np.isnan(axes.lines[0].get_ydata()[0])
    for line in axes.lines[2:]:
        assert [floor] * 3 == line.get_ydata().tolist()


def test_a_ledger_that_closes_exactly_says_so(tmp_path):
    axes = drawn(run_with(tmp_path / "run")).axes[0]
    names = ("energy", "momentum", "angular momentum", "third law", "charge", "count")
    assert [f"{name}: 0" for name in names] == key(axes)


def test_a_residual_too_small_for_any_axis_is_zero(tmp_path):
    axes = drawn(run_with(tmp_path / "run", momentum_residual=[0.0, 5e-324, 1e-200])).axes[0]
    assert "momentum: 0" == key(axes)[1]


def test_a_residual_that_is_no_number_is_said_to_be_none(tmp_path):
    axes = drawn(run_with(tmp_path / "run", energy_residual=[0.0, 1e-9, np.nan])).axes[0]
    assert "energy: not a number" == key(axes)[0]


@pytest.mark.parametrize(
    ("speed", "unit", "size"), [(1e3, "eV", ELEMENTARY_CHARGE), (3e14, "kJ", 1e3)]
)
def test_energies_are_in_electronvolts_or_joules(tmp_path, speed, unit, size):
    fast = charges(10, speed=(speed, speed, speed))
    axes = drawn(run_with(tmp_path / "run", fast)).axes[1]
    assert f"energy ({unit})" == axes.get_ylabel()
    energy = 0.5 * MASS * (fast.velocity**2).sum() / size
    assert energy == pytest.approx(axes.lines[0].get_ydata()[0])


def test_only_energies_that_there_are_have_a_line(tmp_path):
    axes = drawn(run_with(tmp_path / "run", coulomb=[0.0, 1e-19, 0.0])).axes[1]
    assert ["kinetic", "of all pairs"] == key(axes)
    assert 2 == len(axes.lines)


def test_no_energy_at_all_leaves_the_residuals_alone(tmp_path):
    assert 1 == len(drawn(run_with(tmp_path / "run", NONE)).axes)


def test_one_row_alone_shows_nothing(tmp_path):
    assert drawn(pictured_run(tmp_path / "run", [(0.0, charges(3))])) is None
