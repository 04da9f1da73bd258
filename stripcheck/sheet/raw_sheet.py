"""A worksheet part as it stands: its rows and cells with the places of their bytes, so that some can be cut out and replaced.

The file format is that of ECMA-376 part 1 (SpreadsheetML), from memory.
"""

from __future__ import annotations

import mmap
import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from html import unescape
from sys import intern
from xml.parsers import expat

from openpyxl.utils import column_index_from_string

TAG = re.compile(rb"""<(?:[^>"']|"[^"]*"|'[^']*')*>""")
FORMULA = re.compile(rb"<(?:[\w.-]+:)?f(\s(?:[^>\"']|\"[^\"]*\"|'[^']*')*?)?(?:/>|>([^<]*)</(?:[\w.-]+:)?f\s*>)")
_CHUNK = 1 << 20  # bytes that the parser is fed at a time
_ESCAPED = re.compile("_x([0-9A-Fa-f]{4})_")

Value = float | str | bool | None


@dataclass(slots=True)
class RawCell:
    """A cell as it stands: column number from 1, the part and the place of its bytes in it, style and value.

    ``value`` is the typed value, or the last result of the formula; an error comes as its text. ``live``: it has a formula.
    ``shared`` is the number of a shared formula, whose text stands in one of its cells only.
    """

    data: mmap.mmap | bytes
    column: int
    start: int
    end: int = 0
    style: str = ""
    value: Value = None
    live: bool = False
    shared: str = ""

    @property
    def formula(self) -> str | None:
        """Text of the formula, "" where it is that of a shared one; None where there is none."""
        if not self.live:
            return None
        match = FORMULA.search(self.data, self.start, self.end)
        return unescape((match[2] or b"").decode()) if match else ""

    def whole(self) -> bytes:
        """The bytes of the cell."""
        return bytes(self.data[self.start : self.end])


@dataclass(slots=True)
class RawRow:
    """A row as it stands: its number, the places where its tag, its cells and the row end, and the cells by column."""

    number: int
    start: int
    inside: int
    stop: int = 0
    end: int = 0
    cells: dict[int, RawCell] = field(default_factory=dict)


@dataclass
class RawSheet:
    """A worksheet part: its bytes, its rows in order, and where its table of cells ends."""

    data: mmap.mmap | bytes
    rows: list[RawRow]
    stop: int
    prefix: str

    def cell(self, row: int, column: int) -> RawCell | None:
        """The cell by numbers from 1; None where there is none."""
        found = self.by_number.get(row)
        return found.cells.get(column) if found else None

    def value(self, row: int, column: int) -> Value:
        """Value of a cell by numbers from 1; None where there is none."""
        cell = self.cell(row, column)
        return cell.value if cell else None

    @cached_property
    def by_number(self) -> dict[int, RawRow]:
        """The rows by their numbers."""
        return {row.number: row for row in self.rows}


def read_sheet(data: mmap.mmap | bytes, texts: Sequence[str]) -> RawSheet:
    """Read a worksheet part; ``texts`` are the workbook's shared texts. Raises ValueError, IndexError or ExpatError for one
    that is damaged.

    >>> part = b'<worksheet><sheetData><row r="7"><c r="B7"><f>A7*2</f><v>3</v></c></row></sheetData></worksheet>'
    >>> cell = read_sheet(part, ()).rows[0].cells[2]
    >>> cell.value, cell.formula
    (3.0, 'A7*2')
    """
    return _Reader(data, texts).read()


def unescaped(text: str) -> str:
    """A text as it reads: characters that XML forbids are written as _x000D_ and so on."""
    return _ESCAPED.sub(lambda match: chr(int(match[1], 16)), text)


class _Reader:
    """Reads with expat, which tells the place of each tag."""

    def __init__(self, data: mmap.mmap | bytes, texts: Sequence[str]) -> None:
        self.data, self.texts = data, texts
        self.rows: list[RawRow] = []
        self.row: RawRow | None = None
        self.cell: RawCell | None = None
        self.kind, self.text, self.within = "", [""], ""
        self.stop, self.prefix = -1, ""
        self.columns: dict[str, int] = {}
        self.parser = expat.ParserCreate()
        self.parser.buffer_text = True
        self.parser.StartElementHandler, self.parser.EndElementHandler = self._start, self._end
        self.parser.CharacterDataHandler = self._characters
        self.parser.StartDoctypeDeclHandler = _refuse

    def read(self) -> RawSheet:
        for at in range(0, len(self.data), _CHUNK):
            self.parser.Parse(self.data[at : at + _CHUNK], False)
        self.parser.Parse(b"", True)
        if self.stop < 0:
            raise ValueError("no table of cells")
        return RawSheet(self.data, self.rows, self.stop, self.prefix)

    def _tag_end(self, at: int) -> int:
        found = TAG.match(self.data, at)
        if not found:
            raise ValueError("a tag without an end")
        return found.end()

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        prefix, _, local = name.rpartition(":")
        at = self.parser.CurrentByteIndex
        if local == "sheetData":
            self.prefix = f"{prefix}:" if prefix else ""
        elif local == "row" and self.row is None:
            self._start_row(at, attributes)
        elif local == "c" and self.row is not None:
            column = self._column(attributes.get("r", ""), self.row)
            self.cell = RawCell(self.data, column, at, style=intern(attributes.get("s", "")))
            self.kind, self.text, self.within = attributes.get("t", "n"), [], ""
        elif self.cell is None:
            return
        elif local == "f":
            self.cell.live = True
            self.cell.shared = intern(attributes.get("si", "")) if attributes.get("t") == "shared" else ""
        elif local == "rPh":  # how a text is read aloud
            self.within = "rPh"
        elif local in ("v", "t") and self.within != "rPh":
            self.within = local

    def _start_row(self, at: int, attributes: dict[str, str]) -> None:
        last = self.rows[-1].number if self.rows else 0
        number = int(attributes.get("r", last + 1))
        if number <= last:
            raise ValueError("rows that don't stand in their order")
        self.row = RawRow(number, at, self._tag_end(at))

    def _column(self, reference: str, row: RawRow) -> int:
        letters = reference.rstrip("0123456789")
        if not letters:
            return max(row.cells, default=0) + 1
        if letters not in self.columns:
            self.columns[letters] = column_index_from_string(letters)
        return self.columns[letters]

    def _characters(self, text: str) -> None:
        if self.within in ("v", "t"):
            self.text.append(text)

    def _end(self, name: str) -> None:
        local = name.rpartition(":")[2]
        at = self.parser.CurrentByteIndex
        if local == "rPh" or (local in ("v", "t") and self.within != "rPh"):
            self.within = ""
        elif local == "c" and self.cell is not None and self.row is not None:
            opened = self._tag_end(self.cell.start)
            self.cell.end = opened if self._closed(opened) else self._tag_end(at)
            self.cell.value = _value(self.kind, "".join(self.text), self.texts)
            if self.kind == "b" and self.cell.formula in ("TRUE()", "FALSE()"):  # LibreOffice keeps a typed truth so
                self.cell.live = False
            self.row.cells[self.cell.column] = self.cell
            self.cell = None
        elif local == "row" and self.row is not None:
            alone = self._closed(self.row.inside)
            self.row.end = self.row.inside if alone else self._tag_end(at)
            self.row.stop = self.row.end if alone else at
            self.rows.append(self.row)
            self.row = None
        elif local == "sheetData" and self.data[at : at + 2] == b"</":
            self.stop = at

    def _closed(self, end: int) -> bool:
        """Whether the tag that ends there also closes its element; expat then gives another place for its end."""
        return bool(self.data[end - 2 : end] == b"/>")


def _refuse(*_: object) -> None:
    raise ValueError("a part of a workbook has no document type")


def _value(kind: str, text: str, texts: Sequence[str]) -> Value:
    if kind == "s":
        return texts[int(text)] if text else None
    if kind in ("str", "inlineStr", "e", "d"):
        return intern(unescaped(text))
    if kind == "b":
        return text.strip() == "1" if text.strip() else None
    return float(text) if text.strip() else None
