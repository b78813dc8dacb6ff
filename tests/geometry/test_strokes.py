"""Strokes, their crossings, and curves made of arcs."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.geometry.biarcs import biarc, biarc_chain
from driftwell.geometry.crossings import meetings, neighbours
from driftwell.geometry.outline import arc, circle, line, outline, rectangle
from driftwell.geometry.revolution import least_r, without_axis
from driftwell.geometry.strokes import joined, strokes, turns_around


def test_strokes_follow_the_outline() -> None:
    """A slot: ends where pieces end, directions continued, arcs of a right angle at most."""
    drawn = outline(
        [
            [
                line((0.0, 0.0), (2.0, 0.0)),
                arc((2.0, 0.0), (2.0, 1.0), (2.0, 0.5), math.pi),
                line((2.0, 1.0), (0.0, 1.0)),
                arc((0.0, 1.0), (0.0, 0.0), (0.0, 0.5), math.pi),
            ]
        ],
        solid=True,
    )
    found = strokes(drawn)
    assert 6 == len(found)
    assert 4.0 + math.pi == pytest.approx(found.length.sum())
    assert np.roll(found.start, -1) == pytest.approx(found.end, abs=1e-15)
    turned = np.exp(1j * (np.roll(found.direction, -1) - found.last_direction))
    assert np.ones(6) == pytest.approx(turned)
    back = found.reversed()
    assert found.at(0.3 * found.length) == pytest.approx(back.at(0.7 * back.length))


def test_the_nearest_place_on_a_stroke_is_found() -> None:
    """On the circle where the point's own direction meets it, on a side at the foot."""
    random = np.random.default_rng(3)
    points = random.uniform(-2, 2, 50) + 1j * random.uniform(-2, 2, 50)
    round_one, square = strokes(circle((0.3, 0.1), 1.0)), strokes(rectangle((-1, -1), (1, 1)))
    expected = np.abs(np.abs(points - (0.3 + 0.1j)) - 1.0)
    assert expected == pytest.approx(round_one.nearest(points)[0].min(axis=1))
    x, y = np.abs(points.real) - 1.0, np.abs(points.imag) - 1.0
    outside = np.hypot(np.maximum(x, 0.0), np.maximum(y, 0.0))
    expected = np.where(np.maximum(x, y) > 0.0, outside, -np.maximum(x, y))
    assert expected == pytest.approx(square.nearest(points)[0].min(axis=1))


def test_turns_tell_what_is_inside() -> None:
    """A disc with a square hole, its arcs beyond their chords as well."""
    drawn = strokes(circle((0, 0), 1.0).joined(rectangle((-0.2, -0.2), (0.3, 0.4))))
    random = np.random.default_rng(4)
    points = random.uniform(-1.2, 1.2, 400) + 1j * random.uniform(-1.2, 1.2, 400)
    hole = (points.real > -0.2) & (points.real < 0.3) & (points.imag > -0.2) & (points.imag < 0.4)
    expected = (np.abs(points) < 1.0) & ~hole
    assert (expected == (turns_around(points, drawn) % 2 == 1)).all()


def test_all_crossings_are_found_and_nothing_else() -> None:
    """Of a circle and a square in its middle: eight; of two circles: two."""

    def places(*drawn: object) -> list[complex]:
        both = joined([strokes(one) for one in drawn])
        split = len(strokes(drawn[0]))
        return [
            complex(both.at(np.array([s]), np.array([i]))[0])
            for i, j in neighbours(both, 1e-10)
            for s, _ in meetings(both, i, j, 1e-10)
            if i < split <= j
        ]

    found = places(circle((0, 0), 1.1), rectangle((-1, -1), (1, 1)))
    half = math.sqrt(1.1**2 - 1.0)
    corners = [complex(x, y) for x in (-1, 1) for y in (-half, half)]
    corners += [complex(x, y) for x in (-half, half) for y in (-1, 1)]
    apart = np.abs(np.array(corners)[:, None] - np.array(found))
    assert (8, 8) == apart.shape
    assert np.zeros(8) == pytest.approx(apart.min(axis=0), abs=1e-12)
    assert np.zeros(8) == pytest.approx(apart.min(axis=1), abs=1e-12)
    found = places(circle((0, 0), 1.0), circle((1.0, 0.5), 0.7))
    assert 2 == len(found)
    assert np.ones(2) == pytest.approx(np.abs(found))
    assert np.full(2, 0.7) == pytest.approx(np.abs(np.array(found) - (1.0 + 0.5j)))
    assert [] == places(circle((0, 0), 1.0), circle((0.1, 0), 0.5))


def test_touching_and_overlapping_strokes_meet() -> None:
    touching = joined([strokes(circle((0, 0), 1)), strokes(rectangle((1, -2), (2, 2)))])
    found = [pair for i, j in neighbours(touching, 1e-9) for pair in meetings(touching, i, j, 1e-9)]
    assert any(abs(t - 2.0) < 1e-9 for _, t in found)
    two = joined([strokes(outline([[line((0, 0), (2, 0))], [line((3, 0), (1, 0))]], False))])
    found = sorted(meetings(two, 0, 1, 1e-9))
    assert np.array([(1.0, 2.0), (2.0, 1.0)]) == pytest.approx(np.array(found))


def test_two_arcs_meet_their_ends_and_directions() -> None:
    start, end = 0.1 + 0.2j, 1.0 + 0.7j
    leaving, arriving = np.exp(0.9j), np.exp(-0.4j)
    found = strokes(outline([biarc(start, leaving, end, arriving)], solid=False))
    assert start == pytest.approx(found.start[0])
    assert end == pytest.approx(found.end[-1])
    assert [0.9, -0.4] == pytest.approx([found.direction[0], found.last_direction[-1]])
    assert found.direction[1:] == pytest.approx(found.last_direction[:-1])


@pytest.mark.parametrize("tolerance", [1e-4, 1e-7])
def test_a_chain_of_arcs_is_as_near_to_its_curve_as_asked(tolerance: float) -> None:
    """An ellipse of half axes 2 and 1, also between the places that were looked at: to a half
    more; directions go on; and the number of arcs grows like the third root."""

    def ellipse(u: float) -> tuple[complex, complex]:
        return complex(2 * math.cos(u), math.sin(u)), complex(-2 * math.sin(u), math.cos(u))

    found = strokes(outline([biarc_chain(ellipse, 0.0, 2.0 * math.pi, tolerance)], solid=True))
    u = np.linspace(0.0, 2.0 * math.pi, 3001)
    points = 2 * np.cos(u) + 1j * np.sin(u)
    worst = found.nearest(points)[0].min(axis=1).max()
    assert 0.02 * tolerance < worst / 2.0 < 1.5 * tolerance
    turned = np.exp(1j * (found.direction[1:] - found.last_direction[:-1]))
    assert np.abs(turned - 1.0).max() < 1e-9
    assert 2.0 * tolerance ** (-1 / 3) < len(found) < 10.0 * tolerance ** (-1 / 3)


def test_the_least_r_counts_the_bulge_of_arcs() -> None:
    bulge = outline([[arc((1.0, 0.0), (1.0, -2.0), (1.0, -1.0), math.pi)]], solid=False)
    assert 0.0 == pytest.approx(least_r(bulge), abs=1e-15)
    assert 0.25 == pytest.approx(least_r(circle((1.0, 3.0), 0.75)))


def test_pieces_along_the_axis_are_left_out() -> None:
    """A closed loop then begins and ends on the axis, one that meets it twice becomes two."""
    square = list(rectangle((0, 0), (1, 2)).pieces)
    once = without_axis([square], solid=True)
    assert (3, [0, 3]) == (len(once.pieces), once.loops.tolist())
    assert [0.0, 0.0] == [once.pieces[0][0], once.pieces[-1][2]]
    turns = [(0, 0), (1, 0), (1, 3), (0, 3), (0, 2), (0.5, 2), (0.5, 1), (0, 1)]
    loop = [line(a, b) for a, b in zip(turns, [*turns[1:], turns[0]], strict=True)]
    twice = without_axis([loop], solid=True)
    assert [0, 3, 6] == twice.loops.tolist()
