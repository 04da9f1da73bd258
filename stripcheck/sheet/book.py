"""The whole workbook: pages, strips with live formulas, summary, left out, method."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Collection, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Protocol

import numpy as np
from openpyxl import Workbook
from openpyxl.utils import get_column_letter
from openpyxl.workbook.defined_name import DefinedName

from stripcheck.assessment import Result
from stripcheck.book_tables import BookTables
from stripcheck.card import Card
from stripcheck.chain import Chain, Step, evaluate
from stripcheck.chance import chance_of
from stripcheck.day import Day
from stripcheck.inputs import SIDE_WORDS
from stripcheck.register import Directions
from stripcheck.rules import Rules
from stripcheck.sheet import left_out, manual_tables, method, pages, strips, styles, summary
from stripcheck.sheet.formulas import write_formulas
from stripcheck.sheet.stream import Column as AnyColumn
from stripcheck.sheet.stream import FormulaColumn, NumberColumn, Table, TextColumn, write_book
from stripcheck.units import from_si, tidy

ASSUMED_SLOPE = "Slope of "  # how the sentence on it begins
SAME_TEMPERATURE = "The day's temperature stands for every strip that has none of its own, whatever its elevation"
SHORT_ABOVE = 2000  # directions above which a list is long, and gets the short detail unless told otherwise


@dataclass(frozen=True)
class Filling:
    """All that a workbook is filled from, and the computed steps; ``chosen`` is mass and flap by chain key, SI."""

    directions: Directions
    card: Card
    day: Day
    rules: Rules
    chosen: Mapping[str, float]
    flap_names: Mapping[str, str]
    given: Mapping[str, Any]
    values: Mapping[str, np.ndarray]
    best: Mapping[str, np.ndarray]
    chances: Mapping[str, np.ndarray]

    @property
    def chain(self) -> Chain:
        return self.card.chain

    def shown(self, step: Step) -> Any:
        """A step's values as its column shows them: numbers in its unit, truths, or texts."""
        return strips.shown(step, self.values[step.key], self.directions.texts["fault"])

    def counts(self) -> dict[str, dict[str, int]]:
        """How many strips have each verdict, in and out, and each pair of them."""
        found: dict[str, dict[str, int]] = {}
        for side, _, _ in summary.SIDES:
            numbers = Counter(self.best[f"{side}_rank"].tolist())
            found[side] = {word: numbers.get(rank, 0) for rank, word in enumerate(summary.RANKS, 1)}
        both = Counter(self.best["both"].tolist())
        found["both"] = {words: both.get(number, 0) for number, words in enumerate(summary.BOTH, 1)}
        return found


def fill(directions: Directions, card: Card, day: Day, rules: Rules, chosen: Mapping[str, float],
         flap_names: Mapping[str, str], short: bool = False, chances: bool = False) -> Filling:  # fmt: skip
    """Compute the steps of all directions, and the better direction of each strip.

    ``short``: only the steps that a workbook of short detail shows, to spare memory. ``chances``: also the chance of
    needing more than there is, which takes about a thousand times as long as a verdict.
    """
    given = strips.given_columns(directions)
    keys = _short_keys(card.chain) if short else None
    inputs = {**card.values, **rules.values, **day.values, **given, **chosen}
    if any(profile is not None for profile in directions.profiles):
        given |= strips.profile_columns(card.chain, inputs, directions)
    values = evaluate(card.chain, {**inputs, **given}, keys)
    values = {key: np.broadcast_to(value, directions.n) if key in _SUMMARISED else value for key, value in values.items()}
    words = {step.key: step.words for step in card.chain.steps}
    best = summary.summarise(values, words)
    case = Result(card.chain, directions.n, {**inputs, **given}, {}, directions.texts["fault"], directions.profiles)
    return Filling(directions, card, day, rules, chosen, flap_names, given, values, best, _chances(case) if chances else {})


def _chances(case: Result) -> dict[str, np.ndarray]:
    found = chance_of(case)
    return {"takeoff_chance": found.takeoff, "landing_chance": found.landing}


def _short_keys(chain: Chain) -> list[str]:
    varying = chain.depends_on_strip()
    return [step.key for step in chain.steps if step.short or step.key not in varying or step.key in _SUMMARISED]


_PARTS = ("finding", "verdict", "margin", "margin_share", "reason")
_SUMMARISED = {f"{step}_{part}" for _, step, _ in summary.SIDES for part in _PARTS}


@dataclass(frozen=True)
class Layout:
    """Where things stand in a workbook, for formulas: letters of the Strips sheet's columns by key, cells of typed values by
    key, and the ranges of the Aircraft and the Rules sheet."""

    letters: Mapping[str, str]
    value_cells: Mapping[str, str]
    ranges: Mapping[str, str]


class Instead(Protocol):
    """Formulas in place of the native ones of the Strips sheet: columns by key; no columns at all: values everywhere."""

    @property
    def names(self) -> Collection[tuple[str, str, str]]: ...

    def columns(self, layout: Layout) -> Mapping[str, FormulaColumn]: ...


def write_workbook(filling: Filling, path: Path, full: bool, progress: Callable[[int], None] | None = None,
                   instead: Instead | None = None) -> list[str]:  # fmt: skip
    """Write the workbook whole or not at all; returns what had to be cut, one sentence each.

    ``full``: every step a column of its own; else the short detail. ``instead``: other formulas than native ones; the full
    detail only. Raises InputError where it can't be written.
    """
    chain, directions = filling.chain, filling.directions
    book = Workbook()
    book.remove(book.active)
    book.properties.creator, book.properties.title = "stripcheck", "Airstrip suitability"
    made = pages.Pages(book)
    count = directions.n // 2
    columns = strips.layout(chain, directions, full, bool(filling.chances))
    letters = {column.key: get_column_letter(number) for number, column in enumerate(columns, 1)}

    summary_sheet = summary.write_skeleton(made, count, [*(label for label, _ in FACTS), "Rules"])
    strips.write_skeleton(made, columns, directions.n, f"{filling.card.name}{strips.TITLE}")
    aircraft = pages.write_aircraft(made, filling.card, filling.chosen, filling.flap_names, tables_follow=True)
    manual_tables.write_manual(made, filling.card, filling.values)
    pages.write_day(made, filling.day)
    pages.write_rules(made, filling.rules)
    left_out.write_skeleton(made, directions)
    method.write_method(made, chain, taken_for_granted(filling), _made_from(filling))

    once = [step for step in chain.steps if step.key not in chain.depends_on_strip()]
    row = aircraft.max_row + 3
    row = pages.write_book_points(aircraft, row, filling.card)
    pages.write_steps(made, aircraft, row, once)
    made.places.update(strips.places_of(columns, chain))
    formulas = write_formulas(chain, made.places)
    pages.fill_steps(made, aircraft, row, once, formulas, filling.values)
    manual_tables.write_as_rows(made, aircraft, filling.card, filling.values)
    _fill_facts(made, summary_sheet, filling)
    summary.write_counts(made, summary_sheet, count, filling.counts())

    shown = {step.key: filling.shown(step) for step in chain.steps if step.key in letters or step.key in _SUMMARISED}
    shown |= {"direction": directions.texts["direction"], **filling.chances}
    tables = {
        strips.SHEET: strips.table_of(columns, directions, filling.given, formulas, shown),
        summary.SHEET: summary.table_of(directions, letters, shown, filling.best),
        left_out.SHEET: left_out.table_of(directions),
    }
    if instead is not None:
        ranges = {"aircraft": f"Aircraft!$A$1:$I${aircraft.max_row}", "rules": f"Rules!$A$1:$F${book['Rules'].max_row}"}
        _replace_formulas(made, columns, tables, instead, Layout(letters, made.value_cells, ranges))
    return write_book(book, tables, path, progress=progress, cached=made.cached)


def _replace_formulas(made: pages.Pages, columns: list[strips.Column], tables: dict[str, Table], instead: Instead,
                      layout: Layout) -> None:  # fmt: skip
    """The Strips sheet's formulas as others or as values; without any other, the whole book's as values."""
    others = instead.columns(layout)
    for name, text, comment in instead.names:
        made.book.defined_names[name] = DefinedName(name, attr_text=text, comment=comment)
    strip_table = tables[strips.SHEET]
    strip_table.columns = [
        others.get(column.key) or _as_values(found) for column, found in zip(columns, strip_table.columns, strict=True)
    ]
    if others:
        return
    for name, table in tables.items():
        table.columns = [_as_values(found) for found in tables[name].columns]
    for sheet, cells in made.cached.items():
        for cell, value in cells.items():
            target = made.book[sheet][cell]
            target.value = None if value == "" else value
            if isinstance(value, str) and value:
                target.data_type = "s"
    made.cached.clear()


def _as_values(column: AnyColumn) -> AnyColumn:
    if not isinstance(column, FormulaColumn):
        return column
    values = column.values
    if isinstance(values, np.ndarray) and values.dtype.kind == "f":
        return NumberColumn(values)
    return TextColumn(values.tolist() if isinstance(values, np.ndarray) else values)


def taken_for_granted(filling: Filling) -> list[str]:
    """Every default and assumed value that stands in this filling, in words."""
    kinds = Counter(item.what for item in filling.directions.doubts)
    doubts = [f"{what}: {_runways(number)}, listed on the sheet Left out" for what, number in kinds.most_common()]
    return [*filling.day.defaults, *granted_by_card(filling.card), *doubts, *granted_by_day(filling.day.values)]


def granted_by_card(card: Card) -> list[str]:
    """What a card takes for granted, and how far its figures reach."""
    return [*card.assumed, *card.fit.remarks, *_book_reach(card)]


def granted_by_day(values: Mapping[str, Any]) -> list[str]:
    """What the values of a day [SI] take for granted, but its defaults."""
    slope, lines = values["assumed_slope"], []
    if np.isfinite(slope):
        lines.append(f"{ASSUMED_SLOPE}{slope:.1%} against you, both ways, where none is known")
    if np.isnan(values["temperature_elevation"]) and np.isfinite(values["temperature"]):
        lines.append(SAME_TEMPERATURE)
    return lines


def _runways(number: int) -> str:
    return f"{number:,} runway" if number == 1 else f"{number:,} runways"


def _book_reach(card: Card) -> list[str]:
    """How far the manual's figures on the card reach, side by side; beyond them a verdict is at best marginal."""
    lines = []
    for side, points in (("takeoff", card.takeoff), ("landing", card.landing)):
        word = SIDE_WORDS[side]
        if side in card.tables:
            lines.append(f"{word}: {_extent(card, card.tables[side])}; higher, hotter or heavier is beyond the book")
        else:
            reach = from_si(card.values[f"{side}_reach"], "ft")
            lines.append(
                f"{word}: calibrated on {_points(len(points.roll))} of the manual, which reach to a density altitude of "
                f"{reach:,.0f} ft; thinner air is beyond the book"
            )
    if "climb" in card.tables:
        lines.append(f"Climb: {_extent(card, card.tables['climb'])}")
    return lines


def _points(number: int) -> str:
    return "1 figure" if number == 1 else f"{number} figures"


def _extent(card: Card, tables: BookTables) -> str:
    names = [flap.name for flap in card.flaps if any(flap.deflection == one for one, _ in tables.pages)]
    masses = sorted({mass for _, mass in tables.pages})
    kilograms = f"{masses[0]:,.0f} kg" if len(masses) == 1 else f"{masses[0]:,.0f} to {masses[-1]:,.0f} kg"
    feet = [from_si(tables.altitudes[i], "ft") for i in (0, -1)]
    heat = [from_si(tables.temperatures[i], "°C") for i in (0, -1)]
    return (
        f"the manual's tables for flap {' and '.join(names)}, {kilograms}, {feet[0]:,.0f} to {feet[1]:,.0f} ft pressure "
        f"altitude, {heat[0]:.0f} to {heat[1]:.0f} °C, less their holes"
    )


def _made_from(filling: Filling) -> list[tuple[str, str]]:
    return [
        ("Runway list", f"{filling.directions.source}, {_runways(filling.directions.rows_read)}"),
        from_card(filling.card),
        from_rules(filling.rules),
    ]


def from_card(card: Card) -> tuple[str, str]:
    """Which card a workbook was made from: label and text."""
    return "Aircraft card", f"{card.file}: {card.name}"


def from_rules(rules: Rules) -> tuple[str, str]:
    """Which rule set a workbook was made from: label and text."""
    return "Rule set", f"{rules.name}: {rules.title}"


FACTS = (  # label above the summary, and key of the value, None for the aeroplane's name
    ("Aeroplane", None),
    ("Take-off mass", "mass_takeoff"),
    ("Landing mass", "mass_landing"),
    ("Take-off flap", "takeoff_flap"),
    ("Landing flap", "landing_flap"),
    ("QNH", "qnh"),
    ("Temperature", "temperature"),
    ("ISA deviation", "isa_deviation"),
    ("Wind", "wind_speed"),
)


def _fill_facts(made: pages.Pages, sheet: Any, filling: Filling) -> None:
    """What the verdicts stand on, read live from the other sheets, at the top of the summary."""
    column = summary.LETTERS["name"]
    values = {**filling.card.values, **filling.day.values, **filling.chosen}
    units = {item.key: item.unit for item in filling.chain.inputs}
    for row, (_, key) in enumerate(FACTS, 4):
        cell = f"{column}{row}"
        if key is None:
            made.formula(sheet, cell, "Aircraft!A1", filling.card.name)
        elif key in filling.flap_names:
            made.formula(sheet, cell, made.value_cells[key], filling.flap_names[key])
        else:
            source = made.value_cells[key]
            known = np.isfinite(values[key])
            text = f'IF(ISNUMBER({source}),{source},"not given")'
            made.formula(sheet, cell, text, tidy(from_si(values[key], units[key])) if known else "not given")
            sheet[cell].number_format = styles.number_format(units[key])
        sheet[cell].alignment = styles.LEFT
    row = 4 + len(FACTS)
    beside = f"{summary.LETTERS['runway']}{row - 1}"
    direction = values["wind_from"]
    known = np.isfinite(direction)
    source = made.value_cells["wind_from"]
    made.formula(sheet, beside, f'IF(ISNUMBER({source}),{source},"")', tidy(from_si(direction, "°")) if known else "")
    sheet[beside].number_format, sheet[beside].font = '"from "000"°"', styles.BODY
    made.formula(sheet, f"{column}{row}", "Rules!A1", filling.rules.title)
