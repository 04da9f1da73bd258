"""What is given with ``stripcheck refresh`` goes into the cells where a user would type it: a day, loading, rules, card."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Protocol

import numpy as np
from openpyxl import Workbook
from openpyxl.utils import column_index_from_string
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.card import Card
from stripcheck.chain import evaluate
from stripcheck.day import read_day
from stripcheck.errors import InputError
from stripcheck.filling import Loading, loading
from stripcheck.flaps import flap_setting
from stripcheck.inputs import CARD, DAY, RULES
from stripcheck.rules import Rules
from stripcheck.sheet import manual_tables, pages
from stripcheck.sheet.cases import no_inputs
from stripcheck.sheet.filled_pages import VALUE
from stripcheck.sheet.package import cell_of
from stripcheck.sheet.refreshed import BookEdits, plain_value
from stripcheck.units import from_si, read_quantity, tidy

_BY_KEY = {item.key: item for item in (*CARD, *DAY)}
# inputs of the day that exclude each other
_EITHER = (("temperature", "isa_deviation"), ("humidity", "dew_point"))


class Given(Loading, Protocol):
    """What a command may give besides mass and flap."""

    @property
    def day(self) -> Mapping[str, Any] | None: ...


def take_over(work: BookEdits, given: Given, card: Card | None, rules: Rules | None) -> None:
    """Type what is given into the pages. Raises InputError for what does not fit them."""
    _take_day(work, given.day or {})
    if rules is not None:
        _take_rules(work, rules)
    if card is None:
        _take_loading(work, given)
    else:
        _take_card(work, card, *loading(card, given))


def _put(work: BookEdits, key: str, value: Any) -> None:
    item = _BY_KEY[key]
    work.put("Aircraft" if item.where == "card" else "Day", work.pages.row_of(item), VALUE, value)


# --- the day


def _take_day(work: BookEdits, day: Mapping[str, Any]) -> None:
    given = {key: value for key, value in day.items() if value not in (None, "")}
    checked = read_day(_made_whole(given))
    for pair in _EITHER:
        if any(key in given for key in pair):
            for key in pair:
                _put(work, key, None)
    if "isa_deviation" in given:
        _put(work, "temperature_elevation", None)
    for key in given:
        item = _BY_KEY[key]
        is_word = item.kind == "choice"
        _put(work, key, checked.condition if is_word else tidy(from_si(checked.values[key], item.unit)))
    work.pages.told |= set(given)


def _made_whole(given: Mapping[str, Any]) -> dict[str, Any]:
    """The values given, with what a check asks for and the workbook has: where a wind comes from, a temperature."""
    made = dict(given)
    if "wind_speed" in made:
        made.setdefault("wind_from", 0.0)
    if "temperature_elevation" in made and "isa_deviation" not in made:
        made.setdefault("temperature", 15.0)
    return made


# --- mass and flap


def _take_loading(work: BookEdits, given: Loading) -> None:
    for key, typed in (("mass_takeoff", given.takeoff_mass), ("mass_landing", given.landing_mass)):
        if typed is not None:
            _put(work, key, _mass(work, key, typed))
    for key, name in (("takeoff_flap", given.takeoff_flap), ("landing_flap", given.landing_flap)):
        if name is not None:
            _put(work, key, _flap(work, key, name))


def _mass(work: BookEdits, key: str, typed: str) -> float:
    item = _BY_KEY[f"max_{key.removeprefix('mass_')}_mass"]
    mass, greatest = read_quantity(typed, "mass"), work.pages.value("Aircraft", work.pages.row_of(item), VALUE)
    if not isinstance(greatest, float) or not 0.1 * greatest <= mass <= greatest:
        most = f"up to {greatest:,.0f} kg" if isinstance(greatest, float) else "none, since the greatest mass is not known"
        raise InputError(f"{_BY_KEY[key].label.lower()} of {typed}: the workbook allows {most}")
    return tidy(mass)


def _flap(work: BookEdits, key: str, name: str) -> str:
    flaps = work.pages.aeroplane().flaps
    use = "take-off" if key == "takeoff_flap" else "landing"
    deflection = flap_setting(name, tuple(flaps), use, f"--{key.replace('_', '-')}")
    return str(next(flap.name for flap in flaps if flap.deflection == deflection))


# --- rules


def _take_rules(work: BookEdits, rules: Rules) -> None:
    for item in RULES:
        if item.kind == "range" or item.key.startswith("reference_"):
            continue
        value: Any = rules.values[item.key]
        if item.kind == "flag":
            shown: Any = "yes" if value else "no"
        else:
            shown = None if np.isnan(value) else tidy(from_si(value, item.unit))
        work.put("Rules", work.pages.row_of(item), VALUE, shown)
    _take_ground_table(work, rules)
    _take_rule_texts(work, rules)


def _take_ground_table(work: BookEdits, rules: Rules) -> None:
    for key, letter in pages.GROUND_COLUMNS.items():
        place = cell_of(work.package.names.get(key, "").split(":")[0])
        if place is None:
            raise work.pages.without_name(key)
        for at, value in enumerate(np.asarray(rules.values[key], dtype=float).tolist()):
            shown = pages.NO_FIGURE if np.isnan(value) else value
            work.put("Rules", place[1] + at, column_index_from_string(letter), shown)


def _take_rule_texts(work: BookEdits, rules: Rules) -> None:
    """Title, and the lines above the rules, which are found by the one that tells the status of the figures."""
    raw, facts = work.pages.raw["Rules"], pages.rule_facts(rules)
    texts = {row.number: str(work.pages.value("Rules", row.number, 1) or "") for row in raw.rows}
    title = next((number for number, text in texts.items() if text), 1)
    status = next((number for number, text in texts.items() if text.startswith(pages.STATUS)), None)
    work.put("Rules", title, 1, rules.title)
    if status is not None:
        for row, text in enumerate(facts, status - 2):
            work.put("Rules", row, 1, text)


# --- another card


def _take_card(work: BookEdits, card: Card, chosen: Mapping[str, float], flap_names: Mapping[str, str]) -> None:
    """Another aeroplane of the same make: the cells of the sheets Aircraft and Manual, as they would be filled."""
    made = pages.Pages(Workbook())
    aircraft = pages.write_aircraft(made, card, chosen, flap_names, tables_follow=True)
    once = [step for step in card.chain.steps if step.key not in card.chain.depends_on_strip()]
    known = {**no_inputs(), **card.values, **chosen, **work.pages.rules(), **work.pages.day()}
    values = evaluate(card.chain, {item.key: known.get(item.key, np.nan) for item in card.chain.inputs},
                      [step.key for step in once])  # fmt: skip
    manual_tables.write_manual(made, card, values)
    row = pages.write_book_points(aircraft, aircraft.max_row + 3, card)
    pages.write_steps(made, aircraft, row, once)
    names = {name: defined.attr_text for name, defined in made.book.defined_names.items()}
    differing = next((name for name, cells in names.items() if not work.package.is_named(name, cells)), None)
    if differing:
        raise InputError(
            f"{work.package.path}: this workbook was filled for an aeroplane of another make (propeller, engine, flaps, "
            f"figures of the manual), or rows were moved on its pages, so that {card.name} does not fit the cell "
            f'"{differing}"; fill a new one'
        )
    formulas = work.formulas(card.chain, work.page_places(card.chain) | made.places, [step.key for step in once])
    pages.fill_steps(made, aircraft, row, once, formulas, values)
    manual_tables.write_as_rows(made, aircraft, card, values)
    for title in ("Aircraft", "Manual"):
        if title in made.book.sheetnames:
            _copy(work, made.book[title], made.cached.get(title, {}))


def _copy(work: BookEdits, sheet: Worksheet, cached: Mapping[str, Any]) -> None:
    """The contents of a page as filled anew, into the cells where they stand; the formats stay."""
    for cell in (cell for row in sheet.iter_rows() for cell in row if cell.value is not None or cell.has_style):
        is_formula = cell.data_type == "f" and cell.coordinate in cached
        value = cached[cell.coordinate] if is_formula else cell.value
        if value is not None or work.pages.raw[sheet.title].value(cell.row, cell.column) is not None:
            plain = None if value is None else plain_value(value)
            formula = str(cell.value)[1:] if is_formula and work.pages.live else None
            work.pages.put(sheet.title, cell.row, cell.column, plain)
            work.by_title[sheet.title].set(cell.row, cell.column, plain, formula)
