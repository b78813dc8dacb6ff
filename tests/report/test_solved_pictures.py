"""Pictures of solved electrodes, of small arrays."""

from __future__ import annotations

import numpy as np
import pytest
from matplotlib.colors import to_rgb
from matplotlib.contour import QuadContourSet

from driftwell.report.field_pictures.axis_potential import axis_potential
from driftwell.report.field_pictures.equipotentials import METAL, Drawn, equipotentials
from driftwell.report.field_pictures.surface_charge import charge_along_outlines, charge_in_space
from driftwell.report.paper.shades import shades
from driftwell.report.paper.sheet import png, style

X, Y = np.linspace(-0.03, 0.03, 31), np.linspace(0.0, 0.02, 21)
RING = Drawn("ring", np.array([[0, 15], [10, 15], [10, 18], [0, 18], [0, 15]]) * 1e-3)
GRID = Drawn("grid", np.array([[-20, 0], [-20, 10]]) * 1e-3)


@pytest.fixture(autouse=True)
def _styled():
    with style():
        yield


def drawn(figure) -> bool:
    """Whether the figure can be made into a file at all."""
    return png(figure, "a title").startswith(b"\x89PNG")


def plane(values: np.ndarray, electrodes=(RING, GRID)):
    return equipotentials("A lens", "invented", X, Y, values, electrodes)


def lines_of(figure) -> QuadContourSet:
    (lines,) = (each for each in figure.axes[0].collections if isinstance(each, QuadContourSet))
    return lines


def test_lines_of_equal_potential_stand_at_round_voltages_where_these_are() -> None:
    """A potential of 20 kV/m along x, so that a line at V lies at x = V/(20 kV/m)."""
    figure = plane(np.broadcast_to(2e4 * X, (21, 31)))
    lines = lines_of(figure)
    assert [-500, -400, -300, -200, -100, 0, 100, 200, 300, 400, 500] == list(lines.levels)
    for level, path in zip(lines.levels, lines.get_paths(), strict=True):
        assert level / 20.0 == pytest.approx(path.vertices[:, 0], abs=1e-9)
    panel, scale = figure.axes
    assert ["z (mm)", "r (mm)", "potential (V)"] == [
        panel.get_xlabel(),
        panel.get_ylabel(),
        scale.get_ylabel(),
    ]
    assert drawn(figure)


def test_electrodes_are_filled_or_drawn_as_sheets_and_named() -> None:
    figure = plane(np.broadcast_to(2e4 * X, (21, 31)))
    panel = figure.axes[0]
    (filled,) = panel.patches
    assert to_rgb(METAL) == filled.get_facecolor()[:3]
    assert RING.outline * 1e3 == pytest.approx(filled.get_xy()[:5])
    assert GRID.outline * 1e3 == pytest.approx(np.column_stack(panel.lines[0].get_data()))
    names = {text.get_text(): text.get_position() for text in panel.texts}
    assert (5.0, 16.5) == pytest.approx(names["ring"])
    assert (-20.0, 5.0) == pytest.approx(names["grid"])


def test_a_plane_without_potential_difference_or_with_holes_is_drawn_all_the_same() -> None:
    flat = plane(np.full((21, 31), 3.0))
    assert [] == [c for c in flat.axes[0].collections if isinstance(c, QuadContourSet)]
    holed = np.broadcast_to(2e4 * X, (21, 31)).copy()
    holed[:, 20:] = np.nan
    assert max(lines_of(plane(holed)).levels) < 200.0
    for values in (flat, plane(holed), plane(np.full((21, 31), np.nan))):
        assert drawn(values)


def test_axis_shows_each_electrode_at_one_volt_and_their_sum() -> None:
    left, right = np.linspace(1, 0, 31), np.linspace(0, 1, 31)
    figure = axis_potential(
        "A gap", "invented", X, [("in", left), ("out", right)], 500 * left - 200 * right, 2e-6
    )
    above, below = figure.axes
    assert [left.tolist(), right.tolist()] == [list(line.get_ydata()) for line in above.lines]
    (total,) = below.lines
    assert 500 * left - 200 * right == pytest.approx(total.get_ydata())
    assert "all electrodes at t = 2 µs" == below.get_title(loc="left")
    assert ["z (mm)", "potential (V)"] == [below.get_xlabel(), below.get_ylabel()]
    assert ["in", "out"] == [text.get_text() for text in figure.legends[0].get_texts()]
    assert drawn(figure)


def test_many_electrodes_share_the_last_entry_of_the_key() -> None:
    units = [(f"ring {k}", np.full(31, k / 40)) for k in range(40)]
    figure = axis_potential("A stack", "invented", X, units, np.zeros(31), 0.0)
    assert 40 == len(figure.axes[0].lines)
    assert "and 27 more" == figure.legends[0].get_texts()[-1].get_text()
    assert drawn(figure)


def test_charge_stands_along_each_outline() -> None:
    along = np.linspace(0.0, 0.04, 50)
    figure = charge_along_outlines(
        "A lens", "invented", [("ring", along, 1e-6 + along), ("cap", along[:9], -along[:9])]
    )
    panel = figure.axes[0]
    zero, ring, cap = panel.lines
    assert [0.0, 0.0] == list(zero.get_ydata())
    assert 1e3 * along == pytest.approx(ring.get_xdata())
    assert 1e3 * (1e-6 + along) == pytest.approx(ring.get_ydata())
    assert 9 == len(cap.get_xdata())
    assert "charge density (mC/m²)" == panel.get_ylabel()
    assert drawn(figure)


def test_charge_in_space_is_seen_from_two_sides_in_one_scale_of_colours() -> None:
    random = np.random.default_rng(1)
    position = random.uniform(-1, 1, (300, 3)) * [2e-3, 3e-3, 9e-3]
    density = random.normal(size=300) * 1e-7
    density[7] = 1e-3
    figure = charge_in_space("A body", "invented", position, density)
    side, front, scale = figure.axes
    (dots,) = side.collections
    (same,) = front.collections
    assert dots.get_clim() == same.get_clim()
    assert 500.0 > dots.get_clim()[1] == -dots.get_clim()[0]
    assert ["z (mm)", "x (mm)", "x (mm)", "y (mm)"] == [
        side.get_xlabel(),
        side.get_ylabel(),
        front.get_xlabel(),
        front.get_ylabel(),
    ]
    shown = dots.get_offsets()[np.argmax(dots.get_array())]
    assert 1e3 * position[7, [2, 0]] == pytest.approx(shown)
    assert "charge density (nC/m²)" == scale.get_ylabel()
    assert drawn(figure)


@pytest.mark.parametrize(
    ("values", "low", "high"),
    [([-1.0, 3.0], -3.0, 3.0), ([1.0, 3.0], 0.0, 3.0), ([-2.0, -1.0], -2.0, 0.0), ([], 0.0, 1.0)],
)
def test_colours_meet_at_zero_where_both_signs_are(values, low: float, high: float) -> None:
    """And the colour of zero is the lightest of all."""
    found = shades(values)
    assert (low, high) == (found.low, found.high)
    zero = float(np.sum(found.colours((0.0 - low) / (high - low))[:3]))
    assert zero >= max(float(np.sum(found.colours(t)[:3])) for t in np.linspace(0, 1, 41)) - 0.02
