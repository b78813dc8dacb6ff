"""A field given as a Python function pushes as a kind of driftwell's own would, or is refused."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numba
import numpy as np
import pytest

from driftwell import DriftwellError, RecordError, Scenario, ScenarioError
from driftwell.cli.main import main
from driftwell.fields.from_python import functions
from driftwell.fields.from_python.functions import text_digest
from tests.api.small_scenarios import rods, trap

DRIVE = {"amplitude": 180.0, "frequency": "1.1 MHz"}
HALF = 0.5


def quadrupole(x: float, y: float, z: float, r0: float) -> tuple[float, float, float, float]:
    """(x^2 - y^2) / (2 r0^2) and minus its gradient, for 1 V."""
    k = 1.0 / r0**2
    return HALF * k * (x * x - y * y), -k * x, k * y, 0.0


def upside_down(x: float, y: float, z: float, r0: float) -> tuple[float, float, float, float]:
    k = 1.0 / r0**2
    return HALF * k * (x * x - y * y), k * x, -k * y, 0.0


def uniform(x: float, y: float, z: float) -> tuple[float, float, float]:
    return 0.0, 0.0, 1.0


def with_sources(x: float, y: float, z: float) -> tuple[float, float, float]:
    return 10.0 * x, 0.0, 1.0


def nowhere(x: float, y: float, z: float) -> tuple[float, float, float, float]:
    return math.nan, 0.0, 0.0, 0.0


def loud(x: float, y: float, z: float) -> tuple[float, float, float, float]:
    if z > 1.0:
        raise ValueError(z)
    return 0.0, 0.0, 0.0, 0.0


def given(scenario: Scenario, function: Any = quadrupole, **keys: Any) -> Scenario:
    return scenario.field_function("rods", function, {"r0": 3.5e-3}, scale=DRIVE, **keys)


def test_a_quadrupole_given_as_a_function_moves_ions_as_the_built_in_one(tmp_path: Path) -> None:
    """Both add the same numbers in another order of operations: rounding, grown over 1000 steps."""
    own = rods(trap()).run(tmp_path / "own", progress=False)
    made = given(trap()).run(tmp_path / "given", progress=False)
    apart = np.abs(own.positions[:] - made.positions[:]).max()
    assert apart < 1e-9 * np.abs(own.positions[:]).max()
    assert own.ledger["energy_residual"] == pytest.approx(
        made.ledger["energy_residual"], abs=1e-9, rel=1e-6
    )


def test_a_function_compiled_by_numba_is_the_same_as_its_python_text(tmp_path: Path) -> None:
    plain, compiled = given(trap()), given(trap(), numba.njit(quadrupole, fastmath=True))
    assert plain.digest == compiled.digest


@pytest.mark.parametrize("threads", [1, 2])
def test_the_bits_do_not_depend_on_the_number_of_threads(threads: int, tmp_path: Path) -> None:
    many = given(trap(count=300, duration="5 us")).coulomb(method="direct")
    found = many.run(tmp_path / "run", threads=threads, progress=False).trajectory[1]
    again = many.run(tmp_path / "again", threads=1, progress=False).trajectory[1]
    assert np.array_equal(again, found)


def test_the_steps_follow_the_field_that_is_given(tmp_path: Path) -> None:
    made = given(trap()).stepping(step="auto").run(tmp_path / "run", progress=False)
    assert "the drive of field" in made.told[0]
    assert 9.09e-9 == pytest.approx(made.header.step, rel=1e-3, abs=0.0)


def test_a_flux_turns_ions_as_a_uniform_field_does(tmp_path: Path) -> None:
    """Compared over a part of a turn; the built-in kind follows its helix exactly."""
    own = trap(duration="2 us").field("coil", kind="uniform-magnetic", strength="2 T")
    made = trap(duration="2 us").field_function("coil", uniform, gives="flux", scale=2.0)
    one, other = (
        each.run(tmp_path / name, progress=False) for name, each in (("a", own), ("b", made))
    )
    moved = np.abs(one.positions[-1] - one.positions[0]).max()
    assert np.abs(one.positions[-1] - other.positions[-1]).max() < 1e-4 * moved
    cyclotron = 1.602176634e-19 * 2.0 / (138.0 * 1.66053906892e-27)
    assert cyclotron == pytest.approx(other.header.motion_rate, rel=1e-6, abs=0.0)


def test_a_force_that_is_not_minus_the_gradient_is_refused_with_place_and_numbers(
    tmp_path: Path,
) -> None:
    with pytest.raises(ScenarioError, match=r"not minus the gradient.*Ex|Ey = .* V/m along"):
        given(trap(), upside_down).run(tmp_path / "run")
    assert not (tmp_path / "run").exists()


def test_a_force_off_by_a_hundred_thousandth_is_refused(tmp_path: Path) -> None:
    def nearly(x: float, y: float, z: float, r0: float) -> tuple[float, float, float, float]:
        k = 1.0 / r0**2
        return HALF * k * (x * x - y * y), -1.00001 * k * x, 1.00001 * k * y, 0.0

    with pytest.raises(ScenarioError, match="not minus the gradient"):
        given(trap(), nearly).run(tmp_path / "run")


@pytest.mark.parametrize(
    ("function", "gives", "told"),
    [
        (with_sources, "flux", "divergence is up to 10"),
        (nowhere, "potential", "gives no number at"),
    ],
)
def test_functions_that_are_no_fields_are_refused_before_the_run(
    function: Any, gives: Any, told: str, tmp_path: Path
) -> None:
    with pytest.raises(ScenarioError, match=told):
        trap().field_function("odd", function, gives=gives).run(tmp_path / "run")


@pytest.mark.parametrize(
    ("function", "told"),
    [
        (lambda x, y: (0.0, 0.0, 0.0, 0.0), "needs the arguments x, y, z"),
        (lambda x, y, z: (0.0, 0.0), "returns 2 values; needs 4"),
        (lambda x, y, z: 0.0, "returns 1 value; needs 4"),
        (lambda x, y, z: ("", 0.0, 0.0, 0.0), "cannot be compiled"),
        (lambda x, y, z: open(x), "cannot be compiled by numba"),  # noqa: SIM115, PTH123
        (loud, "raises, or asserts"),
        (3.0, "needs a function written in Python"),
        (math.sin, "needs a function written in Python"),
    ],
    ids=range(8),
)
def test_what_cannot_be_a_field_function_is_told_when_it_is_given(function: Any, told: str) -> None:
    with pytest.raises(ScenarioError, match=told):
        trap().field_function("odd", function)


def test_parameters_go_by_the_names_of_the_arguments(tmp_path: Path) -> None:
    with pytest.raises(ScenarioError, match="takes r0 after x, y, z; there are radius here"):
        trap().field_function("rods", quadrupole, {"radius": 1e-3}).run(tmp_path / "run")


def test_a_flux_that_changes_in_time_is_a_fault_of_its_scale() -> None:
    (fault,) = trap().field_function("coil", uniform, gives="flux", scale=DRIVE).faults()
    assert 'field]] "coil" scale: must be constant' in fault


def test_the_digest_changes_with_the_text_and_with_what_the_text_uses(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    first = text_digest(quadrupole)
    assert first == text_digest(quadrupole)
    assert first != text_digest(upside_down)
    monkeypatch.setitem(globals(), "HALF", 0.25)
    assert first != text_digest(quadrupole)


def test_a_function_without_readable_text_is_known_by_its_byte_code() -> None:
    found = []
    for factor in ("2.0", "2.0", "3.0"):
        names: dict[str, Any] = {}
        exec(f"def g(x, y, z):\n    return {factor} * z, 0.0, 0.0, -{factor}", names)
        found.append(text_digest(names["g"]))
    assert found[0] == found[1]
    assert found[0] != found[2]


def test_a_run_goes_on_with_the_same_function_and_not_with_another(tmp_path: Path) -> None:
    long = trap(count=60, duration="3 ms").record(every="0.1 ms")
    given(long).run(tmp_path / "run", stop_after=1e-9, progress=False)
    with pytest.raises(RecordError, match="holds another run"):
        rods(long).run(tmp_path / "run", progress=False)
    gone_on = given(long).run(tmp_path / "run", progress=False)
    assert "finished" == gone_on.outcome.word
    assert any("Going on" in each for each in gone_on.told)


def test_the_command_line_says_that_the_field_comes_from_python_and_reads_its_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    run = given(trap(duration="1 us")).run(tmp_path / "run", progress=False)
    assert "" == run.header.command
    monkeypatch.setattr(functions, "_given", {})  # as in another process
    file = str(run.folder / "scenario.toml")
    assert 2 == main(["run", file, "-o", str(tmp_path / "other"), "--threads", "1"])
    told = capsys.readouterr().err
    assert '[[field]] "rods": is the Python function "quadrupole"' in told
    assert not (tmp_path / "other").exists()
    for words in (["check", file], ["info", str(run.folder)]):
        assert 0 == main(words)
    told = " ".join(capsys.readouterr().out.split())
    assert 'potential by the Python function "quadrupole"' in told
    assert "answers held 1.0" in told


def test_a_process_without_the_function_says_so(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    scenario = given(trap())
    monkeypatch.setattr(functions, "_given", {})
    with pytest.raises(DriftwellError, match="which no file holds"):
        scenario.run(tmp_path / "run")
    assert () == scenario.faults()
