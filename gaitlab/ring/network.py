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


class OpeningLaw(Protocol):
    """Where each membrane wants to be."""

    def target(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray
    ) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Target opening 0…1 and its derivatives with control pressure, output pressure and opening; absolute Pa, each (N,)."""


class ChamberLaw(Protocol):
    """Pressure in each bellows."""

    def pressure(self, content_J: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Pressure [Pa absolute] at the gas content p V [J], and its derivative [1/m³], each (n,)."""


class SupplyLaw(Protocol):
    """What the pump takes out of the manifold."""

    def mass_flow(self, manifold_Pa: float) -> tuple[float, float]:
        """Mass flow [kg/s] out at this absolute pressure, and its derivative [kg/(s Pa)]."""


@dataclass(frozen=True)
class Network:
    """One ring with its loads. Arrays over stages (N,), over bellows (n,); `fed_by` the output (0…N−1) of each bellows.

    `volume_m3` is what is rigid at each output; an opening is the fraction of the open conductance. `complement` 1 shuts the resistor as the valve opens (a push-pull stage, whose closed forms are known); a vacuum
    ring has 0. `swept_m3_s` is the syringe's growth of the manifold.
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

    def split(self, state: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray, FloatArray]:
        """P, X, E, G and manifold volume of a state (or of many: the last axis is the state's)."""
        n, m = self.stages, 2 * self.stages + self.bellows
        return state[..., :n], state[..., n : 2 * n], state[..., 2 * n : m], state[..., m], state[..., m + 1]

    def rates(self, state: FloatArray) -> FloatArray:
        """dy/dt."""
        return _Point(self, state).rates

    def linearised(self, state: FloatArray) -> Linearised:
        """dy/dt and the blocks of its Jacobian."""
        return Linearised(self, state)


class _Point:
    """Everything evaluated at one state; what the Jacobian needs again is kept."""

    def __init__(self, net: Network, state: FloatArray) -> None:
        n = net.stages
        self.output, self.opening, content, manifold, volume = net.split(state)
        self.volume = float(volume)
        self.manifold = float(manifold) / self.volume
        self.bellows, self.bellows_slope = net.chambers.pressure(content)
        p_a = np.empty(2 * n + net.bellows)
        p_b = np.empty_like(p_a)
        p_a[:n], p_a[n : 2 * n], p_a[2 * n :] = self.output, net.ambient_Pa, self.output[net.fed_by]
        p_b[:n], p_b[n : 2 * n], p_b[2 * n :] = self.manifold, self.output, self.bellows
        self.flow, self.flow_a, self.flow_b = net.flows.flow(p_a, p_b)
        self.control = np.concatenate((self.output[-1:], self.output[:-1]))
        self.target = net.openings.target(self.control, self.output, self.opening)
        self.pump, self.pump_slope = net.supply.mass_flow(self.manifold)
        self.resistor_part = 1.0 - net.complement * self.opening
        self.rates = self._rates(net, state.size)

    def _rates(self, net: Network, size: int) -> FloatArray:
        n, m = net.stages, 2 * net.stages + net.bellows
        drawn, tubes = self.resistor_part * self.flow[:n], self.flow[2 * n :]
        rates = np.empty(size)
        into = self.opening * self.flow[n : 2 * n] - drawn
        if m > 2 * n:
            into -= np.bincount(net.fed_by, tubes, n)
        rates[:n] = net.gas_J_kg / net.volume_m3 * into
        rates[n : 2 * n] = (self.target[0] - self.opening) / net.travel_s
        rates[2 * n : m] = net.gas_J_kg * tubes
        rates[m] = net.gas_J_kg * (drawn.sum() - self.pump)
        rates[m + 1] = net.swept_m3_s
        return rates


class Linearised:
    """Rates and Jacobian at one state; membranes and bellows touch only their own output and are eliminated by hand.

    What remains is one equation for each output, coupled to the output before it and to the manifold: N + 1 unknowns.
    """

    def __init__(self, net: Network, state: FloatArray) -> None:
        n, gas = net.stages, net.gas_J_kg
        at = _Point(net, state)
        self.net, self.rates = net, at.rates
        per = gas / net.volume_m3
        r_a, r_b = at.resistor_part * at.flow_a[:n], at.resistor_part * at.flow_b[:n]
        t_a, t_b = at.flow_a[2 * n :], at.flow_b[2 * n :] * at.bellows_slope
        _, control, output, opening = at.target
        manifold_slope = 1.0 / at.volume
        self.pp = per * (at.opening * at.flow_b[n : 2 * n] - r_a - np.bincount(net.fed_by, t_a, n))
        drawn = net.complement * at.flow[:n]
        self.px = per * (at.flow[n : 2 * n] + drawn)
        self.pe, self.pm = -per[net.fed_by] * t_b, -per * r_b
        self.xc, self.xp, self.xx = control / net.travel_s, output / net.travel_s, (opening - 1.0) / net.travel_s
        self.ep, self.ee = gas * t_a, gas * t_b
        self.mp, self.mx, self.mm = gas * r_a, -gas * drawn, gas * (r_b.sum() - at.pump_slope)
        self.m_content, self.m_volume = manifold_slope, -at.manifold * manifold_slope

    def solver(self, shift: float) -> Callable[[FloatArray], FloatArray]:
        """The map r → (shift·1 − J)⁻¹ r: by elimination of membranes and bellows, then LU of N + 1 equations."""
        net = self.net
        n, m = net.stages, 2 * net.stages + net.bellows
        fed, x, e = net.fed_by, 1.0 / (shift - self.xx), 1.0 / (shift - self.ee)
        px, pe, mx = self.px * x, self.pe * e, self.mx * x
        lu, pivots = self._factorised(shift, px, pe, mx)
        x_p, x_c, e_p = x * self.xp, x * self.xc, e * self.ep
        still = net.swept_m3_s == 0.0

        def solved(right: FloatArray) -> FloatArray:
            out = np.empty_like(right)
            own_x, own_e = right[n : 2 * n], right[2 * n : m]
            reduced = np.empty(n + 1)
            reduced[:n] = right[:n] + px * own_x
            if m > 2 * n:
                reduced[:n] += np.bincount(fed, pe * own_e, n)
            reduced[n] = right[m] + mx @ own_x
            out[m + 1] = right[m + 1] / shift
            if not still:
                by_volume = self.m_volume * out[m + 1]
                reduced[:n] += self.pm * by_volume
                reduced[n] += self.mm * by_volume
            found = dgetrs(lu, pivots, reduced, trans=1)[0]
            p = found[:n]
            out[:n], out[m] = p, found[n]
            out[n : 2 * n] = x * own_x + x_p * p
            out[n] += x_c[0] * p[-1]
            out[n + 1 : 2 * n] += x_c[1:] * p[:-1]
            out[2 * n : m] = e * own_e + e_p * p[fed]
            return out

        return solved

    def _factorised(self, shift: float, px: FloatArray, pe: FloatArray, mx: FloatArray) -> tuple[FloatArray, IntArray]:
        """LU of the transposed reduced matrix (row-major numpy is LAPACK's column-major transpose)."""
        net, n = self.net, self.net.stages
        matrix = np.zeros((n + 1, n + 1))
        flat = matrix.reshape(-1)
        flat[: n * (n + 1) : n + 2] = shift - self.pp - px * self.xp - np.bincount(net.fed_by, pe * self.ep, n)
        back = px * self.xc
        flat[n + 1 : n * (n + 1) : n + 2] -= back[1:]
        matrix[0, n - 1] -= back[0]
        matrix[:n, n] = -self.pm * self.m_content
        past = mx * self.xc
        matrix[n, :n] = -self.mp - mx * self.xp
        matrix[n, : n - 1] -= past[1:]
        matrix[n, n - 1] -= past[0]
        matrix[n, n] = shift - self.mm * self.m_content
        lu, pivots, _ = dgetrf(matrix.T, overwrite_a=1)
        return lu, pivots

    def matrix(self) -> FloatArray:
        """The full Jacobian (dense), for the stability of a resting state and for checks of the elimination."""
        net = self.net
        n, m = net.stages, 2 * net.stages + net.bellows
        full, i, e = np.zeros((m + 2, m + 2)), np.arange(n), 2 * n + np.arange(net.bellows)
        full[i, i] = self.pp
        full[i, n + i] = self.px
        full[net.fed_by, e] = self.pe
        full[n + i, (i - 1) % n] = self.xc
        full[n + i, i] += self.xp
        full[n + i, n + i] = self.xx
        full[e, net.fed_by] = self.ep
        full[e, e] = self.ee
        full[m, :n], full[m, n : 2 * n] = self.mp, self.mx
        for row, by_manifold in ((i, self.pm), (m, self.mm)):
            full[row, m], full[row, m + 1] = by_manifold * self.m_content, by_manifold * self.m_volume
        return full
