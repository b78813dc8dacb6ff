"""The study: one scenario, and what changes in it from case to case."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from driftwell.forms import (
    AnyValue,
    Bound,
    Count,
    Form,
    Name,
    NonNegative,
    NumberOrText,
    Title,
    checked,
    key,
    refuse,
)
from driftwell.forms.inside import check_inside
from driftwell.study.limit_form import Limit

MOST_CASES = 100_000
"""Most cases a study may have, replicas counted."""

Points = Annotated[Count, Bound(least=2, most=MOST_CASES)]
Replicas = Annotated[Count, Bound(least=1, most=MOST_CASES)]


class Vary(Form):
    """One key of the scenario, and the values it takes.

    Its values are either listed, `values = [...]`, or cut from a range, `from`, `to` and `points`.
    A range has both its ends. Values between them are rounded to 12 digits, and to the nearest
    whole number where the key holds one. Several entries make a grid, in which the last one changes
    fastest; entries with the same word in `together` advance together instead, first with first,
    second with second.
    """

    setting: Title = key(
        "key of the scenario, as `--set` takes it", example="cloud.load.count", named="key"
    )
    values: tuple[AnyValue, ...] | None = key(
        "the values, each as the scenario would have it",
        default=None,
        example=["150 V", "180 V", "210 V"],
    )
    first: NumberOrText | None = key(
        "where a range begins: a number, or a quantity where the key holds one",
        default=None,
        example="100 V",
        named="from",
    )
    last: NumberOrText | None = key("where it ends", default=None, example="250 V", named="to")
    points: Points | None = key(
        "number of values in a range, both ends counted; left out where there is a [sample]",
        default=None,
        example=5,
    )
    spacing: Literal["even", "log"] = key(
        "even: equal differences; log: equal ratios", default="even"
    )
    together: Name | None = key(
        "a word of your own: entries that share it advance together", default=None, example="drive"
    )

    @checked
    def _says_which_values(self) -> Self:
        has_range = self.first is not None or self.last is not None
        if self.values is None and not has_range:
            raise refuse("needs `values`, or a range: `from`, `to` and `points`")
        if self.values is not None and has_range:
            raise refuse("give either `values` or a range, not both")
        if self.values is None and (self.first is None or self.last is None):
            raise refuse(f"a range needs `{'from' if self.first is None else 'to'}` as well")
        if self.values is not None and self.model_fields_set & {"points", "spacing"}:
            raise refuse("`points` and `spacing` belong to a range; leave them out beside `values`")
        if self.values is not None and not self.values:
            raise refuse("`values` must have at least one entry")
        return self


class Sample(Form):
    """Points drawn over all ranges at once, instead of a grid of them.

    Each range is divided into as many parts as there are points, and each part is met exactly once
    (a Latin hypercube): many ranges are covered with few cases. Lists are not sampled: the same
    points are taken for each of their values. The same seed gives the same points, as long as
    numpy and scipy stay the same.
    """

    points: Points = key("number of points", example=40)
    seed: NonNegative[Count] = key("number the points are drawn from", default=1)


class StudyForm(Form):
    """What a study file holds."""

    title: Title = key(
        "what is to be found out, in one line", example="How much current passes the aperture?"
    )
    scenario: str = key(
        "scenario file in the study's folder, relative to it", example="beam-aperture.toml"
    )
    settings: tuple[str, ...] = key(
        "settings that hold in all cases, each KEY=VALUE as `--set` takes it",
        default=(),
        example=["cloud.pulse.count=300"],
        named="set",
    )
    replicas: Replicas = key(
        "runs of each case, which differ in nothing but the seed of their random draws",
        default=1,
        example=3,
    )
    vary: tuple[Vary, ...] = key("what changes from case to case", default=())
    sample: Sample | None = key("how ranges are sampled", default=None)
    limit: Limit | None = key(
        "the value at which an answer crosses a threshold, instead of what varies", default=None
    )

    @checked
    def _searched_or_varied(self) -> Self:
        if self.limit is not None:
            others = self.model_fields_set & {"vary", "sample", "replicas"}
            if others:
                named = " and ".join(f"`{name}`" for name in sorted(others))
                raise refuse(
                    f"[limit] chooses values and seeds by itself; leave out {named}, or [limit]"
                )
        return self

    @checked
    def _in_its_folder(self) -> Self:
        check_inside(self.scenario, (".toml",), "scenario", "study")
        return self
