"""One steady test of the plant as it stands: which efficiency and which fouling, would have given it?"""

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

    Where the exhaust pressure was measured too, at the turbine's flange, the terminal difference of the
    design point is found from it; the two are repeated in turn until neither moves.
    """
    test = plant.measured
    if test is None:
        return plant
    for _ in range(20):
        before = plant
        if test.exhaust_bar is not None:
            plant = _with_exhaust(plant, at_test)
        plant = _with_power(plant, at_test)
        moved = abs(plant.efficiency - before.efficiency)
        moved += abs(plant.terminal_difference_K - before.terminal_difference_K)
        if moved < 1e-11:
            return plant
    raise ValueError("efficiency and terminal difference do not settle")


def _with_exhaust(plant: Plant, at_test: BaselineAtTest) -> Plant:
    def at(difference_K: float) -> Plant:
        return dataclasses.replace(plant, terminal_difference_K=difference_K)

    def miss(difference_K: float) -> float:
        return at_test(at(difference_K)).train.shells[-1].steam.pressure_bar - plant.measured.exhaust_bar

    return at(steam.root(miss, *_DIFFERENCE_K))


def _with_power(plant: Plant, at_test: BaselineAtTest) -> Plant:
    def at(efficiency: float) -> Plant:
        return dataclasses.replace(plant, efficiency=efficiency)

    def miss(efficiency: float) -> float:
        return at_test(at(efficiency)).power_gross_MW - plant.measured.power_MW

    return at(steam.root(miss, *_EFFICIENCY))
