"""Clouds from the keys a scenario would give."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from driftwell.forms.faults import Fault, read_form
from driftwell.particles.cloud import Cloud
from driftwell.particles.species import SpeciesForm, bodies
from driftwell.particles.state import Particles

ION, _ = read_form(SpeciesForm, {"mass": "100 u", "charge": "1 e"})
assert ION is not None
BODIES = bodies({"ion": ION})


def cloud_of(**keys: Any) -> Cloud:
    """The cloud these keys mean; a key that is None is left out."""
    cloud, faults = read_form(Cloud, _keys(keys))
    assert cloud is not None, faults
    return cloud


def _keys(keys: dict[str, Any]) -> dict[str, Any]:
    usual = {"name": "load", "species": "ion", "count": 1000}
    return {name: value for name, value in (usual | keys).items() if value is not None}


def _load(seed: int = 7, folder: Path = Path(), first_id: int = 0, **keys: Any) -> Particles:
    return cloud_of(**keys).load(seed, BODIES, first_id, 0, 0, folder)


def _faults(folder: Path = Path(), **keys: Any) -> list[Fault]:
    cloud, faults = read_form(Cloud, _keys(keys))
    return faults if cloud is None else cloud.faults(BODIES, folder)


@pytest.fixture(scope="session")
def load() -> Callable[..., Particles]:
    """load(seed=..., folder=..., first_id=..., **keys): the charges of a cloud of 100 u ions."""
    return _load


@pytest.fixture(scope="session")
def faults_of() -> Callable[..., list[Fault]]:
    """faults_of(folder=..., **keys): every fault of a cloud."""
    return _faults


@pytest.fixture(scope="session")
def words_of() -> Callable[..., str]:
    """words_of(folder=..., **keys): what `driftwell check` says of a cloud."""
    return lambda folder=Path(), **keys: cloud_of(**keys).words(BODIES, folder)
