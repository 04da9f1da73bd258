"""What is worked out once for a register, for each of its rows, and for each of its directions.

Hundreds of cases that share most of what they are made of, a strip's air in a month, an aeroplane's book figures in that air,
the wind along a runway, would make a large file if each were worked out whole. So the chain is cut in levels, a sheet each:
*End 1* and *End 2* hold what hangs on the direction alone, *air* what hangs on the strip's air and ground and the aeroplane,
and the last level reads both. The days are the standard day and, for one aeroplane, the months.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from openpyxl.utils import quote_sheetname

from stripcheck.books.register_columns import MONTHS
from stripcheck.books.register_reading import Reading
from stripcheck.chain import Chain, Input, Step
from stripcheck.inputs import CARD, STRIP
from stripcheck.numeric import Number
from stripcheck.sheet.cases import FIRST_ROW, About, Cases, Elsewhere, Given, write_cases
from stripcheck.sheet.cell import Cell, as_cell, formula
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.pages import UNKNOWN_GROUND, Pages
from stripcheck.sheet.stream import ROW, FormulaColumn, Table, TextColumn
from stripcheck.sheet.strips import codes
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import to_si

RUNWAY, DAY_ROW = "\x02", "\x03"  # marks in references: row of the runway's own sheets, row of the day on the sheet Climate
ELEVATION = Input("elevation", "Elevation", "ft", "strip", "Highest known elevation of the strip")
# the day's values that differ from month to month
OF_DAY = ("temperature", "temperature_elevation", "isa_deviation", "dew_point", "qnh", "day_condition")
OF_AIR = ("elevation", "surface", "condition", *OF_DAY)
OF_END = (
    "fault", "land_here", "take_off_here", "length", "tora", "lda", "width", "elevation_start", "elevation_end", "slope_given",
    "profile_takeoff_slope", "profile_landing_slope", "profile_climb_slope", "profile_approach_slope", "local_slope", "heading",
    "obstacle_height", "obstacle_distance", "approach_obstacle_height", "approach_obstacle_distance",
)  # fmt: skip
ALL_VARYING = (*(item.key for item in STRIP), *OF_AIR)
DIGITS = 11  # of the values beside the formulas of cases
WANTED = tuple(f"{side}_{part}" for side in ("landing", "takeoff") for part in ("verdict", "reason", "finding", "margin"))


def air_set(density: Number, loading: Number) -> Number:
    """Whether the air and the loading of a side are known."""
    return np.isfinite(density) & loading


def register_chain(chain: Chain) -> Chain:
    """The chain with the elevation given, and with what hangs on air and aeroplane alone kept from hanging on the direction.

    Such a step is guarded by the air and the loading instead of by all that its side needs. Where its side can be assessed
    it has the same value; where it can't, nothing reads it. One that reads the ground keeps its guard, since there is ground
    without figures.
    """
    guards = {f"{side}_known": f"{side}_air_known" for side in ("takeoff", "landing")}
    of_end = {*OF_END, "surface", "condition"}
    steps: list[Step] = []
    for step in chain.steps:
        if step.key == "elevation":
            continue
        if step.guard in guards and not of_end & set(step.inputs):
            step = replace(step, guard=guards[step.guard])
        if step.key in guards:
            step = replace(step, implies=(*step.implies, guards[step.key]))
        if of_end & {*step.inputs, step.guard}:
            of_end.add(step.key)
        steps.append(step)
        if step.key == "density":
            steps += [
                Step(f"{side}_air_known", "", "", f"Air and loading known, {word}", "Arithmetic", air_set,
                     ("density", f"{side}_set"), truth=True, implies=("density", f"{side}_set"))
                for side, word in (("takeoff", "take-off"), ("landing", "landing"))
            ]  # fmt: skip
    return Chain((*chain.inputs, ELEVATION), tuple(steps))


def boundary(chain: Chain, inside: Collection[str]) -> list[str]:
    """The steps among ``inside`` that others, on the way to a verdict, read."""
    steps = chain.leading_to(WANTED)
    read = {key for step in steps if step.key not in inside for key in (*step.inputs, step.guard)}
    return [step.key for step in steps if step.key in inside and step.key in read]


def inside_of(chain: Chain, level: str) -> set[str]:
    """Keys of the steps that hang on the "end" alone, or on the "air" alone."""
    of_end, of_air = chain.depends_on(OF_END), chain.depends_on(OF_AIR)
    of_card = chain.depends_on(item.key for item in CARD)
    found = of_end - of_air - of_card if level == "end" else of_air - of_end
    return {step.key for step in chain.steps} & found


def take_off_length(given: Number, length: Number) -> Number:
    """TORA where it is given, but no more than the strip is long; else the length [m].

    >>> float(take_off_length(700.0, 620.0))
    620.0
    """
    known = np.where(np.isfinite(length), length, np.nan)
    return np.where(np.isfinite(given), np.where(np.isfinite(length), np.minimum(given, length), given), known)


def landing_length(given: Number, length: Number, displaced: Number) -> Number:
    """LDA where it is given, but no more than the displaced threshold leaves; else what that leaves [m]."""
    left = length - np.where(np.isfinite(displaced), displaced, 0.0)
    shorter = np.where(np.isfinite(given), np.minimum(given, left), left)
    return np.where(np.isfinite(length), shorter, np.where(np.isfinite(given), given, np.nan))


def above_zero(value: Number) -> Number:
    """The value, where it is more than nothing: a width or an obstacle's height of 0 says that there is none."""
    return np.where(np.isfinite(value), np.where(value > 0.0, value, np.nan), np.nan)


def where_height(distance: Number, height: Number) -> Number:
    """The distance of an obstacle that has a height."""
    return np.where(np.isfinite(above_zero(height)) & np.isfinite(distance), distance, np.nan)


def plain(value: Number) -> Number:
    return np.where(np.isfinite(value), value, np.nan)


def negative(value: Number) -> Number:
    return np.where(np.isfinite(value), -value, np.nan)


def steepest_part(own: Number, up: Number, down: Number) -> Number:
    """Greatest local slope [%]: the one given, or the steepest part of a profile where that is more."""
    of_profile = np.maximum(np.abs(up), np.abs(down))
    either = np.where(np.isfinite(own), np.maximum(own, of_profile), of_profile)
    return np.where(np.isfinite(up), either, np.where(np.isfinite(own), own, np.nan))


@dataclass(frozen=True)
class Ends:
    """The two sheets of the directions, as written."""

    first: Cases
    second: Cases

    def __iter__(self) -> Any:
        return iter((self.first, self.second))


def write_ends(pages: Pages, reading: Reading, chain: Chain, day_values: Mapping[str, Any]) -> Ends:
    """The sheets *End 1* and *End 2*; ``chain`` is that of any aeroplane, ``day_values`` those of the standard day, SI."""
    made = []
    for end in (1, 2):
        given = _given(reading, end)
        names = FormulaColumn(f"{reading.at(f'end_{end}')}", reading.values[f"end_{end}"])
        about = {
            "strip": About("Strip", 10, FormulaColumn(reading.at("strip"), reading.values["strip"])),
            "direction": About("Direction", 9, names),
        }
        wanted = boundary(chain, inside_of(chain, "end"))
        heading = f"The directions that begin at end {end}: as the register has them, with the wind of the standard day"
        made.append(write_cases(pages, f"End {end}", heading, chain, about, given, day_values, wanted))
    return Ends(*made)


def _given(reading: Reading, end: int) -> dict[str, Given]:
    other = 3 - end
    read: dict[str, tuple[Any, tuple[str, ...]]] = {
        "length": (above_zero, ("length",)),  # a length of 0, which is a fault, must not divide
        "tora": (take_off_length, (f"tora_{end}", "length")),
        "lda": (landing_length, (f"lda_{end}", "length", f"displaced_{end}")),
        "width": (above_zero, ("width",)),
        "elevation_start": (plain, (f"elevation_{end}",)),
        "elevation_end": (plain, (f"elevation_{other}",)),
        "slope_given": (plain if end == 1 else negative, ("slope",)),
        "local_slope": (steepest_part, ("local_slope", "profile_up", "profile_down")),
        "heading": (plain, (f"heading_{end}_used",)),
        "obstacle_height": (above_zero, (f"obstacle_height_{other}",)),
        "obstacle_distance": (where_height, (f"obstacle_distance_{other}", f"obstacle_height_{other}")),
        "approach_obstacle_height": (above_zero, (f"obstacle_height_{end}",)),
        "approach_obstacle_distance": (where_height, (f"obstacle_distance_{end}", f"obstacle_height_{end}")),
    }
    up, down = ("profile_up", "profile_down") if end == 1 else ("profile_down", "profile_up")
    turn = plain if end == 1 else negative
    for side, slope in (("takeoff", up), ("climb", up), ("landing", down), ("approach", down)):
        read[f"profile_{side}_slope"] = turn, (slope,)
    given: dict[str, Given] = {"fault": Given(reading.values["fault"], reading.at("fault"))}
    names = [reading.at(f"end_{number}") for number in (end, other)]
    texts = [reading.values[f"end_{number}"] for number in (end, other)]
    for key, only in (("land_here", "land_towards"), ("take_off_here", "take_off_towards")):
        shown = ["no" if told == that != this else "yes" for told, this, that in zip(reading.values[only], *texts, strict=True)]
        given[key] = Given(shown, f'IF(AND({reading.at(only)}={names[1]},{names[0]}<>{names[1]}),"no","yes")')
    with np.errstate(invalid="ignore"):
        for key, (function, inputs) in read.items():
            cells = [Cell(reading.at(name)) for name in inputs]
            numbers = [reading.number(name) for name in inputs]
            given[key] = Given(np.asarray(function(*numbers)), formula(as_cell(function(*cells))))
    return {key: given[key] for key in OF_END}


@dataclass(frozen=True)
class Days:
    """The days of a sheet of cases: their names, their rows on the sheet Climate, and their values in SI by key."""

    names: tuple[str, ...]
    rows: tuple[int, ...]
    letters: Mapping[str, str]
    sheet: str
    values: Mapping[str, np.ndarray]

    def first(self) -> Days:
        """The standard day alone."""
        return Days(self.names[:1], self.rows[:1], self.letters, self.sheet, {key: v[:1] for key, v in self.values.items()})

    @property
    def count(self) -> int:
        return len(self.names)


@dataclass(frozen=True)
class Fleet:
    """The sheets of one aeroplane, as written: its air, and the directions that begin at each end."""

    air: Cases
    ends: tuple[Cases, Cases]
    rows: int

    def row(self, runway: int, day: int = 0) -> int:
        """Row among the cases [from 0] of a runway on a day."""
        return day * self.rows + runway


def write_aeroplane(pages: Pages, name: str, heading: str, chain: Chain, reading: Reading, ends: Ends, days: Days,
                    values: Mapping[str, Any]) -> Fleet:  # fmt: skip
    """The sheets of one aeroplane; ``values`` are its inputs, those of the rules and of the standard day, SI."""
    rows, count = reading.rows, days.count
    marks = {
        RUNWAY: [FIRST_ROW + runway for _ in range(count) for runway in range(rows)],
        DAY_ROW: [row for row in days.rows for _ in range(rows)],
    }
    air_values = {key: np.repeat(column, rows) for key, column in days.values.items()}
    air_values["elevation"] = np.tile(to_si(reading.number("elevation_used"), "ft"), count)
    air_values["surface"] = np.tile(codes(reading.values["surface"], SURFACES), count)
    air_values["condition"] = np.tile(codes(reading.values["condition"], CONDITIONS, blank=-1, strange=-2), count)
    air_places = {key: Place(f"{days.sheet}!${letter}{DAY_ROW}") for key, letter in days.letters.items()}
    del air_places["day_condition"]  # which has a column of its own
    air_places["elevation"] = Place(reading.at("elevation_used", RUNWAY), "ft")
    air_places |= {key: Place(reading.at(key, RUNWAY)) for key in ("surface", "condition")}
    faults = [reading.values["fault"][runway] for _ in range(count) for runway in range(rows)]
    elsewhere = Elsewhere(air_places, marks, faults)
    ground = _ground_of_day(reading, days)
    air_values["day_condition"] = codes([str(word) for word in ground.shown], CONDITIONS, blank=-1, strange=-2)
    inside = inside_of(chain, "air")
    names = FormulaColumn(elsewhere.in_rows(reading.at("strip", RUNWAY)), list(reading.values["strip"]) * count)
    about = {
        "strip": About("Strip", 10, names),
        "day": About("Day", 12, TextColumn([day for day in days.names for _ in range(rows)])),
    }
    air = write_cases(pages, f"{name} air", f"{heading}: air and ground at each strip, and the book in that air", chain, about,
                      {"day_condition": ground},
                      {**values, **air_values}, boundary(chain, inside), elsewhere)  # fmt: skip
    of_air = {key: Place(f"{quote_sheetname(air.sheet)}!${letter}{ROW}", _unit(chain, key))
              for key, letter in air.letters.items() if key in chain.by_key}  # fmt: skip
    made = []
    for end, cases in enumerate(ends, 1):
        of_end = {key: Place(f"{quote_sheetname(cases.sheet)}!${letter}{RUNWAY}", _unit(chain, key))
                  for key, letter in cases.letters.items() if key in chain.by_key}  # fmt: skip
        known = {key: np.tile(cases.values[key], count) for key in OF_END}
        name_of_end = elsewhere.in_rows(reading.at(f"end_{end}", RUNWAY))
        direction = FormulaColumn(name_of_end, list(reading.values[f"end_{end}"]) * count)
        made.append(write_cases(
            pages, f"{name} end {end}", f"{heading}: in and out in the directions that begin at end {end}", chain,
            {**about, "direction": About("Direction", 9, direction)}, {}, {**values, **air_values, **known}, WANTED,
            Elsewhere({"elevation": air_places["elevation"], **of_air, **of_end}, marks, faults),
        ))  # fmt: skip
    return Fleet(air, (made[0], made[1]), rows)


def _ground_of_day(reading: Reading, days: Days) -> Given:
    """The ground of the day at each strip: of the climate's soft months a paved strip has the wet."""
    shown, formulas = [], []
    for day, row in enumerate(days.rows):
        code = int(days.values["day_condition"][day])
        word = CONDITIONS[code] if code >= 0 else UNKNOWN_GROUND
        cell = f"{days.sheet}!${days.letters['day_condition']}${row}"
        for runway in range(reading.rows):
            surface = reading.at("surface", FIRST_ROW + runway)
            paved = day > 0 and reading.values["surface"][runway] == SURFACES[0] and word == "soft"
            shown.append("wet" if paved else word)
            formulas.append(f'IF(AND({surface}="{SURFACES[0]}",{cell}="soft"),"wet",{cell})' if day else cell)
    return Given(shown, formulas)


def short_values(cases: Cases) -> Cases:
    """The same with fewer digits in the values beside the formulas, which a file of hundreds of cases is large with."""
    columns = [_short(column) if isinstance(column, FormulaColumn) else column for column in cases.table.columns]
    return replace(cases, table=Table(cases.table.first_row, columns, cases.table.heights))


def _short(column: FormulaColumn) -> FormulaColumn:
    values = column.values
    if not (isinstance(values, np.ndarray) and values.dtype.kind == "f"):
        return column
    return replace(column, values=np.array([float(f"{value:.{DIGITS}g}") for value in values.tolist()]))


def _unit(chain: Chain, key: str) -> str:
    item = chain.by_key[key]
    return item.unit if isinstance(item, Step) or item.kind == "number" else ""


def day_names() -> tuple[str, ...]:
    """The days, in the order of the sheet Climate."""
    return ("Standard day", *MONTHS)
