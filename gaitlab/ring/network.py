"""The gas network of a ring as a system of equations: outputs, membranes, bellows and manifold, with the analytic Jacobian.

Unknowns in this order: pressure of each output P (N, Pa absolute), opening of each valve X (N, 0…1), gas content of each
bellows E = p V (n, J), gas content of the manifold G = p V (J) and its volume (m³; only a syringe changes it). All gas
is isothermal, so d(pV)/dt = R T Σm. Contents are unknowns instead of pressures because sums of contents are then kept
exactly by the integrator: gas in is gas out, however coarse the step.

What flows and what opens are handed in as laws, so that first-order stages, for which closed forms exist, run through
this very code.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import NDArray
from scipy.linalg.lapack import dgetrf, dgetrs

from gaitlab.ring.waves import FloatArray

IntArray = NDArray[np.int64]


class FlowLaw(Protocol):
    """Mass flow of all elements: N resistors (output to manifold), N valves (atmosphere to output), n tubes (output to bellows)."""

    def flow(self, p_a: FloatArray, p_b: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        """Signed flow [kg/s] from a to b and its derivatives with both pressures, each (2N + n,)."""

    def mass_flow(self, p_a: FloatArray, p_b: FloatArray) -> FloatArray:
        """The flow alone."""


class OpeningLaw(Protocol):
    """Where each membrane wants to be."""

    def target(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray
    ) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Target opening 0…1 and its derivatives with control pressure, output pressure and opening; absolute Pa, each (N,)."""

    def share(self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray) -> FloatArray:
        """The target alone."""


class ChamberLaw(Protocol):
    """Pressure in each bellows."""

    def pressure(self, content_J: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Pressure [Pa absolute] at the gas content p V [J], and its derivative [1/m³], each (n,)."""

    def pressures(self, content_J: FloatArray) -> FloatArray:
        """Pressures (K, n) at contents (K, n)."""


class SupplyLaw(Protocol):
    """What the pump takes out of the manifold."""

    def mass_flow(self, manifold_Pa: float) -> tuple[float, float]:
        """Mass flow [kg/s] out at this absolute pressure, and its derivative [kg/(s Pa)]."""


@dataclass(frozen=True)
class Network:
    """One ring with its loads. Arrays over stages (N,), over bellows (n,); `fed_by` the output (0…N−1) of each bellows.

    `volume_m3` is what is rigid at each output; an opening is the fraction of the open conductance. `complement` 1 shuts
    the resistor as the valve opens (a push-pull stage, whose closed forms are known); a vacuum ring has 0. `swept_m3_s`
    is the syringe's growth of the manifold.
    """

    gas_J_kg: float
    ambient_Pa: float
    volume_m3: FloatArray
    travel_s: FloatArray
    fed_by: IntArray
    flows: FlowLaw
    openings: OpeningLaw
    chambers: ChamberLaw
    supply: SupplyLaw
    complement: float = 0.0
    swept_m3_s: float = 0.0

    @property
    def stages(self) -> int:
        """N."""
        return int(self.volume_m3.size)

    @property
    def bellows(self) -> int:
        """n."""
        return int(self.fed_by.size)

    @cached_property
    def places(self) -> Places:
        """Where everything is in a state, and which element joins what."""
        return Places.of(self)

    def split(self, state: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
        """P, X, E, G and manifold volume of a state (or of many: the last axis is the state's)."""
        n, m = self.stages, 2 * self.stages + self.bellows
        return state[..., :n], state[..., n : 2 * n], state[..., 2 * n : m], state[..., m], state[..., m + 1]

    def rates(self, state: FloatArray) -> FloatArray:
        """dy/dt."""
        at = Point(self, state)
        flow = self.flows.mass_flow(*at.sides)
        return at.rates(flow, self.openings.share(at.control, at.output, at.opening))

    def linearised(self, state: FloatArray) -> Linearised:
        """dy/dt and the blocks of its Jacobian."""
        return Linearised(self, Point(self, state))


@dataclass(frozen=True)
class Places:
    """Index arrays of a network: N stages, n bellows, N + N + n elements, 2N + n + 2 unknowns.

    `side_a` and `side_b` pick an element's two pressures out of (P, bellows, manifold, atmosphere); `incidence` (unknowns,
    elements) turns mass flows into rates of P, E and G.
    """

    n: int
    m: int
    stage: IntArray
    before: IntArray
    bellows: IntArray
    side_a: IntArray
    side_b: IntArray
    incidence: FloatArray

    @classmethod
    def of(cls, net: Network) -> Places:
        """The places of this network."""
        n, count = net.stages, net.bellows
        m = 2 * n + count
        stage, bellows = np.arange(n), 2 * n + np.arange(count)
        manifold, atmosphere = np.full(n, n + count), np.full(n, n + count + 1)
        side_a = np.concatenate((stage, atmosphere, net.fed_by))
        side_b = np.concatenate((manifold, stage, n + np.arange(count)))
        incidence = np.zeros((m + 2, m))
        per = net.gas_J_kg / net.volume_m3
        incidence[stage, stage], incidence[stage, n + stage] = -per, per
        incidence[net.fed_by, bellows] = -per[net.fed_by]
        incidence[bellows, bellows] = incidence[m, :n] = net.gas_J_kg
        return cls(n, m, stage, np.roll(stage, 1), bellows, side_a, side_b, incidence)


class Point:
    """One state taken apart: what the flow and opening laws are asked for, and what comes of their answers."""

    __slots__ = (
        "bellows_slope",
        "control",
        "manifold",
        "net",
        "opening",
        "output",
        "part",
        "pump_slope",
        "sides",
        "volume",
    )

    def __init__(self, net: Network, state: FloatArray) -> None:
        at = net.places
        n, m = at.n, at.m
        self.net = net
        self.output, self.opening = state[:n], state[n : 2 * n]
        self.volume = float(state[m + 1])
        self.manifold = float(state[m]) / self.volume
        pressure = np.empty(m - n + 2)
        pressure[:n] = self.output
        pressure[n : m - n], self.bellows_slope = net.chambers.pressure(state[2 * n : m])
        pressure[m - n], pressure[m - n + 1] = self.manifold, net.ambient_Pa
        self.sides = pressure[at.side_a], pressure[at.side_b]
        self.control = self.output[at.before]
        self.part = np.ones(m)
        self.part[n : 2 * n] = self.opening
        if net.complement:
            self.part[:n] -= net.complement * self.opening

    def rates(self, flow: FloatArray, target: FloatArray) -> FloatArray:
        """dy/dt from the elements' flows [kg/s] and the membranes' targets."""
        net, at = self.net, self.net.places
        pump, self.pump_slope = net.supply.mass_flow(self.manifold)
        rates = at.incidence @ (self.part * flow)
        rates[at.n : 2 * at.n] = (target - self.opening) / net.travel_s
        rates[at.m] -= net.gas_J_kg * pump
        rates[at.m + 1] = net.swept_m3_s
        return rates


class Linearised:
    """Rates and Jacobian at one state; membranes and bellows touch only their own output and are eliminated by hand.

    What remains is one equation for each output, coupled to the output before it and to the manifold: N + 1 unknowns.
    Names say row and column: `px` is the derivative of dP/dt with X, c the controlling output, m the manifold's pressure.
    """

    def __init__(self, net: Network, at: Point) -> None:
        n, gas, fed = net.stages, net.gas_J_kg, net.fed_by
        flow, flow_a, flow_b = net.flows.flow(*at.sides)
        target, by_control, by_output, by_opening = net.openings.target(at.control, at.output, at.opening)
        self.net, self.rates = net, at.rates(flow, target)
        per = gas / net.volume_m3
        by_a, by_b = at.part * flow_a, at.part * flow_b
        tube_b = by_b[2 * n :] * at.bellows_slope
        drawn = net.complement * flow[:n]
        self.pp = per * (by_b[n : 2 * n] - by_a[:n] - np.bincount(fed, by_a[2 * n :], n))
        self.px = per * (flow[n : 2 * n] + drawn)
        self.pe, self.pm = -per[fed] * tube_b, -per * by_b[:n]
        self.xc, self.xp = by_control / net.travel_s, by_output / net.travel_s
        self.xx = (by_opening - 1.0) / net.travel_s
        self.ep, self.ee = gas * by_a[2 * n :], gas * tube_b
        self.mp, self.mx = gas * by_a[:n], -gas * drawn
        self.mm = gas * (float(by_b[:n].sum()) - at.pump_slope)
        self.m_content, self.m_volume = 1.0 / at.volume, -at.manifold / at.volume

    def solver(self, shift: float) -> Callable[[FloatArray], FloatArray]:
        """The map r → (shift·1 − J)⁻¹ r.

        With D for what is solved by itself, `gather` brings r to the N + 1 reduced equations, LU solves them, and
        `spread` carries their solution back to membranes and bellows.
        """
        x, e = 1.0 / (shift - self.xx), 1.0 / (shift - self.ee)
        px, pe, mx = self.px * x, self.pe * e, self.mx * x
        lu, pivots = self._factorised(shift, px, pe, mx)
        own, gather = self._gathering(shift, x, e, (px, pe, mx))
        spread = self._spreading(x, e)

        def solved(right: FloatArray) -> FloatArray:
            found = dgetrs(lu, pivots, gather @ right, trans=1)[0]
            return np.asarray(own * right + spread @ found)

        return solved

    def _gathering(
        self, shift: float, x: FloatArray, e: FloatArray, inner: tuple[FloatArray, FloatArray, FloatArray]
    ) -> tuple[FloatArray, FloatArray]:
        """Diagonal of what is solved by itself (unknowns,), and the map of a right side to the reduced one."""
        at, (px, pe, mx) = self.net.places, inner
        n, m = at.n, at.m
        own, gather = np.zeros(m + 2), np.zeros((n + 1, m + 2))
        own[n : 2 * n], own[2 * n : m], own[m + 1] = x, e, 1.0 / shift
        gather[at.stage, at.stage] = 1.0
        gather[at.stage, n + at.stage] = px
        gather[self.net.fed_by, at.bellows] = pe
        gather[n, m], gather[n, n : 2 * n] = 1.0, mx
        by_volume = self.m_volume / shift
        gather[:n, m + 1], gather[n, m + 1] = self.pm * by_volume, self.mm * by_volume
        return own, gather

    def _spreading(self, x: FloatArray, e: FloatArray) -> FloatArray:
        """The map of the reduced solution (outputs, manifold content) to all unknowns."""
        at = self.net.places
        spread = np.zeros((at.m + 2, at.n + 1))
        spread[at.stage, at.stage] = 1.0
        spread[at.n + at.stage, at.stage] = x * self.xp
        spread[at.n + at.stage, at.before] += x * self.xc
        spread[at.bellows, self.net.fed_by] = e * self.ep
        spread[at.m, at.n] = 1.0
        return spread

    def _factorised(self, shift: float, px: FloatArray, pe: FloatArray, mx: FloatArray) -> tuple[FloatArray, IntArray]:
        """LU of the transposed reduced matrix (row-major numpy is LAPACK's column-major transpose)."""
        at, n = self.net.places, self.net.stages
        matrix = np.zeros((n + 1, n + 1))
        matrix[at.stage, at.stage] = shift - self.pp - px * self.xp - np.bincount(self.net.fed_by, pe * self.ep, n)
        matrix[at.stage, at.before] -= px * self.xc
        matrix[:n, n] = -self.pm * self.m_content
        matrix[n, :n] = -self.mp - mx * self.xp
        matrix[n, at.before] -= mx * self.xc
        matrix[n, n] = shift - self.mm * self.m_content
        lu, pivots, _ = dgetrf(matrix.T, overwrite_a=1)
        return lu, pivots

    def matrix(self) -> FloatArray:
        """The full Jacobian (dense), for the stability of a resting state and for checks of the elimination."""
        at, fed = self.net.places, self.net.fed_by
        n, m, i, e = at.n, at.m, at.stage, at.bellows
        full = np.zeros((m + 2, m + 2))
        full[i, i], full[i, n + i], full[fed, e] = self.pp, self.px, self.pe
        full[n + i, at.before] = self.xc
        full[n + i, i] += self.xp
        full[n + i, n + i] = self.xx
        full[e, fed], full[e, e] = self.ep, self.ee
        full[m, :n], full[m, n : 2 * n] = self.mp, self.mx
        for row, by_manifold in ((i, self.pm), (m, self.mm)):
            full[row, m], full[row, m + 1] = by_manifold * self.m_content, by_manifold * self.m_volume
        return full
