"""The same bits from a process that compiles and from one that loads what was compiled."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import driftwell
from tests.same_bits.test_threads import executed


def test_a_run_that_compiles_and_one_that_loads_leave_the_same_record(tmp_path: Path) -> None:
    """A sum compiled apart for each of its callers would be linked from whichever came first."""
    cache = tmp_path / "cache"
    cold, warm = (executed(tmp_path / name, 1, cache) for name in ("cold", "warm"))
    assert len(list(cache.rglob("*.nbc"))) > 0
    assert cold.trajectory[1].tobytes() == warm.trajectory[1].tobytes()
    for rows in ("moments", "losses", "crossings", "ledger", "trace/value"):
        assert cold.rows(rows).tobytes() == warm.rows(rows).tobytes(), rows


SUMS = """
import hashlib
import numpy as np
from driftwell.coulomb import direct
from driftwell.coulomb.sampled import sampled_field
random = np.random.default_rng(6)
digest = hashlib.sha256()
kernels = {names}
for name in kernels:
    for n in (3, 8, 30, 64, 100, 600):
        place, charge = random.normal(size=(3, n)), random.uniform(-1.0, 1.0, n)
        out, work = np.zeros((3, n)), direct.workspace(n)
        if name.endswith("potentials"):
            getattr(direct, name)(place, charge, 0.0, 9e9, out[0])
        elif name == "sampled_field":
            sampled_field(np.arange(n), place, charge, 0.0, 9e9, out)
        elif n > 64 or name == "direct_field":
            getattr(direct, name)(place, charge, 0.0, 9e9, work, out)
        digest.update(out.tobytes())
print(digest.hexdigest())
"""


def digest_of_sums(cache: Path, names: list[str]) -> str:
    """What a new process finds, kernels used in the order of their names."""
    sources = Path(driftwell.__file__).resolve().parent.parent
    done = subprocess.run(
        [sys.executable, "-c", SUMS.format(names=names)],
        env={**os.environ, "PYTHONPATH": str(sources), "DRIFTWELL_CACHE": str(cache)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout.strip()


def test_all_sums_are_the_same_from_a_process_that_compiles_and_one_that_loads(
    tmp_path: Path,
) -> None:
    """Also where some were compiled by another process before, in another order.

    Two compilations of each take most of the 20 s.
    """
    names = ["direct_field", "mixed_field", "potentials", "sampled_field"]
    threaded = ["threaded_direct_field", "threaded_potentials"]
    cold = digest_of_sums(tmp_path / "one", names + threaded)
    assert cold == digest_of_sums(tmp_path / "one", names + threaded)
    digest_of_sums(tmp_path / "two", threaded[::-1])
    assert cold == digest_of_sums(tmp_path / "two", names + threaded)
