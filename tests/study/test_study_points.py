"""Entries become axes and cases: grids, entries together, samples, replicas; faults at once."""

from __future__ import annotations

import itertools
import math
import tomllib
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.forms.faults import read_form
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings
from driftwell.study.form import MOST_CASES, StudyForm
from driftwell.study.points import Axis, Case, expand, latin_hypercube, replica_seeds
from tests.study.small_study import HEAD, SCENARIO, vary

COUNT = "cloud.load.count"
RADIUS = "field.rods.radius"
VOLTAGE = "field.rods.voltage.amplitude"


def expanded(text: str, *settings: str) -> tuple[tuple[Axis, ...], tuple[Case, ...], list[str]]:
    """Axes, cases, and faults as ``path: needed``."""
    form, faults = read_form(StudyForm, tomllib.loads(HEAD + text))
    assert form is not None, faults
    data = tomllib.loads(SCENARIO)
    apply_settings(data, settings, Scenario)
    axes, cases, faults = expand(form, data, settings)
    told = [f"{'.'.join(map(str, fault.path))}: {fault.needed}" for fault in faults]
    return axes, cases, told


def cases_of(text: str) -> tuple[Case, ...]:
    _, cases, faults = expanded(text)
    assert [] == faults
    return cases


def test_a_grid_changes_its_last_key_fastest() -> None:
    text = vary(COUNT, "values = [10, 20]") + vary(RADIUS, 'values = ["3 mm", "0.4 cm", "5 mm"]')
    axes, cases, faults = expanded(text)
    assert [] == faults
    assert [(COUNT, (10.0, 20.0), "1"), (RADIUS, (0.003, 0.004, 0.005), "m")] == [
        (axis.name, axis.values, axis.unit) for axis in axes
    ]
    assert list(itertools.product((10.0, 20.0), (0.003, 0.004, 0.005))) == [
        case.values for case in cases
    ]
    assert [1, 2, 3, 4, 5, 6] == [case.number for case in cases]
    assert (f"{COUNT}=10", f"{RADIUS}=0.4 cm") == cases[1].settings


def test_entries_with_the_same_word_advance_together_and_form_a_grid_with_others() -> None:
    text = (
        vary(COUNT, 'values = [10, 20]\ntogether = "load"')
        + vary(RADIUS, 'values = ["3 mm", "4 mm"]')
        + vary("cloud.load.weight", 'values = [2, 1]\ntogether = "load"')
    )
    axes, cases, _ = expanded(text)
    assert [(10.0, 0.003, 2.0), (10.0, 0.004, 2.0), (20.0, 0.003, 1.0), (20.0, 0.004, 1.0)] == [
        case.values for case in cases
    ]
    assert axes[0].group == axes[2].group != axes[1].group


@pytest.mark.parametrize(
    ("rest", "expected"),
    [
        ('from = "100 V"\nto = "200 V"\npoints = 3', ["100 V", "150 V", "200 V"]),
        ('from = "0.2 kV"\nto = "100 V"\npoints = 3', ["0.2 kV", "150 V", "100 V"]),
        (
            'from = "1 V"\nto = "1000 V"\npoints = 4\nspacing = "log"',
            ["1 V", "10 V", "100 V", "1000 V"],
        ),
        (
            'from = "-1 V"\nto = "-100 V"\npoints = 3\nspacing = "log"',
            ["-1 V", "-10 V", "-100 V"],
        ),
        ('from = "0.1 V"\nto = "0.4 V"\npoints = 4', ["0.1 V", "0.2 V", "0.3 V", "0.4 V"]),
    ],
)
def test_a_range_of_quantities_is_written_in_the_unit_of_its_ends(
    rest: str, expected: list[str]
) -> None:
    assert expected == [
        case.settings[0].removeprefix(f"{VOLTAGE}=") for case in cases_of(vary(VOLTAGE, rest))
    ]


@pytest.mark.parametrize("spacing", ["even", "log"])
@pytest.mark.parametrize(
    ("first", "last"), [("1e-300", "1e300"), ("1e308", "1.7e308"), ("5e-324", "1e-320")]
)
def test_ranges_at_the_edge_of_what_numbers_can_be_stay_between_their_ends(
    first: str, last: str, spacing: str
) -> None:
    text = f'from = "{first} V"\nto = "{last} V"\npoints = 5\nspacing = "{spacing}"'
    values = [float(case.values[0]) for case in cases_of(vary(VOLTAGE, text))]
    assert sorted(values) == values
    assert (float(first), float(last)) == (values[0], values[-1])


def test_a_range_over_all_numbers_has_its_middle_at_zero() -> None:
    text = 'from = "-1.7e308 V"\nto = "1.7e308 V"\npoints = 3'
    assert [-1.7e308, 0.0, 1.7e308] == [case.values[0] for case in cases_of(vary(VOLTAGE, text))]


def test_a_temperature_in_degrees_is_spaced_on_the_absolute_scale() -> None:
    text = vary("cloud.load.motion.temperature", 'from = "0 degC"\nto = "100 degC"\npoints = 3')
    _, cases, faults = expanded(text)
    assert [] == faults
    assert [273.15, 323.15, 373.15] == pytest.approx([case.values[0] for case in cases])
    assert "cloud.load.motion.temperature=50 degC" == cases[1].settings[0]


def test_counts_stay_whole_numbers() -> None:
    text = vary(COUNT, 'from = 10\nto = 1000\npoints = 4\nspacing = "log"')
    cases = cases_of(text)
    assert [f"{COUNT}={n}" for n in (10, 46, 215, 1000)] == [case.settings[0] for case in cases]
    assert [10.0, 46.0, 215.0, 1000.0] == [case.values[0] for case in cases]


def test_plain_numbers_keep_their_decimals() -> None:
    cases = cases_of(vary("coulomb.accuracy", "from = 1e-5\nto = 2e-5\npoints = 3"))
    assert [1e-5, 1.5e-5, 2e-5] == [case.values[0] for case in cases]


def test_words_and_tables_are_varied_as_texts() -> None:
    shape = '{ kind = "ball", radius = "1 mm" }'
    text = vary("coulomb.method", 'values = ["direct", "off"]') + vary(
        "cloud.load.shape", f"values = [{shape}]"
    )
    axes, cases, _ = expanded(text)
    assert [("direct", "off"), (shape,)] == [axis.values for axis in axes]
    assert ["", ""] == [axis.unit for axis in axes]
    assert ("coulomb.method=off", f"cloud.load.shape={shape}") == cases[1].settings


def test_a_list_of_quantities_and_a_word_is_a_list_of_texts() -> None:
    axes, _, _ = expanded(vary("stepping.step", 'values = ["auto", "5 ns"]'))
    assert (("auto", "5 ns"), "") == (axes[0].values, axes[0].unit)


@given(
    st.lists(st.lists(st.integers(1, 10**6), min_size=1, max_size=5, unique=True), max_size=3),
    st.integers(1, 4),
)
def test_any_grid_has_each_combination_once_for_each_replica(
    lists: list[list[int]], replicas: int
) -> None:
    keys = (COUNT, "record.tracks", "stepping.coulomb_every")
    text = f"replicas = {replicas}\n" + "".join(
        vary(key, f"values = {values}") for key, values in zip(keys, lists, strict=False)
    )
    _, cases, faults = expanded(text)
    if not lists and replicas == 1:
        assert ["vary: missing; a study varies a key, or has replicas"] == faults
        return
    wanted = [
        (*map(float, point), k)
        for point in itertools.product(*lists)
        for k in range(1, replicas + 1)
    ]
    assert wanted == [(*case.values, case.replica) for case in cases]
    assert list(range(1, len(wanted) + 1)) == [case.number for case in cases]
    assert len({case.settings for case in cases}) == len(cases)


@given(
    st.floats(1e-6, 1e6),
    st.floats(1e-6, 1e6),
    st.integers(2, 30),
    st.sampled_from(["even", "log"]),
)
def test_any_range_runs_from_end_to_end_in_equal_steps(
    first: float, last: float, points: int, spacing: str
) -> None:
    text = f'from = "{first!r} V"\nto = "{last!r} V"\npoints = {points}\nspacing = "{spacing}"'
    _, cases, faults = expanded(vary(VOLTAGE, text))
    if abs(last / first - 1.0) < 1e-9:
        return  # closer than 12 digits tell
    assert [] == faults
    values = [float(case.values[0]) for case in cases]
    assert (first, last) == (values[0], values[-1])
    expected = np.geomspace if spacing == "log" else np.linspace
    np.testing.assert_allclose(values, expected(first, last, points), rtol=1e-11, atol=0.0)


@given(st.text(max_size=20))
def test_any_text_is_set_as_this_very_text(text: str) -> None:
    form = StudyForm.model_validate(
        {"title": "x", "scenario": "s.toml", "vary": [{"key": "title", "values": [text]}]}
    )
    data = tomllib.loads(SCENARIO)
    _, cases, faults = expand(form, data)
    assert [] == faults
    settings, unusable = apply_settings(data, cases[0].settings, Scenario)
    assert [] == unusable
    assert 1 == len(settings)
    assert text == data["title"]


def test_a_sample_meets_each_part_of_each_range_once() -> None:
    text = (
        "[sample]\npoints = 40\nseed = 3\n"
        + vary(VOLTAGE, 'from = "100 V"\nto = "200 V"')
        + vary(RADIUS, 'from = "1 mm"\nto = "100 mm"\nspacing = "log"')
        + vary("coulomb.method", 'values = ["direct", "off"]')
    )
    axes, cases, faults = expanded(text)
    assert [] == faults
    assert 80 == len(cases)
    direct = [case.values for case in cases if case.values[2] == "direct"]
    assert direct == [case.values for case in cases[:40]]
    assert [v[:2] for v in direct] == [case.values[:2] for case in cases[40:]]
    voltage = np.array([float(v[0]) for v in direct])
    radius = np.array([float(v[1]) for v in direct])
    assert list(range(40)) == sorted((voltage - 100.0) // 2.5)
    assert list(range(40)) == sorted(np.log10(radius / 1e-3) // 0.05)
    assert abs(np.corrcoef(voltage, radius)[0, 1]) < 0.5
    assert axes[0].group == axes[1].group != axes[2].group


def test_a_sample_is_the_same_for_the_same_seed_only() -> None:
    assert np.array_equal(latin_hypercube(9, 2, 5), latin_hypercube(9, 2, 5))
    assert not np.array_equal(latin_hypercube(9, 2, 5), latin_hypercube(9, 2, 6))


def test_ranges_together_are_sampled_as_one() -> None:
    text = (
        "[sample]\npoints = 8\n"
        + vary(VOLTAGE, 'from = "100 V"\nto = "200 V"\ntogether = "a"')
        + vary(RADIUS, 'from = "1 mm"\nto = "2 mm"\ntogether = "a"')
    )
    for case in cases_of(text):
        assert float(case.values[0]) / 1e5 == pytest.approx(float(case.values[1]), rel=1e-10)


def test_replicas_differ_in_their_seeds_alone_and_further_ones_change_none_before() -> None:
    cases = cases_of("replicas = 3\n" + vary(COUNT, "values = [5, 6]"))
    assert [1, 2, 3, 1, 2, 3] == [case.replica for case in cases]
    assert (f"{COUNT}=5",) == cases[0].settings
    seeds = replica_seeds(7, 3)
    assert 7 == seeds[0]
    assert (f"{COUNT}=6", f"seed={seeds[2]}") == cases[5].settings
    assert seeds == replica_seeds(7, 50)[:3]
    assert 3000 == len(set(replica_seeds(7, 3000)))
    assert set(replica_seeds(7, 50)[1:]).isdisjoint(replica_seeds(8, 50))
    assert all(0 <= seed < 2**53 for seed in replica_seeds(7, 50))


def test_the_seeds_are_those_of_studies_run_before() -> None:
    """Computed once, with numpy 2.4: a study taken up again finds its finished runs."""
    assert (7, 1973877946906281, 8573731580185675) == replica_seeds(7, 3)


def test_the_seed_of_replicas_follows_a_seed_that_is_set() -> None:
    _, cases, faults = expanded("replicas = 2\n", "seed=99")
    assert [] == faults
    assert ("seed=99",) == cases[0].settings
    assert ("seed=99", f"seed={replica_seeds(99, 2)[1]}") == cases[1].settings


LIST = 'values = ["1 V", "2 V"]'
FAULTS: list[tuple[str, list[str]]] = [
    (
        vary("cloud.x.count", "values = [1]"),
        ['vary.0.key: no entry of cloud is "x"; there are "load"'],
    ),
    (
        vary("cloud.load.count = 3", "values = [1]"),
        ['vary.0.key: needs a key without "=", for example cloud.load.count'],
    ),
    (
        vary(COUNT, "values = [1]") + vary("cloud.1.count", "values = [2]"),
        ["vary.1.key: [[vary]] number 1 varies this already"],
    ),
    (
        vary("field.rods.voltage", 'values = ["1 V"]') + vary(VOLTAGE, LIST),
        ['vary.1.key: one holds the other: [[vary]] number 1 varies "field.rods.voltage"'],
    ),
    (
        vary(COUNT, 'values = [1, 2]\ntogether = "a"')
        + vary(VOLTAGE, 'values = ["1 V"]\ntogether = "a"'),
        ["vary.1.together: has 1 values and [[vary]] number 1 has 2; needs as many in both"],
    ),
    (
        vary(COUNT, 'values = [1, 2]\ntogether = "a"'),
        ["vary.0.together: no other [[vary]] has this word; give it to all that advance together"],
    ),
    (
        vary(VOLTAGE, 'from = "-1 V"\nto = "5 V"\npoints = 3\nspacing = "log"'),
        [
            "vary.0.to: cannot be reached in equal ratios from `from`: both must be above 0, "
            "or both below"
        ],
    ),
    (
        vary(VOLTAGE, 'from = "0 V"\nto = "5 V"\npoints = 3\nspacing = "log"'),
        [
            "vary.0.to: cannot be reached in equal ratios from `from`: both must be above 0, "
            "or both below"
        ],
    ),
    (
        vary(VOLTAGE, 'from = 3\nto = "5 mm"\npoints = 3'),
        [
            f'vary.0.from: {VOLTAGE} needs a voltage such as "180 V" '
            "(a number and its unit in quotes)",
            f"vary.0.to: {VOLTAGE} needs a voltage such as \"180 V\" ('mm' is a unit of length)",
        ],
    ),
    (
        vary(COUNT, 'from = 1.5\nto = "5"\npoints = 3'),
        [
            f"vary.0.from: {COUNT} needs a whole number, without decimals",
            f"vary.0.to: {COUNT} needs a whole number, without quotes or unit",
        ],
    ),
    (
        vary("title", "from = 1\nto = 2\npoints = 2"),
        [
            f"vary.0.{end}: title does not hold a number; list its `values` instead of a range"
            for end in ("from", "to")
        ],
    ),
    (vary(COUNT, "from = 3\nto = 3\npoints = 2"), ["vary.0.to: must be another value than `from`"]),
    (
        vary(COUNT, "from = 1\nto = 5\npoints = 9"),
        ["vary.0.points: gives 5 different values only; needs fewer points"],
    ),
    (
        vary(COUNT, "from = 1\nto = 5"),
        ["vary.0.points: missing; needs the number of values, such as 5"],
    ),
    (
        vary("cloud.load.coutn", "from = 1\nto = 5\npoints = 2"),
        ['vary.0.key: unknown key; did you mean "count"?'],
    ),
    (
        vary(RADIUS, 'values = ["1 mm", "2 mm", "0.001 m"]'),
        ["vary.0.values.2: stands in this list already, as entry 1"],
    ),
    (
        "[sample]\npoints = 5\n" + vary(COUNT, "values = [1, 2]"),
        ["sample: nothing to sample; needs a [[vary]] with `from` and `to`"],
    ),
    (
        "[sample]\npoints = 5\n" + vary(COUNT, "from = 1\nto = 100\npoints = 4"),
        ["vary.0.points: [sample] says how many points there are; leave this out"],
    ),
    (
        "[sample]\npoints = 50\n" + vary(COUNT, "from = 1\nto = 10"),
        ["sample.points: 40 cases would be the same as others; needs fewer points"],
    ),
    (
        "[sample]\npoints = 2\n"
        + vary(COUNT, 'values = [1, 2]\ntogether = "a"')
        + vary(VOLTAGE, 'from = "1 V"\nto = "5 V"\ntogether = "a"'),
        [
            "vary.1.together: joins a list with a range that [sample] draws, [[vary]] number 1; "
            "give both as ranges"
        ],
    ),
    (
        "replicas = 2\n" + vary("seed", "values = [1, 2]"),
        ["vary.0.key: replicas have seeds of their own; leave out one of the two"],
    ),
    (
        "replicas = 3\n"
        + vary(COUNT, "from = 1\nto = 9000\npoints = 1000")
        + vary(VOLTAGE, 'from = "1 V"\nto = "5 V"\npoints = 90'),
        [
            f"vary: 1000 x 90 values and 3 replicas of each are 270000 cases; "
            f"needs at most {MOST_CASES}"
        ],
    ),
]


@pytest.mark.parametrize(("text", "expected"), FAULTS)
def test_what_cannot_be_expanded_is_told(text: str, expected: list[str]) -> None:
    axes, cases, faults = expanded(text)
    assert expected == faults
    assert ((), ()) == (axes, cases)


def test_a_setting_that_a_varied_key_would_undo_is_refused() -> None:
    _, _, faults = expanded(vary(COUNT, "values = [1, 2]"), "cloud.1.count=5", "duration=1 ms")
    text = 'the setting "cloud.1.count=5" would be undone; leave one of the two out'
    assert [f"vary.0.key: {text}"] == faults


@pytest.mark.parametrize(
    ("keys", "expected"),
    [
        ({}, "needs `values`, or a range: `from`, `to` and `points`"),
        ({"values": [1], "from": 3}, "give either `values` or a range, not both"),
        ({"from": 3}, "a range needs `to` as well"),
        ({"to": 3}, "a range needs `from` as well"),
        (
            {"values": [1], "points": 3},
            "`points` and `spacing` belong to a range; leave them out beside `values`",
        ),
        (
            {"values": [1], "spacing": "even"},
            "`points` and `spacing` belong to a range; leave them out beside `values`",
        ),
        ({"values": []}, "`values` must have at least one entry"),
    ],
)
def test_an_entry_says_its_values_in_one_way(keys: dict[str, Any], expected: str) -> None:
    table = {"title": "x", "scenario": "s.toml", "vary": [{"key": COUNT, **keys}]}
    form, faults = read_form(StudyForm, table)
    assert form is None
    assert [expected] == [fault.needed for fault in faults]


def test_the_largest_study_is_expanded() -> None:
    text = "replicas = 10\n" + vary(COUNT, "from = 1\nto = 1000\npoints = 100")
    cases = cases_of(text + vary(VOLTAGE, 'from = "1 V"\nto = "5 V"\npoints = 100'))
    assert MOST_CASES == len(cases)
    assert MOST_CASES == len({case.settings for case in cases})
    assert math.isclose(5.0, float(cases[-1].values[1]))
