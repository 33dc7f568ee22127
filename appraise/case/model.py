"""The case as a whole: all tables of one file, frozen."""

from collections.abc import Iterator, Mapping
from typing import Annotated, Any

from pydantic import BeforeValidator

from appraise.case.fields import Frozen, FrozenMap, Table
from appraise.case.kinds import (
    Place,
    detail,
    fault,
    faults,
)
from appraise.case.money import Capex, Draws, Driver, Emissions, Finance, Opex, Scenario
from appraise.case.network import Network, Year
from appraise.case.plant import NewCondenser, Option, Plant, Study, Tail
from appraise.case.words import said


def note_entries(notes: Any, place: Place = ()) -> Iterator[tuple[Place, Any]]:
    """Every note and its place, whether its path was quoted in the file or not (then TOML nests it)."""
    if isinstance(notes, Mapping):
        for key, inner in notes.items():
            yield from note_entries(inner, (*place, str(key)))
    else:
        yield place, notes


def flat_notes(value: Any) -> dict[str, str]:
    """Notes by dotted path."""
    if not isinstance(value, Mapping):
        raise fault(said(value, "a table of dotted paths and texts"))
    entries = list(note_entries(value))
    wrong = [
        detail(place, said(note, "a text"), note) for place, note in entries if not isinstance(note, str)
    ]
    if wrong:
        raise faults("notes", wrong)
    return {".".join(map(str, place)): note for place, note in entries}


class Case(Table):
    """One plant, its options and its money, as one file states them."""

    study: Study
    plant: Plant
    tail: Tail
    new_condenser: NewCondenser
    options: tuple[Option, ...]
    network: Network = Network()
    year: Year
    scenarios: Annotated[Mapping[str, Scenario], Frozen]
    capex: Capex = Capex()
    opex: Opex = Opex()
    finance: Finance
    drivers: tuple[Driver, ...] = ()
    draws: Draws = Draws()
    emissions: Emissions = Emissions()
    notes: Annotated[Mapping[str, str], Frozen, BeforeValidator(flat_notes)] = FrozenMap({})

    @property
    def baseline(self) -> Option:
        """The option that all others are compared with."""
        return next(option for option in self.options if option.baseline)

    def tail_of(self, option: Option) -> Tail:
        """The tail of an option: its own keys over the case's, efficiencies never None."""
        turbine = self.plant.turbine
        defaults = {
            "mechanical_efficiency": turbine.mechanical_efficiency,
            "generator_efficiency": turbine.generator_efficiency,
        }
        return self.tail.model_copy(update=defaults | _stated(self.tail) | _stated(option.tail))

    def new_condenser_of(self, option: Option) -> NewCondenser:
        """The new condensers of an option: its own keys over the case's."""
        own = _stated(option.new_condenser)
        if option.terminal_difference_K is not None:
            own["terminal_difference_K"] = option.terminal_difference_K
        return self.new_condenser.model_copy(update=own)

    def shares_of(self, option: Option) -> tuple[float, ...]:
        """Shares of the temperature rise, cold to hot; equal where the option states none."""
        return option.shares or (1.0 / option.stages,) * option.stages


def _stated(table: Table | None) -> dict[str, Any]:
    """The values a table gives, without its blanks."""
    if table is None:
        return {}
    given = {key: getattr(table, key) for key in table.model_fields_set}
    return {key: value for key, value in given.items() if value is not None}
