"""Whether enough charges reached a detector for what is asked of it.

A mean needs some ten passages for its error to be known to a quarter; a spread some thirty, a
radius that holds nine tenths, or a full width at half maximum, some hundred, so that ten lie beyond
it or in a bin. Common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.fractions import DetectorQuestion
from driftwell.answers.passages import first_of_each, passages, within
from driftwell.errors import DriftwellError
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject

_MEAN, _SPREAD, _TAIL = 10, 30, 100
_NEEDS = {
    "arrival-time": _MEAN,
    "arrival-energy": _MEAN,
    "current": _MEAN,
    "transmission": _MEAN,
    "spot-size": _SPREAD,
    "perveance": _MEAN,
    "generalised-perveance": _MEAN,
    "brightness": _SPREAD,
    "mass-resolving-power": _TAIL,
}
_BY_STATISTIC = {"mean": _MEAN, "rms": _SPREAD, "fwhm": _TAIL, "edge": _TAIL}
_LATE = 0.9
"""Part of the run after which a passage says that more may come."""


def needed(question: QuestionForm) -> int:
    """Passages a question needs; 0 where it asks nothing of a detector."""
    for name in ("statistic", "measure"):
        said = getattr(question, name, None)
        if said in _BY_STATISTIC and question.ask in _NEEDS:
            return max(_BY_STATISTIC[said], _NEEDS[question.ask])
    return _NEEDS.get(question.ask, 0)


def starved(subject: Subject) -> Iterator[Finding]:
    """Each question of a detector that fewer charges passed than it needs."""
    if subject.scenario is None or not subject.ended:
        return
    for question in subject.scenario.question:
        least = needed(question)
        if least and isinstance(question, DetectorQuestion):
            yield from _of(subject, question, least)


def _of(subject: Subject, question: DetectorQuestion, least: int) -> Iterator[Finding]:
    run = subject.run
    name = getattr(question, "entrance", question.of)
    try:
        clouds = question.clouds(run)
        passed = first_of_each(passages(run, name, clouds))
        counted = within(passed, getattr(question, "over", None), run)
    except DriftwellError:
        return  # the answer's note says why
    count = len(counted)
    if count >= least:
        return
    born = sum(run.born(cloud.name) for cloud in clouds)
    lost = int(np.isin(run.losses()["cloud"], [cloud.index for cloud in clouds]).sum())
    on_the_way = born - len(passed) - lost
    late = len(passed) == 0 or float(passed.time.max()) > _LATE * run.end_time
    if count < len(passed):
        remedy = f"{len(passed)} passed in the whole run: give the question a longer `over`."
    elif late and on_the_way > max(lost, count):
        longer = spelled(2.0 * run.header.duration, "s", 3)
        remedy = f'{on_the_way} are still on their way: set duration = "{longer}".'
    elif count == 0:
        remedy = (
            f"{lost} of them were lost before: look where (`driftwell info`), move the detector, "
            "or let the charges reach it."
        )
    else:
        cloud = max(clouds, key=lambda each: run.born(each.name))
        remedy = f"Set {subject.finer(cloud, least / count)}."
    yield Finding(
        "starved detector",
        f'"{question.name}" is from {count} of {born} charges at detector "{name}"; {least} or '
        "more are wanted",
        float(count),
        float(least),
        remedy,
    )
