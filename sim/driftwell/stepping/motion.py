"""What the compiled loop works on: the moving charges, the fields, the plan, and work space.

All are named tuples of flat arrays and numbers, so that one compiled loop serves every scenario.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.frame_table import ROWS, frame_table
from driftwell.coulomb.unresolved import search_room
from driftwell.fields.table import FieldTable
from driftwell.images.image_sum import ImageSum
from driftwell.kernels import inner_kernel
from driftwell.kernels.cache_lines import room
from driftwell.particles.state import Particles
from driftwell.stepping.accounts import ACCOUNTS, RATES
from driftwell.stepping.blocks import LEAP, SUMS, blocks

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

LEAVING = 2
"""What `alive` is for a charge lost in the present step, while it still stands in all sums."""
WAITING = 3
"""For a charge not born yet: it stands where it will be, with charge, weight and velocity 0."""
NEWBORN = 4
"""For a charge born in the present step, until the step is closed."""
EVENT_COLUMNS = 10
"""surface, particle index, time, x, y, z, ux, uy, uz, direction."""


class Charges(NamedTuple):
    """The moving charges; `charge` and `mass` are those of the macro-particle.

    position, velocity : (3, n) float64, m and m/s (proper velocity), changed
    charge : (n,) float64, C; mass : (n,) float64, kg; weight : (n,) float64, real particles
    charge_to_mass : (3, n) float64, C/kg, repeated for the axes
    cloud : (n,) int64; alive : (n,) int8, 1, 0 or WAITING, changed (within a step LEAVING, NEWBORN)

    A charge that is lost stays where it was lost, with charge, weight and velocity 0, until it is
    taken out between bursts. One that is WAITING has charge_to_mass 0 as well.
    """

    position: Floats
    velocity: Floats
    charge: Floats
    mass: Floats
    weight: Floats
    charge_to_mass: Floats
    cloud: Ints
    alive: NDArray[np.int8]


class Fields(NamedTuple):
    """The fields by role."""

    electric: FieldTable
    uniform: FieldTable
    magnetic: FieldTable


class Plan(NamedTuple):
    """Numbers that hold for the whole run.

    coulomb : 0 to leave out the charges' own force, 1 to sum it, 2 to sum it over all images too
    coulomb_every : steps between Coulomb kicks
    constant : 1/(4 pi eps0); softening2 : m^2; extent2 : m^2
    watch_collapse : 1 where charges of both signs move without softening
    light2 : c^2, m^2/s^2
    images : 1 where conductors answer to the charges
    midway : 1 where momenta change in the middle of a step only (midpoint_rotation.py)
    frames : bunches whose charges are summed in a rest frame of their own; 0: in the laboratory
    cell_axis : the axis along which all repeats, -1 where nothing does
    cell_begin, cell_length : m, where the cell begins, and the period
    processes : 1 where anything else acts, in events; 2 where something acts in every step
    """

    coulomb: int
    coulomb_every: int
    constant: float
    softening2: float
    extent2: float
    watch_collapse: int
    light2: float
    images: int
    midway: int = 0
    frames: int = 0
    cell_axis: int = -1
    cell_begin: float = 0.0
    cell_length: float = 0.0
    processes: int = 0


class Trace(NamedTuple):
    """Coordinates sampled at the marks for it.

    cloud, which : (m,) int64, a cloud's centre (which = -1), or one charge by its index in the
    present arrays (-2 once it is lost); axis : (m,) int64
    time : (k,) float64 and value : (k, m) float64, overwritten from the top
    """

    cloud: Ints
    which: Ints
    axis: Ints
    time: Floats
    value: Floats


class Work(NamedTuple):
    """Arrays the loop keeps between calls; none is allocated inside a step.

    external, coulomb, induced : (3, n) fields, V/m; spare : (3, n)
    pairs : (3, n) V/m, the charges' at each other alone: `coulomb` itself where there are neither
        images nor several bunches
    image : (4, n) field and potential of the images, V/m and V; (4, 0) where there are none
    image_table, image_work : what their sum reads, and works in
    image_force : (6,) N and N m, force and torque of the images on all charges; in a cell those of
        the charges' own forces
    bunch : (clouds,) int64, in which bunch's frame a cloud is summed; empty where none has one
    frames : (bunches + 1, COLUMNS), see coulomb/frame_table.py
    frame_rows : (ROWS, n) room for the sum in frames; (ROWS, 0) where there are none
    slowness : (n,) 1/gamma
    old_position, old_velocity, old_field : (3, n) at the beginning of the step, the field being
        the electric one that the step's kicks begin with, V/m; in the scheme midpoint-rotation
        room for two numbers of each charge
    clearance : (n,) m, less than the distance to every electrode, see approach.py; empty without
    side : (surfaces, n) int8, -1 or 1; 0 while a charge has not left the surface it began on
    tiles : Coulomb work space
    levels : (4, n) field and potential of the pair sum, V/m and V; (4, 0) where it gives none
    search : int64, see coulomb/unresolved.py; empty where no pair can collapse
    block_sums : (blocks, 24), see blocks.py
    leap_sums : (steps, blocks, 24), of which `block_sums` is the first: those of several steps
        taken at once
    rate, pending : see accounts.settle
    energy : (1,) J, potential energy in the fields at the last evaluation
    total, carry : (accounts,)
    events : (capacity, 10)
    cursor : (CURSORS,) int64, see the constants below
    """

    external: Floats
    coulomb: Floats
    pairs: Floats
    image: Floats
    image_table: Floats
    image_work: Floats
    image_force: Floats
    bunch: Ints
    frames: Floats
    frame_rows: Floats
    induced: Floats
    spare: Floats
    slowness: Floats
    old_position: Floats
    old_velocity: Floats
    old_field: Floats
    clearance: Floats
    side: NDArray[np.int8]
    tiles: Floats
    levels: Floats
    search: Ints
    block_sums: Floats
    leap_sums: Floats
    rate: Floats
    pending: Floats
    energy: Floats
    total: Floats
    carry: Floats
    events: Floats
    cursor: Ints


CURSOR_INTERVAL = 0
CURSOR_STEP = 1
CURSOR_EVENTS = 2
CURSOR_TRACES = 3
CURSOR_FRESH = 4
"""1 while the force arrays belong to the present positions and time."""
CURSOR_STEPS = 5
"""Steps done since the run began."""
CURSOR_AT_FAULT = 6
"""Index of the charge a failing status speaks of."""
CURSOR_OVERFLOW = 7
"""Events that did not fit the buffer: more than a step can sensibly hold."""
CURSOR_JUMPED = 8
"""The last mark whose jump of a waveform has been taken."""
CURSOR_INDUCED = 9
"""1 while magnets change, so that the induced field does work."""
CURSOR_BIRTH = 10
"""The next of the births laid out, see births.py."""
CURSOR_NEWBORN = 11
"""How many of them were due in the present step."""
CURSORS = 12


def aligned(values: Floats) -> Floats:
    """A copy laid out by :func:`room`."""
    made = room(values.shape)
    made[...] = values
    return made


def charges_of(particles: Particles) -> Charges:
    """The moving charges of a set of particles.

    Positions and velocities are shared: those of `particles` are laid out anew, with their values.
    """
    particles.position = aligned(particles.position)
    particles.velocity = aligned(particles.velocity)
    ratio = particles.charge / particles.mass
    return Charges(
        particles.position,
        particles.velocity,
        aligned(particles.charge * particles.weight),
        aligned(particles.mass * particles.weight),
        particles.weight.copy(),
        aligned(np.tile(ratio, (3, 1))),
        particles.cloud,
        np.ones(ratio.size, dtype=np.int8),
    )


def room_for_events(n: int, surfaces: int) -> int:
    """Rows one step may need: every charge meets every surface, some bounce about in corners."""
    return n * surfaces + 64 * surfaces * 17


def work_space(
    n: int,
    surfaces: int,
    tiles: Floats,
    levels: bool,
    collapse: bool,
    images: ImageSum | None = None,
    bodies: bool = False,
    in_blocks: bool = False,
    bunch: Ints | None = None,
    takers: bool = False,
) -> Work:
    """Work space for `n` charges and `surfaces` walls and detectors.

    What a run never writes to takes no memory: the system gives it by the page, when it is used.

    tiles : the pair sum's; levels : whether that finds potentials too
    collapse : whether opposite charges may fall together
    images : the sum over the images; None where there are none
    bodies : whether electrodes stop charges
    in_blocks : whether few charges are passed through in blocks too, and many steps at once
    bunch : (clouds,) to which bunch each cloud belongs; None where none has a frame
    takers : whether anything but surfaces takes charges
    """
    events = 2 * room_for_events(n, surfaces + bodies + takers)
    coulomb = room((3, n))
    own = np.zeros(0, dtype=np.int64) if bunch is None else bunch
    bunches = bunches_in(own)
    sums = room((LEAP if in_blocks else 1, blocks(n, in_blocks), SUMS))
    return Work(
        external=room((3, n)),
        coulomb=coulomb,
        pairs=coulomb if images is None and bunches < 2 else room((3, n)),
        image=room((4, 0 if images is None else n)),
        image_table=room((0,)) if images is None else images.table,
        image_work=room((0, 0)) if images is None else images.work,
        image_force=np.zeros(6),
        bunch=own,
        frames=frame_table(bunches),
        frame_rows=room((ROWS, n if bunches else 0)),
        induced=room((3, n)),
        spare=room((3, n)),
        slowness=room((n,)),
        old_position=room((3, n)),
        old_velocity=room((3, n)),
        old_field=room((3, n)),
        clearance=room((n if bodies else 0,)),
        side=np.ones((surfaces, n), dtype=np.int8),
        tiles=tiles,
        levels=room((4, n if levels else 0)),
        search=search_room(n) if collapse else np.zeros(0, dtype=np.int64),
        block_sums=sums[0],
        leap_sums=sums,
        rate=np.zeros(RATES),
        pending=np.zeros(1),
        energy=np.zeros(1),
        total=np.zeros(ACCOUNTS),
        carry=np.zeros(ACCOUNTS),
        events=np.zeros((events, EVENT_COLUMNS)),
        cursor=np.zeros(CURSORS, dtype=np.int64),
    )


def bunches_in(bunch: Ints) -> int:
    """Number of bunches, from the bunch (clouds,) that each cloud belongs to."""
    return int(bunch.max()) + 1 if bunch.size else 0


@inner_kernel
def put(charges: Charges, i: int, x: float, y: float, z: float) -> None:
    """Set the place of charge `i`, m."""
    charges.position[0, i], charges.position[1, i], charges.position[2, i] = x, y, z
