"""How the cores are shared, by what is left, how large it is and how much memory there is."""

from __future__ import annotations

import pytest

from driftwell.coulomb.form import Coulomb
from driftwell.study.cores import Load, shared, threads_pay_from

GB = 10**9


def load(left: int, charges: int = 10_000, memory: int = GB, free: int | None = None) -> Load:
    return Load(left, charges, 512, memory, free)


@pytest.mark.parametrize(
    ("left", "charges", "cores", "workers", "threads"),
    [
        (200, 8, 2, 2, 1),
        (200, 100_000, 2, 2, 1),
        (64, 100_000, 8, 8, 1),
        (1, 100_000, 8, 1, 8),
        (1, 511, 8, 1, 1),
        (2, 512, 8, 2, 4),
        (3, 100, 8, 3, 1),
        # two rounds, the second with one alone, against five on all cores: 2 > 5/1.8^2
        (5, 100_000, 4, 1, 4),
        # but threads gain less with few charges: 2 < 5/1.5^2, and 3/1.5 is as long
        (5, 600, 4, 4, 1),
        (8, 100_000, 4, 4, 1),
        (2, 100_000, 2, 2, 1),
        (3, 100_000, 2, 1, 2),
    ],
)
def test_many_runs_go_side_by_side_and_few_large_ones_on_more_threads(
    left: int, charges: int, cores: int, workers: int, threads: int
) -> None:
    found = shared(load(left, charges), cores)
    assert (workers, threads) == (found.workers, found.threads)


def test_no_more_runs_go_side_by_side_than_fit_in_memory() -> None:
    found = shared(load(100, memory=10 * GB, free=35 * GB), 12)
    assert (3, 4) == (found.workers, found.threads)
    assert found.because.endswith("; no more of them fit in memory at 10 GB each")
    alone = shared(load(100, memory=10 * GB, free=GB), 12)
    assert (1, 12) == (alone.workers, alone.threads)


@pytest.mark.parametrize(
    ("workers", "threads", "expected"),
    [
        (3, None, (3, 2)),
        (None, 4, (2, 4)),
        (5, 3, (5, 3)),
        (100, None, (20, 1)),
        (None, 64, (1, 64)),
    ],
)
def test_what_the_user_asks_for_is_done(
    workers: int | None, threads: int | None, expected: tuple[int, int]
) -> None:
    found = shared(load(20), 8, workers, threads)
    assert expected == (found.workers, found.threads)
    assert found.because.endswith("as asked for")


@pytest.mark.parametrize(
    ("left", "charges", "cores", "told"),
    [
        (
            16,
            8,
            2,
            "2 runs side by side on 1 thread each: 16 runs are left, and threads pay only "
            "from 512 charges on",
        ),
        (
            1,
            10_000,
            2,
            "one run at a time on 2 threads: 1 run is left of up to 10000 charges: this ends "
            "soonest",
        ),
        (
            16,
            10_000,
            2,
            "2 runs side by side on 1 thread each: 16 runs are left, and a run on one "
            "thread wastes nothing",
        ),
    ],
)
def test_why_is_told_in_words(left: int, charges: int, cores: int, told: str) -> None:
    assert told == shared(load(left, charges), cores).because


def test_without_a_coulomb_sum_threads_pay_later() -> None:
    assert (512, 16384) == (
        threads_pay_from(Coulomb()),
        threads_pay_from(Coulomb(method="off")),
    )
