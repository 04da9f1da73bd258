"""The what-if workbook: one strip, one aeroplane, all inputs on one page, and the verdicts, tables and charts beside them.

Sheets: *What if* (inputs, results, verdicts by mass and temperature), *Charts*, the aeroplane, the manual, the rules, the
method, *Tables* (what the charts draw), and the sheets of cases, *Working landing* and *Working take-off*.
"""

from __future__ import annotations

from pathlib import Path

from stripcheck.books import common as book
from stripcheck.books import whatif_charts, whatif_page, whatif_tables
from stripcheck.books import whatif_cases as working
from stripcheck.books.whatif_inputs import SIDES, Start
from stripcheck.books.whatif_layout import CHARTS, PAGE, TABLES, WORKING, Layout
from stripcheck.card import Card
from stripcheck.rules import Rules
from stripcheck.sheet import manual_stack, method, pages
from stripcheck.sheet.cases import Cases, write_once
from stripcheck.sheet.formulas import Place
from stripcheck.units import to_si

HEADINGS = {"landing": "The landing, case by case", "takeoff": "The take-off, case by case"}


def write_whatif(card: Card, rules: Rules, start: Start, path: Path) -> list[str]:
    """Write the workbook, whole or not at all; returns what had to be cut, one sentence each.

    ``start``: the first values of the page. Raises InputError where the file can't be written.
    """
    made = book.start_book(f"What if: {start.title}")
    layout = Layout(card, rules, start)
    page = made.book.create_sheet(PAGE)
    drawn = made.book.create_sheet(CHARTS)
    aircraft = pages.write_aircraft(made, card)
    manual_stack.write_stack(made, card)
    pages.write_rules(made, rules)
    method.write_method(made, card.chain, list(start.taken), [("Strip", start.title), ("Aeroplane", card.name),
                                                              ("Rules", rules.title)])  # fmt: skip
    tables = made.book.create_sheet(TABLES)
    whatif_page.write_inputs(made, page, layout)
    whatif_tables.write_checks(made, tables, layout)
    whatif_charts.write_settings(made, tables, layout)
    fixed = {}
    for key, unit in (("width", "m"), ("local_slope", "%")):
        made.places[key] = Place(layout.cell(key), unit)
        value = start.values[key][0]
        fixed[key] = to_si(value, unit) if isinstance(value, float) else float("nan")
    everything = {**card.values, **rules.values, **fixed}
    write_once(made, aircraft, aircraft.max_row + 2, card.chain, working.VARYING, everything)
    cases: dict[str, Cases] = {}
    for side in SIDES:
        listed = layout.cases(side)
        cases[side] = working.write_side(made, side, card, rules, layout.source(made, side), listed, WORKING[side], HEADINGS[side], everything)
    whatif_tables.write_directions(made, tables, layout, cases)
    whatif_page.write_results(made, page, layout, cases)
    whatif_charts.write_charts(made, page, drawn, tables, layout, cases)
    whatif_page.finish(page)
    for sheet in made.book.worksheets:
        book.protect(sheet)
    return book.save(made, cases.values(), path)
