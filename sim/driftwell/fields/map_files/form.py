"""What all fields that are read from a file have in common."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Self

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.fields.form import FieldForm, FieldRegion, PackedField, Role
from driftwell.fields.map_files.node_table import COORDINATES
from driftwell.fields.maps.grid import Grid
from driftwell.fields.maps.potential_map import MapGeometry
from driftwell.forms import checked, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.column_files import READERS, columns_inside, told_of_file
from driftwell.forms.columns import ColumnRules, Columns
from driftwell.forms.faults import Fault
from driftwell.forms.inside import check_inside
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveforms import (
    AnyWaveform,
    RealWave,
    largest_value,
    packed_waveform,
)
from driftwell.kernels.spline import SPARE

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class FittedMap:
    """What the file of a field became.

    role, number : the kernel's
    coefficients : of one spline, or of several, one after the other, as they are packed
    strength : what makes charges turn or swing fastest for a scale of 1: curvature of the potential
        (V/m^2) or field (T)
    held : what the file holds, in words
    """

    role: Role
    number: int
    geometry: MapGeometry
    grid: Grid
    coefficients: Floats
    strength: float
    held: str


class MapFile(FieldForm):
    """Base of the fields that a file gives on an even grid.

    The folder the path counts from is not stated in the scenario: :meth:`found_in` gives it.
    """

    path: str = key(
        "file in the scenario's folder, relative to it, .csv or .h5: one row for each node of an "
        "even grid, in any order; columns as said of the kind, each with its unit",
        example="einzel.csv",
    )
    scale: RealWave = key(
        "what the file's values are multiplied by, a number or in time", default=1.0
    )

    _folder: Path = Path()

    @checked
    def _inside(self) -> Self:
        check_inside(self.path, READERS, "path", "scenario")
        return self

    @classmethod
    def rules(cls) -> ColumnRules:
        """The columns such a file may have."""
        raise TypeError(f"{cls.__name__} must say what its file holds")

    @classmethod
    def fit(cls, columns: Columns, mirrors: tuple[str, ...], tolerance: float) -> FittedMap:
        """The splines of a file; raises ColumnError where it gives none."""
        raise TypeError(f"{cls.__name__} must say how its file is fitted")

    def fit_options(self) -> tuple[tuple[str, ...], float]:
        """Mirrors and tolerance of :meth:`fit`."""
        return (), 0.0

    def found_in(self, folder: Path) -> Self:
        found = self.model_copy()
        found._folder = folder
        return found

    def files_named(self) -> tuple[str, ...]:
        return (self.path,)

    def fitted(self) -> FittedMap:
        """The file's splines, kept from call to call; raises ScenarioError."""
        with told_of_file(self.path):
            file = self._folder / self.path
            stamp = (file.stat().st_size, file.stat().st_mtime_ns) if file.is_file() else (0, 0)
            return _kept(type(self), self._folder.absolute(), self.path, stamp, *self.fit_options())

    def faults(self) -> list[Fault]:
        try:
            self.fitted()
        except ScenarioError as error:
            return [Fault(("path",), "", line) for line in str(error).splitlines()]
        return []

    def waveform(self) -> AnyWaveform:
        return self.scale

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        found = self.fitted()
        return PackedField(
            found.role,
            found.number,
            (*self.centre, *found.grid.parameters()),
            packed_waveform(self.scale),
            found.coefficients,
        )

    def region(self) -> FieldRegion:
        found = self.fitted()
        return FieldRegion(found.geometry, found.grid.region())

    def words(self) -> str:
        found = self.fitted()
        grid = found.grid
        axes = ", ".join(
            f"{name} from {spelled(grid.origin[a], 'm')} to {spelled(grid.axis(a)[-1], 'm')}"
            for a, name in enumerate(COORDINATES[found.geometry])
        )
        nodes = " x ".join(str(n) for n in grid.counts)
        return (
            f"{found.held} from the file {self.path}, {nodes} nodes, {axes}"
            f"{self._times()}{self.where()}"
        )

    def _times(self) -> str:
        if isinstance(self.scale, WaveformForm):
            kind = getattr(self.scale, "kind", "waveform")
            return f", times a {kind} of at most {largest_value(self.scale):g}"
        return "" if self.scale == 1.0 else f", times {self.scale:g}"


@lru_cache(maxsize=8)
def _kept(
    kind: type[MapFile],
    folder: Path,
    path: str,
    stamp: tuple[int, int],
    mirrors: tuple[str, ...],
    tolerance: float,
) -> FittedMap:
    """The fit of a file, made once as long as size and time of change stay the same."""
    return kind.fit(columns_inside(folder, path, kind.rules()), mirrors, tolerance)


def packed_coefficients(*splines: Floats) -> Floats:
    """Coefficients one after the other, with what a kernel's last load may touch."""
    return np.concatenate([*(spline.ravel() for spline in splines), np.zeros(SPARE)])
