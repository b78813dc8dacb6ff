"""Hand calculations of beams, guns and gases against published values."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from driftwell.forms.body import Body
from driftwell.hand.beam import Beam, generalised_perveance
from driftwell.hand.kinds.beam_envelope import envelope
from driftwell.hand.kinds.child_langmuir import current_density
from driftwell.hand.kinds.universal_curve import spread
from tests.hand.scenes import E, U, cloud, ions, one, scene

PROTON = Body("proton", 1.6726e-27, E)


def test_the_universal_curve_is_that_of_dawsons_function() -> None:
    """z sqrt(2 K)/R0 for R/R0 = 1.1, 2, 3, 10 (Abramowitz and Stegun, table 7.5; Reiser 1994)."""
    for chi, reach in (
        (1.1, 0.6376371210559587),
        (2.0, 2.1450375996356517),
        (3.0, 3.200292894919425),
        (10.0, 8.46574798907419),
    ):
        found = spread(1.25e-3, 5e-3, reach * 5e-3 / math.sqrt(2.5e-3))
        assert chi * 5e-3 == pytest.approx(found, rel=1e-9, abs=0.0)


def test_a_proton_beam_of_10_ma_has_its_perveance() -> None:
    """30 keV without relativity (Reiser 1994): 0.0012496413151481351."""
    momentum = 2397368.3960946277 / 299792458.0
    assert 0.0012496413151481351 == pytest.approx(
        generalised_perveance(0.01, PROTON, momentum), rel=1e-9, abs=0.0
    )


@pytest.mark.parametrize(
    ("distance", "edge"),
    [(0.1, 0.003192520454371186), (0.2, 0.006032028415521456), (0.5, 0.018575868737387674)],
)
def test_the_envelope_with_emittance_is_that_of_its_equation(distance: float, edge: float) -> None:
    """Waist of 2 mm, K = 5e-4, 10 mm mrad (Reiser 1994, eq. 4.191, solved to 1e-10)."""
    given: Any = None
    beam = Beam(given, 2, 1.0, 2e-3, 0.0, 1e-5, 1.0, 0.0, 5e-4)
    assert edge == pytest.approx(envelope(beam, distance), rel=1e-7, abs=0.0)


def test_a_short_bunch_is_no_long_beam(tmp_path: Path) -> None:
    """The same beam, 100 and 2 radii long: only the first lies within the formula's range."""
    screen = {"name": "screen", "kind": "plane", "at": ["0 mm", "0 mm", "200 mm"]}
    for length, inside in (("500 mm", True), ("10 mm", False)):
        shape = {"kind": "cylinder", "radius": "5 mm", "length": length}
        found = scene(
            tmp_path,
            cloud=[
                cloud(shape, "proton", weight=1e5, motion={"kinetic_energy": "30 keV"}),
            ],
            coulomb={"softening": "0.1 mm"},
            detector=[screen],
        )
        assert inside == one(found, "edge of cloud").inside
        assert inside == one(found, "rms size of cloud").inside
        flight = one(found, "flight of cloud")
        # gamma - 1 = 3.2e-5 slows it by 3/4 of that
        assert 0.2 / 2397368.396 == pytest.approx(flight.value, rel=1e-4, abs=0.0)


def test_the_law_of_child_and_langmuir_is_that_of_the_handbook() -> None:
    """Electrons, 1 kV over 5 mm: 2952.2416299614306 A/m^2 (NRL Plasma Formulary)."""
    electron = Body("electron", 9.1093837139e-31, -E)
    assert 2952.2416299614306 == pytest.approx(
        current_density(1000.0, 5e-3, electron), rel=1e-9, abs=0.0
    )


def gas(**more: Any) -> dict[str, Any]:
    return {"name": "gas", "kind": "gas-collisions", "temperature": "300 K", **more}


def test_langevins_collision_time_is_that_of_the_textbook(tmp_path: Path) -> None:
    """N2+ in helium, k_L = 5.666219050201696e-10 cm^3/s (Gioumousis and Stevenson 1958)."""
    helium = gas(
        mass="4.0026 u",
        pressure=f"{1e20 * 1.380649e-23 * 300.0!r} Pa",
        collision={"kind": "induced-dipole", "polarisability": "0.205 angstrom^3"},
        loss=0.5,
    )
    shape = {"kind": "gaussian", "sigma": "1 mm"}
    found = scene(tmp_path, species=ions(28.0129 * U), cloud=[cloud(shape)], process=[helium])
    time = one(found, "mean collision time").value
    assert 1.0 / 56662.19050201696 == pytest.approx(time, rel=1e-7, abs=0.0)
    lifetime = one(found, "lifetime of ion")
    assert 2.0 * time == pytest.approx(lifetime.value, rel=1e-12, abs=0.0)
    assert lifetime.inside


def test_the_mobility_is_that_of_mason_and_schamp(tmp_path: Path) -> None:
    """100 u in nitrogen, 100 Pa, 300 K, 1e-18 m^2 (Mason and McDaniel 1988)."""
    nitrogen = gas(
        mass="28.0134 u",
        pressure="100 Pa",
        collision={"kind": "hard-sphere", "cross_section": "1e-18 m^2"},
    )
    shape = {"kind": "gaussian", "sigma": "1 mm"}
    found = scene(
        tmp_path,
        species=ions(100.0 * U),
        cloud=[cloud(shape, motion={"temperature": "300 K"})],
        process=[nitrogen],
    )
    assert 0.2542284353489832 == pytest.approx(
        one(found, "mobility of ion").value, rel=1e-7, abs=0.0
    )
    assert 1.0 / 3795221.879464554 == pytest.approx(
        one(found, "damping time").value, rel=1e-7, abs=0.0
    )
    rate = one(found, "mean collision time")
    assert 1.0 / 13007326.579725625 == pytest.approx(rate.value, rel=1e-7, abs=0.0)
    assert rate.inside
