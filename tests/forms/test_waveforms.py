"""Waveforms: values, rates, breaks, the pieces on the two sides of a break, faults and words."""

from __future__ import annotations

import itertools
import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from pydantic import TypeAdapter, ValidationError

from driftwell.errors import ScenarioError
from driftwell.forms.waveform_table import waveform_table
from driftwell.forms.waveforms import (
    AnyWaveform,
    MagneticFieldWave,
    VoltageWave,
    frequency_scale,
    largest_value,
    packed_waveform,
    steady_value,
    waveform_breaks,
    waveform_words,
)
from driftwell.kernels.waveform import waveform

VOLTAGE = TypeAdapter(VoltageWave)


def read(value: Any) -> AnyWaveform:
    return VOLTAGE.validate_python(value)


def at(wave: AnyWaveform, t: float, inside: float | None = None) -> tuple[float, float]:
    """Value and rate."""
    table = waveform_table([packed_waveform(wave)])
    return waveform(
        int(table.kind[0]), table.parameter[0], table.data, t, t if inside is None else inside
    )


RAMP = {"kind": "ramp", "before": "2 V", "after": "-6 V", "start": "1 us", "end": "3 us"}
STEP = {"kind": "step", "before": "2 V", "after": "-6 V", "at": "1 us"}
PULSE = {"kind": "pulses", "low": "1 V", "high": "5 V", "start": "1 us", "width": "3 us"}
EDGES = {**PULSE, "rise": "1 us"}
TRAIN = {**EDGES, "period": "10 us", "count": 3}
KINDS = '`kind` must be "sine", "ramp", "step", "pulses", "table" or "noise"'
TABLE = {"kind": "table", "times": ["1 us", "2 us", "5 us"], "values": ["1 V", "3 V", "-3 V"]}


def test_a_plain_quantity_is_constant() -> None:
    wave = read("-180 V")
    assert (-180.0, 0.0) == at(wave, 0.0) == at(wave, 1.0)
    assert [] == waveform_breaks(wave, 1.0)
    assert (180.0, 180.0, 0.0) == (largest_value(wave), steady_value(wave), frequency_scale(wave))


def test_a_sine_starts_at_its_crest_and_turns_with_its_frequency() -> None:
    wave = read({"amplitude": "180 V", "frequency": "1.1 MHz", "offset": "5 V", "phase": "90 deg"})
    rate = 2.0 * math.pi * 1.1e6
    for t in (0.0, 0.13e-6, 2.7e-6):
        angle = rate * t + math.pi / 2.0
        assert (5.0 + 180.0 * math.cos(angle), -180.0 * rate * math.sin(angle)) == pytest.approx(
            at(wave, t), rel=1e-9, abs=1e-9
        )
    assert (185.0, 5.0, 1.1e6) == (largest_value(wave), steady_value(wave), frequency_scale(wave))
    assert [] == waveform_breaks(wave, 1.0)
    crest = read({"kind": "sine", "amplitude": "180 V", "frequency": "1.1 MHz"})
    assert (180.0, 0.0) == pytest.approx(at(crest, 0.0))


@pytest.mark.parametrize(
    ("t", "expected"),
    [(0.0, (2.0, 0.0)), (2e-6, (-2.0, -4e6)), (2.5e-6, (-4.0, -4e6)), (4e-6, (-6.0, 0.0))],
)
def test_a_ramp_is_a_straight_line_between_two_levels(
    t: float, expected: tuple[float, float]
) -> None:
    assert expected == pytest.approx(at(read(RAMP), t))
    assert 6.0 == largest_value(read(RAMP))
    assert [1e-6, 3e-6] == waveform_breaks(read(RAMP), 1.0)


def test_a_step_takes_the_side_of_the_time_inside() -> None:
    assert (2.0, 0.0) == at(read(STEP), 1e-6, 0.9e-6)
    assert (-6.0, 0.0) == at(read(STEP), 1e-6, 1.1e-6)
    assert (2.0, 0.0) == at(read(STEP), 0.0)
    assert [1e-6] == waveform_breaks(read(STEP), 1.0)


@pytest.mark.parametrize(
    ("t", "expected"),
    [
        (0.5e-6, (1.0, 0.0)),
        (1.25e-6, (2.0, 4e6)),
        (3e-6, (5.0, 0.0)),
        (4.75e-6, (2.0, -4e6)),
        (7e-6, (1.0, 0.0)),
    ],
)
def test_a_pulse_rises_stays_and_falls(t: float, expected: tuple[float, float]) -> None:
    assert expected == pytest.approx(at(read(EDGES), t), rel=1e-9, abs=0.0)
    assert expected == pytest.approx(at(read(TRAIN), t), rel=1e-9, abs=0.0)
    assert expected == pytest.approx(at(read(TRAIN), t + 20e-6), rel=1e-9, abs=0.0)
    assert (1.0, 0.0) == at(read(TRAIN), t + 30e-6)


def test_a_pulse_without_edges_is_high_from_start_for_its_width() -> None:
    wave = read(PULSE)
    assert [1.0, 5.0, 5.0, 1.0] == [at(wave, t)[0] for t in (0.9e-6, 1.1e-6, 3.9e-6, 4.1e-6)]
    assert [1e-6, 4e-6] == pytest.approx(waveform_breaks(wave, 1.0))


def test_pulses_break_at_every_corner_within_the_duration() -> None:
    corners = [1e-6, 2e-6, 4e-6, 5e-6]
    assert corners == pytest.approx(waveform_breaks(read(EDGES), 1.0))
    train = [10e-6 * number + corner for number in range(3) for corner in corners]
    assert train == pytest.approx(waveform_breaks(read(TRAIN), 1.0))
    assert train[:6] == pytest.approx(waveform_breaks(read(TRAIN), 13e-6))
    endless = {key: value for key, value in TRAIN.items() if key != "count"}
    assert 400 == len(waveform_breaks(read(endless), 1e-3))


def test_touching_pulses_of_a_square_wave_change_level_at_each_break() -> None:
    wave = read({**PULSE, "low": "-5 V", "start": "0 s", "width": "0.3 us", "period": "0.6 us"})
    breaks = [0.0, *waveform_breaks(wave, 60e-6)]
    middles = 0.5 * (np.array(breaks[:-1]) + np.array(breaks[1:]))
    assert 199 == len(middles)
    found = [at(wave, t, inside)[0] for t, inside in zip(breaks[1:], middles, strict=True)]
    assert ([5.0, -5.0] * 100)[:199] == found


def test_a_train_with_too_many_edges_is_refused_in_words() -> None:
    wave = read({**TRAIN, "count": 10**9})
    with pytest.raises(ScenarioError, match=r"more edges than .* take a longer `period`"):
        waveform_breaks(wave, 1e4)


def test_a_table_joins_its_points_and_is_constant_outside() -> None:
    wave = read(TABLE)
    assert (1.0, 0.0) == at(wave, 0.0)
    assert (2.0, 2e6) == pytest.approx(at(wave, 1.5e-6))
    assert (1.0, -2e6) == pytest.approx(at(wave, 3e-6))
    assert (-3.0, 0.0) == at(wave, 1.0)
    assert [1e-6, 2e-6, 5e-6] == waveform_breaks(wave, 1.0)
    assert [1e-6] == waveform_breaks(wave, 2e-6)
    assert 3.0 == largest_value(wave)


def test_a_table_takes_the_slope_of_the_piece_inside() -> None:
    wave = read(TABLE)
    assert (3.0, 2e6) == pytest.approx(at(wave, 2e-6, 1.9e-6))
    assert (3.0, -2e6) == pytest.approx(at(wave, 2e-6, 2.1e-6))


@settings(max_examples=60, deadline=None)
@given(st.lists(st.tuples(st.floats(-1e3, 1e3), st.floats(1e-3, 10.0)), min_size=2, max_size=30))
def test_a_table_agrees_with_numpy_interpolation(points: list[tuple[float, float]]) -> None:
    times = np.cumsum([gap for _, gap in points])
    values = [value for value, _ in points]
    wave = read(
        {
            "kind": "table",
            "times": [f"{float(t)!r} s" for t in times],
            "values": [f"{value!r} V" for value in values],
        }
    )
    for t in np.linspace(times[0] - 1.0, times[-1] + 1.0, 41):
        assert float(np.interp(t, times, values)) == pytest.approx(at(wave, t)[0], abs=1e-9)


@pytest.mark.parametrize("value", [RAMP, STEP, PULSE, EDGES, TRAIN, TABLE], ids=str)
def test_between_breaks_the_value_is_a_straight_line_with_its_rate(value: dict[str, Any]) -> None:
    wave = read(value)
    edges = [0.0, *waveform_breaks(wave, 40e-6), 40e-6]
    for begin, end in itertools.pairwise(edges):
        middle = 0.5 * (begin + end)
        level, slope = at(wave, middle)
        for t in (begin, end):
            expected = (level + slope * (t - middle), slope)
            assert expected == pytest.approx(at(wave, t, middle), rel=1e-9, abs=1e-9)
        assert abs(level) <= largest_value(wave)


def test_several_tables_share_one_array_and_keep_apart() -> None:
    waves = [read(TABLE), read("7 V"), read({**TABLE, "values": ["0 V", "10 V", "0 V"]})]
    table = waveform_table([packed_waveform(wave) for wave in waves])
    found = [
        waveform(int(table.kind[row]), table.parameter[row], table.data, 1.5e-6, 1.5e-6)[0]
        for row in range(3)
    ]
    assert [2.0, 7.0, 5.0] == pytest.approx(found)
    assert (6, 2) == table.data.shape


@pytest.mark.parametrize(
    ("value", "where", "what"),
    [
        (180, ("constant",), 'needs a voltage such as "180 V" (a number and its unit in quotes)'),
        ("180 mm", ("constant",), "'mm' is a unit of length"),
        ("1 T", ("constant",), "needs a voltage"),
        ({"kind": "sinus"}, (), KINDS),
        ({"kind": 5}, (), KINDS),
        ({"amplitude": "1 V"}, ("sine", "frequency"), "required"),
        ({"amplitude": "1 V", "frequency": "0 Hz"}, ("sine", "frequency"), "greater than 0"),
        (
            {"amplitude": "1 V", "frequency": "1 Hz", "amplitud": "2 V"},
            ("sine", "amplitud"),
            "not permitted",
        ),
        ({**RAMP, "end": "1 us"}, ("ramp",), "`end` must be later than `start`"),
        ({**EDGES, "rise": "4 us"}, ("pulses",), "`rise` must not be longer than `width`"),
        (
            {**TRAIN, "period": "3.5 us"},
            ("pulses",),
            "`period` must be at least `width` and `rise` together",
        ),
        ({**PULSE, "count": 2}, ("pulses",), "`count` needs a `period`"),
        ({**TRAIN, "count": 0}, ("pulses", "count"), "greater than 0"),
        ({**TABLE, "times": ["1 us", "1 us", "5 us"]}, ("table",), "must rise"),
        ({**TABLE, "times": ["1 us", "2 us"]}, ("table",), "same number of points, at least 2"),
        ({**TABLE, "times": ["1 us"], "values": ["1 V"]}, ("table",), "at least 2"),
    ],
    ids=str,
)
def test_a_wrong_waveform_is_refused_where_it_is_wrong(
    value: Any, where: tuple[str, ...], what: str
) -> None:
    with pytest.raises(ValidationError) as caught:
        read(value)
    (fault,) = caught.value.errors()
    assert where == fault["loc"]
    assert what in fault["msg"]


def test_waveforms_of_two_quantities_do_not_take_each_others_units() -> None:
    magnetic = TypeAdapter(MagneticFieldWave)
    assert 0.5 == magnetic.validate_python({"amplitude": "0.5 T", "frequency": "1 Hz"}).largest()
    with pytest.raises(ValidationError, match="needs a magnetic field"):
        magnetic.validate_python({"amplitude": "0.5 V", "frequency": "1 Hz"})


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        ("180 V", "180 V"),
        ({"amplitude": "180 V", "frequency": "1.1 MHz"}, "180 V amplitude at 1.1 MHz"),
        (
            {"amplitude": "1 kV", "frequency": "2 kHz", "offset": "-5 V", "phase": "90 deg"},
            "-5 V plus 1 kV amplitude at 2 kHz from phase 90 deg",
        ),
        (RAMP, "ramp from 2 V at 1 us to -6 V at 3 us"),
        (STEP, "2 V, from 1 us on -6 V"),
        (PULSE, "1 V with one pulse to 5 V for 3 us, at 1 us"),
        (
            TRAIN,
            "1 V with 3 pulses to 5 V for 3 us with edges of 1 us, every 10 us from 1 us on",
        ),
        (TABLE, "-3 V to 3 V in 3 points from 1 us to 5 us"),
    ],
    ids=lambda value: value if isinstance(value, str) else "",
)
def test_a_waveform_says_in_words_what_it_does(value: Any, expected: str) -> None:
    assert expected == waveform_words(read(value), "V")
