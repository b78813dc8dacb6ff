"""Files of columns: what a file of rows must hold, whatever its format.

Each column has a name and a unit; any column that is not known is a fault, and so is a number that
is not finite: nothing in a file is passed over in silence.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.quantities import read_quantity

Floats = NDArray[np.float64]

TOLD = 5
"""Faults of one file that are told before the rest is left."""


class ColumnError(Exception):
    """What is wrong with a file of columns: lines that begin where its name ends."""

    def __init__(self, *lines: str) -> None:
        super().__init__(*lines)
        self.lines = lines


@dataclass(frozen=True, slots=True)
class ColumnRules:
    """What files of a sort must hold.

    row : what a row is, e.g. ``charge``
    most : rows at most
    example : a first line of a file of text
    quantities : the columns there may be, and the dimensioned type of each; None: a pure number,
        its unit "1"
    further : faults of a file's names, once all are known and none is there twice
    labels : the columns of text there may be, without a unit
    """

    row: str
    most: int
    example: str
    quantities: Mapping[str, Any]
    further: Callable[[Sequence[str]], Sequence[str]]
    labels: tuple[str, ...] = ()

    def check_names(self, names: Sequence[str], where: str) -> None:
        """Raise a fault where `names` are not the columns of such a file."""
        lines = [
            f'unknown column "{name}"; the columns are {", ".join(self.quantities)}'
            for name in names
            if name not in self.quantities and name not in self.labels
        ]
        lines += [
            f'column "{name}" is there {names.count(name)} times'
            for name in (*self.quantities, *self.labels)
            if names.count(name) > 1
        ]
        lines += self.further(names)
        if lines:
            raise ColumnError(*(f"{where}: {line}" for line in lines))

    def si_factor(self, name: str, unit: str, where: str) -> float:
        """What a number in the column `name` with `unit` is multiplied by."""
        if self.quantities[name] is None:
            if unit != "1":
                raise ColumnError(f'{where}: unit "{unit}" of column "{name}": needs "1"')
            return 1.0
        try:
            return read_quantity(self.quantities[name], f"1 {unit}")
        except ValueError as fault:
            raise ColumnError(f'{where}: unit "{unit}" of column "{name}": {fault}') from fault

    def leading(self, names: Sequence[str]) -> str:
        """The column the others are as long as."""
        return next(name for name in self.quantities if name in names)


@dataclass(frozen=True, slots=True)
class Columns:
    """A file as read.

    values : SI values by name of the column, (n,) float64 each
    where : the place of a row in the file, as a message says it after the file's name
    texts : texts by name of the column, n each
    chosen : whether it is of one group at one time, so that there is nothing left to choose
    """

    values: dict[str, Floats]
    where: Callable[[int], str]
    texts: Mapping[str, Sequence[str]] = field(default_factory=dict)
    chosen: bool = False
