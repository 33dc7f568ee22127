"""Plants at the edges of what a case may say: solved or refused with a reason, closed, and within the laws.

`python tests/sweeps/edges.py` asks the same of many thousands.
"""

import pytest
from sweeps.edge_plants import edge_plant
from sweeps.edges import CLOSURE_LIMIT, Outcome, band, outcome, outcomes_of

NUMBER, SEED = 300, 3


@pytest.fixture(scope="module")
def outcomes() -> list[Outcome]:
    return list(outcomes_of(NUMBER, SEED))


def test_solved_or_refused_but_never_broken(outcomes: list[Outcome]) -> None:
    assert [(one.plant.number, one.reason) for one in outcomes if one.faulty] == []


def test_most_are_solved_in_every_corner(outcomes: list[Outcome]) -> None:
    accepted = [one.plant for one in outcomes if one.reason is None]
    assert len(accepted) > 0.75 * NUMBER
    assert {band(plant.lift_K, (5.0, 80.0)) for plant in accepted} == set(range(10))
    assert {band(plant.load, (0.05, 1.0)) for plant in accepted} == set(range(10))
    assert {plant.stages for plant in accepted} == set(range(1, 7))


def test_energy_closes(outcomes: list[Outcome]) -> None:
    assert max(one.closure for one in outcomes) < CLOSURE_LIMIT


def test_laws_hold(outcomes: list[Outcome]) -> None:
    laws = [(law, one.plant.number) for one in outcomes for law in one.laws]
    assert {law.name for law, _ in laws} == {
        "price of extra power", "more equal stages", "subcooling", "gain vanishes with the lift"
    }  # fmt: skip
    assert [(number, law) for law, number in laws if law.shortfall > 0.0] == []


def test_a_plant_is_the_same_however_it_is_reached(outcomes: list[Outcome]) -> None:
    again = edge_plant(SEED, 7)
    assert again.data == outcomes[7].plant.data
    assert outcome(again).closure == outcomes[7].closure


def test_valves_that_close_on_the_way_are_no_fault() -> None:
    """Here the iteration tries a thousandth of the pressure before a valve, which no steam table has."""
    assert outcome(edge_plant(99, 691)).reason is None
