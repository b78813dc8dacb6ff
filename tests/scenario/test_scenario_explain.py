"""A scenario in words, and the cautions where it holds hazards."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.scenario.cautions import cautions
from driftwell.scenario.explain import WIDTH, explain
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.scenario.good_scenarios import BEAM, GOOD, PAIR, TRAP

COIL = """
[[field]]
name = "coil"
kind = "current-loop"
radius = "50 mm"
turns = 50
current = { amplitude = "10 A", frequency = "50 Hz" }
"""
BLOCK = """
[[field]]
name = "block"
kind = "magnet-block"
size = ["20 mm", "10 mm", "5 mm"]
remanence = "1.3 T"
centre = ["100 mm", "0 mm", "0 mm"]
"""
PLATES = """
[[electrode]]
name = "below"
voltage = "-3 kV"
shape = [{ kind = "rectangle", low = ["0 mm", "-6 mm"], high = ["20 mm", "-5 mm"] }]

[[electrode]]
name = "above"
voltage = { amplitude = "1 kV", offset = "2 kV", frequency = "1 kHz" }
shape = [{ kind = "rectangle", low = ["0 mm", "5 mm"], high = ["20 mm", "6 mm"] }]
"""
DRAG = """
[[process]]
name = "helium"
kind = "mobility-drag"
mobility = "0.25 m^2/(V s)"
"""


def loaded(folder: Path, text: str, *settings: str) -> LoadedScenario:
    path = folder / "s.toml"
    path.write_text(text)
    return read_scenario(path, settings)


def in_one_line(lines: list[str]) -> str:
    return " ".join(" ".join(lines).split())


def test_a_scenario_is_told_in_aligned_lines(tmp_path: Path) -> None:
    lines = explain(loaded(tmp_path, TRAP))
    assert "Barium cloud in a rod trap" == lines[0]
    assert lines[1].endswith(f"s.toml, digest {loaded(tmp_path, TRAP).digest[:12]}")
    assert "  duration    2 ms, seed 7" == lines[3]
    sections = [line[2:14].strip() for line in lines[3:] if line[2:14].strip()]
    assert [
        *("duration", "species", "cloud", "field", "wall", "detector"),
        *("Coulomb", "stepping", "record", "question"),
    ] == sections
    assert any(line.startswith("  field       rods      linear quadrupole") for line in lines)
    assert any(line.startswith("              end caps  static quadrupole") for line in lines)
    assert any(line.startswith("              hot axis       temperature of") for line in lines)


@pytest.mark.parametrize("name", list(GOOD))
def test_no_line_is_wider_than_a_page_and_none_ends_in_blanks(tmp_path: Path, name: str) -> None:
    lines = explain(loaded(tmp_path, GOOD[name]))
    assert [] == [line for line in lines[2:] if len(line) > WIDTH or line != line.rstrip()]


def test_every_part_of_a_scenario_is_named(tmp_path: Path) -> None:
    text = "\n".join(explain(loaded(tmp_path, BEAM)))
    for name in (
        "bunch",
        "probe",
        "gap",
        "kicker",
        "bend",
        "plate",
        "chamber",
        "screen",
        "arrival",
    ):
        assert name in text


@pytest.mark.parametrize(
    ("setting", "expected"),
    [
        ("coulomb.method=off", "off: the charges do not feel each other"),
        ("coulomb.softening=0 m", "every pair of charges, without softening"),
        ("coulomb.method=tree", "a tree, to 0.0001 of the force (rms), softened within 1 um"),
        ("coulomb.precision=mixed", "softened within 1 um, in mixed precision"),
        ("stepping.step=5 ns", "kick-drift-kick, steps of 5 ns"),
        ("stepping.coulomb_every=4", "Coulomb sum every 4 steps"),
        ("record.snapshots=1 ms", "snapshots of all every 1 ms"),
        ("record.tracks=20", "tracks of 20 charges"),
        ("wall.bore.effect=reflect", "reflects"),
    ],
)
def test_choices_of_the_scenario_are_told(tmp_path: Path, setting: str, expected: str) -> None:
    assert expected in in_one_line(explain(loaded(tmp_path, TRAP, setting)))
    assert expected not in in_one_line(explain(loaded(tmp_path, TRAP)))


@pytest.mark.parametrize(
    ("method", "count", "expected"),
    [
        ("auto", 200, "every pair of charges, softened"),
        ("auto", 5000, "every pair of charges, or where that is faster on the machine a tree, to"),
        ("direct", 5000, "every pair of charges, softened"),
        ("tree", 50, "every pair of charges, softened"),
        ("tree", 5000, "Coulomb a tree, to 0.001 of the force"),
    ],
)
def test_how_the_force_is_summed_is_told(
    tmp_path: Path, method: str, count: int, expected: str
) -> None:
    settings = (f"coulomb.method={method}", f"cloud.load.count={count}", "coulomb.accuracy=1e-3")
    assert expected in in_one_line(explain(loaded(tmp_path, TRAP, *settings)))


def test_macro_particles_without_softening_and_runs_without_questions_are_noted(
    tmp_path: Path,
) -> None:
    quiet = "\n".join(explain(loaded(tmp_path, TRAP)))
    assert "Note" not in quiet
    settings = ("cloud.load.weight=50", "coulomb.softening=0 m")
    heavy = in_one_line(explain(loaded(tmp_path, TRAP, *settings)))
    assert 'Charges of "load" stand for 50 real ones each and meet without softening' in heavy
    unasked = "\n".join(explain(loaded(tmp_path, PAIR.split("[[question]]", maxsplit=1)[0])))
    assert "No [[question]] is asked: the run only records." in unasked


@pytest.mark.parametrize(
    ("text", "settings", "expected"),
    [
        (TRAP, (), []),
        (TRAP, ("field.rods.voltage.amplitude=999 V",), []),
        (TRAP, ("field.rods.voltage.amplitude=1.2 kV",), ["Voltages up to 1.2 kV"]),
        (TRAP, ("field.rods.voltage.offset=-900 V",), ["Voltages up to 1.08 kV"]),
        (TRAP, ("field.rods.voltage=-25 kV",), ["Voltages up to 25 kV"]),
        (BEAM, (), ["Voltages up to 30 kV", "Electrons of up to 30 keV"]),
        (BEAM, ("cloud.bunch.shape.kinetic_energy=900 eV",), []),
        (BEAM, ("cloud.bunch.shape.kinetic_energy=4 MeV",), ["Electrons of up to 4 MeV"]),
        (
            BEAM,
            (
                "cloud.bunch.species=proton",
                "cloud.bunch.total_charge=8 fC",
                "cloud.bunch.shape.kinetic_energy=4 MeV",
            ),
            ["Light ions of up to 4 MeV set neutrons free"],
        ),
        (
            BEAM,
            ("cloud.bunch.shape.kinetic_energy=900 eV", "field.bend.strength=0.6 T"),
            ["Fields up to 600 mT"],
        ),
        (TRAP + COIL, (), []),
        (TRAP + COIL, ("field.coil.current=1.2 kA",), ["Fields up to 754 mT"]),
        (TRAP + COIL, ("field.coil.current.amplitude=1.2 kA",), ["Fields up to 754 mT"]),
        (TRAP + BLOCK, (), ["Fields up to 1.3 T"]),
        (
            TRAP,
            ("cloud.load.species=electron", "field.rods.voltage=6 kV"),
            ["Voltages up to 6 kV", "Electrons of up to 6 keV"],
        ),
        (
            TRAP,
            ("cloud.load.species=electron", "cloud.load.motion={ kinetic_energy = '6 keV' }"),
            ["Voltages up to 6 kV", "Electrons of up to 6.18 keV"],
        ),
        (TRAP + PLATES, ("cloud.load.species=electron",), ["Voltages up to 3 kV", "Electrons of"]),
        (
            TRAP + PLATES,
            ("cloud.load.species=electron", "cloud.load.motion={ kinetic_energy = '1 keV' }"),
            ["Voltages up to 3 kV", "Electrons of up to 7 keV"],
        ),
        (TRAP + PLATES, (), ["Voltages up to 3 kV"]),
        (
            TRAP + PLATES,
            ("cloud.load.species=electron", "electrode.below.voltage=3 kV"),
            ["Voltages up to 3 kV"],
        ),
        (TRAP + DRAG, (), ["Gas comes from bottles under pressure"]),
    ],
)
def test_hazards_are_told_and_left_to_local_codes_and_licensed_practice(
    tmp_path: Path, text: str, settings: tuple[str, ...], expected: list[str]
) -> None:
    told = cautions(loaded(tmp_path, text, *settings).scenario)
    assert expected == [
        sentence[: len(start)] for sentence, start in zip(told, expected, strict=False)
    ]
    assert (len(expected) + 1 if expected else 0) == len(told)
    if expected:
        assert "local codes" in told[-1]
        assert "licensed" in told[-1]
        lines = explain(loaded(tmp_path, text, *settings))
        assert any(line.startswith("  Caution ") for line in lines)
        assert in_one_line(lines).endswith("check what is built.")
