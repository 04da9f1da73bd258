"""Cases with masses, flaps, air and strips of their own, against the arrays: formulas recalculated by a real program."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from openpyxl import Workbook

from stripcheck.card import Card, load_card
from stripcheck.rules import load_rules
from stripcheck.sheet import manual_stack, method, pages
from stripcheck.sheet.cases import About, Cases, Given, write_cases, write_once
from stripcheck.sheet.stream import TextColumn, write_book
from stripcheck.surface import SURFACES
from tests.aircraft import heavy_tables, trial_heron, trial_mule
from tests.manual_cards import everything
from tests.office import Office
from tests.sheet.package_check import package_faults
from tests.sheet.recalculated import differences

ROWS = 60


def _given(card: Card, random: np.random.Generator) -> dict[str, Given]:
    flaps = [flap.deflection for flap in card.flaps]
    mass = card.values["max_takeoff_mass"]
    numbers = {
        "mass_takeoff": random.uniform(0.6, 1.0, ROWS) * mass,
        "mass_landing": random.uniform(0.6, 0.95, ROWS) * mass,
        "takeoff_flap": np.degrees(random.choice(flaps, ROWS)),
        "landing_flap": np.degrees(random.choice(flaps, ROWS)),
        "tora": random.uniform(200, 1500, ROWS),
        "lda": random.uniform(200, 1500, ROWS),
        "elevation_field": random.uniform(-200, 9000, ROWS),
        "slope_given": random.uniform(-8, 8, ROWS),
        "heading": random.uniform(0, 360, ROWS),
        "obstacle_height": np.where(random.random(ROWS) < 0.5, np.nan, random.uniform(0, 200, ROWS)),
        "obstacle_distance": random.uniform(50, 2000, ROWS),
        "own_temperature": random.uniform(-15, 40, ROWS),
        "own_qnh": random.uniform(985, 1035, ROWS),
        "own_wind_from": random.uniform(0, 360, ROWS),
        "own_wind_speed": random.uniform(0, 14, ROWS),
    }
    texts = {"surface": random.choice([*SURFACES[:6], ""], ROWS), "condition": random.choice(["dry", "wet", "soft"], ROWS)}
    return {key: Given(values) for key, values in numbers.items()} | {key: Given(list(map(str, v))) for key, v in texts.items()}


def _book(card: Card, path: Path) -> Cases:
    rules = load_rules("part-cat-b")
    made = pages.Pages(Workbook())
    made.book.remove(made.book.active)
    aircraft = pages.write_aircraft(made, card)
    manual_stack.write_stack(made, card)
    pages.write_rules(made, rules)
    method.write_method(made, card.chain, [], [])
    given = _given(card, np.random.default_rng(7))
    values = {**card.values, **rules.values}
    write_once(made, aircraft, aircraft.max_row + 2, card.chain, given, values)
    about = {"case": About("Case", 8, TextColumn([str(i) for i in range(ROWS)]))}
    cases = write_cases(made, "Working out", "Cases of a test", card.chain, about, given, values)
    write_book(made.book, {cases.sheet: cases.table}, path, cached=made.cached, level=9)
    return cases


CARDS = {
    "ridge-runner": lambda: load_card("ridge-runner"), "high-mule": lambda: load_card("high-mule"), "heron": trial_heron,
    "mule": trial_mule, "heavy tables": heavy_tables, "everything": everything, "everything, constant speed":
    lambda: everything(fixed=False),
}  # fmt: skip


@pytest.mark.parametrize("name", CARDS)
def test_cases_recalculated_are_the_arrays(name: str, tmp_path: Path, office: Office) -> None:
    path = tmp_path / "cases.xlsx"
    cases = _book(CARDS[name](), path)
    assert not package_faults(path)
    with office.open(path) as book:
        count, found = differences(book, path)
    assert count > ROWS * 60
    assert not found
    texts = {text for column in cases.table.columns if not isinstance(column.values, np.ndarray) for text in column.values}
    assert {"suitable", "marginal", "unsuitable", "not assessed"} <= texts
