"""What a trip is made of: the values that a pilot types, and the plan file that fills them in beforehand.

Everything here is in the units of a navigation log, as on the page: kg, litres, nautical miles, knots, minutes.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from math import inf, isnan, nan
from pathlib import Path

from stripcheck.day import LIMITS
from stripcheck.errors import InputError
from stripcheck.surface import CONDITIONS
from stripcheck.toml_fields import Section, read_toml
from stripcheck.units import from_si, tidy

STOPS = 9
Value = float | str


@dataclass(frozen=True)
class Item:
    """A number to be typed: its key, what it is, its unit, and what can be right.

    ``kind``: kind of quantity, by which the plan file is read. ``blank``: what a blank cell means, NaN for not known.
    """

    key: str
    label: str
    unit: str
    low: float
    high: float
    shown: str = "General"
    kind: str = "number"
    blank: float = nan
    help: str = ""

    @property
    def expected(self) -> str:
        """What would be right, in words."""
        return f"{self.low:,.6g} to {self.high:,.6g} {self.unit} is expected"


def _of_day(key: str, label: str, unit: str, kind: str, shown: str = "General") -> Item:
    low, high = (round(float(from_si(limit, unit)), 3) for limit in LIMITS[key])
    return Item(key, label, unit, low, high, shown, kind)


GENERAL = (
    Item("operating_mass", "Empty mass with crew", "kg", 50.0, 20_000.0, kind="mass", help="Without payload and fuel"),
    Item("zero_fuel_limit", "Greatest zero-fuel mass", "kg", 50.0, 20_000.0, kind="mass", help="Blank: there is none"),
    Item("fuel_start", "Usable fuel at the start", "l", 0.0, 5_000.0),
    Item("tank", "Usable tank capacity", "l", 1.0, 5_000.0),
    Item("fuel_density", "Fuel density", "kg/l", 0.5, 1.0, "0.000", help="1: all fuel figures here are kilograms"),
    Item("fuel_flow", "Fuel flow in cruise", "l/h", 1.0, 2_000.0),
    Item("leg_fuel", "Taxi and circuit, each leg", "l", 0.0, 500.0, help="Counted as aboard at take-off, as gone at landing"),
    Item("reserve", "Reserve at each landing", "l", 0.0, 2_000.0),
    Item("cruise", "Cruise speed, still air", "kt", 30.0, 400.0, kind="speed", help="The wind comes leg by leg"),
)  # fmt: skip
LEG = (
    Item("distance", "Distance, if typed", "nm", 0.1, 2_000.0, "0.0", help="Blank: from the positions on the sheet Strips"),
    Item("tailwind", "Wind along: tail +, head -", "kt", -150.0, 150.0, "0;-0;0"),
    Item("minutes", "Time, if known better", "min", 1.0, 1_500.0, "0", help="Blank: from distance and speed"),
)
WEATHER = (
    _of_day("temperature", "Temperature", "°C", "temperature"),
    _of_day("qnh", "QNH", "hPa", "pressure"),
    _of_day("wind_from", "Wind from, true", "°", "angle", "000"),
    _of_day("wind_speed", "Wind", "kt", "speed"),
)
LOADS = (
    Item("payload_off", "Payload off", "kg", 0.0, 20_000.0, kind="mass", blank=0.0),
    Item("payload_on", "Payload on", "kg", 0.0, 20_000.0, kind="mass", blank=0.0),
    Item("refuel", "Refuelled", "l", 0.0, 5_000.0, blank=0.0),
)
OF_STOPS = (*LEG, *WEATHER, *LOADS)
FIRST_HAS_NOT = ("distance", "tailwind", "minutes", "payload_off", "refuel")  # the first stop is where the trip begins


@dataclass(frozen=True)
class Stop:
    """A stop: its runway as the list names it, the ground reported there, and numbers by key as shown."""

    runway: str
    ground: str = "dry"
    values: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True)
class Plan:
    """A trip as it stands when the workbook is made: general numbers by key as shown, and the stops in order."""

    title: str
    general: Mapping[str, float] = field(default_factory=dict)
    stops: Sequence[Stop] = ()


def read_plan(path: Path, runways: Sequence[str]) -> Plan:
    """A trip from a plan file (TOML). Raises InputError for what can't be right.

    ``runways``: names of those on the list, such as "XLRB 14/32"; a strip's identifier alone means its first runway.
    The parts are [aeroplane], [fuel] and up to nine [[stop]]; see docs/pilot.md.
    """
    top = read_toml(path)
    plan = Plan(top.text("title", path.stem), _general(top), _stops(top, runways))
    top.refuse_unknown()
    if not plan.stops:
        raise InputError(f"{path.name}: the plan has no [[stop]]; two or more are expected, in the order of the trip")
    return plan


# entry of the plan file by part and name -> key
_ENTRIES = {
    "aeroplane": {"operating_mass": "operating_mass", "zero_fuel_limit": "zero_fuel_limit", "cruise": "cruise"},
    "fuel": {"at_start": "fuel_start", "tank": "tank", "density": "fuel_density", "flow": "fuel_flow",
             "each_leg": "leg_fuel", "reserve": "reserve"},
}  # fmt: skip


def _general(top: Section) -> dict[str, float]:
    items = {item.key: item for item in GENERAL}
    found = {}
    for name, entries in _ENTRIES.items():
        part = top.section(name)
        for entry, key in entries.items():
            found[key] = _number(part, entry, items[key])
    return {key: value for key, value in found.items() if not isnan(value)}


def _stops(top: Section, runways: Sequence[str]) -> tuple[Stop, ...]:
    parts = top.sections("stop")
    if len(parts) > STOPS:
        raise InputError(f"{top.where}: {len(parts)} stops; a trip has up to {STOPS}")
    return tuple(_stop(part, runways, first=number == 0) for number, part in enumerate(parts))


def _stop(part: Section, runways: Sequence[str], first: bool) -> Stop:
    runway = _runway(part, runways)
    values: dict[str, float] = {}
    for item in OF_STOPS:
        if item.key in ("wind_from", "wind_speed") or (first and item.key in FIRST_HAS_NOT):
            continue
        values[item.key] = _number(part, item.key, item)
    values |= _wind(part)
    if not first and isnan(values["tailwind"]):
        values["tailwind"] = 0.0
    ground = part.text("ground", "dry", CONDITIONS)
    return Stop(runway, ground, {key: value for key, value in values.items() if not isnan(value)})


def _runway(part: Section, runways: Sequence[str]) -> str:
    typed = part.text("strip")
    for runway in runways:
        if typed.casefold() in (runway.casefold(), runway.rpartition(" ")[0].casefold()):
            return runway
    near = ", ".join(runways[:5])
    raise InputError(f'{part.where}: strip = "{typed}" is not on the list; its runways are named {near} ...')


def _number(part: Section, name: str, item: Item) -> float:
    """An entry in the unit shown, NaN where there is none."""
    value = part.number(name, item.kind, nan, -inf, inf)
    shown = value if item.kind == "number" or isnan(value) else tidy(from_si(value, item.unit))
    if shown < item.low or shown > item.high:
        raise InputError(f"{part.where}: {name} = {part.entries[name]} can't be right; {item.expected}")
    return shown


def _wind(part: Section) -> dict[str, float]:
    """Direction and speed of an entry such as "270/10"; "calm" is none."""
    text = part.text("wind", "").strip()
    if text.lower() in ("", "calm"):
        return {"wind_speed": 0.0} if text else {}
    direction, stroke, speed = text.partition("/")
    if not stroke or not direction.strip() or not speed.strip():
        raise InputError(f'{part.where}: wind = "{text}": a direction and a speed such as 270/10 are expected, or "calm"')
    found = Section(part.where, {"wind_from": direction, "wind_speed": speed})
    return {item.key: _number(found, item.key, item) for item in WEATHER if item.key in found.entries}


def blank_plan(runways: Sequence[str]) -> Plan:
    """A trip along the first runways of a list, nothing typed yet.

    >>> [stop.runway for stop in blank_plan(["A 09/27", "A 18/36", "B 01/19"]).stops]
    ['A 09/27', 'B 01/19']
    """
    first: dict[str, str] = {}
    for runway in runways:
        first.setdefault(runway.rpartition(" ")[0], runway)
    chosen = list(first.values())[:4]
    return Plan("A trip", {}, tuple(Stop(runway, "dry", {"tailwind": 0.0} if n else {}) for n, runway in enumerate(chosen)))
