"""Notes down what the body does while it walks: often and cheaply what the measures need, rarely the whole body."""

from __future__ import annotations

import numpy as np
from scipy.ndimage import binary_closing

from gaitlab.body.engine import Engine, FeetState
from gaitlab.body.records import BodyModel
from gaitlab.gait.motion import LOOK_EVERY, BoolArray, FloatArray, Motion, attitude, rotations
from gaitlab.gait.records import Trace
from gaitlab.gait.schedule import Schedule

# A foot carries weight when the floor presses it with more than this part of the robot's weight (chosen by us).
LOADED_WEIGHT = 0.01
# A foot that is pushed along hops by micrometres and carries weight on the average: shorter gaps are no swing (chosen by us).
HOP_S = 0.030
# A sphere of a loaded foot stands when it is this near the floor: ten times the penetration at rest (chosen by us).
STANDING_GAP_M = 1e-4

Pose = tuple[FloatArray, FloatArray]


class Recorder:
    """Collects samples from an engine; `motion()` turns them into arrays over whole periods."""

    def __init__(self, engine: Engine, schedule: Schedule, trace_hz: float = 0.0) -> None:
        self._engine = engine
        self._schedule = schedule
        self._base: list[Pose] = []
        self._feet: list[FeetState] = []
        self._looks: list[tuple[FloatArray, FloatArray]] = []
        self._trace_every = max(1, round(1.0 / (trace_hz * schedule.sample_s))) if trace_hz > 0.0 else 0
        self._trace: list[tuple[int, Pose]] = []

    def sample(self) -> None:
        """Note the present instant; call at the gait's start and after every `steps_per_sample` steps."""
        engine, count = self._engine, len(self._base)
        self._base.append(engine.base_pose())
        self._feet.append(engine.feet())
        if count % LOOK_EVERY == 0:
            position, quaternion = engine.part_poses()
            self._looks.append((engine.centre_of_mass(), _lowest_corner(engine.model, position, quaternion)))
        if self._trace_every and count % self._trace_every == 0:
            self._trace.append((count, engine.part_poses()))

    def motion(self) -> Motion:
        """Everything noted so far, cut to whole periods."""
        model, schedule = self._engine.model, self._schedule
        instants = (len(self._base) - 1) // schedule.samples * schedule.samples + 1
        feet = self._feet[:instants]
        yaw, pitch, roll = attitude(np.array([pose[1] for pose in self._base[:instants]]))
        foot_m = np.array([f.position_m for f in feet])
        loaded = self._loaded(feet)
        contact_m, contact_loaded = _contacts(model, feet, loaded)
        look_at = np.arange(0, instants, LOOK_EVERY)
        looks = self._looks[: len(look_at)]
        return Motion(
            samples=schedule.samples,
            sample_s=schedule.sample_s,
            position_m=np.array([pose[0] for pose in self._base[:instants]]),
            yaw_rad=yaw,
            pitch_rad=pitch,
            roll_rad=roll,
            foot_m=foot_m,
            sole_m_s=_sole_speed(model, feet),
            loaded=loaded,
            contact_m=contact_m,
            contact_loaded=contact_loaded,
            look_at=look_at,
            centre_m=np.array([look[0] for look in looks]),
            clearance_m=np.array([look[1] for look in looks]),
        )

    def _loaded(self, feet: list[FeetState]) -> BoolArray:
        model = self._engine.model
        weight = model.mass_kg * float(np.linalg.norm(model.gravity_m_s2))
        loaded = np.array([f.normal_N for f in feet]) > LOADED_WEIGHT * weight
        return without_hops(loaded, round(HOP_S / self._schedule.sample_s))

    def trace(self, gait_table: FloatArray) -> Trace | None:
        """The recorded motion for pictures, or None where none was asked for; `gait_table` as it drove the body."""
        if not self._trace:
            return None
        counts = np.array([count for count, _ in self._trace])
        feet = [self._feet[count] for count in counts]
        model, schedule = self._engine.model, self._schedule
        loaded = self._loaded(self._feet)[counts]
        return Trace(
            parts=model.parts,
            inlets=model.inlets,
            feet=tuple(foot.name for foot in model.feet),
            period_s=schedule.period_s,
            time_s=counts * schedule.sample_s,
            position_m=np.array([pose[0] for _, pose in self._trace]),
            quaternion=np.array([pose[1] for _, pose in self._trace]),
            vacuum_Pa=gait_table[(counts * schedule.steps_per_sample) % schedule.steps],
            loaded=loaded,
            foot_m=np.array([f.position_m for f in feet]),
        )


def without_hops(loaded: BoolArray, longest: int) -> BoolArray:
    """Flags (T, F) with every gap of up to `longest` samples (rounded up to even) closed; stances keep their ends."""
    reach = (longest + 1) // 2
    if reach == 0 or len(loaded) == 0:
        return loaded
    padded = np.pad(loaded, ((2 * reach, 2 * reach), (0, 0)), mode="edge")
    closed = binary_closing(padded, structure=np.ones((2 * reach + 1, 1)))
    return np.asarray(closed[2 * reach : -2 * reach])


def _lowest_corner(model: BodyModel, position_m: FloatArray, quaternion: FloatArray) -> FloatArray:
    """Height of the lowest corner of any block: z − Σ |R_zj| size_j / 2."""
    boxes = [index for index, look in enumerate(model.looks) if look.part.kind == "box"]
    half = 0.5 * np.array([model.looks[index].part.size_m for index in boxes])
    down = np.sum(np.abs(rotations(quaternion[boxes])[:, 2, :]) * half, axis=1)
    return np.asarray(np.min(position_m[boxes, 2] - down))


def _sole_speed(model: BodyModel, feet: list[FeetState]) -> FloatArray:
    """Velocity (T, F, 2) of the lowest point of every foot: v + ω × (0, 0, −r) = v + r (−ω_y, ω_x)."""
    radius = np.array([foot.radius_m for foot in model.feet])[:, None]
    velocity = np.array([f.velocity_m_s for f in feet])[..., :2]
    spin = np.array([f.spin_rad_s for f in feet])
    return np.asarray(velocity + radius * np.stack([-spin[..., 1], spin[..., 0]], axis=-1))


def _contacts(model: BodyModel, feet: list[FeetState], loaded: BoolArray) -> tuple[FloatArray, BoolArray]:
    """Centres (T, G, 3) of all spheres of all feet, and which of them stand (T, G)."""
    owner = np.repeat(np.arange(len(model.feet)), [len(foot.centres_m) for foot in model.feet])
    aside = np.concatenate([np.array(f.centres_m) - np.mean(f.centres_m, axis=0) for f in model.feet])
    radius = np.array([model.feet[index].radius_m for index in owner])
    turn = rotations(np.array([f.quaternion for f in feet]))
    middle = np.array([f.position_m for f in feet])
    centres = middle[:, owner] + np.einsum("tgij,gj->tgi", turn[:, owner], aside)
    return centres, loaded[:, owner] & (centres[..., 2] < radius + STANDING_GAP_M)
