"""Whether a workbook that is a zip package (.xlsx, .xlsm, .ods) is whole, says the truth about itself, and is small enough.

Zip: the layout of PKWARE's APPNOTE 6.3. Two readers must never take the same file differently, so that what is checked here
is what the reader gets: the directory stands at the end and is the only one, every part is where and as long as the directory
says, and no name comes twice. Workbooks: ECMA-376 and OASIS OpenDocument 1.2. All from memory.
"""

from __future__ import annotations

import posixpath
import struct
import zipfile
import zlib
from collections.abc import Iterator
from pathlib import Path
from typing import BinaryIO

from stripcheck.errors import InputError
from stripcheck.register.safe_cells import Elements, OpenDocument, SharedTexts, SheetCells, SheetList, Tally, local
from stripcheck.register.safe_limits import (
    MAX_BOOK_FILE,
    MAX_INFLATED,
    MAX_PART,
    MAX_PART_NAME,
    MAX_PARTS,
    MAX_PIECE,
    MAX_RATIO,
    MAX_TAGS,
    RATIO_FROM,
    SAVE_AS,
    check_size,
    damaged,
    protected,
)

_BLOCK = 1 << 20
_KINDS = {".xlsx": ".xlsx", ".xlsm": ".xlsx", ".ods": ".ods"}  # ending -> the kind that it stands for
_OPEN_DOCUMENT = b"application/vnd.oasis.opendocument.spreadsheet"
_MANIFEST, _CONTENT = "META-INF/manifest.xml", "content.xml"
_PART, _END, _END_64, _END_64_PLACE = b"PK\x03\x04", b"PK\x05\x06", b"PK\x06\x06", b"PK\x06\x07"
_COMMENT = 65_535  # [bytes] after the directory at the most


def check_package(path: Path) -> None:
    """Raise InputError unless the package is a workbook of the kind that its name says, whole and within ``safe_limits``.

    Each part is unpacked once, a block at a time, and what is XML is parsed.
    """
    check_size(path.name, path.stat().st_size, MAX_BOOK_FILE)
    with path.open("rb") as file:
        directory = _find_directory(path.name, file)
        entries = _entries(path.name, file, directory)
        package = _Package(path.name, file, directory)
        _check_kind(path, entries, package)
        for entry in entries:
            package.check_part(entry)
        package.check_sheets()


# --- the directory


def _find_directory(name: str, file: BinaryIO) -> int:
    """Where the directory begins. Raises InputError unless it is the only one and the last thing in the file."""
    size = file.seek(0, 2)
    at = max(size - _COMMENT - 22 - 76, 0)
    file.seek(at)
    tail = file.read()
    ends = [end for end in _places(tail, _END) if end + 22 + int.from_bytes(tail[end + 20 : end + 22], "little") == len(tail)]
    if len(ends) != 1:
        raise damaged(name, "it breaks off" if not ends else "it has two directories")
    end = ends[0]
    disk, first_disk, here, count, length = struct.unpack("<HHHHI", tail[end + 4 : end + 16])
    begin = int.from_bytes(tail[end + 16 : end + 20], "little")
    stop = at + end
    if end >= 76 and tail[end - 20 : end - 16] == _END_64_PLACE:
        long_end = end - 76
        stop = at + long_end
        if tail[long_end : long_end + 4] != _END_64 or int.from_bytes(tail[end - 12 : end - 4], "little") != stop:
            raise damaged(name, "its directory has no end")
        count, length = struct.unpack("<QQ", tail[long_end + 32 : long_end + 48])
        begin = int.from_bytes(tail[long_end + 48 : long_end + 56], "little")
        here = count
    if (disk, first_disk, here) not in ((0, 0, count), (0xFFFF, 0xFFFF, count)) or begin + length != stop:
        raise damaged(name, "its directory is not where it should be")
    if count > MAX_PARTS or length > MAX_PARTS * 1_000:
        raise InputError(f"{name}: the workbook has {count:,} parts, and at most {MAX_PARTS:,} are read; {SAVE_AS}")
    return begin


def _places(text: bytes, mark: bytes) -> Iterator[int]:
    at = text.find(mark)
    while at >= 0:
        yield at
        at = text.find(mark, at + 1)


def _entries(name: str, file: BinaryIO, directory: int) -> list[zipfile.ZipInfo]:
    """What the directory lists, in the order in which it is to be looked at. Raises InputError for any trick in it."""
    try:
        entries = zipfile.ZipFile(file).infolist()
    except (zipfile.BadZipFile, NotImplementedError, ValueError, OverflowError, struct.error, OSError) as error:
        raise damaged(name, "its directory can't be read") from error
    seen = set()
    for entry in entries:
        _check_name(name, entry.orig_filename)
        _check_entry(name, entry)
        if entry.filename.lower() in seen:
            raise damaged(name, f'the part "{entry.filename}" is there twice')
        seen.add(entry.filename.lower())
    inflated = sum(entry.file_size for entry in entries)
    if inflated > MAX_INFLATED:
        most = f"{MAX_INFLATED / 1e6:,.0f} MB"
        raise InputError(f"{name}: unpacked, the workbook has {inflated / 1e6:,.0f} MB, and at most {most} are read; divide it")
    entries.sort(key=lambda entry: entry.header_offset)
    for entry, end in zip(entries, [*(entry.header_offset for entry in entries[1:]), directory], strict=True):
        if entry.header_offset + 30 + len(entry.filename) + entry.compress_size > end:
            raise damaged(name, f'the part "{entry.filename}" reaches into the next one')
    return sorted(entries, key=lambda entry: (entry.filename != _MANIFEST, not _is_shared(entry.filename)))


def _check_name(name: str, part: str) -> None:
    if len(part) > MAX_PART_NAME:
        raise damaged(name, f'a part has a name of {len(part):,} characters, "{part[:40]}..."')
    steps = part.removesuffix("/").split("/")
    if any(step in ("", ".", "..") for step in steps) or any(letter < " " or letter in "\\:" for letter in part):
        raise damaged(name, f'the part "{part}" has a name that leads elsewhere')


def _check_entry(name: str, entry: zipfile.ZipInfo) -> None:
    part, size, packed = entry.filename, entry.file_size, entry.compress_size
    if entry.flag_bits & 1:
        raise protected(name)
    if entry.compress_type not in (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED):
        raise damaged(name, f'the part "{part}" is packed in an unusual way')
    if size > MAX_PART and not (part.startswith("xl/worksheets/") or part == _CONTENT):
        most = f"{MAX_PART / 1e6:,.0f} MB"
        raise InputError(f'{name}: the part "{part}" has {size / 1e6:,.0f} MB unpacked, and at most {most} are read; {SAVE_AS}')
    if size > RATIO_FROM and size > MAX_RATIO * packed:
        ratio = f"{size / max(packed, 1):,.0f}"
        raise InputError(f'{name}: the part "{part}" unpacks to {ratio} times its size, as no list does; {SAVE_AS}')


def _is_shared(part: str) -> bool:
    return "sharedstrings" in part.lower() and part.lower().endswith(".xml")


def _check_kind(path: Path, entries: list[zipfile.ZipInfo], package: _Package) -> None:
    ends = {posixpath.basename(entry.filename).lower() for entry in entries}
    mimetype = next((entry for entry in entries if entry.filename == "mimetype" and entry.file_size < 100), None)
    if mimetype is not None and b"".join(package.unpacked(mimetype)).strip() == _OPEN_DOCUMENT:
        kind = ".ods"
    elif "workbook.xml" in ends:
        kind = ".xlsx"
    elif "workbook.bin" in ends:
        raise InputError(f"{path.name}: this is a binary workbook (.xlsb), which is not read; {SAVE_AS}")
    else:
        raise InputError(f"{path.name}: this is an archive or another document and no workbook; {SAVE_AS}")
    if _KINDS.get(path.suffix.lower()) != kind:
        raise InputError(f"{path.name}: by its content this is a workbook of the kind {kind}; name it {path.stem}{kind}")


# --- the parts


class _Package:
    """A package, ``name``, whose directory, at ``directory``, was checked."""

    def __init__(self, name: str, file: BinaryIO, directory: int) -> None:
        self.name, self.file, self.directory = name, file, directory
        self.tally, self.tags = Tally(name), 0

    def unpacked(self, entry: zipfile.ZipInfo) -> Iterator[bytes]:
        """The content of a part, in blocks. Raises InputError unless place, length and check sum are those told."""
        part, packed = entry.filename, entry.compress_type == zipfile.ZIP_DEFLATED
        self._go_to(entry)
        size = check = 0
        inflate = zlib.decompressobj(-15)
        left, raw = entry.compress_size, b""
        while left or raw:
            if not raw:
                raw = self.file.read(min(left, _BLOCK))
                left -= len(raw)
            try:
                block = inflate.decompress(raw, _BLOCK) if packed else raw
            except zlib.error as error:
                raise damaged(self.name, f'the part "{part}" can\'t be unpacked') from error
            raw = inflate.unconsumed_tail
            size, check = size + len(block), zlib.crc32(block, check)
            if size > entry.file_size or inflate.unused_data:
                break
            yield block
        if size != entry.file_size or check != entry.CRC or (packed and (not inflate.eof or inflate.unused_data)):
            raise damaged(self.name, f'the part "{part}" is not what the directory says')

    def _go_to(self, entry: zipfile.ZipInfo) -> None:
        """Go to the first byte of a part. Raises InputError where its own header says otherwise than the directory."""
        part = entry.filename
        self.file.seek(entry.header_offset)
        header = self.file.read(30)
        if len(header) < 30 or not header.startswith(_PART):
            raise damaged(self.name, f'the part "{part}" is not where it should be')
        name_length, more = struct.unpack("<HH", header[26:])
        if self.file.read(name_length) != part.encode("utf-8" if entry.flag_bits & 0x800 else "cp437"):
            raise damaged(self.name, f'the part "{part}" has another name where it stands')
        if self.file.seek(more, 1) + entry.compress_size > self.directory:
            raise damaged(self.name, f'the part "{part}" has no end')

    def check_part(self, entry: zipfile.ZipInfo) -> None:
        """Unpack a part and, where it is XML, count what is in it. Raises InputError."""
        part, kind = entry.filename, entry.filename.lower().rpartition(".")[2]
        if kind in ("xml", "rels"):
            self._check_xml(part, self.unpacked(entry))
            return
        for block in self.unpacked(entry):
            if kind == "vml" and (b"<!DOCTYPE" in block or b"<!ENTITY" in block):  # drawings, which no reader here looks at
                raise self._defines(part)

    def check_sheets(self) -> None:
        """Raise InputError where a sheet is kept in a part that is no XML, or two are kept in the same one."""
        targets = self.tally.targets
        parts = [_resolved(targets[sheet]) for sheet in self.tally.sheet_ids if sheet in targets]
        if not all(part.endswith(".xml") for part in parts):
            raise damaged(self.name, "a sheet is kept in a part that is none")
        if len(set(parts)) < len(parts):
            raise damaged(self.name, "two sheets are kept in the same part")

    def _check_xml(self, part: str, blocks: Iterator[bytes]) -> None:
        from xml.parsers import expat

        parser = expat.ParserCreate("UTF-8")  # as every reader takes it, whatever the part says of itself
        parser.XmlDeclHandler = lambda version, encoding, standalone: self._check_encoding(part, encoding)
        parser.StartDoctypeDeclHandler = lambda *_: self._refuse_definitions(part)
        literal: list[int] = []  # where a section began that is taken literally and has not ended
        parser.StartCdataSectionHandler = lambda: literal.append(parser.CurrentByteIndex)
        parser.EndCdataSectionHandler = literal.clear
        counter = self._counter(part)(self.tally, part, parser)
        fed = without = 0
        try:
            for block in blocks:
                if fed == 0 and block.startswith((b"\xff\xfe", b"\xfe\xff")):
                    self._check_encoding(part, "UTF-16")
                parser.Parse(block, False)
                fed += len(block)
                last = block.rfind(b"<")
                without = len(block) - last if last >= 0 else without + len(block)
                begun = literal[0] if literal else max(parser.CurrentByteIndex, 0)
                if max(without, fed - begun) > MAX_PIECE:
                    raise damaged(self.name, f'the part "{part}" has a text without an end')
                self.tags += block.count(b"<")
                if self.tags > MAX_TAGS:
                    raise InputError(f"{self.name}: the workbook has more than {MAX_TAGS:,} elements; divide it")
            parser.Parse(b"", True)
        except expat.ExpatError as error:
            raise damaged(self.name, f'part "{part}": {error}') from error
        counter.finish()

    def _counter(self, part: str) -> type[Elements]:
        if part == _CONTENT:
            return OpenDocument
        if part == _MANIFEST:
            return _Manifest
        if _is_shared(part):
            return SharedTexts
        return SheetList if part.lower().endswith(("workbook.xml", "workbook.xml.rels")) else SheetCells

    def _check_encoding(self, part: str, encoding: str | None) -> None:
        if (encoding or "utf-8").lower() not in ("utf-8", "utf8", "us-ascii", "ascii"):
            raise damaged(self.name, f'the part "{part}" is written in {encoding}, not in UTF-8')

    def _refuse_definitions(self, part: str) -> None:
        raise self._defines(part)

    def _defines(self, part: str) -> InputError:
        return damaged(self.name, f'the part "{part}" defines a document type or entities, as no workbook does')


class _Manifest(Elements):
    """The list of the parts of an .ods, which says which are encrypted."""

    def start(self, tag: str, given: dict[str, str]) -> None:
        super().start(tag, given)
        if local(tag) == "encryption-data":
            raise protected(self.tally.name)


def _resolved(target: str) -> str:
    """A part's name from the folder of the workbook, in small letters, however a link spells it."""
    return posixpath.normpath("/" + target.replace("\\", "/").lower().removeprefix("/").removeprefix("xl/"))
