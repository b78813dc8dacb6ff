"""What a field refuses, and how it describes itself."""

from __future__ import annotations

import pytest
from pydantic import ValidationError

from tests.cases import FIELDS, field


def faults(kind: str, **keys: object) -> list[tuple[tuple[object, ...], str]]:
    """Where and what is refused."""
    with pytest.raises(ValidationError) as caught:
        field(kind, **keys)
    return [(fault["loc"], fault["msg"]) for fault in caught.value.errors()]


@pytest.mark.parametrize("kind", ["uniform-electric", "uniform-magnetic"])
def test_a_direction_must_not_be_zero(kind: str) -> None:
    unit = "V/m" if kind == "uniform-electric" else "T"
    ((where, what),) = faults(kind, strength=f"1 {unit}", along=[0, 0, 0])
    assert ("along",) == where
    assert "at least one component other than 0" in what


QUADRUPOLE = {"voltage": "1 V", "radius": "5 mm", "half_length": "4 mm"}
FREQUENCY = {"species": "barium", "value": "80 kHz"}


def test_a_static_quadrupole_needs_one_of_its_two_ways() -> None:
    ((_, nothing),) = faults("static-quadrupole")
    assert "or `axial_frequency` instead" in nothing
    ((_, both),) = faults("static-quadrupole", axial_frequency=FREQUENCY, **QUADRUPOLE)
    assert "`axial_frequency` takes the place of `voltage`, `radius`, `half_length`" in both


@pytest.mark.parametrize("missing", list(QUADRUPOLE))
def test_a_static_quadrupole_says_which_of_its_electrode_keys_is_missing(missing: str) -> None:
    given = {key: value for key, value in QUADRUPOLE.items() if key != missing}
    ((_, what),) = faults("static-quadrupole", **given)
    assert what.endswith(f"add `{missing}`")


def test_a_static_quadrupole_names_the_species_it_refers_to() -> None:
    by_frequency = field("static-quadrupole", axial_frequency=FREQUENCY)
    assert ("barium",) == by_frequency.species_named()
    assert () == field("static-quadrupole", **QUADRUPOLE).species_named()


def test_ellipticity_stays_between_minus_one_and_one() -> None:
    ((where, what),) = faults("static-quadrupole", ellipticity=1.2, **QUADRUPOLE)
    assert ("ellipticity",) == where
    assert "must be at least -1 and at most 1" == what


def test_a_magnetic_multipole_needs_one_of_strength_and_gradient() -> None:
    keys = {"order": 2, "radius": "20 mm"}
    for more in ({}, {"strength": "1 T", "gradient": "1 T/m"}):
        ((_, what),) = faults("magnetic-multipole", **keys, **more)
        assert "needs one of `strength` and `gradient`" == what


def test_a_gradient_belongs_to_a_quadrupole() -> None:
    ((_, what),) = faults("magnetic-multipole", order=3, radius="20 mm", gradient="1 T/m")
    assert "`gradient` belongs to order 2" in what


@pytest.mark.parametrize("order", [0, -1, 65, 1.5, "2"])
def test_an_order_is_a_whole_number_from_1_to_64(order: object) -> None:
    ((where, _),) = faults("electric-multipole", order=order, radius="4 mm", voltage="1 V")
    assert ("order",) == where


def test_a_wire_is_thinner_than_its_cylinder() -> None:
    ((_, what),) = faults(
        "wire-in-cylinder", wire_radius="10 mm", cylinder_radius="10 mm", voltage="1 V"
    )
    assert "`wire_radius` must be less than `cylinder_radius`" == what


def test_a_strength_of_another_dimension_is_refused() -> None:
    ((where, what),) = faults(
        "quadro-logarithmic", curvature="3 V/m", characteristic_radius="20 mm"
    )
    assert ("curvature", "constant") == where
    assert 'needs an electric field gradient such as "3.0e7 V/m^2"' in what


def test_a_multipole_magnet_needs_edges_that_have_a_series() -> None:
    """pi/2 edges or more from the axis it has none."""
    keys = {"order": 2, "strength": "0.3 T", "length": "50 mm", "edge": "10 mm"}
    ((_, what),) = faults("multipole-magnet", radius="16 mm", **keys)
    assert "`edge` must be longer than 0.64 times `radius`" in what
    assert field("multipole-magnet", radius="15 mm", **keys).radius == 15e-3


@pytest.mark.parametrize("key", ["radius", "length", "turns"])
def test_a_solenoid_has_sizes_and_turns_greater_than_zero(key: str) -> None:
    keys = {"radius": "2 mm", "length": "5 mm", "turns": 5, "current": "1 A"}
    ((where, what),) = faults("solenoid", **{**keys, key: -1 if key == "turns" else "-1 mm"})
    assert (key,) == where
    assert "must be greater than 0" == what


@pytest.mark.parametrize("form", FIELDS, ids=lambda form: form.name)
def test_a_field_describes_itself_on_one_line_with_its_numbers(form) -> None:
    words = form.words()
    assert words == words.strip()
    assert "\n" not in words
    assert any(character.isdigit() for character in words)
    assert ("centred at" in words) == (any(form.centre) and form.kind != "uniform-electric")


@pytest.mark.parametrize(
    ("expected", "form"),
    [
        (
            "uniform electric field along (0, 0, 1), 20 kV/m",
            field("uniform-electric", strength="20 kV/m"),
        ),
        (
            "linear quadrupole of rods at r0 = 3.5 mm, 180 V amplitude at 1.1 MHz between "
            "neighbouring rods",
            field(
                "rf-quadrupole",
                radius="3.5 mm",
                voltage={"amplitude": "180 V", "frequency": "1.1 MHz"},
            ),
        ),
        (
            "current loop about z of radius 50 mm, 20 turns, 10 A, centred at (0 m, 0 m, 30 mm)",
            field(
                "current-loop",
                radius="50 mm",
                current="10 A",
                turns=20,
                centre=["0 mm", "0 mm", "30 mm"],
            ),
        ),
        (
            "solenoid about (1, 0, 0) of radius 20 mm and length 100 mm, 5 mm thick, 200 turns, "
            "2 A amplitude at 50 Hz",
            field(
                "solenoid",
                radius="20 mm",
                length="100 mm",
                thickness="5 mm",
                turns=200,
                current={"amplitude": "2 A", "frequency": "50 Hz"},
                along=[2, 0, 0],
            ),
        ),
        (
            "block magnet of 20 mm x 10 mm x 5 mm magnetised along (0, 0, 1), turned by (0 deg, "
            "90 deg, 0 deg), remanence 1.2 T",
            field(
                "magnet-block",
                size=["20 mm", "10 mm", "5 mm"],
                remanence="1.2 T",
                rotation=["0 deg", "90 deg", "0 deg"],
            ),
        ),
        (
            "round magnet about z of radius 5 mm and length 10 mm magnetised along (1, 0, 0), "
            "remanence 1.2 T",
            field(
                "magnet-cylinder",
                radius="5 mm",
                length="10 mm",
                remanence="1.2 T",
                magnetised_along=[1, 0, 0],
            ),
        ),
        (
            "magnetic quadrupole along z of length 100 mm with edges of 25 mm, turned by 45 deg, "
            "300 mT at r0 = 20 mm",
            field(
                "multipole-magnet",
                order=2,
                radius="20 mm",
                strength="0.3 T",
                length="100 mm",
                edge="25 mm",
                angle="45 deg",
            ),
        ),
        (
            "static quadrupole in which barium oscillates along z at 80 kHz",
            field("static-quadrupole", axial_frequency=FREQUENCY),
        ),
        (
            "static quadrupole of end caps at z0 = 4 mm against a ring of r0 = 5 mm, 1 V, "
            "ellipticity 0.1, centred at (0 m, 0 m, 2 mm)",
            field(
                "static-quadrupole",
                ellipticity=0.1,
                centre=["0 mm", "0 mm", "2 mm"],
                **QUADRUPOLE,
            ),
        ),
        (
            "magnetic sextupole along z, turned by 30 deg, 300 mT at r0 = 20 mm",
            field("magnetic-multipole", order=3, radius="20 mm", strength="0.3 T", angle="30 deg"),
        ),
        (
            "electric 22-pole along z of poles at r0 = 4 mm, 50 V on the positive poles",
            field("electric-multipole", order=11, radius="4 mm", voltage="50 V"),
        ),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_a_field_says_in_words_what_it_does(expected: str, form) -> None:
    assert expected == form.words()
