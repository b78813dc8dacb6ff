"""The conductors that answer to a run's charges, and what the run asks of their images."""

from __future__ import annotations

from driftwell.coulomb.form import MIXED_ACCURACY, Coulomb
from driftwell.coulomb.tree import settings_for
from driftwell.images.electrodes import ElectrodeImages, electrode_images
from driftwell.images.form import ClosedForm, ImagesForm, MirrorForm, followed
from driftwell.images.image_sum import Asked, Fineness, Images
from driftwell.particles.state import Particles
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.model import Scenario
from driftwell.stepping.step_choice import StepChoice


def asked_of_images(scenario: Scenario, particles: Particles, choice: StepChoice) -> Asked:
    """What a run of such steps asks of its images; nothing where they are no closed form.

    particles : all, those to be born as they are born
    """
    form = scenario.images
    if not isinstance(form, ClosedForm):
        return Asked()
    kick = choice.step * scenario.stepping.coulomb_every
    charge, mass = particles.charge * particles.weight, particles.mass * particles.weight
    away = form.depth(particles.position)
    nearest = followed(kick, charge, mass, particles.velocity, away)
    return Asked(nearest, scenario.coulomb.softening, _fineness(scenario.coulomb))


def answering(scenario: Scenario, conductors: Conductors, asked: Asked) -> Images | None:
    """The conductors that answer to the charges."""
    form = scenario.images
    if isinstance(form, ElectrodeImages):
        solids = [solid for own in conductors.bodies for solid in own]
        return electrode_images(solids, form.panels, form.length)
    return form.images(asked) if isinstance(form, ClosedForm) else None


def closest_to(form: ImagesForm | None, asked: Asked) -> float:
    """Distance, m, from the conductor within which the images' force stops growing; 0: none."""
    return 0.5 * form.blur(asked) if isinstance(form, MirrorForm) else 0.0


def _fineness(form: Coulomb) -> Fineness | None:
    """How the tree sums over images of many charges; not at all where all is summed directly."""
    if form.method == "direct":
        return None
    it = settings_for(form.accuracy)
    mixed = form.precision != "double" and form.accuracy >= MIXED_ACCURACY
    return Fineness(it.order, it.leaf, it.tolerance, mixed)
