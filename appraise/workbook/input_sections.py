"""Words of the sheet of inputs beside the keys: what a blank stands for, and the titles of its parts."""

from collections.abc import Mapping
from types import MappingProxyType

BLANKS: Mapping[str, str] = MappingProxyType(
    {
        "Study.date": "the day of the run",
        "Boiler.max_fuel_MW": "no limit",
        "Turbine.generator_limit_MW": "no limit",
        "Condenser.max_heat_MW": "no limit",
        "Measured.exhaust_bar": "not measured",
        "Measured.live_steam_kg_s": "not measured",
        "Tail.mechanical_efficiency": "the plant's",
        "Tail.generator_efficiency": "the plant's",
        "Tail.generator_limit_MW": "shares the plant's generator and limit",
        "Option.terminal_difference_K": "as for every new condenser",
        "Premium.not_below": "every hour counts",
        "CapexItem.currency": "the study's currency",
        "CapexItem.year": "the price year",
        "Depreciation.years": "over the years of operation",
        "Finance.reinvestment_rate": "the discount rate",
        "Draws.scenario": "the reference scenario",
    }
)
"""What a blank cell of a key stands for."""

SECTIONS: Mapping[str, str] = MappingProxyType(
    {
        "study": "Study",
        "plant": "Plant",
        "plant.live_steam": "Plant: live steam",
        "plant.boiler": "Plant: boiler",
        "plant.turbine": "Plant: turbine, main section",
        "plant.feed": "Plant: feed water",
        "plant.condenser": "Plant: existing condenser",
        "plant.design": "Plant: design point, at which all is sized",
        "plant.flue_gas_condenser": "Plant: flue-gas condenser",
        "plant.peak_boiler": "Plant: peak boilers",
        "plant.measured": "Plant: one steady test as it stands",
        "tail": "New turbine section (tail)",
        "new_condenser": "New condenser, each stage",
        "network": "Network",
        "year": "Year",
        "capex": "Capital: factors, spend and tie-in",
        "opex": "Running cost",
        "finance": "Finance",
        "drivers": "Drivers of tornado and draws",
        "draws": "Draws",
        "emissions": "Emissions",
    }
)
"""Headings of the groups whose name is not in the case itself."""
