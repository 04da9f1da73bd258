"""The abort point of each take-off of a trip, in cells: the same equations as in `stripcheck.solve`, by unrolled rounds.

A row for each take-off, at the trip's mass, in the direction and with the flap of the sheet Best. Where the manual's landing
roll is carried, that is with the card's usual landing flap at the take-off mass.
"""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np

from stripcheck import ground_run, links, solve, speeds
from stripcheck.books import rounds
from stripcheck.books.trip_cases import MASSES, OF_BEST, Best, Book, frontier
from stripcheck.chain import Chain, Step
from stripcheck.ground_run import LEAST_ACCELERATION
from stripcheck.numeric import Number
from stripcheck.sheet.cases import FIRST_ROW, About, Cases, Elsewhere, write_cases
from stripcheck.sheet.formulas import Place
from stripcheck.sheet.stream import FormulaColumn

ABORT = "Abort"
ROUNDS = 8  # of false position: random strips and cards came within 2e-13 of the bisection
ROUNDING = 1e-12  # below this a slack says no more which side of the abort point a speed lies on
SOURCE = "Ground runs of the chain, false position"
_BRAKED = ("density", "wing_area", "mass_takeoff", "rolling_drag", "ground_lift", "braking", "braking_quality")
WANTED = ("abort_known", "abort_stops", "abort_open", "abort_distance", "abort_eas", "seventy_at", "seventy_by_half",
          "abort_usable")  # fmt: skip


def _usable(tora: Number, lda: Number) -> Number:
    return np.where(np.isfinite(tora) & np.isfinite(lda), np.minimum(tora, lda), np.nan)


def _known(lifts_off: Number, usable: Number, profile_out: Number, profile_in: Number, *parts: Number) -> Number:
    """A slope that stands for a profile does so for the whole run only."""
    known = lifts_off & links.known(usable, links.LENGTHS) & np.isnan(profile_out) & np.isnan(profile_in)
    for part in parts:
        known = known & np.isfinite(part)
    return known


def _stops_at_all(start: Number, square: Number, wind: Number) -> Number:
    """Whether the brakes hold where the run begins."""
    return ground_run.least_speed_run_acceleration(start, square, wind, wind) >= LEAST_ACCELERATION


def _top(start: Number, square: Number, lift_off: Number) -> Number:
    """Lift-off speed, or the speed from which the brakes would no longer hold [m/s], whichever is less."""
    spare = np.maximum(start - LEAST_ACCELERATION, 0.0)
    return np.where(square < 0.0, np.minimum(lift_off, np.sqrt(spare / np.where(square < 0.0, -square, 1.0))), lift_off)


def _open(start: Number, square: Number, wind: Number, lift_off: Number, needed: Number, usable: Number) -> Number:
    """Whether the aeroplane still stops from lift-off."""
    slows = ground_run.least_speed_run_acceleration(start, square, wind, lift_off) >= LEAST_ACCELERATION
    return slows & (needed <= usable)


def _slack(needed: Number, usable: Number) -> Number:
    """What is left of the strip, as a root, since lengths go with the square of speed; none where it is but rounding."""
    left = 1.0 - np.sqrt(needed / usable)
    return np.where(np.absolute(left) < ROUNDING, 0.0, left)


def _between(known: Number, stops: Number, is_open: Number) -> Number:
    return known & stops & np.logical_not(is_open)


def _fits(slack: Number) -> Number:
    return slack >= 0.0


def _not(truth: Number) -> Number:
    return np.logical_not(truth)


def _was(end: float, last: Number) -> Number:
    return last == end


def _one() -> Number:
    return np.float64(1.0)


def _neither() -> Number:
    return np.float64(rounds.NEITHER)


def _itself(value: Number) -> Number:
    return value


def _speed(stops: Number, is_open: Number, lift_off: Number, top: Number, of_top: Number, found: Number) -> Number:
    between = np.where(np.isfinite(found), np.where(of_top >= 0.0, top, found), np.nan)
    return np.where(stops, np.where(is_open, lift_off, between), np.nan)


def _seventy(lift_off: Number) -> Number:
    return solve.GO_SHARE * lift_off


def _by_half(at: Number, usable: Number) -> Number:
    return at <= 0.5 * usable


class _Law:
    """The run and the braked roll as functions of steps: their keys, and how a formula is made of them."""

    def __init__(self, chain: Chain) -> None:
        carries = tuple(key for key in ("takeoff_roll_carry",) if key in chain.by_key)
        self.disk = "start" not in chain.by_key
        self.run = ("run_wind", *(solve.DISK_KEYS if self.disk else ("start", "square")), *carries)
        self.carry = tuple(key for key in ("landing_roll_carry",) if key in chain.by_key)

    def end(self, key: str, speed: str) -> list[Step]:
        """What the run's length takes of a speed: for a constant-speed propeller the root of the disk, else the speed."""
        if not self.disk:
            return []
        return [_step(f"end_{key}", "Disk root there", links.disk_root_of, (speed, "disk_speed"), "abort_known")]

    def end_key(self, key: str, speed: str) -> str:
        """Key of that."""
        return f"end_{key}" if self.disk else speed

    def length(self, key: str, speed: str, label: str) -> Step:
        """Length of the run to a speed."""
        return _step(key, label, partial(_run_length, self.run), (self.end_key(key, speed), *self.run), "abort_known")

    def needed(self, key: str, speed: str) -> Step:
        """Length that an abort at a speed takes."""
        read = (self.end_key(key, speed), speed, "abort_braked_start", "abort_braked_square", *self.carry, *self.run)
        return _step(f"needed_{key}", "Length needed there", partial(_needed, self.run, bool(self.carry)), read, "abort_known")


def _run_length(keys: tuple[str, ...], end: Number, *values: Number) -> Number:
    return solve.take_off_run(dict(zip(keys, values, strict=True))).length(end)


def _needed(keys: tuple[str, ...], carried: bool, end: Number, speed: Number, start: Number, square: Number,
            *values: Number) -> Number:  # fmt: skip
    carry, run = (values[0], values[1:]) if carried else (1.0, values)
    by_key = dict(zip(keys, run, strict=True))
    stopped = ground_run.speed_run(start, square, by_key["run_wind"], speed) * carry
    return solve.abort_needed(solve.take_off_run(by_key).length(end), speed, by_key["run_wind"], solve.REACTION, stopped)


def _step(key: str, label: str, function: Callable[..., Number], inputs: tuple[str, ...], guard: str = "",
          truth: bool = False, unit: str = "") -> Step:  # fmt: skip
    return Step(key, "", unit, label, SOURCE, function, inputs, guard, truth=truth)


def abort_chain(chain: Chain) -> Chain:
    """The chain with the abort point behind it."""
    law = _Law(chain)
    braked = ("abort_braked_start", "abort_braked_square")
    steps = [
        _step("abort_usable", "Usable for an abort", _usable, ("tora", "lda"), unit="m"),
        _step("abort_known", "Abort point: can be assessed", _known,
              ("lifts_off", "abort_usable", "profile_takeoff_slope", "profile_landing_slope", "braking", "landing_slope",
               *law.run, *law.carry), "takeoff_known", truth=True),
        _step(braked[0], "Deceleration of the abort at zero airspeed", links.braked_start,
              ("braking", "braking_quality", "landing_slope"), "abort_known"),
        _step(braked[1], "Deceleration of the abort per V², 1/m", links.braked_square, _BRAKED, "abort_known"),
        _step("abort_stops", "Stops where the run begins", _stops_at_all, (*braked, "run_wind"), "abort_known", truth=True),
        *law.end("lift_off", "lift_off_tas"),
        law.needed("lift_off", "lift_off_tas"),
        _step("abort_open", "Stops even from lift-off", _open,
              (*braked, "run_wind", "lift_off_tas", "needed_lift_off", "abort_usable"), "abort_stops", truth=True),
        _step("abort_between", "Abort point to be found", _between, ("abort_known", "abort_stops", "abort_open"), "abort_known",
              truth=True),
        _step("top", "Fastest that could be stopped from [m/s]", _top, (*braked, "lift_off_tas"), "abort_between"),
        *(_of(step, "abort_between") for step in (*law.end("top", "top"), law.needed("top", "top"))),
        _step("low_1", "Low [m/s]", _itself, ("run_wind",), "abort_between"),
        _step("of_low_1", "Slack there", _one, (), "abort_between"),
        _step("high_1", "High [m/s]", _itself, ("top",), "abort_between"),
        _step("of_high_1", "Slack there", _slack, ("needed_top", "abort_usable"), "abort_between"),
        _step("last_1", "Moved last", _neither, (), "abort_between"),
    ]  # fmt: skip
    for n in range(1, ROUNDS + 1):
        steps += _round(n, law)
    last = f"try_{ROUNDS}"
    steps += [
        _step("abort_tas", "Abort point: true airspeed", _speed,
              ("abort_stops", "abort_open", "lift_off_tas", "top", "of_high_1", last), "abort_known", unit="kt"),
        _step("abort_eas", "Abort point: airspeed, EAS", speeds.equivalent_airspeed, ("abort_tas", "sigma"), "abort_tas",
              unit="kt"),
        *_place_of(law),
    ]  # fmt: skip
    return Chain(chain.inputs, (*chain.steps, *steps))


def _place_of(law: _Law) -> list[Step]:
    """Where the aeroplane is then, and where it has 70 % of lift-off speed."""
    at = law.length("abort_distance", "abort_tas", "Abort point: along the strip")
    seventy = law.length("seventy_at", "seventy_tas", "70 % of lift-off speed reached at")
    made = [_of(step, "abort_tas") for step in (*law.end("abort_distance", "abort_tas"), at)]
    made += [_step("seventy_tas", "70 % of lift-off speed", _seventy, ("lift_off_tas",), "abort_known", unit="kt"),
             *law.end("seventy_at", "seventy_tas"), seventy]  # fmt: skip
    made = [_in_metres(step) if step.key in ("abort_distance", "seventy_at") else step for step in made]
    return [*made, _step("seventy_by_half", "By half way", _by_half, ("seventy_at", "abort_usable"), "abort_known", truth=True)]


def _of(step: Step, guard: str) -> Step:
    return Step(step.key, step.symbol, step.unit, step.label, step.source, step.function, step.inputs, guard)


def _in_metres(step: Step) -> Step:
    return Step(step.key, step.symbol, "m", step.label, step.source, step.function, step.inputs, step.guard)


def _round(n: int, law: _Law) -> list[Step]:
    tried, guard = f"try_{n}", "abort_between"
    made = [_step(tried, f"Round {n}: speed tried [m/s]", rounds.between,
                  (f"low_{n}", f"of_low_{n}", f"high_{n}", f"of_high_{n}"), guard)]  # fmt: skip
    if n == ROUNDS:
        return made
    needed = law.needed(f"{n}", tried)
    return [
        *made,
        *(_of(step, guard) for step in law.end(f"{n}", tried)),
        _of(needed, guard),
        _step(f"slack_{n}", "Slack there", _slack, (f"needed_{n}", "abort_usable"), guard),
        _step(f"lifts_{n}", "Low end moves", _fits, (f"slack_{n}",), guard, truth=True),
        _step(f"lowers_{n}", "High end moves", _not, (f"lifts_{n}",), guard, truth=True),
        _step(f"high_again_{n}", "High end moved before", partial(_was, rounds.HIGH), (f"last_{n}",), guard, truth=True),
        _step(f"low_again_{n}", "Low end moved before", partial(_was, rounds.LOW), (f"last_{n}",), guard, truth=True),
        _step(f"low_{n + 1}", "Low [m/s]", rounds.end_after, (f"lifts_{n}", tried, f"low_{n}"), guard),
        _step(f"of_low_{n + 1}", "Slack there", rounds.value_after,
              (f"lifts_{n}", f"slack_{n}", f"lowers_{n}", f"high_again_{n}", f"of_low_{n}"), guard),
        _step(f"high_{n + 1}", "High [m/s]", rounds.end_after, (f"lowers_{n}", tried, f"high_{n}"), guard),
        _step(f"of_high_{n + 1}", "Slack there", rounds.value_after,
              (f"lowers_{n}", f"slack_{n}", f"lifts_{n}", f"low_again_{n}", f"of_high_{n}"), guard),
        _step(f"last_{n + 1}", "Moved last", rounds.last_after, (f"lifts_{n}", f"lowers_{n}", f"last_{n}"), guard),
    ]  # fmt: skip


def needs_of_abort(book: Book) -> tuple[list[str], list[str]]:
    """What the abort points read of a place and of a flap setting."""
    return frontier(abort_chain(book.chain), book.parts, WANTED)


def write_abort(book: Book, best: Best, flaps: Cases) -> Cases:
    """The sheet Abort: a row for each take-off, in the order of Best's."""
    chain = abort_chain(book.chain)
    rows = best.rows("takeoff")
    usual = book.settings.index(book.usual("landing_flap"))
    there = dict(best.places)
    mass = Place(f"Best!${best.columns['mass']}${OF_BEST}", "kg")
    there |= dict.fromkeys(MASSES, mass)
    of_landing = {"landing_flap"}
    for step in chain.steps:
        if of_landing.intersection(step.inputs):
            of_landing.add(step.key)
    for key in of_landing & set(flaps.letters) & {"landing_flap", *book.parts.flap}:
        item = chain.by_key[key]
        unit = item.unit if isinstance(item, Step) else ""  # the setting itself stands there in SI
        there[key] = Place(f"{flaps.sheet}!${flaps.letters[key]}${FIRST_ROW + usual}", unit)
    masses = np.array([value if isinstance(value, float) else np.nan for value in best.values["mass"]])[rows]
    values: dict[str, Any] = {**book.values, **{key: column[rows] for key, column in best.si.items()},
                              **dict.fromkeys(MASSES, masses), "landing_flap": book.values["landing_flap"]}  # fmt: skip
    about = {"case": About("Take-off, stop", 12, FormulaColumn(
        [best.address("stop", row) for row in rows], [best.values["stop"][row] for row in rows]))}  # fmt: skip
    elsewhere = Elsewhere(there, {OF_BEST: [FIRST_ROW + row for row in rows]},
                          [str(best.values["fault"][row]) for row in rows])  # fmt: skip
    wanted = [step.key for step in chain.steps if step.key not in book.chain.by_key]
    heading = f"Where a take-off given up still stops: {solve.REACTION:.0f} s until the brakes bite, thrust nil, no factor"
    return write_cases(book.pages, ABORT, heading, chain, about, {}, values, wanted, elsewhere)
