"""Scenarios without faults that tests start from, and a writer of raw tables. Settings invented."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from driftwell.forms.wording import name_text, toml_text

TRAP = """\
title    = "Barium cloud in a rod trap"
duration = "2 ms"
seed     = 7

[species.barium]
mass   = "137.905 u"
charge = "1 e"

[[cloud]]
name    = "load"
species = "barium"
count   = 200
shape   = { kind = "gaussian", sigma = ["60 um", "60 um", "250 um"] }
motion  = { temperature = "300 K" }

[[field]]
name    = "rods"
kind    = "rf-quadrupole"
radius  = "3.5 mm"
voltage = { amplitude = "180 V", frequency = "1.1 MHz" }

[[field]]
name = "end caps"
kind = "static-quadrupole"
axial_frequency = { species = "barium", value = "80 kHz" }

[[wall]]
name   = "bore"
kind   = "cylinder"
radius = "3.5 mm"

[[detector]]
name = "exit"
kind = "plane"
at   = ["0 mm", "0 mm", "40 mm"]

[coulomb]
method    = "direct"
softening = "1 um"

[stepping]
step = "auto"

[record]
every = "10 us"

[[question]]
name = "held fraction"
ask  = "fraction-left"
of   = "load"

[[question]]
name = "hot axis"
ask  = "temperature"
of   = "load"
axis = "z"
at   = "1 ms"
"""

BEAM = """\
# An electron beam through a hole, pushed and bent.
title = "Electron beam through a hole"
duration = "20 ns"

[[cloud]]
name = "bunch"
species = "electron"
weight = 50
total_charge = "-8 fC"
[cloud.shape]
kind = "beam-waterbag"
emittance = ["2 mm mrad", "3 mm mrad"]
beta = "0.5 m"
alpha = 0.5
kinetic_energy = "30 keV"
length = "10 mm"
centre = ["0", "0", "-40 mm"]

[[cloud]]
name = "probe"
species = "proton"
shape = { kind = "points", positions = [
  ["0 mm", "1 mm", "0 mm"],  # above
  ["0 mm", "-1 mm", "0 mm"], # below
] }

[[field]]
name = "gap"
kind = "uniform-electric"
strength = { kind = "table", times = ["0 ns", "5 ns", "10 ns"], values = ["0 V/m", "3 kV/m", "0"] }

[[field]]
name = "kicker"
kind = "uniform-electric"
along = [1, 0, 0]
[field.strength]
kind = "pulses"
low = "0 V/m"
high = "2 kV/m"
start = "2 ns"
width = "4 ns"
rise = "1 ns"

[[field]]
name = "bend"
kind = "uniform-magnetic"
strength = "2 mT"
along = [0, 1, 0]

[[wall]]
name = "plate"
kind = "plane"
at = ["0 mm", "0 mm", "20 mm"]
hole = { radius = "2 mm" }

[[wall]]
name = "chamber"
kind = "box"
size = ["0.1 m", "0.1 m", "1 m"]
effect = "reflect"

[[detector]]
name = "screen"
kind = "plane"
at = ["0", "0", "0.2 m"]
normal = [0, 0, 1]

[coulomb]
softening = "50 um"

[stepping]
step = "5 ps"
scheme = "composed-4"

[record]
every = "0.2 ns"
snapshots = "10 ns"
tracks = 20

[[question]]
name = "sent"
ask = "fraction-through"
of = "screen"
cloud = "bunch"

[[question]]
name = "arrival"
ask = "arrival-time"
of = "screen"
statistic = "rms"

[[question]]
name = "width"
ask = "rms-size"
of = "bunch"
axis = "x"
over = ["5 ns", "15 ns"]
"""

PAIR = """\
title = "Two charges side by side"
duration = "1 us"
[[cloud]]
name = "pair"
species = "proton"
shape.kind = "points"
shape.positions = [["-1 um", "0", "0"], ["1 um", "0", "0"]]
[[question]]
name = "push"
ask = "force"
of = "pair"
charge = 1
at = "start"
[coulomb]
method = "auto"
accuracy = 1e-5
precision = "double"
"""

GOOD = {"trap": TRAP, "beam": BEAM, "pair": PAIR}


def toml_file(table: Mapping[str, Any]) -> str:
    """A raw table as a TOML file: plain keys first, then one header for each section and entry."""
    plain, sections = [], []
    for name, value in table.items():
        key = name_text(name)
        if isinstance(value, Mapping) and value and all(map(_is_table, value.values())):
            for inner, entry in value.items():
                sections.append(f"\n[{key}.{name_text(inner)}]\n{_lines(entry)}")
        elif isinstance(value, Mapping):
            sections.append(f"\n[{key}]\n{_lines(value)}")
        elif isinstance(value, list) and value and all(map(_is_table, value)):
            sections += [f"\n[[{key}]]\n{_lines(entry)}" for entry in value]
        else:
            plain.append(f"{key} = {toml_text(value)}\n")
    return "".join(plain + sections)


def _is_table(value: object) -> bool:
    return isinstance(value, Mapping)


def _lines(table: Mapping[str, Any]) -> str:
    return "".join(f"{name_text(name)} = {toml_text(value)}\n" for name, value in table.items())
