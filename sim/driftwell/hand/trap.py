"""The linear trap a scenario makes at its start: stiffness of each axis, its drive, its magnet.

A charge at the place x from the common centre of all fields feels, along each axis,

    x'' = -(k0 + k1 cos(Omega t)) x                                                         (1)

and v x B besides. k0 and k1 are sums over the quadrupoles. What changes in time otherwise (a step,
a ramp, a pulse) is taken as it is at time zero. By tau = Omega t/2, (1) is Mathieu's equation
x'' + (a - 2 q cos(2 tau)) x = 0 with a = 4 k0/Omega^2 and |q| = 2 |k1|/Omega^2.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

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


def trap_of(scene: Scene, body: Body) -> Trap | None:
    """The trap of one body; None where no quadrupole acts on it at the start."""
    static, swing = np.zeros(3), np.zeros(3)
    edge = np.full(3, math.inf)
    drives: set[tuple[float, float]] = set()
    centres: set[tuple[float, float, float]] = set()
    besides = []
    cyclotron = 0.0
    for field in scene.scenario.field:
        shares = _shares(field, scene, body)
        if shares is None:
            if isinstance(field, UniformMagnetic) and abs(field.along[2]) > _UPRIGHT:
                strength, wave = at_start(field.strength), 0.0
                if strength is not None:
                    cyclotron += body.charge_to_mass * strength * math.copysign(1.0, field.along[2])
                    continue
            if not _small(field):
                besides.append(f'field "{field.name}"')
            continue
        level, wave = at_start(field.waveform()), 0.0
        if isinstance(field.waveform(), Sine):
            sine = field.waveform()
            assert isinstance(sine, Sine)
            level, wave = sine.offset, sine.amplitude
            drives.add((sine.frequency, sine.phase))
        if level is None:
            besides.append(f'field "{field.name}"')
            continue
        if level == 0.0 == wave:
            continue
        static += level * shares
        swing += wave * shares
        edge = np.minimum(edge, _edges(field))
        centres.add(field.centre)
    if not centres:
        return None
    if len(drives) > 1:
        besides.append("drives of several frequencies or phases")
    if len(centres) > 1:
        besides.append("fields about other centres")
    if scene.scenario.electrode:
        besides.append("the electrodes' field")
    drive = 2.0 * math.pi * max((frequency for frequency, _ in drives), default=0.0)
    return Trap(
        body,
        _three(static),
        _three(swing),
        drive,
        _three(edge),
        -cyclotron,
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
