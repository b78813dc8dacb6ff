"""Files of grid nodes: values on an even grid, one row for each node, in any order.

    r [mm], z [mm], V [V]
    0,      -10,    0.012
    ...

The coordinates are r and z, x and y, or x, y and z, and every node of the grid has its row.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.grid import FEWEST, Grid
from driftwell.fields.maps.potential_map import MapGeometry
from driftwell.forms import Length, spelled
from driftwell.forms.columns import ColumnError, ColumnRules, Columns

Floats = NDArray[np.float64]
Names = tuple[str, ...]

COORDINATES: dict[MapGeometry, Names] = {
    "axisymmetric": ("r", "z"),
    "planar": ("x", "y"),
    "spatial": ("x", "y", "z"),
}
MOST_NODES = 20_000_000
MOST_ALONG = 2000
"""Nodes along one axis at most: fits work with matrices of that size."""
_SAME = 1e-6
"""Coordinates closer than this part of their whole range are one."""
_UNEVEN = 1e-3
"""Part of the spacing by which nodes may be off an even grid."""


@dataclass(frozen=True, slots=True)
class NodeTable:
    """Values on an even grid.

    values : SI values (n0, n1, ...) by name of the column
    """

    geometry: MapGeometry
    grid: Grid
    values: dict[str, Floats]


def node_rules(kinds: Mapping[MapGeometry, Names], quantity: Any, example: str) -> ColumnRules:
    """The rules of files with these columns beside the coordinates of each geometry."""
    places = [name for names in COORDINATES.values() for name in names]
    held = [name for names in kinds.values() for name in names]
    return ColumnRules(
        "node",
        MOST_NODES,
        example,
        {**dict.fromkeys(places, Length), **dict.fromkeys(held, quantity)},
        lambda names: _name_faults(names, kinds),
    )


def _name_faults(names: Sequence[str], kinds: Mapping[MapGeometry, Names]) -> list[str]:
    """What is wrong with the columns a file has, taken together."""
    places = {name for every in COORDINATES.values() for name in every}
    found = {name for name in names if name in places}
    for geometry, held in kinds.items():
        wanted = COORDINATES[geometry]
        if found == set(wanted):
            return [
                f'column "{name}" is missing beside {", ".join(wanted)}'
                for name in held
                if name not in names
            ] + [
                f'column "{name}" does not belong to {", ".join(wanted)}'
                for name in names
                if name not in (*wanted, *held)
            ]
    ways = " or ".join(", ".join((*COORDINATES[g], *held)) for g, held in kinds.items())
    return [f"needs the columns {ways}"]


def node_table(columns: Columns, mirrors: Sequence[str] = ()) -> NodeTable:
    """The rows of a file put on their grid; raises ColumnError where they make none.

    mirrors : coordinates of which the file holds the half from 0 on
    """
    geometry = _geometry_of(columns.values)
    names = COORDINATES[geometry]
    if columns.values[names[0]].size == 0:
        raise ColumnError(": holds no nodes; needs at least one row")
    places = [columns.values[name] for name in names]
    held = {name: value for name, value in columns.values.items() if name not in names}
    _check_finite(columns)
    axes = [_axis(name, place) for name, place in zip(names, places, strict=True)]
    folded = tuple(
        _folded(name, low, step, mirrors) for name, (low, step, _) in zip(names, axes, strict=True)
    )
    grid = Grid(
        tuple(0.0 if m else low for m, (low, _, _) in zip(folded, axes, strict=True)),
        tuple(step for _, step, _ in axes),
        tuple(count for _, _, count in axes),
        folded,
    )
    order = _rows_of_nodes(columns, names, grid, places)
    return NodeTable(
        geometry, grid, {name: value[order].reshape(grid.counts) for name, value in held.items()}
    )


def _geometry_of(values: Mapping[str, Floats]) -> MapGeometry:
    if "r" in values:
        return "axisymmetric"
    return "spatial" if "z" in values else "planar"


def _check_finite(columns: Columns) -> None:
    for name, value in columns.values.items():
        bad = np.flatnonzero(~np.isfinite(value))
        if bad.size:
            raise ColumnError(
                f'{columns.where(int(bad[0]))}: column "{name}" is not finite in SI units'
            )


def _axis(name: str, place: Floats) -> tuple[float, float, int]:
    """First coordinate, spacing and number of nodes along an axis."""
    rising = np.unique(place)
    width = float(rising[-1] - rising[0])
    starts = np.concatenate([[True], np.diff(rising) > _SAME * width])
    levels = rising[starts]
    if len(levels) < FEWEST:
        raise ColumnError(f": has {len(levels)} values of {name}; needs at least {FEWEST}")
    step = width / (len(levels) - 1)
    gaps = np.diff(levels)
    even = levels[0] + step * np.arange(len(levels))
    if np.abs(levels - even).max() > _UNEVEN * step:
        usual = float(np.median(gaps))
        odd = int(np.argmax(np.abs(gaps - usual)))
        raise ColumnError(
            f": the values of {name} are not evenly spaced: {spelled(gaps[odd], 'm')} lie between "
            f"{spelled(levels[odd], 'm')} and {spelled(levels[odd + 1], 'm')}, "
            f"{spelled(usual, 'm')} between most"
        )
    if len(levels) > MOST_ALONG:
        raise ColumnError(f": has {len(levels)} values of {name}; needs at most {MOST_ALONG}")
    return float(levels[0]), step, len(levels)


def _folded(name: str, low: float, step: float, mirrors: Sequence[str]) -> bool:
    """Whether an axis begins at a mirror: r on its axis, others where that is said."""
    at_zero = abs(low) < _SAME * step
    if name == "r":
        if low < 0.0 and not at_zero:
            raise ColumnError(f": r begins at {spelled(low, 'm')}; a distance is not negative")
        return at_zero
    if name in mirrors and not at_zero:
        raise ColumnError(f": {name} begins at {spelled(low, 'm')}; a mirrored axis begins at 0 m")
    return name in mirrors


def _rows_of_nodes(
    columns: Columns, names: Names, grid: Grid, places: Sequence[Floats]
) -> NDArray[np.int64]:
    """The row of each node, in the order of the grid."""
    index = np.zeros(places[0].size, dtype=np.int64)
    for axis, place in enumerate(places):
        node = np.rint((place - grid.origin[axis]) / grid.spacing[axis]).astype(np.int64)
        index = index * grid.counts[axis] + node
    rows = np.full(grid.size, -1, dtype=np.int64)
    rows[index[::-1]] = np.arange(index.size)[::-1]  # the first row of a node stays
    again = np.flatnonzero(rows[index] != np.arange(index.size))
    if again.size:
        row = int(again[0])
        raise ColumnError(
            f"{columns.where(row)}: {_node_words(names, grid, int(index[row]))} has a row already "
            f"({columns.where(int(rows[index[row]])).strip(' :')})"
        )
    missing = np.flatnonzero(rows < 0)
    if missing.size:
        raise ColumnError(
            f": there is no row for {_node_words(names, grid, int(missing[0]))}; "
            f"{missing.size} of {math.prod(grid.counts)} nodes are missing"
        )
    return rows


def _node_words(names: Names, grid: Grid, node: int) -> str:
    indices = np.unravel_index(node, grid.counts)
    return ", ".join(
        f"{name} = {spelled(low + step * int(i), 'm')}"
        for name, low, step, i in zip(names, grid.origin, grid.spacing, indices, strict=True)
    )
