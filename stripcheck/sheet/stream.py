"""Write an .xlsx book whose large sheets are streamed, with a value beside every formula.

openpyxl makes the book (styles, header rows, comments, validations, conditional formats, names, print set-up,
small sheets). In each large sheet it writes the header rows and one *template row*, whose cells carry the
styles of the data. This module then copies the package and puts all the data rows where the template row was.
A formula cell keeps its text and the value that it had when the book was written, so that viewers that don't
calculate show it too.

The file format is that of ECMA-376 part 1 (SpreadsheetML): rows 18.3.1.73, cells 18.3.1.4, text escapes
22.9.2.19 (section numbers from memory). The limits of a sheet (rows, text, formula length) are common
practice, no source.
"""

from __future__ import annotations

import datetime
import io
import math
import re
import zipfile
from collections.abc import Callable, Collection, Iterable, Mapping, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from copy import copy
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING
from xml.sax.saxutils import escape, quoteattr

import numpy as np

from stripcheck.errors import InputError
from stripcheck.safe_file import whole_or_not_at_all

if TYPE_CHECKING:
    from openpyxl import Workbook
    from openpyxl.cell import Cell
    from openpyxl.worksheet.worksheet import Worksheet

ROW = "\x00"
"""Stands for the row number in a formula, as in ``f"SQRT(B{ROW})"``. XML forbids it, so it can't clash."""

MAX_ROWS = 1_048_576
MAX_TEXT = 32_767
MAX_FORMULA = 8_192
_BLOCK_BYTES = 8_000_000  # made at a time: less makes the two threads wait for each other, more costs memory
_BLOCK_ROWS = 2_000  # at the most, however short they are
_LEVEL = 1  # of deflate: the rows are so alike that higher levels take longer and gain little
_ZIP64_FROM = 2**31 - 1  # [bytes] zipfile wants to know beforehand whether a part may be larger
_EXACT_INTEGER = 10**15  # a sheet keeps 15 digits of a number; a longer integer is carried as text

_MARK = "\x01"  # between the texts of a block; XML forbids it, so no text keeps it
_NOT_XML = re.compile("[\x00\x02-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")
_LOOKS_ESCAPED = re.compile("_(?=x[0-9A-Fa-f]{4}_)")
_SHEET_DATA = re.compile(r"<sheetData\s*/>|<sheetData>(.*)</sheetData>", re.DOTALL)
_LINK = re.compile(r'<hyperlink([^>]*?) ref="([A-Z]+)[0-9]+"([^>]*?) location="[^"]*"([^>]*?) ?/>')
_ROW_TAG = re.compile(r'<row\b([^>]*?)\br="(\d+)"([^>]*?)/?>')


@dataclass
class TextColumn:
    """Values that a user gave or reads: text, numbers, True/False, dates, None; one per row.

    Text stays text whatever it starts with. None, NaN and "" give an empty cell.
    """

    values: Sequence[object]


@dataclass
class NumberColumn:
    """Numbers, shape (rows,), in the unit that the column's header states. NaN gives an empty cell."""

    values: np.ndarray


@dataclass
class FormulaColumn:
    """A formula per row and the value that it has now.

    formula : text without the leading "=", with `ROW` for the row number; or a list of them, one per row, None where
        the value stands alone
    values : array of numbers (NaN shows as "") or True/False, shape (rows,); or a list, also of texts
    dynamic : whether the program must take it as a formula of its newer kind, as one that calls a LAMBDA name
    """

    formula: str | Sequence[str | None]
    values: np.ndarray | Sequence[object]
    dynamic: bool = False


Column = TextColumn | NumberColumn | FormulaColumn
_Styles = dict[type, str]  # style attribute by type of value; that of `object` is the template cell's
_Filler = Callable[[int, int], list[list[bytes]]]  # (start, stop) of a block -> one list of rows per slot
_DATES = (datetime.date, datetime.time, datetime.timedelta)


@dataclass
class Table:
    """The rows of one large sheet: number of the first row (the template row), and the columns from A on.

    ``heights`` [points], shape (rows,), sets the height of each row; NaN leaves it as usual. ``links``: places such as
    "'List'!C5", one per row or fewer, to which the cells below the template row's own link lead, in the same file as that.
    """

    first_row: int
    columns: Sequence[Column]
    heights: np.ndarray | None = None
    links: Sequence[str] = ()


@dataclass
class _Sheet:
    """What is written for one table: the row's fixed text with ``%b`` slots, and what goes into the slots."""

    row: bytes
    fillers: list[_Filler]
    first_row: int
    rows: int
    width: int
    may_pass_zip64: bool
    links: Sequence[str]


def write_book(
    skeleton: Workbook,
    tables: Mapping[str, Table],
    path: Path,
    *,
    progress: Callable[[int], None] | None = None,
    cached: Mapping[str, Mapping[str, object]] | None = None,
    dynamic: Mapping[str, Collection[str]] | None = None,
    level: int = _LEVEL,
) -> list[str]:
    """Write the book to ``path``, whole or not at all, and return what had to be cut, one sentence each.

    skeleton : the openpyxl book; in each sheet of ``tables`` the template row is the last one, and ranges
        (filters, validations, formats) already reach over all the rows to come
    tables : name of the sheet -> its `Table`
    progress : called with the number of rows just written, again and again
    cached : name of a sheet -> cell such as "D5" -> the value beside the formula that the skeleton has there
    dynamic : name of a sheet -> cells of those whose formula is of the newer kind, see `FormulaColumn`
    level : of deflate, 1 to 9

    The spreadsheet program is told to recalculate when it opens the book. Formulas in the skeleton itself
    get the value that ``cached`` has for them; what begins with "=" and has none there is a user's text, such as a header,
    and stays text. Raises InputError when there are more rows than a sheet holds or
    the file can't be written,
    ValueError when the tables don't fit the skeleton or hold what a sheet can't keep.
    Method: SpreadsheetML as in the heading of this module.

    >>> import openpyxl, tempfile
    >>> book = openpyxl.Workbook()
    >>> book.active.append(["Length [m]", "Half [m]"])
    >>> lengths = np.array([620.0, 455.0])
    >>> table = Table(2, [NumberColumn(lengths), FormulaColumn(f"A{ROW}/2", lengths / 2)])
    >>> with tempfile.TemporaryDirectory() as folder:
    ...     path = Path(folder) / "strips.xlsx"
    ...     write_book(book, {"Sheet": table}, path)
    ...     sheet = openpyxl.load_workbook(path)["Sheet"]
    ...     shown = openpyxl.load_workbook(path, data_only=True)["Sheet"]
    ...     sheet["B3"].value, shown["B3"].value
    []
    ('=A3/2', 227.5)
    """
    for name in tables:
        if name not in skeleton.sheetnames:
            raise ValueError(f'the skeleton has no sheet "{name}"')
    cuts = [cut for name, table in tables.items() for cut in _check(name, table)]
    sheets = {name: _prepare(skeleton[name], table) for name, table in tables.items()}
    _keep_text_as_text(skeleton, cached or {})
    skeleton.properties.creator = "stripcheck"
    skeleton.properties.lastModifiedBy = None
    skeleton.calculation.fullCalcOnLoad = True
    packed = io.BytesIO()
    skeleton.save(packed)
    # openpyxl settles the part names as it saves, so they are asked for only now
    streamed = {skeleton[name].path.lstrip("/"): sheet for name, sheet in sheets.items()}
    beside = {skeleton[name].path.lstrip("/"): values for name, values in (cached or {}).items()}
    newer = {skeleton[name].path.lstrip("/"): cells for name, cells in (dynamic or {}).items()}
    columns = (column for table in tables.values() for column in table.columns)
    any_newer = any(newer.values()) or any(isinstance(column, FormulaColumn) and column.dynamic for column in columns)
    with (
        zipfile.ZipFile(packed) as source,
        whole_or_not_at_all(path) as file,
        zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, compresslevel=level) as target,
    ):
        for part in source.namelist():
            data = _with_relative_targets(part, source.read(part))
            if part in beside:
                data = _with_values(data.decode(), beside[part], newer.get(part, ())).encode()
            if any_newer and part in _LISTS_OF_PARTS:
                data = data.replace(*_LISTS_OF_PARTS[part], 1)
            if part in streamed:
                _stream(data.decode(), streamed[part], target, part, progress)
            else:
                target.writestr(part, data)
        if any_newer:
            target.writestr("xl/metadata.xml", _METADATA)
    return cuts


def _keep_text_as_text(skeleton: Workbook, cached: Mapping[str, Mapping[str, object]]) -> None:
    for sheet in skeleton.worksheets:
        ours = cached.get(sheet.title, {})
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type == "f" and cell.coordinate not in ours:
                    cell.data_type, cell.quotePrefix = "s", True  # so that it stays one when it is edited


_FORMULA_CELL = re.compile(r'<c r="([A-Z]+[0-9]+)"([^>]*)><f>(.*?)</f><v ?/?>(?:</v>)?</c>', re.DOTALL)


# What a workbook must hold for formulas of the newer kind: cells with cm="1" are of the one kind told here (the form is
# that which such a program writes; from memory)
_DYNAMIC = "http://schemas.microsoft.com/office/spreadsheetml/2017/dynamicarray"
_METADATA = (
    '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>'
    f'<metadata xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:xda="{_DYNAMIC}">'
    '<metadataTypes count="1"><metadataType name="XLDAPR" minSupportedVersion="120000" copy="1" pasteAll="1" '
    'pasteValues="1" merge="1" splitFirst="1" rowColShift="1" clearFormats="1" clearComments="1" assign="1" coerce="1" '
    'cellMeta="1"/></metadataTypes><futureMetadata name="XLDAPR" count="1"><bk><extLst>'
    '<ext uri="{bdbb8cdc-fa1e-496e-a857-3c3f30c029c3}"><xda:dynamicArrayProperties fDynamic="1" fCollapsed="0"/></ext>'
    '</extLst></bk></futureMetadata><cellMetadata count="1"><bk><rc t="1" v="0"/></bk></cellMetadata></metadata>'
)
_LISTS_OF_PARTS = {
    "[Content_Types].xml": (
        b"</Types>",
        b'<Override PartName="/xl/metadata.xml" '
        b'ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheetMetadata+xml"/></Types>',
    ),
    "xl/_rels/workbook.xml.rels": (
        b"</Relationships>",
        b'<Relationship Id="rIdMetadata" Target="metadata.xml" '
        b'Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/sheetMetadata"/></Relationships>',
    ),
}


def _with_values(xml: str, values: Mapping[str, object], newer: Collection[str] = ()) -> str:
    """The formula cells of a sheet that openpyxl wrote, each with the value that it has now."""

    def with_value(match: re.Match[str]) -> str:
        value = values.get(match[1])
        if value is None:
            return match[0]
        if isinstance(value, bool):
            kind, text = ' t="b"', str(int(value))
        elif isinstance(value, int | float):
            kind, text = "", repr(value)
        else:
            kind, text = ' t="str"', escape(str(value))
        mark, array = (' cm="1"', f' t="array" ref="{match[1]}"') if match[1] in newer else ("", "")
        return f'<c r="{match[1]}"{match[2]}{kind}{mark}><f{array}>{match[3]}</f><v>{text}</v></c>'

    return _FORMULA_CELL.sub(with_value, xml)


def _with_relative_targets(part: str, data: bytes) -> bytes:
    """Some readers look for a sheet's comments beside the sheet and can't follow a target from the root."""
    return data.replace(b'Target="/xl/', b'Target="../') if part.startswith("xl/worksheets/_rels/") else data


# --- what must hold before anything is written


def _check(name: str, table: Table) -> list[str]:
    """Raise when the table can't be written; otherwise the sentences about texts that will be cut."""
    counts = {len(column.values) for column in table.columns}
    if len(counts) != 1:
        raise ValueError(f'sheet "{name}": the columns must have equal lengths, not {sorted(counts)}')
    last = table.first_row + counts.pop() - 1
    if last > MAX_ROWS:
        raise InputError(
            f'sheet "{name}": the list needs {last:,} rows, and a sheet holds {MAX_ROWS:,}; divide the list'
        )
    cuts: list[str] = []
    for number, column in enumerate(table.columns, 1):
        where = f'sheet "{name}", column {_letter(number)}'
        if isinstance(column, FormulaColumn):
            _check_formulas(where, column, last)
        if isinstance(column, NumberColumn | FormulaColumn):
            _check_finite(where, column.values, table.first_row)
        if not _is_numeric(column.values):
            cuts += _cuts(name, _letter(number), column.values, table.first_row)
    return cuts


def _is_numeric(values: np.ndarray | Sequence[object]) -> bool:
    return isinstance(values, np.ndarray) and values.dtype.kind in "fiub"


def _check_formulas(where: str, column: FormulaColumn, last_row: int) -> None:
    formulas = [column.formula] if isinstance(column.formula, str) else [text for text in column.formula if text is not None]
    if not isinstance(column.formula, str) and len(column.formula) != len(column.values):
        raise ValueError(f"{where}: {len(column.formula)} formulas for {len(column.values)} values")
    extra = len(str(last_row)) - len(ROW)
    for formula in formulas:
        if not formula or formula.startswith("="):
            raise ValueError(f'{where}: a formula is given without "=" and is not empty')
        if _MARK in formula or _NOT_XML.search(formula.replace(ROW, "")):
            raise ValueError(f"{where}: a formula holds a character that a sheet can't keep")
        if len(formula) + extra * formula.count(ROW) > MAX_FORMULA:
            raise ValueError(f"{where}: a formula is longer than {MAX_FORMULA:,} characters")


def _check_finite(where: str, values: np.ndarray | Sequence[object], first_row: int) -> None:
    if isinstance(values, np.ndarray) and _is_numeric(values):
        bad = np.flatnonzero(np.isinf(values)).tolist()
    else:
        numbers = ((i, value) for i, value in enumerate(values) if isinstance(value, float | np.floating))
        bad = [i for i, value in numbers if math.isinf(value)]
    if bad:
        raise ValueError(f"{where}, row {first_row + bad[0]}: an infinite number can't be shown in a sheet")


def _cuts(name: str, letter: str, values: Iterable[object], first_row: int) -> list[str]:
    if max(map(len, _texts(values)), default=0) <= MAX_TEXT // 2:
        return []
    return [
        f'sheet "{name}", row {row}, column {letter}: '
        f"a text of {_cell_length(value):,} characters was cut to the {MAX_TEXT:,} that a cell holds"
        for row, value in enumerate(values, first_row)
        if isinstance(value, str) and _cell_length(value) > MAX_TEXT
    ]


def _texts(values: Iterable[object]) -> list[str]:
    return [value for value in values if isinstance(value, str)]


def _cell_length(text: str) -> int:
    """Length as a sheet counts it: a character outside the basic plane of Unicode is two."""
    return len(text.encode("utf-16-le", "surrogatepass")) // 2


# --- preparing: all that is the same in every row is made once


def _prepare(worksheet: Worksheet, table: Table) -> _Sheet:
    template = [worksheet.cell(table.first_row, number) for number in range(1, len(table.columns) + 1)]
    for cell in worksheet[table.first_row][len(template) :]:
        if cell.has_style or cell.value is not None:
            raise ValueError(f'sheet "{worksheet.title}": cell {cell.coordinate} is beyond the table')
    pieces: list[str] = []
    fillers: list[_Filler] = []
    for cell, column in zip(template, table.columns, strict=True):
        piece, filler = _prepare_column(cell, column)
        pieces.append(piece)
        fillers.append(filler)
    row = "".join(pieces).encode()
    if table.heights is not None:
        heights = table.heights
        row = b"%b>" + row
        fillers.insert(0, lambda a, b: [_height_attributes(heights[a:b])])
    rows = len(table.columns[0].values)
    size = rows * (len(row) + 6 * row.count(b"\0") + 60 * len(pieces)) + sum(map(_most_bytes, table.columns))
    width = max(worksheet.max_column, len(template))
    return _Sheet(row, fillers, table.first_row, rows, width, size > _ZIP64_FROM, table.links)


def _height_attributes(heights: np.ndarray) -> list[bytes]:
    return [b"" if height != height else b' ht="%.4g" customHeight="1"' % height for height in heights.tolist()]


def _most_bytes(column: Column) -> int:
    """Never less than the bytes that the texts of a column need: escaping makes at most seven of one."""
    texts = [] if _is_numeric(column.values) else _texts(column.values)
    if isinstance(column, FormulaColumn) and not isinstance(column.formula, str):
        texts += [text for text in column.formula if text is not None]
    return 7 * sum(map(len, texts))


def _prepare_column(cell: Cell, column: Column) -> tuple[str, _Filler]:
    """The column's part of a row, with ``%b`` slots, and what fills them."""
    style = f' s="{cell.style_id}"' if cell.has_style else ""
    start = f'<c r="{cell.column_letter}{ROW}"'
    if isinstance(column, TextColumn):
        given, styles = column.values, _value_styles(cell, style, column.values)
        return f"{start}%b", lambda a, b: [_given_cells(given[a:b], styles)]
    if isinstance(column, NumberColumn):
        numbers = np.asarray(column.values, dtype=float)
        return f"{start}%b", lambda a, b: [_number_cells(numbers[a:b], style)]
    values, formulas, row = column.values, column.formula, cell.row
    mark, array = (' cm="1"', f' t="array" ref="{cell.column_letter}{ROW}"') if column.dynamic else ("", "")
    if isinstance(formulas, str):
        text = escape(formulas).replace("%", "%%")
        return f"{start}{style}{mark}%b><f{array}>{text}</f><v>%b</v></c>", lambda a, b: _cached(values[a:b])
    return f"{start}{style}%b>%b<v>%b</v></c>", lambda a, b: _with_formulas(
        _cached(values[a:b]), formulas[a:b], row + a, mark, array
    )


def _with_formulas(cached: list[list[bytes]], formulas: Sequence[str | None], row: int, mark: str,
                   array: str) -> list[list[bytes]]:  # fmt: skip
    kinds, values = cached
    marked = [kind if formula is None else mark.encode() + kind for kind, formula in zip(kinds, formulas, strict=True)]
    texts = [
        b"" if formula is None else f"<f{array}>{escape(formula)}</f>".replace(ROW, str(r)).encode()
        for r, formula in enumerate(formulas, row)
    ]
    return [marked, texts, values]


def _value_styles(cell: Cell, style: str, values: Sequence[object]) -> _Styles:
    """Style attribute by type of value: a date needs a date format, unless the template cell has one."""
    from openpyxl.cell import Cell

    styles: _Styles = {object: style}
    for kind in {type(value) for value in values}:
        if issubclass(kind, _DATES):
            dated = Cell(cell.parent, row=cell.row, column=cell.column)
            dated._style = copy(cell._style)
            dated.value = next(value for value in values if type(value) is kind)  # this sets the format too
            styles[kind] = f' s="{dated.style_id}"'
    return styles


# --- cells: whole blocks at a time, since one join, one encoding and one split are faster than many encodings


def _given_cells(values: Sequence[object], styles: _Styles) -> list[bytes]:
    """The rest of each cell, after its reference, for values as a user gave them."""
    if set(map(type, values)) <= {str, type(None)}:
        return _text_cells([str(value or "") for value in values], styles[object])
    return [_given_cell(value, styles) for value in values]


def _given_cell(value: object, styles: _Styles) -> bytes:
    style = styles[object]
    if value is None or value != value:  # NaN differs from itself
        return f"{style}/>".encode()
    if isinstance(value, bool | np.bool_):
        return f'{style} t="b"><v>{int(value)}</v></c>'.encode()
    if isinstance(value, _DATES):
        serial = _serial(value)
        if serial is not None:
            return f"{styles[type(value)]}><v>{serial}</v></c>".encode()
    if isinstance(value, float | np.floating) and math.isfinite(value):
        return f"{style}><v>{float(value)!r}</v></c>".encode()
    if isinstance(value, int | np.integer) and abs(int(value)) < _EXACT_INTEGER:
        return f"{style}><v>{int(value)}</v></c>".encode()
    return _text_cells([str(value)], style)[0]


def _serial(value: datetime.date | datetime.time | datetime.timedelta) -> float | None:
    """Days since the sheet's calendar began; None for a time with a zone and for what lies before it."""
    from openpyxl.utils.datetime import to_excel

    if getattr(value, "tzinfo", None) is not None:
        return None
    serial = float(to_excel(value))
    return serial if serial >= (1 if isinstance(value, datetime.date) else 0) else None


def _text_cells(texts: list[str], style: str) -> list[bytes]:
    empty = f"{style}/>".encode()
    full = f'{style} t="inlineStr"><is><t xml:space="preserve">'.encode()
    return [full + text + b"</t></is></c>" if text else empty for text in xml_texts(texts)]


def xml_texts(texts: list[str]) -> list[bytes]:
    """Texts as XML carries them: cut to a cell's length, forbidden characters replaced, the rest escaped.

    >>> xml_texts(["A<B" + chr(7), "09/27"])[0].decode()
    'A&lt;B\ufffd'
    """
    if max(map(len, texts), default=0) > MAX_TEXT // 2:
        texts = [_cut(text) for text in texts]
    joined = _MARK.join(texts)
    if joined.count(_MARK) >= len(texts):  # a text holds the mark itself
        joined = _MARK.join([text.replace(_MARK, "\ufffd") for text in texts])
    plain = _LOOKS_ESCAPED.sub("_x005F_", _NOT_XML.sub("\ufffd", joined))
    return escape(plain, {"\r": "&#13;"}).encode().split(_MARK.encode())


def _cut(text: str) -> str:
    if _cell_length(text) <= MAX_TEXT:
        return text
    # a character of two halves that the cut parts is left out
    return text.encode("utf-16-le", "surrogatepass")[: 2 * MAX_TEXT].decode("utf-16-le", "ignore")


def _number_cells(values: np.ndarray, style: str) -> list[bytes]:
    empty, full = f"{style}/>".encode(), f"{style}><v>".encode()
    return [empty if number == b"nan" else full + number + b"</v></c>" for number in _numbers(values)]


def _numbers(values: np.ndarray) -> list[bytes]:
    """Each number with all its digits; -0.0 is shown as 0.0."""
    numbers = (values + 0.0).tolist()
    return ",".join(map(repr, numbers)).encode().split(b",")


def _cached(values: np.ndarray | Sequence[object]) -> list[list[bytes]]:
    """Type attribute and value, row by row, of the value that a formula has now."""
    if isinstance(values, np.ndarray) and values.dtype.kind in "fiu":
        numbers = _numbers(values)
        kinds = [b' t="str"' if number == b"nan" else b"" for number in numbers]
        return [kinds, [b"" if number == b"nan" else number for number in numbers]]
    if set(map(type, values)) == {str}:
        return [[b' t="str"'] * len(values), xml_texts(list(map(str, values)))]
    cells = [_cached_value(value) for value in values]
    return [[kind for kind, _ in cells], [value for _, value in cells]]


def _cached_value(value: object) -> tuple[bytes, bytes]:
    if isinstance(value, bool | np.bool_):
        return b' t="b"', b"1" if value else b"0"
    if value is None or value != value:
        return b' t="str"', b""
    if isinstance(value, int | float | np.integer | np.floating):
        return b"", repr(float(value)).encode()
    return b' t="str"', xml_texts([str(value)])[0]


# --- streaming


def _stream(
    xml: str,
    sheet: _Sheet,
    target: zipfile.ZipFile,
    part: str,
    progress: Callable[[int], None] | None,
) -> None:
    """Write the sheet's part with all its rows in place of the template row."""
    head, row_start, tail = _split(xml, sheet)
    if sheet.row.startswith(b"%b>"):  # the first slot, of the height, belongs into the start tag
        row_start = row_start.removesuffix(">")
    pieces = (row_start.encode() + sheet.row + b"</row>").split(ROW.encode())
    # one block is compressed, which leaves the interpreter free, while the next one is made
    with target.open(part, "w", force_zip64=sheet.may_pass_zip64) as file, ThreadPoolExecutor(1) as writer:
        file.write(head.encode())
        pending: Future[int] | None = None
        step = min(_BLOCK_ROWS, 1 + _BLOCK_BYTES // len(sheet.row))
        for start in range(0, sheet.rows, step):
            stop = min(start + step, sheet.rows)
            block = _rows(sheet, pieces, start, stop)
            if pending is not None:
                pending.result()
            pending = writer.submit(file.write, block)
            if progress is not None:
                progress(stop - start)
        if pending is not None:
            pending.result()
        file.write(tail.encode())


def _rows(sheet: _Sheet, pieces: list[bytes], start: int, stop: int) -> bytes:
    slots = [slot for filler in sheet.fillers for slot in filler(start, stop)]
    rows = enumerate(zip(*slots, strict=True), sheet.first_row + start)
    return b"".join([str(row).encode().join(pieces) % values for row, values in rows])


def _split(xml: str, sheet: _Sheet) -> tuple[str, str, str]:
    """What stands before the template row, the start tag of every data row, and what stands after."""
    last_row = max(sheet.first_row + sheet.rows - 1, 1)
    extent = f'<dimension ref="A1:{_letter(sheet.width)}{last_row}"/>'
    xml = re.sub(r'<dimension ref="[^"]*"\s*/>', extent, xml, count=1)
    data = _SHEET_DATA.search(xml)
    if data is None:
        raise ValueError("openpyxl has written a sheet without data; is there a newer kind of it?")
    head, tail = xml[: data.start()] + "<sheetData>" + (data[1] or ""), "</sheetData>" + _linked(xml[data.end() :], sheet)
    tag = None
    for tag in _ROW_TAG.finditer(head):
        if int(tag[2]) > sheet.first_row:
            raise ValueError(f"row {tag[2]} of the skeleton is below the template row {sheet.first_row}")
    if tag is None or int(tag[2]) < sheet.first_row:  # a template row without a style is not in the part
        return head, f'<row r="{ROW}">', tail
    start = f'<row{tag[1]}r="{ROW}"{tag[3].rstrip()}>'.replace("%", "%%")
    return head[: tag.start()], start, tail


def _linked(tail: str, sheet: _Sheet) -> str:
    """What stands after the rows, with a link for each row in place of the template row's."""
    link = _LINK.search(tail)
    if not sheet.links or link is None:
        return tail
    rest = link[3] + link[4]  # with the file that all of them lead to, if it is another
    links = (
        f'<hyperlink{link[1]} ref="{link[2]}{row}" location={quoteattr(place)}{rest}/>'
        for row, place in enumerate(sheet.links, sheet.first_row)
    )
    return tail[: link.start()] + "".join(links) + tail[link.end() :]


def _letter(number: int) -> str:
    from openpyxl.utils import get_column_letter

    return str(get_column_letter(number))
