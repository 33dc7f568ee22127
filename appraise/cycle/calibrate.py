"""One steady test of the plant as it stands decides on the main section's efficiency and the fouling."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from scipy.optimize import brentq

from appraise.case.load import Case
from appraise.cycle.plant import PlantData
from appraise.cycle.solve import solve
from appraise.cycle.task import Conditions, Reference, Solution, Task
from appraise.errors import CaseError, Problem

EFFICIENCY_RANGE = (0.40, 0.95)
DIFFERENCE_RANGE_K = (0.05, 40.0)

BaselineOf = Callable[[PlantData], tuple[Reference, Task]]


@dataclass(frozen=True, slots=True)
class Calibration:
    """What the test said.

    difference_K : terminal difference of the existing condenser at the design point; None where the test has
        no exhaust pressure, so that efficiency and fouling cannot be told apart.
    live_steam_kg_s : by the model at the test. measured_live_steam_kg_s : None where it was not measured.
    """

    efficiency: float
    stated_efficiency: float
    difference_K: float | None
    stated_difference_K: float
    live_steam_kg_s: float
    measured_live_steam_kg_s: float | None


def calibrate(case: Case, plant: PlantData, baseline_of: BaselineOf) -> tuple[PlantData, Calibration | None]:
    """The plant with the efficiency, and where it can be known the terminal difference, that meet the test.

    baseline_of : gives the baseline's reference values and its task at the design point for a plant; its
        sizes follow the plant, so the test is solved off design. `exhaust_bar` is taken at the turbine's
        exhaust flange. Raises CaseError where no value in range meets the test.
    """
    test = case.plant.measured
    if test is None:
        return plant, None
    at = Conditions(np.array([test.heat_MW]), np.array([test.return_C]), np.array([test.supply_C]))

    def tested(trial: PlantData) -> Solution:
        reference, task = baseline_of(trial)
        return solve(replace(task, plant=trial, reference=reference, conditions=at))

    difference = None
    if test.exhaust_bar is not None:
        difference = _root(
            lambda k: float(tested(replace(plant, existing_difference_K=k)).shells.flange_bar[-1, 0]),
            DIFFERENCE_RANGE_K,
            test.exhaust_bar,
            "plant.measured.exhaust_bar",
            "bar",
            "a terminal difference of {:g} to {:g} K",
        )
        plant = replace(plant, existing_difference_K=difference)
    efficiency = _root(
        lambda x: float(tested(replace(plant, main_efficiency=x)).energy.power_gross_MW[0]),
        EFFICIENCY_RANGE,
        test.power_MW,
        "plant.measured.power_MW",
        "MW",
        "an efficiency of {:g} to {:g}",
    )
    plant = replace(plant, main_efficiency=efficiency)
    return plant, Calibration(
        efficiency=efficiency,
        stated_efficiency=case.plant.turbine.efficiency,
        difference_K=difference,
        stated_difference_K=case.plant.condenser.terminal_difference_K,
        live_steam_kg_s=float(tested(plant).feed.live_steam_kg_s[0]),
        measured_live_steam_kg_s=test.live_steam_kg_s,
    )


def _root(
    model: Callable[[float], float],
    span: tuple[float, float],
    measured: float,
    where: str,
    unit: str,
    meaning: str,
) -> float:
    """Where a rising function of one unknown meets what was measured."""
    ends = model(span[0]), model(span[1])
    if not ends[0] <= measured <= ends[1]:
        raise CaseError(
            [
                Problem(
                    where,
                    f"{measured:g} {unit} given; allowed: {ends[0]:.4g} to {ends[1]:.4g} {unit}, "
                    f"which the plant as described makes with {meaning.format(*span)}",
                )
            ]
        )
    return float(brentq(lambda x: model(x) - measured, *span, xtol=1e-12, rtol=1e-13))
