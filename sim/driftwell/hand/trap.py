"""The linear trap a scenario makes at its start: stiffness of each axis, its drive, its magnet.

A charge at the place x from the common centre of all fields feels, along each axis,

    x'' = -(k0 + k1 cos(Omega t)) x                                                         (1)

and v x B besides. k0 and k1 are sums over the quadrupoles. What changes in time otherwise (a step,
a ramp, a pulse) is taken as it is at time zero. By tau = Omega t/2, (1) is Mathieu's equation
x'' + (a - 2 q cos(2 tau)) x = 0 with a = 4 k0/Omega^2 and |q| = 2 |k1|/Omega^2.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.form import FieldForm
from driftwell.fields.rf_quadrupole import RfQuadrupole
from driftwell.fields.rf_quadrupole_3d import RfQuadrupole3D
from driftwell.fields.rotating_drive import RotatingDrive
from driftwell.fields.static_quadrupole import StaticQuadrupole
from driftwell.fields.uniform_magnetic import UniformMagnetic
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, Pulses, Ramp, Sine, Step, Table
from driftwell.hand.scene import Scene

AXES = "xyz"
_UPRIGHT = 0.999
"""Cosine to the z axis from which a magnet counts as along it."""


@dataclass(frozen=True, slots=True)
class Trap:
    """One body's trap.

    static, swing : k0 and k1 along x, y, z, 1/s^2
    drive : Omega, rad/s; 0 where nothing is driven
    edge : distance of the nearest electrode that the fields state along each axis, m
    cyclotron : q B/m about z, rad/s, signed as the turn is about z; 0 without magnet
    besides : names of fields and processes that (1) does not hold, and of electrodes
    """

    body: Body
    static: tuple[float, float, float]
    swing: tuple[float, float, float]
    drive: float
    edge: tuple[float, float, float]
    cyclotron: float
    besides: tuple[str, ...]

    @property
    def adiabatic(self) -> tuple[float, float, float]:
        """k0 + k1^2/(2 Omega^2) along each axis, 1/s^2: the stiffness of the pseudopotential."""
        if self.drive == 0.0:
            return self.static
        x, y, z = (
            k0 + k1**2 / (2.0 * self.drive**2)
            for k0, k1 in zip(self.static, self.swing, strict=True)
        )
        return x, y, z

    @property
    def parameters(self) -> list[tuple[float, float]]:
        """Mathieu's a and |q| of each axis."""
        scale = self.drive**2
        return [
            (4.0 * k0 / scale, 2.0 * abs(k1) / scale)
            for k0, k1 in zip(self.static, self.swing, strict=True)
        ]

    def doubt(self) -> str:
        """What acts besides the linear fields, in words; empty where nothing."""
        return "" if not self.besides else f"{', '.join(self.besides)} act besides"


@dataclass(slots=True)
class _Sum:
    """What the fields looked at so far come to; arrays along x, y, z, as in :class:`Trap`."""

    static: NDArray[np.float64] = field(default_factory=lambda: np.zeros(3))
    swing: NDArray[np.float64] = field(default_factory=lambda: np.zeros(3))
    edge: NDArray[np.float64] = field(default_factory=lambda: np.full(3, math.inf))
    cyclotron: float = 0.0
    drives: set[tuple[float, float]] = field(default_factory=set)
    centres: set[tuple[float, float, float]] = field(default_factory=set)

    def takes_quadrupole(self, form: FieldForm, shares: NDArray[np.float64]) -> bool:
        """Add a quadrupole, k for a waveform of 1 being `shares`; whether (1) holds it."""
        wave = form.waveform()
        level = at_start(wave)
        if level is None:
            return False
        swing = wave.amplitude if isinstance(wave, Sine) else 0.0
        if level == 0.0 == swing:
            return True
        if isinstance(wave, Sine):
            self.drives.add((wave.frequency, wave.phase))
        self.static += level * shares
        self.swing += swing * shares
        self.edge = np.minimum(self.edge, _edges(form))
        self.centres.add(form.centre)
        return True

    def takes_magnet(self, form: FieldForm, ratio: float) -> bool:
        """Add a magnet along z, for a body of so many C/kg; whether it is one."""
        if not isinstance(form, UniformMagnetic) or abs(form.along[2]) <= _UPRIGHT:
            return False
        strength = at_start(form.strength)
        if strength is None:
            return False
        self.cyclotron -= ratio * strength * math.copysign(1.0, form.along[2])
        return True


def trap_of(scene: Scene, body: Body) -> Trap | None:
    """The trap of one body; None where no quadrupole acts on it at the start."""
    found = _Sum()
    besides = []
    for form in scene.scenario.field:
        shares = _shares(form, scene, body)
        if shares is None:
            held = _small(form) or found.takes_magnet(form, body.charge_to_mass)
        else:
            held = found.takes_quadrupole(form, shares)
        if not held:
            besides.append(f'field "{form.name}"')
    if not found.centres:
        return None
    if len(found.drives) > 1:
        besides.append("drives of several frequencies or phases")
    if len(found.centres) > 1:
        besides.append("fields about other centres")
    if scene.scenario.electrode:
        besides.append("the electrodes' field")
    drive = 2.0 * math.pi * max((frequency for frequency, _ in found.drives), default=0.0)
    return Trap(
        body,
        _three(found.static),
        _three(found.swing),
        drive,
        _three(found.edge),
        found.cyclotron,
        tuple(besides),
    )


def at_start(wave: AnyWaveform) -> float | None:
    """The value of a waveform at time zero, a sine's without its swing; None of noise."""
    match wave:
        case Sine():
            return float(wave.offset)
        case Ramp() | Step():
            return float(wave.after if isinstance(wave, Step) and wave.at == 0.0 else wave.before)
        case Pulses():
            return float(wave.low)
        case Table():
            return float(np.interp(0.0, wave.times, wave.values))
        case float() | int():
            return float(wave)
        case _:
            return None


def steady(wave: AnyWaveform) -> bool:
    """Whether it keeps its value through the run."""
    return isinstance(wave, float | int)


def _shares(field: FieldForm, scene: Scene, body: Body) -> np.ndarray | None:
    """k along x, y, z for a waveform of 1; None of a field that is no quadrupole."""
    ratio = body.charge_to_mass
    match field:
        case RfQuadrupole():
            return ratio / field.radius**2 * np.array([1.0, -1.0, 0.0])
        case RfQuadrupole3D():
            return 2.0 * ratio / field.span * np.array([1.0, 1.0, -2.0])
        case StaticQuadrupole():
            uneven = field.ellipticity
            own = ratio * field.curvature(scene.bodies)
            return own * np.array([-0.5 * (1.0 + uneven), -0.5 * (1.0 - uneven), 1.0])
        case _:
            return None


def _edges(field: FieldForm) -> np.ndarray:
    """Distance of the electrodes along x, y, z, m."""
    match field:
        case RfQuadrupole():
            return np.array([field.radius, field.radius, math.inf])
        case RfQuadrupole3D():
            return np.array([field.radius, field.radius, field.end_cap_distance])
        case StaticQuadrupole():
            r, z = field.radius or math.inf, field.half_length or math.inf
            return np.array([r, r, z])
        case _:
            return np.full(3, math.inf)


def _small(field: FieldForm) -> bool:
    """Whether a field is a weak drive that a trap is steered with."""
    return isinstance(field, RotatingDrive)


def _three(values: np.ndarray) -> tuple[float, float, float]:
    x, y, z = (float(each) for each in values)
    return x, y, z
