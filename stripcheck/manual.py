"""What a card holds of the flight manual: single figures, tables, and the manual's own corrections.

The single figures and the figures of the tables calibrate the card's free coefficients. The tables themselves are then
used as they stand, their holes carried by the calibrated model.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from stripcheck import atmosphere, links
from stripcheck.book_tables import BookTables, fill_holes, read_grids, stack_tables
from stripcheck.calibrate import BookPoints, at_book_conditions
from stripcheck.errors import InputError
from stripcheck.flaps import Flap, flap_setting
from stripcheck.steps import SIDES, build_chain
from stripcheck.toml_fields import Section, read_share
from stripcheck.units import from_si, read_quantity

MOST_CORRECTION = 1.0  # a correction of more than all of the distance is a slip
GRASS = {"dry": "dry_grass", "wet": "wet_grass"}


@dataclass(frozen=True)
class Manual:
    """Figures of the flight manual: points and tables by side, values by chain key [SI] that go with them, and remarks.

    ``corrections`` names the sides for which the manual has corrections of its own.
    """

    takeoff: BookPoints
    landing: BookPoints
    tables: Mapping[str, BookTables]
    corrections: frozenset[str]
    values: dict[str, Any]
    remarks: list[str]


def read_manual(book: Section, values: Mapping[str, Any], flaps: tuple[Flap, ...], folder: Path) -> Manual:
    """The part [book] of a card whose other values [SI] are read. Raises InputError for what can't be right."""
    takeoff, landing = values["max_takeoff_mass"], values["max_landing_mass"]
    remarks: list[str] = []
    grids = read_grids(book, flaps, {"takeoff": takeoff, "landing": landing, "climb": takeoff}, folder, remarks)
    tables = {side: found for side in SIDES if (found := stack_tables(grids, side))}
    own = {"takeoff": _points(book, "takeoff", "to_50ft", values, flaps),
           "landing": _points(book, "landing", "from_50ft", values, flaps)}  # fmt: skip
    more: dict[str, Any] = {}
    book.asked.add("climb_speed")
    if "climb" in tables:
        more["climb_speed"] = book.number("climb_speed", "speed", low=10.0, high=130.0)
    points = {side: _joined(rows, tables.get(side)) for side, rows in own.items()}
    for side, figures in points.items():
        if not len(figures.roll):
            raise InputError(
                f"{book.where}: nothing to calibrate the {side.replace('takeoff', 'take-off')} on: a [[book.table]] with its "
                f"rolls, or one [[book.{side}]] point or more, is needed"
            )
        more[f"{side}_reach"] = _reach(figures)
    part = book.section("corrections")
    part.asked |= set(own)
    corrections = frozenset(side for side in own if part.has(side))
    for side in corrections:
        more |= _corrections(part.section(side), side)
    remarks += [remark for found in tables.values() for remark in found.remarks]
    return Manual(points["takeoff"], points["landing"], tables, corrections, more, remarks)


def _points(book: Section, side: str, whole: str, values: Mapping[str, Any], flaps: tuple[Flap, ...]) -> list[list[float]]:
    rows = []
    use, mass = ("take-off", "takeoff") if side == "takeoff" else ("landing", "landing")
    for part in book.sections(side):
        roll = part.number("roll", "length", low=20.0, high=3000.0)
        distance = part.number(whole, "length", np.nan, 20.0, 5000.0)
        if distance <= roll:
            raise InputError(f"{part.where}: {whole} must be longer than roll")
        rows.append([
            part.number("pressure_altitude", "altitude", low=-300.0, high=5000.0),
            part.number("temperature", "temperature", low=223.15, high=328.15),
            part.number("mass", "mass", values[f"max_{mass}_mass"], 100.0, values["max_takeoff_mass"] * 1.001),
            flap_setting(part.text("flap"), flaps, use, part.where),
            roll,
            distance,
            part.number("lift_off_speed", "speed", np.nan, 10.0, 100.0) if side == "takeoff" else np.nan,
        ])  # fmt: skip
    return rows


def _joined(rows: Sequence[Sequence[float]], tables: BookTables | None) -> BookPoints:
    """Single figures and those of the tables that have a roll, as points."""
    columns = [np.array(column, float) for column in zip(*rows, strict=True)] if rows else [np.empty(0)] * 7
    if tables is None or "roll" not in tables.printed:
        return BookPoints(*columns)
    nodes = tables.nodes()
    printed = np.isfinite(nodes["roll"])
    whole = nodes.get("distance", np.full(len(printed), np.nan))
    keys = ("altitude", "temperature", "mass", "flap", "roll")
    of_tables = (*(nodes[key] for key in keys), whole, nodes["lift_off"])
    return BookPoints(*(np.concatenate([one, other[printed]]) for one, other in zip(columns, of_tables, strict=True)))


def _reach(points: BookPoints) -> float:
    """Density altitude [m] of the thinnest air of the points."""
    density = links.standard_air_density(points.pressure_altitude, points.temperature)
    return float(np.max(atmosphere.density_altitude(density)))


def _corrections(part: Section, side: str) -> dict[str, float]:
    """The manual's own corrections, SI: shares for each m/s of wind, shares of the roll for grass."""
    found = {
        f"{side}_manual_head": _for_each(part, "headwind"),
        f"{side}_manual_tail": _for_each(part, "tailwind"),
        **{f"{side}_manual_{key}": part.number(name, "slope", np.nan, 0.0, MOST_CORRECTION) for key, name in GRASS.items()},
    }
    if all(np.isnan(value) for value in found.values()):
        raise InputError(f'{part.where}: no correction is given; write for example headwind = ["10 %", "9 kt"]')
    if found[f"{side}_manual_tail"] < found[f"{side}_manual_head"]:
        raise InputError(
            f"{part.where}: a knot of tailwind adds less than a knot of headwind takes off, which no aeroplane does; check "
            "whether the two are exchanged"
        )
    if np.isnan(found[f"{side}_manual_dry"]) and np.isfinite(found[f"{side}_manual_wet"]):
        raise InputError(f"{part.where}: wet_grass is given without dry_grass; give both, or dry_grass alone")
    if found[f"{side}_manual_wet"] < found[f"{side}_manual_dry"]:
        raise InputError(f"{part.where}: wet_grass adds less than dry_grass; wet grass is never easier: check both")
    return found


def _for_each(part: Section, name: str) -> float:
    """A correction such as ["10 %", "9 kt"]: so much of the distance for each so much wind."""
    part.asked.add(name)
    if not part.has(name):
        return float(np.nan)
    entry = part.entries[name]
    wanted = f'{part.where}: {name} takes a share and the wind that it stands for, such as ["10 %", "9 kt"]'
    if not isinstance(entry, list) or len(entry) != 2:
        raise InputError(wanted)
    try:
        share, speed = read_share(entry[0]), read_quantity(entry[1], "speed")
    except InputError as error:
        raise InputError(f"{wanted}: {error}") from None
    if not (0.0 < share <= MOST_CORRECTION and 0.5 <= speed <= 50.0):
        raise InputError(wanted)
    return share / speed


def carry_tables(manual: Manual, propeller: str, power: str, values: Mapping[str, Any], flaps: tuple[Flap, ...],
                 where: str) -> dict[str, BookTables]:  # fmt: skip
    """The manual's tables with their holes carried by the calibrated model; ``values`` [SI] include what was fitted.

    Raises InputError where the model has no distance at a place where the manual prints one.
    """
    found = {}
    for side, tables in manual.tables.items():
        nodes = tables.nodes()
        nothing = np.full(len(nodes["mass"]), np.nan)
        points = BookPoints(nodes["altitude"], nodes["temperature"], nodes["mass"], nodes["flap"], nothing, nothing)
        found[side] = fill_holes(tables, _of_model(side, tables, points, propeller, power, values, flaps, where))
    return found


def _of_model(side: str, tables: BookTables, points: BookPoints, propeller: str, power: str, values: Mapping[str, Any],
              flaps: tuple[Flap, ...], where: str) -> dict[str, np.ndarray]:  # fmt: skip
    """The model's figures at all places of the tables, shaped like them."""
    shape = tables.known.shape
    if side == "climb":
        chain = build_chain(propeller, power, frozenset({"climb"}))
        model = at_book_conditions(chain, {**values, **tables.values(flaps)}, points)
        return {"rate": (model["climb_model_gradient"] * model["climb_book_tas"]).reshape(shape)}
    model = at_book_conditions(build_chain(propeller, power), values, points)
    keys = {"roll": f"{side}_roll", "distance": f"physics_{side}"}
    figures = {figure: model[key].reshape(shape) for figure, key in keys.items()}
    lost = np.argwhere(tables.known & ~np.isfinite(figures["distance"]))
    if len(lost):
        _, line, column = lost[0]
        raise InputError(
            f"{where}: the card gives no {side.replace('takeoff', 'take-off')} distance at "
            f"{from_si(tables.altitudes[line], 'ft'):,.0f} ft and {from_si(tables.temperatures[column], '°C'):.0f} °C, where "
            "the manual's table has one: check power, drag and stall speeds of the card, and that figure"
        )
    return figures
