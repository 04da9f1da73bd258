"""An .xlsx file as its parts, so that some cells can be changed and all the rest stays byte for byte as it is.

A load and save by openpyxl loses much that a user may have put into a workbook: sparklines, text boxes, rich text, pictures,
macros. Here a sheet is read with the places of its rows and cells in the part's own bytes; what is changed is cut out and
replaced, and every other part of the zip is copied.

The file format is that of ECMA-376 part 1 (SpreadsheetML) and part 2 (packages), from memory.
"""

from __future__ import annotations

import math
import mmap
import posixpath
import re
import shutil
import tempfile
import zipfile
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path
from typing import BinaryIO
from xml.etree import ElementTree
from xml.parsers import expat
from xml.sax.saxutils import escape, quoteattr

from openpyxl.utils import column_index_from_string, get_column_letter

from stripcheck.errors import InputError

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
RELATION = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
# strict files name the same things by other addresses
_STRICT = {"http://purl.oclc.org/ooxml/spreadsheetml/main": MAIN,
           "http://purl.oclc.org/ooxml/officeDocument/relationships": RELATION}  # fmt: skip
_TAG = re.compile(rb"""<(?:[^>"']|"[^"]*"|'[^']*')*>""")
_REFERENCE = re.compile(r"(?:'((?:[^']|'')+)'|([^'!:()]+))!\$?([A-Z]+)\$?(\d+)")
_TYPE = re.compile(rb"""\st=(?:"[^"]*"|'[^']*')""")
_RESULT = re.compile(rb"<(?:\w+:)?v(?:\s[^>]*)?(?:/>|>[^<]*</(?:\w+:)?v>)")
_CHUNK = 1 << 20  # bytes that the parser is fed at a time
_ESCAPED = re.compile("_x([0-9A-Fa-f]{4})_")

Value = float | str | bool | None


@dataclass
class RawCell:
    """A cell as it stands: column number from 1, place of its bytes in the part, style, and its value and formula.

    ``value`` is the typed value or the last result of ``formula``; ``shared`` the number of a shared formula, whose text
    stands in one of its cells only; an error comes as its text.
    """

    column: int
    start: int
    end: int
    style: str = ""
    value: Value = None
    formula: str | None = None
    shared: str = ""


@dataclass
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

    def value(self, row: int, column: int) -> Value:
        """Value of a cell by numbers from 1; None where there is none."""
        found = self.by_number.get(row)
        cell = found.cells.get(column) if found else None
        return cell.value if cell else None

    @cached_property
    def by_number(self) -> dict[int, RawRow]:
        """The rows by their numbers."""
        return {row.number: row for row in self.rows}


class Package:
    """An open .xlsx file: its worksheets by title, defined names, and cells; nothing is written but by `save`."""

    def __init__(self, path: Path) -> None:
        self.path = path
        try:
            self.zip = zipfile.ZipFile(path)
            self.workbook = self._workbook_part()
            root = self._root(self.workbook)
        except (OSError, zipfile.BadZipFile, KeyError, ElementTree.ParseError, IndexError) as error:
            raise InputError(f"{path}: this is no workbook that can be read; an .xlsx file is expected") from error
        targets = self._targets(self.workbook)
        sheets = root.find(f"{{{MAIN}}}sheets")
        self.sheets = {
            sheet.get("name", ""): targets.get(sheet.get(f"{{{RELATION}}}id", ""), "")
            for sheet in (sheets if sheets is not None else ())
        }
        names = root.find(f"{{{MAIN}}}definedNames")
        whole = [name for name in (names if names is not None else ()) if name.get("localSheetId") is None]
        self.names = {name.get("name", ""): name.text or "" for name in whole}
        self._texts: list[str] | None = None

    def close(self) -> None:
        """Let the file go."""
        self.zip.close()

    def __enter__(self) -> Package:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def sheet(self, title: str) -> RawSheet:
        """The cells of a worksheet. Raises InputError where there is none of that title, or it can't be read."""
        part = self.sheets.get(title, "")
        if part not in self.zip.namelist():
            raise InputError(f'{self.path}: there is no sheet "{title}"')
        try:
            return _Reader(_in_memory(self.zip, part), self.texts).read()
        except (expat.ExpatError, ValueError, zipfile.BadZipFile) as error:
            raise InputError(f'{self.path}: the sheet "{title}" can\'t be read: the file is damaged') from error

    @property
    def texts(self) -> list[str]:
        """The shared texts, plain."""
        if self._texts is None:
            part = next((part for part in self._targets(self.workbook).values() if part.endswith("sharedStrings.xml")), "")
            root = self._root(part) if part in self.zip.namelist() else ()
            self._texts = [_plain_text(item) for item in root]
        return self._texts

    def save(self, changed: Mapping[str, Iterable[bytes]], file: BinaryIO, added: Mapping[str, bytes] | None = None) -> None:
        """Write the package anew: the parts of ``changed`` from pieces of bytes, every other part as it is, those of ``added``
        last."""
        with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, allowZip64=True) as target:
            for info in self.zip.infolist():
                fresh = zipfile.ZipInfo(info.filename, info.date_time)
                fresh.compress_type, fresh.external_attr = zipfile.ZIP_DEFLATED, info.external_attr
                large = max(info.file_size * 2, 1) > 2**31 - 1
                with target.open(fresh, "w", force_zip64=large) as out:
                    if info.filename in changed:
                        for piece in changed[info.filename]:
                            out.write(piece)
                    else:
                        with self.zip.open(info) as source:
                            shutil.copyfileobj(source, out)
            for name, data in (added or {}).items():
                target.writestr(name, data)

    def _root(self, part: str) -> ElementTree.Element:
        root = ElementTree.fromstring(self.zip.read(part))
        for element in root.iter():
            element.tag = _usual(element.tag)
            for key in [key for key in element.attrib if _usual(key) != key]:
                element.attrib[_usual(key)] = element.attrib.pop(key)
        return root

    def _workbook_part(self) -> str:
        return next(target for target in self._targets("").values() if posixpath.basename(target).startswith("workbook"))

    def _targets(self, part: str) -> dict[str, str]:
        """Parts that a part is related to, by the number of the relation; nothing outside of the file."""
        folder, name = posixpath.split(part)
        rels = posixpath.join(folder, "_rels", f"{name}.rels")
        found = {}
        for relation in ElementTree.fromstring(self.zip.read(rels)):
            target = relation.get("Target", "")
            if relation.get("TargetMode") != "External":
                whole = target.lstrip("/") if target.startswith("/") else posixpath.normpath(posixpath.join(folder, target))
                found[relation.get("Id", "")] = whole
        return found


def _usual(name: str) -> str:
    address, _, local = name[1:].partition("}") if name.startswith("{") else ("", "", name)
    return f"{{{_STRICT[address]}}}{local}" if address in _STRICT else name


def _plain_text(item: ElementTree.Element) -> str:
    """The text of a shared or inline string: its own or its runs', without what is only read aloud."""
    parts = [run.text or "" for run in item.iter(f"{{{MAIN}}}t")]
    aloud = [run.text or "" for reading in item.iter(f"{{{MAIN}}}rPh") for run in reading.iter(f"{{{MAIN}}}t")]
    text = "".join(parts)
    return unescaped(text[: len(text) - len("".join(aloud))] if aloud else text)


def unescaped(text: str) -> str:
    """A text as it reads: characters that XML forbids are written as _x000D_ and so on."""
    return _ESCAPED.sub(lambda match: chr(int(match[1], 16)), text)


def _in_memory(package: zipfile.ZipFile, part: str) -> mmap.mmap | bytes:
    """The bytes of a part, on disk where there are many."""
    size = package.getinfo(part).file_size
    if size < 50_000_000:
        return package.read(part)
    with tempfile.TemporaryFile() as file, package.open(part) as source:
        shutil.copyfileobj(source, file)
        file.flush()
        return mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ)


class _Reader:
    """Reads one worksheet part with expat, which tells the place of each tag."""

    def __init__(self, data: mmap.mmap | bytes, texts: Sequence[str]) -> None:
        self.data, self.texts = data, texts
        self.rows: list[RawRow] = []
        self.row: RawRow | None = None
        self.cell: RawCell | None = None
        self.kind, self.text, self.within = "", [""], ""
        self.stop, self.prefix, self.last_row = -1, "", 0
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
        found = _TAG.match(self.data, at)
        if not found:
            raise ValueError("a tag without an end")
        return found.end()

    def _start(self, name: str, attributes: dict[str, str]) -> None:
        prefix, _, local = name.rpartition(":")
        at = self.parser.CurrentByteIndex
        if local == "row" and self.row is None:
            self.last_row = int(attributes.get("r", self.last_row + 1))
            self.row = RawRow(self.last_row, at, self._tag_end(at))
            self.prefix = f"{prefix}:" if prefix else ""
        elif local == "c" and self.row is not None:
            column = _column(attributes.get("r", ""), self.row)
            self.cell = RawCell(column, at, 0, attributes.get("s", ""))
            self.kind = attributes.get("t", "n")
            self.text = []
        elif local == "f" and self.cell is not None:
            self.cell.shared = attributes.get("si", "") if attributes.get("t") == "shared" else ""
            self.within, self.text = "f", []
        elif local in ("v", "t") and self.cell is not None and self.within not in ("rPh",):
            self.within = local
            self.text = [] if local == "v" else self.text
        elif local == "rPh" and self.cell is not None:
            self.within = "rPh"
        elif local == "sheetData":
            self.prefix = f"{prefix}:" if prefix else ""

    def _characters(self, text: str) -> None:
        if self.within in ("f", "v", "t"):
            self.text.append(text)

    def _end(self, name: str) -> None:
        local = name.rpartition(":")[2]
        at = self.parser.CurrentByteIndex
        if local == "f" and self.cell is not None:
            self.cell.formula, self.text, self.within = "".join(self.text), [], ""
        elif local in ("v", "t") and self.cell is not None:
            self.within = "" if self.within != "rPh" else self.within
        elif local == "rPh":
            self.within = ""
        elif local == "c" and self.cell is not None and self.row is not None:
            opened = self._tag_end(self.cell.start)
            self.cell.end = opened if self._closed(opened) else self._tag_end(at)
            self.cell.value = _value(self.kind, "".join(self.text), self.texts)
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


def _column(reference: str, row: RawRow) -> int:
    letters = reference.rstrip("0123456789")
    return column_index_from_string(letters) if letters else max(row.cells, default=0) + 1


def _value(kind: str, text: str, texts: Sequence[str]) -> Value:
    if kind == "s":
        return texts[int(text)] if text else None
    if kind in ("str", "inlineStr", "e", "d"):
        return unescaped(text)
    if kind == "b":
        return text.strip() == "1"
    return float(text) if text.strip() else None


def cell_of(reference: str) -> tuple[str, int, int] | None:
    """Sheet title, row and column that an absolute reference to one cell stands for; None for anything else.

    >>> cell_of("'Day'!$D$6")
    ('Day', 6, 4)
    """
    match = _REFERENCE.fullmatch(reference)
    if not match:
        return None
    title = match[1].replace("''", "'") if match[1] is not None else match[2]
    return title, int(match[4]), column_index_from_string(match[3])


def cell_bytes(column: int, row: int, style: str, value: Value, formula: str | None = None, prefix: str = "") -> bytes:
    """A cell as it is written: a formula with its value, or a typed value. NaN and "" give an empty cell, or result.

    >>> cell_bytes(2, 7, "4", 1.5, "A7/2")
    b'<c r="B7" s="4"><f>A7/2</f><v>1.5</v></c>'
    """
    kind, text = _as_text(value)
    styled = f" s={quoteattr(style)}" if style else ""
    p, head = prefix, f'<{prefix}c r="{get_column_letter(column)}{row}"{styled}'
    if formula is not None:
        typed = ' t="str"' if kind == "str" else ' t="b"' if kind == "b" else ""
        return f"{head}{typed}><{p}f>{escape(formula)}</{p}f><{p}v>{escape(text)}</{p}v></{p}c>".encode()
    if not text:
        return f"{head}/>".encode()
    if kind == "str":
        return f'{head} t="inlineStr"><{p}is><{p}t xml:space="preserve">{escape(text)}</{p}t></{p}is></{p}c>'.encode()
    typed = ' t="b"' if kind == "b" else ""
    return f"{head}{typed}><{p}v>{text}</{p}v></{p}c>".encode()


def _as_text(value: Value) -> tuple[str, str]:
    if isinstance(value, bool):
        return "b", str(int(value))
    if isinstance(value, int | float):
        return ("str", "") if math.isnan(value) else ("n", repr(float(value)) if value != int(value) else str(int(value)))
    return "str", value or ""


class Edits:
    """Changes to one worksheet part, gathered and then applied in the order of its bytes."""

    def __init__(self, sheet: RawSheet) -> None:
        self.sheet = sheet
        self.cells: dict[int, dict[int, bytes]] = {}

    def set(self, row: int, column: int, value: Value, formula: str | None = None, style: str | None = None) -> None:
        """Put a value, or a formula with its value, into a cell by numbers from 1; it keeps its style unless told another."""
        found = self.sheet.by_number.get(row)
        own = found.cells.get(column) if found else None
        kept = own.style if own is not None and style is None else style or ""
        self.cells.setdefault(row, {})[column] = cell_bytes(column, row, kept, value, formula, self.sheet.prefix)

    def result(self, row: int, column: int, value: Value) -> None:
        """Put the result that a formula has now beside it; the formula, of whatever kind, and the style stay.

        None leaves no result: the next program to open the file works it out. Without such a cell nothing happens.
        """
        found = self.sheet.by_number.get(row)
        cell = found.cells.get(column) if found else None
        if cell is None:
            return
        whole = bytes(self.sheet.data[cell.start : cell.end])
        tag = _TAG.match(whole)
        if tag is None or tag[0].endswith(b"/>"):
            return
        kind, text = _as_text(value)
        typed = {"str": b' t="str"', "b": b' t="b"'}.get(kind, b"")
        head = _TYPE.sub(b"", tag[0][:-1]) + typed + b">"
        body, closing = _RESULT.sub(b"", whole[tag.end() :]).rsplit(b"</", 1)
        p = self.sheet.prefix.encode()
        shown = b"" if value is None else b"<%bv>%b</%bv>" % (p, escape(text).encode(), p)
        self.cells.setdefault(row, {})[column] = head + body + shown + b"</" + closing

    def pieces(self) -> Iterator[bytes]:
        """The part with the changes, piece by piece."""
        at = 0
        for start, end, fresh in sorted(self._cuts(), key=lambda cut: cut[:2]):  # what is put in comes before what is replaced
            yield self.sheet.data[at:start]
            yield fresh
            at = end
        yield self.sheet.data[at:]

    def _cuts(self) -> Iterator[tuple[int, int, bytes]]:
        """Places of the part and what comes there instead."""
        for number, cells in sorted(self.cells.items()):
            row = self.sheet.by_number.get(number)
            if row is None:
                yield self._new_row(number, cells)
            elif row.stop == row.end:  # a tag alone, without cells so far
                opened = bytes(self.sheet.data[row.start : row.inside])[:-2].rstrip() + b">"
                body = b"".join(cells[column] for column in sorted(cells))
                yield row.start, row.end, opened + body + f"</{self.sheet.prefix}row>".encode()
            else:
                yield from self._in_row(row, cells)

    def _in_row(self, row: RawRow, cells: Mapping[int, bytes]) -> Iterator[tuple[int, int, bytes]]:
        inserted: dict[int, bytes] = {}
        for column in sorted(cells):
            own = row.cells.get(column)
            if own is not None:
                yield own.start, own.end, cells[column]
                continue
            following = min((other for other in row.cells if other > column), default=None)
            place = row.cells[following].start if following else row.stop
            inserted[place] = inserted.get(place, b"") + cells[column]
        for place, fresh in inserted.items():
            yield place, place, fresh

    def _new_row(self, number: int, cells: Mapping[int, bytes]) -> tuple[int, int, bytes]:
        p, following = self.sheet.prefix, next((row for row in self.sheet.rows if row.number > number), None)
        body = b"".join(cells[column] for column in sorted(cells))
        place = following.start if following else self.sheet.stop
        return place, place, f'<{p}row r="{number}">'.encode() + body + f"</{p}row>".encode()
