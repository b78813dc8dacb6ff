"""What can hurt where a scenario is built: voltage, X-rays, magnets, laser light, gas."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from itertools import permutations

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, ELEMENTARY_CHARGE
from driftwell.fields.form import FieldForm
from driftwell.forms import Form, spelled
from driftwell.forms.body import Body
from driftwell.forms.declared import Choice, Declared, Dimensioned, declared_keys
from driftwell.forms.waveforms import AnyWaveform, Pulses, Ramp, Sine, Step, Table, largest_value
from driftwell.particles.cloud import Cloud
from driftwell.particles.source import Source
from driftwell.particles.species import bodies
from driftwell.processes.gas_collisions import GasCollisions
from driftwell.processes.laser_cooling import LaserCooling
from driftwell.processes.mobility_drag import MobilityDrag
from driftwell.scenario.model import Scenario

HIGH_VOLTAGE = 1e3
"""V."""
X_RAY_ENERGY = 5e3 * ELEMENTARY_CHARGE
"""J."""
STRONG_MAGNET = 0.5
"""T."""
ACCELERATED = 1e6
"""V; energies of one charge up to this are taken to come from a voltage between electrodes."""
NUCLEAR_ENERGY = 2e6 * ELEMENTARY_CHARGE
"""J; light ions above may set neutrons free where they stop, and make what they meet radioactive.
Common practice, no source."""
LIGHT = 4.5 * ATOMIC_MASS
"""kg; ions up to helium."""


def cautions(scenario: Scenario) -> list[str]:
    """The hazards of what is simulated and whom to ask, one sentence each; empty where none."""
    known = bodies(scenario.species)
    groups: list[Cloud | Source] = [*scenario.cloud, *scenario.source]
    light = [group for group in groups if _is_electron(known[group.species])]
    powered = (*scenario.field, *scenario.electrode)
    voltage = max((abs(v) for each in powered for v in _values(each, "V")), default=0.0)
    magnet = max((_flux_density(field) for field in scenario.field), default=0.0)
    energy = max((_energy(cloud, known) for cloud in light), default=0.0)
    if light:
        energy += max(voltage, _between_electrodes(scenario)) * ELEMENTARY_CHARGE
    voltage = max([voltage, *(_accelerating(group, known) for group in groups)])
    found = []
    if voltage > HIGH_VOLTAGE:
        found.append(f"Voltages up to {spelled(voltage, 'V')} kill: insulate, interlock, earth.")
    if energy > X_RAY_ENERGY:
        reached = spelled(energy / ELEMENTARY_CHARGE, "eV")
        found.append(f"Electrons of up to {reached} make X-rays where they stop: shield, measure.")
    fastest = max(
        (_energy(each, known) for each in groups if _is_light_ion(known[each.species])), default=0.0
    )
    if fastest > NUCLEAR_ENERGY:
        reached = spelled(fastest / ELEMENTARY_CHARGE, "eV")
        found.append(
            f"Light ions of up to {reached} set neutrons free and make what they meet radioactive: "
            "shield, measure, keep away."
        )
    if magnet > STRONG_MAGNET:
        found.append(
            f"Fields up to {spelled(magnet, 'T', 3)} pull iron through the air and stop pacemakers;"
            " a superconducting magnet that quenches fills the room with cold gas."
        )
    if any(isinstance(process, LaserCooling) for process in scenario.process):
        found.append(
            "Laser beams blind, reflections and beams nobody sees too: enclose them, wear eyewear "
            "for the wavelength."
        )
    if any(isinstance(process, GasCollisions | MobilityDrag) for process in scenario.process):
        found.append(
            "Gas comes from bottles under pressure, suffocates where it collects, and may "
            "burn or be toxic: regulate, ventilate, watch the oxygen."
        )
    if found:
        found.append(
            "driftwell says nothing of safety: follow your local codes, and have licensed "
            "practitioners plan and check what is built."
        )
    return found


def _is_electron(body: Body) -> bool:
    return abs(body.mass / ELECTRON_MASS - 1.0) < 1e-3


def _is_light_ion(body: Body) -> bool:
    return 0.5 * ATOMIC_MASS < body.mass < LIGHT


def _accelerating(group: Cloud | Source, known: Mapping[str, Body]) -> float:
    """Voltage that would give a cloud or a source its energy, V; 0 beyond :data:`ACCELERATED`."""
    volts = _energy(group, known) / abs(known[group.species].charge)
    return float(f"{volts:.3g}") if volts <= ACCELERATED else 0.0


def _between_electrodes(scenario: Scenario) -> float:
    """Largest voltage between two electrodes, or one and ground, V."""
    ranges = [(0.0, 0.0), *(_lowest_and_highest(each.voltage) for each in scenario.electrode)]
    return max((high[1] - low[0] for high, low in permutations(ranges, 2)), default=0.0)


def _lowest_and_highest(wave: AnyWaveform) -> tuple[float, float]:
    match wave:
        case float() | int():
            return float(wave), float(wave)
        case Sine():
            swing = abs(wave.amplitude)
            return wave.offset - swing, wave.offset + swing
        case Ramp() | Step():
            return min(wave.before, wave.after), max(wave.before, wave.after)
        case Pulses():
            return min(wave.low, wave.high), max(wave.low, wave.high)
        case Table():
            return min(wave.values), max(wave.values)
        case _:  # noise
            return -largest_value(wave), largest_value(wave)


def _flux_density(field: FieldForm) -> float:
    """Largest flux density a field states, or that its currents make, T."""
    return max(field.strongest(), *_values(field, "T"), 0.0)


def _energy(cloud: Cloud | Source, known: Mapping[str, Body]) -> float:
    """Largest kinetic energy a cloud or a source is given at the start, J."""
    moving = 0.0 if cloud.motion is None else cloud.motion.mean_energy(known[cloud.species])
    return max(moving, *_values(cloud, "J"), 0.0)


def _values(form: Form, si_unit: str) -> Iterator[float]:
    """The largest magnitude of every key with this unit, waveforms too, at any depth."""
    for key in declared_keys(type(form)).values():
        value = getattr(form, key.name)
        if value is None:
            continue
        if _is_of(key.holds, si_unit):
            yield abs(largest_value(value))
        elif isinstance(value, Form):
            yield from _values(value, si_unit)


def _is_of(declared: Declared, si_unit: str) -> bool:
    match declared:
        case Dimensioned(_, unit):
            return unit == si_unit
        case Choice(options) if declared.kinds:
            return any(_is_of(option, si_unit) for _, option in options)
        case _:
            return False
