"""What every page that goes to the bench says: where work with vacuum robots hurts people, and what the figures are.

Common practice, no source.
"""

from __future__ import annotations

CAUTIONS = (
    ("Vacuum", "glass or thin plastic vessels can implode: use rated ones, shielded, and wear eye protection."),
    ("Compressed air", "never aim it at people; fit a regulator and relief valve, vent before you open a joint."),
    ("Blades and needles", "cut tubes away from you on a mat; cap needles, keep them in a sharps box."),
    ("Silicone and solvents", "cure and clean with ventilation and gloves; read the safety sheets; no open flame."),
    ("Hot pumps", "small pumps burn fingers and fail when blocked for long: let them cool, keep them dry."),
    ("Wet places", "anything electrical stays outside the wash-down area, behind the wall the hose comes through."),
)
ESTIMATES = (
    "All figures are estimates from a model, not measurements. Local codes and licensed practice for pressure, vacuum "
    "and electrical work come first; where this sheet and they differ, they are right."
)
