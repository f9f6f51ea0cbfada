"""Speed of the fast flow law: against the exact model in one run, per element and call, and memory per element.

Run from the root: python tests/benchmarks/air_speed.py
"""

from __future__ import annotations

import itertools
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from gaitlab.air.duct import exact_mass_flow
from gaitlab.air.elements import FlowElements
from gaitlab.air.gas import Gas
from gaitlab.robot.circuit import FlowPart, IsoPart, RoundDuct, SquareDuct

GAS = Gas()
LEAST_RATIO = 200.0
MOST_US_PER_ELEMENT = 0.5
MOST_KB_PER_ELEMENT = 10.0


def parts(count: int) -> list[FlowPart]:
    """A circuit's mix of resistors, open valves and tubes, all different."""
    kinds = (
        lambda k: SquareDuct(0.4e-3 + 5e-6 * k, 10e-3),
        lambda k: SquareDuct(1.2e-3 + 5e-6 * k, 6e-3),
        lambda k: RoundDuct(2e-3, 60e-3 + 2e-3 * k),
        lambda k: IsoPart(2e-10 + 1e-12 * k, 0.4),
    )
    return [kinds[k % len(kinds)](k) for k in range(count)]


def pressures(count: int) -> tuple[np.ndarray, np.ndarray]:
    """Absolute pressures on both sides, between 40 kPa and atmosphere."""
    rng = np.random.default_rng(3)
    return rng.uniform(40e3, 101e3, count), rng.uniform(40e3, 101e3, count)


def seconds(call: Callable[[], object], repeats: int, rounds: int = 7) -> float:
    """CPU seconds per call: the best of several rounds, which other load on the machine disturbs least."""
    found = []
    for _ in range(rounds):
        start = time.process_time()
        for _ in itertools.repeat(None, repeats):
            call()
        found.append((time.process_time() - start) / repeats)
    return min(found)


def fast_seconds(count: int) -> float:
    """Seconds of one call for `count` elements, flow and Jacobian."""
    elements, (p_a, p_b) = FlowElements.of(parts(count), GAS), pressures(count)
    return seconds(lambda: elements.flow(p_a, p_b), 2000)


def exact_seconds() -> float:
    """Seconds of one exact flow through one duct (no Jacobian), mean over ducts and pressures."""
    chosen = [part for part in parts(40) if not isinstance(part, IsoPart)]
    p_a, p_b = pressures(len(chosen))

    def all_of_them() -> None:
        for part, a, b in zip(chosen, p_a, p_b, strict=True):
            exact_mass_flow(part, float(a), float(b), GAS)

    return seconds(all_of_them, 3, rounds=4) / len(chosen)


def building_seconds(count: int) -> float:
    """Seconds to tabulate one new duct."""
    fresh = [RoundDuct(1.5e-3, 50e-3 + 1e-4 * k) for k in range(count)]
    start = time.process_time()
    FlowElements.of(fresh, GAS)
    return (time.process_time() - start) / count


def main() -> int:
    """Prints the figures and says whether they keep the limits."""
    exact = exact_seconds()
    per_element = {count: fast_seconds(count) / count for count in (15, 100, 400)}
    ratio = exact / per_element[100]
    kilobytes = FlowElements.of(parts(100), GAS).bytes_per_element / 1e3
    print(f"exact model                {1e6 * exact:9.1f} µs per flow")
    for count, value in per_element.items():
        print(
            f"fast form, {count:4d} elements    {1e6 * value:9.3f} µs per element, {1e6 * value * count:7.1f} µs per call"
        )
    print(f"exact over fast (100)      {ratio:9.0f} (at least {LEAST_RATIO:.0f})")
    print(f"memory of a table          {kilobytes:9.2f} kB per element (at most {MOST_KB_PER_ELEMENT:.0f})")
    print(f"tabulating a new duct      {1e3 * building_seconds(40):9.2f} ms")
    kept = ratio >= LEAST_RATIO and kilobytes < MOST_KB_PER_ELEMENT and 1e6 * per_element[100] <= MOST_US_PER_ELEMENT
    print(
        "all limits kept"
        if kept
        else f"a limit is broken (or the core is busy: {MOST_US_PER_ELEMENT} µs at 100 elements)"
    )
    return 0 if kept else 1


if __name__ == "__main__":
    sys.exit(main())
