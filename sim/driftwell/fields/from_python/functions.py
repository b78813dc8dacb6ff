"""Functions given from Python, compiled for the time loop and known by a digest of their text.

A scenario holds a function's name, the digest of its text and the numbers it is called with, so
that a run says what moved its charges. The function itself is in no file: it lives in the process
that gave it. The digest covers the source text of the function (its byte code, where the text
cannot be read) and whatever of its module it uses: other functions likewise, numbers by value.

    potential(x, y, z, *parameters) -> g, Ex, Ey, Ez      V and V/m, for a scale of 1         (1)
    flux(x, y, z, *parameters) -> Bx, By, Bz              T, for a scale of 1                 (2)

with E = -grad g. Coordinates are in m and count from the field's centre. The functions are compiled
exactly as written and called place by place; they may not raise, since nobody would hear it: where
a field is not known they return math.nan, and the run stops there.
"""

from __future__ import annotations

import dis
import hashlib
import inspect
import types
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any, Literal

import numpy as np
from numba.core.errors import NumbaError
from numba.np.unsafe import ndarray as unsafe
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.fields.apart import ELECTRIC, MAGNETIC
from driftwell.kernels import given_kernel
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]
Gives = Literal["potential", "flux"]

VALUES: dict[Gives, int] = {"potential": 4, "flux": 3}
"""How many numbers a function of each sort returns."""
RETURNS: dict[Gives, str] = {
    "potential": "g, Ex, Ey, Ez (V and V/m)",
    "flux": "Bx, By, Bz (T)",
}
fixed_tuple: Any = unsafe.to_fixed_tuple
"""In compiled code: so many numbers of an array as a tuple."""
MOST_DEEP = 50
"""Functions that call functions, in a row."""


@dataclass(frozen=True, slots=True)
class GivenFunction:
    """A function that a user gave, compiled.

    name : as Python has it; sha256 : of its text and of what it uses
    parameters : names of what it is called with after x, y and z, in their order
    field : its kernel of the field's role; induced : of a flux, that of what its change induces
    """

    name: str
    sha256: str
    gives: Gives
    parameters: tuple[str, ...]
    field: CompiledFunction
    induced: CompiledFunction | None

    def addresses(self) -> tuple[float, ...]:
        """Where the kernels are, as they stand at the end of a row of parameters."""
        kernels = [self.field, *([] if self.induced is None else [self.induced])]
        found = np.array([each.__wrapper_address__() for each in kernels], dtype=np.int64)
        return tuple(found.view(np.float64).tolist())

    def potential(self, place: Floats, data: Floats) -> tuple[Floats, Floats]:
        """g (n,), V, and E (3, n), V/m, at places (3, n), m from the centre."""
        place = np.ascontiguousarray(place, dtype=np.float64)
        ones, field = np.ones(place.shape[1]), np.zeros(place.shape)
        row = np.zeros(16), data, 1.0, place, ones
        g = [self.field(*row, i, i + 1, field) for i in range(ones.size)]
        return np.array(g, dtype=np.float64), field

    def flux(self, place: Floats, data: Floats) -> Floats:
        """B (3, n), T, at places (3, n), m from the centre."""
        place = np.ascontiguousarray(place, dtype=np.float64)
        field = np.zeros(place.shape)
        self.field(np.zeros(16), data, 1.0, place, 0, place.shape[1], field)
        return field


_given: dict[tuple[str, str], GivenFunction] = {}


def give(function: Callable[..., Any], gives: Gives) -> GivenFunction:
    """Compile a function of (1) or (2), and keep it for the runs of this process.

    function : of plain Python, or compiled by numba, whose Python text is then compiled anew

    Raises ScenarioError where it cannot be used; the text says why.
    """
    plain = _plain(function)
    name = getattr(plain, "__name__", "")
    if not isinstance(plain, types.FunctionType):
        raise ScenarioError(
            f"field function {plain!r}: needs a function written in Python, or one compiled from "
            "it by numba"
        )
    parameters = _parameters(plain, gives)
    if any(each.opname == "RAISE_VARARGS" for each in dis.get_instructions(plain)):
        raise ScenarioError(
            f"field function {name}: raises, or asserts, which compiled steps cannot hear; return "
            "math.nan where the field is not known"
        )
    digest = text_digest(plain)
    key = (digest, gives)
    if key not in _given:
        field, induced = _kernels(plain, gives, len(parameters))
        _given[key] = GivenFunction(name, digest, gives, parameters, field, induced)
    return _given[key]


def given(sha256: str, gives: Gives) -> GivenFunction | None:
    """The function of this digest, where this process was given it."""
    return _given.get((sha256, gives))


def text_digest(function: Callable[..., Any]) -> str:
    """SHA-256, in hexadecimal, of a function's text and of what it uses of its module."""
    pieces: list[str] = []
    _describe(_plain(function), pieces, set())
    return hashlib.sha256("\0".join(pieces).encode(errors="surrogatepass")).hexdigest()


def _plain(function: Any) -> Any:
    """The Python function behind one that numba compiled."""
    return getattr(function, "py_func", function)


def _parameters(function: types.FunctionType, gives: Gives) -> tuple[str, ...]:
    """Names of its arguments after x, y and z."""
    arguments = inspect.signature(function).parameters.values()
    plain = (inspect.Parameter.POSITIONAL_ONLY, inspect.Parameter.POSITIONAL_OR_KEYWORD)
    if len(arguments) < 3 or any(each.kind not in plain for each in arguments):
        raise ScenarioError(
            f"field function {function.__name__}{inspect.signature(function)}: needs the arguments "
            f"x, y, z (m) and then its parameters, each by a name, and returns {RETURNS[gives]}"
        )
    return tuple(each.name for each in arguments)[3:]


def _describe(value: Any, out_pieces: list[str], seen: set[int]) -> None:
    """Add what tells a value that compiled code takes in from another one."""
    value = _plain(value)
    if not isinstance(value, types.FunctionType):
        out_pieces.append(_told(value))
        return
    if id(value) in seen:
        return
    seen.add(id(value))
    if len(seen) > MOST_DEEP:
        raise ScenarioError(f"field function {value.__name__}: calls too many functions")
    try:
        out_pieces.append(inspect.getsource(value))
    except (OSError, TypeError):
        out_pieces += [value.__code__.co_code.hex(), repr(list(_constants(value.__code__)))]
    out_pieces.append(repr(value.__defaults__))
    for name, used in sorted(_used(value)):
        out_pieces.append(name)
        _describe(used, out_pieces, seen)


def _constants(code: types.CodeType) -> Iterator[str]:
    yield from code.co_names
    yield from code.co_varnames
    for each in code.co_consts:
        if isinstance(each, types.CodeType):
            yield from _constants(each)
        else:
            yield repr(each)


def _used(function: types.FunctionType) -> Iterator[tuple[str, Any]]:
    """What a function takes from around it, by name."""
    for name in function.__code__.co_names:
        if name in function.__globals__:
            yield name, function.__globals__[name]
    closed = function.__closure__ or ()
    for name, cell in zip(function.__code__.co_freevars, closed, strict=True):
        yield name, cell.cell_contents


def _told(value: Any) -> str:
    """A value in its type and its bits."""
    if isinstance(value, types.ModuleType):
        return value.__name__
    if isinstance(value, np.ndarray):
        return f"{value.dtype} {value.shape} {value.tobytes().hex()}"
    if isinstance(value, bool | int | float | complex | str | tuple | np.generic):
        return f"{type(value).__name__} {value!r}"
    name = getattr(value, "__qualname__", type(value).__qualname__)
    return f"{getattr(value, '__module__', '')} {name}"


def _kernels(
    function: types.FunctionType, gives: Gives, count: int
) -> tuple[CompiledFunction, CompiledFunction | None]:
    """The kernels that the time loop calls; see :mod:`driftwell.fields.table`."""
    name = function.__name__
    inner: Any = given_kernel(function)
    numbers = ("float64",) * (3 + count)
    try:
        inner.compile(f"({', '.join(numbers)})")
        returned = next(iter(inner.overloads.values())).signature.return_type
        values = len(returned) if hasattr(returned, "__len__") else 1
        if values != VALUES[gives]:
            raise ScenarioError(
                f"field function {name}: returns {values} value{'s' * (values != 1)}; needs "
                f"{VALUES[gives]}: {RETURNS[gives]}"
            )
        if gives == "potential":
            made = _potential_of_none(inner) if count == 0 else _potential(inner, count)
            return CompiledFunction(given_kernel(made), ELECTRIC), None
        made = _flux_of_none(inner) if count == 0 else _flux(inner, count)
        return (
            CompiledFunction(given_kernel(made), MAGNETIC),
            CompiledFunction(given_kernel(_induced), MAGNETIC),
        )
    except NumbaError as fault:
        why = next((line.strip() for line in str(fault).splitlines()[1:] if line.strip()), "")
        raise ScenarioError(
            f"field function {name}: cannot be compiled by numba ({why or type(fault).__name__}). "
            "It may use numbers, the math module and other functions of its kind."
        ) from fault


def _potential(function: Any, count: int) -> Any:
    def field_given(
        p: Any, data: Any, w: Any, position: Any, charge: Any, first: Any, last: Any, out: Any
    ) -> Any:
        own = fixed_tuple(data, count)
        x, y, z = position[0], position[1], position[2]
        total = 0.0
        for i in range(first, last):
            g, ex, ey, ez = function(x[i] - p[0], y[i] - p[1], z[i] - p[2], *own)
            out[0, i] += w * ex
            out[1, i] += w * ey
            out[2, i] += w * ez
            total += charge[i] * g
        return total

    return field_given


def _potential_of_none(function: Any) -> Any:
    def field_given(
        p: Any, data: Any, w: Any, position: Any, charge: Any, first: Any, last: Any, out: Any
    ) -> Any:
        x, y, z = position[0], position[1], position[2]
        total = 0.0
        for i in range(first, last):
            g, ex, ey, ez = function(x[i] - p[0], y[i] - p[1], z[i] - p[2])
            out[0, i] += w * ex
            out[1, i] += w * ey
            out[2, i] += w * ez
            total += charge[i] * g
        return total

    return field_given


def _flux(function: Any, count: int) -> Any:
    def flux_given(
        p: Any, data: Any, w: Any, position: Any, first: Any, last: Any, out: Any
    ) -> Any:
        own = fixed_tuple(data, count)
        x, y, z = position[0], position[1], position[2]
        for i in range(first, last):
            bx, by, bz = function(x[i] - p[0], y[i] - p[1], z[i] - p[2], *own)
            out[0, i] += w * bx
            out[1, i] += w * by
            out[2, i] += w * bz

    return flux_given


def _flux_of_none(function: Any) -> Any:
    def flux_given(
        p: Any, data: Any, w: Any, position: Any, first: Any, last: Any, out: Any
    ) -> Any:
        x, y, z = position[0], position[1], position[2]
        for i in range(first, last):
            bx, by, bz = function(x[i] - p[0], y[i] - p[1], z[i] - p[2])
            out[0, i] += w * bx
            out[1, i] += w * by
            out[2, i] += w * bz

    return flux_given


def _induced(p: Any, data: Any, rate: Any, position: Any, first: Any, last: Any, out: Any) -> None:
    """Nothing while the flux is constant; what its change would induce is not known."""
    if rate != 0.0:
        for i in range(first, last):
            out[0, i] = out[1, i] = out[2, i] = np.nan
