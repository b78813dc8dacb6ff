"""The number of threads of parallel kernels: as asked, within what numba was started with."""

from __future__ import annotations

from collections.abc import Iterator

import numba
import pytest

from driftwell.errors import DriftwellError
from driftwell.kernels import threads as module
from driftwell.kernels.threads import use_threads

LIMIT = int(numba.config.NUMBA_NUM_THREADS)


@pytest.fixture(autouse=True)
def _as_before() -> Iterator[None]:
    before = numba.get_num_threads()
    yield
    numba.set_num_threads(before)


def test_as_many_threads_are_used_as_asked_up_to_the_limit() -> None:
    for asked in range(1, LIMIT + 3):
        assert min(asked, LIMIT) == use_threads(asked)
        if asked > 1:
            assert min(asked, LIMIT) == numba.get_num_threads()


def test_threads_that_cannot_be_started_are_told_in_one_line(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def refused(count: int) -> None:
        raise ValueError("No threading layer could be loaded.\nHINT:\nget one")

    monkeypatch.setattr(numba, "set_num_threads", refused)
    monkeypatch.setattr(numba.config, "NUMBA_NUM_THREADS", 4)
    with pytest.raises(
        DriftwellError, match=r"^2 threads cannot be started \(No thr.* one\)"
    ) as told:
        use_threads(2)
    assert "--threads 1" in str(told.value)
    assert "\n" not in str(told.value)
    assert 1 == use_threads(1)


def test_compilation_switched_off_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module.numba.config, "DISABLE_JIT", 1)
    with pytest.raises(DriftwellError, match="NUMBA_DISABLE_JIT is set"):
        use_threads(1)
