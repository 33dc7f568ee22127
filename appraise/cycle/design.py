"""The design point: where every option is sized, and what that fixes for all hours."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from appraise.case.load import Case
from appraise.case.plant import Option
from appraise.cycle.calibrate import Calibration, calibrate
from appraise.cycle.condensers import log_mean_difference, transfer_units
from appraise.cycle.energy import Energy
from appraise.cycle.feedwater import BleedLaw, not_below_live_steam
from appraise.cycle.plant import PlantData, plant_data
from appraise.cycle.shells import Shells, Sizes
from appraise.cycle.solve import solve
from appraise.cycle.stages import Stage, Train, ideal_train, train_of
from appraise.cycle.task import Conditions, Reference, Solution, Task
from appraise.errors import CaseError, Problem


@dataclass(frozen=True, slots=True)
class NewSurface:
    """Surface to be bought for one stage, m2: all of a new one, what is added to the existing."""

    condensing_m2: float
    drain_m2: float

    @property
    def total_m2(self) -> float:
        """Both zones together."""
        return self.condensing_m2 + self.drain_m2


@dataclass(frozen=True, slots=True, eq=False)
class OptionDesign:
    """One option at the design point and its fixed sizes."""

    train: Train
    sizes: Sizes
    surface: tuple[NewSurface, ...]
    solution: Solution

    @property
    def energy(self) -> Energy:
        """Power and fuel at the design point."""
        return self.solution.energy


@dataclass(frozen=True, slots=True, eq=False)
class Design:
    """The whole design point: the baseline's reference values and every option, in the case's order."""

    plant: PlantData
    calibration: Calibration | None
    reference: Reference
    conditions: Conditions
    existing_conductance_kW_K: float
    baseline: OptionDesign
    options: tuple[OptionDesign, ...]


def design_conditions(case: Case) -> Conditions:
    """The design point as one operating point."""
    at = case.plant.design
    return Conditions(np.array([at.heat_MW]), np.array([at.return_C]), np.array([at.supply_C]))


def design(case: Case) -> Design:
    """Solve the design point of the baseline, then size every option there.

    Raises CaseError, naming the option, where one cannot be built.
    """
    conditions, train = design_conditions(case), train_of(case, case.baseline)
    live_bar = case.plant.live_steam.pressure_bar

    def baseline_of(trial: PlantData) -> tuple[Reference, Task]:
        reference, existing = _rated_baseline(trial, train, conditions, live_bar)
        return reference, _rated_task(trial, train, reference, conditions, existing)

    plant, calibration = calibrate(case, plant_data(case), baseline_of)
    reference, existing = _rated_baseline(plant, train, conditions, live_bar)
    options = tuple(
        size_option(plant, train_of(case, option), reference, conditions, existing) for option in case.options
    )
    baseline = next(o for o in options if o.train.key == case.baseline.key)
    return Design(plant, calibration, reference, conditions, existing, baseline, options)


def _rated_baseline(
    plant: PlantData, train: Train, conditions: Conditions, live_bar: float
) -> tuple[Reference, float]:
    """The baseline at its own design point: reference values, and UA of its condenser in kW/K."""
    stated = replace(train.stages[0], terminal_difference_K=plant.existing_difference_K)
    start = solve(_design_task(plant, replace(train, stages=(stated,)), None, conditions, (None,)))
    reference = Reference(
        live_steam_kg_s=float(start.feed.live_steam_kg_s[0]),
        bleed=BleedLaw(
            condensate_kg_s=float(start.condensate_kg_s[0]),
            bleed_bar=plant.bleed_bar,
            heater_bar=0.0 if plant.heater is None else plant.heater.bleed_bar,
            exhaust_bar=float(start.shells.flange_bar[-1, 0]),
        ),
    )
    _check_exhaust(reference.bleed.exhaust_bar, plant.bleed_bar, live_bar)
    return reference, _conductance(stated, start, 0)


def _check_exhaust(exhaust_bar: float, bleed_bar: float, live_bar: float) -> None:
    """Live steam and the bleed must lie above the exhaust. Raises CaseError."""
    for where, bar in (("plant.live_steam.pressure_bar", live_bar), ("plant.feed.bleed_bar", bleed_bar)):
        if bar <= exhaust_bar:
            allowed = f"must lie above the baseline's exhaust, {exhaust_bar:.3f} bar at the design point"
            raise CaseError([Problem(where, f"{bar:g} bar; {allowed}")])


def _rated_task(
    plant: PlantData, train: Train, reference: Reference, conditions: Conditions, existing_kW_K: float
) -> Task:
    """A train at the design point with the existing condenser rated, and what is stated for the others."""
    rated = tuple(
        existing_kW_K * s.area_factor if s.terminal_difference_K is None else None for s in train.stages
    )
    return _design_task(plant, train, reference, conditions, rated)


def size_option(
    plant: PlantData, train: Train, reference: Reference, conditions: Conditions, existing_kW_K: float
) -> OptionDesign:
    """Solve one option at the design point with its stated differences, and fix its sizes."""
    task = _rated_task(plant, train, reference, conditions, existing_kW_K)
    solution, rated = solve(task), task.sizes.conductance_kW_K
    if not solution.valid[0]:
        why = f"cannot be built: {why_not(plant, solution)}"
        raise CaseError([Problem(f"options.{train.key}", why)])
    conductance = tuple(
        _conductance(stage, solution, i) if known is None else known
        for i, (stage, known) in enumerate(zip(train.stages, rated, strict=True))
    )
    shells = solution.shells
    choked = np.flatnonzero(shells.passing[:, 0] <= 0.0)
    if choked.size:
        raise CaseError([Problem(f"options.{train.key}", _no_drop(train, shells, int(choked[0])))])
    through = np.cumsum(shells.steam_kg_s[:, 0])[:-1]
    constant = tuple(float(v) for v in through / shells.passing[:, 0])
    sizes = Sizes(conductance, constant, tuple(map(float, through)), float(solution.network_kg_s[0]))
    surface = tuple(_new_surface(train, solution, i, existing_kW_K) for i in range(train.number))
    return OptionDesign(train, sizes, surface, solution)


def _new_surface(train: Train, solution: Solution, i: int, existing_kW_K: float) -> NewSurface:
    """Surface by zone from duty, U and logarithmic mean difference at the design point.

    Drain zone: from T_sat - T_x at its warm end to the drain approach at its cold end.
    """
    stage, shells = train.stages[i], solution.shells
    t_sat, t_x, t_out = (
        float(v[0]) for v in (shells.saturation_C[i], shells.zone_C[i], shells.water_C[i + 1])
    )
    inflow = 0.0 if train.pumped else float(shells.steam_kg_s[i + 1 :, 0].sum())
    cooled = float(shells.steam_kg_s[i, 0]) + inflow
    drain_kW = cooled * float(shells.saturated_drain_kJ_kg[i, 0] - shells.drain_kJ_kg[i, 0])
    drain = 0.0
    if stage.drain_approach_K is not None and drain_kW > 0:
        mean = float(log_mean_difference(np.asarray(t_sat - t_x), np.asarray(stage.drain_approach_K)))
        drain = drain_kW * 1e3 / (stage.u_drain_W_m2K * mean)
    if stage.existing:
        added = (stage.area_factor - 1.0) * existing_kW_K
        return NewSurface(added * 1e3 / stage.u_condensing_W_m2K, drain)
    rise = float(shells.water_kJ_kg[i + 1, 0] - shells.water_kJ_kg[i, 0])
    duty_kW = float(solution.network_kg_s[0]) * rise - drain_kW
    mean = float(log_mean_difference(np.asarray(t_sat - t_x), np.asarray(t_sat - t_out)))
    return NewSurface(duty_kW * 1e3 / (stage.u_condensing_W_m2K * mean), drain)


def _design_task(
    plant: PlantData,
    train: Train,
    reference: Reference | None,
    conditions: Conditions,
    conductance: tuple[float | None, ...],
) -> Task:
    ends = plant.network.enthalpy(np.array([conditions.return_C[0], conditions.supply_C[0]]))
    flow = float(conditions.heat_MW[0] * 1e3 / (ends[1] - ends[0]))
    sizes = Sizes(conductance, (), (), flow)
    return Task(plant, train, sizes, reference, conditions, np.zeros(1, dtype=bool))


def _conductance(stage: Stage, solution: Solution, i: int) -> float:
    """UA, kW/K, that gives the stage its temperatures at the design point."""
    shells = solution.shells
    inlet = shells.water_C[i] if stage.existing else shells.zone_C[i]
    units = transfer_units(shells.saturation_C[i], inlet, shells.water_C[i + 1])
    c = (shells.water_kJ_kg[i + 1] - shells.water_kJ_kg[i]) / (shells.water_C[i + 1] - shells.water_C[i])
    return float(units[0] * solution.network_kg_s[0] * c[0])


def _no_drop(train: Train, shells: Shells, i: int) -> str:
    """A tail section that has no pressure left to expand."""
    inlet = shells.flange_bar[i + 1, 0] * (1.0 - train.tail.inlet_loss_share)
    return (
        f"cannot be built: the tail section into stage {i + 1} has {inlet:.4f} bar before it, behind its "
        f"inlet loss, and {shells.flange_bar[i, 0]:.4f} bar after it"
    )


def why_not(plant: PlantData, solution: Solution) -> str:
    """Why a single point, without a tail whose size is known, has no operation."""
    steam, pressure = solution.shells.steam_kg_s[:, 0], solution.shells.shell_bar[:, 0]
    if (np.diff(pressure) <= 0).any():
        stage = int(np.flatnonzero(np.diff(pressure) <= 0)[0]) + 1
        return (
            f"the shell of stage {stage} needs {pressure[stage - 1]:.3f} bar, which is not below the "
            f"{pressure[stage]:.3f} bar of the next hotter one"
        )
    if (steam <= 0).any():
        stage = int(np.flatnonzero(steam <= 0)[0]) + 1
        return f"stage {stage} would need no steam, the drains from above heat it alone"
    feed, shells = solution.feed, solution.shells
    above = not_below_live_steam(plant, shells.steam_kJ_kg[-1], feed, solution.on_live_steam)[:, 0]
    places = (
        ("its hottest exhaust", shells.flange_bar[-1]),
        ("the bleed to the deaerator", feed.bleed_bar),
        ("the bleed to the feed heater", feed.heater_bar),
    )
    name, bar = places[int(np.flatnonzero(above)[0])]
    return f"{name} would stand at {bar[0]:.3f} bar, which is not below the live steam"


def ideal_power_gross_MW(case: Case, option: Option, made: Design) -> float:
    """Gross power of 16 equal stages with the option's drain, route and terminal difference, MW.

    No generator limits it.
    """
    ideal = size_option(
        made.plant,
        ideal_train(case, option),
        made.reference,
        made.conditions,
        made.existing_conductance_kW_K,
    )
    return unlimited_gross_MW(ideal)


def unlimited_gross_MW(option: OptionDesign) -> float:
    """Gross power at the design point before what a generator's limit takes away, MW."""
    return float(option.energy.power_gross_MW[0] + option.energy.power_lost_MW[0])
