"""Particles in the open standard openPMD (1.x, HDF5), as columns.

Of one species at one iteration: position with positionOffset; momentum, or velocity where there is
none; weighting, mass, charge; time, where particles have their own. Whatever else a file holds is
passed by. All values are multiplied by their unitSI, and those of a whole macro-particle
(macroWeighted) divided by its weighting, to the power that the file says.

A momentum becomes the proper velocity p / m by the mass in the file, whose unit is divided first:
where momenta are kept in units of the mass nothing is rounded.

References
----------
A. Huebl et al., openPMD 1.1.0 and its extension ED-PIC (macroWeighted, weightingPower); from
memory.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from driftwell.forms.choice import Choice
from driftwell.forms.columns import ColumnError, ColumnRules, Columns, Floats
from driftwell.forms.hdf5_numbers import finite_numbers

AXES = ("x", "y", "z")
LENGTH = (1, 0, 0, 0, 0, 0, 0)
MASS = (0, 1, 0, 0, 0, 0, 0)
TIME = (0, 0, 1, 0, 0, 0, 0)
CHARGE = (0, 0, 1, 1, 0, 0, 0)
NUMBER = (0, 0, 0, 0, 0, 0, 0)
SPEED = (1, 0, -1, 0, 0, 0, 0)
MOMENTUM = (1, 1, -1, 0, 0, 0, 0)


def read_openpmd(file: Any, rules: ColumnRules, choice: Choice) -> Columns:
    """The columns of an open file; raises ColumnError."""
    version = _text(file, "openPMD")
    if not version.startswith("1."):
        raise ColumnError(f': is openPMD "{version[:20]}"; needs version 1, such as 1.1.0')
    moment = _iteration(file, choice)
    particles = _inner(moment, _text(file, "particlesPath").strip("/"), moment.name)
    species = _species(particles, choice)
    leading = _inner(_record(species, "position"), "x", species.name)
    count = _count(leading)
    if count > rules.most:
        raise ColumnError(f" {leading.name}: holds more than {rules.most} {rules.row}s")
    read = _Reader(species, count)
    values: dict[str, Floats] = {}
    for axis in AXES:
        values[axis] = read.component("position", axis, LENGTH)
        offset = read.component("positionOffset", axis, LENGTH)
        if offset.any():
            values[axis] = values[axis] + offset
    for record, dimension, name in (
        ("weighting", NUMBER, "weight"),
        ("mass", MASS, "mass"),
        ("charge", CHARGE, "charge"),
        ("time", TIME, "t"),
    ):
        if record in species:
            values[name] = read.scalar(record, dimension)
    if "t" not in values:
        values["t"] = np.full(count, _time(moment))
    values |= read.motion(values.get("mass"))
    place = species.name
    return Columns(values, lambda row: f" {place} particle {row} (counted from 0)", chosen=True)


class _Reader:
    """The records of one species of `count` particles."""

    def __init__(self, species: Any, count: int) -> None:
        self._species = species
        self._count = count

    def motion(self, mass: Floats | None) -> dict[str, Floats]:
        """Proper velocities, momenta where no mass is known, velocities, or nothing."""
        if "momentum" in self._species:
            if mass is None:
                return {f"p{axis}": self.component("momentum", axis, MOMENTUM) for axis in AXES}
            if not (mass > 0.0).all():
                raise ColumnError(f" {self._species.name}/mass: must be greater than 0")
            return {f"u{axis}": self.component("momentum", axis, MOMENTUM, mass) for axis in AXES}
        if "velocity" in self._species:
            return {f"v{axis}": self.component("velocity", axis, SPEED) for axis in AXES}
        return {}

    def scalar(self, name: str, dimension: tuple[int, ...]) -> Floats:
        """A record without components, SI, of one real particle."""
        record = _inner(self._species, name, self._species.name)
        return self._real(record, self._numbers(record), _number(record, "unitSI"), dimension)

    def component(
        self, name: str, axis: str, dimension: tuple[int, ...], part: Floats | None = None
    ) -> Floats:
        """One component, SI, of one real particle; divided by `part`."""
        record = _record(self._species, name)
        component = _inner(record, axis, record.name)
        unit = _number(component, "unitSI")
        factor = unit if part is None else unit / part
        return self._real(record, self._numbers(component), factor, dimension)

    def _real(
        self, record: Any, values: Floats, factor: float | Floats, dimension: tuple[int, ...]
    ) -> Floats:
        """Values times `factor`, of one real particle."""
        found = np.asarray(record.attrs.get("unitDimension", ()))
        if found.shape != (7,) or found.dtype.kind not in "fiu" or tuple(found) != dimension:
            raise ColumnError(
                f" {record.name}: needs a unitDimension of {', '.join(map(str, dimension))}"
            )
        values = values * factor
        if dimension == NUMBER or not _number(record, "macroWeighted", 0.0):
            return np.asarray(values)
        weight = self.scalar("weighting", NUMBER) if "weighting" in self._species else None
        if weight is None or not (weight > 0.0).all():
            raise ColumnError(f" {record.name}: is macroWeighted; needs a weighting above 0")
        return np.asarray(values / weight ** _number(record, "weightingPower"))

    def _numbers(self, component: Any) -> Floats:
        """The numbers as they stand: an array, or one value and a shape."""
        if _count(component) != self._count:
            raise ColumnError(
                f" {component.name}: needs {self._count} values, as many as position/x"
            )
        if hasattr(component, "shape"):
            return finite_numbers(component.name, component)
        return np.full(self._count, _number(component, "value"))


def _iteration(file: Any, choice: Choice) -> Any:
    """The group of the iteration asked for."""
    if _text(file, "basePath") != "/data/%T/":
        raise ColumnError(': needs a basePath of "/data/%T/", as the standard has it')
    data = _inner(file, "data", "")
    numbers = sorted(int(name) for name in data if name.isascii() and name.isdecimal())
    if not numbers:
        raise ColumnError(" /data: holds no iterations")
    names = {int(name): name for name in data if name.isascii() and name.isdecimal()}
    moments = [_inner(data, names[number], "/data") for number in numbers]
    return moments[choice.moment([_time(each) for each in moments], numbers)]


def _time(moment: Any) -> float:
    return _number(moment, "time") * _number(moment, "timeUnitSI")


def _species(particles: Any, choice: Choice) -> Any:
    """The group asked for, by its name or by the attribute `cloud`, as driftwell writes it."""
    groups = {name: _inner(particles, name, particles.name) for name in particles}
    names = {name: _text(group, "cloud", name) for name, group in groups.items()}
    if choice.of in groups:
        return groups[choice.of]
    wanted = choice.group(list(names.values()))
    return groups[next(name for name, cloud in names.items() if cloud == wanted)]


def _record(species: Any, name: str) -> Any:
    """A record with components."""
    record = _inner(species, name, species.name)
    if hasattr(record, "shape"):
        raise ColumnError(f" {record.name}: needs components x, y, z")
    return record


def _inner(group: Any, name: str, where: str) -> Any:
    """What lies in a group under a name; links are refused."""
    import h5py

    if not isinstance(group, h5py.Group) or not name or name not in group:
        raise ColumnError(f' {where}: "{name[:60]}" is missing')
    for part in name.split("/"):
        if not isinstance(group.get(part, getlink=True), h5py.HardLink):
            raise ColumnError(f' {where}: "{part[:60]}" is a link; needs the numbers themselves')
        group = group[part]
    return group


def _count(component: Any) -> int:
    """How many values a component has."""
    shape = component.shape if hasattr(component, "shape") else component.attrs.get("shape")
    sizes = np.atleast_1d(np.asarray(() if shape is None else shape))
    if sizes.shape != (1,) or sizes.dtype.kind not in "iu":
        raise ColumnError(f" {component.name}: needs one value for each particle")
    return int(sizes[0])


def _number(place: Any, name: str, default: float | None = None) -> float:
    """A finite number in an attribute."""
    value = place.attrs.get(name)
    if value is None and default is not None:
        return default
    found = np.asarray(() if value is None else value)
    if found.size != 1 or found.dtype.kind not in "fiu" or not np.isfinite(found).all():
        raise ColumnError(f" {place.name}: needs a finite number in the attribute {name}")
    return float(found.reshape(-1)[0])


def _text(place: Any, name: str, default: str | None = None) -> str:
    """A text in an attribute."""
    value = place.attrs.get(name)
    if isinstance(value, bytes):
        value = value.decode("utf-8", "replace")
    if isinstance(value, str):
        return value
    if default is not None:
        return default
    raise ColumnError(f" {place.name}: needs a text in the attribute {name}")
