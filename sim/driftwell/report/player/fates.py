"""Where and when the charges shown begin and end: born by a source, lost on a surface."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.record.reader import Run
from driftwell.report.player.ways import Ways

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

STAYS = -1
UNKNOWN = -2
"""Not there any more, and the record does not say why."""


@dataclass(frozen=True, slots=True)
class Fates:
    """Beginning and end of each charge shown.

    born, lost : (n,) s; -infinity for those there from the start, infinity for those that stay
    birthplace, end : (n, 3) m; not a number where there was none
    wall : (n,) index in the record's walls, STAYS or UNKNOWN
    """

    born: Floats
    birthplace: Floats
    lost: Floats
    end: Floats
    wall: Ints


def fates_of(run: Run, ways: Ways) -> Fates:
    """What became of the charges shown."""
    n = len(ways.id)
    born, birthplace = _noted(run.births(), ways.id)
    lost, end = _noted(run.losses(), ways.id)
    wall = np.full(n, STAYS, np.int64)
    rows = run.losses()
    known = np.isin(rows["id"], ways.id)
    wall[np.searchsorted(ways.id, rows["id"][known])] = rows["wall"][known]
    missing = np.isnan(lost)
    known_at = np.isfinite(ways.state[:, :, 0])
    last = known_at.shape[1] - 1 - np.argmax(known_at[:, ::-1], axis=1)
    vanished = missing & known_at.any(axis=1) & (last < known_at.shape[1] - 1)
    lost[vanished] = ways.time[last[vanished]]
    end[vanished] = ways.state[vanished, last[vanished], :3]
    wall[vanished] = UNKNOWN
    born[np.isnan(born)] = -np.inf
    lost[np.isnan(lost)] = np.inf
    return Fates(born, birthplace, lost, end, wall)


def _noted(rows: NDArray[Any], ids: Ints) -> tuple[Floats, Floats]:
    """Time and place in the rows of each id, ascending; not a number where there is none."""
    time, place = np.full(len(ids), np.nan), np.full((len(ids), 3), np.nan)
    known = np.isin(rows["id"], ids)
    where = np.searchsorted(ids, rows["id"][known])
    time[where], place[where] = rows["time"][known], rows["position"][known]
    return time, place
