"""The chain as data, and its two ways over arrays: step by step, and recorded as one program."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from stripcheck import chain as chains
from stripcheck.card import load_card, shipped_cards
from stripcheck.chain import FEW, Chain, Input, Step, evaluate
from stripcheck.day import read_day
from stripcheck.rules import load_rules, shipped_rules
from tests.messy_strips import messy_columns

DAYS: list[dict[str, Any]] = [
    {"isa_deviation": 15, "wind_from": 300, "wind_speed": 10},
    {"temperature": 25, "humidity": 60, "assumed_slope": 2},
    {"temperature": 30, "temperature_elevation": 1200, "dew_point": 18, "day_condition": "wet", "qnh": 1003},
]


CARDS = {name: load_card(name) for name in shipped_cards()}


def given(card: str, rules: str, day: dict[str, Any], rows: int, seed: int = 0) -> dict[str, Any]:
    values = {**CARDS[card].values, **load_rules(rules).values, **read_day(day).values}
    return {**values, **messy_columns(rows, seed)}


def assert_same(found: dict[str, np.ndarray], expected: dict[str, np.ndarray]) -> None:
    """Words and truths exactly; numbers to 1e-12, or 1e-9 m where the difference of two lengths is small."""
    assert found.keys() == expected.keys()
    for key, values in expected.items():
        if values.dtype.kind == "f":
            np.testing.assert_allclose(found[key], values, rtol=1e-12, atol=1e-9, err_msg=key)
        else:
            np.testing.assert_array_equal(found[key], values, err_msg=key)


@pytest.mark.parametrize("day", DAYS, ids=["deviation", "humid", "dew"])
@pytest.mark.parametrize("rules", shipped_rules())
@pytest.mark.parametrize("card", shipped_cards())
def test_both_ways_give_the_same(card: str, rules: str, day: dict[str, Any], monkeypatch: pytest.MonkeyPatch) -> None:
    values = given(card, rules, day, 3000)
    values["mass_takeoff"] = values["max_takeoff_mass"] * np.linspace(0.7, 1.02, 3000)
    values["landing_flap"] = np.linspace(values["flap_least"], values["flap_most"] + 0.01, 3000)
    chain = CARDS[card].chain
    plain = evaluate(chain, values)
    monkeypatch.setattr(chains, "FEW", 0)
    assert_same(evaluate(chain, values), plain)


def test_many_rows_as_one_by_one() -> None:
    """A long list in blocks, and single rows of it with plain numbers."""
    rows = 3 * FEW
    values = given("high-mule", "part-cat-b", DAYS[0], rows, seed=1)
    chain = CARDS["high-mule"].chain
    keys = ("takeoff_finding", "landing_finding", "takeoff_required", "landing_required", "density")
    whole = evaluate(chain, values, keys)
    for row in (0, 1, FEW, rows - 1):
        single = {key: column[row] if np.shape(column) == (rows,) else column for key, column in values.items()}
        assert_same({key: column[row : row + 1] for key, column in whole.items()},
                    {key: value.reshape(1) for key, value in evaluate(chain, single, keys).items()})  # fmt: skip


@pytest.mark.parametrize("rows", [10, FEW + 10])
def test_a_column_of_one_value_is_as_good_as_the_value(rows: int) -> None:
    chain = CARDS["ridge-runner"].chain
    values = given("ridge-runner", "uk-leaflet", DAYS[1], rows)
    single = {"slope_given": 0.01, "heading": np.nan, "surface": 3, "land_here": True, "own_wind_speed": 0.0}
    columns = {key: np.full(rows, value) for key, value in single.items()}
    assert_same(evaluate(chain, {**values, **single}), evaluate(chain, {**values, **columns}))


def with_single_values(chain: Chain, values: dict[str, Any]) -> dict[str, Any]:
    """The values of one row, without their dimension; tables stay as they are."""
    tables = {item.key for item in chain.inputs if item.kind == "range"}
    return {key: np.ravel(value)[0] if np.shape(value) == (1,) and key not in tables else value
            for key, value in values.items()}  # fmt: skip


@pytest.mark.parametrize("card", shipped_cards())
@pytest.mark.parametrize("rows", [10, FEW + 10])
def test_all_strips_at_one_place(card: str, rows: int) -> None:
    """Air and speeds are the same in all rows, and only the ground differs."""
    values = {**given(card, "uk-leaflet", DAYS[1], 1), "fault": False, "take_off_here": True, "land_here": True,
              "elevation_field": 500.0, "own_wind_speed": np.nan, "own_qnh": np.nan, "own_temperature": np.nan,
              "elevation_start": np.nan, "elevation_end": np.nan, "tora": 800.0, "lda": 800.0, "obstacle_height": np.nan,
              "obstacle_distance": np.nan}  # fmt: skip
    values = with_single_values(CARDS[card].chain, values)
    slopes = np.linspace(-0.05, 0.05, rows)
    together = evaluate(CARDS[card].chain, {**values, "surface": 3, "slope_given": slopes})
    assert np.isfinite(together["takeoff_roll"]).sum() > rows // 2
    for row in (0, rows - 1):
        single = evaluate(CARDS[card].chain, {**values, "surface": 3, "slope_given": slopes[row]})
        assert_same({key: value[row : row + 1] for key, value in together.items()},
                    {key: value.reshape(1) for key, value in single.items()})  # fmt: skip


def test_the_same_again_with_other_values() -> None:
    """A program is kept for the next call, but only for one with the same numbers."""
    chain = CARDS["ridge-runner"].chain
    values = given("ridge-runner", "uk-leaflet", DAYS[1], FEW)
    first = evaluate(chain, values, ["takeoff_required"])["takeoff_required"]
    heavier = {**values, "mass_takeoff": values["mass_takeoff"] * 0.9}
    shorter = evaluate(chain, heavier, ["takeoff_required"])["takeoff_required"]
    known = np.isfinite(first)
    assert known.sum() > FEW // 50 and (shorter[known] < first[known]).all()
    again = evaluate(chain, values, ["takeoff_required"])["takeoff_required"]
    np.testing.assert_array_equal(again, first)


@pytest.mark.parametrize("rows", [1, FEW])
def test_results_are_as_long_as_the_columns(rows: int) -> None:
    chain = CARDS["ridge-runner"].chain
    results = evaluate(chain, given("ridge-runner", "uk-leaflet", DAYS[0], rows))
    assert {values.shape for values in results.values()} == {(rows,)}


def test_no_column_gives_single_values() -> None:
    chain = CARDS["ridge-runner"].chain
    values = with_single_values(chain, given("ridge-runner", "uk-leaflet", DAYS[0], 1))
    assert {values.shape for values in evaluate(chain, values).values()} == {()}


def test_no_rows_at_all() -> None:
    chain = CARDS["ridge-runner"].chain
    results = evaluate(chain, given("ridge-runner", "uk-leaflet", DAYS[0], 0))
    assert {values.shape for values in results.values()} == {(0,)}


def small_chain(*steps: Step) -> Chain:
    return Chain((Input("a", "A", "", "strip"), Input("b", "B", "", "day")), steps)


def test_only_what_leads_to_a_key_is_evaluated() -> None:
    def fail(value: Any) -> Any:
        raise AssertionError("nothing asked for this step")

    chain = small_chain(
        Step("double", "", "", "Double", "", lambda a: 2.0 * a, ("a",)),
        Step("unasked", "", "", "Unasked", "", fail, ("double",)),
        Step("sum", "", "", "Sum", "", lambda x, b: x + b, ("double", "b")),
    )
    assert [step.key for step in chain.leading_to(["sum"])] == ["double", "sum"]
    assert evaluate(chain, {"a": np.array([1.0, 2.0]), "b": 0.5}, ["sum"])["sum"].tolist() == [2.5, 4.5]
    with pytest.raises(KeyError, match="no step has the key wrong"):
        evaluate(chain, {"a": 1.0, "b": 1.0}, ["wrong"])


def test_guards() -> None:
    """A number has no value and a truth does not hold where the guard does not hold, or is no number."""
    chain = small_chain(
        Step("above", "", "", "Above", "", lambda a: a > 1.0, ("a",), truth=True),
        Step("guarded", "", "", "Guarded", "", lambda b: b, ("b",), "above"),
        Step("truth", "", "", "Truth", "", lambda b: b > 0.0, ("b",), "guarded", truth=True),
    )
    found = evaluate(chain, {"a": np.array([0.0, 2.0, np.nan]), "b": 5.0})
    np.testing.assert_array_equal(found["guarded"], [np.nan, 5.0, np.nan])
    assert found["truth"].tolist() == [False, True, False]


def test_a_chain_that_does_not_hang_together_is_refused() -> None:
    step = Step("x", "", "", "X", "", lambda a: a, ("a",))
    with pytest.raises(ValueError, match="same key"):
        small_chain(step, step)
    with pytest.raises(ValueError, match=r"step y reads \['z'\]"):
        small_chain(Step("y", "", "", "Y", "", lambda a: a, ("a",), "z"))
