"""The page to pass on: one HTML file with everything inside, nothing fetched, every text from a robot file escaped."""

from __future__ import annotations

import base64
import hashlib
import json
import math
from importlib import resources
from typing import Any

from gaitlab.errors import MissingExtraError
from gaitlab.report.cautions import CAUTIONS, ESTIMATES
from gaitlab.report.page_data import page_data
from gaitlab.report.page_tables import (
    ranking_table,
    recheck_table,
    ring_table,
    robot_facts,
    search_facts,
    sensitivity_table,
    spread_table,
)
from gaitlab.report.run_folder import SavedRun
from gaitlab.report.words import KPA, MM, number, rechecks_text, reversed_text, source_text, speed_estimate

SCRIPTS = ("solids.js", "motion.js", "body.js", "charts.js", "tables.js", "page.js")


def html_page(run: SavedRun) -> str:
    """The whole page as text.

    Texts are escaped by the template, the data block by `embedded_json`; a content security policy admits the page's own
    script and style by their hashes and nothing else. Raises MissingExtraError without jinja2 (extra `page`).
    """
    environment = _environment()
    style, script = _file("page.css"), "\n".join(_file(name) for name in SCRIPTS)
    template = environment.from_string(_file("page.html"))
    from markupsafe import Markup

    return str(
        template.render(
            **_words(run),
            **_tables(run),
            style=Markup(style),
            script=Markup(script),
            style_hash=_hash(style),
            script_hash=_hash(script),
            data=Markup(embedded_json(page_data(run))),
        )
    )


def embedded_json(data: Any) -> str:
    """JSON that may stand inside a script element: no text in it can end the element or open a comment.

    >>> embedded_json("</script><!--")
    '"\\\\u003c/script\\\\u003e\\\\u003c!--"'
    """
    text = json.dumps(data, separators=(",", ":"), allow_nan=False)
    for letter in "<>&\u2028\u2029":
        text = text.replace(letter, f"\\u{ord(letter):04x}")
    return text


def _environment() -> Any:
    try:
        import jinja2
    except ImportError as error:
        raise MissingExtraError("the page needs jinja2; install it with: pip install 'gaitlab[page]'") from error
    return jinja2.Environment(autoescape=True, undefined=jinja2.StrictUndefined, trim_blocks=True)


def _file(name: str) -> str:
    return (resources.files("gaitlab.report") / "page_files" / name).read_text(encoding="utf-8")


def _hash(text: str) -> str:
    """The source expression of a content security policy (W3C CSP level 3) for an inline element."""
    return "sha256-" + base64.b64encode(hashlib.sha256(text.encode("utf-8")).digest()).decode("ascii")


def _words(run: SavedRun) -> dict[str, Any]:
    estimate = speed_estimate(run)
    unfinished = () if run.finished else ("The search was cut short: this is what was known by then.",)
    return {
        "name": run.robot.name,
        "notes": run.robot.notes,
        "version": run.version,
        "created": run.created,
        "tubes": [(inlet, source_text(source)) for inlet, source in run.best.wiring.pairs],
        "tiles": _tiles(run),
        "reversed_words": reversed_text(run.best),
        "rechecks_words": rechecks_text(run),
        "warnings": (*unfinished, *run.best.walk.warnings, *(estimate.warnings if estimate else ())),
        "gaps": run.gaps,
        "ring_facts": _ring_facts(run),
        "search": search_facts(run),
        "robot": robot_facts(run),
        "robot_path": run.robot_path,
        "robot_text": run.robot_text,
        "draws": run.spread.draws if run.spread else 0,
        "cautions": CAUTIONS,
        "estimates": ESTIMATES,
    }


def _tables(run: SavedRun) -> dict[str, Any]:
    return {
        "ranking": ranking_table(run),
        "ring": ring_table(run),
        "spread": spread_table(run),
        "sensitivities": sensitivity_table(run),
        "rechecks": recheck_table(run),
    }


def _tiles(run: SavedRun) -> list[dict[str, str]]:
    walk, ring, estimate = run.best.walk, run.ring, speed_estimate(run)
    tiles = []
    if estimate is not None:
        low, middle, high = (number(MM * value) for value in estimate.speed_m_s)
        tiles.append({"label": "Speed", "value": f"{middle} mm/s", "aside": f"{low} to {high} mm/s: {estimate.basis}"})
        lengths = f"{number(estimate.body_lengths_per_period[1], 3)} body lengths"
        scatter = f"± {number(MM * walk.travel_scatter_m, 2)} mm between periods, {lengths}"
        tiles.append({"label": "Travel per period", "value": f"{number(MM * walk.travel_m)} mm", "aside": scatter})
    pace = 60.0 / ring.period_s if math.isfinite(ring.period_s) else math.nan
    tiles.append(
        {"label": "Period", "value": f"{number(ring.period_s, 2)} s", "aside": f"{number(pace, 0)} per minute"}
    )
    tied = sum(row.tied_with_best for row in run.ranking if row.rank > 1)
    others = f"{tied} tied with it" if tied else "none tied with it"
    tiles.append({"label": "Best of", "value": f"{run.search.evaluated} wirings", "aside": others})
    return tiles


def _ring_facts(run: SavedRun) -> tuple[tuple[str, str], ...]:
    ring = run.ring
    supply = f"{number(ring.supply_mean_Pa / KPA)} kPa mean, {number(ring.supply_min_Pa / KPA)} kPa least vacuum at the manifold"
    return (
        ("Outcome", ring.outcome.replace("_", " ")),
        ("Start-up", f"{number(ring.start_up_s)} s from atmosphere"),
        ("Supply", supply),
        ("Air", f"{number(1e6 * ring.air_kg_per_period)} mg per period"),
    )
