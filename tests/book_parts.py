"""A workbook as the texts of its parts, edited as a spreadsheet program would: rows and columns moved, cells typed over.

For tests that must know what a file holds to the byte; good enough for the parts that this project and openpyxl write.
"""

from __future__ import annotations

import re
import zipfile
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from hashlib import sha256
from pathlib import Path
from xml.sax.saxutils import escape, unescape

from openpyxl.formula.translate import Translator
from openpyxl.utils import column_index_from_string, get_column_letter

OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_ROW = re.compile(r"<row ([^>]*?)(?:/>|>(.*?)</row>)", re.DOTALL)
_CELL = re.compile(r"<c ([^>]*?)(?:/>|>(.*?)</c>)", re.DOTALL)
_REFERENCE = re.compile(
    r"""(?<![\w.$!])(?:(?P<sheet>'(?:[^']|'')+'|[A-Za-z_][\w.]*)!)?"""
    r"""\$?[A-Z]{1,3}\$?[0-9]+(?::\$?[A-Z]{1,3}\$?[0-9]+)?(?![\w(.!])"""
)
_CORNER = re.compile(r"(\$?)([A-Z]{1,3})(\$?)([0-9]+)")


class Parts(dict[str, bytes]):
    """The parts of a package by name."""

    @classmethod
    def read(cls, path: Path) -> Parts:
        with zipfile.ZipFile(path) as package:
            return cls({name: package.read(name) for name in package.namelist()})

    def write(self, path: Path) -> None:
        with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as package:
            for name, data in self.items():
                package.writestr(name, data)

    def text(self, part: str) -> str:
        return self[part].decode()

    def put(self, part: str, text: str) -> None:
        self[part] = text.encode()

    def change(self, part: str, old: str, new: str) -> None:
        """Put ``new`` in place of the first ``old``, which must be there."""
        text = self.text(part)
        assert old in text, f"{part}: no {old}"
        self.put(part, text.replace(old, new, 1))

    def sheet(self, title: str) -> str:
        """The part of a sheet."""
        number = re.search(rf'<sheet [^>]*name="{re.escape(escape(title))}"[^>]*r:id="([^"]*)"', self.text("xl/workbook.xml"))
        assert number is not None, title
        relations = self.text("xl/_rels/workbook.xml.rels")
        entry = next(entry for entry in re.findall(r"<Relationship [^>]*>", relations) if f'Id="{number[1]}"' in entry)
        target = re.search(r'Target="([^"]*)"', entry)
        assert target is not None
        return target[1].lstrip("/") if target[1].startswith("/") else f"xl/{target[1]}"

    def titles(self) -> list[str]:
        return [unescape(name) for name in re.findall(r'<sheet [^>]*?name="([^"]*)"', self.text("xl/workbook.xml"))]

    def relate(self, part: str, kind: str, target: str) -> str:
        """Relate a part to another; returns the number of the relation."""
        folder, _, name = part.rpartition("/")
        rels = f"{folder}/_rels/{name}.rels" if folder else f"_rels/{name}.rels"
        namespace = "http://schemas.openxmlformats.org/package/2006/relationships"
        if rels not in self:
            self.put(rels, f'<Relationships xmlns="{namespace}"></Relationships>')
        number = f"user{self.text(rels).count('<Relationship ') + 1}"
        whole = kind if kind.startswith("http") else f"{OFFICE}/{kind}"
        self.change(rels, "</Relationships>", f'<Relationship Id="{number}" Type="{whole}" Target="{target}"/></Relationships>')
        return number

    def declare(self, part: str, kind: str) -> None:
        self.change("[Content_Types].xml", "</Types>", f'<Override PartName="/{part}" ContentType="{kind}"/></Types>')

    def declare_ending(self, ending: str, kind: str) -> None:
        if f'Extension="{ending}"' not in self.text("[Content_Types].xml"):
            entry = f'<Default Extension="{ending}" ContentType="{kind}"/>'
            text = self.text("[Content_Types].xml")
            self.put("[Content_Types].xml", re.sub(r"(<Types[^>]*>)", rf"\1{entry}", text, count=1))

    def hashes(self) -> dict[str, str]:
        return {name: sha256(data).hexdigest() for name, data in self.items()}


@dataclass
class SheetText:
    """A worksheet part: what stands before the rows, the rows, and what stands after."""

    head: str
    rows: dict[int, dict[int, str]]
    attributes: dict[int, str]
    tail: str

    @classmethod
    def of(cls, part: str) -> SheetText:
        start, stop = part.index("<sheetData>") + 11, part.index("</sheetData>")
        rows: dict[int, dict[int, str]] = {}
        attributes: dict[int, str] = {}
        for row in _ROW.finditer(part, start, stop):
            number = int(re.search(r'\br="(\d+)"', row[1])[1])  # type: ignore[index]
            attributes[number] = row[1].strip()
            rows[number] = {_column(cell[1]): cell[0] for cell in _CELL.finditer(row[2] or "")}
        return cls(part[:start], rows, attributes, part[stop:])

    def __str__(self) -> str:
        return self.head + "".join(self._rows()) + self.tail

    def _rows(self) -> Iterator[str]:
        for number in sorted(self.rows):
            attributes = re.sub(r'\br="\d+"', f'r="{number}"', self.attributes.get(number, f'r="{number}"'))
            cells = self.rows[number]
            yield f"<row {attributes}>" + "".join(cells[column] for column in sorted(cells)) + "</row>"

    def put(self, row: int, column: int, inside: str, kind: str = "", style: str | None = None) -> None:
        """Put a cell in place; it keeps its style unless told another."""
        own = self.rows.setdefault(row, {}).get(column, "")
        found = re.search(r'\bs="(\d+)"', own.split(">")[0])
        kept = style if style is not None else found[1] if found else ""
        attributes = "".join(f' {name}="{value}"' for name, value in (("s", kept), ("t", kind)) if value)
        name = f"{get_column_letter(column)}{row}"
        self.rows[row][column] = f'<c r="{name}"{attributes}>{inside}</c>' if inside else f'<c r="{name}"{attributes}/>'

    def type(self, row: int, column: int, value: float | str | None, style: str | None = None) -> None:
        """Type a value into a cell, or clear it."""
        if value is None or value == "":
            self.put(row, column, "", style=style)
        elif isinstance(value, str):
            self.put(row, column, f"<is><t>{escape(value)}</t></is>", "inlineStr", style)
        else:
            self.put(row, column, f"<v>{value!r}</v>", style=style)

    def headers(self, row: int) -> dict[str, int]:
        """Columns by header."""
        texts = {column: "".join(re.findall(r"<t[^>]*>([^<]*)</t>", cell)) for column, cell in self.rows[row].items()}
        return {unescape(text): column for column, text in sorted(texts.items(), reverse=True) if text}

    def shown(self, row: int, column: int) -> str:
        """What a cell shows: its text or number."""
        cell = self.rows.get(row, {}).get(column, "")
        return unescape("".join(re.findall(r"<(?:t|v)(?: [^>]*)?>([^<]*)</(?:t|v)>", cell)))


def _column(attributes: str) -> int:
    found = re.search(r'\br="([A-Z]+)\d+"', attributes)
    assert found is not None
    return column_index_from_string(found[1])


@dataclass
class Shift:
    """Rows or columns of a sheet put in (``by`` > 0) before a place, or taken out from it on (``by`` < 0)."""

    title: str
    place: int
    by: int
    columns: bool
    kept: Callable[[int], int | None] = field(init=False)

    def __post_init__(self) -> None:
        self.kept = self._moved

    def _moved(self, number: int) -> int | None:
        if number < self.place:
            return number
        return None if number < self.place - min(self.by, 0) else number + self.by

    def reference(self, text: str, here: bool) -> str:
        """A formula, or a list of references, after it; ``here``: on the sheet itself."""
        quoted = re.split(r'("[^"]*")', text)
        return "".join(part if part.startswith('"') else self._plain(part, here) for part in quoted)

    def _plain(self, text: str, here: bool) -> str:
        def moved(found: re.Match[str]) -> str:
            sheet = found["sheet"]
            if (sheet is None and not here) or (sheet is not None and sheet.strip("'") != self.title):
                return found[0]
            head, _, cells = found[0].rpartition("!")
            corners = self._corners(cells)
            return f"{head}!{corners}" if head else corners

        return _REFERENCE.sub(moved, text)

    def _corners(self, cells: str) -> str:
        corners = [_CORNER.fullmatch(corner) for corner in cells.split(":")]
        numbers = [column_index_from_string(c[2]) if self.columns else int(c[4]) for c in corners if c is not None]
        ends = [self.kept(number) for number in numbers]
        if len(ends) == 2 and None in ends:  # a range shrinks
            alive = [end for number in range(numbers[0], numbers[1] + 1) if (end := self.kept(number)) is not None]
            ends = [alive[0], alive[-1]] if alive else ends
        if None in ends:
            return "#REF!"
        made = []
        for corner, end in zip(corners, ends, strict=True):
            assert corner is not None and end is not None
            letters, number = (get_column_letter(end), corner[4]) if self.columns else (corner[2], str(end))
            made.append(f"{corner[1]}{letters}{corner[3]}{number}")
        return ":".join(made)


def shift(parts: Parts, title: str, place: int, by: int, columns: bool = False) -> None:
    """Put rows or columns into a sheet, or take them out, as a spreadsheet program does: all references follow."""
    change = Shift(title, place, by, columns)
    for other in parts.titles():
        part = parts.sheet(other)
        here = other == title
        text = re.sub(r"(<(?:f|formula|formula1|formula2|xm:f)(?: [^>]*)?>)([^<]*)(<)",
                      lambda found, here=here: found[1] + escape(change.reference(unescape(found[2]), here)) + found[3],
                      parts.text(part))  # fmt: skip
        if here:
            sheet = SheetText.of(text)
            _move(sheet, change)
            sheet.tail = re.sub(r'(\s(?:ref|sqref)=")([^"]*)(")', lambda found: found[1] + _areas(change, found[2]) + found[3],
                                sheet.tail)  # fmt: skip
            sheet.head = re.sub(r'(<dimension ref=")([^"]*)', lambda found: found[1] + _areas(change, found[2]), sheet.head)
            sheet.head = _moved_widths(sheet.head, change) if columns else sheet.head
            text = str(sheet)
        parts.put(part, text)
    names = re.sub(r"(<definedName [^>]*>)([^<]*)(<)",
                   lambda found: found[1] + escape(change.reference(unescape(found[2]), False)) + found[3],
                   parts.text("xl/workbook.xml"))  # fmt: skip
    parts.put("xl/workbook.xml", names)


def _areas(change: Shift, areas: str) -> str:
    return " ".join(area for one in areas.split() if (area := change.reference(one, True)) != "#REF!")


def _move(sheet: SheetText, change: Shift) -> None:
    rows: dict[int, dict[int, str]] = {}
    attributes: dict[int, str] = {}
    for number, cells in sheet.rows.items():
        row = number if change.columns else change.kept(number)
        if row is None:
            continue
        moved = {}
        for column, cell in cells.items():
            to = change.kept(column) if change.columns else column
            if to is not None:
                moved[to] = renamed(cell, row, to)
        rows[row], attributes[row] = moved, sheet.attributes.get(number, f'r="{number}"')
    sheet.rows, sheet.attributes = rows, attributes


def _moved_widths(head: str, change: Shift) -> str:
    def moved(found: re.Match[str]) -> str:
        numbers = {name: int(re.search(rf'\b{name}="(\d+)"', found[0])[1]) for name in ("min", "max")}  # type: ignore[index]
        ends = {name: change.kept(number) for name, number in numbers.items()}
        if None in ends.values():
            return ""
        return re.sub(r'\b(min|max)="\d+"', lambda part: f'{part[1]}="{ends[part[1]]}"', found[0])

    return re.sub(r"<col [^>]*/>", moved, head)


def renamed(cell: str, row: int, column: int) -> str:
    """A cell at another place, without a look at its formula."""
    return re.sub(r'(<c (?:[^>]*?\s)?r=")[A-Z]+\d+', rf"\g<1>{get_column_letter(column)}{row}", cell, count=1)


def reorder(parts: Parts, title: str, rows: Sequence[int], order: Sequence[int]) -> None:
    """Sort rows: where ``rows[i]`` was, stands what stood in ``order[i]``; formulas that read their own row follow."""
    part = parts.sheet(title)
    sheet = SheetText.of(parts.text(part))
    before = dict(sheet.rows)
    for row, source in zip(rows, order, strict=True):
        sheet.rows[row] = {column: _in_row(cell, source, row, column) for column, cell in before[source].items()}
    parts.put(part, str(sheet))


def _in_row(cell: str, source: int, row: int, column: int) -> str:
    def moved(found: re.Match[str]) -> str:
        quoted = re.split(r'("[^"]*")', unescape(found[2]))
        own = re.compile(rf"(?<![\w.!:])(\$?[A-Z]{{1,3}}){source}(?![\w(.:])")
        text = "".join(text if text.startswith('"') else own.sub(rf"\g<1>{row}", text) for text in quoted)
        return found[1] + escape(text) + found[3]

    return renamed(re.sub(r"(<f(?: [^>]*)?>)([^<]*)(<)", moved, cell), row, column)


def unshare(parts: Parts, title: str) -> None:
    """Give each cell that shares a formula its own, as a program does that sorts them."""
    part = parts.sheet(title)
    sheet, first = SheetText.of(parts.text(part)), {}
    for row, cells in sorted(sheet.rows.items()):
        for column, cell in sorted(cells.items()):
            shared = re.search(r'<f t="shared"[^>]*?si="(\d+)"(?:/>|>([^<]*)</f>)', cell)
            if shared:
                name = f"{get_column_letter(column)}{row}"
                if shared[2]:
                    first[shared[1]] = (name, unescape(shared[2]))
                origin, text = first[shared[1]]
                own = Translator(f"={text}", origin).translate_formula(name)[1:]
                cells[column] = cell.replace(shared[0], f"<f>{escape(own)}</f>")
    parts.put(part, str(sheet))


def hide(parts: Parts, title: str, rows: Sequence[int]) -> None:
    """Hide rows, as a filter or a user does."""
    part = parts.sheet(title)
    sheet = SheetText.of(parts.text(part))
    for row in rows:
        sheet.attributes[row] = f'{sheet.attributes[row]} hidden="1"'
    parts.put(part, str(sheet))
