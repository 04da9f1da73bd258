"""Commands that make the workbooks for people: ``stripcheck trip``, ``register`` and ``whatif``."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from stripcheck.cli_options import EPILOG, add_day, add_loading, add_strip_values, day_of, loading_of, say, strip_of
from stripcheck.errors import InputError


def add_whatif(commands: Any) -> None:
    """``stripcheck whatif``."""
    whatif = commands.add_parser(
        "whatif",
        help="a workbook for one strip and one aeroplane: change anything and see what becomes of the verdicts",
        description="Make a workbook for one strip and one aeroplane with all inputs on one page, verdicts by mass and "
        "temperature, and charts. The strip is typed as options, or taken from a list; slope, heading and obstacles are those "
        "of one direction, the other follows.",
        epilog="Numbers are read in the unit named, or carry their own: --elev '700 m', --obstacle '20 m/400 m'. " + EPILOG,
    )
    whatif.add_argument("--card", help="aircraft card: a .toml file, or the name of a shipped one")
    whatif.add_argument("--rules", help="rule set: a .toml file, or the name of a shipped one")
    whatif.add_argument("-o", "--output", required=True, metavar="OUT.xlsx", help="workbook to write")
    whatif.add_argument("--force", action="store_true", help="replace OUT if it exists")
    whatif.add_argument("--demo", action="store_true", help="a strip of the shipped, invented scenario; no other options")
    listed = whatif.add_argument_group("strip of a list, instead of a strip typed")
    listed.add_argument("--list", metavar="LIST", help="runway list: .csv, .xlsx, .xls or .ods")
    listed.add_argument("--strip", metavar="NAME", help="its identifier or its name in the list")
    listed.add_argument("--runway", metavar="NN/NN", help="which of its runways, where it has several")
    listed.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, for elevations and names")
    listed.add_argument("--sheet", help="sheet of the list's workbook, if not the first")
    add_strip_values(whatif, required=False)
    add_loading(whatif)
    add_day(whatif)
    whatif.set_defaults(run=_run_whatif)


def _run_whatif(options: argparse.Namespace) -> int:
    from stripcheck.books.whatif import Request, demo_request, make_whatif

    output = Path(options.output)
    if options.demo:
        return say(make_whatif(demo_request(output, options.force)), False)
    request = Request(
        output, options.card, options.rules, day_of(options), loading_of(options), strip_of(options), options.one_way,
        options.list, options.strip, options.runway, options.airports, options.sheet, options.force,
    )  # fmt: skip
    return say(make_whatif(request), False)


def add_register(commands: Any) -> None:
    """``stripcheck register``."""
    register = commands.add_parser(
        "register",
        help="a workbook that is the strip database itself, with the fleet on a standard day and the months of the year",
        description="Make a register workbook from a runway list: the strips to keep and to edit, the verdict of each strip "
        "for each aeroplane on a standard day, and each strip in each month of a climate for one of them.",
        epilog="Numbers are read in the unit named, or carry their own: --temp 86F, --temp-at '700 m'. " + EPILOG,
    )
    register.add_argument("list", nargs="?", metavar="LIST", help="runway list, or an older register: .csv, .xlsx, .xls, .ods")
    register.add_argument("--card", nargs="+", action="extend", metavar="CARD",
                          help="aircraft cards, up to four: .toml files, or names of shipped ones")  # fmt: skip
    register.add_argument("--rules", help="rule set: a .toml file, or the name of a shipped one")
    register.add_argument("--climate", metavar="CLIMATE.csv",
                          help="twelve months: Month, Temperature [°C], Ground, QNH [hPa], Elevation [ft]")  # fmt: skip
    register.add_argument("--month-card", metavar="CARD", help="which of the cards goes through the year (usual: the first)")
    register.add_argument("--survey-age", type=float, metavar="MONTHS", help="age from which a survey is old (usual: 60)")
    register.add_argument("-o", "--output", required=True, metavar="OUT.xlsx", help="workbook to write")
    register.add_argument("--force", action="store_true", help="replace OUT if it exists")
    register.add_argument("--demo", action="store_true", help="the shipped, invented register; no other options")
    register.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, for elevations and names")
    register.add_argument("--sheet", help="sheet of the list's workbook, if not the first")
    add_day(register)
    register.set_defaults(run=_run_register)


def _run_register(options: argparse.Namespace) -> int:
    from stripcheck.books.register_book import Request, demo_request, make_register

    output = Path(options.output)
    if options.demo:
        return say(make_register(demo_request(output, options.force)), False)
    for name, given in (("LIST", options.list), ("--card", options.card), ("--rules", options.rules)):
        if not given:
            raise InputError(f"register: {name} is missing; give it, or --demo for the shipped register")
    age = {} if options.survey_age is None else {"survey_age": options.survey_age}
    request = Request(
        Path(options.list), output, options.card, options.rules, day_of(options), options.climate, options.month_card,
        airports=options.airports, sheet=options.sheet, force=options.force, **age,
    )  # fmt: skip
    return say(make_register(request), False)


def add_trip(commands: Any) -> None:
    """``stripcheck trip``."""
    trip = commands.add_parser(
        "trip",
        help="a workbook that plans a trip from strip to strip: fuel, masses, verdicts in and out, and a kneeboard page",
        description="Make a trip planner: up to nine stops chosen from a runway list by drop-down, with fuel, masses, weather, "
        "verdicts in and out, the leg that limits and by how much, abort points, and a page for the kneeboard.",
        epilog=EPILOG,
    )
    trip.add_argument("list", nargs="?", metavar="LIST", help="runway list of the trip's strips: .csv, .xlsx, .xls or .ods")
    trip.add_argument("--card", help="aircraft card: a .toml file, or the name of a shipped one")
    trip.add_argument("--rules", help="rule set: a .toml file, or the name of a shipped one")
    trip.add_argument("--plan", metavar="PLAN.toml", help="stops, loads, fuel and weather to begin with; else typed later")
    trip.add_argument("-o", "--output", required=True, metavar="OUT.xlsx", help="workbook to write")
    trip.add_argument("--force", action="store_true", help="replace OUT if it exists")
    trip.add_argument("--demo", action="store_true", help="the shipped, invented trip; no other options")
    trip.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, for elevations and positions")
    trip.add_argument("--sheet", help="sheet of the list's workbook, if not the first")
    trip.set_defaults(run=_run_trip)


def _run_trip(options: argparse.Namespace) -> int:
    from stripcheck.books.trip import Request, demo_request, make_trip

    output = Path(options.output)
    if options.demo:
        return say(make_trip(demo_request(output, options.force)), False)
    for name, given in (("LIST", options.list), ("--card", options.card), ("--rules", options.rules)):
        if not given:
            raise InputError(f"trip: {name} is missing; give it, or --demo for the shipped trip")
    plan = None if options.plan is None else Path(options.plan)
    request = Request(
        Path(options.list), output, options.card, options.rules, plan, options.airports, options.sheet, options.force
    )
    return say(make_trip(request), False)
