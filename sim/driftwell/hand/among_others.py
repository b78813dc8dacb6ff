"""What other charges do to the frequency of a cloud's centre, or of one charge.

The centre of a cloud of one charge-to-mass ratio moves in a harmonic trap as one free charge does,
whatever its charges do among themselves (W. Kohn, Phys. Rev. 123 (1961) 1242, from memory). One
charge among others, or one kind among others, is shifted.
"""

from __future__ import annotations

from dataclasses import replace

from driftwell.answers.form import QuestionForm
from driftwell.hand.formula import HandValue
from driftwell.hand.scene import Scene


def shifted_by_others(question: QuestionForm, scene: Scene, found: HandValue) -> HandValue:
    """The value of one free charge, marked as outside its range where others push the charge."""
    scenario = scene.scenario
    if scenario.coulomb.method == "off":
        return found
    charge = getattr(question, "charge", None)
    group = scene.group(question.of)
    lone = group is not None and group.count == 1 and len(scene.groups) == 1
    ratios = {body.charge_to_mass for body in scene.kinds}
    reasons = []
    if charge is not None and not lone:
        reasons.append("the other charges push this one")
    elif len(ratios) > 1 or len(scene.groups) > 1 or scenario.source:
        reasons.append("other clouds push this one")
    if scenario.process:
        reasons.append("it is damped")
    if scenario.images is not None:
        reasons.append("images pull")
    if not reasons:
        return found
    return replace(found, inside=False, why="; ".join([found.why, *reasons]))
