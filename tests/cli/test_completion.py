"""Scripts for shells: bash's is sourced by bash, and asked."""

from __future__ import annotations

import shutil
import subprocess
from pathlib import Path

import pytest

from driftwell.cli.commands.completion import SHELLS
from driftwell.cli.completion import script
from driftwell.cli.main import main

ASK = """source "$1"; shift
COMP_WORDS=("$@"); COMP_CWORD=$(($# - 1))
function=$(complete -p driftwell | sed 's/.*-F \\([^ ]*\\).*/\\1/')
$function driftwell "${@: -1}" "${@: -2:1}" 2>/dev/null
printf '%s\\n' "${COMPREPLY[@]}"
"""


@pytest.mark.skipif(shutil.which("bash") is None, reason="no bash")
@pytest.mark.parametrize(
    ("words", "expected"),
    [
        (("conv",), {"converge"}),
        (("run", "--stop"), {"--stop-after"}),
        (("export", "run", "open"), {"openpmd"}),
        (("new", "rf"), {"rf-trap"}),
        (("check", "own-"), {"own-trap.toml"}),
        (("run", "own-trap.toml", "-o", "own-"), {"own-folder"}),
    ],
)
def test_bash_completes_commands_options_values_and_files(
    words: tuple[str, ...], expected: set[str], tmp_path: Path
) -> None:
    (tmp_path / "own-trap.toml").touch()
    if "-o" in words:
        (tmp_path / "own-folder").mkdir()
    path = tmp_path / "completion.sh"
    path.write_text(script("bash"))
    done = subprocess.run(
        ["bash", "-c", ASK, "bash", path, "driftwell", *words],
        cwd=tmp_path,
        capture_output=True,
        text=True,
        timeout=60,
        check=True,
    )
    assert expected == {word.strip() for word in done.stdout.splitlines()}


@pytest.mark.parametrize("shell", SHELLS)
def test_the_script_alone_is_printed(shell: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert 0 == main(["completion", shell])
    printed = capsys.readouterr()
    assert script(shell) + "\n" == printed.out
    assert "converge" in printed.out
    assert "" == printed.err
