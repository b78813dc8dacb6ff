"""Values that do not fit together are told, each at the key to change."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.errors import ScenarioError
from driftwell.scenario.read import read_scenario
from tests.scenario.good_scenarios import BEAM, PAIR, TRAP

BALL = """\
[[cloud]]
name = "{name}"
species = "{species}"
count = {count}
shape = {{ kind = "ball", radius = "1 um" }}
"""


def told(folder: Path, text: str, *settings: str) -> list[str]:
    path = folder / "s.toml"
    path.write_text(text)
    try:
        read_scenario(path, settings)
    except ScenarioError as fault:
        return str(fault).replace(f"{folder}/", "").split("\n")
    return []


@pytest.mark.parametrize(
    ("text", "old", "new", "expected"),
    [
        (
            TRAP,
            '"10 us"',
            '"3 ms"',
            's.toml:45 [record] every = "3 ms": must be at most the duration, 2 ms.',
        ),
        (
            TRAP,
            '"10 us"',
            '"1 ns"',
            's.toml:45 [record] every = "1 ns": would be 2e+06 times in 2 ms; '
            "needs at most 1000000.",
        ),
        (
            BEAM,
            'snapshots = "10 ns"',
            'snapshots = "30 ns"',
            's.toml:77 [record] snapshots = "30 ns": must be at most the duration, 20 ns.',
        ),
        (
            TRAP,
            '"auto"',
            '"3 ms"',
            's.toml:42 [stepping] step = "3 ms": must be at most the duration, 2 ms.',
        ),
        (
            TRAP,
            '"auto"',
            '"1e-20 s"',
            's.toml:42 [stepping] step = "1e-20 s": would be 2e+17 steps in 2 ms; '
            "needs at most 1e+13.",
        ),
        (
            TRAP,
            '"1 um"',
            '"2 km"',
            's.toml:39 [coulomb] softening = "2 km": must be less than [stepping] extent, 1 km, '
            "and far less than any cloud.",
        ),
        (
            TRAP,
            '"1 ms"',
            '"2.1 ms"',
            's.toml:57 [[question]] "hot axis" at = "2.1 ms": lies after the end of the run, 2 ms.',
        ),
        (
            BEAM,
            '"15 ns"',
            '"25 ns"',
            's.toml:97 [[question]] "width" over: lies after the end of the run, 20 ns.',
        ),
        (
            PAIR,
            "charge = 1",
            "charge = 2",
            's.toml:12 [[question]] "push" charge = 2: asks for charge 2 of "pair", which has 2, '
            "counted from 0.",
        ),
        (
            PAIR,
            'ask = "force"\nof = "pair"\ncharge = 1\nat = "start"',
            'ask = "tune"\nof = "pair"\naxis = "x"\nperiod = "1 us"\ncharges = 3',
            's.toml:14 [[question]] "push" charges = 3: asks for charge 2 of "pair", which has 2, '
            "counted from 0.",
        ),
        (
            BEAM,
            '"-8 fC"',
            '"8 fC"',
            's.toml:9 [[cloud]] "bunch" total_charge = "8 fC": must be negative, as the charge of '
            "electron is.",
        ),
        (
            PAIR,
            '["-1 um", "0", "0"]',
            '["-1 um", "5 km", "0"]',
            's.toml:3 [[cloud]] "pair": has charges 5 km from the origin, farther than [stepping] '
            "extent, 1 km.",
        ),
        (
            PAIR,
            '["-1 um", "0", "0"]',
            '["1 um", "-0 m", "0"]',
            's.toml:6 [[cloud]] "pair" shape: charge 1 is exactly where charge 0 is (counted from '
            "0): move it, or give a [coulomb] softening.",
        ),
    ],
)
def test_values_that_do_not_fit_are_told_at_the_key_to_change(
    tmp_path: Path, text: str, old: str, new: str, expected: str
) -> None:
    spoiled = text.replace(old, new, 1)
    assert text != spoiled
    assert [expected] == told(tmp_path, spoiled)


def test_places_beyond_what_can_be_squared_are_told_and_no_warning_is_given(
    tmp_path: Path,
) -> None:
    [line] = told(tmp_path, PAIR.replace('"-1 um"', '"1e300 m"'))
    assert 's.toml:3 [[cloud]] "pair": has charges 1e+300 m from the origin, farther' in line


def test_times_up_to_the_very_end_are_fine(tmp_path: Path) -> None:
    text = TRAP.replace('"1 ms"', '"2 ms"').replace('"10 us"', '"2 ms"').replace('"auto"', '"2 ms"')
    assert [] == told(tmp_path, text)


def test_charges_of_two_clouds_at_one_place_are_told_with_both_names(tmp_path: Path) -> None:
    other = (
        '[[cloud]]\nname = "o"\nspecies = "electron"\n'
        'shape = { kind = "points", positions = [["1 um", "0", "0"]] }\n'
    )
    [line] = told(tmp_path, PAIR + other)
    assert 's.toml:21 [[cloud]] "o" shape: charge 0 is exactly where charge 1 of "pair" is' in line


@pytest.mark.parametrize(
    ("settings", "expected"),
    [
        (["coulomb.accuracy=1e-9"], "must be at least 1e-08 and at most 0.1"),
        (["coulomb.accuracy=0.2"], "must be at least 1e-08 and at most 0.1"),
        (["coulomb.accuracy=fine"], "accuracy"),
        (["coulomb.accuracy=nan"], "needs a finite number"),
        (["coulomb.method=fmm"], '"auto", "direct", "tree" or "off"'),
        (["coulomb.method=trees"], "tree"),
        (["coulomb.precision=single"], '"auto", "double" or "mixed"'),
        (
            ["coulomb.precision=mixed", "coulomb.accuracy=1e-7"],
            "needs an accuracy of 1e-06 or more",
        ),
    ],
)
def test_ways_to_sum_that_cannot_be_are_told(
    tmp_path: Path, settings: list[str], expected: str
) -> None:
    (line,) = told(tmp_path, PAIR, *settings)
    assert expected in line
    assert settings[0].split("=")[1] in line


@pytest.mark.parametrize("setting", ["coulomb.softening=1 um", "coulomb.method=off"])
def test_charges_at_one_place_are_fine_where_no_force_grows_without_bound(
    tmp_path: Path, setting: str
) -> None:
    text = PAIR.replace('"-1 um"', '"1 um"')
    assert [] == told(tmp_path, text, setting)


def test_many_charges_at_one_place_are_counted_after_the_first_few(tmp_path: Path) -> None:
    places = ", ".join(['["0", "0", "0"]'] * 20)
    text = PAIR.replace('["-1 um", "0", "0"], ["1 um", "0", "0"]', places)
    lines = told(tmp_path, text)
    assert 6 == len(lines)
    assert lines[-1].endswith("and 14 more charges are exactly where others are.")


def test_opposite_charges_without_softening_are_no_fault(tmp_path: Path) -> None:
    assert [] == told(tmp_path, PAIR + BALL.format(name="e", species="electron", count=3))


def test_more_charges_than_fit_in_memory_are_refused(tmp_path: Path) -> None:
    clouds = [BALL.format(name=name, species="proton", count=6_000_000) for name in "ab"]
    [line] = told(tmp_path, 'title = "x"\nduration = "1 s"\n' + "".join(clouds))
    expected = (
        "[[cloud]]: 12000000 charges in all clouds; needs at most 10000000: raise the weights."
    )
    assert f"s.toml:3 {expected}" == line
