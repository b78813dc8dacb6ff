"""Sources: charges born while the run goes on."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Literal, Self

import numpy as np

from driftwell.constants import BOLTZMANN, ELECTRIC_CONSTANT, SPEED_OF_LIGHT
from driftwell.errors import ScenarioError
from driftwell.forms import (
    Charge,
    Form,
    Name,
    NonNegative,
    NonZero,
    Positive,
    Real,
    Temperature,
    Time,
    TrueOrFalse,
    checked,
    key,
    one_of,
    refuse,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault
from driftwell.forms.waveforms import CurrentWave, waveform_words
from driftwell.geometry.solid import Solid
from driftwell.particles.charge_columns import one_weight
from driftwell.particles.cloud import Amount, SeveralCharges
from driftwell.particles.draws import Draws
from driftwell.particles.emission.course import Course, Pieces, pieces_of
from driftwell.particles.emission.form import EmitterForm, Leaving
from driftwell.particles.emission.profile import PROFILE_KINDS, ProfileForm
from driftwell.particles.emission.table import EMITTER_KINDS
from driftwell.particles.emission.thermal import thermal_emission
from driftwell.particles.in_words import charge_in_words
from driftwell.particles.motion import HOTTEST, Motion
from driftwell.particles.proper_velocity import Floats
from driftwell.particles.state import LARGEST_COUNT, Particles
from driftwell.particles.unborn import Unborn

if TYPE_CHECKING:
    AnyEmitter = EmitterForm
    AnyProfile = ProfileForm
else:
    AnyEmitter = one_of(EMITTER_KINDS)
    AnyProfile = one_of(PROFILE_KINDS)


@dataclass(frozen=True, slots=True)
class Setting:
    """What a source is seen with: the run's seed and duration, s, known bodies, files."""

    seed: int
    duration: float
    bodies: Mapping[str, Body]
    folder: Path


class Source(Form):
    """Charges of one species that are born in the course of the run, each at its own time.

    Either a `current` flows, from `start` to `stop`, and `weight` or `count` says in how many
    charges it comes; or a pulse comes with a `profile` in time, and how much it is follows as for
    clouds: `count`, `count` with `weight` or `total_charge`, or `weight` with `total_charge`. A
    file says by itself what is born when, with `weight` or `total_charge` as for clouds; where
    neither is given, the weight in the file counts, if it has one.
    """

    name: Name = key("what the source is called in messages, questions and results")
    species: Name = key("species of its particles: a built-in or declared one", example="electron")
    emitter: AnyEmitter = key("where the charges are born")
    current: CurrentWave | None = key(
        "current that leaves, counted positive whatever the sign of the species; never negative",
        default=None,
        example="10 mA",
    )
    start: NonNegative[Time] = key("when the current begins", default=0.0)
    stop: Positive[Time] | None = key(
        "when the current ends; left out: with the run", default=None, example="1 us"
    )
    total_charge: NonZero[Charge] | None = key(
        "charge of the whole pulse, with the sign of its species", default=None, example="-100 pC"
    )
    profile: AnyProfile | None = key("how the pulse comes in time", default=None)
    count: SeveralCharges | None = key(
        "number of simulated charges; with a current and random spacing the mean number",
        default=None,
        example=2000,
    )
    weight: Positive[Real] | None = key(
        "real particles each simulated one stands for; left out: 1, or what the charge needs",
        default=None,
        example=50,
    )
    spacing: Literal["random", "even"] = key(
        "random: each birth independent of all others, the true shot noise of charges so heavy; "
        "even: the charge in equal parts",
        default="random",
    )
    motion: Motion | None = key("how the charges move when they are born", default=None)
    emission_temperature: Positive[Temperature] | None = key(
        "temperature of a surface that emits thermally, about its normal; not beside `motion`",
        default=None,
        example="1300 K",
    )
    space_charge_limited: TrueOrFalse = key(
        "whether a surface lets go only as much of `current` as makes the field there vanish; "
        "needs [images] that end the field of the charges at the surface",
        default=False,
    )

    @checked
    def _amount_is_clear(self) -> Self:
        if self.emitter.fixes_births():
            self._refuse_beside_file()
        elif self.current is not None:
            if self.profile is not None or self.total_charge is not None:
                raise refuse("give either `current`, or `profile` for a pulse, not both")
            if (self.count is None) == (self.weight is None):
                raise refuse("a `current` needs either `weight` or `count`")
            if self.stop is not None and self.stop <= self.start:
                raise refuse("`stop` must be later than `start`")
        else:
            self._refuse_unclear_pulse()
        if self.motion is not None and self.emission_temperature is not None:
            raise refuse("needs either `motion` or `emission_temperature`, not both")
        if self.motion is not None and self.motion.rotation:
            raise refuse("`rotation` turns a cloud as a whole; what a source bears has none")
        if self.space_charge_limited and self.current is None:
            raise refuse("`space_charge_limited` needs a `current`, the most that is supplied")
        if self.space_charge_limited and not self.emitter.has_area():
            raise refuse("`space_charge_limited` needs an emitter with an area")
        return self

    def _refuse_beside_file(self) -> None:
        for name in ("current", "profile", "count", "motion", "emission_temperature", "stop"):
            if getattr(self, name) is not None:
                raise refuse(f"the file says what is born: leave out `{name}`")
        if self.weight is not None and self.total_charge is not None:
            raise refuse("the file fixes the number of charges: give `weight` or `total_charge`")

    def _refuse_unclear_pulse(self) -> None:
        if self.profile is None:
            raise refuse("needs a `current`, or a `profile` for a pulse")
        if self.start or self.stop is not None:
            raise refuse("`start` and `stop` go with a `current`; a pulse has its `profile`")
        given = [self.count, self.weight, self.total_charge]
        if sum(each is not None for each in given) == 3:
            raise refuse("give at most two of `count`, `weight` and `total_charge`")
        if self.count is None and (self.weight is None or self.total_charge is None):
            raise refuse("needs `count`, or `total_charge` and `weight` together")

    def species_named(self) -> tuple[str, ...]:
        """Names of species the source refers to."""
        return (self.species,)

    def files_named(self) -> tuple[str, ...]:
        """Files the source reads, relative to the scenario's folder."""
        return self.emitter.files_named()

    def faults(self, setting: Setting) -> list[Fault]:
        """What cannot be, seen with species and files: paths count from the source's table."""
        body = setting.bodies.get(self.species)
        if body is None:
            return []
        found = []
        if self.total_charge is not None and self.total_charge * body.charge < 0.0:
            sign = "negative" if body.charge < 0.0 else "positive"
            text = f"must be {sign}, as the charge of {self.species} is"
            found.append(Fault(("total_charge",), "", text))
        if self.current is not None:
            if self.start >= setting.duration:
                text = f"must be before the end of the run, {spelled(setting.duration, 's')}"
                found.append(Fault(("start",), "", text))
                return found
            flow = self._flow(setting.duration)
            if flow.lowest() < 0.0:
                found.append(Fault(("current",), "", "must never be negative in the run"))
            elif not 0.0 < flow.whole() < math.inf:
                found.append(Fault(("current",), "", "brings no charge in the run"))
        if self.motion is not None:
            found += [Fault(("motion", name), "", text) for name, text in self.motion.faults(body)]
        hottest = HOTTEST * body.mass * SPEED_OF_LIGHT**2 / BOLTZMANN
        if self.emission_temperature is not None and self.emission_temperature > hottest:
            text = f"must be at most {spelled(hottest, 'K')} for {body.name}"
            found.append(Fault(("emission_temperature",), "", text))
        if found:
            return found
        try:
            count = self.amount(setting).count
        except ScenarioError as fault:
            lines = str(fault).splitlines()
            return [Fault(("emitter", "path"), "", line) for line in lines]
        if count > LARGEST_COUNT:
            text = f"is {count} charges; needs at most {LARGEST_COUNT}: raise `weight`"
            found.append(Fault((), "", text))
        elif count == 0:
            found.append(Fault((), "", "bears no charge in the run: lower `weight`"))
        return found

    def amount(self, setting: Setting) -> Amount:
        """Births of the whole source, with those after the run's end, and their weight."""
        charge = abs(setting.bodies[self.species].charge)
        given = 1.0
        if self.emitter.fixes_births():
            leaving = self._file(setting)
            count = leaving.position.shape[1]
            if self.weight is None and self.total_charge is None:
                given = one_weight(leaving.weight, self.files_named())
        elif self.current is not None:
            whole = self._flow(setting.duration).whole() / charge
            mean = float(self.count) if self.count is not None else whole / (self.weight or 1.0)
            weight = self.weight if self.weight is not None else whole / mean
            if mean > 2 * LARGEST_COUNT:
                return Amount(int(min(mean, 1e18)), weight)
            if self.spacing == "random":
                draws = Draws(setting.seed, self.name)
                return Amount(int(draws.stream("number").poisson(mean)), weight)
            return Amount(round(mean), weight)
        elif self.count is not None:
            count = self.count
        else:
            total = abs(self.total_charge or 0.0)
            count = round(min(total / charge / (self.weight or 1.0), 1e18))
        if self.weight is not None or self.total_charge is None:
            return Amount(count, given if self.weight is None else self.weight)
        return Amount(count, abs(self.total_charge) / (max(count, 1) * charge))

    def load(
        self,
        setting: Setting,
        first_id: int,
        cloud_index: int,
        species_index: int,
        solids: Sequence[Solid] = (),
    ) -> Unborn:
        """All births before the run's end, in the order of time, ids from `first_id` on.

        The numbers depend on the seed, the source's name and its own options, on nothing else.
        solids : the bodies of the electrode it is on

        Raises ScenarioError where the electrode has no such part, or a number is not finite.
        """
        body = setting.bodies[self.species]
        amount, draws = self.amount(setting), Draws(setting.seed, self.name)
        try:
            leaving = self.emitter.leave(amount.count, draws, body, solids, setting.folder)
        except ScenarioError as fault:
            raise ScenarioError(f'[[source]] "{self.name}": {fault}.') from fault
        time = self._times(amount.count, draws, setting) if leaving.time is None else leaving.time
        velocity = self._velocities(leaving, draws, body)
        count = int(np.searchsorted(time, setting.duration))
        finite = np.isfinite(leaving.position).all() and np.isfinite(velocity).all()
        if not (finite and np.isfinite(time).all() and 0.0 < amount.weight < math.inf):
            raise ScenarioError(
                f'[[source]] "{self.name}": gives times, places, velocities or weights that are '
                "not finite; check its sizes, its motion and the mass of its species."
            )
        particles = Particles(
            np.ascontiguousarray(leaving.position[:, :count]),
            np.ascontiguousarray(velocity[:, :count]),
            np.full(count, body.charge),
            np.full(count, body.mass),
            np.full(count, amount.weight),
            np.arange(first_id, first_id + count, dtype=np.int64),
            np.full(count, species_index, dtype=np.int64),
            np.full(count, cloud_index, dtype=np.int64),
            time[:count].copy(),
        )
        normal = np.ascontiguousarray(leaving.normal[:, :count])
        if not self.space_charge_limited:
            return Unborn(particles, normal, np.zeros(count), np.zeros(count))
        flow = self._flow(setting.duration).rates_at(particles.birth_time)
        demand = ELECTRIC_CONSTANT * self.emitter.area(solids) / flow
        return Unborn(particles, normal, demand, draws.stream("launch").random(count))

    def _times(self, count: int, draws: Draws, setting: Setting) -> Floats:
        course: Course = self._flow(setting.duration)
        if self.profile is not None:
            course = self.profile.course()
        if self.spacing == "even":
            return course.times_at((np.arange(count) + 0.5) / max(count, 1))
        return np.sort(course.times_at(draws.unit_points("time", count, 1)[0]))

    def _velocities(self, leaving: Leaving, draws: Draws, body: Body) -> Floats:
        if leaving.velocity is not None:
            return leaving.velocity
        if self.emission_temperature is not None:
            return thermal_emission(self.emission_temperature, leaving.normal, draws, body)
        return (self.motion or Motion()).velocities(leaving.position.shape[1], draws, body)

    def _flow(self, duration: float) -> Pieces:
        """The current in the run."""
        stop = duration if self.stop is None else min(self.stop, duration)
        return pieces_of(0.0 if self.current is None else self.current, self.start, stop)

    def _file(self, setting: Setting) -> Leaving:
        body = setting.bodies[self.species]
        return self.emitter.leave(0, Draws(0, self.name), body, (), setting.folder)

    def density(self, setting: Setting, solids: Sequence[Solid]) -> float:
        """The largest current density it supplies, A/m^2; infinite from a point, 0 from a file."""
        if self.emitter.fixes_births():
            return 0.0
        if self.profile is None:
            flow = self._flow(setting.duration)
            most = max(flow.before.max(initial=0.0), flow.after.max(initial=0.0))
        else:
            amount, body = self.amount(setting), setting.bodies[self.species]
            course = self.profile.course()
            middle = course.times_at(np.linspace(0.001, 0.999, 999))
            share = float(course.rates_at(middle).max()) / course.whole()
            most = share * amount.count * amount.weight * abs(body.charge)
        area = self.emitter.area(solids)
        return float(most) / area if area > 0.0 else math.inf

    def words(self, setting: Setting) -> str:
        """One sentence for `driftwell check`; the source must be without faults."""
        amount = self.amount(setting)
        body = setting.bodies[self.species]
        each = "" if amount.weight == 1.0 else f", each for {amount.weight:.6g} real ones"
        total = charge_in_words(amount.count * amount.weight * body.charge)
        parts = [f"{amount.count} {self.species} charges{each} ({total} in all)"]
        parts.append(self.emitter.words())
        if self.current is not None:
            most = "at most " if self.space_charge_limited else ""
            stop = "the end" if self.stop is None else spelled(self.stop, "s")
            flow = f"{most}{waveform_words(self.current, 'A')}"
            parts.append(f"{flow} from {spelled(self.start, 's')} to {stop}, {self.spacing}")
        elif self.profile is not None:
            parts.append(f"{self.profile.words()}, {self.spacing}")
        if self.emission_temperature is not None:
            parts.append(f"emitted at {spelled(self.emission_temperature, 'K')}")
        elif not self.emitter.fixes_births():
            parts.append((self.motion or Motion()).words())
        if self.space_charge_limited:
            parts.append("limited by space charge")
        return ", ".join(parts)
