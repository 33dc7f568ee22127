"""Sheet of the cautions that travel with every result: what it rests on, and what it cannot say.

Standards are named where their title and scope were looked up at a place that carries them; they are no
complete list for any country.
"""

from __future__ import annotations

from collections.abc import Iterator
from math import ceil

from appraise.checks import MOISTURE_LIMIT
from appraise.study import Study
from appraise.workbook.cash_flow import LOSSES
from appraise.workbook.cells import Page, Sheet
from appraise.workbook.side_by_side import LINE_POINTS

TITLE = "Cautions"
COLUMNS = 8
WIDTH = 14.0
LINE_LENGTH = 1.25 * COLUMNS * WIDTH  # characters of running text


def cautions_sheet(study: Study) -> Sheet:
    """The cautions, on one page."""
    page = Page(TITLE, "as run")
    page.width([WIDTH] * COLUMNS)
    page.put(1, 1, TITLE, "title")
    page.put(2, 1, "They belong to every figure of this workbook, and go where it goes.", "note")
    row = 4
    for heading, paragraphs in _sections(study):
        page.merge(row, 1, row, COLUMNS)
        page.put(row, 1, heading, "section")
        row += 1
        for text in paragraphs:
            page.paragraph(row, 1, COLUMNS, text)
            page.height(row, ceil(len(text) / LINE_LENGTH) * LINE_POINTS + 4.0)
            row += 1
        row += 1
    page.printed(landscape=False, pages_tall=1)
    return page.finish()


def _sections(study: Study) -> Iterator[tuple[str, list[str]]]:
    yield "What this study is", _scope(study)
    yield "What its numbers rest on", list(_grounds(study))
    yield "What it does not model", list(_left_out(study))
    yield "For the turbine maker", _turbine()
    yield "For pressure equipment and water", _pressure()
    yield "For grid and permits", _grid()


def _scope(study: Study) -> list[str]:
    look = sum(not check.passed for check in study.checks)
    return [
        "It is a pre-feasibility study: it shows which options deserve the next, dearer step, and which do "
        "not. It replaces neither engineering nor quotations, and it is no investment advice.",
        f"{look} of its {len(study.checks)} checks ask for a look; the sheet Checks says which, and why.",
    ]


def _grounds(study: Study) -> Iterator[str]:
    """What was measured, what was assumed, and what prices are."""
    case, hours = study.case, study.hours
    if case.plant.measured is None:
        yield (
            "The efficiency of the existing turbine and the terminal difference of its condenser are "
            "stated, not measured. A steady heat test of the plant as it stands would settle both."
        )
    else:
        yield "The existing turbine was fitted to one steady test, and is as good as that test."
    if case.year.metered is None:
        yield (
            "The baseline's year was not compared with metered heat, power and fuel. Compare it before "
            "money is committed: the gain is a small difference of large figures."
        )
    else:
        yield "The baseline's year was compared with meters; the sheet Checks says how well it agrees."
    years = "one year" if hours.number_of_years == 1 else f"{hours.number_of_years} years"
    growth = (
        "as it was"
        if not case.year.change_per_year
        else f"changing by {case.year.change_per_year:.1%} a year"
    )
    yield (
        f"Heat and temperatures are those of {years} ({study.loaded.hours_path.name}), with demand {growth}. "
        "Colder and warmer years, new customers and lost ones will move the result."
    )
    yield (
        "Prices are scenarios and none of them is a forecast. "
        + (
            "The series has no hourly power price, so power is worth the same in every hour."
            if hours.power_price is None and not hours.other_prices
            else "The hourly shape of the power price is that of the series, in every scenario and year."
        )
    )
    yield (
        "Capital rests on the sources beside each item; a published correlation is a screening figure and a "
        "quotation always wins. Low and high totals are straight sums: wider than the likely spread if the "
        "errors of the items are independent of each other, and only then."
    )
    yield (
        f"Tax is that of the stated rate on the stated depreciation. {LOSSES} A stand-alone company would "
        "carry them forward, which is worth less."
    )


def _left_out(study: Study) -> Iterator[str]:
    yield (
        "Heat storage (the heat of the series is after it), start and stop costs, ramps, balancing and "
        "reserve markets, and what a stricter dispatch of several boilers would do. Hours follow one "
        "another without memory."
    )
    yield (
        "Fouling over the years, air in the shells, leaving losses beyond the stated exhaust loss, control "
        "margins and the wear of blades. The network is not modelled: its temperatures are given."
    )
    if not any(option.bypass for option in study.case.options):
        yield (
            "No option may be bypassed in hours of low power price; a bypass could only add margin, before "
            "its own cost."
        )


def _turbine() -> list[str]:
    return [
        f"Blading, moisture in the last rows (above {MOISTURE_LIMIT:.0%} is warned of), thrust balance, "
        "critical speeds, and overspeed from the steam stored in a larger exhaust volume need the maker of "
        "the turbine. Fast non-return valves, load rejection and island operation are for the same "
        "discussion.",
        "Useful in a specification: IEC 60045-1:2020 (steam turbines), EN 45510-5-1:1998 (procurement), "
        "IEC 60953-3:2022 (acceptance tests of retrofitted turbines, where turbine hardware changes).",
    ]


def _pressure() -> list[str]:
    return [
        "Pressure parts, shells under vacuum, relief, tube rupture (network water at full pressure enters "
        "a shell built for little), flashing of drains and air in-leakage fall under the "
        "pressure-equipment code of the country and are for licensed engineers. In the European Union that "
        "is Directive 2014/68/EU for plant equipment; EN 12952-15:2003 is the acceptance test of the "
        "boiler.",
        "A flooded condenser is a source of water to the turbine: high-level trips, non-return valves and "
        "drains are needed; ASME TDP-1-2013 is a recommended practice against water induction. A trip of "
        "the network pumps brings water hammer and a rise of shell pressure, which the trip system must "
        "meet.",
        "Hotter or larger networks need pipes for it; EN 13941 treats district-heating pipes, not the "
        "exchangers.",
    ]


def _grid() -> list[str]:
    return [
        "More power may need a new grid agreement. In the European Union a modernised generator of types C "
        "and D must be notified beforehand and may come under the whole of Regulation (EU) 2016/631 (Art. "
        "4): ask the grid operator before ordering.",
        "Environmental and building permits, support schemes and their conditions, heat tariffs and tax "
        "are local and change; have them confirmed in writing.",
    ]
