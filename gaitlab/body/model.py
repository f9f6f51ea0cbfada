"""From the robot file's record to the tree of links that the engines build."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from gaitlab.body.chain import Chain, Station, chain_of, laws_of
from gaitlab.body.checks import check_body
from gaitlab.body.dynamics import link_origins
from gaitlab.body.records import BlockModel, BodyModel, ChainModel, FootModel, Joint, Link, Look
from gaitlab.body.rotation import quaternion_of
from gaitlab.body.solids import Solid, ball, box, joined, point
from gaitlab.errors import InputError, must
from gaitlab.gait.records import Part
from gaitlab.robot.circuit import Vector
from gaitlab.robot.parts import Block, Foot, Leg, Spine
from gaitlab.robot.records import Robot
from gaitlab.robot.suspicions import greatest_vacuum_Pa
from gaitlab.robot.tree import root_block

__all__ = ["BodyModel", "body_model"]

FloatArray = NDArray[np.float64]


def body_model(robot: Robot) -> BodyModel:
    """The engine-neutral body of a robot, checked: every leg reaches the ground, no column buckles.

    Raises InputError naming the number and its limit; what is legal but doubtful is in the model's `warnings`.
    """
    return check_body(_Builder(robot).built())


class _Builder:
    """Grows the list of links from the root block outwards; one use, one model."""

    def __init__(self, robot: Robot) -> None:
        self.robot = robot
        self.laws = laws_of(robot)
        self.links: list[Link] = []
        self.looks: list[Look] = []
        self.feet: dict[str, FootModel] = {}
        self.blocks: dict[str, BlockModel] = {}
        self.chains: list[ChainModel] = []

    def built(self) -> BodyModel:
        root = self.block_named(root_block(self.robot))
        self.links.append(_link(root.name, -1, self.block_solids(root, np.zeros(3)), None, None))
        self.add_block(root, 0, np.zeros(3))
        model = BodyModel(
            name=self.robot.name,
            inlets=self.robot.inlets(),
            links=tuple(self.links),
            feet=tuple(self.feet[name] for name in foot_names(self.robot)),
            looks=tuple(self.looks),
            blocks=tuple(self.blocks.values()),
            chains=tuple(self.chains),
            slope_rad=self.robot.ground.slope_rad,
            ground_friction=self.robot.ground.friction_factor,
            start_height_m=0.0,
            length_m=0.0,
            vacuum_max_Pa=greatest_vacuum_Pa(self.robot) or self.robot.ambient.pressure_Pa,
            warnings=tuple(text for law in self.laws.values() for text in law.warnings),
        )
        return replace(model, start_height_m=start_height(model), length_m=body_length(model))

    def add_block(self, block: Block, link: int, centre: FloatArray) -> None:
        """Everything on a block that is already part of `link`: its look, skids, legs and the spines behind it."""
        self.blocks[block.name] = BlockModel(block.name, link, _vector(centre))
        part = Part(block.name, "box", block.size_m, _vector(centre), None, None)
        self.looks.append(Look(part, link, _vector(centre), (0.0, 0.0, 0.0, 1.0)))
        for skid in self.robot.body.skids:
            if skid.block == block.name:
                foot = self.robot.foot_named(skid.foot)
                self.add_foot(skid.name, foot, link, centre + skid.at_m, leg=False)
        for leg in self.robot.body.legs:
            if leg.block == block.name:
                self.add_leg(leg, link, centre + leg.at_m)
        for spine in self.robot.body.spines:
            if spine.front == block.name:
                self.add_spine(spine, link, centre + spine.front_at_m)

    def add_leg(self, leg: Leg, parent: int, head: FloatArray) -> None:
        chain = chain_of(self.robot, leg, self.laws)
        foot = self.robot.foot_named(leg.foot)
        middle = chain.place(chain.length_m)
        last = self.add_chain(chain, parent, head, foot_solids(foot, middle), leg=True, rigid_end=False)
        last_joint = chain.stations()[-1].along_m
        self.add_foot(leg.name, foot, last, middle - chain.place(last_joint), leg=True)

    def add_spine(self, spine: Spine, parent: int, head: FloatArray) -> None:
        chain = chain_of(self.robot, spine, self.laws)
        block = self.block_named(spine.rear)
        centre = chain.place(chain.length_m) - np.array(spine.rear_at_m)
        solids = tuple(self.block_solids(block, centre))
        last = self.add_chain(chain, parent, head, solids, leg=False, rigid_end=True)
        self.add_block(block, last, centre - chain.place(chain.stations()[-1].along_m))

    def add_chain(
        self, chain: Chain, parent: int, head: FloatArray, end: tuple[Solid, ...], *, leg: bool, rigid_end: bool
    ) -> int:
        """Append the links of a chain; `end` are the pieces on its far end, placed from its head. Returns the last link."""
        stations, first = chain.stations(), len(self.links)
        edges = [station.along_m for station in stations] + [chain.length_m]
        origin, turning = head, None
        for index, station in enumerate(stations):
            start, stop = edges[index], edges[index + 1]
            last = index == len(stations) - 1
            turning = station.axis if station.kind == "revolute" else turning
            solids = [
                solid.moved(-chain.place(start)) for solid in (*chain.solids(start, stop), *(end if last else ()))
            ]
            scaled = None if last and rigid_end else turning
            self.links.append(
                _link(f"{chain.name}.{index + 1}", parent, solids, _joint(chain, station, origin), scaled)
            )
            parent, origin = len(self.links) - 1, chain.place(stop) - chain.place(start)
            self.add_piece(chain, parent, start, stop)
        mass = sum(link.mass_kg for link in self.links[first:])
        self.chains.append(
            ChainModel(
                chain.name,
                leg,
                first,
                len(self.links) - 1,
                chain.length_m,
                mass,
                chain.bend_stiffness,
                chain.axial_stiffness,
            )
        )
        return len(self.links) - 1

    def add_piece(self, chain: Chain, link: int, start: float, stop: float) -> None:
        """The look of one piece of bellows: a capsule whose caps reach over its ends."""
        if stop <= start:
            return
        unit = chain.unit_at(0.5 * (start + stop))
        centre = _vector(0.5 * (chain.place(stop) - chain.place(start)))
        size = (0.5 * unit.bellows.diameter_m, stop - start, 0.0)
        part = Part(self.links[link].name, "capsule", size, centre, unit.unit.inlet, chain.name)
        self.looks.append(Look(part, link, centre, quaternion_of(chain.axes)))

    def add_foot(self, name: str, foot: Foot, link: int, middle: FloatArray, *, leg: bool) -> None:
        places = tuple(_vector(centre) for centre in foot_centres(foot, middle))
        back = foot.friction if foot.friction_backward is None else foot.friction_backward
        side = foot.friction if foot.friction_sideways is None else foot.friction_sideways
        self.feet[name] = FootModel(name, link, places, foot.radius_m, (foot.friction, back, side), leg)
        for index, centre in enumerate(places):
            part = Part(f"{name}.foot{index + 1}", "sphere", (foot.radius_m, 0.0, 0.0), centre, None, name)
            self.looks.append(Look(part, link, centre, (0.0, 0.0, 0.0, 1.0)))

    def block_named(self, name: str) -> Block:
        return next(block for block in self.robot.body.blocks if block.name == name)

    def block_solids(self, block: Block, centre: FloatArray) -> list[Solid]:
        """A block with its payloads and skids, its middle at `centre`."""
        solids = [box(block.mass_kg, block.size_m, centre)]
        solids += [point(p.mass_kg, centre + p.at_m) for p in self.robot.body.payloads if p.block == block.name]
        for skid in self.robot.body.skids:
            if skid.block == block.name:
                foot = self.robot.foot_named(skid.foot)
                solids += foot_solids(foot, centre + skid.at_m)
        return solids


def foot_names(robot: Robot) -> tuple[str, ...]:
    """Names of the feet in the file's order: those of the legs, then the skids."""
    return (*(leg.name for leg in robot.body.legs), *(skid.name for skid in robot.body.skids))


def foot_centres(foot: Foot, middle: FloatArray) -> list[FloatArray]:
    """Centres of a foot's spheres: one in the middle, or two `spacing_m` apart across or along."""
    if foot.spacing_m == 0:
        return [middle]
    axis = np.array([0.0, 1.0, 0.0] if foot.spacing_axis == "across" else [1.0, 0.0, 0.0])
    return [middle + 0.5 * foot.spacing_m * axis, middle - 0.5 * foot.spacing_m * axis]


def foot_solids(foot: Foot, middle: FloatArray) -> tuple[Solid, ...]:
    """A foot's spheres, which share its mass."""
    places = foot_centres(foot, middle)
    return tuple(ball(foot.mass_kg / len(places), foot.radius_m, place) for place in places)


def start_height(model: BodyModel) -> float:
    """Height [m] of the root's middle with the lowest foot just on the ground, joints at zero."""
    if not model.feet:
        raise InputError(must("body", "given at least one leg or skid", "none", "a body needs feet to stand on"))
    origins = link_origins(model)
    return max(float(foot.radius_m - origins[foot.link][2] - c[2]) for foot in model.feet for c in foot.centres_m)


def body_length(model: BodyModel) -> float:
    """Length [m] along x from the foremost to the hindmost surface of blocks and feet, joints at zero."""
    origins, reach = link_origins(model), []
    for look in model.looks:
        half = 0.5 * look.part.size_m[0] if look.part.kind == "box" else look.part.size_m[0]
        x = float(origins[look.link][0] + look.centre_m[0])
        reach += [x - half, x + half]
    return max(reach) - min(reach)


def _joint(chain: Chain, station: Station, origin: FloatArray) -> Joint:
    return Joint(
        kind=station.kind,
        axis=station.axis,
        origin_m=_vector(origin),
        chain=chain.name,
        unit=station.unit,
        stiffness=station.stiffness,
        damping=station.damping,
        stop_at=station.stop_at,
        stop_gain=station.stop_gain,
        actuation=station.actuation,
    )


def _link(name: str, parent: int, solids: list[Solid], joint: Joint | None, scaled: Vector | None) -> Link:
    solid = joined(solids)
    x, y, z = (_vector(row) for row in solid.inertia_kg_m2)
    return Link(name, parent, solid.mass_kg, _vector(solid.centre_m), (x, y, z), joint, scaled)


def _vector(array: FloatArray) -> Vector:
    return (float(array[0]), float(array[1]), float(array[2]))
