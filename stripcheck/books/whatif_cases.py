"""The cases of a what-if: today both ways, by mass and temperature, by temperature, by flap, and one input after another.

The landing and the take-off have a sheet of cases each, so that a row holds the steps of one side only. Each case reads the
page's inputs by formula; what it has instead of them is in `Case.instead`.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from stripcheck.books.whatif_inputs import Value
from stripcheck.chain import Chain, Input, evaluate
from stripcheck.sheet.cases import About, Cases, Given, no_inputs, scores, write_cases
from stripcheck.sheet.pages import Pages
from stripcheck.sheet.stream import ROW, FormulaColumn, TextColumn
from stripcheck.sheet.strips import codes
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import to_si

Instead = Mapping[str, tuple[str, Value]]  # by key: formula, and the value that it has now; "" for blank

WARMER = (-15.0, -10.0, -5.0, 0.0, 5.0, 10.0, 15.0, 20.0)  # K beside today's, of the table by mass and temperature
MASSES = 7  # of that table
SWEEP = (-20.0, -15.0, -10.0, -5.0, 0.0, 5.0, 10.0, 15.0, 20.0)  # K beside today's, of the curve
BOTH_WAYS = 2  # rows of today's two directions
BEST = "best"
BOOK_QNH = 1013.25
# the inputs that differ from case to case, by side; the others stand on the page alone
SHARED = (
    "fault", "surface", "condition", "elevation_field", "slope_given", "heading", "obstacle_height", "obstacle_distance",
    "approach_obstacle_height", "approach_obstacle_distance", "temperature", "isa_deviation", "qnh", "humidity", "wind_from",
    "wind_speed", "physics_counts", "corrections_count",
)  # fmt: skip
OWN = {
    "landing": ("land_here", "lda", "mass_landing", "landing_flap"),
    "takeoff": ("take_off_here", "tora", "mass_takeoff", "takeoff_flap"),
}
VARYING = (*SHARED, *OWN["landing"], *OWN["takeoff"])
WANTED = {
    "landing": ("landing_verdict", "landing_reason", "landing_finding", "landing_margin", "landing_required",
                "landing_distance", "landing_available", "stall_landing", "approach_eas", "touchdown_eas", "headwind",
                "crosswind", "pressure_altitude", "density_altitude"),
    "takeoff": ("takeoff_verdict", "takeoff_reason", "takeoff_finding", "takeoff_margin", "takeoff_required",
                "takeoff_distance", "stall_takeoff", "lift_off_eas", "screen_eas", "headwind", "crosswind"),
}  # fmt: skip
# the other input of an obstacle, seen from the other direction
BEHIND = {"approach_obstacle_height": "obstacle_height", "approach_obstacle_distance": "obstacle_distance"}
# one input after another from the book's conditions to today's: label, and the keys that become today's with it
FACTORS = (
    ("Book figure", ()),
    ("Mass", ("mass",)),
    ("Height", ("elevation_field", "qnh")),
    ("Heat", ("isa_deviation", "humidity")),
    ("Slope", ("slope_given",)),
    ("Surface", ("surface", "condition")),
    ("Wind", ("wind_from", "wind_speed")),
)


@dataclass(frozen=True)
class Case:
    """A row: what it is, the direction [1 or 2, or BEST], and what stands instead of the page's inputs, by key."""

    label: str
    way: int | str
    instead: Instead = field(default_factory=dict)


@dataclass(frozen=True)
class Source:
    """Where the cases read from, by key: the formula for a case's row, and its values in the two directions, as shown.

    ``best`` is the cell with the better direction.
    """

    formulas: Mapping[str, str]
    values: Mapping[str, tuple[Value, Value]]
    best: str


def rows_of(kind: str, flaps: int) -> tuple[int, int]:
    """First and last row [from 0] of a kind of cases: ways, table, sweep, flaps or factors.

    >>> rows_of("table", 3)
    (2, 57)
    """
    counts = {"ways": BOTH_WAYS, "table": MASSES * len(WARMER), "sweep": len(SWEEP), "flaps": flaps, "factors": len(FACTORS)}
    first = 0
    for one, count in counts.items():
        if one == kind:
            return first, first + count - 1
        first += count
    raise KeyError(kind)


def cases_of(side: str, masses: Sequence[tuple[str, Value]], temperatures: Sequence[tuple[str, Value]],
             sweep: Sequence[tuple[str, Value]], flaps: Sequence[tuple[str, Value]],
             greatest: tuple[str, Value]) -> list[Case]:  # fmt: skip
    """All cases of a side, in the order of `rows_of`; each mass, temperature and flap as reference and value shown."""
    mass, flap = ("mass_landing", "landing_flap") if side == "landing" else ("mass_takeoff", "takeoff_flap")
    ways = [Case("Today, direction 1", 1), Case("Today, direction 2", 2)]
    table = [
        Case(f"Mass {i}, temperature {j}", BEST, {mass: one, "temperature": other})
        for i, one in enumerate(masses, 1)
        for j, other in enumerate(temperatures, 1)
    ]
    curve = [Case(f"Temperature {change:+.0f} K", BEST, {"temperature": one})
             for change, one in zip(SWEEP, sweep, strict=True)]  # fmt: skip
    settings = [Case(f"Flap {i}", BEST, {flap: one}) for i, one in enumerate(flaps, 1)]
    return [*ways, *table, *curve, *settings, *_factors(mass, greatest)]


def _factors(mass: str, greatest: tuple[str, Value]) -> list[Case]:
    """From the book's conditions to today's; without the rule set's corrections, which come last and have no case."""
    left: dict[str, tuple[str, Value]] = {
        "mass": greatest, "elevation_field": ("0", 0.0), "qnh": (f"{BOOK_QNH}", BOOK_QNH), "isa_deviation": ("0", 0.0),
        "humidity": ("", ""), "slope_given": ("0", 0.0), "surface": ('"paved"', "paved"), "condition": ('"dry"', "dry"),
        "wind_from": ("", ""), "wind_speed": ("0", 0.0),
    }  # fmt: skip
    rules: Instead = {"physics_counts": ('"yes"', "yes"), "corrections_count": ('"no"', "no")}
    made = []
    for label, keys in FACTORS:
        left = {key: one for key, one in left.items() if key not in keys}
        made.append(Case(label, BEST, {**rules, **{mass if key == "mass" else key: one for key, one in left.items()}}))
    return made


def better_way(side: str, chain: Chain, source: Source, values: Mapping[str, Any]) -> int:
    """The better of today's two directions [1 or 2] as the formulas find it; ``values``: the chain's other inputs, SI."""
    inputs = {item.key: item for item in chain.inputs}
    columns = {key: _si(inputs[key], source.values[key]) for key in (*SHARED, *OWN[side])}
    found = evaluate(chain, {**no_inputs(), **values, **columns}, WANTED[side])
    return int(np.argmax(scores(chain, found, side))) + 1


def _si(item: Input, shown: Sequence[Value]) -> np.ndarray:
    if item.kind == "number":
        return np.asarray(to_si(np.array([np.nan if one == "" else one for one in shown], dtype=float), item.unit))
    if item.kind == "flag":
        return np.array([one != "no" for one in shown])
    if item.kind == "fault":
        return np.array([bool(one) for one in shown])
    words = [str(one) for one in shown]
    return codes(words, SURFACES) if item.key == "surface" else codes(words, CONDITIONS, blank=-1, strange=-2)


def write_side(pages: Pages, side: str, chain: Chain, source: Source, cases: Sequence[Case], title: str, heading: str,
               values: Mapping[str, Any]) -> Cases:  # fmt: skip
    """The sheet of cases of a side. ``values``: inputs that are the same in all rows, SI."""
    best = better_way(side, chain, source, values)
    ways = np.array([best if case.way == BEST else case.way for case in cases], dtype=float)
    way_formulas = [source.best if case.way == BEST else None for case in cases]
    about = {
        "case": About("Case", 24, TextColumn([case.label for case in cases])),
        "way": About("Direction", 9, FormulaColumn(way_formulas, ways)),
    }
    inputs = {item.key: item for item in chain.inputs}
    given = {}
    for key in (*OWN[side], *SHARED):
        shown = [case.instead[key][1] if key in case.instead else source.values[key][int(way) - 1]
                 for case, way in zip(cases, ways.tolist(), strict=True)]  # fmt: skip
        usual = source.formulas[key]
        formulas = [case.instead[key][0] or '""' if key in case.instead else usual for case in cases]
        number = inputs[key].kind == "number"
        given[key] = Given(np.array([np.nan if one == "" else one for one in shown], dtype=float) if number
                           else [str(one) for one in shown], usual if set(formulas) == {usual} else formulas)  # fmt: skip
    return write_cases(pages, title, heading, chain, about, given, values, WANTED[side])


def way_formula(cells: str, other: bool = False) -> str:
    """Of two cells that one of a case's direction, or of the other."""
    return f"INDEX({cells},{'3-' if other else ''}$B{ROW})"


def blank_kept(one: str) -> str:
    """A formula that reads a cell, blank where it is: read straight, a blank would be 0."""
    return f'IF({one}="","",{one})'
