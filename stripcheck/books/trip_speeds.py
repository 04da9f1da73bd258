"""Speeds to fly as the pilot reads them: indicated airspeeds, where the card has an airspeed calibration."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck import speeds
from stripcheck.books.trip_cases import Best, Book
from stripcheck.card import Card
from stripcheck.sheet import styles
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.cell import formula, reference, where
from stripcheck.sheet.cell import shown as in_unit
from stripcheck.sheet.pages import Pages, write_header, write_heading
from stripcheck.units import from_si, tidy, to_si

EAS_ONLY = (
    "Speeds are equivalent airspeeds (EAS); at such speeds calibrated ones are within 0.1 kt. The card has no airspeed "
    "calibration: take the indicated ones from the flight manual."
)
INDICATED = (
    "Speeds are indicated airspeeds (IAS) by the card's airspeed calibration; where one lies outside of that, all of that "
    "landing or take-off are equivalent airspeeds (EAS), and the line below them says so."
)
FLOWN = {"landing": "approach_eas", "takeoff": "lift_off_eas"}


def told(card: Card) -> str:
    """Which speeds the workbook shows, in a sentence."""
    return INDICATED if card.position_error.tables else EAS_ONLY


def write_tables(pages: Pages, sheet: Worksheet, card: Card) -> None:
    """The airspeed calibration of each flap setting, at the end of the Aircraft sheet, with names; nothing without one."""
    if not card.position_error.tables:
        return
    row = sheet.max_row + 2
    write_heading(sheet, row, "Airspeed calibration, by flap setting")
    write_header(sheet, row + 1, ("Flap", "Indicated [kt]", "", "Calibrated [kt]"))
    row += 2
    for number, flap in enumerate(card.flaps, 1):
        first = row
        for ias, cas in zip(*card.position_error.table(flap.name), strict=True):
            if math.isnan(ias):
                continue
            cells = {"A": flap.name, "B": tidy(from_si(float(ias), "kt")), "D": tidy(from_si(float(cas), "kt"))}
            for letter, value in cells.items():
                sheet[f"{letter}{row}"], sheet[f"{letter}{row}"].font = value, styles.BODY
            row += 1
        if row > first:
            pages.name(f"indicated_{number}", sheet, f"B{first}:B{row - 1}")
            pages.name(f"calibrated_{number}", sheet, f"D{first}:D{row - 1}")


def write_indicated(book: Book, best: Best, abort: Cases) -> None:
    """On the sheet Best: the calibrated and the indicated airspeeds [kt] of each landing and take-off."""
    if not book.card.position_error.tables:
        return
    for row, (side, _) in enumerate(best.ops):
        speeds_of: dict[str, tuple[str, Any]] = {
            "stall": (best.address(f"stall_{side}", row), best.values[f"stall_{side}"][row]),
            "speed": (best.address(FLOWN[side], row), best.values[FLOWN[side]][row]),
        }
        if side == "takeoff":
            at = best.rows("takeoff").index(row)
            eas = float(from_si(abort.values["abort_eas"][at], "kt"))
            speeds_of["abort"] = (abort.cell("abort_eas", at), "" if math.isnan(eas) else eas)
        for name, (address, eas_now) in speeds_of.items():
            _write_one(book, best, row, name, address, eas_now)


def _write_one(book: Book, best: Best, row: int, name: str, address: str, eas: Any) -> None:
    pressure, pressure_now = best.address("pressure", row), best.values["pressure"][row]
    eas_cell, pressure_cell = reference(address, "kt"), reference(pressure, "hPa")
    calibrated = in_unit(speeds.calibrated_from_equivalent(eas_cell, pressure_cell), "kt")
    known = np.isfinite(eas_cell) & np.isfinite(pressure_cell)
    cas = math.nan
    if isinstance(eas, float) and isinstance(pressure_now, float):
        cas = float(from_si(speeds.calibrated_from_equivalent(to_si(eas, "kt"), to_si(pressure_now, "hPa")), "kt"))
    best.further(row, f"cas_{name}", f"{name.capitalize()}, CAS [kt]", formula(where(known, calibrated, np.nan)), _blank(cas))
    flap = str(best.values["name"][row])
    ias = float(from_si(book.card.position_error.indicated(to_si(cas, "kt"), flap), "kt"))
    at = best.address(f"cas_{name}", row)
    choices = ",".join(_read_off(book.card, number, at) for number in range(1, len(book.card.flaps) + 1))
    text = f'IF(ISNUMBER({at}),CHOOSE({best.address("number", row)},{choices}),"")'
    best.further(row, f"ias_{name}", f"{name.capitalize()}, IAS [kt]", text, _blank(ias))


def _blank(value: float) -> Any:
    return "" if math.isnan(value) else value


def _read_off(card: Card, number: int, at: str) -> str:
    """The indicated airspeed of a calibrated one for one setting: straight between the rows, blank outside of them."""
    if math.isnan(card.position_error.table(card.flaps[number - 1].name)[0][0]):
        return '""'
    xs, ys = f"calibrated_{number}", f"indicated_{number}"
    left = f"MIN(MATCH({at},{xs},1),COUNT({xs})-1)"
    x0, x1, y0, y1 = (f"INDEX({name},{left}{more})" for name in (xs, ys) for more in ("", "+1"))
    inside = f"AND({at}>=MIN({xs}),{at}<=MAX({xs}))"
    return f'IF({inside},{y0}+({at}-{x0})/({x1}-{x0})*({y1}-{y0}),"")'
