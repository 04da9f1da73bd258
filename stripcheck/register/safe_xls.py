"""An old workbook (.xls) without anything but its cells, so that its reader meets nothing that could break it.

The file system within the file is walked first: a chain of sectors that runs in a circle would keep a reader going until
the memory is gone. Then the records of the workbook are walked, the cells counted, and every record that is neither a cell
nor needed to understand one is blotted out: macros, names, links and the texts of formulas are never looked at. What is left
stands in a new compound file. Structure: Microsoft's open specifications [MS-CFB] and [MS-XLS], from memory.
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

_NO_SECTOR = 0xFFFFFFFA  # sector numbers from here on mean something else, such as the end of a chain
_LONGEST = 65_535  # [characters] of a text
_SMALL = 4096  # [bytes] below which a stream stands among the small ones
_STREAM, _ROOT = 2, 5

_BEGIN, _END, _SHEET, _PASSWORD, _CONTINUED = 0x809, 0x0A, 0x85, 0x2F, 0x3C
_SHARED, _SHOWS_SHARED, _SEVERAL, _FORMULAS = 0xFC, 0xFD, 0xBD, (0x06, 0x206, 0x406)
_BLOTTED = 0xFFF  # a kind of record that no reader knows
# kind of a record that is kept -> the least bytes that it must have. Cells: formula, number, label, true or false, shared
# text, several numbers, and the text that a formula gives; then what tells of dates, character sets and sheets
_CELLS = dict.fromkeys(_FORMULAS, 22) | {0x203: 14, 0x27E: 10, 0x204: 9, 0xD6: 9, 0x205: 8, _SHOWS_SHARED: 10, _SEVERAL: 12}
_KEPT = _CELLS | {0x207: 3, _BEGIN: 4, _END: 0, _SHEET: 8, _SHARED: 8, 0x42: 2, 0x22: 2, 0x41E: 5, 0xE0: 4}


def clean_workbook(path: Path) -> bytes:
    """The cells of an .xls as a compound file that can be given to a reader.

    Raises InputError unless it is a whole .xls workbook within ``safe_limits``, not encrypted, and named so.
    """
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
    return _compound_file(book.name, _Records(path.name, file.content(book)).cleaned())


class _Stream(NamedTuple):
    name: str
    kind: int
    start: int
    size: int


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
        self.name, self.data = name, bytearray(data)
        self.tally = Tally(name)
        self.walked = 0
        self.lengths = array("q")

    def cleaned(self) -> bytes:
        """All of them, those that are not needed blotted out. Raises InputError for what is damaged or too large."""
        sheets, shared = [], []
        for kind, content in self._walk(0):
            if kind == _SHEET:
                sheets.append(int.from_bytes(content[:4], "little"))
            elif kind in (_SHARED, _CONTINUED):
                shared.append(content)
        if shared:
            self.lengths = _text_lengths(self.name, shared)
        if len(set(sheets)) < len(sheets):
            raise damaged(self.name, "two sheets are kept in the same place")
        for number, place in enumerate(sheets, 1):
            self._check_sheet(number, place)
        return bytes(self.data)

    def _check_sheet(self, number: int, place: int) -> None:
        if self.data[place : place + 2] != _BEGIN.to_bytes(2, "little"):
            raise damaged(self.name, f"sheet {number} is not where it should be")
        most_rows = most_columns = cells = 0
        for kind, content in self._walk(place):
            if kind not in _CELLS:
                continue
            row, column = struct.unpack_from("<HH", content)
            if kind == _SEVERAL:
                last = int.from_bytes(content[-2:], "little")
                if len(content) != 6 + 6 * (last - column + 1):
                    raise damaged(self.name, f"row {row + 1} of sheet {number} breaks off")
                cells, column = cells + last - column, last
            if column >= COLUMNS:
                raise damaged(self.name, f"sheet {number} has a cell beyond column IV")
            cells, most_rows, most_columns = cells + 1, max(most_rows, row + 1), max(most_columns, column + 1)
            if kind == _SHOWS_SHARED:
                at = int.from_bytes(content[6:10], "little")
                self.tally.add_text(self.lengths[at] if at < len(self.lengths) else _LONGEST)
        self.tally.add_area(f"number {number}", most_rows, most_columns, cells)

    def _walk(self, at: int) -> Iterator[tuple[int, bytes]]:
        """Kind and content of each record that is kept, to the end of what begins there and all that is within it."""
        data, depth, last = self.data, 0, 0
        while at + 4 <= len(data):
            kind, length = struct.unpack_from("<HH", data, at)
            self.walked += 1
            if self.walked > MAX_RECORDS:
                raise InputError(f"{self.name}: the workbook has more than {MAX_RECORDS:,} records; {SAVE_AS}")
            if kind == _PASSWORD:
                raise protected(self.name)
            if kind in _KEPT or (kind == _CONTINUED and last == _SHARED):
                content = bytes(data[at + 4 : at + 4 + length])
                if len(content) < max(length, _KEPT.get(kind, 0)):
                    raise damaged(self.name, "a record breaks off")
                if kind in _FORMULAS:
                    data[at + 24 : at + 26] = bytes(2)  # the length of the formula's text: the value stands before it
                yield kind, content
                last = _SHARED if kind == _CONTINUED else kind
                depth += (kind == _BEGIN) - (kind == _END)
                if kind == _END and depth <= 0:
                    return
            else:
                data[at : at + 2] = _BLOTTED.to_bytes(2, "little")
                last = 0
            at += 4 + length


def _compound_file(name: str, stream: bytes) -> bytes:
    """A compound file with one stream, in sectors of 4,096 bytes: tables of chains, directory, small streams, the stream."""
    size, end, free = 4096, 0xFFFFFFFE, 0xFFFFFFFF
    count = max(-(-len(stream) // size), 1)
    tables = 1
    while tables * size // 4 < tables + 2 + count:
        tables += 1
    chains = [0xFFFFFFFD] * tables + [end, end] + [tables + 3 + at for at in range(count - 1)] + [end]
    chains += [free] * (tables * size // 4 - len(chains))
    header = bytes.fromhex("D0CF11E0A1B11AE1") + bytes(16) + struct.pack("<HHHHH", 0x3E, 4, 0xFFFE, 12, 6) + bytes(6)
    header += struct.pack("<IIIIIIIII", 1, tables, tables, 0, _SMALL, end, 0, end, 0)
    header += struct.pack("<109I", *range(tables), *[free] * (109 - tables))
    directory = _directory_entry("Root Entry", _ROOT, 1, tables + 1, size)  # a reader wants small streams, if only blank ones
    directory += _directory_entry(name, _STREAM, free, tables + 2, count * size)
    blocks = (header, struct.pack(f"<{len(chains)}I", *chains), directory, b"", stream)
    return b"".join(block.ljust(-(-max(len(block), 1) // size) * size, b"\0") for block in blocks)


def _directory_entry(name: str, kind: int, child: int, start: int, size: int) -> bytes:
    text = name.encode("utf-16-le") + b"\0\0"
    links = struct.pack("<HBBIII", len(text), kind, 1, 0xFFFFFFFF, 0xFFFFFFFF, child)
    return text.ljust(64, b"\0") + links + bytes(36) + struct.pack("<IQ", start, size)


def _text_lengths(name: str, records: list[bytes]) -> array[int]:
    """Characters of each shared text. Raises InputError where the texts break off.

    A text may go on in the next record, where a byte says anew how wide its characters are; its head may not.
    """
    lengths = array("q")
    texts = _Texts(name, records)
    total = int.from_bytes(records[0][4:8], "little")
    while len(lengths) < total and not texts.at_end():
        count, flags = struct.unpack("<HB", texts.whole(3))
        runs = int.from_bytes(texts.whole(2), "little") if flags & 8 else 0
        extra = int.from_bytes(texts.whole(4), "little") if flags & 4 else 0
        texts.skip_characters(count, 2 if flags & 1 else 1)
        texts.skip(4 * runs + extra)
        lengths.append(count)
    return lengths


class _Texts:
    """A place within the records of the shared texts."""

    def __init__(self, name: str, records: list[bytes]) -> None:
        self.name, self.records = name, records
        self.record, self.at = 0, 8

    def at_end(self) -> bool:
        """Whether nothing is left; goes on to the next record where one is over."""
        while self.at >= len(self.records[self.record]):
            if self.record + 1 == len(self.records):
                return True
            self._next()
        return False

    def whole(self, count: int) -> bytes:
        """So many bytes that stand together."""
        found = self.records[self.record][self.at : self.at + count]
        if len(found) < count:
            raise damaged(self.name, "its texts break off")
        self.at += count
        return found

    def skip_characters(self, count: int, width: int) -> None:
        """Go past so many characters of so many bytes."""
        while count * width > (here := len(self.records[self.record]) - self.at):
            count -= here // width
            self._next()
            width = 2 if self.whole(1)[0] & 1 else 1
        self.at += count * width

    def skip(self, count: int) -> None:
        """Go past so many bytes."""
        while count > (here := len(self.records[self.record]) - self.at):
            count -= here
            self._next()
        self.at += count

    def _next(self) -> None:
        if self.record + 1 == len(self.records):
            raise damaged(self.name, "its texts break off")
        self.record, self.at = self.record + 1, 0
