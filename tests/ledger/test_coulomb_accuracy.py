"""Whole runs whose pair sum errs: kept, or told, mended, recorded and carried into the answers."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import common_lines
from driftwell.coulomb.promise import TOLD, Broken
from driftwell.ledger.doubts import doubts
from driftwell.record.reader import Run, open_run
from driftwell.record.summary import summary
from driftwell.run import Result, run
from driftwell.scenario.read import read_scenario
from tests.inexact import Inexact, inexact  # noqa: F401
from tests.running import Unwatched

BALL = """
title    = "A ball of ions that swells by its own repulsion"
duration = "40 us"
species.ion = { mass = "40 u", charge = "1 e" }
coulomb  = { method = "tree", accuracy = 1e-4, softening = "5 um" }
stepping.step = "20 ns"
record.every = "1 us"

[[cloud]]
name    = "ball"
species = "ion"
count   = 150
weight  = 300
shape   = { kind = "ball", radius = "0.5 mm" }

[[question]]
name = "size"
ask  = "rms-size"
of   = "ball"
axis = "x"

[[question]]
name = "early size"
ask  = "rms-size"
of   = "ball"
axis = "x"
at   = "5 us"

[[question]]
name = "size at first"
ask  = "rms-size"
of   = "ball"
axis = "x"
at   = "start"
"""


BALL_COUNT = 150


class Listening(Unwatched):
    """Keeps what it is told."""

    def __init__(self) -> None:
        self.sentences: list[str] = []

    def told(self, sentence: str) -> None:
        self.sentences.append(sentence)


def swollen(folder: Path, *settings: str) -> tuple[Result, Run, list[str]]:
    """The ball's run, its record, and what was told on the way."""
    folder.mkdir(exist_ok=True)
    (folder / "ball.toml").write_text(BALL)
    watching = Listening()
    result = run(read_scenario(folder / "ball.toml", settings), folder / "run", watching)
    return result, open_run(result.folder), watching.sentences


def test_a_promise_that_is_kept_stands_in_record_and_answers(
    tmp_path: Path,
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance = 1e-7
    result, found, told = swollen(tmp_path)
    error = found.ledger["coulomb_error"]
    assert 0.0 < error.min() < error.max() <= 1e-4
    assert result.broken is None
    assert [] == doubts(result.ledger, result.broken)
    assert ["Coulomb sum: tree; the scenario says so; to 0.0001 of the force"] == told[:1]
    assert 2 == len(told)
    assert ("tree", told[0].removeprefix("Coulomb sum: tree; ")) == (
        found.header.coulomb_method,
        found.header.coulomb_because,
    )
    size, early, first = found.answers
    assert error.max() == size.coulomb_error
    assert error[found.ledger["time"] <= 5.0001e-6].max() == early.coulomb_error
    assert early.coulomb_error < size.coulomb_error
    assert 0.0 == first.coulomb_error
    assert result.answers == list(found.answers)
    (line,) = _of_forces(found.answers)
    assert line.startswith(f"coulomb error: rms {early.coulomb_error:.1e} to {error.max():.1e} of")
    assert "behind 2 of 3" in line
    text = "\n".join(summary(found))
    assert f"Coulomb force errs by {error[-1]:.1e} (rms) at the end" in text
    assert "less accurate than asked" not in text


def test_a_promise_that_is_broken_is_told_mended_and_kept(
    tmp_path: Path,
    inexact: Inexact,  # noqa: F811
) -> None:
    """The ball swells until the sum is no longer good; from that record on it is again."""
    inexact.tolerance = 1e-4
    result, found, told = swollen(tmp_path)
    error, time = found.ledger["coulomb_error"], found.ledger["time"]
    bad = np.flatnonzero(error > 1e-4)
    assert bad.size >= 1
    assert time[bad[0]] > 0.0
    # measured before it is mended, so that the record tells what was; good at the next
    assert (np.diff(bad) > 1).all()
    assert bad.size < error.size / 3
    assert isinstance(result.broken, Broken)
    assert error.max() == result.broken.worst
    assert not result.broken.unmended
    breaches = found.state()["coulomb/breaches"]
    assert time[bad].tolist() == breaches[:, 1].tolist()
    assert error[bad].tolist() == breaches[:, 2].tolist()
    assert (breaches[1:, 0] >= breaches[:-1, 1]).all()
    spans = breaches[:, 1] - breaches[:, 0]
    assert spans.min() > 0.0
    assert spans.sum() == pytest.approx(result.broken.seconds, rel=1e-12, abs=0.0)
    warned = [sentence for sentence in told if "more than coulomb.accuracy" in sentence]
    assert min(bad.size, TOLD) == len(warned)
    assert f"errs by {error[bad[0]]:.1e} of the force" in warned[0]
    (doubt,) = doubts(result.ledger, result.broken)
    assert f"{error.max():.1e} of the force (rms) at the worst look" in doubt
    assert f"for up to {result.broken.seconds * 1e6:.3g} us of the run" in doubt
    assert error.max() == found.answers[0].coulomb_error
    assert "less accurate than asked" in "\n".join(summary(found))
    assert found.state()["coulomb/settings"][2] < 1e-4


def test_a_run_whose_sum_cannot_be_mended_says_so(
    tmp_path: Path,
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance = inexact.best = 1e-2
    result, _, _ = swollen(tmp_path)
    assert result.broken is not None
    assert result.broken.unmended
    (doubt,) = doubts(result.ledger, result.broken)
    assert "could not be made smaller" in doubt
    assert "for up to 40 us of the run" in doubt


def test_a_direct_sum_has_no_error_to_tell(tmp_path: Path) -> None:
    result, found, told = swollen(tmp_path, "coulomb.method=direct")
    assert not found.ledger["coulomb_error"].any()
    assert ["Coulomb sum: direct; the scenario says so"] == told
    assert [0.0] * 3 == [answer.coulomb_error for answer in found.answers]
    assert [] == _of_forces(found.answers)
    assert found.ledger["torque_residual"].max() < 1e-14
    assert result.broken is None


def test_answers_of_an_inexact_sum_are_off_by_no_more_than_its_error(
    tmp_path: Path,
    inexact: Inexact,  # noqa: F811
) -> None:
    """The ball grows to several times its size: an error of the push shows in the size at most
    as it stands."""
    inexact.tolerance = 1e-5
    sizes = []
    for method in ("tree", "direct"):
        _, found, _ = swollen(tmp_path / method, f"coulomb.method={method}")
        sizes.append([answer.value for answer in found.answers])
    errors = found.answers[0].coulomb_error, open_run(tmp_path / "tree" / "run").answers[0]
    (size, _, first), (exact, _, same) = sizes
    assert first == same
    assert 3.0 * first < exact
    assert 0.0 == errors[0]
    assert 0.0 < abs(size / exact - 1.0) < errors[1].coulomb_error


def test_lost_charges_leave_the_promise_as_it_was(
    tmp_path: Path,
    inexact: Inexact,  # noqa: F811
) -> None:
    """Few are left at the end, too few for a tree: summed directly, they have no error."""
    inexact.tolerance = 1e-6
    wall = '{ name = "bore", kind = "sphere", radius = "0.9 mm" }'
    result, found, _ = swollen(tmp_path, f"wall=[{wall}]", "duration=5 us")
    left = BALL_COUNT - found.losses().size
    assert 2 <= left < 64
    error = found.ledger["coulomb_error"]
    assert 0.0 < error[0] <= error.max() <= 1e-4
    assert 0.0 == error[-1]
    assert result.broken is None


def test_a_run_with_the_tree_answers_as_one_with_the_direct_sum(tmp_path: Path) -> None:
    """Sizes agree within the error that was measured, and every account closes as it should."""
    given = ("coulomb.softening=0 m", "cloud.ball.count=4000", "cloud.ball.weight=10")
    given = (*given, "stepping.step=0.1 us", "duration=5 us")
    tree, direct = (
        swollen(tmp_path / method, *given, f"coulomb.method={method}")
        for method in ("tree", "direct")
    )
    assert "tree" == tree[1].header.coulomb_method
    error = tree[1].ledger["coulomb_error"]
    assert 0.0 < error.min() <= error.max() <= 1e-4
    for found, exact in zip(tree[1].answers, direct[1].answers, strict=True):
        assert exact.value == pytest.approx(found.value, rel=error.max(), abs=0.0)
    assert tree[1].answers[0].value != direct[1].answers[0].value
    row = tree[0].ledger
    assert [] == doubts(row, tree[0].broken)
    assert row.third_law_residual <= 1e-14
    assert row.momentum_residual <= 1e-13
    # the tree's forces have a torque together, and the allowance covers what it did
    assert 1e-13 < row.torque_residual < error.max()
    assert 1e-13 < row.angular_residual < 3.0 * row.angular_allowance
    assert row.coulomb == pytest.approx(direct[0].ledger.coulomb, rel=error.max(), abs=0.0)


def _of_forces(answers: Sequence[Answer]) -> list[str]:
    """What is said of the forces behind the answers."""
    return [line for line in common_lines(answers, 200) if "error: rms" in line]
