"""Comparison by flap setting for one strip and one direction: more flap shortens the roll and weakens the climb.

All settings of the card are computed at once, one row each, whether allowed or not; what the card does not allow is marked
and never chosen. Method: the chain's own steps, and its equations at one common speed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck import airborne, ground_run, links, speeds
from stripcheck.assessment import Result, prepare
from stripcheck.card import Card, load_card
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.rules import Rules
from stripcheck.units import read_quantity
from stripcheck.verdict import MARGINAL, SUITABLE

Array = NDArray[Any]

NONE = "none"
_RANK = {SUITABLE: 0, MARGINAL: 1}


@dataclass(frozen=True)
class Comparison:
    """One entry for each flap setting of the card, from up to down; SI, NaN where there is no value.

    ``flaps``: the settings' names; ``takeoff_allowed`` and ``landing_allowed``: whether the card allows it.
    Equivalent airspeeds [m/s]: ``stall_takeoff`` and ``lift_off`` at take-off mass, ``stall_landing`` and ``approach`` at
    landing mass. At landing mass and the ``common_speed``, the same for all: ``above_stall`` [m/s], and ``descent_angle``
    [rad] in still air with the engine giving nothing. ``stopping_distance`` [m]: brakes and the roll before they bite, from
    ``touchdown_speed``, the same for all: that of the least flap, the fastest, at which no setting stalls.
    ``takeoff_roll``, ``takeoff_distance`` to 50 ft and ``landing_distance`` from 50 ft [m], unfactored; ``climb_gradient``
    [-] in still air at take-off mass. Verdicts and reasons in words, margins [m].
    ``best_takeoff``, ``best_landing``: the allowed setting with the best verdict, and of those the greatest margin; "none".
    """

    flaps: list[str]
    takeoff_allowed: Array
    landing_allowed: Array
    common_speed: float
    touchdown_speed: float
    stall_takeoff: Array
    stall_landing: Array
    lift_off: Array
    approach: Array
    above_stall: Array
    descent_angle: Array
    takeoff_roll: Array
    takeoff_distance: Array
    climb_gradient: Array
    stopping_distance: Array
    landing_distance: Array
    takeoff_margin: Array
    landing_margin: Array
    takeoff_verdict: list[str]
    landing_verdict: list[str]
    takeoff_reason: list[str]
    landing_reason: list[str]
    best_takeoff: str
    best_landing: str


def compare_flaps(strip: Mapping[str, Any], card: Card | str, day: Day | Mapping[str, Any], rules: Rules | str = "manual-only",
                  *, common_speed: Any = None, takeoff_mass: Any = None, landing_mass: Any = None,
                  landing_flap: str | None = None) -> Comparison:  # fmt: skip
    """Compare the flap settings of a card for one direction of a strip.

    ``strip`` as for ``assess``, one row. ``common_speed``: equivalent airspeed [kt] or a text with a unit, at which margin
    over the stall and descent are compared; where none is given, the approach speed with ``landing_flap`` (the card's usual
    one where none is given). Below the stall of a setting it has no descent. Other arguments and errors as for ``assess``.

    >>> strip = {"tora": 700, "lda": 700, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"}
    >>> table = compare_flaps(strip, "ridge-runner", {"temperature": 22}, "uk-leaflet", takeoff_mass=900)
    >>> table.flaps, table.best_takeoff, table.best_landing
    (['up', '10', '20', '30'], '20', '30')
    """
    card = load_card(card) if isinstance(card, str) else card
    one = prepare(strip, card, day, rules, takeoff_mass=takeoff_mass, landing_mass=landing_mass, landing_flap=landing_flap)
    if one.size != 1:
        raise InputError(f"strips: one direction of one strip is expected, not {one.size} rows")
    common = _speed(common_speed, one)
    deflections = np.array([flap.deflection for flap in card.flaps])
    case = _rows(one, len(deflections)).changed({"takeoff_flap": deflections, "landing_flap": deflections})
    allowed = {use: np.array([use in flap.uses for flap in card.flaps]) for use in ("take-off", "landing")}
    names = [flap.name for flap in card.flaps]
    touchdown = float(case.si("touchdown_eas").max())
    stall = case.si("stall_landing")
    verdicts = {side: case[f"{side}_verdict"] for side in ("takeoff", "landing")}
    margins = {side: case.si(f"{side}_margin") for side in ("takeoff", "landing")}
    return Comparison(
        names, allowed["take-off"], allowed["landing"], common, touchdown, case.si("stall_takeoff"), stall,
        case.si("lift_off_eas"), case.si("approach_eas"), common - stall, _descent_angle(case, common),
        case.si(_first_of(case, "carried_takeoff_roll", "takeoff_roll")), case.si("takeoff_distance"),
        case.si(_first_of(case, "carried_climb", "climb_gradient")), _stopping_distance(case, touchdown),
        case.si("landing_distance"), margins["takeoff"], margins["landing"], verdicts["takeoff"], verdicts["landing"],
        case["takeoff_reason"], case["landing_reason"],
        _best(names, allowed["take-off"], verdicts["takeoff"], margins["takeoff"]),
        _best(names, allowed["landing"], verdicts["landing"], margins["landing"]),
    )  # fmt: skip


def _speed(typed: Any, one: Result) -> float:
    if typed is None:
        return float(one.si("approach_eas")[0])
    speed = read_quantity(typed, "speed")
    if not speed > 0.0:
        raise InputError(f"common speed of {typed}: a speed above 0 is expected, such as 65 kt")
    return speed


def _rows(one: Result, count: int) -> Result:
    """The one row, so many times."""
    tables = {item.key for item in one.chain.inputs if item.kind == "range"}
    given = {key: np.broadcast_to(value, count) if np.ndim(value) and key not in tables else value
             for key, value in one.given.items()}  # fmt: skip
    return Result(one.chain, count, given, {}, list(one.faults) * count, list(one.profiles) * count)


def _first_of(case: Result, *keys: str) -> str:
    """The first of some keys that the chain has a step for: a card without tables carries nothing."""
    return next(key for key in keys if key in case.chain.by_key)


def _descent_angle(case: Result, eas: float) -> Array:
    """Angle of descent [rad] in still air, thrust nil, at landing mass and an airspeed [m/s EAS]."""
    lift = links.lift_at(case.given["mass_landing"], case.given["wing_area"], eas)
    drag = ground_run.drag_coefficient(case.si("landing_flap_drag"), lift, case.si("aspect_ratio"), case.given["efficiency"])
    return np.where(eas >= case.si("stall_landing"), np.arctan(drag / lift), np.nan)


def _stopping_distance(case: Result, eas: float) -> Array:
    """Length [m] from a touchdown speed [m/s EAS] to rest, at landing mass, where the brakes hold."""
    tas = speeds.true_airspeed(eas, case.si("sigma"))
    wind = np.min(case.si("landing_wind"))  # counted to half of touchdown speed: the same for all
    law = (case.si("braked_start"), case.si("braked_square"), wind, tas)
    with np.errstate(all="ignore"):
        roll = airborne.free_roll(tas, wind, case.given["free_roll_seconds"]) + ground_run.speed_run(*law)
        stops = ground_run.least_speed_run_acceleration(*law) >= ground_run.LEAST_ACCELERATION
    carry = case.si("landing_roll_carry") if "landing_roll_carry" in case.chain.by_key else 1.0
    return np.where(stops, roll * carry, np.nan)


def _best(names: list[str], allowed: Array, verdicts: list[str], margins: Array) -> str:
    """Name of the allowed setting with the best verdict and then the greatest margin, "none" where none is usable."""
    usable = [i for i, verdict in enumerate(verdicts) if allowed[i] and verdict in _RANK]
    return names[min(usable, key=lambda i: (_RANK[verdicts[i]], -margins[i]))] if usable else NONE
