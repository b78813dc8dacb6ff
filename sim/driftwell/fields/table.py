"""All kinds of fields: the forms a scenario may use, and their dispatch in compiled code.

A new kind is one new file, one line in :data:`FIELD_KINDS` and one branch in the dispatch of its
role. The branch is chosen once per field and step, not per particle; the loop over particles is
inside the kind's own kernel, over contiguous rows.

Every electric kind's kernel has the signature

    kernel(p, data, w, position, charge, first, last, out_field) -> total

    p : (16,) float64, the kind's parameters, centre first
    data : (k,) float64, the kind's own stretch of the shared data array
    w : float, value of the waveform now
    position : (3, n) float64, m; charge : (n,) float64, C (macro-charges)
    first, last : the particles to work on
    out_field : (3, n) float64, V/m, added to
    total : float, sum over those particles of charge times g, J for unit w

Every magnetic kind (uniform or not) has a kernel for its field and one for what it induces:

    kernel(p, data, w, position, first, last, out_b)       B = w curl a, T, added to
    kernel(p, data, rate, position, first, last, out_e)    E = -(dw/dt) a, V/m, added to

A kind with long formulas is compiled apart, and only where a scenario uses it: its kernels stand in
:data:`KERNELS_APART` or, an electric one's, in :data:`ELECTRIC_APART`, with no branch of their own,
and it has 14 parameters at most (fields/apart.py).

A uniform magnetic kind keeps the unit vector of its field in ``p[3:6]``, so that the stepping can
sum w n over all of them and turn each charge on its exact helix.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.apart import (
    APART,
    ELECTRIC,
    MAGNETIC,
    call_electric,
    call_field,
    call_induced,
    note_addresses,
)
from driftwell.fields.electric_multipole import (
    ELECTRIC_MULTIPOLE,
    ElectricMultipole,
    electric_multipole,
)
from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.from_python.flux import FLUX_FROM_PYTHON, FluxFromPython
from driftwell.fields.from_python.potential import POTENTIAL_FROM_PYTHON, PotentialFromPython
from driftwell.fields.gridded_gap import GRIDDED_GAP, GriddedGap, gridded_gap
from driftwell.fields.magnetic_multipole import (
    MAGNETIC_MULTIPOLE,
    MagneticMultipole,
    magnetic_multipole,
    magnetic_multipole_induced,
)
from driftwell.fields.magnets.current_loop import (
    CURRENT_LOOP,
    CurrentLoop,
    current_loop,
    current_loop_induced,
)
from driftwell.fields.magnets.magnet_block import (
    MAGNET_BLOCK,
    MagnetBlock,
    magnet_block,
    magnet_block_induced,
)
from driftwell.fields.magnets.magnet_cylinder import (
    MAGNET_CYLINDER,
    MagnetCylinder,
    magnet_cylinder,
    magnet_cylinder_induced,
)
from driftwell.fields.magnets.multipole_magnet import (
    MULTIPOLE_MAGNET,
    MultipoleMagnet,
    multipole_magnet,
    multipole_magnet_induced,
)
from driftwell.fields.magnets.solenoid import SOLENOID, Solenoid, solenoid, solenoid_induced
from driftwell.fields.map_files.electric import ElectricMapFile
from driftwell.fields.map_files.magnetic import MagneticMapFile
from driftwell.fields.map_files.potential import PotentialMapFile
from driftwell.fields.maps.kernels import (
    PLANAR_MAP,
    ROUND_MAP,
    SPATIAL_MAP,
    planar_map,
    round_map,
    spatial_map,
)
from driftwell.fields.maps.magnetic_kernels import (
    ROUND_MAGNETIC_MAP,
    SPATIAL_MAGNETIC_MAP,
    round_magnetic_map,
    round_magnetic_map_induced,
    spatial_magnetic_map,
    spatial_magnetic_map_induced,
)
from driftwell.fields.quadro_logarithmic import (
    QUADRO_LOGARITHMIC,
    QuadroLogarithmic,
    quadro_logarithmic,
)
from driftwell.fields.rf_quadrupole import RF_QUADRUPOLE, RfQuadrupole, rf_quadrupole
from driftwell.fields.rf_quadrupole_3d import RF_QUADRUPOLE_3D, RfQuadrupole3D, rf_quadrupole_3d
from driftwell.fields.rotating_drive import RotatingDrive
from driftwell.fields.static_quadrupole import (
    STATIC_QUADRUPOLE,
    StaticQuadrupole,
    static_quadrupole,
)
from driftwell.fields.uniform_electric import UNIFORM_ELECTRIC, UniformElectric, uniform_electric
from driftwell.fields.uniform_magnetic import (
    UNIFORM_MAGNETIC,
    UniformMagnetic,
    uniform_magnetic,
    uniform_magnetic_induced,
)
from driftwell.fields.wire_in_cylinder import WIRE_IN_CYLINDER, WireInCylinder, wire_in_cylinder
from driftwell.forms.body import Body
from driftwell.forms.waveform_table import waveform_table
from driftwell.kernels import inlined_kernel, kernel

FIELD_KINDS: tuple[type[FieldForm], ...] = (
    UniformElectric,
    GriddedGap,
    UniformMagnetic,
    StaticQuadrupole,
    RfQuadrupole,
    RfQuadrupole3D,
    ElectricMultipole,
    RotatingDrive,
    MagneticMultipole,
    QuadroLogarithmic,
    WireInCylinder,
    PotentialMapFile,
    ElectricMapFile,
    MagneticMapFile,
    CurrentLoop,
    Solenoid,
    MagnetBlock,
    MagnetCylinder,
    MultipoleMagnet,
    PotentialFromPython,
    FluxFromPython,
)

KERNELS_APART = {
    CURRENT_LOOP: (current_loop, current_loop_induced),
    SOLENOID: (solenoid, solenoid_induced),
    MAGNET_BLOCK: (magnet_block, magnet_block_induced),
    MAGNET_CYLINDER: (magnet_cylinder, magnet_cylinder_induced),
    MULTIPOLE_MAGNET: (multipole_magnet, multipole_magnet_induced),
    ROUND_MAGNETIC_MAP: (round_magnetic_map, round_magnetic_map_induced),
    SPATIAL_MAGNETIC_MAP: (spatial_magnetic_map, spatial_magnetic_map_induced),
}
"""Of the magnetic kinds that are compiled apart: kernels of the field and of what it induces."""
ELECTRIC_APART = {
    ROUND_MAP: round_map,
    PLANAR_MAP: planar_map,
    SPATIAL_MAP: spatial_map,
    GRIDDED_GAP: gridded_gap,
}
"""Of the electric kinds that are compiled apart: the kernel."""
LAST_APART = max(*KERNELS_APART, *ELECTRIC_APART, POTENTIAL_FROM_PYTHON, FLUX_FROM_PYTHON)
"""The last two bring the addresses of their kernels with them (fields/from_python)."""

PARAMETERS = 16


class FieldTable(NamedTuple):
    """The fields of one role, one row each, as flat arrays for compiled code.

    kind : (m,) int64
    parameter : (m, 16) float64
    first : (m + 1,) int64, where each field's stretch of `data` begins
    data : (k,) float64
    wave_kind, wave_parameter, wave_data : waveforms, row by row (kernels/waveform.py)
    """

    kind: NDArray[np.int64]
    parameter: NDArray[np.float64]
    first: NDArray[np.int64]
    data: NDArray[np.float64]
    wave_kind: NDArray[np.int64]
    wave_parameter: NDArray[np.float64]
    wave_data: NDArray[np.float64]


def field_table(fields: Sequence[PackedField]) -> FieldTable:
    """Lay packed fields one after the other."""
    waves = waveform_table([field.waveform for field in fields])
    parameter = np.zeros((len(fields), PARAMETERS))
    first = np.zeros(len(fields) + 1, dtype=np.int64)
    data = [np.asarray(field.data, dtype=np.float64) for field in fields]
    for row, field in enumerate(fields):
        parameter[row, : len(field.parameters)] = field.parameters
        if field.kind in KERNELS_APART:
            note_addresses(field.kind, KERNELS_APART[field.kind], MAGNETIC, parameter[row])
        elif field.kind in ELECTRIC_APART:
            note_addresses(field.kind, (ELECTRIC_APART[field.kind],), ELECTRIC, parameter[row])
        first[row + 1] = first[row] + data[row].size
    return FieldTable(
        np.array([field.kind for field in fields], dtype=np.int64),
        parameter,
        first,
        np.concatenate(data) if first[-1] else np.zeros(1),
        waves.kind,
        waves.parameter,
        waves.data,
    )


def field_tables(
    forms: Sequence[FieldForm], bodies: Mapping[str, Body], more: Sequence[PackedField] = ()
) -> dict[Role, FieldTable]:
    """The scenario's fields as one table for each role; `more` are packed already."""
    packed = [*(row for form in forms for row in form.all_packed(bodies)), *more]
    return {role: field_table([field for field in packed if field.role is role]) for role in Role}


@inlined_kernel
def electric_field(
    kind: int,
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Dispatch to the kernel of an electric kind; see the module's docstring."""
    if kind == UNIFORM_ELECTRIC:
        return uniform_electric(p, data, w, position, charge, first, last, out_field)
    if kind == RF_QUADRUPOLE:
        return rf_quadrupole(p, data, w, position, charge, first, last, out_field)
    if kind == STATIC_QUADRUPOLE:
        return static_quadrupole(p, data, w, position, charge, first, last, out_field)
    if kind == RF_QUADRUPOLE_3D:
        return rf_quadrupole_3d(p, data, w, position, charge, first, last, out_field)
    if kind == ELECTRIC_MULTIPOLE:
        return electric_multipole(p, data, w, position, charge, first, last, out_field)
    if kind == QUADRO_LOGARITHMIC:
        return quadro_logarithmic(p, data, w, position, charge, first, last, out_field)
    if kind == WIRE_IN_CYLINDER:
        return wire_in_cylinder(p, data, w, position, charge, first, last, out_field)
    if APART <= kind <= LAST_APART:
        return call_electric(p, data, w, position, charge, first, last, out_field)
    return np.nan


@kernel
def magnetic_field(
    kind: int,
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Dispatch to the kernel of a magnetic kind's field; see the module's docstring."""
    if kind == UNIFORM_MAGNETIC:
        uniform_magnetic(p, data, w, position, first, last, out_b)
    elif kind == MAGNETIC_MULTIPOLE:
        magnetic_multipole(p, data, w, position, first, last, out_b)
    elif APART <= kind <= LAST_APART:
        call_field(p, data, w, position, first, last, out_b)
    else:
        out_b[:, first:last] = np.nan


@kernel
def induced_field(
    kind: int,
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Dispatch to the kernel of what a magnetic kind induces; see the module's docstring."""
    if kind == UNIFORM_MAGNETIC:
        uniform_magnetic_induced(p, data, rate, position, first, last, out_e)
    elif kind == MAGNETIC_MULTIPOLE:
        magnetic_multipole_induced(p, data, rate, position, first, last, out_e)
    elif APART <= kind <= LAST_APART:
        call_induced(p, data, rate, position, first, last, out_e)
    else:
        out_e[:, first:last] = np.nan
