"""What the fields that are given as functions from Python have in common."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.fields.form import FieldForm
from driftwell.fields.from_python.functions import GivenFunction, Gives, given
from driftwell.forms import Name, Real, Title, key
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveforms import AnyWaveform, RealWave, largest_value

Floats = NDArray[np.float64]

_NUDGE = 1e-3
"""Steps of differences, as part of how far places lie apart, and m where they do not."""


class FieldFromPython(FieldForm):
    """Base of the fields that a user gives as functions; see :mod:`driftwell.fields.from_python`.

    A scenario that holds one can be read and told of anywhere, and run only where the function is.
    """

    function: Name = key("name of the function, as Python has it", example="funnel")
    sha256: Title = key("digest of the function's text, as `field_function` gives it")
    parameters: dict[Name, Real] = key(
        "plain numbers (SI) that the function is called with after x, y and z, by name",
        default={},
    )
    scale: RealWave = key(
        "what the function's values are multiplied by, a number or in time", default=1.0
    )

    def gives(self) -> Gives:
        """What sort of function it is."""
        raise TypeError(f"{type(self).__name__} must say what its function gives")

    def given(self) -> GivenFunction:
        """The function; raises ScenarioError where this process was not given it."""
        found = given(self.sha256, self.gives())
        if found is None:
            raise ScenarioError(
                f'[[field]] "{self.name}": is the Python function "{self.function}" (digest '
                f"{self.sha256[:12]}), which no file holds. Such a scenario is run from Python, by "
                "the program that gives this very function (Scenario.field_function); the command "
                "line cannot run it."
            )
        if set(found.parameters) != set(self.parameters):
            wanted = ", ".join(found.parameters) or "none"
            there = ", ".join(self.parameters) or "none"
            raise ScenarioError(
                f'[[field]] "{self.name}" parameters: the function "{self.function}" takes '
                f"{wanted} after x, y, z; there are {there} here"
            )
        return found

    def numbers(self) -> Floats:
        """The parameters in the order in which the function takes them."""
        return np.array([self.parameters[name] for name in self.given().parameters], np.float64)

    def waveform(self) -> AnyWaveform:
        return self.scale

    def words(self) -> str:
        given_with = ", ".join(f"{name} = {value:g}" for name, value in self.parameters.items())
        with_them = f" with {given_with}" if given_with else ""
        return (
            f'{self.gives()} by the Python function "{self.function}"{with_them} (digest '
            f"{self.sha256[:12]}){self._times()}{self.where()}; run from Python only"
        )

    def _times(self) -> str:
        if isinstance(self.scale, WaveformForm):
            kind = getattr(self.scale, "kind", "waveform")
            return f", times a {kind} of at most {largest_value(self.scale):g}"
        return "" if self.scale == 1.0 else f", times {self.scale:g}"


def local(centre: tuple[float, float, float], position: Floats) -> Floats:
    """Places (3, n), m, as they count from a centre."""
    return position - np.array(centre)[:, None]


def nudge(place: Floats) -> float:
    """m, a step over which differences of a field at places (3, n) are taken."""
    apart = float(np.std(place, axis=1).max(initial=0.0))
    away = float(np.abs(place).max(initial=0.0))
    return _NUDGE * (apart or away or 1e-3)


def differences(values: Callable[[Floats], Floats], place: Floats, step: float) -> Floats:
    """d(values)/d(axis) at places (3, n) by differences of order 4; the last index is the axis.

    values : of places (3, n) an array whose last index is the place
    """
    found = []
    for axis in range(3):
        along = np.zeros((3, 1))
        along[axis] = step
        near = values(place + along) - values(place - along)
        far = values(place + 2.0 * along) - values(place - 2.0 * along)
        found.append((8.0 * near - far) / (12.0 * step))
    return np.stack(found, axis=-1)
