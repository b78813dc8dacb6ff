"""How much a cloud is, what its numbers depend on, and options that contradict each other."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.errors import ScenarioError
from driftwell.forms.faults import Fault
from driftwell.particles.draws import Draws
from driftwell.particles.state import Particles, joined

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]
WordsOf = Callable[..., str]

E = ELEMENTARY_CHARGE
BALL = {"kind": "ball", "radius": "1 mm"}
LIST = {"kind": "points", "positions": [["0 m", "0 m", "0 m"], ["1 m", "0 m", "0 m"]]}
THERMAL = {"temperature": "300 K"}


# -- how much ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("keys", "count", "weight"),
    [
        ({"count": 300}, 300, 1.0),
        ({"count": 300, "weight": 50}, 300, 50.0),
        ({"count": 300, "weight": 0.5}, 300, 0.5),
        ({"count": 300, "total_charge": "600 e"}, 300, 2.0),
        ({"count": 1000, "total_charge": "1 pC"}, 1000, 1e-15 / E),
        ({"count": None, "weight": 100, "total_charge": "30049 e"}, 300, 100.0),
        ({"count": None, "weight": 100, "total_charge": "30051 e"}, 301, 100.0),
        ({"count": None, "shape": LIST}, 2, 1.0),
        ({"count": None, "shape": LIST, "weight": 7}, 2, 7.0),
        ({"count": None, "shape": LIST, "total_charge": "7 e"}, 2, 3.5),
    ],
)
def test_count_and_weight_follow_from_what_is_given(
    load: Load, keys: dict[str, Any], count: int, weight: float
) -> None:
    found = load(**({"shape": BALL} | keys))
    assert count == len(found)
    assert [weight] * count == pytest.approx(found.weight.tolist(), rel=1e-14, abs=0.0)
    assert [E] * count == found.charge.tolist()
    assert [100.0 * ATOMIC_MASS] * count == pytest.approx(found.mass.tolist(), rel=1e-14, abs=0.0)


@given(count=st.integers(1, 500), charge=st.floats(1e-19, 1e-6))
def test_a_total_charge_shared_by_a_count_comes_out_exactly(
    load: Load, count: int, charge: float
) -> None:
    found = load(species="alpha", count=count, total_charge=f"{charge!r} C", shape=BALL)
    total = math.fsum(found.charge * found.weight)
    assert charge == pytest.approx(total, rel=1e-13, abs=0.0)


@pytest.mark.parametrize(
    ("keys", "path", "needed"),
    [
        ({"count": None}, (), "needs `count`, or `total_charge` and `weight`"),
        ({"count": None, "weight": 2}, (), "needs `count` beside `weight`"),
        ({"count": None, "total_charge": "1 pC"}, (), "needs `count` beside `total_charge`"),
        ({"weight": 2, "total_charge": "1 pC"}, (), "at most two of"),
        ({"shape": LIST}, (), "leave out `count`"),
        (
            {"shape": LIST, "count": None, "weight": 2, "total_charge": "1 pC"},
            (),
            "`weight` or `total_charge`, not both",
        ),
        ({"count": 0}, ("count",), "at least 1"),
        ({"count": -5}, ("count",), "at least 1"),
        ({"count": 2.5}, ("count",), "whole number"),
        ({"count": 10_000_001}, ("count",), "at most 1e+07"),
        ({"count": True}, ("count",), "whole number"),
        ({"weight": 0}, ("weight",), "greater than 0"),
        ({"weight": math.inf}, ("weight",), "finite"),
        ({"total_charge": "0 C"}, ("total_charge",), "other than 0"),
        ({"total_charge": "-1 pC"}, ("total_charge",), "must be positive"),
        (
            {"species": "electron", "total_charge": "1 pC"},
            ("total_charge",),
            "must be negative, as the charge of electron is",
        ),
        (
            {"count": None, "weight": 1e9, "total_charge": "1 e"},
            ("total_charge",),
            "is 0 charges of weight 1e+09; needs 1 to 10000000",
        ),
        (
            {"count": None, "weight": 1e-300, "total_charge": "1 C"},
            ("total_charge",),
            "change `weight`",
        ),
        ({"name": ""}, ("name",), "1 to 60 characters"),
        ({"cuont": 3}, ("cuont",), 'did you mean "count"'),
        ({"motion": "at rest"}, ("motion",), "a table"),
    ],
)
def test_amounts_that_contradict_each_other_are_faults(
    faults_of: FaultsOf, keys: dict[str, Any], path: tuple[str, ...], needed: str
) -> None:
    faults = faults_of(**({"shape": BALL} | keys))
    assert [path] == [fault.path for fault in faults]
    assert needed in faults[0].needed


def test_all_faults_of_a_cloud_are_told_at_once(faults_of: FaultsOf, load: Load) -> None:
    keys: dict[str, Any] = {
        "shape": BALL,
        "total_charge": "-1 pC",
        "motion": {
            "temperature": "1e13 K",
            "velocity": ["1 m/s", "0 m/s", "0 m/s"],
            "energy_spread": "1 eV",
        },
    }
    paths = [fault.path for fault in faults_of(**keys)]
    assert [("total_charge",), ("motion", "temperature"), ("motion", "energy_spread")] == paths
    with pytest.raises(ScenarioError) as caught:
        load(**keys)
    lines = str(caught.value).splitlines()
    assert ['cloud "load" ' + ".".join(path) for path in paths] == [
        line.split(":")[0] for line in lines
    ]


@pytest.mark.parametrize(
    "keys",
    [
        {"shape": {"kind": "ball", "radius": "1.7e308 m"}, "motion": THERMAL},
        {"shape": {"kind": "ball", "radius": "1 m", "centre": ["1e308 m", "0 m", "0 m"]}},
        {"motion": {"velocity": ["299792457.99999994 m/s", "0 m/s", "0 m/s"]}},
        {"count": 1, "total_charge": "1e300 C"},
        {"shape": {"kind": "gaussian", "sigma": "1e308 m"}},
    ],
)
def test_numbers_at_the_end_of_their_range_give_charges_or_words(
    load: Load, keys: dict[str, Any]
) -> None:
    told = "not finite"
    try:
        found = load(**({"shape": BALL} | keys))
        assert np.isfinite(found.position).all()
        assert np.isfinite(found.velocity).all()
    except ScenarioError as error:
        told = str(error)
    assert "not finite" in told


# -- what the numbers depend on ---------------------------------------------------------------


def test_the_same_seed_gives_the_same_charges_and_another_seed_others(load: Load) -> None:
    keys: dict[str, Any] = {"shape": BALL, "motion": THERMAL}
    first, again, other = load(**keys), load(**keys), load(seed=8, **keys)
    for name in ("position", "velocity"):
        assert getattr(first, name).tolist() == getattr(again, name).tolist()
        assert not np.any(getattr(first, name) == getattr(other, name))


def test_a_cloud_does_not_depend_on_its_place_among_other_clouds(load: Load) -> None:
    keys: dict[str, Any] = {"shape": BALL, "motion": THERMAL}
    alone = load(name="b", **keys)
    a = load(name="a", count=10, **keys)
    b = load(name="b", first_id=len(a), **keys)
    both = joined([a, b])
    assert list(range(1010)) == both.id.tolist()
    assert alone.position.tolist() == both.position[:, 10:].tolist()
    assert alone.velocity.tolist() == both.velocity[:, 10:].tolist()
    assert not np.any(a.position == b.position[:, :10])


def test_places_and_velocities_of_a_cloud_are_independent_of_each_other(load: Load) -> None:
    count = 50_000
    found = load(
        count=count,
        shape={"kind": "gaussian", "sigma": "1 mm"},
        motion={
            "kinetic_energy": "1 keV",
            "divergence": "10 mrad",
            "energy_spread": "20 eV",
            "temperature": "1000 K",
        },
    )
    correlation = np.corrcoef(np.vstack([found.position, found.velocity]))
    off = correlation - np.diag(np.diag(correlation))
    assert np.max(np.abs(off)) < 4.5 / math.sqrt(count)  # 4.5 standard errors


def test_no_stream_of_random_numbers_is_used_for_two_purposes(
    load: Load, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked: list[str] = []
    key = Draws._key

    def noted(draws: Draws, purpose: str) -> int:
        asked.append(purpose)
        return key(draws, purpose)

    monkeypatch.setattr(Draws, "_key", noted)
    motion = THERMAL | {"kinetic_energy": "1 eV", "divergence": "1 deg", "energy_spread": "10 meV"}
    load(shape=BALL, motion=motion)
    assert ["divergence", "energy spread", "place", "temperature"] == sorted(asked)


def test_a_motion_does_not_change_where_charges_are_nor_a_shape_how_they_move(load: Load) -> None:
    still, warm = load(shape=BALL), load(shape=BALL, motion=THERMAL)
    assert still.position.tolist() == warm.position.tolist()
    box = load(shape={"kind": "box", "size": "1 mm"}, motion=THERMAL)
    assert warm.velocity.tolist() == box.velocity.tolist()


def test_a_larger_count_keeps_the_velocities_of_the_first_charges(load: Load) -> None:
    motion = THERMAL | {"kinetic_energy": "1 eV", "divergence": "1 deg", "energy_spread": "10 meV"}
    few = load(count=100, shape=BALL, motion=motion)
    many = load(count=177, shape=BALL, motion=motion)
    assert few.velocity.tolist() == many.velocity[:, :100].tolist()


# -- what is said of it -----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("keys", "said"),
    [
        (
            {"count": 2000, "motion": THERMAL},
            "2000 ion charges (2000 e in all), uniform in a ball of radius 1 mm, at 300 K",
        ),
        (
            {"species": "electron", "count": None, "weight": 100, "total_charge": "-1 pC"},
            "62415 electron charges, each for 100 real ones (-999.999 fC in all), "
            "uniform in a ball of radius 1 mm, at rest",
        ),
        (
            {"count": None, "shape": LIST},
            "2 ion charges (2 e in all), at listed places, at rest",
        ),
    ],
)
def test_a_cloud_is_told_in_one_sentence(
    words_of: WordsOf, keys: dict[str, Any], said: str
) -> None:
    assert said == words_of(**({"shape": BALL} | keys))
