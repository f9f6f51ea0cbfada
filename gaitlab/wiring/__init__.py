"""Wirings: which output feeds which inlet, the space of all that a robot's limits allow, its symmetries and exact counts."""
