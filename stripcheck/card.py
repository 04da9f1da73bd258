"""The aircraft card: one aeroplane's figures, from a TOML file, with its free coefficients calibrated on book points."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from stripcheck import links
from stripcheck.calibrate import BookPoints, Fit, calibrate
from stripcheck.chain import Chain
from stripcheck.errors import InputError
from stripcheck.speeds import greatest_lift_coefficient
from stripcheck.steps import POWERS, PROPELLERS, build_chain
from stripcheck.toml_fields import Section, read_toml, shipped_or_own
from stripcheck.units import to_si

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
KNOWN_HEIGHT = 0.15  # wing above ground as a share of the span, where none is given; common practice, no source


@dataclass(frozen=True)
class Flap:
    """A flap setting: deflection [rad], stall speed [m/s EAS] at the card's stall mass, drag added [-], uses."""

    name: str
    deflection: float
    stall_speed: float
    drag: float
    uses: tuple[str, ...]


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

    @property
    def chain(self) -> Chain:
        """The chain for this kind of engine and propeller."""
        return build_chain(self.propeller, self.power)


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
    flaps = _flaps(top)
    values = {
        **_masses(top),
        **_airframe(top, assumed),
        **_engine(engine, propeller, kind, power),
        **_flap_values(top, flaps),
        **_speed_factors(top, assumed),
        **_limits(top),
    }
    values |= _chosen(top, flaps, values)
    book = top.section("book", required=True)
    takeoff = _book_points(book, "takeoff", "to_50ft", values, flaps)
    landing = _book_points(book, "landing", "from_50ft", values, flaps)
    name, note = aeroplane.text("name"), aeroplane.text("note", "")
    top.refuse_unknown()
    fit = calibrate(build_chain(kind, power), values, takeoff, landing, path.name)
    return Card(name, note, path.name, kind, power, flaps, _stall_mass(top.section("mass")), {**values, **fit.values}, assumed,
                takeoff, landing, fit)  # fmt: skip


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
    if not empty < landing <= takeoff:
        raise InputError(f"{mass.where}: empty mass below landing mass, and that not above take-off mass, is expected")
    return {"max_takeoff_mass": takeoff, "max_landing_mass": landing}


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
        limit = {"limit_sigma": links.sigma_at(altitude, deviation)}
    if kind == "fixed pitch":
        if limit:
            raise InputError(f"{engine.where}: a {power} engine goes with a constant-speed propeller")
        return {}
    return {"rated_power": rated, "propeller_diameter": diameter, **limit}


def _flaps(top: Section) -> tuple[Flap, ...]:
    rows = []
    for part in top.sections("flap"):
        rows.append(
            Flap(
                part.text("setting"),
                part.number("deflection", "angle", low=0.0, high=to_si(60.0, "°")),
                part.number("stall_speed", "speed", low=10.0, high=100.0),
                part.number("drag", "number", 0.0, 0.0, 0.3),
                part.texts("uses", ("take-off", "landing")),
            )
        )
    if len(rows) < 2:
        raise InputError(f"{top.where}: two [[flap]] parts or more are expected, with flaps up and down")
    for less, more in itertools.pairwise(rows):
        if more.deflection <= less.deflection:
            raise InputError(f"{top.where}: flap settings must be listed from up to down, by deflection")
        if more.stall_speed > less.stall_speed:
            raise InputError(
                f"{top.where}: the stall speed with flap {more.name} is above the one with flap {less.name}; "
                "more flap never raises it"
            )
    return tuple(rows)


def _flap_values(top: Section, flaps: tuple[Flap, ...]) -> dict[str, Any]:
    mass = top.section("mass")
    wing = top.section("wing")
    stall_mass = _stall_mass(mass)
    lift = [greatest_lift_coefficient(f.stall_speed, stall_mass, wing.number("area", "area")) for f in flaps]
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


def _stall_mass(mass: Section) -> float:
    """Mass at which the stall speeds are stated: the greatest take-off mass unless the card says otherwise."""
    return mass.number("stall_speeds_at", "mass", mass.number("max_takeoff", "mass"), 100.0, 20000.0)


def _speed_factors(top: Section, assumed: list[str]) -> dict[str, float]:
    speeds, landing = top.section("speeds"), top.section("landing")
    factors = {name: _typical(speeds, "speeds", name, "number", 1.0, 2.0, assumed)
               for name in ("lift_off", "screen", "approach", "touchdown")}  # fmt: skip
    if factors["screen"] < factors["lift_off"] or factors["approach"] < factors["touchdown"]:
        raise InputError(f"{speeds.where}: screen must not be below lift_off, nor approach below touchdown")
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
        "mass_takeoff": usual.number("takeoff_mass", "mass", takeoff, 100.0, takeoff),
        "mass_landing": usual.number("landing_mass", "mass", landing, 100.0, landing),
        "takeoff_flap": flap_setting(usual.text("takeoff_flap"), flaps, "take-off", usual.where),
        "landing_flap": flap_setting(usual.text("landing_flap"), flaps, "landing", usual.where),
    }


def flap_setting(name: str, flaps: tuple[Flap, ...], use: str, where: str) -> float:
    """Deflection [rad] of a setting by its name. Raises InputError for one that the card lacks or does not allow."""
    for flap in flaps:
        if flap.name == name:
            if use not in flap.uses:
                raise InputError(f'{where}: flap "{name}" is not allowed for {use} by the card')
            return flap.deflection
    raise InputError(f'{where}: there is no flap setting "{name}"; the card has: {", ".join(f.name for f in flaps)}')


def _book_points(book: Section, side: str, whole: str, values: dict[str, Any], flaps: tuple[Flap, ...]) -> BookPoints:
    rows = []
    use, mass = ("take-off", "takeoff") if side == "takeoff" else ("landing", "landing")
    for part in book.sections(side):
        roll = part.number("roll", "length", low=20.0, high=3000.0)
        distance = part.number(whole, "length", np.nan, 20.0, 5000.0) if part.has(whole) else np.nan
        part.asked.add(whole)
        if distance <= roll:
            raise InputError(f"{part.where}: {whole} must be longer than roll")
        rows.append((
            part.number("pressure_altitude", "altitude", low=-300.0, high=5000.0),
            part.number("temperature", "temperature", low=223.15, high=328.15),
            part.number("mass", "mass", values[f"max_{mass}_mass"], 100.0, values["max_takeoff_mass"] * 1.001),
            flap_setting(part.text("flap"), flaps, use, part.where),
            roll,
            distance,
        ))  # fmt: skip
    if not rows:
        raise InputError(f"{book.where}: one [[book.{side}]] point or more is needed to calibrate the card")
    return BookPoints(*(np.array(column, float) for column in zip(*rows, strict=True)))
