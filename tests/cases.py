"""One list of everything that keeps a contract: contract tests run over the whole list.

All settings are invented.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, ELEMENTARY_CHARGE
from driftwell.fields.form import FieldForm
from driftwell.fields.from_python.functions import give
from driftwell.fields.table import FIELD_KINDS
from driftwell.forms import Form
from driftwell.forms.body import Body
from driftwell.processes.form import ProcessForm
from driftwell.processes.table import PROCESS_KINDS
from driftwell.walls.form import DetectorForm, WallForm
from driftwell.walls.table import DETECTOR_KINDS, WALL_KINDS
from tests.grid_files import grids
from tests.pair_sums import direct, tree

BODIES = {
    "barium": Body("barium", 137.905 * ATOMIC_MASS, ELEMENTARY_CHARGE),
    "electron": Body("electron", ELECTRON_MASS, -ELEMENTARY_CHARGE),
}

_KINDS = {kind.model_fields["kind"].annotation.__args__[0]: kind for kind in FIELD_KINDS}


def field(kind: str, **keys: Any) -> FieldForm:
    """A field as a scenario states it; its name is its kind where none is given."""
    return _KINDS[kind](**{"kind": kind, "name": kind, **keys}).found_in(grids())


def _kinds(kinds: Sequence[type[Form]]) -> dict[str, Any]:
    return {kind.model_fields["kind"].annotation.__args__[0]: kind for kind in kinds}


_WALLS, _DETECTORS = _kinds(WALL_KINDS), _kinds(DETECTOR_KINDS)


def wall(kind: str, **keys: Any) -> WallForm:
    """A wall as a scenario states it; its name is its kind where none is given."""
    return _WALLS[kind](**{"kind": kind, "name": kind, **keys})


def detector(kind: str, **keys: Any) -> DetectorForm:
    """A detector as a scenario states it; its name is its kind where none is given."""
    return _DETECTORS[kind](**{"kind": kind, "name": kind, **keys})


_PROCESSES = _kinds(PROCESS_KINDS)


def process(kind: str, **keys: Any) -> ProcessForm:
    """A process as a scenario states it; its name is its kind where none is given."""
    return _PROCESSES[kind](**{"kind": kind, "name": kind, **keys})


SINE = {"frequency": "1.1 MHz", "phase": "40 deg"}
OFF_CENTRE = ["0.3 mm", "-0.2 mm", "0.5 mm"]


def saddle(x: float, y: float, z: float, strength: float, twist: float) -> tuple[float, ...]:
    """A harmonic potential in V, and minus its gradient; lengths in m."""
    bend = 3.0 * strength / twist
    g = strength * (x * x - y * y) + bend * z * (x * x - y * y)
    slope = 2.0 * (strength + bend * z)
    return g, -slope * x, slope * y, -bend * (x * x - y * y)


def twisted(x: float, y: float, z: float, slope: float) -> tuple[float, ...]:
    """A magnetic field without sources and curl, in T."""
    return 0.1 + slope * y, slope * x, 0.3


FIELDS = [
    field(
        "python-potential",
        function="saddle",
        sha256=give(saddle, "potential").sha256,
        parameters={"strength": 4e5, "twist": 20e-3},
        scale={"amplitude": 3.0, **SINE},
        centre=OFF_CENTRE,
    ),
    field(
        "python-flux",
        function="twisted",
        sha256=give(twisted, "flux").sha256,
        parameters={"slope": 7.0},
        scale=0.5,
        centre=OFF_CENTRE,
    ),
    field("uniform-electric", strength="20 kV/m"),
    field(
        "uniform-electric",
        name="uniform-electric, ramped",
        strength={
            "kind": "ramp",
            "before": "0 V/m",
            "after": "3 kV/m",
            "start": "0 s",
            "end": "2 us",
        },
        along=[1.0, -2.0, 0.5],
        centre=OFF_CENTRE,
    ),
    field(
        "gridded-gap",
        voltage={"amplitude": "200 V", **SINE},
        length="40 mm",
        along=[1.0, -2.0, 0.5],
        centre=["-10 mm", "20 mm", "1 mm"],
    ),
    field(
        "uniform-electric",
        name="uniform-electric, noise",
        strength={
            "kind": "noise",
            "density": "1e-3 V^2/m^2/Hz",
            "lowest": "0.2 MHz",
            "highest": "1.4 MHz",
            "lines": 12,
            "offset": "5 V/m",
        },
        along=[1.0, 1.0, -0.5],
    ),
    field("uniform-magnetic", strength="1.5 T"),
    field(
        "uniform-magnetic",
        name="uniform-magnetic, changing",
        strength={"amplitude": "20 mT", "offset": "0.1 T", **SINE},
        along=[0.2, 0.0, 1.0],
        centre=OFF_CENTRE,
    ),
    field("static-quadrupole", voltage="10 V", radius="5 mm", half_length="4 mm"),
    field(
        "static-quadrupole",
        name="static-quadrupole, elliptic",
        voltage={
            "kind": "pulses",
            "low": "2 V",
            "high": "10 V",
            "start": "0 s",
            "width": "2 us",
            "rise": "1.5 us",
        },
        radius="5 mm",
        half_length="4 mm",
        ellipticity=-0.3,
        centre=OFF_CENTRE,
    ),
    field(
        "static-quadrupole",
        name="static-quadrupole, by frequency",
        axial_frequency={"species": "electron", "value": "30 MHz"},
    ),
    field(
        "rf-quadrupole",
        radius="3.5 mm",
        voltage={"amplitude": "180 V", "offset": "5 V", **SINE},
        centre=OFF_CENTRE,
    ),
    field(
        "rf-quadrupole-3d",
        radius="10 mm",
        half_length="6 mm",
        voltage={"amplitude": "500 V", **SINE},
        centre=OFF_CENTRE,
    ),
    *(
        field(
            "electric-multipole",
            name=f"electric-multipole, order {order}",
            order=order,
            radius="4 mm",
            angle="17 deg",
            voltage={"kind": "table", "times": ["0 s", "3 us"], "values": ["50 V", "-20 V"]},
            centre=OFF_CENTRE,
        )
        for order in (1, 2, 3, 7)
    ),
    *(
        field(
            "rotating-drive",
            name=f"rotating-drive, order {order}, {sense}",
            order=order,
            radius="4 mm",
            angle="17 deg",
            voltage="5 V",
            frequency="0.4 MHz",
            sense=sense,
            centre=OFF_CENTRE,
        )
        for order, sense in ((1, "counterclockwise"), (2, "clockwise"), (3, "clockwise"))
    ),
    *(
        field(
            "magnetic-multipole",
            name=f"magnetic-multipole, order {order}",
            order=order,
            radius="20 mm",
            angle="17 deg",
            strength={"amplitude": "0.3 T", **SINE},
            centre=OFF_CENTRE,
        )
        for order in (1, 2, 3, 6)
    ),
    field(
        "magnetic-multipole",
        name="magnetic-multipole, by gradient",
        order=2,
        radius="20 mm",
        gradient="12 T/m",
    ),
    field(
        "current-loop",
        radius="20 mm",
        current={"amplitude": "3 A", "offset": "5 A", **SINE},
        turns=40,
        along=[0.3, -0.2, 1.0],
        centre=OFF_CENTRE,
    ),
    field("current-loop", name="current-loop, small", radius="0.1 mm", current="30 A"),
    field(
        "solenoid",
        radius="18 mm",
        length="12 mm",
        current={"amplitude": "3 A", **SINE},
        turns=100,
        along=[1.0, 0.5, -0.4],
        centre=OFF_CENTRE,
    ),
    field(
        "solenoid",
        name="solenoid, thick",
        radius="15 mm",
        length="30 mm",
        thickness="10 mm",
        current={"amplitude": "3 A", **SINE},
        turns=100,
    ),
    field(
        "solenoid",
        name="solenoid, seen from outside",
        radius="0.1 mm",
        length="0.3 mm",
        current={"amplitude": "3 A", **SINE},
        centre=OFF_CENTRE,
    ),
    field(
        "magnet-block",
        size=["0.3 mm", "0.2 mm", "0.25 mm"],
        remanence={"amplitude": "1.2 T", **SINE},
        magnetised_along=[1.0, -2.0, 3.0],
        rotation=["20 deg", "-35 deg", "50 deg"],
        centre=OFF_CENTRE,
    ),
    field(
        "magnet-cylinder",
        radius="0.1 mm",
        length="0.3 mm",
        remanence={"amplitude": "1.2 T", **SINE},
        along=[0.2, 1.0, 0.4],
        centre=OFF_CENTRE,
    ),
    field(
        "magnet-cylinder",
        name="magnet-cylinder, magnetised aslant",
        radius="0.15 mm",
        length="0.2 mm",
        remanence={"amplitude": "1.2 T", **SINE},
        along=[0.2, 1.0, 0.4],
        magnetised_along=[1.0, 0.5, 0.3],
        centre=OFF_CENTRE,
    ),
    *(
        field(
            "multipole-magnet",
            name=f"multipole-magnet, order {order}",
            order=order,
            radius="20 mm",
            strength={"amplitude": "0.3 T", **SINE},
            length="60 mm",
            edge="40 mm",
            angle="17 deg",
            centre=OFF_CENTRE,
        )
        for order in (1, 2, 3, 6)
    ),
    field(
        "quadro-logarithmic",
        curvature={"amplitude": "1.0e6 V/m^2", "offset": "3.0e7 V/m^2", **SINE},
        characteristic_radius="20 mm",
        centre=OFF_CENTRE,
    ),
    field(
        "wire-in-cylinder",
        wire_radius="50 um",
        cylinder_radius="10 mm",
        voltage={"amplitude": "-300 V", **SINE},
        centre=OFF_CENTRE,
    ),
    *(
        field("potential-map", name=f"potential-map, {path}", path=path, centre=OFF_CENTRE)
        for path in ("round.csv", "flat.csv")
    ),
    field("potential-map", name="potential-map, mirrored", path="half.h5", mirrors=["z"]),
    field(
        "potential-map",
        name="potential-map, in space",
        path="space.h5",
        scale={"amplitude": 1.5, "offset": 0.2, **SINE},
        centre=OFF_CENTRE,
    ),
    *(
        field("electric-map", name=f"electric-map, {path}", path=path, centre=OFF_CENTRE)
        for path in ("round-e.csv", "flat-e.csv", "space-e.h5")
    ),
    field(
        "magnetic-map",
        path="round-b.csv",
        scale={"amplitude": 2.0, **SINE},
        centre=OFF_CENTRE,
    ),
    field("magnetic-map", name="magnetic-map, in space", path="space-b.h5", centre=OFF_CENTRE),
]

WALLS = [
    wall("cylinder", radius="3.5 mm"),
    wall(
        "cylinder",
        name="cylinder along x, of a length",
        radius="4 mm",
        axis="x",
        length="6 mm",
        centre=OFF_CENTRE,
    ),
    wall("cylinder", name="cylinder along y", radius="4 mm", axis="y", centre=OFF_CENTRE),
    wall("sphere", radius="5 mm", centre=OFF_CENTRE),
    wall("box", size=["6 mm", "8 mm", "10 mm"], centre=OFF_CENTRE),
    wall("plane", at=OFF_CENTRE),
    wall(
        "plane",
        name="plane with a hole",
        at=OFF_CENTRE,
        normal=[1, 2, -2],
        hole={"radius": "1 mm"},
    ),
    wall(
        "plane",
        name="plane with a slit",
        at=OFF_CENTRE,
        normal=[0, 3, 4],
        slit={"width": "1.2 mm", "along": [1, 0, 0]},
    ),
]

DETECTORS = [
    detector("plane", at=OFF_CENTRE),
    detector("plane", name="tilted disc", at=OFF_CENTRE, normal=[-2, 1, 2], radius="2 mm"),
]

PAIR_SUMS = [
    direct(threads=1),
    direct(threads=2),
    direct(threads=2, mixed=True),
    tree(1e-3),
    tree(1e-4),
    tree(5e-7),
]
