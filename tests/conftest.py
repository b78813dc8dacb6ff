"""What holds for every test: examples are drawn the same way each time, on any machine.

Two processes share the tests, file by file. Solved fields are kept in a folder that they have in
common, so that each is solved once.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

# threads that wait for their like give up their core: the other process has use for it
os.environ.setdefault("OMP_WAIT_POLICY", "passive")

import pytest
from hypothesis import settings

from driftwell.solved.store import PLACE

settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")


LONGEST = (
    "scenarios/test_shipped_scenarios.py",
    "same_bits/test_cold_and_warm.py",
    "coulomb/test_tree.py",
    "docs/test_documents_run.py",
    "study/test_cluster.py",
    "walls/test_losses.py",
)
"""Files that take a minute and more."""


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """The longest files first, so that neither process is left alone with one in the end."""
    first = {Path(__file__).parent / name: place for place, name in enumerate(LONGEST)}
    items.sort(key=lambda item: first.get(item.path, len(first)))


@pytest.fixture(scope="session", autouse=True)
def fields_kept_here(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    base = tmp_path_factory.getbasetemp()
    if "PYTEST_XDIST_WORKER" in os.environ:  # each process has a folder of its own in it
        base = base.parent
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv(PLACE, str(base / "solved-fields"))
        yield
