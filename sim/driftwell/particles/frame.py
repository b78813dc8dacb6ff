"""A right-handed frame about a direction."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray


def frame(axis: tuple[float, float, float]) -> NDArray[np.float64]:
    """Rows: two unit vectors across `axis`, then `axis` itself, a right-handed set.

    The first is the coordinate axis that follows the nearest one cyclically, made perpendicular:
    about z they are x and y, about x they are y and z, about y they are z and x.

    Parameters
    ----------
    axis : unit vector
    """
    along = np.array(axis)
    across = np.zeros(3)
    across[(int(np.argmax(np.abs(along))) + 1) % 3] = 1.0
    across -= along * (along @ across)
    across /= np.linalg.norm(across)
    return np.array([across, np.cross(along, across), along])
