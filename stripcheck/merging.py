"""What ``stripcheck merge`` does: compare a new list with a register, tell the changes, and apply what is accepted."""

from __future__ import annotations

import csv
import io
import math
import shutil
import tempfile
from collections.abc import Iterator, Mapping, Sequence
from contextlib import nullcontext
from dataclasses import dataclass, field
from datetime import datetime
from pathlib import Path
from typing import Any, BinaryIO

from stripcheck.errors import InputError, one_line
from stripcheck.merge_verdicts import Verdicts, compare_verdicts
from stripcheck.register.columns import Found
from stripcheck.register.csv_lines import CsvLines
from stripcheck.register.matching import BY_IDENTIFIER
from stripcheck.register.merge import CHANGED, GONE, KINDS, NEW, Change, Merge, compare
from stripcheck.register.merge_row import Write
from stripcheck.register.read_table import DELIMITERS, TEXT_KINDS, check_file, find_encoding, read_table, text_rows
from stripcheck.register.reader import Reading, read_runways
from stripcheck.register.values import as_written, harmless, is_blank
from stripcheck.safe_file import keeping_the_old, refuse_if_open, whole_or_not_at_all
from stripcheck.sheet import filled
from stripcheck.sheet.merged import LOG_HEADERS, LOG_SHEET, RegisterBook, last_row
from stripcheck.sheet.package import Package
from stripcheck.sheet.review import Line, read_review, write_review
from stripcheck.units import KINDS as QUANTITIES
from stripcheck.units import read_quantity

BOOK_KINDS = (".xlsx", ".xlsm")
MOST_LINES = 40  # changes of one kind that the terminal shows: about a screen
MOST_REMARKS = 12
MOST_SHEETS = 6
NO_FLIP = "no change"
LONGEST_SHOWN = 160  # characters of a new runway that the terminal shows
SAME = 1e-9  # relative: a number written and read back


@dataclass(frozen=True)
class MergeRequest:
    """What to merge: the register, the new list, what is accepted or where the review is, and for which aeroplane and day
    verdicts are compared. ``output``: None writes the register itself. ``now``: for the change log."""

    register: Path
    other: Path
    sheet: str | None = None
    other_sheet: str | None = None
    airports: str | None = None
    accept: Sequence[str] = ()
    accept_from: Path | None = None
    review: Path | None = None
    source: str | None = None
    card: str | None = None
    rules: str | None = None
    day: Mapping[str, Any] = field(default_factory=dict)
    takeoff_mass: str | None = None
    landing_mass: str | None = None
    takeoff_flap: str | None = None
    landing_flap: str | None = None
    output: Path | None = None
    force: bool = False
    now: datetime | None = None

    @property
    def target(self) -> Path:
        """The file that is written."""
        return self.output or self.register

    @property
    def is_book(self) -> bool:
        return self.register.suffix.lower() in BOOK_KINDS

    @property
    def log(self) -> Path:
        """The change log of a text list."""
        return self.target.with_name(f"{self.target.stem} changes.csv")

    @property
    def named_source(self) -> str:
        """What the change log tells of where the changes came from."""
        return self.source or self.other.name + (f', sheet "{self.other_sheet}"' if self.other_sheet else "")


def run_merge(request: MergeRequest) -> list[str]:
    """Do it and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    _check(request)
    stamp = _stamp(request.register)
    with Package(request.register) if request.is_book else nullcontext() as package:
        if package is not None and filled.is_filled(package):
            raise InputError(
                f"{request.register}: this is a workbook that stripcheck filled; merge into the list it was filled from, and "
                "fill it again"
            )
        register = read_runways(read_table(request.register, request.sheet), request.register)
        other = read_runways(read_table(request.other, request.other_sheet), request.other, request.airports)
        book = None if package is None else RegisterBook(package, register)
        merge = compare(register, other, book.fixed if book is not None else ())
        verdicts = None
        if request.card is not None and request.rules is not None:
            verdicts = compare_verdicts(merge, request.register, request.card, request.rules, request.day, request)
        lines = _told(request, merge, verdicts)
        if request.review is not None:
            return [*lines, "", *_review(request, merge, verdicts)]
        accepted = _accepted(request, merge)
        if not request.accept and request.accept_from is None:
            return [*lines, "", "Nothing was written: add --accept new, changed, gone or all, or --review REVIEW.xlsx"]
        if not accepted:
            return [*lines, "", "Nothing was written: nothing of what is accepted is left to change"]
        if _stamp(request.register) != stamp:
            raise InputError(f"{request.register}: the file has changed in the meantime; merge again")
        return [*lines, "", *_apply(request, merge, accepted, book)]


# --- what is asked


def _check(request: MergeRequest) -> None:
    kind = request.register.suffix.lower()
    if kind not in (*BOOK_KINDS, *TEXT_KINDS):
        raise InputError(f"{request.register}: a register is a list in a .csv or an .xlsx file; save it as one of these")
    if (request.card is None) != (request.rules is None):
        raise InputError("to compare verdicts both are needed: --card and --rules")
    if [bool(request.accept), request.accept_from is not None, request.review is not None].count(True) > 1:
        raise InputError("--accept, --accept-from and --review can't go together; choose one")
    check_file(request.register)
    check_file(request.other)
    if request.register.samefile(request.other):
        raise InputError(f"{request.other}: this is the register itself; name the list to merge into it")
    if request.review is not None:
        _check_output(request.review, ".xlsx", request)
        return
    if request.output is not None:
        _check_output(request.output, kind, request)
    if request.accept or request.accept_from is not None:
        refuse_if_open(request.target)
        if not request.is_book:
            refuse_if_open(request.log)


def _check_output(path: Path, ending: str, request: MergeRequest) -> None:
    if path.suffix.lower() != ending:
        raise InputError(f"{path}: the name of this file must end in {ending}")
    for given in (request.register, request.other, request.accept_from):
        if given is not None and path.exists() and given.exists() and path.samefile(given):
            raise InputError(f"{path}: this is a file that is read; choose another name for what is written")
    if path.exists() and not request.force:
        raise InputError(f"{path}: this file exists; choose another name, or add --force to replace it")
    refuse_if_open(path)
    if not path.resolve().parent.is_dir():
        raise InputError(f"{path}: the folder does not exist")


def _stamp(path: Path) -> tuple[int, int]:
    found = path.stat()
    return found.st_mtime_ns, found.st_size


def _accepted(request: MergeRequest, merge: Merge) -> list[Change]:
    if request.accept_from is not None:
        keys = read_review(request.accept_from, merge)
        chosen = [change for change in merge.changes if change.key in keys]
        bad = next((change for change in chosen if change.hindered), None)
        if bad is not None:
            what = f"{bad.strip} {bad.runway} {bad.column}".strip()
            raise InputError(f"{request.accept_from}: {what} is marked yes and can't be merged: {bad.hindered}")
        return chosen
    kinds = KINDS if "all" in request.accept else request.accept
    return [change for change in merge.changes if change.kind in kinds and not change.hindered and not change.by_hand]


# --- what is told


def _told(request: MergeRequest, merge: Merge, verdicts: Verdicts | None) -> list[str]:
    """The comparison as a page for the terminal."""
    tables = merge.register.runways.table, merge.other.runways.table
    matched = ", ".join(f"{count:,} by {how}" for how, count in merge.matched.items())
    total = sum(merge.matched.values())
    lines = [f"{tables[0].where}: {len(tables[0].row_numbers):,} runways; {tables[1].where}: {len(tables[1].row_numbers):,}",
             f"In both: {total:,}" + (f" ({matched})" if total else "")]  # fmt: skip
    for kind, title in ((NEW, "New"), (GONE, "Gone"), (CHANGED, "Changed")):
        changes = [change for change in merge.changes if change.kind == kind]
        rows = {(change.row, change.other) for change in changes}
        count = f"{len(changes):,}" if kind != CHANGED else f"{len(changes):,} in {len(rows):,} runways"
        closed = f", and {merge.closed_gone:,} marked as closed already" if kind == GONE and merge.closed_gone else ""
        lines += ["", f"{title}: {count}{closed}"]
        shown = [line for change in changes[:MOST_LINES] for line in _lines_of(merge, change, verdicts)]
        lines += shown
        if len(changes) > MOST_LINES:
            lines.append(f"  and {len(changes) - MOST_LINES:,} more: --review writes them all")
    lines += _together(merge, verdicts)
    lines += _listed("Not clear, left aside", merge.unclear)
    lines += _listed("Not compared", merge.remarks)
    for title, counts in (("Not in the new list, kept", merge.kept), ("No column in the register, not merged", merge.lost)):
        if counts:
            lines += ["", f"{title}: " + ", ".join(f"{header} ({count:,})" for header, count in counts.items())]
    compared = "Verdicts were not compared: add --card, --rules and the day"
    about = f"Verdicts compared for {verdicts.about}" if verdicts is not None else compared
    return [*map(one_line, lines), "", about]


def _lines_of(merge: Merge, change: Change, verdicts: Verdicts | None) -> Iterator[str]:
    where = "" if change.row is None else f"row {merge.register.runways.table.row_numbers[change.row]} "
    start = f"  {where}{change.strip} {change.runway}"
    if change.kind == CHANGED:
        yield f"{start}  {change.column}: {change.old or '(blank)'} -> {change.new}" + _how(change)
    else:
        new = change.new if len(change.new) <= LONGEST_SHOWN else f"{change.new[:LONGEST_SHOWN]} ..."
        yield start + (f"  {new}" if change.kind == NEW else f"  to be marked: {change.column} = {new}" if new else "")
    flip = verdicts.flips.get(change.key, "") if verdicts else ""
    if flip:
        yield f"      {flip}"
    if change.hindered:
        yield f"      can't be merged: {change.hindered}"
    elif change.by_hand:
        yield "      merged only where it is marked in a review: the register has notes of its own"


def _how(change: Change) -> str:
    return "" if change.how in ("", BY_IDENTIFIER) else f"  (matched by {change.how})"


def _together(merge: Merge, verdicts: Verdicts | None) -> list[str]:
    """Verdicts that flip only by several changes of a runway, or otherwise than by each."""
    if verdicts is None:
        return []
    alone: dict[int, set[str]] = {}
    for change in merge.changes:
        if change.row is not None:
            alone.setdefault(change.row, set()).add(verdicts.flips.get(change.key, ""))
    found = [(row, flip) for row, flip in verdicts.together.items() if flip and alone[row] - {""} != {flip}]
    called = {change.row: f"{change.strip} {change.runway}" for change in merge.changes}
    return _listed("With all changes of a runway together", [f"{called[row]}  {flip}" for row, flip in found])


def _listed(title: str, texts: Sequence[str]) -> list[str]:
    if not texts:
        return []
    more = [f"  and {len(texts) - MOST_REMARKS:,} more"] if len(texts) > MOST_REMARKS else []
    return ["", f"{title}: {len(texts):,}", *(f"  {text}" for text in texts[:MOST_REMARKS]), *more]


# --- the review


def _review(request: MergeRequest, merge: Merge, verdicts: Verdicts | None) -> list[str]:
    assert request.review is not None
    numbers = merge.register.runways.table.row_numbers
    lines = []
    for change in merge.changes:
        flip = "" if verdicts is None else verdicts.flips.get(change.key, "") or NO_FLIP
        all_of_it = flip if verdicts is None or change.row is None else verdicts.together.get(change.row, flip) or NO_FLIP
        if all_of_it != flip:
            flip += f"; with all changes of the runway: {all_of_it}"
        remark = f"can't be merged: {change.hindered}" if change.hindered else ""
        how = _how(change).strip(" ()")
        own = "the register has notes of its own" if change.by_hand else ""
        row = None if change.row is None else numbers[change.row]
        lines.append(Line(change.kind, change.strip, change.runway, row, change.column, change.old, change.new, flip,
                          "; ".join(filter(None, (remark, how, own))), change.key))  # fmt: skip
    lists = f"Register: {request.register.name}. New list: {request.named_source}."
    about = f"Verdicts: {verdicts.about}." if verdicts is not None else "Verdicts were not compared."
    cuts = write_review(merge, lines, request.review, lists, about)
    return [*cuts, f"{request.review}: {len(lines):,} changes to look through; mark them and give the file with --accept-from"]


# --- applying


def _apply(request: MergeRequest, merge: Merge, accepted: Sequence[Change], book: RegisterBook | None) -> list[str]:
    now = (request.now or datetime.now()).strftime("%Y-%m-%d %H:%M")
    log = [(now, request.named_source, change.strip, change.runway, change.kind, change.column, change.old, change.new)
           for change in accepted]  # fmt: skip
    added = [change.writes for change in accepted if change.kind == NEW]
    told: list[str] = []
    log_data = b"" if book is not None else _log_data(request.log, log)
    with tempfile.TemporaryDirectory() as folder:
        made = Path(folder) / f"made{request.register.suffix}"
        with made.open("wb") as file:
            if book is not None:
                rows = _into_book(book, accepted, added, log, file)
                told += _about_book(book, rows)
            else:
                file.write(_into_text(request, merge.register, accepted, added))
                rows = list(range(last_row(merge.register) + 1, last_row(merge.register) + 1 + len(added)))
        _verify(request, made, merge.register, accepted, rows, book)
        writing = keeping_the_old if request.output is None else whole_or_not_at_all
        if book is not None:
            book.package.close()
        with writing(request.target) as file, made.open("rb") as source:
            shutil.copyfileobj(source, file)
    if book is None:
        with whole_or_not_at_all(request.log) as file:
            file.write(log_data)
    counts = ", ".join(f"{sum(change.kind == kind for change in accepted):,} {kind}" for kind in KINDS)
    where = f'the sheet "{LOG_SHEET}"' if book is not None else request.log.name
    return [f"{request.target}: merged {counts}; written down in {where}", *told]


def _into_book(book: RegisterBook, accepted: Sequence[Change], added: Sequence[Sequence[Write]], log: Sequence[Sequence[str]],
               file: BinaryIO) -> list[int]:  # fmt: skip
    for change in accepted:
        if change.row is not None:
            book.change(change.row, change.writes)
    rows = book.add(added)
    book.drop_results()
    book.log(log)
    book.save(file)
    return rows


def _about_book(book: RegisterBook, rows: Sequence[int]) -> list[str]:
    told = []
    if rows and book.in_table:
        told.append(f"New runways stand in rows {rows[0]} to {rows[-1]}: see whether the sheet's table must be drawn longer")
    if book.stale:
        titles = list(book.stale)
        more = f" and {len(titles) - MOST_SHEETS} more" if len(titles) > MOST_SHEETS else ""
        told.append(
            f"{sum(book.stale.values()):,} formulas that hang on the list have no result until a spreadsheet program opens the "
            f"file and saves it, on: {', '.join(titles[:MOST_SHEETS])}{more}"
        )
    return told


def _into_text(request: MergeRequest, register: Reading, accepted: Sequence[Change],
               added: Sequence[Sequence[Write]]) -> bytes:  # fmt: skip
    table = register.runways.table
    lines = CsvLines(request.register.read_bytes(), find_encoding(request.register), table.delimiter)
    for change in accepted:
        if change.row is not None:
            for write in change.writes:
                lines.set(table.row_numbers[change.row], table.places[write.position] - 1, write.text)
    for writes in added:
        cells = [""] * max(table.places)
        for write in writes:
            cells[table.places[write.position] - 1] = write.text
        lines.add_below(last_row(register), cells)
    return lines.data()


def _verify(request: MergeRequest, made: Path, register: Reading, accepted: Sequence[Change], rows: Sequence[int],
            book: RegisterBook | None) -> None:  # fmt: skip
    """Read what was made, and raise InputError unless all that is in it is what stood there before or what was accepted.

    ``rows``: where the new runways stand. Cells with formulas are not looked at: their results may have been taken away.
    """
    table = register.runways.table
    read = read_runways(read_table(made, table.sheet or None), made)
    place = {number: index for index, number in enumerate(read.runways.table.row_numbers)}
    fixed = book.fixed if book is not None else set()
    shift, above = (0 if book is not None else len(rows)), last_row(register)
    now = [number if number <= above else number + shift for number in table.row_numbers]
    if read.runways.table.headers != table.headers or not {*place} <= {*now, *rows}:
        raise _not_as_meant(request, "what stands in its rows")
    written: dict[tuple[int, int], Write] = {}
    numbers = iter(rows)
    for change in accepted:
        number = next(numbers) if change.row is None else now[change.row]
        written |= {(number, write.position): write for write in change.writes}
    worked_out = {position for _, position in fixed}
    expected = [(now[index], position, cells[index], index) for position, cells in enumerate(table.cells)
                for index in range(len(now)) if (index, position) not in fixed]  # fmt: skip
    expected += [(number, position, "", -1) for number in rows for position in range(len(table.headers))
                 if position not in worked_out]  # fmt: skip
    keys = {item.position: at for at, item in register.runways.found.items() if item.column.kind in QUANTITIES}
    for number, position, old, index in expected:
        write = written.get((number, position))
        cell = old if write is None else write.value if book is not None else write.text
        if number not in place:
            same = is_blank(cell)
        else:
            same = as_written(read.runways.table.cells[position][place[number]]) == as_written(cell)
            at = keys.get(position)
            if same and at is not None:
                before = float(register.runways.number(*at)[index]) if index >= 0 else math.nan
                same = _same_number(float(read.runways.number(*at)[place[number]]), before, write, register.runways.found[at])
        if not same:
            raise _not_as_meant(request, f'row {number}, column "{table.headers[position]}"')


def _same_number(number: float, before: float, write: Write | None, item: Found) -> bool:
    """Whether a cell is read as the number that stood there before, or that was to be written."""
    meant = before
    if write is not None:
        value = write.value.replace(",", ".") if isinstance(write.value, str) else write.value
        meant = read_quantity(value, item.column.kind, item.unit)
    return (math.isnan(number) and math.isnan(meant)) or abs(number - meant) <= SAME * max(abs(meant), 1e-3)


def _not_as_meant(request: MergeRequest, where: str) -> InputError:
    return InputError(
        f"{request.register}: {where} would not be read as it is meant after the merge, so nothing was written; give the "
        "numbers of that column one form, without marks between thousands"
    )


def _log_data(path: Path, rows: Sequence[Sequence[str]]) -> bytes:
    """The change log of a text list with lines more: what is there stays as it is."""
    data, delimiter, end = b"", ",", b""
    if path.exists() and path.stat().st_size:
        check_file(path, "change log")
        data = path.read_bytes()
        encoding = find_encoding(path)
        found = (mark for mark in DELIMITERS if next(iter(text_rows(path, encoding, mark)), []) == [*LOG_HEADERS])
        delimiter = next(found, "")
        if not delimiter or encoding not in ("utf-8-sig",):
            raise InputError(f"{path}: this is no change log of a merge in UTF-8; rename it, and a new one is made")
        end = b"" if data.endswith((b"\n", b"\r")) else b"\r\n"
    text = io.StringIO(newline="")
    writer = csv.writer(text, delimiter=delimiter)
    if not data:
        writer.writerow(LOG_HEADERS)
    writer.writerows([list(map(harmless, row)) for row in rows])
    return (data or b"\xef\xbb\xbf") + end + text.getvalue().encode()
