"""The time loop as the run drives it: bursts of compiled steps, events in between, losses removed.

Between two marks nothing of Python runs inside a step. A call into compiled code lasts about half
a second at most, so that signals, progress and a wish to stop are heard.
"""

from __future__ import annotations

import time as clocks
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT, SPEED_OF_LIGHT
from driftwell.coulomb.bunch_frames import BunchFrames, FrameWatch
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.frame_sum import HELD, frame_sum
from driftwell.coulomb.promise import Promise, Scene
from driftwell.coulomb.summation import Summation, manner_of
from driftwell.errors import StepError
from driftwell.forms import spelled
from driftwell.geometry.body_search import searched
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.images.image_sum import Images, no_images
from driftwell.kernels.cache_lines import room
from driftwell.kernels.status import (
    COLLAPSE,
    CROWDED_STEP,
    DONE,
    EVENTS_FULL,
    NEED_BIRTHS,
    NOT_FINITE,
    OVERFLOW,
    PAUSED,
    RUNAWAY,
)
from driftwell.particles.state import Particles
from driftwell.particles.unborn import Unborn
from driftwell.processes.table import Acting
from driftwell.stepping.births import bearing_of
from driftwell.stepping.burst import burst
from driftwell.stepping.cell import reentry
from driftwell.stepping.form import Stepping
from driftwell.stepping.frames import InFrame, take_frames
from driftwell.stepping.midpoint_passes import midpoint_passes_over
from driftwell.stepping.motion import (
    CURSOR_AT_FAULT,
    CURSOR_BIRTH,
    CURSOR_EVENTS,
    CURSOR_FRESH,
    CURSOR_INTERVAL,
    CURSOR_STEP,
    CURSOR_STEPS,
    CURSOR_TRACES,
    WAITING,
    Fields,
    Plan,
    Trace,
    charges_of,
    work_space,
)
from driftwell.stepping.passes import passes_over
from driftwell.stepping.pools import Born, Pools, merged
from driftwell.stepping.process_work import (
    no_processes,
    process_state,
    process_work,
    take_up_processes,
    when_acting,
)
from driftwell.stepping.processes import processes_over
from driftwell.stepping.schedule import TRACE, Schedule
from driftwell.stepping.schemes import MIDWAY, SCHEMES
from driftwell.walls.table import SurfaceTable, sides

_CALL_SECONDS = 0.4
_TRACE_ROWS = 4096
_NO_CENTRE = -2


@dataclass(frozen=True, slots=True)
class Traced:
    """One traced coordinate: a cloud's centre, or one charge by its id."""

    cloud: int
    id: int | None
    axis: int


@dataclass(frozen=True, slots=True)
class Events:
    """What happened on surfaces, in the order of time.

    surface, id, cloud : (k,) int64; direction : (k,) int64, 0 for losses
    time : (k,) s; position, velocity : (k, 3), m and m/s (proper)
    mass, weight : (k,) of one real particle, and how many it stands for
    """

    surface: NDArray[np.int64]
    id: NDArray[np.int64]
    cloud: NDArray[np.int64]
    direction: NDArray[np.int64]
    time: NDArray[np.float64]
    position: NDArray[np.float64]
    velocity: NDArray[np.float64]
    mass: NDArray[np.float64]
    weight: NDArray[np.float64]


class TimeLoop:
    """Moves a set of particles along a schedule.

    Attributes
    ----------
    particles : Particles
        The charges, in the order of their ids; lost ones until :meth:`remove_lost`, and those of
        the next births, waiting; :meth:`present` leaves both out.
    charges, work :
        What the compiled loop works on; the ledger reads them.
    summation : Summation
        The pair sum as it is now.
    promise : Promise
        Whether that sum is as accurate as asked.
    """

    def __init__(
        self,
        particles: Particles,
        fields: Fields,
        surfaces: SurfaceTable,
        coulomb: Coulomb,
        stepping: Stepping,
        schedule: Schedule,
        traced: Sequence[Traced],
        threads: int,
        state: Mapping[str, NDArray[Any]] | None = None,
        images: Images | None = None,
        bodies: BodyTable | None = None,
        unborn: Unborn | None = None,
        frames: BunchFrames | None = None,
        cell: Cell | None = None,
        processes: Acting | None = None,
    ) -> None:
        """A loop at time zero, or where its :meth:`state` was taken, with the particles of then.

        images : the conductors that answer to the charges
        frames : in which frames the charges are summed; None: in the laboratory, and unwatched
        bodies : what else stops charges: owner k is surface number (walls + detectors + k)
        unborn : charges that are born on the way
        cell : what repeats along one axis
        processes : what else acts on charges
        """
        self.particles = particles
        self._pools = Pools(unborn, {} if state is None else entries_below("births", state))
        self.schedule = schedule
        self._fields = fields
        self._surfaces = surfaces
        self._bodies = body_table(()) if bodies is None else searched(bodies)
        self._scheme = SCHEMES[stepping.scheme]
        self._traced = traced
        charge, most = particles.charge, len(particles)
        if unborn is not None:
            charge = np.concatenate([charge, unborn.particles.charge])
            most += len(unborn)
        both_signs = bool((charge > 0).any() and (charge < 0).any())
        self.plan = Plan(
            coulomb=int(coulomb.method != "off") * (1 if cell is None else 2),
            coulomb_every=stepping.coulomb_every,
            constant=COULOMB_CONSTANT,
            softening2=coulomb.softening**2,
            extent2=stepping.extent**2,
            watch_collapse=int(both_signs and coulomb.softening == 0.0 and coulomb.method != "off"),
            light2=SPEED_OF_LIGHT**2,
            images=int(images is not None),
            midway=int(stepping.scheme == MIDWAY),
            frames=0 if frames is None or coulomb.method == "off" else frames.count,
            cell_axis=-1 if cell is None else cell.number,
            cell_begin=0.0 if cell is None else cell.begin,
            cell_length=0.0 if cell is None else cell.length,
            processes=0 if processes is None else when_acting(processes),
        )
        self._processes = no_processes() if processes is None else processes
        self._bunch = frames.numbers if frames is not None and self.plan.frames else None
        self._frame_sum = frame_sum(self.plan.frames > 0)
        self._frame_watch = None
        if frames is not None and coulomb.method != "off":
            self._frame_watch = FrameWatch(frames, coulomb.accuracy)
        self._images, self._threads = images, threads
        self._repeats = cell is not None
        self._image_sum = no_images()
        self._doubted = False
        summed = None if state is None else entries_below("coulomb", state)
        manner = None if summed is None else manner_of(summed)
        self.summation = Summation(coulomb, most, threads, manner=manner, cell=cell)
        self.promise = Promise(coulomb.accuracy, summed)
        every = stepping.coulomb_every
        self._sums_per_step = (
            1.0 / every if every > 1 else float(np.count_nonzero(self._scheme.kick[1:]))
        )
        self.work = work_space(0, 0, room((1, 1)), False, False)
        self.acting = process_work(self._processes, particles)
        self._events: list[Events] = []
        self._births: list[Born] = []
        self._samples: list[tuple[NDArray[np.float64], NDArray[np.float64]]] = []
        self._budget = 1
        if state is not None:
            self.work.cursor[CURSOR_BIRTH] = state["schedule/cursor"][CURSOR_BIRTH]
        elif unborn is not None:
            self.particles = merged(particles, self._pools.admitted(0, len(particles)))
        self._arrange()
        if state is not None:
            self._take_up(state)
            return
        sides(self._surfaces, self.particles.position, self.work.side)
        self._step_aside()
        self._burst(1, 0)  # no step, but the forces at the start
        if traced and schedule.flags[0] & TRACE:
            self._samples.append((schedule.time[:1].copy(), self._traced_now()))

    @property
    def steps_done(self) -> int:
        """Steps since the run began."""
        return int(self.work.cursor[CURSOR_STEPS])

    @property
    def time(self) -> float:
        """Time reached, s."""
        interval, step = self.work.cursor[CURSOR_INTERVAL], self.work.cursor[CURSOR_STEP]
        times, steps = self.schedule.time, self.schedule.steps
        if interval >= len(steps):
            return float(times[-1])
        span = times[interval + 1] - times[interval]
        return float(times[interval] + step * span / steps[interval])

    @property
    def exchanged(self) -> NDArray[np.float64]:
        """What each process has given so far, (processes, 8), see :mod:`process_work`."""
        return self.acting.exchanged + self.acting.carry

    @property
    def mark(self) -> int:
        """The mark of the schedule last reached."""
        return int(self.work.cursor[CURSOR_INTERVAL])

    @property
    def alive(self) -> int:
        """Simulated charges that are there."""
        return int(np.count_nonzero(self.charges.alive == 1))

    @property
    def born(self) -> int:
        """Simulated charges born since the run began."""
        return self._pools.born

    @property
    def over(self) -> bool:
        """Whether no charge is left, and none will be born."""
        return self.alive == 0 and not self._pools.to_come(int(self.work.cursor[CURSOR_BIRTH]))

    def present(self) -> Particles:
        """The charges that are there now, neither lost nor unborn."""
        there = self.charges.alive == 1
        return self.particles if there.all() else self.particles.kept(there)

    def to_mark(self, until: int, keep_going: Callable[[], bool]) -> bool:
        """Step on to a mark; False when `keep_going` said no on the way.

        Raises StepError where the motion cannot be continued.
        """
        status = PAUSED
        while status != DONE:
            if not keep_going():
                return False
            began, before = clocks.perf_counter(), self.steps_done
            status = self._burst(self._next_stop(until), self._budget)
            self._collect()
            if status == NEED_BIRTHS:
                self._admit()
                status = PAUSED
            if status not in {DONE, PAUSED, EVENTS_FULL}:
                raise StepError(self._failure(status), self._id_at_fault(status))
            self._adapt(clocks.perf_counter() - began, self.steps_done - before)
            if status == DONE and self.mark < until:
                status = PAUSED
        return True

    def keep_accuracy(self) -> tuple[float, list[str]]:
        """Measure the pair sum's error where that is due, and mend it; only at a mark.

        Returns the rms relative force error the sum had, and what the user should be told.
        """
        position, charge, field = self.charges.position, self.charges.charge, self.work.pairs
        if self.plan.frames:
            seen = self._largest_bunch()
            position, charge, field = seen.place, seen.charge, seen.field
        summation, error, told = self.promise.look(
            self.summation,
            Scene(
                self.time,
                self.steps_done,
                self.steps_done * self._sums_per_step,
                position,
                charge,
                self.particles.id,
                field,
                last=self.mark == len(self.schedule.steps),
            ),
        )
        if summation is not self.summation:
            self.summation = summation
            self.work = self.work._replace(tiles=summation.work)
            if self.plan.frames:
                take_frames(
                    summation.pair_sum, self._frame_sum, HELD, self.plan, self.charges, self.work
                )
        if self._frame_watch is not None:
            told = [
                *told,
                *self._frame_watch.look(
                    self.charges.velocity,
                    self.charges.mass,
                    self.charges.charge,
                    self.charges.cloud,
                ),
            ]
        if self._images is not None and not self._doubted:
            doubt = self._images.doubt(self.charges.position, self.charges.charge)
            if doubt is not None:
                self._doubted = True
                told = [*told, f"At t = {spelled(self.time, 's')} {doubt}."]
        return error, told

    def _largest_bunch(self) -> InFrame:
        """The bunch with the most charges, whose sum is looked at."""
        own = self.work.bunch[self.charges.cloud[self.charges.charge != 0.0]]
        number = int(np.bincount(own, minlength=self.plan.frames).argmax())
        return InFrame(number, self.charges, self.work, self.plan.light2)

    def remove_lost(self) -> None:
        """Take the charges lost since the last call out of the arrays."""
        alive = self.charges.alive != 0
        if alive.all():
            return
        side, clearance = self.work.side[:, alive], self.work.clearance
        self.particles = self.particles.kept(alive)
        self._arrange()
        self.work.side[:] = side
        self.work.clearance[:] = clearance[alive] if clearance.size else clearance

    def _admit(self) -> None:
        """Take lost charges out, and lay out the next that will be born."""
        self.remove_lost()
        before, side = self.particles.id, self.work.side
        clearance, cursor = self.work.clearance, self.work.cursor
        more = self._pools.admitted(int(cursor[CURSOR_BIRTH]), self.alive)
        cursor[CURSOR_BIRTH] = 0
        self.particles = merged(self.particles, more)
        self._arrange()
        sides(self._surfaces, self.particles.position, self.work.side)
        where = np.searchsorted(self.particles.id, before)
        self.work.side[:, where] = side
        if clearance.size:
            self.work.clearance[where] = clearance
        self._step_aside()

    def _step_aside(self) -> None:
        """Let no surface ask again and again for a charge that waits on it."""
        waiting = self.charges.alive == WAITING
        side = self.work.side[:, waiting]
        self.work.side[:, waiting] = np.where(side == 0, -1, side)

    def state(self) -> dict[str, NDArray[Any]]:
        """Copies of everything a resume needs besides the particles, by name.

        Between two marks as well, once events and samples have been taken.
        """
        return {
            "accounts/total": self.work.total.copy(),
            "accounts/carry": self.work.carry.copy(),
            "accounts/energy": self.work.energy.copy(),
            "accounts/pending": self.work.pending.copy(),
            "schedule/cursor": self.work.cursor.copy(),
            "surfaces/side": self.work.side.copy(),
            "charges/alive": self.charges.alive.copy(),
            **{f"births/{name}": item for name, item in self._pools.state().items()},
            **{f"processes/{name}": each for name, each in process_state(self.acting).items()},
            **{
                f"coulomb/{name}": item
                for name, item in (self.summation.manner.state() | self.promise.state()).items()
            },
            **({"frames/table": self.work.frames.copy()} if self.plan.frames else {}),
        }

    def take_events(self) -> list[Events]:
        """What happened on surfaces since the last call."""
        taken, self._events = self._events, []
        return taken

    def take_births(self) -> list[Born]:
        """The charges born since the last call."""
        taken, self._births = self._births, []
        return taken

    def take_samples(self) -> list[tuple[NDArray[np.float64], NDArray[np.float64]]]:
        """Traced times (k,) and values (k, traces) since the last call."""
        taken, self._samples = self._samples, []
        return taken

    def _take_up(self, state: Mapping[str, NDArray[Any]]) -> None:
        """Put a state into the arrays laid out, and find the forces it was left with.

        They are those of the last kick's second half: rates of the accounts are at hand again for
        the time that is pending, which is put back last.
        """
        accounts, work = entries_below("accounts", state), self.work
        for name in ("total", "carry", "energy"):
            getattr(work, name)[:] = accounts[name]
        work.cursor[:] = state["schedule/cursor"]
        self._pools.take_up(int(work.cursor[CURSOR_BIRTH]))
        work.cursor[CURSOR_FRESH] = 0
        if self.plan.frames:
            work.frames[:] = state["frames/table"]
        work.side[:] = state["surfaces/side"]
        self.charges.alive[:] = state["charges/alive"]
        take_up_processes(self.acting, entries_below("processes", state))
        gone = self.charges.alive == 0
        self.charges.charge[gone] = self.charges.weight[gone] = 0.0
        self.charges.charge_to_mass[:, gone] = 0.0
        if self.mark < len(self.schedule.steps):
            self._burst(self.mark + 1, 0)
        work.pending[:] = accounts["pending"]

    def _next_stop(self, until: int) -> int:
        """A mark near enough that the samples on the way fit their buffer."""
        return min(until, self.mark + _TRACE_ROWS) if self._traced else until

    def _burst(self, until: int, budget: int) -> int:
        return int(
            burst(
                self.summation.pair_sum,
                self._image_sum.function,
                self._bearing,
                self._frame_sum,
                self._reentry,
                self._passes,
                self._acts,
                self.acting,
                self.plan,
                self._scheme,
                self._fields,
                self._surfaces,
                self._bodies,
                self.charges,
                self._pools.births,
                self._trace,
                self.schedule.time,
                self.schedule.flags,
                self.schedule.steps,
                until,
                budget,
                self.work,
            )
        )

    def _adapt(self, seconds: float, steps: int) -> None:
        """Set the budget of the next call to about :data:`_CALL_SECONDS`."""
        if steps > 0 and seconds > 0.0:
            wanted = int(steps * _CALL_SECONDS / seconds)
            self._budget = max(1, min(wanted, 8 * max(self._budget, steps)))

    def _arrange(self) -> None:
        """Lay out work space for the particles as they are; accounts and cursor are kept."""
        n = len(self.particles)
        old = self.work
        self.charges = charges_of(self.particles)
        self._pools.lay_out(self.particles, self.charges, int(old.cursor[CURSOR_BIRTH]))
        self.summation = self.summation.laid_out(n)
        collapse = bool(self.plan.watch_collapse)
        tiles, levels = self.summation.work, self.summation.gives_potential
        images = None
        if self._images is not None:
            images = self._image_sum = self._images.laid_out(n, self._threads)
        stopped = self._bodies.whole.shape[0] > 0
        surfaces = self._surfaces.kind.size
        midway = bool(self.plan.midway)
        takes = bool((self._processes.table.surface >= 0).any())
        work = work_space(
            n, surfaces, tiles, levels, collapse, images, stopped, midway, self._bunch, takes
        )
        if old.frames.shape == work.frames.shape:
            work.frames[:] = old.frames
        work.total[:], work.carry[:] = old.total, old.carry
        work.energy[:], work.cursor[:] = old.energy, old.cursor
        work.cursor[CURSOR_FRESH] = 0
        self.work = work
        self.acting = process_work(self._processes, self.particles, self.acting)
        self._acts = processes_over(self.plan, self._fields, self.charges, work, self.acting)
        passes = midpoint_passes_over if midway else passes_over
        self._passes = passes(
            n, self.plan, self._fields, self._surfaces, self._bodies, self.charges, self.work
        )
        self._bearing = bearing_of(
            self.plan, self._fields, self._surfaces, self.charges, self._pools.births, self.work
        )
        self._reentry = reentry(self.plan, self._fields, self._surfaces, self.charges, self.work)
        self._trace = Trace(
            np.array([each.cloud for each in self._traced], dtype=np.int64),
            np.array([self._index(each) for each in self._traced], dtype=np.int64),
            np.array([each.axis for each in self._traced], dtype=np.int64),
            np.zeros(_TRACE_ROWS + 1),
            np.zeros((_TRACE_ROWS + 1, len(self._traced))),
        )

    def _index(self, traced: Traced) -> int:
        """Where a traced charge stands now; -1 for a centre, -2 once the charge is lost."""
        if traced.id is None:
            return -1
        found = np.flatnonzero(self.particles.id == traced.id)
        return int(found[0]) if found.size else _NO_CENTRE

    def _traced_now(self) -> NDArray[np.float64]:
        """The traced coordinates (1, traces) at the start; NaN for what is not born yet."""
        there = self.charges.alive == 1
        found = np.full((1, len(self._traced)), np.nan)
        for k, (each, i) in enumerate(zip(self._traced, self._trace.which, strict=True)):
            own = there & (self.charges.cloud == each.cloud)
            if i == -1 and own.any():
                found[0, k] = self.charges.position[each.axis, own].mean()
            elif i >= 0 and there[i]:
                found[0, k] = self.charges.position[each.axis, i]
        return found

    def _collect(self) -> None:
        """Empty the event and sample buffers into lists."""
        cursor = self.work.cursor
        born = self._pools.take_born(int(cursor[CURSOR_BIRTH]))
        if born is not None:
            self._births.append(born)
        count = int(cursor[CURSOR_EVENTS])
        if count:
            rows = self.work.events[:count]
            rows = rows[np.argsort(rows[:, 2], kind="stable")]
            index = rows[:, 1].astype(np.int64)
            self._events.append(
                Events(
                    surface=rows[:, 0].astype(np.int64),
                    id=self.particles.id[index],
                    cloud=self.particles.cloud[index],
                    direction=rows[:, 9].astype(np.int64),
                    time=rows[:, 2],
                    position=rows[:, 3:6],
                    velocity=rows[:, 6:9],
                    mass=self.particles.mass[index],
                    weight=self.particles.weight[index],
                )
            )
            cursor[CURSOR_EVENTS] = 0
        count = int(cursor[CURSOR_TRACES])
        if count:
            self._samples.append(
                (self._trace.time[:count].copy(), self._trace.value[:count].copy())
            )
            cursor[CURSOR_TRACES] = 0

    def _failure(self, status: int) -> str:
        """What went wrong, with whom, when, and what to do."""
        i = int(self.work.cursor[CURSOR_AT_FAULT])
        steps = f"{self.steps_done} step{'s' * (self.steps_done != 1)}"
        when = f"after {steps}, at t = {spelled(self.time, 's')}"
        if status == OVERFLOW:
            return f"{when}: a single step met too many surfaces; take a shorter step."
        who = f"charge {int(self.particles.id[i])}"
        x, y, z = self.particles.position[:, i]
        where = f"at ({', '.join(spelled(float(each), 'm', 4) for each in (x, y, z))})"
        if status == NOT_FINITE:
            return (
                f"{when}: the position or velocity of {who} is no longer a number. It met a point "
                "where a field has no value, or the step is far too long; take a shorter step, or "
                "put a wall before that point."
                + (
                    " Or the beam is more than four times as wide as [cell] is long."
                    * self._repeats
                )
            )
        if status == RUNAWAY:
            return (
                f"{when}: {who} has run away, {where}, beyond stepping.extent. The motion is "
                "unstable or nothing stops it: put a wall, or set a larger extent."
            )
        if status == CROWDED_STEP:
            return (
                f"{when}: {who} would be met by a process more than 100000 times in one step. Take "
                "a shorter step, or a thinner gas, or describe the gas by its drag."
            )
        if status == COLLAPSE:
            return (
                f"{when}: {who} falls towards an opposite charge faster than the step can follow, "
                f"{where}. Take a shorter step, or give coulomb.softening a length."
            )
        return f"{when}: the step ended with the unknown status {status}."

    def _id_at_fault(self, status: int) -> int | None:
        if status not in {NOT_FINITE, RUNAWAY, COLLAPSE, CROWDED_STEP}:
            return None
        return int(self.particles.id[self.work.cursor[CURSOR_AT_FAULT]])


def entries_below(group: str, state: Mapping[str, NDArray[Any]]) -> dict[str, NDArray[Any]]:
    """The entries of a group, without its name."""
    start = f"{group}/"
    return {
        name.removeprefix(start): each for name, each in state.items() if name.startswith(start)
    }
