"""A run as datasets of xarray: named dimensions, coordinates, units.

Units stand in the attribute ``units`` of each variable, as is customary. Trajectories are read when
a dataset is asked for; ``ids`` and ``records`` choose a part before anything is read.
"""

from __future__ import annotations

from collections.abc import Sequence
from importlib.util import find_spec
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.api.track_view import TrackView, ids_in
from driftwell.errors import DriftwellError
from driftwell.record.layout import dataset, unit
from driftwell.record.reader import Run as Record

Ints = NDArray[np.int64]

_AXES = ["x", "y", "z"]
_MISSING = "xarray is not installed; `pip install 'driftwell[xarray]'` installs it."
_PHASE = ["x", "y", "z", "ux", "uy", "uz"]


def datasets(run: Record) -> Datasets:
    """The views of a run. Raises DriftwellError where xarray is not installed."""
    if find_spec("xarray") is None:
        raise DriftwellError(_MISSING)
    return Datasets(run)


class Datasets:
    """The tables of one run; each gives an ``xarray.Dataset``."""

    __slots__ = ("_run",)

    def __init__(self, run: Record) -> None:
        self._run = run

    def trajectory(
        self, records: slice | int = slice(None), ids: Sequence[int] | Ints | slice = slice(None)
    ) -> Any:
        """Tracked charges: ``position`` (m) and ``velocity`` (proper velocity, m/s).

        Dimensions (time, charge, component); coordinates: time in s, ids of the charges, their
        cloud's name, and x, y, z.
        """
        import xarray

        chosen = slice(records, records + 1 or None) if isinstance(records, int) else records
        place = TrackView(self._run, slice(0, 3, 1), "m")
        there = place.ids
        columns = [ids] if isinstance(ids, int) else ids
        found = place[chosen, columns]
        own = _chosen_ids(there, columns)
        speed = TrackView(self._run, slice(3, 6, 1), "m/s")[chosen, columns]
        dims = ("time", "charge", "component")
        return xarray.Dataset(
            {
                "position": (dims, found, {"units": "m", "long_name": "position"}),
                "velocity": (dims, speed, {"units": "m/s", "long_name": "proper velocity gamma v"}),
            },
            coords={
                "time": ("time", self._run.rows("trajectory/time")[chosen], {"units": "s"}),
                "charge": ("charge", own, {"long_name": "id of the charge"}),
                "cloud": ("charge", self._clouds(own)),
                "component": _AXES,
            },
            attrs=self._about(),
        )

    def moments(self, cloud: str) -> Any:
        """Moments of a cloud at every record: count, centre, covariance, kinetic energy.

        Raises AnswerError where there is no such cloud.
        """
        import xarray

        found = self._run.moments(cloud)
        units = {"units": "m, m, m, m/s, m/s, m/s"}
        return xarray.Dataset(
            {
                "count": ("time", found.count, {"units": "1"}),
                "centre": (("time", "phase"), found.centre, units),
                "covariance": (("time", "phase", "phase_2"), found.covariance),
                "kinetic_energy": ("time", found.kinetic_energy, {"units": "J"}),
                "kinetic_variance": ("time", found.kinetic_variance, {"units": "J^2"}),
            },
            coords={
                "time": ("time", found.time, {"units": "s"}),
                "phase": _PHASE,
                "phase_2": _PHASE,
            },
            attrs={**self._about(), "cloud": cloud},
        )

    def ledger(self) -> Any:
        """The ledger at every record; what has three components has the dimension component."""
        return self._of_rows("ledger", "time")

    def losses(self) -> Any:
        """One row for each charge lost."""
        return self._of_rows("losses", "loss")

    def crossings(self) -> Any:
        """One row for each passage through a detector."""
        return self._of_rows("crossings", "crossing")

    def _of_rows(self, path: str, along: str) -> Any:
        """A table of the record, column by column."""
        import xarray

        rows = self._run.rows(path)
        variables: dict[str, Any] = {}
        coords: dict[str, Any] = {}
        for column in dataset(path).columns:
            values = np.ascontiguousarray(rows[column.name])
            dims = (along,) if values.ndim == 1 else (along, "component")
            entry = (dims, values, {"units": unit(path, column.name)})
            (coords if column.name == along else variables)[column.name] = entry
        if any(len(each[0]) == 2 for each in variables.values()):
            coords["component"] = (("component",), np.array(_AXES), {})
        return xarray.Dataset(variables, coords=coords, attrs=self._about())

    def _clouds(self, ids: Ints) -> list[str]:
        """Name of the cloud of each charge."""
        clouds = self._run.header.clouds
        ends = np.array([each.first_id + each.count for each in clouds])
        order = np.argsort(ends)
        found = order[np.searchsorted(ends[order], ids, side="right")]
        return [clouds[int(k)].name for k in found]

    def _about(self) -> dict[str, str]:
        header = self._run.header
        return {
            "title": header.title,
            "digest": header.digest,
            "driftwell_version": header.driftwell_version,
        }


def _chosen_ids(there: Ints, chosen: Any) -> Ints:
    """Ids in the order in which a view gives their charges."""
    if isinstance(chosen, slice):
        return ids_in(chosen, there)
    return np.asarray(chosen, dtype=np.int64)
