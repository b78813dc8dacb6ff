"""What holds for every test: examples are drawn the same way each time, on any machine.

Solved fields are kept in a folder of the tests' own, so that each is solved once.
"""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from hypothesis import settings

from driftwell.solved.store import PLACE

settings.register_profile("repeatable", derandomize=True, deadline=None)
settings.load_profile("repeatable")


@pytest.fixture(scope="session", autouse=True)
def fields_kept_here(tmp_path_factory: pytest.TempPathFactory) -> Iterator[None]:
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv(PLACE, str(tmp_path_factory.mktemp("solved-fields")))
        yield
