"""Two charges against the Kepler problem: approach, scattering, closed orbit, release from rest.

All runs take the sixth-order scheme with steps so short that its error lies below 1e-9 of what is
compared; what is left of the tolerances is the rounding of some ten thousand steps.
"""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from tests.running import Floats, Track, carried_out, points, species, track

ION = 6.6359e-26  # kg
STRENGTH = COULOMB_CONSTANT * ELEMENTARY_CHARGE**2  # J m


def two_ions(
    folder: Path, mass: float, relative: Floats, speed: Floats, duration: float, **sections: object
) -> Track:
    """Two equal ions about a centre at rest, from the relative position and velocity (3,)."""
    steps = sections.pop("steps", 20_000)
    place, motion = np.array([[-0.5], [0.5]]) * relative, np.array([[-0.5], [0.5]]) * speed
    return track(
        carried_out(
            folder,
            duration,
            species={"ion": species(mass)},
            cloud=[points("pair", "ion", place, motion)],
            stepping={"scheme": "composed-6", "step": f"{duration / steps!r} s"},
            **sections,
        )
    )


def test_two_ions_flying_at_each_other_turn_round_at_the_closest_approach(tmp_path: Path) -> None:
    """r_min = 0.95650189 um after 0.84928390 us, and back again in the same time.

    Goldstein, Poole & Safko, Classical Mechanics, 3rd ed. (2002), ch. 3, radial Kepler problem
    with repulsion: the closed form worked out with CODATA 2022. Apart from the recorded distance
    at the turning point, its time is checked by the way back: an error of dt in it shows as
    2 dt times the speed of 120 m/s in the last distance, so 1e-9 of r0 is 5e-10 of the time.
    """
    closest, when = 9.565018855783628e-07, 8.492838951469167e-07
    start, speed = np.array([1e-4, 0.0, 0.0]), np.array([-120.0, 0.0, 0.0])
    found = two_ions(tmp_path, ION, start, speed, 2.0 * when, record={"every": f"{when!r} s"})
    apart = found.position[:, 1, 0] - found.position[:, 0, 0]
    assert closest == pytest.approx(apart[1], rel=1e-9, abs=0.0)
    assert 1e-4 == pytest.approx(apart[2], rel=1e-9, abs=0.0)
    assert 60.0 == pytest.approx(found.velocity[2, 1, 0], rel=1e-9, abs=0.0)


@pytest.mark.parametrize("ratio", [0.2, 0.5, 1.0, 2.0, 5.0])
def test_ions_scatter_by_rutherfords_angle(tmp_path: Path, ratio: float) -> None:
    """tan(theta / 2) = b90 / b for b = 0.2 to 5 b90, b90 = 0.17383306 um.

    E. Rutherford, Phil. Mag. 21 (1911) 669; Goldstein et al. (2002) eq. 3.101. The way in begins
    200 b90 away; from both its ends the asymptote follows from energy, angular momentum and
    Laplace's vector of that state alone, so a force that is not inverse square turns one against
    the other. 1e-7 deg is what 1e-9 in position and velocity can do to the angle.
    """
    reduced, fast = 0.5 * ION, 200.0
    b90 = STRENGTH / (reduced * fast**2)
    assert 1.7383305586117597e-07 == pytest.approx(b90, rel=1e-12, abs=0.0)
    far = 200.0 * b90
    offset = ratio * b90
    # the speed at this distance by the energy, the offset there by the angular momentum
    slower = math.sqrt(fast**2 - 2.0 * STRENGTH / (reduced * math.hypot(far, offset)))
    start = np.array([-math.sqrt(far**2 - offset**2), offset * fast / slower, 0.0])
    slower = math.sqrt(fast**2 - 2.0 * STRENGTH / (reduced * float(np.linalg.norm(start))))
    start[1] = offset * fast / slower
    found = two_ions(tmp_path, ION, start, np.array([slower, 0.0, 0.0]), 2.0 * far / fast)
    relative = found.position[:, 1] - found.position[:, 0]
    speed = found.velocity[:, 1] - found.velocity[:, 0]
    way_in = _asymptote(relative[0], speed[0], reduced, -1.0)
    way_out = _asymptote(relative[-1], speed[-1], reduced, 1.0)
    turned = math.degrees(math.acos(float(way_in @ way_out)))
    impact = float(np.linalg.norm(np.cross(relative[0], speed[0]))) / fast
    expected = math.degrees(2.0 * math.atan(b90 / impact))
    assert ratio == pytest.approx(impact / b90, rel=1e-4, abs=0.0)
    assert expected == pytest.approx(turned, abs=1e-7)


def _asymptote(place: Floats, speed: Floats, reduced: float, sign: float) -> Floats:
    """Direction of flight long before (-1) or after (+1), from one state of a repelled charge."""
    spin = np.cross(place, speed)
    laplace = np.cross(speed, spin) * reduced / STRENGTH + place / np.linalg.norm(place)
    eccentricity = float(np.linalg.norm(laplace))
    axis = laplace / eccentricity
    across = np.cross(spin / np.linalg.norm(spin), axis)
    # the hyperbola's branch about its outer focus: r (e cos f - 1) = p, open where cos f = 1/e
    cosine = 1.0 / eccentricity
    outward = axis * cosine + sign * across * math.sqrt(1.0 - cosine**2)
    return sign * outward


def test_a_scattered_pair_ends_where_the_hyperbola_says(tmp_path: Path) -> None:
    """b = b90, from 200 b90 before to 200 b90 behind the turning point.

    Closed form by the hyperbolic Kepler equation, Goldstein et al. (2002) sec. 3.8.
    """
    start = np.array([-3.4766174400248446e-05, 1.742698278479166e-07, 0.0])
    speed = np.array([198.99748740546164, 0.0025125945383136766, 0.0])
    found = two_ions(tmp_path, ION, start, speed, 3.5572299677118287e-07)
    relative = found.position[-1, 1] - found.position[-1, 0]
    motion = found.velocity[-1, 1] - found.velocity[-1, 0]
    size = 3.4766e-05
    expected = [-1.7426982784791047e-07, 3.4766174400248446e-05, 0.0]
    assert expected == pytest.approx(relative, abs=1e-9 * size)
    assert [0.0025125945383435095, 198.99748740546164, 0.0] == pytest.approx(motion, abs=2e-7)


def test_an_opposite_pair_goes_round_on_a_closed_ellipse(tmp_path: Path) -> None:
    """Eccentricity 0.5, semi-major axis 1 um: period 16.679051 ns, no precession.

    Goldstein et al. (2002), sec. 3.7 and 3.8; L. D. Landau, E. M. Lifshitz, Mechanics, sec. 15;
    the state at a quarter of the period by Kepler's equation. Ten orbits of 4000 steps.
    """
    period, light, heavy = 1.6679050908691893e-08, 1.6726e-27, 5.8e-26
    start, speed = np.array([1.5e-6, 0.0, 0.0]), np.array([0.0, 217.49431357500072, 0.0])
    share = np.array([[-heavy], [light]]) / (light + heavy)
    found = track(
        carried_out(
            tmp_path,
            10.0 * period,
            species={"light": species(light), "heavy": species(heavy, "-1 e")},
            cloud=[
                points("light", "light", share[0] * start, share[0] * speed),
                points("heavy", "heavy", share[1] * start, share[1] * speed),
            ],
            stepping={"scheme": "composed-6", "step": f"{period / 4000!r} s"},
            record={"every": f"{period / 4!r} s"},
        )
    )
    relative = found.position[:, 1] - found.position[:, 0]
    motion = found.velocity[:, 1] - found.velocity[:, 0]
    quarter = [9.351308590367094e-07, 7.797408874975592e-07, 0.0]
    assert quarter == pytest.approx(relative[1], abs=1e-15)
    assert 5e-7 == pytest.approx(float(np.linalg.norm(relative[2])), rel=1e-9, abs=0.0)
    # after whole periods back at the start: an error of the period of 1e-9 of it is 2.3e-14 m
    assert list(start) == pytest.approx(relative[40], abs=2.3e-14)
    assert list(speed) == pytest.approx(motion[40], abs=1e-5)
    strength = STRENGTH * (1.0 / light + 1.0 / heavy)
    laplace = np.cross(motion, np.cross(relative, motion)) / strength
    laplace -= relative / np.linalg.norm(relative, axis=1)[:, None]
    assert 0.5 == pytest.approx(np.linalg.norm(laplace, axis=1), abs=1e-9)
    precession = np.arctan2(laplace[:, 1], -laplace[:, 0])
    assert 0.0 == pytest.approx(precession, abs=1e-9)


def test_ions_released_at_rest_double_their_distance_in_time(tmp_path: Path) -> None:
    """d = 10 um, 2.2e-25 kg: 1.12084106 us, then 7.24110356 m/s each.

    Energy integral of the repelled pair: t = 2.29558715 sqrt(m d^3 / (4 k q^2)) (elementary; as the
    radial Kepler problem in Goldstein et al. (2002), ch. 3).
    """
    found = two_ions(
        tmp_path,
        2.2e-25,
        np.array([0.0, 0.0, 1e-5]),
        np.zeros(3),
        1.1208410622285242e-06,
        steps=1000,
    )
    apart = found.position[-1, 1] - found.position[-1, 0]
    assert [0.0, 0.0, 2e-5] == pytest.approx(apart, abs=2e-14)
    assert 7.2411035553642 == pytest.approx(found.velocity[-1, 1, 2], rel=1e-9, abs=0.0)
