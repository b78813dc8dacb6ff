"""Many charges spread evenly over a ball, shell, rod, disc or ring push as the body does.

The closed forms and their sources stand in charged_bodies.py. Places are scrambled Sobol' points:
A. B. Owen, SIAM J. Numer. Anal. 34 (1997) 1884. Their mean is unbiased and the scatter between
scramblings tells its error, which lies between that of independent charges, n^(-1/2), and
n^(-3/2), to be had where the field is smooth.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.stats import qmc

from tests.cases import PAIR_SUMS
from tests.pair_sums import Floats, PairSumCase
from tests.physics.charged_bodies import BODIES, Body

EACH_BODY = pytest.mark.parametrize("body", BODIES, ids=str)
LOG_COUNT, SETS = 12, 8
COUNT = 2**LOG_COUNT


def sets_of_charges(body: Body) -> list[Floats]:
    """Places of the charges (3, COUNT) of each scrambling."""
    return [
        body.places(
            qmc.Sobol(body.dimensions, rng=np.random.default_rng(number)).random_base2(LOG_COUNT)
        )
        for number in range(SETS)
    ]


@EACH_BODY
@pytest.mark.parametrize("pair_sum", PAIR_SUMS, ids=str)
def test_the_field_and_potential_are_the_bodys(pair_sum: PairSumCase, body: Body) -> None:
    """At probes without charge, near and far: within four standard errors of the mean over the
    sets (5e-6 to 1e-3 of the field), besides the sum's own error; and the scatter is as expected.

    A sum's promise is an rms over all charges, |E| counting as no less than 1/100 of its rms: a few
    probes may have the more of it the fewer they are.
    """
    probes = np.array(body.probes).T
    charge = np.append(np.full(COUNT, 1.0 / COUNT), np.zeros(len(body.probes)))
    found, levels, random_error, strength = [], [], [], []
    for places in sets_of_charges(body):
        whole = np.ascontiguousarray(np.hstack([places, probes]))
        field = pair_sum.field(whole, charge, 0.0, 1.0)
        found.append(field[:, COUNT:])
        strength.append((field**2).sum(axis=0).mean())
        if pair_sum.potential is not None:
            levels.append(pair_sum.potential(whole, charge, 0.0, 1.0)[COUNT:])
        apart = probes[:, :, None] - places[:, None, :]
        square = (apart**2).sum(axis=0)
        random_error.append((apart / square**1.5).var(axis=2).sum(axis=0) / COUNT)
    fields = np.array(found)
    expected = np.array([body.field(place) for place in probes.T]).T
    scatter = np.sqrt(fields.var(axis=0, ddof=1).sum(axis=0))
    wrong = np.linalg.norm(fields.mean(axis=0) - expected, axis=0)
    share = np.sqrt(charge.size / len(body.probes))
    least = 0.01 * np.sqrt(np.mean(strength))
    size = np.maximum(np.linalg.norm(expected, axis=0), least)
    own = pair_sum.relative_error * share * size
    assert (wrong <= 4.0 * scatter / np.sqrt(SETS) + own + 1e-10).all()
    found_scatter, at_random = np.sqrt(np.mean(scatter**2)), np.sqrt(np.mean(random_error))
    assert found_scatter > at_random / COUNT
    assert found_scatter < at_random * COUNT**-0.25 + np.sqrt(np.mean(own**2))
    if levels:
        expected = np.array([body.potential(place) for place in probes.T])
        error = np.std(levels, axis=0, ddof=1) / np.sqrt(SETS)
        wrong = np.abs(np.mean(levels, axis=0) - expected)
        assert (wrong <= 4.0 * error + 3.0 * pair_sum.relative_error * expected + 1e-10).all()


@EACH_BODY
def test_the_closed_forms_fit_each_other(body: Body) -> None:
    """Field = minus gradient of potential, by central differences; far away, a point's."""
    for probe in body.probes:
        place, h = np.array(probe), 1e-4
        slope = [
            (body.potential(place + step) - body.potential(place - step)) / (2.0 * h)
            for step in h * np.eye(3)
        ]
        assert -np.array(slope) == pytest.approx(body.field(place), abs=2e-7)
    far = np.array([300.0, -400.0, 1200.0])
    assert 1.0 / 1300.0 == pytest.approx(body.potential(far), rel=1e-5, abs=0.0)
    assert far / 1300.0**3 == pytest.approx(body.field(far), rel=1e-5, abs=0.0)
