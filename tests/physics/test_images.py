"""Images against what is published of them: planes, spheres, plates, tubes, a cube, a fall."""

from __future__ import annotations

import math

import numpy as np
import pytest
from mpmath import besselk, mp, mpf, nsum, sin
from scipy.integrate import quad
from scipy.special import digamma, ive, kve, polygamma

from driftwell.constants import ATOMIC_MASS, COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.geometry.outline import Outline, arc
from driftwell.geometry.solid import Extruded, Revolved
from driftwell.images.electrodes import electrode_images
from driftwell.images.gap_sum import GapImages
from driftwell.images.image_sum import Images
from driftwell.images.mirror_sum import plane_images, sphere_images
from driftwell.images.panel_sum import PanelImages
from driftwell.images.tube_sum import TubeImages
from tests.images.images_at import Floats, box, cloud, images_at, put, sheet
from tests.moving import ions, loop, to_end

UP = np.array([0.0, 0.0, 1.0])
MADELUNG = 1.7475645946
"""NaCl lattice; OEIS A085469."""


def at(*places: tuple[float, float, float]) -> Floats:
    """Places as (3, n)."""
    return np.array(places, dtype=np.float64).T


@pytest.mark.parametrize("distance", [1e-6, 2e-3])
def test_a_plane_pulls_with_the_force_of_the_mirrored_charge(distance: float) -> None:
    """F = K q^2 / (4 d^2) (J. D. Jackson, Classical Electrodynamics, 3rd ed., section 2.1)."""
    normal = np.array([2.0, -1.0, 2.0]) / 3.0
    images = plane_images(np.array([1e-3, 2e-3, 3e-3]), normal, 0.0)
    place = (np.array([1e-3, 2e-3, 3e-3]) + distance * normal)[:, None]
    q, k = ELEMENTARY_CHARGE, COULOMB_CONSTANT
    found = images_at(images, place, q, constant=k)[:, 0]
    assert found[:3] == pytest.approx(-k * q / (4.0 * distance**2) * normal, rel=1e-12)
    assert found[3] == pytest.approx(-k * q / (2.0 * distance), rel=1e-12)


@pytest.mark.parametrize(("s", "force"), [(0.5, 0.8888888888888888), (0.9, 24.93074792243769)])
def test_a_sphere_pulls_a_charge_inside_outwards(s: float, force: float) -> None:
    """F = K q^2 a s / (a^2 - s^2)^2, a = 10 mm, in units of K q^2 / a^2 (Jackson, section 2.2)."""
    a = 0.01
    images = sphere_images(np.array([0.0, a, 0.0]), a, 0.0)
    place = np.array([[0.0], [a + 0.6 * s * a], [0.8 * s * a]])
    found = images_at(images, place, 1.0)[:, 0] * a * a
    assert [0.0, 0.6 * force, 0.8 * force] == pytest.approx(list(found[:3]), rel=1e-11, abs=1e-11)


def test_charges_in_a_sphere_feel_each_other_s_kelvin_images() -> None:
    """-a/s q at a^2/s, each written out (Jackson, section 2.2)."""
    a = 1.3
    place, charge = cloud(9, 0.7)
    found = images_at(sphere_images(np.zeros(3), a, 0.0), place, charge)
    s = np.linalg.norm(place, axis=0)
    mirrored, image = place * (a / s) ** 2, -charge * a / s
    apart = place[:, :, None] - mirrored[:, None, :]
    r = np.linalg.norm(apart, axis=0)
    assert (image / r).sum(axis=1) == pytest.approx(found[3], rel=1e-12)
    for axis in range(3):
        assert (image * apart[axis] / r**3).sum(axis=1) == pytest.approx(found[axis], rel=1e-11)


def tube_potential(rho: float) -> float:
    """-(2/pi) sum (2 - delta) int K_m/I_m I_m(x rho)^2 dx, over K q / a (Jackson, problem 3.23)."""
    total = 0.0
    for m in range(1 if rho == 0.0 else 100):

        def integrand(x: float, m: int = m) -> float:
            inner = ive(m, x)
            if inner < 1e-250:
                return rho ** (2 * m) / (2 * m)  # the limit for small x
            return float(kve(m, x) / inner * ive(m, x * rho) ** 2 * math.exp(-2 * x * (1 - rho)))

        top = 15.0 / (1.0 - rho) + m
        part = quad(integrand, 0.0, top, epsabs=1e-11, epsrel=1e-10, limit=200)[0]
        total += part if m == 0 else 2.0 * part
        if m and part < 1e-10 * total:
            break
    return -2.0 / math.pi * total


@pytest.mark.parametrize("rho", [0.0, 0.3, 0.6])
def test_an_endless_tube_has_the_potential_of_its_green_function(rho: float) -> None:
    """Force as the difference of half the potential of the charge by itself: F = -q d(phi/2)/dx."""
    images = TubeImages(0, np.array([0.2, 0.1, -0.1]), 1.0, 0.95)
    place = at((5.0, 0.1 + 0.6 * rho, -0.1 - 0.8 * rho))
    found = images_at(images, place, 1.0)[:, 0]
    assert tube_potential(rho) == pytest.approx(found[3], rel=3e-8)
    if rho:
        h = 1e-2
        ends = [tube_potential(rho + k * h) for k in (-2, -1, 1, 2)]
        push = -0.5 * (ends[0] - 8 * ends[1] + 8 * ends[2] - ends[3]) / (12 * h)
        assert [0.0, 0.6 * push, -0.8 * push] == pytest.approx(list(found[:3]), rel=1e-5, abs=1e-9)


@pytest.mark.parametrize("apart", [2.5, 9.0, 40.0])
def test_far_along_a_tube_charges_no_longer_feel_each_other(apart: float) -> None:
    """What a charge feels of another and its images falls as exp(-2.405 z/a) (Jackson, 3.11)."""
    images = TubeImages(2, np.zeros(3), 1.0, 0.9)
    place = at((0.3, 0.0, 0.0), (0.2, 0.1, apart))
    both = images_at(images, place, [1.0, 1.0])[3]
    alone = images_at(images, place[:, 1:], 1.0)[3]
    direct = 1.0 / np.linalg.norm(place[:, 0] - place[:, 1])
    left = both[1] - alone[0] + direct
    assert 0.0 < left + 2e-9
    assert abs(left) <= 4.0 * math.exp(-2.404825557695773 * apart) + 2e-9


@pytest.mark.parametrize("x", [0.5, 0.2, 1e-3])
def test_a_charge_between_plates_has_the_potential_of_the_psi_function(x: float) -> None:
    """phi = K q / (2 D) [psi(x/D) + psi(1 - x/D) + 2 gamma], and minus half its rate as the field.

    The series of images, summed (reference case I6; A. and S. 6.3.16; digamma and polygamma of
    scipy).
    """
    gap, normal = 0.01, np.array([2.0, -1.0, 2.0]) / 3.0
    first = np.array([1e-3, 2e-3, 3e-3])
    place = (first + x * gap * normal)[:, None]
    found = images_at(GapImages(first, normal, gap, 0.0), place, 1.0)[:, 0]
    expected = 0.5 / gap * (digamma(x) + digamma(1.0 - x) + 2.0 * np.euler_gamma)
    assert expected == pytest.approx(found[3], rel=1e-12)
    push = -0.25 / gap**2 * (polygamma(1, x) - polygamma(1, 1.0 - x))
    assert push * normal == pytest.approx(found[:3], rel=1e-11, abs=1e-9)


@pytest.mark.parametrize("rho", [0.0, 0.4, 1.2499, 1.2501, 2.0, 7.0])
def test_charges_between_plates_have_the_potential_of_their_green_function(rho: float) -> None:
    """The images one by one where near, else 4 K q/d sum K_0(k pi rho/d) sin sin without the
    charge itself (Jackson, 3rd ed., problem 3.17), both by mpmath; 1e-11."""
    random = np.random.default_rng(round(100 * rho))
    images = GapImages(np.zeros(3), UP, 1.0, 0.0)
    for _ in range(3):
        one, other = random.uniform(0.02, 0.98, 2)
        found = images_at(images, at((0.0, 0.0, one), (0.6 * rho, 0.8 * rho, other)), [0.0, 1.0])
        with mp.workdps(25):
            a, b, r2 = mpf(one) - other, mpf(one) + other, mpf(rho) ** 2

            def ring(m: mpf, a: mpf = a, b: mpf = b, r2: mpf = r2) -> mpf:
                places = ((1, a + 2 * m), (1, a - 2 * m), (-1, b - 2 * m), (-1, b + 2 * m - 2))
                return sum(sign / mp.sqrt(r2 + z * z) for sign, z in places)

            def wave(k: mpf, one: float = one, other: float = other) -> mpf:
                return (
                    4 * besselk(0, mp.pi * k * rho) * sin(mp.pi * k * one) * sin(mp.pi * k * other)
                )

            if rho < 0.3:
                expected = nsum(ring, [1, mp.inf])
            else:
                waves = sum(wave(k) for k in range(1, int(22.0 / rho) + 3))
                expected = waves - 1 / mp.sqrt(r2 + a * a)
        assert float(expected) == pytest.approx(found[3, 0], rel=1e-11)


BLUR = 0.05
BLURRED: list[tuple[str, Images, Floats]] = [
    ("plane", plane_images(np.zeros(3), UP, BLUR), at((0.1, 0.2, 0.0), (0.13, 0.2, 0.0))),
    ("sphere", sphere_images(np.zeros(3), 1.0, BLUR), at((0.6, 0.0, 0.8), (0.0, 1.0, 0.0))),
    (
        "gap",
        GapImages(np.zeros(3), UP, 1.0, BLUR),
        at((0.1, 0.2, 0.0), (0.1, 0.3, 1.0), (2.0, 0.0, 1.0)),
    ),
]


@pytest.mark.parametrize(
    ("images", "places"), [each[1:] for each in BLURRED], ids=["plane", "sphere", "gap"]
)
def test_softened_charges_and_their_images_leave_no_potential_on_the_conductor(
    images: Images, places: Floats
) -> None:
    """sum q / (r^2 + e^2)^(1/2) + images = 0 at places on it, where charges of 0 stand.

    Boundary condition of grounded conductors (Jackson, section 1.9).
    """
    place, charge = cloud(20, 0.4)
    if images is BLURRED[0][1] or images is BLURRED[2][1]:
        place[2] += 0.45
    place[2, 0] = 0.03 if images is not BLURRED[1][1] else -0.97
    both, q = np.hstack([places, place]), np.concatenate([np.zeros(places.shape[1]), charge])
    found = images_at(images, both, q)[3, : places.shape[1]]
    r2 = ((places[:, :, None] - place[:, None, :]) ** 2).sum(axis=0)
    own = (charge / np.sqrt(r2 + BLUR**2)).sum(axis=1)
    assert -own == pytest.approx(found, rel=1e-10)
    assert np.abs(own).min() > 0.05


def test_a_heavy_macro_charge_before_a_cathode_is_pulled_no_more_than_its_blur_lets() -> None:
    """K q d / (4 (d^2 + e^2/4)^(3/2)), largest at d = e/8^(1/2): K q 2 / 27^(1/2) / e^2 (a blurred
    charge and its mirrored one, Jackson, section 2.1; maximum by hand)."""
    d = np.geomspace(1e-4, 1.0, 400)
    pulls = []
    for x in d:
        place = at((0.0, 0.0, x))
        one = images_at(plane_images(np.zeros(3), UP, BLUR), place, 1.0)[2, 0]
        two = images_at(GapImages(np.zeros(3), UP, 100.0, BLUR), place, 1.0)[2, 0]
        assert -x / (4.0 * (x * x + 0.25 * BLUR**2) ** 1.5) == pytest.approx(one, rel=1e-12)
        assert one == pytest.approx(two, rel=1e-3, abs=1e-3)
        pulls.append(-one)
    assert 2.0 / math.sqrt(27.0) / BLUR**2 == pytest.approx(max(pulls), rel=1e-3)
    assert BLUR / math.sqrt(8.0) == pytest.approx(d[np.argmax(pulls)], rel=0.03)


@pytest.fixture(scope="module")
def plates() -> PanelImages:
    """Two square plates 1 apart, of 12, with finer triangles in the middle."""
    flat = sheet(12.0, 18, 4.0)
    return PanelImages(np.concatenate([put(flat, 2, 0.0), put(flat, 2, 1.0)]))


@pytest.mark.parametrize("x", [0.5, 0.2])
def test_two_plates_as_triangles_have_the_potential_of_the_psi_function(
    x: float, plates: PanelImages
) -> None:
    """phi = K q / (2 D) [psi(x/D) + psi(1 - x/D) + 2 gamma]; plates of 12 D, 1 % and less.

    The series of images, summed (reference case I6; digamma of scipy).
    """
    found = images_at(plates, at((0.013, -0.021, x)), 1.0)[3, 0]
    expected = 0.5 * (digamma(x) + digamma(1.0 - x) + 2.0 * np.euler_gamma)
    assert expected == pytest.approx(found, rel=2e-3)
    assert abs(found / expected - 1.0) > 1e-7


def test_the_middle_of_a_grounded_cube_converges_to_madelung_s_constant() -> None:
    """-1.7475645946 K q / a: the images of its charge form the NaCl lattice."""
    errors = []
    for steps in (4, 8):
        found = images_at(PanelImages(box(steps)), at((0.0, 0.0, 0.0)), 1.0)[3, 0]
        errors.append(abs(found / -MADELUNG - 1.0))
    assert errors[0] < 0.01
    assert errors[1] < 0.3 * errors[0]
    assert errors[1] > 1e-6


def test_a_sphere_of_triangles_pulls_as_kelvin_s_images_and_better_with_more() -> None:
    """1 % where triangles are smaller than a third of the distance to the wall."""
    half = np.array([arc((0.0, -1.0), (0.0, 1.0), (0.0, 0.0), math.pi)])
    body = Revolved(Outline(half, np.array([0, 1]), True))
    place, charge = cloud(5, 0.3)
    exact = images_at(sphere_images(np.zeros(3), 1.0, 0.0), place, charge)
    size = np.linalg.norm(exact[:3])
    errors = []
    for panels in (300, 1200):
        images = electrode_images([body], panels)
        assert abs(len(images.corners) / panels - 1.0) < 0.5
        found = images_at(images, place, charge)
        errors.append(float(np.linalg.norm((found - exact)[:3]) / size))
    assert errors[0] < 0.01
    assert errors[1] < 0.6 * errors[0]


def test_a_tube_of_triangles_of_a_length_pulls_as_the_endless_one() -> None:
    """Eight radii long, charges in the middle, to 1 %."""
    circle = np.array(
        [
            arc((1.0, 0.0), (-1.0, 0.0), (0.0, 0.0), math.pi),
            arc((-1.0, 0.0), (1.0, 0.0), (0.0, 0.0), math.pi),
        ]
    )
    body = Extruded(Outline(circle, np.array([0, 2]), True), math.inf)
    place, charge = cloud(5, 0.3)
    exact = images_at(TubeImages(2, np.zeros(3), 1.0, 0.9), place, charge)
    found = images_at(electrode_images([body], 1200, length=8.0), place, charge)
    error = np.linalg.norm((found - exact)[:3]) / np.linalg.norm(exact[:3])
    assert 1e-5 < error < 0.01


def test_a_plate_is_pulled_as_the_charges_before_it_are() -> None:
    """The force on charges before a plane is minus that on its surface charge.

    Maxwell's stress, sigma^2 / (2 eps0) over the plane (Jackson, section 1.11 and problem 1.9),
    with sigma of the mirrored charges; integrated in polar coordinates.
    """
    place = at((0.1, 0.2, 0.5), (-0.4, 0.1, 0.7), (0.3, -0.5, 0.4))
    charge = np.array([1.0, -0.6, 0.8])
    found = images_at(plane_images(np.zeros(3), UP, 0.0), place, charge)
    t, w = np.polynomial.legendre.leggauss(80)
    t, w = 0.5 * (t + 1.0), 0.5 * w
    r, dr = t / (1.0 - t), w / (1.0 - t) ** 2
    phi = 2.0 * math.pi * np.arange(64) / 64
    x, y = np.multiply.outer(r, np.cos(phi)), np.multiply.outer(r, np.sin(phi))
    field = np.zeros_like(x)
    for (px, py, pz), q in zip(place.T, charge, strict=True):
        field -= 2.0 * q * pz / ((x - px) ** 2 + (y - py) ** 2 + pz**2) ** 1.5
    pull = float(np.sum(field**2 / (8.0 * math.pi) * (r * dr)[:, None]) * 2.0 * math.pi / 64)
    assert -pull == pytest.approx(float(np.sum(charge * found[2])), rel=1e-6)
    for axis in (0, 1):
        assert 0.0 == pytest.approx(float(np.sum(charge * found[axis])), abs=1e-13)


@pytest.mark.parametrize(("scheme", "steps"), [("kick-drift-kick", 20_000), ("composed-4", 2000)])
def test_an_ion_falls_onto_a_plane_by_its_own_image(scheme: str, steps: int) -> None:
    """m x'' = -K q^2 / (4 x^2) from rest at 1 um: at half the height at the time of the radial
    Kepler motion, with its speed; 1e-6."""
    half_time, half_speed = 3.082985574478484e-08, 41.693291530074234
    start = ions([[0.0, 0.0, 1e-6]], mass=6.6359e-26 / ATOMIC_MASS)
    moving = loop(
        start,
        half_time,
        half_time / steps,
        images=plane_images(np.zeros(3), UP, 0.0),
        scheme=scheme,
    )
    to_end(moving)
    assert 0.5e-6 == pytest.approx(moving.charges.position[2, 0], rel=1e-6)
    assert -half_speed == pytest.approx(moving.charges.velocity[2, 0], rel=1e-6)
    assert 0.5e-6 != moving.charges.position[2, 0]


def test_an_ion_between_plates_falls_to_the_nearer_and_its_energy_is_its_image_s() -> None:
    """m v^2/2 = K q^2/(4 D) [f(x0) - f(x)], f = psi(x/D) + psi(1 - x/D) (reference case I6)."""
    mass, gap, high = 6.6359e-26, 3e-6, 1e-6
    start = ions([[0.0, 0.0, high]], mass=mass / ATOMIC_MASS)
    images = GapImages(np.zeros(3), UP, gap, 0.0)
    moving = loop(start, 3e-8, 3e-12, images=images)
    to_end(moving)
    x, v = float(moving.charges.position[2, 0]), float(moving.charges.velocity[2, 0])
    levels = [digamma(z / gap) + digamma(1.0 - z / gap) for z in (high, x)]
    fallen = COULOMB_CONSTANT * ELEMENTARY_CHARGE**2 / (4.0 * gap) * (levels[0] - levels[1])
    assert fallen == pytest.approx(0.5 * mass * v * v, rel=1e-6)
    assert x < 0.7 * high
    assert v < 0.0
