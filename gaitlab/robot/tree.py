"""The trunk of a body: blocks joined by spines must make one tree, rooted at the block that is no spine's rear."""

from __future__ import annotations

from gaitlab.robot.faults import fail
from gaitlab.robot.records import Robot


def root_block(robot: Robot) -> str:
    """Name of the block that is no spine's rear (the reader has made sure there is exactly one)."""
    rears = {spine.rear for spine in robot.body.spines}
    return next(block.name for block in robot.body.blocks if block.name not in rears)


def check_tree(robot: Robot) -> None:
    """Raises FaultError where spines make a loop, meet in one block, or leave a block on its own."""
    spines = robot.body.spines
    seen: set[str] = set()
    for index, spine in enumerate(spines):
        if spine.rear == spine.front:
            raise fail(("body", "spine", index, "rear"), "be another block than front", spine.rear)
        if spine.rear in seen:
            raise fail(
                ("body", "spine", index, "rear"), "be the rear of one spine only", spine.rear, "blocks form a tree"
            )
        seen.add(spine.rear)
    names = [block.name for block in robot.body.blocks]
    roots = [name for name in names if name not in seen]
    if len(roots) > 1:
        raise fail(
            ("body", "block"), "be joined by spines into one tree, but no spine leads to " + ", ".join(roots[1:])
        )
    # With one root at most and one front per rear, a block that the root does not reach lies on a loop.
    reached = set(roots)
    for _ in names:
        reached |= {spine.rear for spine in spines if spine.front in reached}
    loop = [name for name in names if name not in reached]
    if loop:
        raise fail(("body", "spine"), "form a tree without loops, but these blocks are on one: " + ", ".join(loop))
