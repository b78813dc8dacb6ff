"""Points in a .vtp file of the library VTK, as columns.

Places are the points; arrays ``proper velocity``, ``velocity`` or ``momentum`` of three components,
``charge``, ``mass``, ``weight`` and ``t`` of one; ``cloud`` holds numbers whose names are the texts
``clouds`` of the whole file. Units stand in the arrays' label for them (UNITS_LABEL). Other arrays
are passed by. How much a file says it holds is looked at before the library opens it.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any
from xml.parsers import expat

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns, Floats

VECTORS = {"proper velocity": "u", "velocity": "v", "momentum": "p"}
"""Names of arrays, and how the columns begin that they become."""
SCALARS = ("charge", "mass", "weight", "t")
_CUT = b"<AppendedData"
_LONGEST_HEAD = 1_000_000
_MOST_PARTS = 64


def read_vtk(path: Path, rules: ColumnRules) -> Columns:
    """The columns of a file; raises ColumnError or OSError."""
    try:
        from vtkmodules.util.numpy_support import vtk_to_numpy
        from vtkmodules.vtkIOXML import vtkXMLPolyDataReader
    except ImportError as fault:
        raise ColumnError(
            ": reading .vtp files needs vtk, which is not installed; install it with: "
            "pip install 'driftwell[vtk]'"
        ) from fault
    _refuse_oversized(path, rules)
    reader = vtkXMLPolyDataReader()
    told: list[str] = []
    for each in (reader, reader.GetReaderErrorObserver()):
        if each is not None:
            each.AddObserver("ErrorEvent", lambda *_: told.append("error"))
    reader.SetFileName(str(path))
    with quiet_library():
        reader.Update()
    data = reader.GetOutput()
    if told or reader.GetErrorCode() or data is None or data.GetPoints() is None:
        raise ColumnError(": cannot be read (damaged, or not a file of this kind)")
    count = data.GetNumberOfPoints()
    found = _Arrays(data.GetPointData(), count, rules, vtk_to_numpy)
    places = found.numbers(data.GetPoints().GetData(), "x", 3, "Points")
    values = dict(zip("xyz", places, strict=True))
    for name, begin in VECTORS.items():
        if found.has(name):
            each = found.named(name, f"{begin}x", 3)
            values |= {f"{begin}{axis}": column for axis, column in zip("xyz", each, strict=True)}
    for name in SCALARS:
        if found.has(name):
            [values[name]] = found.named(name, name, 1)
    when = data.GetFieldData().GetArray("TimeValue")
    if "t" not in values and when is not None and when.GetNumberOfTuples() == 1:
        values["t"] = np.full(count, when.GetComponent(0, 0))
    rules.check_names(list(values), "")
    texts = {"cloud": _clouds(data, found)} if found.has("cloud") else {}
    return Columns(values, lambda row: f" point {row} (counted from 0)", texts)


@contextmanager
def quiet_library() -> Iterator[None]:
    """While it lasts the library prints nothing of its own."""
    from vtkmodules.vtkCommonCore import vtkLogger

    before = vtkLogger.GetCurrentVerbosityCutoff()
    vtkLogger.SetStderrVerbosity(vtkLogger.VERBOSITY_OFF)
    try:
        yield
    finally:
        vtkLogger.SetStderrVerbosity(before)


class _Arrays:
    """The arrays of a file with `count` points."""

    def __init__(self, data: Any, count: int, rules: ColumnRules, taken: Any) -> None:
        self._data = data
        self._count = count
        self._rules = rules
        self._taken = taken

    def has(self, name: str) -> bool:
        """Whether there is such an array."""
        return bool(self._data.HasArray(name))

    def named(self, name: str, column: str, components: int) -> list[Floats]:
        """The columns of an array, SI; its unit is that of `column`."""
        return self.numbers(self._data.GetArray(name), column, components, name)

    def numbers(self, array: Any, column: str, components: int, name: str) -> list[Floats]:
        """The same of an array at hand."""
        values = self._plain(array, components, name)
        unit = self._unit(array)
        if unit is None:
            raise ColumnError(
                f' "{name}": carries no unit (UNITS_LABEL); write the file with it, or as a table'
            )
        factor = self._rules.si_factor(column, unit, "")
        return [np.ascontiguousarray(each) * factor for each in values.T]

    def whole(self, name: str) -> NDArray[np.int64]:
        """An array of whole numbers, one for each point."""
        values = self._plain(self._data.GetArray(name), 1, name)[:, 0]
        if np.abs(values).max(initial=0.0) > 2**53 or (values != np.floor(values)).any():
            raise ColumnError(f' "{name}": needs whole numbers')
        return values.astype(np.int64)

    def _plain(self, array: Any, components: int, name: str) -> Floats:
        """The numbers as they stand, (n, components)."""
        if array is None:
            raise ColumnError(f' "{name}": does not hold real numbers')
        shape = (array.GetNumberOfTuples(), array.GetNumberOfComponents())
        if shape != (self._count, components):
            raise ColumnError(
                f' "{name}": has {shape[0]} times {shape[1]} numbers; needs {components} for each '
                f"of the {self._count} points"
            )
        values = np.array(self._taken(array), dtype=np.float64).reshape(shape)
        bad = np.flatnonzero(~np.isfinite(values).all(axis=1))
        if bad.size:
            raise ColumnError(
                *(
                    f' "{name}" point {row} (counted from 0): must be a finite number'
                    for row in bad[:TOLD]
                )
            )
        return values

    def _unit(self, array: Any) -> str | None:
        from vtkmodules.vtkCommonCore import vtkDataArray

        about, label = array.GetInformation(), vtkDataArray.UNITS_LABEL()
        return str(about.Get(label)).strip() if about.Has(label) else None


def _clouds(data: Any, found: _Arrays) -> list[str]:
    """The name of each point's cloud; a number without a name stands as itself."""
    listed = data.GetFieldData().GetAbstractArray("clouds")
    texts = hasattr(listed, "GetValue")
    count = listed.GetNumberOfValues() if texts else 0
    names = [str(listed.GetValue(k)) for k in range(min(count, 10_000))] if texts else []
    return [names[k] if 0 <= k < len(names) else str(k) for k in found.whole("cloud").tolist()]


def _refuse_oversized(path: Path, rules: ColumnRules) -> None:
    """Raise ColumnError where a file is none of points, or says it holds too many of anything."""
    with path.open("rb") as file:
        head = file.read(_LONGEST_HEAD)
    cut = head.find(_CUT)
    sizes: list[int] = []
    kinds: list[str] = []

    def begins(tag: str, attributes: dict[str, str]) -> None:
        if tag == "VTKFile":
            kinds.append(attributes.get("type", ""))
        for name, text in attributes.items():
            if name.startswith("NumberOf"):
                plain = text.strip()
                most = _MOST_PARTS if name == "NumberOfComponents" else rules.most + 1
                known = plain.isascii() and plain.isdecimal() and len(plain) < 20
                if not known or int(plain) > most:
                    raise ColumnError(f": says {name} {plain[:20]!r}; needs at most {most}")
                if name == "NumberOfPoints":
                    sizes.append(int(plain))

    def refused(*_: object) -> None:
        raise ColumnError(": declares entities, which no such file needs")

    parser = expat.ParserCreate()
    parser.StartElementHandler = begins
    parser.StartDoctypeDeclHandler = refused
    try:
        parser.Parse(head if cut < 0 else head[:cut], False)
    except expat.ExpatError as fault:
        raise ColumnError(": cannot be read (damaged, or not a file of this kind)") from fault
    if kinds != ["PolyData"]:
        raise ColumnError(f": is not a file of points ({kinds or 'no VTKFile'}); needs PolyData")
    if len(sizes) > _MOST_PARTS or sum(sizes) > rules.most:
        raise ColumnError(f": holds more than {rules.most} {rules.row}s")
