"""Lists every direct dependency with its lower bound, the version here and its licence, dated, as a Markdown table.

An audit against known weaknesses needs a database that is not on every machine: where it is, run `pip-audit` on the versions below.

    python tests/benchmarks/dependency_list.py
"""

from __future__ import annotations

import datetime
import re
import tomllib
from importlib import metadata
from pathlib import Path

PYPROJECT = Path(__file__).resolve().parents[2] / "pyproject.toml"


def requirements() -> list[tuple[str, str]]:
    """Pairs of group (core or the extra's name) and requirement, in the file's order."""
    project = tomllib.loads(PYPROJECT.read_text(encoding="utf-8"))["project"]
    found = [("core", text) for text in project["dependencies"]]
    for extra, texts in project["optional-dependencies"].items():
        found += [(extra, text) for text in texts if not text.startswith("gaitlab[")]
    return found


def licence(name: str) -> str:
    """The licence a package states: its expression, else its classifiers, else its short text."""
    facts = metadata.metadata(name)
    if facts.get("License-Expression"):
        return str(facts["License-Expression"])
    named = [c.split(" :: ")[-1] for c in facts.get_all("Classifier") or [] if c.startswith("License ::")]
    stated = (facts.get("License") or "not stated").splitlines()[0]
    return ", ".join(named) or stated[:60]


def main() -> None:
    print(f"As of {datetime.date.today().isoformat()}:")
    print()
    print("| for | package | at least | here | licence |")
    print("|---|---|---|---|---|")
    for group, text in requirements():
        name, bound = re.split(r"\s*>=\s*", text)
        print(f"| {group} | {name} | {bound} | {metadata.version(name)} | {licence(name)} |")


if __name__ == "__main__":
    main()
