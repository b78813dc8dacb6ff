"""Random events have the same bits on any number of threads, at any pause and after a resume."""

from __future__ import annotations

from typing import Any

import numba
import numpy as np
import pytest

from driftwell.kernels.threads import on_threads
from tests.cases import field, process
from tests.moving import DIRECT, ions, loop, to_end
from tests.same_bits.test_pauses import NEVER
from tests.same_bits.test_pauses import moved as paused
from tests.same_bits.test_resume import moved as resumed

GAS = process(
    "gas-collisions",
    mass="28 u",
    pressure="20 Pa",
    collision={"kind": "hard-sphere", "cross_section": "1e-18 m^2"},
)
HELIUM = process(
    "gas-collisions",
    name="helium",
    mass="4.0026 u",
    pressure="50 Pa",
    collision={"kind": "induced-dipole", "polarisability": "0.205 angstrom^3"},
    loss=0.03,
    start="1.1 us",
    end="6.3 us",
)
BATH = process("thermostat", temperature="300 K", relaxation_time="10 us", end="5 us")
SETTINGS = {"events": [GAS, HELIUM], "constant rates": [HELIUM], "all": [GAS, BATH, HELIUM]}
EVENTFUL = pytest.mark.parametrize("acting", SETTINGS.values(), ids=SETTINGS)


@EVENTFUL
def test_a_pause_after_every_step_changes_no_bit_of_processes(acting: Any) -> None:
    """In a trap with losses on surfaces and to the gas, bounces, a jump and a coil."""
    moving, _, often = paused(1, processes=acting)
    _, _, never = paused(NEVER, processes=acting)
    assert moving.exchanged[:, 7].sum() > 100.0
    for name, values in never.items():
        assert values == often[name], name


@EVENTFUL
def test_a_loop_taken_up_has_the_clocks_it_was_left_with(acting: Any) -> None:
    """Between any two calls; with accounts by process, clocks and numbers of events."""
    whole = resumed(NEVER, NEVER, coulomb=DIRECT, processes=acting)[1]
    assert any(name.startswith("processes/depth") for name in whole)
    for every in (2, 5):
        taken_up, found = resumed(7, every, coulomb=DIRECT, processes=acting)
        assert taken_up > 3
        for name, values in whole.items():
            assert values == found[name], name


@pytest.mark.skipif(numba.config.NUMBA_NUM_THREADS < 2, reason="needs two threads")
@EVENTFUL
def test_many_charges_have_the_same_bits_on_one_thread_and_two(acting: Any) -> None:
    """20 000 ions in a coil and a field, some of which are lost to the gas."""
    fields = [
        field("uniform-electric", strength="2 kV/m"),
        field("uniform-magnetic", strength="20 mT"),
    ]
    random = np.random.default_rng(8)
    place, speed = random.normal(scale=1e-3, size=(20_000, 3)), random.normal(size=(20_000, 3))
    found = []
    for threads in (1, 2):
        with on_threads(threads):
            moving = loop(
                ions(place, 300.0 * speed),
                5e-6,
                2.5e-7,
                fields=fields,
                processes=acting,
                threads=threads,
            )
            to_end(moving)
        lost = b"".join(each.id.tobytes() for each in moving.take_events())
        state = [values.tobytes() for values in moving.state().values()]
        found.append((moving.particles.position.tobytes(), lost, state))
        assert moving.exchanged[:, 7].sum() > 1000.0
        assert (moving.charges.alive == 0).sum() > 100
    assert found[0] == found[1]
