"""Frequencies of lines far below a bin, and their errors."""

from __future__ import annotations

import numpy as np
import pytest
from recorded_by_hand import near

from driftwell.answers.sinusoid import Line, chosen_line, lines_in
from driftwell.errors import AnswerError

LENGTH = 1e-3
BIN = 1.0 / LENGTH


def record(
    lines: list[tuple[float, float, float]], count: int = 4000, noise: float = 0.0, seed: int = 1
) -> tuple[np.ndarray, np.ndarray]:
    """Times and values of lines (frequency, amplitude, phase), off zero and drifting a little."""
    time = np.arange(count) * (LENGTH / count)
    value = 2.0 + 30.0 * time + noise * np.random.default_rng(seed).normal(size=count)
    for frequency, amplitude, phase in lines:
        value = value + amplitude * np.cos(2.0 * np.pi * frequency * time + phase)
    return time, value


@pytest.mark.parametrize("frequency", [23_456.789, 23_000.0, 2_345.6, 1_234_567.8])
def test_a_clean_sine_is_found_to_a_billionth_of_a_bin(frequency: float) -> None:
    found = lines_in(*record([(frequency, 1e-6, 0.7)]))
    assert len(found) == 1
    assert frequency == pytest.approx(found[0].frequency, abs=1e-9 * BIN)
    assert near(1e-6, rel=1e-6) == found[0].amplitude
    assert found[0].error < 1e-9 * BIN


def test_a_long_record_is_read_as_a_short_one() -> None:
    lines = [(23_456.789, 1.0, 0.7), (1_200_000.5, 0.1, 0.2)]
    found = lines_in(*record(lines, 70_000))
    assert [23_456.789, 1_200_000.5] == pytest.approx(
        [line.frequency for line in found], abs=1e-9 * BIN
    )


@pytest.mark.parametrize("bins", [5.0, 2.0, 1.0, 0.6])
@pytest.mark.parametrize("weaker", [1.0, 0.6, 1e-3])
def test_two_close_clean_lines_are_told_apart(bins: float, weaker: float) -> None:
    first, second = 50_321.5, 50_321.5 + bins * BIN
    found = lines_in(*record([(first, 1.0, 0.3), (second, weaker, 2.0)]))
    low, high = sorted(line.frequency for line in found[:2])
    assert first == pytest.approx(low, abs=1e-9 * BIN)
    assert second == pytest.approx(high, abs=1e-9 * BIN)


def test_the_error_comes_from_the_noise_around_the_line() -> None:
    """Noise whose power grows with the square of the frequency, 20 times weaker at the line."""
    frequency = 25_321.0
    scores = []
    for seed in range(200):
        blue = np.diff(np.random.default_rng(seed).normal(size=1001))
        time, value = record([(frequency, 1.0, 0.1 * seed)], 1000)
        line = lines_in(time, value + blue)[0]
        scores.append((line.frequency - frequency) / line.error)
    assert 0.8 < np.std(scores) < 1.25


def test_weak_sidebands_do_not_pull_the_strong_line() -> None:
    drive, slow = 1.1e6, 80_123.4
    lines = [(slow, 1.0, 0.1), (drive - slow, 0.2, 1.0), (drive + slow, 0.2, 2.0)]
    found = lines_in(*record(lines, count=50_000))
    assert slow == pytest.approx(found[0].frequency, abs=1e-8 * BIN)
    assert len(found) == 3


@pytest.mark.parametrize(("count", "noise"), [(64, 0.1), (300, 0.1), (300, 1.0), (1000, 1.0)])
def test_the_error_of_a_noisy_sine_is_its_scatter(count: int, noise: float) -> None:
    frequency = 8_456.789
    scores = []
    for seed in range(200):
        phase = 0.1 * seed
        found = lines_in(*record([(frequency, 1.0, phase)], count, noise, seed))
        line = min(found, key=lambda line: abs(line.frequency - frequency))
        scores.append((line.frequency - frequency) / line.error)
    assert 0.8 < np.std(scores) < 1.25
    assert abs(np.mean(scores)) < 0.25


def test_the_error_of_a_noisy_sine_is_the_least_there_can_be() -> None:
    """Rife and Boorstyn (1974): var(f) = 6 s^2 / (pi^2 A^2 n T^2) for large n (from memory)."""
    line = lines_in(*record([(23_456.789, 1.0, 0.4)], 4000, 0.2))[0]
    least = np.sqrt(6.0 / (np.pi**2 * 4000)) * 0.2 / LENGTH
    assert least == near(line.error, rel=0.2)
    assert line.error < 0.01 * BIN


def test_a_frequency_that_wanders_widens_the_error() -> None:
    time = np.arange(4000) * (LENGTH / 4000)
    steady, wandering = (
        lines_in(time, np.cos(2.0 * np.pi * (5e4 * time + drift * time**2)))[0]
        for drift in (0.0, 1e5)
    )
    assert wandering.error > 1e3 * steady.error
    assert pytest.approx(5e4 + 1e5 * LENGTH, abs=0.2 * BIN) == wandering.frequency


def test_noise_alone_has_no_line() -> None:
    with pytest.raises(AnswerError, match="above the noise"):
        lines_in(*record([], 2000, 1.0))


def test_rest_has_no_line() -> None:
    with pytest.raises(AnswerError, match="does not move"):
        lines_in(np.linspace(0.0, 1.0, 100), np.full(100, 3.0))


def test_few_or_uneven_samples_are_refused() -> None:
    time, value = record([(5e4, 1.0, 0.0)], 200)
    with pytest.raises(AnswerError, match="at least 16 samples"):
        lines_in(time[:15], value[:15])
    time[100] += 2e-6
    with pytest.raises(AnswerError, match="evenly"):
        lines_in(time, value)


def test_the_line_near_a_frequency_is_the_strongest_within_a_tenth() -> None:
    lines = [Line(80e3, 1.0, 5.0), Line(101e3, 1.0, 2.0), Line(97e3, 1.0, 1.0)]
    assert lines[0] == chosen_line(lines, None, LENGTH)
    assert lines[1] == chosen_line(lines, 95e3, LENGTH)
    assert lines[2] == chosen_line(lines, 91e3, LENGTH)
    with pytest.raises(AnswerError, match="no line within 30 kHz of 300 kHz"):
        chosen_line(lines, 300e3, LENGTH)


def test_a_record_of_less_than_two_periods_is_too_short() -> None:
    with pytest.raises(AnswerError, match="run longer"):
        chosen_line([Line(1.9 * BIN, 1.0, 1.0)], None, LENGTH)
