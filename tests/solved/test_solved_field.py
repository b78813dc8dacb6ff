"""The solved field of a scenario: kept, mapped, put together from voltages; its edges absorb."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.assembly import assembled
from driftwell.errors import ScenarioError
from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import Role
from driftwell.forms.body import Body
from driftwell.record.earlier import differences
from driftwell.record.reader import Run, open_run
from driftwell.run import Progress, run
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.solved import solved_field as module
from driftwell.solved.acting import ActingField, acting_field
from driftwell.solved.content import contents
from driftwell.solved.summary import summary
from tests.running import Unwatched
from tests.scenario.good_scenarios import toml_file

Floats = NDArray[np.float64]

LEFT = {"kind": "rectangle", "low": ["5 mm", "-20 mm"], "high": ["6 mm", "-1 mm"]}
RIGHT = {"kind": "rectangle", "low": ["5 mm", "1 mm"], "high": ["6 mm", "20 mm"]}
COMMON = {"field_accuracy": 1e-3, "region": {"r": "4 mm", "z": ["-15 mm", "15 mm"]}}


def tubes(folder: Path, name: str = "tubes", **changes: Any) -> LoadedScenario:
    """Two tubes in line, at 100 V with 20 V of RF and at 0 V, and 6 ions within."""
    table: dict[str, Any] = {
        "title": "two tubes",
        "duration": "2 us",
        "record": {"every": "0.5 us"},
        "cloud": [
            {
                "name": "ions",
                "species": "proton",
                "count": 6,
                "shape": {
                    "kind": "line",
                    "start": ["1 mm", "0 mm", "-9 mm"],
                    "end": ["0 mm", "1 mm", "-3 mm"],
                },
            }
        ],
        "electrodes": COMMON,
        "electrode": [
            {
                "name": "left",
                "voltage": {"offset": "100 V", "amplitude": "20 V", "frequency": "2 MHz"},
                "shape": [LEFT],
            },
            {"name": "right", "voltage": "10 V", "shape": [RIGHT]},
        ],
        "question": [{"name": "left", "ask": "fraction-left", "of": "ions"}],
    }
    path = folder / f"{name}.toml"
    path.write_text(toml_file(table | changes))
    return read_scenario(path)


@pytest.fixture(scope="module")
def acting(tmp_path_factory: pytest.TempPathFactory) -> ActingField:
    loaded = tubes(tmp_path_factory.mktemp("acting"))
    found = acting_field(loaded.scenario, loaded.folder)
    assert found is not None
    return found


@pytest.fixture(scope="module")
def ran(tmp_path_factory: pytest.TempPathFactory) -> Run:
    folder = tmp_path_factory.mktemp("ran")
    result = run(tubes(folder), folder / "run", Unwatched())
    return open_run(result.folder)


def test_a_second_asking_is_answered_from_what_is_kept(
    acting: ActingField, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Other voltages, names and places need no new solution; another shape does."""

    def solves(*given: object) -> None:
        raise ArithmeticError("solved anew")

    monkeypatch.setattr(module, "solve_drawn", solves)

    def with_right(shape: dict[str, Any]) -> ActingField | None:
        electrode = [
            {"name": "a", "voltage": "-3 kV", "shape": [LEFT]},
            {"name": "b", "voltage": "1 V", "shape": [shape]},
        ]
        common = {**COMMON, "centre": ["0 mm", "0 mm", "2 mm"]}
        loaded = tubes(tmp_path, electrodes=common, electrode=electrode)
        return acting_field(loaded.scenario, loaded.folder)

    found = with_right(RIGHT)
    assert found is not None
    np.testing.assert_array_equal(
        acting.solved.map.coefficients, found.solved.map.coefficients, strict=True
    )
    assert acting.solved.digest == found.solved.digest
    with pytest.raises(ArithmeticError, match="solved anew"):
        with_right({**RIGHT, "high": ["6 mm", "21 mm"]})


@pytest.mark.parametrize("t", [0.0, 1.3e-7])
def test_the_field_in_a_run_is_the_solution_with_the_voltages_of_the_time(
    acting: ActingField, t: float
) -> None:
    """At random places, off the axis; the tubes stand about a centre of their own."""
    random = np.random.default_rng(4)
    r, z, angle = (
        3.9e-3 * random.random(40),
        14e-3 * random.uniform(-1, 1, 40),
        6.28 * random.random(40),
    )
    places = np.stack([r * np.cos(angle), r * np.sin(angle), z], axis=1)
    found = evaluate([], {}, places + np.array(acting.centre), t, more=acting.packed())
    drawn = np.stack([r, z], axis=1)
    volts = np.array([100.0 + 20.0 * np.cos(2.0 * np.pi * 2e6 * t), 10.0])
    np.testing.assert_allclose(volts, acting.voltages(t), rtol=1e-12)
    solution = acting.solved.solution
    np.testing.assert_allclose(volts @ solution.potential(drawn), found.potential, rtol=1e-4)
    radial, along = np.moveaxis(np.tensordot(volts, solution.field(drawn), axes=1), 1, 0)
    expected = np.stack([radial * np.cos(angle), radial * np.sin(angle), along], axis=1)
    scale = np.sqrt((expected**2).sum(axis=1).mean())
    np.testing.assert_allclose(expected, found.electric, atol=3e-3 * scale)
    rate = -20.0 * 2.0 * np.pi * 2e6 * np.sin(2.0 * np.pi * 2e6 * t)
    np.testing.assert_allclose(
        rate * solution.potential(drawn)[0], found.potential_rate, rtol=1e-4, atol=1e-3
    )


def test_constant_and_alternating_voltages_are_two_fields(acting: ActingField) -> None:
    packed = acting.packed()
    assert [Role.ELECTRIC] * 2 == [each.role for each in packed]


def test_a_charge_that_leaves_the_region_is_lost_at_its_edge(tmp_path: Path) -> None:
    cloud = {
        "name": "ion",
        "species": "proton",
        "shape": {"kind": "points", "positions": [["3 mm", "0 mm", "14 mm"]]},
        "motion": {"velocity": ["0 m/s", "0 m/s", "1e5 m/s"]},
    }
    question = [{"name": "left", "ask": "fraction-left", "of": "ion"}]
    loaded = tubes(tmp_path, cloud=[cloud], question=question, duration="1 us")
    found = open_run(run(loaded, tmp_path / "run", Unwatched()).folder)
    assert "all lost" == found.outcome.word
    (loss,) = found.losses()
    assert "edge of the electrodes' field, high z" == found.header.walls[loss["wall"]]
    assert 15e-3 == pytest.approx(loss["position"][2], rel=1e-12, abs=0.0)
    assert abs(found.ledger["energy_residual"][-1]) < 1e-6


def test_a_charge_that_meets_an_electrode_is_lost_on_its_surface(tmp_path: Path) -> None:
    """The edge in r lies within the wall of the tubes: the tube is met first."""
    cloud = {
        "name": "ion",
        "species": "proton",
        "shape": {"kind": "points", "positions": [["0 mm", "3 mm", "10 mm"]]},
        "motion": {"velocity": ["0 m/s", "2e5 m/s", "0 m/s"]},
    }
    question = [{"name": "left", "ask": "fraction-left", "of": "ion"}]
    loaded = tubes(
        tmp_path,
        cloud=[cloud],
        question=question,
        electrodes={**COMMON, "region": {"r": "5.2 mm", "z": ["-15 mm", "15 mm"]}},
    )
    found = open_run(run(loaded, tmp_path / "run", Unwatched()).folder)
    (loss,) = found.losses()
    assert "right" == found.header.walls[loss["wall"]]
    assert 5e-3 == pytest.approx(np.hypot(*loss["position"][:2]), rel=1e-9, abs=0.0)


def test_charges_born_outside_the_region_are_refused_with_what_to_do(tmp_path: Path) -> None:
    loaded = tubes(
        tmp_path, electrodes={**COMMON, "region": {"r": "4 mm", "z": ["-8 mm", "15 mm"]}}
    )
    with pytest.raises(ScenarioError) as refused:
        assembled(loaded)
    text = str(refused.value)
    assert '[[cloud]] "ions": 1 of 6 charges begin' in text
    assert "larger `region`" in text


def test_a_run_closes_its_account_and_its_answers_carry_the_field_error(ran: Run) -> None:
    """With RF on one tube the work of the drive is a part of it."""
    ledger = ran.ledger
    assert 1e-9 < np.abs(ledger["energy_residual"]).max() < 1e-4
    assert np.abs(ledger["work_drive"]).max() > 0.0
    assert np.abs(ledger["momentum_residual"]).max() < 1e-12
    assert 0.0 < ran.header.field_error < 1e-3
    assert ran.header.field_error == ran.answers[0].field_error
    assert ran.header.field_digest


def test_the_content_about_the_centre_is_that_of_the_solution(acting: ActingField) -> None:
    """Two like tubes at 100 V and 10 V: the constant is the mean, the first term the odd part."""
    steady = contents(acting, 1e-3)[0]
    assert 1.0 == steady.course
    assert 55.0 == pytest.approx(steady.terms[0].amplitude, rel=0.02)
    point = np.array([[0.0, 1e-4], [0.0, -1e-4]])
    units = acting.solved.solution.potential(point)
    slope = np.array([100.0, 10.0]) @ (units[:, 0] - units[:, 1]) / 2e-4
    assert slope * 1e-3 == pytest.approx(steady.terms[1].amplitude, rel=1e-3)


def test_the_table_names_every_electrode_and_the_error_reached(
    acting: ActingField, tmp_path: Path
) -> None:
    told = "\n".join(summary(acting, tubes(tmp_path).scenario.electrode, None, 90))
    for part in ("left", "right", "pF", "field error", "r up to 4 mm", "dipole"):
        assert part in told


class Stopping(Unwatched):
    """An observer that asks to stop on the way."""

    calls = 0

    def goes_on(self, progress: Progress) -> bool:
        self.calls += 1
        return self.calls < 3


def test_a_run_stopped_in_a_solved_field_goes_on_to_the_last_bit(ran: Run, tmp_path: Path) -> None:
    """On two threads instead of one, with the field read again from where it is kept."""
    loaded = tubes(tmp_path)
    assert "stopped" == run(loaded, tmp_path / "run", Stopping()).outcome.word
    result = run(loaded, tmp_path / "run", Unwatched(), threads=2)
    assert ran.outcome.word == result.outcome.word
    found = open_run(result.folder)
    for expected, again in zip(ran.trajectory, found.trajectory, strict=True):
        assert np.asarray(expected).tobytes() == np.asarray(again).tobytes()
    assert ran.ledger.tobytes() == found.ledger.tobytes()


def test_going_on_in_a_field_solved_anew_is_told(tmp_path: Path) -> None:
    """Where its numbers differ: as after an update of the linear algebra library."""
    told: list[str] = []

    class Listening(Unwatched):
        def told(self, sentence: str) -> None:
            told.append(sentence)

    loaded = tubes(tmp_path)
    run(loaded, tmp_path / "run", Stopping())
    earlier = open_run(tmp_path / "run")
    assert not differences(earlier, earlier.header.field_digest)
    (sentence,) = differences(earlier, "0123456789abcdef")
    assert "a solved field of digest" in sentence
    assert "gone on with 0123456789abcdef" in sentence
    run(loaded, tmp_path / "run", Listening())
    assert not any("solved field" in each for each in told)


def test_what_is_curved_more_where_charges_are_held_is_reckoned_with(acting: ActingField) -> None:
    """omega^2 = q/m times the curvature there, where that is more than usual; places outside the
    map change nothing."""
    steady = tuple(course for course in acting.courses if course.waveform == 1.0)
    acting, flat = replace(acting, courses=steady), replace(acting, courses=steady)
    vars(flat)["_bends"] = [0.0]
    body = Body("ion", 1e-25, 1.6e-19)
    region = np.array(flat.solved.map.region())
    own = region.mean(axis=1) + 0.1 * np.ptp(region, axis=1)
    place = np.array([[0.6 * own[0]], [0.8 * own[0]], [own[1]]])
    place += np.array(flat.centre)[:, None]
    (course,) = steady
    bends = flat.solved.map.curvature(own, course.weight)[0, ::2, ::2]
    rate = np.sqrt(body.charge_to_mass * np.abs(np.linalg.eigvalsh(bends)).max())
    assert rate == pytest.approx(flat.rates(body, 0.0, place)["oscillation"], rel=1e-9, abs=0.0)
    assert rate < acting.rates(body, 0.0)["oscillation"]
    usual = acting.rates(body, 0.0)
    assert usual == acting.rates(body, 0.0, place) == acting.rates(body, 0.0, place + 1.0)
    assert 0.0 == flat.rates(body, 0.0, place + 1.0)["oscillation"]
