"""What a compiled call reports: kernels do not raise, they return one of these."""

from __future__ import annotations

DONE = 0
"""The asked stretch of time is behind us."""
PAUSED = 1
"""The step budget of this call is used up; call again to go on."""
EVENTS_FULL = 2
"""The event buffer could overflow in the next step; empty it and call again."""
NOT_FINITE = 3
"""A position or velocity is not a number or infinite."""
RUNAWAY = 4
"""A charge left the region the scenario declares as its extent."""
COLLAPSE = 5
"""Two opposite charges came closer than the step can follow."""
CROWDED_STEP = 9
"""A charge met a process more often in one step than can be followed."""
OVERFLOW = 6
"""A step met more surfaces than the event buffer can hold: the step is far too long."""
NEED_BIRTHS = 7
"""Charges are due that have no place in the arrays yet; lay them out and call again."""
