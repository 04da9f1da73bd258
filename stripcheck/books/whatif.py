"""The what-if workbook: one strip, one aeroplane, all inputs on one page, and the verdicts, tables and charts beside them.

Sheets: *What if* (inputs, results, verdicts by mass and temperature), *Charts*, the aeroplane, the manual, the rules, the
method, *Tables* (what the charts draw), and the sheets of cases, *Working landing* and *Working take-off*.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from importlib.resources import files
from math import nan
from pathlib import Path
from typing import Any

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book
from stripcheck.books import whatif_cases as working
from stripcheck.books import whatif_charts, whatif_page, whatif_tables
from stripcheck.books.whatif_inputs import SIDES, Start, from_list, from_options
from stripcheck.books.whatif_layout import CHARTS, PAGE, TABLES, WORKING, Layout
from stripcheck.card import Card, load_card
from stripcheck.day import read_day
from stripcheck.errors import InputError
from stripcheck.filling import DEMO_CARD, DEMO_DAY, DEMO_LIST, DEMO_RULES
from stripcheck.rules import Rules, load_rules
from stripcheck.sheet import manual_stack, method, pages
from stripcheck.sheet.cases import Cases, write_once
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.pages import Pages
from stripcheck.units import to_si

HEADINGS = {"landing": "The landing, case by case", "takeoff": "The take-off, case by case"}
DEMO_STRIP = "XSPH"
PRINT_SCALE = 45  # per cent, of the wide sheets of cases


@dataclass(frozen=True)
class Request:
    """What to make: the file to write, card and rule set by name or path, day, loading and strip as typed, or a strip of a
    list by its name."""

    output: Path
    card: str | None
    rules: str | None
    day: Mapping[str, Any]
    loading: Mapping[str, str | None]
    strip: Mapping[str, str | None]
    one_way: bool = False
    list: str | None = None
    name: str | None = None
    runway: str | None = None
    airports: str | None = None
    sheet: str | None = None
    force: bool = False


def demo_request(output: Path, force: bool) -> Request:
    """The request for a strip of the shipped scenario, all of it invented."""
    scenario = str(files("stripcheck") / "scenario" / DEMO_LIST)
    return Request(output, DEMO_CARD, DEMO_RULES, DEMO_DAY, {}, {}, list=scenario, name=DEMO_STRIP, force=force)


def make_whatif(request: Request) -> list[str]:
    """Make the workbook and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    book.check_output(request.output, request.force)
    _check_options(request)
    card, rules, day = load_card(request.card or ""), load_rules(request.rules or ""), read_day(request.day)
    if request.list is not None:
        start = from_list(Path(request.list), request.name or "", request.runway, card, day, rules, request.loading,
                          request.airports, request.sheet)  # fmt: skip
    else:
        start = from_options(request.strip, request.one_way, card, day, rules, request.loading)
    return write_whatif(card, rules, start, request.output)


def _check_options(request: Request) -> None:
    """Options that are missing, or that exclude each other."""
    for value, option in ((request.card, "--card"), (request.rules, "--rules")):
        if value is None:
            raise InputError(f"a what-if needs {option}, or --demo for the shipped scenario")
    typed = [key for key, value in request.strip.items() if value is not None]
    if request.list is None:
        if request.name is not None or request.runway is not None:
            raise InputError("--strip and --runway go with --list; without a list the strip is typed, such as --length 620")
        for key, option in (("elevation_field", "--elev"), ("surface", "--surface")):
            if key not in typed:
                raise InputError(f"the strip needs {option}; or take one from a list with --list and --strip")
    elif typed or request.one_way:
        raise InputError("a strip of a list has its own values: leave out the options of a typed strip, or --list")
    elif request.name is None:
        raise InputError(f"{request.list}: name the strip with --strip, by its identifier or its name")
    elif Path(request.list).exists() and request.output.exists() and Path(request.list).samefile(request.output):
        raise InputError(f"{request.output}: this is the list itself; choose another name for what is written")
    if request.day.get("assumed_slope") is not None:
        raise InputError("--assume-slope: a what-if has a cell for the slope; give --slope, or type it into the workbook")


def write_whatif(card: Card, rules: Rules, start: Start, path: Path) -> list[str]:
    """Write the workbook, whole or not at all; returns what had to be cut and what is the better way, a line each.

    ``start``: the first values of the page. Raises InputError where the file can't be written.
    """
    made = book.start_book(f"What if: {start.title}")
    layout = Layout(card, rules, start)
    page, drawn = made.book.create_sheet(PAGE), made.book.create_sheet(CHARTS)
    aircraft = pages.write_aircraft(made, card)
    manual_stack.write_stack(made, card)
    pages.write_rules(made, rules)
    facts = [("Strip", start.title), ("Aeroplane", card.name), ("Rules", rules.title)]
    method.write_method(made, card.chain, list(start.taken), facts)
    tables = made.book.create_sheet(TABLES)
    whatif_page.write_inputs(made, page, layout)
    whatif_tables.write_checks(made, tables, layout)
    whatif_charts.write_settings(made, tables, layout)
    cases = _write_cases(made, aircraft, layout)
    whatif_tables.write_directions(made, tables, layout, cases)
    whatif_page.write_results(made, page, layout, cases)
    whatif_charts.write_charts(made, page, drawn, tables, layout, cases)
    whatif_page.finish(page)
    for sheet in made.book.worksheets:
        book.protect(sheet)
    cuts = book.save(made, cases.values(), path)
    return [*cuts, f"{path}: {start.title}, {card.name}", *whatif_page.told(layout, cases)]


def _write_cases(made: Pages, aircraft: Worksheet, layout: Layout) -> dict[str, Cases]:
    """The two sheets of cases, and the steps that are the same for all of them on the Aircraft sheet."""
    card, rules, start = layout.card, layout.rules, layout.start
    fixed = {}
    for key, unit in (("width", "m"), ("local_slope", "%")):
        made.places[key] = Place(layout.cell(key), unit)
        value = start.values[key][0]
        fixed[key] = to_si(value, unit) if isinstance(value, float) else nan
    values = {**card.values, **rules.values, **fixed}
    write_once(made, aircraft, aircraft.max_row + 2, card.chain, working.VARYING, values)
    cases = {}
    for side in SIDES:
        source, title = layout.source(made, side), WORKING[side]
        cases[side] = working.write_side(made, side, card.chain, source, layout.cases(side), title, HEADINGS[side],
                                         values)  # fmt: skip
        sheet = made.book[title]
        sheet.sheet_properties.pageSetUpPr.fitToPage = False
        sheet.column_dimensions[cases[side].letters["temperature"]].width = 13
        sheet.page_setup.scale, sheet.print_title_cols = PRINT_SCALE, "A:B"
    return cases
