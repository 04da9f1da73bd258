# ruff: noqa: E501  (pieces of XML stand as the programs write them)
"""Puts into a filled workbook everything that a user may add to one, as the usual programs write it, part by part.

The forms are those of ECMA-376 and of the published extensions to it ([MS-XLSX], [MS-OI29500]), from memory. What is put in
is told, so that a test can look whether it is still there.
"""

from __future__ import annotations

import re
import struct
import zlib
from collections.abc import Callable
from pathlib import Path

from openpyxl.utils import get_column_letter

from tests.book_parts import OFFICE, Parts, SheetText, shift

HEADER_ROWS = {"Strips": 3, "Summary": 14}
OURS = ("Summary", "Strips", "Aircraft", "Manual", "Day", "Rules", "Left out", "Method")
MINE = "My "  # what the headers of the user's columns begin with
NOTES = "My notes"
CHAIN = "xl/calcChain.xml"
_SPREADSHEET = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_DRAWING = "application/vnd.openxmlformats-officedocument.drawing+xml"
_A = "http://schemas.openxmlformats.org/drawingml/2006/main"
_XDR = "http://schemas.openxmlformats.org/drawingml/2006/spreadsheetDrawing"
_X14 = "http://schemas.microsoft.com/office/spreadsheetml/2009/9/main"
_XM = "http://schemas.microsoft.com/office/excel/2006/main"
_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_XML = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'


def add_everything(parts: Parts, macros: bool = False) -> None:
    """All of it. ``macros``: a project of macros too, with which the file must be named .xlsm."""
    styles = _add_styles(parts)
    _add_shared_texts(parts)
    _add_columns(parts, "Strips", styles)
    _add_columns(parts, "Summary", styles)
    _add_rows_of_totals(parts)
    _add_words_on_pages(parts)
    _add_own_sheet(parts)
    for add in (_add_drawing, _add_pictures_of_page, _add_note, _add_threaded_comment, _add_sparklines, _add_control,
                _add_formats, _add_names, _add_custom_xml, _add_properties, _add_printer_settings):  # fmt: skip
        add(parts)
    if macros:
        _add_macros(parts)
    set_calc_chain(parts)


# --- styles and texts


def _add_styles(parts: Parts) -> dict[str, str]:
    """Formats of a user's: a bold red number on pink, and a date; numbers of the styles by name."""
    part = "xl/styles.xml"
    font = _append(parts, part, "fonts", '<font><b/><sz val="11"/><color rgb="FFC00000"/><name val="Georgia"/></font>')
    pattern = '<patternFill patternType="solid"><fgColor rgb="FFFFC7CE"/></patternFill>'
    fill = _append(parts, part, "fills", f"<fill>{pattern}</fill>")
    plain = f'<xf numFmtId="2" fontId="{font}" fillId="{fill}" borderId="0" xfId="0" applyFont="1" applyFill="1"/>'
    date = f'<xf numFmtId="14" fontId="{font}" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/>'
    return {"pink": _append(parts, part, "cellXfs", plain), "date": _append(parts, part, "cellXfs", date)}


def _append(parts: Parts, part: str, collection: str, entry: str) -> str:
    """Add an entry to a counted list; returns its number."""
    text = parts.text(part)
    found = re.search(rf"<{collection}([^>]*?)count=\"(\d+)\"([^>]*)>", text)
    assert found is not None, collection
    text = text.replace(found[0], f'<{collection}{found[1]}count="{int(found[2]) + 1}"{found[3]}>', 1)
    parts.put(part, text.replace(f"</{collection}>", f"{entry}</{collection}>", 1))
    return found[2]


def _add_shared_texts(parts: Parts) -> None:
    """Rich text, a reading aloud, and spaces that count."""
    part = "xl/sharedStrings.xml"
    assert part not in parts
    texts = (
        '<si><r><t xml:space="preserve">Ask </t></r><r><rPr><b/><color rgb="FFFF0000"/></rPr><t xml:space="preserve"> Ada </t></r>'
        "<r><t>first</t></r></si>",
        '<si><t>海</t><rPh sb="0" eb="1"><t>うみ</t></rPh><phoneticPr fontId="0"/></si>',
        '<si><t xml:space="preserve">  two spaces &amp; a line_x000D_\n</t></si>',
    )  # fmt: skip
    parts.put(part, f'{_XML}<sst xmlns="{_MAIN}" count="9" uniqueCount="3">{"".join(texts)}</sst>')
    parts.declare(part, f"{_SPREADSHEET}.sharedStrings+xml")
    parts.relate("xl/workbook.xml", "sharedStrings", "sharedStrings.xml")


# --- columns and rows in the sheets that are ours


def _add_columns(parts: Parts, title: str, styles: dict[str, str]) -> None:
    """Five columns of a user's: two between ours and three after them."""
    header = HEADER_ROWS[title]
    places = {"Strips": (6, 22), "Summary": (10, 14)}[title]
    for place in places:
        shift(parts, title, place, 1, columns=True)
    sheet = SheetText.of(parts.text(parts.sheet(title)))
    last = max(max(cells, default=0) for cells in sheet.rows.values())
    columns = (*places, last + 1, last + 2, last + 3)
    rows = [row for row in sorted(sheet.rows) if row > header]
    watched = get_column_letter(sheet.headers(header)["Take-off margin [m]" if title == "Strips" else "Take off: margin [m]"])
    names = get_column_letter(sheet.headers(header)["Name"])
    for column, name in zip(columns, ("price", "remark", "long enough", "letters", "visited"), strict=True):
        sheet.type(header, column, MINE + name, styles["pink"])
    for at, row in enumerate(rows):
        price, remark, enough, letters, visited = columns
        sheet.type(row, price, 12.5 * at, styles["pink"])
        sheet.put(row, remark, f"<v>{at % 3}</v>", "s")
        formula = f'IF(ISNUMBER({watched}{row}),IF({watched}{row}&gt;100,"long","short"),"?")'
        sheet.put(row, enough, f"<f>{formula}</f><v>?</v>", "str")
        first = f'<f t="shared" ref="{_cells(letters, rows)}" si="7">LEN({names}{row})</f>'
        sheet.put(row, letters, ('<f t="shared" si="7"/>' if at else first) + f"<v>{at}</v>", style=styles["pink"])
        sheet.put(row, visited, f"<v>{45_000 + at}</v>", style=styles["date"])
    parts.put(parts.sheet(title), str(sheet))


def _cells(column: int, rows: list[int]) -> str:
    letter = get_column_letter(column)
    return f"{letter}{rows[0]}:{letter}{rows[-1]}"


def _add_rows_of_totals(parts: Parts) -> None:
    """Some rows below the table: a total with formulas in columns of ours, and a remark."""
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    headers, last = sheet.headers(3), max(sheet.rows)
    first = min(row for row in sheet.rows if row > 3)
    sheet.type(last + 2, headers["Strip"], "Mean")
    for header in ("Take-off margin [m]", "Usable for take-off [m]"):
        column, letter = headers[header], get_column_letter(headers[header])
        sheet.put(last + 2, column, f"<f>AVERAGE({letter}{first}:{letter}{last})</f><v>321.5</v>")
    sheet.type(last + 3, headers["Name"], "All lengths were paced in March")
    sheet.head = re.sub(r'(<dimension ref="[A-Z]+\d+:[A-Z]+)\d+', rf"\g<1>{last + 3}", sheet.head)
    parts.put(parts.sheet("Strips"), str(sheet))


def _add_words_on_pages(parts: Parts) -> None:
    """Words and a formula beside the values of the pages."""
    for title in ("Aircraft", "Day", "Rules", "Method"):
        sheet = SheetText.of(parts.text(parts.sheet(title)))
        row = min(sheet.rows)
        sheet.type(row, 15, f"Checked with Ada: {title}")
        sheet.put(row, 16, "<f>TODAY()</f><v>46000</v>")
        parts.put(parts.sheet(title), str(sheet))


# --- a sheet of the user's


def _add_own_sheet(parts: Parts) -> None:
    """A sheet that reads ours, with a table, a hidden row, data bars, sparklines, a link, and protection."""
    part = "xl/worksheets/sheet77.xml"
    table = "xl/tables/table1.xml"
    cells = (
        '<row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="inlineStr"><is><t>Fuel</t></is></c></row>'
        '<row r="2"><c r="A2" t="str"><f>Summary!H15&amp;" today"</f><v>old</v></c><c r="B2"><v>96.5</v></c></row>'
        '<row r="3" hidden="1"><c r="A3"><f>COUNTIF(Strips!E:E,"suitable")</f><v>3</v></c><c r="B3"><v>40</v></c></row>'
        '<row r="4"><c r="A4"><f t="array" ref="A4">SUM(LEN(Summary!H15:H17))</f><v>1</v></c><c r="B4"><v>41</v></c></row>'
    )
    bars = (
        f'<ext xmlns:x14="{_X14}" uri="{{78C0D931-6437-407d-A8EE-F0AAD7539E65}}"><x14:conditionalFormattings>'
        f'<x14:conditionalFormatting xmlns:xm="{_XM}"><x14:cfRule type="dataBar" id="{{0A0B0C0D-0000-4000-8000-000000000001}}">'
        '<x14:dataBar minLength="0" maxLength="100" border="1" gradient="0"><x14:cfvo type="autoMin"/><x14:cfvo type="autoMax"/>'
        '<x14:borderColor rgb="FF638EC6"/></x14:dataBar></x14:cfRule><xm:sqref>B2:B4</xm:sqref></x14:conditionalFormatting>'
        "</x14:conditionalFormattings></ext>"
    )
    parts.put(part, (
        f'{_XML}<worksheet xmlns="{_MAIN}" xmlns:r="{OFFICE}"><sheetPr><tabColor rgb="FF00B050"/></sheetPr><dimension ref="A1:B4"/>'
        f"<sheetData>{cells}</sheetData><sheetProtection sheet=\"1\" objects=\"1\"/>"
        '<conditionalFormatting sqref="B2:B4"><cfRule type="dataBar" priority="1"><dataBar><cfvo type="min"/><cfvo type="max"/>'
        '<color rgb="FF638EC6"/></dataBar></cfRule></conditionalFormatting>'
        '<hyperlinks><hyperlink ref="B3" location="Strips!A4" display="to the strips"/></hyperlinks>'
        f'<tableParts count="1"><tablePart r:id="user1"/></tableParts><extLst>{bars}{_sparkline("Strips!G4:G9", "C2")}</extLst></worksheet>'
    ))  # fmt: skip
    parts.declare(part, f"{_SPREADSHEET}.worksheet+xml")
    number = parts.relate("xl/workbook.xml", "worksheet", "worksheets/sheet77.xml")
    parts.change("xl/workbook.xml", "</sheets>", f'<sheet name="{NOTES}" sheetId="77" r:id="{number}"/></sheets>')
    parts.put(table, (
        f'{_XML}<table xmlns="{_MAIN}" id="1" name="Fuel" displayName="Fuel" ref="A1:B4"><autoFilter ref="A1:B4"/>'
        '<tableColumns count="2"><tableColumn id="1" name="Ask  Ada first"/><tableColumn id="2" name="Fuel"/></tableColumns></table>'
    ))  # fmt: skip
    parts.declare(table, f"{_SPREADSHEET}.table+xml")
    parts.relate(part, "table", "../tables/table1.xml")


def _sparkline(source: str, cell: str) -> str:
    return (
        f'<ext xmlns:x14="{_X14}" uri="{{05C60535-1F16-4fd2-B633-F4F36F0B64E0}}"><x14:sparklineGroups xmlns:xm="{_XM}">'
        '<x14:sparklineGroup displayEmptyCellsAs="gap"><x14:colorSeries rgb="FF376092"/><x14:sparklines><x14:sparkline>'
        f"<xm:f>{source}</xm:f><xm:sqref>{cell}</xm:sqref></x14:sparkline></x14:sparklines></x14:sparklineGroup>"
        "</x14:sparklineGroups></ext>"
    )


# --- things that lie on a sheet


def _into_tail(parts: Parts, title: str, element: str, before: tuple[str, ...]) -> None:
    """Put an element into a sheet's part, before the first of some others that it has."""
    part = parts.sheet(title)
    head, _, tail = parts.text(part).partition("</sheetData>")
    place = min(at for name in (*before, "/worksheet") if (at := tail.find(f"<{name}")) >= 0)
    parts.put(part, f"{head}</sheetData>{tail[:place]}{element}{tail[place:]}")


def _add_drawing(parts: Parts) -> None:
    """On the Summary: a text box, a picture and a chart that reads it."""
    drawing, picture, chart = "xl/drawings/drawing9.xml", "xl/media/image1.png", "xl/charts/chart1.xml"
    parts[picture] = _png()
    parts.declare_ending("png", "image/png")
    anchor = ("<xdr:twoCellAnchor><xdr:from><xdr:col>{0}</xdr:col><xdr:colOff>0</xdr:colOff><xdr:row>0</xdr:row><xdr:rowOff>0"
              "</xdr:rowOff></xdr:from><xdr:to><xdr:col>{1}</xdr:col><xdr:colOff>0</xdr:colOff><xdr:row>6</xdr:row><xdr:rowOff>0"
              "</xdr:rowOff></xdr:to>{2}<xdr:clientData/></xdr:twoCellAnchor>")  # fmt: skip
    box = ('<xdr:sp macro="" textlink=""><xdr:nvSpPr><xdr:cNvPr id="2" name="TextBox 1"/><xdr:cNvSpPr txBox="1"/></xdr:nvSpPr><xdr:spPr>'
           '<a:prstGeom prst="rect"><a:avLst/></a:prstGeom></xdr:spPr><xdr:txBody><a:bodyPr/><a:p><a:r><a:t>Call the caretaker'
           "</a:t></a:r></a:p></xdr:txBody></xdr:sp>")  # fmt: skip
    image = ('<xdr:pic><xdr:nvPicPr><xdr:cNvPr id="3" name="Picture 2"/><xdr:cNvPicPr/></xdr:nvPicPr><xdr:blipFill><a:blip '
             'r:embed="user1"/><a:stretch/></xdr:blipFill><xdr:spPr><a:prstGeom prst="rect"><a:avLst/></a:prstGeom></xdr:spPr></xdr:pic>')  # fmt: skip
    frame = ('<xdr:graphicFrame macro=""><xdr:nvGraphicFramePr><xdr:cNvPr id="4" name="Chart 3"/><xdr:cNvGraphicFramePr/>'
             '</xdr:nvGraphicFramePr><xdr:xfrm><a:off x="0" y="0"/><a:ext cx="0" cy="0"/></xdr:xfrm><a:graphic><a:graphicData '
             'uri="http://schemas.openxmlformats.org/drawingml/2006/chart"><c:chart xmlns:c="http://schemas.openxmlformats.org/'
             'drawingml/2006/chart" r:id="user2"/></a:graphicData></a:graphic></xdr:graphicFrame>')  # fmt: skip
    shapes = anchor.format(22, 25, box) + anchor.format(26, 28, image) + anchor.format(29, 36, frame)
    parts.put(drawing, f'{_XML}<xdr:wsDr xmlns:xdr="{_XDR}" xmlns:a="{_A}" xmlns:r="{OFFICE}">{shapes}</xdr:wsDr>')
    parts.put(chart, (
        f'{_XML}<c:chartSpace xmlns:c="http://schemas.openxmlformats.org/drawingml/2006/chart" xmlns:a="{_A}"><c:chart><c:plotArea>'
        '<c:barChart><c:barDir val="col"/><c:ser><c:idx val="0"/><c:order val="0"/><c:val><c:numRef><c:f>Summary!$O$15:$O$18</c:f>'
        '</c:numRef></c:val></c:ser><c:axId val="1"/><c:axId val="2"/></c:barChart><c:catAx><c:axId val="1"/><c:crossAx val="2"/>'
        '</c:catAx><c:valAx><c:axId val="2"/><c:crossAx val="1"/></c:valAx></c:plotArea></c:chart></c:chartSpace>'
    ))  # fmt: skip
    parts.relate(drawing, "image", "../media/image1.png")
    parts.relate(drawing, "chart", "../charts/chart1.xml")
    parts.declare(drawing, _DRAWING)
    parts.declare(chart, "application/vnd.openxmlformats-officedocument.drawingml.chart+xml")
    number = parts.relate(parts.sheet("Summary"), "drawing", "../drawings/drawing9.xml")
    _into_tail(parts, "Summary", f'<drawing xmlns:r="{OFFICE}" r:id="{number}"/>', ("legacyDrawing", "tableParts", "extLst"))


def _png() -> bytes:
    """A picture of one red point (PNG, ISO/IEC 15948)."""

    def chunk(kind: bytes, data: bytes) -> bytes:
        return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))

    header = struct.pack(">IIBBBBB", 1, 1, 8, 2, 0, 0, 0)
    return b"\x89PNG\r\n\x1a\n" + chunk(b"IHDR", header) + chunk(b"IDAT", zlib.compress(b"\0\xff\0\0")) + chunk(b"IEND", b"")


def _add_pictures_of_page(parts: Parts) -> None:
    """On the sheet Strips: a background picture, and one in the header, which is kept as VML."""
    parts["xl/media/image2.png"] = _png()
    vml = "xl/drawings/vmlDrawing9.vml"
    parts.put(vml, (
        '<xml xmlns:v="urn:schemas-microsoft-com:vml" xmlns:o="urn:schemas-microsoft-com:office:office"><v:shape id="LH" '
        'style="width:30pt;height:30pt"><v:imagedata o:relid="user1" o:title="badge"/></v:shape></xml>'
    ))  # fmt: skip
    parts.relate(vml, "image", "../media/image2.png")
    sheet = parts.sheet("Strips")
    header, ground = parts.relate(sheet, "vmlDrawing", "../drawings/vmlDrawing9.vml"), parts.relate(sheet, "image", "../media/image2.png")
    elements = f'<legacyDrawingHF xmlns:r="{OFFICE}" r:id="{header}"/><picture xmlns:r="{OFFICE}" r:id="{ground}"/>'
    _into_tail(parts, "Strips", elements, ("oleObjects", "controls", "tableParts", "extLst"))


def _add_note(parts: Parts) -> None:
    """A note on a cell of the sheet Strips, among those of the headers, which are ours."""
    part = next(name for name in parts if name.startswith("xl/comments") and b"Key of this direction" in parts[name])
    parts.change(part, "</authors>", "<author>Ada Quillfeather</author></authors>")
    parts.change(part, "</commentList>", (
        '<comment ref="B5" authorId="1" shapeId="0"><text><r><rPr><b/></rPr><t>Ada: </t></r><r><t>gate is locked</t></r></text>'
        "</comment></commentList>"
    ))  # fmt: skip


def _add_threaded_comment(parts: Parts) -> None:
    threads, people = "xl/threadedComments/threadedComment1.xml", "xl/persons/person.xml"
    space = "http://schemas.microsoft.com/office/spreadsheetml/2018/threadedcomments"
    kinds = "http://schemas.microsoft.com/office/2017/10/relationships"
    who = "{11111111-2222-4333-8444-555555555555}"
    parts.put(threads, (
        f'{_XML}<ThreadedComments xmlns="{space}"><threadedComment ref="H15" dT="2026-03-01T09:00:00.00" personId="{who}" '
        'id="{A1111111-2222-4333-8444-555555555555}"><text>Is the fence still there?</text></threadedComment></ThreadedComments>'
    ))  # fmt: skip
    parts.put(people, f'{_XML}<personList xmlns="{space}"><person displayName="Bram Oakenshaw" id="{who}" userId="b" providerId="None"/></personList>')
    parts.declare(threads, "application/vnd.ms-excel.threadedcomments+xml")
    parts.declare(people, "application/vnd.ms-excel.person+xml")
    parts.relate(parts.sheet("Summary"), f"{kinds}/threadedComment", "../threadedComments/threadedComment1.xml")
    parts.relate("xl/workbook.xml", f"{kinds}/person", "persons/person.xml")


def _add_sparklines(parts: Parts) -> None:
    """Sparklines on the sheet Summary."""
    _into_tail(parts, "Summary", f'<extLst>{_sparkline("Summary!O15:O18", "AA15")}</extLst>', ())


def _add_control(parts: Parts) -> None:
    """A check box on the sheet Day, by a part of its own."""
    part, vml = "xl/ctrlProps/ctrlProp1.xml", "xl/drawings/vmlDrawing8.vml"
    parts.put(part, f'{_XML}<formControlPr xmlns="{_X14}" objectType="CheckBox" checked="Checked" fmlaLink="$H$6" lockText="1"/>')
    parts.put(vml, '<xml xmlns:v="urn:schemas-microsoft-com:vml"><v:shape id="_x0000_s9001" style="width:60pt;height:15pt"/></xml>')
    parts.declare(part, "application/vnd.ms-excel.controlproperties+xml")
    sheet = parts.sheet("Day")
    drawing, control = parts.relate(sheet, "vmlDrawing", "../drawings/vmlDrawing8.vml"), parts.relate(sheet, "ctrlProp", "../ctrlProps/ctrlProp1.xml")
    compatible = "http://schemas.openxmlformats.org/markup-compatibility/2006"
    _into_tail(parts, "Day", (
        f'<legacyDrawing xmlns:r="{OFFICE}" r:id="{drawing}"/><mc:AlternateContent xmlns:mc="{compatible}"><mc:Choice '
        f'xmlns:x14="{_X14}" Requires="x14"><controls><mc:AlternateContent><mc:Choice Requires="x14"><control shapeId="9001" '
        f'xmlns:r="{OFFICE}" r:id="{control}" name="Check Box 1"/></mc:Choice></mc:AlternateContent></controls></mc:Choice>'
        "</mc:AlternateContent>"
    ), ("tableParts", "extLst"))  # fmt: skip


def _add_formats(parts: Parts) -> None:
    """Formats of a user's on the sheets that are ours: colours by condition in a column of theirs and over ours, merged cells."""
    sheet = SheetText.of(parts.text(parts.sheet("Strips")))
    letter = get_column_letter(sheet.headers(3)[MINE + "price"])
    rule = '<conditionalFormatting sqref="{}"><cfRule type="top10" priority="{}" rank="3"/></conditionalFormatting>'
    _into_tail(parts, "Strips", rule.format(f"{letter}4:{letter}9", 90) + rule.format("A4:ZZ6", 91), ("dataValidations", "hyperlinks", "pageMargins"))
    _into_tail(parts, "Summary", '<mergeCells count="1"><mergeCell ref="AC3:AD4"/></mergeCells>', ("conditionalFormatting",))


def _add_names(parts: Parts) -> None:
    names = f"<definedName name=\"my_fuel\">'{NOTES}'!$B$2</definedName><definedName name=\"my_rate\" comment=\"an hour\">185.5</definedName>"
    parts.change("xl/workbook.xml", "</definedNames>", f"{names}</definedNames>")


def _add_custom_xml(parts: Parts) -> None:
    parts.put("customXml/item1.xml", '<trip xmlns="urn:invented:trip"><leg>XTLF</leg></trip>')
    parts.put("customXml/itemProps1.xml", '<ds:datastoreItem ds:itemID="{22222222-3333-4444-8555-666666666666}" '
              'xmlns:ds="http://schemas.openxmlformats.org/officeDocument/2006/customXml"/>')  # fmt: skip
    parts.declare("customXml/itemProps1.xml", "application/vnd.openxmlformats-officedocument.customXmlProperties+xml")
    parts.relate("customXml/item1.xml", "customXmlProps", "itemProps1.xml")
    parts.relate("xl/workbook.xml", "customXml", "../customXml/item1.xml")


def _add_properties(parts: Parts) -> None:
    """Properties of the document: a title of the user's, and some of their own."""
    part = "docProps/custom.xml"
    space = "http://schemas.openxmlformats.org/officeDocument/2006/custom-properties"
    parts.put(part, f'{_XML}<Properties xmlns="{space}"><property fmtid="{{D5CDD505-2E9C-101B-9397-08002B2CF9AE}}" pid="2" name="Reviewed">'
              '<vt:bool xmlns:vt="http://schemas.openxmlformats.org/officeDocument/2006/docPropsVTypes">true</vt:bool></property></Properties>')  # fmt: skip
    parts.declare(part, "application/vnd.openxmlformats-officedocument.custom-properties+xml")
    parts.relate("", "custom-properties", "docProps/custom.xml")
    parts.change("docProps/core.xml", "Airstrip suitability", "Strips of the Lantern Range")


def _add_printer_settings(parts: Parts) -> None:
    parts["xl/printerSettings/printerSettings1.bin"] = bytes(range(256))
    parts.declare_ending("bin", f"{_SPREADSHEET}.printerSettings")
    parts.relate(parts.sheet("Rules"), "printerSettings", "../printerSettings/printerSettings1.bin")


def _add_macros(parts: Parts) -> None:
    """What stands for a project of macros: nothing here looks into it."""
    part = "xl/vbaProject.bin"
    parts[part] = bytes.fromhex("D0CF11E0A1B11AE1") + bytes(range(255, -1, -1)) * 4
    parts.declare(part, "application/vnd.ms-office.vbaProject")
    parts.relate("xl/workbook.xml", "http://schemas.microsoft.com/office/2006/relationships/vbaProject", "vbaProject.bin")
    parts.change("[Content_Types].xml", f"{_SPREADSHEET}.sheet.main+xml", "application/vnd.ms-excel.sheet.macroEnabled.main+xml")


def set_calc_chain(parts: Parts) -> None:
    """The order of calculation, as Excel keeps it: every cell with a formula; the sheet's number where it changes."""
    entries = []
    book = parts.text("xl/workbook.xml")
    for title in parts.titles():
        number = re.search(rf'name="{re.escape(title)}" sheetId="(\d+)"', book)
        assert number is not None
        cells = re.findall(r'<c r="([A-Z]+\d+)"[^>]*><f', parts.text(parts.sheet(title)))
        entries += [f'<c r="{cell}"' + (f' i="{number[1]}"/>' if not at else "/>") for at, cell in enumerate(cells)]
    fresh = CHAIN not in parts
    parts.put(CHAIN, f'{_XML}<calcChain xmlns="{_MAIN}">{"".join(entries)}</calcChain>')
    if not fresh:
        return
    parts.declare(CHAIN, f"{_SPREADSHEET}.calcChain+xml")
    parts.relate("xl/workbook.xml", "calcChain", "calcChain.xml")


# --- looking at it


def chain_cells(parts: Parts) -> list[tuple[str, str]]:
    """Number of the sheet and name of each cell in the order of calculation."""
    sheet, found = "", []
    for entry in re.findall(r"<c [^>]*>", parts.text(CHAIN)):
        told = dict(re.findall(r'(\w+)="([^"]*)"', entry))
        sheet = told.get("i", sheet)
        found.append((sheet, told["r"]))
    return found


def foreign_parts(path: Path) -> dict[str, str]:
    """Hash of every part but the worksheets that are stripcheck's."""
    parts = Parts.read(path)
    ours = {parts.sheet(title) for title in parts.titles() if title in OURS}
    return {name: digest for name, digest in parts.hashes().items() if name not in ours}


def own_cells(path: Path, is_own: Callable[[str, int, int], bool]) -> dict[tuple[str, int, int], str]:
    """The cells of stripcheck's sheets that are a user's, to the letter, by sheet, row and column."""
    parts = Parts.read(path)
    return {
        (title, row, column): cell
        for title in parts.titles() if title in OURS
        for row, cells in SheetText.of(parts.text(parts.sheet(title))).rows.items()
        for column, cell in cells.items() if is_own(title, row, column)
    }  # fmt: skip
