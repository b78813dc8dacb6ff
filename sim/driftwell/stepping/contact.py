"""Where the path of a charge through a step first meets an electrode.

From a point at the distance d of the nearest surface nothing is met before the path is longer than
d. So the path is walked in strides of d over the largest speed on it, which the control points of
the quintic bound,

    |dx/ds| <= max(|h v0|, |h v0 + h^2 a0 / 4|, 5 |b3 - b2|, |h v1 - h^2 a1 / 4|, |h v1|)   (1)
    b2 = x0 + 2 h v0 / 5 + h^2 a0 / 20,    b3 = x1 - 2 h v1 / 5 + h^2 a1 / 20

and a surface is met where d is nothing but rounding, or found behind the path. Strides shrink as a
surface is neared: the smallest is 2^-20 of the step, and doubles with every 256 of them, so that a
charge which slides along a surface comes to its end. Where a stride ends behind a surface, within a
body or on the other face of a thin one, the crossing is found by bisection, to the last bit. A
corner that is cut within a stride of the smallest length may go unnoticed.

A charge that begins on a surface has not met it, unless it goes on into the body.

References
----------
J. C. Hart, Sphere tracing, The Visual Computer 12 (1996) 527 (strides as long as the distance; from
memory). G. Farin, Curves and Surfaces for CAGD, 4th ed. (1997), ch. 4 (control points bound a curve
and its derivative; from memory).
"""

from __future__ import annotations

from driftwell.geometry.body_table import OWNER, VOLUME, BodyTable
from driftwell.geometry.distance import nearest_body, to_body
from driftwell.kernels import outer_kernel
from driftwell.stepping.motion import Plan
from driftwell.stepping.path import End, fastest, place

NOTHING = -1
_SMALLEST = 2.0**-20
_DOUBLE_AFTER = 256
_MOST = 20 * _DOUBLE_AFTER
_BISECTIONS = 60
_GAP = 10.0
"""A thin surface is crossed, not passed by, where the faces change within so often `touch`."""


@outer_kernel
def first_body(
    plan: Plan, bodies: BodyTable, start: End, end: End, span: float, until: float
) -> tuple[int, float]:
    """The owner of the body met first, and the fraction of the path before it; (-1, 1) for none.

    until : fraction of the path that is made, at most 1
    """
    touch = bodies.touch[0]
    distance, body, side = nearest_body(bodies, start[0], start[1], start[2])
    if distance < -touch:
        return bodies.whole[body, OWNER], 0.0
    leaving = distance <= touch
    speed = fastest(plan, start, end, span)
    if speed == 0.0:
        return NOTHING, 1.0
    here, shortest = 0.0, _SMALLEST
    for k in range(_MOST):
        if here >= until:
            break
        if leaving or k % _DOUBLE_AFTER == _DOUBLE_AFTER - 1:
            shortest *= 2.0
        there = min(here + max(distance / speed, shortest), until)
        x, y, z = place(plan, start, end, span, there)
        found, other, face = nearest_body(bodies, x, y, z)
        if leaving:
            if found < -touch:
                at = _crossing(plan, bodies, start, end, span, here, there, other, 1.0)
                return bodies.whole[other, OWNER], at
            if found > touch:
                leaving, shortest = False, _SMALLEST
        elif bodies.whole[other, VOLUME] != 0:
            if found <= touch:
                if found < 0.0:
                    there = _crossing(plan, bodies, start, end, span, here, there, other, 1.0)
                return bodies.whole[other, OWNER], there
        elif found <= touch:
            return bodies.whole[other, OWNER], there
        elif other == body and face != side and there - here > distance / speed:
            at = _crossing(plan, bodies, start, end, span, here, there, body, side)
            x, y, z = place(plan, start, end, span, at)
            gap, between, _ = nearest_body(bodies, x, y, z)
            if gap <= _GAP * touch:
                return bodies.whole[between, OWNER], at
        here, distance, body, side = there, found, other, face
    return NOTHING, 1.0


@outer_kernel
def _crossing(
    plan: Plan,
    bodies: BodyTable,
    start: End,
    end: End,
    span: float,
    low: float,
    high: float,
    body: int,
    side: float,
) -> float:
    """Fraction of the path between `low` and `high` where it leaves the side of a body."""
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        x, y, z = place(plan, start, end, span, middle)
        distance, face = to_body(bodies, body, x, y, z)
        behind = distance <= 0.0 if bodies.whole[body, VOLUME] != 0 else face != side
        if behind:
            high = middle
        else:
            low = middle
    return high
