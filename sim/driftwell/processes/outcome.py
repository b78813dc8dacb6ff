"""What may come of an event, and the purposes that random numbers are drawn for."""

from __future__ import annotations

NOTHING, CHANGED, LOST = 0, 1, 2
"""A null event; the charge's velocity has changed; the charge is lost."""

CLOCK, COLLISION, PHOTON, NOISE = 0, 1, 2, 3
"""Purposes: the first waiting time, collisions with atoms, photons, the noise of drag."""

Event = tuple[int, float, float, float, float]
"""What came of it, change of velocity (3), m/s, exponential of the wait for the next."""
