"""What every waveform given as a table declares and answers."""

from __future__ import annotations

from typing import Any

from driftwell.forms.form import Form
from driftwell.forms.quantities import quantity_name
from driftwell.forms.waveform_table import PackedWaveform


class WaveformForm(Form):
    """Base of all waveforms given as a table."""

    @classmethod
    def model_parametrized_name(cls, params: tuple[Any, ...]) -> str:
        """What editors call the waveform of one quantity, e.g. ``Sine (a voltage)``."""
        return f"{cls.__name__} ({quantity_name(params[0])})"

    def packed(self) -> PackedWaveform:
        """The waveform as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def breaks(self, duration: float) -> list[float]:
        """Times in (0, duration) where the value or its slope jumps, s."""
        return []

    def frequency_scale(self) -> float:
        """Highest frequency a step must follow, Hz; 0 where nothing oscillates."""
        return 0.0

    def largest(self) -> float:
        """Largest magnitude the value reaches, SI."""
        raise TypeError(f"{type(self).__name__} must say how large it gets")

    def steady(self) -> float:
        """Largest magnitude the value has apart from its oscillation, SI."""
        return self.largest()

    def words(self, unit: str) -> str:
        """The waveform in words; `unit` is the SI unit of its values."""
        raise TypeError(f"{type(self).__name__} must describe itself")
