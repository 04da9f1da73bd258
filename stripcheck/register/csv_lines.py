"""A text list whose cells are changed in place: what is not changed stays byte for byte, with its quotes and line ends."""

from __future__ import annotations

import codecs
import csv
import io
from collections.abc import Iterator, Sequence

from stripcheck.errors import InputError

_MARKS = (("utf-8", codecs.BOM_UTF8), ("utf-16-le", codecs.BOM_UTF16_LE), ("utf-16-be", codecs.BOM_UTF16_BE))


class CsvLines:
    """The rows of a text list as they are written; rows and columns are counted from 1 and from 0.

    ``data``: the file; ``encoding`` as ``find_encoding`` names it.

    >>> lines = CsvLines(b'Strip,Length\\r\\n"XOTB",620', "utf-8-sig", ",")
    >>> lines.set(2, 0, "XOTC")
    >>> lines.add_below(2, ["XNEW", "700, or so"])
    >>> lines.data()
    b'Strip,Length\\r\\n"XOTC",620\\r\\nXNEW,"700, or so"\\r\\n'
    """

    def __init__(self, data: bytes, encoding: str, delimiter: str) -> None:
        plain = "utf-8" if encoding == "utf-8-sig" else encoding
        self.encoding, self.mark = next(
            ((name, mark) for name, mark in _MARKS if data.startswith(mark) and name.startswith(plain)), (plain, b"")
        )
        self.delimiter = delimiter
        self.rows = list(_records(data[len(self.mark) :].decode(self.encoding), delimiter))
        self.added: dict[int, list[str]] = {}

    def set(self, row: int, column: int, text: str) -> None:
        """Put a text into a cell; one that was within quotes stays so."""
        body, end = _cut_end(self.rows[row - 1])
        cells = _raw_cells(body, self.delimiter)
        cells += [""] * (column + 1 - len(cells))
        cells[column] = self._quoted(text, always=cells[column].startswith('"'))
        self.rows[row - 1] = self.delimiter.join(cells) + end

    def add_below(self, row: int, texts: Sequence[str]) -> None:
        """Put a row below another, and below those added there before."""
        above = _raw_cells(_cut_end(self.rows[row - 1])[0], self.delimiter)
        always = len(above) > 1 and all(cell.startswith('"') for cell in above)
        line = self.delimiter.join(self._quoted(text, always) for text in texts)
        self.added.setdefault(row, []).append(line)

    def data(self) -> bytes:
        """The file as it is now. Raises InputError where its encoding has no sign for what is written."""
        usual = next((end for end in (_cut_end(row)[1] for row in self.rows) if end), "\n")
        pieces = []
        for number, row in enumerate(self.rows, 1):
            below = self.added.get(number, [])
            pieces.append(row if not below or _cut_end(row)[1] else row + usual)
            pieces += [line + usual for line in below]
        try:
            return self.mark + "".join(pieces).encode(self.encoding)
        except UnicodeEncodeError as error:
            sign = error.object[error.start]
            raise InputError(
                f'the register is written in {self.encoding}, which has no "{sign}"; save it as CSV, UTF-8, first'
            ) from error

    def _quoted(self, text: str, always: bool) -> str:
        needs = always or any(sign in text for sign in (self.delimiter, '"', "\r", "\n"))
        return '"' + text.replace('"', '""') + '"' if needs else text


def _records(text: str, delimiter: str) -> Iterator[str]:
    """Each row of a text as it stands there, with its line end; one with a line end in a cell is several lines."""
    lines: list[str] = []

    def feed() -> Iterator[str]:
        for line in io.StringIO(text, newline=""):
            lines.append(line)
            yield line

    for _ in csv.reader(feed(), delimiter=delimiter, strict=True):
        yield "".join(lines)
        lines.clear()


def _cut_end(row: str) -> tuple[str, str]:
    end = next((end for end in ("\r\n", "\n", "\r") if row.endswith(end)), "")
    return row.removesuffix(end), end


def _raw_cells(body: str, delimiter: str) -> list[str]:
    """The cells of a row as they are written, with their quotes."""
    cells: list[str] = []
    start = 0
    while True:
        at = start
        if body.startswith('"', start):
            at = start + 1
            while body[at] != '"' or body.startswith('""', at):
                at += 1 if body[at] != '"' else 2
        end = body.find(delimiter, at)
        if end < 0:
            return [*cells, body[start:]]
        cells.append(body[start:end])
        start = end + len(delimiter)
