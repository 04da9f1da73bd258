"""The cases of a trip: every stop in both directions with every flap setting, and of them the best landing and take-off.

What does not hang on mass and flap is worked out once for each stop and direction (sheet *Places*), what hangs on the flap
alone once for each setting (*Flaps*); *Working* joins them with the masses of the trip, and *Best* picks.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck import links
from stripcheck.books.trip_layout import READING, TRIP, cell, fixed
from stripcheck.books.trip_plan import STOPS
from stripcheck.books.trip_strips import INPUTS, Strips
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.chain import Chain, Input, Step
from stripcheck.inputs import DAY, STRIP
from stripcheck.numeric import Number
from stripcheck.sheet import styles
from stripcheck.sheet.cases import FIRST_ROW, About, Cases, Elsewhere, Given, write_cases
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.pages import Pages, write_header
from stripcheck.sheet.stream import ROW, FormulaColumn, NumberColumn
from stripcheck.surface import CONDITIONS
from stripcheck.verdict import NOT_ASSESSED, SUITABLE

PLACES, FLAPS, WORKING, BEST = "Places", "Flaps", "Working", "Best"
WAYS = 2
MASSES = ("mass_takeoff", "mass_landing")
SETTINGS = ("takeoff_flap", "landing_flap")
VARYING = (*(item.key for item in (*STRIP, *DAY)), *MASSES, *SETTINGS)
USES = {"takeoff": "take-off", "landing": "landing"}
NO_STRIP = "no such runway on the sheet Strips"
_PLACE, _FLAP = "«p»", "«f»"  # stand for the row of a case's place and of its flap setting
OF_BEST = "«o»"  # stands for a row of Best
_WEATHER = {"own_temperature": "temperature", "own_qnh": "qnh", "own_wind_from": "wind_from", "own_wind_speed": "wind_speed"}
SLACK_HEIGHT = 100.0  # m: makes a height over an obstacle comparable with the other slacks
# of the best case: what the Trip sheet shows and the abort point needs, besides what the search for a mass reads
SHOWN = {
    "landing": ("landing_verdict", "landing_reason", "landing_required", "landing_available", "landing_margin", "headwind",
                "crosswind", "stall_landing", "approach_eas", "density_altitude", "pressure", "landing_slack"),
    "takeoff": ("takeoff_verdict", "takeoff_reason", "takeoff_required", "tora", "takeoff_margin", "headwind", "crosswind",
                "stall_takeoff", "lift_off_eas", "density_altitude", "pressure", "takeoff_slack"),
}  # fmt: skip


def takeoff_slack(required: Number, available: Number, over: Number, asked: Number, least: Number, first: Number) -> Number:
    """By how much a take-off is suitable [-], as far as it changes smoothly with mass; negative where it is not.

    The least of: length at hand against length required [m], height over the obstacle against the one asked for [m], least
    acceleration against the one below which it "barely accelerates" [m/s2]. -1 where there is no distance.

    >>> round(float(takeoff_slack(400.0, 484.0, np.nan, 15.0, 1.0, 2.0)), 9)
    0.1
    """
    fits = np.sqrt(available / required) - 1.0
    clears = np.where(np.isfinite(over), (over - asked) / SLACK_HEIGHT, 1.0)
    lively = np.where(np.isfinite(first), least / first - links.BARELY, -1.0)
    return np.where(np.isfinite(required), np.maximum(np.minimum(np.minimum(fits, clears), lively), -1.0), -1.0)


def landing_slack(required: Number, available: Number) -> Number:
    """The same for a landing: length at hand against length required [m].

    >>> round(float(landing_slack(400.0, 440.0)), 9)
    0.1
    """
    return np.where(np.isfinite(required), np.maximum(available / required - 1.0, -1.0), -1.0)


def trip_chain(card: Card) -> Chain:
    """The card's chain with the slacks, by which the search for the greatest mass goes."""
    slacks = (
        Step("takeoff_slack", "", "", "Take-off: slack", "Least of the shares to spare", takeoff_slack,
             ("takeoff_required", "tora", "over_obstacle_factored", "obstacle_margin", "least_acceleration",
              "first_acceleration")),
        Step("landing_slack", "", "", "Landing: slack", "Share of the length to spare", landing_slack,
             ("landing_required", "landing_available")),
    )  # fmt: skip
    return Chain(card.chain.inputs, (*card.chain.steps, *slacks))


@dataclass(frozen=True)
class Split:
    """Which steps hang on the place alone, which on the flap alone, and which are the same for all."""

    place: frozenset[str]
    flap: frozenset[str]
    once: frozenset[str]

    @property
    def known(self) -> frozenset[str]:
        """Steps that a case need not work out."""
        return self.place | self.flap | self.once


def split(chain: Chain) -> Split:
    """What a step hangs on, by what it reads; the truths that guard a step ask for all of it and don't count."""
    by_mass, by_flap, by_place = (_reading(chain, keys) for keys in
                                  (MASSES, SETTINGS, [item.key for item in (*STRIP, *DAY)]))  # fmt: skip
    of_place = frozenset(step.key for step in chain.steps if step.key in by_place - by_mass - by_flap)
    of_flap = frozenset(step.key for step in chain.steps if step.key in by_flap - by_mass - by_place)
    return Split(of_place, of_flap, frozenset(step.key for step in chain.steps) - chain.depends_on(VARYING))


def _reading(chain: Chain, keys: Collection[str]) -> set[str]:
    """Keys of the steps that read one of these, straight or through others, not counting guards."""
    reading = set(keys)
    for step in chain.steps:
        if reading.intersection(step.inputs):
            reading.add(step.key)
    return reading


def frontier(chain: Chain, parts: Split, wanted: Collection[str]) -> tuple[list[str], list[str]]:
    """What cases with these steps read of a place (steps and inputs), and of a flap setting, in the order of the chain."""
    read = set(wanted)
    for step in chain.leading_to(wanted, parts.known):
        if step.key not in parts.known:
            read |= {*step.inputs, step.guard}
    typed = {item.key for item in STRIP}
    keys = [*(item.key for item in chain.inputs), *(step.key for step in chain.steps)]
    return [key for key in keys if key in read and key in parts.place | typed], [
        step.key for step in chain.steps if step.key in read & parts.flap
    ]


@dataclass(frozen=True)
class Book:
    """What all sheets of a trip's cases share: the pages, the card, its chain, the inputs that never vary, SI."""

    pages: Pages
    card: Card
    chain: Chain
    parts: Split
    values: Mapping[str, Any]

    @property
    def settings(self) -> list[int]:
        """The flap settings that have a use, by their number [from 0]: for take-off alone, for both, for landing alone, so
        that those of each use stand together."""
        uses = [("take-off" in flap.uses, "landing" in flap.uses) for flap in self.card.flaps]
        order = [(True, False), (True, True), (False, True)]
        return sorted((j for j, use in enumerate(uses) if use in order), key=lambda j: order.index(uses[j]))

    def allowed(self, side: str) -> list[int]:
        """Places in that order of the settings allowed for a side: one after the other."""
        return [at for at, j in enumerate(self.settings) if USES[side] in self.card.flaps[j].uses]

    def usual(self, key: str) -> int:
        """Number [from 0] of the card's usual setting, ``takeoff_flap`` or ``landing_flap``."""
        return [flap.deflection for flap in self.card.flaps].index(self.card.values[key])


def write_places(book: Book, strips: Strips, runways: Sequence[str], reading: Mapping[str, float], masses: Mapping[str, float],
                 grounds: Sequence[str], wanted: Collection[str]) -> Cases:  # fmt: skip
    """The sheet Places: two rows for each stop. ``runways``, ``grounds`` of each stop; ``reading``, ``masses``: what the
    page's cells come to, by key with the stop's number; ``wanted``: the steps that others read."""
    stops = [stop for stop in range(1, STOPS + 1) for _ in range(WAYS)]
    pairs = [strips.names.index(runway) if runway in strips.names else -1 for runway in runways]
    rows = [2 * pairs[stop - 1] + way if pairs[stop - 1] >= 0 else -1 for stop, way in zip(stops, (0, 1) * STOPS, strict=True)]
    pair_cells = [fixed(cell("runway", stop), READING) for stop in stops]
    about = {
        "stop": About("Stop", 6, NumberColumn(np.array(stops, dtype=float))),
        "way": About("Way", 6, NumberColumn(np.array((1.0, 2.0) * STOPS))),
        "row": About("Row among the strips", 9, FormulaColumn(
            [f'IF(ISNUMBER({pair}),2*({pair}-1)+$B{ROW},"")' for pair in pair_cells],
            np.array([row + 1.0 if row >= 0 else np.nan for row in rows]))),
        "direction": About("Direction", 9, FormulaColumn(
            f'IF($C{ROW}="","",INDEX({strips.range("direction")},$C{ROW}))', _picked(strips.shown["direction"], rows))),
    }  # fmt: skip
    given: dict[str, Given] = {}
    for item in INPUTS:
        column = strips.shown[item.key]
        picked = _numbers(column, rows) if isinstance(column, np.ndarray) else _picked(column, rows)
        found = f"INDEX({strips.range(item.key)},$C{ROW})"
        given[item.key] = Given(picked, f'IF($C{ROW}="","",IF({found}="","",{found}))')
    given["fault"] = _fault(strips, rows, runways, stops)
    given["condition"] = _condition(given["condition"].shown, strips, rows, [grounds[stop - 1] for stop in stops], stops)
    for key, typed in _WEATHER.items():
        given[key] = Given(np.array([reading.get(f"{typed}_{stop}", np.nan) for stop in stops]),
                           [fixed(cell(typed, stop), READING) for stop in stops])  # fmt: skip
    for key in MASSES:
        has = [f"{key}_{stop}" in masses for stop in stops]
        given[key] = Given(np.array([masses.get(f"{key}_{stop}", np.nan) for stop in stops]),
                           [fixed(cell(key, stop), TRIP) if one else '""' for stop, one in zip(stops, has, strict=True)])
    usual = {key: Place(f"INDEX(flap_deflections,{book.usual(key) + 1})") for key in SETTINGS}
    elsewhere = Elsewhere(usual, {}, list(map(str, given["fault"].shown)))
    return write_cases(book.pages, PLACES, "Each stop in both directions: ground, air and wind", book.chain, about, given,
                       book.values, wanted, elsewhere)  # fmt: skip


def _numbers(column: np.ndarray, rows: Sequence[int]) -> np.ndarray:
    return np.array([column[row] if row >= 0 else np.nan for row in rows], dtype=float)


def _picked(column: Sequence[Any] | np.ndarray, rows: Sequence[int]) -> list[str]:
    return [str(column[row]) if row >= 0 else "" for row in rows]


def _fault(strips: Strips, rows: Sequence[int], runways: Sequence[str], stops: Sequence[int]) -> Given:
    """The fault of the strip; of a stop whose runway is not on the sheet that it is not."""
    known = _picked(strips.shown["fault"], rows)
    values = [fault if row >= 0 else (NO_STRIP if runways[stop - 1] else "")
              for fault, row, stop in zip(known, rows, stops, strict=True)]  # fmt: skip
    found = f"INDEX({strips.range('fault')},$C{ROW})"
    formulas = [f'IF($C{ROW}="",IF({fixed(cell("runway", stop), TRIP)}="","","{NO_STRIP}"),IF({found}="","",{found}))'
                for stop in stops]  # fmt: skip
    return Given(values, formulas)


def _condition(listed: Sequence[Any] | np.ndarray, strips: Strips, rows: Sequence[int], reported: Sequence[str],
               stops: Sequence[int]) -> Given:  # fmt: skip
    """The worse of the condition on the sheet Strips and the ground reported; a word that is neither stays as it is."""
    words = "{" + ",".join(f'"{word}"' for word in CONDITIONS) + "}"
    found = f"INDEX({strips.range('condition')},$C{ROW})"
    formulas = []
    for stop in stops:
        typed = fixed(cell("ground", stop), TRIP)
        worse = f'IFERROR(INDEX({words},MAX(MATCH({found},{words},0),MATCH({typed},{words},0))),{found}&" / "&{typed})'
        formulas.append(f'IF($C{ROW}="","",IF({found}="",IF({typed}="","",{typed}),IF({typed}="",{found},{worse})))')
    values = [_worse(str(given), ground) if row >= 0 else "" for given, row, ground in zip(listed, rows, reported, strict=True)]
    return Given(values, formulas)


def _worse(listed: str, reported: str) -> str:
    if not listed or not reported:
        return listed or reported
    known = [word for word in CONDITIONS if word in (listed, reported)]
    both = listed in CONDITIONS and reported in CONDITIONS
    return known[-1] if both else f"{listed} / {reported}"


def write_flaps(book: Book, wanted: Collection[str]) -> Cases:
    """The sheet Flaps: a row for each setting of the card."""
    flaps, order = book.card.flaps, book.settings
    numbers = np.array([j + 1.0 for j in order])
    about = {
        "number": About("Setting", 8, NumberColumn(numbers)),
        "name": About("Flap", 10, FormulaColumn(f"INDEX(flap_names,$A{ROW})", [flaps[j].name for j in order])),
    }
    deflection = f"INDEX(flap_deflections,$A{ROW})"
    values = dict(book.values)
    places: dict[str, Place] = {}
    for side, key in (("takeoff", "takeoff_flap"), ("landing", "landing_flap")):
        allowed = [USES[side] in flaps[j].uses for j in order]
        column = np.array([flaps[j].deflection if may else np.nan for j, may in zip(order, allowed, strict=True)])
        about[key] = About(f"{side.capitalize()}, deflection [rad]", 11,
                           FormulaColumn([deflection if may else '""' for may in allowed], column))  # fmt: skip
        places[key], values[key] = Place(f"${get_column_letter(len(about))}{ROW}"), column
    for key in MASSES:  # any mass will do: what hangs on it is not asked for
        places[key], values[key] = book.pages.places[f"max_{key.removeprefix('mass_')}_mass"], book.values[key]
    return write_cases(book.pages, FLAPS, "Each flap setting", book.chain, about, {}, values, wanted,
                       Elsewhere(places, {}, [""] * len(order)))  # fmt: skip


def write_working(book: Book, places: Cases, flaps: Cases, wanted: Collection[str]) -> Cases:
    """The sheet Working: each stop with each setting in both directions, at the masses of the trip."""
    settings = len(book.settings)
    rows = [(stop, at, way) for stop in range(STOPS) for at in range(settings) for way in range(WAYS)]
    of_place, of_flap = frontier(book.chain, book.parts, wanted)
    place_rows = np.array([WAYS * stop + way for stop, _, way in rows])
    flap_rows = np.array([at for _, at, _ in rows])
    marks = {_PLACE: (FIRST_ROW + place_rows).tolist(), _FLAP: (FIRST_ROW + flap_rows).tolist()}
    names = [book.card.flaps[j].name for j in book.settings]
    about = {
        "stop": About("Stop", 6, NumberColumn(np.array([stop + 1.0 for stop, _, _ in rows]))),
        "flap": About("Flap", 8, FormulaColumn([f"{FLAPS}!${flaps.letters['name']}${row}" for row in marks[_FLAP]],
                                               [names[at] for _, at, _ in rows])),
        "way": About("Way", 6, NumberColumn(np.array([way + 1.0 for *_, way in rows]))),
    }  # fmt: skip
    there = {key: _place(book.chain, places, key, _PLACE) for key in (*of_place, *MASSES) if key in places.letters}
    there |= {key: _place(book.chain, flaps, key, _FLAP) for key in (*of_flap, *SETTINGS)}
    values = {**book.values, **_taken(book, places, place_rows, (*(item.key for item in STRIP), *MASSES)),
              **_taken(book, flaps, flap_rows, SETTINGS)}  # fmt: skip
    faults = [str(fault) for fault in _column(places, "fault")]
    elsewhere = Elsewhere(there, marks, [faults[row] for row in place_rows])
    return write_cases(book.pages, WORKING, "Each stop, each flap setting, both directions, at the masses of the trip",
                       book.chain, about, {}, values, wanted, elsewhere)  # fmt: skip


def _place(chain: Chain, cases: Cases, key: str, mark: str) -> Place:
    """Where a value of another sheet of cases stands, in the row of a mark."""
    return Place(f"{cases.sheet}!${cases.letters[key]}${mark}", _unit(chain.by_key[key], cases))


def _unit(item: Input | Step, cases: Cases) -> str:
    """Unit in which a sheet shows a value; the sheet Flaps has its settings in SI."""
    if cases.sheet == FLAPS and item.key in SETTINGS:
        return ""
    return item.unit if isinstance(item, Step) or item.kind == "number" else ""


def _taken(book: Book, cases: Cases, rows: np.ndarray, keys: Collection[str]) -> dict[str, Any]:
    """Inputs of another sheet of cases, for each of these rows of it [from 0]."""
    return {key: np.broadcast_to(cases.values[key], cases.rows)[rows] for key in keys if key in cases.values}


def _column(cases: Cases, key: str) -> list[Any]:
    """What a column shows, one for each row; a number's NaN is a blank."""
    return list(cases.table.columns[list(cases.letters).index(key)].values)


@dataclass
class Best:
    """The sheet Best: a row for each landing (stops 2 on), then one for each take-off, with what the best case has.

    ``columns``: letters by key; ``values``: what each column shows, by key; ``si``: the chain's inputs of the chosen cases, SI,
    and ``suits``, ``assessed`` of each row.
    """

    ops: list[tuple[str, int]]
    columns: dict[str, str] = field(default_factory=dict)
    values: dict[str, list[Any]] = field(default_factory=dict)
    si: dict[str, np.ndarray] = field(default_factory=dict)
    places: dict[str, Place] = field(default_factory=dict)
    further: Any = None  # writes a cell of a column more: row, key, header, formula, value

    def rows(self, side: str) -> list[int]:
        """Places [from 0] of a side's rows."""
        return [row for row, (one, _) in enumerate(self.ops) if one == side]

    def row(self, side: str, stop: int) -> int:
        """Place [from 0] of the landing or take-off at a stop."""
        return self.ops.index((side, stop))

    def address(self, key: str, row: int) -> str:
        """Reference of a key's cell in a row [from 0], from any sheet."""
        return f"{BEST}!${self.columns[key]}${FIRST_ROW + row}"

    def range(self, key: str) -> str:
        """Reference of a key's cells, from any sheet."""
        return f"{BEST}!${self.columns[key]}${FIRST_ROW}:${self.columns[key]}${FIRST_ROW + len(self.ops) - 1}"


def operations() -> list[tuple[str, int]]:
    """All landings, then all take-offs, each with its stop."""
    return [*(("landing", stop) for stop in range(2, STOPS + 1)), *(("takeoff", stop) for stop in range(1, STOPS))]


def write_best(book: Book, places: Cases, flaps: Cases, working: Cases, active: Mapping[tuple[str, int], bool],
               read: tuple[Collection[str], Collection[str]]) -> Best:  # fmt: skip
    """The sheet Best. ``active``: which landings and take-offs the trip has as it stands; ``read``: keys of places and of
    flaps that the search for a mass and the abort point read of the chosen case."""
    sheet: Worksheet = book.pages.book.create_sheet(BEST)
    best = Best(operations())
    settings, writer = len(book.settings), _Rows(book.pages, sheet, best)
    for row, (side, stop) in enumerate(best.ops):
        allowed = book.allowed(side)
        first = WAYS * (settings * (stop - 1) + allowed[0])
        last = first + WAYS * len(allowed) - 1
        scores = working.values[f"{side}_score"][first : last + 1]
        chosen = int(np.argmax(scores))
        at, way = allowed[0] + chosen // WAYS, chosen % WAYS
        on = [fixed(cell("runway", one), TRIP) for one in ((stop,) if side == "landing" else (stop, stop + 1))]
        scored = working.range(f"{side}_score", first, last)
        n = f"$E{FIRST_ROW + row}"
        writer.value(row, "side", "Side", "Landing" if side == "landing" else "Take-off")
        writer.value(row, "stop", "Stop", float(stop))
        asked = f"AND({','.join(one + '<>' + chr(34) * 2 for one in on)})"
        writer.formula(row, "active", "In the trip", f'IF({asked},"yes","no")', "yes" if active[side, stop] else "no")
        writer.value(row, "leg", "Leg", float(stop - 1 if side == "landing" else stop))
        writer.formula(row, "chosen", "Best of its cases", f"MATCH(MAX({scored}),{scored},0)", chosen + 1.0)
        writer.formula(row, "place_row", "Row of Places", f"{FIRST_ROW - 1 + WAYS * (stop - 1)}+MOD({n}-1,{WAYS})+1",
                       float(FIRST_ROW + WAYS * (stop - 1) + way))  # fmt: skip
        writer.formula(row, "flap_row", "Row of Flaps", f"{FIRST_ROW + allowed[0]}+INT(({n}-1)/{WAYS})", float(FIRST_ROW + at))
        writer.formula(row, "case_row", "Row of Working", f"{FIRST_ROW - 1 + first}+{n}", float(FIRST_ROW + first + chosen))
        sources = ((places, WAYS * (stop - 1) + way, ("direction", *read[0], *SHOWN[side]), "place_row"),
                   (flaps, at, ("name", "number", f"{side}_flap", *read[1]), "flap_row"),
                   (working, first + chosen, SHOWN[side], "case_row"))  # fmt: skip
        for cases, picked, keys, where in sources:
            for key in dict.fromkeys(keys):
                if key in cases.letters:
                    writer.picked(row, cases, picked, key, where)
        key = f"mass_{side}"
        writer.formula(row, "mass", "Mass [kg]", fixed(cell(key, stop), TRIP),
                       _plain(np.broadcast_to(places.values[key], places.rows)[WAYS * (stop - 1)]))  # fmt: skip
    best.further = writer.formula
    _keep(book, best, places, flaps, active)
    return best


class _Rows:
    """Writes cells of the sheet Best, a column for each key."""

    def __init__(self, pages: Pages, sheet: Worksheet, best: Best) -> None:
        self.pages, self.sheet, self.best = pages, sheet, best

    def _address(self, row: int, key: str, header: str) -> str:
        if key not in self.best.columns:
            self.best.columns[key] = get_column_letter(len(self.best.columns) + 1)
            self.best.values[key] = [""] * len(self.best.ops)
            write_header(self.sheet, FIRST_ROW - 1, (header,), len(self.best.columns))
        return f"{self.best.columns[key]}{FIRST_ROW + row}"

    def value(self, row: int, key: str, header: str, value: Any) -> None:
        self.sheet[self._address(row, key, header)] = value
        self.best.values[key][row] = value

    def formula(self, row: int, key: str, header: str, text: str, value: Any) -> None:
        self.pages.formula(self.sheet, self._address(row, key, header), text, value)
        self.best.values[key][row] = value

    def picked(self, row: int, cases: Cases, at: int, key: str, where: str) -> None:
        """A value of the chosen row of another sheet."""
        letter = cases.letters[key]
        header = str(self.pages.book[cases.sheet][f"{letter}{FIRST_ROW - 1}"].value)
        column = f"{cases.sheet}!${letter}$1:${letter}${FIRST_ROW + cases.rows - 1}"
        value = _plain(_column(cases, key)[at])
        text = f"INDEX({column},${self.best.columns[where]}{FIRST_ROW + row})"
        self.formula(row, key, header, text, value)


def _plain(value: Any) -> Any:
    """A value as a cell keeps it: no NaN, no NumPy type."""
    if isinstance(value, np.generic):
        value = value.item()
    return "" if isinstance(value, float) and np.isnan(value) else value


def finish_best(pages: Pages, best: Best) -> None:
    """The look of the sheet Best, once all its columns stand."""
    sheet = pages.book[BEST]
    sheet["A1"], sheet["A1"].font = "The best direction and flap setting of each landing and take-off", styles.HEADING
    styles.write_caution(sheet, "A2", CAUTION)
    sheet.row_dimensions[FIRST_ROW - 1].height = 58
    for key, letter in best.columns.items():
        sheet.column_dimensions[letter].width = 42 if key.endswith("_reason") else 11
        for row in range(FIRST_ROW, FIRST_ROW + len(best.ops)):
            sheet[f"{letter}{row}"].font, sheet[f"{letter}{row}"].border = styles.BODY, styles.LINE
            sheet[f"{letter}{row}"].number_format = "General"
        if key.endswith("_verdict"):
            styles.colour_verdicts(sheet, f"{letter}{FIRST_ROW}:{letter}{FIRST_ROW + len(best.ops) - 1}")
    sheet.freeze_panes = f"E{FIRST_ROW}"
    styles.set_print(sheet, f"{FIRST_ROW - 1}:{FIRST_ROW - 1}")


def _keep(book: Book, best: Best, places: Cases, flaps: Cases, active: Mapping[tuple[str, int], bool]) -> None:
    """The chosen cases' inputs in SI, for those who work on with them."""
    place_rows = np.array([int(row) - FIRST_ROW for row in best.values["place_row"]])
    flap_rows = np.array([int(row) - FIRST_ROW for row in best.values["flap_row"]])
    best.si |= _taken(book, places, place_rows, [*(item.key for item in STRIP), *MASSES])
    best.si |= _taken(book, flaps, flap_rows, SETTINGS)
    on = np.array([active[op] for op in best.ops])
    verdicts = np.array([best.values[f"{side}_verdict"][row] for row, (side, _) in enumerate(best.ops)])
    best.si["suits"] = on & (verdicts == SUITABLE)
    best.si["assessed"] = on & (verdicts != NOT_ASSESSED)
    for cases, keys in ((places, best.columns), (flaps, best.columns)):
        for key in keys:
            item = book.chain.by_key.get(key)
            if item is not None and key in cases.letters:
                unit = _unit(item, cases)
                best.places[key] = Place(f"{BEST}!${best.columns[key]}${OF_BEST}", unit)
