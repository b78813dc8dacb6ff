"""Normalised brightness of the beam through a detector: current over the area in phase space.

    effective   B = 2 I / (pi^2 (4 e_x) (4 e_y)) = I / (8 pi^2 e_x e_y)                       (1)
    rms         B = 2 I / (pi^2 e_x e_y)                                                      (2)
    plain       B = 2 I / (e_x e_y)                                                           (3)

e_x, e_y are the normalised rms emittances across the beam, from places and proper velocities of
the charges as they pass,

    e_x = sqrt(<x^2><u_x^2> - <x u_x>^2) / c                                                  (4)

about their own means, and I the net current over the window: the mean over a window within a
pulse's top gives its peak brightness. Eq. 1 is the mean brightness of the hyperellipsoid that
edge emittances of four times the rms ones span, in which a beam of Kapchinskij and Vladimirskij
lies whole; eqs. 2 and 3 put in rms emittances, with and without pi^2. The three differ by constant
factors, 16 and 157.9; which was taken is in the answer's note.

The error joins that of the current and the jackknife of the emittances.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 3.1 (eq. 1, with the effective
emittance of sec. 5.3.4). C. Lejeune, J. Aubert, Adv. Electron. Electron Phys. Suppl. 13A (1980) 159
(eq. 2). Eq. 3: common practice for free-electron lasers, no source. From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import AXES, Axis
from driftwell.answers.kinds.emittance import phase_area
from driftwell.answers.kinds.passage_question import CurrentQuestion, window_in_words
from driftwell.answers.passages import (
    alike,
    current_of,
    first_of_each,
    one_species,
    passages_in_words,
)
from driftwell.answers.sampling import Bools, jackknife_error
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.errors import AnswerError
from driftwell.forms import key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

_LEAST = 10
_FACTOR = {"effective": 1.0 / (8.0 * math.pi**2), "rms": 2.0 / math.pi**2, "plain": 2.0}
_FORMULA = {
    "effective": "I / (8 pi^2 e_x e_y)",
    "rms": "2 I / (pi^2 e_x e_y)",
    "plain": "2 I / (e_x e_y)",
}


class Brightness(CurrentQuestion):
    """Normalised brightness of the beam through a detector."""

    unit: ClassVar[str] = "A/(m rad)^2"
    ask: Literal["brightness"] = key("normalised brightness of the beam through a detector")
    beam_axis: Axis = key("axis the beam runs along", default="z")
    convention: Literal["effective", "rms", "plain"] = key(
        "effective: I / (8 pi^2 e_x e_y); rms: 2 I / (pi^2 e_x e_y); plain: 2 I / (e_x e_y); "
        "e: normalised rms emittances",
        default="effective",
    )

    def answer(self, evidence: Evidence) -> Answer:
        clouds = self.clouds(evidence)
        passed = self.all_passages(evidence)
        each = alike(first_of_each(passed), _LEAST, self.of)
        one_species(each)
        current = current_of(passed, self.over, clouds, evidence)
        factor = abs(current.value) * _FACTOR[self.convention]
        across = [k for k in range(3) if k != AXES.index(self.beam_axis)]

        def emittances(keep: Bools) -> list[float]:
            return [
                phase_area(each.position[k, keep], each.velocity[k, keep]) / SPEED_OF_LIGHT
                for k in across
            ]

        def value(keep: Bools) -> float:
            areas = emittances(keep)
            return factor / (areas[0] * areas[1])

        everyone = np.ones(len(each), dtype=np.bool_)
        first, second = emittances(everyone)
        if first * second == 0.0:
            raise AnswerError("the beam has no emittance: its brightness has no bound")
        found = value(everyone)
        by_area = jackknife_error(value, len(each))
        note = (
            f"{_FORMULA[self.convention]} with e of {spelled(first, 'm rad', 3)} and "
            f"{spelled(second, 'm rad', 3)}, normalised rms, and {spelled(current.value, 'A', 4)}; "
            f"{passages_in_words(passed, clouds, self.over)}"
        )
        error = None if by_area is None else math.hypot(by_area, found * current.relative_error)
        return self.answered(found, error, note)

    def words(self) -> str:
        return (
            f"normalised brightness {_FORMULA[self.convention]} of {self.whose()} at detector "
            f'"{self.of}" {window_in_words(self.over)}'
        )
