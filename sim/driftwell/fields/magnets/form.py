"""What coils and magnets about an axis declare and say of themselves in common."""

from __future__ import annotations

import math

from driftwell.fields.form import FieldForm
from driftwell.forms import Direction, key
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, frequency_scale


class AboutAxis(FieldForm):
    """Base of what is round about an axis through `centre`."""

    along: Direction = key("direction of the axis; any length but zero", default=(0.0, 0.0, 1.0))

    def axis_words(self) -> str:
        """The axis in words, to follow the name of the thing."""
        if self.along == (0.0, 0.0, 1.0):
            return " about z"
        return f" about ({', '.join(f'{component:.6g}' for component in self.along)})"


def turning_rates(body: Body, strongest: float, wave: AnyWaveform) -> dict[str, float]:
    """Angular frequencies, rad/s, of a body in a magnet: cyclotron motion, and the drive if any.

    strongest : T
    """
    rates = {"cyclotron": abs(body.charge_to_mass) * strongest}
    drive = 2.0 * math.pi * frequency_scale(wave)
    return {"drive": drive, **rates} if drive else rates
