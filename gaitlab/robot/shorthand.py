"""The short ways of writing that a robot file may use, written out in full before the records are built."""

from __future__ import annotations

from typing import Any

from gaitlab.robot.faults import Place, fail
from gaitlab.robot.fields import Key
from gaitlab.robot.values import number_of

# International Standard Atmosphere (ISO 2533:1975), troposphere: sea level 101.325 kPa and 288.15 K, lapse 6.5 K/km,
# exponent g M/(R L) = 5.25588.
SEA_LEVEL_KPA = 101.325
_ALTITUDE = Key("altitude_m", "number", at_least=-500, at_most=9000)


def expanded(document: dict[str, Any]) -> dict[str, Any]:
    """The same document with `altitude_m` as a pressure and every chain's `bellows = "type"` as its one unit.

    The document given is not changed. Raises FaultError where a shorthand stands beside what it stands for.
    """
    full = dict(document)
    if isinstance(full.get("ambient"), dict) and "altitude_m" in full["ambient"]:
        full["ambient"] = _ambient(full["ambient"])
    body = full.get("body")
    if isinstance(body, dict):
        full["body"] = {
            key: _chains(value, ("body", key)) if key in ("leg", "spine") and isinstance(value, list) else value
            for key, value in body.items()
        }
    return full


def as_written(document: dict[str, Any], place: Place) -> Place:
    """Where the file itself says what stands at a place of the expanded document.

    >>> as_written({"body": {"leg": [{"name": "a", "bellows": "x"}]}}, ("body", "leg", 0, "unit", 0, "inlet"))
    ('body', 'leg', 0, 'name')
    """
    if len(place) < 6 or place[0] != "body" or place[3] != "unit":
        return place
    _, kind, index, _, _, *rest = place
    if "unit" in document["body"][kind][index]:
        return place
    return ("body", kind, index, "name" if rest == ["inlet"] else "bellows")


def standard_pressure_kPa(altitude_m: float) -> float:
    """Absolute air pressure [kPa] at an altitude [m] of the standard atmosphere (ISO 2533, below 11 km).

    >>> round(standard_pressure_kPa(1500.0), 2)
    84.56
    """
    return SEA_LEVEL_KPA * float((1.0 - 0.0065 * altitude_m / 288.15) ** 5.25588)


def _ambient(table: dict[str, Any]) -> dict[str, Any]:
    if "pressure_kPa" in table:
        raise fail(("ambient", "altitude_m"), "be left out where pressure_kPa is given", fix="keep the one you know")
    altitude_m = number_of(_ALTITUDE, table["altitude_m"], ("ambient", "altitude_m"))
    rest = {key: value for key, value in table.items() if key != "altitude_m"}
    return {**rest, "pressure_kPa": standard_pressure_kPa(altitude_m)}


def _chains(chains: list[Any], place: tuple[str, ...]) -> list[Any]:
    return [_chain(chain, (*place, i)) if isinstance(chain, dict) else chain for i, chain in enumerate(chains)]


def _chain(chain: dict[str, Any], place: tuple[str | int, ...]) -> dict[str, Any]:
    if "bellows" not in chain:
        return chain
    if "unit" in chain:
        raise fail((*place, "bellows"), "be left out where units are given", chain["bellows"], "keep [[…unit]] only")
    if not isinstance(chain["bellows"], str):
        raise fail((*place, "bellows"), "be the name of a bellows type", chain["bellows"])
    rest = {key: value for key, value in chain.items() if key != "bellows"}
    return {**rest, "unit": [{"bellows": chain["bellows"], "inlet": chain.get("name", "")}]}
