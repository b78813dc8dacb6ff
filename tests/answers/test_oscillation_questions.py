"""Tunes, spectral lines, their shifts and widths, in motion that is known."""

from __future__ import annotations

import math

import numpy as np
import pytest
from recorded_by_hand import Recorded, asked, facts, near, one_cloud

from driftwell.answers.evidence import TraceRequest
from driftwell.errors import AnswerError

TIME = np.arange(4000) * 1e-7
TURN = 2.0 * math.pi


def oscillating(frequencies: list[float], speed: float = 0.0) -> Recorded:
    """Charges that oscillate along x, each at its frequency, Hz, and fly along z."""
    recorded = Recorded({"load": facts(count=len(frequencies))}, end_time=float(TIME[-1]))
    for number, frequency in enumerate(frequencies):
        moving = 1e-4 * np.cos(TURN * frequency * TIME + 0.3 * number)
        recorded.traced[TraceRequest("load", number, 0, None)] = (TIME, moving)
        recorded.traced[TraceRequest("load", number, 2, None)] = (TIME, speed * TIME)
    return recorded


def lines(*parts: tuple[float, float]) -> Recorded:
    """A centre that oscillates along x at several frequencies, Hz, and amplitudes, m."""
    recorded = Recorded({"load": facts(count=50, weight=2.0)}, end_time=float(TIME[-1]))
    moving = sum(size * np.cos(TURN * f * TIME + f) for f, size in parts)
    recorded.traced[TraceRequest("load", None, 0, None)] = (TIME, np.asarray(moving))
    return recorded


FOUND = [100e3, 104e3, 98e3, 102e3]


def test_tune_is_oscillations_in_a_period_averaged_over_charges() -> None:
    found = asked("tune", axis="x", period="2 us", charges=4).answer(oscillating(FOUND))
    assert near(101e3 * 2e-6, rel=1e-9) == found.value
    scatter = np.std(FOUND, ddof=1) * 2e-6 / math.sqrt(4.0)
    # With four values one standard deviation is 1.197 of what they scatter by.
    assert 1.197 * scatter == near(found.error, rel=1e-6)
    assert "mean of 4 charges, 98 kHz to 104 kHz" in found.note


def test_tune_of_a_length_is_along_each_charges_flight() -> None:
    recorded = oscillating(FOUND, speed=4e5)
    found = asked("tune", axis="x", length="1 m", charges=4).answer(recorded)
    assert near(101e3 / 4e5, rel=1e-9) == found.value
    assert asked("tune", axis="x", length="1 m").needs(1.0).traces[8].axis == 2


def test_tune_depression_of_the_reference_channel() -> None:
    """0.630674, matched KV beam at 60 degrees per metre, K = 2e-5, 20 mm mrad.

    R^2 = (K + sqrt(K^2 + 4 k0^2 e^2)) / (2 k0^2), k = e/R^2: Reiser (1994), sec. 4.3 (from memory).
    """
    speed, k0, perveance, area = 1e6, 1.0471975511965976, 2e-5, 2e-5
    square = (perveance + math.sqrt(perveance**2 + 4.0 * k0**2 * area**2)) / (2.0 * k0**2)
    f0, f = (k * speed / (2.0 * math.pi) for k in (k0, area / square))
    found = asked("tune-depression", axis="x", without=f"{f0!r} Hz", charges=2).answer(
        oscillating([f, f])
    )
    assert near(0.6306744504158426, rel=1e-6) == found.value
    assert found.error is not None
    assert found.error < 1e-6


def test_charges_without_a_tune_are_left_out_and_told() -> None:
    recorded = oscillating([100e3, 100e3])
    request = TraceRequest("load", 1, 0, None)
    recorded.traced[request] = (TIME, np.full(TIME.size, np.nan))
    found = asked("tune", axis="x", period="2 us", charges=2).answer(recorded)
    assert near(0.2, rel=1e-9) == found.value
    assert "1 without: there was no charge to follow: charge 1" in found.note


@pytest.mark.parametrize("keys", [{}, {"period": "1 us", "length": "1 m"}])
@pytest.mark.parametrize("ask", ["tune", "envelope-tune"])
def test_a_tune_needs_one_period(ask: str, keys: dict[str, str]) -> None:
    with pytest.raises(AssertionError, match="needs either `period` or `length`"):
        asked(ask, axis="x", **keys)


def test_envelope_tune_of_a_matched_beam_is_its_depressed_tune() -> None:
    """k = 37.8405 degrees per metre for the KV beam above, from its rms size and emittance alone.

    Reiser (1994), sec. 4.3 and 5.3 (from memory). The beam is drawn, 4-D, on its surface.
    """
    random = np.random.default_rng(1)
    point = random.normal(size=(100_000, 4))
    point /= np.linalg.norm(point, axis=1)[:, None]
    radius, area, speed = 0.0055029817197110795, 2e-5, 1e6
    place = np.zeros((100_000, 3))
    velocity = np.full((100_000, 3), speed)
    place[:, :2] = radius * point[:, :2]
    velocity[:, :2] = speed * area / radius * point[:, 2:]
    recorded = one_cloud(place, velocity)
    found = asked("envelope-tune", axis="x", length="1 m").answer(recorded)
    assert found.error is not None
    assert pytest.approx(37.84046702495055 / 360.0, abs=3.0 * found.error) == found.value
    assert found.error < 0.005 * found.value
    timed = asked("envelope-tune", axis="x", period="1 us").answer(recorded)
    assert found.value == near(timed.value, rel=1e-4)


def test_peaks_of_a_spectrum_come_in_the_order_of_their_strength() -> None:
    recorded = lines((100e3, 1e-4), (350e3, 4e-5), (40e3, 2e-5))
    for rank, frequency in ((1, 100e3), (2, 350e3), (3, 40e3)):
        found = asked("spectrum-peak", axis="x", rank=rank).answer(recorded)
        assert near(frequency, rel=1e-8) == found.value
    with pytest.raises(AnswerError, match="there is no line 4"):
        asked("spectrum-peak", axis="x", rank=4).answer(recorded)


def test_shift_of_a_frequency_is_against_the_reference_and_for_each_particle() -> None:
    recorded = lines((100.05e3, 1e-4), (350e3, 2e-4))
    recorded.clouds["other"] = facts("other", count=25, index=1, first_id=50)
    keys = {"axis": "x", "reference": "100 kHz", "reference_error": "2 Hz"}
    whole = asked("frequency-shift", **keys).answer(recorded)
    assert near(50.0, rel=1e-5) == whole.value
    assert near(2.0, rel=1e-3) == whole.error
    assert "relative shift 0.0005" in whole.note
    each = asked("frequency-shift", per_charge=True, **keys).answer(recorded)
    assert near(50.0 / 125.0, rel=1e-5) == each.value
    assert near(2.0 / 125.0, rel=1e-3) == each.error
    other = asked("frequency-shift", per_charge=True, by="other", **keys).answer(recorded)
    assert near(2.0, rel=1e-5) == other.value


def test_a_line_shifted_beyond_a_tenth_is_taken_within_the_reach_and_told_without() -> None:
    recorded = lines((80e3, 1e-4), (103e3, 1e-6))
    keys = {"axis": "x", "reference": "100 kHz"}
    found = asked("frequency-shift", **keys).answer(recorded)
    assert near(3e3, rel=1e-4) == found.value
    assert "strongest other line at 80 kHz, 100 times as large" in found.note
    assert (
        near(-20e3, rel=1e-6)
        == asked("frequency-shift", reach="30 kHz", **keys).answer(recorded).value
    )
    with pytest.raises(AnswerError, match="no line within 1 kHz of 100 kHz"):
        asked("frequency-shift", reach="1 kHz", **keys).answer(recorded)


@pytest.mark.parametrize(("motion", "times"), [("harmonic", 2.0), ("cyclotron", 1.0)])
def test_resolving_power_of_a_line_is_that_of_the_time_it_was_traced(
    motion: str, times: float
) -> None:
    """df = 1.20671/T of a lasting sine in magnitude: sinc(x) = 1/2 at x = 0.603355."""
    found = asked("line-resolving-power", axis="x", motion=motion).answer(lines((250e3, 1e-4)))
    assert near(250e3 * 4e-4 / (times * 1.2067091), rel=2e-3) == found.value


def test_a_motion_that_dies_away_has_the_width_of_its_decay() -> None:
    """df = sqrt(3)/(pi tau) for exp(-t/tau): 1/sqrt(1 + (2 pi tau x)^2) is 1/2 at sqrt(3)."""
    recorded = lines((250e3, 1e-4))
    request = TraceRequest("load", None, 0, None)
    tau = 4e-5
    recorded.traced[request] = (TIME, np.exp(-TIME / tau) * recorded.traced[request][1])
    found = asked("line-resolving-power", axis="x").answer(recorded)
    expected = 250e3 / (2.0 * math.sqrt(3.0) / (math.pi * tau))
    assert near(expected, rel=0.02) == found.value


def test_a_charge_born_late_is_read_from_its_birth_on() -> None:
    recorded = oscillating([100e3])
    request = TraceRequest("load", 0, 0, None)
    moving = recorded.traced[request][1].copy()
    moving[:500] = np.nan
    recorded.traced[request] = (TIME, moving)
    found = asked("frequency", axis="x", charge=0).answer(recorded)
    assert near(100e3, rel=1e-8) == found.value
    assert "3500 samples in 350 us;" in found.note
