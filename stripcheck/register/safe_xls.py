"""Whether a compound file is an old workbook (.xls) that can be read, is encrypted, or is something else.

The file system within the file is walked first: a chain of sectors that runs in a circle would keep a reader going until
the memory is gone. Then the records of the workbook are walked, and the cells counted. Structure: Microsoft's open
specifications [MS-CFB] and [MS-XLS], from memory.
"""

from __future__ import annotations

import struct
from array import array
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

from stripcheck.errors import InputError
from stripcheck.register.safe_cells import Tally
from stripcheck.register.safe_limits import MAX_PARTS, MAX_XLS_FILE, SAVE_AS, check_size, damaged, protected

MAX_RECORDS = 20_000_000  # that are walked: more than a file of the greatest size has, unless its sheets overlap
ROWS, COLUMNS = 65_536, 256  # of a sheet of this kind

_END_OF_CHAIN, _NO_SECTOR = 0xFFFFFFFE, 0xFFFFFFFA  # sector numbers from the latter on mean something else
_LONGEST = 65_535  # [characters] of a text
_SMALL = 4096  # [bytes] below which a stream stands among the small ones
_STREAM, _ROOT = 2, 5
_BEGIN, _END, _SHEET, _PASSWORD, _CONTINUED = 0x809, 0x0A, 0x85, 0x2F, 0x3C
_SHARED, _SHOWS_SHARED, _SEVERAL, _MERGED = 0xFC, 0xFD, 0xBD, 0xE5
_SIZES = {0x200: "<IIHH", 0x00: "<HHHH"}  # first row, last row + 1, first column, last column + 1
# one cell each, row and column first: formula, number, label, true or false, text of shared ones, and their older forms
_CELLS = frozenset((0x06, 0x206, 0x406, 0x203, 0x27E, 0x204, 0xD6, 0x205, 0xFD, 0x02, 0x03, 0x04, 0x05, 0xBD))


class _Stream(NamedTuple):
    name: str
    kind: int
    start: int
    size: int


def check_compound(path: Path) -> None:
    """Raise InputError unless a compound file is a whole .xls workbook within ``safe_limits``, and named so."""
    check_size(path.name, path.stat().st_size, MAX_XLS_FILE)
    file = _Compound(path.name, path.read_bytes())
    names = {stream.name: stream for stream in file.streams if stream.kind == _STREAM}
    if "EncryptedPackage" in names:
        raise protected(path.name)
    book = names.get("Workbook") or names.get("Book")
    if book is None:
        raise InputError(f"{path.name}: this is a document of another program and no workbook; {SAVE_AS}")
    if path.suffix.lower() != ".xls":
        raise InputError(f"{path.name}: by its content this is a workbook of the kind .xls; name it {path.stem}.xls")
    _Records(path.name, file.content(book)).check()


# --- the file system within the file


class _Compound:
    """A compound file, all of whose chains come to an end."""

    def __init__(self, name: str, data: bytes) -> None:
        self.name, self.data = name, data
        shift, small_shift = struct.unpack("<HH", data[30:34].ljust(4, b"\0"))
        if shift not in (9, 12) or small_shift != 6 or len(data) < 512:
            raise damaged(name, "its header is not that of a compound file")
        self.size = 1 << shift
        self.count = -(-len(data) // self.size) - 1  # sectors after that of the header
        (first_directory,) = struct.unpack("<I", data[48:52])
        first_small, _, first_more, _ = struct.unpack("<IIII", data[60:76])
        self.table = self._numbers(self._table_sectors(first_more))
        self.streams = self._read_directory(first_directory)
        root = next((stream for stream in self.streams if stream.kind == _ROOT), None)
        self.small_table = self._numbers(self._chain(first_small)) if first_small < _NO_SECTOR else array("I")
        self.small = self._joined(self._chain(root.start)) if root and root.start < _NO_SECTOR else b""
        for stream in self.streams:
            if stream.kind == _STREAM and stream.size:
                self._chain_of(stream)

    def content(self, stream: _Stream) -> bytes:
        """The bytes of a stream."""
        chain = self._chain_of(stream)
        if stream.size < _SMALL:
            return b"".join(self.small[64 * at : 64 * at + 64] for at in chain)[: stream.size]
        return self._joined(chain)[: stream.size]

    def _chain_of(self, stream: _Stream) -> list[int]:
        small = stream.size < _SMALL
        if small:
            return self._chain(stream.start, self.small_table, len(self.small) // 64 + 1)
        return self._chain(stream.start)

    def _chain(self, at: int, table: array[int] | None = None, count: int | None = None) -> list[int]:
        """The sectors of a chain from one on. Raises InputError where it leads nowhere or in a circle."""
        table, count = self.table if table is None else table, self.count if count is None else count
        chain, seen = [], bytearray(count)
        while at < _NO_SECTOR:
            if at >= min(count, len(table)) or seen[at]:
                raise damaged(self.name, "its parts run in a circle or out of the file")
            seen[at] = 1
            chain.append(at)
            at = table[at]
        return chain

    def _table_sectors(self, more: int) -> list[int]:
        """The sectors of the table of chains: 109 in the header, and further ones in a chain of lists."""
        sectors = [at for at in struct.unpack("<109I", self.data[76:512]) if at < _NO_SECTOR]
        lists = set()
        while more < _NO_SECTOR:
            if more in lists or more >= self.count:
                raise damaged(self.name, "its table runs in a circle or out of the file")
            lists.add(more)
            *listed, more = self._numbers([more])
            sectors += [at for at in listed if at < _NO_SECTOR]
        if len(sectors) > self.count or any(at >= self.count for at in sectors):
            raise damaged(self.name, "its table runs out of the file")
        return sectors

    def _read_directory(self, first: int) -> list[_Stream]:
        data = self._joined(self._chain(first))
        streams = []
        for at in range(0, len(data) - 127, 128):
            entry = data[at : at + 128]
            length, kind = struct.unpack("<HB", entry[64:67])
            start, size, high = struct.unpack("<III", entry[116:128])
            if kind in (_STREAM, _ROOT):
                if (high and self.size > 512) or size > len(self.data):
                    raise damaged(self.name, "a part of it is larger than the file")
                name = entry[: max(min(length, 64) - 2, 0)].decode("utf-16-le", "replace")
                streams.append(_Stream(name, kind, start, size))
        names = [stream.name for stream in streams if stream.kind == _STREAM and stream.name in ("Workbook", "Book")]
        if len(names) > len(set(names)) or len(streams) > MAX_PARTS:
            raise damaged(self.name, "its directory lists a part twice or too many")
        return streams

    def _joined(self, sectors: list[int]) -> bytes:
        return b"".join(self.data[(at + 1) * self.size : (at + 2) * self.size] for at in sectors)

    def _numbers(self, sectors: list[int]) -> array[int]:
        data = self._joined(sectors)
        return array("I", struct.unpack(f"<{len(data) // 4}I", data[: len(data) // 4 * 4]))


# --- the records


class _Records:
    """The records of a workbook: its list of sheets and shared texts first, then the cells of each sheet."""

    def __init__(self, name: str, data: bytes) -> None:
        self.name, self.data = name, data
        self.tally = Tally(name)
        self.walked = 0
        self.lengths = array("q")

    def check(self) -> None:
        """Raise InputError where it is encrypted, damaged, or larger than is read."""
        sheets = []
        shared: list[bytes] = []
        last = 0
        for kind, content in self._walk(0):
            if kind == _PASSWORD:
                raise protected(self.name)
            if kind == _SHEET:
                sheets.append(int.from_bytes(content[:4], "little"))
            if kind == _SHARED or (kind == _CONTINUED and last == _SHARED):
                shared.append(content)
            last = _SHARED if kind == _CONTINUED and last == _SHARED else kind
        if shared:
            self.lengths = _text_lengths(shared)
        if len(set(sheets)) < len(sheets):
            raise damaged(self.name, "two sheets are kept in the same place")
        for number, place in enumerate(sheets, 1):
            self._check_sheet(number, place)

    def _check_sheet(self, number: int, place: int) -> None:
        most_rows = most_columns = cells = 0
        for kind, content in self._walk(place):
            if kind in _SIZES and len(content) >= struct.calcsize(_SIZES[kind]):
                _, rows, _, columns = struct.unpack_from(_SIZES[kind], content)
                self._check_reach(number, rows, columns)
            elif kind in _CELLS and len(content) >= 4:
                row, column = struct.unpack_from("<HH", content)
                if kind == _SEVERAL:
                    column = max(column, int.from_bytes(content[-2:], "little"))
                    cells += len(content) // 6
                self._check_reach(number, row + 1, column + 1)
                cells, most_rows, most_columns = cells + 1, max(most_rows, row + 1), max(most_columns, column + 1)
                if kind == _SHOWS_SHARED and len(content) >= 10:
                    at = int.from_bytes(content[6:10], "little")
                    self.tally.add_text(self.lengths[at] if at < len(self.lengths) else _LONGEST)
            elif kind == _MERGED and len(content) < 2 + 8 * int.from_bytes(content[:2], "little"):
                raise damaged(self.name, f"the list of merged cells of sheet {number} breaks off")
        self.tally.add_area(f"number {number}", most_rows, most_columns, cells)

    def _check_reach(self, number: int, rows: int, columns: int) -> None:
        if rows > ROWS or columns > COLUMNS:
            raise damaged(self.name, f"sheet {number} has cells beyond column IV or row {ROWS:,}")

    def _walk(self, at: int) -> Iterator[tuple[int, bytes]]:
        """Kind and content of each record, to the end of what begins there, including what is within it."""
        data, depth = self.data, 0
        while at + 4 <= len(data):
            kind, length = struct.unpack_from("<HH", data, at)
            self.walked += 1
            if self.walked > MAX_RECORDS:
                raise InputError(f"{self.name}: the workbook has more than {MAX_RECORDS:,} records; {SAVE_AS}")
            yield kind, data[at + 4 : at + 4 + length]
            at += 4 + length
            depth += (kind & 0xFF == _BEGIN & 0xFF and kind <= _BEGIN) - (kind == _END)
            if depth <= 0 and kind == _END:
                return


def _text_lengths(records: list[bytes]) -> array[int]:
    """Characters of each shared text. A text may go on in the next record, where a byte says how wide its characters are.

    What breaks off is as long as it says: the reader refuses it, or takes less.
    """
    lengths = array("q")
    record, at = 0, 8
    while record < len(records):
        content = records[record]
        if at + 3 > len(content):
            record, at = record + 1, at - len(content) if at > len(content) else 0
            continue
        count, flags = struct.unpack_from("<HB", content, at)
        lengths.append(count)
        at += 3
        runs = extra = 0
        if flags & 8:
            runs = int.from_bytes(content[at : at + 2], "little")
            at += 2
        if flags & 4:
            extra = int.from_bytes(content[at : at + 4], "little")
            at += 4
        width = 2 if flags & 1 else 1
        while at + count * width > len(content) and record + 1 < len(records):
            count -= max(len(content) - at, 0) // width
            record, at = record + 1, 1
            content = records[record]
            width = 2 if content[:1] and content[0] & 1 else 1
        at += count * width + 4 * runs + extra
        while at > len(content) and record + 1 < len(records):
            record, at = record + 1, at - len(content)
            content = records[record]
        if at > len(content):
            break
    return lengths
