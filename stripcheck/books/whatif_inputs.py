"""What a what-if begins with: the inputs of its page, what they may be, and their first values from a strip and a day.

A value outside its limits, or a word where a number is expected, becomes the fault of the sides that read it: the
verdict is then *not assessed*, and the sentence tells what would be right.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from math import ceil, floor, inf, isnan
from pathlib import Path
from typing import Any

import numpy as np

from stripcheck import atmosphere, links
from stripcheck.assessment import prepare
from stripcheck.card import Card
from stripcheck.chain import evaluate
from stripcheck.day import LIMITS as DAY_LIMITS
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.flaps import flap_setting
from stripcheck.one_strip import typed_strip
from stripcheck.register import read_list
from stripcheck.register.limits import LIMITS as LIST_LIMITS
from stripcheck.register.runway_ends import names_from_heading
from stripcheck.rules import Rules
from stripcheck.sheet.strips import given_columns
from stripcheck.solve import both_directions
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si, read_quantity

Value = float | str
SIDES = ("landing", "takeoff")
OVER = 1.5  # of the greatest mass, up to which a mass may be typed to see what the verdict says
AS_GIVEN = ("tora", "lda", "heading", "obstacle_height", "obstacle_distance", "local_slope", "width")
DIGITS = {"slope_given": 2, "local_slope": 2, "qnh": 2}  # after the point, of the first values; else 1
USES = {"landing": "landing", "takeoff": "take-off"}
YES_OR_NO = "yes,no"


@dataclass(frozen=True)
class Entry:
    """An input of the page.

    ``kind``: number, name, or the words of a drop-down. ``both``: a cell for each direction; ``turned``: the second one
    follows from the first. ``limits`` [SI]. ``here``, ``there``: the sides that read it in its own direction and in the
    other one.
    """

    key: str
    label: str
    unit: str
    meaning: str
    kind: str = "number"
    both: bool = False
    turned: bool = False
    limits: tuple[float, float] = (-inf, inf)
    here: tuple[str, ...] = SIDES
    there: tuple[str, ...] = ()

    @property
    def shown_limits(self) -> tuple[int, int]:
        """Limits in the unit shown, rounded inwards."""
        low, high = (round(float(from_si(limit, self.unit)), 6) for limit in self.limits)
        return ceil(low), floor(high)

    @property
    def expected(self) -> str:
        """What would be right."""
        if self.kind == YES_OR_NO:
            return "yes or no is expected"
        low, high = self.shown_limits
        return f"{low:,} to {high:,} {self.unit} is expected"

    @property
    def complaint(self) -> str:
        """What is said about a value that can't be right."""
        return f"{self.label}: {self.expected}"


def _list(key: str) -> tuple[float, float]:
    return LIST_LIMITS[key].least, LIST_LIMITS[key].greatest


def _ahead(key: str, label: str, unit: str, meaning: str, limit: str) -> Entry:
    return Entry(key, label, unit, meaning, both=True, limits=_list(limit), there=SIDES)


STRIP = (
    Entry("name", "Name of the direction", "", "as on the chart; blank: from the heading", "name", both=True, here=()),
    Entry("tora", "Usable for take-off", "m", "length in this direction", both=True, limits=links.LENGTHS, here=("takeoff",)),
    Entry("lda", "Usable for landing", "m", "length in this direction", both=True, limits=links.LENGTHS, here=("landing",)),
    Entry("take_off_here", "Take-off allowed", "", "no: one-way strip", YES_OR_NO, both=True, here=("takeoff",)),
    Entry("land_here", "Landing allowed", "", "no: one-way strip", YES_OR_NO, both=True, here=("landing",)),
    Entry("heading", "Heading", "°", "true; needed in any wind", both=True, turned=True, limits=_list("heading")),
    Entry("slope_given", "Slope", "%", "mean, uphill positive", both=True, turned=True,
          limits=links.SLOPES),
    _ahead("obstacle_height", "Obstacle ahead, height", "ft", "above the far end; blank: none known", "obstacle_height"),
    _ahead("obstacle_distance", "Obstacle ahead, distance", "m", "beyond the far end", "obstacle_distance"),
    Entry("local_slope", "Steepest part", "%", "blank: not looked at", limits=_list("local_slope")),
    Entry("width", "Width", "m", "where the rules ask for one", limits=_list("width")),
    Entry("elevation_field", "Elevation", "ft", "highest point of the strip", limits=links.ELEVATIONS),
    Entry("surface", "Surface", "", "what the wheels roll on", ",".join(SURFACES)),
    Entry("condition", "Condition", "", "soft: wheels sink in", ",".join(CONDITIONS)),
)  # fmt: skip
DAY = (
    Entry("temperature", "Temperature", "°C", "at the strip", limits=DAY_LIMITS["temperature"]),
    Entry("qnh", "QNH", "hPa", "altimeter setting", limits=DAY_LIMITS["qnh"]),
    Entry("wind_from", "Wind from", "°", "true direction it comes from", limits=DAY_LIMITS["wind_from"]),
    Entry("wind_speed", "Wind", "kt", "0: calm", limits=DAY_LIMITS["wind_speed"]),
    Entry("humidity", "Relative humidity", "%", "blank: dry air", limits=DAY_LIMITS["humidity"]),
)  # fmt: skip


def loading_entries(card: Card) -> tuple[Entry, ...]:
    """Masses and flap settings, with the settings that the card allows for each."""
    entries = []
    for key, label, side in (("mass_takeoff", "Take-off mass", "takeoff"), ("mass_landing", "Landing mass", "landing")):
        greatest = card.values[f"max_{side}_mass"]
        limits = (card.values["empty_mass"], OVER * greatest)
        entries.append(Entry(key, label, "kg", f"the card allows up to {greatest:,.0f} kg", limits=limits, here=(side,)))
    for key, label, side in (("takeoff_flap", "Take-off flap", "takeoff"), ("landing_flap", "Landing flap", "landing")):
        entries.append(Entry(key, label, "", f"a setting allowed for {USES[side]}", "flap", here=(side,)))
    return tuple(entries)


def entries_of(card: Card) -> tuple[Entry, ...]:
    """All inputs of the page, in order."""
    return (*STRIP, *DAY, *loading_entries(card))


@dataclass(frozen=True)
class Start:
    """The first values of the page as typed: by key one for each direction, in the units shown, "" where blank.

    ``title``: the strip in words. ``taken``: what was taken for granted, a sentence each.
    """

    title: str
    values: Mapping[str, tuple[Value, Value]]
    taken: Sequence[str]


def from_options(typed: Mapping[str, str | None], one_way: bool, card: Card, day: Day, rules: Rules,
                 loading: Mapping[str, str | None]) -> Start:  # fmt: skip
    """From a strip as typed on a command line, as ``stripcheck strip`` reads it. Raises InputError for what can't be right."""
    both = both_directions(typed_strip(typed))
    if one_way:
        both |= {"land_here": ["yes", "no"], "take_off_here": ["no", "yes"]}
    given = prepare(both, card, day, rules).given
    names = names_from_heading(float(given["heading"][0]))
    return _start(f"Strip {names[0]}/{names[1]}", ("", ""), given, card, day, loading, [])


def from_list(path: Path, strip: str, runway: str | None, card: Card, day: Day, rules: Rules,
              loading: Mapping[str, str | None], airports: str | None = None, sheet: str | None = None) -> Start:  # fmt: skip
    """From a strip of a runway list, by its identifier or name. Raises InputError for what can't be right."""
    directions = read_list(path, airports=airports, sheet=sheet)
    texts = directions.texts
    wanted = strip.strip().casefold()
    found = [i for i in range(0, directions.n, 2) if wanted in (texts["strip"][i].casefold(), texts["name"][i].casefold())]
    if not found:
        gone = [one for one in directions.left_out if one.strip.casefold() == wanted]
        why = f"it is left out: {gone[0].reason}" if gone else "the list has no strip of that identifier or name"
        raise InputError(f"{path.name}: {strip}: {why}")
    if runway is not None:
        asked = runway.strip().upper()
        found = [i for i in found if asked in (texts["runway"][i].upper(), *texts["direction"][i : i + 2])]
    if len(found) != 1:
        runways = ", ".join(texts["runway"][i] for i in found)
        said = f"name one of its runways with --runway: {runways}" if found else f"there is no runway {runway}"
        raise InputError(f"{path.name}: {strip}: {said}")
    at = found[0]
    fault = texts["fault"][at] or texts["fault"][at + 1]
    if fault:
        raise InputError(f"{path.name}: {strip} {texts['runway'][at]}: {fault}")
    columns = {key: np.broadcast_to(column, directions.n)[at : at + 2] for key, column in given_columns(directions).items()}
    given = {**card.values, **rules.values, **day.values, **columns}
    names = texts["direction"][at], texts["direction"][at + 1]
    title = " ".join(filter(None, (texts["name"][at] or texts["strip"][at], texts["runway"][at])))
    told = []
    if directions.profiles and directions.profiles[at] is not None:
        told = ["Slope profile of the list: not used here, the mean slope stands for the whole strip"]
    return _start(title, names, given, card, day, loading, told)


def _start(title: str, names: tuple[str, str], given: Mapping[str, Any], card: Card, day: Day,
           loading: Mapping[str, str | None], told: list[str]) -> Start:  # fmt: skip
    """The values of the page from the inputs of an assessment [SI], of both directions."""
    found = evaluate(card.chain, given, ("elevation", "slope", "air_temperature", "qnh_used", "wind_used", "wind_from_used"))
    air = found["air_temperature"]
    if not np.isfinite(air).all():  # no elevation to carry it to
        air = np.where(np.isfinite(given["own_temperature"]), given["own_temperature"], given["temperature"])
    if not np.isfinite(air).all():
        raise InputError("no temperature: add --temp or --isa-dev")
    masses = {key: _mass(loading.get(f"{side}_mass"), side, card) for side in SIDES for key in (f"mass_{side}",)}
    si: dict[str, Any] = {
        **{key: given[key] for key in AS_GIVEN},
        "slope_given": found["slope"], "elevation_field": found["elevation"], "temperature": air, "qnh": found["qnh_used"],
        "wind_from": found["wind_from_used"], "wind_speed": found["wind_used"], "humidity": _humidity(given, air), **masses,
    }  # fmt: skip
    condition = [CONDITIONS[code] if code >= 0 else day.condition for code in _pair(given["condition"])]
    words: dict[str, tuple[Value, Value]] = {
        "name": names,
        "surface": _texts(SURFACES[code] if code >= 0 else "" for code in _pair(given["surface"])),
        "condition": _texts(condition),
        **{key: _texts("yes" if allowed else "no" for allowed in _pair(given[key])) for key in ("land_here", "take_off_here")},
        **{f"{side}_flap": (name, name) for side in SIDES for name in [_flap(loading.get(f"{side}_flap"), side, card)]},
    }
    units = {entry.key: entry.unit for entry in entries_of(card)}
    numbers = {key: _numbers(value, units[key], DIGITS.get(key, 1)) for key, value in si.items()}
    values = {**words, **numbers}
    values["heading"] = _turned(values["heading"][0], lambda heading: (heading + 180.0) % 360.0)
    values["slope_given"] = _turned(values["slope_given"][0], lambda slope: 0.0 - slope)
    for entry in entries_of(card):
        for value in values[entry.key]:
            if wrong(entry, value):
                raise InputError(f"{title}: {entry.complaint}, not {value}")
    return Start(title, values, [*day.defaults, *told, *card.assumed])


def _pair(column: Any) -> list[Any]:
    return list(np.broadcast_to(column, 2).tolist())


def _texts(words: Any) -> tuple[Value, Value]:
    first, second = words
    return first, second


def _numbers(column: Any, unit: str, digits: int) -> tuple[Value, Value]:
    """Rounded as they will be seen, so that the page counts with what it shows."""
    shown = [round(float(from_si(value, unit)), digits) + 0.0 for value in _pair(column)]
    return _texts("" if isnan(value) else value for value in shown)


def _turned(first: Value, turn: Callable[[float], float]) -> tuple[Value, Value]:
    return first, turn(first) if isinstance(first, float) else ""


def _humidity(given: Mapping[str, Any], air: Any) -> Any:
    """Relative humidity, also of a day that gives a dew point."""
    dew, humidity = (np.asarray(given[key], dtype=float) for key in ("dew_point", "humidity"))
    saturated = atmosphere.saturation_vapour_pressure
    share = np.minimum(saturated(np.where(np.isfinite(dew), dew, atmosphere.T0)) / saturated(air), 1.0)
    return np.where(np.isfinite(dew), share, humidity)


def _mass(typed: str | None, side: str, card: Card) -> float:
    if typed is None:
        return float(card.values[f"mass_{side}"])
    mass, greatest = read_quantity(typed, "mass"), card.values[f"max_{side}_mass"]
    if not card.values["empty_mass"] <= mass <= greatest:
        raise InputError(f"{USES[side]} mass of {typed}: {card.values['empty_mass']:,.0f} to {greatest:,.0f} kg is expected")
    return mass


def _flap(name: str | None, side: str, card: Card) -> str:
    if name is not None:
        flap_setting(name, card.flaps, USES[side], f"--{USES[side].replace('take-off', 'takeoff')}-flap")
        return name
    return next(flap.name for flap in card.flaps if flap.deflection == card.values[f"{side}_flap"])


def allowed_flaps(card: Card, side: str) -> list[str]:
    """Names of the settings that the card allows for a side, from up to down."""
    return [flap.name for flap in card.flaps if USES[side] in flap.uses]


def wrong(entry: Entry, value: Value) -> bool:
    """Whether a value as typed can't be right; a blank is missing, not wrong.

    >>> wrong(DAY[0], 99.0), wrong(DAY[0], ""), wrong(DAY[0], "warm")
    (True, False, True)
    """
    if value == "":
        return False
    if entry.kind == YES_OR_NO:
        return value not in YES_OR_NO.split(",")
    if entry.kind != "number":
        return False
    low, high = entry.shown_limits
    return not (isinstance(value, float | int) and low <= value <= high)


