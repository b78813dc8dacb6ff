"""Time in which a drag takes a velocity to 1/e, and the heat that noise leaves.

tau = m K / |q|            mobility                                                      (1)
tau = m C / (3 pi eta d)   Stokes's law with the slip correction                         (2)
<v^2> = k T / m            where the drag has noise of a temperature                     (3)
"""

from __future__ import annotations

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.temperature import Temperature
from driftwell.forms import spelled
from driftwell.forms.body import Body
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.rf_trap import body_of
from driftwell.hand.scene import Scene
from driftwell.processes.form import ProcessForm
from driftwell.processes.mobility_drag import MobilityDrag
from driftwell.processes.stokes_drag import StokesDrag
from driftwell.processes.thermostat import Thermostat

DRAG = Formula(
    "relaxation time of a drag",
    "tau = m K/|q| by mobility; tau = m C/(3 pi eta d) by Stokes's law",
    "E. A. Mason and E. W. McDaniel (1988), ch. 1; E. Cunningham, Proc. R. Soc. A 83 (1910) 357. "
    "From memory.",
    "slow charges: Reynolds number well below 1, drift slow against the gas's heat",
)
BATH = Formula(
    "temperature of a heat bath",
    "<v^2> = k T/m along each axis",
    "S. Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, sec. II. From memory.",
    "after several relaxation times; no drive that heats",
)
LATE = 5.0
"""Relaxation times after which the start is forgotten (to 5e-5 of an energy)."""


def relaxation_time(process: ProcessForm, body: Body) -> float | None:
    """tau, s; None of a process that is no drag."""
    if isinstance(process, MobilityDrag):
        return body.mass * process.actual() / abs(body.charge)
    if isinstance(process, StokesDrag | Thermostat):
        return 1.0 / process.packed(body).own[0]
    return None


def values(scene: Scene) -> Values:
    """Of every species and drag."""
    for process in scene.scenario.process:
        for body in scene.kinds:
            tau = relaxation_time(process, body)
            if tau is None or not any(
                process.acts_on(each.name, each.species)
                for each in scene.moving
                if each.species == body.name
            ):
                continue
            what = f'relaxation time of {body.name} in "{process.name}"'
            why = f"{scene.scenario.duration / tau:.3g} of them in the run"
            yield HandValue(DRAG, what, tau, "s", True, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The temperature of a cloud in one heat bath, late enough."""
    if not isinstance(question, Temperature):
        return None
    body = body_of(scene, question.of)
    acting = [p for p in scene.scenario.process if body and p.acts_on(question.of, body.name)]
    if body is None or len(acting) != 1:
        return None
    bath = acting[0]
    noisy = isinstance(bath, Thermostat) or getattr(bath, "diffusion", False)
    tau = relaxation_time(bath, body)
    if tau is None or not noisy or bath.region is not None or bath.end is not None:
        return None
    first = _earliest(question, scene.scenario.duration)
    if first < bath.start + LATE * tau or any(getattr(bath, "flow", ())):
        return None
    kelvin = float(bath.temperature)  # type: ignore[attr-defined]
    driven = any(_swings(field) for field in scene.scenario.field) or bool(scene.scenario.electrode)
    why = f"{spelled(first - bath.start, 's', 3)} after it begins, tau {spelled(tau, 's', 3)}"
    if driven:
        why += "; fields may heat, and driven motion counts as heat"
    what = f'temperature of cloud "{question.of}" in "{bath.name}"'
    return HandValue(BATH, what, kelvin, "K", not driven, why)


def _earliest(question: Temperature, duration: float) -> float:
    if question.over is not None:
        return float(question.over[0])
    if question.at == "start":
        return 0.0
    return duration if question.at == "end" else float(question.at)


def _swings(field: object) -> bool:
    wave = field.waveform()  # type: ignore[attr-defined]
    return not isinstance(wave, float | int)


KIND = HandKind((DRAG, BATH), values, answer)
