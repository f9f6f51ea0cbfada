"""gaitlab page: one self-contained HTML file from a saved run."""

from __future__ import annotations

from pathlib import Path

import click

from gaitlab.cli.files import write_new
from gaitlab.cli.options import force_option, json_option, out_option
from gaitlab.cli.output import print_facts, print_json, warn


@click.command("page")
@click.argument("run", metavar="RUN", type=click.Path(path_type=Path))
@out_option("HTML file to write; default: RUN/page.html.")
@force_option
@json_option
def command(run: Path, out: Path | None, force: bool, as_json: bool) -> None:
    """One HTML page to pass on: ranking, ring, and the best walk moving beside its reverse.

    RUN is the folder of a search (gaitlab search ROBOT --out RUN). The page holds everything it needs, fetches nothing and
    opens from the file system. Needs the extra page (jinja2). Refused (exit 2): a folder that holds no finished run, an
    --out that does not end in .html, a file that is there already (--force replaces it).

    \b
      gaitlab page runs/row5
      gaitlab page runs/row5 --out row5.html --force
    """
    from gaitlab.errors import InputError, must
    from gaitlab.report.page import html_page
    from gaitlab.report.run_folder import read_run

    target = run / "page.html" if out is None else out
    if target.suffix.lower() != ".html":
        raise InputError(must("file of the page", "named .html", target.name))
    saved = read_run(run)
    content = html_page(saved).encode("utf-8")
    write_new(target, content, force=force)
    for gap in saved.gaps:
        warn(gap)
    facts = {"name": saved.robot.name, "file": str(target), "size_kB": len(content) / 1e3, "gaps": list(saved.gaps)}
    if as_json:
        print_json(facts)
    else:
        print_facts([("robot", facts["name"]), ("written", facts["file"]), ("size", f"{facts['size_kB']:.0f} kB")])
