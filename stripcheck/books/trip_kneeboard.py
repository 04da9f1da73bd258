"""The Kneeboard sheet: the trip on one page, nothing to type."""

from __future__ import annotations

from typing import Any

from openpyxl.formatting.rule import FormulaRule
from openpyxl.styles import Border, Font, PatternFill, Side
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book_cells
from stripcheck.books.trip_layout import KNEEBOARD, TRIP, cell, fixed
from stripcheck.books.trip_page import SUMMARY, Page
from stripcheck.books.trip_plan import STOPS, Plan
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.sheet import styles
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.verdict import SUITABLE

FIRST_ROW, ROWS_OF_STOP = 8, 4
HEADER_ROW = 7
COLUMNS = (  # header, width, line of the Trip sheet without its side, number format
    ("", 9.5, "", ""),
    ("Verdict", 12.5, "verdict", "General"),
    ("On", 6, "direction", "General"),
    ("Flap", 6, "flap", "General"),
    ("Stall kt", 6.5, "stall", "0"),
    ("Fly kt", 6.5, "speed", "0"),
    ("Needs m", 7.5, "required", "#,##0"),
    ("Has m", 7.5, "available", "#,##0"),
    ("Margin m", 8.5, "margin", "#,##0;-#,##0;0"),
    ("Mass kg", 7.5, "", "#,##0"),
    ("Up to kg", 7.5, "greatest", "#,##0"),
    ("Cross kt", 6.5, "crosswind", "0"),
)
LETTERS = "ABCDEFGHIJKL"
_BLACK = Side(style="thin", color="404040")


def write_kneeboard(pages: Pages, page: Page, plan: Plan, card: Card) -> None:
    """The sheet; the Trip sheet must be written."""
    sheet: Worksheet = pages.book[KNEEBOARD]
    sheet.sheet_view.showGridLines = False
    for letter, (header, width, *_) in zip(LETTERS, COLUMNS, strict=True):
        sheet.column_dimensions[letter].width = width
        write_header(sheet, HEADER_ROW, (header,), LETTERS.index(letter) + 1)
    sheet.row_dimensions[HEADER_ROW].height = 28
    _write_top(pages, sheet, page, plan, card)
    for stop in range(1, STOPS + 1):
        _write_stop(pages, sheet, page, stop)
    last = FIRST_ROW + ROWS_OF_STOP * STOPS
    sheet[f"A{last}"], sheet[f"A{last}"].font = (
        "Fly: approach speed at 50 ft, or lift-off speed. Needs: with the rules' factors. Up to: the greatest suitable mass.",
        styles.SMALL,
    )
    styles.write_caution(sheet, f"A{last + 1}", CAUTION)
    styles.set_print(sheet, portrait=True)
    sheet.page_setup.fitToHeight = 1
    sheet.print_area = f"A1:L{last + 1}"
    book_cells.protect(sheet)


def _write_top(pages: Pages, sheet: Worksheet, page: Page, plan: Plan, card: Card) -> None:
    """Title, caution, and the trip's lines; a place for date and name."""
    sheet["A1"], sheet["A1"].font = f"{plan.title}: {card.name}", styles.TITLE
    styles.write_caution(sheet, "A2", CAUTION)
    summary = pages.cached[TRIP]
    for row, key in enumerate(("verdicts", "limit", "none", "fuel"), 3):
        address = f"E{SUMMARY[key]}"
        pages.formula(sheet, f"A{row}", fixed(address, TRIP), summary[address])
        sheet[f"A{row}"].font = styles.BOLD if row < 5 else styles.BODY
    sheet["I1"], sheet["I1"].font = "Date: ____________________", styles.SMALL


def _write_stop(pages: Pages, sheet: Worksheet, page: Page, stop: int) -> None:
    """Four rows: what the place is like, the landing, the take-off, and words."""
    top = FIRST_ROW + ROWS_OF_STOP * (stop - 1)
    writer = _Texts(pages, sheet, page, stop)
    used = f'{fixed(cell("runway", stop), TRIP)}<>""'
    name = fixed(cell("name", stop), TRIP)
    title = f"{stop}  {page.typed.get(f'runway_{stop}')}  {pages.cached[TRIP][cell('name', stop)]}"
    writer.put(f"A{top}", f'IF({used},"{stop}  "&{fixed(cell("runway", stop), TRIP)}&"  "&{name},"")',
               title if writer.used else "")
    writer.put(f"E{top}", *writer.weather(used))
    writer.put(f"I{top}", *writer.leg(used))
    for row, side, word in ((top + 1, "landing", "Land"), (top + 2, "takeoff", "Take off")):
        writer.side(row, side, word)
    writer.put(f"A{top + 3}", *writer.words(used))
    for first, last in (("A", "D"), ("E", "H"), ("I", "L")):
        sheet.merge_cells(f"{first}{top}:{last}{top}")
    sheet.merge_cells(f"A{top + 3}:L{top + 3}")
    for letter in LETTERS:
        sheet[f"{letter}{top}"].font, sheet[f"{letter}{top}"].alignment = styles.SMALL, styles.MIDDLE
        for row in (top + 1, top + 2):
            sheet[f"{letter}{row}"].alignment = styles.CENTRE
            sheet[f"{letter}{row}"].font = styles.BOLD if letter in "AB" else styles.BODY
    sheet[f"A{top}"].font = styles.BOLD
    sheet[f"A{top + 3}"].font, sheet[f"A{top + 3}"].alignment = styles.SMALL, styles.WRAP
    sheet.row_dimensions[top + 3].height = 25
    styles.colour_verdicts(sheet, f"B{top + 1}:B{top + 2}")
    band = PatternFill("solid", fgColor="DCE3EA", bgColor="DCE3EA")
    rule = FormulaRule(formula=[f'$A${top}<>""'], fill=band, border=Border(top=_BLACK), font=Font(bold=True))
    sheet.conditional_formatting.add(f"A{top}:L{top}", rule)


class _Texts:
    """Makes the texts of a stop: a formula, and what it comes to now."""

    def __init__(self, pages: Pages, sheet: Worksheet, page: Page, stop: int) -> None:
        self.pages, self.sheet, self.page, self.stop = pages, sheet, page, stop
        self.used = bool(page.typed.get(f"runway_{stop}", ""))

    def put(self, address: str, text: str, value: Any) -> None:
        self.pages.formula(self.sheet, address, text, value)

    def at(self, key: str) -> str:
        """Reference of a line of the Trip sheet for this stop."""
        return fixed(cell(key, self.stop), TRIP)

    def side(self, row: int, side: str, word: str) -> None:
        """The row of the landing or the take-off."""
        verdict, now = self.at(f"{side}_verdict"), self.page.shown.get((f"{side}_verdict", self.stop), "")
        has = (side, self.stop) not in (("landing", 1), ("takeoff", STOPS))
        self.put(f"A{row}", f'IF({verdict}="","","{word}")', word if now else "")
        for letter, (_, _, line, number_format) in zip(LETTERS[1:], COLUMNS[1:], strict=True):
            key = f"{side}_{line}" if line else f"mass_{side}"
            value = self.page.shown.get((key, self.stop), "") if now else ""
            if not has:
                value = ""
            test = f'OR({verdict}="",{self.at(key)}="")'
            self.put(f"{letter}{row}", f'IF({test},"",{self.at(key)})', value)
            self.sheet[f"{letter}{row}"].number_format = number_format

    def _number(self, key: str) -> tuple[str, str]:
        """A typed number, rounded, in words; a dash where it is blank."""
        at, value = self.at(key), self.page.typed.get(f"{key}_{self.stop}", "")
        said = f"{_rounded(value):g}" if isinstance(value, float | int) else "-"
        return f'IF(ISNUMBER({at}),ROUND({at},0),"-")', said

    def weather(self, used: str) -> tuple[str, str]:
        """The forecast in a line."""
        parts = {key: self._number(key) for key in ("temperature", "qnh", "wind_speed")}
        ground, said = self.at("ground"), self.page.typed.get(f"ground_{self.stop}", "")
        origin, speed = self.at("wind_from"), self.at("wind_speed")
        blown = f'IF(ISNUMBER({origin}),TEXT({origin},"000"),"-")&"°/"&{parts["wind_speed"][0]}&" kt"'
        wind = f'IF(ISNUMBER({speed}),IF({speed}=0,"calm",{blown}),"wind -")'
        from_now, speed_now = (self.page.typed.get(f"{key}_{self.stop}", "") for key in ("wind_from", "wind_speed"))
        told = f"{_rounded(from_now):03.0f}" if isinstance(from_now, float | int) else "-"
        now = f"{told}°/{parts['wind_speed'][1]} kt"
        now = "wind -" if speed_now == "" else "calm" if speed_now == 0.0 else now
        text = f'{parts["temperature"][0]}&" °C, "&{parts["qnh"][0]}&" hPa, "&{wind}&", "&{ground}'
        line = f"{parts['temperature'][1]} °C, {parts['qnh'][1]} hPa, {now}, {said}"
        return f'IF({used},{text},"")', line if self.used else ""

    def leg(self, used: str) -> tuple[str, str]:
        """The leg to this stop and the fuel left in a line."""
        if self.stop == 1:
            return '""', ""
        parts, said = {}, {}
        for key in ("leg", "time", "fuel_left"):
            at, value = self.at(key), self.page.number(key, self.stop)
            parts[key] = f'IF(ISNUMBER({at}),ROUND({at},0),"-")'
            said[key] = f"{_rounded(value):g}" if value == value else "-"
        text = f'{parts["leg"]}&" nm, "&{parts["time"]}&" min, "&{parts["fuel_left"]}&" l left"'
        line = f"{said['leg']} nm, {said['time']} min, {said['fuel_left']} l left"
        return f'IF({used},{text},"")', line if self.used else ""

    def words(self, used: str) -> tuple[str, str]:
        """Why a verdict is not "suitable", the abort point, and the loads."""
        fuel, payload = self.at("fuel_out"), self.at("payload")
        aboard = [self.page.number(key, self.stop) for key in ("fuel_out", "payload")]
        leaves = f'AND({self.at("takeoff_verdict")}<>"",ISNUMBER({fuel}),ISNUMBER({payload}))'
        texts = [f'IF({leaves},"Leaves with "&ROUND({fuel},0)&" l, "&ROUND({payload},0)&" kg of payload. ","")']
        line = ""
        if self.page.shown.get(("takeoff_verdict", self.stop), "") and all(value == value for value in aboard):
            line = f"Leaves with {_rounded(aboard[0]):g} l, {_rounded(aboard[1]):g} kg of payload. "
        for side, word in (("landing", "In"), ("takeoff", "Out")):
            verdict, reason = self.at(f"{side}_verdict"), self.at(f"{side}_reason")
            texts.append(f'IF(OR({verdict}="",{verdict}="{SUITABLE}"),"","{word}: "&{reason}&". ")')
            now = self.page.shown.get((f"{side}_verdict", self.stop), "")
            if now not in ("", SUITABLE):
                line += f"{word}: {self.page.shown[f'{side}_reason', self.stop]}. "
        abort, place, speed, seventy = (self.at(key) for key in ("abort", "abort_place", "abort_speed", "seventy"))
        along = f'IF(ISNUMBER({place}),", "&{place}&" m along, "&{speed}&" kt","")'
        texts.append(f'IF({abort}="","","Abort: "&{abort}&{along}&". ")')
        texts.append(f'IF({seventy}="","","70 % of lift-off speed: "&{seventy}&". ")')
        shown = {key: self.page.shown.get((key, self.stop), "") for key in ("abort", "abort_place", "abort_speed", "seventy")}
        if shown["abort"]:
            at = f", {shown['abort_place']:g} m along, {shown['abort_speed']:g} kt" if shown["abort_place"] != "" else ""
            line += f"Abort: {shown['abort']}{at}. "
        line += f"70 % of lift-off speed: {shown['seventy']}. " if shown["seventy"] else ""
        return f'IF({used},{"&".join(texts)},"")', line if self.used else ""


def _rounded(value: float) -> float:
    """As a spreadsheet rounds: halves away from zero."""
    return float(int(abs(value) + 0.5)) * (1.0 if value >= 0.0 else -1.0)
