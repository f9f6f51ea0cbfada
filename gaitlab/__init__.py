"""gaitlab: from a robot file to the best wiring of an air-driven walker."""

__version__ = "0.1.0"
