"""All kinds of images a scenario may ask for. A new one is one new file and one line here."""

from __future__ import annotations

from driftwell.images.cylinder import CylinderImages
from driftwell.images.electrodes import ElectrodeImages
from driftwell.images.form import ImagesForm
from driftwell.images.gap import PlatesImages
from driftwell.images.plane import PlaneImages
from driftwell.images.sphere import SphereImages

IMAGE_KINDS: tuple[type[ImagesForm], ...] = (
    PlaneImages,
    PlatesImages,
    SphereImages,
    CylinderImages,
    ElectrodeImages,
)
