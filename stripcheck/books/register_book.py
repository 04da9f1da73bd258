"""The register workbook: a strip database, its fleet on a standard day, and the year of one aeroplane. What ``stripcheck
register`` does."""

from __future__ import annotations

import datetime
import math
from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from importlib.resources import files
from pathlib import Path
from typing import Any

import numpy as np
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck.books import common, register_climate, register_fleet, register_months, register_sheet
from stripcheck.books.register_best import WORDS, Best
from stripcheck.books.register_climate import Climate, read_climate
from stripcheck.books.register_columns import spare_rows
from stripcheck.books.register_levels import ALL_VARYING, Days, Ends, register_chain, short_values, write_aeroplane, write_ends
from stripcheck.books.register_reading import Reading, write_reading
from stripcheck.books.register_rows import Rows, rows_of
from stripcheck.card import Card, load_card
from stripcheck.chain import evaluate
from stripcheck.day import LIMITS, Day, read_day
from stripcheck.errors import InputError
from stripcheck.inputs import DAY
from stripcheck.rules import Rules, load_rules
from stripcheck.safe_file import refuse_if_open
from stripcheck.sheet import manual_tables, method, pages
from stripcheck.sheet.cases import Cases, no_inputs, write_once
from stripcheck.sheet.stream import write_book
from stripcheck.units import from_si, tidy

MOST_CARDS = 4
MOST_RUNWAYS = 1000  # that a workbook of live cases can hold and still be opened with patience
FLAPS = ("takeoff_flap", "landing_flap")
LOADING = ("mass_takeoff", "mass_landing", *FLAPS)
DEMO_LIST, DEMO_CLIMATE = "lantern-register.csv", "lantern-climate.csv"
DEMO_CARDS, DEMO_RULES = ("ridge-runner", "high-mule"), "part-cat-b"
DEMO_DAY = {"temperature": 22, "temperature_elevation": 2300, "qnh": 1015}
DEMO_DATE = datetime.date(2025, 7, 1)
_TABS = {"input": "E8C547", "result": "2E75B6", "working": "A6A6A6"}


@dataclass(frozen=True)
class Request:
    """What to make: the list, cards and rule set by name or path, the climate's file, the standard day as typed, options."""

    list: Path
    output: Path
    cards: Sequence[str]
    rules: str
    day: Mapping[str, Any]
    climate: str | None = None
    month_card: str | None = None
    survey_age: float = register_sheet.SURVEY_AGE
    counted_on: datetime.date | None = None
    airports: str | None = None
    sheet: str | None = None
    force: bool = False


def demo_request(output: Path, force: bool) -> Request:
    """The request that makes the shipped register, all of it invented."""
    folder = Path(str(files("stripcheck") / "scenario"))
    return Request(folder / DEMO_LIST, output, DEMO_CARDS, DEMO_RULES, DEMO_DAY, str(folder / DEMO_CLIMATE),
                   counted_on=DEMO_DATE, force=force)  # fmt: skip


def make_register(request: Request) -> list[str]:
    """Do the job and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    common.check_output(request.output, request.force)
    refuse_if_open(request.output)
    if not 1 <= len(request.cards) <= MOST_CARDS:
        raise InputError(f"register: 1 to {MOST_CARDS} aircraft cards are expected, not {len(request.cards)}")
    if not 1 <= request.survey_age <= register_sheet.MOST_SURVEY_AGE:
        raise InputError(f"--survey-age: 1 to {register_sheet.MOST_SURVEY_AGE} months are expected")
    if request.output.exists() and request.output.samefile(request.list):
        raise InputError(f"{request.output}: this is the list itself; choose another name for what is written")
    cards, rules, day = [load_card(name) for name in request.cards], load_rules(request.rules), read_day(request.day)
    if math.isnan(day.values["temperature"]) and math.isnan(day.values["isa_deviation"]):
        raise InputError("no temperature of the standard day: add --temp or --isa-dev")
    climate = register_climate.UNKNOWN if request.climate is None else read_climate(request.climate)
    rows = rows_of(request.list, request.airports, request.sheet)
    if len(rows.rows) > MOST_RUNWAYS:
        raise InputError(
            f"{request.list}: {len(rows.rows):,} runways are more than the {MOST_RUNWAYS:,} of a register workbook; divide the "
            "list, or use stripcheck fill"
        )
    of_year = _month_card(request, cards)
    book = RegisterBook(rows, cards, rules, day, climate, of_year, request.survey_age, request.counted_on)
    cuts = book.write(request.output)
    return [*cuts, *rows.told, *book.lines(request.output)]


def _month_card(request: Request, cards: Sequence[Card]) -> int:
    """Which of the cards goes through the year."""
    if request.month_card is None:
        return 0
    named = [name == request.month_card or card.name == request.month_card
             for name, card in zip(request.cards, cards, strict=True)]  # fmt: skip
    if not any(named):
        raise InputError(f'--month-card "{request.month_card}": it is none of the cards given ({", ".join(request.cards)})')
    return named.index(True)


class RegisterBook:
    """A register workbook in the making."""

    def __init__(self, rows: Rows, cards: Sequence[Card], rules: Rules, day: Day, climate: Climate, of_year: int,
                 survey_age: float, counted_on: datetime.date | None) -> None:  # fmt: skip
        self.rows, self.cards, self.rules, self.day = rows, cards, rules, day
        self.climate, self.of_year, self.survey_age, self.counted_on = climate, of_year, survey_age, counted_on
        self.pages = common.start_book("Strip register")
        self.all_rows = [*rows.rows, *({} for _ in range(spare_rows(len(rows.rows))))]
        self.tables: list[Cases] = []
        self.planes: list[register_fleet.Plane] = []

    def write(self, path: Path) -> list[str]:
        """Write the workbook whole or not at all; returns what had to be cut."""
        book = self.pages.book
        source = register_sheet.write_register(self.pages, self.rows, self.survey_age, self.counted_on)
        self._limit_day(pages.write_day(self.pages, self.day))
        days = register_climate.write_climate(self.pages, self.climate, self.day)
        pages.write_rules(self.pages, self.rules)
        chains = [register_chain(card.chain) for card in self.cards]
        method.write_method(self.pages, chains[0], self._taken(), self._made_from())
        reading = write_reading(self.pages, source, self.all_rows, self.rows.profiles)
        shared = {**no_inputs(), **self.rules.values, **self.day.values, **self.cards[0].values}
        ends = write_ends(self.pages, reading, chains[0], {**shared, "elevation": np.nan})
        for number, (card, chain) in enumerate(zip(self.cards, chains, strict=True), 1):
            self._aeroplane(number, card, chain, reading, ends, days)
        facts = self._facts()
        said = register_fleet.write_fleet(self.pages, reading, self.planes, facts, self.counted_on, self.survey_age)
        register_sheet.say(self.pages, said)
        plane = self.planes[self.of_year]
        register_months.write_months(self.pages, reading, plane.best, plane.heading, plane.loading, self.all_rows)
        self._order(reading, ends)
        book.active = 0
        tables = {one.sheet: one.table for one in (*ends, *self.tables)} | {"Reading": reading.table}
        return write_book(book, tables, path, cached=self.pages.cached, level=common.SMALLEST)

    def _limit_day(self, sheet: Worksheet) -> None:
        """The limits of the day's values, instead of a check for any number."""
        sheet.data_validations.dataValidation = [
            check for check in sheet.data_validations.dataValidation if check.type != "decimal"
        ]
        for item in DAY:
            if item.kind == "number":
                low, high = (tidy(from_si(limit, item.unit)) for limit in LIMITS[item.key])
                cell = self.pages.value_cells[item.key].split("!")[1].replace("$", "")
                common.expect_number(sheet, cell, item.label, low, high, item.unit)

    def _aeroplane(self, number: int, card: Card, chain: Any, reading: Reading, ends: Ends, days: Days) -> None:
        """The pages of one aeroplane, and its cases."""
        name = f"Aircraft {number}"
        made = replace(self.pages, prefix=f"plane{number}_", places=dict(self.pages.places), value_cells={})
        chosen = {key: float(card.values[key]) for key in LOADING}
        flaps = {key: next(flap.name for flap in card.flaps if flap.deflection == chosen[key]) for key in FLAPS}
        sheet = pages.write_aircraft(made, card, chosen, flaps, title=name)
        values = {**no_inputs(), **self.rules.values, **self.day.values, **card.values, **chosen, "elevation": np.nan}
        found = evaluate(chain, values)
        manual_tables.write_manual(made, card, found, title=f"Manual {number}")
        row = pages.write_book_points(sheet, sheet.max_row + 3, card)
        write_once(made, sheet, row, chain, ALL_VARYING, values)
        through = days if number - 1 == self.of_year else days.first()
        fleet = write_aeroplane(made, name, card.name, chain, reading, ends, through, values)
        self.tables += [short_values(cases) for cases in (fleet.air, *fleet.ends)]
        cells = {key: "'{}'!{}".format(*cell.split("!")) for key, cell in made.value_cells.items()}
        loading = [_loading(cells, word, mass, flap, chosen, flaps) for word, mass, flap in (
            ("Take-off", "mass_takeoff", "takeoff_flap"), ("Landing", "mass_landing", "landing_flap"))]  # fmt: skip
        heading = f"'{name}'!$A$1", card.name
        self.planes.append(register_fleet.Plane(heading, loading, Best(fleet, reading, chain)))

    def _facts(self) -> list[tuple[str, str, Any]]:
        """Label, formula and value of what the verdicts stand on."""
        cells, values = self.pages.value_cells, self.day.values
        shown = {item.key: _rounded(from_si(values[item.key], item.unit)) for item in DAY
                 if item.kind == "number" and not math.isnan(values[item.key])}  # fmt: skip
        temperature, at, deviation, wind, direction = (
            cells[key] for key in ("temperature", "temperature_elevation", "isa_deviation", "wind_speed", "wind_from")
        )
        air = f"{shown['temperature']} °C" if "temperature" in shown else ""
        air += f" at {shown['temperature_elevation']} ft" if "temperature_elevation" in shown else ""
        air = air or f"ISA {'+' if values['isa_deviation'] >= 0 else ''}{shown['isa_deviation']} K"
        return [
            ("Temperature",
             f'IF(ISNUMBER({deviation}),"ISA "&IF({deviation}<0,"","+")&ROUND({deviation},1)&" K",IF(ISNUMBER({temperature}),'
             f'ROUND({temperature},1)&" °C"&IF(ISNUMBER({at})," at "&ROUND({at},0)&" ft",""),"not given"))', air),
            ("QNH", f'IF(ISNUMBER({cells["qnh"]}),ROUND({cells["qnh"]},1)&" hPa","not given")', f"{shown['qnh']} hPa"),
            ("Wind", f'IF(ISNUMBER({wind}),IF({wind}=0,"calm",ROUND({direction},0)&"° "&ROUND({wind},1)&" kt"),"not given")',
             f"{shown['wind_from']}° {shown['wind_speed']} kt" if values["wind_speed"] > 0 else "calm"),
            ("Ground", f'{cells["day_condition"]}&""', self.day.condition),
            ("Rules", "Rules!$A$1", self.rules.title),
        ]  # fmt: skip

    def _taken(self) -> list[str]:
        lines = list(self.day.defaults)
        for card in self.cards:
            lines += [f"{card.name}: {line}" for line in (*card.assumed, *card.fit.remarks)]
        lines += self.rows.told
        if math.isnan(self.day.values["temperature_elevation"]) and not math.isnan(self.day.values["temperature"]):
            lines.append("The standard day's temperature stands for every strip, whatever its elevation")
        lines += self.climate.told
        return lines

    def _made_from(self) -> list[tuple[str, str]]:
        return [
            ("Runway list", f"{self.rows.source}, {len(self.rows.rows):,} runways"),
            *((f"Aircraft card {number}", f"{card.file}: {card.name}") for number, card in enumerate(self.cards, 1)),
            ("Rule set", f"{self.rules.name}: {self.rules.title}"),
            ("Climate", self.climate.source),
        ]

    def _order(self, reading: Reading, ends: Ends) -> None:
        """Sheets in the order in which they are used, with tabs coloured; the workings come last."""
        book, count = self.pages.book, len(self.cards)
        planes = [f"{page} {number}" for number in range(1, count + 1) for page in ("Aircraft", "Manual")]
        planes = [name for name in planes if name in book.sheetnames]
        kinds = {
            "input": ["Register"],
            "result": [register_fleet.SHEET, register_months.SHEET],
            "input ": ["Day", register_climate.SHEET, *planes, "Rules"],
            "working": ["Method", "Reading", "Profiles", *(one.sheet for one in ends), *(one.sheet for one in self.tables)],
        }
        for kind, names in kinds.items():
            for name in names:
                sheet = book[name]
                sheet.sheet_properties.tabColor = _TABS[kind.strip()]
                if not sheet.protection.sheet:
                    common.protect(sheet)
        order = [name for names in kinds.values() for name in names]
        book._sheets.sort(key=lambda sheet: order.index(sheet.title))

    def lines(self, path: Path) -> list[str]:
        """Counts for the user."""
        number = len(self.rows.rows)
        lines = [f"{path}: {number:,} runways, {spare_rows(number)} spare rows, {path.stat().st_size / 1e6:.2f} MB"]
        for plane in self.planes:
            words = Counter(plane.best.unless_closed(at, *plane.best.both(at))[1] for at in range(number))
            lines.append(f"{plane.heading[1]}: " + "; ".join(f"{words[word]} {word}" for word in WORDS if words[word]))
        return lines


def _loading(cells: Mapping[str, str], word: str, mass: str, flap: str, chosen: Mapping[str, float],
             flaps: Mapping[str, str]) -> tuple[str, str]:  # fmt: skip
    text = f'"{word} "&IF(ISNUMBER({cells[mass]}),ROUND({cells[mass]},0),"?")&" kg, flap "&{cells[flap]}'
    return text, f"{word} {_rounded(chosen[mass], 0)} kg, flap {flaps[flap]}"


def _rounded(value: float, digits: int = 1) -> str:
    """As a spreadsheet's ROUND has it, which rounds a half away from zero."""
    whole = math.floor(abs(float(value)) * 10.0**digits + 0.5 + 1e-9)
    return f"{math.copysign(whole / 10.0**digits, value) + 0.0:.12g}"
