"""Clouds: groups of charges that are there when a run begins."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Self

import numpy as np

from driftwell.errors import ScenarioError
from driftwell.forms import (
    Bound,
    Charge,
    Count,
    Form,
    Name,
    NonZero,
    Positive,
    Real,
    checked,
    key,
    one_of,
    refuse,
)
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault
from driftwell.particles.charge_columns import one_weight
from driftwell.particles.draws import Draws
from driftwell.particles.in_words import charge_in_words
from driftwell.particles.motion import Motion
from driftwell.particles.shapes.form import Placement, ShapeForm
from driftwell.particles.shapes.table import SHAPE_KINDS
from driftwell.particles.state import LARGEST_COUNT, Particles

if TYPE_CHECKING:
    AnyShape = ShapeForm
else:
    AnyShape = one_of(SHAPE_KINDS)
SeveralCharges = Annotated[Count, Bound(least=1, most=LARGEST_COUNT)]

_TWO_MOTIONS = Fault(("motion",), "", "the shape sets the velocities: leave out `motion`")


@dataclass(frozen=True, slots=True)
class Amount:
    """How much a cloud is: simulated charges, and real ones that each stands for."""

    count: int
    weight: float


class Cloud(Form):
    """A group of charges of one species.

    How much it is follows from `count`, `weight` and `total_charge`: `count` alone (weight 1),
    `count` with `weight`, `count` with `total_charge` (the weight follows), or `weight` with
    `total_charge` (the count follows, rounded to a whole number). Where the shape fixes the count
    (a list, a file), `count` is left out; a file may say the weight, which counts where neither
    `weight` nor `total_charge` is given.
    """

    name: Name = key("what the cloud is called in messages, questions and results")
    species: Name = key("species of its particles: a built-in or declared one", example="electron")
    count: SeveralCharges | None = key(
        "number of simulated charges; left out where the shape fixes it, or where `weight` and "
        "`total_charge` do",
        default=None,
        example=2000,
    )
    weight: Positive[Real] | None = key(
        "real particles each simulated one stands for; left out: 1, or what `total_charge` needs",
        default=None,
        example=50,
    )
    total_charge: NonZero[Charge] | None = key(
        "charge of the whole cloud, with the sign of its species; together with `count` or "
        "`weight`, the other one follows",
        default=None,
        example="1 pC",
    )
    shape: AnyShape = key("where the charges are at the start")
    motion: Motion | None = key(
        "how they move at the start; left out: at rest, or as the shape says", default=None
    )

    @checked
    def _amount_is_clear(self) -> Self:
        given = [
            name for name in ("count", "weight", "total_charge") if getattr(self, name) is not None
        ]
        if self.shape.fixes_count():
            if self.count is not None:
                raise refuse("the shape fixes the number of charges: leave out `count`")
            if len(given) == 2:
                raise refuse(
                    "the shape fixes the number of charges: give `weight` or `total_charge`, "
                    "not both"
                )
        elif len(given) == 3:
            raise refuse("give at most two of `count`, `weight` and `total_charge`")
        elif self.count is None and len(given) < 2:
            raise refuse(
                "needs `count`, or `total_charge` and `weight`"
                if not given
                else f"needs `count` beside `{given[0]}`, or `total_charge` and `weight` together"
            )
        return self

    def species_named(self) -> tuple[str, ...]:
        """Names of species the cloud refers to."""
        return (self.species,)

    def files_named(self) -> tuple[str, ...]:
        """Files the cloud reads, relative to the scenario's folder."""
        return self.shape.files_named()

    def faults(self, bodies: Mapping[str, Body], folder: Path) -> list[Fault]:
        """What cannot be, seen with the species and files: paths count from the cloud's table.

        An unknown species is left to whoever checks all names.
        """
        body = bodies.get(self.species)
        if body is None:
            return []
        found = self._stated_faults(body)
        try:
            if self.shape.fixes_count():
                placed = self.shape.place(0, Draws(0, self.name), body, folder)
                self._weight(body, placed)
                moves = placed.velocity is not None
            else:
                moves = self.shape.sets_velocity(folder)
            if moves and self.motion is not None:
                found.append(_TWO_MOTIONS)
        except ScenarioError as error:
            found += [Fault(("shape", "path"), "", line) for line in str(error).splitlines()]
        return found

    def _stated_faults(self, body: Body) -> list[Fault]:
        """Faults seen without reading a file."""
        motion = [] if self.motion is None else self.motion.faults(body)
        return self._amount_faults(body) + [
            Fault(("motion", key), "", text) for key, text in motion
        ]

    def _amount_faults(self, body: Body) -> list[Fault]:
        if self.total_charge is None:
            return []
        path = ("total_charge",)
        if self.total_charge * body.charge < 0.0:
            sign = "negative" if body.charge < 0.0 else "positive"
            return [Fault(path, "", f"must be {sign}, as the charge of {self.species} is")]
        if self.weight is not None and not self.shape.fixes_count():
            count = self._count(body)
            if not 1 <= count <= LARGEST_COUNT:
                return [
                    Fault(
                        path,
                        "",
                        f"is {count} charges of weight {self.weight:g}; needs 1 to "
                        f"{LARGEST_COUNT}: change `weight`",
                    )
                ]
        return []

    def _count(self, body: Body) -> int:
        """Simulated charges; 0 where the shape fixes them."""
        if self.count is not None:
            return self.count
        if self.weight is None or self.total_charge is None or self.shape.fixes_count():
            return 0
        return round(min(self.total_charge / body.charge / self.weight, 1e18))

    def _weight(self, body: Body, placed: Placement) -> float:
        if self.weight is not None:
            return self.weight
        if self.total_charge is not None:
            return float(self.total_charge / (placed.position.shape[1] * body.charge))
        return one_weight(placed.weight, self.files_named())

    def amount(self, bodies: Mapping[str, Body], folder: Path) -> Amount:
        """Count and weight of a cloud without faults; reads the file of a shape that has one."""
        body = bodies[self.species]
        if self.shape.fixes_count():
            placed = self.shape.place(0, Draws(0, self.name), body, folder)
            return Amount(placed.position.shape[1], self._weight(body, placed))
        count = self._count(body)
        if self.total_charge is not None and self.weight is None:
            return Amount(count, self.total_charge / (count * body.charge))
        return Amount(count, 1.0 if self.weight is None else self.weight)

    def load(
        self,
        seed: int,
        bodies: Mapping[str, Body],
        first_id: int,
        cloud_index: int,
        species_index: int,
        folder: Path,
    ) -> Particles:
        """The charges of the cloud at time zero, ids from `first_id` on.

        The numbers depend on `seed`, the cloud's name and its own options, on nothing else.

        Raises
        ------
        ScenarioError
            The cloud has faults (see :meth:`faults`), or a number is not finite.
        """
        body = bodies[self.species]
        self._refuse(self._stated_faults(body))
        draws = Draws(seed, self.name)
        with np.errstate(all="ignore"):  # checked below
            placed = self.shape.place(self._count(body), draws, body, folder)
            position, velocity, _ = placed
            count = position.shape[1]
            if velocity is None:
                motion = self.motion or Motion()
                velocity = motion.turned(motion.velocities(count, draws, body), position)
            elif self.motion is not None:
                self._refuse([_TWO_MOTIONS])
            weight = self._weight(body, placed)
        finite = np.isfinite(position).all() and np.isfinite(velocity).all()
        if not (finite and 0.0 < weight < math.inf):
            raise ScenarioError(
                f'cloud "{self.name}": gives places, velocities or weights that are not finite; '
                "check its sizes, its motion and the mass of its species"
            )
        return Particles(
            np.ascontiguousarray(position),
            np.ascontiguousarray(velocity),
            np.full(count, body.charge),
            np.full(count, body.mass),
            np.full(count, weight),
            np.arange(first_id, first_id + count, dtype=np.int64),
            np.full(count, species_index, dtype=np.int64),
            np.full(count, cloud_index, dtype=np.int64),
            np.zeros(count),
        )

    def _refuse(self, faults: list[Fault]) -> None:
        if faults:
            raise ScenarioError(
                "\n".join(
                    f'cloud "{self.name}" {".".join(map(str, fault.path))}: {fault.needed}'
                    for fault in faults
                )
            )

    def words(self, bodies: Mapping[str, Body], folder: Path) -> str:
        """One sentence for `driftwell check`; the cloud must be without faults."""
        amount = self.amount(bodies, folder)
        total = charge_in_words(amount.count * amount.weight * bodies[self.species].charge)
        each = "" if amount.weight == 1.0 else f", each for {amount.weight:.6g} real ones"
        sentence = (
            f"{amount.count} {self.species} charges{each} ({total} in all), {self.shape.words()}"
        )
        if not self.shape.sets_velocity(folder):
            sentence += f", {(self.motion or Motion()).words()}"
        return sentence
