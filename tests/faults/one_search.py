"""Runs `gaitlab search` as a process of its own, with walks made up by formula, so that hundreds of faults can be tried.

Everything but the physics is the real thing: command line, worker processes, ledger, ranking, Ctrl-C. Called as
``python -m tests.faults.one_search search ROBOT …``; each reported walk's wiring goes to the file in GAITLAB_TEST_HEARD.
"""

from __future__ import annotations

import functools
import hashlib
import os
import random
import sys
import time
from dataclasses import replace
from typing import Any

import gaitlab.cli.search_command as search_command
import gaitlab.search.identity as identity
import gaitlab.search.whole as whole
from gaitlab.cli.main import main
from gaitlab.gait.records import WaveReading
from gaitlab.robot.reader import read_robot
from gaitlab.search.evaluate import Evaluation, Job, failed_walk
from gaitlab.search.run import Step

WALK_S = 0.015  # as long as one made-up walk takes


def made_up(job: Job) -> Evaluation:
    """A walk whose travel is read off the wiring's hash; every eleventh one falls over."""
    time.sleep(WALK_S)
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[:4], "big")
    if number % 11 == 0:
        return Evaluation(failed_walk(job, "fell_over", "widen the stance"), WALK_S)
    travel_m = 1e-6 * (number % 20_000 - 5_000)
    walked = replace(
        failed_walk(job, "walked", ""),
        period_s=1.5, travel_m=travel_m, travel_scatter_m=1e-5, travels_m=(travel_m,) * 6, drift_m=1e-3, turn_rad=0.01,
        slip=0.1, body_length_m=0.16, air_kg_per_m=1e-3, wave=WaveReading("direct", 4.0, 0.9), simulated_s=9.5,
    )  # fmt: skip
    return Evaluation(walked, WALK_S)


def starved(job: Job) -> Evaluation:
    """Runs out of memory at one wiring in seven, the first time it comes up (a file in the temporary folder remembers)."""
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[4:8], "big")
    flag = f"{os.environ['GAITLAB_TEST_HEARD']}.{number}"
    if number % 7 == 0 and not os.path.exists(flag):
        open(flag, "w").close()
        raise MemoryError
    return made_up(job)


def blown_up(job: Job) -> Evaluation:
    """Physics that went wrong quietly: a travel that is no number, infinite, or of astronomic size, said to be a walk."""
    done = made_up(job)
    number = int.from_bytes(hashlib.sha256(job.wiring.text().encode()).digest()[8:12], "big")
    if number % 5 == 0 and done.walk.outcome == "walked":
        travel_m = (float("nan"), float("inf"), float("-inf"))[number % 3]
        return replace(done, walk=replace(done.walk, travel_m=travel_m))
    return done


KINDS = {"": made_up, "starved": starved, "blown_up": blown_up}


def main_with_faults() -> None:
    """The command line with made-up walks, a wall clock that may jump, and a note of every walk that was reported."""
    heard = open(os.environ["GAITLAB_TEST_HEARD"], "a", encoding="utf-8")  # noqa: SIM115 - open until the process dies
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
    if os.environ.get("GAITLAB_TEST_NOBODY") and os.getuid() == 0:  # the super-user may write anything anywhere
        read_robot(sys.argv[2])  # loads what a user without rights might not find in the super-user's Python
        os.setgroups([])
        os.setgid(65534)
        os.setuid(65534)
    if os.environ.get("GAITLAB_TEST_CLOCK") == "jumps":
        chance = random.Random(1)
        time.time = lambda: chance.choice([-1e9, 0.0, 1.7e9, 4e9])  # type: ignore[assignment]
    main(sys.argv[1:])


if __name__ == "__main__":
    main_with_faults()
