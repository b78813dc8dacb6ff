"""How a movie is asked for."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.report.figures.options import FigureError, plane_axes

FORMATS = ("mp4", "gif")
PLANES = "zx,zy,xy"
MOST_SECONDS, MOST_RATE = 600.0, 120.0


@dataclass(frozen=True, slots=True)
class MovieOptions:
    """What a user may choose.

    seconds : length; rate : frames a second
    planes : planes shown side by side, such as "zx" or "zx,xy"
    dots : charges shown at the most
    height : of the picture, in dots
    """

    seconds: float = 10.0
    rate: float = 25.0
    planes: str = PLANES
    dots: int = 5000
    height: int = 480

    @property
    def frames(self) -> int:
        """Number of frames."""
        return max(2, round(self.seconds * self.rate))

    @property
    def axes(self) -> list[tuple[int, int]]:
        """Numbers of the axes across and up, of each plane."""
        return [plane_axes(word.strip()) for word in self.planes.split(",")]

    def check(self) -> None:
        """Raises FigureError where a choice has no sense."""
        for name, given, most in (
            ("seconds", self.seconds, MOST_SECONDS),
            ("frames-per-second", self.rate, MOST_RATE),
        ):
            if not 0.0 < given <= most:
                raise FigureError(f"{name}: {given:g} is beyond what is made; needs 0 to {most:g}.")
        if not self.dots >= 1 or not 120 <= self.height <= 2160:
            raise FigureError("dots, height: needs at least one dot, and a height of 120 to 2160.")
        if len(self.axes) > 3:
            raise FigureError("plane: at most three planes are shown side by side.")
