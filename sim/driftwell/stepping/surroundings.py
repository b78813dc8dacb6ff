"""What a time loop may have besides charges, fields and surfaces, and the plan that follows."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.constants import COULOMB_CONSTANT, SPEED_OF_LIGHT
from driftwell.coulomb.bunch_frames import BunchFrames
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.geometry.body_table import BodyTable
from driftwell.images.image_sum import Images
from driftwell.particles.unborn import Unborn
from driftwell.processes.table import Acting
from driftwell.stepping.form import Stepping
from driftwell.stepping.motion import Plan
from driftwell.stepping.process_work import when_acting
from driftwell.stepping.schemes import MIDWAY


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What else there is; None where there is none of it.

    images : the conductors that answer to the charges
    bodies : what else stops charges: owner k is surface number (walls + detectors + k)
    unborn : charges that are born on the way
    frames : in which frames the charges are summed; None: in the laboratory, and unwatched
    cell : what repeats along one axis
    processes : what else acts on charges
    """

    images: Images | None = None
    bodies: BodyTable | None = None
    unborn: Unborn | None = None
    frames: BunchFrames | None = None
    cell: Cell | None = None
    processes: Acting | None = None


def plan_of(coulomb: Coulomb, stepping: Stepping, around: Surroundings, both_signs: bool) -> Plan:
    """The numbers that hold for the whole run; both_signs : whether charges of both signs move."""
    frames, cell = around.frames, around.cell
    summed = coulomb.method != "off"
    return Plan(
        coulomb=int(summed) * (1 if cell is None else 2),
        coulomb_every=stepping.coulomb_every,
        constant=COULOMB_CONSTANT,
        softening2=coulomb.softening**2,
        extent2=stepping.extent**2,
        watch_collapse=int(both_signs and coulomb.softening == 0.0 and summed),
        light2=SPEED_OF_LIGHT**2,
        images=int(around.images is not None),
        midway=int(stepping.scheme == MIDWAY),
        frames=0 if frames is None or not summed else frames.count,
        cell_axis=-1 if cell is None else cell.number,
        cell_begin=0.0 if cell is None else cell.begin,
        cell_length=0.0 if cell is None else cell.length,
        processes=0 if around.processes is None else when_acting(around.processes),
    )
