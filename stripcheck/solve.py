"""Inverse questions: how heavy, how hot, how much wind, and where to stop or turn away.

Each question takes what ``stripcheck.assess`` takes and answers for each row, one row a direction, over arrays. The
chain itself is asked, by bisection with a fixed count, so that an answer agrees with the verdict: at the value found the
direction is still suitable, a hair beyond it is not. ``**loading`` is ``takeoff_mass``, ``landing_mass``,
``takeoff_flap`` and ``landing_flap``, as for ``assess``. Inside all is SI; ``texts()`` says it in words, rounded to the
safe side. What can't be assessed has no answer, and the words say so.

Bisection is right because more mass, heat or tailwind never betters a verdict, which tests/test_laws.py holds.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import ceil, floor
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck import airborne, ground_run, links, speeds
from stripcheck.assessment import Result, prepare, strip_columns
from stripcheck.atmosphere import G0
from stripcheck.card import Card, load_card
from stripcheck.chain import evaluate
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.flaps import flap_setting
from stripcheck.inputs import STRIP
from stripcheck.numeric import Number
from stripcheck.profile import read_profile
from stripcheck.rules import Rules
from stripcheck.units import from_si, to_si
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE

Array = NDArray[Any]
Given = Mapping[str, Any]

SIDES = ("takeoff", "landing")
FOUND, NONE, OPEN = "found", "none", "open"  # besides NOT_ASSESSED; open: even the hardest value works
HALVINGS = 26  # of 120 K leave 2e-6 K, of a tonne 2e-5 kg, of 5 nm 0.2 mm
FINE_HALVINGS = 44  # of 60 m/s leave 3e-12 m/s, so that a workbook's cells can be compared at 1e-9
LEAST_SHARE = 0.3  # of the greatest mass: lighter than any aeroplane flies
WINDS = (to_si(30.0, "kt"), to_si(-20.0, "kt"))  # along the strip, from the easiest headwind to the hardest tailwind
# Seconds from the abort point until the brakes bite. Transport aeroplanes are certified with two seconds at that speed
# (14 CFR 25.109, from memory); one more for a pilot alone. Common practice, no source.
REACTION = 3.0
GO_SHARE = 0.7  # of lift-off speed, to be had at half of the strip. Common practice, no source.
FLAP_SECONDS = 5.0  # from the decision to go around until the flap is where it climbs best. Common practice, no source.
FARTHEST = 5.0 * 1852.0  # m before the threshold: beyond this nobody is on the approach yet


@dataclass(frozen=True)
class Answer:
    """Answers to one question, one for each row.

    ``value`` in SI, NaN where there is none; where even the hardest value works (``state`` "open") it is that one.
    ``state``: "found", "none", "open" or "not assessed". ``limits``: the reason that forbids more, or why there is none.
    """

    value: Array
    state: Array
    limits: list[str]
    unit: str
    say: Callable[[float], str]
    say_open: Callable[[float], str]

    def texts(self) -> list[str]:
        """The answers in words."""
        words = {FOUND: self.say, OPEN: self.say_open}
        return [words[state](value) if state in words else str(state)
                for state, value in zip(self.state.tolist(), self.value.tolist(), strict=True)]  # fmt: skip


def most_takeoff_mass(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only", *,
                      at_best: str = SUITABLE, **loading: Any) -> Answer:  # fmt: skip
    """Greatest take-off mass [kg] at which the take-off is suitable, up to the card's greatest.

    ``at_best="marginal"`` accepts marginal too. Raises InputError as ``assess`` does.

    >>> most_takeoff_mass({"tora": [80.0, 2000.0], "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"},
    ...                   "ridge-runner", {"temperature": 22}, "uk-leaflet").texts()
    ['none', '1,110 kg, the greatest allowed']
    """
    return most_mass(prepare(strips, card, day, rules, **loading), "takeoff", at_best)


def most_landing_mass(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only", *,
                      at_best: str = SUITABLE, **loading: Any) -> Answer:  # fmt: skip
    """Greatest landing mass [kg] at which the landing is suitable, up to the card's greatest.

    Arguments and errors as for ``most_takeoff_mass``.

    >>> most_landing_mass({"lda": [80.0, 1500.0], "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"},
    ...                   "ridge-runner", {"temperature": 22}, "uk-leaflet").texts()
    ['none', '1,110 kg, the greatest allowed']
    """
    return most_mass(prepare(strips, card, day, rules, **loading), "landing", at_best)


def hottest(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only", side: str = "takeoff",
            *, at_best: str = SUITABLE, **loading: Any) -> Answer:  # fmt: skip
    """Hottest air at the strip [K], within -60 to 60 °C, in which a ``side``, "takeoff" or "landing", is suitable.

    A relative humidity of the day holds at each temperature. Other arguments and errors as for ``most_takeoff_mass``.

    >>> answer = hottest({"tora": [80.0, 2000.0], "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"},
    ...                  "ridge-runner", {"temperature": 22}, "uk-leaflet", takeoff_mass=950)
    >>> answer.texts(), answer.limits[1]
    (['none', '40.0 °C'], 'beyond the book: higher, hotter or heavier')
    """
    return hottest_air(prepare(strips, card, day, rules, **loading), side, at_best)


def hottest_air(case: Result, side: str, at_best: str = SUITABLE) -> Answer:
    """The hottest air [K] of a side, for what `prepare` gives."""
    coldest, hot = (np.full(case.size, limit) for limit in links.TEMPERATURES)
    found = _hardest(case, side, at_best, coldest, hot, lambda kelvin: {"own_temperature": kelvin})
    return Answer(*found, "°C", _celsius, lambda kelvin: f"no limit within {_celsius(kelvin)}")


def least_headwind(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only",
                   side: str = "takeoff", *, at_best: str = SUITABLE, **loading: Any) -> Answer:  # fmt: skip
    """Least headwind [m/s] at which a ``side`` is suitable; negative: the most tailwind.

    The wind blows straight along the strip, from 30 kt ahead to 20 kt behind, in place of the day's; the rule set counts
    it as it does any. Other arguments and errors as for ``hottest``.

    >>> least_headwind({"tora": [80.0, 2000.0], "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"},
    ...                "ridge-runner", {"temperature": 22}, "uk-leaflet", takeoff_mass=900).texts()
    ['none', 'up to 10.0 kt of tailwind']
    """
    case = prepare(strips, card, day, rules, **loading)
    # a wind along the strip has no crosswind, so its limit has no say; the sine of half a turn is not nil to the last digit
    calm_across = {"crosswind_limit": np.inf}
    ahead, behind = (np.full(case.size, wind) for wind in WINDS)
    found = _hardest(case, side, at_best, ahead, behind, lambda head: {**wind_along(head), **calm_across})
    return Answer(*found, "kt", _wind, lambda head: f"no limit within {-from_si(head, 'kt'):.0f} kt of tailwind")


def most_mass(case: Result, side: str, at_best: str = SUITABLE) -> Answer:
    """The greatest mass [kg] of a side, for what `prepare` gives."""
    greatest = float(case.given[f"max_{side}_mass"])
    least = float(case.given.get("empty_mass", LEAST_SHARE * greatest))
    light, heavy = (np.full(case.size, mass) for mass in (least, greatest))
    found = _hardest(case, side, at_best, light, heavy, lambda mass: {f"mass_{side}": mass})
    return Answer(*found, "kg", _kilograms, lambda mass: f"{_kilograms(mass)}, the greatest allowed")


def _hardest(case: Result, side: str, at_best: str, easiest: Array, hardest: Array,
             given: Callable[[Array], Given]) -> tuple[Array, Array, list[str]]:  # fmt: skip
    """The value nearest to the hardest at which a side is still acceptable: values, states and limiting reasons."""
    verdicts = np.array(verdict_words(case, side))
    accepted = np.isin(verdicts, {SUITABLE: [SUITABLE], MARGINAL: [SUITABLE, MARGINAL]}[at_best])

    def finding(value: Array) -> Array:
        return case.changed(given(value)).si(f"{side}_finding") - 1

    first, last = finding(easiest), finding(hardest)
    state = np.select([verdicts[first] == NOT_ASSESSED, ~accepted[first], accepted[last]], [NOT_ASSESSED, NONE, OPEN], FOUND)
    good, bad = _last_that_holds(lambda value: accepted[finding(value)], easiest, hardest)
    value = np.select([state == FOUND, state == OPEN], [good, hardest], np.nan)
    beyond = np.where(state == FOUND, bad, easiest)
    reasons = case.changed(given(beyond))[f"{side}_reason"]
    limits = ["" if one == OPEN else reason for one, reason in zip(state.tolist(), reasons, strict=True)]
    return value, state, limits


def verdict_words(case: Result, side: str) -> tuple[str, ...]:
    """The verdict of each finding of a side, in order. Raises InputError for a side that is none.

    >>> verdict_words(prepare({}, "ridge-runner", {"temperature": 22}), "landing")[-1]
    'suitable'
    """
    if side not in SIDES:
        raise InputError(f'"{side}" is no side; it is one of: {", ".join(SIDES)}')
    words: tuple[str, ...] = getattr(case.chain.by_key[f"{side}_verdict"], "words", ())
    return words


def _last_that_holds(holds: Callable[[Array], Array], good: Array, bad: Array,
                     halvings: int = HALVINGS) -> tuple[Array, Array]:  # fmt: skip
    """Two values a hair apart, of which the one still holds and the other no more, from one of each kind."""
    for _ in range(halvings):
        middle = 0.5 * (good + bad)
        still = holds(middle)
        good, bad = np.where(still, middle, good), np.where(still, bad, middle)
    return good, bad


def wind_along(head: Array) -> dict[str, Any]:
    """Strip values [SI] by key for a wind straight along the strip, headwind positive [m/s], in place of any other.

    >>> wind_along(np.array([5.0, -5.0]))["own_wind_speed"]
    array([5., 5.])
    """
    return {"heading": 0.0, "own_wind_speed": np.abs(head), "own_wind_from": np.where(head < 0.0, np.pi, 0.0)}


def _kilograms(mass: float) -> str:
    return f"{floor(mass):,} kg"


def _celsius(kelvin: float) -> str:
    return f"{_down(from_si(kelvin, '°C')):.1f} °C"


def _wind(head: float) -> str:
    knots = _up(from_si(head, "kt"))
    return f"needs {knots:.1f} kt of headwind" if knots > 0.0 else f"up to {abs(knots):.1f} kt of tailwind"


def _down(value: float) -> float:
    """A value to one digit behind the point, not above itself; of what is a hair below a digit, that digit."""
    return floor(10.0 * value + 1e-4) / 10.0


def _up(value: float) -> float:
    return -_down(-value)


# --- the abort point --------------------------------------------------------------------------------------------------


@dataclass(frozen=True)
class AbortPoint:
    """The last place from which a take-off given up still stops on the strip, for each row, and the 70 % check.

    ``distance`` [m] from the start of the run and true and equivalent airspeed [m/s] there; where the aeroplane can stop
    even from lift-off ("open") these are lift-off's. ``usable`` [m]: the lesser of the lengths usable for take-off and
    for landing. ``half_share`` [-]: airspeed at half of it over lift-off speed, at most 1; ``seventy_at`` [m]: where
    70 % of lift-off speed is reached, NaN where never.
    """

    distance: Array
    tas: Array
    eas: Array
    state: Array
    usable: Array
    half_share: Array
    seventy_at: Array

    @property
    def reaches_seventy(self) -> Array:
        """Whether 70 % of lift-off speed is reached by half of the usable length."""
        return self.half_share >= GO_SHARE

    def texts(self) -> list[str]:
        """The abort points in words."""
        words = {
            NONE: "none: once rolling it would not stop, or it does not get going",
            FOUND: "{place} m along, at {eas} kt EAS ({tas} kt TAS)",
            OPEN: "can stop even from lift-off, {place} m along, at {eas} kt EAS ({tas} kt TAS)",
        }
        numbers = (np.nan_to_num(one).tolist() for one in (self.distance, from_si(self.eas, "kt"), from_si(self.tas, "kt")))
        return [words[state].format(place=floor(place), eas=floor(eas), tas=floor(tas)) if state in words else state
                for state, place, eas, tas in zip(self.state.tolist(), *numbers, strict=True)]  # fmt: skip

    def check_texts(self) -> list[str]:
        """The 70 % check in words."""
        return [_check_in_words(*row) for row in zip(self.half_share.tolist(), self.seventy_at.tolist(), strict=True)]


def abort_point(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only", *,
                reaction: float = REACTION, **loading: Any) -> AbortPoint:  # fmt: skip
    """The farthest place along the strip from which a rejected take-off still stops on it, and the speed there.

    The run accelerates as in the take-off; then the ground speed stays for ``reaction`` [s]; then the aeroplane brakes,
    thrust nil, at take-off mass and flap on the ground in question, and stops within the lesser of the lengths usable
    for take-off and for landing. Wind as the rule set counts it; no safety factor; where the card's tables carry the
    manual's rolls, both parts are carried likewise. A slope that is only assumed is taken uphill for the run and downhill
    for the stop. A strip with a slope profile is not assessed: its slope stands for the whole run only. Other arguments
    and errors as for ``assess``. Source: the ground runs of the chain.

    >>> lengths = [300.0, 2000.0]
    >>> point = abort_point({"tora": lengths, "lda": lengths, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"},
    ...                     "ridge-runner", {"temperature": 22})
    >>> point.state.tolist(), bool(point.distance[0] < point.distance[1]), point.reaches_seventy.tolist()
    (['found', 'open'], True, [True, True])
    """
    return abort_point_of(prepare(strips, card, day, rules, **loading), reaction)


def abort_point_of(case: Result, reaction: float = REACTION) -> AbortPoint:
    """The abort point for what `prepare` gives, after a ``reaction`` [s]. Raises InputError for one that can't be right."""
    if not 0.0 <= reaction < np.inf:
        raise InputError(f"a time to react of {reaction} s can't be right; 0 s or more is expected")
    values = _values(case, "run_wind", "lift_off_tas", "sigma", *_RUN_KEYS, *STOP_KEYS)
    run, stop = take_off_run(values), braked_run(values)
    usable = np.broadcast_to(np.minimum(case.given["tora"], case.given["lda"]), case.size)
    wind, lift_off = values["run_wind"], values["lift_off_tas"]

    def accelerated(speed: Array) -> Array:
        return np.asarray(run.length(run.end(speed)))

    def quickens(speed: Array) -> Array:
        return np.asarray(run.least(run.end(speed)) >= ground_run.LEAST_ACCELERATION)

    def stops(speed: Array) -> Array:
        slows = stop.least(speed) >= ground_run.LEAST_ACCELERATION
        needed = abort_needed(run.length(run.end(speed)), speed, wind, reaction, stop.length(speed))
        return np.asarray(quickens(speed) & slows & (needed <= usable))

    def within_half(speed: Array) -> Array:
        return quickens(speed) & (accelerated(speed) <= 0.5 * usable)

    with np.errstate(all="ignore"):
        known = np.isfinite(accelerated(wind) + stop.length(wind) + usable) & (usable >= links.LENGTHS[0])
        known &= ~_has_profile(case)
        state = np.select([~known, ~stops(wind), stops(lift_off)], [NOT_ASSESSED, NONE, OPEN], FOUND)
        last, _ = _last_that_holds(stops, wind, lift_off, FINE_HALVINGS)
        tas = np.select([state == FOUND, state == OPEN], [last, lift_off], np.nan)
        at_half = np.where(within_half(lift_off), lift_off, _last_that_holds(within_half, wind, lift_off)[0])
        seventy = GO_SHARE * lift_off
        seventy_at = np.where(known & quickens(seventy), accelerated(seventy), np.nan)
        half_share = np.where(known & quickens(wind), at_half / lift_off, np.nan)
        return AbortPoint(accelerated(tas), tas, speeds.equivalent_airspeed(tas, values["sigma"]), state, usable, half_share,
                          seventy_at)  # fmt: skip


DISK_KEYS = ("thrust_acceleration", "lost", "square", "disk_speed", "slow_root")
_RUN_KEYS = ("start", *DISK_KEYS, "takeoff_roll_carry")
STOP_KEYS = ("density", "rolling_drag", "braking", "landing_slope", "landing_roll_carry")


def _values(case: Result, *keys: str) -> dict[str, Array]:
    """Those of the steps that this chain has, and all that was given, SI, one value for each row."""
    present = [key for key in keys if key in case.chain.by_key and key not in case.given]
    found = {**case.given, **evaluate(case.chain, case.given, present)}
    return {key: np.broadcast_to(value, case.size) if np.ndim(value) == 0 else value for key, value in found.items()}


def _has_profile(case: Result) -> Array:
    """Rows whose slope stands for a profile, which it does at one mass on one day only."""
    slopes = (case.given.get(f"profile_{side}_slope", np.nan) for side in SIDES)
    return np.broadcast_to(np.logical_or(*(np.isfinite(slope) for slope in slopes)), case.size)


@dataclass(frozen=True)
class Run:
    """A run by the chain's own law, of anything that answers NumPy's protocols.

    ``end``: what the other two take of an airspeed [m/s] at the fast end; ``length`` [m] from or to rest; ``least``
    acceleration, or deceleration, on the way [m/s2].
    """

    end: Callable[[Number], Number]
    length: Callable[[Number], Number]
    least: Callable[[Number], Number]


def take_off_run(values: Mapping[str, Number]) -> Run:
    """The take-off run of steps by key: those of a chain with a fixed-pitch propeller, or those with a constant-speed one."""
    wind, carry = values["run_wind"], values.get("takeoff_roll_carry", 1.0)
    if "start" in values:  # a fixed-pitch propeller
        return _square_law(values["start"], values["square"], wind, carry)
    thrust, lost, square, disk_speed, slow = (values[key] for key in DISK_KEYS)
    return Run(
        lambda speed: links.disk_root_of(speed, disk_speed),
        lambda fast: ground_run.disk_run_between(thrust, lost, square, disk_speed, wind, slow, fast) * carry,
        lambda fast: ground_run.least_disk_acceleration(thrust, lost, square, disk_speed, slow, fast),
    )


def braked_run(values: Mapping[str, Number]) -> Run:
    """A braked roll at take-off mass and flap, of inputs and steps of a chain by key."""
    braking, quality = values["braking"], values["braking_quality"]
    start = links.braked_start(braking, quality, values["landing_slope"])
    square = links.braked_square(values["density"], values["wing_area"], values["mass_takeoff"], values["rolling_drag"],
                                 values["ground_lift"], braking, quality)  # fmt: skip
    return _square_law(start, square, values["run_wind"], values.get("landing_roll_carry", 1.0))


def _square_law(start: Number, square: Number, wind: Number, carry: Number) -> Run:
    """A run whose acceleration is ``start + square V^2``, either way."""
    return Run(
        lambda speed: speed,
        lambda speed: ground_run.speed_run(start, square, wind, speed) * carry,
        lambda speed: ground_run.least_speed_run_acceleration(start, square, wind, speed),
    )


def abort_needed(accelerated: Number, speed: Number, wind: Number, reaction: Number, stopped: Number) -> Number:
    """Length [m] that an abort at an airspeed [m/s] takes: the run until there, the reaction [s], the braked roll.

    >>> abort_needed(200.0, 30.0, 5.0, 3.0, 150.0)
    425.0
    """
    return accelerated + (speed - wind) * reaction + stopped


def _check_in_words(share: float, seventy_at: float) -> str:
    if np.isnan(share):
        return NOT_ASSESSED
    place = "never" if np.isnan(seventy_at) else f"at {ceil(seventy_at)} m"
    advice = "go" if share >= GO_SHARE else "stop"
    at_half = "lifts off before half" if share == 1.0 else f"{floor(100.0 * share + 1e-9)} % of lift-off speed at half"
    return f"{at_half}, {100.0 * GO_SHARE:.0f} % {place}: {advice}"


# --- the break-even wind of a sloping strip ---------------------------------------------------------------------------


@dataclass(frozen=True)
class BreakEven:
    """Wind at which the two directions of a strip need the same share of their lengths, for each pair of rows.

    ``wind`` [m/s] along the strip, NaN where there is none: for the landing the tailwind uphill, which is the headwind
    downhill; for the take-off the tailwind downhill. ``uphill`` tells which row of the pair goes uphill, 0 or 1.
    """

    wind: Array
    state: Array
    uphill: Array
    side: str
    tailwind_limit: float
    within: float

    def texts(self) -> list[str]:
        """The winds in words, with the card's tailwind limit."""
        return [self._text(*row) for row in zip(self.wind.tolist(), self.state.tolist(), strict=True)]

    def _text(self, wind: float, state: str) -> str:
        way, other = ("uphill", "downhill") if self.side == "landing" else ("downhill", "uphill")
        reach = f"none within {from_si(self.within, 'kt'):.0f} kt"
        if state in ("with", "against"):
            return f"{reach}: {way if state == 'with' else other} takes less of the strip throughout"
        if state != FOUND:
            return state
        knots, limit = from_si(wind, "kt"), from_si(self.tailwind_limit, "kt")
        if knots < 0.0:
            return f"{way} takes less only with more than {-knots:.1f} kt of headwind"
        over = f", but the card's tailwind limit is {limit:.0f} kt" if wind > self.tailwind_limit else ""
        return f"{way} takes less up to {knots:.1f} kt of tailwind{over}"


def break_even_wind(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only",
                    side: str = "landing", *, within: float = WINDS[0], **loading: Any) -> BreakEven:  # fmt: skip
    """The wind along a sloping strip at which going with the slope's help and going into wind become equal.

    Rows 0 and 1, 2 and 3 ... of ``strips`` are the two directions of one strip; `both_directions` makes them from one.
    For the landing: uphill with a tailwind against downhill into wind; for the take-off: downhill with a tailwind against
    uphill into wind. Equal means the same share of the length at hand, safety factors included, the wind counted as the
    rule set counts it; searched ``within`` [m/s] both ways. The card's tailwind limit is told, not applied. Other
    arguments and errors as for ``assess``; an odd number of rows is an InputError.

    >>> strip = both_directions({"tora": 600.0, "lda": 600.0, "elevation_field": 2300, "slope_given": 5, "surface": "grass"})
    >>> break_even_wind(strip, "ridge-runner", {"temperature": 22}).texts()[0].rpartition(", ")[2]
    "but the card's tailwind limit is 10 kt"
    """
    case = prepare(strips, card, day, rules, **loading)
    verdict_words(case, side)  # refuses a side that is none
    if case.size % 2:
        raise InputError(f"strips: {case.size} rows; two for each strip are expected, one for each direction")
    required, allowed = f"{side}_required", "land_here" if side == "landing" else "take_off_here"
    length = "landing_available" if side == "landing" else "tora"
    base = _values(case, f"{side}_known", f"{side}_slope")
    slope = base[f"{side}_slope"].reshape(-1, 2)
    uphill = np.argmax(slope, axis=1)
    with_tailwind = uphill if side == "landing" else 1 - uphill
    sign = np.where(np.arange(2) == with_tailwind[:, None], -1.0, 1.0)  # of the headwind in each direction

    def shares(wind: Array) -> tuple[Array, Array]:
        """Required over available length with the tailwind and against it; without end where it can't be done."""
        found = _values(case.changed(wind_along((sign * wind[:, None]).ravel())), required, length)
        share = np.where(np.isfinite(found[required]), found[required] / found[length], np.inf).reshape(-1, 2)
        with_it = np.take_along_axis(share, with_tailwind[:, None], 1)[:, 0]
        return with_it, np.take_along_axis(share, 1 - with_tailwind[:, None], 1)[:, 0]

    def takes_less(wind: Array) -> Array:
        one, other = shares(wind)
        return one <= other

    calmest, strongest = (np.full(len(uphill), end) for end in (-within, within))
    wind, beyond = _last_that_holds(takes_less, calmest, strongest)
    one, other = (np.isfinite(shares(wind)[0]), np.isfinite(shares(beyond)[1]))
    both = base[allowed].reshape(-1, 2).all(axis=1)
    known = base[f"{side}_known"].reshape(-1, 2).all(axis=1)
    state = np.select(
        [~both, ~known, slope[:, 0] == slope[:, 1], ~takes_less(calmest), takes_less(strongest), one & other],
        ["none: one-way strip", NOT_ASSESSED, "none: no slope", "against", "with", FOUND],
        "none: at some wind neither direction can be used",
    )
    found = np.where(state == FOUND, wind, np.nan)
    return BreakEven(found, state, uphill, side, float(case.given["tailwind_limit"]), within)


_AHEAD_AND_BEHIND = (("elevation_start", "elevation_end"), ("obstacle_height", "approach_obstacle_height"),
                     ("obstacle_distance", "approach_obstacle_distance"))  # fmt: skip


def both_directions(strip: Given) -> dict[str, Any]:
    """Columns for ``assess`` of both directions of a strip, from those of one direction: numbers or texts, no columns.

    What lies ahead in one direction lies behind in the other; lengths, and what is allowed, hold both ways: change the
    columns where they don't. Raises InputError as ``assess`` does.

    >>> both = both_directions({"slope_given": 5, "heading": 80, "obstacle_height": 90, "obstacle_distance": "400 m"})
    >>> [both[key].round(9).tolist() for key in ("slope_given", "heading", "approach_obstacle_distance")]
    [[5.0, -5.0], [80.0, 260.0], [nan, 400.0]]
    """
    columns, faults, size = strip_columns(strip)
    if size != 1:
        raise InputError(f"strips: one direction of one strip is expected, not {size} rows")
    back = {**columns, "slope_given": -columns["slope_given"], "heading": (columns["heading"] + np.pi) % (2.0 * np.pi)}
    for ahead, behind in _AHEAD_AND_BEHIND:
        back |= {ahead: columns[behind], behind: columns[ahead]}
    turning = [item for item in STRIP if item.kind != "fault" and not item.key.startswith("profile_")]
    both = {item.key: np.concatenate((columns[item.key], back[item.key])) for item in turning}
    shown = {item.key: np.asarray(from_si(both[item.key], item.unit)) for item in turning if item.kind == "number"}
    profile = read_profile(str(strip["profile"])) if strip.get("profile") else None
    turned = {"profile": [profile, profile.reversed()]} if profile else {}
    return {**both, **shown, "fault": [*faults, *faults], **turned}


# --- the commit point of a one-way strip ------------------------------------------------------------------------------


@dataclass(frozen=True)
class CommitPoint:
    """The last place on the approach from which a go-around clears the ground beyond the strip, for each row.

    ``distance`` [m] before the threshold and ``height`` [m] above it, on the approach path; where a go-around clears even
    from over the threshold ("open") these are 0 and the path's height there. ``climb`` [-]: gradient over the ground of
    the climb counted.
    """

    distance: Array
    height: Array
    climb: Array
    state: Array

    def texts(self) -> list[str]:
        """The commit points in words."""
        words = {
            FOUND: "{place:,} m before the threshold, not below {height} ft above it",
            OPEN: "a go-around clears even from over the threshold, not below {height} ft above it",
            NONE: "none: no go-around from the approach clears the ground beyond",
        }
        numbers = (np.nan_to_num(one).tolist() for one in (self.distance, from_si(self.height, "ft")))
        return [words[state].format(place=ceil(place), height=ceil(height - 1e-6)) if state in words else state
                for state, place, height in zip(self.state.tolist(), *numbers, strict=True)]  # fmt: skip


def go_around_margin(case: Result) -> float:
    """Height [m] by which a go-around has to clear the ground: the rule set's over obstacles, 50 ft at least.

    >>> go_around_margin(prepare({}, "ridge-runner", {"temperature": 22}))
    15.24
    """
    return max(float(case.given["obstacle_margin"]), airborne.SCREEN)


def commit_point(strips: Given, card: Card | str, day: Day | Given, rules: Rules | str = "manual-only", *,
                 margin: float | None = None, climb_flap: str | None = None, flap_seconds: float = FLAP_SECONDS,
                 **loading: Any) -> CommitPoint:  # fmt: skip
    """The last place on the approach from which a go-around clears the rising ground beyond the strip.

    That ground is the row's ``obstacle_height`` above and ``obstacle_distance`` beyond the far end; it is to be cleared
    by ``margin`` [m], `go_around_margin` where none is given. The approach path is the chain's, 50 ft
    over the threshold, or later where an obstacle before the threshold asks for it. The go-around: level at approach
    speed for ``flap_seconds`` [s] while the flap goes to ``climb_flap`` (a take-off setting of the card; the take-off
    flap where none is given), level on until the speed of the chain's climb is gained, if that is faster, which the climb
    pays for in height, then the chain's climb at landing mass in the strip's air. Nor may it meet the strip, where that
    rises. The wind counts as in the rule set. Only the strip and that ground are looked at: not what lies between them,
    no turn, no gust, no sink. Other arguments and errors as for ``assess``. Source: geometry, energy method.

    >>> strip = {"lda": 600.0, "elevation_field": 2300, "slope_given": 5, "surface": "grass",
    ...          "obstacle_height": [250.0, 700.0], "obstacle_distance": [1500.0, 1500.0]}
    >>> point = commit_point(strip, "ridge-runner", {"temperature": 22})
    >>> point.state.tolist(), point.texts()[0]
    (['open', 'found'], 'a go-around clears even from over the threshold, not below 50 ft above it')
    """
    if not 0.0 <= flap_seconds < np.inf:
        raise InputError(f"a time for the flap of {flap_seconds} s can't be right; 0 s or more is expected")
    card = load_card(card) if isinstance(card, str) else card
    case = prepare(strips, card, day, rules, **loading)
    flap = case.given["takeoff_flap"] if climb_flap is None else flap_setting(climb_flap, card.flaps, "take-off", card.file)
    around = {"mass_takeoff": case.given["mass_landing"], "takeoff_flap": flap, "tora": case.given["lda"]}
    values = _values(case.changed(around), "climb_over_ground", "screen_tas", "slope", "landing_known",
                     "approach_tas", "landing_wind", "approach_over_ground", "landing_available")  # fmt: skip
    margin = go_around_margin(case) if margin is None else margin
    climb, length = values["climb_over_ground"], values["lda"]
    known = values["landing_known"] & np.isfinite(climb + values["obstacle_height"] + values["obstacle_distance"])
    slope = np.where(np.isfinite(values["slope"]), values["slope"], np.abs(values["assumed_slope"]))
    gained = np.maximum(np.square(values["screen_tas"]) - np.square(values["approach_tas"]), 0.0) / (2.0 * G0)
    level = (values["approach_tas"] - values["landing_wind"]) * flap_seconds
    ground = values["obstacle_height"] + slope * length + margin

    def height_of_path(before: Array) -> Array:
        return np.asarray(airborne.SCREEN + values["approach_over_ground"] * (before + length - values["landing_available"]))

    def clears(near: Array) -> Array:
        """Whether a go-around from as much nearer [m] than the farthest place clears the strip and the ground beyond."""
        before = FARTHEST - near
        height = height_of_path(before)
        level_ends = level + gained / climb - before  # behind the threshold

        def at(behind: Array) -> Array:
            return np.asarray(height + climb * np.maximum(behind - level_ends, 0.0))

        rise = np.maximum(slope, 0.0)
        over_strip = (height >= rise * np.clip(level_ends, 0.0, length)) & (at(length) >= rise * length)
        return np.asarray(over_strip & (at(length + values["obstacle_distance"]) >= ground))

    with np.errstate(all="ignore"):
        out, over = np.zeros(case.size), np.full(case.size, FARTHEST)
        climbs = climb > 0.0
        state = np.select([~known, ~climbs | ~clears(out), clears(over)], [NOT_ASSESSED, NONE, OPEN], FOUND)
        last, _ = _last_that_holds(clears, out, over)
        distance = FARTHEST - np.select([state == FOUND, state == OPEN], [last, over], np.nan)
        return CommitPoint(distance, height_of_path(distance), np.where(known, climb, np.nan), state)
