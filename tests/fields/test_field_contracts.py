"""What every kind of field keeps, over the one list of all kinds."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.fields.evaluation import FieldValues, evaluate
from driftwell.fields.form import FieldForm, Role
from driftwell.fields.table import (
    ELECTRIC_APART,
    FIELD_KINDS,
    KERNELS_APART,
    electric_field,
    field_table,
    field_tables,
    induced_field,
    magnetic_field,
)
from driftwell.kernels.waveform import NOISE, TABLE
from tests.cases import BODIES, FIELDS

ROLES = {form.name: form.packed(BODIES).role for form in FIELDS}
ELECTRIC = [form for form in FIELDS if ROLES[form.name] is Role.ELECTRIC]
MAGNETIC = [form for form in FIELDS if ROLES[form.name] is not Role.ELECTRIC]
CONSTANT_ONLY = {"magnetic-map, in space", "python-flux"}
"""What their change would induce is not known, so they must not change."""
MAPS = {"potential-map", "electric-map", "magnetic-map"}

# weights of the central difference of order 8 (Fornberg 1988, Math. Comp. 51, 699; from memory)
OFFSETS = np.array([-4, -3, -2, -1, 1, 2, 3, 4], dtype=float)
WEIGHTS = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 4 / 5, -1 / 5, 4 / 105, -1 / 280])
REACH = 4e-5
TIME = 1.1e-6
"""In the slope of every ramp and pulse edge of the list."""


def named(value: object) -> str | None:
    return value.name if isinstance(value, FieldForm) else None


def points(form: FieldForm, count: int = 12) -> np.ndarray:
    """Places 1.5 to 3 mm from the field's axis, on all sides."""
    random = np.random.default_rng(20)
    angle = random.uniform(0.0, 2.0 * np.pi, count)
    distance = random.uniform(1.5e-3, 3e-3, count)
    height = random.uniform(-3e-3, 3e-3, count)
    local = np.stack([distance * np.cos(angle), distance * np.sin(angle), height], axis=1)
    return local + np.array(form.centre)


def at(form: FieldForm, position: np.ndarray, time: float = TIME) -> FieldValues:
    return evaluate([form], BODIES, position, time, inside=TIME)


def gradient(form: FieldForm, what: str, position: np.ndarray) -> np.ndarray:
    """d(value)/d(axis) as the last index, by differences of order 8."""
    parts = []
    for axis in range(3):
        step = np.zeros(3)
        step[axis] = REACH
        values = [getattr(at(form, position + k * step), what) for k in OFFSETS]
        parts.append(sum(w * v for w, v in zip(WEIGHTS, values, strict=True)) / REACH)
    return np.stack(parts, axis=-1)


def rate(form: FieldForm, what: str, position: np.ndarray) -> np.ndarray:
    """d(value)/dt on the piece of the waveform that holds TIME, by differences of order 8."""
    step = 5e-9
    values = [getattr(at(form, position, TIME + k * step), what) for k in OFFSETS]
    return sum(w * v for w, v in zip(WEIGHTS, values, strict=True)) / step


def curl(slopes: np.ndarray) -> np.ndarray:
    return np.stack(
        [
            slopes[:, 2, 1] - slopes[:, 1, 2],
            slopes[:, 0, 2] - slopes[:, 2, 0],
            slopes[:, 1, 0] - slopes[:, 0, 1],
        ],
        axis=1,
    )


@pytest.mark.parametrize("form", ELECTRIC, ids=named)
def test_electric_field_is_minus_the_gradient_of_the_potential(form: FieldForm) -> None:
    position = points(form)
    found = at(form, position).electric
    assert -gradient(form, "potential", position) == pytest.approx(
        found, rel=1e-9, abs=1e-9 * np.abs(found).max()
    )
    assert np.abs(found).max() > 0.0


@pytest.mark.parametrize("form", ELECTRIC, ids=named)
def test_electric_potential_obeys_laplaces_equation(form: FieldForm) -> None:
    slopes = gradient(form, "electric", points(form))
    divergence = np.trace(slopes, axis1=1, axis2=2)
    scale = np.abs(slopes).max() + np.abs(at(form, points(form)).electric).max() / 3e-3
    assert np.zeros(12) == pytest.approx(divergence, abs=1e-9 * scale)


@pytest.mark.parametrize("form", MAGNETIC, ids=named)
def test_magnetic_field_has_neither_sources_nor_currents(form: FieldForm) -> None:
    slopes = gradient(form, "magnetic", points(form))
    scale = np.abs(slopes).max() + np.abs(at(form, points(form)).magnetic).max() / 3e-3
    assert scale > 0.0
    assert np.zeros(12) == pytest.approx(np.trace(slopes, axis1=1, axis2=2), abs=1e-9 * scale)
    assert np.zeros((12, 3)) == pytest.approx(curl(slopes), abs=1e-9 * scale)


@pytest.mark.parametrize("form", MAGNETIC, ids=named)
def test_changing_magnetic_field_induces_by_faradays_law(form: FieldForm) -> None:
    position = points(form)
    expected = -rate(form, "magnetic", position)
    slopes = gradient(form, "electric", position)
    tolerance = 1e-8 * np.abs(expected).max() + 1e-8
    assert expected == pytest.approx(curl(slopes), abs=tolerance)
    assert np.zeros(12) == pytest.approx(np.trace(slopes, axis1=1, axis2=2), abs=tolerance)


def test_the_list_holds_changing_magnets_of_each_kind() -> None:
    """So that Faraday's law above is not checked on zeros only."""
    changing = {
        form.kind for form in MAGNETIC if np.abs(rate(form, "magnetic", points(form))).max() > 0.0
    }
    assert {form.kind for form in MAGNETIC} == changing


@pytest.mark.parametrize("form", ELECTRIC, ids=named)
def test_rate_is_the_potentials_change_in_time(form: FieldForm) -> None:
    position = points(form)
    values = at(form, position)
    tolerance = 1e-9 * np.abs(values.potential_rate).max() + 1e-6 * np.abs(values.potential).max()
    assert rate(form, "potential", position) == pytest.approx(values.potential_rate, abs=tolerance)


@pytest.mark.parametrize("form", ELECTRIC, ids=named)
def test_electric_kernel_scales_with_its_waveform_and_works_on_its_range_only(
    form: FieldForm,
) -> None:
    table = field_table([form.packed(BODIES)])
    inner = points(form).T
    position = np.full((3, 16), np.nan)
    position[:, 2:14] = inner
    charge = np.full(16, np.nan)
    charge[2:14] = np.random.default_rng(3).normal(size=12)
    one, three = np.full((3, 16), 7.0), np.full((3, 16), 7.0)
    row = int(table.kind[0]), table.parameter[0], table.data
    first = electric_field(*row, 1.0, position, charge, 2, 14, one)
    again = electric_field(*row, -3.0, position, charge, 2, 14, three)
    assert first == again
    assert np.all(one[:, [0, 1, 14, 15]] == 7.0)
    assert -3.0 * (one[:, 2:14] - 7.0) == pytest.approx(
        three[:, 2:14] - 7.0, rel=1e-12, abs=1e-12 * np.abs(three[:, 2:14]).max()
    )
    singly = [
        electric_field(*row, 1.0, position, charge, i, i + 1, np.zeros((3, 16)))
        for i in range(2, 14)
    ]
    assert sum(singly) == pytest.approx(first, rel=1e-12, abs=1e-13 * np.abs(singly).max())


@pytest.mark.parametrize("form", MAGNETIC, ids=named)
@pytest.mark.parametrize("dispatch", [magnetic_field, induced_field], ids=["field", "induced"])
def test_magnetic_kernel_scales_with_its_waveform_and_works_on_its_range_only(
    form: FieldForm, dispatch: object
) -> None:
    table = field_table([form.packed(BODIES)])
    position = np.full((3, 16), np.nan)
    position[:, 2:14] = points(form).T
    one, three = np.full((3, 16), 7.0), np.full((3, 16), 7.0)
    row = int(table.kind[0]), table.parameter[0], table.data
    dispatch(*row, 1.0, position, 2, 14, one)
    if dispatch is induced_field and form.name in CONSTANT_ONLY:
        assert np.all(np.isnan(one[:, 2:14]))
        return
    dispatch(*row, -3.0, position, 2, 14, three)
    assert np.all(one[:, [0, 1, 14, 15]] == 7.0)
    assert np.abs(one[:, 2:14] - 7.0).max() > 0.0
    assert -3.0 * (one[:, 2:14] - 7.0) == pytest.approx(three[:, 2:14] - 7.0, abs=1e-12)


def test_the_table_of_each_role_holds_its_fields_as_they_were_packed() -> None:
    tables = field_tables(FIELDS, BODIES)
    for role, table in tables.items():
        packed = [
            row for form in FIELDS if ROLES[form.name] is role for row in form.all_packed(BODIES)
        ]
        assert len(packed) == table.kind.size
        for row, one in enumerate(packed):
            assert one.kind == table.kind[row]
            wanted = np.zeros(16)
            wanted[: len(one.parameters)] = one.parameters
            apart = one.kind in KERNELS_APART or one.kind in ELECTRIC_APART
            kept = 14 if apart else 16  # addresses follow
            assert wanted[:kept].tolist() == table.parameter[row, :kept].tolist()
            data = table.data[table.first[row] : table.first[row + 1]]
            assert list(one.data) == data.tolist()
            assert one.waveform.kind == table.wave_kind[row]
            if one.waveform.kind == TABLE:
                start, count = table.wave_parameter[row, :2].astype(int)
                found = table.wave_data[start : start + count]
                assert [list(point) for point in one.waveform.points] == found.tolist()
            elif one.waveform.kind == NOISE:
                start, lines = table.wave_parameter[row, :2].astype(int)
                found = table.wave_data[start : start + 2 * lines]
                assert [list(point) for point in one.waveform.points] == found.tolist()
                assert one.waveform.parameters[1:] == tuple(table.wave_parameter[row, 1:3])
            else:
                found = table.wave_parameter[row, : len(one.waveform.parameters)]
                assert list(one.waveform.parameters) == found.tolist()


def test_the_list_of_cases_holds_every_kind() -> None:
    assert set(FIELD_KINDS) == {type(form) for form in FIELDS}


def test_each_kind_has_its_own_number() -> None:
    """Maps in (r, z), (x, y) and space have one each, wherever their potential comes from.

    A rotating drive is two multipoles.
    """
    numbers = {form.kind: form.packed(BODIES).kind for form in FIELDS if form.kind not in MAPS}
    of_maps = {form.packed(BODIES).kind for form in FIELDS if form.kind in MAPS}
    assert len(FIELD_KINDS) - len(MAPS) == 1 + len(set(numbers.values()) - of_maps)
    assert numbers["electric-multipole"] == numbers["rotating-drive"]
    assert 5 == len(of_maps)


@pytest.mark.parametrize("dispatch", [electric_field, magnetic_field, induced_field])
def test_an_unknown_number_gives_no_number(dispatch: object) -> None:
    """So that a kind forgotten in a dispatch stops the run instead of pushing nothing."""
    out = np.zeros((3, 2))
    position, charge = np.ones((3, 2)), np.ones(2)
    if dispatch is electric_field:
        assert np.isnan(dispatch(99, np.zeros(16), np.zeros(1), 1.0, position, charge, 0, 2, out))
    else:
        dispatch(99, np.zeros(16), np.zeros(1), 1.0, position, 0, 2, out)
        assert np.all(np.isnan(out))


@pytest.mark.parametrize("form", FIELDS, ids=named)
def test_every_key_of_a_field_has_a_line_of_help(form: FieldForm) -> None:
    fields = type(form).model_fields
    assert [] == [name for name, one in fields.items() if name != "kind" and not one.description]


@pytest.mark.parametrize("form", FIELDS, ids=named)
def test_the_waveform_that_cuts_the_steps_is_the_one_packed(form: FieldForm) -> None:
    from driftwell.forms.waveforms import packed_waveform

    assert packed_waveform(form.waveform()) == form.packed(BODIES).waveform
