"""How fast the error of each scheme falls with the step: its fitted order, from both sides.

The same motion is integrated apart from the product's stepping (DOP853 of scipy at 1e-13 relative,
E. Hairer, S. P. Norsett, G. Wanner, Solving Ordinary Differential Equations I, sec. II.5) with
Coulomb's law summed by numpy. Orders: kick-drift-kick 2; five-fold composition 4 (M. Suzuki, Phys.
Lett. A 146 (1990) 319); seven-fold composition 6 (H. Yoshida, Phys. Lett. A 150 (1990) 262).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from driftwell.constants import COULOMB_CONSTANT, SPEED_OF_LIGHT
from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import FieldForm
from driftwell.particles.proper_velocity import proper_velocity
from driftwell.particles.species import SpeciesForm, bodies
from driftwell.stepping.schemes import ORDER
from tests.cases import field
from tests.running import Floats, carried_out, points, species, track

ION = species(2.29e-25)
ELECTRON = {"mass": "9.1093837139e-31 kg", "charge": "-1 e"}
PLACES = 1e-5 * np.array([[1.0, 0.4, -3.0], [-0.7, 1.2, 0.3], [0.2, -0.9, 3.5]])
SPEEDS = np.array([[6.0, -4.0, 3.0], [2.0, 5.0, -8.0], [-5.0, 1.0, 4.0]])
CAPS = {"kind": "static-quadrupole", "axial_frequency": {"species": "body", "value": "80 kHz"}}
SINE = {"frequency": "400 kHz", "phase": "50 deg"}


@dataclass(frozen=True, slots=True)
class Case:
    """A motion: its fields, time in s, and how many steps the sixth-order scheme takes for it.

    The numbers of steps are such that the error is above rounding and its first term is the rest.
    """

    fields: Sequence[dict[str, Any]]
    duration: float
    sixth: tuple[int, int, int]
    body: dict[str, str]
    position: Floats
    velocity: Floats

    def steps(self, order: int) -> tuple[int, ...]:
        """How many steps to take at each order, coarsest first."""
        return {2: (200, 400, 800), 4: (100, 170, 300), 6: self.sixth}[order]

    def sections(self) -> dict[str, Any]:
        """The scenario but for its steps."""
        return {
            "species": {"body": self.body},
            "cloud": [points("few", "body", self.position, self.velocity)],
            "field": [{"name": f"field {k}", **keys} for k, keys in enumerate(self.fields)],
        }

    def expected(self) -> Floats:
        """Places (n, 3), m, at the end."""
        known = bodies({"body": SpeciesForm(**self.body)})
        body = known["body"]
        forms: list[FieldForm] = [field(**keys) for keys in self.fields]
        count = len(self.position)

        def motion(t: float, flat: Floats) -> Floats:
            place, proper = flat.reshape(2, count, 3)
            gamma = np.sqrt(1.0 + (proper**2).sum(axis=1, keepdims=True) / SPEED_OF_LIGHT**2)
            speed = proper / gamma
            there = evaluate(forms, known, place, t)
            apart = place[:, None] - place[None, :]
            distance = np.sqrt((apart**2).sum(axis=2))
            np.fill_diagonal(distance, np.inf)
            own = COULOMB_CONSTANT * body.charge * (apart / distance[:, :, None] ** 3).sum(axis=1)
            push = there.electric + own + np.cross(speed, there.magnetic)
            return np.concatenate([speed.ravel(), (body.charge_to_mass * push).ravel()])

        start = np.concatenate([self.position.ravel(), proper_velocity(self.velocity.T).T.ravel()])
        size = np.repeat([np.abs(self.position).max(), np.abs(self.velocity).max()], 3 * count)
        end = solve_ivp(
            motion, (0.0, self.duration), start, method="DOP853", rtol=1e-13, atol=1e-14 * size
        ).y[:, -1]
        return np.asarray(end[: 3 * count].reshape(count, 3))


def ions(*fields: dict[str, Any], sixth: tuple[int, int, int] = (80, 120, 180)) -> Case:
    """Three ions some 30 um apart for 8 us: their push is as strong as the fields'."""
    return Case(fields, 8e-6, sixth, ION, PLACES, SPEEDS)


CASES = {
    "static trap": ions(CAPS, sixth=(40, 60, 90)),
    "rf drive": ions(
        CAPS,
        {"kind": "rf-quadrupole", "radius": "3.5 mm", "voltage": {"amplitude": "40 V", **SINE}},
    ),
    "uniform magnet": ions(CAPS, {"kind": "uniform-magnetic", "strength": "1.5 T"}),
    "changing uniform magnet": ions(
        CAPS,
        {
            "kind": "uniform-magnetic",
            "strength": {"amplitude": "0.4 T", "offset": "1 T", **SINE},
            "along": [0.3, 0.1, 1.0],
        },
    ),
    "shaped magnets": ions(
        CAPS,
        {"kind": "uniform-magnetic", "strength": "0.5 T", "along": [0.2, -0.1, 1.0]},
        {
            "kind": "magnetic-multipole",
            "order": 3,
            "radius": "30 um",
            "strength": {"amplitude": "0.3 T", "offset": "0.6 T", **SINE},
        },
        sixth=(300, 450, 700),
    ),
    "close to the speed of light": Case(
        [
            {"kind": "uniform-magnetic", "strength": "20 mT", "along": [0.0, 0.6, 0.8]},
            {"kind": "uniform-electric", "strength": {"amplitude": "3 MV/m", "frequency": "1 GHz"}},
            {
                "kind": "static-quadrupole",
                "voltage": "300 kV",
                "radius": "60 mm",
                "half_length": "50 mm",
            },
        ],
        1.2e-9,
        (40, 60, 90),
        ELECTRON,
        1e-2 * np.array([[0.0, 0.3, 0.0], [0.4, 0.0, -0.5]]),
        2.8e8 * np.array([[1.0, 0.0, 0.0], [0.0, 0.6, 0.6]]),
    ),
}


def errors(
    folder: Path, case: Case, scheme: str, steps: Sequence[int], expected: Floats, **keys: Any
) -> Floats:
    """Largest distance from the expected places, over the largest of these, for each step."""
    found = []
    for count in steps:
        step = f"{case.duration / count!r} s"
        stepping = {"scheme": scheme, "step": step, **keys}
        recorded = track(carried_out(folder, case.duration, **case.sections(), stepping=stepping))
        found.append(np.abs(recorded.position[-1] - expected).max() / np.abs(expected).max())
    return np.array(found)


def fitted_order(steps: Sequence[int], error: Floats) -> float:
    """Slope of the logarithm of the error against that of the step."""
    return float(-np.polyfit(np.log(steps), np.log(error), 1)[0])


@pytest.mark.parametrize("name", CASES)
def test_every_scheme_has_its_order(tmp_path: Path, name: str) -> None:
    """Within 0.1, and with errors between 1e-12 and 1e-2: neither rounding nor saturation."""
    case = CASES[name]
    expected = case.expected()
    for scheme, order in ORDER.items():
        steps = case.steps(order)
        error = errors(tmp_path, case, scheme, steps, expected)
        assert 1e-12 < error.min() < error.max() < 1e-2, f"{scheme}: {error}"
        assert order == pytest.approx(fitted_order(steps, error), abs=0.1), f"{scheme}: {error}"


@pytest.mark.parametrize("scheme", ORDER)
def test_taking_the_coulomb_kick_every_fourth_step_keeps_order_two(
    tmp_path: Path, scheme: str
) -> None:
    """Order 2 whatever follows the fields: the long kicks make a kick-drift-kick of their own.

    M. Tuckerman, B. J. Berne, G. J. Martyna, J. Chem. Phys. 97 (1992) 1990.
    """
    case = CASES["rf drive"]
    steps = (400, 800, 1600)
    error = errors(tmp_path, case, scheme, steps, case.expected(), coulomb_every=4)
    assert 1e-12 < error.min() < error.max() < 1e-2
    assert 2.0 == pytest.approx(fitted_order(steps, error), abs=0.1)


def test_kicks_left_out_are_noticed(tmp_path: Path) -> None:
    """A fit can fail: against the path of ions that do not push each other, no order is left."""
    case = CASES["static trap"]
    steps = case.steps(2)
    expected = track(
        carried_out(
            tmp_path,
            case.duration,
            **case.sections(),
            coulomb={"method": "off"},
            stepping={"step": f"{case.duration / 800!r} s"},
        )
    ).position[-1]
    error = errors(tmp_path, case, "kick-drift-kick", steps, expected)
    assert 0.0 == pytest.approx(fitted_order(steps, error), abs=0.1)
