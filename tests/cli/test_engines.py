"""What the commands compute runs with: closed and left in order, whatever happens."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest

from driftwell.cli.studies.engines import Engines
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.errors import BusyError, DriftwellError
from driftwell.study.sweep_folder import CATALOGUE_FILE, taken


def noting(did: list[str], refuses: bool = False) -> Any:
    """A cluster that notes what is asked of it."""

    def fits(runs: Path) -> None:
        did.append(f"fits {runs.name}")
        if refuses:
            raise DriftwellError("no shared disk")

    def engine(workers: int | None) -> str:
        did.append(f"engine of {workers}")
        return "engine"

    close: Callable[[], None] = lambda: did.append("closed")  # noqa: E731
    return SimpleNamespace(fits=fits, engine=engine, close=close)


def test_a_cluster_is_looked_at_once_the_folder_is_taken_and_closed_in_the_end(
    tmp_path: Path,
) -> None:
    did: list[str] = []
    engines = Engines(noting(did), 3)
    wish = StopWish(lambda: True, engines.kill)
    with engines.working_in(tmp_path / "s", "study", "scenario", wish) as changed:
        assert not changed
        assert "engine" == engines.engine(1, 1)
        with pytest.raises(BusyError), taken(tmp_path / "s", "study", "scenario"):
            pass
    assert ["fits runs", "engine of 3", "closed"] == did
    (tmp_path / "s" / CATALOGUE_FILE).touch()
    with engines.working_in(tmp_path / "s", "another", "scenario", wish) as changed:
        assert changed


def test_a_cluster_that_does_not_fit_is_closed_and_the_folder_is_free_again(
    tmp_path: Path,
) -> None:
    did: list[str] = []
    engines = Engines(noting(did, refuses=True), None)
    wish = StopWish(lambda: True, engines.kill)
    with (
        pytest.raises(DriftwellError, match="no shared disk"),
        engines.working_in(tmp_path / "s", "study", "scenario", wish),
    ):
        pass
    assert ["fits runs", "closed"] == did
    with taken(tmp_path / "s", "study", "scenario") as changed:
        assert not changed
