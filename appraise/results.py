"""What `run` hands over besides the workbook: the study as JSON, and a summary on the screen."""

from __future__ import annotations

from dataclasses import fields
from textwrap import fill
from typing import TYPE_CHECKING, Any

from appraise.output import percent, plain
from appraise.tables import WIDTH, Cell, Column, heading, table, table_of

if TYPE_CHECKING:
    from appraise.cash_flow import CashFlow
    from appraise.checks import Check
    from appraise.measures import Measures
    from appraise.optimum import DesignChoice
    from appraise.study import Study


def study_json(study: Study) -> dict[str, Any]:
    """The results of a study under the names that other people's scripts rely on."""
    return {
        "study": _about(study),
        "design_point": plain(study.balances, "design_point"),
        "year": plain([one for row in study.year_figures for one in row], "year"),
        "capex": plain(study.capital, "capex"),
        "emissions": [_emissions(study, index) for index in range(len(study.balances))],
        "estimates": plain(study.estimates, "estimates"),
        "cash_flow": [
            _flow(study, flow, told)
            for run, row in zip(study.runs, study.measures, strict=True)
            for flow, told in zip(run.flows, row, strict=True)
        ],
        "scenarios": _scenarios(study),
        "tornado": plain(study.tornado, "tornado"),
        "gain_moves": plain(study.moves, "gain_moves"),
        "draws": _draws(study),
        "break_even": plain(study.grids, "break_even"),
        "design_choice": plain(study.design_choice, "design_choice"),
        "checks": plain(study.checks, "checks"),
    }


def _about(study: Study) -> dict[str, Any]:
    from appraise import __version__

    loaded, about = study.loaded, study.case.study
    return {
        "title": about.title,
        "date": study.dated.isoformat(),
        "currency": about.currency,
        "price_year": about.price_year,
        "first_year": about.first_year,
        "years": about.years,
        "reference_scenario": about.reference_scenario,
        "version": __version__,
        "case_sha256": loaded.case_sha256,
        "hours_sha256": loaded.hours_sha256,
    }


def _emissions(study: Study, index: int) -> dict[str, Any]:
    """Stack CO2 and primary energy of the first operating year in the reference scenario."""
    from appraise.emissions import HIGH_EFFICIENCY_SAVING, carbon_change, plant_saving

    f = study.year_figures[study.reference][index]
    change = carbon_change(study.case, f.extra_power_MWh, f.extra_fuel_MWh, f.extra_peak_fuel_MWh)
    saving = plant_saving(study.case, f.heat_MWh, f.power_gross_MWh, f.fuel_MWh)
    return {
        "option": f.option,
        "co2_t": f.co2_t,
        "co2_change_t": float(change.stack),
        "co2_change_with_displaced_power_t": float(change.with_displaced),
        "primary_energy_saving": saving,
        "high_efficiency_from": HIGH_EFFICIENCY_SAVING,
    }


def _flow(study: Study, flow: CashFlow, told: Measures) -> dict[str, Any]:
    place = f"cash_flow of {flow.option} in {flow.scenario}"
    return {
        "scenario": flow.scenario,
        "option": flow.option,
        "basis": study.case.finance.basis,
        "calendar_year": [int(year) for year in flow.years],
        "lines": plain(flow.lines, place),
        "net": plain(flow.net, place),
        **plain(told, place),
    }


def _draws(study: Study) -> list[dict[str, Any]]:
    """Statistics by option; the draws themselves stay in the workbook."""
    if study.risk is None:
        return []
    error = plain(study.risk.method_error, "draws")
    found = []
    for one in study.risk.options:
        entry = {f.name: plain(getattr(one, f.name), "draws") for f in fields(one) if f.name != "npv"}
        found.append(entry | {"rank_correlation": dict(one.rank_correlation), "method_error": error})
    return found


def _scenarios(study: Study) -> dict[str, Any]:
    names, keys = list(study.case.scenarios), [option.key for option in study.case.options]
    compared = study.comparison
    return {
        "best": {name: keys[best] for name, best in zip(names, compared.best, strict=True)},
        "worst_npv": dict(zip(keys, compared.worst.tolist(), strict=True)),
        "largest_regret": dict(zip(keys, compared.largest_regret.tolist(), strict=True)),
        "regret": {
            name: dict(zip(keys, row, strict=True))
            for name, row in zip(names, compared.regret.tolist(), strict=True)
        },
    }


def run_summary(study: Study) -> str:
    """The answer in two tables: the options in the reference scenario, and NPV in every scenario."""
    about = study.case.study
    parts = [
        heading(about.title),
        f"Scenario {about.reference_scenario}, {_money(study)}, against the baseline:",
        _options_table(study),
        f"Net present value by scenario, thousand {about.currency}; the best option of each is starred:",
        _scenario_table(study),
        _closing(study),
    ]
    return "\n\n".join(parts)


def _money(study: Study) -> str:
    about, basis = study.case.study, study.case.finance.basis
    year = f"of {about.price_year}" if basis == "real" else "of the day"
    return (
        f"money {year} in thousand {about.currency} at {100 * study.case.finance.discount_rate:g} % {basis}"
    )


def _options_table(study: Study) -> str:
    at = study.reference
    return table_of(
        [
            (Column("option"), lambda i: study.balances[i].key),
            (Column("extra\npower", "MWh/a", 0), lambda i: study.year_figures[at][i].extra_power_MWh),
            (
                Column("per heat\ndesign point", "kW/MW", 2),
                lambda i: 1e3 * study.balances[i].extra_power_per_heat,
            ),
            (
                Column("per heat\nyear", "kWh/MWh", 2),
                lambda i: _thousand(study.year_figures[at][i].extra_power_per_heat),
            ),
            (Column("capital", "", 0), lambda i: float(study.capital[i].total) / 1e3),
            (
                Column("first year's\ngain", "", 0),
                lambda i: study.year_figures[at][i].first_year_gain / 1e3,
            ),
            (Column("NPV", "", 0), lambda i: study.measures[at][i].npv / 1e3),
            (Column("IRR", "%", 1), lambda i: percent(study.measures[at][i].irr)),
            (Column("payback", "years", 1), lambda i: study.measures[at][i].simple_payback_years),
        ],
        range(len(study.balances)),
    )


def _thousand(value: float | None) -> float | None:
    return None if value is None else 1e3 * value


def _scenario_table(study: Study) -> str:
    columns = [Column("scenario"), *(Column(balance.key, "", 0) for balance in study.balances)]
    rows: list[list[Cell]] = []
    for name, npv, best in zip(
        study.case.scenarios, study.comparison.npv, study.comparison.best, strict=True
    ):
        rows.append([name, *(f"{v / 1e3:,.0f}{' *' if i == best else '  '}" for i, v in enumerate(npv))])
    return table(columns, rows)


def _closing(study: Study) -> str:
    failed = [check for check in study.checks if not check.passed]
    plural = "" if len(failed) == 1 else "s"
    verdict = f"{len(study.checks)} checks, {len(failed)} finding{plural}{':' if failed else '.'}"
    return "\n".join([verdict, *(_finding(check) for check in failed), "", _CAUTION])


def _finding(check: Check) -> str:
    """What failed, by how much where that can be said, and why it matters; folded to the width of a page."""
    measured = check.value is not None and check.limit is not None
    by = f" {check.value:.4g}, limit {check.limit:.4g};" if measured else ""
    text = f"{check.name}:{by} {check.message}"
    return fill(text, WIDTH, initial_indent="  ", subsequent_indent="    ", break_on_hyphens=False)


_CAUTION = (
    "Pre-feasibility only and no investment advice: blading, pressure parts, permits and grid\n"
    "connection need the makers, the local codes and licensed engineers."
)


def optimum_table(choice: DesignChoice, currency: str) -> str:
    """Every curve of the design choice as a table, then the joint optimum."""
    title = f"{choice.option}: NPV in scenario {choice.scenario}, thousand {currency}; as stated "
    parts = [heading(f"{title}{choice.stated_npv / 1e3:,.0f}")]
    for curve in choice.curves:
        unit = f", {curve.unit}" if curve.unit else ""
        rows: list[list[Cell]] = [
            [
                value if isinstance(value, str) else f"{value:g}",
                None if npv is None else npv / 1e3,
                "best" if value == curve.best else reason or "",
            ]
            for value, npv, reason in zip(curve.values, curve.npv, curve.reason, strict=True)
        ]
        columns = [Column(f"{curve.label}{unit}"), Column("NPV", "", 0), Column("")]
        parts.append(table(columns, rows))
        if curve.flat is not None:
            low, high = curve.flat
            parts.append(f"within 1 % of the best from {low:.3g} to {high:.3g}{unit.replace(',', '')}")
    if choice.best_joint_npv is not None:
        parts.append(
            f"Terminal difference and split together: {choice.best_difference_K:g} K and "
            f"{choice.best_cold_share:g} of the rise in the cold stage, {choice.best_joint_npv / 1e3:,.0f}."
        )
    return "\n\n".join(parts)
