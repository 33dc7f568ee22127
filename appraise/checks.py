"""What a careful reader would verify, verified: closure, moisture, limits, what the existing plant can bear.

A check that fails is bad news about the result or the plant, never an error.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy_financial as npf

from appraise.capex import OptionCapital
from appraise.case.hours import Hours
from appraise.case.load import Case
from appraise.cash_flow import CashFlow
from appraise.chain import Physics, ScenarioRun
from appraise.draws import METHOD_LIMIT, MethodError
from appraise.measures import internal_rate
from appraise.year import OptionYear

CLOSURE_LIMIT = 1e-9
METER_LIMIT = 0.03  # deviation of a model from meters that asks for a reason
MOISTURE_LIMIT = 0.12  # common practice for last blades without special protection, from memory


@dataclass(frozen=True, slots=True)
class Check:
    """One question put to the results. `value` and `limit` are None where there is nothing to measure.

    option, item : keys of the option and of the capital item that it is about; `name` ends with them
    """

    name: str
    passed: bool
    value: float | None
    limit: float | None
    message: str
    option: str | None = None
    item: str | None = None


def checks(
    case: Case,
    hours: Hours,
    physics: Physics,
    bought: tuple[OptionCapital, ...],
    runs: tuple[ScenarioRun, ...],
    method_error: MethodError | None,
) -> tuple[Check, ...]:
    """Every check of a study, the numerical ones first."""
    return (
        *_closures(physics),
        *_money(runs),
        *_draws(method_error),
        *_moisture(hours, physics),
        *_flashing(physics),
        *_existing(hours, physics),
        *_design_limits(case, physics),
        *_hours(physics),
        *_estimates(bought),
        *_calibration(physics),
        *_meters(case, physics),
    )


def _limited(name: str, value: float, limit: float, message: str, option: str | None = None) -> Check:
    full = name if option is None else f"{name}, {option}"
    return Check(full, bool(value <= limit), float(value), limit, message, option)


def _all_years(physics: Physics, option: int) -> tuple[OptionYear, ...]:
    return tuple(solved[option] for solved in physics.years.solved)


def _closures(physics: Physics) -> Iterator[Check]:
    at_design = max(float(o.energy.closure[0]) for o in physics.design.options)
    yield _limited(
        "closure at the design point",
        at_design,
        CLOSURE_LIMIT,
        "energy in less energy out, relative to the boiler's heat, the largest of all options",
    )
    over_year = max(float(o.greatest.closure.value[0]) for solved in physics.years.solved for o in solved)
    yield _limited(
        "closure over all hours", over_year, CLOSURE_LIMIT, "the same in every solved hour of every option"
    )


def _money(runs: tuple[ScenarioRun, ...]) -> Iterator[Check]:
    flows = [flow for run in runs for flow in run.flows]
    scale = max(1.0, max(float(np.abs(flow.net).sum()) for flow in flows))
    lost = max(float(np.abs(flow.lines.total() - flow.net).max()) for flow in flows) / scale
    yield _limited(
        "lines sum to the net flow",
        lost,
        1e-12,
        "every option, scenario and year, relative to the largest flow",
    )
    second = [float(npf.npv(flow.case.finance.discount_rate, flow.net)) for flow in flows]
    apart = max(abs(float(flow.npv) - other) for flow, other in zip(flows, second, strict=True)) / scale
    yield _limited(
        "net present value, computed a second time",
        apart,
        1e-12,
        "by an independent library, every option and scenario, relative to the largest flow",
    )
    yield _limited(
        "value left at the internal rate of return",
        max(_left_at_irr(flow) for flow in flows) / scale,
        1e-9,
        "by an independent library, every option and scenario, relative to the largest flow",
    )


def _draws(error: MethodError | None) -> Iterator[Check]:
    if error is None:
        return
    yield _limited(
        "draws: fitted response against full solves",
        error.root_mean_square,
        METHOD_LIMIT,
        f"root mean square over the deviation of NPV, {error.checked} draws solved in full; the largest is "
        f"{100 * error.largest:.1f} %, the chance of a positive NPV shifts by {100 * error.shift:.1f} points",
    )


def _left_at_irr(flow: CashFlow) -> float:
    rate = internal_rate(flow.net).value
    return 0.0 if rate is None else abs(float(npf.npv(rate, flow.net)))


def _when(hours: Hours, index: int) -> str:
    return f"{hours.time[index].item():%Y-%m-%d %H:%M}" if index >= 0 else "the design point"


def _moisture(hours: Hours, physics: Physics) -> Iterator[Check]:
    for index, option in enumerate(physics.design.options):
        peaks = [year.greatest.moisture for year in _all_years(physics, index)]
        at_design = option.solution.shells.moisture[:, 0]
        worst, stage, when = max(
            [(float(p.value[i]), i, int(p.hour[i])) for p in peaks for i in range(option.train.number)]
            + [(float(at_design[i]), i, -1) for i in range(option.train.number)]
        )
        yield _limited(
            "moisture",
            worst,
            MOISTURE_LIMIT,
            f"wettest exhaust is that of stage {stage + 1}, at {_when(hours, when)}; "
            "erosion of the last blades is for the turbine maker to judge",
            option.train.key,
        )


def _flashing(physics: Physics) -> Iterator[Check]:
    for option in physics.design.options:
        shells = option.solution.shells
        for i in range(option.train.number - 1):
            if option.train.stages[i + 1].drain_approach_K is None or option.train.pumped:
                continue
            excess = float(shells.drain_C[i + 1, 0] - shells.saturation_C[i, 0])
            yield _limited(
                f"drain into stage {i + 1}",
                excess,
                0.0,
                f"subcooled drain less saturation in the colder shell, K: "
                f"{'it still flashes on entry; provide for it' if excess > 0 else 'no flashing'}",
                option.train.key,
            )


def _existing(hours: Hours, physics: Physics) -> Iterator[Check]:
    """Volume flow through the existing exhaust and duty of the existing condenser, against the baseline's."""
    base = physics.years.baseline
    for name, what, unit in (
        ("exhaust_m3_s", "existing exhaust", "m³/s"),
        ("heat_MW", "existing condenser", "MW"),
    ):
        limit = max(float(getattr(y.greatest, name).value[-1]) for y in _all_years(physics, base))
        for index, option in enumerate(physics.design.options):
            if index == base:
                continue
            peaks = [getattr(y.greatest, name) for y in _all_years(physics, index)]
            value, when = max((float(p.value[-1]), int(p.hour[-1])) for p in peaks)
            yield _limited(
                what,
                value,
                limit * (1.0 + 1e-12),
                f"greatest flow or duty, {unit}, at {_when(hours, when)}, against the baseline's greatest",
                option.train.key,
            )


def _design_limits(case: Case, physics: Physics) -> Iterator[Check]:
    steam = case.plant.live_steam
    for option in physics.design.options:
        flow = float(option.solution.feed.live_steam_kg_s[0])
        yield _limited(
            "live steam at the design point",
            flow,
            steam.max_kg_s,
            "kg/s; above the limit the option makes less heat than the design point asks for in such hours",
            option.train.key,
        )
    if case.plant.condenser.max_heat_MW is not None:
        yield _limited(
            "heat at the design point",
            case.plant.design.heat_MW,
            case.plant.condenser.max_heat_MW,
            "MW, all turbine condensers together",
        )


def _hours(physics: Physics) -> Iterator[Check]:
    idle = [base.hours(base.no_operation) for base in _all_years(physics, physics.years.baseline)]
    yield _limited(
        "hours without operation of the plant as it stands",
        max(idle),
        0.0,
        "hours with heat enough but at temperatures it cannot serve; peak boilers make their heat",
    )
    for index, option in enumerate(physics.years.solved[0]):
        if index == physics.years.baseline:
            continue
        borrowed = option.hours(option.as_baseline)
        yield Check(
            f"hours run as the baseline, {option.key}",
            borrowed == 0.0,
            borrowed,
            0.0,
            "hours in which the option has no steady operation of its own",
            option.key,
        )


def _estimates(bought: tuple[OptionCapital, ...]) -> Iterator[Check]:
    for paid in bought:
        for item in paid.items:
            for warning in item.warnings:
                name = f"capital, {paid.option}, {item.key}"
                yield Check(name, False, None, None, warning, paid.option, item.key)


def _meters(case: Case, physics: Physics) -> Iterator[Check]:
    """The baseline's first year against a metered one."""
    metered, years = case.year.metered, physics.years
    if metered is None:
        message = (
            "the baseline's year was not compared with metered heat, power and fuel: "
            "the gain rests on plant data alone"
        )
        yield Check("comparison with meters", False, None, None, message)
        return
    base = years.solved[0][years.baseline]
    share = years.shares[years.baseline] / base.years
    for what, made, measured in (
        ("heat", base.heat_MW, metered.heat_MWh),
        ("net power", base.power_net_MW, metered.power_net_MWh),
        ("fuel", base.fuel_MW, metered.fuel_MWh),
    ):
        value = share * float(made.sum())
        yield _limited(
            f"comparison with meters, {what}",
            abs(value / measured - 1.0),
            METER_LIMIT,
            f"the model's year has {value:,.0f} MWh, the meters {measured:,.0f} MWh",
        )


def _calibration(physics: Physics) -> Iterator[Check]:
    found = physics.design.calibration
    if found is None:
        return
    if found.difference_K is None:
        message = (
            f"efficiency {found.efficiency:.4f} found from power alone; without an exhaust pressure a fouled "
            "condenser and a worn turbine cannot be told apart"
        )
    else:
        message = f"efficiency {found.efficiency:.4f}, terminal difference {found.difference_K:.2f} K found"
    yield Check("steady test of the plant", found.difference_K is not None, found.efficiency, None, message)
    if found.measured_live_steam_kg_s is not None:
        yield _limited(
            "live steam of the steady test",
            abs(found.live_steam_kg_s / found.measured_live_steam_kg_s - 1.0),
            METER_LIMIT,
            f"model {found.live_steam_kg_s:.3f} kg/s, measured {found.measured_live_steam_kg_s:.3f} kg/s",
        )
