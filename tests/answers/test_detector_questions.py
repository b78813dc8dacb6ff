"""Fractions left and through, and arrival times."""

from __future__ import annotations

import numpy as np
import pytest
from recorded_by_hand import CROSSING, LOSS, Recorded, asked, facts, near, passing, table

from driftwell.answers.sampling import fraction_error

GAUSSIAN = 2.354820045


def losing(times: list[float], count: int = 10) -> Recorded:
    """A cloud whose first charges are lost at `times`; a run of 1 ms."""
    rows = [(time, i, 0) for i, time in enumerate(times)]
    return Recorded({"load": facts(count=count)}, lost=table(LOSS, rows))


def test_fraction_left_counts_losses_up_to_the_time_asked() -> None:
    recorded = losing([1e-4, 2e-4, 5e-4])
    values = {
        at: asked("fraction-left", at=at).answer(recorded).value
        for at in ("start", "0.2 ms", "0.4 ms", "end")
    }
    assert values == {"start": 1.0, "0.2 ms": 0.8, "0.4 ms": 0.8, "end": 0.7}


def test_fraction_left_counts_its_own_cloud_only() -> None:
    other = facts("other", count=5, index=1, first_id=10)
    recorded = losing([1e-4])
    recorded.clouds["other"] = other
    assert asked("fraction-left", of="other").answer(recorded).value == 1.0


@pytest.mark.parametrize("lost", [0, 10])
def test_fraction_of_none_or_all_is_not_certain(lost: int) -> None:
    found = asked("fraction-left").answer(losing([1e-5] * lost))
    assert found.value == 1.0 - lost / 10
    assert near(0.5 / 11.0, rel=1e-12) == found.error


def test_fraction_through_counts_every_charge_once() -> None:
    rows = [(1e-4, 3, 0, 0, 1), (2e-4, 3, 0, 0, -1), (3e-4, 3, 0, 0, 1), (1e-4, 4, 0, 1, 1)]
    recorded = Recorded({"load": facts(count=8)}, ["exit", "side"], crossed=table(CROSSING, rows))
    found = asked("fraction-through", of="exit").answer(recorded)
    assert found.value == 1 / 8
    assert near(fraction_error(1, 8), rel=1e-12) == found.error
    assert found.note == "1 of 8 charges"


def two_clouds(weight: float) -> Recorded:
    """Half of "light" (4) and all of "heavy" (2, of this weight) pass "exit"."""
    rows = [(1e-4, 0, 0, 0, 1), (2e-4, 1, 0, 0, 1), (5e-4, 4, 1, 0, 1), (7e-4, 5, 1, 0, 1)]
    clouds = {
        "light": facts("light", count=4),
        "heavy": facts("heavy", count=2, index=1, first_id=4, weight=weight),
    }
    return Recorded(clouds, ["exit"], crossed=table(CROSSING, rows))


def test_fraction_through_of_all_clouds_weighs_real_particles() -> None:
    assert asked("fraction-through", of="exit").answer(two_clouds(1.0)).value == 4 / 6
    found = asked("fraction-through", of="exit").answer(two_clouds(8.0))
    assert near((2 + 16) / (4 + 16), rel=1e-12) == found.value
    # As uncertain as 400/132 equal charges would be.
    trials = 20.0**2 / (4.0 + 128.0)
    assert found.error == near(fraction_error(0.9 * trials, trials), rel=1e-12)


def test_a_named_cloud_is_counted_alone() -> None:
    recorded = two_clouds(8.0)
    assert asked("fraction-through", of="exit", cloud="light").answer(recorded).value == 0.5
    found = asked("arrival-time", of="exit", cloud="light").answer(recorded)
    assert near(1.5e-4, rel=1e-12) == found.value


def test_arrival_times_of_unequal_macro_particles_need_a_cloud() -> None:
    with pytest.raises(Exception, match="name one with `cloud`"):
        asked("arrival-time", of="exit").answer(two_clouds(8.0))


def test_arrival_time_is_that_of_the_first_passage() -> None:
    rows = [(9e-4, 0, 0, 0, -1), (1e-4, 0, 0, 0, 1), (3e-4, 1, 0, 0, 1)]
    recorded = Recorded({"load": facts(count=2)}, ["exit"], crossed=table(CROSSING, rows))
    found = asked("arrival-time", of="exit").answer(recorded)
    assert near(2e-4, rel=1e-12) == found.value
    assert near(1e-4, rel=1e-12) == found.error
    assert found.unit == "s"


def test_statistics_of_arrival_times_are_those_of_the_pulse() -> None:
    times = 5e-6 + 3e-9 * np.random.default_rng(1).normal(size=4000)
    mean, rms, fwhm = (
        asked("arrival-time", of="exit", statistic=which).answer(passing(times))
        for which in ("mean", "rms", "fwhm")
    )
    assert times.mean() == near(mean.value, rel=1e-12)
    assert 3e-9 / np.sqrt(4000) == near(mean.error, rel=0.05)
    assert times.std() == near(rms.value, rel=1e-6)
    assert 3e-9 / np.sqrt(8000) == near(rms.error, rel=0.3)
    assert fwhm.error is not None
    assert pytest.approx(3e-9 * GAUSSIAN, abs=3.0 * fwhm.error) == fwhm.value
    assert fwhm.error < 0.1 * fwhm.value


def test_too_few_passages_say_how_many_are_needed() -> None:
    recorded = passing(np.array([1e-3, 2e-3]), count=5)
    with pytest.raises(Exception, match='2 charges passed detector "exit"; needs at least 20'):
        asked("arrival-time", of="exit", statistic="fwhm").answer(recorded)
    found = asked("arrival-time", of="exit", statistic="rms").answer(recorded)
    assert (found.value, found.error) == (near(5e-4), None)
    assert "too few" in found.note
