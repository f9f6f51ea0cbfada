"""The tolerances of a robot document, resolved: which numbers move, how far, and which of them move together."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from gaitlab.errors import InputError, must
from gaitlab.robot.faults import Place
from gaitlab.robot.paths import value_at
from gaitlab.robot.records import Tolerance
from gaitlab.trust.build_parts import Copies, part_type, split_by_chain, split_by_stage, stage_part, stage_places
from gaitlab.trust.default_tolerances import default_tolerances
from gaitlab.trust.places import Document, number_places, numbers_at

FROM_FILE = "robot file"


@dataclass(frozen=True)
class Coordinate:
    """One independent draw: the numbers at all its `places` of the split document move with it. `name` is for people."""

    name: str
    tolerance: Tolerance
    places: tuple[Place, ...]


@dataclass(frozen=True)
class Listed:
    """One tolerance as it is printed: where it comes from, and its number as the robot file has it (the first of several)."""

    tolerance: Tolerance
    source: str
    nominal: float


@dataclass(frozen=True)
class Tolerances:
    """What is drawn: the split document (the same robot), the independent coordinates, and the list to print."""

    document: Document
    coordinates: tuple[Coordinate, ...]
    listed: tuple[Listed, ...]

    def keys(self) -> tuple[str, ...]:
        """The tolerance key of each coordinate, (D,): those of one key belong together in the sensitivities."""
        return tuple(c.tolerance.key for c in self.coordinates)


def tolerances_of(document: Document, given: Sequence[Tolerance] = ()) -> Tolerances:
    """Resolve `given` (a file's own list, which stands alone) or, where it is empty, the defaults.

    Raises InputError for a key that names no number, a key or its size given twice or not at all, and for an `each`
    whose key has no stages or legs.
    """
    stated, sourced = default_tolerances(document) if not given else (document, [(t, FROM_FILE) for t in given])
    _check_once([t.key for t, _ in sourced])
    listed = tuple(Listed(t, source, _checked_nominal(stated, t)) for t, source in sourced)
    split, copies = _split(stated, [t for t, _ in sourced])
    coordinates = tuple(c for t, _ in sourced for c in _coordinates(stated, split, copies, t))
    return Tolerances(split, coordinates, listed)


def _check_once(keys: Sequence[str]) -> None:
    double = next((k for k in keys if keys.count(k) > 1), None)
    if double is not None:
        raise InputError(must(f"tolerance of {double}", "given once", f"{keys.count(double)} times"))


def _checked_nominal(document: Document, tolerance: Tolerance) -> float:
    if (tolerance.plus_minus is None) == (tolerance.percent is None):
        got = (tolerance.plus_minus, tolerance.percent)
        raise InputError(must(f"tolerance of {tolerance.key}", "given by exactly one of plus_minus and percent", got))
    places = number_places(document, tolerance.key)
    values = [v for p in places for v in numbers_at(document, p)]
    if tolerance.kind == "lognormal" and min(values) <= 0:
        raise InputError(must(f"lognormal tolerance of {tolerance.key}", "on a number above 0", min(values)))
    if tolerance.plus_minus is not None and any(isinstance(value_at(document, p), list) for p in places):
        rule = "in percent where the key is a whole list"
        raise InputError(
            must(f"tolerance of {tolerance.key}", rule, tolerance.plus_minus, f"{tolerance.key}.0 for its first")
        )
    return values[0]


def _split(document: Document, tolerances: Sequence[Tolerance]) -> tuple[Document, Copies]:
    split = document
    copies: Copies = {}
    for tolerance in tolerances:
        for place in number_places(document, tolerance.key) if tolerance.each != "shared" else ():
            part, kind = stage_part(place), part_type(place)
            if tolerance.each == "stage" and part is not None:
                split = split_by_stage(split, part)
            if tolerance.each == "leg" and kind is not None and kind not in copies:
                split, copies[kind] = split_by_chain(split, *kind)
    return split, copies


def _coordinates(stated: Document, split: Document, copies: Copies, tolerance: Tolerance) -> tuple[Coordinate, ...]:
    places = number_places(stated, tolerance.key)
    if tolerance.each == "shared":
        return (Coordinate(tolerance.key, tolerance, _shared_places(split, copies, places)),)
    owned = _by_stage(split, places) if tolerance.each == "stage" else _by_leg(stated, copies, places)
    if not owned:
        rule = {
            "stage": "in ring.resistor, ring.valve, ring.port_mL or ring.control_mL when each is stage",
            "leg": "a number of a bellows type, a foot type or body.leg when each is leg",
        }[tolerance.each]
        raise InputError(must("tolerance key", rule, tolerance.key))
    named = f"{tolerance.key}, {tolerance.each} "
    return tuple(Coordinate(named + owner, tolerance, own) for owner, own in owned.items())


def _shared_places(split: Document, copies: Copies, places: Sequence[Place]) -> tuple[Place, ...]:
    """Where a shared number is after splitting: in every chain's copy of its type, in every stage's copy of its part."""
    found: list[Place] = []
    for place in places:
        kind = part_type(place)
        if kind in copies:
            found += [(place[0], own, *place[2:]) for own in copies[kind].values()]
        else:
            found.append(place)
        if stage_part(place) is not None:
            found += stage_places(split, place).values()
    return tuple(found)


def _by_stage(split: Document, places: Sequence[Place]) -> dict[str, tuple[Place, ...]]:
    owned: dict[str, tuple[Place, ...]] = {}
    for place in places:
        if stage_part(place) is not None:
            for stage, own in stage_places(split, place).items():
                owned[stage] = (*owned.get(stage, ()), own)
    return owned


def _by_leg(document: Document, copies: Copies, places: Sequence[Place]) -> dict[str, tuple[Place, ...]]:
    owned: dict[str, tuple[Place, ...]] = {}
    for place in places:
        if place[:2] == ("body", "leg"):
            leg = str(value_at(document, place[:3])["name"])
            owned[leg] = (*owned.get(leg, ()), place)
        for leg, own in copies.get(part_type(place) or ("", ""), {}).items():
            owned[leg] = (*owned.get(leg, ()), (place[0], own, *place[2:]))
    return owned
