"""What a body must keep before it is worth simulating; each refusal names the number and its limit."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import eigh
from scipy.optimize import linprog

from gaitlab.body.drive import damping_parts
from gaitlab.body.dynamics import centre_of_mass, free_joint_mass, link_origins
from gaitlab.body.records import GRAVITY_M_S2, BodyModel, ChainModel
from gaitlab.errors import InputError, must

FloatArray = NDArray[np.float64]

# Bullet takes 128 degrees of freedom, six of them the base's, and silently ignores torque on more (from memory).
JOINTS_MAX = 120
# A foot may hang this part of its leg's length above the plane the others stand on (chosen by us).
GAP_FRACTION_MAX = 0.1
# Explicit damping of the slides: 2 dt k τ/m; past it some wirings blow up while others look right (chosen by us).
AXIAL_STABILITY_MAX = 2.7
# Explicit springs and dampers: 2 dt λ + dt² ω² [theory of the semi-implicit Euler step].
EXPLICIT_STABILITY_MAX = 4.0
# Below this buckling margin gaits alternate from period to period (chosen by us).
BUCKLING_MARGIN_DOUBTFUL = 2.0


def check_body(model: BodyModel) -> BodyModel:
    """The same model with its warnings; raises InputError for one that cannot stand or cannot be run."""
    if len(model.joints) > JOINTS_MAX:
        fix = "fewer segments for each bellows"
        raise InputError(must("number of joints", f"at most {JOINTS_MAX}", len(model.joints), fix))
    warnings = [*model.warnings, *_reach(model), *_buckling(model)]
    return replace(model, warnings=tuple(dict.fromkeys(warnings)))


def _reach(model: BodyModel) -> list[str]:
    """Gap of each leg's foot above the plane that the body rests on, joints at zero: error, warning or nothing."""
    gaps = resting_gaps(model)
    warnings = []
    for chain in legs(model):
        gap = gaps[chain.name]
        limit = GAP_FRACTION_MAX * chain.length_m
        if gap > limit:
            got, fix = f"{gap * 1e3:.3g} mm", "make it longer or mount it lower"
            raise InputError(must(f"leg {chain.name}: gap to the ground", f"at most {limit * 1e3:.3g} mm", got, fix))
        if gap > 0.1 * limit:
            warnings.append(
                f"leg_gap: leg {chain.name} hangs {gap * 1e3:.2g} mm above the ground that the other feet stand on"
            )
    return warnings


def resting_gaps(model: BodyModel) -> dict[str, float]:
    """Gap [m] under each foot with the body at rest as if rigid: the highest plane under the centre of mass below all feet.

    Raises InputError where the feet do not surround the centre of mass (the body would tip over).
    """
    origins = link_origins(model)
    low = {f.name: [np.array(c) + origins[f.link] - [0, 0, f.radius_m] for c in f.centres_m] for f in model.feet}
    points = np.array([point for places in low.values() for point in places])
    centre = centre_of_mass(model)
    result = linprog(
        c=[-1.0, -centre[0], -centre[1]],
        A_ub=np.column_stack([np.ones(len(points)), points[:, :2]]),
        b_ub=points[:, 2],
        bounds=[(None, None)] * 3,
    )
    if not result.success:
        got = f"centre of mass at x = {centre[0] * 1e3:.3g}, y = {centre[1] * 1e3:.3g} mm"
        raise InputError(must("feet", "all round the centre of mass", got, "use pads of two spheres or move the legs"))
    plane = result.x
    gap = {name: min(p[2] - plane @ [1.0, p[0], p[1]] for p in places) for name, places in low.items()}
    return {name: max(float(value), 0.0) for name, value in gap.items()}


def legs(model: BodyModel) -> list[ChainModel]:
    """The chains that are legs."""
    return [chain for chain in model.chains if chain.leg]


def buckling_load(chain: ChainModel) -> float:
    """Load [N] above which a leg, clamped above and free below, folds: π² k/(4 L), Euler with EI = k L.

    >>> from gaitlab.body.records import ChainModel
    >>> round(buckling_load(ChainModel("a", True, 1, 5, 0.032, 0.006, 0.014, 400.0)), 2)
    1.08
    """
    return float(np.pi**2 * chain.bend_stiffness / (4.0 * chain.length_m))


def _buckling(model: BodyModel) -> list[str]:
    """A leg must carry its share with all legs down, and should carry twice its share with half of them down."""
    weight, columns = model.mass_kg * GRAVITY_M_S2, legs(model)
    resting = any(not foot.leg for foot in model.feet)
    if resting or not columns:
        return []
    stance = weight / max(2, len(columns) // 2)
    warnings = []
    for chain in columns:
        load = buckling_load(chain)
        if load < weight / len(columns):
            rule = f"above its share of the weight, {weight / len(columns):.3g} N"
            fix = "stiffer or shorter legs, or a lighter trunk"
            raise InputError(must(f"leg {chain.name}: buckling load", rule, f"{load:.3g} N", fix))
        if load < BUCKLING_MARGIN_DOUBTFUL * stance:
            warnings.append(
                f"buckling_margin: leg {chain.name} folds at {load:.3g} N, {load / stance:.2g} times its load with half the legs down "
                f"({stance:.3g} N); under {BUCKLING_MARGIN_DOUBTFUL:g} times gaits may alternate from period to period"
            )
    return warnings


def check_step(model: BodyModel, *, step_s: float, inertia_factor: float) -> None:
    """Refuse a step that an explicit integrator cannot take with these springs and dampers; raises InputError."""
    for name, number in axial_numbers(model, step_s=step_s).items():
        if number >= AXIAL_STABILITY_MAX:
            _too_long(f"axial stability number 2·step·k·τ/m of {name}", AXIAL_STABILITY_MAX, number, step_s)
    number = explicit_number(model, step_s=step_s, inertia_factor=inertia_factor)
    if number >= EXPLICIT_STABILITY_MAX:
        _too_long("stability number 2·step·λ + (step·ω)² of the joints", EXPLICIT_STABILITY_MAX, number, step_s)


def _too_long(name: str, limit: float, number: float, step_s: float) -> None:
    got = f"{number:.3g} at a step of {step_s * 1e3:g} ms"
    fix = f"a step below {step_s * 1e3 * limit / number:.2g} ms, a lower axial_damping_ms, or a higher inertia factor"
    raise InputError(must(name, f"below {limit:g}", got, fix))


def axial_numbers(model: BodyModel, *, step_s: float) -> dict[str, float]:
    """2·step·k·τ/m of every chain that has a slide: m is the leg's mass, or both sides of a spine in series."""
    numbers: dict[str, float] = {}
    slides = [(j, index + 1) for index, j in enumerate(model.joints) if j.kind == "prismatic"]
    for joint, link in slides:
        chain = next(chain for chain in model.chains if chain.name == joint.chain)
        mass = mass_beyond(model, link)
        if not chain.leg:
            mass = mass * (model.mass_kg - mass) / model.mass_kg
        in_series = sum(other.chain == joint.chain and other.unit == joint.unit for other, _ in slides)
        number = 2.0 * step_s * joint.damping / in_series / mass
        numbers[chain.name] = max(numbers.get(chain.name, 0.0), number)
    return numbers


def mass_beyond(model: BodyModel, first: int) -> float:
    """Mass [kg] of a link and of everything that hangs on it."""
    beyond = {first}
    for index in range(first + 1, len(model.links)):
        if model.links[index].parent in beyond:
            beyond.add(index)
    return sum(model.links[index].mass_kg for index in beyond)


def explicit_number(model: BodyModel, *, step_s: float, inertia_factor: float) -> float:
    """Largest 2·dt·λ + dt²·ω² over the modes of the body floating free, solid limits as far in as the supply drives them.

    The step is stable below 4.
    """
    mass = free_joint_mass(model, inertia_factor)
    damping = damping_parts(model)[1]
    stiffness = np.diag([joint.stiffest(model.vacuum_max_Pa) for joint in model.joints])
    try:
        fastest = eigh(2.0 * step_s * damping + step_s**2 * stiffness, mass, eigvals_only=True)
    except (np.linalg.LinAlgError, ValueError) as error:
        rule = "of one order, so that the joints' motion can be worked out"
        raise InputError(
            must("masses and sizes of the body's parts", rule, str(error), "check the units in the keys")
        ) from error
    return float(fastest[-1])
