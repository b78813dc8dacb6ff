"""Processes as a scenario states them: what is read, refused and told, and what a run records."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.constants import atomic_mass, elementary_charge

from driftwell.errors import ScenarioError
from driftwell.record.reader import open_run
from driftwell.record.summary import summary
from driftwell.run import run
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario
from tests.cases import process
from tests.running import Unwatched, carried_out, points
from tests.scenario.good_scenarios import toml_file

GAS = {
    "name": "helium",
    "kind": "gas-collisions",
    "mass": "4.0026 u",
    "pressure": "1e-3 mbar",
    "collision": {"kind": "induced-dipole", "polarisability": "0.205 angstrom^3"},
}
DRAG = {"name": "air", "kind": "mobility-drag", "mobility": "2 cm^2/(V s)"}
BATH = {
    "name": "bath",
    "kind": "thermostat",
    "temperature": "300 K",
    "relaxation_time": "50 us",
}
SPRAY = {
    "name": "gun",
    "species": "ion",
    "current": "100 e/ms",
    "weight": 1,
    "spacing": "even",
    "emitter": {"kind": "point"},
}
ION = {"ion": {"mass": "100 u", "charge": "1 e"}, "other": {"mass": "4 u", "charge": "1 e"}}


def table(*processes: dict[str, Any], **sections: Any) -> dict[str, Any]:
    """A scenario of two clouds with processes."""
    return {
        "title": "a check",
        "duration": "1 ms",
        "species": ION,
        "cloud": [
            points("load", "ion", [[0, 0, 0], [1e-3, 0, 0]]),
            points("rest", "other", [[0, 0, 1e-3]]),
        ],
        "process": list(processes),
    } | sections


def read(folder: Path, *processes: dict[str, Any], **sections: Any) -> Any:
    path = folder / "scenario.toml"
    path.write_text(toml_file(table(*processes, **sections)))
    return read_scenario(path)


@pytest.mark.parametrize(
    ("processes", "sections", "expected"),
    [
        ([GAS], {"stepping": {"scheme": "composed-4"}}, "is no scheme for [[process]] entries"),
        ([GAS | {"pressure": "1 V"}], {}, "needs a pressure such as"),
        ([GAS | {"exchange": 0.7, "loss": 0.7}], {}, "together must be at most 1"),
        ([GAS | {"exchange": 0.5}], {}, 'needs a gas of the ions\' own mass, 100 u for "ion"'),
        ([GAS | {"of": ["lode"]}], {}, "did you mean 'load'?"),
        ([GAS | {"start": "2 ms"}], {}, "lies not before the end of the run, 1 ms"),
        ([GAS | {"start": "2 us", "end": "1 us"}], {}, "`end` must be later than `start`"),
        ([DRAG, BATH], {}, 'is drag on "load" beside "air"'),
        ([DRAG | {"reduced_mobility": "2 cm^2/(V s)"}], {}, "either `mobility` or"),
        ([GAS | {"region": {"x": ["1 mm", "0 mm"]}}], {}, "from the smaller to the larger"),
        ([GAS, DRAG | {"name": "helium"}], {}, "is the name of [[process]] number 1 already"),
        (
            [GAS | {"name": "bore"}],
            {"wall": [{"name": "bore", "kind": "cylinder", "radius": "1 cm"}]},
            "is the name of a [[wall]] already",
        ),
        ([GAS | {"of": ["electron"]}], {}, "acts on no cloud and no source"),
        ([GAS | {"of": ["gnu"]}], {"source": [SPRAY]}, 'did you mean "gun"?'),
        ([DRAG, BATH], {"cloud": [], "source": [SPRAY]}, 'is drag on "gun" beside "air"'),
    ],
)
def test_what_does_not_fit_is_refused_in_words(
    tmp_path: Path, processes: Any, sections: Any, expected: str
) -> None:
    with pytest.raises(ScenarioError) as refused:
        read(tmp_path, *processes, **sections)
    assert expected.replace("'load'", '"load"') in " ".join(str(refused.value).split())


def test_drags_on_different_clouds_and_a_gas_go_together(tmp_path: Path) -> None:
    named = DRAG | {"of": ["load"]}, BATH | {"of": ["other"]}, GAS
    assert 3 == len(read(tmp_path, *named).scenario.process)


def test_a_stream_from_a_source_drifts_as_its_mobility_says(tmp_path: Path) -> None:
    """From rest, x = K E (t - T + T exp(-t/T)), T = K m/q: 100 mm take 0.5 ms + 2.1 us.

    They are born evenly, 5 us, 15 us, ... on; those of the first half arrive before the end.
    """
    found = carried_out(
        tmp_path,
        1e-3,
        species=ION,
        source=[SPRAY],
        field=[{"name": "drive", "kind": "uniform-electric", "strength": "100 V/m"}],
        process=[DRAG | {"mobility": "2 m^2/(V s)", "of": ["gun"]}],
        detector=[{"name": "end", "kind": "plane", "at": ["0 m", "0 m", "100 mm"]}],
        coulomb={"method": "off"},
        stepping={"step": "0.1 us"},
        question=[{"name": "arrival", "ask": "arrival-time", "of": "end"}],
    )
    relaxation = 2.0 * 100 * atomic_mass / elementary_charge
    assert 50 == found.rows("crossings").size
    assert 0.75e-3 + relaxation == pytest.approx(found.answers[0].value, rel=1e-5, abs=0.0)


def test_check_tells_of_processes_and_of_their_hazards(tmp_path: Path) -> None:
    light = {
        "name": "beam",
        "kind": "laser-cooling",
        "wavelength": "397 nm",
        "linewidth": "21.6 MHz",
        "detuning": "-10.8 MHz",
        "saturation": 0.5,
        "direction": [1.0, 0.0, 0.0],
        "of": ["load"],
        "end": "0.5 ms",
    }
    told = " ".join(" ".join(explain(read(tmp_path, GAS, light))).split())
    for words in (
        "helium gas of 4.0026 u at 100 mPa and 300 K, induced dipoles of 0.205 angstrom^3",
        "light of 397 nm along (1, 0, 0), width 21.6 MHz, detuned by -10.8 MHz",
        "on load, until 500 us",
        "Laser beams blind",
        "Gas comes from bottles under pressure",
        "follow your local codes, and have licensed practitioners",
    ):
        assert words in told
    told = " ".join(" ".join(explain(read(tmp_path, DRAG))).split())
    assert "Gas comes from bottles under pressure" in told
    assert "Caution" not in " ".join(explain(read(tmp_path, BATH)))


def test_a_mobility_may_be_reduced() -> None:
    """K = K0 (101325 Pa / p) (T / 273.15 K): at 1 mbar and 300 K, by hand."""
    drag = process(
        "mobility-drag", reduced_mobility="2 cm^2/(V s)", pressure="100 Pa", temperature="300 K"
    )
    assert 2e-4 * 1013.25 * 300.0 / 273.15 == pytest.approx(drag.actual(), rel=1e-12, abs=0.0)


def test_a_run_records_what_each_process_gave_and_took(tmp_path: Path) -> None:
    """By names of their own, beside each row of the ledger; losses stand under the gas's name."""
    n = 60
    random = np.random.default_rng(3)
    gas = GAS | {"loss": 0.3, "pressure": "0.01 Pa"}
    found = carried_out(
        tmp_path,
        2e-3,
        species=ION,
        cloud=[
            points("load", "ion", random.normal(scale=1e-3, size=(n, 3)), np.full((n, 3), 300.0))
        ],
        wall=[{"name": "far", "kind": "sphere", "radius": "50 m"}],
        process=[gas, DRAG | {"mobility": "400 m^2/(V s)"}],
        coulomb={"method": "off"},
        stepping={"step": "10 us"},
        record={"every": "0.5 ms"},
    )
    assert ("helium", "air") == found.header.processes
    assert ("far", "helium") == found.header.walls
    given, ledger = found.rows("exchange"), found.ledger
    assert given.shape == (len(ledger), 2, 8)
    assert given[0].tolist() == np.zeros((2, 8)).tolist()
    for name, columns in (("energy", 0), ("momentum", slice(1, 4)), ("angular", slice(4, 7))):
        assert ledger[f"{name}_processes"] == pytest.approx(
            given[:, :, columns].sum(axis=1), rel=1e-9, abs=1e-40
        )
        assert np.abs(ledger[f"{name}_residual"]).max() < 1e-11
    losses = found.losses()
    assert 5 < len(losses) < n
    assert (losses["wall"] == 1).all()
    assert len(np.unique(losses["time"] % 10e-6)) == len(losses)
    assert given[-1, 0, 7] > len(losses)
    assert given[-1, 1, 7] == 0.0
    lines = "\n".join(summary(found))
    assert "lost on helium" in lines
    assert "helium gave" in lines
    assert "events" in lines


def test_a_run_with_gas_that_was_stopped_ends_bit_for_bit_as_one_that_was_not(
    tmp_path: Path,
) -> None:
    """Through the record's own segments and states, stopped at every third look."""
    sections = table(GAS | {"pressure": "1 Pa", "loss": 1e-3}, BATH | {"of": ["rest"]})
    sections |= {"coulomb": {"method": "off"}, "stepping": {"step": "1 us"}}
    sections |= {"record": {"every": "0.1 ms"}}
    path = tmp_path / "scenario.toml"
    path.write_text(toml_file(sections))

    class Impatient(Unwatched):
        def goes_on(self, progress: Any) -> bool:
            self.looks = getattr(self, "looks", 0) + 1
            return self.looks < 3

    whole = run(read_scenario(path), tmp_path / "whole", Unwatched())
    words = []
    for _ in range(200):
        words.append(run(read_scenario(path), tmp_path / "cut", Impatient()).outcome.word)
        if words[-1] != "stopped":
            break
    assert "finished" == whole.outcome.word == words[-1]
    assert len(words) > 2
    first, second = open_run(tmp_path / "whole"), open_run(tmp_path / "cut")
    for rows in ("exchange", "ledger", "losses", "trajectory/state"):
        assert first.rows(rows).tobytes() == second.rows(rows).tobytes()
