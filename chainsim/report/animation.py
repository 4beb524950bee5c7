"""Writes the motion of a run as GIF (Pillow) or MP4 (ffmpeg, where it is installed)."""

from __future__ import annotations

import shutil
import subprocess
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
from PIL import Image

from chainsim.errors import CallError
from chainsim.report.drawing import draw_lift, drawing_parts
from chainsim.report.playback import chosen_samples
from chainsim.report.style import new_figure, plot_style

MAX_FRAMES = 500
"""Most frames of an animation [dimensionless]; each takes about a tenth of a second to draw."""

HEIGHT = 6.0
"""Height of a frame [inch]."""

DOTS = 100
"""Resolution of a frame [dots per inch]."""


def animate(rec: Any, path: str | Path, rate: float = 20.0, speed: float = 1.0) -> Path:
    """Write the motion of a run as a moving picture.

    Parameters
    ----------
    rec : Recording
        The run.
    path : str or Path
        File to write, ending in ``.gif`` or ``.mp4``.
    rate : float
        Pictures per second shown [1/s]; fewer where the run would need more than `MAX_FRAMES`.
    speed : float
        Seconds of the run per second shown [dimensionless].

    Returns
    -------
    Path
        The file written.

    Raises
    ------
    CallError
        If the ending is another one, or an MP4 is asked for and ffmpeg is not installed.
    """
    path = Path(path)
    write = {".gif": _write_gif, ".mp4": _write_mp4}.get(path.suffix.lower())
    if write is None:
        raise CallError(f"animation '{path.name}': the ending must be .gif or .mp4")
    span = float(rec.time[-1] - rec.time[0]) / speed
    rate = min(rate, max(MAX_FRAMES / max(span, 1e-9), 1.0))
    samples = chosen_samples(rec.time, [], rate / speed)[:-1]
    write(_pictures(rec, samples), path, rate)
    return path


def _pictures(rec: Any, samples: np.ndarray) -> Iterator[Image.Image]:
    """Yield a picture of the lift at each of the samples."""
    parts = drawing_parts(rec)
    left, bottom, right, top = parts.box
    width = min(max(HEIGHT * (right - left) / (top - bottom) + 1.0, 2.4), 9.0)
    with plot_style():
        figure, (axes,) = new_figure(width=width, height=HEIGHT)
        figure.set_dpi(DOTS)
        for sample in samples:
            for artist in (*axes.lines, *axes.collections, *axes.patches):
                artist.remove()
            draw_lift(axes, rec, int(sample), parts)
            axes.set_title(f"{rec.time[sample]:.2f} s")
            figure.canvas.draw()
            figure.set_layout_engine("none")  # the first picture has fixed the layout for all
            pixels = np.asarray(figure.canvas.buffer_rgba())[..., :3]  # type: ignore[attr-defined]
            even = pixels[: pixels.shape[0] // 2 * 2, : pixels.shape[1] // 2 * 2]
            yield Image.fromarray(np.ascontiguousarray(even))


def _write_gif(frames: Iterator[Image.Image], path: Path, rate: float) -> None:
    """Write pictures as GIF that repeats without end."""
    images = [frame.quantize(64) for frame in frames]
    duration = max(round(1000.0 / rate), 20)
    images[0].save(path, save_all=True, append_images=images[1:], duration=duration, loop=0)


def _write_mp4(frames: Iterator[Image.Image], path: Path, rate: float) -> None:
    """Write pictures as MP4 by ffmpeg."""
    program = shutil.which("ffmpeg")
    if program is None:
        raise CallError(
            f"animation '{path.name}': MP4 needs ffmpeg, which is not installed; use .gif"
        )
    first = next(frames)
    size = f"{first.width}x{first.height}"
    command = [program, "-y", "-loglevel", "error", "-f", "rawvideo", "-pix_fmt", "rgb24"]
    command += ["-s", size, "-r", f"{rate:.6g}", "-i", "-", "-pix_fmt", "yuv420p"]
    command += ["-preset", "veryfast", str(path)]
    with subprocess.Popen(command, stdin=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stdin is not None
        process.stdin.write(first.tobytes())
        for frame in frames:
            process.stdin.write(frame.tobytes())
        _, errors = process.communicate()
    if process.returncode:
        text = errors.decode(errors="replace").strip().splitlines()
        raise CallError(
            f"animation '{path.name}': ffmpeg failed: {text[-1] if text else 'no reason'}"
        )
