"""The charged surface of drawn electrodes: outlines of each joined to one, cut where they meet.

An electrode may be drawn as several outlines that overlap, touch or have sides in common. What
counts is their union: strokes are cut wherever they meet, and those with metal on both sides are
left out, as are second copies.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.sparse import coo_array
from scipy.sparse.csgraph import connected_components
from scipy.spatial import cKDTree

from driftwell.errors import DriftwellError
from driftwell.geometry.crossings import meetings, neighbours
from driftwell.geometry.outline import Outline
from driftwell.geometry.strokes import Strokes, joined, strokes, turns_around

Floats = NDArray[np.float64]
Complex = NDArray[np.complex128]
Flags = NDArray[np.bool_]
SAME_PLACE = 1e-10
"""Distance, of the size of all electrodes, below which two points are one."""
_ALIKE = 1e-9
"""Distance, of the size, below which a surface counts as its own mirror image."""
_ASIDE = 1e-5
"""How far from its middle, of its length, a stroke is asked for metal."""


@dataclass(frozen=True, slots=True)
class Surface:
    """Strokes that carry charge, in their electrodes' order, in units of the electrodes' size.

    strokes : n of them
    electrode : (n,) int64
    metal : (n, 2) bool, whether there is metal to their left and right
    """

    strokes: Strokes
    electrode: NDArray[np.int64]
    metal: Flags


def _without_axis(all_strokes: Strokes, axisymmetric: bool) -> Flags:
    """Which strokes have a surface: those along the axis have none, nor those without length."""
    kept = all_strokes.length > SAME_PLACE
    if axisymmetric:
        ends = np.maximum(np.abs(all_strokes.start.real), np.abs(all_strokes.end.real))
        kept &= (ends > SAME_PLACE) | (all_strokes.curvature != 0.0)
    return np.asarray(kept)


def _cut(pieces: Strokes, owner: NDArray[np.int64]) -> tuple[Strokes, NDArray[np.int64]]:
    """Strokes cut where they meet others; gives also which stroke each part was of.

    Raises DriftwellError where strokes of two electrodes meet.
    """
    cuts: list[list[float]] = [[] for _ in range(len(pieces))]
    for i, j in neighbours(pieces, SAME_PLACE):
        for s, t in meetings(pieces, i, j, SAME_PLACE):
            if owner[i] != owner[j]:
                there = pieces.at(np.array([s]), np.array([i]))[0]
                raise ContactError(int(owner[i]), int(owner[j]), complex(there))
            cuts[i].append(s)
            cuts[j].append(t)
    parts, origin = [], []
    for i, places in enumerate(cuts):
        length = float(pieces.length[i])
        inner = sorted(s for s in places if 4.0 * SAME_PLACE < s < length - 4.0 * SAME_PLACE)
        bounds = [0.0]
        for s in inner:
            if s - bounds[-1] > 4.0 * SAME_PLACE:
                bounds.append(s)
        bounds.append(length)
        if len(bounds) == 2:
            parts.append(pieces.taken(np.array([i])))
        else:
            parts += [pieces.part(i, a, b) for a, b in itertools.pairwise(bounds)]
        origin += [i] * (len(bounds) - 1)
    return joined(parts), np.array(origin, dtype=np.int64)


class ContactError(DriftwellError):
    """Two electrodes touch or overlap.

    pair : their numbers
    place : where, m (within :func:`charged_surface`: in units of the size)
    """

    def __init__(self, first: int, second: int, place: complex) -> None:
        super().__init__(
            f"electrodes {first} and {second} (counted from 0) touch or cross at "
            f"({place.real:.6g} m, {place.imag:.6g} m); needs a gap between them: move one, or "
            "draw both as shapes of one electrode."
        )
        self.pair = (first, second)
        self.place = place


def _closed(bounding: Strokes, loops: NDArray[np.int64]) -> Strokes:
    """The strokes, and a straight one from the end to the start of each loop that is open."""
    parts = [bounding]
    for first, last in itertools.pairwise(loops):
        begin, end = bounding.start[first], bounding.at(bounding.length)[last - 1]
        if abs(begin - end) > SAME_PLACE:
            along = np.array([begin - end])
            parts.append(Strokes(np.array([end]), np.angle(along), np.zeros(1), np.abs(along)))
    return joined(parts)


def _loops_of_strokes(outline: Outline, size: float) -> tuple[Strokes, NDArray[np.int64]]:
    """All strokes of an outline in units of `size`, and where its loops begin among them."""
    parts, loops = [], [0]
    for first, last in zip(outline.loops[:-1], outline.loops[1:], strict=True):
        one = Outline(outline.pieces[first:last], np.array([0, last - first]), outline.solid)
        found = strokes(one)
        parts.append(
            Strokes(
                found.start / size, found.direction, found.curvature * size, found.length / size
            )
        )
        loops.append(loops[-1] + len(found))
    return joined(parts), np.array(loops, dtype=np.int64)


def _metal(middles: Strokes, bounds: list[Strokes]) -> Flags:
    """Whether there is metal at the left and right of the middle of each stroke, (n, 2)."""
    half = 0.5 * middles.length
    centre = middles.at(half)
    normal = 1j * np.exp(1j * (middles.direction + middles.curvature * half))
    aside = _ASIDE * middles.length * normal
    metal = np.zeros((len(middles), 2), dtype=bool)
    for bound in bounds:
        for side, points in enumerate((centre + aside, centre - aside)):
            metal[:, side] |= turns_around(points, bound) % 2 == 1
    return metal


def _first_of_each(parts: Strokes) -> Flags:
    """Which strokes are no second copies of others."""
    middle = parts.at(0.5 * parts.length)
    tree = cKDTree(np.stack([middle.real, middle.imag], axis=1))
    first = np.ones(len(parts), dtype=bool)
    for i, j in sorted(tree.query_pairs(4.0 * SAME_PLACE)):
        if abs(parts.length[i] - parts.length[j]) <= 8.0 * SAME_PLACE:
            first[j] = False
    return first


def size_of(outlines: Sequence[tuple[Outline, ...]]) -> float:
    """The largest coordinate of all electrodes, m."""
    sizes = []
    for outline in (outline for drawn in outlines for outline in drawn):
        ends = strokes(outline)
        sizes.append(float(np.abs(np.concatenate([ends.start, ends.end])).max()))
    return max(sizes)


def charged_surface(
    outlines: Sequence[tuple[Outline, ...]], axisymmetric: bool, size: float
) -> Surface:
    """The surface of electrodes of some outlines each, in units of `size`, m.

    Raises ContactError where two electrodes touch.
    """
    pieces, owner, metal = [], [], []
    bounds: list[list[Strokes]] = []
    for number, drawn in enumerate(outlines):
        of_one, solids = [], []
        for outline in drawn:
            found, loops = _loops_of_strokes(outline, size)
            of_one.append(found.taken(_without_axis(found, axisymmetric)))
            if outline.solid:
                solids.append(_closed(found, loops))
        pieces += of_one
        owner += [number] * sum(len(part) for part in of_one)
        bounds.append(solids)
    owners = np.array(owner, dtype=np.int64)
    try:
        parts, origin = _cut(joined(pieces), owners)
    except ContactError as fault:
        raise ContactError(*fault.pair, fault.place * size) from None
    owners = owners[origin]
    metal = [
        _metal(parts.taken(owners == number), bounds[number]) for number in range(len(outlines))
    ]
    sides = np.concatenate(metal)
    kept = ~sides.all(axis=1) & _first_of_each(parts)
    return Surface(parts.taken(kept), owners[kept], sides[kept])


def vertices(ends: NDArray[np.complex128]) -> NDArray[np.int64]:
    """A number for each end, the same for ends at one place."""
    tree = cKDTree(np.stack([ends.real, ends.imag], axis=1))
    pairs = tree.query_pairs(8.0 * SAME_PLACE, output_type="ndarray")
    links = coo_array((np.ones(len(pairs)), (pairs[:, 0], pairs[:, 1])), shape=(len(ends),) * 2)
    return np.asarray(connected_components(links, directed=False)[1], dtype=np.int64)


def evenness(surface: Surface, axisymmetric: bool) -> tuple[bool, bool]:
    """For each coordinate, whether the surface of every electrode is its own mirror image in it."""
    owns = [surface.electrode == number for number in np.unique(surface.electrode)]
    each = [surface.strokes.taken(own) for own in owns]
    return (
        not axisymmetric and all(_even(one, lambda z: -z.conjugate()) for one in each),
        all(_even(one, lambda z: z.conjugate()) for one in each),
    )


def _even(found: Strokes, image: Callable[[Complex], Complex]) -> bool:
    """Whether strokes are their own image, however they are cut."""

    def apart(places: Complex) -> NDArray[np.bool_]:
        tree = cKDTree(np.stack([places.real, places.imag], axis=1))
        mirrored = image(places)
        distance, _ = tree.query(np.stack([mirrored.real, mirrored.imag], axis=1))
        return np.asarray(distance > _ALIKE)

    # strokes whose ends and middle have no counterpart are compared with all others
    ends = np.concatenate([found.start, found.end])
    doubtful = apart(found.at(0.5 * found.length)) | apart(ends).reshape(2, -1).any(axis=0)
    share = np.array([0.0, 0.213, 0.5, 0.787, 1.0])
    for k in np.flatnonzero(doubtful):
        points = image(found.at(found.length[k] * share, np.full(5, k)))
        if found.nearest(points)[0].min(axis=1).max() > _ALIKE:
            return False
    return True


def field_angles(directions: Floats, metal_left: Flags) -> Floats:
    """The widest angle without metal beside each stroke that leaves one vertex, (n,), rad.

    directions : in which the strokes leave the vertex
    metal_left : whether metal lies to the left of each, seen from the vertex
    """
    order = np.argsort(directions % (2.0 * math.pi), kind="stable")
    sorted_directions = (directions % (2.0 * math.pi))[order]
    following = np.append(sorted_directions[1:], sorted_directions[0] + 2.0 * math.pi)
    sector = np.where(metal_left[order], 0.0, following - sorted_directions)
    widest = np.maximum(sector, np.roll(sector, 1))
    found = np.empty(len(directions))
    found[order] = widest
    return found
