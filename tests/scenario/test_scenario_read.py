"""A scenario file is read, or all its faults are told at once, one line each, in file order."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import pytest

from driftwell.errors import ScenarioError
from driftwell.forms.declared import kind_name
from driftwell.forms.waveforms import Sine
from driftwell.particles.shapes.table import SHAPE_KINDS
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.scenario.good_scenarios import GOOD, TRAP

SPOILED = """\
title    = "Barium cloud in a rod trap"
duration = "2 sm"
sed      = 7

[species.barium]
mass   = "137.905 u"
charge = 1

[[cloud]]
name    = "load"
species = "bariun"
count   = "2000"
shape   = { kind = "gausian", sigma = "60 um" }
motion  = { temprature = "300 K" }

[[field]]
name      = "rods"
kind      = "rf-quadrupole"
radius    = "-3.5 mm"
radus     = "3.5 mm"
amplitude = "180 V"
voltage   = { amplitude = "180 V", frequency = "1.1 Mhz" }

[[field]]
name = "rods"
kind = "uniform-magnetic"
strength = "1.5 Tesla"
duration = "2 ms"

[[wall]]
kind   = "cylinder"
radius = 3.5
axis   = "Z"

[detector]
name = "exit"

[[coulomb]]
method = "direkt"
[Stepping]
step = "auto"

[[question]]
name = "left"
ask  = "fraction-left"
of   = "laod"
"""

SHAPES = ", ".join(str(kind_name(form)) for form in SHAPE_KINDS)
TOLD = f"""\
s.toml:2 duration = "2 sm": needs a time such as "2 ms" \
(no unit is called 'sm'; did you mean 'ms'?).
s.toml:3 sed: unknown key; did you mean "seed"?
s.toml:7 [species.barium] charge = 1: needs a charge such as "1 e" \
(a number and its unit in quotes).
s.toml:11 [[cloud]] "load" species = "bariun": no species is called so; did you mean "barium"?
s.toml:12 [[cloud]] "load" count = "2000": needs a whole number, without quotes or unit.
s.toml:13 [[cloud]] "load" shape.kind = "gausian": unknown kind; did you mean "gaussian"? \
The kinds are {SHAPES}.
s.toml:14 [[cloud]] "load" motion.temprature: unknown key; did you mean "temperature"?
s.toml:19 [[field]] "rods" radius = "-3.5 mm": must be greater than 0.
s.toml:20 [[field]] "rods" radus: unknown key; did you mean "radius"?
s.toml:21 [[field]] "rods" amplitude: unknown key here; did you mean "voltage.amplitude"?
s.toml:22 [[field]] "rods" voltage.frequency = "1.1 Mhz": needs a frequency such as "1.1 MHz" \
(no unit is called 'Mhz'; did you mean 'MHz'?).
s.toml:25 [[field]] "rods" name = "rods": is the name of [[field]] number 1 already.
s.toml:27 [[field]] "rods" strength = "1.5 Tesla": needs a magnetic field such as "1.5 T" \
(no unit is called 'Tesla'; did you mean 'T'?).
s.toml:28 [[field]] "rods" duration: unknown key here; "duration" belongs at the top of the file, \
before any [table].
s.toml:30 [[wall]] number 1 name: missing; needs text in quotes.
s.toml:32 [[wall]] number 1 radius = 3.5: needs a length such as "3.5 mm" \
(a number and its unit in quotes).
s.toml:33 [[wall]] number 1 axis = "Z": must be "x", "y" or "z"; did you mean "z"?
s.toml:35 [detector]: there may be several: write the header as [[detector]], in double brackets.
s.toml:38 [[coulomb]]: there is only one: write the header as [coulomb], in single brackets.
s.toml:40 [Stepping]: unknown key; did you mean "stepping"?
s.toml:46 [[question]] "left" of = "laod": no [[cloud]] is called so; did you mean "load"?
"""


def written(folder: Path, text: str) -> Path:
    path = folder / "s.toml"
    path.write_text(text, encoding="utf-8")
    return path


def told(folder: Path, text: str, settings: Sequence[str] = ()) -> list[str]:
    with pytest.raises(ScenarioError) as fault:
        read_scenario(written(folder, text), settings)
    return str(fault.value).replace(f"{folder}/", "").split("\n")


def test_a_good_scenario_is_read_with_its_text_its_folder_and_its_settings(tmp_path: Path) -> None:
    path = written(tmp_path, TRAP)
    loaded = read_scenario(path, ["duration=1 ms"])
    assert isinstance(loaded, LoadedScenario)
    assert (TRAP, path, tmp_path, ("duration=1 ms",)) == (
        loaded.text,
        loaded.path,
        loaded.folder,
        loaded.settings,
    )
    scenario = loaded.scenario
    assert (7, 0.001, 200) == (scenario.seed, scenario.duration, scenario.cloud[0].count)
    assert 1e-5 == scenario.record.every
    voltage = scenario.field[0].waveform()
    assert isinstance(voltage, Sine)
    assert (180.0, 1.1e6) == (voltage.amplitude, voltage.frequency)


def test_all_faults_of_a_file_are_told_at_once_in_its_order(tmp_path: Path) -> None:
    assert TOLD.splitlines() == told(tmp_path, SPOILED)


def test_each_fault_is_told_alone_where_it_is_the_only_one(tmp_path: Path) -> None:
    spoiled = TRAP.replace('radius  = "3.5 mm"', 'radius  = "-3.5 mm"')
    expected = 's.toml:19 [[field]] "rods" radius = "-3.5 mm": must be greater than 0.'
    assert [expected] == told(tmp_path, spoiled)


@pytest.mark.parametrize(
    ("setting", "expected"),
    [
        (
            "cloud.load.count=abc",
            '--set cloud.load.count=abc: [[cloud]] "load" count = "abc": needs a whole number, '
            "without quotes or unit.",
        ),
        (
            "duration=1",
            '--set duration=1: duration = 1: needs a time such as "2 ms" (a number and its unit in '
            "quotes).",
        ),
        (
            "steping.step=1 ns",
            '--set steping.step=1 ns: [steping]: unknown key; did you mean "stepping"?',
        ),
        (
            "question.hot axis.at=3 ms",
            '--set question.hot axis.at=3 ms: [[question]] "hot axis" at = "3 ms": lies after the '
            "end of the run, 2 ms.",
        ),
        (
            "title=a\nb",
            r'--set "title=a\nb": title = "a\nb": needs 1 to 200 characters on one line.',
        ),
        (
            "cloud.load.shape.sigma=0 m",
            's.toml:13 [[cloud]] "load" shape: `sigma` must be greater than 0 on at least one '
            "axis. (with --set cloud.load.shape.sigma=0 m)",
        ),
    ],
)
def test_a_fault_in_a_setting_names_the_setting(
    tmp_path: Path, setting: str, expected: str
) -> None:
    assert [expected] == told(tmp_path, TRAP, [setting])


def test_faults_of_settings_come_before_those_of_the_file(tmp_path: Path) -> None:
    lines = told(tmp_path, TRAP.replace("seed", "sed"), ["nonsense", "duration=1"])
    assert ["--set nonsense", "--set duration=1", "s.toml:3 sed"] == [
        line.split(":")[0] if line.startswith("--") else line.split(": ")[0] for line in lines
    ]


def test_hundreds_of_faults_are_counted_after_the_first_two_hundred(tmp_path: Path) -> None:
    lines = told(tmp_path, "".join(f"key{i} = 1\n" for i in range(300)) + TRAP)
    assert 201 == len(lines)
    assert "s.toml: 100 more faults." == lines[-1]


def test_the_digest_is_that_of_the_content_and_not_of_how_it_is_written(tmp_path: Path) -> None:
    def digest(text: str, *settings: str) -> str:
        return read_scenario(written(tmp_path, text), settings).digest

    original = digest(TRAP)
    assert 64 == len(original)
    same = TRAP.replace('"2 ms"', '"2000 us"  # in other units').replace("seed     = 7\n", "")
    assert original == digest(same, "seed=7")
    assert original == digest(TRAP.replace('step = "auto"', ""))
    for other in ("seed=8", "duration=3 ms", "cloud.load.name=other", "title=x"):
        settings = (
            [other]
            if other != "cloud.load.name=other"
            else [other, "question.1.of=other", "question.2.of=other"]
        )
        assert original != digest(TRAP, *settings)


def test_the_digest_covers_the_files_a_scenario_names(tmp_path: Path) -> None:
    text = (
        'title = "x"\nduration = "1 us"\n[[cloud]]\nname = "a"\nspecies = "proton"\n'
        'shape = { kind = "file", path = "a.csv" }\n'
    )
    digests = []
    for x in ("1", "2"):
        (tmp_path / "a.csv").write_text(f"x [mm], y [mm], z [mm]\n{x}, 0, 0\n")
        digests.append(read_scenario(written(tmp_path, text)).digest)
    assert digests[0] != digests[1]


def test_a_fault_in_a_file_of_charges_names_that_file_and_its_line(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text("x [mm], y [mm], z [mm]\n1, 2, three\n")
    text = (
        'title = "x"\nduration = "1 us"\n[[cloud]]\nname = "a"\nspecies = "proton"\n'
        'shape = { kind = "file", path = "a.csv" }\n'
    )
    [line] = told(tmp_path, text)
    assert line.startswith('s.toml:6 [[cloud]] "a" shape.path = "a.csv": a.csv:2')


def test_every_good_scenario_is_read(tmp_path: Path) -> None:
    assert ["beam", "pair", "trap"] == sorted(
        name for name, text in GOOD.items() if read_scenario(written(tmp_path, text))
    )
