"""How often an answer's error bar covers the truth: many seeds of scenarios with known answers.

    python tools/error_bars.py [--seeds N] [--write] [CASE ...]

Each scenario of tools/error_bar_cases is run with the seeds 1 to N as the command line runs it, and
each answer is compared with its truth: a bar of one standard deviation should cover it 68.3 % of
the time. Prints a table; with --write it goes into docs/numerics/errors.md. Ends with 1 where a
case with closed forms covers, over all its answers, less than 60 % or more than 76 %.
"""

from __future__ import annotations

import argparse
import math
import re
import sys
import tempfile
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from error_bar_cases.cases import CASES, HELD, Case

from driftwell.answers.answer import Answer
from driftwell.particles.state import Particles
from driftwell.run import Progress, run
from driftwell.scenario.read import read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice

SEEDS = 200
LEAST, MOST = 0.60, 0.76
"""What a bar of one standard deviation may cover."""
PAGE = Path(__file__).parent.parent / "docs" / "numerics" / "errors.md"
BEGIN, END = "<!-- coverage: begin -->", "<!-- coverage: end -->"


@dataclass(frozen=True, slots=True)
class Covered:
    """How the errors of one answer fared.

    part : of the seeds whose bar covered the truth
    scatter : of the values about the truth, rms, in the errors told (root of the mean square)
    bias : mean deviation in the same unit
    """

    case: str
    question: str
    seeds: int
    known: bool
    part: float
    scatter: float
    bias: float


class Unwatched:
    """An observer that shows nothing and never asks to stop."""

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Nothing to show."""

    def told(self, sentence: str) -> None:
        """Nothing to show."""

    def goes_on(self, progress: Progress) -> bool:
        """On to the end."""
        return True


def answered(case: Case, seeds: int) -> list[list[Answer]]:
    """What the runs of so many seeds say."""
    return [_answers(case, seed) for seed in range(1, seeds + 1)]


def covered(case: Case, runs: Sequence[Sequence[Answer]]) -> Iterator[Covered]:
    """How the errors of each answer of a case fared over its runs."""
    for found in zip(*runs, strict=True):
        name = found[0].name
        value = np.array([answer.value for answer in found])
        error = np.array([math.nan if each.error is None else each.error for each in found])
        told = np.isfinite(error) & np.isfinite(value)
        known = name in case.known
        truth = case.known[name] if known else float(value[told].mean())
        off = (value[told] - truth) / error[told]
        yield Covered(
            case.name,
            name,
            int(told.sum()),
            known,
            float(np.mean(np.abs(off) <= 1.0)),
            float(np.sqrt(np.mean(off**2))),
            float(off.mean()),
        )


def _answers(case: Case, seed: int) -> list[Answer]:
    """What one run says."""
    with tempfile.TemporaryDirectory() as folder:
        loaded = read_scenario(case.path, [f"seed={seed}"])
        return run(loaded, Path(folder) / "run", Unwatched()).answers


def whole(found: Sequence[Covered]) -> float:
    """Part covered over all answers of a case."""
    return float(np.average([each.part for each in found], weights=[each.seeds for each in found]))


def table(found: Sequence[Covered]) -> list[str]:
    """The lines of a table."""
    lines = [
        "| case | answer | seeds | truth | covered | scatter | bias |",
        "| --- | --- | --- | --- | --- | --- | --- |",
    ]
    for each in found:
        truth = "closed form" if each.known else "mean of the seeds"
        lines.append(
            f"| {each.case} | {each.question} | {each.seeds} | {truth} | {100.0 * each.part:.0f} % "
            f"| {each.scatter:.2f} | {each.bias:+.2f} |"
        )
    return lines


def write(lines: Sequence[str]) -> None:
    """Put the table into its page."""
    text = PAGE.read_text()
    between = re.compile(f"(?<={re.escape(BEGIN)}\n).*(?=\n{re.escape(END)})", re.DOTALL)
    PAGE.write_text(between.sub("\n".join(lines).replace("\\", r"\\"), text, count=1))


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the cases and print the table; 1 where a bar with a known truth is not honest."""
    parser = argparse.ArgumentParser(description=(__doc__ or "").splitlines()[0])
    parser.add_argument("case", nargs="*", help="only these: " + ", ".join(c.name for c in CASES))
    parser.add_argument("--seeds", type=int, default=SEEDS)
    parser.add_argument("--write", action="store_true", help="put the table into its page")
    given = parser.parse_args(arguments)
    every, honest = [], True
    for case in CASES:
        if given.case and case.name not in given.case:
            continue
        found = list(covered(case, answered(case, given.seeds)))
        every += found
        part = whole(found)
        print(f"{case.name} ({case.about}): {100.0 * part:.1f} % covered", flush=True)
        honest &= case not in CASES[:HELD] or LEAST <= part <= MOST
    lines = table(every)
    print("\n".join(lines))
    if given.write:
        write(lines)
    return 0 if honest else 1


if __name__ == "__main__":
    sys.exit(main())
