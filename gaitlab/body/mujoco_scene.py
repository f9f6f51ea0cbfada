"""A body model as a MuJoCo scene in XML: the same links, joints, springs and feet that Bullet gets, under neutral names.

Names are l0, l1, … for links, j0, … for joints and f<foot>_<sphere> for feet: nothing of a robot file is put into the XML.
"""

from __future__ import annotations

from collections.abc import Iterable
from xml.etree.ElementTree import Element, SubElement, tostring

from gaitlab.body.engine import EngineSettings
from gaitlab.body.records import BodyModel, Joint

# Coulomb's cone as a cone, not a pyramid, whose strength along and across differs from that at 45° by √2.
CONE = "elliptic"
IMPRATIO = 10.0
# Contacts give with this time constant, but never faster than two steps (chosen by us; tests/benchmarks/convergence.py
# puts walks in both engines side by side).
CONTACT_S = 0.004
# Nearly rigid from 0.1 mm of penetration on (chosen by us; Bullet's own slop is a tenth of that).
SOLIMP = (0.9, 0.99, 1e-3)
# MuJoCo's cone ties sliding to lifting, so a sliding foot hops. The slower friction answers, the less it hops and the later it
# sticks (chosen by us between the two; tests/benchmarks/convergence.py puts walks in both engines side by side).
FRICTION_S = 0.008
KINDS = {"revolute": "hinge", "prismatic": "slide"}


def scene_xml(model: BodyModel, settings: EngineSettings) -> str:
    """The scene: ground plane, gravity, and the body with its springs and dampers inside MuJoCo, which is implicit in them.

    Links carry their physical inertia; a raised one may break A + B ≥ C, which the XML reader refuses.
    """
    root = Element("mujoco")
    SubElement(root, "compiler", angle="radian", autolimits="true")
    _options(root, model, settings)
    world = SubElement(root, "worldbody")
    SubElement(
        world, "geom", name="floor", type="plane", size="0 0 0.1", contype="1", conaffinity="0", friction="0 0 0"
    )
    bodies = [_body(world, model, settings)]
    for index, link in enumerate(model.links[1:], start=1):
        bodies.append(_child(bodies[link.parent], model, index))
    for index in range(len(model.links)):
        _feet(bodies[index], model, index)
    _contacts(root, model, settings)
    return tostring(root, encoding="unicode")


def _options(root: Element, model: BodyModel, settings: EngineSettings) -> None:
    SubElement(
        root,
        "option",
        timestep=repr(settings.step_s),
        gravity=_text(model.gravity_m_s2),
        cone=CONE,
        impratio=repr(IMPRATIO),
        integrator="implicitfast",
        iterations="100",
        tolerance="1e-10",
    )


def _body(world: Element, model: BodyModel, settings: EngineSettings) -> Element:
    nudge = settings.nudge_m
    body = SubElement(world, "body", name="l0", pos=_text((nudge, nudge, model.start_height_m + nudge)))
    SubElement(body, "freejoint", name="root")
    _inertial(body, model, 0)
    return body


def _child(parent: Element, model: BodyModel, index: int) -> Element:
    joint = model.links[index].joint
    assert joint is not None
    body = SubElement(parent, "body", name=f"l{index}", pos=_text(joint.origin_m))
    _inertial(body, model, index)
    _joint(body, joint, index - 1)
    return body


def _inertial(body: Element, model: BodyModel, index: int) -> None:
    link = model.links[index]
    i = link.inertia(1.0)
    full = (i[0, 0], i[1, 1], i[2, 2], i[0, 1], i[0, 2], i[1, 2])
    SubElement(body, "inertial", pos=_text(link.com_m), mass=repr(link.mass_kg), fullinertia=_text(full))


def _joint(body: Element, joint: Joint, index: int) -> None:
    SubElement(
        body,
        "joint",
        name=f"j{index}",
        type=KINDS[joint.kind],
        axis=_text(joint.axis),
        stiffness=repr(float(joint.stiffness)),
        damping=repr(float(joint.damping)),
        limited="false",
    )


def _feet(body: Element, model: BodyModel, link: int) -> None:
    for index, foot in enumerate(model.feet):
        if foot.link == link:
            for sphere, centre in enumerate(foot.centres_m):
                SubElement(
                    body,
                    "geom",
                    name=f"f{index}_{sphere}",
                    type="sphere",
                    size=repr(foot.radius_m),
                    pos=_text(centre),
                    mass="0",
                    contype="0",
                    conaffinity="0",
                )


def _contacts(root: Element, model: BodyModel, settings: EngineSettings) -> None:
    """One explicit pair for every sphere and the floor, in the order of feet and spheres: nothing else touches."""
    contact = SubElement(root, "contact")
    for index, foot in enumerate(model.feet):
        friction = foot.friction[0] * model.ground_friction
        for sphere in range(len(foot.centres_m)):
            SubElement(
                contact,
                "pair",
                geom1="floor",
                geom2=f"f{index}_{sphere}",
                condim="3",
                friction=_text((friction, friction, 0.0, 0.0, 0.0)),
                solref=_text((max(CONTACT_S, 2.0 * settings.step_s), 1.0)),
                solreffriction=_text((FRICTION_S, 1.0)),
                solimp=_text(SOLIMP),
            )


def _text(numbers: Iterable[float]) -> str:
    return " ".join(repr(float(number)) for number in numbers)
