"""Ways to spend walks: all wirings, a race, a Gaussian process over wirings, random draws; each only asks and is told."""
