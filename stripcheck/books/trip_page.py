"""The Trip sheet: what is typed, fuel and masses leg by leg, the verdicts of every stop, and what limits the trip."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, floor, isfinite, isnan, nan
from typing import Any

import numpy as np
from openpyxl.formatting.rule import CellIsRule, FormulaRule
from openpyxl.styles import Font, PatternFill
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common as book_cells
from stripcheck.books.trip_cases import Best, Book
from stripcheck.books.trip_layout import (
    GENERAL_KEYS,
    HEADER_ROW,
    HEADINGS,
    LAST_ROW,
    READING,
    ROWS,
    SECTIONS,
    TRIP,
    Line,
    cell,
    column,
    fixed,
    typed_cells,
)
from stripcheck.books.trip_legs import legs_chain
from stripcheck.books.trip_plan import GENERAL, STOPS, Item, Plan
from stripcheck.books.trip_search import Search
from stripcheck.books.trip_strips import NAMES, Strips
from stripcheck.caution import CAUTION
from stripcheck.chain import evaluate
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.formulas import GROUND_NAMES, NOWHERE, Place, write_formulas
from stripcheck.sheet.pages import Pages, choice, note
from stripcheck.surface import CONDITIONS
from stripcheck.units import to_si
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE, UNSUITABLE

Value = float | str
FURTHER = ("latitude", "longitude", "by_position", "fuel_in", "kept", "stays")  # rows of Reading after those of the page
SUMMARY = {"verdicts": 7, "limit": 8, "none": 10, "fuel": 11, "mass": 12, "entries": 13}  # rows of the box beside the aeroplane
SIDE_WORD = {"landing": "landing at", "takeoff": "take-off from"}
BAD = "FBE3D6"
HEIGHTS = {"landing_reason": 38, "takeoff_reason": 38, "fuel_check": 38, "entry_check": 62,
           "landing_speeds_are": 13, "takeoff_speeds_are": 13}  # fmt: skip


@dataclass
class Page:
    """What the Trip sheet shows, cell by cell, and what the sheet Reading makes of what is typed."""

    typed: dict[str, Value]
    read: dict[str, float]
    worked: dict[str, float]
    shown: dict[tuple[str, int], Value]

    def number(self, key: str, stop: int) -> float:
        """A number that the page shows, NaN where it shows none."""
        value = self.shown.get((key, stop), "")
        return float(value) if isinstance(value, int | float) else nan


def further_cell(key: str, stop: int) -> str:
    """Address, on the sheet Reading, of what the page itself does not show."""
    return f"{column(stop)}{LAST_ROW + 2 + FURTHER.index(key)}"


def read_plan_values(plan: Plan, strips: Strips) -> Page:
    """What stands in the yellow cells at first, what is read of it, and the fuel and masses that follow."""
    typed: dict[str, Value] = dict(plan.general)
    for stop, one in enumerate(plan.stops, 1):
        typed |= {f"{key}_{stop}": value for key, value in one.values.items()}
        typed |= {f"runway_{stop}": one.runway, f"ground_{stop}": one.ground}
    for stop in range(len(plan.stops) + 1, STOPS + 1):
        typed[f"tailwind_{stop}"], typed[f"ground_{stop}"] = 0.0, "dry"
    read: dict[str, float] = {}
    for item, stop in typed_cells():
        key = item.key if item.key in GENERAL_KEYS else f"{item.key}_{stop}"
        value = typed.get(key, "")
        inside = isinstance(value, float | int) and item.low <= value <= item.high
        read[key] = float(value) if inside else item.blank if value == "" else nan
    for stop in range(1, STOPS + 1):
        runway = typed.get(f"runway_{stop}", "")
        pair = strips.names.index(str(runway)) if runway in strips.names else -1
        for key in ("latitude", "longitude"):
            read[f"{key}_{stop}"] = float(strips.shown[key][2 * pair]) if pair >= 0 else nan
        read[f"runway_{stop}"] = pair + 1.0 if pair >= 0 else nan
    chain = legs_chain()
    inputs: dict[str, Any] = {item.key: np.array([read.get(item.key, nan)]) for item in chain.inputs}
    for stop in range(1, STOPS + 1):
        inputs[f"runway_{stop}"] = np.array([bool(typed.get(f"runway_{stop}", ""))])
        for key in ("latitude", "longitude"):
            inputs[f"{key}_{stop}"] = np.array([to_si(read[f"{key}_{stop}"], "°")])
    worked = {key: float(value[0]) for key, value in evaluate(chain, inputs).items()}
    return Page(typed, read, worked, {})


def write_inputs(pages: Pages, page: Page, strips: Strips) -> Worksheet:
    """The Trip sheet with its labels, its yellow cells and the fuel and masses; and the sheet Reading.

    They are made together: the one reads the other.
    """
    sheet: Worksheet = pages.book[TRIP]
    reading: Worksheet = pages.book[READING]
    _write_labels(sheet)
    for item, stop in typed_cells():
        _write_item(pages, sheet, reading, item, stop, page)
    for stop in range(1, STOPS + 1):
        _write_stop(pages, sheet, reading, stop, page, strips)
    _write_legs(pages, sheet, reading, page)
    reading["A1"], reading["A1"].font = "What is read of the sheet Trip: blank where it can't be right", styles.HEADING
    for stop in range(1, STOPS + 1):
        reading[f"{column(stop)}{HEADER_ROW}"] = f"Stop {stop}"
        reading.column_dimensions[column(stop)].width = 11
    reading.column_dimensions["A"].width = 34
    styles.set_print(reading, f"{HEADER_ROW}:{HEADER_ROW}", portrait=True)
    for key, row in ROWS.items():
        if any(key == item.key for item, _ in typed_cells()) or key == "runway":
            reading[f"A{row}"] = sheet[f"A{row}"].value if key != "runway" else "Place in the list of runways"
    for key in FURTHER:
        reading[f"A{LAST_ROW + 2 + FURTHER.index(key)}"] = key.replace("_", " ").capitalize()
    return sheet


def _write_labels(sheet: Worksheet) -> None:
    sheet["A2"] = CAUTION
    styles.write_caution(sheet, "A2", CAUTION)
    sheet.sheet_view.showGridLines = False
    sheet.column_dimensions["A"].width, sheet.column_dimensions["B"].width = 31, 6
    for letter in ["A", "B"] + [column(stop) for stop in range(1, STOPS + 1)]:
        top = sheet[f"{letter}{HEADER_ROW}"]
        top.fill, top.font, top.alignment = styles.HEADER_FILL, styles.HEADER, styles.CENTRE
    sheet[f"A{HEADER_ROW}"], sheet[f"A{HEADER_ROW}"].alignment = "Stop", styles.LEFT
    for stop in range(1, STOPS + 1):
        sheet[f"{column(stop)}{HEADER_ROW}"] = stop
        sheet.column_dimensions[column(stop)].width = 13.5
    sheet[f"A{ROWS['runway']}"], sheet[f"A{ROWS['runway']}"].font = "Strip and runway", styles.BOLD
    sheet.row_dimensions[ROWS["runway"]].height = 27
    sheet.row_dimensions[ROWS["name"]].height = 26
    sheet[f"A{ROWS['runway']}"].alignment = styles.MIDDLE
    for name, title, lines in SECTIONS:
        row = HEADINGS[name]
        sheet[f"A{row}"] = title
        for letter in ["A", "B"] + [column(stop) for stop in range(1, STOPS + 1)]:
            band = sheet[f"{letter}{row}"]
            band.fill, band.font = styles.BAND_FILL, styles.BOLD
        for line in lines:
            _write_line(sheet, line)


def _write_line(sheet: Worksheet, line: Line) -> None:
    row = ROWS[line.key]
    label, unit = sheet[f"A{row}"], sheet[f"B{row}"]
    label.value, label.font, label.border, label.alignment = line.label, styles.BODY, styles.LINE, styles.MIDDLE
    unit.value, unit.font, unit.alignment, unit.border = line.unit, styles.SMALL, styles.MIDDLE, styles.LINE
    if line.item is not None and line.item.help:
        label.comment = note(line.item.help, 240, 60)
    if line.key in GENERAL_KEYS:
        return
    for stop in range(1, STOPS + 1):
        one = sheet[cell(line.key, stop)]
        one.font, one.border, one.alignment = (styles.SMALL if line.small else styles.BODY), styles.LINE, styles.CENTRE
        one.number_format = line.shown
    if line.small:
        sheet.row_dimensions[row].height = HEIGHTS.get(line.key, 26)
    if line.key.endswith("_verdict"):
        cells = f"{column(1)}{row}:{column(STOPS)}{row}"
        styles.colour_verdicts(sheet, cells)


def _write_item(pages: Pages, sheet: Worksheet, reading: Worksheet, item: Item, stop: int, page: Page) -> None:
    """A yellow cell, and the one that reads it."""
    key = item.key if item.key in GENERAL_KEYS else f"{item.key}_{stop}"
    address, value = cell(item.key, stop), page.typed.get(key, "")
    book_cells.input_cell(sheet, address, None if value == "" else value, item.shown)
    sheet[address].alignment = styles.CENTRE
    book_cells.expect_number(sheet, address, item.label, item.low, item.high, item.unit)
    there = fixed(address, TRIP)
    blank = '""' if isnan(item.blank) else f"{item.blank:g}"
    inside = f"AND({there}>={item.low:.15g},{there}<={item.high:.15g})"
    text = f'IF(ISBLANK({there}),{blank},IF(ISNUMBER({there}),IF({inside},{there},""),""))'
    pages.formula(reading, address, text, _or_blank(page.read[key]))


def _or_blank(value: float) -> Value:
    return "" if isnan(value) else value


def _write_stop(pages: Pages, sheet: Worksheet, reading: Worksheet, stop: int, page: Page, strips: Strips) -> None:
    """Runway and ground by drop-down; the runway's place in the list, and its position."""
    address, runway = cell("runway", stop), page.typed.get(f"runway_{stop}", "")
    book_cells.input_cell(sheet, address, runway or None, "@")
    sheet[address].alignment, sheet[address].font = styles.CENTRE, styles.BOLD
    choice(sheet, address, NAMES, "Choose a runway of the sheet Strips, or leave the cell blank.")
    ground = cell("ground", stop)
    book_cells.input_cell(sheet, ground, page.typed.get(f"ground_{stop}", "") or None)
    sheet[ground].alignment = styles.CENTRE
    choice(sheet, ground, f'"{",".join(CONDITIONS)}"', "dry, wet or soft; the worse of this and the sheet Strips counts.")
    there, listed = fixed(address, TRIP), strips.listed
    first = listed.partition("$")[2].partition("$")[2].partition(":")[0]
    same = f"({listed}={there})"
    found = f'IF({there}="","",IF(SUMPRODUCT(--{same})=1,SUMPRODUCT({same}*(ROW({listed})-{int(first) - 1})),""))'
    pages.formula(reading, address, found, _or_blank(page.read[f"runway_{stop}"]))
    named = f'INDEX({strips.range("name")},2*{fixed(address, READING)}-1)'
    pages.formula(sheet, cell("name", stop), f'IF(ISNUMBER({fixed(address, READING)}),IF({named}="","",{named}),"")',
                  strips.shown["name"][2 * int(page.read[f"runway_{stop}"]) - 2] if page.read[f"runway_{stop}"] > 0 else "")
    sheet[cell("name", stop)].font, sheet[cell("name", stop)].alignment = styles.SMALL, styles.CENTRE
    for key in ("latitude", "longitude"):
        one = f"INDEX({strips.range(key)},2*{fixed(address)}-1)"
        text = f'IF(ISNUMBER({fixed(address)}),IF(ISNUMBER({one}),{one},""),"")'
        pages.formula(reading, further_cell(key, stop), text, _or_blank(page.read[f"{key}_{stop}"]))


def _write_legs(pages: Pages, sheet: Worksheet, reading: Worksheet, page: Page) -> None:
    """Fuel and masses by the steps of the chain, each in its cell."""
    chain = legs_chain()
    places: dict[str, Place] = {GROUND_NAMES: Place("ground_names"), "fault": NOWHERE}
    for item, stop in typed_cells():
        key = item.key if item.key in GENERAL_KEYS else f"{item.key}_{stop}"
        places[key] = Place(fixed(cell(item.key, stop), READING))
    for stop in range(1, STOPS + 1):
        places[f"runway_{stop}"] = Place(fixed(cell("runway", stop), TRIP))
        for key in ("latitude", "longitude"):
            places[f"{key}_{stop}"] = Place(fixed(further_cell(key, stop), READING), "°")
    where: dict[str, tuple[Worksheet, str]] = {}
    for step in chain.steps:
        key, _, number = step.key.rpartition("_")
        if key in ROWS:
            where[step.key] = sheet, cell(key, int(number))
        elif key in FURTHER:
            where[step.key] = reading, further_cell(key, int(number))
    places |= {key: Place(fixed(address, on.title)) for key, (on, address) in where.items()}
    for key, text in write_formulas(chain, places).items():
        on, address = where[key]
        value = _or_blank(page.worked[key])
        pages.formula(on, address, text, value)
        name, _, number = key.rpartition("_")
        page.shown[name, int(number)] = value


def write_results(book: Book, sheet: Worksheet, page: Page, best: Best, search: Search, abort: Cases) -> None:
    """Verdicts, directions, flaps, speeds, distances, the greatest masses and the abort points, stop by stop."""
    writer = _Writer(book, sheet, page, best, search, abort)
    for row, (side, stop) in enumerate(best.ops):
        writer.write_side(row, side, stop)
    for stop in range(1, STOPS + 1):
        side = "takeoff" if stop == 1 else "landing"
        writer.show("density_altitude", stop, best.row(side, stop), "density_altitude")
        writer.write_checks(stop)
    for row, (side, stop) in enumerate(best.ops):
        _write_where(book, page, best, row, side, stop)
    _write_summary(book.pages, sheet, page, best)
    _colour(sheet)


class _Writer:
    """Writes formulas into the page, each with its value."""

    def __init__(self, book: Book, sheet: Worksheet, page: Page, best: Best, search: Search, abort: Cases) -> None:
        self.book, self.sheet, self.page, self.best, self.search, self.abort = book, sheet, page, best, search, abort

    def put(self, key: str, stop: int, text: str, value: Any) -> None:
        """A formula of a line and a stop."""
        plain = value.item() if isinstance(value, np.generic) else value
        plain = "" if isinstance(plain, float) and isnan(plain) else plain
        self.book.pages.formula(self.sheet, cell(key, stop), text, plain)
        self.page.shown[key, stop] = plain

    def on(self, row: int) -> tuple[str, bool]:
        """Whether a row of Best is in the trip: the test, and what it is now."""
        return f'{self.best.address("active", row)}="yes"', self.best.values["active"][row] == "yes"

    def show(self, key: str, stop: int, row: int, source: str, assessed: bool = False) -> None:
        """A value of Best, where the row is in the trip; ``assessed``: and where its verdict is one."""
        test, active = self.on(row)
        if assessed:
            side = self.best.ops[row][0]
            test = f'AND({test},{self.best.address(f"{side}_verdict", row)}<>"{NOT_ASSESSED}")'
            active = active and self.best.values[f"{side}_verdict"][row] != NOT_ASSESSED
        self.put(key, stop, f'IF({test},{self.best.address(source, row)},"")', self.best.values[source][row] if active else "")

    def write_side(self, row: int, side: str, stop: int) -> None:
        """All of a landing or a take-off."""
        sources = {"verdict": f"{side}_verdict", "reason": f"{side}_reason", "direction": "direction", "flap": "name",
                   "required": f"{side}_required", "available": "landing_available" if side == "landing" else "tora",
                   "margin": f"{side}_margin", "headwind": "headwind", "crosswind": "crosswind"}  # fmt: skip
        for line, source in sources.items():
            self.show(f"{side}_{line}", stop, row, source, assessed=line not in ("verdict", "reason"))
        self._greatest(row, side, stop)
        self._speeds(row, side, stop)
        if side == "takeoff":
            self._abort(row, stop)

    def _greatest(self, row: int, side: str, stop: int) -> None:
        test, active = self.on(row)
        found = self.search.address("greatest", row)
        assessed = self.search.address("assessed", row)
        value = float(np.asarray(self.search.cases.values["greatest"])[row])
        known = bool(self.best.si["assessed"][row])
        shown: Value = value if isfinite(value) else "none" if known else ""
        self.put(f"{side}_greatest", stop,
                 f'IF({test},IF(ISNUMBER({found}),{found},IF({assessed}="yes","none","")),"")', shown if active else "")
        greatest, mass = fixed(cell(f"{side}_greatest", stop)), fixed(cell(f"mass_{side}", stop))
        own = self.page.number(f"mass_{side}", stop)
        spare = value - own if active and isfinite(value) else ""
        self.put(f"{side}_spare", stop, f'IF(ISNUMBER({greatest}),{greatest}-{mass},"")', spare)

    def _speeds(self, row: int, side: str, stop: int) -> None:
        """Stall speed and the speed flown, as indicated airspeeds where the card tells them."""
        keys = {"stall": f"stall_{side}", "speed": "approach_eas" if side == "landing" else "lift_off_eas"}
        test, active = self.on(row)
        known = self.best.address(keys["stall"], row)
        indicated = "ias_stall" in self.best.columns
        if not indicated:
            for line, key in keys.items():
                self.show(f"{side}_{line}", stop, row, key)
            shown = "EAS" if active and self.best.values[keys["stall"]][row] != "" else ""
            self.put(f"{side}_speeds_are", stop, f'IF(AND({test},ISNUMBER({known})),"EAS","")', shown)
            return
        both = [f"ias_{line}" for line in keys]
        has = all(isinstance(self.best.values[key][row], float) for key in both)
        numbers = f"AND({','.join(f'ISNUMBER({self.best.address(key, row)})' for key in both)})"
        for line, key in keys.items():
            ias, eas = self.best.address(f"ias_{line}", row), self.best.address(key, row)
            value = self.best.values[f"ias_{line}" if has else key][row]
            self.put(f"{side}_{line}", stop, f'IF({test},IF({numbers},{ias},{eas}),"")', value if active else "")
        text = f'IF(AND({test},ISNUMBER({known})),IF({numbers},"IAS","EAS: outside the airspeed table"),"")'
        word = "IAS" if has else "EAS: outside the airspeed table"
        self.put(f"{side}_speeds_are", stop, text, word if active and self.best.values[keys["stall"]][row] != "" else "")

    def _abort(self, row: int, stop: int) -> None:
        test, active = self.on(row)
        at = self.best.rows("takeoff").index(row)
        is_known, stops, is_open = (self.abort.cell(key, at) for key in ("abort_known", "abort_stops", "abort_open"))
        known, halts, opens = (bool(self.abort.values[key][at]) for key in ("abort_known", "abort_stops", "abort_open"))
        reason, words = fixed(cell("takeoff_reason", stop)), "does not lift off"
        text = (f'IF({test},IF({is_known},IF({stops},IF({is_open},"can stop even from lift-off","can stop up to here"),'
                f'"none: the brakes won\'t hold"),IF({reason}="{words}","none: {words}","not assessed")),"")')
        said = "can stop even from lift-off" if opens else "can stop up to here" if halts else "none: the brakes won't hold"
        said = said if known else f"none: {words}" if self.page.shown["takeoff_reason", stop] == words else NOT_ASSESSED
        self.put("abort", stop, text, said if active else "")
        self._down("abort_place", stop, row, self.abort.cell("abort_distance", at),
                   float(self.abort.values["abort_distance"][at]), active, test)
        eas = float(self.abort.values["abort_eas"][at]) / to_si(1.0, "kt")
        address, value = self.abort.cell("abort_eas", at), eas
        if "ias_stall" in self.best.columns:
            address, shown = self.best.address("ias_abort", row), self.best.values["ias_abort"][row]
            indicated = fixed(cell("takeoff_speeds_are", stop))
            is_ias = self.page.shown["takeoff_speeds_are", stop] == "IAS"
            address = f'IF({indicated}="IAS",{address},{self.abort.cell("abort_eas", at)})'
            value = (shown if isinstance(shown, float) else nan) if is_ias else eas
        self._down("abort_speed", stop, row, address, value, active, test)
        self._seventy(stop, at, test, active, known, is_known)

    def _down(self, key: str, stop: int, row: int, address: str, value: float, active: bool, test: str) -> None:
        """A number rounded down."""
        text = f'IF({test},IF(ISNUMBER({address}),ROUNDDOWN({address},0),""),"")'
        self.put(key, stop, text, float(floor(value)) if active and isfinite(value) else "")

    def _seventy(self, stop: int, at: int, test: str, active: bool, known: bool, is_known: str) -> None:
        place, half, by_half = (self.abort.cell(key, at) for key in ("seventy_at", "abort_usable", "seventy_by_half"))
        text = (f'IF({test},IF({is_known},IF({by_half},"go","stop")&", at "&ROUNDUP({place},0)&" m (half: "&'
                f'ROUNDDOWN({half}/2,0)&" m)",""),"")')  # fmt: skip
        values = {key: self.abort.values[key][at] for key in ("seventy_at", "abort_usable", "seventy_by_half")}
        said = ""
        if active and known:
            go = "go" if bool(values["seventy_by_half"]) else "stop"
            said = f"{go}, at {ceil(float(values['seventy_at']))} m (half: {floor(float(values['abort_usable']) / 2)} m)"
        self.put("seventy", stop, text, said)

    def write_checks(self, stop: int) -> None:
        """Fuel against tank and reserve, zero-fuel mass against its limit, and what is amiss with what is typed."""
        used = bool(self.page.typed.get(f"runway_{stop}", ""))
        test = f'{fixed(cell("runway", stop))}=""'
        for key, (text, value) in (("fuel_check", self._fuel(stop)), ("mass_check", self._mass(stop)),
                                   ("entry_check", self._entries(stop))):  # fmt: skip
            self.put(key, stop, f'IF({test},"",{text})', value if used else "")

    def _fuel(self, stop: int) -> tuple[str, str]:
        tank, reserve = (fixed(cell(key), READING) for key in ("tank", "reserve"))
        out, left = fixed(cell("fuel_out", stop)), fixed(cell("fuel_left", stop))
        page = self.page
        has, keep = page.read["tank"], page.read["reserve"]
        aboard, rest = page.number("fuel_out", stop), page.number("fuel_left", stop)
        filled = f'IF({out}>{tank},ROUNDUP({out}-{tank},0)&" l over the tank","enough")'
        over = f'IF(AND(ISNUMBER({out}),ISNUMBER({tank})),{filled},"not known")'
        said = "not known"
        if not isnan(aboard) and not isnan(has):
            said = f"{ceil(aboard - has)} l over the tank" if aboard > has else "enough"
        if stop == 1:
            return over, said
        below = f'IF({left}<{reserve},IF({left}<0,"runs dry: ","")&ROUNDUP({reserve}-{left},0)&" l below the reserve",{over})'
        text = f'IF(AND(ISNUMBER({left}),ISNUMBER({reserve})),{below},"not known")'
        if isnan(rest) or isnan(keep):
            return text, "not known"
        if rest < keep:
            return text, f"{'runs dry: ' if rest < 0 else ''}{ceil(keep - rest)} l below the reserve"
        return text, said

    def _mass(self, stop: int) -> tuple[str, str]:
        typed, limit = fixed(cell("zero_fuel_limit")), fixed(cell("zero_fuel_limit"), READING)
        mass = fixed(cell("zero_fuel", stop))
        text = (f'IF(ISBLANK({typed}),"no limit given",IF(AND(ISNUMBER({limit}),ISNUMBER({mass})),'
                f'IF({mass}>{limit},ROUNDUP({mass}-{limit},0)&" kg over","within"),"not known"))')  # fmt: skip
        own, most = self.page.number("zero_fuel", stop), self.page.read["zero_fuel_limit"]
        if "zero_fuel_limit" not in self.page.typed:
            return text, "no limit given"
        if isnan(own) or isnan(most):
            return text, "not known"
        return text, f"{ceil(own - most)} kg over" if own > most else "within"

    def _entries(self, stop: int) -> tuple[str, str]:
        """The first thing amiss with what is typed for a stop."""
        complaints: list[tuple[str, bool, str]] = []
        page = self.page
        runway = fixed(cell("runway", stop), READING)
        complaints.append((f'{runway}=""', isnan(page.read[f"runway_{stop}"]), "choose a runway of the sheet Strips"))
        if stop > 1:
            before = fixed(cell("runway", stop - 1))
            complaints.append((f'{before}=""', not page.typed.get(f"runway_{stop - 1}", ""), "the stop before is blank"))
        for item, at in typed_cells():
            if at == stop and item.key not in GENERAL_KEYS:
                complaints.append(self._wrong(item, stop))
        if stop > 1:
            time, kept = fixed(cell("time", stop)), fixed(further_cell("kept", stop), READING)
            complaints.append((f"NOT(ISNUMBER({time}))", isnan(page.number("time", stop)),
                               "no time for the leg: distance, wind along or cruise speed is missing"))
            value = page.worked[f"kept_{stop}"]
            complaints.append((f"IF(ISNUMBER({kept}),{kept}<0,FALSE)", value < 0.0, "more payload off than there is aboard"))
        text, said = '"nothing amiss"', "nothing amiss"
        for test, holds, sentence in reversed(complaints):
            text, said = f'IF({test},"{sentence}",{text})', sentence if holds else said
        return text, said

    def _wrong(self, item: Item, stop: int) -> tuple[str, bool, str]:
        key = f"{item.key}_{stop}"
        there, read = fixed(cell(item.key, stop)), fixed(cell(item.key, stop), READING)
        test = f'AND(NOT(ISBLANK({there})),{read}="")'
        return test, key in self.page.typed and isnan(self.page.read[key]), f"{item.label}: {item.expected}"


def _write_where(book: Book, page: Page, best: Best, row: int, side: str, stop: int) -> None:
    """On the sheet Best: each landing and take-off in words, what it has to spare, and whether no mass suits."""
    runway = fixed(cell("runway", stop), TRIP)
    leg = best.address("leg", row)
    best.further(row, "where", "Where", f'"leg "&{leg}&", {SIDE_WORD[side]} "&{runway}',
                 f"leg {best.values['leg'][row]:g}, {SIDE_WORD[side]} {page.typed.get(f'runway_{stop}', '')}")
    best.further(row, "spare", "To spare [kg]", fixed(cell(f"{side}_spare", stop), TRIP), page.shown[f"{side}_spare", stop])
    greatest = fixed(cell(f"{side}_greatest", stop), TRIP)
    none = page.shown[f"{side}_greatest", stop] == "none"
    best.further(row, "none", "No mass suits", f'IF({greatest}="none",1,"")', 1.0 if none else "")
    reason = page.shown[f"{side}_reason", stop]
    best.further(row, "reason", "Limiting reason", fixed(cell(f"{side}_reason", stop), TRIP), reason)


def _write_summary(pages: Pages, sheet: Worksheet, page: Page, best: Best) -> None:
    """The box beside the aeroplane's values: the trip in a few lines."""
    sheet[f"E{HEADINGS['general']}"] = "This trip"
    for key, row in SUMMARY.items():
        text, value = {"verdicts": _verdicts, "limit": _limit, "none": _none, "fuel": _fuel_line, "mass": _mass_line,
                       "entries": _entry_line}[key](page, best)  # fmt: skip
        last = SUMMARY["none"] - 1 if key == "limit" else row
        sheet.merge_cells(f"E{row}:K{last}")
        pages.formula(sheet, f"E{row}", text, value)
        target = sheet[f"E{row}"]
        target.font, target.alignment = (styles.BOLD if key in ("verdicts", "limit") else styles.BODY), styles.INDENT_WRAP


def _row_range(key: str) -> str:
    return f"${column(1)}${ROWS[key]}:${column(STOPS)}${ROWS[key]}"


def _count(word: str) -> str:
    return "+".join(f'COUNTIF({_row_range(f"{side}_verdict")},"{word}")' for side in ("landing", "takeoff"))


def _verdicts(page: Page, best: Best) -> tuple[str, str]:
    words = [page.shown[f"{side}_verdict", stop] for side, stop in best.ops]
    parts = [f'IF({_count(word)}>0,", "&({_count(word)})&" {word}","")' for word in (MARGINAL, UNSUITABLE, NOT_ASSESSED)]
    all_of = f"({_count(SUITABLE)}+{_count(MARGINAL)}+{_count(UNSUITABLE)}+{_count(NOT_ASSESSED)})"
    text = f'({_count(SUITABLE)})&" of "&{all_of}&" landings and take-offs suitable"&{"&".join(parts)}'
    said = f"{words.count(SUITABLE)} of {sum(word != '' for word in words)} landings and take-offs suitable"
    for word in (MARGINAL, UNSUITABLE, NOT_ASSESSED):
        said += f", {words.count(word)} {word}" if word in words else ""
    return text, said


def _limit(page: Page, best: Best) -> tuple[str, str]:
    """Where the least mass is to spare; of the others, where somewhere no mass suits."""
    spare, where, none = (best.range(key) for key in ("spare", "where", "none"))
    least = f"MIN({spare})"
    kilograms = f'IF({least}<0,ROUNDUP(-{least},0)&" kg too heavy",ROUNDDOWN({least},0)&" kg to spare")'
    found = f'INDEX({where},MATCH({least},{spare},0))&", "&{kilograms}'
    others = f'IF(COUNT({none})>0,", of the others","")'
    text = f'"What limits"&{others}&": "&IF(COUNT({spare})=0,"not known",{found})'
    known = [(float(value), name) for value, name in zip(best.values["spare"], best.values["where"], strict=True)
             if isinstance(value, float)]  # fmt: skip
    first = f"What limits{', of the others' if 1.0 in best.values['none'] else ''}: "
    if not known:
        return text, f"{first}not known"
    value, name = min(known, key=lambda one: one[0])
    return text, f"{first}{name}, {f'{ceil(-value)} kg too heavy' if value < 0.0 else f'{floor(value)} kg to spare'}"


def _none(page: Page, best: Best) -> tuple[str, str]:
    """Where no mass suits."""
    none, where, reason = (best.range(key) for key in ("none", "where", "reason"))
    at = f"MATCH(1,{none},0)"
    more = f'IF(COUNT({none})>1," (and "&(COUNT({none})-1)&" more)","")'
    fine = "At every stop there is a mass that suits"
    text = f'IF(COUNT({none})=0,"{fine}","At no mass: "&INDEX({where},{at})&": "&INDEX({reason},{at})&{more})'
    rows = [row for row, value in enumerate(best.values["none"]) if value == 1.0]
    if not rows:
        return text, fine
    further = f" (and {len(rows) - 1} more)" if len(rows) > 1 else ""
    return text, f"At no mass: {best.values['where'][rows[0]]}: {best.values['reason'][rows[0]]}{further}"


def _checked(key: str, name: str, page: Page, good: Sequence[str], fine: str) -> tuple[str, str]:
    """The first stop with a check that is not good, else that all is."""
    cells = [fixed(cell(key, stop)) for stop in range(1, STOPS + 1)]
    text, said = f'"{name}: {fine}"', f"{name}: {fine}"
    for stop in range(STOPS, 0, -1):
        one = cells[stop - 1]
        fails = "AND(" + ",".join(f'{one}<>"{word}"' for word in ("", *good)) + ")"
        text = f'IF({fails},"{name}, stop {stop}: "&{one},{text})'
        value = page.shown[key, stop]
        said = f"{name}, stop {stop}: {value}" if value not in ("", *good) else said
    return text, said


def _fuel_line(page: Page, best: Best) -> tuple[str, str]:
    return _checked("fuel_check", "Fuel", page, ("enough",), "above the reserve at every landing, within the tank")


def _mass_line(page: Page, best: Best) -> tuple[str, str]:
    return _checked("mass_check", "Zero-fuel mass", page, ("within", "no limit given"), "within its limit, if there is one")


def _entry_line(page: Page, best: Best) -> tuple[str, str]:
    text, said = _checked("entry_check", "Typed", page, ("nothing amiss",), "nothing amiss")
    for item in reversed(GENERAL):
        there, read = fixed(cell(item.key)), fixed(cell(item.key), READING)
        optional = item.key == "zero_fuel_limit"
        test = f'AND(NOT(ISBLANK({there})),{read}="")' if optional else f'{read}=""'
        text = f'IF({test},"{item.label}: {item.expected}",{text})'
        typed = item.key in page.typed
        holds = isnan(page.read[item.key]) and (typed or not optional)
        said = f"{item.label}: {item.expected}" if holds else said
    return text, said


def _colour(sheet: Worksheet) -> None:
    """What calls for attention stands out, in grey print too."""
    back = PatternFill("solid", fgColor=BAD, bgColor=BAD)
    for key in ("landing_spare", "takeoff_spare", "landing_margin", "takeoff_margin"):
        rule = CellIsRule(operator="lessThan", formula=["0"], font=Font(bold=True, color="9C2A00"), fill=back)
        sheet.conditional_formatting.add(_row_range(key).replace("$", ""), rule)
    for key, good in (("fuel_check", "enough"), ("mass_check", "within"), ("entry_check", "nothing amiss")):
        first = f"{column(1)}{ROWS[key]}"
        others = f'{first}<>"no limit given"'
        test = f'AND({first}<>"",{first}<>"{good}",{others})'
        rule = FormulaRule(formula=[test], font=Font(bold=True, color="9C2A00"), fill=back)
        sheet.conditional_formatting.add(_row_range(key).replace("$", ""), rule)


def finish(sheet: Worksheet, title: str, card_name: str, notes: Sequence[str]) -> None:
    """Title, notes below, freeze, print set-up."""
    sheet["A1"], sheet["A1"].font = f"{title}: {card_name}", styles.TITLE
    row = LAST_ROW + 2
    for text in notes:
        sheet[f"A{row}"], sheet[f"A{row}"].font, sheet[f"A{row}"].alignment = text, styles.SMALL, styles.WRAP
        sheet.merge_cells(f"A{row}:{column(STOPS)}{row}")
        sheet.row_dimensions[row].height = 13.0 * ceil(len(text) / 230)
        row += 1
    sheet.freeze_panes = f"{column(1)}{ROWS['name'] + 1}"
    styles.set_print(sheet, f"{HEADER_ROW}:{ROWS['runway']}", portrait=True)
    sheet.print_area = f"A1:{column(STOPS)}{row}"
    book_cells.protect(sheet)


