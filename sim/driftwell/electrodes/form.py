"""Electrodes as a scenario declares them: `[electrodes]` for all, an `[[electrode]]` for each."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated, Self

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.electrodes.shapes.table import SHAPE_KINDS
from driftwell.forms import (
    Bound,
    Form,
    Length,
    Name,
    Point,
    Positive,
    Real,
    checked,
    key,
    one_of,
    refuse,
    spelled,
)
from driftwell.forms.waveforms import VoltageWave, waveform_words

if TYPE_CHECKING:
    AnyShape = ShapeForm
else:
    AnyShape = one_of(SHAPE_KINDS)
MOST_ACCURATE, LEAST_ACCURATE = 1e-7, 0.1


class Enclosure(Form):
    """A grounded can around all electrodes: round for drawn ones, a box for those in space."""

    radius: Positive[Length] | None = key("inner radius, of a round can about z", default=None)
    length: Positive[Length] | None = key(
        "inner length along z, of the round can of axisymmetric electrodes", default=None
    )
    size: tuple[Positive[Length], Positive[Length], Positive[Length]] | None = key(
        "inner lengths of the box, for electrodes in space", default=None
    )


class Region(Form):
    """The part of space the field is worked out in: charges that leave it are lost."""

    r: Positive[Length] | None = key("largest distance from z, if axisymmetric", default=None)
    x: tuple[Length, Length] | None = key("from and to along x", default=None)
    y: tuple[Length, Length] | None = key("from and to along y", default=None)
    z: tuple[Length, Length] | None = key("from and to along z", default=None)

    @checked
    def _ordered(self) -> Self:
        for name in ("x", "y", "z"):
            pair = getattr(self, name)
            if pair is not None and not pair[0] < pair[1]:
                raise refuse(f"the first number of `{name}` must be less than the second")
        return self


class Electrodes(Form):
    """What all electrodes of a scenario have in common, and how well their field is to be known."""

    geometry: Geometry = key(
        "axisymmetric: drawn in (r, z) and turned about z; planar: drawn in (x, y), the same at "
        "every z; spatial: bodies in space",
        default="axisymmetric",
    )
    centre: Point = key("place the electrodes' own coordinates count from", default=(0.0, 0.0, 0.0))
    field_accuracy: Annotated[Real, Bound(least=MOST_ACCURATE, most=LEAST_ACCURATE)] = key(
        "rms error of the field wanted, as part of the field's rms over the region, but right "
        "beside electrodes, whose edges no map follows; the largest error is told",
        default=1e-4,
    )
    enclosure: Enclosure | None = key(
        "a grounded can around all electrodes; left out: open space", default=None
    )
    region: Region | None = key(
        "where the field is worked out; left out: what the electrodes enclose or lie around",
        default=None,
    )
    multipole_radius: Positive[Length] | None = key(
        "radius the multipole content about `centre` is given for; left out: half the distance to "
        "the nearest electrode",
        default=None,
    )


class Electrode(Form):
    """A conductor with one voltage, of one body or several."""

    name: Name = key("what the electrode is called in messages and results")
    voltage: VoltageWave = key("its voltage against ground", example="200 V")
    shape: tuple[AnyShape, ...] = key("its bodies, one or more")

    def words(self) -> str:
        """One sentence for `driftwell check`."""
        shapes = "; ".join(shape.words() for shape in self.shape)
        return f"{waveform_words(self.voltage, 'V')}: {shapes}"


def electrodes_words(electrodes: Electrodes | None) -> str:
    """What all electrodes have in common, for `driftwell check`."""
    common = electrodes or Electrodes()
    words = f"{common.geometry}, field to {common.field_accuracy:g} of its rms"
    if any(common.centre):
        words += ", about (" + ", ".join(spelled(x, "m") for x in common.centre) + ")"
    can = common.enclosure
    if can is not None:
        sizes = [can.radius, can.length, *(can.size or ())]
        said = " x ".join(spelled(size, "m") for size in sizes if size is not None)
        words += f"; within a grounded can, {said}"
    return words
