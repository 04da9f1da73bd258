"""Workbooks made part by part, so that a test can put anything into them. The strips are invented."""

from __future__ import annotations

import struct
import zipfile
import zlib
from collections.abc import Mapping
from pathlib import Path

from tests.register.lists import write_ods

MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
RELATIONS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
PACKAGE = "http://schemas.openxmlformats.org/package/2006"
HEAD = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>'

# A list of two columns as the rows of a sheet: shared texts, inline ones and numbers
ROWS = (
    '<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="inlineStr"><is><t>Length [m]</t></is></c></row>'
    '<row r="2"><c r="A2" t="s"><v>1</v></c><c r="B2"><v>620</v></c></row>'
)
SHARED = f'{HEAD}<sst xmlns="{MAIN}" count="2" uniqueCount="2"><si><t>Strip</t></si><si><t>Otter Bend</t></si></sst>'


def xlsx_parts(rows: str = ROWS, shared: str = SHARED, before: str = "") -> dict[str, str]:
    """The parts of a workbook with one sheet "Strips"; ``before`` stands before the rows."""
    sheet = f"{RELATIONS}/worksheet"
    links = (("rId1", sheet, "worksheets/sheet1.xml"), ("rId2", f"{RELATIONS}/sharedStrings", "sharedStrings.xml"))
    return {
        "[Content_Types].xml": f'{HEAD}<Types xmlns="{PACKAGE}/content-types">'
        '<Default Extension="xml" ContentType="application/xml"/></Types>',
        "_rels/.rels": relations(("rId1", f"{RELATIONS}/officeDocument", "xl/workbook.xml")),
        "xl/workbook.xml": f'{HEAD}<workbook xmlns="{MAIN}" xmlns:r="{RELATIONS}"><sheets>'
        '<sheet name="Strips" sheetId="1" r:id="rId1"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": relations(*links),
        "xl/worksheets/sheet1.xml": f'{HEAD}<worksheet xmlns="{MAIN}">{before}<sheetData>{rows}</sheetData></worksheet>',
        "xl/sharedStrings.xml": shared,
    }


def relations(*links: tuple[str, str, str], more: str = "") -> str:
    """A list of links: identifier, type and target of each."""
    texts = "".join(f'<Relationship Id="{name}" Type="{kind}" Target="{target}"/>' for name, kind, target in links)
    return f'{HEAD}<Relationships xmlns="{PACKAGE}/relationships">{texts}{more}</Relationships>'


def pack(path: Path, parts: Mapping[str, str | bytes]) -> Path:
    """A package of these parts."""
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
        for name, content in parts.items():
            package.writestr(name, content)
    return path


def xlsx(path: Path, rows: str = ROWS, *, shared: str = SHARED, before: str = "", **parts: str | bytes) -> Path:
    """A workbook with one sheet; parts by name replace those of the same name or are added."""
    return pack(path, {**xlsx_parts(rows, shared, before), **parts})


def ods(path: Path, rows: str) -> Path:
    """An OpenDocument spreadsheet whose one table has these rows."""
    write_ods(path, [])
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    table = b'<table:table table:name="Strips">'
    assert table in parts["content.xml"]
    parts["content.xml"] = parts["content.xml"].replace(table, table + rows.encode())
    return pack(path, parts)


def stored(parts: Mapping[str, bytes], **changes: Mapping[str, int]) -> bytes:
    """A zip package written by hand, each part deflated, with fields that may lie.

    ``changes``: for "local", "central" and "end" the fields that are to have another value.
    """
    body, central = b"", b""
    for name, content in parts.items():
        deflate = zlib.compressobj(6, zlib.DEFLATED, -15)
        packed = deflate.compress(content) + deflate.flush()
        fields = {"method": 8, "crc": zlib.crc32(content), "packed": len(packed), "size": len(content), "flags": 0}
        fields |= {"offset": len(body), "name": len(name), "extra": 0}
        local, listed = fields | dict(changes.get("local", {})), fields | dict(changes.get("central", {}))
        central += b"PK\1\2" + struct.pack(
            "<HHHHHHIIIHHHHHII", 20, 20, listed["flags"], listed["method"], 0, 0, listed["crc"], listed["packed"],
            listed["size"], listed["name"], 0, 0, 0, 0, 0, listed["offset"],
        ) + name.encode()  # fmt: skip
        body += b"PK\3\4" + struct.pack(
            "<HHHHHIIIHH", 20, local["flags"], local["method"], 0, 0, local["crc"], local["packed"], local["size"],
            local["name"], local["extra"],
        ) + name.encode() + packed  # fmt: skip
    end = {"disk": 0, "count": len(parts), "length": len(central), "begin": len(body)} | dict(changes.get("end", {}))
    return body + central + b"PK\5\6" + struct.pack(
        "<HHHHIIH", end["disk"], 0, end["count"], end["count"], end["length"], end["begin"], 0
    )  # fmt: skip
