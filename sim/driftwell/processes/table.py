"""All kinds of processes, and the table of them for compiled code.

What acts all the time is drag (linear.py); the rest comes in events. A new kind of the first sort
is one new file and one line here; one of the second also a branch in :func:`happen`.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.body import Body
from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.philox import stream_key
from driftwell.processes.form import BOX, RATE, SLOPE, ProcessForm
from driftwell.processes.gas_collisions import GasCollisions, collide
from driftwell.processes.laser_cooling import LASER, LaserCooling, scatter
from driftwell.processes.mobility_drag import MobilityDrag
from driftwell.processes.outcome import Event
from driftwell.processes.stokes_drag import StokesDrag
from driftwell.processes.thermostat import Thermostat

PROCESS_KINDS: tuple[type[ProcessForm], ...] = (
    GasCollisions,
    MobilityDrag,
    StokesDrag,
    LaserCooling,
    Thermostat,
)
PARAMETERS = 24
ON = 23
"""Where in a row of parameters stands 1 where the process acts on the cloud's charges."""


class ProcessTable(NamedTuple):
    """The processes, one row each, as flat arrays for compiled code.

    kind : (p,) int64; parameter : (p, clouds, 24) float64, see form.py
    flow : (p, 3) m/s, see form.py
    start, end : (p,) s; region : (p, 8), see form.py
    key : (p, 2) uint64, of its random numbers
    surface : (p,) int64, number of the surface that takes what is lost; -1: none is
    """

    kind: NDArray[np.int64]
    parameter: NDArray[np.float64]
    flow: NDArray[np.float64]
    start: NDArray[np.float64]
    end: NDArray[np.float64]
    region: NDArray[np.float64]
    key: NDArray[np.uint64]
    surface: NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Acting:
    """The processes of a run.

    names : in the order of the table
    continuous : whether any acts all the time
    """

    names: tuple[str, ...]
    table: ProcessTable
    continuous: bool

    def __len__(self) -> int:
        return len(self.names)

    @property
    def sloped(self) -> NDArray[np.bool_]:
        """Which of them have rates that depend on the velocity, (p,)."""
        return (self.table.parameter[:, :, SLOPE] != 0.0).any(axis=1)

    def of_charges(self, cloud: NDArray[np.int64], column: int) -> NDArray[np.float64]:
        """One of the parameters for every charge, (p, n)."""
        return np.ascontiguousarray(self.table.parameter[:, cloud, column])

    def rates(self, cloud: NDArray[np.int64]) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
        """The largest rates of the events of every charge: (p, n), 1/s and 1/m."""
        return self.of_charges(cloud, RATE), self.of_charges(cloud, SLOPE)


def acting(
    forms: Sequence[ProcessForm],
    clouds: Sequence[tuple[str, Body]],
    seed: int,
    first_surface: int = 0,
) -> Acting:
    """Lay the processes one after the other.

    clouds : name and body of each, in the order of the charges' `cloud`
    first_surface : number of the surface that stands for the first process that takes charges
    """
    count = len(forms)
    kind = np.zeros(count, np.int64)
    parameter = np.zeros((count, max(1, len(clouds)), PARAMETERS))
    flow = np.zeros((count, 3))
    surface = np.full(count, -1, np.int64)
    region = np.zeros((count, BOX))
    taking = first_surface
    for k, form in enumerate(forms):
        for row, (name, body) in zip(parameter[k], clouds, strict=False):
            packed = form.packed(body)
            kind[k], flow[k] = packed.kind, packed.flow
            if form.acts_on(name, body.name):
                row[:] = packed.row(PARAMETERS)
                row[ON] = 1.0
        if form.region is not None:
            region[k] = form.region.packed()
        if form.takes_charges():
            surface[k] = taking
            taking += 1
    table = ProcessTable(
        kind,
        parameter,
        flow,
        np.array([form.start for form in forms]),
        np.array([np.inf if form.end is None else form.end for form in forms]),
        region,
        np.array([stream_key(seed, form.name, "process") for form in forms], np.uint64).reshape(
            count, 2
        ),
        surface,
    )
    return Acting(
        tuple(form.name for form in forms), table, any(form.is_continuous() for form in forms)
    )


@inner_kernel
def is_within(region: np.ndarray, x: float, y: float, z: float) -> bool:
    """Whether a place lies in a region, (8,)."""
    return region[0] == 0.0 or (
        region[1] <= x <= region[2]
        and region[3] <= y <= region[4]
        and region[5] <= z <= region[6]
        and x * x + y * y <= region[7]
    )


@outer_kernel
def happen(
    kind: int,
    p: np.ndarray,
    key: np.ndarray,
    who: int,
    event: int,
    bound: float,
    x: float,
    y: float,
    z: float,
    vx: float,
    vy: float,
    vz: float,
) -> Event:
    """One event of a process of `kind` on charge `who`, see `collide`."""
    if kind == LASER:
        return scatter(p, key, who, event, x, y, z, vx, vy, vz)
    return collide(kind, p, key, who, event, bound, vx, vy, vz)
