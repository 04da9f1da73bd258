"""Commands for those who keep a register: ``stripcheck audit``, ``merge`` and ``refresh``."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from stripcheck.cli_options import EPILOG, add_day, add_loading, day_of, say


def add_audit(commands: Any) -> None:
    audit = commands.add_parser(
        "audit",
        help="what makes the verdicts from a list or a filled workbook untrustworthy, row by row",
        description="Find what makes verdicts untrustworthy: values that are missing, absurd or contradict each other, runways "
        "that come twice, old surveys. Each is told with a suggested correction; nothing is changed.",
        epilog=EPILOG,
    )
    audit.add_argument("list", metavar="LIST", help="runway list: .csv, .xlsx, .xls or .ods; or a filled workbook")
    audit.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, to compare with")
    audit.add_argument("--sheet", help="sheet of the list's workbook, if not the first")
    audit.add_argument("--survey-age", type=float, metavar="YEARS", help="greatest age of a survey (usual: 5)")
    audit.add_argument("--csv", metavar="OUT.csv", help="write all findings as a table")
    audit.add_argument("--xlsx", metavar="OUT.xlsx", help="write all findings as a workbook, with links to the cells")
    audit.add_argument("--force", action="store_true", help="replace the files to write if they exist")
    audit.set_defaults(run=_run_audit)


def add_refresh(commands: Any) -> None:
    """``stripcheck refresh``."""
    refresh = commands.add_parser(
        "refresh",
        help="compute a filled workbook anew, and keep all that is yours in it",
        description="Compute a filled workbook anew after its strips, day, loading, tables or rules were edited, or with new "
        "ones. Only cells of stripcheck's are changed; columns, sheets, notes, formats, pictures and macros of yours stay as "
        "they are. The version before stays beside it as a dated copy.",
        epilog=EPILOG,
    )
    refresh.add_argument("book", metavar="BOOK", help="workbook that `stripcheck fill` made: .xlsx or .xlsm")
    refresh.add_argument("-o", "--output", metavar="OUT", help="write another file, and leave BOOK as it is")
    refresh.add_argument("--card", help="another aircraft card of the same make: a .toml file, or the name of a shipped one")
    refresh.add_argument("--rules", help="another rule set: a .toml file, or the name of a shipped one")
    refresh.add_argument("--force", action="store_true", help="replace OUT if it exists")
    add_loading(refresh)
    add_day(refresh)
    refresh.set_defaults(run=_run_refresh)


def add_merge(commands: Any) -> None:
    """``stripcheck merge``."""
    merge = commands.add_parser(
        "merge",
        help="what another list would change in a register, and merge what is accepted",
        description="Compare a new list with a register: what is new, gone and changed, and which verdicts change with it. "
        "Only what is accepted is written, cell by cell; all else stays as it is, and a change log tells what was done. A "
        "runway that is gone is marked as closed, never deleted. The version before stays beside the register as a dated copy.",
        epilog=EPILOG,
    )
    merge.add_argument("register", metavar="REGISTER", help="your list: .csv, or .xlsx such as `stripcheck register` makes")
    merge.add_argument("list", metavar="NEWLIST", help="another runway list: .csv, .xlsx, .xls or .ods")
    merge.add_argument("--sheet", help="sheet of REGISTER, if not the first with a list")
    merge.add_argument("--list-sheet", metavar="SHEET", help="sheet of NEWLIST, if not the first with a list")
    merge.add_argument("--airports", metavar="FILE", help="airports file of the open runway data, for NEWLIST")
    merge.add_argument("--accept", action="append", choices=("new", "changed", "gone", "all"), default=[],
                       help="merge all changes of this kind; may be repeated")  # fmt: skip
    merge.add_argument("--review", metavar="REVIEW.xlsx", help="write the changes as a workbook, to mark what is accepted")
    merge.add_argument("--accept-from", metavar="REVIEW.xlsx", help="merge what is marked yes in a review")
    merge.add_argument("--source", metavar="TEXT", help="where the new list is from, for the change log (usual: its file name)")
    merge.add_argument("-o", "--output", metavar="OUT", help="write another file, and leave REGISTER as it is")
    merge.add_argument("--force", action="store_true", help="replace OUT or REVIEW.xlsx if it exists")
    verdicts = merge.add_argument_group("verdicts (compared where both are given)")
    verdicts.add_argument("--card", help="aircraft card: a .toml file, or the name of a shipped one")
    verdicts.add_argument("--rules", help="rule set: a .toml file, or the name of a shipped one")
    add_loading(merge)
    add_day(merge)
    merge.set_defaults(run=_run_merge)


def _run_merge(options: argparse.Namespace) -> int:
    from stripcheck.merging import MergeRequest, run_merge

    accept_from, review, output = (None if name is None else Path(name)
                                   for name in (options.accept_from, options.review, options.output))  # fmt: skip
    request = MergeRequest(
        Path(options.register), Path(options.list), options.sheet, options.list_sheet, options.airports, options.accept,
        accept_from, review, options.source, options.card, options.rules, day_of(options), options.takeoff_mass,
        options.landing_mass, options.takeoff_flap, options.landing_flap, output, options.force,
    )  # fmt: skip
    return say(run_merge(request), False)


def _run_audit(options: argparse.Namespace) -> int:
    from stripcheck.auditing import AuditRequest, run_audit

    csv, xlsx = (None if name is None else Path(name) for name in (options.csv, options.xlsx))
    age = {} if options.survey_age is None else {"survey_age": options.survey_age}
    request = AuditRequest(Path(options.list), options.airports, options.sheet, csv=csv, xlsx=xlsx, force=options.force, **age)
    return say(run_audit(request), False)


def _run_refresh(options: argparse.Namespace) -> int:
    from stripcheck.refreshing import Request, refresh_book

    request = Request(
        Path(options.book), Path(options.output) if options.output else None, day_of(options), options.card, options.rules,
        options.takeoff_mass, options.landing_mass, options.takeoff_flap, options.landing_flap, options.force,
    )  # fmt: skip
    return say(refresh_book(request), False)
