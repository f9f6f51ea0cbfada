"""The ring's valves as the network sees them: atmosphere on one flow side, the stage's output on the other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from gaitlab.air.valve import SIDE_BLEND_PA, ValveBank
from gaitlab.ring.waves import FloatArray
from gaitlab.robot.circuit import Valve


@dataclass(frozen=True)
class Membranes:
    """The law of `gaitlab.air.valve.opening_target` for N valves with one flow side at atmosphere, in absolute pressures.

    With u = p_amb − p_out and y the share of the open conductance (leak included, which the network follows in
    place of the membrane: both move with one time constant), x = fixed − control p_c + output p_out −
    lift √(u² + blend²) + held y, kept to [0, 1]; the target share is leak + (1 − leak) x² (3 − 2x). Written out here,
    all constants folded, because a run asks it ten thousand times; a test holds it to the general law.
    """

    ambient_Pa: float
    fixed: FloatArray
    control: FloatArray
    output: FloatArray
    lift: FloatArray
    held: FloatArray
    leak: FloatArray

    @classmethod
    def of(cls, valves: Sequence[Valve], ambient_Pa: float) -> Membranes:
        """The membranes of these valves."""
        bank = ValveBank.of(valves)
        span, sealing, leak = bank.opening_span_Pa, bank.sealing, bank.leak_fraction
        held = bank.hysteresis_Pa / span / (1.0 - leak)
        threshold = (bank.threshold_Pa - (sealing - 0.5) * SIDE_BLEND_PA) / span
        fixed = 0.5 * ambient_Pa / span - threshold - held * leak
        return cls(ambient_Pa, fixed, 1.0 / span, 0.5 / span, (sealing - 0.5) / span, held, leak)

    def share(self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray) -> FloatArray:
        """Target share of the open conductance, each (N,); absolute pressures."""
        x = self._place(control_Pa, output_Pa, opening, np.hypot(self.ambient_Pa - output_Pa, SIDE_BLEND_PA))
        return self.leak + (1.0 - self.leak) * x * x * (3.0 - 2.0 * x)

    def target(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray
    ) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Target share and its derivatives with control pressure, output pressure and share, each (N,)."""
        under = self.ambient_Pa - output_Pa
        apart = np.hypot(under, SIDE_BLEND_PA)
        x = self._place(control_Pa, output_Pa, opening, apart)
        lifted = 1.0 - self.leak
        sloped = 6.0 * lifted * x * (1.0 - x)
        by_output = sloped * (self.output + self.lift * under / apart)
        share = self.leak + lifted * x * x * (3.0 - 2.0 * x)
        return share, -sloped * self.control, by_output, sloped * self.held

    def _place(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray, apart: FloatArray
    ) -> FloatArray:
        x = self.fixed - self.control * control_Pa
        x += self.output * output_Pa
        x -= self.lift * apart
        x += self.held * opening
        np.maximum(x, 0.0, out=x)
        np.minimum(x, 1.0, out=x)
        return x
