"""What is said under every figure that somebody may take to the bench."""

from __future__ import annotations

ESTIMATES = (
    "All figures are estimates from a model with assumed tolerances; they replace neither a bench test nor licensed practice, "
    "and local codes for vacuum and compressed air hold."
)
DISTANCES = "A distance from a physics engine is an estimate, good to 20–30 %: trust the order more than the length."
BENCH = (
    "At the bench: vacuum vessels can implode (guard them, wear eye protection); never block a pump's exhaust and let a hot "
    "pump cool; vent before opening a joint; keep fingers off blades and needles when clearing channels; air out solvents "
    "and curing silicone."
)
