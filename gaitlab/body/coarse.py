"""Many copies of one body at once, coarse and cheap: long implicit steps, for a first look at hundreds of wirings.

Each step is the implicit Euler step of the same body model that the engines run: pressure, springs, dampers and solid limits of
all joints, weight, and feet that push and rub on the ground. What is coarser than in an engine: links other than the root are
points as far as inertia goes; a step is some ten milliseconds, which takes the swing out of anything quicker; a foot
sinks and gives by tenths of a millimetre before it slides. The equations of a step are solved by Newton's method with all
their derivatives; a copy that does not come to an end takes the step in halves.
"""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.coarse_frames import FREE, BoolArray, FloatArray, Frames, IntArray, Skeleton, turned
from gaitlab.body.drive import torque_per_Pa
from gaitlab.body.records import GRAVITY_M_S2, BodyModel

# Numerical choices, all by us; tests/benchmarks/coarse_settings.py prints what hangs on them.
SINK_M = 1e-4  # how far a foot sinks under its share of the weight
GIVE = 1.0 / 3.0  # a foot's stiffness along the ground, for a coefficient of friction of one, over that into the ground
CLOSE = 3e-4  # a step is solved when the last move of Newton's method, which it still makes, was below this [m, rad]
ITERATIONS = 12
HALVINGS = 3
TURN_MAX = 0.2  # largest move of one Newton iteration [rad]
SHIFT_MAX_M = 5e-3


@dataclass
class _State:
    """Root's place (B, 3) and turn (B, 3, 3), joints (B, J), speed of the points (B, P, 3), give of the feet (B, C, 2)."""

    place_m: FloatArray
    turn: FloatArray
    joint: FloatArray
    speed_m_s: FloatArray
    give_m: FloatArray

    def of(self, copies: IntArray) -> _State:
        """The state of some copies."""
        return _State(*(getattr(self, f.name)[copies] for f in fields(self)))

    def put(self, copies: IntArray, other: _State) -> None:
        """Sets the state of some copies."""
        for field in fields(self):
            getattr(self, field.name)[copies] = getattr(other, field.name)


class CoarseBodies:
    """`copies` of a body model, each under its own vacua; at first all stand still with joints at zero."""

    def __init__(self, model: BodyModel, copies: int) -> None:
        joints = model.joints
        self.model = model
        link, place, mass, self._radius, self._friction = _points(model)
        self._contacts = len(self._radius)
        self._foot_link = link[: self._contacts]
        self._mass = mass[:, None]
        self._skeleton = Skeleton(model, link, place)
        self._gravity = np.array(model.gravity_m_s2)
        self._into = model.mass_kg * GRAVITY_M_S2 / max(1, self._contacts) / SINK_M
        self._along = GIVE * self._into
        self._stiffness = np.array([joint.stiffness for joint in joints])
        self._damping = np.array([joint.damping for joint in joints])
        self._stop_at = np.array([joint.stop_at for joint in joints])
        self._stop_gain = np.array([joint.stop_gain for joint in joints])
        self._per_Pa = torque_per_Pa(model)
        place_m = np.tile([0.0, 0.0, model.start_height_m], (copies, 1))
        self._state = _State(
            place_m,
            np.tile(np.eye(3), (copies, 1, 1)),
            np.zeros((copies, len(joints))),
            np.zeros((copies, len(link), 3)),
            np.zeros((copies, self._contacts, 2)),
        )
        self._vacuum = np.zeros((copies, len(model.inlets)))
        self.unsolved = np.zeros(copies, dtype=int)

    @property
    def place_m(self) -> FloatArray:
        """Where the root's frame is, (B, 3)."""
        return self._state.place_m

    @property
    def turn(self) -> FloatArray:
        """Rotation matrices of the root, (B, 3, 3)."""
        return self._state.turn

    @property
    def joint(self) -> FloatArray:
        """Joint positions (B, J)."""
        return self._state.joint

    def frames(self) -> Frames:
        """Link frames of all copies."""
        return self._skeleton.frames(self._state.place_m, self._state.turn, self._state.joint)

    def step(self, vacuum_Pa: FloatArray, step_s: FloatArray) -> None:
        """One step of `step_s` (B,) [s], at whose end the inlets are at `vacuum_Pa` (B, inlets) [Pa].

        Steps that could not be solved are counted in `unsolved` (B,).
        """
        everyone = np.arange(len(vacuum_Pa))
        self._advance(everyone, self._vacuum, vacuum_Pa, step_s, HALVINGS)
        self._vacuum = vacuum_Pa.copy()

    def _advance(
        self, copies: IntArray, before_Pa: FloatArray, after_Pa: FloatArray, step_s: FloatArray, halvings: int
    ) -> None:
        """Moves some copies on by a step; the arrays have a row for each of them."""
        start = self._state.of(copies)
        ended, solved = self._solved(start, after_Pa, step_s)
        if halvings and not solved.all():
            self._state.put(copies[solved], ended.of(np.flatnonzero(solved)))
            again = np.flatnonzero(~solved)
            middle_Pa, half_s = 0.5 * (before_Pa + after_Pa)[again], 0.5 * step_s[again]
            self._advance(copies[again], before_Pa[again], middle_Pa, half_s, halvings - 1)
            self._advance(copies[again], middle_Pa, after_Pa[again], half_s, halvings - 1)
            return
        self._state.put(copies, ended)
        self.unsolved[copies[~solved]] += 1

    def _solved(self, start: _State, vacuum_Pa: FloatArray, step_s: FloatArray) -> tuple[_State, BoolArray]:
        """The state at the end of the step, and for which copies Newton's method came to an end."""
        state = start.of(np.arange(len(step_s)))
        frames, points = self._placed(state)
        before = points.copy()
        step = _Step(
            torque=vacuum_Pa @ self._per_Pa.T,
            joint=start.joint,
            expected_m=before + start.speed_m_s * step_s[:, None, None],
            step_s=step_s,
        )
        moving, solved = np.arange(len(step_s)), np.zeros(len(step_s), dtype=bool)
        for _ in range(ITERATIONS):
            held = self._held(points, state.give_m[moving])
            moved = self._newton(state, step, moving, frames, points)
            frames, points = self._placed(state.of(moving))
            same = np.all(held == self._held(points, state.give_m[moving]), axis=(1, 2))
            going = ~same | (np.max(np.abs(moved), axis=1) > CLOSE)
            solved[moving[~going]] = True
            moving, frames, points = moving[going], frames.of(going), points[going]
            if not len(moving):
                break
        _, after = self._placed(state)
        push = self._push(after)
        stretch = np.linalg.norm(state.give_m, axis=-1) + 1e-300
        state.give_m *= np.minimum(1.0, push / self._along / stretch)[..., None]
        state.speed_m_s = (after - before) / step_s[:, None, None]
        return state, solved

    def _placed(self, state: _State) -> tuple[Frames, FloatArray]:
        """Link frames and points of a state."""
        frames = self._skeleton.frames(state.place_m, state.turn, state.joint)
        return frames, self._skeleton.points(frames)

    def _held(self, points_m: FloatArray, give_m: FloatArray) -> NDArray[np.int8]:
        """(B, C, 2): whether each sphere touches the ground, and whether it slides; a step is not solved while this changes."""
        push = self._push(points_m)
        return np.stack([push > 0.0, np.linalg.norm(give_m, axis=-1) * self._along > push], axis=-1).astype(np.int8)

    def _push(self, points_m: FloatArray) -> FloatArray:
        """How hard the ground pushes each sphere up, (B, C) [N]."""
        sunk = self._radius - points_m[:, : self._contacts, 2]
        return np.asarray(self._into * np.maximum(sunk, 0.0))

    def _newton(self, state: _State, step: _Step, some: IntArray, frames: Frames, points: FloatArray) -> FloatArray:
        """One iteration for some of the state's copies, whose frames and points are given; gives back their moves (B, n)."""
        place, turn, joint = state.place_m[some], state.turn[some], state.joint[some]
        sole = points.copy()
        sole[:, : self._contacts, 2] -= self._radius
        jacobian = self._skeleton.jacobian(frames, sole)
        copies, inertia = len(some), self._mass / step.step_s[some][:, None, None] ** 2
        force = inertia * (points - step.expected_m[some]) - self._mass * self._gravity
        touch, give = self._ground(frames, points, state.give_m[some])
        force[:, : self._contacts] += touch
        stiff = inertia[..., None] * jacobian
        stiff[:, : self._contacts] += give @ jacobian[:, : self._contacts]
        columns = jacobian.reshape(copies, -1, self._skeleton.size)
        residual = (force.reshape(copies, 1, -1) @ columns)[:, 0]
        matrix = np.swapaxes(columns, 1, 2) @ stiff.reshape(columns.shape)
        matrix += self._skeleton.stiffness_of_forces(frames, jacobian, force)
        own, own_stiff = self._joints(joint, step, some)
        residual[:, FREE:] += own
        diagonal = np.arange(FREE, self._skeleton.size)
        matrix[:, diagonal, diagonal] += own_stiff
        moved = _bounded(-np.linalg.solve(matrix, residual[..., None])[..., 0])
        state.place_m[some] = place + moved[:, :3]
        state.turn[some] = turned(turn, moved[:, 3:FREE])
        state.joint[some] = joint + moved[:, FREE:]
        slid = jacobian[:, : self._contacts, :2].reshape(copies, -1, self._skeleton.size) @ moved[..., None]
        state.give_m[some] += slid.reshape(copies, -1, 2)
        return moved

    def _joints(self, joint: FloatArray, step: _Step, some: IntArray) -> tuple[FloatArray, FloatArray]:
        """What springs, dampers and limits hold against the pressure (B, J), and its derivative."""
        past = np.maximum(np.abs(joint) - self._stop_at, 0.0)
        damping = self._damping / step.step_s[some][:, None]
        held = self._stiffness * joint + np.sign(joint) * self._stop_gain * past**2
        held += damping * (joint - step.joint[some]) - step.torque[some]
        return held, self._stiffness + 2.0 * self._stop_gain * past + damping

    def _ground(self, frames: Frames, points_m: FloatArray, give_m: FloatArray) -> tuple[FloatArray, FloatArray]:
        """What the spheres press on the ground with (B, C, 3), and its derivative by their places (B, C, 3, 3).

        Along the ground a foot gives until its stretch w is N/k long and then slides: the force is k (μ_x w_x, μ_y w_y), in the
        foot's own axes with μ_x the forward or backward value by the sign of w_x, which in sliding is the law of `body/bristle.py`.
        """
        push = self._push(points_m)
        ahead = frames.turn[..., :2, 0][:, self._foot_link]
        ahead = ahead / np.linalg.norm(ahead, axis=-1, keepdims=True)
        axes = np.stack([ahead, np.stack([-ahead[..., 1], ahead[..., 0]], axis=-1)], axis=-2)  # rows ahead, left
        own = (axes @ give_m[..., None])[..., 0]
        friction = np.stack(
            [
                np.where(own[..., 0] >= 0.0, self._friction[:, 0], self._friction[:, 1]),
                self._friction[:, 2] + 0.0 * push,
            ],
            axis=-1,
        )
        stretch = np.linalg.norm(own, axis=-1) + 1e-300
        share = np.minimum(1.0, push / self._along / stretch)[..., None]
        way, sliding = own / stretch[..., None], share < 1.0
        stiff = (self._along * share * friction)[..., None] * (
            np.eye(2) - np.where(sliding, way, 0.0)[..., :, None] * way[..., None, :]
        )
        by_push = np.where(sliding, friction * way, 0.0)
        back = np.swapaxes(axes, -1, -2)
        force = np.empty((*push.shape, 3))
        force[..., :2] = (back @ (self._along * share * friction * own)[..., None])[..., 0]
        force[..., 2] = -push
        give = np.zeros((*push.shape, 3, 3))
        give[..., :2, :2] = back @ stiff @ axes
        touching = push > 0.0
        give[..., :2, 2] = np.where(touching, -self._into, 0.0)[..., None] * (back @ by_push[..., None])[..., 0]
        give[..., 2, 2] = np.where(touching, self._into, 0.0)
        return force, give


@dataclass(frozen=True)
class _Step:
    """What a step starts from: pressure torque (B, J), joints (B, J), where the points go if nothing pulls (B, P, 3), steps (B,)."""

    torque: FloatArray
    joint: FloatArray
    expected_m: FloatArray
    step_s: FloatArray


def _bounded(moved: FloatArray) -> FloatArray:
    """Moves (B, n) cut to what one iteration may do."""
    largest = np.maximum(
        np.max(np.abs(moved[:, 3:]), axis=1) / TURN_MAX, np.max(np.abs(moved[:, :3]), axis=1) / SHIFT_MAX_M
    )
    return np.asarray(moved / np.maximum(1.0, largest)[:, None])


def _points(model: BodyModel) -> tuple[IntArray, FloatArray, FloatArray, FloatArray, FloatArray]:
    """Links, places and masses of all points: first the feet's spheres, without mass, with their radii and friction; then the
    masses, six for the root (which has its inertia), one for every other link."""
    link, place, mass, radius, friction = [], [], [], [], []
    for foot in model.feet:
        for centre in foot.centres_m:
            link.append(foot.link)
            place.append(np.array(centre))
            mass.append(0.0)
            radius.append(foot.radius_m)
            friction.append(foot.friction)
    root = model.links[0]
    inertia = np.array(root.inertia_kg_m2)
    spread, ways = np.linalg.eigh(0.5 * np.trace(inertia) * np.eye(3) - inertia)
    for moment, way in zip(spread, ways.T, strict=True):
        for sign in (1.0, -1.0):
            link.append(0)
            place.append(np.array(root.com_m) + sign * np.sqrt(max(3.0 * moment, 0.0) / root.mass_kg) * way)
            mass.append(root.mass_kg / 6.0)
    for index, other in enumerate(model.links[1:], start=1):
        link.append(index)
        place.append(np.array(other.com_m))
        mass.append(other.mass_kg)
    coefficients = np.array(friction).reshape(-1, 3) * model.ground_friction
    return np.array(link), np.array(place), np.array(mass), np.array(radius), coefficients
