"""One charge in fields with known paths: gyration, cycloid, constant pull, quadro-logarithmic well.

Speeds close to that of light among them: recorded velocities are proper velocities, gamma v.
"""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.constants import SPEED_OF_LIGHT
from tests.running import answers, carried_out, points, quantity, species, track


def test_a_fast_electron_is_back_after_a_thousand_turns(tmp_path: Path) -> None:
    """gamma = 10 in 0.1 T: r = 0.16959651 m, T = 3.5723867577 ns.

    J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 12.2. A rotation of which each
    step is exact is left with rounding: 1e-9 rad after 1e5 steps. One by tan(theta/2) that is not
    corrected would lag by 2.07 rad (C. K. Birdsall, A. B. Langdon (1985), sec. 15, from memory).
    """
    period, radius = 3.5723867577410623e-09, 0.1695965067650099
    found = track(
        carried_out(
            tmp_path,
            1000.0 * period,
            cloud=[
                {
                    **points("one", "electron", [0.0, 0.0, 0.0]),
                    "motion": {"kinetic_energy": "4598990.556225779 eV", "along": [1, 0, 0]},
                }
            ],
            field=[{"name": "coil", "kind": "uniform-magnetic", "strength": "0.1 T"}],
            stepping={"step": f"{period / 100!r} s"},
            record={"every": f"{period * 249.75!r} s"},
        )
    )
    proper = SPEED_OF_LIGHT * math.sqrt(99.0)
    assert proper == pytest.approx(np.linalg.norm(found.velocity[:, 0], axis=1), rel=1e-12, abs=0.0)
    # a quarter turn before a whole number of turns, then further ones back
    assert [radius, -radius, 0.0] != pytest.approx(found.position[1, 0], abs=1e-3 * radius)
    assert [-radius, radius, 0.0] == pytest.approx(found.position[1, 0], abs=1e-9 * radius)
    assert [0.0, 2.0 * radius, 0.0] == pytest.approx(found.position[2, 0], abs=1e-9 * radius)
    assert [0.0, 0.0, 0.0] == pytest.approx(found.position[-1, 0], abs=1e-9 * radius)
    assert [proper, 0.0, 0.0] == pytest.approx(found.velocity[-1, 0], abs=1e-9 * proper)


@pytest.mark.parametrize(
    ("time", "distance", "gamma"),
    [
        (1e-10, 0.00814497352564516, 1.1593931555949202),
        (1e-9, 0.2530163937904688, 5.9514073061784885),
        (1e-8, 2.9472601544652792, 58.67644239729833),
    ],
)
def test_an_electron_pulled_steadily_moves_on_a_hyperbola(
    tmp_path: Path, time: float, distance: float, gamma: float
) -> None:
    """x = (m c^2 / q E) (sqrt(1 + (q E t / m c)^2) - 1) in 10 MV/m.

    L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 20. The kick by a constant
    force is exact, the way is summed to order 6 from 1000 steps.
    """
    found = track(
        carried_out(
            tmp_path,
            time,
            cloud=[points("one", "electron", [0.0, 0.0, 0.0])],
            field=[
                {
                    "name": "gap",
                    "kind": "uniform-electric",
                    "strength": "10 MV/m",
                    "along": [-1, 0, 0],
                }
            ],
            stepping={"scheme": "composed-6", "step": f"{time / 1000!r} s"},
        )
    )
    proper = SPEED_OF_LIGHT * math.sqrt(gamma**2 - 1.0)
    assert [distance, 0.0, 0.0] == pytest.approx(found.position[-1, 0], rel=1e-10, abs=0.0)
    assert [proper, 0.0, 0.0] == pytest.approx(found.velocity[-1, 0], rel=1e-12, abs=0.0)


def test_a_proton_from_rest_in_crossed_fields_goes_on_a_cycloid(tmp_path: Path) -> None:
    """0.02 T and 500 V/m after 3.3 turns: x 0.25816630 m, y 0.01708216 m.

    Landau & Lifshitz, The Classical Theory of Fields, sec. 22: x = (E/B) (t - sin(w t)/w),
    y = (E/(B w)) (1 - cos(w t)), for v << c. At E/B = 25 km/s the run's heavier proton is late by
    up to 1.4e-8 of 20.7 rad, 4e-9 m on the circle of 13 mm.
    """
    found = track(
        carried_out(
            tmp_path,
            1.0823088367941155e-05,
            cloud=[points("one", "proton", [0.0, 0.0, 0.0])],
            field=[
                {"name": "coil", "kind": "uniform-magnetic", "strength": "0.02 T"},
                {
                    "name": "plates",
                    "kind": "uniform-electric",
                    "strength": "500 V/m",
                    "along": [0, 1, 0],
                },
            ],
            stepping={"scheme": "composed-6", "step": "20 ns"},
        )
    )
    expected = [0.25816629622383547, 0.01708215623490911, 0.0]
    assert expected == pytest.approx(found.position[-1, 0], abs=4e-9)


WELL = {
    "name": "well",
    "kind": "quadro-logarithmic",
    "curvature": "3.0e7 V/m^2",
    "characteristic_radius": "20 mm",
}
HEAVY = species(8.6e-25)
AXIAL = 376258.8556027039
"""Hz, sqrt(k q / m) / (2 pi). K. H. Kingdon, Phys. Rev. 21 (1923) 408; R. D. Knight, Appl. Phys.
Lett. 38 (1981) 221 (from memory)."""
TANGENTIAL = 29857.053223204326
"""m/s, of the circular orbit at 9 mm."""


def swinging(near: dict[str, tuple[str, str, float]]) -> list[dict[str, Any]]:
    """Frequency questions by name: cloud, axis, frequency in Hz to look near."""
    return [
        {
            "name": name,
            "ask": "frequency",
            "of": cloud,
            "axis": axis,
            "near": quantity(frequency, "Hz"),
            "every": "0.2 us",
        }
        for name, (cloud, axis, frequency) in near.items()
    ]


def test_the_axial_frequency_of_a_quadro_logarithmic_well_is_the_same_for_all(
    tmp_path: Path,
) -> None:
    """376258.8556 Hz for axial swings of 0.1 to 8 mm, on round orbits and on others, to 1e-7."""
    starts = {
        "small": ([9e-3, 0.0, 0.1e-3], [0.0, TANGENTIAL, 0.0]),
        "large": ([9e-3, 0.0, 8e-3], [0.0, TANGENTIAL, 0.0]),
        "long": ([9e-3, 0.0, 5e-3], [0.0, 0.8 * TANGENTIAL, 0.0]),
        "wide": ([11e-3, 0.0, 5e-3], [0.0, 0.7 * TANGENTIAL, 300.0]),
    }
    found = carried_out(
        tmp_path,
        0.3e-3,
        species={"ion": HEAVY},
        cloud=[points(name, "ion", *start) for name, start in starts.items()],
        field=[WELL],
        coulomb={"method": "off"},
        stepping={"scheme": "composed-6", "step": "25 ns"},
        record={"every": "1 us"},
        question=swinging({name: (name, "z", AXIAL) for name in starts}),
    )
    assert [AXIAL] * 4 == pytest.approx(answers(found), rel=1e-7, abs=0.0)
    radius = np.linalg.norm(track(found).position[:, :, :2], axis=2)
    assert np.ptp(radius, axis=0)[:2] == pytest.approx(0.0, abs=1e-8)
    assert np.ptp(radius, axis=0)[2:].min() > 1e-3


def test_round_and_radial_frequencies_of_a_quadro_logarithmic_well(tmp_path: Path) -> None:
    """At 9 mm f_phi = 527988.62296 Hz and, for small radial swings, f_r = 644959.87901 Hz.

    f_phi = f_z sqrt((Rm^2/R^2 - 1) / 2), f_r = f_z sqrt(Rm^2/R^2 - 2); sources as above. Along x
    a radial swing shows as lines at f_phi + f_r and f_phi - f_r; a swing of 3e-4 of the radius
    shifts them by some 1e-7.
    """
    around, radial = 527988.622958975, 644959.8790070378
    found = carried_out(
        tmp_path,
        0.3e-3,
        species={"ion": HEAVY},
        cloud=[points("one", "ion", [9e-3, 0.0, 5e-3], [3.0, TANGENTIAL, 0.0])],
        field=[WELL],
        stepping={"scheme": "composed-6", "step": "20 ns"},
        question=swinging({"around": ("one", "x", around), "sum": ("one", "x", around + radial)}),
    )
    turning, both = answers(found)
    assert around == pytest.approx(turning, rel=1e-6, abs=0.0)
    assert radial == pytest.approx(both - turning, rel=1e-5, abs=0.0)
