"""Noise: its spectral density and statistics, its draws, faults and words."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from pydantic import TypeAdapter, ValidationError

from driftwell.electrodes.form import Electrode
from driftwell.errors import ScenarioError
from driftwell.forms.noise import Noise, with_noise_drawn
from driftwell.forms.waveform_table import PackedWaveform, waveform_table
from driftwell.forms.waveforms import (
    ElectricFieldWave,
    RealWave,
    VoltageWave,
    frequency_scale,
    largest_value,
    packed_waveform,
    steady_value,
    waveform_breaks,
    waveform_words,
)
from driftwell.kernels.waveform import waveform
from driftwell.scenario.read import read_scenario
from driftwell.solved.waves import courses
from tests.cases import field
from tests.running import points
from tests.scenario.good_scenarios import toml_file

FLAT = {
    "kind": "noise",
    "density": "4e-12 V^2/Hz",
    "lowest": "100 kHz",
    "highest": "1.1 MHz",
    "lines": 50,
}
FALLING = {**FLAT, "exponent": -1.0, "reference": "500 kHz", "offset": "3 V"}


def read(value: Any) -> Noise[float, float]:
    noise = TypeAdapter(VoltageWave).validate_python(value)
    assert isinstance(noise, Noise)
    return noise


def lines(noise: Noise[float, float]) -> tuple[np.ndarray, np.ndarray]:
    """Frequencies, Hz, and complex amplitudes."""
    rows = np.array(noise.packed().points).reshape(-1, 4)
    return rows[:, 0] / (2.0 * math.pi), rows[:, 1] * np.exp(1j * rows[:, 2])


def test_value_and_rate_are_the_sum_over_the_lines() -> None:
    noise = read(FALLING)
    table = waveform_table([packed_waveform(noise)])
    frequency, amplitude = lines(noise)
    for t in (0.0, 3.7e-6, 21e-6):
        swing = amplitude * np.exp(2j * math.pi * frequency * t)
        rate = (2j * math.pi * frequency * swing).real.sum()
        value = waveform(int(table.kind[0]), table.parameter[0], table.data, t, t)
        assert 3.0 + swing.real.sum() == pytest.approx(value[0], rel=1e-13, abs=0.0)
        assert rate == pytest.approx(value[1], abs=1e-11 * np.abs(swing).max() * 1e7)


def test_each_part_of_the_band_has_one_line() -> None:
    frequency, _ = lines(read(FLAT))
    part = (frequency - 1e5) / 2e4
    assert list(range(50)) == np.floor(part).tolist()
    assert np.ptp(part - np.floor(part)) > 0.8


@pytest.mark.parametrize("keys", [FLAT, FALLING], ids=["flat", "falling"])
def test_over_many_seeds_it_has_its_density_and_is_gaussian(keys: dict[str, Any]) -> None:
    """Mean square of all lines in a fifth of the band; the fourth moment of a value is 3.

    S. O. Rice, Bell Syst. Tech. J. 23 (1944) 282. 400 seeds of 10 lines: 2 % and less; the fourth
    moment of 400 values errs by 0.5 of 3.
    """
    noise = read(keys)
    power = np.zeros(5)
    values = []
    for seed in range(400):
        frequency, amplitude = lines(noise.drawn_for(seed, "rods"))
        power += 0.5 * np.histogram(frequency, 5, (1e5, 1.1e6), weights=np.abs(amplitude) ** 2)[0]
        values.append(amplitude.real.sum())
    power /= 400.0
    edges = np.linspace(1e5, 1.1e6, 6)
    expected = 4e-12 * np.diff(edges)
    if "exponent" in keys:
        expected = 4e-12 * 5e5 * np.diff(np.log(edges))
    assert expected == pytest.approx(power, rel=0.08, abs=0.0)
    assert math.sqrt(expected.sum()) == pytest.approx(noise.root_mean_square(), rel=1e-9, abs=0.0)
    found = np.array(values)
    assert expected.sum() == pytest.approx(float(np.mean(found**2)), rel=0.25, abs=0.0)
    assert 3.0 == pytest.approx(float(np.mean(found**4) / np.mean(found**2) ** 2), abs=1.2)


def test_seed_and_name_make_the_noise_and_nothing_else() -> None:
    noise = read(FLAT)
    one, again = noise.drawn_for(3, "rods").packed(), noise.drawn_for(3, "rods").packed()
    assert one == again
    assert one != noise.drawn_for(4, "rods").packed()
    assert one != noise.drawn_for(3, "caps").packed()
    form = field("uniform-electric", strength={**FLAT, "density": "1e-9 V^2/m^2/Hz"})
    drawn = with_noise_drawn(form, 5, "stray")
    assert form.packed({}).waveform != drawn.packed({}).waveform
    plain = field("uniform-electric", strength="1 V/m")
    assert plain is with_noise_drawn(plain, 5, "stray")


def test_a_scenarios_seed_draws_the_noise_of_its_fields(tmp_path: Any) -> None:
    """Each has its own, the same each time the file is read; with another seed another."""
    strength = {**FLAT, "density": "1e-9 V^2/m^2/Hz"}
    table = {
        "title": "stray fields",
        "duration": "10 us",
        "seed": 11,
        "cloud": [points("one", "electron", [0.0, 0.0, 0.0])],
        "field": [
            {"name": name, "kind": "uniform-electric", "strength": strength} for name in "ab"
        ],
    }
    path = tmp_path / "stray.toml"
    path.write_text(toml_file(table))

    def waves(*settings: str) -> list[PackedWaveform]:
        return [
            packed_waveform(each.strength) for each in read_scenario(path, settings).scenario.field
        ]

    one, two = waves()
    assert one != two
    assert [one, two] == waves()
    assert not {one, two} & set(waves("seed=12"))


def test_electrodes_of_one_kind_of_noise_have_each_their_own() -> None:
    """And so each a field of its own; the same constant part is one for all."""
    drawn = [
        with_noise_drawn(
            Electrode.model_validate(
                {
                    "name": name,
                    "voltage": FALLING,
                    "shape": [{"kind": "circle", "centre": ["5 mm", "0 mm"], "radius": "1 mm"}],
                }
            ),
            7,
            name,
        ).voltage
        for name in ("left", "right")
    ]
    found = courses(drawn)
    assert [[3.0, 3.0], [1.0, 0.0], [0.0, 1.0]] == [course.weight.tolist() for course in found]
    for course, wave in zip(found[1:], drawn, strict=True):
        assert packed_waveform(course.waveform).points == packed_waveform(wave).points


def test_noise_that_would_repeat_itself_is_refused() -> None:
    noise = read(FLAT)
    assert [] == waveform_breaks(noise, 50e-6)
    told = (
        r"noise of 50 lines from 100 kHz to 1.1 MHz repeats itself after 50 us, before the run "
        r"ends at 2 ms: give it at least 2000 `lines`"
    )
    with pytest.raises(ScenarioError, match=told):
        waveform_breaks(noise, 2e-3)
    with pytest.raises(ScenarioError, match="100000 `lines` are the most"):
        waveform_breaks(noise, 2.0)


def test_what_a_step_and_a_reader_are_told() -> None:
    noise = read(FALLING)
    size = noise.root_mean_square()
    assert 1.1e6 == frequency_scale(noise)
    assert 3.0 == steady_value(noise)
    assert 3.0 + 5.0 * size == largest_value(noise)
    assert "noise of 2 mV rms between 100 kHz and 1.1 MHz" == waveform_words(read(FLAT), "V")
    assert waveform_words(noise, "V").startswith("3 V plus noise of ")
    assert waveform_words(noise, "V").endswith("1.1 MHz with f^-1")


@pytest.mark.parametrize(
    ("change", "told"),
    [
        ({"highest": "100 kHz"}, "`highest` must be above `lowest`"),
        ({"density": "4e-12 V/Hz"}, "a spectral density of voltage"),
        ({"density": "-4e-12 V^2/Hz"}, "must be at least 0"),
        ({"lines": 0}, "at least 1 and at most 100000"),
    ],
)
def test_faults_are_told(change: dict[str, Any], told: str) -> None:
    with pytest.raises(ValidationError, match=told):
        read({**FLAT, **change})


@pytest.mark.parametrize(
    ("declared", "density", "expected"),
    [(ElectricFieldWave, "2 mV^2/mm^2/Hz", 2.0), (RealWave, "1e-9 1/Hz", 1e-9)],
)
def test_every_unit_has_its_square_per_hertz(declared: Any, density: str, expected: float) -> None:
    noise = TypeAdapter(declared).validate_python({**FLAT, "density": density})
    assert expected == pytest.approx(noise.density, rel=1e-12, abs=0.0)
