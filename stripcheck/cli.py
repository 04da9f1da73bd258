"""The command line: ``stripcheck fill``, ``strip``, ``card``, ``audit``, ``merge``, ``register``, ``whatif``, ``demo``...

Exit codes: 0 done; 1 an unexpected failure; 2 bad input or bad options, said in one sentence, and nothing was written;
130 interrupted. NumPy, openpyxl and pint are imported by the commands that need them, so that help shows at once.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from stripcheck import __version__
from stripcheck.caution import CAUTION
from stripcheck.cli_books import add_register, add_trip, add_whatif
from stripcheck.cli_options import EPILOG, add_day, add_loading, add_strip_values, day_of, loading_of, say, strip_of
from stripcheck.cli_register import add_audit, add_merge, add_refresh
from stripcheck.errors import InputError

DEMO_FILE = "stripcheck-demo.xlsx"


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a command line and return its exit code."""
    options = _parser().parse_args(arguments)
    try:
        run: Any = options.run
        code = int(run(options))
        sys.stdout.flush()
        return code
    except InputError as error:
        print(f"stripcheck: {error}", file=sys.stderr)
        return 2
    except BrokenPipeError:  # whoever read the output has gone; what was to be written is written
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except KeyboardInterrupt:
        print("stripcheck: interrupted, nothing was written", file=sys.stderr)
        return 130


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="stripcheck",
        description="Can one aeroplane get in, and out again, of short, sloping, unpaved strips on a given day?",
        epilog=EPILOG,
    )
    parser.add_argument("--version", action="version", version=f"stripcheck {__version__}")
    commands = parser.add_subparsers(title="commands", required=True, metavar="COMMAND")
    _add_fill(commands)
    _add_strip(commands)
    _add_card(commands)
    add_audit(commands)
    add_refresh(commands)
    add_merge(commands)
    add_trip(commands)
    add_register(commands)
    add_whatif(commands)
    _add_demo(commands)
    _add_door(commands)
    listing = commands.add_parser("list", help="list the shipped aircraft cards and rule sets", epilog=EPILOG)
    listing.set_defaults(run=_run_list)
    return parser


def _add_fill(commands: Any) -> None:
    fill = commands.add_parser(
        "fill",
        help="fill a workbook (or a .csv) from a runway list",
        description="Fill a workbook with live formulas, or a .csv with results, from a runway list.",
        epilog="Numbers are read in the unit named, or carry their own: --temp 86F, --qnh 29.92inHg, --temp-at '1800 m'. "
        + EPILOG,
    )
    fill.add_argument("list", metavar="LIST", help="runway list: .csv, .xlsx, .xls or .ods")
    fill.add_argument("--card", required=True, help="aircraft card: a .toml file, or the name of a shipped one")
    fill.add_argument("--rules", required=True, help="rule set: a .toml file, or the name of a shipped one")
    fill.add_argument("-o", "--output", required=True, metavar="OUT", help="workbook (.xlsx) or result table (.csv)")
    fill.add_argument("--force", action="store_true", help="replace OUT if it exists")
    fill.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, for elevations and names")
    fill.add_argument("--sheet", help="sheet of the list's workbook, if not the first")
    fill.add_argument("--strict", action="store_true", help="stop at the first row with a fault")
    fill.add_argument("--detail", choices=("full", "short"),
                      help="full: each step a column (usual up to 2,000 directions); short: the key columns")  # fmt: skip
    fill.add_argument("--chance", action="store_true",
                      help="beside each margin the chance of needing more than there is (slow on long lists)")  # fmt: skip
    fill.add_argument("--formulas", choices=("native", "excel", "calc", "lambda", "none"), default="native",
                      help="native: live everywhere (usual); excel, calc, lambda: verdict, reason and margin by the functions "
                      "of that door; none: values only")  # fmt: skip
    add_loading(fill)
    add_day(fill)
    fill.add_argument("--quiet", action="store_true", help="no progress bar, no summary line")
    fill.set_defaults(run=_run_fill)


def _add_strip(commands: Any) -> None:
    strip = commands.add_parser(
        "strip",
        help="one strip on one page: both ways, what limits it, how far it could go, flaps compared",
        description="One strip on one page. Slope, heading and obstacles are those of one direction; the other follows.",
        epilog="Numbers are read in the unit named, or carry their own: --elev '700 m', --obstacle '20 m/400 m'. " + EPILOG,
    )
    strip.add_argument("--card", required=True, help="aircraft card: a .toml file, or the name of a shipped one")
    strip.add_argument("--rules", required=True, help="rule set: a .toml file, or the name of a shipped one")
    add_strip_values(strip, required=True)
    strip.add_argument("--profile", metavar="POINTS", help="heights along it, such as '0:0, 200:3.5, 450:12' (m)")
    add_loading(strip)
    add_day(strip)
    strip.set_defaults(run=_run_strip)


def _add_card(commands: Any) -> None:
    card = commands.add_parser(
        "card",
        help="an aircraft card on one page: what was given, fitted and assumed, and how far it is from the manual",
        description="An aircraft card on one page: what was given, what was fitted and how well it is known, what was assumed, "
        "and how far the card is from the figures of the manual.",
        epilog=EPILOG,
    )
    card.add_argument("card", metavar="CARD", help="aircraft card: a .toml file, or the name of a shipped one")
    card.add_argument("--picture", metavar="FILE", help="draw the card against the manual too: .png or .svg (needs matplotlib)")
    card.add_argument("--force", action="store_true", help="replace FILE if it exists")
    card.set_defaults(run=_run_card)


def _add_demo(commands: Any) -> None:
    demo = commands.add_parser(
        "demo",
        help="fill a workbook from the shipped, invented scenario",
        description="Fill a workbook from the shipped scenario: invented strips, an invented aeroplane.",
        epilog=EPILOG,
    )
    demo.add_argument("-o", "--output", default=DEMO_FILE, metavar="OUT", help=f"workbook to write (usual: {DEMO_FILE})")
    demo.add_argument("--force", action="store_true", help="replace OUT if it exists")
    demo.add_argument("--quiet", action="store_true", help="no summary line")
    demo.set_defaults(run=_run_demo)


def _add_door(commands: Any) -> None:
    door = commands.add_parser("door", help="formulas in your spreadsheet program", epilog=EPILOG,
                               description="Put the functions of stripcheck into a spreadsheet program.")  # fmt: skip
    doors = door.add_subparsers(title="programs", required=True, metavar="PROGRAM")
    excel = doors.add_parser("excel", help="Excel on Windows, through Python", epilog=EPILOG,
                             description="Write settings, a workbook to start from and the steps into a folder, and on "
                             "Windows import the functions into Excel.")  # fmt: skip
    excel.add_argument("folder", nargs="?", default="stripcheck-excel", metavar="FOLDER",
                       help="folder for the files (usual: stripcheck-excel)")  # fmt: skip
    excel.add_argument("--force", action="store_true", help="replace the files if they exist")
    excel.set_defaults(run=_run_door_excel)
    calc = doors.add_parser("calc", help="LibreOffice Calc", epilog=EPILOG,
                            description="Make the extension for LibreOffice Calc, and install it for you.")  # fmt: skip
    calc.add_argument("-o", "--output", default="stripcheck.oxt", metavar="OUT", help="file to write (usual: stripcheck.oxt)")
    calc.add_argument("--install", action="store_true", help="install it too, for you alone; LibreOffice must be closed")
    calc.add_argument("--force", action="store_true", help="replace OUT if it exists")
    calc.set_defaults(run=_run_door_calc)
    names = doors.add_parser("lambda", help="any Excel that knows LAMBDA: names of a workbook, no Python", epilog=EPILOG,
                             description="Write the functions as LAMBDA names into a new workbook, or a copy of yours.")
    names.add_argument("book", nargs="?", metavar="BOOK.xlsx", help="workbook to copy; left out: a new one with examples")
    names.add_argument("-o", "--output", metavar="OUT.xlsx", help="workbook to write")
    names.add_argument("--force", action="store_true", help="replace OUT if it exists")
    names.set_defaults(run=_run_door_lambda)


def _run_door_excel(options: argparse.Namespace) -> int:
    from stripcheck.doors.excel_setup import install

    return say(install(Path(options.folder), options.force), False)


def _run_door_lambda(options: argparse.Namespace) -> int:
    from stripcheck.doors import lambda_book

    book, output = (None if name is None else Path(name) for name in (options.book, options.output))
    return say(lambda_book.run(book, output, options.force), False)


def _run_door_calc(options: argparse.Namespace) -> int:
    from stripcheck.doors.calc.install import calc_door

    return say(calc_door(Path(options.output), options.install, options.force), False)


def _run_list(_: argparse.Namespace) -> int:
    from stripcheck.card import load_card, shipped_cards
    from stripcheck.rules import load_rules, shipped_rules

    print("Aircraft cards (invented aeroplanes):")
    for name in shipped_cards():
        print(f"  {name:14} {load_card(name).name}")
    print("Rule sets:")
    for name in shipped_rules():
        print(f"  {name:14} {load_rules(name).title}")
    print(CAUTION)
    return 0


def _run_fill(options: argparse.Namespace) -> int:
    from stripcheck.filling import Request, fill_list

    day = day_of(options)
    request = Request(
        Path(options.list), Path(options.output), options.card, options.rules, day,
        takeoff_mass=options.takeoff_mass, landing_mass=options.landing_mass, takeoff_flap=options.takeoff_flap,
        landing_flap=options.landing_flap, airports=options.airports, sheet=options.sheet, strict=options.strict,
        detail=options.detail, formulas=options.formulas, chance=options.chance, force=options.force, quiet=options.quiet,
    )  # fmt: skip
    return say(fill_list(request), options.quiet)


def _run_strip(options: argparse.Namespace) -> int:
    from stripcheck.card import load_card
    from stripcheck.day import read_day
    from stripcheck.one_strip import one_strip, typed_strip
    from stripcheck.rules import load_rules

    loading = loading_of(options)
    strip = typed_strip({**strip_of(options), "profile": options.profile})
    day = day_of(options)
    if day["temperature"] is None and day["isa_deviation"] is None:
        raise InputError("no temperature: add --temp or --isa-dev")
    lines = one_strip(strip, load_card(options.card), read_day(day), load_rules(options.rules), one_way=options.one_way,
                      **loading)  # fmt: skip
    print("\n".join(lines))
    return 0


def _run_card(options: argparse.Namespace) -> int:
    from stripcheck.card import load_card
    from stripcheck.card_report import draw, report

    card = load_card(options.card)
    if options.picture:
        draw(card, options.picture, options.force)
    print("\n".join(report(card)))
    return 0


def _run_demo(options: argparse.Namespace) -> int:
    from stripcheck.filling import demo_request, fill_list

    return say(fill_list(demo_request(Path(options.output), options.force, options.quiet)), options.quiet)


