"""Opens a physics engine by its name; each engine's library is imported only when it is asked for."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterator
from contextlib import contextmanager

from gaitlab.body.engine import Engine, EngineSettings
from gaitlab.body.records import BodyModel
from gaitlab.errors import InputError, must

ENGINES = ("pybullet", "mujoco")


def open_engine(name: str, model: BodyModel, settings: EngineSettings) -> Engine:
    """The body in a world of its own; close it after use.

    Raises InputError for an unknown name or settings that the engine cannot take, MissingExtraError where the engine's
    library is not installed.
    """
    if name == "pybullet":
        with quiet_import("pybullet"):
            from gaitlab.body.bullet import BulletEngine

        return BulletEngine(model, settings)
    if name == "mujoco":
        from gaitlab.body.mujoco_engine import MujocoEngine

        return MujocoEngine(model, settings)
    raise InputError(must("engine", "one of " + ", ".join(ENGINES), name))


@contextmanager
def quiet_import(library: str) -> Iterator[None]:
    """Keep off stderr what a library prints from C while it is imported for the first time (pybullet: its build time)."""
    if library in sys.modules or sys.stderr is None:
        yield
        return
    sys.stderr.flush()
    with open(os.devnull, "wb") as nowhere:
        kept = os.dup(2)
        os.dup2(nowhere.fileno(), 2)
        try:
            yield
        finally:
            os.dup2(kept, 2)
            os.close(kept)
