"""Fields that change in time: their work, their jumps, and what changing magnets induce."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from driftwell.ledger.ledger import LedgerRow
from tests.cases import field
from tests.moving import DIRECT, ION_MASS, ION_RATIO, OFF, Floats, accounts, ions, loop
from tests.running import quantity

US = 1e-6
PLACES = np.array([[0.3e-3, 0.1e-3, -0.2e-3], [-0.2e-3, 0.4e-3, 0.5e-3], [0.1e-3, 0.0, -0.4e-3]])
SPEEDS = np.array([[500.0, -300.0, 200.0], [-200.0, 100.0, 900.0], [50.0, 20.0, 30.0]])


def waves(unit: str, scale: float) -> dict[str, Any]:
    """Every kind of waveform, of this size."""
    low, high = quantity(-0.3 * scale, unit), quantity(scale, unit)
    return {
        "sine": {"amplitude": high, "frequency": "2.3 MHz", "phase": "30 deg"},
        "step": {"kind": "step", "before": low, "after": high, "at": "0.4 us"},
        "ramp": {"kind": "ramp", "before": low, "after": high, "start": "0.1 us", "end": "0.6 us"},
        "sharp pulses": {
            "kind": "pulses",
            "low": low,
            "high": high,
            "start": "0.15 us",
            "width": "0.1 us",
            "period": "0.25 us",
            "count": 3,
        },
        "soft pulses": {
            "kind": "pulses",
            "low": low,
            "high": high,
            "start": "0.05 us",
            "width": "0.2 us",
            "period": "0.4 us",
            "rise": "0.1 us",
        },
        "table": {
            "kind": "table",
            "times": ["0.2 us", "0.3 us", "0.8 us"],
            "values": [low, high, low],
        },
    }


def rows(
    fields: list, step: float, scheme: str = "kick-drift-kick", **keys: Any
) -> list[LedgerRow]:
    """The ledger of three ions moved for 1 us."""
    return accounts(
        loop(
            ions(PLACES, SPEEDS),
            US,
            step,
            fields=fields,
            scheme=scheme,
            records=np.linspace(0, US, 6),
            **keys,
        )
    )


def worst(found: list[LedgerRow]) -> float:
    """Largest energy residual of a ledger."""
    return max(abs(row.energy_residual) for row in found)


@pytest.mark.parametrize("name", waves("V", 1.0))
def test_the_work_of_every_waveform_is_accounted(name: str) -> None:
    """In a uniform field the ledger closes to rounding at jumps and to order h^2 in between.

    Extended phase space (J. M. Sanz-Serna, M. P. Calvo, Numerical Hamiltonian Problems (1994),
    sec. 12, from memory): fourfold with half the step. Without the work nothing would close.
    """
    plates = field("uniform-electric", strength=waves("V/m", 1e5)[name], along=[1, -2, 2])
    coarse, fine = rows([plates], 2e-8), rows([plates], 1e-8)
    moved = max(abs(row.work_drive) for row in fine) / fine[-1].kinetic
    assert moved > 1e-2
    if name in {"step", "sharp pulses"}:
        # between jumps the pull is steady, and kicks and drifts follow it exactly
        assert worst(coarse) <= 1e-11  # (v/c)^2: the drift's speed is not the mean of the kick's
    else:
        assert 4.0 == pytest.approx(worst(coarse) / worst(fine), rel=0.15, abs=0.0)
        assert worst(fine) < 2e-2 * moved
    for row in fine:
        assert row.momentum_residual <= 1e-13
        assert row.angular_residual <= 1e-13
        assert 0.0 == row.work_induced


def test_a_jump_does_work_on_charges_where_they_are() -> None:
    """W = sum Q (phi_after - phi_before), entered after the mark of the jump, not before."""
    strength = waves("V/m", 1e5)["step"]
    plates = field("uniform-electric", strength=strength, centre=["0", "0", "1 mm"])
    moving = loop(ions(PLACES, SPEEDS), US, 1e-8, fields=[plates], records=[0.4e-6, 0.5e-6])
    _, at, after, _ = accounts(moving)
    assert 0.0 == at.work_drive
    acceleration = -0.3e5 * ION_RATIO
    z = PLACES[:, 2] + SPEEDS[:, 2] * 0.4e-6 + 0.5 * acceleration * 0.4e-6**2
    charge = ION_RATIO * ION_MASS
    expected = float((-charge * 1.3e5 * (z - 1e-3)).sum())
    assert expected == pytest.approx(after.work_drive, rel=1e-9, abs=0.0)


@pytest.mark.parametrize("coulomb_every", [1, 3])
@pytest.mark.parametrize("name", waves("T", 1.0))
def test_the_work_of_changing_magnets_is_accounted(name: str, coulomb_every: int) -> None:
    """With nothing but a changing magnet the ledger closes to rounding, jumps and all.

    The work of the induced field is entered as what each kick adds, which is exact.
    """
    magnet = field(
        "uniform-magnetic",
        strength=waves("T", 0.2)[name],
        along=[1, 0, 2],
        centre=["0.2 mm", "0", "-0.1 mm"],
    )
    found = rows([magnet], 1e-8, coulomb=OFF, coulomb_every=coulomb_every)
    assert max(abs(row.work_induced) for row in found) > 1e-3 * found[-1].kinetic
    assert worst(found) <= 1e-13
    for row in found:
        assert row.momentum_residual <= 1e-13
        assert row.angular_residual <= 1e-13
        assert 0.0 == row.work_drive
    with_push = rows([magnet], 1e-8, coulomb=DIRECT, coulomb_every=coulomb_every)
    assert worst(with_push) <= 1e-6


def test_changing_multipoles_are_accounted_too() -> None:
    """A quadrupole magnet with a step and one with a sine: to rounding."""
    for name in ("step", "sine"):
        magnet = field("magnetic-multipole", order=2, radius="1 mm", strength=waves("T", 0.5)[name])
        found = rows([magnet], 1e-8)
        assert abs(found[-1].work_induced) > 1e-3 * found[-1].kinetic
        assert worst(found) <= 1e-13


def canonical(place: Floats, proper: Floats, b: float) -> Floats:
    """Canonical angular momentum over the mass about the field's axis, m^2/s (place (3, n))."""
    x, y, _ = place
    turn: Floats = x * proper[1] - y * proper[0] + 0.5 * ION_RATIO * b * (x * x + y * y)
    return turn


@pytest.mark.parametrize(
    ("name", "order"), [("step", 0), ("sharp pulses", 0), ("ramp", 0), ("sine", 2)]
)
def test_a_magnet_about_its_axis_keeps_the_canonical_angular_momentum(
    name: str, order: int
) -> None:
    """m (x u_y - y u_x) + Q B r^2 / 2 (L. D. Landau, E. M. Lifshitz, Theory of Fields, sec. 17).

    A jump is the limit of ever faster ramps: it kicks by -Q (A_after - A_before), and leaves it
    to rounding, as a ramp does, whose middle is its mean; else it is of the step's second order.
    """
    magnet = field("uniform-magnetic", strength=waves("T", 0.2)[name])
    start = {"step": -0.06, "sharp pulses": -0.06, "ramp": -0.06}.get(name)
    start = 0.2 * np.cos(np.pi / 6.0) if start is None else start
    stop = {"step": 0.2, "sharp pulses": -0.06, "ramp": 0.2}.get(name)
    stop = 0.2 * np.cos(np.pi / 6.0 + 2.0 * np.pi * 2.3) if stop is None else stop
    expected = canonical(PLACES.T, SPEEDS.T, start)
    wrong = []
    for step in (2e-8, 1e-8):
        moving = loop(ions(PLACES, SPEEDS), US, step, fields=[magnet])
        accounts(moving)
        found = canonical(moving.charges.position, moving.charges.velocity, stop)
        wrong.append(np.abs(found - expected).max() / np.abs(expected).max())
        bare = np.cross(moving.charges.position.T, moving.charges.velocity.T)[:, 2]
        assert np.abs(bare - np.cross(PLACES, SPEEDS)[:, 2]).max() > 1e-2 * np.abs(bare).max()
    if order == 0:
        assert max(wrong) <= 1e-12
    else:
        assert 4.0 == pytest.approx(wrong[0] / wrong[1], rel=0.2, abs=0.0)
        assert wrong[1] < 1e-3


def test_a_jump_is_the_limit_of_fast_ramps() -> None:
    """Ever shorter ramps end ever nearer to the jump."""

    def end(strength: dict[str, Any]) -> Floats:
        moving = loop(
            ions(PLACES, SPEEDS), US, 1e-8, fields=[field("uniform-magnetic", strength=strength)]
        )
        accounts(moving)
        return np.concatenate([moving.charges.position, moving.charges.velocity * US])

    levels = {"before": "-0.1 T", "after": "0.2 T"}
    jump = end({"kind": "step", "at": "0.4 us", **levels})
    away = [
        np.abs(
            end(
                {"kind": "ramp", "start": f"{0.4 - width} us", "end": f"{0.4 + width} us", **levels}
            )
            - jump
        ).max()
        for width in (0.04, 0.004, 0.0004)
    ]
    assert away[1] < 0.2 * away[0]
    assert away[2] < 0.2 * away[1]
    assert away[2] < 1e-6


def test_an_ion_in_a_rising_field_gains_what_a_fine_integration_says() -> None:
    """Induction heats a gyrating ion: path and work against the equation of motion itself.

    du/dt = Q/m (E + v x B), E = -(dB/dt)/2 n x r, by an eighth-order method at 1e-12 (E. Hairer,
    S. P. Norsett, G. Wanner, Solving Ordinary Differential Equations I, sec. II.10).
    """
    low, high = 0.05, 0.4
    magnet = field(
        "uniform-magnetic",
        strength={
            "kind": "ramp",
            "before": f"{low} T",
            "after": f"{high} T",
            "start": "0 us",
            "end": "1 us",
        },
    )
    moving = loop(ions(PLACES[0], SPEEDS[0]), US, 2e-9, fields=[magnet], scheme="composed-4")
    last = accounts(moving)[-1]
    slope = (high - low) / US

    def motion(t: float, state: Floats) -> Floats:
        x, y, _, u, v, w = state
        b = low + slope * t
        return np.array(
            [
                u,
                v,
                w,
                ION_RATIO * (0.5 * slope * y + v * b),
                ION_RATIO * (-0.5 * slope * x - u * b),
                0.0,
            ]
        )

    begin = np.concatenate([PLACES[0], SPEEDS[0]])
    exact = solve_ivp(motion, (0.0, US), begin, method="DOP853", rtol=1e-12, atol=1e-18).y[:, -1]
    assert exact[:3] == pytest.approx(moving.charges.position[:, 0], abs=1e-10 * 1e-3)
    assert exact[3:] == pytest.approx(moving.charges.velocity[:, 0], abs=1e-9 * 1e3)
    gain = 0.5 * ION_MASS * (np.sum(exact[3:] ** 2) - np.sum(SPEEDS[0] ** 2))
    assert gain == pytest.approx(last.work_induced, rel=1e-8, abs=0.0)
    assert gain > 0.1 * last.kinetic


def test_the_magnetic_moment_is_kept_in_a_slowly_rising_field() -> None:
    """u_perp^2 / B of an orbit round the axis: 13 turns for a rise by half, to 1 %.

    Adiabatic invariant, L. D. Landau, E. M. Lifshitz, Theory of Fields, sec. 21. The rise takes
    80 rad, and is felt with one part in 160 of it at its ends, where it begins and stops at once.
    """
    b0, b1 = 1.0, 1.5
    gyration = ION_RATIO * b0
    time = 80.0 / gyration
    radius = 0.5e-3
    magnet = field(
        "uniform-magnetic",
        strength={
            "kind": "ramp",
            "before": f"{b0} T",
            "after": f"{b1} T",
            "start": "0 us",
            "end": quantity(time, "s"),
        },
    )
    moving = loop(
        ions([radius, 0, 0], [0, -gyration * radius, 0]), time, 0.02 / gyration, fields=[magnet]
    )
    last = accounts(moving)[-1]
    speed = float(np.hypot(*moving.charges.velocity[:2, 0]))
    assert b1 / b0 == pytest.approx((speed / (gyration * radius)) ** 2, rel=1e-2, abs=0.0)
    begin = 0.5 * ION_MASS * (gyration * radius) ** 2
    assert begin * (b1 / b0 - 1.0) == pytest.approx(last.work_induced, rel=3e-2, abs=0.0)
    assert abs(last.energy_residual) <= 1e-13
