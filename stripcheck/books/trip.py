"""The trip planner: a workbook that follows an aeroplane from strip to strip, leg by leg.

Sheets: *Trip* (all that is typed, and all results), *Kneeboard* (one page to print), *Strips*, the aeroplane, the manual,
the rules, the method; and the sheets that work: *Reading*, *Places*, *Flaps*, *Working*, *Best*, the search for the greatest
masses, and *Abort*.
"""

from __future__ import annotations

from dataclasses import dataclass
from importlib.resources import files
from pathlib import Path

from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book_cells
from stripcheck.books import trip_kneeboard, trip_page, trip_speeds
from stripcheck.books.trip_abort import ABORT, needs_of_abort, write_abort
from stripcheck.books.trip_cases import (
    BEST,
    FLAPS,
    PLACES,
    SHOWN,
    VARYING,
    WORKING,
    Book,
    finish_best,
    frontier,
    operations,
    split,
    trip_chain,
    write_best,
    write_flaps,
    write_places,
    write_working,
)
from stripcheck.books.trip_layout import KNEEBOARD, READING, TRIP
from stripcheck.books.trip_plan import STOPS, Plan, blank_plan, read_plan
from stripcheck.books.trip_search import SEARCH, TRIALS, write_search
from stripcheck.books.trip_strips import GREATEST, Strips, lay_out, write_strips
from stripcheck.card import Card, load_card
from stripcheck.errors import InputError
from stripcheck.register import Directions, read_list
from stripcheck.rules import Rules, load_rules
from stripcheck.sheet import manual_stack, method, pages
from stripcheck.sheet.cases import Cases, write_once

DEMO_LIST, DEMO_PLAN = "lantern-range.csv", "lantern-round.toml"
DEMO_CARD, DEMO_RULES = "ridge-runner", "uk-leaflet"
MAIN_TAB, WORKING_TAB = "2F4254", "BFBFBF"
WORKING_SHEETS = (READING, PLACES, FLAPS, WORKING, BEST, *TRIALS.values(), SEARCH, ABORT)
NOTES = (
    "Each landing and take-off is the best of both directions and of the flap settings that the card allows for it.",
    "Greatest suitable mass: in that direction and with that flap, found by trying whole kilograms, the verdict deciding each "
    "time (sheet Greatest mass): the heaviest tried that suits. A kilogram more does not, unless that sheet shows a wider gap.",
    "Fuel of a leg: cruise flow for its time, and taxi and circuit. All of it counts as aboard at take-off, so that masses err "
    "on the heavy side. A payload or refuelling left blank is none; anything else left blank is not known.",
    "Abort point: the last place from which a take-off given up still stops on the strip, with 3 s until the brakes bite and "
    "no safety factor. A slope profile counts as steep as its steepest part, against you, and has no abort point.",
)


@dataclass(frozen=True)
class Request:
    """A trip to make a workbook of: the list, the card and the rules by name or path, the plan file, and options."""

    list: Path
    output: Path
    card: str
    rules: str
    plan: Path | None = None
    airports: str | None = None
    sheet: str | None = None
    force: bool = False


def demo_request(output: Path, force: bool) -> Request:
    """The shipped trip, all of it invented."""
    scenario = Path(str(files("stripcheck") / "scenario"))
    return Request(scenario / DEMO_LIST, output, DEMO_CARD, DEMO_RULES, scenario / DEMO_PLAN, force=force)


def make_trip(request: Request) -> list[str]:
    """Make the workbook and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    book_cells.check_output(request.output, request.force)
    card, rules = load_card(request.card), load_rules(request.rules)
    directions = read_list(request.list, airports=request.airports, sheet=request.sheet)
    check_length(directions)
    names = lay_out(directions).names
    plan = blank_plan(names) if request.plan is None else read_plan(request.plan, names)
    guessed = [f"Taken for granted: {doubt.reason}" for doubt in directions.doubts if doubt.what == "unit not named"]
    told = write_trip(directions, card, rules, plan, request.output)
    return [*guessed, f"{request.output}: {plan.title}, {len(plan.stops)} stops, {card.name}", *told]


def check_length(directions: Directions) -> None:
    """Raise InputError for a list that is too long for a trip's workbook."""
    if directions.n > GREATEST:
        raise InputError(
            f"{directions.source}: {directions.n // 2:,} runways are too many for a trip's drop-downs, which take up to "
            f"{GREATEST // 2}; give a shorter list with the strips of the trip and its alternates"
        )


def write_trip(directions: Directions, card: Card, rules: Rules, plan: Plan, path: Path) -> list[str]:
    """Write the workbook, whole or not at all; returns what the trip comes to and what had to be cut, one sentence each.

    Raises InputError for a list that is too long, or where the file can't be written.
    """
    check_length(directions)
    made = book_cells.start_book(f"Trip: {plan.title}")
    for title in (TRIP, KNEEBOARD):
        made.book.create_sheet(title)
    strips = lay_out(directions)
    listed = write_strips(made, strips)
    aircraft = pages.write_aircraft(made, card)
    manual_stack.write_stack(made, card)
    pages.write_rules(made, rules)
    chain = trip_chain(card)
    made_from = [("Runway list", directions.source), ("Aircraft card", f"{card.file}: {card.name}"), ("Rule set", rules.title)]
    method.write_method(made, chain, _taken(card, directions), made_from)
    made.book.create_sheet(READING)
    values = {**card.values, **rules.values}
    write_once(made, aircraft, aircraft.max_row + 2, chain, VARYING, values)
    trip_speeds.write_tables(made, aircraft, card)
    page = trip_page.read_plan_values(plan, strips)
    sheet = trip_page.write_inputs(made, page, strips)
    book = Book(made, card, chain, split(chain), values)
    cases = _write_cases(book, strips, page, sheet)
    trip_kneeboard.write_kneeboard(made, page, plan, card)
    trip_page.finish(sheet, plan.title, card.name, (*NOTES, trip_speeds.told(card)))
    for number, one in enumerate(made.book.worksheets):
        book_cells.protect(one)
        one.sheet_properties.tabColor = MAIN_TAB if number < 3 else WORKING_TAB if one.title in WORKING_SHEETS else None
    told = [str(made.cached[TRIP][f"E{row}"]) for row in trip_page.SUMMARY.values()]
    return [*book_cells.save(made, [listed, *cases], path), *told]


def _write_cases(book: Book, strips: Strips, page: trip_page.Page, sheet: Worksheet) -> list[Cases]:
    """The sheets that work, and the results on the page."""
    wanted = [key for keys in SHOWN.values() for key in keys if key in {step.key for step in book.chain.steps}]
    wanted += ["landing_finding", "takeoff_finding"]
    of_trials = [frontier(book.chain, book.parts, (f"{side}_slack", f"{side}_verdict")) for side in TRIALS]
    needs = [frontier(book.chain, book.parts, wanted), *of_trials, needs_of_abort(book)]
    steps = {step.key for step in book.chain.steps}
    of_place, of_flap = (list(dict.fromkeys(key for need in needs for key in need[at])) for at in (0, 1))
    runways = [str(page.typed.get(f"runway_{stop}", "")) for stop in range(1, STOPS + 1)]
    grounds = [str(page.typed.get(f"ground_{stop}", "")) for stop in range(1, STOPS + 1)]
    masses = {key: value for key, value in page.worked.items() if key.startswith("mass_")}
    places = write_places(book, strips, runways, page.read, masses, grounds, [key for key in of_place if key in steps])
    flaps = write_flaps(book, of_flap)
    working = write_working(book, places, flaps, [key for key in wanted if key not in book.parts.known])
    used = [bool(runway) for runway in runways]
    active = {(side, stop): used[stop - 1] and (side == "landing" or used[stop]) for side, stop in operations()}
    best = write_best(book, places, flaps, working, active, (of_place, of_flap))
    search = write_search(book, best, page.read["operating_mass"])
    abort = write_abort(book, best, flaps)
    trip_speeds.write_indicated(book, best, abort)
    trip_page.write_results(book, sheet, page, best, search, abort)
    finish_best(book.pages, best)
    return [places, flaps, working, *search.trials, search.cases, abort]


def _taken(card: Card, directions: Directions) -> list[str]:
    """What is taken for granted, in words."""
    lines = [*card.assumed, *card.fit.remarks, "Dry air: no humidity is asked for"]
    if any(profile is not None for profile in directions.profiles):
        lines.append("A slope profile counts as steep throughout as its steepest part, against you both ways")
    return lines
