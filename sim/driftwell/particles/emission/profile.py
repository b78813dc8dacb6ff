"""How a pulse of charge comes in time."""

from __future__ import annotations

from typing import Literal, Self

import numpy as np

from driftwell.forms import Form, NonNegative, Positive, Real, Time, checked, key, refuse
from driftwell.forms.spelling import spelled
from driftwell.particles.emission.course import Bell, Course, Pieces

CUT = 5.0
"""Births of a Gaussian pulse stay within this many rms of its middle."""


class ProfileForm(Form):
    """Base of all profiles."""

    def course(self) -> Course:
        """The rate in time, up to a factor."""
        raise TypeError(f"{type(self).__name__} must say when charges are born")

    def words(self) -> str:
        """The profile in words."""
        raise TypeError(f"{type(self).__name__} must describe itself")


class GaussianProfile(ProfileForm):
    """A Gaussian in time, cut at 5 rms on both sides."""

    kind: Literal["gaussian"]
    centre: Positive[Time] = key("its middle, at least 5 rms after time zero", example="10 ns")
    rms: Positive[Time] = key("its rms duration", example="1 ns")

    @checked
    def _begins(self) -> Self:
        if self.centre < CUT * self.rms:
            raise refuse("`centre` must be at least 5 `rms` after time zero")
        return self

    def course(self) -> Course:
        return Bell(self.centre, self.rms, CUT)

    def words(self) -> str:
        return f"Gaussian in time, {spelled(self.rms, 's')} rms about {spelled(self.centre, 's')}"


class FlatProfile(ProfileForm):
    """The same rate from one time to another."""

    kind: Literal["flat"]
    start: NonNegative[Time] = key("when it begins", default=0.0)
    stop: Positive[Time] = key("when it ends", example="10 ns")

    @checked
    def _ordered(self) -> Self:
        if self.stop <= self.start:
            raise refuse("`stop` must be later than `start`")
        return self

    def course(self) -> Course:
        return Pieces(np.array([self.start, self.stop]), np.ones(1), np.ones(1))

    def words(self) -> str:
        return f"evenly from {spelled(self.start, 's')} to {spelled(self.stop, 's')}"


class TableProfile(ProfileForm):
    """Rates at given times, joined by straight lines; none before the first and after the last."""

    kind: Literal["table"]
    times: tuple[NonNegative[Time], ...] = key("times of the points, rising")
    values: tuple[NonNegative[Real], ...] = key("rates at those times, in any unit")

    @checked
    def _ordered(self) -> Self:
        if len(self.times) != len(self.values) or len(self.times) < 2:
            raise refuse("`times` and `values` must hold the same number of points, at least 2")
        if any(b <= a for a, b in zip(self.times, self.times[1:], strict=False)):
            raise refuse("`times` must rise from point to point")
        if not any(self.values):
            raise refuse("one of `values` must be greater than 0")
        return self

    def course(self) -> Course:
        values = np.array(self.values)
        return Pieces(np.array(self.times), values[:-1], values[1:])

    def words(self) -> str:
        first, last = spelled(self.times[0], "s"), spelled(self.times[-1], "s")
        return f"as tabulated from {first} to {last}"


PROFILE_KINDS: tuple[type[ProfileForm], ...] = (GaussianProfile, FlatProfile, TableProfile)
