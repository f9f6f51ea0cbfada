"""Which wiring walks best: strategies that ask and tell, workers that walk, a ledger that keeps every walk, and the ranking."""
