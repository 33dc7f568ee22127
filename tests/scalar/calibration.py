"""One steady test of the plant as it stands: which main efficiency, and which fouling, would have given it."""

import dataclasses
from collections.abc import Callable

from . import steam
from .balance import Balance
from .plain import Plant

BaselineAtTest = Callable[[Plant], Balance]

_EFFICIENCY = (0.4, 0.95)
_DIFFERENCE_K = (0.05, 40.0)


def calibrated(plant: Plant, at_test: BaselineAtTest) -> Plant:
    """The plant with the efficiency that meets the measured gross power.

    Where the exhaust pressure was measured too, at the turbine's flange, the terminal difference of the design
    point is sought around that: for every trial of it, the efficiency that meets the power.
    """
    test = plant.measured
    if test is None:
        return plant
    if test.exhaust_bar is None:
        return _with_power(plant, at_test)

    def miss(difference_K: float) -> float:
        trial = _with_power(dataclasses.replace(plant, terminal_difference_K=difference_K), at_test)
        return at_test(trial).train.shells[-1].steam.pressure_bar - test.exhaust_bar

    found = steam.root(miss, *_DIFFERENCE_K)
    return _with_power(dataclasses.replace(plant, terminal_difference_K=found), at_test)


def _with_power(plant: Plant, at_test: BaselineAtTest) -> Plant:
    def at(efficiency: float) -> Plant:
        return dataclasses.replace(plant, efficiency=efficiency)

    def miss(efficiency: float) -> float:
        return at_test(at(efficiency)).power_gross_MW - plant.measured.power_MW

    return at(steam.root(miss, *_EFFICIENCY))
