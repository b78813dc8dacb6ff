"""Frames into a file: MP4 by ffmpeg where it is on the machine, GIF by the imaging library.

The file is made beside its place and renamed at the end, so that one that is interrupted
leaves nothing.
"""

from __future__ import annotations

import shutil
import subprocess
import tempfile
from collections.abc import Iterable
from contextlib import suppress
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from driftwell.errors import RecordError
from driftwell.record.commit import PART
from driftwell.report.figures.options import FigureError
from driftwell.report.movie.options import FORMATS

Frame = NDArray[np.uint8]

ENCODER = "ffmpeg"
COLOURS = 64
"""Of a GIF: the most frequent of its first frame, which has the clouds' and the surfaces'."""


def form_of(path: Path) -> str:
    """The format of a file by its ending; raises FigureError where none is meant or can be made."""
    form = path.suffix.lower().lstrip(".")
    if form not in FORMATS:
        raise FigureError(f"{path}: a movie is an .mp4 or a .gif; give the file such an ending.")
    if form == "mp4" and shutil.which(ENCODER) is None:
        raise FigureError(
            f"{path}: MP4 needs {ENCODER}, which is not on this machine. Install it (on Debian: "
            f"apt install {ENCODER}), or write a GIF: -o {path.with_suffix('.gif')}"
        )
    return form


def encode(
    path: Path, frames: Iterable[Frame], size: tuple[int, int], rate: float, title: str
) -> None:
    """Put the frames, (height, width, 4), into a file.

    Raises RecordError where it cannot be written, FigureError where the encoder fails.
    """
    part = path.with_name(path.name + PART)
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        part.touch()
        if form_of(path) == "mp4":
            _mp4(part, frames, size, rate, title)
        else:
            _gif(part, frames, rate)
        part.replace(path)
    except OSError as fault:
        raise RecordError(
            f"{path}: cannot be written ({fault.strerror or fault}). Make space, give access, or "
            "name another file with -o."
        ) from fault
    finally:
        with suppress(OSError):
            part.unlink(missing_ok=True)


def _mp4(
    part: Path, frames: Iterable[Frame], size: tuple[int, int], rate: float, title: str
) -> None:
    command = [
        *(ENCODER, "-hide_banner", "-loglevel", "error", "-y", "-f", "rawvideo"),
        *("-pix_fmt", "rgba", "-s", f"{size[0]}x{size[1]}", "-r", f"{rate:g}", "-i", "-"),
        *("-an", "-c:v", "libx264", "-preset", "medium", "-crf", "18", "-pix_fmt", "yuv420p"),
        *("-threads", "1", "-movflags", "+faststart", "-fflags", "+bitexact"),
        *("-flags:v", "+bitexact", "-metadata", f"title={title}", "-f", "mp4", str(part)),
    ]
    with tempfile.TemporaryFile() as said:
        process = subprocess.Popen(
            command, stdin=subprocess.PIPE, stdout=subprocess.DEVNULL, stderr=said
        )
        try:
            with suppress(BrokenPipeError):  # the encoder says why, below
                for frame in frames:
                    process.stdin.write(frame.tobytes())  # type: ignore[union-attr]
                process.stdin.close()  # type: ignore[union-attr]
            code = process.wait()
        finally:
            with suppress(OSError):
                process.stdin.close()  # type: ignore[union-attr]
            if process.poll() is None:
                process.kill()
                process.wait()
        if code:
            said.seek(0)
            words = said.read().decode(errors="replace").strip().splitlines()
            raise FigureError(
                f"{part.name.removesuffix(PART)}: {ENCODER} cannot make the movie "
                f"({words[-1] if words else f'code {code}'}). Write a GIF instead."
            )


def _gif(part: Path, frames: Iterable[Frame], rate: float) -> None:
    """All frames in the colours of the first, one in memory at a time."""
    pictures = (Image.fromarray(np.ascontiguousarray(frame[..., :3])) for frame in frames)
    first = next(pictures).quantize(COLOURS)
    with part.open("wb") as file:
        first.save(
            file,
            format="GIF",
            save_all=True,
            append_images=(
                picture.quantize(palette=first, dither=Image.Dither.NONE) for picture in pictures
            ),
            duration=max(20, 10 * round(100.0 / rate)),
            loop=0,
        )
