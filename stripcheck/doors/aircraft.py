"""The aircraft and rules arguments of the spreadsheet functions: a card's or set's name, or a range of a filled workbook.

A range of an Aircraft or Rules sheet has labels in its first column, values in the second, units in the third and the
values in SI in the fourth; the flap table and the ground table stand below. Labels are those of ``stripcheck.inputs``,
from which the sheets are made too.

Tables of a manual follow at the end of a filled workbook's Aircraft sheet, as the sheet Manual has them: ``range_tables``
reads them. A sheet that tells of no tables and not how far the manual's figures reach either, as that of the LAMBDA library
may be, gives the calibrated model's answers, and a verdict that is at best marginal.
"""

from __future__ import annotations

import math
import os
import time
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import chain as joined
from typing import Any

import numpy as np

from stripcheck.assessment import Result
from stripcheck.card import load_card
from stripcheck.chain import Chain, Input, Step, evaluate
from stripcheck.day import read_day
from stripcheck.doors.range_tables import Rows, is_number, sides_told, table_values
from stripcheck.errors import InputError
from stripcheck.flaps import flap_setting
from stripcheck.inputs import REACH, STRIP, manual_inputs, table_inputs
from stripcheck.inputs import RULES as RULE_INPUTS
from stripcheck.rules import load_rules
from stripcheck.sheet.labels import ENGINE, FLAP_HEADER, FLAP_LEAST, FLAP_MOST, GROUND_HEADER, PROPELLER, TABLES
from stripcheck.speeds import load_factor
from stripcheck.steps import build_chain
from stripcheck.surface import GROUND_NAMES
from stripcheck.units import to_si
from stripcheck.verdict import BEYOND

LONG = 5000.0  # m: a length that decides nothing, where a function has none
# where a function has no air, since its result does not hang on it
STANDARD_AIR = {"elevation_field": 0.0, "own_qnh": 101325.0, "own_temperature": 288.15}
MOST_BANK = math.radians(85.0)
KEPT = 2.0  # s for which a file that was read counts as unchanged
NO_WORDS = "there is no result for these values"
NO_BANK = "Bank: less than 85° to either side is expected"
NO_REACH = "the range does not tell how far the manual's figures reach: give the name of the card instead"
CLIMB_SPEED = next(item for item in table_inputs("climb") if item.key == "climb_speed")  # told on the sheet with climb tables
# what a range may leave blank; masses and flaps of functions are their arguments
MAY_BE_BLANK = {"mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap", "slope_limit", "least_width",
                "least_width_light", "light_mass", "greatest_slope", "greatest_local_slope", "free_gradient",
                "free_distance", *(item.key for item in REACH.values()),
                *(item.key for side in REACH for item in manual_inputs(side))}  # fmt: skip


@dataclass(frozen=True)
class Setting:
    """A flap setting of a range: name, deflection [rad], uses."""

    name: str
    deflection: float
    uses: tuple[str, ...]


@dataclass(frozen=True)
class Aeroplane:
    """An aeroplane as the functions use it: its chain, its values by chain key in SI, its flap settings.

    ``without_reach`` are the sides of which it is not known how far the manual's figures reach.
    """

    where: str
    chain: Chain
    values: Mapping[str, Any]
    flaps: Sequence[Any]
    without_reach: frozenset[str] = frozenset()

    def deflection(self, cell: Any, use: str | None) -> float:
        """Deflection [rad] of a setting by its name; a whole number is the name that it reads as."""
        name = str(int(cell)) if isinstance(cell, float) and cell.is_integer() else str(cell)
        uses = next((flap.uses for flap in self.flaps if flap.name == name and flap.uses), ("",))
        return flap_setting(name, tuple(self.flaps), use or uses[0], self.where)

    def case(self, values: Mapping[str, np.ndarray], rules: Mapping[str, Any] | None, size: int) -> Result:
        """The assessment that a function's arguments stand for, SI; nothing is computed yet."""
        air = {} if "elevation" in values else STANDARD_AIR
        inputs = {**self.values, **_no_day(), **_no_strip(), **air, **(rules or rules_of("manual-only")), **_strip(values)}
        return Result(self.chain, size, inputs, {}, [""] * size)

    def ask(self, step: str, values: Mapping[str, np.ndarray], rules: Mapping[str, Any] | None,
            size: int) -> tuple[Any, dict[int, str]]:  # fmt: skip
        """A step of the chain for arguments in SI: values or texts, and sentences for the places without one."""
        inputs = self.case(values, rules, size).given
        key = next((key for key in CARRIED.get(step, ()) if key in self.chain.by_key), step)
        item = self.chain.by_key[key]
        if not isinstance(item, Step):
            raise TypeError(f"{key} is not a step")
        side = "landing" if _is_landing(step) else "takeoff"
        result = np.broadcast_to(evaluate(self.chain, inputs, (key,))[key], size)
        if item.words:
            return self._texts(item, side, result), {}
        lost = np.flatnonzero(~np.isfinite(result)).tolist()
        if not lost:
            return result, {}
        reason = self.chain.by_key[f"{side}_reason"]
        if not isinstance(reason, Step):
            raise TypeError(f"{reason.key} is not a step")
        texts = self._texts(reason, side, np.broadcast_to(evaluate(self.chain, inputs, (reason.key,))[reason.key], size))
        steep = np.abs(values.get("bank", np.zeros(size))) >= MOST_BANK
        return result, {place: NO_BANK if steep[place] else texts[place] for place in lost}

    def _texts(self, step: Step, side: str, numbers: np.ndarray) -> list[str]:
        words = step.words
        if side in self.without_reach:
            words = tuple(NO_REACH if word == BEYOND else word for word in words)
        return [words[number - 1] for number in numbers.tolist()]


# where a card has tables of the manual, the step that starts from them stands for the model's own
CARRIED = {
    "takeoff_roll": ("carried_takeoff_roll",),
    "landing_roll": ("carried_landing_roll",),
    "climb_gradient": ("carried_climb",),
}


def _is_landing(step: str) -> bool:
    return step.startswith(("landing", "approach"))


def _strip(values: Mapping[str, np.ndarray]) -> dict[str, Any]:
    """Arguments of a function as inputs of the chain."""
    found: dict[str, Any] = {}
    names = {"elevation": "elevation_field", "qnh": "own_qnh", "temperature": "own_temperature", "slope": "slope_given",
             "height": "obstacle_height", "beyond": "obstacle_distance"}  # fmt: skip
    found |= {names[key]: value for key, value in values.items() if key in names}
    if "mass" in values:
        bank = values.get("bank", np.zeros(1))
        mass = values["mass"] * np.where(np.abs(bank) < MOST_BANK, load_factor(bank), np.nan)
        found |= {"mass_takeoff": mass, "mass_landing": mass}
    if "flap" in values:
        found |= {"takeoff_flap": values["flap"], "landing_flap": values["flap"]}
    if "length" in values:
        found |= {"tora": values["length"], "lda": values["length"]}
    for key in ("surface", "condition"):
        if key in values:
            found[key] = np.nan_to_num(values[key], nan=-1).astype(np.int64)
    if "headwind" in values:
        head = values["headwind"]
        found |= {"own_wind_speed": np.abs(head), "own_wind_from": np.where(head < 0.0, np.pi, 0.0)}
    return found


@lru_cache(maxsize=1)
def _no_day() -> dict[str, Any]:
    return dict(read_day({}).values)


@lru_cache(maxsize=1)
def _no_strip() -> dict[str, Any]:
    """A level, paved, dry strip of great length in a calm, without anything else known."""
    usual = {"fault": False, "land_here": True, "take_off_here": True, "surface": 0, "condition": 0, "tora": LONG,
             "lda": LONG, "slope_given": 0.0, "heading": 0.0, "own_wind_speed": 0.0}  # fmt: skip
    return {item.key: usual.get(item.key, np.nan) for item in STRIP}


def aeroplane_of(argument: Any) -> Aeroplane:
    """The aeroplane of a card's name or path, or of a range. Raises InputError where there is none.

    >>> aeroplane_of("ridge-runner").chain.by_key["takeoff_roll"].unit
    'm'
    """
    if isinstance(argument, str):
        return _of_card(argument, _age(argument))
    if isinstance(argument, list):
        return _of_range(*_content(argument))
    raise InputError("Aircraft: the name of a card, or a range with the rows of an Aircraft sheet, is expected")


def _age(name: str) -> int:
    """A number that changes every few seconds for a user's own file, which may change; never for a shipped one."""
    return int(time.monotonic() / KEPT) if os.path.exists(name) else 0


@lru_cache(maxsize=64)
def _of_card(name: str, _: int) -> Aeroplane:
    card = load_card(name)
    return Aeroplane(card.file, card.chain, card.values, card.flaps)


def _content(rows: list[list[Any]]) -> tuple[tuple[tuple[Any, ...], ...], tuple[type, ...]]:
    """A range to look up what was made of it before: its cells, and their types, since 1 and TRUE are equal."""
    return tuple(map(tuple, rows)), tuple(map(type, joined.from_iterable(rows)))


@lru_cache(maxsize=16)
def _of_range(rows: Rows, _: tuple[type, ...]) -> Aeroplane:
    labels = _labels(rows)
    kinds = {}
    for label in (PROPELLER, ENGINE):
        if label not in labels:
            raise _no_row(label)
        kinds[label] = str(labels[label][1])
    corrections = frozenset(side for side in REACH if manual_inputs(side)[0].label in labels)
    tables = frozenset(sides_told(labels[TABLES][1]) if TABLES in labels else ())
    try:
        chain = build_chain(kinds[PROPELLER], kinds[ENGINE], tables, corrections)
    except KeyError as error:
        raise InputError(f"Aircraft: {error} is no kind of propeller or engine") from None
    flaps, values = _flap_table(rows)
    values |= table_values(rows, tables, len(flaps))
    values |= _card_values(chain, labels, values)
    if CLIMB_SPEED.label in labels and not tables:  # how far the climb tables of a sheet without them reach is not known
        values[REACH["takeoff"].key] = math.nan
    without_reach = frozenset(side for side, item in REACH.items() if math.isnan(values.get(item.key, 0.0)))
    return Aeroplane("Aircraft range", chain, values, flaps, without_reach)


def _card_values(chain: Chain, labels: Mapping[str, list[Any]], known: Collection[str]) -> dict[str, float]:
    """The numbers of an Aircraft sheet's rows that a chain reads, SI, but those that are known already."""
    values: dict[str, float] = {}
    wanted = [item for item in chain.inputs if item.where == "card" and item.key not in known]
    for item in wanted:
        if item.key in ("takeoff_flap", "landing_flap"):  # names of settings, chosen for the workbook's own assessment
            values[item.key] = math.nan
        elif item.label in labels:
            values[item.key] = _number(labels[item.label], item, "Aircraft")
        elif item in REACH.values():
            values[item.key] = math.nan
        else:
            raise _no_row(item.label)
    return values


def _no_row(label: str) -> InputError:
    return InputError(f'Aircraft: the range has no row "{label}"; give the whole Aircraft sheet, columns A to I')


def _labels(rows: Rows) -> dict[str, list[Any]]:
    """First row of each label; four columns or more each."""
    found: dict[str, list[Any]] = {}
    for row in rows:
        if isinstance(row[0], str) and row[0].strip():
            found.setdefault(row[0].strip(), [*row, "", "", "", ""])
    return found


def _number(row: list[Any], item: Input, where: str) -> float:
    """A value in SI: column four where there is a number, else column two in the label's unit.

    NaN for a blank where one is allowed; raises InputError elsewhere, as no limit or factor may be lost unnoticed.
    """
    for cell, unit in ((row[3], ""), (row[1], item.unit)):
        if is_number(cell):
            return float(to_si(float(cell), unit))
    if row[1] in (None, "") and item.key in MAY_BE_BLANK:
        return math.nan
    raise InputError(f'{where}: "{item.label}" has no number in the range')


def _flap_table(rows: Rows) -> tuple[list[Setting], dict[str, Any]]:
    start = next((i for i, row in enumerate(rows) if row[0] == FLAP_HEADER[0] and len(row) >= len(FLAP_HEADER)), None)
    if start is None:
        raise InputError("Aircraft: the range has no flap table; give the whole Aircraft sheet, columns A to I")
    flaps, columns = [], []
    for row in rows[start + 1 :]:
        if row[0] in (None, "", FLAP_LEAST, FLAP_MOST):
            break
        name = str(int(row[0])) if isinstance(row[0], float) and row[0].is_integer() else str(row[0])
        numbers = [row[at] for at in (3, 7, 8)]
        if not all(is_number(cell) for cell in numbers):
            raise InputError(f"Aircraft: the flap table of the range lacks a number for setting {name}")
        uses = tuple(use.split(";")[0].strip() for use in str(row[4]).split(","))
        flaps.append(Setting(name, float(row[3]), uses))
        columns.append(numbers)
    deflections, drag, lift = np.array(columns, dtype=float).reshape(-1, 3).T
    if len(flaps) < 2 or not (np.diff(deflections) > 0.0).all():
        raise InputError("Aircraft: two flap settings or more are expected in the range, from up to down")
    table = {"flap_deflection": deflections, "flap_drag": drag, "flap_lift": lift, "flap_least": float(deflections[0]),
             "flap_most": float(deflections[-1])}  # fmt: skip
    return flaps, table


def rules_of(argument: Any) -> dict[str, Any]:
    """The values of a rule set's name or path, or of a range. Raises InputError where there is none.

    >>> float(rules_of("part-cat-b")["takeoff_factor"])
    1.25
    """
    if isinstance(argument, str):
        return _named_rules(argument, _age(argument))
    if isinstance(argument, list):
        return _rules_of_range(*_content(argument))
    raise InputError("Rules: the name of a rule set, or a range with the rows of a Rules sheet, is expected")


@lru_cache(maxsize=64)
def _named_rules(name: str, _: int) -> dict[str, Any]:
    return dict(load_rules(name).values)


@lru_cache(maxsize=16)
def _rules_of_range(rows: Rows, _: tuple[type, ...]) -> dict[str, Any]:
    labels = _labels(rows)
    values: dict[str, Any] = {}
    for item in RULE_INPUTS:
        if item.kind == "range" or item.key.startswith("reference_"):
            continue
        if item.label not in labels:
            raise InputError(f'Rules: the range has no row "{item.label}"; give the whole Rules sheet, columns A to F')
        row = labels[item.label]
        values[item.key] = _flag(row, item) if item.kind == "flag" else _number(row, item, "Rules")
    return values | _ground_table(rows)


def _flag(row: list[Any], item: Input) -> bool:
    if row[1] not in ("yes", "no"):
        raise InputError(f'Rules: "{item.label}": yes or no is expected in the range')
    return bool(row[1] == "yes")


def _ground_table(rows: Rows) -> dict[str, Any]:
    start = next((i for i, row in enumerate(rows) if row[0] == GROUND_HEADER[0] and len(row) >= 6), None)
    if start is None:
        raise InputError("Rules: the range has no ground table; give the whole Rules sheet, columns A to F")
    columns = {"ground_rolling": 1, "ground_braking": 2, "ground_takeoff_factor": 3, "ground_landing_factor": 5}
    table = rows[start + 1 : start + 1 + len(GROUND_NAMES)]
    if [str(row[0]) for row in table] != list(GROUND_NAMES):
        raise InputError("Rules: the ground table of the range is not complete; give the whole Rules sheet, columns A to F")
    found: dict[str, Any] = {
        key: np.array([*(float(row[at]) if is_number(row[at]) else math.nan for row in table), math.nan])
        for key, at in columns.items()
    }
    return found | {"reference_rolling": found["ground_rolling"][0], "reference_braking": found["ground_braking"][0]}
