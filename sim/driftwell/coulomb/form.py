"""The scenario's [coulomb] section."""

from __future__ import annotations

from typing import Literal

from driftwell.forms import Form, Length, NonNegative, key


class Coulomb(Form):
    """How the force between the charges is summed."""

    method: Literal["direct", "off"] = key(
        "direct: every pair, exactly; off: charges do not feel each other", default="direct"
    )
    softening: NonNegative[Length] = key(
        "length e in the force law r / (r^2 + e^2)^(3/2); for macro-particles, 0 for real charges",
        default=0.0,
        example="5 um",
    )
