"""The aircraft card: one aeroplane's figures, from a TOML file, with its free coefficients calibrated on book points."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from stripcheck import links
from stripcheck.book_tables import BookTables
from stripcheck.calibrate import BookPoints, Fit, calibrate
from stripcheck.chain import Chain
from stripcheck.errors import InputError
from stripcheck.flaps import (
    Flap,
    PositionError,
    check_book_flaps,
    flap_setting,
    read_flaps,
    read_position_error,
    usual_flaps_in_order,
)
from stripcheck.manual import carry_tables, read_manual
from stripcheck.speeds import greatest_lift_coefficient
from stripcheck.steps import POWERS, PROPELLERS, build_chain
from stripcheck.toml_fields import Section, read_toml, shipped_or_own

# typical values that stand in for entries a manual seldom prints: (part, entry) -> value as typed
TYPICAL = {
    ("drag", "parasite"): "0.035",
    ("drag", "span_efficiency"): "0.75",
    ("drag", "lift_in_the_run"): "0.4",
    ("speeds", "lift_off"): "1.10",
    ("speeds", "screen"): "1.20",
    ("speeds", "approach"): "1.30",
    ("speeds", "touchdown"): "1.10",
    ("landing", "shallowest_approach"): "5.2 %",
    ("landing", "steepest_approach"): "8 %",
    ("landing", "time_before_braking"): "2 s",
}
# Margins over the stall below which a card says so. It is not refused: manuals of short-field aeroplanes state such
# lift-offs, and their rolls belong to them. Common practice, no source.
LEAST_USUAL = {"lift_off": 1.05, "approach": 1.2}
ROUNDED = 1.001  # masses over a limit by no more than this were rounded on the way from pounds
KNOWN_HEIGHT = 0.15  # wing above ground as a share of the span, where none is given; common practice, no source


@dataclass(frozen=True)
class Card:
    """An aeroplane ready for assessments: values by chain key in SI, and how they came about."""

    name: str
    note: str
    file: str
    propeller: str
    power: str
    flaps: tuple[Flap, ...]
    stall_mass: float
    values: dict[str, Any]
    assumed: list[str]
    takeoff: BookPoints
    landing: BookPoints
    fit: Fit
    position_error: PositionError  # tells a speed to fly as the indicated one
    tables: Mapping[str, BookTables]  # of the manual, by side: takeoff, landing, climb
    corrections: frozenset[str]  # sides for which the manual has corrections of its own

    @property
    def chain(self) -> Chain:
        """The chain for this kind of engine and propeller, and for the tables and corrections that the card holds."""
        return build_chain(self.propeller, self.power, frozenset(self.tables), self.corrections)


def load_card(name: str) -> Card:
    """A shipped aircraft card by name, or a user's own by path.

    Raises InputError where the file or a value in it can't be right.

    >>> load_card("ridge-runner").propeller
    'fixed pitch'
    """
    path = shipped_or_own(name, "cards")
    top = read_toml(path)
    assumed: list[str] = []
    aeroplane = top.section("aeroplane", required=True)
    propeller = top.section("propeller", required=True)
    kind = propeller.text("kind", choices=PROPELLERS)
    engine = top.section("engine", required=True)
    power = engine.text("kind", POWERS[0], choices=POWERS)
    shaft = _engine(engine, propeller, kind, power)
    values = {
        **_masses(top),
        **_airframe(top, assumed),
        **(shaft if kind != "fixed pitch" else {}),
        **_speed_factors(top, assumed),
        **_limits(top),
    }
    stall_mass, position_error = _stall_mass(top), read_position_error(top)
    flaps = read_flaps(top, position_error, stall_mass, values["wing_area"], assumed)
    values |= _flap_values(top, flaps, stall_mass, values["wing_area"])
    values |= _chosen(top, flaps, values)
    assumed += usual_flaps_in_order(flaps, values["takeoff_flap"], values["landing_flap"], f"{path.name} [usual]")
    book = top.section("book", required=True)
    manual = read_manual(book, values, flaps, path.parent)
    assumed += check_book_flaps(flaps, manual.takeoff.flap, manual.landing.flap, book.where)
    assumed += manual.remarks
    name, note = aeroplane.text("name"), aeroplane.text("note", "")
    top.refuse_unknown()
    values |= manual.values
    fit = calibrate(build_chain(kind, power), values, manual.takeoff, manual.landing, path.name,
                    rated_power=shaft["rated_power"], diameter=shaft["propeller_diameter"])  # fmt: skip
    values |= fit.values
    tables = carry_tables(manual, kind, power, values, flaps, book.where)
    for found in tables.values():
        values |= found.values(flaps)
    return Card(name, note, path.name, kind, power, flaps, stall_mass, values, assumed, manual.takeoff, manual.landing, fit,
                position_error, tables, manual.corrections)  # fmt: skip


def shipped_cards() -> list[str]:
    """Names of the shipped aircraft cards, both of invented aeroplanes.

    >>> shipped_cards()
    ['high-mule', 'ridge-runner']
    """
    return sorted(path.stem for path in (Path(__file__).parent / "cards").glob("*.toml"))


def _typical(part: Section, key: str, name: str, kind: str, low: float, high: float, assumed: list[str]) -> float:
    """An entry, or its typical value, which is then listed as assumed."""
    if not part.has(name):
        text = TYPICAL[key, name]
        assumed.append(f"{part.where}: {name} not given, {text} used")
        part.entries = {**part.entries, name: text}
    return part.number(name, kind, low=low, high=high)


def _masses(top: Section) -> dict[str, float]:
    mass = top.section("mass", required=True)
    empty = mass.number("empty", "mass", low=50.0, high=20000.0)
    takeoff = mass.number("max_takeoff", "mass", low=100.0, high=20000.0)
    landing = mass.number("max_landing", "mass", takeoff, low=100.0, high=20000.0)
    if landing > takeoff:
        raise InputError(f"{mass.where}: max_landing = {landing:g} kg must not be above max_takeoff = {takeoff:g} kg")
    if empty >= landing:
        raise InputError(f"{mass.where}: empty = {empty:g} kg must be below max_landing = {landing:g} kg")
    return {"empty_mass": empty, "max_takeoff_mass": takeoff, "max_landing_mass": landing}


def _airframe(top: Section, assumed: list[str]) -> dict[str, float]:
    wing, drag = top.section("wing", required=True), top.section("drag")
    span = wing.number("span", "length", low=3.0, high=60.0)
    if not wing.has("height_above_ground"):
        assumed.append(f"{wing.where}: height_above_ground not given, {KNOWN_HEIGHT} of the span used")
    return {
        "wing_area": wing.number("area", "area", low=3.0, high=200.0),
        "span": span,
        "wing_height": wing.number("height_above_ground", "length", KNOWN_HEIGHT * span, 0.1, 10.0),
        "efficiency": _typical(drag, "drag", "span_efficiency", "number", 0.4, 1.0, assumed),
        "parasite_drag": _typical(drag, "drag", "parasite", "number", 0.01, 0.15, assumed),
        "ground_lift": _typical(drag, "drag", "lift_in_the_run", "number", 0.0, 1.5, assumed),
    }


def _engine(engine: Section, propeller: Section, kind: str, power: str) -> dict[str, float]:
    rated = engine.number("rated_power", "power", low=20e3, high=2000e3)
    diameter = propeller.number("diameter", "length", low=1.0, high=5.0)
    limit = {}
    if power != POWERS[0]:
        name = "critical_altitude" if power == "turbo-normalised" else "flat_rated_to"
        altitude = engine.number(name, "altitude", low=0.0, high=10000.0)
        deviation = engine.number("at_isa_deviation", "temperature difference", 0.0, -20.0, 40.0)
        limit = {"limit_sigma": links.rating_limit(altitude, deviation, power == "flat rated")}
    if kind == "fixed pitch" and limit:
        raise InputError(f"{engine.where}: a {power} engine goes with a constant-speed propeller")
    return {"rated_power": rated, "propeller_diameter": diameter, **limit}


def _flap_values(top: Section, flaps: tuple[Flap, ...], stall_mass: float, wing_area: float) -> dict[str, Any]:
    lift = [greatest_lift_coefficient(flap.stall_speed, stall_mass, wing_area) for flap in flaps]
    if not 0.8 <= min(lift) <= max(lift) <= 4.5:
        raise InputError(
            f"{top.where}: the stall speeds mean lift coefficients of {min(lift):.2f} to {max(lift):.2f}, which is not "
            "credible (0.8 to 4.5): check the stall speeds, the mass and the wing area"
        )
    return {
        "flap_deflection": np.array([f.deflection for f in flaps]),
        "flap_lift": np.array(lift),
        "flap_drag": np.array([f.drag for f in flaps]),
        "flap_least": flaps[0].deflection,
        "flap_most": flaps[-1].deflection,
    }


def _stall_mass(top: Section) -> float:
    """Mass at which the stall speeds are stated: the greatest take-off mass unless the card says otherwise."""
    mass = top.section("mass")
    empty, takeoff = mass.number("empty", "mass"), mass.number("max_takeoff", "mass")
    stated = mass.number("stall_speeds_at", "mass", takeoff, 100.0, 20000.0)
    if not empty < stated <= takeoff * ROUNDED:
        raise InputError(
            f"{mass.where}: stall_speeds_at = {stated:g} kg is expected above the empty mass, {empty:g} kg, and up to "
            f"max_takeoff, {takeoff:g} kg; a wrong one makes every stall speed wrong"
        )
    return stated


def _speed_factors(top: Section, assumed: list[str]) -> dict[str, float]:
    speeds, landing = top.section("speeds"), top.section("landing")
    factors = {name: _typical(speeds, "speeds", name, "number", 1.0, 2.0, assumed)
               for name in ("lift_off", "screen", "approach", "touchdown")}  # fmt: skip
    for later, sooner in (("screen", "lift_off"), ("approach", "touchdown")):
        if factors[later] < factors[sooner]:
            raise InputError(f"{speeds.where}: {later} = {factors[later]:g} must not be below {sooner} = {factors[sooner]:g}")
    for name, least in LEAST_USUAL.items():
        if factors[name] < least:
            assumed.append(f"{speeds.where}: {name} = {factors[name]:g} is less than {least:g} times the stall speed, which "
                           "leaves little for gusts; taken as meant")  # fmt: skip
    shallow = _typical(landing, "landing", "shallowest_approach", "slope", 0.02, 0.2, assumed)
    steep = _typical(landing, "landing", "steepest_approach", "slope", shallow, 0.25, assumed)
    return {
        **{f"{name}_factor": value for name, value in factors.items()},
        "approach_shallowest": shallow,
        "approach_steepest": steep,
        "free_roll_seconds": _typical(landing, "landing", "time_before_braking", "time", 0.0, 10.0, assumed),
    }


def _limits(top: Section) -> dict[str, float]:
    limits = top.section("limits", required=True)
    return {
        "crosswind_limit": limits.number("crosswind", "speed", low=0.0, high=30.0),
        "tailwind_limit": limits.number("tailwind", "speed", low=0.0, high=15.0),
    }


def _chosen(top: Section, flaps: tuple[Flap, ...], values: dict[str, Any]) -> dict[str, float]:
    """Mass and flap that an assessment starts from unless told otherwise."""
    usual = top.section("usual", required=True)
    takeoff, landing = values["max_takeoff_mass"], values["max_landing_mass"]
    return {
        "mass_takeoff": _usual_mass(top, "takeoff_mass", "max_takeoff", takeoff),
        "mass_landing": _usual_mass(top, "landing_mass", "max_landing", landing),
        "takeoff_flap": flap_setting(usual.text("takeoff_flap"), flaps, "take-off", usual.where),
        "landing_flap": flap_setting(usual.text("landing_flap"), flaps, "landing", usual.where),
    }


def _usual_mass(top: Section, name: str, limit_name: str, limit: float) -> float:
    usual, empty = top.section("usual"), top.section("mass").number("empty", "mass")
    mass = usual.number(name, "mass", limit, 100.0, 20000.0)
    if not empty < mass <= limit:
        raise InputError(
            f"{usual.where}: {name} = {mass:g} kg is expected above the empty mass, {empty:g} kg, and up to {limit_name}, "
            f"{limit:g} kg"
        )
    return mass
