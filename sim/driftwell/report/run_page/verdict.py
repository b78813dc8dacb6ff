"""The top of the page: how the run ended, and what speaks against its answers."""

from __future__ import annotations

from driftwell.report.page.document import verdict_box
from driftwell.report.page.markup import Markup, coded, joined, tag, together
from driftwell.report.page.numbers import amount, count_of
from driftwell.report.run_page.matter import Matter

_GOOD, _FAIR, _BAD = ("✓", "good"), ("!", "fair"), ("✗", "bad")
_MARKS = {"finished": _GOOD, "failed": _BAD}
"""Signs and colours of outcomes; of all others the one in between."""
_STATES = {
    "going on": "The run is still going on: this report shows what it has sealed so far.",
    "silent": "The run's process is there, but has given no sign of life for long.",
    "cut off": "The run was cut off; what was sealed is here. The same command goes on from there.",
}


def verdict(matter: Matter) -> Markup:
    """Outcome, sentence, worst findings and a line of facts."""
    run = matter.run
    outcome, header = run.outcome, run.header
    mark, kind = _MARKS.get(outcome.word, _FAIR)
    grave = [each for each in matter.findings if each.grave]
    if kind == "good" and matter.findings:
        mark, kind = _BAD if grave else _FAIR
    word, sentence = outcome.word, outcome.sentence
    if outcome.exit_code is None:
        sentence = _STATES.get(matter.state, sentence)
        word = "unfinished" if matter.state != "going on" else "still going on"
    charges = sum(run.born(cloud.name) for cloud in header.clouds)
    reached = amount(run.end_time, "s")
    whole = amount(header.duration, "s")
    facts = [
        f"reached {reached} of {whole}" if reached != whole else f"followed for {whole}",
        f"{charges} simulated charges",
        f"seed {header.seed}",
    ]
    if outcome.steps is not None:
        facts.append(count_of(outcome.steps, "step"))
    return verdict_box(
        word[:1].upper() + word[1:],
        sentence,
        mark,
        kind,
        _judged(matter),
        tag("p", " · ".join(facts), class_="facts"),
    )


def _judged(matter: Matter) -> Markup:
    """The worst findings, and how many there are besides."""
    grave = [each for each in matter.findings if each.grave]
    mild = [each for each in matter.findings if not each.grave]
    parts: list[Markup] = [
        tag("p", tag("strong", "Doubt: "), coded(f"{each.words}."), class_="doubt")
        for each in grave
    ]
    if mild:
        names = joined((tag("strong", each.name) for each in mild[:4]), ", ")
        more = f" and {len(mild) - 4} more" if len(mild) > 4 else ""
        start = "Besides, to look at: " if grave else "To look at: "
        link = tag("a", "figures and remedies", href="#judgement")
        parts.append(tag("p", start, names, more, " (", link, ")."))
    if not parts:
        parts.append(tag("p", "Judgement: nothing found amiss."))
    return together(*parts)
