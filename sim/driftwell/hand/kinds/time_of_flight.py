"""When a flying cloud reaches a detector, in free flight.

t = L / v                                                                                (1)
"""

from __future__ import annotations

import numpy as np

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.arrival_time import ArrivalTime
from driftwell.forms import spelled
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene
from driftwell.walls.form import DetectorForm

FORMULA = Formula(
    "free flight",
    "t = L/v",
    "elementary",
    "no field on the way; the middle of the cloud, whose charges all arrive",
)


def values(scene: Scene) -> Values:
    """Of every cloud that flies, at every detector ahead of it."""
    for group in scene.groups:
        for detector in scene.detectors:
            found = _value(scene, group, detector)
            if found is not None:
                yield found


def _value(scene: Scene, group: Group, detector: DetectorForm) -> HandValue | None:
    normal = np.array(getattr(detector, "normal", (0.0, 0.0, 1.0)), dtype=np.float64)
    normal /= np.linalg.norm(normal)
    place = np.array(getattr(detector, "at", (0.0, 0.0, 0.0)))
    towards = float(normal @ group.drift) / group.lorentz
    away = float(normal @ (place - group.middle))
    if towards == 0.0 or away / towards <= 0.0:
        return None
    free = not (scene.scenario.field or scene.scenario.electrode)
    reasons = [] if free else ["fields act on the way"]
    if scene.scenario.process:
        reasons.append("a gas or light acts on the way")
    if len(scene.groups) > 1 or scene.scenario.source:
        reasons.append("other clouds push it")
    why = "; ".join(reasons) or f"{spelled(abs(away), 'm', 5)} at {spelled(abs(towards), 'm/s', 5)}"
    what = f'flight {group.named} to "{detector.name}"'
    return HandValue(FORMULA, what, away / towards, "s", not reasons, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The mean time of arrival of the only cloud in free flight."""
    if not isinstance(question, ArrivalTime) or question.statistic != "mean":
        return None
    if len(scene.groups) != 1 or scene.scenario.wall:
        return None
    detector = scene.detector(question.of)
    found = None if detector is None else _value(scene, scene.groups[0], detector)
    return found if found is not None and found.inside else None


KIND = HandKind((FORMULA,), values, answer)
