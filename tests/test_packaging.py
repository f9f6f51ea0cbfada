"""What the package asks for and brings along, read from pyproject.toml."""

from __future__ import annotations

import re
import subprocess
import tomllib
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
PROJECT = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]


def test_core_needs_five_libraries_and_no_more() -> None:
    names = [re.split(r"[<>=\[ ]", text)[0] for text in PROJECT["dependencies"]]
    assert names == ["numpy", "scipy", "pybullet", "matplotlib", "click"]


def test_every_dependency_has_a_lower_bound_and_no_other() -> None:
    extras = [text for texts in PROJECT["optional-dependencies"].values() for text in texts]
    for text in [*PROJECT["dependencies"], *extras]:
        assert re.fullmatch(r"[A-Za-z0-9_.-]+>=\d+(\.\d+)*", text) or text.startswith("gaitlab["), text


def test_extras_are_the_documented_ones() -> None:
    assert {"cluster", "second-engine", "page", "dev"} <= set(PROJECT["optional-dependencies"])
    assert PROJECT["requires-python"] == ">=3.11"


def test_set_up_commands_are_where_the_checks_look_for_them() -> None:
    readme = (ROOT / "README.md").read_text(encoding="utf-8")
    for name, word in (("run", "gaitlab search robots/tray_row5.toml"), ("test", "pytest")):
        block = re.search(rf"<!-- setup: {name} -->\n```\w*\n(.*?)```", readme, re.DOTALL)
        assert block and word in block[1] and "python3.11 -m venv" in block[1]
    assert ".ci/run" in {str(p.relative_to(ROOT)) for p in (ROOT / ".ci").iterdir()}


def test_the_top_level_holds_what_it_should() -> None:
    shown = {p.name for p in ROOT.iterdir() if not p.name.startswith(".")}
    generated = {"build", "dist", "runs", "gaitlab.egg-info"}
    assert shown - generated == {"README.md", "DEVELOPERS.md", "pyproject.toml", "gaitlab", "robots", "tests", "media"}


def test_tracked_files_name_no_machine() -> None:
    """Paths that only one machine knows (put together so that this file is clean)."""
    words = ["/wo" + "rk/", "/op" + "t/gl", "/ro" + "ot/"]
    listed = subprocess.run(["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, check=True).stdout.decode()
    texts = [
        ROOT / name for name in listed.split("\0") if Path(name).suffix in (".py", ".md", ".toml") or name == ".ci/run"
    ]
    assert ROOT / ".ci" / "run" in texts and len(texts) > 200
    for path in filter(Path.is_file, texts):
        assert not [word for word in words if word in path.read_text(encoding="utf-8")], path
