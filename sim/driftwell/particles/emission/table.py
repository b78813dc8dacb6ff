"""All kinds of emitters a source may have. A new kind is one new file and one entry here."""

from __future__ import annotations

from driftwell.particles.emission.disc import DiscEmitter
from driftwell.particles.emission.electrode import ElectrodeEmitter
from driftwell.particles.emission.file import FileEmitter
from driftwell.particles.emission.form import EmitterForm
from driftwell.particles.emission.point import PointEmitter
from driftwell.particles.emission.ring import RingEmitter

EMITTER_KINDS: tuple[type[EmitterForm], ...] = (
    PointEmitter,
    DiscEmitter,
    RingEmitter,
    ElectrodeEmitter,
    FileEmitter,
)
