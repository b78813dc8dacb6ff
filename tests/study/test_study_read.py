"""A study file is read, its cases are tried, and all its faults are told at once."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.errors import StudyError
from driftwell.scenario.read import read_scenario
from driftwell.study.read import read_study
from driftwell.study.trial import ALL_UP_TO, chosen
from tests.study.small_study import HEAD, SCENARIO, study, study_file, vary

COUNT = "cloud.load.count"
VOLTAGE = "field.rods.voltage.amplitude"
RADIUS = "field.rods.radius"


def told(folder: Path, text: str, *overrides: str) -> list[str]:
    path = study_file(folder, text)
    with pytest.raises(StudyError) as fault:
        read_study(path, overrides)
    return str(fault.value).replace(f"{folder}/", "").splitlines()


def test_a_study_says_what_its_file_says(tmp_path: Path) -> None:
    text = f'set = ["duration=15 us"]\n{vary(COUNT, "values = [3, 5]")}'
    found = study(tmp_path, text, "stepping.step=20 ns")
    assert ("How wide", "wide", 1) == (found.title, found.name, found.replicas)
    assert (HEAD + text, SCENARIO) == (found.text, found.scenario_text)
    assert tmp_path / "rods.toml" == found.scenario_path
    assert ("duration=15 us", "stepping.step=20 ns") == found.settings
    assert (*found.settings, f"{COUNT}=5") == found.cases[1].settings


def test_the_settings_of_a_case_make_its_scenario(tmp_path: Path) -> None:
    text = "replicas = 2\n" + vary(VOLTAGE, 'from = "100 V"\nto = "300 V"\npoints = 3')
    found = study(tmp_path, text)
    loaded = [read_scenario(found.scenario_path, case.settings) for case in found.cases]
    assert 6 == len({each.digest for each in loaded})
    for case, each in zip(found.cases, loaded, strict=True):
        voltage = each.scenario.field[0].voltage  # type: ignore[attr-defined]
        assert case.values == (voltage.amplitude,)
    assert [7, 7, 7] == [each.scenario.seed for each in loaded[::2]]
    assert loaded[1].scenario.seed == loaded[3].scenario.seed != 7


def test_more_values_leave_the_digests_of_the_others_as_they_are(tmp_path: Path) -> None:
    def digests(text: str) -> set[str]:
        found = study(tmp_path, text)
        return {read_scenario(found.scenario_path, case.settings).digest for case in found.cases}

    few = digests(vary(COUNT, "values = [3, 5]"))
    assert 2 == len(few)
    assert few < digests("replicas = 2\n" + vary(COUNT, "values = [9, 3, 5]"))
    assert few < digests(
        vary(RADIUS, 'values = ["3.5 mm", "4 mm"]') + vary(COUNT, "values = [5, 3]")
    )


SPOILED = f"""\
set = ["duration.x=3", "zz"]
replica = 2
[[vary]]
kye = "a"
values = [1]
[[vary]]
key = "{COUNT}"
from = 3
to = true
points = 1
spacing = "lgo"
[sample]
"""


def test_all_faults_of_the_keys_are_told_at_once(tmp_path: Path) -> None:
    assert [
        'wide.toml:4 replica = 2: unknown key; did you mean "replicas"?',
        'wide.toml:6 [[vary]] number 1 kye = "a": unknown key; did you mean "key"?',
        "wide.toml:11 [[vary]] number 2 to = true: needs a plain number.",
        "wide.toml:12 [[vary]] number 2 points = 1: must be at least 2 and at most 100000.",
        'wide.toml:13 [[vary]] number 2 spacing = "lgo": must be "even" or "log"; '
        'did you mean "log"?',
        "wide.toml:14 [sample] points: missing; needs a whole number.",
    ] == told(tmp_path, SPOILED)


def test_all_faults_of_settings_and_entries_are_told_at_once(tmp_path: Path) -> None:
    text = (
        'set = ["duration.x=3", "zz"]\n'
        + vary(COUNT, "values = [1, 1]")
        + vary("cloud.laod.count", "values = [1]")
        + vary(VOLTAGE, 'from = 3\nto = "5 V"\npoints = 2')
    )
    assert [
        '--set nonsense: needs the form key=value, for example "duration=1 ms".',
        'wide.toml:3 set entry 1 = "duration.x=3": "duration" is not a table in the scenario; '
        'set all of it: "duration=...".',
        'wide.toml:3 set entry 2 = "zz": needs the form key=value, for example "duration=1 ms".',
        'wide.toml:8 [[vary]] number 2 key = "cloud.laod.count": no entry of cloud is "laod"; '
        'did you mean "load"?',
        f'wide.toml:12 [[vary]] number 3 from = 3: {VOLTAGE} needs a voltage such as "180 V" '
        "(a number and its unit in quotes).",
    ] == told(tmp_path, text, "nonsense")


@pytest.mark.parametrize(
    ("scenario", "expected"),
    [
        (
            "../rods.toml",
            "`scenario` must lead to a file in the study's own folder: relative to it and "
            "without ..",
        ),
        (
            "/etc/rods.toml",
            "`scenario` must lead to a file in the study's own folder: relative to it and "
            "without ..",
        ),
        ("rods.txt", "`scenario` must end in .toml"),
        ("c:rods.toml", "`scenario` must be plain text, its folders separated by /"),
    ],
)
def test_a_scenario_elsewhere_is_refused(tmp_path: Path, scenario: str, expected: str) -> None:
    path = study_file(tmp_path, vary(COUNT, "values = [1]"))
    path.write_text(path.read_text().replace("rods.toml", scenario))
    with pytest.raises(StudyError) as fault:
        read_study(path)
    assert expected in str(fault.value)


def test_a_scenario_behind_a_link_out_of_the_folder_is_refused(tmp_path: Path) -> None:
    inner = tmp_path / "inner"
    inner.mkdir()
    path = study_file(inner, vary(COUNT, "values = [1]"))
    (inner / "rods.toml").rename(tmp_path / "rods.toml")
    (inner / "rods.toml").symlink_to(tmp_path / "rods.toml")
    with pytest.raises(StudyError, match=r"wide.toml:2 scenario = \"rods.toml\": leads out of"):
        read_study(path)


def test_files_that_are_missing_empty_or_no_toml_are_told(tmp_path: Path) -> None:
    with pytest.raises(StudyError, match="there is no such file"):
        read_study(tmp_path / "none.toml")
    with pytest.raises(StudyError, match="is a folder; needs a study file"):
        read_study(tmp_path)
    path = study_file(tmp_path, vary(COUNT, "values = [1]"))
    (tmp_path / "rods.toml").unlink()
    with pytest.raises(StudyError, match="there is no such file in the study's folder"):
        read_study(path)
    (tmp_path / "rods.toml").write_text("duration = 2 ms")
    with pytest.raises(StudyError, match=r"rods.toml:1:14 .* needs quotes"):
        read_study(path)
    path.write_text("")
    with pytest.raises(StudyError, match="is empty; a study needs a title"):
        read_study(path)


def test_a_faulty_value_is_told_with_its_line_its_setting_and_what_the_scenario_says(
    tmp_path: Path,
) -> None:
    text = (
        'set = ["stepping.scheme=fast"]\n'
        + vary(COUNT, "values = [-1, -2, 3]")
        + vary(RADIUS, 'values = ["3 mm", "4 ms"]')
    )
    assert [
        'wide.toml:3 set entry 1: --set stepping.scheme=fast: [stepping] scheme = "fast": '
        'must be "kick-drift-kick", "composed-4", "composed-6" or '
        '"midpoint-rotation".',
        f'wide.toml:4 [[vary]] number 1: --set {COUNT}=-1: [[cloud]] "load" count = -1: '
        "must be at least 1 and at most 1e+07. (1 more of its values has this fault)",
        f'wide.toml:7 [[vary]] number 2: --set {RADIUS}=4 ms: [[field]] "rods" radius = "4 ms": '
        "needs a length such as \"3.5 mm\" ('ms' is a unit of time).",
    ] == sorted(told(tmp_path, text))


def test_a_value_that_fits_no_longer_is_told_with_the_case_and_the_scenarios_line(
    tmp_path: Path,
) -> None:
    text = vary(COUNT, "values = [3, 5]") + vary("duration", 'values = ["20 us", "5 us"]')
    line = SCENARIO.splitlines().index('at   = "10 us"') + 1
    assert [
        f"wide.toml:6 [[vary]] number 2, case 2, --set {COUNT}=3 --set duration=5 us: "
        f'rods.toml:{line} [[question]] "size" at = "10 us": lies after the end of the run, 5 us.'
    ] == told(tmp_path, text)


def test_a_fault_of_the_scenario_itself_is_told_as_its_own(tmp_path: Path) -> None:
    path = study_file(tmp_path, vary(COUNT, "values = [3, 5]"))
    (tmp_path / "rods.toml").write_text(SCENARIO.replace('radius  = "3.5 mm"', "radius = 3.5"))
    with pytest.raises(StudyError) as fault:
        read_study(path)
    expected = (
        'rods.toml:19 [[field]] "rods" radius = 3.5: needs a length such as "3.5 mm" '
        "(a number and its unit in quotes)."
    )
    assert expected == str(fault.value).replace(f"{tmp_path}/", "")


def test_a_setting_of_the_command_line_that_is_faulty_is_told_as_such(tmp_path: Path) -> None:
    expected = (
        'the command line: --set duration=5: duration = 5: needs a time such as "2 ms" '
        "(a number and its unit in quotes)."
    )
    assert [expected] == told(tmp_path, vary(COUNT, "values = [3, 5]"), "duration=5")


def test_a_value_that_takes_a_name_away_is_told(tmp_path: Path) -> None:
    text = vary("cloud.load.name", 'values = ["load", "lode"]') + vary(COUNT, "values = [3]")
    found = told(tmp_path, text)
    assert (
        'wide.toml:6 [[vary]] number 2: --set cloud.load.count=3: no entry of cloud is "load"'
        in (found[0])
    )


def test_of_many_cases_the_ends_of_ranges_and_each_value_of_lists_are_tried(
    tmp_path: Path,
) -> None:
    text = (
        vary(COUNT, "values = [9, 3, 5, 7]")
        + vary(VOLTAGE, 'from = "300 V"\nto = "100 V"\npoints = 100')
        + vary("coulomb.method", 'values = ["direct", "off"]')
    )
    found = study(tmp_path, text)
    assert 800 == len(found.cases) > ALL_UP_TO
    tried = chosen(found.axes, found.cases)
    assert len(tried) < 10
    assert {9.0, 3.0, 5.0, 7.0} == {case.values[0] for case in tried}
    assert {300.0, 100.0} == {case.values[1] for case in tried}
    assert {"direct", "off"} == {case.values[2] for case in tried}


def test_a_faulty_value_among_many_is_found(tmp_path: Path) -> None:
    voltage = vary(VOLTAGE, 'from = "300 V"\nto = "100 V"\npoints = 400')
    expected = f'--set {RADIUS}=-4 mm: [[field]] "rods" radius = "-4 mm": must be greater than 0.'
    text = voltage + vary(RADIUS, 'values = ["3 mm", "-4 mm"]')
    assert [f"wide.toml:8 [[vary]] number 2: {expected}"] == told(tmp_path, text)
    text = voltage + vary(RADIUS, 'from = "3 mm"\nto = "-4 mm"\npoints = 9')
    assert [f"wide.toml:8 [[vary]] number 2: {expected}"] == told(tmp_path, text)


def test_of_few_cases_every_one_is_tried(tmp_path: Path) -> None:
    found = study(tmp_path, vary(VOLTAGE, 'from = "300 V"\nto = "100 V"\npoints = 300'))
    assert list(found.cases) == chosen(found.axes, found.cases)
