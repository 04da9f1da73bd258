"""Raw rows of a runway list, from a text file or a workbook, before anything in them is understood.

Text files: any of the delimiters ``, ; tab |`` and the encodings UTF-8, UTF-16 (with its mark) and
Windows-1252. Workbooks (.xlsx, .xlsm, .xls, .ods) are read with python-calamine, which is imported only when
one comes. Title lines above the header are passed over: the header is the first of the first rows with two
known columns.
"""

from __future__ import annotations

import codecs
import csv
import io
import os
import stat
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass, field
from itertools import islice
from pathlib import Path
from typing import TextIO

from stripcheck.errors import InputError
from stripcheck.register.columns import known_headers
from stripcheck.register.safe_limits import (
    MAX_CELL_TEXT,
    MAX_COLUMNS,
    MAX_LINE,
    MAX_LIST_COLUMNS,
    MAX_ROWS,
    check_area,
    damaged,
    protected,
)
from stripcheck.register.safe_read import check_text, check_workbook
from stripcheck.register.values import as_written

TEXT_KINDS = (".csv", ".txt", ".tsv", ".tab")
WORKBOOK_KINDS = (".xlsx", ".xlsm", ".xls", ".ods")
DELIMITERS = (",", ";", "\t", "|")
HEADER_WITHIN = 40  # rows in which the header is looked for; title lines above a list are never as many


@dataclass
class Table:
    """A list as columns of raw cells.

    ``where``: file, and sheet of a workbook, for messages. ``source``: file name. ``sheet``: "" for a text
    file. ``headers``: as written; ``header_row``: their row. ``cells``: one list for each header, all of the
    same length. ``row_numbers``: the row of each in the file, as a spreadsheet shows it (1 = first).
    ``too_wide``: index -> number of cells of a text row that has more cells than the header. ``delimiter``:
    "" for a workbook. ``places``: column of each header in the file (1 = first).
    """

    where: str
    source: str
    sheet: str
    headers: list[str]
    header_row: int
    cells: list[list[object]]
    row_numbers: list[int]
    too_wide: dict[int, int]
    delimiter: str
    places: list[int] = field(default_factory=list)


def read_table(path: str | Path, sheet: str | None = None) -> Table:
    """Read a runway list as raw cells.

    ``path``: the file. ``sheet``: name of the sheet of a workbook; without it the first sheet with a header
    is taken. Raises InputError when there is no such file, it is a directory, empty, corrupt or of another
    kind, or when no row looks like a header.

    >>> read_table("no such list.csv")
    Traceback (most recent call last):
    ...
    stripcheck.errors.InputError: no such list.csv: there is no such file
    """
    path = Path(path)
    check_file(path)
    kind = path.suffix.lower()
    if kind in TEXT_KINDS:
        if sheet is not None:
            raise InputError(f'{path.name}: a text file has no sheets; leave the sheet "{sheet}" out')
        return _read_text(path)
    if kind in WORKBOOK_KINDS:
        return _read_workbook(path, sheet)
    kinds = ", ".join((*TEXT_KINDS, *WORKBOOK_KINDS))
    raise InputError(f'{path.name}: "{kind}" is not a kind of runway list; save the list as one of {kinds}')


def check_file(path: Path, what: str = "runway list") -> None:
    """Raise InputError unless ``path`` is a file with something in it; ``what`` it should be, for the sentence."""
    try:
        mode = path.stat().st_mode
        if stat.S_ISDIR(mode):
            raise InputError(f"{path}: this is a directory; name the file of the {what}")
        if not stat.S_ISREG(mode):
            raise InputError(f"{path}: this is a device or a pipe; name the file of the {what}")
        path.open("rb").close()
    except (FileNotFoundError, ValueError):  # a name with a zero byte is no name
        raise InputError(f"{path}: there is no such file") from None
    except OSError as error:
        raise InputError(
            f"{path}: the file can't be opened ({error.strerror}); close it elsewhere or check its rights"
        ) from error
    if path.stat().st_size == 0:
        raise InputError(f"{path.name}: the file is empty; a {what} has a header row and a row for each entry")


def text_rows(path: Path, encoding: str, delimiter: str) -> Iterator[list[str]]:
    """Rows of a text file, a blank line giving ``[]``; InputError where the quotes or the text are broken.

    Quotes are checked strictly: an open quote mark would swallow the runways that follow it. A row is held within
    ``safe_limits``, so that a line or a quote without an end takes no memory.
    """
    with path.open(encoding=encoding, newline="") as stream:
        lines = _Lines(path.name, stream)
        reader = csv.reader(lines, delimiter=delimiter, strict=True)
        try:
            for number, row in enumerate(reader, 1):
                lines.length = 0
                if len(row) > MAX_COLUMNS or number > MAX_ROWS:
                    raise InputError(
                        f"{path.name} line {reader.line_num}: a list has at most {MAX_COLUMNS:,} columns and {MAX_ROWS:,} "
                        "rows; divide it"
                    )
                yield row
        except csv.Error as error:
            raise InputError(
                f"{path.name} line {reader.line_num}: broken quote marks or text ({error}); "
                'a quote mark inside a quoted value must be doubled ("")'
            ) from error
        except UnicodeError as error:
            raise InputError(f"{path.name}: the text breaks off or is damaged; save the list as CSV, UTF-8") from error


class _Lines:
    """The lines of a text; InputError where those of one row are longer than a row can be."""

    def __init__(self, name: str, stream: TextIO) -> None:
        self.name, self.stream = name, stream
        self.length = 0  # of the row so far, set back by whoever has a whole row

    def __iter__(self) -> _Lines:
        return self

    def __next__(self) -> str:
        line = self.stream.readline(MAX_LINE + 1)
        if not line:
            raise StopIteration
        self.length += len(line)
        if self.length > MAX_LINE:
            raise InputError(
                f"{self.name}: a row is longer than {MAX_LINE:,} characters; is a quote mark open, or is this no list?"
            )
        return line


def find_encoding(path: Path) -> str:
    """Encoding of a text file: by its mark, else UTF-8 when all of it is, else Windows-1252, else Latin-1.

    Raises InputError when the file holds zero bytes, which no text has.
    """
    with path.open("rb") as stream:
        start = stream.read(4)
        if start.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
            return "utf-16"
        stream.seek(0)
        decoders = {name: codecs.getincrementaldecoder(name)() for name in ("utf-8-sig", "cp1252", "latin-1")}
        while block := stream.read(1 << 20):
            if b"\0" in block:
                raise InputError(f"{path.name}: this is no text file; save the list as CSV, UTF-8")
            decoders = {name: decoder for name, decoder in decoders.items() if _decodes(decoder, block)}
    return next(iter(decoders))


def find_delimiter(path: Path, encoding: str) -> str:
    """The delimiter with which the first rows hold most known headers; between equals, most cells.

    Raises InputError when the start of the file can't be read with any of them.
    """
    scores: dict[str, tuple[int, int]] = {}
    failures: dict[str, InputError] = {}
    for delimiter in DELIMITERS:
        try:
            rows = list(islice(text_rows(path, encoding, delimiter), HEADER_WITHIN))
        except InputError as error:
            failures[delimiter] = error
            continue
        scores[delimiter] = max(((known_headers(row), len(row)) for row in rows), default=(0, 0))
    if not scores:  # what is wrong is said for the likeliest of them
        with path.open(encoding=encoding, errors="replace") as stream:
            start = stream.read(4096)
        raise failures[max(failures, key=start.count)]
    return max(scores, key=lambda delimiter: scores[delimiter])


def _decodes(decoder: codecs.IncrementalDecoder, block: bytes) -> bool:
    try:
        decoder.decode(block)
    except UnicodeDecodeError:
        return False
    return True


def _read_text(path: Path) -> Table:
    check_text(path)
    encoding = find_encoding(path)
    delimiter = find_delimiter(path, encoding)
    table = _collect(text_rows(path, encoding, delimiter), path.name, "", delimiter)
    if table is None:
        raise InputError(_no_header(path.name))
    return table


def _read_workbook(path: Path, wanted: str | None) -> Table:
    for name, rows in workbook_sheets(path, wanted):
        table = _collect(rows, path.name, name, "")
        if table is not None:
            return table
    raise InputError(_no_header(path.name if wanted is None else f'{path.name} sheet "{wanted}"'))


def workbook_sheets(path: Path, wanted: str | None) -> Iterator[tuple[str, Sequence[Sequence[object]]]]:
    """Name and rows of the sheets of a workbook, or of the one wanted; InputError where it can't be read."""
    cells_only = check_workbook(path)
    from python_calamine import CalamineWorkbook, SheetTypeEnum

    with _said_in_one_sentence(path.name):
        book = CalamineWorkbook.from_object(path if cells_only is None else io.BytesIO(cells_only))
    with book:
        names = [sheet.name for sheet in book.sheets_metadata if sheet.typ == SheetTypeEnum.WorkSheet]
        if wanted is not None and wanted not in names:
            raise InputError(f'{path.name}: there is no sheet "{wanted}"; its sheets are {", ".join(names)}')
        for name in [wanted] if wanted is not None else names:
            with _said_in_one_sentence(path.name):
                rows = book.get_sheet_by_name(name).to_python(skip_empty_area=False)
            yield name, rows


@contextmanager
def _said_in_one_sentence(name: str) -> Iterator[None]:
    """What goes wrong in the reader of workbooks becomes an InputError, also where it gives up with a note of its own."""
    from python_calamine import CalamineError, PasswordError

    try:
        with _without_notes():
            yield
    except PasswordError as error:
        raise protected(name) from error
    except OverflowError as error:
        raise damaged(name, "a date or time is beyond all calendars") from error
    except (CalamineError, OSError, ValueError) as error:
        raise InputError(f"{name}: the workbook can't be read ({error}); open it and save it again") from error
    except BaseException as error:
        if type(error).__name__ != "PanicException":  # how the reader ends where it meets what it did not expect
            raise
        raise damaged(name, "it can't be understood") from error


@contextmanager
def _without_notes() -> Iterator[None]:
    """Nothing that is not Python's reaches the error output meanwhile."""
    try:
        kept = os.dup(2)
    except OSError:  # there is none, as in a program with windows only
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 2)
    os.close(nowhere)
    try:
        yield
    finally:
        os.dup2(kept, 2)
        os.close(kept)


def _no_header(where: str) -> str:
    return f'{where}: no usable column: there is no header row with headers such as "Strip" and "Length [m]"'


def _collect(rows: Iterable[Sequence[object]], source: str, sheet: str, delimiter: str) -> Table | None:
    """Columns below the header row, blank rows left out; None when there is no header row."""
    numbered = enumerate(rows, 1)
    first_rows = islice(numbered, HEADER_WITHIN)
    header_row, header = next(((at, row) for at, row in first_rows if known_headers(row) >= 2), (0, None))
    if header is None:
        return None
    headers = _name_headers(header)
    where = f'{source} sheet "{sheet}"' if sheet else source
    table = Table(where, source, sheet, headers, header_row, [[] for _ in headers], [], {}, delimiter)
    same: dict[str, str] = {}  # one copy of each repeated text keeps a list of 44,000 runways small
    for number, row in numbered:
        cells = [_lasting(cell, same) for cell in row]
        if _is_empty(cells):
            continue
        if any(type(cell) is str and len(cell) > MAX_CELL_TEXT for cell in cells):
            raise InputError(f"{where} row {number}: a cell holds more than {MAX_CELL_TEXT:,} characters; shorten it")
        if not _is_empty(cells[len(headers) :]):
            table.too_wide[len(table.row_numbers)] = len(cells)
        table.row_numbers.append(number)
        check_area(where, len(table.row_numbers), len(headers))
        cells += [""] * (len(headers) - len(cells))
        for column, cell in zip(table.cells, cells, strict=False):
            column.append(cell)
    if not table.row_numbers:
        raise InputError(f"{table.where}: there are no runways below the header row; add a row for each runway")
    _drop_blank_columns(table)
    if len(table.headers) > MAX_LIST_COLUMNS:
        raise InputError(
            f"{where}: the list has {len(table.headers):,} columns, and at most {MAX_LIST_COLUMNS:,} are read; delete "
            "those that are not needed"
        )
    return table


def _lasting(cell: object, same: dict[str, str]) -> object:
    """A cell as it is kept: None as "", and the first copy of a text that comes again."""
    if type(cell) is str:
        return same.setdefault(cell, cell)
    return "" if cell is None else cell


def _is_empty(cells: Sequence[object]) -> bool:
    return all(isinstance(cell, str) and not cell.strip() for cell in cells)


def _name_headers(header: Iterable[object]) -> list[str]:
    """Headers as text; a column without one is called by its place, so that what stands in it is carried."""
    return [" ".join(as_written(cell).split()) or f"(column {place})" for place, cell in enumerate(header, 1)]


def _drop_blank_columns(table: Table) -> None:
    keep = [
        place
        for place, header in enumerate(table.headers)
        if header != f"(column {place + 1})" or not _is_empty(table.cells[place])
    ]
    table.places = [place + 1 for place in keep]
    table.headers = [table.headers[place] for place in keep]
    table.cells = [table.cells[place] for place in keep]
