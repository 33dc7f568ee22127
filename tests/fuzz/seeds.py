"""The cases that are bent: small, sound, and between them with most of the tables that a case can have."""

from typing import Any

from cases import minimal_case


def quick_case() -> dict[str, Any]:
    """Two options of one stage, so that a whole run needs no design choice; money in many forms."""
    data = minimal_case()
    del data["drivers"]
    data["options"][1] = {"key": "larger", "name": "Larger", "stages": 1, "existing_area_factor": 1.5}
    data["study"]["years"] = 5
    data["scenarios"]["central"] |= {
        "power": {"year": [2028, 2031], "value": [62.0, 70.0]},
        "fuel": {"start": 22.0, "change_per_year": 0.01},
        "carbon": 60.0,
        "power_premium": {"value": 10.0, "years": 2, "not_below": 0.0},
        "network_fee": 3.0,
    }
    data["plant"]["boiler"]["co2_kg_per_MWh"] = 200.0
    data["capex"] |= {
        "index": {"year": [2020, 2026], "value": [100.0, 120.0]},
        "exchange": {"USD": 0.9},
        "spend": [0.4, 0.6],
        "tie_in": {"from": "07-01", "to": "07-10", "multiplier": 1.0},
        "location_factor": 1.1,
    }
    data["capex"]["items"] += [
        {"key": "works", "name": "Works", "amount": 2e5, "currency": "USD", "year": 2024},
        {"key": "planning", "name": "Planning", "share_of": "all", "share": 0.1},
    ]
    data["opex"] = {
        "fixed_share_of_capex": 0.02,
        "fixed_per_year": 1e4,
        "variable_per_MWh": 1.5,
        "change_per_year": 0.01,
        "overhauls": [{"every_years": 3, "amount": 5e4}],
    }
    data["finance"] |= {
        "basis": "nominal",
        "inflation": 0.02,
        "tax_rate": 0.25,
        "depreciation": {"method": "declining_balance", "rate": 0.3, "years": 4},
        "grant": 1e5,
        "residual_share": 0.1,
        "reinvestment_rate": 0.04,
    }
    data["emissions"] = {"grid_kg_per_MWh": 300.0}
    data["notes"] = {"finance.discount_rate": "a guess"}
    return data


def rich_case() -> dict[str, Any]:
    """Three options on a plant with everything a plant may have."""
    data = minimal_case()
    del data["drivers"]
    data["plant"]["boiler"] |= {
        "efficiency": {"load": [0.4, 1.0], "value": [0.86, 0.89]},
        "blowdown_share": 0.01,
        "max_fuel_MW": 80.0,
    }
    data["plant"]["turbine"] |= {
        "part_load": {"load": [0.3, 0.7, 1.0], "value": [0.9, 0.97, 1.0]},
        "generator_limit_MW": 20.0,
    }
    data["plant"]["feed"] |= {
        "deaerator_control": "sliding",
        "heater": {"bleed_bar": 12.0, "terminal_difference_K": 4.0},
    }
    data["plant"]["condenser"] |= {"flow_exponent": 0.6, "max_heat_MW": 45.0}
    data["plant"]["flue_gas_condenser"] = {"heat_per_fuel": 0.08, "at_return_C": 46.0, "slope_per_K": 0.002}
    data["plant"]["peak_boiler"]["connection"] = "series"
    data["plant"]["measured"] = {"heat_MW": 38.0, "supply_C": 96.0, "return_C": 45.0, "power_MW": 12.6}
    data["tail"] |= {"baumann_factor": 0.8, "min_flow_share": 0.1, "inlet_loss_share": 0.01}
    data["new_condenser"] |= {"flow_exponent": 0.6, "vacuum_auxiliary_kW": 20.0}
    data["options"] += [
        {
            "key": "three-stage",
            "name": "Three stages",
            "stages": 3,
            "shares": [0.3, 0.3, 0.4],
            "drain": "subcooled",
            "drain_route": "pumped",
            "temperature_control": "held",
            "bypass": True,
            "tail": {"efficiency": 0.78},
            "new_condenser": {"drain_approach_K": 6.0},
        }
    ]
    curve = {"outdoor_C": [-10, 10], "supply_C": [110, 80], "return_C": [50, 45]}
    data["network"] = {"pressure_bar": 12.0, "heating_curve": curve}
    data["year"] |= {"outages": [{"from": "07-01", "to": "07-21"}], "heat_multiplier": 1.05}
    data["scenarios"]["low"] = {"power": 50.0, "fuel": {"start": 20.0}, "peak_fuel": 35.0}
    return data
