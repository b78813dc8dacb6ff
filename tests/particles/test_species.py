"""Species everyone knows, and those a scenario declares."""

from __future__ import annotations

import pytest

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.forms.faults import read_form
from driftwell.particles.species import BUILT_IN, SpeciesForm, bodies

E = ELEMENTARY_CHARGE

# CODATA 2022: E. Tiesinga, P. J. Mohr, D. B. Newell, B. N. Taylor, NIST (2024); electron and
# proton masses read in the table, the others from memory.
CODATA = [
    ("electron", 9.1093837139e-31, -E),
    ("positron", 9.1093837139e-31, E),
    ("proton", 1.67262192595e-27, E),
    ("antiproton", 1.67262192595e-27, -E),
    ("muon", 1.883531627e-28, -E),
    ("antimuon", 1.883531627e-28, E),
    ("deuteron", 3.3435837768e-27, E),
    ("triton", 5.0073567512e-27, E),
    ("helion", 5.0064127862e-27, 2 * E),
    ("alpha", 6.6446573450e-27, 2 * E),
]


@pytest.mark.parametrize(("name", "mass", "charge"), CODATA)
def test_a_built_in_species_has_its_published_mass_and_charge(
    name: str, mass: float, charge: float
) -> None:
    body = bodies({})[name]
    assert (name, charge) == (body.name, body.charge)
    assert mass == pytest.approx(body.mass, rel=1e-10, abs=0.0)


def test_every_built_in_species_is_compared_with_a_published_one() -> None:
    assert {name for name, _, _ in CODATA} == set(BUILT_IN)


def test_a_declared_species_joins_the_built_in_ones_and_wins_over_one_of_its_name() -> None:
    declared, faults = read_form(SpeciesForm, {"mass": "137.905 u", "charge": "2 e"})
    assert declared is not None, faults
    known = bodies({"barium": declared, "proton": declared})
    assert {*BUILT_IN, "barium"} == set(known)
    assert declared.mass == known["barium"].mass == known["proton"].mass
    assert 2 * E == known["proton"].charge
    assert bodies({})["proton"].mass < known["proton"].mass


@pytest.mark.parametrize(
    ("keys", "path", "needed"),
    [
        ({"mass": "1 u", "charge": "0 e"}, ("charge",), "other than 0"),
        ({"mass": "0 u", "charge": "1 e"}, ("mass",), "greater than 0"),
        ({"mass": "-1 u", "charge": "1 e"}, ("mass",), "greater than 0"),
        ({"mass": "1 eV", "charge": "1 e"}, ("mass",), "a mass"),
        ({"mass": "1 u", "charge": 1}, ("charge",), "a charge"),
        ({"mass": "1 u"}, ("charge",), "missing"),
    ],
)
def test_a_species_without_mass_or_charge_is_a_fault(
    keys: dict[str, object], path: tuple[str, ...], needed: str
) -> None:
    form, faults = read_form(SpeciesForm, keys)
    assert form is None
    assert [path] == [fault.path for fault in faults]
    assert needed in faults[0].needed


def test_a_species_says_its_mass_and_charge() -> None:
    form, _ = read_form(SpeciesForm, {"mass": "1e-26 kg", "charge": "-2 e"})
    assert form is not None
    assert "-2 e" in form.words()
