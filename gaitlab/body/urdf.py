"""A body model as URDF: links, inertias, joints, looks and feet, for use in other simulators.

URDF knows no springs, so the file holds the joints and their dampers; stiffness and pull of the bellows are this package's.
Inertias are the physical ones, without the numerical factor. All frames are parallel with joints at zero, as in the model.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from xml.etree.ElementTree import Element, SubElement, indent, tostring

from scipy.spatial.transform import Rotation

from gaitlab.body.records import BodyModel, FootModel, Joint, Link, Look
from gaitlab.robot.circuit import Vector

# URDF must have limits; these are out of reach of any bellows here (chosen by us).
EFFORT, VELOCITY, TRAVEL_M, TURN_RAD = 1e3, 1e3, 1.0, 6.3
POLE = 1.0 - 1e-12
UPRIGHT = (0.0, 0.0, 0.0)


def urdf_text(model: BodyModel) -> str:
    """The body as URDF; every text of the robot file in it is escaped.

    Loads back with the same masses, inertias, joint kinds, places and axes (Bullet takes the inertias with its flag
    URDF_USE_INERTIA_FROM_FILE only).
    """
    names = [link.name for link in model.links]
    robot = Element("robot", name=model.name)
    for index, link in enumerate(model.links):
        _link(robot, names[index], link, model, index)
    for index, link in enumerate(model.links):
        if link.joint is not None:
            _joint(robot, f"{names[index]}.joint", link.joint, names[link.parent], names[index])
    indent(robot)
    return '<?xml version="1.0" encoding="utf-8"?>\n' + tostring(robot, encoding="unicode") + "\n"


def _link(robot: Element, name: str, link: Link, model: BodyModel, index: int) -> None:
    element = SubElement(robot, "link", name=name)
    inertial = SubElement(element, "inertial")
    SubElement(inertial, "origin", xyz=_text(link.com_m), rpy=_text(UPRIGHT))
    SubElement(inertial, "mass", value=repr(float(link.mass_kg)))
    i = link.inertia_kg_m2
    places = {"ixx": (0, 0), "ixy": (0, 1), "ixz": (0, 2), "iyy": (1, 1), "iyz": (1, 2), "izz": (2, 2)}
    SubElement(inertial, "inertia", {key: repr(float(i[row][column])) for key, (row, column) in places.items()})
    for look in model.looks:
        if look.link == index:
            _visual(element, look)
    for foot in model.feet:
        if foot.link == index:
            _collision(element, foot)


def _visual(element: Element, look: Look) -> None:
    visual = SubElement(element, "visual")
    SubElement(visual, "origin", xyz=_text(look.centre_m), rpy=_text(roll_pitch_yaw(look.quaternion)))
    geometry = SubElement(visual, "geometry")
    size = look.part.size_m
    if look.part.kind == "box":
        SubElement(geometry, "box", size=_text(size))
    elif look.part.kind == "sphere":
        SubElement(geometry, "sphere", radius=repr(float(size[0])))
    else:  # URDF has no capsules
        SubElement(geometry, "cylinder", radius=repr(float(size[0])), length=repr(float(size[1])))


def _collision(element: Element, foot: FootModel) -> None:
    for centre in foot.centres_m:
        collision = SubElement(element, "collision")
        SubElement(collision, "origin", xyz=_text(centre), rpy=_text(UPRIGHT))
        SubElement(SubElement(collision, "geometry"), "sphere", radius=repr(float(foot.radius_m)))


def _joint(robot: Element, name: str, joint: Joint, parent: str, child: str) -> None:
    element = SubElement(robot, "joint", name=name, type=joint.kind)
    SubElement(element, "parent", link=parent)
    SubElement(element, "child", link=child)
    SubElement(element, "origin", xyz=_text(joint.origin_m), rpy=_text(UPRIGHT))
    SubElement(element, "axis", xyz=_text(joint.axis))
    reach = repr(TURN_RAD if joint.kind == "revolute" else TRAVEL_M)
    SubElement(element, "limit", lower=f"-{reach}", upper=reach, effort=repr(EFFORT), velocity=repr(VELOCITY))
    SubElement(element, "dynamics", damping=repr(float(joint.damping)), friction="0.0")


def roll_pitch_yaw(quaternion: Sequence[float]) -> Vector:
    """Fixed-axis roll, pitch, yaw of a quaternion x y z w, as URDF counts them: R = Rz(yaw) Ry(pitch) Rx(roll)."""
    matrix = Rotation.from_quat(quaternion).as_matrix()
    pitch = math.asin(max(-1.0, min(1.0, -matrix[2, 0])))
    if abs(matrix[2, 0]) > POLE:  # x points straight up or down: roll and yaw are one turn, which yaw takes
        return (0.0, pitch, math.atan2(-matrix[0, 1], matrix[1, 1]))
    return (math.atan2(matrix[2, 1], matrix[2, 2]), pitch, math.atan2(matrix[1, 0], matrix[0, 0]))


def _text(numbers: Iterable[float]) -> str:
    return " ".join(repr(float(number)) for number in numbers)
