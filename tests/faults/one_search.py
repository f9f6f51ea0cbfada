"""Runs `gaitlab search` as a process of its own, with walks made up by formula, so that hundreds of faults can be tried.

Everything but the physics is the real thing: command line, worker processes, ledger, ranking, Ctrl-C. Called as
``python -m tests.faults.one_search search ROBOT …``; each reported walk's wiring goes to the file in GAITLAB_TEST_HEARD.
"""

from __future__ import annotations

import functools
import os
import random
import sys
import time
from typing import Any, TextIO


def main_with_faults(heard: TextIO) -> None:
    """The command line with made-up walks, a wall clock that may jump, and a note of every walk that was reported."""
    import gaitlab.cli.search_command as search_command
    import gaitlab.search.identity as identity
    import gaitlab.search.whole as whole
    from gaitlab.cli.main import main
    from gaitlab.search.run import Step
    from tests.faults.made_up import KINDS

    tell = search_command._Watcher.__call__

    def noted(self: Any, step: Step) -> None:
        heard.write(step.ask.wiring.text() + "\n")
        heard.flush()
        tell(self, step)

    search_command._Watcher.__call__ = noted  # type: ignore[method-assign]
    evaluating = KINDS[os.environ.get("GAITLAB_TEST_KIND", "")]
    search_command.search_robot = functools.partial(whole.search_robot, evaluating=evaluating)
    identity.code_version = lambda: "tests"  # type: ignore[assignment]
    whole._finals = lambda task, ranking, workers, finished: ([], finished)
    whole._checked = lambda task, plan, ranking, workers, finished, tell: (None, finished)
    if os.environ.get("GAITLAB_TEST_NOBODY") and os.getuid() == 0:
        give_up_rights(sys.argv[2])
    if os.environ.get("GAITLAB_TEST_CLOCK") == "jumps":
        chance = random.Random(1)
        time.time = lambda: chance.choice([-1e9, 0.0, 1.7e9, 4e9])  # type: ignore[assignment]
    main(sys.argv[1:])


def give_up_rights(robot: str) -> None:
    """Becomes a user without rights, because the super-user may write anything anywhere."""
    from gaitlab.robot.reader import read_robot

    read_robot(robot)  # loads what a user without rights might not find in the super-user's Python
    os.setgroups([])
    os.setgid(65534)
    os.setuid(65534)


if __name__ == "__main__":
    try:
        with open(os.environ["GAITLAB_TEST_HEARD"], "a", encoding="utf-8") as file:
            main_with_faults(file)
    except KeyboardInterrupt:
        sys.exit(130)
