"""The bench sheet: one A4 page that goes to the workshop, drawn from a saved run."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from gaitlab.errors import InputError, must
from gaitlab.report.cautions import CAUTIONS, ESTIMATES
from gaitlab.report.paper import Paper
from gaitlab.report.run_folder import SavedRun
from gaitlab.report.sheet_content import SheetContent, TubeRow, row_text, sheet_content
from gaitlab.report.style import BLUE, INK, MUTED, SERIES, bare, figure_bytes, styled
from gaitlab.report.tube_plan import draw_tube_plan
from gaitlab.report.words import KPA, MM, number

A4_MM = (210.0, 297.0)
LEFT, WIDTH = 13.0, 184.0
GUTTER = 7.0
HALF = 0.5 * (WIDTH - GUTTER)
RIGHT = LEFT + HALF + GUTTER
BOTTOM = 291.0
TYPE_SCALES = (1.0, 0.95, 0.9, 0.85, 0.8, 0.75, 0.7)  # the first at which everything fits is taken
TABLE_MM = 44.0  # height the tube table may take; more rows are set tighter
ROWS_WIDE = 8  # more tubes than this go into two tables side by side
COLUMNS = (24.0, 26.0, 18.0, 36.0, 36.0, 22.0, 22.0)
HEADS = (
    "from",
    "to inlet",
    "cut, mm",
    "after output 1, s (phase)",
    "gauge should swing, kPa",
    "measured low",
    "measured high",
)
HALF_COLUMNS = (17.5, 17.0, 12.0, 24.0, 18.0)
HALF_HEADS = ("from", "to inlet", "cut, mm", "after 1, s (phase)", "gauge, kPa")


def bench_sheet(run: SavedRun) -> Figure:
    """The sheet as a figure of A4 size, in the largest type that leaves room for all of it."""
    content = sheet_content(run)
    with styled():
        for scale in TYPE_SCALES:
            paper = Paper.blank(*A4_MM, type_scale=scale)
            if _draw_all(paper, run, content) <= BOTTOM:
                break
    return paper.figure


def _draw_all(paper: Paper, run: SavedRun, content: SheetContent) -> float:
    y = _draw_head(paper, content)
    y = _draw_tubes(paper, content, y + 3.0)
    y = _draw_middle(paper, run, content, y + 4.0)
    y = _draw_orientation(paper, content, y + 3.0)
    y = max(_draw_assembly(paper, content, y + 3.0), _draw_faults(paper, content, y + 3.0))
    return _draw_cautions(paper, y + 3.5)


def sheet_files(run: SavedRun, pdf: Path) -> dict[Path, bytes]:
    """The sheet's bytes by file: `pdf` and a PNG of the same name beside it.

    Raises InputError when `pdf` does not end in .pdf.
    """
    if pdf.suffix.lower() != ".pdf":
        raise InputError(must("file of the sheet", "named .pdf", pdf.name))
    figure = bench_sheet(run)
    return {pdf: figure_bytes(figure, ".pdf"), pdf.with_suffix(".png"): figure_bytes(figure, ".png", dpi=150)}


def _draw_head(paper: Paper, content: SheetContent) -> float:
    paper.box(0.0, 0.0, A4_MM[0], 24.0, fill="#e9eef2", edge="none")
    paper.line(LEFT, 9.0, "BENCH SHEET", size=8.0, bold=True, colour=MUTED)
    paper.line(LEFT + WIDTH, 9.0, "built by ____________  on ____________", size=7.5, colour=MUTED, align="right")
    paper.line(LEFT, 16.2, content.title, size=16.0, bold=True, width=WIDTH)
    paper.line(LEFT, 21.2, content.subtitle, size=7.2, colour=MUTED, width=WIDTH)
    return 24.0


def _draw_tubes(paper: Paper, content: SheetContent, y: float) -> float:
    bore = number(MM * content.bore_m)
    y = paper.heading(LEFT, y, f"1  Tubes, bore {bore} mm: which output goes to which inlet", width=WIDTH)
    rows = [_cells(row) for row in content.tubes]
    if len(rows) <= ROWS_WIDE:
        row_mm = paper.type_scale * min(6.0, TABLE_MM / max(len(rows), 1))
        below = paper.table(
            LEFT, y, COLUMNS, rows, heads=HEADS, row_mm=row_mm, size=min(9.0, 1.6 * row_mm / paper.type_scale)
        )
    else:
        below = _draw_two_tables(paper, [row[: len(HALF_HEADS)] for row in rows], y)
    if content.open_inlets:
        words = f"Open to atmosphere, no tube: {', '.join(content.open_inlets)}."
        below = paper.paragraph(LEFT, below, words, width=WIDTH, size=7.6)
    return below


def _draw_two_tables(paper: Paper, rows: list[tuple[str, ...]], y: float) -> float:
    half = (len(rows) + 1) // 2
    row_mm = paper.type_scale * min(5.0, TABLE_MM / half)
    size = min(7.4, 1.75 * row_mm / paper.type_scale)
    ends = [
        paper.table(x, y, HALF_COLUMNS, part, heads=HALF_HEADS, row_mm=row_mm, size=size)
        for x, part in ((LEFT, rows[:half]), (RIGHT, rows[half:]))
    ]
    return max(ends)


def _cells(row: TubeRow) -> tuple[str, ...]:
    source, inlet = row_text(row)
    moment = f"{number(row.delay_s, 2)}  ({number(row.phase, 2)})" if np.isfinite(row.phase) else "–"
    swing = f"{number(row.least_Pa / KPA)} – {number(row.peak_Pa / KPA)}"
    return source, inlet, number(MM * row.length_m, 0), moment, swing, "", ""


def _draw_middle(paper: Paper, run: SavedRun, content: SheetContent, y: float) -> float:
    """Plan and gauge curves at the left, the expected figures at the right."""
    top = paper.heading(LEFT, y, "2  Plan from above, ring block drawn aside", width=HALF)
    draw_tube_plan(bare(paper.inset(LEFT + 10.0, top + 2.0, HALF - 11.0, 42.0)), run.robot, run.best.wiring)
    below = paper.heading(RIGHT, y, "3  What to expect", width=HALF)
    for name, value in content.expected:
        start = below
        below = paper.paragraph(RIGHT + 17.0, start, value, width=HALF - 17.0, size=7.6) + 0.7
        paper.paragraph(RIGHT, start, name, width=17.0, size=7.6, bold=True)
    chart = max(below + 3.5, y + 30.0)
    _draw_gauges(bare(paper.inset(RIGHT + 10.0, chart, HALF - 12.5, max(y + 55.0 - chart - 4.0, 17.0))), run)
    return max(y + 57.0, chart + 24.0)


def _draw_gauges(ax: Axes, run: SavedRun) -> None:
    """Vacuum at every port over one period, as fast gauges would draw it."""
    rows = run.ring.output_vacuum_Pa
    phase = np.arange(rows.shape[1] + 1) / rows.shape[1]
    styles = ("-", "--", "-.", ":")
    for k, row in enumerate(rows):
        wave = np.append(row, row[0]) / KPA
        ax.plot(phase, wave, color=SERIES[k % len(SERIES)], ls=styles[k % len(styles)], lw=1.1)
        top = int(np.argmax(wave[:-1]))
        ax.text(phase[top], wave[top] + 1.0, str(k + 1), fontsize=6.5, ha="center", va="bottom", color=INK)
    ax.set_xlim(0, 1)
    ax.set_ylim(bottom=0, top=1.18 * float(rows.max()) / KPA)
    ax.set_xlabel("phase (periods), numbers: outputs", fontsize=7, labelpad=1)
    ax.set_ylabel("vacuum (kPa)", fontsize=7)
    ax.tick_params(labelsize=6.5, length=2)


def _draw_orientation(paper: Paper, content: SheetContent, y: float) -> float:
    below = y + 2.2
    below = paper.paragraph(
        LEFT + 3.0, below, "4  Which way round the ring block goes", width=WIDTH - 6.0, size=9.0, bold=True
    )
    for k, words in enumerate(content.orientation):
        below = paper.paragraph(LEFT + 3.0, below + 0.5, words, width=WIDTH - 6.0, size=8.0, bold=k == 1)
    paper.box(LEFT, y, WIDTH, below - y + 2.6, fill="#fdf3e1", edge="#e69f00", radius=1.5)
    return below + 2.6


def _draw_assembly(paper: Paper, content: SheetContent, y: float) -> float:
    y = paper.heading(LEFT, y, "5  Order of assembly", width=HALF)
    for k, words in enumerate(content.assembly):
        paper.paragraph(LEFT, y, str(k + 1), width=5.0, size=7.6, bold=True)
        y = paper.paragraph(LEFT + 5.0, y, words, width=HALF - 5.0, size=7.6) + 0.8
    return y


def _draw_faults(paper: Paper, content: SheetContent, y: float) -> float:
    y = paper.heading(RIGHT, y, "6  When it does not walk, check first", width=HALF)
    for name, words in content.faults:
        y = paper.paragraph(RIGHT, y, name, width=HALF, size=7.6, bold=True)
        y = paper.paragraph(RIGHT, y, words, width=HALF, size=7.4) + 0.8
    return y


def _draw_cautions(paper: Paper, y: float) -> float:
    top, half = y, (WIDTH - 9.0) / 2
    y = paper.paragraph(LEFT + 3.0, y + 0.8, "Cautions", width=30.0, size=8.6, bold=True) + 0.4
    ends = []
    for column in (0, 1):
        below, x = y, LEFT + 3.0 + column * (half + 3.0)
        for name, words in CAUTIONS[3 * column : 3 * column + 3]:
            below = paper.paragraph(x, below, f"{name}: {words}", width=half, size=6.7) + 0.4
        ends.append(below)
    below = paper.paragraph(LEFT + 3.0, max(ends) + 0.3, ESTIMATES, width=WIDTH - 6.0, size=6.9, bold=True)
    paper.box(LEFT, top, WIDTH, below - top + 2.2, fill="#f6f7f8", edge=BLUE, radius=1.5)
    return below + 2.2
