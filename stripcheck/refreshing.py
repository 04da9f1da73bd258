"""Refresh a filled workbook: compute it anew after its strips, day, loading or rules were edited, or with new ones.

Only cells that are stripcheck's are changed, in the worksheet parts that are its own; every other part of the file, and every
cell of the user's in those, stays byte for byte as it is. What ``stripcheck refresh`` does.
"""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from stripcheck.card import load_card
from stripcheck.errors import InputError
from stripcheck.refresh_given import take_over
from stripcheck.rules import load_rules
from stripcheck.safe_file import dated_copies, keeping_the_old, refuse_if_open, whole_or_not_at_all
from stripcheck.sheet.filled import check_filled, read_filled
from stripcheck.sheet.filled_pages import ValuePages
from stripcheck.sheet.package import Package
from stripcheck.sheet.refreshed import BookEdits, compute
from stripcheck.sheet.refreshed_pages import PageEdits
from stripcheck.sheet.refreshed_strips import StripEdits
from stripcheck.sheet.refreshed_summary import SummaryEdits

KINDS = (".xlsx", ".xlsm")
MOST_CHANGES = 10  # verdicts that the terminal names
MOST_DOUBTS = 12


@dataclass(frozen=True)
class Request:
    """What to refresh, where to (the workbook itself where None), and what goes before the workbook's own values."""

    book: Path
    output: Path | None = None
    day: Mapping[str, Any] | None = None
    card: str | None = None
    rules: str | None = None
    takeoff_mass: str | None = None
    landing_mass: str | None = None
    takeoff_flap: str | None = None
    landing_flap: str | None = None
    force: bool = False

    @property
    def target(self) -> Path:
        """The file that is written."""
        return self.output or self.book

    @property
    def in_place(self) -> bool:
        """Whether the workbook itself is written."""
        return self.output is None or (self.output.exists() and self.book.exists() and self.output.samefile(self.book))


def refresh_book(request: Request) -> list[str]:
    """Do it and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    _check(request)
    before = _stamp(request.book)
    with Package(request.book) as package:
        work, lines = _refresh(package, request)
        parts = package.with_edits(work.by_title)
        writing = keeping_the_old if request.in_place else whole_or_not_at_all
        with writing(request.target) as file:
            package.save(parts, file)
            package.close()  # some systems replace no file that is open
            if _stamp(request.book) != before:
                raise InputError(f"{request.book}: the file was changed while it was refreshed; refresh it again")
    kept = dated_copies(request.target)[-1:] if request.in_place else []
    return [f"{request.target}: {lines[0]}", *lines[1:], *(f"The version before: {path.name}" for path in kept)]


def _check(request: Request) -> None:
    book, output = request.book, request.output
    if book.suffix.lower() not in KINDS:
        raise InputError(f"{book}: a workbook that stripcheck filled is expected, .xlsx or .xlsm")
    if not book.exists():
        raise InputError(f"{book}: there is no such file")
    if output is not None and output.suffix.lower() != book.suffix.lower():
        raise InputError(f"{output}: the name of the file to write must end in {book.suffix}, as that of the workbook does")
    if output is not None and output.exists() and not request.force:
        raise InputError(f"{output}: this file exists; choose another name, or add --force to replace it")
    refuse_if_open(book)
    refuse_if_open(request.target)  # now, and not after a long list was worked out
    if not request.target.resolve().parent.is_dir():
        raise InputError(f"{request.target}: the folder does not exist")


def _stamp(path: Path) -> tuple[int, int]:
    found = os.stat(path)
    return found.st_mtime_ns, found.st_size


def _refresh(package: Package, request: Request) -> tuple[BookEdits, list[str]]:
    """All edits, and what to tell, the number of directions first."""
    check_filled(package)
    card = None if request.card is None else load_card(request.card)
    rules = None if request.rules is None else load_rules(request.rules)
    work = BookEdits(package, ValuePages(package))
    take_over(work, request, card, rules)
    book = read_filled(package, work.pages)
    computed = compute(book)
    directions = StripEdits(work, computed)
    directions.write()
    summary = SummaryEdits(work, computed, directions)
    summary.write()
    pages = PageEdits(work, computed, card, rules)
    pages.write()
    return work, [
        f"{_many(computed.size, 'direction')} refreshed",
        *_some([*book.doubts, *pages.doubts, *summary.misnamed()], MOST_DOUBTS),
        *_told_of(directions, summary, pages),
        *summary.counts(),
    ]


def _told_of(directions: StripEdits, summary: SummaryEdits, pages: PageEdits) -> list[str]:
    lines = []
    if directions.replaced or pages.replaced:
        cells = ", ".join(_some([*directions.replaced, *pages.replaced], 5))
        lines.append(f"Typed over formulas, and formulas again: {cells}")
    if summary.gone:
        lines.append(f"{_many(summary.gone, 'strip')} of the Summary not on the sheet Strips any more: delete the rows there")
    unknown, changes = directions.unknown_before(), directions.changes()
    if unknown:
        lines.append(f"{_many(unknown, 'direction')} had no verdict before")
    if unknown < len(directions.rows):
        lines.append(f"Changed: {_many(len(changes), 'verdict')}")
    return [*lines, *(f"  {line}" for line in _some(changes, MOST_CHANGES))]


def _some(lines: Sequence[str], most: int) -> list[str]:
    return [*lines[:most], *([f"and {len(lines) - most:,} more"] if len(lines) > most else [])]


def _many(number: int, what: str) -> str:
    return f"{number:,} {what}" if number == 1 else f"{number:,} {what}s"
