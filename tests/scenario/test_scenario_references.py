"""Names stand once in their section, and each name that is used is there."""

from __future__ import annotations

import tomllib

import pytest

from driftwell.scenario.references import reference_faults
from tests.scenario.good_scenarios import GOOD, TRAP


def told(text: str) -> list[tuple[str, str, str]]:
    return [
        (".".join(map(str, fault.path)), fault.found, fault.needed)
        for fault in reference_faults(tomllib.loads(text))
    ]


@pytest.mark.parametrize("name", list(GOOD))
def test_good_scenarios_have_no_faulty_names(name: str) -> None:
    assert [] == told(GOOD[name])


@pytest.mark.parametrize(
    ("old", "new", "expected"),
    [
        (
            '"end caps"',
            '"rods"',
            ("field.1.name", '"rods"', "is the name of [[field]] number 1 already"),
        ),
        (
            '"hot axis"',
            '"held fraction"',
            ("question.1.name", '"held fraction"', "is the name of [[question]] number 1 already"),
        ),
        (
            'species = "barium"\ncount',
            'species = "bariumm"\ncount',
            (
                "cloud.0.species",
                '"bariumm"',
                'no species is called so; did you mean "barium"?',
            ),
        ),
        (
            '{ species = "barium"',
            '{ species = "xenon"',
            (
                "field.1.axial_frequency.species",
                '"xenon"',
                "no species is called so; known are barium, electron, positron, muon, antimuon, "
                "proton, antiproton, deuteron, triton, helion, alpha",
            ),
        ),
        (
            'of   = "load"\n\n',
            'of   = "lead"\n\n',
            ("question.0.of", '"lead"', 'no [[cloud]] is called so; did you mean "load"?'),
        ),
        (
            'of   = "load"\n\n',
            'of   = "zzz"\n\n',
            ("question.0.of", '"zzz"', 'no [[cloud]] is called so; there are "load"'),
        ),
        (
            '"fraction-left"\nof   = "load"',
            '"fraction-through"\nof   = "exot"',
            ("question.0.of", '"exot"', 'no [[detector]] is called so; did you mean "exit"?'),
        ),
        (
            '"fraction-left"\nof   = "load"',
            '"fraction-through"\nof   = "exit"\ncloud = "zzz"',
            ("question.0.cloud", '"zzz"', 'no [[cloud]] is called so; there are "load"'),
        ),
    ],
)
def test_a_name_used_twice_or_not_there_is_told_at_its_key(
    old: str, new: str, expected: tuple[str, str, str]
) -> None:
    spoiled = TRAP.replace(old, new, 1)
    assert TRAP != spoiled
    assert [expected] == told(spoiled)


def test_a_scenario_needs_a_cloud() -> None:
    faults = told('title = "x"\n')
    needed = "missing; needs at least one group of charges, or a [[source]]"
    assert [("cloud", "", needed)] == faults


def test_a_built_in_species_needs_no_declaration() -> None:
    text = TRAP.replace('species = "barium"\ncount', 'species = "electron"\ncount')
    assert [] == told(text)


def test_names_are_checked_beside_other_faults_and_in_tables_of_any_shape() -> None:
    odd = (
        'cloud = [3, { name = 4, species = ["x"] }]\nfield = 7\nquestion = { a = 1 }\nspecies = 1\n'
    )
    assert [] == told(odd)
