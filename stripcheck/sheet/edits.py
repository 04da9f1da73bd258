"""Changes to some cells of a worksheet part; all the rest of it stays byte for byte as it is.

The file format is that of ECMA-376 part 1 (SpreadsheetML), from memory.
"""

from __future__ import annotations

import math
import re
from bisect import bisect_right
from collections.abc import Collection, Iterator
from mmap import mmap
from typing import NamedTuple
from xml.sax.saxutils import escape, quoteattr

from openpyxl.formula.translate import Translator
from openpyxl.utils import get_column_letter, range_boundaries

from stripcheck.sheet.raw_sheet import FORMULA, TAG, RawCell, RawRow, RawSheet, Value
from stripcheck.sheet.stream import ROW, xml_texts

_TYPE = re.compile(rb"""\st=(?:"[^"]*"|'[^']*')""")
_RESULT = re.compile(rb"<(?:[\w.-]+:)?v(?:\s[^>]*)?(?:/>|>[^<]*</(?:[\w.-]+:)?v\s*>)")
_SPANS = re.compile(rb"""\sspans=(?:"[^"]*"|'[^']*')""")
_DIMENSION = re.compile(rb"""(<(?:[\w.-]+:)?dimension\s[^>]*?ref=["'])([A-Z0-9:]+)""")
_ATTRIBUTE = re.compile(rb"""([\w:.-]+)\s*=\s*(?:"([^"]*)"|'([^']*)')""")
_RANGES = re.compile(rb"<(?:[\w.-]+:)?(autoFilter|conditionalFormatting|dataValidation)\s")
_AREA = re.compile("[A-Z]+[0-9]+:[A-Z]+[0-9]+")
_BLOCK = 1 << 20  # bytes that are handed on at a time

Cut = tuple[int, int, bytes]  # from, to, and what comes there instead


class Fresh(NamedTuple):
    """What a cell will hold: a value, or a formula (with ``ROW`` for its row) and its result, and the style."""

    value: Value
    formula: str | None
    style: str


class Result(NamedTuple):
    """The result that will stand beside a formula, which stays."""

    value: Value


class Growth(NamedTuple):
    """Rows that were added below a table: its first row, the last one before, the last one now, and its columns."""

    first: int
    before: int
    now: int
    columns: Collection[int]


def cell_bytes(column: int, row: int, style: str, value: Value, formula: str | None = None, prefix: str = "") -> bytes:
    """A cell as it is written: a formula with its value, or a typed value. NaN and "" give an empty cell, or result.

    >>> cell_bytes(2, 7, "4", 1.5, "A7/2")
    b'<c r="B7" s="4"><f>A7/2</f><v>1.5</v></c>'
    """
    kind, text = _as_text(value)
    styled = f" s={quoteattr(style)}" if style else ""
    p, head = prefix.encode(), f'<{prefix}c r="{get_column_letter(column)}{row}"{styled}'.encode()
    typed = _typed(kind)
    if formula is not None:
        return b"%b%b><%bf>%b</%bf><%bv>%b</%bv></%bc>" % (head, typed, p, escape(formula).encode(), p, p, text, p, p)
    if not text:
        return head + b"/>"
    if kind == "str":
        return b'%b t="inlineStr"><%bis><%bt xml:space="preserve">%b</%bt></%bis></%bc>' % (head, p, p, text, p, p, p)
    return b"%b%b><%bv>%b</%bv></%bc>" % (head, typed, p, text, p, p)


def _typed(kind: str) -> bytes:
    return {"str": b' t="str"', "b": b' t="b"'}.get(kind, b"")


def _as_text(value: Value) -> tuple[str, bytes]:
    """Kind of cell, and the value as it stands there."""
    if isinstance(value, bool):
        return "b", b"1" if value else b"0"
    if isinstance(value, int | float):
        return ("str", b"") if math.isnan(value) else ("n", repr(value + 0.0).encode())
    return "str", xml_texts([value or ""])[0]


class Edits:
    """Changes to one worksheet part, gathered and then applied in the order of its bytes."""

    def __init__(self, sheet: RawSheet) -> None:
        self.sheet = sheet
        self.cells: dict[int, dict[int, bytes | Fresh | Result]] = {}
        self.growth: Growth | None = None
        self._formulas: dict[str, list[bytes]] = {}

    def set(self, row: int, column: int, value: Value, formula: str | None = None, style: str | None = None) -> None:
        """Put a value, or a formula with its value, into a cell by numbers from 1; it keeps its style unless told another.

        ``formula`` may have ``ROW`` for its row.
        """
        own = self.sheet.cell(row, column)
        kept = own.style if own is not None and style is None else style or ""
        self.cells.setdefault(row, {})[column] = Fresh(value, formula, kept)

    def result(self, row: int, column: int, value: Value) -> None:
        """Put the result that a formula has now beside it; the formula, of whatever kind, and the style stay.

        None leaves no result: the next program to open the file works it out. Without such a cell nothing happens.
        """
        own = self.sheet.cell(row, column)
        if own is not None and own.live:
            self.cells.setdefault(row, {})[column] = Result(value)

    def grow(self, growth: Growth) -> None:
        """Let the ranges of conditional formats, drop-downs and the filter that covered a table cover its new rows too."""
        self.growth = growth

    @property
    def formulas_gone(self) -> list[tuple[int, int]]:
        """Row and column of each cell that had a formula and will have none."""
        return [(row, column) for row, cells in self.cells.items() for column, edit in cells.items()
                if isinstance(edit, Fresh) and edit.formula is None
                and (own := self.sheet.cell(row, column)) is not None and own.live]  # fmt: skip

    def pieces(self) -> Iterator[bytes]:
        """The part with the changes, piece by piece."""
        self._free_dependents()
        gathered: list[bytes] = []
        size = 0
        for piece in self._small_pieces():
            gathered.append(piece)
            size += len(piece)
            if size > _BLOCK:
                yield b"".join(gathered)
                gathered, size = [], 0
        yield b"".join(gathered)

    def _small_pieces(self) -> Iterator[bytes]:
        data, at = self.sheet.data, 0
        for start, end, fresh in self._cuts():
            yield from _blocks(data, at, start)
            yield fresh
            at = end
        yield from _blocks(data, at, len(data))

    def _cuts(self) -> Iterator[Cut]:
        yield from self._head()
        numbers = [row.number for row in self.sheet.rows]
        for number in sorted(self.cells):
            row = self.sheet.by_number.get(number)
            if row is None:
                following = bisect_right(numbers, number)
                place = self.sheet.rows[following].start if following < len(numbers) else self.sheet.stop
                yield place, place, self._new_row(number)
            else:
                yield from sorted(self._in_row(row), key=lambda cut: cut[:2])  # put in comes before what is replaced
        yield from self._tail()

    # --- the ranges before and after the cells

    def _head(self) -> Iterator[Cut]:
        """The sheet's dimension, where cells are put beyond it."""
        end = self.sheet.rows[0].start if self.sheet.rows else self.sheet.stop
        found = _DIMENSION.search(self.sheet.data, 0, end)
        if found is None or not self.cells:
            return
        left, top, right, bottom = range_boundaries(found[2].decode())
        columns = {column for cells in self.cells.values() for column in cells}
        left, right = min(left, *columns), max(right, *columns)
        whole = _area(left, min(top, *self.cells), right, max(bottom, *self.cells))
        yield found.start(2), found.end(2), whole.encode()

    def _tail(self) -> Iterator[Cut]:
        if self.growth is None:
            return
        data = self.sheet.data
        for opening in _RANGES.finditer(data, self.sheet.stop):
            tag = TAG.match(data, opening.start())
            for part in _ATTRIBUTE.finditer(data, opening.end(), tag.end() if tag else opening.end()):
                if part[1] in (b"ref", b"sqref"):
                    group = 2 if part[2] is not None else 3
                    areas = [self._grown(area, opening[1] == b"autoFilter") for area in part[group].decode().split()]
                    yield part.start(group), part.end(group), " ".join(areas).encode()

    def _grown(self, area: str, is_filter: bool) -> str:
        growth = self.growth
        if growth is None or not _AREA.fullmatch(area):
            return area
        left, top, right, bottom = range_boundaries(area)
        ours = is_filter or all(column in growth.columns for column in range(left, right + 1))
        covers = top <= growth.first and growth.before <= bottom < growth.now
        return _area(left, top, right, growth.now) if ours and covers else area

    # --- the cells

    def _in_row(self, row: RawRow) -> Iterator[Cut]:
        cells = self.cells[row.number]
        if row.stop == row.end:  # a tag alone, without cells so far
            opened = _without_spans(self.sheet.data[row.start : row.inside][:-2].rstrip() + b">")
            yield row.start, row.end, opened + self._joined(row.number) + f"</{self.sheet.prefix}row>".encode()
            return
        others = sorted(row.cells)
        put_in: dict[int, list[bytes]] = {}
        for column in sorted(cells):
            own = row.cells.get(column)
            if own is not None:
                yield own.start, own.end, self._cell(row.number, column)
            else:
                following = bisect_right(others, column)
                place = row.cells[others[following]].start if following < len(others) else row.stop
                put_in.setdefault(place, []).append(self._cell(row.number, column))
        for place, fresh in put_in.items():
            yield place, place, b"".join(fresh)
        if put_in:
            yield row.start, row.inside, _without_spans(self.sheet.data[row.start : row.inside])

    def _new_row(self, number: int) -> bytes:
        p = self.sheet.prefix
        return f'<{p}row r="{number}">'.encode() + self._joined(number) + f"</{p}row>".encode()

    def _joined(self, number: int) -> bytes:
        return b"".join(self._cell(number, column) for column in sorted(self.cells[number]))

    def _cell(self, row: int, column: int) -> bytes:
        edit = self.cells[row][column]
        if isinstance(edit, Fresh):
            return self._fresh(row, column, edit)
        if isinstance(edit, Result):
            own = self.sheet.cell(row, column)
            return b"" if own is None else self._with_result(own.whole(), edit.value)
        return edit

    def _fresh(self, row: int, column: int, edit: Fresh) -> bytes:
        if edit.formula is None or ROW not in edit.formula:
            return cell_bytes(column, row, edit.style, edit.value, edit.formula, self.sheet.prefix)
        if edit.formula not in self._formulas:  # one for a whole column
            self._formulas[edit.formula] = [escape(part).encode() for part in edit.formula.split(ROW)]
        whole = cell_bytes(column, row, edit.style, edit.value, "\x02", self.sheet.prefix)
        return whole.replace(b"\x02", str(row).encode().join(self._formulas[edit.formula]), 1)

    def _with_result(self, whole: bytes, value: Value) -> bytes:
        tag = TAG.match(whole)
        if tag is None:
            return whole
        kind, text = _as_text(value)
        head = _TYPE.sub(b"", tag[0][:-1]) + (b"" if value is None else _typed(kind)) + b">"
        body, closing = _RESULT.sub(b"", whole[tag.end() :]).rsplit(b"</", 1)
        p = self.sheet.prefix.encode()
        shown = b"" if value is None else b"<%bv>%b</%bv>" % (p, text, p)
        return head + body + shown + b"</" + closing

    # --- shared formulas

    def _free_dependents(self) -> None:
        """Cells that share the formula of one that is replaced get its text for themselves."""
        sharing = [(row.number, cell) for row in self.sheet.rows for cell in row.cells.values() if cell.shared]
        texts = {cell.shared: (number, cell, text) for number, cell in sharing if (text := cell.formula)}
        for number, cell in sharing:
            at, first, text = texts.get(cell.shared, (number, cell, ""))
            if self._is_replaced(at, first) and not self._is_replaced(number, cell) and text:
                own = self._cell(number, cell.column) if cell.column in self.cells.get(number, {}) else cell.whole()
                moved = Translator(f"={text}", _name(at, first)).translate_formula(_name(number, cell))[1:]
                p = self.sheet.prefix
                plain = f"<{p}f>{escape(moved)}</{p}f>".encode()
                self.cells.setdefault(number, {})[cell.column] = _with_formula(own, plain)

    def _is_replaced(self, row: int, cell: RawCell) -> bool:
        edit = self.cells.get(row, {}).get(cell.column)
        return edit is not None and not isinstance(edit, Result)


def _with_formula(cell: bytes, formula: bytes) -> bytes:
    found = FORMULA.search(cell)
    return cell if found is None else cell[: found.start()] + formula + cell[found.end() :]


def _name(row: int, cell: RawCell) -> str:
    return f"{get_column_letter(cell.column)}{row}"


def _area(left: int, top: int, right: int, bottom: int) -> str:
    first, last = f"{get_column_letter(left)}{top}", f"{get_column_letter(right)}{bottom}"
    return first if first == last else f"{first}:{last}"


def _without_spans(tag: bytes) -> bytes:
    """A row's tag without its hint which columns are used, which cells put in make wrong."""
    return _SPANS.sub(b"", tag)


def _blocks(data: mmap | bytes, start: int, end: int) -> Iterator[bytes]:
    for at in range(start, end, _BLOCK):
        yield data[at : min(at + _BLOCK, end)]
