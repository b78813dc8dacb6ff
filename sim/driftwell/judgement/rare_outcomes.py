"""Whether the rarer of two outcomes was seen often enough to be counted on.

A part of charges left, let through or lost is known by the number of the rarer outcome k, to a
relative 1/sqrt(k): a third at ten. None at all is no fault: the answer's error says how many there
could be. Common practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from driftwell.answers.answer import Answer
from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject

LEAST = 10
_ASKED = ("fraction-left", "fraction-through", "transmission")


def rare_outcomes(subject: Subject) -> Iterator[Finding]:
    """Each part of charges that few of them decide."""
    if not subject.ended or subject.scenario is None:
        return
    by_name = {question.name: question for question in subject.scenario.question}
    for answer in subject.run.answers:
        if answer.ask not in _ASKED or answer.name not in by_name:
            continue
        share, number = answer.value, _trials(answer)
        rare = round(min(share, 1.0 - share) * number) if number else 0
        if not 0 < rare < LEAST:
            continue
        question = by_name[answer.name]
        clouds = subject.run.clouds
        named = getattr(question, "cloud", None) or question.of
        cloud = clouds.get(named) or max(clouds.values(), key=lambda each: each.count)
        what = "did" if share < 0.5 else "did not"
        yield Finding(
            "rare outcome",
            f'"{answer.name}" hangs on {rare} of {number} charges that {what}: that part, '
            f"{min(share, 1.0 - share):.2g}, is known to {1.0 / math.sqrt(rare):.0%}; {LEAST} or "
            "more are wanted",
            float(rare),
            float(LEAST),
            f"Where that part matters, set {subject.finer(cloud, LEAST / rare)}."
            if cloud.weight > 1.0
            else f"Where that part matters: {subject.finer(cloud, LEAST / rare)}.",
        )


def _trials(answer: Answer) -> int:
    """Charges a part is of, as its note says; 0 where it does not."""
    words = answer.note.replace(",", "").split()
    return int(words[2]) if len(words) > 3 and words[1] == "of" and words[2].isdigit() else 0
