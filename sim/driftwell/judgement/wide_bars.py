"""Whether the sampling error leaves anything of a value that can only be positive.

Where it is more than three tenths of a size, a temperature, a width or a density the answer says
its power of ten, and little more. Common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject

LIMIT = 0.3
_POSITIVE = frozenset(
    {
        "rms-size",
        "temperature",
        "kinetic-energy",
        "kinetic-energy-spread",
        "emittance",
        "peak-density",
        "plasma-frequency",
        "debye-length",
        "coupling-parameter",
        "nearest-neighbour",
        "spot-size",
        "beam-envelope",
        "brightness",
        "mass-resolving-power",
        "lifetime",
        "arrival-energy",
    }
)


def wide_bars(subject: Subject) -> Iterator[Finding]:
    """Each answer whose error is too large a part of it."""
    if not subject.ended or subject.scenario is None:
        return
    clouds = subject.run.clouds
    by_name = {question.name: question for question in subject.scenario.question}
    for answer in subject.run.answers:
        if answer.ask not in _POSITIVE or answer.error is None or answer.name not in by_name:
            continue
        if not answer.error > LIMIT * answer.value > 0.0:
            continue
        question, share = by_name[answer.name], answer.error / answer.value
        named = getattr(question, "cloud", None) or question.of
        cloud = clouds.get(named) or max(clouds.values(), key=lambda each: each.count)
        if getattr(question, "over", None) is not None and question.of in clouds:
            remedy = "Average over a longer stretch: a later end of `over`, a longer duration."
        elif cloud.weight > 1.0:
            remedy = f"Set {subject.finer(cloud, (share / LIMIT) ** 2)}."
        else:
            remedy = f"{subject.finer(cloud, 1.0)}."
        yield Finding(
            "wide error bar",
            f'the sampling error of "{answer.name}" is {share:.0%} of its value; {LIMIT:.0%} is '
            "the most that says more than a power of ten",
            share,
            LIMIT,
            remedy[0].upper() + remedy[1:],
        )
