"""Twenty thousand files that were tampered with: each is read, or refused with one sentence, and none breaks or hangs.

Real lists and workbooks are changed byte by byte, element by element and part by part. A file that once broke a reader is a
plain test of its own in test_safe_read.py or test_read_table.py. What kills the process (a reader that takes all memory, or
never comes back) fails too: then the test process ends. The number of files is fixed, and they are the same in every run.
"""

from __future__ import annotations

import faulthandler
import io
import tempfile
import zipfile
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import cache
from importlib.resources import files
from pathlib import Path

import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from stripcheck.errors import LONGEST, InputError
from stripcheck.register import read_list
from stripcheck.register.airports import read_airports
from stripcheck.register.read_table import workbook_sheets
from tests.register.lists import write_ods, write_xls
from tests.register.packages import MAIN, xlsx_parts

HANG = 120.0  # [s] for one file, of which a usual one takes a few milliseconds; a process that passes it is ended
SHORT = settings(database=None, suppress_health_check=list(HealthCheck), deadline=None, print_blob=False)

HEADERS = (
    "Strip,Name,Runway,Length [m],Width,Surface,Elevation end 1,Elevation end 2,Slope %,Heading,Land on,Closed,Profile,Notes"
)
MESSY = (
    "Strips of 2026\n\nName;Rwy;Länge [m];Belag;Höhe ft;Neigung;Bemerkung\n"
    'Ötterbach;09/27;"1.234,5";Gras;2.300;1,5 %;"weich; naß"\n'
    "Ahorn;4;480;Schotter;1800;-2;\n;;;;;;\nBirke;18L/36R;2034 ft;Asphalt/Gras;700 m;0,4;geschlossen\n"
)
OPEN = (
    '"id","airport_ref","airport_ident","length_ft","width_ft","surface","lighted","closed","le_ident","le_latitude_deg",'
    '"le_longitude_deg","le_elevation_ft","le_heading_degT","le_displaced_threshold_ft","he_ident","he_latitude_deg",'
    '"he_longitude_deg","he_elevation_ft","he_heading_degT","he_displaced_threshold_ft"\n'
    '1,2,"XA01",2034,60,"TURF-G",0,0,"09",45.1,-93.2,990,89.5,,"27",45.1,-93.19,1004,269.5,120\n'
    '2,3,"XA02",80,80,"ASPH-G",1,0,"H1",,,,,,,,,,,\n3,4,"XA03",2500,70,"GRVL",1,1,"N",,,3201,,,"S",,,3180,,\n'
)
AIRPORTS = (
    '"id","ident","type","name","latitude_deg","longitude_deg","elevation_ft"\n'
    '1,"XA01","small_airport","Otter ""Bend""",45.1,-93.2,990\n'
    '2,"XA02","heliport","Crag, north",45,-93,"9,90"\n'
)
NASTY = [
    b"",
    b"\0",
    b'"',
    b'""',
    b"'",
    b"\n",
    b"\r",
    b"\r\n\r\n",
    b",",
    b";",
    b"\t",
    b"|",
    b"=1+1",
    b"-",
    b"+",
    b"@SUM(A1)",
    b"%",
    b"\xff\xfe",
    b"\xfe\xff",
    b"\xef\xbb\xbf",
    b"\xc2",
    b"\xe2\x80\xae",
    b"\xed\xa0\x80",
    b"\xf4\x90\x80\x80",
    b"1e400",
    b"-1e-400",
    b"nan",
    b"inf",
    b"0x10",
    b"1_0",
    b"\xd9\xa1\xd9\xa2",
    b"1.234.567",
    b"1,234,567",
    b"9" * 400,
    b"1 furlong",
    b"5 kg",
    b"09/27/18",
    b"9-Mar",
    b"36/18",
    b"99/99",
    b"0:0,",
    b"0:0, 300:1, 200:2",
    b"yes",
    b"2024-13-45",
    b"(((((((((",
    b"[m][ft]",
    b"Length [ft]",
    b"Strip",
    b"end 1 end 2",
    b"ice/water",
    b"--..--",
    b"<!DOCTYPE x>",
    b"&#0;",
    b"&a;",
    b"<a>",
    b"</row>",
    b"]]>",
    b"<![CDATA[",
    b"<!--",
    b"1048577",
    b"XFD1048576",
    b"A0",
    b"4294967296",
    b"-5",
]


@contextmanager
def no_hang() -> Iterator[None]:
    faulthandler.dump_traceback_later(HANG, exit=True)
    try:
        yield
    finally:
        faulthandler.cancel_dump_traceback_later()


def tried(read: Callable[[], object]) -> None:
    """Read a file: it may be refused, with one sentence."""
    try:
        with no_hang():
            read()
    except InputError as error:
        sentence = str(error)
        assert sentence and "\n" not in sentence and len(sentence) <= LONGEST


def read_and_count(path: Path) -> None:
    strips = read_list(path)
    assert strips.rows_read == len(strips.left_out) + strips.n // 2


PLACE = st.integers(0, 9_999)  # in ten-thousandths of the file
CHANGE = st.tuples(
    st.sampled_from(("put", "over", "cut", "again", "flip", "end")), PLACE, st.integers(1, 40), st.sampled_from(NASTY)
)
Change = tuple[str, int, int, bytes]


def changed(content: bytes, change: Change) -> bytes:
    """The content with one change: something put in or over, cut out, doubled, one bit flipped, or broken off."""
    what, place, length, nasty = change
    at = len(content) * place // 10_000
    if what == "put":
        return content[:at] + nasty + content[at:]
    if what == "over":
        return content[:at] + nasty + content[at + len(nasty) :]
    if what == "cut":
        return content[:at] + content[at + length :]
    if what == "again":
        return content[: at + 5 * length] + content[at:]
    if what == "flip" and content:
        return content[:at] + bytes([content[at] ^ 1 << length % 8]) + content[at + 1 :]
    return content[:at] if what == "end" else content


@cache
def text_lists() -> tuple[bytes, ...]:
    scenario = (files("stripcheck") / "scenario" / "lantern-range.csv").read_bytes().splitlines(True)
    rows = 'XA1,Otter Bend,09/27,620,18,grass,990,1004,,88,09,no,"0:0, 300:2, 620:4","two\nlines"\n'
    rows += "XA2,Crag,4,480 m,,gravel,,,-3,,,,,=1+1\n"
    return (b"".join(scenario[:8]), f"{HEADERS}\n{rows}".encode(), MESSY.encode("cp1252"), MESSY.encode(), OPEN.encode())


@given(
    base=st.integers(0, 4),
    changes=st.lists(CHANGE, max_size=6),
    encoding=st.sampled_from((None, None, None, "utf-16", "utf-16-le", "cp437")),
)
@settings(SHORT, max_examples=13_000)
def test_texts(base: int, changes: list[Change], encoding: str | None) -> None:
    content = text_lists()[base]
    if encoding is not None:
        content = content.decode("utf-8", "replace").encode(encoding, "replace")
    for change in changes:
        content = changed(content, change)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "strips.csv"
        path.write_bytes(content)
        tried(lambda: read_and_count(path))


@given(content=st.one_of(st.binary(max_size=200), st.lists(st.sampled_from(NASTY), max_size=40).map(b"".join)))
@settings(SHORT, max_examples=1_000)
def test_texts_of_anything(content: bytes) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "strips.txt"
        path.write_bytes(content and b"Strip,Length\n" * (content[0] % 2) + content)
        tried(lambda: read_and_count(path))


@given(changes=st.lists(CHANGE, max_size=6))
@settings(SHORT, max_examples=1_000)
def test_airports_files(changes: list[Change]) -> None:
    content = AIRPORTS.encode()
    for change in changes:
        content = changed(content, change)
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "airports.csv"
        path.write_bytes(content)
        tried(lambda: read_airports(path, {"XA01", "XA02"}))


# --- workbooks

ROWS: list[list[str | float]] = [
    ["Strip", "Runway", "Length [m]", "Surface", "Slope %", "Notes"],
    ["Otter Bend", "09/27", 620.0, "grass", 1.5, "soft & wet"],
    ["Crag", "4", 480.5, "gravel", -2.0, "=1+1"],
]


@cache
def workbooks() -> dict[str, bytes]:
    """Workbooks by name: as openpyxl writes them, by hand with shared texts, OpenDocument, and the old kind."""
    book, stream = openpyxl.Workbook(), io.BytesIO()
    for row in ROWS:
        book.active.append(row)
    book.active["C4"] = "=C2*2"
    book.create_sheet("Notes")["B2"] = "nothing"
    book.save(stream)
    made = {"plain.xlsx": stream.getvalue()}
    with tempfile.TemporaryDirectory() as folder:
        for name, write in (("open.ods", write_ods), ("old.xls", write_xls)):
            write(Path(folder) / name, ROWS)
            made[name] = (Path(folder) / name).read_bytes()
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", zipfile.ZIP_DEFLATED) as package:
        for part, content in xlsx_parts().items():
            package.writestr(part, content)
    return made | {"shared.xlsx": packed.getvalue()}


@cache
def parts_of(name: str) -> dict[str, bytes]:
    with zipfile.ZipFile(io.BytesIO(workbooks()[name])) as package:
        return {part: package.read(part) for part in package.namelist()}


def read_workbook(name: str, content: bytes) -> None:
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / name
        path.write_bytes(content)
        tried(lambda: read_and_count(path))
        tried(lambda: list(workbook_sheets(path, None)))


WHOLE = [  # what leaves the XML whole where it stands before the end of an element
    '<row r="3"><c r="{}"><v>1</v></c></row>',
    '<row r="{}"><c><v>1</v></c></row>',
    '<row><c r="{}" t="s"><v>1</v></c></row>',
    '<c r="C1"><v>{}</v></c>',
    '<c r="C1" t="{}"><v>1</v></c>',
    '<c r="C1" t="s"><v>{}</v></c>',
    '<c r="C1" t="d"><v>{}</v></c>',
    '<c r="C1" s="{}"><v>1e15</v></c>',
    '<mergeCell ref="{}:A1"/>',
    '<table:table-row table:number-rows-repeated="{}"><table:table-cell office:value="1"/></table:table-row>',
    '<table:table-cell table:number-columns-repeated="{}" office:value-type="float" office:value="1"/>',
    '<table:table-cell office:value-type="date" office:date-value="{}"/>',
    '<table:table-cell office:value-type="string"><text:p><text:s text:c="{}"/></text:p></table:table-cell>',
    '<sheet name="{}" sheetId="1" r:id="rId1"/>',
    '<Relationship Id="rId1" Target="{}"/>',
    "<si><t>{}</t></si>",
    '<xf numFmtId="{}"/>',
]
BROKEN = ['<row r="{}">', '<c r="{}">', "</sheetData>", "</si>", "<f>", f'<worksheet xmlns="{MAIN}">', "<table:table-row>"]
ENDS = [b"</", b"</row>", b"</sheetData>", b"</table:table-row>", b"</table:table>", b"</sheets>", b"</sst>", b"</cellXfs>"]
WORDS = [
    "A1",
    "XFD1048576",
    "B7",
    "0",
    "1",
    "-1",
    "99",
    "16384",
    "1048576",
    "4294967296",
    "2000000000",
    "",
    "s",
    "b",
    "../x.xml",
    "http://x.invalid",
]


def put(content: bytes, before: bytes, place: int, element: str) -> bytes:
    """The content with an element before the next mark of a kind, or at the end."""
    at = content.find(before, len(content) * place // 10_000)
    at = at if at >= 0 else content.rfind(before)
    return content[:at] + element.encode() + content[at:]


@given(
    name=st.sampled_from(("plain.xlsx", "shared.xlsx", "open.ods")),
    part=PLACE,
    changes=st.lists(CHANGE, max_size=2),
    whole=st.lists(st.tuples(PLACE, st.sampled_from(WHOLE), st.sampled_from(WORDS)), max_size=3),
    broken=st.lists(st.tuples(PLACE, st.sampled_from(BROKEN), st.sampled_from(WORDS)), max_size=1),
)
@settings(SHORT, max_examples=2_400)
def test_workbooks_with_changed_parts(
    name: str, part: int, changes: list[Change], whole: list[tuple[int, str, str]], broken: list[tuple[int, str, str]]
) -> None:
    """The XML is changed and packed again: elements are put in, or it is changed anywhere."""
    parts = dict(parts_of(name))
    cells = [each for each in parts if "sheet" in each or each == "content.xml"]
    chosen = cells[part % len(cells)] if part % 3 else list(parts)[part % len(parts)]
    content = parts[chosen]
    for place, element, word in whole:
        ends = [end for end in ENDS if end in content] or [b""]
        content = put(content, ends[place % len(ends)], place, element.replace("{}", word))
    for place, element, word in broken:
        content = put(content, b"<", place, element.replace("{}", word))
    for change in changes:
        content = changed(content, change)
    parts[chosen] = content
    packed = io.BytesIO()
    with zipfile.ZipFile(packed, "w", zipfile.ZIP_DEFLATED) as package:
        for each, text in parts.items():
            package.writestr(each, text)
    read_workbook(name, packed.getvalue())


@given(
    name=st.sampled_from(("plain.xlsx", "shared.xlsx", "open.ods")),
    changes=st.lists(CHANGE, min_size=1, max_size=4),
    from_end=st.booleans(),
)
@settings(SHORT, max_examples=1_200)
def test_workbooks_with_changed_bytes(name: str, changes: list[Change], from_end: bool) -> None:
    """The package itself is changed: headers, directory, packed data."""
    content = workbooks()[name]
    head, tail = (content[:-900], content[-900:]) if from_end else (b"", content)  # the directory is at the end
    for change in changes:
        tail = changed(tail, change)
    read_workbook(name, head + tail)


@given(changes=st.lists(CHANGE, min_size=1, max_size=4), records=st.booleans())
@settings(SHORT, max_examples=1_200)
def test_old_workbooks_with_changed_bytes(changes: list[Change], records: bool) -> None:
    content = workbooks()["old.xls"]
    head, tail = (content[:1536], content[1536:2300]) if records else (b"", content[:2300])
    for change in changes:
        tail = changed(tail, change)
    read_workbook("old.xls", (head + tail).ljust(len(content), b"\0"))


@given(
    start=st.sampled_from((b"", b"PK\3\4", bytes.fromhex("D0CF11E0A1B11AE1"), b"<html>", b"%PDF-1.7")),
    rest=st.binary(max_size=600),
    kind=st.sampled_from((".xlsx", ".xlsm", ".ods", ".xls")),
)
@settings(SHORT, max_examples=200)
def test_workbooks_of_anything(start: bytes, rest: bytes, kind: str) -> None:
    if start + rest:
        with pytest.raises(InputError), tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / f"strips{kind}"
            path.write_bytes(start + rest)
            with no_hang():
                read_list(path)
