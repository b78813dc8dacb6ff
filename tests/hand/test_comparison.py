"""After a run, answers stand beside what a formula says to the same question, and only there."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from driftwell.answers.answer import Answer
from driftwell.cli.info import info
from driftwell.forms.paragraph import paragraph
from driftwell.hand.comparison import Comparison, comparison_lines, comparisons
from driftwell.hand.formula import Formula, HandValue
from driftwell.hand.table import hand_answer
from tests.hand.scenes import U, cloud, ions, scene
from tests.running import carried_out

FORMULA = Formula("a law", "x = y", "a book", "all")
BALL = {"kind": "ball", "radius": "1 mm", "placing": "even"}
TRAP = [
    {
        "name": "rods",
        "kind": "rf-quadrupole",
        "radius": "3 mm",
        "voltage": {"amplitude": "100 V", "frequency": "2 MHz"},
    }
]
MAGNET = {"name": "magnet", "kind": "uniform-magnetic", "strength": "3 T"}
WELL = {
    "name": "well",
    "kind": "static-quadrupole",
    "axial_frequency": {"species": "ion", "value": "100 kHz"},
}


def told(value: float, error: float | None, inside: bool = True, hand: float = 2.0) -> str:
    """The comparison of a value and its error with `hand`, on one line."""
    answer = Answer("size", "rms-size", value, "m", error, "")
    by_hand = HandValue(FORMULA, "size", hand, "m", inside, "so it is")
    lines = comparison_lines([Comparison(answer, by_hand)], 100, "+-")
    assert "By hand, and by the run:" == lines[0]
    assert max(map(len, lines)) <= 100
    return " ".join(" ".join(lines[1:]).split())


@pytest.mark.parametrize(
    ("value", "error", "inside", "words"),
    [
        (2.1, 0.1, True, "by hand 2 m (a law); the run 2.10 +- 0.10 m: 5 % more, 1 of its error"),
        (2.1, 0.1, True, "They agree; the formula is within its range: so it is"),
        (1.9, 0.01, True, "5 % less, 10 of its error bars. The formula is within its range"),
        (1.9, 0.01, True, "so look at the step, at the number of charges"),
        (2.01, 0.0001, True, "0.5 % more, 1e+02 of its error bars. They agree"),
        (1.0, 0.1, False, "50 % less, 10 of its error bars. Outside the formula's range: so it is"),
        (2.1, None, True, "the run 2.1 +- unknown m: 5 % more. The formula is within its range"),
        (2.0, 0.1, True, "the same to all digits shown. They agree"),
    ],
)
def test_the_difference_is_told_in_words(
    value: float, error: float | None, inside: bool, words: str
) -> None:
    assert words in told(value, error, inside)


def test_a_current_of_electrons_is_more_where_it_is_further_below_zero() -> None:
    assert "5 % more, 10 of its error bars" in told(-2.1, 0.01, hand=-2.0)
    assert "5 % less, 10 of its error bars" in told(-1.9, 0.01, hand=-2.0)


def test_a_run_without_anything_to_compare_says_nothing() -> None:
    assert [] == comparison_lines([], 80)
    assert paragraph("", 80) == []


def asked(folder: Path, question: dict[str, Any], **sections: Any) -> float | None:
    """What a hand calculation answers; None where it has no answer."""
    given = {"name": "asked", "of": "load", **question}
    found = scene(folder, question=[given], **sections)
    value = hand_answer(found.scenario.question[0], found)
    return None if value is None else value.value


def test_only_what_the_formula_is_about_is_compared(tmp_path: Path) -> None:
    """Of a ball in free space its later size; in a trap, in a wall, or hot, nothing."""
    given: dict[str, Any] = {"species": ions(100.0 * U), "coulomb": {"softening": "20 um"}}
    ball = [cloud(BALL, weight=500)]
    size = {"ask": "rms-size", "axis": "x"}
    free = asked(tmp_path, size, cloud=ball, **given)
    assert free is not None
    assert free > 1e-3 / 5.0**0.5
    box = [{"name": "can", "kind": "sphere", "radius": "2 mm"}]
    hot = [cloud(BALL, weight=500, motion={"temperature": "1e5 K"})]
    assert asked(tmp_path, size, cloud=ball, wall=box, **given) is None
    assert asked(tmp_path, size, cloud=ball, field=TRAP, **given) is None
    assert asked(tmp_path, size, cloud=hot, **given) is None
    assert asked(tmp_path, {**size, "at": "start"}, cloud=ball, **given) is None
    density = {"ask": "plasma-frequency", "at": "start"}
    assert asked(tmp_path, density, cloud=ball, **given) is not None
    assert asked(tmp_path, {**density, "at": "end"}, cloud=ball, **given) is None


def test_the_frequency_that_is_asked_for_is_found_by_axis_and_neighbourhood(
    tmp_path: Path,
) -> None:
    """Of a Penning trap across, only `near` says which of the two is meant."""
    given: dict[str, Any] = {"species": ions(100.0 * U), "cloud": [cloud(BALL, count=10)]}
    fields = [MAGNET, WELL]
    question = {"ask": "frequency", "axis": "z"}
    axial = asked(tmp_path, question, field=fields, **given)
    assert 1e5 == pytest.approx(axial, rel=1e-12, abs=0.0)
    across = {**question, "axis": "x"}
    assert asked(tmp_path, across, field=fields, **given) is None
    slow = asked(tmp_path, {**across, "near": "11.6 kHz"}, field=fields, **given)
    fast = asked(tmp_path, {**across, "near": "450 kHz"}, field=fields, **given)
    assert slow is not None
    assert fast is not None
    assert 1e10 / 2.0 == pytest.approx(slow * fast, rel=1e-9, abs=0.0)
    assert asked(tmp_path, {**across, "near": "30 kHz"}, field=fields, **given) is None
    secular = asked(tmp_path, across, field=TRAP, **given)
    assert secular is not None
    assert asked(tmp_path, {**across, "near": "1 MHz"}, field=TRAP, **given) is None


def test_a_run_tells_beside_its_answers_what_the_formula_says(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """200 charges that fly apart for 1 us; their graininess is a few percent."""
    run = carried_out(
        tmp_path,
        1e-6,
        species=ions(100.0 * U),
        cloud=[cloud(BALL, count=200, weight=5000)],
        coulomb={"softening": "20 um"},
        stepping={"step": "20 ns"},
        question=[
            {"name": "size", "ask": "rms-size", "of": "load", "axis": "x"},
            {"name": "energy", "ask": "kinetic-energy", "of": "load"},
            {"name": "warmth", "ask": "temperature", "of": "load"},
        ],
    )
    found = comparisons(run)
    assert ["size", "energy"] == [each.answer.name for each in found]
    assert all(each.by_hand.inside and abs(each.apart) < 0.1 for each in found)
    assert 0 == info(run.folder)
    printed = capsys.readouterr().out
    assert "By hand, and by the run:\n  size: by hand 708" in printed
    assert "(Coulomb explosion of a uniform ball); the run" in " ".join(printed.split())
