"""Rule sets: published corrections, safety factors and site criteria as data, each with its citation.

A set is a TOML file; the shipped ones are in stripcheck/rules/, and a user's own works the same way. The set also
carries the ground table, so that a workbook holds all that a strip's ground needs in one place.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import nan
from pathlib import Path

import numpy as np

from stripcheck.errors import InputError
from stripcheck.surface import CONDITIONS, GROUNDS, SURFACES
from stripcheck.toml_fields import Section, read_toml, shipped_or_own
from stripcheck.units import to_si

STATUS = ("read", "memory", "own")  # how the figures of a set were taken: from the text itself, or recalled


@dataclass(frozen=True)
class Rules:
    """A rule set: where it comes from, and its values by chain key in SI."""

    name: str
    title: str
    issue: str
    citation: str
    status: str
    note: str
    values: dict[str, float | bool | np.ndarray]


def load_rules(name: str) -> Rules:
    """A shipped rule set by name, or a user's own by path. Raises InputError where the file can't be right.

    >>> load_rules("manual-only").values["takeoff_factor"]
    1.0
    """
    path = shipped_or_own(name, "rules")
    top = read_toml(path)
    values = {**_winds(top), **_side(top, "takeoff"), **_side(top, "landing"), **_slopes(top), **_site(top),
              **_grounds(top)}  # fmt: skip
    rules = Rules(
        path.stem,
        top.text("title"),
        top.text("issue"),
        top.text("citation"),
        top.text("status", choices=STATUS),
        top.text("note", ""),
        values,
    )
    top.refuse_unknown()
    if not (values["physics_counts"] or values["corrections_count"]):
        raise InputError(f"{path.name}: physics_counts and corrections_count can't both be false: nothing would count")
    return rules


def _winds(top: Section) -> dict[str, float | bool]:
    wind = top.section("wind")
    return {
        "headwind_credit": wind.number("headwind_credit", "slope", 0.5, 0.0, 1.0),
        "tailwind_count": wind.number("tailwind_count", "slope", 1.5, 1.0, 5.0),
        "physics_counts": top.flag("physics_counts", True),
        "corrections_count": top.flag("corrections_count", True),
    }


def _side(top: Section, side: str) -> dict[str, float]:
    part = top.section(side)
    factor = part.number("safety_factor", "number", 1.0, 1.0, 5.0)
    long = part.number("long_safety_factor", "number", factor, 1.0, 5.0)
    short_to = part.number("short_to", "length", 800.0, 1.0)
    long_from = part.number("long_from", "length", 1500.0, 1.0)
    if long_from <= short_to or long < factor:
        raise InputError(f"{part.where}: long_from must be above short_to, and the long factor not below the other")
    return {f"{side}_factor": factor, f"{side}_factor_to": short_to, f"{side}_factor_long": long,
            f"{side}_factor_from": long_from}  # fmt: skip


def _slopes(top: Section) -> dict[str, float]:
    slope = top.section("slope")
    return {
        "upslope_takeoff": slope.number("takeoff_each_percent_up", "slope", 0.0, 0.0, 1.0),
        "downslope_landing": slope.number("landing_each_percent_down", "slope", 0.0, 0.0, 1.0),
        "slope_limit": slope.number("corrections_hold_to", "slope", nan, 0.0, 1.0),
    }


def _site(top: Section) -> dict[str, float]:
    site = top.section("site")
    return {
        "obstacle_margin": site.number("obstacle_clearance", "altitude", to_si(50.0, "ft"), 0.0, 500.0),
        "least_width": site.number("least_width", "length", nan, 0.0, 200.0),
        "least_width_light": site.number("least_width_light", "length", nan, 0.0, 200.0),
        "light_mass": site.number("light_mass", "mass", nan, 0.0),
        "greatest_slope": site.number("greatest_slope", "slope", nan, 0.0, 1.0),
        "greatest_local_slope": site.number("greatest_local_slope", "slope", nan, 0.0, 1.0),
        "free_gradient": site.number("free_gradient", "slope", nan, 0.0, 1.0),
        "free_distance": site.number("free_distance", "length", nan, 0.0, 10000.0),
    }


def _grounds(top: Section) -> dict[str, float | np.ndarray]:
    """The ground table, with the set's own surface factors; its last row stands for the unknown ground."""
    takeoff = _surface_factors(top.section("takeoff_surface"))
    landing = _surface_factors(top.section("landing_surface"))
    rolling = [ground.rolling for ground in GROUNDS]
    braking = [ground.braking for ground in GROUNDS]
    return {
        "ground_rolling": np.array([*rolling, nan]),
        "ground_braking": np.array([*braking, nan]),
        "ground_takeoff_factor": np.array([*takeoff, nan]),
        "ground_landing_factor": np.array([*landing, nan]),
        "reference_rolling": rolling[0],
        "reference_braking": braking[0],
    }


def _surface_factors(part: Section) -> list[float]:
    """A factor for each row of the ground table; 1 where nothing is published: then the physics governs."""
    every = part.section("every")
    usual = {condition: every.number(condition, "number", 1.0, 1.0, 5.0) for condition in CONDITIONS}
    factors = []
    for surface in SURFACES:
        row = part.section(surface)
        factors += [row.number(condition, "number", usual[condition], 1.0, 5.0) for condition in CONDITIONS]
    return factors


def shipped_rules() -> list[str]:
    """Names of the shipped rule sets.

    >>> "manual-only" in shipped_rules()
    True
    """
    return sorted(path.stem for path in (Path(__file__).parent / "rules").glob("*.toml"))
