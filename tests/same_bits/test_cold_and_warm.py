"""The same bits from a process that compiles and from one that loads what was compiled."""

from __future__ import annotations

from pathlib import Path

from tests.same_bits.test_threads import executed


def test_a_run_that_compiles_and_one_that_loads_leave_the_same_record(tmp_path: Path) -> None:
    """A sum compiled apart for each of its callers would be linked from whichever came first."""
    cache = tmp_path / "cache"
    cold, warm = (executed(tmp_path / name, 1, cache) for name in ("cold", "warm"))
    assert len(list(cache.rglob("*.nbc"))) > 0
    assert cold.trajectory[1].tobytes() == warm.trajectory[1].tobytes()
    for rows in ("moments", "losses", "crossings", "ledger", "trace/value"):
        assert cold.rows(rows).tobytes() == warm.rows(rows).tobytes(), rows
