"""Robots for the search benchmarks, made from the shipped ones: TOML texts by name."""

from __future__ import annotations

import re
from pathlib import Path

ROBOTS = Path(__file__).resolve().parents[2] / "robots"


def shipped(name: str) -> str:
    return (ROBOTS / f"{name}.toml").read_text(encoding="utf-8")


def robot_files() -> dict[str, str]:
    """The robots whose tables `search_cost.py` replays: a row of seven for the settings, two six-legged ones that had no say."""
    return {
        "tray_row7": shipped("tray_row7"),
        "hex6_ring3": shipped("hex6_ring3"),
        "hex6_any_load": any_load(),
        "hex6_ring5": five_stages(),
    }


def any_load() -> str:
    """Six legs on three stages, an output feeding none to all of them: 126 distinct wirings instead of 16."""
    text = shipped("hex6_ring3").replace('name = "hex6_ring3"', 'name = "hex6_any_load"')
    return re.sub(r"inlets_per_output_max = 2.*", "inlets_per_output_max = 6\nevery_output_used = false", text)


def five_stages() -> str:
    """Six legs on five stages, at most two on an output: 180 distinct wirings."""
    text = shipped("hex6_ring3").replace('name = "hex6_ring3"', 'name = "hex6_ring5"')
    return text.replace("stages = 3", "stages = 5")


def row_text(legs: int) -> str:
    """The drip-tray crawler with `legs` legs in a row on as many stages; trunk, pump and payload grow with it."""
    text = shipped("tray_row5").replace('name = "tray_row5"', f'name = "tray_row{legs}"')
    text = text.replace("stages = 5", f"stages = {legs}")
    text = re.sub(r"free_flow_L_min = ([\d.]+)", lambda m: f"free_flow_L_min = {float(m[1]) * legs / 5:.3g}", text)
    head, _, tail = text.partition("[[body.block]]")
    payload = "[[body.payload]]" + tail.partition("[[body.payload]]")[2]
    span = 34 * (legs - 1)
    block = f'[[body.block]]\nname = "trunk"\nsize_mm = [{span + 24}, 30, 12]\nmass_g = {62 * legs / 5:.3g}\n\n'
    legs_text = "".join(
        f'[[body.leg]]\nname = "{chr(97 + i)}"\nblock = "trunk"\nat_mm = [{span / 2 - 34 * i:g}, 0, -6]\n'
        'foot = "pad"\nbellows = "leg"\n\n'
        for i in range(legs)
    )
    return head + block + legs_text + payload
