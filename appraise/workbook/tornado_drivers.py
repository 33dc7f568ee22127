"""Which bars of the tornado can follow the inputs, and by which formula.

A net present value is linear in the level of a price path, in capital, tax rate and most costs: their bars
are value per unit × change. The discount rate gets a second net present value. What changes the plant, its
hours or the length of the study was solved in the run and keeps its difference to the run's base.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

from appraise.case.fields import PricePath
from appraise.case.load import Case
from appraise.case.money import Driver
from appraise.case.paths import value_in_force
from appraise.sensitivity import Bar
from appraise.workbook.cash_flow_calendar import TAX_LEFT
from appraise.workbook.naming import input_name, name_of
from appraise.workbook.scenario_values import CO2, PEAK_CO2, tie_times

if TYPE_CHECKING:
    from appraise.study import Study

Way = Literal["scale", "flat", "level", "rate", "run"]
"""How an end is computed: path scaled, path replaced by a number, number moved, discount rate, as run."""

# Path -> lines it moves, and the energies behind them: sign, kind, factor.
PRICES: dict[str, tuple[tuple[str, ...], tuple[tuple[str, str, str], ...]]] = {
    "scenario.power": (("power",), (("", "weighted_power", ""),)),
    "scenario.fuel": (("fuel",), (("-", "fuel", ""),)),
    "scenario.peak_fuel": (("peak_fuel",), (("-", "peak_fuel", ""),)),
    "scenario.carbon": (
        ("carbon", "peak_carbon"),
        (("-", "fuel", f"*{CO2}"), ("-", "peak_fuel", f"*{PEAK_CO2}")),
    ),
}
TIE_OPPOSITE = frozenset({"peak_fuel"})
"""In the tie-in the plant burns less and the peak boilers burn more; as extra energy both count alike."""


@dataclass(frozen=True, slots=True)
class LiveBar:
    """How one bar of one option follows the inputs.

    worth : expression of the value per unit. now : expression of the driver's present value ("" where the way
    needs none). removed : expression of what goes away when a path is replaced, "" elsewhere.
    """

    way: Way
    worth: str = ""
    now: str = ""
    removed: str = ""


AS_RUN = LiveBar("run")


def live_bar(study: Study, option: int, driver: Driver, bar: Bar) -> LiveBar:
    """How this bar can follow, `AS_RUN` where it cannot."""
    if bar.npv_low is None or bar.npv_high is None:
        return AS_RUN
    case, key = study.case, study.case.options[option].key
    if driver.path in PRICES:
        return _price_bar(case, option, driver)
    if driver.path == "finance.discount_rate":
        return LiveBar("rate", now="in_finance_discount_rate")
    if driver.path.startswith("scenario."):
        return AS_RUN if case.options[option].bypass else _support_bar(case, key, driver)
    worth = _worth(case, option, driver)
    return LiveBar("level", worth, input_name(driver.path)) if worth else AS_RUN


def _price_bar(case: Case, option: int, driver: Driver) -> LiveBar:
    """A whole price path, as long as no hour is decided by that price."""
    lines, energies = PRICES[driver.path]
    flat = [end for end in (driver.low, driver.high) if not isinstance(end, str)]
    if (
        case.options[option].bypass
        or len(flat) == 1
        or (driver.path == "scenario.power" and _floored(case, driver))
    ):
        return AS_RUN
    key = case.options[option].key
    present = (f"SUMPRODUCT({name_of('line', line, key)},discount_factor)" for line in lines)
    lost = (f"{name_of('chosen_tie', line)}*tie_in_weight" for line in lines)
    moved = "+".join(f"{value}-{tie}" for value, tie in zip(present, lost, strict=True))
    worth = f"{TAX_LEFT}*({moved})"
    if not flat:
        return LiveBar("scale", worth)
    each = "".join(f"{sign or '+'}({_energy(case, key, kind)}){factor}" for sign, kind, factor in energies)
    return LiveBar("flat", f"{TAX_LEFT}*({each})", removed=worth)


def _energy(case: Case, key: str, kind: str, condition: str = "value_weight") -> str:
    """Extra energy of an option at present value, what the tie-in saves or costs included."""
    tie = ",".join(name_of("tie", kind, scenario) for scenario in case.scenarios)
    sign = "+" if kind in TIE_OPPOSITE else "-"
    # Extra power is lost in the tie-in, fuel is saved: both count as less of the energy; peak fuel as more.
    return (
        f"SUMPRODUCT({name_of('chosen_energy', kind, key)},{condition})"
        f"{sign}CHOOSE(chosen_index,{tie})*{tie_times(case)}*tie_in_weight"
    )


def _floored(case: Case, driver: Driver) -> bool:
    """Whether a floor of the premium could count other hours when the power price moves."""
    scenario = case.scenarios[case.study.reference_scenario]
    premium = scenario.power_premium
    if premium is None or premium.not_below is None:
        return False
    ends = [driver.low, driver.high]
    factors = [1.0 + float(end.rstrip("% ")) / 100.0 if isinstance(end, str) else end for end in ends]
    rising = all(factor is not None and factor > 0.0 for factor in factors)
    values = scenario.power.value if scenario.power.value is not None else (scenario.power.start,)
    return premium.not_below != 0.0 or not rising or min(values) <= 0.0


def _support_bar(case: Case, key: str, driver: Driver) -> LiveBar:
    """Premium and fee of the chosen scenario: so much per MWh."""
    if driver.path == "scenario.power_premium.value":
        years = "(operating_year<=chosen_premium__years)*value_weight"
        worth = f"{TAX_LEFT}*({_energy(case, key, 'premium', years)}*(chosen_premium__years>=1))"
        return LiveBar("level", worth, "chosen_premium__value")
    if driver.path == "scenario.network_fee":
        return LiveBar(
            "level", f"-{TAX_LEFT}*({_energy(case, key, 'power')})", "INDEX(chosen__fee,1,spend_years+1)"
        )
    return AS_RUN


def _worth(case: Case, option: int, driver: Driver) -> str:
    """Expression of the net present value per unit of a number of capital, cost or finance; "" for none."""
    key = case.options[option].key
    capital = name_of("capital_increment", key)
    running = f"{TAX_LEFT}*SUMPRODUCT(cost_growth,value_weight)"
    if driver.path == "opex.variable_per_MWh" and case.options[option].bypass:
        return ""
    if driver.path == "capex.multiplier" and case.finance.grant and _reaches_zero(driver):
        return ""
    if driver.path == "capex.tie_in.multiplier" and case.capex.tie_in is None:
        return ""
    losses = ",".join(name_of("tie_in_loss", scenario) for scenario in case.scenarios)
    return {
        "capex.multiplier": f"{capital}/in_capex_multiplier*unit_of_capital",
        "capex.tie_in.multiplier": f"-{TAX_LEFT}*CHOOSE(chosen_index,{losses})*tie_in_weight",
        "finance.tax_rate": f"-SUMPRODUCT({name_of('taxable', key)},deflator,discount_factor)",
        "finance.grant": (
            f"IF({capital}<>0,SUMPRODUCT(spend_share,basis_factor,discount_factor)"
            "-IF(in_finance_grant_reduces_depreciation,in_finance_tax_rate,0)"
            "*SUMPRODUCT(spend_share,inflation_index)*SUMPRODUCT(depreciation_share,deflator,discount_factor),0)"
        ),
        "finance.residual_share": (
            f"{TAX_LEFT}*{capital}*SUMPRODUCT((operating_year=years_counted)*value_weight)"
        ),
        "opex.fixed_share_of_capex": f"-{capital}*{running}",
        "opex.fixed_per_year": f"-{running}",
        "opex.variable_per_MWh": (
            f"-{TAX_LEFT}*SUMPRODUCT({name_of('chosen_energy', 'power', key)},cost_growth,value_weight)"
        ),
    }.get(driver.path, "")


def _reaches_zero(driver: Driver) -> bool:
    """Whether an end leaves no capital at all, and so no grant."""
    return any(
        end == 0 or (isinstance(end, str) and end.strip().startswith("-100"))
        for end in (driver.low, driver.high)
    )


def shown(value: object) -> str:
    """A driver's value as a reader would say it."""
    if isinstance(value, PricePath):
        return "price path"
    if isinstance(value, bool) or value is None:
        return "–"
    if isinstance(value, int | float):
        return f"{value:,.10g}".replace("-", "−")
    if isinstance(value, str):
        text = value.replace(" ", "").replace("-", "−")
        return f"{text[:-1]} %" if text.endswith("%") else text
    return "several values"


def shown_in(value: object, unit: str) -> str:
    """The same in a unit: a fraction in per cent, and "−25 %" as "−25 % of it", which is no other value."""
    if not unit.startswith("%"):
        return shown(value)
    if isinstance(value, int | float) and not isinstance(value, bool):
        return f"{shown(100.0 * value)} %"
    text = shown(value)
    return f"{text} of it" if text.endswith("%") else text


def value_now(case: Case, driver: Driver, unit: str = "") -> str:
    """What the driver's path has in the run."""
    return shown_in(value_in_force(case, driver.path), unit)


def driver_unit(path: str, scenario: str, units: Mapping[str, str]) -> str:
    """Unit of a driver, as the Inputs sheet has it; a plain factor is "times".

    scenario : stands for `scenario.` at the path's beginning. units : by path of the inputs
    """
    if path.startswith("scenario."):
        path = f"scenarios.{scenario}.{path.removeprefix('scenario.')}"
    found = (units.get(path + ending) for ending in ("", ".start", ".value[0]"))
    unit = next((unit for unit in found if unit is not None), "")
    factor = path.endswith(("multiplier", "factor"))
    return "times" if unit == "–" and factor else unit
