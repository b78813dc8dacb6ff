"""How fast a charge moves in a field that grows in proportion to the distance.

Where the force on a charge of mass m is -m k x with k = k0 + k1 cos(Omega t), the motion has the
angular frequency sqrt(k0) without drive and, with a fast drive,

    omega^2 = k0 + k1^2 / (2 Omega^2)

which is Dehmelt's approximation beta = sqrt(a + q^2/2) of the Mathieu exponent (8 % low at
q = 0.6). With a slow drive the charge follows the field of the moment: omega^2 = k0 + k1.

References
----------
H. G. Dehmelt, Adv. At. Mol. Phys. 3 (1967) 53 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from driftwell.forms.waveforms import AnyWaveform, frequency_scale, largest_value, steady_value


def linear_rates(stiffness: Mapping[str, float], wave: AnyWaveform) -> dict[str, float]:
    """Angular frequencies, rad/s, of motion in a field scaled by a waveform, and of its drive.

    Parameters
    ----------
    stiffness : name of each motion, and the magnitude of its k for a waveform of 1, 1/s^2
    wave : the waveform that scales the field
    """
    steady = steady_value(wave)
    swing = largest_value(wave) - steady
    drive = 2.0 * math.pi * frequency_scale(wave)
    if drive == 0.0:
        return {name: math.sqrt(k * steady) for name, k in stiffness.items()}
    slow = {
        name: math.sqrt(k * steady + min((k * swing / drive) ** 2 / 2.0, k * swing))
        for name, k in stiffness.items()
    }
    return {"drive": drive, **slow}
