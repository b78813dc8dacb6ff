"""Charges moved through time in memory: parts put together without a scenario file or a record."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.coulomb.bunch_frames import BunchFrames
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.fields.form import FieldForm, Role
from driftwell.fields.table import field_tables
from driftwell.forms.body import Body
from driftwell.forms.waveforms import waveform_breaks
from driftwell.geometry.body_table import body_table
from driftwell.geometry.solid import Solid
from driftwell.images.image_sum import Images
from driftwell.ledger.ledger import Ledger, LedgerRow
from driftwell.particles.state import Particles
from driftwell.particles.unborn import Unborn
from driftwell.processes.form import ProcessForm
from driftwell.processes.table import Acting, acting
from driftwell.stepping.form import Stepping
from driftwell.stepping.happenings import Events, Traced
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.motion import Fields
from driftwell.stepping.schedule import BREAK, RECORD, TRACE, schedule
from driftwell.stepping.surroundings import Surroundings
from driftwell.walls.form import DetectorForm, WallForm
from driftwell.walls.table import surface_table
from tests.cases import BODIES

Floats = NDArray[np.float64]

ION_MASS = 100.0 * ATOMIC_MASS
ION_RATIO = ELEMENTARY_CHARGE / ION_MASS
OFF = Coulomb(method="off")
DIRECT = Coulomb(method="direct")
TREE = Coulomb(method="tree", accuracy=1e-2)


def ions(
    position: ArrayLike,
    velocity: ArrayLike = (0.0, 0.0, 0.0),
    *,
    charge: ArrayLike = 1.0,
    mass: ArrayLike = 100.0,
    weight: ArrayLike = 1.0,
    cloud: ArrayLike = 0,
) -> Particles:
    """Charges at places (n, 3), m, with proper velocities, m/s; charge in e, mass in u."""
    place = np.array(position, dtype=np.float64).reshape(-1, 3)
    n = len(place)

    def each(values: ArrayLike, unit: float = 1.0) -> Floats:
        return np.broadcast_to(np.asarray(values, dtype=np.float64) * unit, (n,)).copy()

    speed = np.broadcast_to(np.asarray(velocity, dtype=np.float64), (n, 3)).copy()
    return Particles(
        np.ascontiguousarray(place.T),
        np.ascontiguousarray(speed.T),
        each(charge, ELEMENTARY_CHARGE),
        each(mass, ATOMIC_MASS),
        each(weight),
        np.arange(n, dtype=np.int64),
        np.zeros(n, dtype=np.int64),
        each(cloud).astype(np.int64),
        np.zeros(n),
    )


def loop(
    particles: Particles,
    duration: float,
    step: float,
    *,
    fields: Sequence[FieldForm] = (),
    walls: Sequence[WallForm] = (),
    detectors: Sequence[DetectorForm] = (),
    coulomb: Coulomb = OFF,
    records: ArrayLike = (),
    samples: ArrayLike = (),
    traced: Sequence[Traced] = (),
    threads: int = 1,
    images: Images | None = None,
    bodies: Sequence[Sequence[Solid]] = (),
    unborn: Unborn | None = None,
    state: Mapping[str, NDArray[Any]] | None = None,
    frames: BunchFrames | None = None,
    cell: Cell | None = None,
    processes: Sequence[ProcessForm] = (),
    **stepping: Any,
) -> TimeLoop:
    """A time loop at its start, or in a `state`; `records` and `samples` are times of marks, s.

    bodies : those of each electrode
    processes : the bodies are those of each cloud's first charge, clouds "cloud 0", ...; seed 7
    """
    options = Stepping(**stepping)
    breaks = [t for field in fields for t in waveform_breaks(field.waveform(), duration)]
    breaks += [t for process in processes for t in process.breaks(duration)]
    plan = schedule(
        duration,
        step,
        [
            (RECORD, np.asarray(records, dtype=np.float64)),
            (TRACE, np.asarray(samples, dtype=np.float64)),
            (BREAK, np.asarray(breaks, dtype=np.float64)),
        ],
        options.coulomb_every,
    )
    tables = field_tables(fields, BODIES)
    return TimeLoop(
        particles,
        Fields(tables[Role.ELECTRIC], tables[Role.UNIFORM_MAGNETIC], tables[Role.MAGNETIC]),
        surface_table(walls, detectors),
        coulomb,
        options,
        plan,
        traced,
        threads,
        state,
        Surroundings(
            images,
            body_table(bodies),
            unborn,
            frames,
            cell,
            _acting(particles, processes, len(walls) + len(detectors) + len(bodies)),
        ),
    )


def _acting(
    particles: Particles, processes: Sequence[ProcessForm], first_surface: int
) -> Acting | None:
    if not processes:
        return None
    cloud, first = np.unique(particles.cloud, return_index=True)
    clouds = [(f"cloud {k}", Body("ion", 1.0, 1.0)) for k in range(int(cloud[-1]) + 1)]
    for k, i in zip(cloud, first, strict=True):
        mass, charge = float(particles.mass[i]), float(particles.charge[i])
        clouds[int(k)] = (f"cloud {k}", Body("ion", mass, charge))
    return acting(processes, clouds, 7, first_surface)


def always() -> bool:
    """Whether to keep going."""
    return True


def to_end(moving: TimeLoop, keep_going: Callable[[], bool] = always) -> TimeLoop:
    """The same loop, moved to its last mark."""
    assert moving.to_mark(len(moving.schedule.steps), keep_going)
    return moving


def accounts(moving: TimeLoop, remove_lost: bool = True) -> list[LedgerRow]:
    """The ledger closed at the start, at every mark for a record, and at the end."""
    ledger = Ledger()

    def closed(time: float) -> LedgerRow:
        error, _ = moving.keep_accuracy()
        return ledger.close(time, moving.plan, moving.charges, moving.work, moving.summation, error)

    rows = [closed(0.0)]
    flags = moving.schedule.flags
    last = len(flags) - 1
    for mark in range(1, last + 1):
        if flags[mark] & RECORD or mark == last:
            assert moving.to_mark(mark, always)
            rows.append(closed(float(moving.schedule.time[mark])))
            if remove_lost:
                moving.remove_lost()
    return rows


def events(moving: TimeLoop) -> Events:
    """All that happened on surfaces so far, as one."""
    taken = moving.take_events()
    assert taken, "nothing happened on any surface"
    names = (
        "surface",
        "id",
        "cloud",
        "direction",
        "time",
        "position",
        "velocity",
        "mass",
        "weight",
    )
    return Events(**{name: np.concatenate([getattr(e, name) for e in taken]) for name in names})
