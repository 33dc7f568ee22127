"""What was sized for every option, and by what: the design point, or the hour that asked for most."""

from __future__ import annotations

from collections.abc import Sequence

from appraise.sizing import SetBy, set_by
from appraise.study import Study
from appraise.workbook.cells import LABEL, TOTAL, UNIT, YEAR_ZERO, Page
from appraise.workbook.input_units import size_unit

WORDS = {
    "area_m2": "surface",
    "condensing_area_m2": "  of it condensing",
    "drain_area_m2": "  of it drain cooling",
    "heat_MW": "heat to the network",
    "steam_kg_s": "steam condensed",
    "exhaust_m3_s": "volume through the exhaust",
    "tail_shaft_MW": "shaft power of the new turbine section",
    "generator_MW": "generator for that section",
    "condensate_pump_kW": "condensate pump",
    "network_pump_kW": "pumping the network water through it",
    "vacuum_auxiliary_kW": "vacuum unit",
}
TITLE = "What was sized, and what set it: the greatest need of the design point and all hours"
ZONES = frozenset({"condensing_area_m2", "drain_area_m2"})
WITHOUT_HOURS = ZONES | {"area_m2"}


def settings(study: Study) -> list[tuple[str, tuple[SetBy, ...]]]:
    """By option its name and its sizes; options for which nothing is sized are left out."""
    physics = study.physics
    found = []
    for index, made in enumerate(physics.design.options):
        years = tuple(solved[index] for solved in physics.years.solved)
        found.append((study.balances[index].name, set_by(made, physics.design.plant, years)))
    return [(name, _told(sizes)) for name, sizes in found if sizes]


def _told(sizes: Sequence[SetBy]) -> tuple[SetBy, ...]:
    """The sizes without the zones of a surface that has one zone only."""
    whole = {size.stage: size.value for size in sizes if size.name == "area_m2"}
    return tuple(size for size in sizes if size.name not in ZONES or size.value != whole[size.stage])


def said(study: Study, size: SetBy) -> str:
    """What set a size, in words."""
    if size.name == "vacuum_auxiliary_kW":
        return "as given in the inputs"
    if size.hour is None or size.year is None:
        return "the design point" + (", at which surfaces are fixed" if size.name in WITHOUT_HOURS else "")
    time = str(study.hours.time[size.hour]).replace("T", " ") + ":00"
    knots = study.physics.years.knots
    return time if len(knots) == 1 else f"{time}, changed as in operating year {knots[size.year]}"


def put_sizes(page: Page, row: int, study: Study) -> int:
    """The table; returns the first free row below it."""
    page.headings(row, ("option and stage, cold end first", "unit", "as run", "set by"), "heading_left")
    page.merge(row, YEAR_ZERO, row, YEAR_ZERO + 2)
    row += 1
    for name, sizes in settings(study):
        stages = sorted({size.stage for size in sizes})
        for stage in stages:
            page.put(row, LABEL, f"{name}, stage {stage}", "text bold")
            row += 1
            for size in (one for one in sizes if one.stage == stage):
                page.put(row, LABEL, WORDS[size.name], "label_indent")
                page.put(row, UNIT, size_unit(size.name), "unit")
                page.put(row, TOTAL, size.value, f"{_kind(size.value)} as run")
                page.put(row, YEAR_ZERO, said(study, size), "label_indent")
                row += 1
    return row


def _kind(value: float) -> str:
    return "number1" if value >= 10.0 else "number2"
