"""Cases carried out with the command line, one run after another, and what they left read."""

from __future__ import annotations

import csv
import hashlib
import json
import math
import os
import shutil
import statistics
import subprocess
import sys
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from time import monotonic

from driftwell.record.reader import Run, open_run
from validation.case import Case, Check, Found, Reading

CASES = Path(__file__).resolve().parent / "cases"

CODES_OF_RUNS = (0, 3)
"""Exit codes of `driftwell run` that leave answers: finished, and every charge lost."""

SCATTER_FROM = 3
"""Seeds from which on their scatter is the sampling error, and no longer what a run tells."""


class CaseError(Exception):
    """A command of a case that did not come to an answer; the message holds its last words."""


@dataclass(frozen=True, slots=True)
class Bench:
    """Where cases run.

    folder : runs and results, one folder for each case
    threads : of each run
    """

    folder: Path
    threads: int

    def place(self, case: str) -> Path:
        """The folder of a case, made where there is none."""
        folder = self.folder / case
        folder.mkdir(parents=True, exist_ok=True)
        return folder

    def laid_out(self, case: Case) -> Path:
        """The case's scenario in its folder, with the files it reads."""
        folder = self.place(case.name)
        scenario = folder / f"{case.name}.toml"
        shutil.copyfile(scenario_file(case), scenario)
        if case.files is not None:
            case.files(folder)
        return scenario

    def run(self, scenario: Path, label: str, settings: Sequence[str], seed: int | None) -> Run:
        """`driftwell run` of a scenario, in a folder beside it."""
        output = scenario.parent / f"{label}-run"
        arguments = ["run", str(scenario), "--output", str(output), "--no-pictures", "--fresh"]
        arguments += ["--threads", str(self.threads)]
        if seed is not None:
            arguments += ["--seed", str(seed)]
        for setting in settings:
            arguments += ["--set", setting]
        command(arguments, CODES_OF_RUNS)
        return open_run(output)

    def sweep(
        self,
        scenario: Path,
        label: str,
        *,
        settings: Sequence[str] = (),
        vary: Mapping[str, Sequence[str | float]] | None = None,
        replicas: int = 1,
    ) -> list[Run]:
        """`driftwell sweep` of a scenario: what varies, together, and so many replicas of each."""
        study = scenario.parent / f"{label}-study.toml"
        output = scenario.parent / f"{label}-sweep-run"
        lines = [
            f'title = "{label}"',
            f'scenario = "{scenario.name}"',
            f"set = {json.dumps(list(settings))}",
            f"replicas = {replicas}",
        ]
        for key, values in (vary or {}).items():
            lines += ["[[vary]]", f"key = {json.dumps(key)}", f"values = {json.dumps(values)}"]
            if vary is not None and len(vary) > 1:
                lines.append('together = "case"')
        study.write_text("\n".join(lines) + "\n")
        shutil.rmtree(output, ignore_errors=True)
        arguments = ["sweep", str(study), "--output", str(output), "--no-pictures"]
        command([*arguments, "--workers", "1", "--threads", str(self.threads)])
        return [open_run(folder) for folder in sorted((output / "runs").iterdir())]


def command(arguments: Sequence[str], good: Sequence[int] = (0,)) -> str:
    """What `driftwell` prints, called as a program of its own.

    Raises CaseError where it ends with another code than the good ones.
    """
    done = subprocess.run(
        [sys.executable, "-m", "driftwell", *arguments],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "MPLBACKEND": "Agg"},
    )
    if done.returncode not in good:
        words = (done.stderr or done.stdout).strip().splitlines()[-8:]
        raise CaseError(
            f"driftwell {' '.join(arguments)} ended with {done.returncode}:\n" + "\n".join(words)
        )
    return done.stdout


def scenario_file(case: Case) -> Path:
    """The shipped scenario of a case."""
    return CASES / f"{case.scenario or case.name}.toml"


def found_by(case: Case, bench: Bench) -> list[Found]:
    """The case's values with their errors: its runs, one after another."""
    if case.measured is not None:
        return case.measured(case, bench)
    scenario = bench.laid_out(case)
    if case.converged:
        return _converged(case, scenario, bench)
    if case.seeds == 1:
        runs = [bench.run(scenario, "first", case.settings, None)]
    else:
        runs = bench.sweep(scenario, "seeds", settings=case.settings, replicas=case.seeds)
        first = tomllib.loads(scenario.read_text())["seed"]
        runs.sort(key=lambda run: run.header.seed != first)
    altered = [
        (axis.name, bench.run(scenario, f"axis {k}", (*case.settings, *axis.settings), None))
        for k, axis in enumerate(case.axes)
    ]
    return [_found(check, runs, altered) for check in case.checks]


def _converged(case: Case, scenario: Path, bench: Bench) -> list[Found]:
    """The case's values with the errors of `driftwell converge`; all of its checks are questions.

    Where it tells the scatter of seeds, that is the sampling error, else what the run tells.
    """
    output = scenario.parent / "converge-run"
    shutil.rmtree(output, ignore_errors=True)
    arguments = ["converge", str(scenario), "--output", str(output), "--no-pictures"]
    command([*arguments, "--workers", "1", "--threads", str(bench.threads)])
    with (output / "convergence.csv").open(newline="") as file:
        rows = {row["question"]: row for row in csv.DictReader(file)}
    found = []
    for check in case.checks:
        row = rows[str(check.read)]
        scale = abs(check.scale)
        errors = {
            name.removesuffix("_error").replace("_", " "): scale * float(value)
            for name, value in row.items()
            if name.endswith("_error") and name != "combined_error" and value
        }
        if "seeds" in errors:
            errors.pop("sampling", None)
        value = check.scale * float(row["value"])
        found.append(Found(check.what, check.unit, check.published, value, errors))
    return found


def _found(check: Check, runs: Sequence[Run], altered: Sequence[tuple[str, Run]]) -> Found:
    """Value: the mean over the seeds. Errors: its sampling error, and the change along each axis
    with the first seed; the largest where an axis has several runs."""
    readings = [reading(check, run) for run in runs]
    value = statistics.fmean(each.value for each in readings)
    if len(readings) >= SCATTER_FROM:
        sampling = statistics.stdev(each.value for each in readings) / math.sqrt(len(readings))
    else:
        sampling = math.hypot(*(each.error for each in readings)) / len(readings)
    errors = {"sampling": sampling}
    for name, run in altered:
        change = abs(reading(check, run).value - readings[0].value)
        errors[name] = max(errors.get(name, 0.0), change)
    return Found(check.what, check.unit, check.published, value, errors)


def reading(check: Check, run: Run) -> Reading:
    """What a run says to a check. Raises CaseError where it has no answer."""
    if not isinstance(check.read, str):
        read = check.read(run)
        return Reading(check.scale * read.value, abs(check.scale) * read.error)
    for answer in run.answers:
        if answer.name == check.read:
            if not math.isfinite(answer.value):
                raise CaseError(f'{run.folder}: "{answer.name}" has no value: {answer.note}')
            error = 0.0 if answer.error is None else answer.error
            return Reading(check.scale * answer.value, abs(check.scale) * error)
    raise CaseError(f'{run.folder}: no answer "{check.read}".')


def digest(case: Case) -> str:
    """Digest of what a case does: its scenario, settings, axes and published values."""
    parts = [scenario_file(case).read_text(), str(case.seeds), *case.settings]
    parts += ["converge"] if case.converged else []
    parts += [json.dumps([axis.name, *axis.settings]) for axis in case.axes]
    parts += [
        json.dumps([check.what, check.published.value, check.published.error, check.scale])
        for check in case.checks
    ]
    return hashlib.sha256("\n".join(parts).encode()).hexdigest()


def timed(case: Case, bench: Bench) -> tuple[list[Found], float]:
    """The case's values, and how long they took, s."""
    begun = monotonic()
    found = found_by(case, bench)
    return found, monotonic() - begun
