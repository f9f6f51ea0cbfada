"""A walk as moving pictures: the body from the side and from above, and the ring with its signal running round."""

from __future__ import annotations

import shutil
import subprocess
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from PIL import Image

from gaitlab.errors import InputError, RunFolderError, must
from gaitlab.gait.records import Trace
from gaitlab.report.body_view import TRUNK, TRUNK_TOP, draw_body, draw_feet, faded, vacuum_colour
from gaitlab.report.canvas import Canvas
from gaitlab.report.moments import even_moments
from gaitlab.report.ring_view import draw_ring
from gaitlab.report.solids import Solid, solids_of
from gaitlab.report.stage_set import COLUMN, RING, STEEL, STEEL_EDGE, TRAY, StageSet, Stretch, stage_set
from gaitlab.report.style import AMBER, BLUE, INK, MUTED, ORANGE, RULE, rgb255
from gaitlab.ring.waves import RingRun
from gaitlab.wiring.wiring import Wiring

PERIODS = 3
FRAME_S = 0.04  # GIF times are whole hundredths of a second; 25 pictures a second look smooth
FRAMES_PER_PERIOD_LIMITS = (12, 50)
VACUUM_SHADES = 80  # of the 256 colours of a GIF, chosen by us
BLENDS = 20
MM = 1e3
TRAIL_PERIODS = 1.0


@dataclass(frozen=True)
class Film:
    """Everything that is needed to paint any frame: the recorded walk, its ring and wiring, and the frames chosen."""

    trace: Trace
    ring: RingRun
    wiring: Wiring
    solids: tuple[Solid, ...]
    frames: tuple[int, ...]
    stage: StageSet
    full_Pa: float
    frame_s: float


def film_of(
    trace: Trace,
    ring: RingRun,
    wiring: Wiring,
    *,
    title: str,
    periods: int = PERIODS,
    frames_per_period: int | None = None,
) -> Film:
    """The last `periods` whole periods of the trace (fewer if it is shorter), `frames_per_period` pictures each.

    Left out, as many as give about 25 pictures a second, within `FRAMES_PER_PERIOD_LIMITS`.

    Raises InputError when the trace holds less than one period or the counts are not above zero.
    """
    low, high = FRAMES_PER_PERIOD_LIMITS
    per_period = frames_per_period or min(max(round(trace.period_s / FRAME_S), low), high)
    frames = even_moments(trace, periods=periods, per_period=per_period)
    solids = solids_of(trace.parts)
    full = max(float(trace.vacuum_Pa.max()), float(ring.output_vacuum_Pa.max()), 1.0)
    stretch = Stretch.of(trace, solids, range(frames[0], frames[-1] + 1))
    stage = stage_set(stretch, title=title, subtitle=wiring.text(), full_Pa=full)
    return Film(trace, ring, wiring, solids, frames, stage, full, trace.period_s / per_period)


def painted(film: Film, index: int) -> Image.Image:
    """Frame number `index` of the film as a finished picture."""
    frame = film.frames[index]
    canvas = film.stage.backdrop.copy()
    _draw_start_line(canvas, film)
    _draw_travel(canvas, film, frame)
    _draw_trails(canvas, film, frame)
    for camera, radius in ((film.stage.side, 5.0), (film.stage.above, 5.0)):
        draw_body(canvas, film.trace, film.solids, frame=frame, camera=camera, full_Pa=film.full_Pa)
        draw_feet(canvas, film.trace, frame=frame, camera=camera, radius_px=radius)
    draw_ring(canvas, film.ring, film.wiring, phase=_phase(film, frame), place=RING, full_Pa=film.full_Pa)
    _draw_figures(canvas, film, index)
    return canvas.finished()


def _phase(film: Film, frame: int) -> float:
    return float(film.trace.time_s[frame] / film.trace.period_s)


def _nose_m(film: Film, frame: int) -> float:
    """How far forward the first block's centre is."""
    return float(film.trace.position_m[frame, 0, 0])


def _draw_start_line(canvas: Canvas, film: Film) -> None:
    """Where the body's middle was at the first frame, in both views."""
    first = film.trace.position_m[film.frames[0], 0]
    for camera in (film.stage.side, film.stage.above):
        x = float(camera.pixels(first[None, :])[0, 0])
        low, high = film.stage.stretch.low_m[camera.axis], film.stage.stretch.high_m[camera.axis]
        ends = [camera.level_px - (value - camera.level_m) * camera.px_per_m for value in (high, low)]
        canvas.dashes((x, ends[0]), (x, ends[1]), colour=MUTED, width=1.0)


def _draw_travel(canvas: Canvas, film: Film, frame: int) -> None:
    """The way so far as a blue bar in the tray's floor, from the start line to the body's middle."""
    camera = film.stage.side
    both = film.trace.position_m[[film.frames[0], frame], 0]
    start, here = (float(x) for x in camera.pixels(both)[:, 0])
    y = camera.level_px + 3.5
    canvas.line([(start, y), (here, y)], colour=BLUE, width=5.0)
    canvas.disc((here, y), 4.0, fill=BLUE)


def _draw_trails(canvas: Canvas, film: Film, frame: int) -> None:
    """Where the loaded feet slid during the last period, from above."""
    since = film.trace.time_s[frame] - TRAIL_PERIODS * film.trace.period_s
    first = int(np.searchsorted(film.trace.time_s, since))
    for foot in range(len(film.trace.feet)):
        pixels = film.stage.above.pixels(film.trace.foot_m[first : frame + 1, foot])
        loaded = film.trace.loaded[first : frame + 1, foot]
        for k in np.flatnonzero(loaded[1:] & loaded[:-1]):
            canvas.line(pixels[k : k + 2], colour=ORANGE, width=2.4)


def _draw_figures(canvas: Canvas, film: Film, index: int) -> None:
    """Travelled distance large, period and time small; and the distance as an arrow under the start line."""
    frame, first = film.frames[index], film.frames[0]
    travelled = MM * (_nose_m(film, frame) - _nose_m(film, first))
    left, right = COLUMN
    elapsed = float(film.trace.time_s[frame] - film.trace.time_s[first])
    canvas.text((left, 346), "travelled", size=10.5, colour=MUTED)
    canvas.text((left, 370), f"{travelled:+.1f} mm".replace("-", "−"), size=22, bold=True, colour=BLUE)
    per_period = len(film.frames) * film.frame_s / film.trace.period_s
    turn = int(elapsed / film.trace.period_s + 1e-6) + 1
    canvas.text((left, 396), f"period {turn} of {round(per_period)}", size=10.5)
    canvas.text((right, 396), f"{elapsed:.2f} s", size=10.5, anchor="rm")
    canvas.text((left, 414), f"one period lasts {film.trace.period_s:.2f} s", size=10.5, colour=INK)


def write_gif(film: Film, path: str | Path) -> Path:
    """The film as an endless GIF at its own speed, one palette for all frames."""
    return save_gif(list(_all_painted(film)), film.frame_s, path)


def save_gif(pictures: Sequence[Image.Image], frame_s: float, path: str | Path) -> Path:
    """Pictures as an endless GIF in the film's palette.

    GIF times are whole hundredths of a second, and viewers slow down below two of them. Raises InputError for a name that
    does not end in .gif or a folder that is not there.
    """
    target, palette = _named(path, ".gif"), _palette()
    indexed = [picture.quantize(palette=palette, dither=Image.Dither.NONE) for picture in pictures]
    duration_ms = max(10 * round(100 * frame_s), 20)
    try:
        indexed[0].save(target, save_all=True, append_images=indexed[1:], duration=duration_ms, loop=0, optimize=False)
    except OSError as error:
        raise RunFolderError(
            must("film file", "writable", str(target), (error.strerror or str(error)).lower())
        ) from error
    return target


def _palette() -> Image.Image:
    """The film's own colours and their blends into paper and ink: chosen, not guessed from a frame, so nothing flickers."""
    scale = [vacuum_colour(k / (VACUUM_SHADES - 1), 1.0) for k in range(VACUUM_SHADES)]
    colours = list(scale)
    for colour in (INK, MUTED, BLUE, ORANGE, AMBER):
        colours += [faded(colour, k / (BLENDS - 1)) for k in range(BLENDS)]
    colours += [TRUNK, TRUNK_TOP, STEEL, STEEL_EDGE, TRAY, RULE]
    colours += [faded(shade, 0.5) for shade in scale[VACUUM_SHADES // 2 :: 2]]
    colours += [faded(shade, -0.25) for shade in scale[: VACUUM_SHADES // 2 : 2]]
    image = Image.new("P", (1, 1))
    image.putpalette([channel for colour in colours[:256] for channel in rgb255(colour)])
    return image


def write_mp4(film: Film, path: str | Path) -> Path:
    """The film as H.264 through ffmpeg. Raises InputError when ffmpeg is not on the path or gives up."""
    target = _named(path, ".mp4")
    program = shutil.which("ffmpeg")
    if program is None:
        raise InputError(must("ffmpeg", "on the path for MP4", None, "install ffmpeg or write a .gif instead"))
    first = painted(film, 0)
    command = [program, "-loglevel", "error", "-y", "-f", "rawvideo", "-pix_fmt", "rgb24"]
    command += ["-s", f"{first.width}x{first.height}", "-r", f"{1 / film.frame_s:.4f}", "-i", "-", "-an"]
    command += ["-c:v", "libx264", "-pix_fmt", "yuv420p", "-crf", "20", "-fflags", "+bitexact", str(target)]
    stream = b"".join(image.tobytes() for image in _all_painted(film))
    done = subprocess.run(command, input=stream, capture_output=True, check=False)
    if done.returncode:
        raise InputError(must("ffmpeg", "able to write MP4", done.stderr.decode(errors="replace").strip()[-300:]))
    return target


def _all_painted(film: Film) -> Iterator[Image.Image]:
    return (painted(film, index) for index in range(len(film.frames)))


def _named(path: str | Path, ending: str) -> Path:
    target = Path(path)
    if target.suffix.lower() != ending:
        raise InputError(must("film file", f"named {ending}", target.name))
    if not target.parent.is_dir():
        raise InputError(must("folder of the film", "there already", str(target.parent), "make it first"))
    return target
