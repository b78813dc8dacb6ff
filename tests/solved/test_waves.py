"""Voltages sorted by their course in time: the sum of courses is every electrode's own voltage."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.electrodes.form import Electrode
from driftwell.forms.waveform_table import waveform_table
from driftwell.forms.waveforms import AnyWaveform, packed_waveform
from driftwell.kernels.waveform import waveform
from driftwell.solved.waves import courses

RF = {"frequency": "1 MHz"}
LATER = {"start": "1 us", "end": "4 us"}
TIMES = ["0 us", "1 us", "5 us"]


def voltage(given: object) -> AnyWaveform:
    shape = {"kind": "circle", "centre": ["9 mm", "0 mm"], "radius": "4 mm"}
    return Electrode.model_validate({"name": "rod", "voltage": given, "shape": [shape]}).voltage


VOLTAGES = [
    voltage(given)
    for given in (
        "12 V",
        {"amplitude": "180 V", "offset": "5 V", **RF},
        {"amplitude": "180 V", "phase": "180 deg", **RF},
        {"amplitude": "20 V", "phase": "90 deg", **RF},
        {"kind": "ramp", "before": "1 V", "after": "3 V", **LATER},
        {"kind": "ramp", "before": "0 V", "after": "-7 V", **LATER},
        {"kind": "step", "before": "10 V", "after": "-900 V", "at": "2 us"},
        {
            "kind": "pulses",
            "low": "3 V",
            "high": "50 V",
            "start": "1 us",
            "width": "2 us",
            "rise": "0.1 us",
        },
        {"kind": "table", "times": TIMES, "values": ["1 V", "4 V", "2 V"]},
        {"kind": "table", "times": TIMES, "values": ["0 V", "0.3 V", "0.1 V"]},
    )
]


def value(wave: AnyWaveform, t: float) -> float:
    table = waveform_table([packed_waveform(wave)])
    return float(waveform(table.kind[0], table.parameter[0], table.data, t, t)[0])


@pytest.mark.parametrize("t", [0.0, 3.7e-7, 1.55e-6, 2.9e-6, 7e-6])
def test_the_courses_add_up_to_every_voltage(t: float) -> None:
    total = sum(value(course.waveform, t) * course.weight for course in courses(VOLTAGES))
    expected = [value(wave, t) for wave in VOLTAGES]
    np.testing.assert_allclose(total, expected, rtol=0, atol=1e-9)


def test_what_varies_alike_is_one_course() -> None:
    found = courses(VOLTAGES)
    kinds = [type(course.waveform).__name__.split(" ")[0] for course in found]
    assert ["float", "Sine", "Sine", "Ramp", "Step", "Pulses", "Table"] == kinds


def test_rods_in_opposite_phase_share_one_course_of_opposite_weights() -> None:
    (course,) = courses([VOLTAGES[2], voltage({"amplitude": "180 V", **RF})])
    assert [-180.0, 180.0] == course.weight.tolist()


def test_electrodes_without_voltage_need_no_map() -> None:
    assert [] == courses([0.0, 0.0])
