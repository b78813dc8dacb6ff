"""What does not go together with a cell that repeats, and places folded into it."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.cell import Cell
from driftwell.forms import Form, spelled
from driftwell.forms.faults import Fault
from driftwell.scenario.model import Scenario

WIDEST = 4.0
"""Largest extent across the axis, in periods, that the sums over images are made for."""


def cell_faults(scenario: Scenario) -> Iterator[Fault]:
    """Faults of a scenario with a cell: what does not repeat with it, or lies outside."""
    cell = scenario.cell
    if cell is None:
        return
    if scenario.images is not None:
        text = "images of a cell that repeats are not summed; leave out [images] or [cell]"
        yield Fault(("images",), "", text)
    if scenario.source:
        text = "charges born within a cell that repeats are not summed; leave out one of the two"
        yield Fault(("source",), "", text)
    if scenario.coulomb.frame == "bunch" and scenario.coulomb.method != "off":
        text = "rest frames do not go with [cell]; leave one of them out"
        yield Fault(("coulomb", "frame"), "", text)
    common = scenario.electrodes
    flat = common is not None and common.geometry == "planar" and cell.axis == "z"
    if scenario.electrode and not flat:
        text = (
            "the field of electrodes does not repeat with [cell]; needs planar electrodes and "
            'axis = "z", along which they are endless, or a [[field]] that repeats'
        )
        yield Fault(("electrode",), "", text)
    if scenario.coulomb.softening >= 0.5 * cell.length:
        limit = spelled(0.5 * cell.length, "m")
        text = f"must be less than half the length of [cell], {limit}"
        yield Fault(("coulomb", "softening"), "", text)
    if max(abs(cell.begin), abs(cell.begin + cell.length)) > scenario.stepping.extent:
        limit = spelled(scenario.stepping.extent, "m")
        yield Fault(("cell", "length"), "", f"reaches beyond [stepping] extent, {limit}")
    for section, surfaces in (("wall", scenario.wall), ("detector", scenario.detector)):
        for i, surface in enumerate(surfaces):
            if _lies_outside(surface, cell):
                text = f"lies outside the cell, which {cell.words()}: no charge comes there"
                yield Fault((section, i, "at"), "", text)


def _lies_outside(surface: Form, cell: Cell) -> bool:
    """Whether a plane across the axis is nowhere in the cell."""
    normal, at = getattr(surface, "normal", None), getattr(surface, "at", None)
    if normal is None or at is None:
        return False
    across = math.hypot(*(n for k, n in enumerate(normal) if k != cell.number))
    return across == 0.0 and not cell.begin <= at[cell.number] <= cell.begin + cell.length


def folded(cell: Cell | None, places: NDArray[np.float64]) -> NDArray[np.float64]:
    """Places (n, 3) put back into the cell by whole periods; as they are without one."""
    if cell is None:
        return places
    x = places[:, cell.number]
    found = places.copy()
    inside = x - cell.length * np.floor((x - cell.begin) / cell.length)
    found[:, cell.number] = np.where(inside < cell.begin + cell.length, inside, cell.begin)
    return found
