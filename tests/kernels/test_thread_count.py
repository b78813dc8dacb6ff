"""The number of threads of parallel kernels: as asked, within what numba was started with."""

from __future__ import annotations

import numba
import pytest

from driftwell.errors import DriftwellError
from driftwell.kernels.threads import on_threads

LIMIT = int(numba.config.NUMBA_NUM_THREADS)


@pytest.mark.parametrize("asked", [1, LIMIT, LIMIT + 2])
def test_as_many_threads_are_used_as_asked_up_to_the_limit(asked: int) -> None:
    """And afterwards as many as before."""
    before = numba.get_num_threads()
    with on_threads(asked) as given:
        assert min(asked, LIMIT) == given == numba.get_num_threads()
    assert before == numba.get_num_threads()


def test_threads_that_cannot_be_started_are_told_in_one_line(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def refused(count: int) -> None:
        raise ValueError("No threading layer could be loaded.\nHINT:\nget one")

    monkeypatch.setattr(numba, "set_num_threads", refused)
    monkeypatch.setattr(numba.config, "NUMBA_NUM_THREADS", 4)
    with pytest.raises(DriftwellError) as told, on_threads(2):
        raise AssertionError("must not come here")
    assert str(told.value).startswith("2 threads cannot be started (No threading layer could be")
    assert "--threads 1" in str(told.value)
    assert "\n" not in str(told.value)


def test_one_thread_needs_no_layer_of_threads(monkeypatch: pytest.MonkeyPatch) -> None:
    """Where numba was started for one thread only, as `--threads 1` does."""
    monkeypatch.setattr(numba, "set_num_threads", None)
    monkeypatch.setattr(numba.config, "NUMBA_NUM_THREADS", 1)
    with on_threads(4) as given:
        assert 1 == given


def test_compilation_switched_off_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(numba.config, "DISABLE_JIT", 1)
    with pytest.raises(DriftwellError, match="NUMBA_DISABLE_JIT is set"), on_threads(1):
        raise AssertionError("must not come here")
