"""Opens a physics engine by its name; each engine's library is imported only when it is asked for."""

from __future__ import annotations

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
        from gaitlab.body.bullet import BulletEngine

        return BulletEngine(model, settings)
    if name == "mujoco":
        from gaitlab.body.mujoco_engine import MujocoEngine

        return MujocoEngine(model, settings)
    raise InputError(must("engine", "one of " + ", ".join(ENGINES), name))
