"""docs/validation.md: what the cases found, written from their results."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from pathlib import Path

from validation.case import AREAS, Case, Found
from validation.results import Result, beyond

MARK = re.compile(r"^### `([^`]+)`", re.MULTILINE)

INTRODUCTION = """\
# Validation

Published values, and what driftwell says to them. This page and its pictures are written by
`python tools/validate.py`, which carries every case out as a user would, with
`driftwell run`, `sweep` and `converge` on the scenarios beside `tools/validation/table.py`, and
reads the folders that these leave; nothing on it is written by hand. The same command with
`--only CASE` does one case anew.

- *published*: with the error its digits and its own derivation leave. How it is known: *computed*
  from the formula of the source, apart from driftwell; *read* in the source; or *from memory*.
- *driftwell*: with a combined error, one standard deviation: sampling (what the run tells, or the
  scatter of several seeds), and what changes when one thing of the arithmetic is altered. Cases
  marked so have the errors of `driftwell converge`. In the others, *step* is the change from
  twice the step to the step taken: where errors fall at least as the step, the error left is no
  larger, and where they fall as its square three times smaller.
- *bars*: the distance of both, in their combined errors. Errors of the step are bounds rather than
  standard deviations, so numbers far below 1 are usual.
"""


def text(cases: Sequence[Case], results: Mapping[str, Result]) -> str:
    """The page; cases without a result are named as missing."""
    missing = [case.name for case in cases if case.name not in results]
    cases = [case for case in cases if case.name in results]
    done = [results[case.name] for case in cases]
    checks = [each for result in done for each in result.found]
    outside = beyond(done, 2.0)
    far = beyond(done, 4.0)
    inside = len(checks) - len(outside)
    parts = [
        INTRODUCTION,
        f"{len(cases)} cases with {len(checks)} values; {inside} of them "
        f"({100.0 * inside / len(checks):.1f} %) within 2 bars, {len(far)} beyond 4. "
        f"driftwell {done[0].version}; {sum(result.seconds for result in done) / 60.0:.0f} minutes "
        "on a machine with other work.\n",
        *([f"Not carried out yet: {', '.join(missing)}.\n"] if missing else []),
        _outside(cases, outside),
        "## All cases\n",
        _overview(cases, results),
    ]
    for area in AREAS:
        parts.append(f"## {area.capitalize()}\n")
        parts += [_case(case, results[case.name]) for case in cases if case.area == area]
    return "\n".join(parts)


def named(page: str) -> list[str]:
    """Names of the cases on a page, in its order."""
    return MARK.findall(page)


def ordered(cases: Sequence[Case]) -> list[str]:
    """Names of cases in the order of the page."""
    return [case.name for area in AREAS for case in cases if case.area == area]


def _outside(cases: Sequence[Case], outside: Sequence[tuple[str, Found]]) -> str:
    lines = ["## Beyond two error bars\n"]
    if not outside:
        lines.append("None.\n")
    remarks = {case.name: case.remark for case in cases}
    for name, each in outside:
        because = remarks[name] or "No reason is known."
        lines.append(f"- `{name}`, {each.what}: {each.bars:+.3g} bars. {because}")
    return "\n".join(lines) + ("\n" if outside else "")


def _overview(cases: Sequence[Case], results: Mapping[str, Result]) -> str:
    lines = ["| case | area | values | farthest, bars | s |", "| --- | --- | --- | --- | --- |"]
    for area in AREAS:
        for case in cases:
            if case.area != area:
                continue
            result = results[case.name]
            farthest = max((each.bars for each in result.found), key=abs)
            lines.append(
                f"| [{case.name}](#{case.name}) | {area} | {len(result.found)} "
                f"| {farthest:+.2g} | {result.seconds:.0f} |"
            )
    return "\n".join(lines) + "\n"


def _case(case: Case, result: Result) -> str:
    lines = [f"### `{case.name}`\n", f"{case.title}\n"]
    if case.converged:
        lines.append("Errors: `driftwell converge`.\n")
    sources = list(dict.fromkeys(each.published.source for each in result.found))
    single = len(sources) == 1
    if single:
        lines.append(f"Source: {sources[0]}.\n")
    lines += [
        "| value | unit | published | known | driftwell | of which | bars |",
        "| --- | --- | --- | --- | --- | --- | --- |",
    ]
    for each in result.found:
        mark = "" if single else f" [{sources.index(each.published.source) + 1}]"
        lines.append(
            f"| {each.what}{mark} | {each.unit} "
            f"| {with_error(each.published.value, each.published.error)} | {each.published.known} "
            f"| {with_error(each.value, each.error)} | {_parts(each)} | {each.bars:+.2g} |"
        )
    if not single:
        lines.append("")
        lines += [f"{k}. {source}." for k, source in enumerate(sources, 1)]
    if case.remark:
        lines.append(f"\n{case.remark}")
    lines.append(f"\n![{case.name}](validation/{case.name}.png)\n")
    return "\n".join(lines)


def _parts(each: Found) -> str:
    parts = [f"{name} {error:.1g}" for name, error in each.errors.items() if error > 0.0]
    return ", ".join(parts) or "-"


def with_error(value: float, error: float) -> str:
    """A value with its error, to two digits of the error: 1.234(56) would be 1.234 +- 0.056."""
    if not math.isfinite(value) or not error > 0.0 or not math.isfinite(error):
        return f"{value:.12g}"
    digits = math.floor(math.log10(error)) - 1
    size = math.floor(math.log10(abs(value))) if value != 0.0 else digits
    top = max(size, digits + 1)
    if top - digits > 13:
        return f"{value:.13g} +- {error:.0e}"
    if -5 <= top < 7:
        places = max(-digits, 0)
        return f"{value:.{places}f} +- {error:.{places}f}"
    scale = 10.0**top
    return f"({value / scale:.{top - digits}f} +- {error / scale:.{top - digits}f})e{top}"


def folder_of(docs: Path) -> Path:
    """Where the pictures lie."""
    return docs / "validation"
