"""Published values against driftwell, case by case, through the command line.

    python tools/validate.py [--only CASE ...] [--quick] [--fresh] [--check] [--list]

Carries out the cases of tools/validation with `driftwell run`, one after another, and writes
docs/validation.md with a picture for each. What was found is kept in the folder of `--output`,
so that a second call goes on where the first was stopped. With `--only` or `--quick` the page is
left alone; what they found counts in the next whole call. `--page` writes it from what was found so
far, and names the cases that are missing.

exit codes: 0 all values are within 4 error bars; 1 some are not, or a case did not come to an
answer, or with `--check` the page has other cases than the table; 2 the command line
"""

from __future__ import annotations

import argparse
import os
import shutil
import sys
from collections.abc import Sequence
from pathlib import Path

from validation.bench import Bench, CaseError, digest, timed
from validation.case import Case
from validation.page import folder_of, named, ordered, text, with_error
from validation.picture import draw
from validation.results import Result, beyond, keep, kept
from validation.table import CASES

from driftwell import __version__

DOCS = Path(__file__).resolve().parent.parent / "docs"
PAGE = DOCS / "validation.md"
FAR = 4.0


def main(arguments: Sequence[str] | None = None) -> int:
    """Do what the command line says; the exit code."""
    options = _parser().parse_args(arguments)
    if options.list:
        for case in CASES:
            print(f"{case.name:28} {case.area:12} {len(case.checks):3}  {case.title}")
        return 0
    if options.check:
        return _page_is_whole()
    if options.page:
        found = {case.name: kept(options.output / case.name, digest(case)) for case in CASES}
        _write({name: result for name, result in found.items() if result is not None})
        return 0
    known = {case.name: case for case in CASES}
    for name in options.only:
        if name not in known:
            print(f'no case "{name}"; --list names all.', file=sys.stderr)
            return 2
    chosen = [known[name] for name in options.only] if options.only else list(CASES)
    if options.quick:
        chosen = [case for case in chosen if case.quick]
    results, failed = _carried_out(chosen, options)
    outside = beyond(list(results.values()), FAR)
    for name, each in outside:
        print(f"{name}, {each.what}: {each.bars:+.1f} error bars", file=sys.stderr)
    whole = not (options.only or options.quick)
    if whole and not failed:
        _write(results)
    return 1 if outside or failed else 0


def _carried_out(
    cases: Sequence[Case], options: argparse.Namespace
) -> tuple[dict[str, Result], list[str]]:
    bench = Bench(options.output, options.threads)
    results: dict[str, Result] = {}
    failed: list[str] = []
    for case in cases:
        folder = bench.place(case.name)
        whose = digest(case)
        result = None if options.fresh else kept(folder, whose)
        if result is None:
            try:
                found, seconds = timed(case, bench)
            except CaseError as fault:
                print(f"{case.name}: {fault}", file=sys.stderr)
                failed.append(case.name)
                continue
            result = Result(case.name, whose, seconds, __version__, tuple(found))
            keep(folder, result)
            if not options.keep_runs:
                for left in folder.glob("*-run"):
                    shutil.rmtree(left)
        results[case.name] = result
        _tell(result)
    return results, failed


def _tell(result: Result) -> None:
    for each in result.found:
        published = with_error(each.published.value, each.published.error)
        print(
            f"{result.case:24} {each.what:34} {published} / {with_error(each.value, each.error)} "
            f"{each.unit}  {each.bars:+.3g} bars",
            flush=True,
        )


def _write(results: dict[str, Result]) -> None:
    for case in CASES:
        if case.name in results:
            draw(case, results[case.name], folder_of(DOCS) / f"{case.name}.png")
    PAGE.write_text(text(CASES, results))
    for picture in folder_of(DOCS).glob("*.png"):
        if picture.stem not in results:
            picture.unlink()
    print(f"written: {PAGE}")


def _page_is_whole() -> int:
    there = named(PAGE.read_text()) if PAGE.is_file() else []
    if there == ordered(CASES):
        return 0
    apart = sorted(set(there) ^ set(ordered(CASES)))
    words = ", ".join(apart) or "the order differs"
    print(
        f"{PAGE.name} has other cases than tools/validation/table.py: {words}. "
        "Run python tools/validate.py.",
        file=sys.stderr,
    )
    return 1


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        description=(__doc__ or "").split("\n\n", maxsplit=1)[0],
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--only", nargs="+", default=[], metavar="CASE", help="these cases only")
    parser.add_argument("--quick", action="store_true", help="the few that take seconds")
    parser.add_argument("--fresh", action="store_true", help="carry out anew what was found before")
    parser.add_argument(
        "--check", action="store_true", help="only whether docs/validation.md has all cases"
    )
    parser.add_argument(
        "--page", action="store_true", help="only write the page, from what was found so far"
    )
    parser.add_argument("--list", action="store_true", help="only name the cases")
    parser.add_argument(
        "--output",
        type=Path,
        default=Path("validation-run"),
        metavar="FOLDER",
        help="where runs and results lie (default: %(default)s)",
    )
    parser.add_argument("--keep-runs", action="store_true", help="leave the runs' folders")
    parser.add_argument(
        "--threads",
        type=int,
        default=os.cpu_count() or 1,
        metavar="N",
        help="threads of each run; they change no bit of it (default: one for each core)",
    )
    return parser


if __name__ == "__main__":
    sys.exit(main())
