"""Whether kernels are being compiled is known: told once, and not for code that is kept."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.kernels import compiled, kernel
from driftwell.kernels.compilation import first_compilation


@pytest.fixture(autouse=True)
def _nothing_kept(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Machine code is kept in a folder of the test's own."""
    monkeypatch.setattr(compiled, "_FOLDER", tmp_path)


def doubled(x: float) -> float:
    return 2.0 * x


def halved(x: float) -> float:
    return 0.5 * x


def test_the_first_of_several_compilations_is_told_once() -> None:
    told = []
    with first_compilation(lambda: told.append("compiling")):
        assert (4.0, 1.0) == (kernel(doubled)(2.0), kernel(halved)(2.0))
    assert ["compiling"] == told


def test_code_in_memory_is_not_told() -> None:
    twice = kernel(doubled)
    twice(1.0)
    told = []
    with first_compilation(lambda: told.append("compiling")):
        assert 4.0 == twice(2.0)
    assert [] == told


def test_code_kept_on_the_disk_is_not_told() -> None:
    kernel(doubled)(1.0)
    told = []
    with first_compilation(lambda: told.append("compiling")):
        assert 4.0 == kernel(doubled)(2.0)
    assert [] == told


def test_nothing_is_told_once_the_watch_is_over() -> None:
    told = []
    with first_compilation(lambda: told.append("compiling")):
        pass
    assert 4.0 == kernel(doubled)(2.0)
    assert [] == told
