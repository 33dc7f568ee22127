"""A case that has every table and every form of a value, for what has to show or carry all of them."""

from appraise.case.model import Case


def full_case() -> Case:
    """A case that has every table and every form of a value."""
    flat = {"start": 40.0, "change_per_year": 0.01}
    curve = {"load": [0.5, 1.0], "value": [0.9, 1.0]}
    return Case.model_validate(
        {
            "study": {
                "title": "t", "currency": "EUR", "price_year": 2026, "first_year": 2028, "years": 4,
                "reference_scenario": "central",
            },
            "plant": {
                "live_steam": {
                    "pressure_bar": 62.0, "temperature_C": 485.0, "max_kg_s": 20.0, "min_kg_s": 6.0,
                },
                "boiler": {"efficiency": {"load": [0.4, 1.0], "value": [0.85, 0.89]}, "pressure_bar": 75.0},
                "turbine": {"efficiency": 0.84, "part_load": curve, "generator_limit_MW": 12.0},
                "feed": {
                    "deaerator_bar": 2.5, "bleed_bar": 5.0,
                    "heater": {"bleed_bar": 12.0, "terminal_difference_K": 4.0},
                },
                "condenser": {"terminal_difference_K": 3.0},
                "design": {"heat_MW": 40.0, "supply_C": 98.0, "return_C": 46.0},
                "flue_gas_condenser": {"heat_per_fuel": 0.1, "at_return_C": 46.0},
                "peak_boiler": {"efficiency": 0.92},
                "measured": {"heat_MW": 38.0, "supply_C": 96.0, "return_C": 45.0, "power_MW": 11.0},
            },
            "tail": {"efficiency": 0.8},
            "new_condenser": {"terminal_difference_K": 3.0, "drain_approach_K": 7.0},
            "options": [
                {"key": "single", "name": "Single", "stages": 1, "baseline": True},
                {
                    "key": "two", "name": "=Two", "stages": 2, "shares": [0.4, 0.6],
                    "tail": {"efficiency": 0.78, "part_load": curve},
                    "new_condenser": {"drain_approach_K": 6.0},
                },
            ],
            "network": {
                "heating_curve": {"outdoor_C": [-10, 10], "supply_C": [110, 80], "return_C": [50, 45]}
            },
            "year": {
                "series": "hours.csv",
                "outages": [{"from": "07-01", "to": "07-21"}, {"from": "12-30", "to": "01-02"}],
                "heat_signature": {"base_MW": 5.0, "slope_MW_per_K": 2.0, "threshold_C": 16.0},
                "metered": {"heat_MWh": 1.9e5, "power_net_MWh": 5e4, "fuel_MWh": 2.7e5},
            },
            "scenarios": {
                "central": {
                    "title": "Central", "power": {"year": [2028, 2040], "value": [60.0, 70.0]}, "fuel": flat,
                    "peak_fuel": 40.0, "power_premium": {"value": 20.0, "years": 3, "not_below": 0.0},
                },
                "low": {"power": 50.0, "fuel": {"start": 20.0}, "peak_fuel": 35.0},
            },
            "capex": {
                "index": {"year": [2020, 2026], "value": [100.0, 120.0]},
                "exchange": {"USD": 0.9, "SEK": 0.09},
                "spend": [0.3, 0.7], "tie_in": {"from": "07-01", "to": "08-01"},
                "items": [
                    {"key": "tail", "name": "Tail", "amount": 1e6, "currency": "USD", "year": 2024,
                     "only": "two"},
                    {
                        "key": "shell", "name": "Shell", "per": "new_stage", "source": "a quotation",
                        "correlation": {
                            "size": "area_m2", "reference_cost": 1e5, "reference_size": 400.0,
                            "exponent": 0.8, "minimum": 50.0, "maximum": 900.0,
                        },
                    },
                    {"key": "works", "name": "Works", "share_of": ["tail", "shell"], "share": 0.2},
                    {"key": "rest", "name": "Rest", "share_of": "all", "share": 0.1},
                    {
                        "key": "pump", "name": "Pump",
                        "correlation": {"name": "turton-2001-centrifugal-pump", "material": "carbon-steel"},
                    },
                ],
            },
            "opex": {"overhauls": [{"every_years": 7, "amount": 3e4}]},
            "finance": {"discount_rate": 0.06, "depreciation": {"method": "table", "shares": [0.5, 0.3]}},
            "drivers": [
                {"label": "Power", "path": "scenario.power", "low": "-20%", "high": "+20%"},
                {
                    "label": "Tail", "path": "tail.efficiency", "low": 0.7, "high": 0.85,
                    "distribution": {"kind": "triangular", "low": 0.7, "mode": 0.8, "high": 0.85},
                },
            ],
            "draws": {"number": 100, "correlations": [{"between": ["Power", "Tail"], "rank": 0.2}]},
            "notes": {"capex.index": "a table", "plant.turbine.efficiency": "a test"},
        }
    )  # fmt: skip
