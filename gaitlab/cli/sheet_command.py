"""gaitlab sheet: one A4 page for the bench from a saved run."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from gaitlab.cli.files import write_new
from gaitlab.cli.options import force_option, json_option, out_option
from gaitlab.cli.output import print_facts, print_json, warn

if TYPE_CHECKING:
    from gaitlab.report.run_folder import SavedRun


@click.command("sheet")
@click.argument("run", metavar="RUN", type=click.Path(path_type=Path))
@out_option("PDF to write, with a PNG of the same name beside it; default: RUN/sheet.pdf.")
@force_option
@json_option
def command(run: Path, out: Path | None, force: bool, as_json: bool) -> None:
    """One A4 page for the bench: tubes to cut, gauges to expect, order of work, cautions.

    RUN is the folder of a search (gaitlab search ROBOT --out RUN); the sheet is of its best wiring, nothing is simulated.
    Refused (exit 2): a folder that holds no finished run, an --out that does not end in .pdf, files that are there already
    (--force replaces them).

    \b
      gaitlab sheet runs/row5
      gaitlab sheet runs/row5 --out bench.pdf --json
    """
    from gaitlab.report.run_folder import read_run
    from gaitlab.report.sheet import sheet_files

    saved = read_run(run)
    files = sheet_files(saved, run / "sheet.pdf" if out is None else out)
    for path, content in files.items():
        write_new(path, content, force=force)
    if not saved.finished:
        warn("the search was cut short: the sheet is of the best wiring known so far")
    facts = summary(saved)
    facts["files"] = [str(path) for path in files]
    if as_json:
        print_json(facts)
    else:
        _print_human(facts)


def summary(saved: SavedRun) -> dict[str, Any]:
    """What the sheet says, keyed as --json prints it."""
    from gaitlab.report.sheet_content import tube_rows
    from gaitlab.report.words import reversed_text, speed_estimate

    estimate = speed_estimate(saved)
    speed = None if estimate is None else dict(zip(("low", "middle", "high"), _mm(estimate.speed_m_s), strict=True))
    return {
        "name": saved.robot.name,
        "wiring": saved.best.wiring.as_dict(),
        "period_s": saved.ring.period_s,
        "travel_mm_per_period": saved.best.walk.travel_m * 1e3,
        "speed_mm_s": speed,
        "speed_basis": None if estimate is None else estimate.basis,
        "reversed": reversed_text(saved.best),
        "tubes": [
            {
                "source": row.source,
                "inlet": row.inlet,
                "cut_mm": row.length_m * 1e3,
                "phase": row.phase,
                "least_vacuum_kPa": row.least_Pa / 1e3,
                "peak_vacuum_kPa": row.peak_Pa / 1e3,
            }
            for row in tube_rows(saved)
        ],
    }


def _mm(values_m: tuple[float, float, float]) -> list[float]:
    return [value * 1e3 for value in values_m]


def _print_human(facts: dict[str, Any]) -> None:
    print_facts(
        [
            ("robot", facts["name"]),
            ("wiring", " ".join(f"{inlet}={source}" for inlet, source in facts["wiring"].items())),
            ("period", f"{facts['period_s']:.3g} s"),
            ("travel", f"{facts['travel_mm_per_period']:.3g} mm per period"),
            ("reversed", facts["reversed"]),
            ("written", ", ".join(facts["files"])),
        ]
    )
