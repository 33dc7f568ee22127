"""What the Prices sheet lists and where: kinds of price, fixed rows, how a path given by year is read."""

from __future__ import annotations

from dataclasses import dataclass

from appraise.workbook.naming import input_name

TITLE = "Prices"
YEAR_ROW, OPERATING_YEAR_ROW, INDEX_ROW, CHOSEN_ROW = 4, 5, 6, 8


@dataclass(frozen=True, slots=True)
class Kind:
    """One price: attribute of ScenarioPrices, key in the case, words, and what it is paid per."""

    name: str
    key: str
    label: str
    per: str


KINDS = (
    Kind("power", "power", "Power, mean of the year", "MWh"),
    Kind("fuel", "fuel", "Fuel", "MWh"),
    Kind("peak_fuel", "peak_fuel", "Fuel of the peak boilers", "MWh"),
    Kind("carbon", "carbon", "Carbon dioxide", "t"),
    Kind("premium", "power_premium", "Premium on extra power", "MWh"),
    Kind("fee", "network_fee", "Network fee on extra power", "MWh"),
)


def chosen_row(kind: str) -> int:
    """Row of the chosen scenario's price."""
    return CHOSEN_ROW + [one.name for one in KINDS].index(kind)


@dataclass(frozen=True, slots=True)
class Place:
    """A listed path: `row` says where each year lies between the points, the row below how far."""

    row: int
    path: str
    number: int

    def _list(self, key: str) -> str:
        return input_name(f"{self.path}.{key}")

    def before(self, c: str) -> str:
        """Formula: number of the last point before the year, but never the last of all."""
        years = self._list("year")
        return f"=MIN(MATCH(MAX({c}${YEAR_ROW},INDEX({years},1)),{years},1),COUNT({years})-1)"

    def weight(self, c: str) -> str:
        """Formula: how far the year lies towards the next point; 0 before the first, 1 after the last."""
        years, at = self._list("year"), f"{c}{self.row}"
        start, end = f"INDEX({years},{at})", f"INDEX({years},{at}+1)"
        return f"=MAX(0,MIN(1,({c}${YEAR_ROW}-{start})/({end}-{start})))"

    def price(self, c: str) -> str:
        """Expression of the price in the column `c`."""
        values, at, weight = self._list("value"), f"{c}${self.row}", f"{c}${self.row + 1}"
        if self.number == 1:
            return f"INDEX({values},1)"
        return f"((1-{weight})*INDEX({values},{at})+{weight}*INDEX({values},{at}+1))"
