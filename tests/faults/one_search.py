"""Runs `gaitlab search` as a process of its own, with walks made up by formula, so that hundreds of faults can be tried.

Everything but the physics is the real thing: command line, worker processes, ledger, ranking, Ctrl-C. Called as
``python -m tests.faults.one_search search ROBOT …``; each reported walk's wiring goes to the file in GAITLAB_TEST_HEARD.
"""

from __future__ import annotations

import ctypes
import functools
import os
import random
import sys
import time
from typing import Any, TextIO

# <linux/capability.h>
LINUX_CAPABILITY_VERSION_3 = 0x20080522
CAP_DAC_OVERRIDE, CAP_DAC_READ_SEARCH, CAP_FOWNER = 1, 2, 3


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
    whole.finals_of = whole.best_ring = lambda *_: []  # the last walks are real physics: made-up ones have no film
    if os.environ.get("GAITLAB_TEST_NO_PRIVILEGES"):
        give_up_privileges()
    if os.environ.get("GAITLAB_TEST_CLOCK") == "jumps":
        chance = random.Random(1)
        time.time = lambda: chance.choice([-1e9, 0.0, 1.7e9, 4e9])  # type: ignore[assignment]
    main([*sys.argv[1:], "--finalists", "0"])


def give_up_privileges() -> None:
    """Makes the super-user an owner like any other: what a file's mode forbids is forbidden (Linux capabilities)."""
    libc = ctypes.CDLL(None, use_errno=True)
    header = (ctypes.c_uint32 * 2)(LINUX_CAPABILITY_VERSION_3, 0)
    data = (ctypes.c_uint32 * 6)()
    assert libc.capget(header, data) == 0
    for word in (0, 1):  # effective and permitted
        data[word] &= ~(1 << CAP_DAC_OVERRIDE | 1 << CAP_DAC_READ_SEARCH | 1 << CAP_FOWNER)
    assert libc.capset(header, data) == 0


if __name__ == "__main__":
    try:
        with open(os.environ["GAITLAB_TEST_HEARD"], "a", encoding="utf-8") as file:
            main_with_faults(file)
    except KeyboardInterrupt:
        sys.exit(130)
