"""The charged surface of electrodes of several outlines."""

from __future__ import annotations

import math

import pytest

from driftwell.boundary.drawn_elements import cone_power, exponent
from driftwell.boundary.drawn_surface import ContactError, charged_surface, evenness
from driftwell.geometry.outline import Outline, circle, rectangle
from tests.boundary.drawn_figures import ball, disc, path, sheet


def length(*drawn: Outline, axisymmetric: bool = False) -> float:
    """Length of the charged outline of one electrode."""
    return float(charged_surface([drawn], axisymmetric, 1.0).strokes.length.sum())


def test_what_lies_within_a_union_carries_no_charge() -> None:
    """Overlaps, common sides, second copies and sheets inside are left out."""
    assert 6.0 == pytest.approx(length(rectangle((0, 0), (1, 2))))
    assert 6.0 == pytest.approx(length(rectangle((0, 0), (1, 1)), rectangle((0, 1), (1, 2))))
    assert 6.0 == pytest.approx(length(rectangle((0, 0), (1, 1.3)), rectangle((0, 0.7), (1, 2))))
    assert 6.0 == pytest.approx(length(*(rectangle((0, 0), (1, 2)),) * 2))
    within = path((0.2, 0.2), (0.8, 1.0), solid=False)
    assert 6.0 == pytest.approx(length(rectangle((0, 0), (1, 2)), within))


def test_two_crossing_circles_keep_their_outer_arcs() -> None:
    """Of unit circles one apart, 4/3 pi each: each loses a third."""
    assert 8.0 * math.pi / 3.0 == pytest.approx(length(circle((0, 0), 1), circle((1, 0), 1)))


def test_a_hole_is_bounded_by_its_own_side() -> None:
    plate = rectangle((-2, -2), (2, 2)).joined(circle((0, 0), 1))
    surface = charged_surface([(plate,)], False, 1.0)
    assert 16.0 + 2.0 * math.pi == pytest.approx(surface.strokes.length.sum())
    # metal to the left of the square, to the right of the circle, both counter-clockwise
    assert surface.metal[:4, 0].all()
    assert surface.metal[4:, 1].all()
    assert 1 == surface.metal.sum(axis=1).max()


def test_the_line_along_the_axis_carries_no_charge() -> None:
    """A cylinder drawn as a rectangle from the axis has a bottom, a side and a top."""
    assert 4.0 == pytest.approx(length(rectangle((0, 0), (1, 2)), axisymmetric=True))


def test_electrodes_that_touch_are_refused_with_the_place() -> None:
    with pytest.raises(ContactError, match=r"electrodes 0 and 1 .* touch or cross at \(1 m, 0"):
        charged_surface([(rectangle((0, 0), (1, 1)),), (rectangle((1, 0), (2, 1)),)], False, 2.0)
    with pytest.raises(ContactError, match=r"draw both as shapes of one electrode"):
        charged_surface([(circle((0, 0), 1),), (circle((1, 0), 1),)], False, 2.0)


def test_mirror_planes_are_those_of_every_electrode() -> None:
    def even(*electrodes: Outline, axisymmetric: bool = False) -> tuple[bool, bool]:
        drawn = [(one,) for one in electrodes]
        return evenness(charged_surface(drawn, axisymmetric, 1.0), axisymmetric)

    box = rectangle((-0.5, -1.0), (0.5, 1.0))
    assert (True, True) == even(box)
    assert (True, True) == even(box, sheet(circle((0, 0), 1.5)))
    assert (False, True) == even(box, rectangle((1, -1), (2, 1)))
    assert (False, False) == even(box, rectangle((1, -1), (2, 1.001)))
    assert (False, True) == even(ball(0.0, 1.0), axisymmetric=True)
    assert (False, False) == even(disc(0.5, 1.0), disc(-0.5, 1.0), axisymmetric=True)


def test_cuts_do_not_hide_a_mirror_plane() -> None:
    drawn = path((-1, 0), (-0.3, 0), (1, 0), (0, 1), (-1, 0))
    assert (True, False) == evenness(charged_surface([(drawn,)], False, 1.0), False)


def test_elements_are_graded_by_the_angle_that_the_field_fills() -> None:
    """Smooth surface 1, edge of a sheet 2, edge of a box 3; inside a box the density is smooth."""
    expected = [1.0, 2.0, 3.0, 1.0]
    assert expected == [exponent(share * math.pi) for share in (1.0, 2.0, 1.5, 0.5)]


def test_the_potential_at_a_tip_is_like_a_power_of_the_distance() -> None:
    """nu = 1 for a plane; near 1/(2 ln(2/half angle)) for a needle, Jackson sec. 3.4; for a narrow
    hole 2.405 / half angle - 1/2."""
    assert 1.0 == pytest.approx(cone_power(0.5 * math.pi))
    assert 1.0 / (2.0 * math.log(2.0 / 1e-3)) == pytest.approx(cone_power(math.pi - 1e-3), rel=0.02)
    assert 2.405 / 0.2 - 0.5 == pytest.approx(cone_power(0.2), rel=1e-3)
