"""Files from anywhere: each is refused with one sentence, or read without harm. Names and strips are invented.

What takes all memory or never ends would take the test process with it, so the worst ones are read in a process of their
own that may have 1 GB and a minute.
"""

from __future__ import annotations

import builtins
import csv
import io
import os
import random
import socket
import struct
import subprocess
import sys
import time
import tracemalloc
import zipfile
import zlib
from collections.abc import Callable, Iterator
from itertools import product
from pathlib import Path
from xml.parsers import expat

import openpyxl
import pytest
from openpyxl.chart import BarChart

from stripcheck.cli import main
from stripcheck.errors import LONGEST, InputError
from stripcheck.register import read_list, safe_cells, safe_limits, safe_package
from stripcheck.register.read_table import read_table, text_rows, workbook_sheets
from stripcheck.register.safe_cells import SheetCells, Tally
from stripcheck.register.safe_read import check_workbook
from tests.register.lists import write_ods, write_xls
from tests.register.packages import HEAD, MAIN, PACKAGE, RELATIONS, ROWS, SHARED, ods, pack, relations, stored, xlsx, xlsx_parts

LIST = [["Strip", "Length [m]"], ["Otter Bend", 620.0]]
SHEET = "xl/worksheets/sheet1.xml"


def sentence_of(path: Path, read: Callable[[Path], object] = read_table) -> str:
    """The sentence with which a file is refused."""
    with pytest.raises(InputError) as error:
        read(path)
    said = str(error.value)
    assert said.startswith(path.name) and "\n" not in said and len(said) <= LONGEST
    return said


def cells_of(path: Path) -> list[list[object]]:
    table = read_table(path)
    return [list(table.headers), *map(list, zip(*table.cells, strict=True))]


IN_BOUNDS = """
import resource, sys
from pathlib import Path
from stripcheck.errors import InputError
from stripcheck.register import read_list
resource.setrlimit(resource.RLIMIT_AS, (1 << 30, 1 << 30))
resource.setrlimit(resource.RLIMIT_CPU, (60, 60))
try:
    read_list(Path(sys.argv[1]))
except InputError as error:
    print(error)
"""


def sentence_in_bounds(path: Path) -> str:
    """As `sentence_of`, in a process that may have 1 GB of memory and a minute."""
    done = subprocess.run([sys.executable, "-c", IN_BOUNDS, str(path)], capture_output=True, text=True)
    assert (done.returncode, done.stderr) == (0, "") and done.stdout.count("\n") == 1
    return done.stdout


# --- what it is


@pytest.mark.parametrize(
    ("content", "says"),
    [
        (b"%PDF-1.7\n...", "this is a PDF document"),
        (b"\x89PNG\r\n\x1a\n" + bytes(50), "this is a picture"),
        (b"\xff\xd8\xff\xe0" + bytes(50), "this is a picture"),
        (b"<!DOCTYPE html><html><table><tr><td>Strip</td></tr></table></html>", "this is a web page"),
        (b"\xef\xbb\xbf\n  <HTML xmlns:x='excel'><table>", "this is a web page"),
        (b"<table><tr><td>Strip</td></tr></table>", "this is a web page"),
        (b'<?xml version="1.0"?><Workbook xmlns="urn:schemas-microsoft-com:office:spreadsheet">', "this is an XML file"),
        (b"{\\rtf1 Strip}", "this is a text document"),
        (b"Rar!\x1a\x07\x00" + bytes(50), "this is an archive"),
        (b"\x1f\x8b\x08" + bytes(50), "this is an archive"),
    ],
)
@pytest.mark.parametrize("ending", [".xlsx", ".xlsm", ".xls", ".ods", ".csv"])
def test_what_is_something_else(tmp_path: Path, content: bytes, says: str, ending: str) -> None:
    (tmp_path / f"strips{ending}").write_bytes(content)
    assert says in sentence_of(tmp_path / f"strips{ending}")


@pytest.mark.parametrize("ending", [".xlsx", ".xls", ".ods"])
def test_texts_and_bytes_with_the_ending_of_a_workbook(tmp_path: Path, ending: str) -> None:
    path = tmp_path / f"strips{ending}"
    path.write_text("Strip,Length\nA,600\n")
    assert "this is a text and no workbook; name it .csv if it is a list" in sentence_of(path)
    path.write_bytes(random.Random(1).randbytes(5_000))
    assert "this is no workbook, or a damaged one" in sentence_of(path)


def test_workbooks_with_the_ending_of_another_kind(tmp_path: Path) -> None:
    made = {".xlsx": xlsx, ".ods": lambda path: write_ods(path, LIST), ".xls": lambda path: write_xls(path, LIST)}
    for kind, make in made.items():
        make(tmp_path / f"book{kind}")
        assert cells_of(tmp_path / f"book{kind}") == LIST
        for other in {".xlsx", ".xlsm", ".ods", ".xls", ".csv"} - {kind}:
            if (kind, other) == (".xlsx", ".xlsm"):
                continue  # one kind
            path = (tmp_path / f"book{kind}").rename(tmp_path / f"other{other}")
            says = (
                "this is a workbook and no text file"
                if other == ".csv"
                else f"a workbook of the kind {kind}; name it other{kind}"
            )
            assert says in sentence_of(path)
            path.rename(tmp_path / f"book{kind}")


def test_other_documents_of_the_same_packing(tmp_path: Path) -> None:
    pack(tmp_path / "a.xlsx", {"[Content_Types].xml": HEAD + "<Types/>", "word/document.xml": HEAD + "<document/>"})
    pack(tmp_path / "a.ods", {"mimetype": "application/vnd.oasis.opendocument.text", "content.xml": HEAD + "<content/>"})
    for name in ("a.xlsx", "a.ods"):
        assert "this is an archive or another document and no workbook" in sentence_of(tmp_path / name)
    pack(tmp_path / "b.xlsx", {"xl/workbook.bin": bytes(20)})
    assert "this is a binary workbook (.xlsb), which is not read" in sentence_of(tmp_path / "b.xlsx")
    path = tmp_path / "c.xls"
    write_xls(path, LIST)
    path.write_bytes(path.read_bytes().replace("Workbook".encode("utf-16-le"), "Document".encode("utf-16-le")))
    assert "this is a document of another program and no workbook" in sentence_of(path)


def test_workbooks_with_a_password(tmp_path: Path) -> None:
    says = "the workbook is protected by a password; save a copy without it"
    # .xlsx: the package is a stream of a compound file (MS-OFFCRYPTO, from memory)
    path = tmp_path / "a.xlsx"
    write_xls(path, LIST)
    name = "EncryptedPackage".encode("utf-16-le")
    content = bytearray(path.read_bytes())
    at = content.index("Workbook".encode("utf-16-le"))
    content[at : at + len(name)] = name
    content[at + 64 : at + 66] = struct.pack("<H", len(name) + 2)
    path.write_bytes(content)
    assert says in sentence_of(path)
    # .xls: a record says so
    path = tmp_path / "a.xls"
    write_xls(path, LIST)
    content = bytearray(path.read_bytes())
    at = content.index(struct.pack("<HH", 0x85, 14))
    content[at : at + 2] = struct.pack("<H", 0x2F)
    path.write_bytes(content)
    assert says in sentence_of(path)
    # .ods: the list of parts says so
    path = tmp_path / "a.ods"
    write_ods(path, LIST)
    with zipfile.ZipFile(path) as package:
        parts = {part: package.read(part) for part in package.namelist()}
    manifest = parts["META-INF/manifest.xml"]
    parts["META-INF/manifest.xml"] = manifest.replace(
        b"</manifest:manifest>", b"<manifest:encryption-data/></manifest:manifest>"
    )
    parts["content.xml"] = random.Random(2).randbytes(500)
    assert says in sentence_of(pack(path, parts))
    # a part of the package is encrypted
    (tmp_path / "b.xlsx").write_bytes(stored(bytes_of(xlsx_parts()), central={"flags": 1}))
    assert says in sentence_of(tmp_path / "b.xlsx")


def bytes_of(parts: dict[str, str]) -> dict[str, bytes]:
    return {name: text.encode() for name, text in parts.items()}


# --- the package


def test_truncated_anywhere(tmp_path: Path) -> None:
    for make in (xlsx, lambda path: write_ods(path, LIST), lambda path: write_xls(path, LIST)):
        path = tmp_path / {0: "a.xlsx", 1: "a.ods", 2: "a.xls"}[len(list(tmp_path.iterdir()))]
        make(path)
        whole = path.read_bytes()
        for size in (4, 20, 100, 512, len(whole) // 3, len(whole) // 2, len(whole) - 1):
            if size < len(whole) - 1 or path.suffix != ".xls":  # which ends with blank bytes
                path.write_bytes(whole[:size])
                sentence_of(path)


def test_a_zip_bomb_of_one_part(tmp_path: Path) -> None:
    blank = b" " * 400_000_000
    sheet = xlsx_parts()[SHEET].replace("<sheetData>", "<sheetData>{}").encode()
    path = xlsx(tmp_path / "a.xlsx", **{SHEET: sheet.replace(b"{}", blank)})
    del blank
    assert path.stat().st_size < 500_000
    start = time.monotonic()
    assert "unpacks to" in sentence_in_bounds(path) and time.monotonic() - start < 30  # it is refused without unpacking


def test_bombs_of_other_shapes(tmp_path: Path) -> None:
    for name in ("xl/media/image1.png", "xl/sharedStrings.xml", "xl/styles.xml"):
        path = tmp_path / "a.xlsx"
        with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as package:
            for part, text in xlsx_parts().items():
                if part != name:
                    package.writestr(part, text)
            with package.open(name, "w") as file:
                for _ in range(257):
                    file.write(bytes(1_000_000))
        assert f'the part "{name}" has 257 MB unpacked, and at most 256 MB are read' in sentence_in_bounds(path)
    with zipfile.ZipFile(tmp_path / "b.xlsx", "w") as package:
        for part, text in xlsx_parts().items():
            package.writestr(part, text)
        for number in range(5_001):
            package.writestr(f"xl/media/{number}", "")
    assert "has 5,007 parts, and at most 5,000 are read" in sentence_of(tmp_path / "b.xlsx")


def test_all_parts_together_are_limited(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = xlsx(tmp_path / "a.xlsx", **{"xl/media/1": bytes(2_000), "xl/media/2": bytes(2_000)})
    monkeypatch.setattr(safe_package, "MAX_INFLATED", 4_000)
    assert "unpacked, the workbook has 0 MB, and at most 0 MB are read; divide it" in sentence_of(path)


@pytest.mark.parametrize("lie", ["size", "crc", "packed"])
@pytest.mark.parametrize("where", ["central", "both"])
def test_a_package_that_lies_about_its_parts(tmp_path: Path, lie: str, where: str) -> None:
    # another reader would go on unpacking: what it gets must be what was looked at
    path, parts = tmp_path / "a.xlsx", bytes_of(xlsx_parts())
    for value in (0, 1, 10):
        changes = {"central": {lie: value}} | ({"local": {lie: value}} if where == "both" else {})
        path.write_bytes(stored(parts, **changes))
        assert "the workbook is damaged" in sentence_of(path)


def test_a_part_whose_check_sum_is_that_of_its_first_bytes(tmp_path: Path) -> None:
    content = HEAD.encode() + b"<x>" + b" " * 1_000_000 + b"</x>"
    first = content[:100]
    path = tmp_path / "a.xlsx"
    changes = {"size": 100, "crc": zlib.crc32(first)}
    parts = stored({"xl/workbook.xml": content}, central=changes, local=changes)
    path.write_bytes(parts)
    assert "is not what the directory says" in sentence_of(path)


def test_a_package_with_two_directories_or_none(tmp_path: Path) -> None:
    path, parts = tmp_path / "a.xlsx", bytes_of(xlsx_parts())
    whole = stored(parts)
    end = whole.rindex(b"PK\5\6")
    fake = whole[end:]
    comment = whole[: end + 20] + struct.pack("<H", len(fake)) + fake  # a second end within the comment of the first
    for content in (
        comment,
        b"PK\3\4 before" + whole,
        whole + b"after",
        whole[:end] + b"gap" + whole[end:],
        whole[:end],
        whole[:end] + b"PK\6\7" + bytes(16) + whole[end:],
    ):
        path.write_bytes(content)
        assert "the workbook is damaged" in sentence_of(path)
    for lie in ({"count": 3}, {"disk": 1}, {"begin": 0}, {"length": 10}, {"begin": 0xFFFFFFFF}, {"count": 0xFFFF}):
        path.write_bytes(stored(parts, end=lie))
        sentence_of(path)
    path.write_bytes(whole)
    assert cells_of(path) == LIST


def test_a_comment_and_a_large_package_s_directory_are_no_harm(tmp_path: Path) -> None:
    path, whole = tmp_path / "a.xlsx", stored(bytes_of(xlsx_parts()))
    end = whole.rindex(b"PK\5\6")
    path.write_bytes(whole[: end + 20] + struct.pack("<H", 5) + b"hello")
    assert cells_of(path) == LIST
    # the form for packages beyond 4 GB, which some programs always write (APPNOTE 4.3.14, from memory)
    count, length, begin = struct.unpack("<HII", whole[end + 10 : end + 20])
    long_end = b"PK\6\6" + struct.pack("<QHHIIQQQQ", 44, 45, 45, 0, 0, count, count, length, begin)
    place = b"PK\6\7" + struct.pack("<IQI", 0, end, 1)
    path.write_bytes(whole[:end] + long_end + place + whole[end:])
    assert cells_of(path) == LIST


@pytest.mark.parametrize(
    "name",
    [
        "../evil.xml",
        "xl/../../evil.xml",
        "/etc/evil.xml",
        "C:/evil.xml",
        "xl\\evil.xml",
        "xl//evil.xml",
        "./evil.xml",
        "xl/ev\nil.xml",
        "xl/evil.xml\0.png",
        "..",
    ],
)
def test_names_of_parts_that_lead_elsewhere(tmp_path: Path, name: str) -> None:
    parts = bytes_of(xlsx_parts()) | {name: b"<x/>"}
    (tmp_path / "a.xlsx").write_bytes(stored(parts))
    assert "has a name that leads elsewhere" in sentence_of(tmp_path / "a.xlsx")
    assert [path.name for path in tmp_path.iterdir()] == ["a.xlsx"]


def test_over_long_and_repeated_names_of_parts(tmp_path: Path) -> None:
    path = tmp_path / "a.xlsx"
    path.write_bytes(stored(bytes_of(xlsx_parts()) | {"x" * 60_000: b""}))
    assert "a part has a name of 60,000 characters" in sentence_of(path)
    path.write_bytes(stored(bytes_of(xlsx_parts()) | {"XL/Worksheets/Sheet1.xml": b"<x/>"}))
    assert 'the part "XL/Worksheets/Sheet1.xml" is there twice' in sentence_of(path)
    with pytest.warns(UserWarning, match="Duplicate"), zipfile.ZipFile(path, "w") as package:
        for part, text in [*xlsx_parts().items(), (SHEET, "<x/>")]:
            package.writestr(part, text)
    assert f'the part "{SHEET}" is there twice' in sentence_of(path)


def test_parts_that_overlap_or_stand_elsewhere(tmp_path: Path) -> None:
    path, parts = tmp_path / "a.xlsx", bytes_of(xlsx_parts())
    for lie in ({"offset": 0}, {"offset": 7}, {"offset": 100_000}, {"method": 99}, {"method": 12}, {"name": 3}):
        path.write_bytes(stored(parts, central=lie))
        sentence_of(path)
    path.write_bytes(stored(parts, local={"name": 60_000}))
    sentence_of(path)
    path.write_bytes(stored(parts, local={"extra": 60_000}))
    sentence_of(path)


# --- XML

LAUGHS = '<!DOCTYPE x [<!ENTITY a "ha"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;"><!ENTITY c "&b;&b;&b;&b;&b;&b;&b;&b;">]>'
OUTSIDE = '<!DOCTYPE x [<!ENTITY a SYSTEM "file:///etc/passwd">]>'


@pytest.mark.parametrize("definition", [LAUGHS, OUTSIDE, "<!DOCTYPE x>", '<!DOCTYPE x SYSTEM "http://x.invalid/x.dtd">'])
@pytest.mark.parametrize("part", [*xlsx_parts(), "docProps/core.xml", "customXml/item1.xml", "xl/drawings/vmlDrawing1.vml"])
def test_entities_in_any_part(tmp_path: Path, part: str, definition: str) -> None:
    text = xlsx_parts().get(part, HEAD + "<x>a</x>").replace(HEAD, HEAD + definition)
    says = sentence_of(xlsx(tmp_path / "a.xlsx", **{part: text}))
    assert f'the part "{part}" defines a document type or entities' in says


def test_entities_in_an_open_document(tmp_path: Path) -> None:
    path = tmp_path / "a.ods"
    write_ods(path, LIST)
    with zipfile.ZipFile(path) as package:
        parts = {name: package.read(name) for name in package.namelist()}
    for part in ("content.xml", "META-INF/manifest.xml"):
        head, rest = parts[part].split(b"?>", 1)
        pack(path, parts | {part: head + b"?>" + LAUGHS.encode() + rest})
        assert f'the part "{part}" defines a document type or entities' in sentence_of(path)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        (HEAD + "<x>" * 300 + "</x>" * 300, "nest more than 256 deep"),
        (HEAD + "<x>", "no element found"),
        (HEAD + "<x></y>", "mismatched tag"),
        (HEAD + "<x/>more", "junk after document"),
        (HEAD + "<x>&other;</x>", "undefined entity"),
        ("PNG" + HEAD + "<x/>", "not well-formed"),
        ("", "no element found"),
        ('<?xml version="1.0" encoding="ISO-8859-1"?><x/>', "is written in ISO-8859-1, not in UTF-8"),
        ('<?xml version="1.0" encoding="utf-16"?><x/>', "is written in utf-16, not in UTF-8"),
        (("\ufeff" + HEAD + "<x/>").encode("utf-16-le"), "is written in UTF-16, not in UTF-8"),
        (HEAD.encode() + b"<x>\xff</x>", "not well-formed"),
    ],
)
@pytest.mark.parametrize("part", [SHEET, "xl/sharedStrings.xml", "docProps/app.xml"])
def test_xml_that_is_none_or_strange(tmp_path: Path, part: str, text: str | bytes, says: str) -> None:
    assert says in sentence_of(xlsx(tmp_path / "a.xlsx", **{part: text}))


@pytest.mark.parametrize(
    ("start", "end"),
    [
        ("<x>", "</x>"),
        ("<!--", "--><x/>"),
        ('<x a="', '"/>'),
        ("<x><![CDATA[<", "]]></x>"),
        ("<?p ", "?><x/>"),
        ("<", "/>"),
        ("<x>&", ";</x>"),
    ],
)
def test_texts_without_an_end(tmp_path: Path, start: str, end: str) -> None:
    letters = "ab<" if "CDATA" in start else "abc"  # signs within such a section are nothing but text
    path = xlsx(tmp_path / "a.xlsx", **{"docProps/app.xml": HEAD + start + letters * 7_000_000 + end})
    assert "docProps/app.xml" in sentence_of(path)


def test_long_texts_with_an_end_are_read(tmp_path: Path) -> None:
    path = xlsx(tmp_path / "a.xlsx", **{"customXml/item1.xml": f"{HEAD}<x>{'QUJD' * 2_000_000}</x>"})
    assert cells_of(path) == LIST


def test_the_number_of_elements_is_limited(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(safe_package, "MAX_TAGS", 1_000)
    assert cells_of(xlsx(tmp_path / "a.xlsx")) == LIST
    path = xlsx(tmp_path / "b.xlsx", **{"docProps/app.xml": HEAD + "<x>" + "<y/>" * 1_000 + "</x>"})
    assert "the workbook has more than 1,000 elements" in sentence_of(path)


# --- cells


def row(number: int | str, *cells: str) -> str:
    return f'<row r="{number}">{"".join(cells)}</row>'


def cell(place: str, value: object = 1, kind: str = "") -> str:
    return f'<c r="{place}"{kind}><v>{value}</v></c>'


@pytest.mark.parametrize(
    "rows",
    [
        row(3, cell("XFD3")) + row(1_048_576, cell("A1048576")),
        row(1_048_576, cell("XFD1048576")),
        row(1_048_576, '<c r="XFD1048576" t="inlineStr"><is><t></t></is></c>'),
        row(1_048_576, '<c r="XFD1048576" t="str"/>'),
        row(3, *["<c><v>1</v></c>"] * 16_384) + row(1_048_576, "<c><v>1</v></c>"),  # without their places
        "<row><c/></row>" * 2_000 + row(3, *["<c/>"] * 16_000, "<c><v>1</v></c>"),  # a reader may count in either way
        row(1_048_576, *[f'<x:c xmlns:x="y" r="{place}"><x:v>1</x:v></x:c>' for place in ("A1", "XFD2", "A1048576")]),
        f'<c r="XFD3"><v>1</v></c><c r="A1048576"><v>1</v></c>{row(3)}',  # outside any row
        row(3, '<c r="XFD3" t="s"><v>0</v></c>', '<c r="A1048576" t="s"><v>0</v></c>'),
    ],
)
def test_cells_far_off(tmp_path: Path, rows: str) -> None:
    path = xlsx(tmp_path / "a.xlsx", ROWS + rows)
    assert "over more than 10,000,000 cells; delete what stands far off the list" in sentence_in_bounds(path)


@pytest.mark.parametrize(
    "rows",
    [
        row(1_048_576, '<c r="XFD1048576"/>', '<c r="XFD1048576" s="0"/>'),  # formats of blank cells
        "".join(row(number, f'<c r="XFD{number}"><f>A1</f></c>') for number in range(3, 1_000)),  # formulas without a value
        "".join(row(number) for number in range(3, 50_000)),
    ],
)
def test_blank_cells_far_off_are_no_harm(tmp_path: Path, rows: str) -> None:
    assert cells_of(xlsx(tmp_path / "a.xlsx", ROWS + rows, before='<dimension ref="A1:XFD1048576"/>')) == LIST
    assert (
        cells_of(xlsx(tmp_path / "a.xlsx", ROWS + rows, before="<cols>" + '<col min="1" max="16384"/>' * 999 + "</cols>"))
        == LIST
    )


def test_many_rows_and_columns_are_read(tmp_path: Path) -> None:
    path = xlsx(tmp_path / "a.xlsx", ROWS + row(9_000, cell("ALL9000")) + row(9_500, cell("A9500", "x", ' t="str"')))
    table = read_table(path)
    assert table.row_numbers == [2, 9_000, 9_500] and len(table.headers) == 3
    assert table.cells[2] == ["", 1.0, ""] and table.places == [1, 2, 1_000]


@pytest.mark.parametrize(
    "place",
    ["A0", "A1048577", "XFE1", "AAAA1", "ZZZZZZZZ1", "1", "A", "", "a1", "A-1", "A1.0", "$A$1", "A" + "1" * 5_000, "\u0410"],
)
def test_places_that_are_none(tmp_path: Path, place: str) -> None:
    sentence_of(xlsx(tmp_path / "a.xlsx", ROWS + row(3, cell(place))))


@pytest.mark.parametrize("number", ["0", "-1", "1048577", "4294967297", "x", "1e3", "9" * 5_000])
def test_rows_that_are_none(tmp_path: Path, number: str) -> None:
    assert "there is a row" in sentence_of(xlsx(tmp_path / "a.xlsx", ROWS + row(number)))


@pytest.mark.parametrize("number", ["2", "-1", "x", "", "99999999999999999999", "0.5"])
def test_shared_texts_that_are_not_there(tmp_path: Path, number: str) -> None:
    says = sentence_of(xlsx(tmp_path / "a.xlsx", ROWS + row(3, cell("A3", number, ' t="s"'))))
    assert "cell A3 shows a text that is not there" in says


def test_a_shared_text_in_a_million_cells(tmp_path: Path) -> None:
    shared = SHARED.replace("Otter Bend", "Otter Bend " * 3_000)
    rows = "".join(row(number, cell(f"A{number}", 1, ' t="s"')) for number in range(3, 50_000))
    says = sentence_in_bounds(xlsx(tmp_path / "a.xlsx", ROWS + rows, shared=shared))
    assert "texts that come again and again make more than 500 MB" in says


def test_more_cells_than_are_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(safe_cells, "MAX_CELLS", 1_000)
    again = ROWS + row(3, cell("A3") * 1_000)  # one place, a thousand times
    assert "the workbook has more than 1,000 cells" in sentence_of(xlsx(tmp_path / "a.xlsx", again))
    assert cells_of(xlsx(tmp_path / "a.xlsx")) == LIST


def test_sheets_in_other_parts(tmp_path: Path) -> None:
    far = xlsx_parts(ROWS + row(1_048_576, cell("XFD1048576")))[SHEET]
    sheet = f"{RELATIONS}/worksheet"
    for part, target in (("xl/media/a.png", "media/a.png"), ("xl/a.bin", "/xl/a.bin")):  # not looked at: so none may be there
        links = relations(("rId1", sheet, target))
        path = xlsx(tmp_path / "a.xlsx", **{"xl/_rels/workbook.xml.rels": links, part: far})
        assert "a sheet is kept in a part that is none" in sentence_of(path)
    links = relations(("rId1", sheet, "calcChain.xml"))
    path = xlsx(tmp_path / "b.xlsx", **{"xl/_rels/workbook.xml.rels": links, "xl/calcChain.xml": far})
    assert "over more than 10,000,000 cells" in sentence_of(path)


def test_one_part_for_many_sheets(tmp_path: Path) -> None:
    # each would be read anew: a thousand times the work for one
    sheets = "".join(f'<sheet name="S{number}" sheetId="{number}" r:id="rId1"/>' for number in range(1, 1_000))
    book = xlsx_parts()["xl/workbook.xml"].replace("<sheets>", "<sheets>" + sheets)
    says = "two sheets are kept in the same part"
    assert says in sentence_of(xlsx(tmp_path / "a.xlsx", **{"xl/workbook.xml": book}))
    book = xlsx_parts()["xl/workbook.xml"].replace("<sheets>", '<sheets><sheet name="S2" sheetId="2" r:id="rId9"/>')
    for target in ("worksheets/sheet1.xml", "/xl/worksheets/sheet1.xml", "worksheets/./Sheet1.XML", "xl/worksheets/sheet1.xml"):
        links = xlsx_parts()["xl/_rels/workbook.xml.rels"]
        links = links.replace("</Rel", f'<Relationship Id="rId9" Type="{RELATIONS}/worksheet" Target="{target}"/></Rel')
        assert says in sentence_of(xlsx(tmp_path / "a.xlsx", **{"xl/workbook.xml": book, "xl/_rels/workbook.xml.rels": links}))


def test_charts_on_sheets_of_their_own_are_passed_over(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    book.create_chartsheet("Chart", 0).add_chart(BarChart())
    for line in LIST:
        book["Sheet"].append(line)
    book.save(tmp_path / "a.xlsx")
    assert cells_of(tmp_path / "a.xlsx") == LIST
    assert 'there is no sheet "Chart"; its sheets are Sheet' in sentence_of(
        tmp_path / "a.xlsx", lambda path: read_table(path, "Chart")
    )


STYLES = (
    f'{HEAD}<styleSheet xmlns="{MAIN}"><numFmts count="1"><numFmt numFmtId="170" formatCode="[h]:mm:ss"/></numFmts>'
    '<cellXfs count="3"><xf numFmtId="0"/><xf numFmtId="14"/><xf numFmtId="170"/></cellXfs></styleSheet>'
)


@pytest.mark.parametrize("value", ["1e15", "-1e15", "1e300", "nan", "inf", "-inf", "2958466", "-5"])
@pytest.mark.parametrize("style", [1, 2])
def test_dates_beyond_all_calendars(tmp_path: Path, value: str, style: int, capfd: pytest.CaptureFixture[str]) -> None:
    # some of these break the reader of workbooks: a sentence, and no word of its own on the screen
    path = xlsx(tmp_path / "a.xlsx", ROWS + row(3, cell("A3", value, f' s="{style}"')), **{"xl/styles.xml": STYLES})
    try:
        read_table(path)
    except InputError as error:
        assert "the workbook is damaged" in str(error)
    assert capfd.readouterr().err == ""


@pytest.mark.parametrize("text", ["1e999", "nan", "-inf", "", " 5 ", "0x10", "1_000", "5 metres"])
def test_numbers_that_are_none(tmp_path: Path, text: str) -> None:
    path = xlsx(tmp_path / "a.xlsx", ROWS.replace("<v>620</v>", f"<v>{text}</v>"))
    try:
        strips = read_list(path)
    except InputError:
        return
    assert strips.texts["fault"][0] or not strips.numbers["length"][0] > 0 or text in (" 5 ",)


# --- OpenDocument


def ods_cell(text: str = "x", **repeats: int | str) -> str:
    more = "".join(f' table:number-{key}-repeated="{count}"' for key, count in repeats.items())
    return f'<table:table-cell office:value-type="string"{more}><text:p>{text}</text:p></table:table-cell>'


def ods_blank(columns: int | str) -> str:
    return f'<table:table-cell table:number-columns-repeated="{columns}"/>'


def ods_row(cells: str, rows: int | str = 1) -> str:
    return f'<table:table-row table:number-rows-repeated="{rows}">{cells}</table:table-row>'


ODS_LIST = ods_row(ods_cell("Strip") + ods_cell("Length [m]")) + ods_row(ods_cell("Otter Bend") + ods_cell("620"))


@pytest.mark.parametrize(
    ("rows", "says"),
    [
        (ods_row(ods_cell("", columns=16_384), 1_048_000), "texts that come again and again make more than 500 MB"),
        (
            ods_row(ods_blank(16_000) + ods_cell()) + ods_row(ods_blank(1), 1_000_000) + ods_row(ods_cell()),
            "over more than 10,000,000 cells",
        ),
        (ods_row(ods_blank(900_000_000) + ods_cell()), "over more than 10,000,000 cells"),
        (ods_row(ods_cell(columns=2_000_000_000)), 'something is repeated "2000000000" times'),
        (ods_row(ods_cell(), "9" * 40), "something is repeated"),
        (ods_row(ods_cell(), "-5"), 'something is repeated "-5" times'),
        (ods_row(ods_cell('a<text:s text:c="2000000000"/>')), "something is repeated"),
        (ods_row(ods_cell('a<text:s text:c="900000000"/>')), "texts that come again and again make more than 500 MB"),
        (ods_row(ods_cell('<text:s text:c="900000"/>') * 600), "texts that come again and again make more than 500 MB"),
        (ods_row(ods_cell("x" * 30_000, columns=100), 1_000), "texts that come again and again make more than 500 MB"),
        ("<table:table/>", "there is a table within a table"),
    ],
)
def test_open_documents_that_repeat_too_much(tmp_path: Path, rows: str, says: str) -> None:
    assert says in sentence_in_bounds(ods(tmp_path / "a.ods", ODS_LIST + rows))


def test_open_documents_repeat_blank_cells_to_the_edge_of_the_sheet(tmp_path: Path) -> None:
    # as LibreOffice does in every file
    rows = ods_row(ods_blank(16_384), 1_048_000) + ods_row(ods_blank(16_383) + ods_blank(1), 500)
    assert cells_of(ods(tmp_path / "a.ods", ODS_LIST + rows)) == [["Strip", "Length [m]"], ["Otter Bend", "620"]]
    rows = ods_row(ods_cell("Crag") + ods_cell("600") + ods_blank(16_382), 3)
    assert len(cells_of(ods(tmp_path / "a.ods", ODS_LIST + rows))) == 5


# --- old workbooks


def xls_with(tmp_path: Path, change: Callable[[bytearray], object]) -> Path:
    path = tmp_path / "a.xls"
    write_xls(path, LIST)
    content = bytearray(path.read_bytes())
    change(content)
    path.write_bytes(content)
    return path


def put(at: int, form: str, *values: int) -> Callable[[bytearray], None]:
    return lambda content: struct.pack_into(form, content, at, *values)


NUMBER = struct.pack("<HH", 0x203, 14)


@pytest.mark.parametrize(
    "change",
    [
        put(512 + 4, "<I", 1),  # the directory follows itself: a reader would add it up for ever
        put(512 + 4 * 5, "<I", 2),  # a part of the workbook goes back to an earlier one
        put(512 + 4 * 5, "<I", 5_000),
        put(48, "<I", 900),
        put(76, "<I", 77),
        put(68, "<I", 0),  # a list of tables
        put(30, "<H", 31),
        put(1024 + 128 + 120, "<I", 0x7FFFFFFF),  # larger than the file
    ],
)
def test_old_workbooks_that_run_in_circles(tmp_path: Path, change: Callable[[bytearray], object]) -> None:
    path = xls_with(tmp_path, change)
    try:
        done = cells_of(path)
    except InputError:
        assert "the workbook is damaged" in sentence_in_bounds(path)
    else:
        assert done == LIST


def test_old_workbooks_with_cells_far_off(tmp_path: Path) -> None:
    path = xls_with(tmp_path, lambda content: struct.pack_into("<HH", content, content.index(NUMBER) + 4, 65_535, 65_535))
    assert "sheet 1 has a cell beyond column IV" in sentence_in_bounds(path)
    path = xls_with(tmp_path, lambda content: struct.pack_into("<HH", content, content.index(NUMBER) + 4, 65_535, 255))
    assert "over more than 10,000,000 cells" in sentence_in_bounds(path)


def test_what_an_old_workbook_says_of_itself_does_not_count(tmp_path: Path) -> None:
    # sizes of the sheet, names, macros: blotted out before the reader sees them (such a size made it ask for 1,200 GB)
    for kind, content in (
        (0x200, struct.pack("<IIHHH", 0, 0xFFFFFFFF, 0, 0xFFFF, 0)),
        (0xE5, struct.pack("<H", 0xFFFF)),
        (0x18, bytes(3)),
        (0x17, b"\1"),
        (0x31, b""),
        (0x86, bytes(1)),
        (0x3C, b"x"),
    ):
        extra = struct.pack("<HH", kind, len(content)) + content
        path = tmp_path / "a.xls"
        write_xls(path, LIST)
        whole = path.read_bytes()
        at = whole.index(struct.pack("<H", 0x204))  # the first cell
        path.write_bytes(whole[:at] + extra + whole[at:-512] + bytes(512 - len(extra)))
        assert cells_of(path) == LIST


# --- macros, links, formulas: nothing is run, followed or fetched


@pytest.fixture
def no_network(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[str]]:
    """Any try to reach a network, or a file outside the test's folder and Python's own, is noted and fails."""
    tries: list[str] = []

    def refused(*arguments: object, **_: object) -> None:
        tries.append(repr(arguments))
        raise AssertionError("the network was touched")

    for name in ("socket", "create_connection", "getaddrinfo", "gethostbyname"):
        monkeypatch.setattr(socket, name, refused)
    plain = builtins.open

    def opened(file: object, *arguments: object, **more: object) -> object:
        if "passwd" in str(file):
            tries.append(str(file))
        return plain(file, *arguments, **more)  # type: ignore[call-overload]

    monkeypatch.setattr(builtins, "open", opened)
    yield tries
    assert tries == []


@pytest.mark.usefixtures("no_network")
def test_links_to_elsewhere_are_not_followed(tmp_path: Path) -> None:
    outside = '<Relationship Id="r{}" Type="{}/{}" Target="{}" TargetMode="External"/>'
    targets = ("http://x.invalid/list.xlsx", "file:///etc/passwd", "\\\\x.invalid\\share\\list.xlsx", "ftp://x.invalid/a")
    kinds = ("externalLinkPath", "hyperlink", "image", "attachedTemplate", "oleObject")
    links = "".join(outside.format(n, RELATIONS, *each) for n, each in enumerate(product(kinds, targets)))
    parts: dict[str, str | bytes] = {
        "xl/externalLinks/externalLink1.xml": f'{HEAD}<externalLink xmlns="{MAIN}" xmlns:r="{RELATIONS}">'
        '<externalBook r:id="r0"/></externalLink>',
        "xl/externalLinks/_rels/externalLink1.xml.rels": relations(more=links),
        "xl/worksheets/_rels/sheet1.xml.rels": relations(more=links),
        "xl/connections.xml": f'{HEAD}<connections xmlns="{MAIN}"><connection id="1" type="4" refreshOnLoad="1">'
        '<webPr url="http://x.invalid"/></connection></connections>',
        "xl/queryTables/queryTable1.xml": f'{HEAD}<queryTable xmlns="{MAIN}" refreshOnLoad="1"/>',
        "xl/vbaProject.bin": b"Sub Auto_Open()",
        "xl/externalLinks/externalLink2.xml": f'{HEAD}<externalLink xmlns="{MAIN}">'
        '<ddeLink ddeService="cmd" ddeTopic="/c calc"/></externalLink>',
    }
    book = xlsx_parts()["xl/_rels/workbook.xml.rels"].replace("</Relationships>", links + "</Relationships>")
    parts["xl/_rels/workbook.xml.rels"] = book.replace(
        "</Relationships>", f'<Relationship Id="v" Type="{PACKAGE}/vbaProject" Target="vbaProject.bin"/></Relationships>'
    )
    formulas = row(
        3,
        '<c r="A3" t="str"><f>[1]Sheet1!A1</f><v>kept</v></c>',
        '<c r="B3"><f>WEBSERVICE("http://x.invalid")</f><v>480</v></c>',
    )
    for name in ("a.xlsx", "a.xlsm"):
        path = xlsx(tmp_path / name, ROWS + formulas, **parts)
        assert cells_of(path) == [*LIST, ["kept", 480.0]]  # the values as they were saved


@pytest.mark.usefixtures("no_network")
def test_a_sheet_that_is_elsewhere_is_not_fetched(tmp_path: Path) -> None:
    for target in ("http://x.invalid/sheet.xml", "file:///etc/passwd", "../../../../etc/passwd", "/etc/passwd"):
        link = f'<Relationship Id="rId1" Type="{RELATIONS}/worksheet" Target="{target}" TargetMode="External"/>'
        sentence_of(xlsx(tmp_path / "a.xlsx", **{"xl/_rels/workbook.xml.rels": relations(more=link)}))


FORMULAS = [
    "=1+1",
    "=cmd|'/c calc'!A0",
    "+1+1",
    "-1+1",
    "@SUM(A1)",
    '=HYPERLINK("http://x.invalid","x")',
    "=WEBSERVICE(A1)",
    "\t=1",
    "\r=1",
    "{=1}",
]


@pytest.mark.usefixtures("no_network")
def test_formulas_in_a_list_stay_texts(tmp_path: Path) -> None:
    path = tmp_path / "strips.csv"
    header = ["Strip", "Name", "Runway", "Length [m]", "Surface", "Elevation [ft]", "Slope [%]", "Notes", *FORMULAS[:8]]
    rows = [[text, text, "09/27", "700", text, "500", "0", text, *[text] * 8] for text in FORMULAS]
    stream = io.StringIO()
    csv.writer(stream).writerows([header, *rows])
    path.write_text(stream.getvalue(), encoding="utf-8", newline="")
    strips = read_list(path)
    assert strips.n == 2 * len(FORMULAS) and strips.carried["=1+1"][::2] == FORMULAS  # texts as they were
    command = ["fill", str(path), "--card", "ridge-runner", "--rules", "part-cat-b", "--temp", "20", "-o"]
    assert main([*command, str(tmp_path / "out.xlsx")]) == 0
    book = openpyxl.load_workbook(tmp_path / "out.xlsx")
    theirs = {text.lstrip("=\t\r") for text in FORMULAS}
    found = 0
    for sheet in book:
        for line in sheet.iter_rows():
            for each in line:
                if isinstance(each.value, str) and each.value.strip() in {text.strip() for text in FORMULAS}:
                    found += 1
                    assert each.data_type != "f", each.coordinate
                if each.data_type == "f":
                    assert str(each.value).lstrip("=") not in theirs, each.coordinate
    assert found > 10 * len(FORMULAS)
    assert book["Strips"]._hyperlinks == [] and len(book._external_links) == 0
    assert main([*command, str(tmp_path / "out.csv")]) == 0
    for written in text_rows(tmp_path / "out.csv", "utf-8-sig", ","):
        assert not any(value.startswith(("=", "+", "@", "\t", "\r")) for value in written)
        assert not any(
            value.startswith("-") and not value[1:].replace(".", "").replace("e-", "").isdigit() for value in written
        )


def test_names_of_sheets_are_only_names(tmp_path: Path) -> None:
    for name in ("../../etc/passwd", "C:\\x", "x" * 100_000, "\u202egnp.exe", "[1]Sheet", "=1+1"):
        book = xlsx_parts()["xl/workbook.xml"].replace('name="Strips"', f'name="{name}"')
        path = xlsx(tmp_path / "a.xlsx", **{"xl/workbook.xml": book})
        assert read_table(path).cells == [["Otter Bend"], [620.0]]
        says = sentence_of(path, lambda path: read_table(path, "other"))
        assert 'there is no sheet "other"; its sheets are' in says and "\u202e" not in says
    assert [path.name for path in tmp_path.iterdir()] == ["a.xlsx"]


# --- texts


def text_file(path: Path, *pieces: bytes | tuple[bytes, int]) -> Path:
    with path.open("wb") as file:
        for piece in pieces:
            content, times = piece if isinstance(piece, tuple) else (piece, 1)
            block = content * min(times, 100_000)
            for _ in range(times // 100_000):
                file.write(block)
            file.write(content * (times % 100_000 if times >= 100_000 else times))
    return path


@pytest.mark.parametrize(
    ("pieces", "says"),
    [
        ((b"Strip,Length\n", (b"x", 60_000_000)), "a row is longer than 1,000,000 characters"),
        ((b"Strip,Length\n", (b",", 60_000_000)), "a row is longer than 1,000,000 characters"),
        (((b",", 60_000_000), b"\nStrip,Length\nA,600\n"), "a row is longer than 1,000,000 characters"),
        ((b"Strip,Length\n", (b'"', 60_000_001)), "a row is longer than 1,000,000 characters"),
        ((b'Strip,Length\n"', (b"\n", 60_000_000)), "field larger than field limit"),
        ((b'Strip,Length\n"', (b'\n","', 20_000_000)), "a row is longer than 1,000,000 characters"),
        ((b"Strip,Length", (b",", 100_000), b"\nA,600\n"), "there is no header row with headers"),
        ((b"Strip,Length", (b",", 16_000), b"\n", (b"A,600\n", 20_000)), "over more than 10,000,000 cells"),
        ((b"Strip,Length\n", (b"\n", 1_100_000)), "has at most 16,384 columns and 1,048,576 rows"),
        (((b"Strip,Length\nA,600\n", 11_000_000),), "the file has 209 MB, and at most 200 MB are read"),
        ((b"Strip,Length\nA,600\n", b"\0"), "this is no text file"),
        ((b"\xff\xfe", (b"A\0", 30_000_000)), "a row is longer than 1,000,000 characters"),
        (((b'"A\n', 1_000_000),), "broken quote marks"),
    ],
)
def test_texts_without_measure(tmp_path: Path, pieces: tuple[bytes | tuple[bytes, int], ...], says: str) -> None:
    assert says in sentence_in_bounds(text_file(tmp_path / "strips.csv", *pieces))


def test_more_columns_than_a_list_has(tmp_path: Path) -> None:
    path = tmp_path / "strips.csv"
    path.write_text("Strip,Length" + "".join(f",c{n}" for n in range(999)) + "\nA,600\n")
    assert "the list has 1,001 columns, and at most 1,000 are read" in sentence_of(path)
    path.write_text("Strip,Length" + "," * 16_000 + "\nA,600\n")  # blank ones don't count
    assert len(read_table(path).headers) == 2


def test_texts_in_unusual_writing(tmp_path: Path) -> None:
    path = tmp_path / "strips.csv"
    text = "Strip,Length\nÖtter Bénd,620\n"
    for encoding, name in (
        ("utf-16", "Ötter Bénd"),
        ("utf-8-sig", "Ötter Bénd"),
        ("latin-1", "Ötter Bénd"),
        ("cp437", "\x99tter B\x82nd"),
    ):
        path.write_bytes(text.encode(encoding))
        found = read_table(path).cells[0][0]
        assert found == name or encoding == "cp437"
    for encoding in ("utf-16-le", "utf-16-be", "utf-32"):  # without a mark, or not known: zero bytes
        path.write_bytes(text.encode(encoding))
        sentence_of(path)


def test_over_long_cells_and_names(tmp_path: Path) -> None:
    path = tmp_path / "strips.csv"
    path.write_text(f"Strip,Runway,Length\n{'x' * 100_000},{'9' * 100_000},{'5' * 100_000}\n")
    strips = read_list(path)
    assert strips.texts["fault"][0] and len(strips.texts["fault"][0]) <= LONGEST
    path = xlsx(tmp_path / "a.xlsx", shared=SHARED.replace("Otter Bend", "x" * 200_000))
    assert "row 2: a cell holds more than 131,072 characters" in sentence_of(path)
    path = tmp_path / "strips.csv"
    path.write_text(f"Strip,Length,{'(' * 130_000}\nA,600,1\n")  # a header that took the square of its length to read
    start = time.monotonic()
    assert read_list(path).n == 2 and time.monotonic() - start < 30
    path.write_text(f"Strip,Length\nA,1{'m' * 130_000}\n")  # a unit that took minutes
    start = time.monotonic()
    assert "is not a unit" in read_list(path).texts["fault"][0] and time.monotonic() - start < 30


def test_what_is_no_plain_file(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.csv")
    for path, says in (
        (tmp_path / "pipe.csv", "this is a device or a pipe"),
        (tmp_path / ("x" * 300 + ".csv"), "can't be opened"),
        (tmp_path / "a\0b.csv", "there is no such file"),
    ):
        with pytest.raises(InputError, match=says):
            read_table(path)


def test_a_hostile_name_of_a_file_is_shown_without_its_tricks(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = tmp_path / "a\x1b[31m\nb\u202e.csv"
    path.write_text("foo,bar\n1,2\n")
    assert (
        main(
            [
                "fill",
                str(path),
                "--card",
                "ridge-runner",
                "--rules",
                "part-cat-b",
                "--temp",
                "20",
                "-o",
                str(tmp_path / "o.xlsx"),
            ]
        )
        == 2
    )
    said = capsys.readouterr().err
    assert said.count("\n") == 1 and "\x1b" not in said and "\u202e" not in said and "no usable column" in said


# --- what must be readable


def test_what_this_program_writes_is_read(tmp_path: Path) -> None:
    assert main(["demo", "-o", str(tmp_path / "demo.xlsx"), "--quiet"]) == 0
    assert check_workbook(tmp_path / "demo.xlsx") is None
    assert dict(workbook_sheets(tmp_path / "demo.xlsx", "Strips"))["Strips"]
    assert main(["door", "lambda", "-o", str(tmp_path / "names.xlsx")]) == 0
    assert check_workbook(tmp_path / "names.xlsx") is None


def test_the_largest_workbook_of_this_program_is_within_the_limits() -> None:
    # 44,000 runways in full detail, measured once: file, unpacked and area of the cells
    assert safe_limits.MAX_BOOK_FILE > 2 * 370e6
    assert safe_limits.MAX_INFLATED > 1.3 * 3_027e6
    assert safe_limits.MAX_CELLS > 2 * (65_113 * 61 + 32_569 * 20)
    # 50,000 rows of 30 columns
    assert safe_limits.MAX_CELLS > 6 * 50_000 * 30 and safe_limits.MAX_TEXT_FILE > 6 * 50_000 * 30 * 20


def test_counting_takes_no_memory(tmp_path: Path) -> None:
    # a sheet of 300,000 cells: nothing is kept but how far they reach
    parser = expat.ParserCreate()
    counter = SheetCells(Tally("a.xlsx"), SHEET, parser)
    parser.Parse("<sheetData>", False)
    tracemalloc.start()
    for first in range(1, 30_000, 1_000):
        text = "".join(
            row(number, *[cell(f"{letter}{number}") for letter in "ABCDEFGHIJ"]) for number in range(first, first + 1_000)
        )
        parser.Parse(text, False)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert (counter.cells, counter.most_rows, counter.most_columns) == (300_000, 30_000, 10)
    assert peak < 4e6
