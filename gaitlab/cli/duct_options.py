"""A channel or tube from the sizes on a command line."""

from __future__ import annotations

import click

from gaitlab.air.section import Duct
from gaitlab.robot.circuit import RectDuct, RoundDuct, SquareDuct
from gaitlab.robot.fields import MILLI


def duct_from_sizes(
    square_mm: float | None,
    width_mm: float | None,
    height_mm: float | None,
    bore_mm: float | None,
    length_mm: float,
    inlet_loss: float,
) -> Duct:
    """The duct of exactly one of: square side; width with height; bore. Raises click.UsageError otherwise."""
    rectangle = width_mm is not None or height_mm is not None
    if sum((square_mm is not None, rectangle, bore_mm is not None)) != 1:
        raise click.UsageError("give exactly one of --square-mm, --width-mm with --height-mm, and --bore-mm")
    length_m = length_mm * MILLI
    if square_mm is not None:
        return SquareDuct(square_mm * MILLI, length_m, inlet_loss)
    if bore_mm is not None:
        return RoundDuct(bore_mm * MILLI, length_m, inlet_loss)
    if width_mm is None or height_mm is None:
        raise click.UsageError("a rectangular channel needs both --width-mm and --height-mm")
    return RectDuct(width_mm * MILLI, height_mm * MILLI, length_m, inlet_loss)
