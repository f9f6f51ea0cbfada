"""The ring's valves as the network sees them: atmosphere on one flow side, the stage's output on the other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from gaitlab.air.valve import ValveBank, conductance_share, opening_target
from gaitlab.ring.waves import FloatArray
from gaitlab.robot.circuit import Valve


@dataclass(frozen=True)
class Membranes:
    """Opening targets of N valves whose control chamber is at one pressure and whose flow path runs from air to output."""

    bank: ValveBank
    ambient_Pa: float
    atmosphere: FloatArray

    @classmethod
    def of(cls, valves: Sequence[Valve], ambient_Pa: float) -> Membranes:
        """The membranes of these valves."""
        return cls(ValveBank.of(valves), ambient_Pa, np.zeros(len(valves)))

    def target(
        self, control_Pa: FloatArray, output_Pa: FloatArray, opening: FloatArray
    ) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """Target share of the open conductance, and its derivatives with control pressure, output pressure (absolute) and share.

        The network follows the share itself, leak included: the membrane's place is (share − leak)/(1 − leak), and both move
        with the same time constant.
        """
        control, output = self.ambient_Pa - control_Pa, self.ambient_Pa - output_Pa
        lifted = 1.0 - self.bank.leak_fraction
        place = (opening - self.bank.leak_fraction) / lifted
        target, slopes = opening_target(control, self.atmosphere, output, place, self.bank)
        share = conductance_share(target, self.bank)
        return share, -lifted * slopes.by_control, -lifted * slopes.by_b, slopes.by_opening
