"""The ``[limit]`` of a study: at which value of a key does an answer cross a threshold?"""

from __future__ import annotations

from typing import Annotated, Literal, Self

from driftwell.forms import (
    Bound,
    Count,
    Form,
    Name,
    NumberOrText,
    Real,
    Title,
    checked,
    key,
    refuse,
)

MOST_RUNS = 10_000
"""Most runs a search may be allowed."""

Confidence = Annotated[Real, Bound(least=0.5, most=0.9999)]


class Limit(Form):
    """The value of one key of the scenario at which an answer crosses a threshold.

    `driftwell limit` begins with a few values over the whole range, then looks closer where the
    answer crosses the threshold, with more seeds where the answers' errors hide on which side they
    are, until the interval of the crossing is as narrow as asked.
    """

    setting: Title = key(
        "key of the scenario, as `--set` takes it; it holds a number or a quantity",
        example="cloud.pulse.total_charge",
        named="key",
    )
    first: NumberOrText = key("one end of the range searched", example="10 pC", named="from")
    last: NumberOrText = key("its other end", example="1 nC", named="to")
    spacing: Literal["auto", "even", "log"] = key(
        "even: differences count; log: ratios count; auto: log where the ends have one sign and "
        "are a factor of 10 or more apart",
        default="auto",
    )
    answer: Name = key("name of the question whose answer is watched", example="transmission")
    crosses: NumberOrText = key(
        "the threshold: a number, or a quantity where the answer has a unit", example=0.5
    )
    resolution: NumberOrText = key(
        'width of the interval to stop at: a part of the value such as "1 %", or a quantity (a '
        "number where the key holds one)",
        default="1 %",
        example="2 V",
    )
    confidence: Confidence = key("probability that the limit is in the interval", default=0.95)
    noise: Literal["auto", "scatter", "none"] = key(
        "auto: errors of answers are their own sampling errors, or larger where seeds scatter "
        "more; scatter: by the scatter of seeds alone; none: answers are exact, as where nothing "
        "is drawn by chance, and no further seeds are run",
        default="auto",
    )
    points: Annotated[Count, Bound(least=3, most=1000)] = key(
        "values to begin with, over the whole range, both ends counted", default=5
    )
    at_once: Annotated[Count, Bound(least=1, most=1000)] = key(
        "values of a round, chosen together and computed side by side where there are workers; "
        "with 1 the fewest runs are needed, with more they take less time",
        default=2,
    )
    most_runs: Annotated[Count, Bound(least=3, most=MOST_RUNS)] = key(
        "runs after which the search ends, however wide the interval is", default=200
    )

    @checked
    def _enough(self) -> Self:
        if self.most_runs < self.points:
            raise refuse(f"`most_runs` must be at least `points`, {self.points}")
        return self
