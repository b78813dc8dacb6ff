"""Whether a line found in a trace may be a faster motion, seen through too coarse samples.

Samples every T seconds show a motion of the frequency f at

    |f - k/T|,   k the whole number nearest to f T                                            (1)

(C. E. Shannon, Proc. IRE 37 (1949) 10; from memory). The fields' fastest motion, as the record has
it, is folded so and compared with what was found.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from driftwell.answers.kinds.frequency import TracedQuestion
from driftwell.errors import DriftwellError
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject

NEAR = 3.0
"""Widths 1/length of the trace within which two lines are one."""
MOST = 0.5
"""Part of 1/T up to which a line is what it seems."""


def folded_lines(subject: Subject) -> Iterator[Finding]:
    """Each frequency found where the folded fastest motion is."""
    header = subject.run.header
    if not subject.ended or subject.scenario is None or header.motion_rate <= 0.0:
        return
    fast = header.motion_rate / (2.0 * math.pi)
    values = {answer.name: answer.value for answer in subject.run.answers}
    for question in subject.scenario.question:
        if not isinstance(question, TracedQuestion) or question.ask == "tune":
            continue
        try:
            time, _ = subject.run.trace(question.request())
        except DriftwellError:
            continue
        found = values.get(question.name, math.nan)
        if time.size < 3 or not math.isfinite(found):
            continue
        every = float(time[1] - time[0])
        if fast * every <= MOST:
            continue
        folded = abs(fast - round(fast * every) / every)
        width = 1.0 / float(time[-1] - time[0])
        if folded <= width or abs(found - folded) > NEAR * width:
            continue
        yield Finding(
            "trace too coarse",
            f'"{question.name}" was found at {spelled(found, "Hz", 4)}, where samples every '
            f"{spelled(every, 's', 3)} show the {header.motion} of {spelled(fast, 'Hz', 4)} as "
            f"well: {fast * every:.2g} periods a sample, of which {MOST:g} may be",
            fast * every,
            MOST,
            f'Set `every` of that question to "{about(0.05 / fast, "s")}", or leave it out.',
        )
