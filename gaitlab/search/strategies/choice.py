"""Strategies by name."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from gaitlab.errors import InputError, must
from gaitlab.search.strategies.ask_tell import Strategy
from gaitlab.search.strategies.closing import Closing
from gaitlab.search.strategies.exhaustive import Exhaustive
from gaitlab.search.strategies.process_search import ProcessSearch
from gaitlab.search.strategies.race import Race
from gaitlab.search.strategies.random_draws import RandomDraws
from gaitlab.search.strategies.screen_search import ScreenSearch
from gaitlab.wiring.smooth import SmoothWaves
from gaitlab.wiring.space import WiringSpace


@dataclass(frozen=True)
class StrategyChoice:
    """A strategy's name, how many walks it may spend (None: its own default) and the seed of its random numbers."""

    name: str = "exhaustive"
    budget: int | None = None
    seed: int = 1


Maker = Callable[[StrategyChoice, WiringSpace, SmoothWaves], Strategy]


def _exhaustive(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    return Exhaustive(space, choice.budget)


def _race(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    return Closing(Race(space, choice.budget, choice.seed), space, waves.wirings())


def _process(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    return Closing(ProcessSearch(space, waves.wirings(), choice.budget, choice.seed), space, waves.wirings())


def _screen(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    return Closing(ScreenSearch(space, waves.wirings(), choice.budget, choice.seed), space, waves.wirings())


def _random(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    return Closing(RandomDraws(space, choice.budget, choice.seed), space, waves.wirings())


STRATEGIES: dict[str, Maker] = {
    "exhaustive": _exhaustive,
    "screen": _screen,
    "race": _race,
    "gp": _process,
    "random": _random,
}


def strategy_of(choice: StrategyChoice, space: WiringSpace, waves: SmoothWaves) -> Strategy:
    """The strategy of that name. Raises InputError for an unknown one and for a budget under one walk."""
    if choice.name not in STRATEGIES:
        raise InputError(must("strategy", "one of " + ", ".join(STRATEGIES), choice.name))
    if choice.budget is not None and choice.budget < 1:
        raise InputError(must("budget", "at least 1 walk", choice.budget))
    return STRATEGIES[choice.name](choice, space, waves)
