"""The rms ellipse with weights against closed forms."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.report.figures.ellipse import rms_ellipse


def sheared(count: int = 4000):
    draw = np.random.default_rng(5)
    x = draw.normal(size=count) * 2e-3
    return x, 3.0 * x + draw.normal(size=count) * 4e-3 + 0.1


def test_the_ellipse_has_pi_times_the_emittance_as_its_area():
    x, y = sheared()
    found = rms_ellipse(x, y, np.ones(x.size))
    # e^2 = s11 s22 - s12^2: H. Wiedemann, section 8.1 (from memory)
    emittance = math.sqrt(np.linalg.det(np.cov(x, y, bias=True)))
    line = found.outline()
    area = 0.5 * abs(np.sum(line[0, :-1] * line[1, 1:] - line[0, 1:] * line[1, :-1]))
    assert emittance == pytest.approx(found.emittance, rel=1e-9, abs=0.0)
    # 180 chords of an ellipse leave out 2e-4 of its area
    assert math.pi * emittance == pytest.approx(area, rel=3e-4, abs=0.0)


def test_every_point_of_the_outline_fulfils_the_ellipse_of_its_twiss_parameters():
    x, y = sheared()
    found = rms_ellipse(x, y, np.ones(x.size))
    alpha, beta, gamma = found.twiss
    u, v = found.outline() - found.centre[:, None]
    assert found.emittance == pytest.approx(
        gamma * u**2 + 2.0 * alpha * u * v + beta * v**2, rel=1e-9, abs=0.0
    )
    assert 1.0 == pytest.approx(beta * gamma - alpha**2, rel=1e-9, abs=0.0)


def test_the_semi_axes_are_the_roots_of_the_covariance_eigenvalues():
    x, y = sheared()
    scale = x.std() / y.std()
    found = rms_ellipse(x, scale * y, np.ones(x.size))
    u, v = found.outline() - found.centre[:, None]
    lengths = np.hypot(u, v)
    smaller, larger = np.sqrt(np.linalg.eigvalsh(np.cov(x, scale * y, bias=True)))
    # a point every 2 degrees lies within 6e-4 of each end
    assert larger == pytest.approx(lengths.max(), rel=1e-3, abs=0.0)
    assert smaller == pytest.approx(lengths.min(), rel=1e-2, abs=0.0)


def test_a_charge_of_weight_three_counts_as_three_charges():
    x, y = sheared(100)
    weight = np.where(np.arange(100) % 2, 3.0, 1.0)
    one = rms_ellipse(
        np.repeat(x, weight.astype(int)), np.repeat(y, weight.astype(int)), np.ones(200)
    )
    other = rms_ellipse(x, y, weight)
    assert one.emittance == pytest.approx(other.emittance, rel=1e-12, abs=0.0)
    assert rms_ellipse(x, y, np.ones(100)).emittance != pytest.approx(
        other.emittance, rel=1e-4, abs=0.0
    )


def test_charges_on_a_line_or_too_few_have_no_ellipse():
    line = np.linspace(0.0, 1.0, 20)
    assert rms_ellipse(line, 2.0 * line, np.ones(20)) is None
    assert rms_ellipse(line[:5], line[:5] ** 2, np.ones(5)) is None
