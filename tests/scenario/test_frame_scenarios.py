"""Frames of bunches as a scenario states them: faults, words, the step, and what a run tells."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.assembly import assembled
from driftwell.errors import ScenarioError
from driftwell.record.reader import open_run
from driftwell.run import Progress, run
from driftwell.scenario.explain import explain
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.running import Unwatched
from tests.scenario.good_scenarios import toml_file

GAMMA = 3.0
ENERGY = (GAMMA - 1.0) * 510998.95  # eV
PLANE = {"kind": "plane", "at": ["0 m", "0 m", "-1 m"]}


def pulse(name: str = "pulse", energy: float = ENERGY, length: str = "1 mm") -> dict[str, Any]:
    """40 bunches of 1000 electrons."""
    return {
        "name": name,
        "species": "electron" if name != "holes" else "positron",
        "count": 40,
        "weight": 1000,
        "shape": {"kind": "cylinder", "radius": "0.5 mm", "length": length},
        "motion": {"kinetic_energy": f"{energy!r} eV"} if energy else {},
    }


def stated(folder: Path, *clouds: dict[str, Any], **sections: Any) -> LoadedScenario:
    """A scenario of clouds; sections beside them."""
    table = {
        "title": "a check",
        "duration": "1 ns",
        "species": {"positron": {"mass": "5.4858e-4 u", "charge": "1 e"}},
        "cloud": list(clouds or (pulse(),)),
        "record": {"every": "0.5 ns"},
        **sections,
    }
    path = folder / f"s{len(list(folder.glob('*.toml')))}.toml"
    path.write_text(toml_file(table))
    return read_scenario(path)


@pytest.mark.parametrize(
    ("clouds", "sections", "expected"),
    [
        (
            [pulse()],
            {"coulomb": {"frame": "bunch"}, "images": PLANE},
            'frame = "bunch": does not go with [images]',
        ),
        (
            [pulse(), pulse("holes")],
            {"coulomb": {"frame": "bunch"}},
            "has several frames for charges of both signs",
        ),
        (
            [pulse(), pulse("tail")],
            {"coulomb": {"share_frame": [["pulse", "tail"]]}},
            'share_frame with frame = "auto"; needs frame = "bunch"',
        ),
        (
            [pulse(), pulse("tail")],
            {"coulomb": {"frame": "bunch", "share_frame": [["pulse", "tail"], ["tail"]]}},
            'share_frame has "tail" twice',
        ),
        (
            [pulse(), pulse("tail")],
            {"coulomb": {"frame": "bunch", "share_frame": [["pulse", "tial"]]}},
            '= "tial": no [[cloud]] is called so; did you mean "tail"?',
        ),
    ],
)
def test_what_does_not_go_with_frames_is_refused(
    tmp_path: Path, clouds: list[dict[str, Any]], sections: dict[str, Any], expected: str
) -> None:
    with pytest.raises(ScenarioError) as fault:
        stated(tmp_path, *clouds, **sections)
    assert expected in str(fault.value)
    assert 1 == len(str(fault.value).splitlines())


def test_opposite_charges_may_share_a_frame_or_be_softened(tmp_path: Path) -> None:
    both = pulse(), pulse("holes")
    together = {"frame": "bunch", "share_frame": [["pulse", "holes"]]}
    words = " ".join(explain(stated(tmp_path, *both, coulomb=together)))
    assert "in the rest frame of 1 bunch" in words
    softened = {"frame": "bunch", "softening": "10 um"}
    words = " ".join(explain(stated(tmp_path, *both, coulomb=softened)))
    assert "in the rest frames of 2 bunches" in words


def test_the_step_in_a_frame_is_longer_by_gamma(tmp_path: Path) -> None:
    """The same places at rest, where the bunch is longer by gamma; what is slow there is slower."""
    seldom: dict[str, Any] = {"duration": "100 us", "record": {"every": "10 us"}}
    slow = pulse(energy=0.0, length=f"{GAMMA} mm")
    rest = assembled(stated(tmp_path, slow, **seldom)).choice
    fast = assembled(stated(tmp_path, **seldom)).choice
    assert "plasma oscillation" in rest.because
    assert GAMMA * rest.step == pytest.approx(fast.step, rel=1e-6, abs=0.0)


class Listener(Unwatched):
    """Keeps what it is told."""

    def __init__(self) -> None:
        self.sentences: list[str] = []

    def told(self, sentence: str) -> None:
        self.sentences.append(sentence)


@pytest.mark.parametrize(
    ("frame", "expected", "never"),
    [
        ("auto", "The charges move together at 0.9428 c: they are summed in their own", "misses"),
        ("bunch", "The charges are summed in the mean rest frame of them all", "at rest, but"),
        ("laboratory", "magnetic forces take a share of 0.89 (1 - 1/Gamma^2)", "rest frame"),
    ],
)
def test_a_run_tells_in_what_frame_it_sums_or_what_it_leaves_out(
    tmp_path: Path, frame: str, expected: str, never: str
) -> None:
    """Once, in a run of three records; what is chosen stands in the record as well."""
    listener = Listener()
    loaded = stated(tmp_path, coulomb={"frame": frame}, stepping={"step": "20 ps"})
    result = run(loaded, tmp_path / "run", listener)
    said = [each for each in listener.sentences if expected in each]
    assert 1 == len(said)
    assert not any(never in each for each in listener.sentences)
    because = open_run(result.folder).header.coulomb_because
    assert (frame != "laboratory") == ("rest frame" in because)
    assert abs(result.ledger.energy_residual) < 1e-6
    twisted = float(np.abs(result.ledger.torque_frames).max())
    assert (frame != "laboratory") == (twisted > 0.0)


class Stopper(Unwatched):
    """Asks to stop at its second chance."""

    def __init__(self) -> None:
        self.asked = 0

    def goes_on(self, progress: Progress) -> bool:
        self.asked += 1
        return self.asked < 2


def test_a_stopped_run_in_frames_ends_as_an_unbroken_one(tmp_path: Path) -> None:
    """Two bunches pushed by a field, stopped in its midst and gone on with: the same last bit."""
    two = pulse(), pulse("tail", 0.9 * ENERGY)
    pushed = {"name": "gap", "kind": "uniform-electric", "strength": "-3 MV/m", "along": [1, 0, 2]}
    loaded = stated(
        tmp_path, *two, coulomb={"frame": "bunch"}, stepping={"step": "20 ps"}, field=[pushed]
    )
    whole = run(loaded, tmp_path / "whole", Unwatched())
    assert "stopped" == run(loaded, tmp_path / "broken", Stopper()).outcome.word
    again = run(loaded, tmp_path / "broken", Unwatched())
    assert "finished" == whole.outcome.word == again.outcome.word
    for name in ("energy_residual", "work_frames", "coulomb"):
        assert getattr(whole.ledger, name) == getattr(again.ledger, name)
    ends = [open_run(each.folder).snapshot(1e-9) for each in (whole, again)]
    assert ends[0].position.tobytes() == ends[1].position.tobytes()
    assert ends[0].velocity.tobytes() == ends[1].velocity.tobytes()
