"""The time loop as the run drives it: bursts of compiled steps, events in between, losses removed.

Between two marks nothing of Python runs inside a step. A call into compiled code lasts about half
a second at most, so that signals, progress and a wish to stop are heard.
"""

from __future__ import annotations

import time as clocks
from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.bunch_frames import FrameWatch
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.frame_sum import HELD, frame_sum
from driftwell.coulomb.promise import Promise, Scene
from driftwell.coulomb.summation import Summation, manner_of
from driftwell.forms import spelled
from driftwell.geometry.body_search import searched
from driftwell.geometry.body_table import body_table
from driftwell.images.image_sum import no_images
from driftwell.kernels.cache_lines import room
from driftwell.kernels.status import (
    DONE,
    EVENTS_FULL,
    NEED_BIRTHS,
    PAUSED,
)
from driftwell.particles.state import Particles
from driftwell.stepping.births import bearing_of
from driftwell.stepping.burst import burst
from driftwell.stepping.cell import reentry
from driftwell.stepping.failures import failure
from driftwell.stepping.form import Stepping
from driftwell.stepping.frames import InFrame, take_frames
from driftwell.stepping.happenings import (
    TRACE_ROWS,
    Events,
    Samples,
    Traced,
    emptied_events,
    emptied_trace,
    trace_of,
    traced_now,
)
from driftwell.stepping.midpoint_passes import midpoint_passes_over
from driftwell.stepping.motion import (
    CURSOR_AT_FAULT,
    CURSOR_BIRTH,
    CURSOR_FRESH,
    CURSOR_INTERVAL,
    CURSOR_STEP,
    CURSOR_STEPS,
    WAITING,
    Fields,
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
)
from driftwell.stepping.processes import processes_over
from driftwell.stepping.schedule import TRACE, Schedule
from driftwell.stepping.schemes import SCHEMES
from driftwell.stepping.surroundings import Surroundings, plan_of
from driftwell.walls.table import SurfaceTable, sides

_CALL_SECONDS = 0.4
NOTHING = Surroundings()
"""Nothing but charges, fields and surfaces."""


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
        around: Surroundings = NOTHING,
    ) -> None:
        """A loop at time zero, or where its :meth:`state` was taken, with the particles of then."""
        self.particles = particles
        self._pools = Pools(around.unborn, {} if state is None else entries_below("births", state))
        self.schedule = schedule
        self._fields = fields
        self._surfaces = surfaces
        self._bodies = body_table(()) if around.bodies is None else searched(around.bodies)
        self._scheme = SCHEMES[stepping.scheme]
        self._traced = traced
        charge, most = particles.charge, len(particles)
        if around.unborn is not None:
            charge = np.concatenate([charge, around.unborn.particles.charge])
            most += len(around.unborn)
        both_signs = bool((charge > 0).any() and (charge < 0).any())
        self.plan = plan_of(coulomb, stepping, around, both_signs)
        self._processes = no_processes() if around.processes is None else around.processes
        frames = around.frames
        self._bunch = frames.numbers if frames is not None and self.plan.frames else None
        self._frame_sum = frame_sum(self.plan.frames > 0)
        self._frame_watch = None
        if frames is not None and coulomb.method != "off":
            self._frame_watch = FrameWatch(frames, coulomb.accuracy)
        self._images, self._threads = around.images, threads
        self._image_sum = no_images()
        self._doubted = False
        summed = None if state is None else entries_below("coulomb", state)
        manner = None if summed is None else manner_of(summed)
        self.summation = Summation(coulomb, most, threads, manner=manner, cell=around.cell)
        self.promise = Promise(coulomb.accuracy, summed)
        every = stepping.coulomb_every
        self._sums_per_step = (
            1.0 / every if every > 1 else float(np.count_nonzero(self._scheme.kick[1:]))
        )
        self.work = work_space(0, 0, room((1, 1)), False, False)
        self.acting = process_work(self._processes, particles)
        self._events: list[Events] = []
        self._births: list[Born] = []
        self._samples: list[Samples] = []
        self._budget = 1
        if state is not None:
            self.work.cursor[CURSOR_BIRTH] = state["schedule/cursor"][CURSOR_BIRTH]
        elif around.unborn is not None:
            self.particles = merged(particles, self._pools.admitted(0, len(particles)))
        self._arrange()
        if state is not None:
            self._take_up(state)
            return
        sides(self._surfaces, self.particles.position, self.work.side)
        self._step_aside()
        self._burst(1, 0)  # no step, but the forces at the start
        if traced and schedule.flags[0] & TRACE:
            self._samples.append((schedule.time[:1].copy(), traced_now(self._trace, self.charges)))

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
                raise failure(
                    status,
                    int(self.work.cursor[CURSOR_AT_FAULT]),
                    self.particles,
                    self.time,
                    self.steps_done,
                    self.plan.cell_axis >= 0,
                )
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

    def take_samples(self) -> list[Samples]:
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
        return min(until, self.mark + TRACE_ROWS) if self._traced else until

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
        self._trace = trace_of(self._traced, self.particles)

    def _collect(self) -> None:
        """Empty the event and sample buffers into lists."""
        born = self._pools.take_born(int(self.work.cursor[CURSOR_BIRTH]))
        if born is not None:
            self._births.append(born)
        events = emptied_events(self.work, self.particles)
        if events is not None:
            self._events.append(events)
        samples = emptied_trace(self.work, self._trace)
        if samples is not None:
            self._samples.append(samples)


def entries_below(group: str, state: Mapping[str, NDArray[Any]]) -> dict[str, NDArray[Any]]:
    """The entries of a group, without its name."""
    start = f"{group}/"
    return {
        name.removeprefix(start): each for name, each in state.items() if name.startswith(start)
    }
