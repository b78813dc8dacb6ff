"""What the pages tell a reader to type runs, their links lead somewhere, their tables are true.

What a page is read as: a line that ends in "Save this as `NAME`:" puts the block below it into
that file. Lines of `sh` blocks that begin with `driftwell` are typed as they stand, in the order of
the page; one that ends in `# exit code 12` ends with that code, all others with 0. Those of the
README are typed into a shell; those of other pages are taken apart as a shell would, and carried
out in this process, which loads everything once. A line that ends
in `&` goes on beside those after it and is ended with the page; so `dask` may be started, too. A
`text` block right below an `sh` block shows what its commands printed: lines of a name and numbers
are compared, and intervals of limits; below `check` and `estimate` every line is.
"""

from __future__ import annotations

import os
import re
import shlex
import shutil
import signal
import subprocess
import sys
import tomllib
from contextlib import redirect_stderr, redirect_stdout, suppress
from dataclasses import dataclass
from io import BytesIO, TextIOWrapper
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.cli.studies.converge import NOT_CONVERGED
from driftwell.cli.studies.limit import EXIT_CODES as LIMIT_CODES
from driftwell.cli.studies.sweep import SOME_FAILED
from driftwell.run import EXIT_CODES
from driftwell.scenario.read import read_scenario
from driftwell.study.cluster_engine import ClusterLostError
from driftwell.study.read import read_study
from tests.grid_files import nodes, write_csv

ROOT = Path(__file__).resolve().parents[2]
PAGES = sorted(
    [*ROOT.glob("*.md"), *(ROOT / "docs").rglob("*.md")], key=lambda page: page.as_posix()
)
RUN_IT = (
    "python3 -m venv .venv && .venv/bin/pip install . && "
    ".venv/bin/driftwell run scenarios/rod-trap.toml"
)
TEST_IT = "python3 -m venv .venv && .venv/bin/pip install '.[test]' && .venv/bin/python -m pytest"


@dataclass(frozen=True, slots=True)
class Block:
    """A fenced block of a page: its language and its text; what stands between it and the last."""

    language: str
    text: str
    above: str = ""

    @property
    def saved_as(self) -> str | None:
        """Name of the file that the reader is told to put it into."""
        told = re.search(r"Save this as\s+`([^`]*)`:$", self.above)
        return told[1] if told else None


def blocks(page: Path) -> list[Block]:
    text, found, end = page.read_text(), [], 0
    for fenced in re.finditer(r"^```(\w*)\n(.*?)^```$", text, re.MULTILINE | re.DOTALL):
        found.append(Block(fenced[1], fenced[2], text[end : fenced.start()].strip()))
        end = fenced.end()
    return found


def typed(page: Path) -> list[str]:
    """The lines a reader is told to type into a shell."""
    return [
        line
        for block in blocks(page)
        if block.language == "sh"
        for line in block.text.splitlines()
        if line
    ]


def has_commands(page: Path) -> bool:
    return any(block.language == "python" for block in blocks(page)) or any(
        line.startswith("driftwell ") for line in typed(page)
    )


@pytest.fixture
def desk(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with the scenarios in it, where `driftwell` is this very package."""
    shutil.copytree(ROOT / "scenarios", tmp_path / "scenarios")
    command = tmp_path / "bin" / "driftwell"
    command.parent.mkdir()
    command.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m driftwell "$@"\n')
    command.chmod(0o755)
    dask = command.with_name("dask")
    dask.write_text(f'#!/bin/sh\nexec "{sys.executable}" -m dask "$@"\n')
    dask.chmod(0o755)
    monkeypatch.setenv("PATH", f"{command.parent}{os.pathsep}{os.environ['PATH']}")
    monkeypatch.chdir(tmp_path)
    return tmp_path


def shell(line: str) -> tuple[int, str]:
    """Exit code of a line typed into a shell, and what it printed."""
    done = subprocess.run(["sh", "-c", line], capture_output=True, text=True, check=False)
    return done.returncode, done.stdout + done.stderr


def here(line: str) -> tuple[int, str]:
    """The same of a command of driftwell, carried out in this process."""
    said = TextIOWrapper(BytesIO(), encoding="utf-8")  # of both streams, in their order
    with redirect_stdout(said), redirect_stderr(said):
        try:
            code = main(shlex.split(line, comments=True)[1:])
        except SystemExit as refused:  # by argparse
            code = int(refused.code or 0)
    said.flush()
    return code, said.buffer.getvalue().decode()


def for_a_shell(line: str) -> bool:
    """Whether there is more in a line than a command of driftwell, or it sets the threads."""
    signs = shlex.shlex(line, posix=True, punctuation_chars=True)
    return "--threads" in line or any(set(sign) <= set("();<>|&") for sign in signs)


def started(line: str) -> subprocess.Popen[bytes]:
    """What goes on in the background, in a session of its own."""
    return subprocess.Popen(
        ["sh", "-c", f"exec {line.removesuffix('&')}"],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.DEVNULL,
        start_new_session=True,
    )


@dataclass(frozen=True, slots=True)
class Row:
    """A line of an output that tells numbers: its name, and values with errors (0 where none)."""

    name: str
    values: tuple[tuple[float, float], ...]


NUMBER = r"(-?\d+(?:\.\d+)?(?:e[+-]?\d+)?)"


def rows(text: str) -> list[Row]:
    """Answers of runs, and lines of a sweep's table: cells that stand two blanks apart."""
    found = []
    for line in text.splitlines():
        name, *cells = re.split(r"\s{2,}", line.strip())
        told = [re.fullmatch(rf"{NUMBER}(?: ± {NUMBER})?(?: \S+)?", cell) for cell in cells]
        values = tuple((float(each[1]), float(each[2] or 0.0)) for each in told if each)
        if values:
            found.append(Row(name, values))
    return found


def intervals(text: str) -> list[tuple[float, float]]:
    """The intervals that limits were found in, ends without their units."""
    found = re.findall(rf"^limit: .*interval {NUMBER}(?: \S+)? to {NUMBER}", text, re.MULTILINE)
    return [(float(low), float(high)) for low, high in found]


def alike(one: Row, other: Row) -> bool:
    """Whether all values are the same within 1 % and half the error bar of the first.

    The motion of many charges differs between processors after a while, as chance would have it.
    """
    return len(one.values) == len(other.values) and all(
        abs(found - value) <= 0.01 * abs(value) + 0.5 * error
        for (value, error), (found, _) in zip(one.values, other.values, strict=True)
    )


def check_output(shown: str, printed: str, word_for_word: bool = False) -> None:
    """What a page shows was printed: rows nearly so, limits in intervals that overlap.

    word_for_word : every line as it stands, but for one that says that some were left out
    """
    if word_for_word:
        missing = [
            line for line in shown.splitlines() if line not in (*printed.splitlines(), "...")
        ]
        assert [] == missing
    for row in rows(shown):
        of_name = [found for found in rows(printed) if row.name == found.name]
        assert any(alike(row, found) for found in of_name), f"{row} shown, printed: {of_name}"
    for low, high in intervals(shown):
        found = intervals(printed)
        assert any(a <= high and low <= b for a, b in found), f"{low} to {high}, printed: {found}"


def type_in(text: str, goes_on: list[subprocess.Popen[bytes]], into_shell: bool) -> str:
    """Type the commands of a block; what they printed."""
    printed = ""
    for line in text.splitlines():
        if line.startswith(("driftwell ", "dask ")):
            if line.endswith("&"):
                goes_on.append(started(line))
                continue
            expected = re.search(r"# exit code (\d+)$", line)
            code, told = (shell if into_shell or for_a_shell(line) else here)(line)
            assert (int(expected[1]) if expected else 0) == code, f"{line}\n{told}"
            printed += told
    return printed


@pytest.mark.parametrize(
    "page",
    [page for page in PAGES if has_commands(page)],
    ids=lambda page: page.relative_to(ROOT).as_posix(),
)
def test_commands_and_python_of_a_page_run_in_their_order(page: Path, desk: Path) -> None:
    names: dict[str, object] = {"__name__": "page"}
    goes_on: list[subprocess.Popen[bytes]] = []
    into_shell = page.name == "README.md"
    printed, word_for_word = None, False
    try:
        for block in blocks(page):
            if block.saved_as is not None:
                assert Path(block.saved_as).name == block.saved_as, "a bare name, in this folder"
                (desk / block.saved_as).write_text(block.text)
            elif block.language == "text" and printed is not None and not block.above:
                check_output(block.text, printed, word_for_word)
            printed = None
            if block.language == "sh":
                printed = type_in(block.text, goes_on, into_shell)
            word_for_word = (
                re.fullmatch(r"driftwell (check|estimate) [\w.-]+\n", block.text) is not None
            )
            if block.language == "python" and block.saved_as is None:
                exec(compile(block.text, page.name, "exec"), names)
    finally:
        for process in goes_on:
            with suppress(ProcessLookupError):
                os.killpg(process.pid, signal.SIGTERM)
            process.wait(20)


def test_what_a_page_shows_is_held_against_what_was_printed() -> None:
    """A value that is off, a name that was not printed, an interval elsewhere, another line."""
    printed = (
        "held 2       0.50 ± 0.02  5 of 10\nsize across  82.7 ± 1.0 um  mean\n"
        "  60 V  0.000 ± 0.024  1.000 ± 0.024\nlimit: 5 V, interval 4 V to 6 V: with\n"
    )
    assert [Row("held 2", ((0.5, 0.02),)), Row("size across", ((82.7, 1.0),))] == rows(printed)[:2]
    assert [(4.0, 6.0)] == intervals(printed)
    check_output("size across  83.0 ± 1.0 um\n60 V  0.000 ± 0.024  1.000 ± 0.024", printed)
    check_output("limit: 5.6 V, interval 5.5 V to 7 V: with", printed)
    check_output("...\nheld 2       0.50 ± 0.02  5 of 10", printed, word_for_word=True)
    for wrong in (
        "size across  85.0 ± 1.0 um",
        "held  0.50 ± 0.02",
        "60 V  0.000 ± 0.024  0.900 ± 0.024",
        "limit: 6.6 V, interval 6.5 V to 7 V: with",
    ):
        with pytest.raises(AssertionError):
            check_output(wrong, printed)
    with pytest.raises(AssertionError):
        check_output("size across  83.0 ± 1.0 um", printed, word_for_word=True)


def test_the_readme_states_the_job_in_one_paragraph_before_its_two_commands() -> None:
    text = (ROOT / "README.md").read_text()
    heading, job, told, first = text.split("\n\n")[:4]
    assert heading.startswith("# driftwell")
    assert "\n" in job
    assert not told.startswith(("#", "```"))
    assert f"```sh\n{RUN_IT}\n```" == first
    assert [RUN_IT, TEST_IT] == typed(ROOT / "README.md")[:2]


def test_what_the_two_commands_name_is_there() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]
    assert "driftwell" in project["scripts"]
    assert "test" in project["optional-dependencies"]
    assert (ROOT / "scenarios" / "rod-trap.toml").is_file()


@pytest.mark.parametrize("page", PAGES, ids=lambda page: page.relative_to(ROOT).as_posix())
def test_every_link_of_a_page_leads_to_a_file_or_a_heading(page: Path) -> None:
    text = re.sub(r"^```.*?^```$", "", page.read_text(), flags=re.MULTILINE | re.DOTALL)
    for target in re.findall(r"\]\(([^)\s]+)\)", text):
        if target.startswith("http"):
            continue
        file, _, heading = target.partition("#")
        place = page if not file else (page.parent / file).resolve()
        assert place.exists(), f"{page.name}: {target}"
        if heading:
            assert heading in headings(place), f"{page.name}: {target}"


def headings(page: Path) -> set[str]:
    """The anchors of a page's headings, as hosts of Markdown make them."""
    titles = re.findall(r"^#+ (.*)$", page.read_text(), re.MULTILINE)
    return {re.sub(r"[^\w\- ]", "", title.lower()).replace(" ", "-") for title in titles}


def test_the_readme_lists_the_exit_codes_that_runs_end_with() -> None:
    text = (ROOT / "README.md").read_text()
    table = text.split("| exit code | meaning |\n", 1)[1].split("\n\n", 1)[0]
    listed = {int(code) for code in re.findall(r"^\| (\d+) \| ", table, re.MULTILINE)}
    of_limits = set(LIMIT_CODES.values()) | {NOT_CONVERGED}
    assert {*EXIT_CODES.values(), 2, SOME_FAILED, ClusterLostError.exit_code} | of_limits == listed


def test_the_readme_shows_keys_as_the_shipped_scenario_has_them() -> None:
    shown = next(b.text for b in blocks(ROOT / "README.md") if b.language == "toml")
    shipped = (ROOT / "scenarios" / "rod-trap.toml").read_text()
    for paragraph in shown.strip().split("\n\n"):
        assert paragraph in shipped


ANY = """
title    = "What an example needs besides"
duration = "1 us"
[[cloud]]
name    = "any"
species = "proton"
shape   = { kind = "points", positions = [["0 mm", "0 mm", "0 mm"]] }
"""


@pytest.mark.parametrize(
    "block",
    [b for b in blocks(ROOT / "docs" / "electrodes.md") if b.language == "toml"],
    ids=lambda block: block.text.split("\n", 1)[0],
)
def test_the_pieces_of_scenarios_on_electrodes_are_without_faults(block: Block, desk: Path) -> None:
    grid = nodes(r=range(9), z=range(-4, 5))
    write_csv(desk / "magnet.csv", {**grid, "Br": 0.0 * grid["r"], "Bz": 1.0 + 0.0 * grid["r"]})
    if "scenario" in tomllib.loads(block.text):
        (desk / "scenarios" / "study.toml").write_text(block.text)
        assert 4 == len(read_study("scenarios/study.toml").cases)
        return
    (desk / "piece.toml").write_text(f"{ANY}{block.text}")
    found = read_scenario("piece.toml").scenario
    assert found.electrode or found.images or found.field


def test_the_tools_that_a_page_names_are_there() -> None:
    for page in PAGES:
        for tool in re.findall(r"\btools/[\w./]+\w", page.read_text()):
            assert (ROOT / tool).exists(), f"{page.name}: {tool}"


def test_documentation_generators_find_their_pages_fresh() -> None:
    checks = [line for line in typed(ROOT / "DEVELOPERS.md") if line.endswith("--check")]
    checks = [line for line in checks if line.startswith("python tools/")]
    assert 5 == len(checks)
    for line in checks:
        command = [sys.executable, *line.split()[1:]]
        done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
        assert 0 == done.returncode, f"{line}\n{done.stdout}{done.stderr}"
