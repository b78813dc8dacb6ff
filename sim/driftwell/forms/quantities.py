"""Dimensioned values: strings with a unit in the file, SI floats in the program.

``"3.5 mm"`` becomes ``0.0035`` where a :data:`Length` is declared. A bare number, an unknown unit,
a unit of another dimension, or a value that is not finite is a fault that says what is needed.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any, TypeVar

from pydantic import (
    AfterValidator,
    Discriminator,
    GetCoreSchemaHandler,
    GetJsonSchemaHandler,
    Strict,
    StringConstraints,
    Tag,
)
from pydantic.json_schema import JsonSchemaValue
from pydantic_core import PydanticCustomError, core_schema

from driftwell.forms import units
from driftwell.forms.form import Bound


@dataclass(frozen=True, slots=True)
class Quantity:
    """The declaration of a dimensioned key: what it is, its SI unit, and an example to show."""

    name: str
    si_unit: str
    example: str

    def read(self, value: Any) -> float:
        """The SI value of a string such as ``"3.5 mm"``; a fault says what is needed."""
        if not isinstance(value, str):
            raise self._fault("a number and its unit in quotes")
        parts = units.split(value)
        if parts is None:
            raise self._fault("a number and its unit")
        number, unit = parts
        if not unit:
            if number == 0:
                return 0.0
            raise self._fault("a unit after the number")
        try:
            factor, offset = units.to_si(unit, self.si_unit)
        except (LookupError, ValueError) as fault:
            raise self._fault(str(fault.args[0])) from fault
        try:
            result = float(factor * number + offset)
        except ArithmeticError as fault:  # beyond even the decimal numbers
            raise self._fault("a value that is not too large or small") from fault
        if not math.isfinite(result):
            raise self._fault("a finite value")
        return result

    def _fault(self, why: str) -> PydanticCustomError:
        return PydanticCustomError(
            "quantity",
            'needs {name} such as "{example}" ({why})',
            {"name": self.name, "example": self.example, "why": why},
        )

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: core_schema.CoreSchema, handler: GetJsonSchemaHandler
    ) -> JsonSchemaValue:
        return {
            "type": "string",
            "title": self.name,
            "pattern": r"^\s*[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?\s*\S.*$|^\s*[+-]?0+(\.0*)?\s*$",
            "examples": [self.example],
        }


Length = Annotated[float, Quantity("a length", "m", "3.5 mm")]
Time = Annotated[float, Quantity("a time", "s", "2 ms")]
Frequency = Annotated[float, Quantity("a frequency", "Hz", "1.1 MHz")]
Angle = Annotated[float, Quantity("an angle", "rad", "30 deg")]
Mass = Annotated[float, Quantity("a mass", "kg", "137.905 u")]
Charge = Annotated[float, Quantity("a charge", "C", "1 e")]
Voltage = Annotated[float, Quantity("a voltage", "V", "180 V")]
Current = Annotated[float, Quantity("a current", "A", "12 uA")]
Energy = Annotated[float, Quantity("an energy", "J", "0.3 eV")]
Temperature = Annotated[float, Quantity("a temperature", "K", "300 K")]
Velocity = Annotated[float, Quantity("a speed", "m/s", "400 m/s")]
Momentum = Annotated[float, Quantity("a momentum", "kg*m/s", "1e-22 kg*m/s")]
ElectricField = Annotated[float, Quantity("an electric field", "V/m", "20 kV/m")]
MagneticField = Annotated[float, Quantity("a magnetic field", "T", "1.5 T")]
FieldGradient = Annotated[float, Quantity("an electric field gradient", "V/m^2", "3.0e7 V/m^2")]
MagneticGradient = Annotated[float, Quantity("a magnetic field gradient", "T/m", "12 T/m")]
Pressure = Annotated[float, Quantity("a pressure", "Pa", "1e-3 mbar")]
Area = Annotated[float, Quantity("an area", "m^2", "1e-18 m^2")]
Volume = Annotated[float, Quantity("a volume", "m^3", "0.205 angstrom^3")]
Viscosity = Annotated[float, Quantity("a viscosity", "Pa*s", "18.1 uPa s")]
Mobility = Annotated[float, Quantity("a mobility", "m^2/(V*s)", "2.2 cm^2/(V s)")]
Emittance = Annotated[float, Quantity("an emittance", "m*rad", "5 mm mrad")]


def _noise(of: str, si_unit: str, example: str) -> Any:
    return Annotated[float, Quantity(f"a spectral density of {of}", si_unit, example)]


if TYPE_CHECKING:
    VoltageNoise = float
    CurrentNoise = float
    ElectricFieldNoise = float
    MagneticFieldNoise = float
    FieldGradientNoise = float
    MagneticGradientNoise = float
    RealNoise = float
else:
    VoltageNoise = _noise("voltage", "V^2/Hz", "1e-12 V^2/Hz")
    CurrentNoise = _noise("current", "A^2/Hz", "1e-18 A^2/Hz")
    ElectricFieldNoise = _noise("electric field", "V^2/m^2/Hz", "1e-11 V^2/m^2/Hz")
    MagneticFieldNoise = _noise("magnetic field", "T^2/Hz", "1e-20 T^2/Hz")
    FieldGradientNoise = _noise("field gradient", "V^2/m^4/Hz", "1e-4 V^2/m^4/Hz")
    MagneticGradientNoise = _noise("magnetic gradient", "T^2/m^2/Hz", "1e-16 T^2/m^2/Hz")
    RealNoise = _noise("a number", "1/Hz", "1e-9 1/Hz")

Real = Annotated[float, Strict()]
"""A plain number without dimension."""
Count = Annotated[int, Strict()]
"""A whole number."""
TrueOrFalse = Annotated[bool, Strict()]
Name = Annotated[
    str, StringConstraints(min_length=1, max_length=60, pattern=r"^[^\x00-\x1f\x7f]+$")
]
"""What a user calls a thing: one line, 1 to 60 characters."""
Title = Annotated[
    str, StringConstraints(min_length=1, max_length=200, pattern=r"^[^\x00-\x1f\x7f]+$")
]
"""A sentence on one line, 1 to 200 characters."""


@dataclass(frozen=True, slots=True)
class Whatever:
    """The declaration of a value that may be anything a file can hold."""

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.any_schema()


if TYPE_CHECKING:
    AnyValue = object
    NumberOrText = float | str
else:
    AnyValue = Annotated[object, Whatever()]
    """Whatever TOML can state: it is judged elsewhere."""
    NumberOrText = Annotated[
        Annotated[float, Strict(), Tag("number")] | Annotated[str, Strict(), Tag("text")],
        Discriminator(lambda value: "text" if isinstance(value, str) else "number"),
    ]
    """A plain number, or a quantity whose dimension is judged elsewhere."""

T = TypeVar("T")
Positive = Annotated[T, Bound(above=0.0)]
NonNegative = Annotated[T, Bound(least=0.0)]
NonZero = Annotated[T, Bound(other_than=0.0)]


def _unit_vector(components: tuple[float, float, float]) -> tuple[float, float, float]:
    length = math.hypot(*components)
    if not 0.0 < length < math.inf:
        raise PydanticCustomError("direction", "must have at least one component other than 0")
    x, y, z = components
    return x / length, y / length, z / length


Direction = Annotated[tuple[Real, Real, Real], AfterValidator(_unit_vector)]
"""Three plain numbers, any length but zero; kept with length 1."""
Point = tuple[Length, Length, Length]
"""A place."""


def quantity_name(declared: Any) -> str:
    """What a dimensioned type is called, e.g. ``a voltage``; ``a number`` for a plain one."""
    names = [part.name for part in declared.__metadata__ if isinstance(part, Quantity)]
    return names[0] if names else "a number"


def read_quantity(declared: Any, text: str) -> float:
    """The SI value of `text` read as the dimensioned type `declared`, e.g. :data:`Length`.

    Raises
    ------
    ValueError
        The text is not such a quantity; the message says what is needed.
    """
    quantity = next(part for part in declared.__metadata__ if isinstance(part, Quantity))
    try:
        return float(quantity.read(text))
    except PydanticCustomError as fault:
        raise ValueError(fault.message()) from fault
