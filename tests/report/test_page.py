"""The page in a real browser: it stands without errors, sorts, moves, and lets no text of a robot file run."""

from __future__ import annotations

import builtins
import dataclasses
import json
import re
import tomllib
from collections.abc import Iterator
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner

from gaitlab.cli.main import cli
from gaitlab.errors import MissingExtraError
from gaitlab.report.page import embedded_json, html_page
from gaitlab.report.page_data import page_data
from gaitlab.report.run_folder import read_run
from tests.report import synthetic
from tests.report.browser import Browser, browser
from tests.report.conftest import ROBOT_FILE

HOSTILE = "<script>alert(1)</script>"


@pytest.fixture(scope="module")
def page_file(run_folder: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    target = tmp_path_factory.mktemp("page") / "page.html"
    target.write_text(html_page(read_run(run_folder)), encoding="utf-8")
    return target


@pytest.fixture(scope="module")
def hostile_file(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A run whose notes, file, command, dates, rechecks and even name carry a script.

    The reader refuses such a name in a robot file, so it is put in behind the reader's back.
    """
    folder = tmp_path_factory.mktemp("hostile")
    text = ROBOT_FILE.read_text(encoding="utf-8")
    document = tomllib.loads(text) | {"notes": [HOSTILE, "</style><img src=x onerror=alert(2)>"]}
    synthetic.write_run(folder / "run", document, text + f"\n# {HOSTILE}")
    file = folder / "run" / "run.json"
    data = json.loads(file.read_text(encoding="utf-8"))
    data["command"] = data["robot"]["path"] = data["created"] = f'"{HOSTILE}'
    data["rechecks"][0]["name"] = data["rechecks"][0]["note"] = HOSTILE
    file.write_text(json.dumps(data), encoding="utf-8")
    run = read_run(folder / "run")
    run = dataclasses.replace(run, robot=dataclasses.replace(run.robot, name=HOSTILE))
    target = folder / "page.html"
    target.write_text(html_page(run), encoding="utf-8")
    return target


@pytest.fixture(scope="module")
def chromium() -> Iterator[Browser]:
    with browser() as opened:
        yield opened


def _opened(chromium: Browser, page: Path, **window: Any) -> Browser:
    chromium.problems.clear()
    chromium.requests.clear()
    chromium.open(page, **window)
    return chromium


def _to_phase(page: Browser, periods: float) -> None:
    page.value(
        f"(s => {{ s.value = {periods}; s.dispatchEvent(new Event('input', {{bubbles: true}})); }})"
        "(document.getElementById('phase'))"
    )


def _column(page: Browser, column: int) -> list[str]:
    rows = "[...document.querySelectorAll('#ranking-table tbody tr')]"
    return list(page.value(f"{rows}.map(r => r.cells[{column}].dataset.key)"))


def _canvas_sums(page: Browser) -> list[int]:
    """One number for each canvas' pixels, which changes when what it shows does."""
    return list(
        page.value(
            "[...document.querySelectorAll('canvas.body')].map(c => c.getContext('2d')"
            ".getImageData(0, 0, c.width, c.height).data.reduce((a, v, i) => (a + v * (i % 9973 + 1)) % 2147483647, 0))"
        )
    )


@pytest.mark.browser
@pytest.mark.parametrize(("width", "dark"), [(1280, False), (1280, True), (390, False), (390, True)])
def test_it_stands_without_errors_and_without_network(
    chromium: Browser, page_file: Path, width: int, dark: bool
) -> None:
    page = _opened(chromium, page_file, width=width, height=844, dark=dark)
    assert page.problems == []
    assert page.requests == [page_file.resolve().as_uri()]
    assert page.value("document.documentElement.scrollWidth") <= width
    assert page.value("document.querySelector('h1').textContent") == "tray_row5"
    ground = page.value("getComputedStyle(document.body).backgroundColor")
    assert (sum(int(v) for v in re.findall(r"\d+", ground)) < 200) == dark


@pytest.mark.browser
def test_both_bodies_are_drawn(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    colours = page.value(
        "[...document.querySelectorAll('canvas.body')].map(c => new Set(new Uint32Array(c.getContext('2d')"
        ".getImageData(0, 0, c.width, c.height).data.buffer)).size)"
    )
    assert len(colours) == 2 and min(colours) > 100


@pytest.mark.browser
def test_the_slider_moves_body_footfalls_waves_and_ring_together(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    shown = (
        "[...document.querySelectorAll('.cursor')].map(c => Number(c.getAttribute('x1'))).concat("
        "[...document.querySelectorAll('.node')].map(n => n.getAttribute('fill')))"
    )
    before, bodies = page.value(shown), _canvas_sums(page)
    _to_phase(page, 1.25)
    after = page.value(shown)
    assert len(before) == 2 * (2 + 5)
    assert all(a != b for a, b in zip(before[:4], after[:4], strict=True))
    assert before[4:] != after[4:]
    assert all(a != b for a, b in zip(bodies, _canvas_sums(page), strict=True))
    assert page.value("document.getElementById('phase-value').textContent") == "1.25"
    # A quarter of a period into the chart, whose plot runs from 64 to 356 of 400.
    assert after[0] == pytest.approx(64 + 0.25 * (356 - 64))
    travelled = page.value("[...document.querySelectorAll('canvas.body')].map(c => Number(c.dataset.travelled))")
    assert travelled == pytest.approx([11.0 * 1.25, 1.0 * 1.25], abs=0.3)
    assert page.problems == []


@pytest.mark.browser
def test_the_slider_works_with_the_keyboard(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    page.value("document.getElementById('phase').focus()")
    for _ in range(5):
        page.press("ArrowRight", 39)
    assert float(page.value("document.getElementById('phase').value")) == pytest.approx(0.05)
    assert page.value("document.getElementById('phase-value').textContent") == "0.05"


@pytest.mark.browser
def test_play_and_stop(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    page.click("#play")
    page.value(
        "new Promise(done => { const look = () => Number(document.getElementById('phase').value) > 0.02"
        " ? done(true) : setTimeout(look, 50); look(); })"
    )
    assert page.value("document.getElementById('play').textContent") == "Stop"
    page.click("#play")
    stopped = page.value("document.getElementById('phase').value")
    page.value("new Promise(done => setTimeout(done, 200))")
    assert page.value("document.getElementById('phase').value") == stopped


@pytest.mark.browser
def test_views_turn_the_body(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    seen = [_canvas_sums(page)[0]]
    for view in ("above", "slant"):
        page.click(f"[data-view={view}]")
        assert page.value(f"document.querySelector('[data-view={view}]').getAttribute('aria-pressed')") == "true"
        seen.append(_canvas_sums(page)[0])
    assert len(set(seen)) == 3


@pytest.mark.browser
def test_the_table_sorts_by_mouse_and_by_keyboard(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    travel = [float(key) for key in _column(page, 2)]
    assert travel == sorted(travel, reverse=True)
    page.click("#ranking-table th:nth-child(3) button")
    assert [float(key) for key in _column(page, 2)] == sorted(travel)
    assert (
        page.value("document.querySelector('#ranking-table th:nth-child(3)').getAttribute('aria-sort')") == "ascending"
    )
    page.value("document.querySelector('#ranking-table th:nth-child(3) button').focus()")
    page.press("Enter", 13, "\r")
    assert [float(key) for key in _column(page, 2)] == sorted(travel, reverse=True)
    page.click("#ranking-table th:nth-child(2) button")
    wirings = _column(page, 1)
    assert wirings == sorted(wirings) and wirings[0] == "a=1 b=2 c=3 d=4 e=5"
    assert page.problems == []


@pytest.mark.browser
def test_the_ranking_can_be_filtered(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    page.value("document.getElementById('filter').focus()")
    page.send("Input.insertText", text="b=4 c=2")
    shown = page.value(
        "[...document.querySelectorAll('#ranking-table tbody tr')].filter(r => !r.hidden).map(r => r.cells[1].textContent)"
    )
    assert shown and all("b=4" in row and "c=2" in row for row in shown)
    assert page.value("document.getElementById('shown').textContent") == f"{len(shown)} shown"


@pytest.mark.browser
def test_light_and_dark_by_the_button(chromium: Browser, page_file: Path) -> None:
    page = _opened(chromium, page_file)
    light, bodies = page.value("getComputedStyle(document.body).backgroundColor"), _canvas_sums(page)
    page.click("#theme")
    assert page.value("getComputedStyle(document.body).backgroundColor") != light
    assert page.value("document.getElementById('theme').textContent") == "Light"
    assert _canvas_sums(page) != bodies


@pytest.mark.browser
def test_a_hostile_name_is_only_text(chromium: Browser, hostile_file: Path) -> None:
    page = _opened(chromium, hostile_file)
    page.value("new Promise(done => setTimeout(done, 200))")
    assert page.problems == []
    assert page.value("document.querySelector('h1').textContent") == HOSTILE
    assert page.value("document.title").startswith(HOSTILE)
    assert page.value("document.querySelectorAll('script').length") == 2
    assert page.value("document.querySelectorAll('img').length") == 0
    assert page.value("document.querySelectorAll('#ranking-table tbody tr').length") == 24


@pytest.mark.browser
def test_a_page_without_motion_spread_and_reverse_still_stands(chromium: Browser, own_folder: Path) -> None:
    file = own_folder / "run.json"
    data = json.loads(file.read_text(encoding="utf-8"))
    data["spread"], data["rechecks"], data["rings"]["reversed"] = None, [], None
    file.write_text(json.dumps(data), encoding="utf-8")
    (own_folder / "traces" / "best.npz").unlink()
    target = own_folder / "page.html"
    target.write_text(html_page(read_run(own_folder)), encoding="utf-8")
    page = _opened(chromium, target)
    _to_phase(page, 0.5)
    assert page.problems == []
    assert page.value("document.querySelectorAll('.walker').length") == 1
    assert page.value("document.querySelectorAll('canvas.body').length") == 0
    assert page.value("document.getElementById('trust')") is None


class _Elements(HTMLParser):
    def __init__(self) -> None:
        super().__init__()
        self.found: list[tuple[str, dict[str, str | None]]] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.found.append((tag, dict(attrs)))


def test_the_file_asks_for_nothing_else(page_file: Path) -> None:
    parser = _Elements()
    parser.feed(page_file.read_text(encoding="utf-8"))
    for tag, attributes in parser.found:
        assert tag not in ("link", "img", "iframe", "object", "embed")
        assert not attributes.get("src")
        assert attributes.get("href", "#").startswith("#")
    assert page_file.stat().st_size < 8e6


def test_json_in_a_script_cannot_end_it() -> None:
    data = {"name": "</script><!--<script>", "more": "\u2028&"}
    text = embedded_json(data)
    assert not re.search(r"[<>&\u2028]", text)
    assert json.loads(text) == data


def test_numbers_that_are_none_stay_out_of_the_page(run_folder: Path) -> None:
    json.dumps(page_data(read_run(run_folder)), allow_nan=False)


def test_recorded_poses_are_kept_to_a_hundredth_of_a_millimetre(run_folder: Path) -> None:
    run = read_run(run_folder)
    motion = page_data(run)["walks"][0]["motion"]
    parts, first = len(run.trace.parts), motion["position"][:3]
    assert [v * 0.01 for v in first] == pytest.approx([1e3 * v for v in run.trace.position_m[54, 0]], abs=0.005)
    assert len(motion["position"]) == 90 * parts * 3


def test_without_jinja2_the_extra_is_named(run_folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    real = builtins.__import__

    def without(name: str, *rest: Any) -> Any:
        if name.split(".")[0] == "jinja2":
            raise ImportError(name)
        return real(name, *rest)

    monkeypatch.setattr(builtins, "__import__", without)
    with pytest.raises(MissingExtraError, match=r"gaitlab\[page\]"):
        html_page(read_run(run_folder))


def test_the_command(own_folder: Path) -> None:
    first = CliRunner().invoke(cli, ["page", str(own_folder), "--json"])
    assert first.exit_code == 0, first.output
    assert json.loads(first.stdout)["file"] == str(own_folder / "page.html")
    again = CliRunner().invoke(cli, ["page", str(own_folder)])
    assert again.exit_code == 2 and "--force" in again.output
    wrong = CliRunner().invoke(cli, ["page", str(own_folder), "--out", str(own_folder / "page.txt")])
    assert wrong.exit_code == 2 and "named .html" in wrong.output
