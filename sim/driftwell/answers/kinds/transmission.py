"""Part of the current through one detector that also passes a second one.

    share = sum of w over the charges that pass the first and then the second
            / sum of w over the charges that pass the first                                   (1)

Of charges of one kind this is the part of the current that gets through. The error is half the
width of Wilson's interval (one standard deviation), for as many equal charges as would scatter
alike, (sum w)^2 / sum w^2. For the part of all that were there at the start, ask for
`fraction-through`.
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.charges import weight_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import References
from driftwell.answers.kinds.passage_question import PassageQuestion
from driftwell.answers.passages import first_of_each, passages, within
from driftwell.answers.sampling import fraction_error
from driftwell.errors import AnswerError
from driftwell.forms import Name, checked, key, refuse


class Transmission(PassageQuestion):
    """Part of what passes one detector that then passes another."""

    unit: ClassVar[str] = "1"
    ask: Literal["transmission"] = key(
        "part of what passes a first detector that then passes this one"
    )
    entrance: Name = key("name of the detector passed before", example="slit")

    @checked
    def _two_detectors(self) -> Self:
        if self.entrance == self.of:
            raise refuse("`entrance` and `of` must be two different detectors")
        return self

    def refers_to(self) -> References:
        clouds = () if self.cloud is None else (self.cloud,)
        return References(clouds, (self.of, self.entrance))

    def answer(self, evidence: Evidence) -> Answer:
        clouds = self.clouds(evidence)
        entered = first_of_each(passages(evidence, self.entrance, clouds))
        entered = within(entered, self.over, evidence)
        if not len(entered):
            raise AnswerError(f'0 charges passed detector "{self.entrance}"; needs at least 1')
        left = passages(evidence, self.of, clouds)
        last = dict(zip(left.id.tolist(), left.time.tolist(), strict=True))  # the latest of each
        through = np.array(
            [
                last.get(number, -np.inf) >= time
                for number, time in zip(entered.id.tolist(), entered.time.tolist(), strict=True)
            ]
        )
        whole = float(entered.weight.sum())
        share = float(entered.weight[through].sum()) / whole
        trials = whole**2 / float(np.sum(entered.weight**2))
        heavy = max(clouds, key=lambda cloud: cloud.weight)
        note = f"{int(through.sum())} of {len(entered)} charges{weight_in_words(heavy)}"
        return self.answered(share, fraction_error(share * trials, trials), note)

    def words(self) -> str:
        return (
            f'part of {self.whose()} that passes detector "{self.entrance}"{self.when()} and then '
            f'detector "{self.of}"'
        )
