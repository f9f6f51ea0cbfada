"""How far to trust a result: build tolerances, spreads, rechecks, advice, and what bench traces say of the ring as built."""
