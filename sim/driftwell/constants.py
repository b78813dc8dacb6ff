"""Constants of nature, SI, CODATA 2022 through scipy.

The Coulomb constant is derived from the electric constant, which has been a measured value since
the 2019 revision of the SI (relative standard uncertainty 1.6e-10), not 1e-7 c^2; the magnetic
constant with it.
"""

from __future__ import annotations

import math

from scipy import constants as codata

SPEED_OF_LIGHT: float = codata.c
"""m/s, exact."""
ELEMENTARY_CHARGE: float = codata.e
"""C, exact."""
BOLTZMANN: float = codata.k
"""J/K, exact."""
ELECTRIC_CONSTANT: float = codata.epsilon_0
"""F/m."""
MAGNETIC_CONSTANT: float = codata.mu_0
"""N/A^2."""
COULOMB_CONSTANT: float = 1.0 / (4.0 * math.pi * codata.epsilon_0)
"""N m^2/C^2, 1/(4 pi epsilon_0)."""
ATOMIC_MASS: float = codata.atomic_mass
"""kg, the unified atomic mass unit."""
ELECTRON_MASS: float = codata.m_e
"""kg."""
PROTON_MASS: float = codata.m_p
"""kg."""
