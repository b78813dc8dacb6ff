"""What a search for a limit has found, in words, and what to do where it has not."""

from __future__ import annotations

import math
from collections.abc import Sequence

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import PLAIN_UNITS
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.study.limit_asked import Asked
from driftwell.study.limit_run import Searched
from driftwell.study.limit_search import (
    FOUND,
    NO_CROSSING,
    RUNS_FAILED,
    SEVERAL,
    TOO_NOISY,
    Search,
    Verdict,
)
from driftwell.study.summary import in_words

_MOST_BRACKETS = 6
_SCATTER_TOLD = 1.5
"""Ratio of the seeds' scatter to the answers' own errors from which on it is told."""


def limit_lines(found: Searched, width: int) -> list[str]:
    """The title, what was asked, the verdict, and what it took; lines of at most `width`."""
    study, search = found.study, found.search
    lines = paragraph(study.title, width)
    lines += paragraph(f"asked: {asked_in_words(search.asked)}", width, rest="  ")
    if found.verdict is None:
        lines += paragraph("Stopped on request; the same command goes on.", width, rest="  ")
    else:
        for sentence in verdict_sentences(search, found.verdict):
            lines += paragraph(sentence, width, rest="  ")
    for sentence in _effort(found):
        lines += paragraph(sentence, width, rest="  ")
    return lines


def asked_in_words(asked: Asked) -> str:
    """The question a ``[limit]`` puts."""
    form = asked.form
    first, last = (value_told(asked, value) for value in (asked.range.first, asked.range.last))
    return (
        f'{form.setting} from {first} to {last}, at which "{form.answer}" crosses '
        f"{threshold_told(asked)}, to {resolution_told(asked)}, with {100.0 * form.confidence:g} % "
        "confidence"
    )


def progress_told(search: Search, wanted: int) -> str:
    """How far a search is, as a round begins."""
    runs = f"{wanted} run{'s' * (wanted != 1)}"
    if not search.runs:
        return f"{runs} over the whole range"
    if not search.intervals:
        return f"{search.runs} runs so far, no crossing seen yet; {runs} more"
    low, high = search.intervals[-1][2:]
    return f"{search.runs} runs so far, limit {interval_told(search.asked, low, high)}; {runs} more"


def value_told(asked: Asked, value: float, digits: int = 6) -> str:
    """A value of the key in the unit of the study's range, else with the unit's usual prefix."""
    whole = asked.range
    if whole.unit and whole.unit != asked.unit:
        return f"{(value - float(whole.offset)) / float(whole.factor):.{digits}g} {whole.unit}"
    if asked.unit in PLAIN_UNITS:
        return f"{value:.{digits}g}"
    return spelled(value, asked.unit, digits)


def interval_told(asked: Asked, low: float, high: float) -> str:
    """An interval with as many digits as its width is worth."""
    size = max(abs(low), abs(high))
    digits = 3 if high <= low else 2 + max(0, math.ceil(math.log10(size / (high - low))))
    digits = min(max(digits, 3), 12)
    return f"{value_told(asked, low, digits)} to {value_told(asked, high, digits)}"


def threshold_told(asked: Asked) -> str:
    """The threshold with its unit."""
    if asked.answer_unit in PLAIN_UNITS:
        return f"{asked.threshold:g}"
    return spelled(asked.threshold, asked.answer_unit, 6)


def resolution_told(asked: Asked) -> str:
    """The resolution asked for."""
    resolution = asked.resolution
    if resolution.relative:
        return f"{100.0 * resolution.size:g} %"
    return value_told(asked, resolution.size)


def verdict_sentences(search: Search, verdict: Verdict) -> list[str]:
    """What was found, and what to do where it was not."""
    answer, threshold = f'"{search.asked.form.answer}"', threshold_told(search.asked)
    if verdict.interval is not None:
        return _interval(search, verdict, verdict.interval)
    if verdict.word == NO_CROSSING:
        return _no_crossing(search, verdict)
    if verdict.word == SEVERAL:
        return [
            f"several crossings: {answer} crosses {threshold} more than once: "
            f"{_places(search.asked, verdict)}",
            "Narrow `from` and `to` to the one that is meant.",
        ]
    if verdict.word == TOO_NOISY:
        return [
            f"noise too large: after {search.runs} runs it cannot be told on which side of "
            f"{threshold} {answer} is; {_nearest(search)}",
            "Let each run say more (more charges, a longer average), widen `from` and `to`, or "
            "allow more with `most_runs`.",
        ]
    return [
        f"no verdict: {search.failed} of {search.runs} runs failed or gave no number for {answer}",
        "Narrow `from` and `to` to where the scenario can be run and has such an answer.",
    ]


def _places(asked: Asked, verdict: Verdict) -> str:
    """Where it crosses, the first few of many."""
    told = "; ".join(interval_told(asked, *each) for each in verdict.brackets[:_MOST_BRACKETS])
    more = len(verdict.brackets) - _MOST_BRACKETS
    return told + (f"; and {more} more" if more > 0 else "")


def _no_crossing(search: Search, verdict: Verdict) -> list[str]:
    asked = search.asked
    answer, threshold = f'"{asked.form.answer}"', threshold_told(asked)
    touched = any(each.value == asked.threshold for r in search.readings.values() for each in r)
    side = ("at or " if touched else "") + ("above" if verdict.above else "below")
    lines = [
        f"no crossing: {answer} is {side} {threshold} at all {len(search.readings)} values of "
        f"{asked.form.setting}, {_nearest(search)}",
        "Widen `from` and `to`; or, where it may cross twice between two of these values, give "
        "more `points`.",
    ]
    if touched:
        lines[1] = (
            "Where it reaches the threshold and stays there, name one a little off: a value that "
            "is passed, not met. Else widen `from` and `to`, or give more `points`."
        )
    return lines


def _interval(search: Search, verdict: Verdict, interval: tuple[float, float]) -> list[str]:
    asked = search.asked
    low, high = interval
    told = interval_told(asked, low, high)
    best = _best(asked, verdict.best, high - low)
    way = "rises above" if verdict.rising else "falls below"
    threshold, answer = threshold_told(asked), f'"{asked.form.answer}"'
    surety = (
        "the values beside it lie on its two sides, and are taken as exact"
        if verdict.certain
        else f"with {100.0 * asked.form.confidence:g} % confidence"
    )
    if verdict.word == FOUND:
        return [
            f"limit: {best}, interval {told}: {surety}",
            f"{answer} {way} {threshold} there as {asked.form.setting} grows.",
        ]
    return [
        f"not reached: {best}, interval {told}: {surety}; {search.runs} runs were too few for "
        f"{resolution_told(asked)}",
        f"About {verdict.needed} runs would do: allow them with `most_runs`; or let each run say "
        "more (more charges, a longer average), or ask for less with `resolution`.",
    ]


def _best(asked: Asked, value: float, width: float) -> str:
    digits = 3 if not width else 2 + max(0, math.ceil(math.log10(max(abs(value) / width, 1e-12))))
    return value_told(asked, value, min(max(digits, 3), 12))


def _nearest(search: Search) -> str:
    """The mean answer that is nearest to the threshold, and where."""
    asked = search.asked
    means = {
        at: math.fsum(each.value for each in those) / len(those)
        for at, those in search.readings.items()
    }
    at = min(means, key=lambda share: abs(means[share] - asked.threshold))
    value = answer_told(asked, means[at])
    return f"nearest at {value_told(asked, search.places[at].value)}: {value}"


def answer_told(asked: Asked, value: float) -> str:
    """A value of the answer with its unit."""
    if asked.answer_unit in PLAIN_UNITS:
        return f"{value:.6g}"
    return spelled(value, asked.answer_unit, 6)


def _effort(found: Searched) -> list[str]:
    """What it took, and how far the answers' own errors can be believed."""
    search = found.search
    there = len(found.evaluations) - found.computed
    places = len(search.readings)
    if found.verdict is None:
        runs = f"{found.computed} computed now; {len(found.evaluations)} in rounds that are whole"
    else:
        runs = (
            f"{len(found.evaluations)} at {places} values ({found.computed} computed now, "
            f"{max(there, 0)} there already)"
        )
    lines = [f"runs: {runs}, {in_words(found.busy)} of work"]
    scatter = None if search.pooled is None else search.pooled.scatter
    if scatter is not None and scatter > _SCATTER_TOLD:
        lines.append(
            f"errors: seeds scatter {scatter:.2g} times as much as the answers' own errors say; "
            "the interval goes by their scatter"
        )
    if search.failed and found.verdict is not None and found.verdict.word != RUNS_FAILED:
        lines.append(f"failed: {search.failed} of the runs failed or gave no number")
    if found.failures:
        first = found.failures[0]
        lines.append(f"failed: run {first.number}: {first.reason}")
    lines += _force_error(found.evaluations)
    return lines


def _force_error(evaluations: Sequence[object]) -> list[str]:
    """The largest error of the forces behind the answers; it is not in the interval."""
    answers = [
        each
        for each in (getattr(evaluation, "answer", None) for evaluation in evaluations)
        if isinstance(each, Answer)
    ]
    worst = max((max(each.coulomb_error, each.field_error) for each in answers), default=0.0)
    if worst == 0.0:
        return []
    return [
        f"forces: rms error up to {worst:.1e}, as measured; it and the error of the time step are "
        "not in the interval"
    ]
