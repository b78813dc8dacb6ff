"""The scenario's [coulomb] section."""

from __future__ import annotations

from typing import Annotated, Literal, Self

from driftwell.forms import Bound, Form, Length, Name, NonNegative, Real, checked, key, refuse

MIXED_ACCURACY = 1e-6
"""The finest `accuracy` that pairs summed in mixed precision, each good to 1e-7, leave room for."""

RelativeError = Annotated[Real, Bound(least=1e-8, most=1e-1)]


class Coulomb(Form):
    """How the force between the charges is summed."""

    method: Literal["auto", "direct", "tree", "off"] = key(
        "direct: every pair, exactly; tree: far charges in groups, to `accuracy`; auto: whichever "
        "is faster for that many charges on this machine; off: charges do not feel each other",
        default="auto",
    )
    accuracy: RelativeError = key(
        "relative error of the forces, root mean square over the charges, that the tree may have; "
        "it is measured while the run goes on",
        default=1e-4,
    )
    precision: Literal["auto", "double", "mixed"] = key(
        "mixed: r^-3 of a pair to 1e-7, differences and sums in full; double: all in full; auto: "
        "mixed within the tree where `accuracy` is 1e-6 or more, double in the direct sum",
        default="auto",
    )
    softening: NonNegative[Length] = key(
        "length e in the force law r / (r^2 + e^2)^(3/2); for macro-particles, 0 for real charges",
        default=0.0,
        example="5 um",
    )
    frame: Literal["auto", "laboratory", "bunch"] = key(
        "where charges are taken as at rest. laboratory: here, which leaves magnetic forces out; "
        "bunch: in the mean rest frame of each cloud, so that they are in; auto: in one frame for "
        "all, where charges move together so fast that it matters to `accuracy`",
        default="auto",
    )
    share_frame: tuple[tuple[Name, ...], ...] = key(
        "groups of clouds that move together as one bunch with one frame; others have their own",
        default=(),
        example=[["head", "tail"]],
    )

    @checked
    def _groups_are_clear(self) -> Self:
        if self.share_frame and self.frame != "bunch":
            raise refuse(f'share_frame with frame = "{self.frame}"; needs frame = "bunch"')
        names = [name for group in self.share_frame for name in group]
        twice = next((name for k, name in enumerate(names) if name in names[:k]), None)
        if twice is not None:
            raise refuse(f'share_frame has "{twice}" twice: a cloud belongs to one group')
        return self

    @checked
    def _precise_enough(self) -> Self:
        if self.precision == "mixed" and self.accuracy < MIXED_ACCURACY:
            raise refuse(
                f'precision = "mixed" errs by 1e-7 in every pair, too much for accuracy = '
                f"{self.accuracy:g}; needs an accuracy of {MIXED_ACCURACY:g} or more, or "
                'precision = "double"'
            )
        return self
