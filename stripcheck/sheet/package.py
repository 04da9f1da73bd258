"""An .xlsx file as its parts, so that some cells can be changed and all the rest stays byte for byte as it is.

A load and save by openpyxl loses much that a user may have put into a workbook: sparklines, text boxes, rich text, pictures,
macros. Here a sheet is read with the places of its rows and cells in the part's own bytes; what is changed is cut out and
replaced, and every other part of the zip is copied.

The file format is that of ECMA-376 part 1 (SpreadsheetML) and part 2 (packages), from memory.
"""

from __future__ import annotations

import mmap
import posixpath
import re
import shutil
import tempfile
import zipfile
import zlib
from collections.abc import Collection, Iterable, Mapping
from functools import cached_property
from pathlib import Path
from typing import BinaryIO
from xml.etree import ElementTree
from xml.parsers import expat

from openpyxl.utils import column_index_from_string, get_column_letter

from stripcheck.errors import InputError
from stripcheck.register.safe_read import check_workbook
from stripcheck.sheet.edits import Edits
from stripcheck.sheet.raw_sheet import RawSheet, read_sheet, unescaped

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
RELATION = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
# strict files name the same things by other addresses
_STRICT = {"http://purl.oclc.org/ooxml/spreadsheetml/main": MAIN,
           "http://purl.oclc.org/ooxml/officeDocument/relationships": RELATION}  # fmt: skip
_REFERENCE = re.compile(r"(?:'((?:[^']|'')+)'|([^'!:()]+))!\$?([A-Z]+)\$?(\d+)")
_CHAIN = "calcChain.xml"  # the order in which a program works the formulas out
_CHAIN_CELL = re.compile(rb"<(?:[\w.-]+:)?c\s[^>]*?/>")
_CHAIN_PART = re.compile(rb"""\b([ri])=["']([^"']*)["']""")
_CALCULATION = re.compile(rb"<(?:[\w.-]+:)?calcPr\b[^>]*>")
_BEFORE_IT = re.compile(rb"</((?:[\w.-]+:)?)(?:sheets|functionGroups|externalReferences|definedNames)\s*>")
_ON_LOAD = re.compile(rb"""\sfullCalcOnLoad=["']([^"']*)["']""")
_LEVEL = 1  # of deflate: higher ones take longer and gain little, since rows are so alike
_IN_MEMORY = 50_000_000  # [bytes] up to which a part is held in memory


class Package:
    """An open .xlsx file: its worksheets by title, defined names, and cells; nothing is written but by `save`.

    Raises InputError for a file that is no workbook, damaged or beyond the limits of ``stripcheck.register.safe_read``.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        try:
            check_workbook(path)
            self.zip = zipfile.ZipFile(path)
            self.workbook = self._workbook_part()
            root, targets = self._root(self.workbook), self._targets(self.workbook)
        except (OSError, zipfile.BadZipFile, KeyError, ElementTree.ParseError) as error:
            why = f" ({error.strerror})" if isinstance(error, OSError) and error.strerror else ""
            raise InputError(f"{path}: this is no workbook that can be read{why}; an .xlsx file is expected") from error
        sheets = root.find(f"{{{MAIN}}}sheets")
        listed = list(sheets) if sheets is not None else []
        self.sheets = {sheet.get("name", ""): targets.get(sheet.get(f"{{{RELATION}}}id", ""), "") for sheet in listed}
        self._ids = {sheet.get("name", ""): sheet.get("sheetId", "") for sheet in listed}
        names = root.find(f"{{{MAIN}}}definedNames")
        whole = [name for name in (names if names is not None else ()) if name.get("localSheetId") is None]
        self.names = {name.get("name", ""): name.text or "" for name in whole}

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
            return read_sheet(_held(self.zip, part), self.texts)
        except (expat.ExpatError, ElementTree.ParseError, ValueError, IndexError, zipfile.BadZipFile, zlib.error) as error:
            raise InputError(f'{self.path}: the sheet "{title}" can\'t be read: the file is damaged') from error
        except OSError as error:
            why = error.strerror or str(error)
            raise InputError(f'{self.path}: the sheet "{title}" can\'t be read ({why}); check the space on the disk') from error

    @cached_property
    def texts(self) -> list[str]:
        """The shared texts, plain."""
        part = next((part for part in self._targets(self.workbook).values() if part.endswith("sharedStrings.xml")), "")
        return [_plain_text(item) for item in self._root(part)] if part in self.zip.namelist() else []

    def is_named(self, name: str, cells: str) -> bool:
        """Whether a name stands for these cells; some programs put quotes round every sheet's title, others where they must."""
        return self.names.get(name, "").replace("'", "") == cells.replace("'", "")

    def save(self, changed: Mapping[str, Iterable[bytes]], file: BinaryIO, added: Mapping[str, bytes] | None = None) -> None:
        """Write the package anew: the parts of ``changed`` from pieces of bytes, every other part as it is, those of ``added``
        last."""
        with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, allowZip64=True, compresslevel=_LEVEL) as target:
            for info in self.zip.infolist():
                large = info.file_size * 2 > 2**31 - 1
                with target.open(info.filename, "w", force_zip64=large) as out:
                    if info.filename in changed:
                        for piece in changed[info.filename]:
                            out.write(piece)
                    else:
                        with self.zip.open(info) as source:
                            shutil.copyfileobj(source, out)
            for name, data in (added or {}).items():
                target.writestr(name, data)

    def with_edits(self, edits: Mapping[str, Edits]) -> dict[str, Iterable[bytes]]:
        """The parts that change with some edits, by the titles of their sheets: what `save` takes.

        Besides the sheets there may be two: the workbook's order to work all formulas out when it is opened, so that a
        user's own formulas don't go on showing what held before; and the order of calculation, which must not name a cell
        that has no formula any more.
        """
        made: dict[str, Iterable[bytes]] = {self.sheets[title]: one.pieces() for title, one in edits.items() if one.cells}
        if made:
            whole = self.zip.read(self.workbook)
            fresh = worked_out_on_load(whole)
            made |= {self.workbook: [fresh]} if fresh != whole else {}
        gone = {self._ids[title]: {f"{get_column_letter(column)}{row}" for row, column in one.formulas_gone}
                for title, one in edits.items()}  # fmt: skip
        return {**made, **self._shorter_chain(gone)}

    def _shorter_chain(self, gone: Mapping[str, Collection[str]]) -> dict[str, Iterable[bytes]]:
        part = next((part for part in self._targets(self.workbook).values() if part.endswith(_CHAIN)), "")
        if part not in self.zip.namelist() or not any(gone.values()):
            return {}
        whole, at, sheet, pieces = self.zip.read(part), 0, "", []
        for entry in _CHAIN_CELL.finditer(whole):
            told = {key.decode(): value.decode() for key, value in _CHAIN_PART.findall(entry[0])}
            before, sheet = sheet, told.get("i", sheet)  # an entry without a sheet's number is of the sheet before
            pieces.append(whole[at : entry.start()])
            at = entry.end()
            if told.get("r", "") not in gone.get(sheet, ()):
                named = entry[0] if "i" in told or not before else entry[0][:-2].rstrip() + f' i="{sheet}"/>'.encode()
                pieces.append(named)
        return {part: [*pieces, whole[at:]]}

    def _root(self, part: str) -> ElementTree.Element:
        root = ElementTree.fromstring(self.zip.read(part))
        for element in root.iter():
            element.tag = _usual(element.tag)
            for key in [key for key in element.attrib if _usual(key) != key]:
                element.attrib[_usual(key)] = element.attrib.pop(key)
        return root

    def _workbook_part(self) -> str:
        targets = self._targets("").values()
        part = next((part for part in targets if posixpath.basename(part).lower() == "workbook.xml"), "")
        if part not in self.zip.namelist():
            raise KeyError(part)
        return part

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
    """The text of a shared string: its own or its runs', without what is only read aloud."""
    aloud = {run for reading in item.iter(f"{{{MAIN}}}rPh") for run in reading.iter(f"{{{MAIN}}}t")}
    return unescaped("".join(run.text or "" for run in item.iter(f"{{{MAIN}}}t") if run not in aloud))


def _held(package: zipfile.ZipFile, part: str) -> mmap.mmap | bytes:
    """The bytes of a part, on disk where there are many."""
    if package.getinfo(part).file_size < _IN_MEMORY:
        return package.read(part)
    with tempfile.TemporaryFile() as file, package.open(part) as source:
        shutil.copyfileobj(source, file)
        file.flush()
        return mmap.mmap(file.fileno(), 0, access=mmap.ACCESS_READ)


def worked_out_on_load(book: bytes) -> bytes:
    """The workbook's part with the order to work all formulas out when the file is opened.

    >>> worked_out_on_load(b'<workbook><sheets></sheets><calcPr calcId="1"/></workbook>')
    b'<workbook><sheets></sheets><calcPr calcId="1" fullCalcOnLoad="1"/></workbook>'
    """
    tag = _CALCULATION.search(book)
    if tag is None:
        last = max(_BEFORE_IT.finditer(book), key=lambda end: end.end(), default=None)
        if last is None:
            return book
        return book[: last.end()] + b"<" + last[1] + b'calcPr fullCalcOnLoad="1"/>' + book[last.end() :]
    told = _ON_LOAD.search(tag[0])
    if told is not None and told[1] in (b"1", b"true"):
        return book
    plain = _ON_LOAD.sub(b"", tag[0])
    end = len(plain.removesuffix(b">").removesuffix(b"/").rstrip())
    return book[: tag.start()] + plain[:end] + b' fullCalcOnLoad="1"' + plain[end:] + book[tag.end() :]


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
