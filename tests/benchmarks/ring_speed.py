"""Speed of the ring: to a settled period against ngspice and against LSODA without Jacobian, and cost over N.

Run from the root: python tests/benchmarks/ring_speed.py

Each rival follows the same circuit from the same start over the same time, as far as the ring needs to settle. LSODA gets
the loosest tolerance of a list at which its period is as good as ours (errors against a tight reference are printed);
ngspice its own default tolerance and a largest step of 5 ms, whatever error that gives, and is tightened beside it.
Times are CPU seconds of the process that does the work; ours are the best of several rounds.
"""

from __future__ import annotations

import resource
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
from scipy.integrate import solve_ivp

ROOT = Path(__file__).resolve().parents[2]
sys.path.insert(0, str(ROOT))

from gaitlab.ring.circuit import Circuit, circuit_of
from gaitlab.ring.periodic import Settings, Settled, nudged, settled
from gaitlab.robot.records import Robot
from gaitlab.wiring.wiring import Wiring
from tests.ring.robots import in_order, tray, with_ring, with_supply
from tests.ring.spice import iso_circuit, netlist, ngspice

REFERENCE = Settings(loose=1e-4, tight=1e-7, near=1e-3, closed=1e-7)
Rival = Callable[[Circuit, np.ndarray, float, float, float], float]
LSODA_TOLERANCES = (1e-3, 3e-4, 1e-4, 3e-5, 1e-5, 3e-6)
SPICE_SETTINGS = ((5e-3, 1e-3), (2e-3, 1e-4), (1e-3, 1e-4))  # largest step, tolerance; the first is ngspice's default
EQUAL = 5e-5  # relative error of the period that counts as equal to ours, if ours happens to be smaller
MORE_S = 0.2  # past the last cut, so that it is seen
LSODA_LEAST, SPICE_LEAST = 3.0, 1.0  # least ratios that are asked for
LINEAR_MOST = 1.25  # cost a period and stage at N = 31 over that at N = 5
ROUNDS = 3


def main() -> None:
    """Prints every figure; exits 1 if a ratio is missed."""
    robot, wiring = tray(), in_order(tray())
    against_lsoda = compared("ducts, as in the robot file", circuit_of(robot, wiring), lsoda)
    against_spice = compared("data-sheet parts, as ngspice is given them", iso_circuit(robot, wiring), spice)
    print(f"faster than LSODA by {against_lsoda:.1f} (asked: {LSODA_LEAST:g})")
    print(f"faster than ngspice by {against_spice:.1f} (asked: above {SPICE_LEAST:g})")
    growth = cost_over_stages()
    missed = against_lsoda < LSODA_LEAST or against_spice < SPICE_LEAST or growth > LINEAR_MOST
    sys.exit(1 if missed else 0)


def compared(title: str, circuit: Circuit, rival: Rival) -> float:
    """Ratio of a rival's CPU seconds to ours on one circuit."""
    print(title)
    start = nudged(circuit, circuit.rest(), 1e-2)
    reference = period_of(settled(circuit, start, REFERENCE))
    ours_s, run = ours(circuit, start)
    error = abs(report("gaitlab", ours_s, period_of(run), reference))
    return rival(circuit, start, run.cuts_s[-1], reference, error) / ours_s


def report(name: str, seconds: float, period_s: float, reference_s: float) -> float:
    """One line: who, CPU seconds, period and its relative error, which is returned."""
    error = period_s / reference_s - 1.0
    print(f"  {name:24s} {seconds:8.3f} s   period {period_s:.6f} s   off by {error:+.1e}", flush=True)
    return error


def period_of(run: Settled) -> float:
    """Period of a run that closed."""
    assert run.cycle is not None
    return run.cycle.period_s


def ours(circuit: Circuit, start: np.ndarray) -> tuple[float, Settled]:
    """CPU seconds to a settled period, and the run."""
    best, run = np.inf, None
    for _ in range(ROUNDS):
        begun = time.process_time()
        run = settled(circuit, start)
        best = min(best, time.process_time() - begun)
    assert run is not None
    return best, run


def lsoda(circuit: Circuit, start: np.ndarray, end_s: float, reference_s: float, error: float) -> float:
    """CPU seconds of scipy's LSODA on the same rates, in full swings, without Jacobian."""
    scale, net = circuit.scale(), circuit.network
    times = np.linspace(0.0, end_s + MORE_S, 40_000)
    for tolerance in LSODA_TOLERANCES:
        begun = time.process_time()
        found = solve_ivp(
            lambda _, y: net.rates(y * scale) / scale,
            (0.0, end_s + MORE_S),
            start / scale,
            method="LSODA",
            rtol=tolerance,
            atol=tolerance,
            dense_output=True,
        )
        seconds = time.process_time() - begun
        period = last_period(times, circuit.gas.pressure_Pa - found.sol(times)[0] * scale[0])
        if abs(report(f"LSODA, rtol {tolerance:g}", seconds, period, reference_s)) <= max(error, EQUAL):
            break
    return seconds


def spice(circuit: Circuit, start: np.ndarray, end_s: float, reference_s: float, error: float) -> float:
    """CPU seconds of ngspice at its default tolerance on the equivalent circuit; tighter runs are printed beside it."""
    spent = []
    for step_s, accuracy in SPICE_SETTINGS:
        with tempfile.TemporaryDirectory() as folder:
            out = Path(folder) / "ring.txt"
            text = netlist(circuit, start, end_s=end_s + MORE_S, step_s=step_s, out=out, accuracy=accuracy)
            before = resource.getrusage(resource.RUSAGE_CHILDREN)
            run = ngspice(text, Path(folder), out)
            after = resource.getrusage(resource.RUSAGE_CHILDREN)
        spent.append(after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime)
        period = last_period(run.time_s, circuit.gas.pressure_Pa - run.output_Pa[0])
        name = f"ngspice, {accuracy:g}, {1e3 * step_s:g} ms"
        if abs(report(name, spent[-1], period, reference_s)) <= max(error, EQUAL):
            break
    return spent[0]


def last_period(time_s: np.ndarray, vacuum: np.ndarray) -> float:
    """Time between the last two rises through half of the peak."""
    level = 0.5 * vacuum.max()
    k = np.flatnonzero((vacuum[:-1] < level) & (vacuum[1:] >= level))
    edges = time_s[k] + (level - vacuum[k]) / (vacuum[k + 1] - vacuum[k]) * (time_s[k + 1] - time_s[k])
    return float(edges[-1] - edges[-2])


def cost_over_stages() -> float:
    """CPU seconds of one tight period for N = 5 … 31; returns cost a stage at 31 over that at 5."""
    costs = {}
    for stages in (5, 7, 11, 15, 21, 31):
        robot = sized(stages)
        circuit = circuit_of(robot, Wiring.of({i: k % stages + 1 for k, i in enumerate(robot.inlets())}))
        run = settled(circuit, nudged(circuit, circuit.rest(), 1e-2))
        costs[stages] = one_period(circuit, run)
        print(f"N = {stages:2d}: {1e3 * costs[stages]:7.1f} ms a period of {period_of(run):.3f} s", end="")
        print(f", {1e3 * costs[stages] / stages:5.2f} ms a stage")
    growth = costs[31] / 31 / (costs[5] / 5)
    print(f"cost a stage at 31 over 5: {growth:.2f} (asked: at most {LINEAR_MOST:g})")
    return growth


def sized(stages: int) -> Robot:
    """The row's ring with N stages and a pump to match."""
    robot = with_ring(tray(), stages=stages)
    return with_supply(robot, free_flow_m3_s=tray().supply.free_flow_m3_s * stages / 5)


def one_period(circuit: Circuit, run: Settled) -> float:
    """CPU seconds to follow one more period from where a run ended, tightly."""
    from gaitlab.ring.rosenbrock import steps

    best = np.inf
    for _ in range(ROUNDS):
        begun = time.process_time()
        for step in steps(
            circuit.network, run.end, scale=circuit.scale(), tolerance=Settings().tight, first_s=1e-3, longest_s=0.05
        ):
            if step.end_s > period_of(run):
                break
        best = min(best, time.process_time() - begun)
    return best


if __name__ == "__main__":
    main()
