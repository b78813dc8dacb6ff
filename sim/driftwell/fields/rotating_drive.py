"""A rotating electric multipole: turns a cloud of one kind of charge about z, and holds its size.

    phi(x, t) = V (r/R)^m cos(m (theta - alpha -+ omega t))
              = V (r/R)^m [cos(m psi) cos(m omega t) +- sin(m psi) sin(m omega t)],
      psi = theta - alpha                                                                  (1)

The pattern turns at omega = 2 pi f about z; m = 1 is a dipole (a uniform field that turns), m = 2 a
quadrupole, and electrodes see the frequency m f. By (1) it is the sum of two multipoles at rest
(electric_multipole.py), each with its own wave, and the tables hold it as these.

What turns with the pattern sees it at rest: with L the canonical angular momentum about z, H -
omega L is conserved in any field that is round about z, and the drive's power is omega times its
torque.

References
----------
X.-P. Huang, F. Anderegg, E. M. Hollmann, C. F. Driscoll and T. M. O'Neil, Phys. Rev. Lett. 78
(1997) 875 (rotating dipole and quadrupole fields on one-component plasmas; from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

from driftwell.fields.electric_multipole import ELECTRIC_MULTIPOLE
from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.multipole_order import Order, multipole_name
from driftwell.fields.rates import linear_rates
from driftwell.forms import Angle, Frequency, Length, Positive, Voltage, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, Sine, packed_waveform


class RotatingDrive(FieldForm):
    """Electric multipole that turns about z, as on a sectored ring electrode."""

    kind: Literal["rotating-drive"]
    order: Order = key("half the number of poles: 1 dipole, 2 quadrupole, ...", default=1)
    radius: Positive[Length] = key("distance from the axis at which `voltage` is", example="10 mm")
    voltage: Positive[Voltage] = key("potential of a positive pole at `radius`", example="2 V")
    frequency: Positive[Frequency] = key(
        "turns of the pattern in a second; each electrode's voltage has `order` times that",
        example="60 kHz",
    )
    sense: Literal["counterclockwise", "clockwise"] = key(
        "how it turns, seen from positive z: counterclockwise is from x towards y",
        default="counterclockwise",
    )
    angle: Angle = key("direction of a positive pole at time zero, from x towards y", default=0.0)

    def waveform(self) -> AnyWaveform:
        return self._wave(0.0)

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return self._pattern(self.order * self.angle, self._wave(0.0))

    def all_packed(self, bodies: Mapping[str, Body]) -> tuple[PackedField, ...]:
        quarter = 0.5 * math.pi
        phase = -quarter if self.sense == "counterclockwise" else quarter
        turned = self.order * self.angle + quarter
        return self.packed(bodies), self._pattern(turned, self._wave(phase))

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        focusing = self.order * (self.order - 1) * abs(body.charge_to_mass) / self.radius**2
        return linear_rates({"radial": focusing} if self.order > 1 else {}, self.waveform())

    def words(self) -> str:
        at = f" from {math.degrees(self.angle):.6g} deg" if self.angle else ""
        return (
            f"electric {multipole_name(self.order)} that turns {self.sense} about z with "
            f"{spelled(self.frequency, 'Hz')}{at}, {spelled(self.voltage, 'V')} at "
            f"{spelled(self.radius, 'm')}{self.where()}"
        )

    def _wave(self, phase: float) -> Sine[float]:
        return Sine.model_construct(
            kind="sine",
            amplitude=self.voltage,
            frequency=self.order * self.frequency,
            offset=0.0,
            phase=phase,
        )

    def _pattern(self, turn: float, wave: AnyWaveform) -> PackedField:
        """A multipole at rest, turned by `turn` / m; see the kernel for its parameters."""
        return PackedField(
            Role.ELECTRIC,
            ELECTRIC_MULTIPOLE,
            (*self.centre, float(self.order), 1.0 / self.radius, math.cos(turn), -math.sin(turn)),
            packed_waveform(wave),
        )
