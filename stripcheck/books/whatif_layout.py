"""Where things stand in a what-if workbook, and what the cells that all sheets share come to."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property

import numpy as np
from openpyxl.utils import get_column_letter, quote_sheetname

from stripcheck.books import whatif_cases as working
from stripcheck.books.whatif_cases import MASSES, SWEEP, WARMER, Case, Source
from stripcheck.books.whatif_inputs import SIDES, YES_OR_NO, Entry, Start, Value, allowed_flaps, entries_of
from stripcheck.card import Card
from stripcheck.rules import Rules
from stripcheck.sheet.cases import Cases
from stripcheck.sheet.pages import Pages
from stripcheck.units import from_si, tidy

PAGE, CHARTS, TABLES = "What if", "Charts", "Tables"
WORKING = {"landing": "Working landing", "takeoff": "Working take-off"}
LAND, TAKE_OFF = "Land on", "Take off on"
WORDS = {"landing": LAND, "takeoff": TAKE_OFF}

# the page: headers and their rows of inputs, the tables of verdicts by mass and temperature
HEADER_ROWS = {"strip": 4, "day": 19, "loading": 25}
MATRIX_ROW = {"landing": 23, "takeoff": 33}  # of the temperatures
MATRIX_LETTERS = [get_column_letter(8 + i) for i in range(len(WARMER))]
MASS_LETTER = "G"
MASS_SHARE, ROUND_TO = 0.05, 10.0  # a step of mass as a share of the greatest, and what it is rounded to [kg]

# the sheet Tables: checks and facts on the left, what the charts draw on the right
CHECK_ROW = 6
FAULT_ROW = 32  # landing, and below it take-off
NAME_ROW = 37  # of the directions
BEST_ROW = 41  # the better direction of each side, and below it its name
FACT_ROW = 43
FACTS = {
    "greatest": "Greatest mass [kg]", "empty": "Empty mass [kg]", "step": "Step of mass [kg]",
    "held": "Today's mass, held at the greatest [kg]", "row": "Row of today's mass, from 0",
    "deflection": "Flap deflection [°]",
}  # fmt: skip
SIDE_LETTER = {"landing": "B", "takeoff": "C"}


class Layout:
    """The cells of one book, for a card and the first values of its page."""

    def __init__(self, card: Card, rules: Rules, start: Start) -> None:
        self.card, self.rules, self.start = card, rules, start
        self.entries = entries_of(card)
        self.flaps = {side: allowed_flaps(card, side) for side in SIDES}

    @cached_property
    def rows(self) -> Mapping[str, int]:
        """Row of each input on the page."""
        found, row = {}, HEADER_ROWS["strip"]
        for entry in self.entries:
            row += 1
            row += row in HEADER_ROWS.values()
            found[entry.key] = row
        return found

    def cell(self, key: str, way: int = 1) -> str:
        """An input of the page, from any sheet."""
        return f"{quote_sheetname(PAGE)}!${'BC'[way - 1]}${self.rows[key]}"

    def both(self, key: str) -> str:
        """An input's two cells."""
        return f"{self.cell(key)}:$C${self.rows[key]}"

    def fact(self, key: str, side: str) -> str:
        """A value on the sheet Tables, from any sheet."""
        return f"{TABLES}!${SIDE_LETTER[side]}${FACT_ROW + list(FACTS).index(key)}"

    def name(self, way: int) -> str:
        """Name of a direction, from any sheet."""
        return f"{TABLES}!${'BC'[way - 1]}${NAME_ROW}"

    def best_name(self, side: str) -> str:
        """Name of the better direction of a side, from any sheet."""
        return f"{TABLES}!${SIDE_LETTER[side]}${BEST_ROW + 1}"

    def check(self, entry: Entry, way: int) -> str:
        """On the sheet Tables, what is wrong with an input."""
        return f"{'BC'[way - 1]}{CHECK_ROW + self.entries.index(entry)}"

    def value(self, key: str, way: int = 1) -> Value:
        return self.start.values[key][way - 1]

    @property
    def flap_row(self) -> Mapping[str, int]:
        """First row of each table by flap on the sheet Tables."""
        return {"landing": 13, "takeoff": 16 + len(self.flaps["landing"])}

    @property
    def sweep_row(self) -> int:
        """First row of the curve over temperature on the sheet Tables."""
        return self.flap_row["takeoff"] + len(self.flaps["takeoff"]) + 3

    @property
    def fall_row(self) -> Mapping[str, int]:
        """First row of each waterfall on the sheet Tables."""
        first = self.sweep_row + len(SWEEP) + 9
        return {"landing": first, "takeoff": first + len(working.FACTORS) + 6}

    # --- what the tables by mass and temperature begin with

    def greatest(self, side: str) -> float:
        """Greatest mass [kg] of a side."""
        return tidy(float(self.card.values[f"max_{side}_mass"]))

    @property
    def empty(self) -> float:
        """Empty mass [kg]."""
        return tidy(float(self.card.values["empty_mass"]))

    @staticmethod
    def best(cases: Cases, side: str) -> int:
        """The better of today's directions [1 or 2]."""
        return int(np.argmax(cases.values[f"{side}_score"][:2])) + 1

    def mass_step(self, side: str) -> float:
        return max(ROUND_TO, int(self.greatest(side) * MASS_SHARE / ROUND_TO + 0.5) * ROUND_TO)

    def mass_held(self, side: str) -> Value:
        """Today's mass, held at the greatest."""
        today = self.value(f"mass_{side}")
        return min(today, self.greatest(side)) if isinstance(today, float) else ""

    def mass_row(self, side: str) -> int:
        """Which of the rows of masses is today's [from 0]; the first is the greatest mass."""
        held, step = self.mass_held(side), self.mass_step(side)
        if not isinstance(held, float) or held >= self.greatest(side):
            return 0
        return 1 + min(1, max(0, int((self.greatest(side) - held) / step - 0.01)))

    def masses(self, side: str) -> list[Value]:
        """The masses of the table, heaviest first, "" below the empty mass."""
        held = self.mass_held(side)
        if not isinstance(held, float):
            return [""] * MASSES
        step, today = self.mass_step(side), self.mass_row(side)
        steps: list[float] = [self.greatest(side), *(held + (today - i) * step for i in range(1, MASSES))]
        return [mass if mass >= self.empty else "" for mass in steps]

    def temperatures(self, changes: tuple[float, ...] = WARMER) -> list[Value]:
        today = self.value("temperature")
        return [today + change if isinstance(today, float) else "" for change in changes]

    def deflection(self, name: str) -> float:
        """Of a flap setting [degrees], as the Aircraft sheet shows it."""
        return tidy(from_si(next(flap.deflection for flap in self.card.flaps if flap.name == name), "°"))

    def mass_cell(self, side: str, i: int) -> str:
        return f"{quote_sheetname(PAGE)}!${MASS_LETTER}${MATRIX_ROW[side] + 1 + i}"

    def temperature_cell(self, side: str, j: int) -> str:
        return f"{quote_sheetname(PAGE)}!${MATRIX_LETTERS[j]}${MATRIX_ROW[side]}"

    # --- what the cases read

    def source(self, pages: Pages, side: str) -> Source:
        """By key, the formula of a case and its values both ways."""
        faults = f"{TABLES}!$B${FAULT_ROW + SIDES.index(side)}:$C${FAULT_ROW + SIDES.index(side)}"
        formulas = {"isa_deviation": '""', "fault": working.way_formula(faults)}
        values: dict[str, tuple[Value, Value]] = {"isa_deviation": ("", ""), "fault": ("", "")}
        for entry in self.entries:
            formulas[entry.key] = self._reading(entry)
            values[entry.key] = self.start.values[entry.key]
        for key, ahead in working.BEHIND.items():
            formulas[key] = working.blank_kept(working.way_formula(self.both(ahead), other=True))
            values[key] = self.start.values[ahead][::-1]
        flap, deflection = f"{side}_flap", self.deflection(str(self.value(f"{side}_flap")))
        formulas[flap], values[flap] = self.fact("deflection", side), (deflection, deflection)
        for key in ("physics_counts", "corrections_count"):
            counts = "yes" if self.rules.values[key] else "no"
            formulas[key], values[key] = f'{pages.places[key].reference}&""', (counts, counts)
        return Source(formulas, values, f"{TABLES}!${SIDE_LETTER[side]}${BEST_ROW}")

    def _reading(self, entry: Entry) -> str:
        if entry.kind == YES_OR_NO:
            return f'{working.way_formula(self.both(entry.key))}&""'
        return working.blank_kept(working.way_formula(self.both(entry.key)) if entry.both else self.cell(entry.key))

    def cases(self, side: str) -> list[Case]:
        """All cases of a side."""
        masses = [(self.mass_cell(side, i), mass) for i, mass in enumerate(self.masses(side))]
        temperatures = [(self.temperature_cell(side, j), one) for j, one in enumerate(self.temperatures())]
        sweep = [(f"{TABLES}!$E${self.sweep_row + i}", one) for i, one in enumerate(self.temperatures(SWEEP))]
        flaps = [(f"{TABLES}!$F${self.flap_row[side] + i}", self.deflection(name)) for i, name in enumerate(self.flaps[side])]
        greatest = (self.fact("greatest", side), self.greatest(side))
        return working.cases_of(side, masses, temperatures, sweep, flaps, greatest)
