"""What is judged: a run's record, the scenario in it, its charges at some times."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.errors import DriftwellError
from driftwell.forms.faults import read_form
from driftwell.judgement.finding import plain
from driftwell.particles.state import Particles, no_particles
from driftwell.record.reader import Run
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table

Floats = NDArray[np.float64]

_LOOKS = 5
"""Snapshots that are looked at, at the most."""
_MANY = 200_000
"""Charges above which only start and end are looked at, and nothing is kept in memory twice."""
_ENDED = ("finished", "all lost")


@dataclass
class Subject:
    """A run, and what judgements ask of it."""

    run: Run

    @cached_property
    def scenario(self) -> Scenario | None:
        """The scenario as it was run; None where this version cannot read it.

        Files that it names are not read.
        """
        header = self.run.header
        try:
            data = raw_table(header.scenario, header.title)
            apply_settings(data, header.settings, Scenario)
            return read_form(Scenario, data)[0]
        except DriftwellError:
            return None

    @property
    def ended(self) -> bool:
        """Whether the questions have been answered for good."""
        return self.run.outcome.word in _ENDED

    @property
    def summed(self) -> bool:
        """Whether the charges feel each other."""
        return self.run.header.coulomb_method != "off"

    @property
    def step(self) -> float:
        """s, of the fields; between two Coulomb sums it is `kick`."""
        return self.run.header.step

    @cached_property
    def kick(self) -> float:
        """s, between two Coulomb sums."""
        every = 1 if self.scenario is None else self.scenario.stepping.coulomb_every
        return self.step * every

    @cached_property
    def looks(self) -> tuple[Snapshot, ...]:
        """Snapshots over the run, start and end among them."""
        times = self.run.snapshots
        charges = sum(cloud.count for cloud in self.run.header.clouds)
        most = _LOOKS if charges <= _MANY else 2
        chosen = np.unique(np.linspace(0, len(times) - 1, min(len(times), most)).round())
        return tuple(self.run.snapshot(times[int(k)]) for k in chosen) if times else ()

    def named(self, look: Snapshot, cloud: CloudFacts) -> Particles:
        """The charges of one cloud in a snapshot."""
        every = self.everyone(look)
        if len(self.run.header.clouds) == 1:
            return every
        return every.kept(every.cloud == cloud.index)

    def everyone(self, look: Snapshot) -> Particles:
        """The charges of a snapshot, as the step choice takes them; not to be changed."""
        if look.time not in self._known:
            if look.id.size > _MANY:
                self._known.clear()
            self._known[look.time] = self._laid_out(look)
        return self._known[look.time]

    @cached_property
    def _known(self) -> dict[float, Particles]:
        return {}

    def _laid_out(self, look: Snapshot) -> Particles:
        """In the order of their clouds."""
        n = look.id.size
        order = np.argsort(look.cloud, kind="stable")
        if n == 0:
            return no_particles()
        return Particles(
            np.ascontiguousarray(look.position[order].T),
            np.ascontiguousarray(look.velocity[order].T),
            look.charge[order],
            look.mass[order],
            look.weight[order],
            look.id[order],
            np.zeros(n, dtype=np.int64),
            look.cloud[order],
            np.zeros(n),
        )

    def finer(self, cloud: CloudFacts, factor: float) -> str:
        """How to have `factor` times as many simulated charges of a cloud, at the same charge."""
        kind = "source" if cloud.emitted else "cloud"
        if cloud.weight == 1.0:
            return (
                f'"{cloud.name}" is simulated charge by charge: more are had from several seeds '
                "(a study with `replicas`)"
            )
        count = cloud.count * factor
        weight = max(cloud.weight / factor, 1.0)
        if cloud.emitted:
            return f"{kind}.{cloud.name}.weight = {plain(weight)}"
        return f"{kind}.{cloud.name}.count = {plain(count)} with a weight of {plain(weight)} each"
