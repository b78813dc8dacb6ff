"""The scenario's [stepping] section."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated, Literal

from driftwell.forms import Bound, Count, Form, Length, Positive, Real, Time, key, or_word

if TYPE_CHECKING:
    StepChoice = float | Literal["auto"]
else:
    StepChoice = or_word("auto", Positive[Time])
FewSteps = Annotated[Count, Bound(least=1, most=1000)]


class Stepping(Form):
    """How time is cut into steps."""

    step: StepChoice = key(
        'duration of a step, or "auto": from the fastest motion in the scenario',
        default="auto",
        example="5 ns",
    )
    scheme: Literal["kick-drift-kick", "composed-4", "composed-6", "midpoint-rotation"] = key(
        "kick-drift-kick: order 2, gyration exact in a uniform magnet; composed-4 and composed-6: "
        "orders 4 and 6 from the same pieces; midpoint-rotation: order 2, drift across E and B "
        "exact at any speed and step",
        default="kick-drift-kick",
    )
    steps_per_period: Positive[Real] = key(
        "steps the automatic choice takes in one period of the fastest motion", default=100.0
    )
    coulomb_every: FewSteps = key(
        "steps between two Coulomb sums; more than 1 only while the charges' own motion is slow "
        "against the fields'",
        default=1,
    )
    extent: Positive[Length] = key(
        "a charge farther than this from the origin has run away: the run stops as failed",
        default=1000.0,
        example="1 m",
    )
