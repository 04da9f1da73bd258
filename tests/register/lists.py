"""Small workbooks in formats for which the test tools have no writer. The strips in them are invented."""

from __future__ import annotations

import struct
import zipfile
from pathlib import Path
from xml.sax.saxutils import escape

Cell = str | float


def write_ods(path: Path, rows: list[list[Cell]]) -> None:
    """An OpenDocument spreadsheet with one sheet "Strips" (structure: OASIS OpenDocument 1.2, from memory)."""
    cells = ""
    for row in rows:
        cells += "<table:table-row>" + "".join(_ods_cell(cell) for cell in row) + "</table:table-row>"
    names = " ".join(
        f'xmlns:{short}="urn:oasis:names:tc:opendocument:xmlns:{name}:1.0"'
        for short, name in (("office", "office"), ("table", "table"), ("text", "text"))
    )
    content = (
        f'<?xml version="1.0" encoding="UTF-8"?><office:document-content {names} office:version="1.2"><office:body>'
        f'<office:spreadsheet><table:table table:name="Strips">{cells}</table:table></office:spreadsheet>'
        "</office:body></office:document-content>"
    )
    kind = "application/vnd.oasis.opendocument.spreadsheet"
    manifest = (
        '<?xml version="1.0"?><manifest:manifest '
        'xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0">'
        f'<manifest:file-entry manifest:full-path="/" manifest:media-type="{kind}"/></manifest:manifest>'
    )
    with zipfile.ZipFile(path, "w") as book:
        book.writestr("mimetype", kind)
        book.writestr("META-INF/manifest.xml", manifest)
        book.writestr("content.xml", content)


def _ods_cell(cell: Cell) -> str:
    if isinstance(cell, str):
        return f'<table:table-cell office:value-type="string"><text:p>{escape(cell)}</text:p></table:table-cell>'
    return f'<table:table-cell office:value-type="float" office:value="{cell}"/>'


def write_xls(path: Path, rows: list[list[Cell]]) -> None:
    """A BIFF8 workbook with one sheet "Strips" in a compound file.

    Structure: Microsoft's open specifications [MS-XLS] and [MS-CFB], from memory.
    """
    sheet = _record(0x809, struct.pack("<HHHHII", 0x600, 0x10, 0, 0, 0, 0))
    for at_row, row in enumerate(rows):
        for at_column, cell in enumerate(row):
            place = struct.pack("<HHH", at_row, at_column, 0)
            if isinstance(cell, str):
                text = cell.encode("latin-1")
                sheet += _record(0x204, place + struct.pack("<HB", len(text), 0) + text)
            else:
                sheet += _record(0x203, place + struct.pack("<d", cell))
    sheet += _record(0x0A, b"")
    start = _record(0x809, struct.pack("<HHHHII", 0x600, 0x05, 0, 0, 0, 0))
    name = b"\x06\0Strips"
    at_sheet = len(start) + 4 + 6 + len(name) + 4
    book = start + _record(0x85, struct.pack("<IH", at_sheet, 0) + name) + _record(0x0A, b"") + sheet
    path.write_bytes(_compound_file(book.ljust(4096, b"\0")))


def _record(kind: int, data: bytes) -> bytes:
    return struct.pack("<HH", kind, len(data)) + data


def _compound_file(stream: bytes) -> bytes:
    """A compound file of 512-byte sectors: sector 0 the allocation table, 1 the directory, from 2 on the stream."""
    stream = stream.ljust(-(-len(stream) // 512) * 512, b"\0")
    count = len(stream) // 512
    end, free = 0xFFFFFFFE, 0xFFFFFFFF
    chain = [0xFFFFFFFD, end, *range(3, 2 + count), end]
    table = struct.pack("<128I", *chain, *[free] * (128 - len(chain)))
    header = bytes.fromhex("D0CF11E0A1B11AE1") + bytes(16) + struct.pack("<HHHHH", 0x3E, 3, 0xFFFE, 9, 6) + bytes(6)
    header += struct.pack("<IIIIIIIII", 0, 1, 1, 0, 4096, end, 0, end, 0) + struct.pack("<109I", 0, *[free] * 108)
    directory = _entry("Root Entry", 5, 1, end, 0) + _entry("Workbook", 2, free, 2, len(stream))
    return header + table + directory.ljust(512, b"\0") + stream


def _entry(name: str, kind: int, child: int, start: int, size: int) -> bytes:
    free = 0xFFFFFFFF
    text = name.encode("utf-16-le") + b"\0\0"
    links = struct.pack("<HBBIII", len(text), kind, 1, free, free, child)
    return text.ljust(64, b"\0") + links + bytes(36) + struct.pack("<IQ", start, size)
