"""A register workbook into which changes are merged: cells put in place, and all else left as it is.

Only the worksheet of the list is edited, cell by cell. Rows that are new take the styles and the formulas of the last row.
The sheet "Change log" is added, or goes on. A result that a formula had before the change must not stand there as if it held
still: where a formula may hang on the list its result is taken away, and the next program to open the file works it out.

The file format is that of ECMA-376 part 1 (SpreadsheetML) and part 2 (packages), from memory.
"""

from __future__ import annotations

import datetime
import posixpath
import re
from bisect import bisect_left, bisect_right
from collections.abc import Collection, Iterable, Iterator, Mapping, Sequence
from contextlib import suppress
from functools import cached_property
from typing import BinaryIO
from xml.sax.saxutils import escape, quoteattr

from openpyxl.formula.translate import Translator
from openpyxl.utils import get_column_letter
from openpyxl.utils.datetime import CALENDAR_MAC_1904, CALENDAR_WINDOWS_1900, to_excel

from stripcheck.errors import InputError
from stripcheck.register.merge_row import Write
from stripcheck.register.reader import Reading
from stripcheck.register.values import is_blank
from stripcheck.sheet.edits import Edits, Growth, cell_bytes
from stripcheck.sheet.package import Package, worked_out_on_load
from stripcheck.sheet.raw_sheet import FORMULA, RawCell, RawRow, RawSheet

LOG_SHEET = "Change log"
LOG_HEADERS = ("Date", "Source", "Strip", "Runway", "What", "Column", "Old", "New")
LOG_WIDTHS = (17, 28, 12, 12, 10, 34, 34, 60)
NEAR = 20  # rows above in which a style is looked for where a cell has none
HEADER_WITHIN = 40  # rows in which the log's header is looked for

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_STRICT_MAIN = "http://purl.oclc.org/ooxml/spreadsheetml/main"
_RELATION = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_STRICT_RELATION = "http://purl.oclc.org/ooxml/officeDocument/relationships"
_SHEET_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"
_CELL_META = re.compile(rb"""\scm=["']\d+["']""")
_STRINGS = re.compile(r'"[^"]*"')
_REFERENCES = re.compile(r"\$?[A-Za-z]{1,3}(\$?)(\d+)(?![\w(.])")
_SPAN = re.compile(r"'[^']*:[^']*'!|[\w.]:[\w.]+!")  # a reference through several sheets
_WORDS = re.compile(r"[^\W\d][\w.]*(?!\w|\s*\()")


class RegisterBook:
    """A register workbook as a package, with the edits to the sheet of its list."""

    def __init__(self, package: Package, register: Reading) -> None:
        table = register.runways.table
        self.package, self.register, self.title = package, register, table.sheet
        self.raw = package.sheet(self.title)
        self.edits = {self.title: Edits(self.raw)}
        self.places, self.rows = table.places, table.row_numbers
        self.understood = {self.places[item.position] for item in register.runways.found.values()}
        self._dated: dict[int, list[int]] = {}  # rows that show a date, by column
        self.added: dict[str, bytes] = {}
        self.parts: dict[str, bytes] = {}
        self.stale: dict[str, int] = {}  # formulas whose results were taken away, by sheet

    @cached_property
    def fixed(self) -> set[tuple[int, int]]:
        """Cells with a formula, as index of the runway and position of the column."""
        return {
            (index, position)
            for index, row in enumerate(self.rows)
            for position, place in enumerate(self.places)
            if (cell := self.raw.cell(row, place)) is not None and cell.live
        }

    # --- the list

    def change(self, index: int, writes: Iterable[Write]) -> None:
        """Write cells of a runway."""
        for write in writes:
            self._put(self.rows[index], self.places[write.position], write)

    @property
    def in_table(self) -> bool:
        """Whether the sheet holds a table of the program's own kind, which does not grow by itself."""
        return bool(re.search(rb"<(?:\w+:)?tablePart\b", self.raw.data[self.raw.stop :]))

    def add(self, rows: Sequence[Sequence[Write]]) -> list[int]:
        """Write new runways below the last one, each into the first row that is free; returns their rows."""
        last = last_row(self.register)
        row, made = last, []
        for writes in rows:
            row = next(number for number in range(row + 1, row + 2 + len(self.raw.rows)) if self._is_free(number))
            self._fill_row(row, last, writes)
            made.append(row)
        if made:
            first = self.register.runways.table.header_row + 1
            self.edits[self.title].grow(Growth(first, last, made[-1], range(1, max(self.places) + 1)))
        return made

    def _is_free(self, number: int) -> bool:
        """Whether a row holds nothing but formulas beside the list's own columns."""
        found = self.raw.by_number.get(number)
        cells = found.cells.items() if found else ()
        return all(cell.live or cell.value in (None, "") for _, cell in cells)

    def _fill_row(self, number: int, above: int, writes: Iterable[Write]) -> None:
        edits, own = self.edits[self.title], self.raw.by_number.get(number)
        model = self.raw.by_number.get(above) or RawRow(above, 0, 0)
        given = {self.places[write.position]: write for write in writes}
        for column in sorted({*given, *model.cells}):
            there = own.cells.get(column) if own else None
            pattern = model.cells.get(column)
            if there is not None and there.live:
                continue
            if pattern is not None and pattern.live and above in self.rows:
                copied = self._copied_down(pattern, above, column, number)
                if copied:
                    edits.cells.setdefault(number, {})[column] = copied
                    self._count(self.title)
                continue
            if column in given:
                self._put(number, column, given[column])
            elif there is None and pattern is not None and pattern.style:
                edits.set(number, column, None, style=pattern.style)

    def _put(self, row: int, column: int, write: Write) -> None:
        value = write.value
        style = self._style(row, column)
        if isinstance(value, datetime.date):
            style = self._date_style(row, column) or style
            value = float(to_excel(datetime.datetime(value.year, value.month, value.day), self._epoch))
        self.edits[self.title].set(row, column, value, style=style)

    def _style(self, row: int, column: int) -> str:
        """The cell's own style, else that of the nearest cell above it in the list."""
        above = (number for number in self._upwards(row) if (cell := self.raw.cell(number, column)) is not None and cell.style)
        cell = self.raw.cell(next(above, 0), column)
        return cell.style if cell else ""

    def _upwards(self, row: int) -> Iterator[int]:
        yield row
        yield from reversed(self.rows[: bisect_left(self.rows, row)][-NEAR:])

    def _date_style(self, row: int, column: int) -> str:
        """The style of the nearest cell above, or else below, in which the column shows a date."""
        if column not in self._dated:
            cells = self.register.runways.table.cells[self.places.index(column)]
            dated = [number for number, cell in zip(self.rows, cells, strict=True) if isinstance(cell, datetime.date)]
            self._dated[column] = dated
        rows = self._dated[column]
        nearest = rows[max(bisect_right(rows, row) - 1, 0)] if rows else 0
        cell = self.raw.cell(nearest, column)
        return cell.style if cell else ""

    @property
    def _epoch(self) -> datetime.datetime:
        workbook = self.package.zip.read(self.package.workbook)
        since_1904 = re.search(rb"""\bdate1904=["'](?:1|true)""", workbook)
        epoch: datetime.datetime = CALENDAR_MAC_1904 if since_1904 else CALENDAR_WINDOWS_1900
        return epoch

    def _copied_down(self, cell: RawCell, row: int, column: int, to: int) -> bytes | None:
        """The formula of a cell in another row, without a result; None for one that reaches over several cells."""
        whole = cell.whole()
        tag = FORMULA.search(whole)
        kind = tag[1] or b"" if tag else b""
        name, letter, p = f"{get_column_letter(column)}{to}", get_column_letter(column), self.raw.prefix
        array = b't="array"' in kind
        if b't="dataTable"' in kind or (array and f'ref="{letter}{row}"'.encode() not in kind):
            return None
        text = escape(_moved(self._formula(cell, column, row), f"{letter}{row}", name))
        meta = match[0].decode() if (match := _CELL_META.search(whole[: whole.find(b">")])) else ""
        style = f" s={quoteattr(cell.style)}" if cell.style else ""
        attributes = f' t="array" ref="{name}"' if array else ""
        return f'<{p}c r="{name}"{style}{meta}><{p}f{attributes}>{text}</{p}f></{p}c>'.encode()

    def _formula(self, cell: RawCell, column: int, row: int) -> str:
        """The text of a formula; that of a shared one stands in the first of its cells only."""
        text = cell.formula
        if text or cell.shared not in self._shared:
            return text or ""
        at, first = self._shared[cell.shared]
        return _moved(first.formula or "", at, f"{get_column_letter(column)}{row}")

    @cached_property
    def _shared(self) -> dict[str, tuple[str, RawCell]]:
        return _shared_formulas(self.raw)

    # --- results that hold no more

    def _count(self, title: str) -> None:
        self.stale[title] = self.stale.get(title, 0) + 1

    def drop_results(self) -> None:
        """Take away the results of all formulas that may hang on what was changed."""
        if not any(edits.cells for edits in self.edits.values()):
            return
        sheets = {}
        for title in self.package.sheets:
            with suppress(InputError):  # a sheet that is a chart has no cells
                sheets[title] = self.raw if title == self.title else self.package.sheet(title)
        touched = set(self.edits[self.title].cells)
        for title in self._hanging_on(sheets):
            edits = self.edits.setdefault(title, Edits(sheets[title]))
            shared = _shared_formulas(sheets[title])
            for row in sheets[title].rows:
                for column, cell in row.cells.items():
                    if not cell.live or column in edits.cells.get(row.number, {}):
                        continue
                    alone = title == self.title and row.number not in touched
                    if not (alone and _of_one_row(*_text_and_row(cell, row.number, shared))):
                        edits.result(row.number, column, None)
                        self._count(title)

    def _hanging_on(self, sheets: Mapping[str, RawSheet]) -> list[str]:
        """The list's sheet, and those with formulas that may read it, directly or through others."""
        formulas = {title: {text for row in raw.rows for cell in row.cells.values() if (text := cell.formula)}
                    for title, raw in sheets.items()}  # fmt: skip
        found, before = {self.title}, 0
        while len(found) > before:
            before = len(found)
            names = self._names_of(found)
            found |= {title for title, texts in formulas.items() if any(_mentions(text, found, names) for text in texts)}
        return [title for title in sheets if title in found]

    def _names_of(self, titles: Collection[str]) -> set[str]:
        """Defined names that lead to one of the sheets, or to another such name."""
        names: set[str] = set()
        before = -1
        while len(names) > before:
            before = len(names)
            names |= {name.casefold() for name, text in self.package.names.items() if _mentions(text, titles, names)}
        return names

    # --- the change log

    def log(self, rows: Sequence[Sequence[str]]) -> None:
        """Add lines to the sheet "Change log", which is made where there is none."""
        if LOG_SHEET in self.package.sheets:
            self._go_on(self.package.sheet(LOG_SHEET), rows)
        else:
            self._new_sheet(rows)

    def _go_on(self, raw: RawSheet, rows: Sequence[Sequence[str]]) -> None:
        headers = {row.number: {str(cell.value): column for column, cell in reversed(row.cells.items())}
                   for row in raw.rows[:HEADER_WITHIN]}  # fmt: skip
        number = next((number for number, found in headers.items() if {*LOG_HEADERS} <= {*found}), None)
        if number is None:
            raise InputError(
                f'{self.package.path}: the sheet "{LOG_SHEET}" has no row with the headers {", ".join(LOG_HEADERS)}; put them '
                "back, or rename that sheet"
            )
        edits = self.edits.setdefault(LOG_SHEET, Edits(raw))
        filled = (row.number for row in raw.rows if any(cell.value not in (None, "") for cell in row.cells.values()))
        last = max(filled, default=number)
        model = raw.by_number[last].cells if last > number else {}
        for at, texts in enumerate(rows, last + 1):
            for header, text in zip(LOG_HEADERS, texts, strict=True):
                column = headers[number][header]
                style = model[column].style if column in model else ""
                edits.set(at, column, text, style=style)

    def _new_sheet(self, rows: Sequence[Sequence[str]]) -> None:
        """A worksheet more: its part, and its entry in the workbook, in its relations and in the list of content types."""
        package = self.package
        folder, name = posixpath.split(package.workbook)
        rels = posixpath.join(folder, "_rels", f"{name}.rels")
        taken = {*map(str.lower, package.zip.namelist())}
        number = next(n for n in range(1, 10_000) if posixpath.join(folder, f"worksheets/sheet{n}.xml").lower() not in taken)
        part = posixpath.join(folder, f"worksheets/sheet{number}.xml")
        parts = (package.workbook, rels, "[Content_Types].xml")
        book, links, types = (package.zip.read(name).decode("utf-8-sig") for name in parts)
        strict = _STRICT_MAIN in book
        ids = {*re.findall(r"""\bId=["']([^"']*)""", links)}
        link = next(f"rId{n}" for n in range(1, 10_000) if f"rId{n}" not in ids)
        numbers = [int(found) for found in re.findall(r"""\bsheetId=["'](\d+)""", book)]
        relation = _STRICT_RELATION if strict else _RELATION
        prefix = re.search(rf"""xmlns:(\w+)=["']{re.escape(relation)}["']""", book)
        if prefix is None:
            raise InputError(f"{package.path}: this workbook can't take another sheet; save it in a spreadsheet program first")
        entry = f'sheet name="{LOG_SHEET}" sheetId="{max(numbers, default=0) + 1}" {prefix[1]}:id="{link}"/>'
        self.parts[package.workbook] = _before_end(book, "sheets", entry).encode()
        relation_entry = f'Relationship Id="{link}" Type="{relation}/worksheet" Target="worksheets/sheet{number}.xml"/>'
        self.parts[rels] = _before_end(links, "Relationships", relation_entry).encode()
        override = f'Override PartName="/{part}" ContentType="{_SHEET_TYPE}"/>'
        self.parts["[Content_Types].xml"] = _before_end(types, "Types", override).encode()
        self.added[part] = _log_part(rows, _STRICT_MAIN if strict else _MAIN)

    # --- writing

    def save(self, file: BinaryIO) -> None:
        """Write the workbook with all changes."""
        changed = self.package.with_edits(self.edits)
        if self.package.workbook in self.parts:
            self.parts[self.package.workbook] = worked_out_on_load(self.parts[self.package.workbook])
        self.package.save({**changed, **{name: [data] for name, data in self.parts.items()}}, file, self.added)


def last_row(register: Reading) -> int:
    """The last row of a list that has something in a column that is understood, else its header row."""
    table = register.runways.table
    columns = [table.cells[item.position] for item in register.runways.found.values()]
    rows = zip(table.row_numbers, zip(*columns, strict=True), strict=True)
    return max((row for row, cells in rows if not all(map(is_blank, cells))), default=table.header_row)


def _shared_formulas(raw: RawSheet) -> dict[str, tuple[str, RawCell]]:
    """The first cell of each shared formula, with its name."""
    return {cell.shared: (f"{get_column_letter(column)}{row.number}", cell)
            for row in raw.rows for column, cell in row.cells.items() if cell.shared and cell.formula}  # fmt: skip


def _text_and_row(cell: RawCell, row: int, shared: Mapping[str, tuple[str, RawCell]]) -> tuple[str, int]:
    """The text of a formula, and the row for which it is written: that of the first cell where it is shared."""
    text = cell.formula or ""
    if text or cell.shared not in shared:
        return text, row
    at, first = shared[cell.shared]
    return first.formula or "", int(re.sub(r"\D", "", at))


def _moved(text: str, origin: str, to: str) -> str:
    """A formula as it reads when copied from one cell to another."""
    return str(Translator(f"={text}", origin=origin).translate_formula(to))[1:]


def _of_one_row(text: str, row: int) -> bool:
    """Whether a formula reads cells of its own row only, so that it holds while that row stays.

    >>> texts = "ROUND((B7-A7)/C7*100,1)", "SUM(B1:B7)", "B7*factor", 'IF(B7="on",$C$7,Rules!A7)'
    >>> [_of_one_row(text, 7) for text in texts]
    [True, False, False, False]
    """
    plain = _STRINGS.sub("", text)
    if not plain or any(sign in plain for sign in ":![#'{") or "indirect(" in plain.lower() or "offset(" in plain.lower():
        return False
    own = all(match[2] == str(row) and not match[1] for match in _REFERENCES.finditer(plain))
    words = _WORDS.findall(_REFERENCES.sub("", plain))
    return own and all(word.upper() in ("TRUE", "FALSE") for word in words)


def _mentions(text: str, titles: Collection[str], names: Collection[str]) -> bool:
    """Whether a formula may read one of the sheets: by title, by name, as a table, or by an address that it makes up."""
    plain = text.casefold()
    if "[" in plain or "indirect(" in plain:
        return True
    if any(f"{title.replace(chr(39), 2 * chr(39)).casefold()}{end}!" in plain for title in titles for end in ("", "'")):
        return True
    if _SPAN.search(plain):
        return True
    return any(word in names for word in re.findall(r"[^\W\d][\w.\\]*", plain))


def _before_end(xml: str, element: str, entry: str) -> str:
    """An element put in as the last one of another; it takes the prefix that the other has."""
    made, count = re.subn(rf"</((?:\w+:)?){element}\s*>", lambda match: f"<{match[1]}{entry}{match[0]}", xml, count=1)
    if not count:
        raise InputError("the workbook is damaged: a list of its parts has no end; save it in a spreadsheet program first")
    return made


def _log_part(rows: Sequence[Sequence[str]], namespace: str) -> bytes:
    """The sheet "Change log" with its first lines; texts only, whatever they begin with."""
    widths = "".join(f'<col min="{n}" max="{n}" width="{width}" customWidth="1"/>' for n, width in enumerate(LOG_WIDTHS, 1))
    lines: list[bytes] = []
    for number, texts in enumerate((LOG_HEADERS, *rows), 1):
        made = b"".join(cell_bytes(column, number, "", text) for column, text in enumerate(texts, 1))
        lines.append(f'<row r="{number}">'.encode() + made + b"</row>")
    head = (
        f'<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n<worksheet xmlns="{namespace}"><sheetViews><sheetView '
        'workbookViewId="0"><pane ySplit="1" topLeftCell="A2" activePane="bottomLeft" state="frozen"/></sheetView></sheetViews>'
        f"<cols>{widths}</cols><sheetData>"
    )
    return head.encode() + b"".join(lines) + b"</sheetData></worksheet>"
