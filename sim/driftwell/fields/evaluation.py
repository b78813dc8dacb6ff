"""What a scenario's fields are at given points and a given time, through the compiled kernels."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.table import (
    FieldTable,
    electric_field,
    field_tables,
    induced_field,
    magnetic_field,
)
from driftwell.forms.body import Body
from driftwell.kernels import kernel
from driftwell.kernels.waveform import waveform

Floats = NDArray[np.float64]


class FieldValues(NamedTuple):
    """Fields at n points.

    potential : (n,) float64, V
    electric : (n, 3) float64, V/m, with what changing magnetic fields induce
    magnetic : (n, 3) float64, T
    potential_rate : (n,) float64, V/s, of change of the potential at the point
    """

    potential: Floats
    electric: Floats
    magnetic: Floats
    potential_rate: Floats


def evaluate(
    forms: Sequence[FieldForm],
    bodies: Mapping[str, Body],
    position: ArrayLike,
    t: float,
    inside: float | None = None,
    more: Sequence[PackedField] = (),
) -> FieldValues:
    """The sum of several fields at some points.

    Parameters
    ----------
    forms : the fields
    bodies : the species by name, for fields that refer to one
    position : (n, 3), m
    t : s
    inside : a time on the smooth piece of the waveforms that is meant, s; left out: `t` itself,
        which at a jump is the value before it for ramps, steps and pulses (see
        kernels/waveform.py)
    more : fields that are packed already, as of solved electrodes
    """
    place = np.ascontiguousarray(np.asarray(position, dtype=np.float64).reshape(-1, 3).T)
    count = place.shape[1]
    potential = np.zeros(count)
    potential_rate = np.zeros(count)
    electric = np.zeros((3, count))
    magnetic = np.zeros((3, count))
    unit_charge = np.ones(count)
    piece = t if inside is None else inside
    tables = field_tables(forms, bodies, more)
    _add_electric(
        tables[Role.ELECTRIC], t, piece, place, unit_charge, potential, potential_rate, electric
    )
    for role in (Role.UNIFORM_MAGNETIC, Role.MAGNETIC):
        _add_magnetic(tables[role], t, piece, place, electric, magnetic)
    return FieldValues(
        potential,
        np.ascontiguousarray(electric.T),
        np.ascontiguousarray(magnetic.T),
        potential_rate,
    )


@kernel
def _add_electric(
    table: FieldTable,
    t: float,
    inside: float,
    position: np.ndarray,
    charge: np.ndarray,
    out_potential: np.ndarray,
    out_rate: np.ndarray,
    out_field: np.ndarray,
) -> None:
    """Add potential, its rate and the field of every row of an electric table."""
    for row in range(table.kind.size):
        data = table.data[table.first[row] : table.first[row + 1]]
        w, rate = waveform(
            table.wave_kind[row], table.wave_parameter[row], table.wave_data, t, inside
        )
        for i in range(charge.size):
            g = electric_field(
                table.kind[row],
                table.parameter[row],
                data,
                w,
                position,
                charge,
                i,
                i + 1,
                out_field,
            )
            out_potential[i] += w * g
            out_rate[i] += rate * g


@kernel
def _add_magnetic(
    table: FieldTable,
    t: float,
    inside: float,
    position: np.ndarray,
    out_e: np.ndarray,
    out_b: np.ndarray,
) -> None:
    """Add the field of every row of a magnetic table, and what its change induces."""
    count = position.shape[1]
    for row in range(table.kind.size):
        kind, p = table.kind[row], table.parameter[row]
        data = table.data[table.first[row] : table.first[row + 1]]
        w, rate = waveform(
            table.wave_kind[row], table.wave_parameter[row], table.wave_data, t, inside
        )
        magnetic_field(kind, p, data, w, position, 0, count, out_b)
        induced_field(kind, p, data, rate, position, 0, count, out_e)
