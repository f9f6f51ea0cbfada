"""What the pictures of a run cost: ``python tests/benchmarks/report_speed.py RUN`` (the folder of a search).

Prints seconds and bytes of sheet, page and film beside what is asked of them (20 s, 8 MB, 4 MB); exits 1 if one is missed.
"""

from __future__ import annotations

import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from gaitlab.report.animation import film_of, write_gif
from gaitlab.report.page import html_page
from gaitlab.report.run_folder import SavedRun, read_run
from gaitlab.report.sheet import sheet_files

SECONDS_ASKED = 20.0
LIMITS = {"sheet": 2e6, "page": 8e6, "film of three periods": 4e6}


def _film_bytes(run: SavedRun) -> int:
    if run.trace is None:
        raise SystemExit("the run holds no motion of its best wiring")
    with tempfile.TemporaryDirectory() as folder:
        film = film_of(run.trace, run.ring, run.best.wiring, title=run.robot.name)
        return write_gif(film, Path(folder) / "walk.gif").stat().st_size


def main(folder: str) -> int:
    """Measures each once, reading the run included."""
    work: dict[str, Callable[[SavedRun], int]] = {
        "sheet": lambda run: sum(len(content) for content in sheet_files(run, Path("sheet.pdf")).values()),
        "page": lambda run: len(html_page(run).encode("utf-8")),
        "film of three periods": _film_bytes,
    }
    missed = 0
    print(f"{'':<24}{'s':>8}{'asked':>8}{'MB':>8}{'asked':>8}")
    for name, run_work in work.items():
        start = time.perf_counter()
        size = run_work(read_run(folder))
        seconds = time.perf_counter() - start
        missed += seconds > SECONDS_ASKED or size > LIMITS[name]
        print(f"{name:<24}{seconds:>8.1f}{SECONDS_ASKED:>8.0f}{size / 1e6:>8.2f}{LIMITS[name] / 1e6:>8.0f}")
    return int(missed > 0)


if __name__ == "__main__":
    sys.exit(main(sys.argv[1]))
