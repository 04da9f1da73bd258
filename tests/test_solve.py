"""Inverse questions: at the value found the verdict still holds, a hair beyond it no more, and the laws of the trade.

Common practice, no source, and plain physics: a heavier aeroplane takes less heat and tailwind, a steeper strip against it
less mass, a longer one more. The abort point is followed by an ODE integration of another hand, the commit point by the
arithmetic of its path.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import solve_ivp

from stripcheck import assess, load_rules, solve
from stripcheck.assessment import Result, prepare
from stripcheck.chain import FEW
from stripcheck.errors import InputError
from stripcheck.units import from_si, to_si
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE
from tests.aircraft import trial_heron, trial_mule
from tests.test_laws import (
    CARDS,
    LAWS,
    RULES,
    Situation,
    harder,
    ladder,
    many_strips,
    situations,
    without_mean_slope_criterion,
)
from tests.test_manual import corrected

HAIR = 1e-4  # of a kilogram, kelvin, metre or m/s: more than the bisection leaves, far less than anybody could mean
SIDES = ("takeoff", "landing")
EXAMPLES = settings(max_examples=6)  # each of them asks the chain some hundred times, over many rows
STRIP = {"tora": 600.0, "lda": 600.0, "elevation_field": 2300, "slope_given": 2.0, "surface": "grass", "heading": 90.0}
DAY = {"temperature": 22}


def asked(situation: Situation, rules: Any = None, **changed: Any) -> tuple[tuple[Any, ...], dict[str, Any]]:
    """A situation as ``assess`` takes it, some values changed: columns or single ones."""
    it = {**situation, **changed}
    head, cross = it["head"], it["cross"]
    strip = {key: value for key, value in {**it["strip"], **changed}.items() if value is not None and key in it["strip"]}
    strip |= {"heading": 0.0, "own_wind_speed": np.hypot(head, cross),
              "own_wind_from": np.degrees(np.arctan2(cross, head)) % 360.0}  # fmt: skip
    card = CARDS[it["card"]]
    masses = {f"{side}_mass": np.multiply(it["share"], card.values[f"max_{side}_mass"]) for side in SIDES}
    masses = {key: mass.tolist() for key, mass in masses.items()}
    flaps = {key: it[key] for key in ("takeoff_flap", "landing_flap")}
    day = {"humidity": it["humidity"], "qnh": it["qnh"]}
    return (strip, card, day, rules or RULES[it["rules"]]), {**masses, **flaps}


Question = Callable[..., solve.Answer]
QUESTIONS: dict[str, tuple[Question, str, Callable[[np.ndarray], dict[str, Any]], float]] = {
    "take-off mass": (solve.most_takeoff_mass, "takeoff", lambda mass: {"mass_takeoff": mass}, HAIR),
    "landing mass": (solve.most_landing_mass, "landing", lambda mass: {"mass_landing": mass}, HAIR),
    "heat": (solve.hottest, "", lambda kelvin: {"own_temperature": kelvin}, HAIR),
    "wind": (solve.least_headwind, "", lambda head: {**solve.wind_along(head), "crosswind_limit": np.inf}, -HAIR),
}


def ask(question: str, side: str, args: tuple[Any, ...], **more: Any) -> solve.Answer:
    function, only, _, _ = QUESTIONS[question]
    return function(*args, **more) if only else function(*args, side=side, **more)


ASKED = [(question, side) for question, (_, only, _, _) in QUESTIONS.items() for side in SIDES if only in ("", side)]


def verdicts(case: Result, question: str, side: str, value: np.ndarray) -> list[str]:
    words: list[str] = case.changed(QUESTIONS[question][2](value))[f"{side}_verdict"]
    return words


@pytest.mark.parametrize(("question", "side"), ASKED)
@EXAMPLES
@given(situation=situations(), lengths=ladder(200.0, 2000.0), at_best=st.sampled_from([SUITABLE, MARGINAL]))
def test_an_answer_agrees_with_the_verdict(question: str, side: str, situation: Situation, lengths: np.ndarray,
                                           at_best: str) -> None:  # fmt: skip
    args, loading = asked(situation, tora=lengths, lda=lengths)
    answer = ask(question, side, args, at_best=at_best, **loading)
    case = prepare(*args, **loading)
    accepted = {SUITABLE} if at_best == SUITABLE else {SUITABLE, MARGINAL}
    safe = np.where(np.isnan(answer.value), 1.0, answer.value)
    at, beyond = (verdicts(case, question, side, value) for value in (safe, safe + QUESTIONS[question][3]))
    reasons = case.changed(QUESTIONS[question][2](safe + QUESTIONS[question][3]))[f"{side}_reason"]
    for row, state in enumerate(answer.state):
        if state in (solve.FOUND, solve.OPEN):
            assert at[row] in accepted
        if state == solve.FOUND:
            assert beyond[row] not in accepted
            assert answer.limits[row] == reasons[row]
        if state in (solve.NONE, NOT_ASSESSED):
            assert np.isnan(answer.value[row]) and answer.texts()[row] == state and answer.limits[row]


@pytest.mark.parametrize(("question", "side"), ASKED)
@EXAMPLES
@given(situation=situations())
def test_where_there_is_no_answer_even_the_easiest_value_fails(question: str, side: str, situation: Situation) -> None:
    args, loading = asked(situation)
    answer = ask(question, side, args, **loading)
    case = prepare(*args, **loading)
    greatest = case.given[f"max_{side}_mass"]
    easiest, hardest = {"heat": (213.15, 333.15), "wind": (to_si(30, "kt"), to_si(-20, "kt"))}.get(
        question, (case.given["empty_mass"], greatest)
    )
    first, last = (verdicts(case, question, side, np.array([value]))[0] for value in (easiest, hardest))
    assert (answer.state[0] == NOT_ASSESSED) == (first == NOT_ASSESSED)
    assert (answer.state[0] == solve.NONE) == (first not in (SUITABLE, NOT_ASSESSED))
    assert (answer.state[0] == solve.OPEN) == (first == last == SUITABLE)


def strain(question: str, answer: solve.Answer) -> np.ndarray:
    """Answers as numbers that tell how much is taken, of mass, heat or tailwind: none is below all others."""
    return np.where(np.isnan(answer.value), -np.inf, -answer.value if question == "wind" else answer.value)


def check_never_more(values: np.ndarray) -> None:
    """No rung is above the one before; infinities are equal to themselves."""
    assert (values[1:] <= values[:-1] + HAIR).all(), values


@EXAMPLES
@given(situations(), ladder(150.0, 2500.0))
def test_a_longer_strip_takes_more(situation: Situation, lengths: np.ndarray) -> None:
    args, loading = asked(situation, tora=lengths[::-1], lda=lengths[::-1])
    for question, side in ASKED:
        check_never_more(strain(question, ask(question, side, args, **loading)))


@EXAMPLES
@given(situations(), ladder(0.6, 1.0))
def test_a_heavier_aeroplane_takes_less_heat_and_tailwind(situation: Situation, shares: np.ndarray) -> None:
    args, loading = asked(situation, tora=np.full(len(shares), situation["strip"]["tora"]), share=shares)
    for question, side in (one for one in ASKED if "mass" not in one[0]):
        check_never_more(strain(question, ask(question, side, args, **loading)))


ROWS = FEW + 96  # random strips at once: long enough to be recorded
CHANGED_BY = {"mass": "mass", "heat": "heat", "tailwind": "wind"}  # what a law changes, as the question asks for it


SETS = {"ridge-runner": "uk-leaflet", "high-mule": "part-cat-b"}


@pytest.mark.parametrize(("law", "name"), list(zip(LAWS, sorted(SETS) * 3, strict=True)))
def test_laws_over_many_strips(law: str, name: str) -> None:
    """What makes a strip harder never raises what is asked of it: mass, heat, tailwind; for either side, where it counts."""
    rng = np.random.default_rng(13)
    base: Situation = {**many_strips(rng, 4000), "card": name, "takeoff_flap": CARDS[name].flaps[2].name,
                       "landing_flap": CARDS[name].flaps[-1].name}  # fmt: skip
    changes = harder(law, base, rng)
    few = {key: column[:ROWS] for key, column in base["strip"].items()}
    easy = {**base, "strip": few, **{key: base[key][:ROWS] for key in ("head", "cross", "share")}}
    hard = {key: column[:ROWS] for key, column in changes.items()}
    for question, side in ASKED:
        if side in LAWS[law] and CHANGED_BY.get(law, law) not in question:
            one, other = (asked(easy, without_mean_slope_criterion(RULES[SETS[name]]), **more) for more in ({}, hard))
            before, after = (strain(question, ask(question, side, args, **loading)) for args, loading in (one, other))
            assert np.isfinite(before).mean() > 0.2  # most strips are too hard for any answer
            worse = np.flatnonzero(after > before + HAIR)
            assert not worse.size, (question, side, worse[:3], before[worse[:3]], after[worse[:3]])


def test_a_long_list_is_answered_as_a_short_one() -> None:
    random = np.random.default_rng(5)
    length = random.uniform(250.0, 1300.0, FEW + 10)
    strips = {"tora": length, "lda": length, "elevation_field": random.uniform(0.0, 6000.0, len(length)),
              "slope_given": random.uniform(-4.0, 5.0, len(length)), "surface": "grass"}  # fmt: skip
    few = {key: column[:40] if np.ndim(column) else column for key, column in strips.items()}
    for function in (solve.most_takeoff_mass, solve.most_landing_mass, solve.hottest, solve.least_headwind):
        many, some = (function(rows, CARDS["ridge-runner"], DAY, "uk-leaflet") for rows in (strips, few))
        np.testing.assert_allclose(many.value[:40], some.value, rtol=0.0, atol=HAIR)
        assert many.texts()[:40] == some.texts()
    many, some = (solve.abort_point(rows, CARDS["high-mule"], DAY) for rows in (strips, few))
    np.testing.assert_allclose(many.distance[:40], some.distance, rtol=1e-9)


def test_words_are_rounded_to_the_safe_side() -> None:
    def answer(value: float, unit: str, say: Callable[[float], str]) -> str:
        return solve.Answer(np.array([value]), np.array([solve.FOUND]), [""], unit, say, say).texts()[0]

    assert answer(1043.97, "kg", solve._kilograms) == "1,043 kg"
    assert answer(273.15 + 31.48, "°C", solve._celsius) == "31.4 °C"
    assert answer(273.15 - 5.01, "°C", solve._celsius) == "-5.1 °C"
    assert answer(to_si(4.21, "kt"), "kt", solve._wind) == "needs 4.3 kt of headwind"
    assert answer(to_si(-4.29, "kt"), "kt", solve._wind) == "up to 4.2 kt of tailwind"
    assert answer(to_si(0.01, "kt"), "kt", solve._wind) == "needs 0.1 kt of headwind"


def test_the_cards_limits_hold() -> None:
    """A strip without end leaves the card's greatest mass and its tailwind limit, 10 kt, and no more."""
    endless = {**STRIP, "tora": 9000.0, "lda": 9000.0, "slope_given": 0.0}
    args = (endless, trial_heron(), DAY, "part-cat-b")
    assert solve.most_takeoff_mass(*args).texts() == ["1,110 kg, the greatest allowed"]
    wind = solve.least_headwind(*args)
    assert wind.texts() == ["up to 10.0 kt of tailwind"] and wind.limits == ["tailwind above the limit"]
    assert from_si(wind.value[0], "kt") == pytest.approx(-10.0, abs=1e-6)


def test_no_aeroplane_is_lighter_than_empty() -> None:
    """Where the card tells the empty mass, a strip that asks for less takes none; where not, 30 % of the greatest."""
    told = trial_heron()
    card = replace(told, values={key: value for key, value in told.values.items() if key != "empty_mass"})
    short = {**STRIP, "tora": 180.0, "lda": 2000.0}
    least = solve.most_takeoff_mass(short, card, DAY)
    assert 333.0 < least.value[0] < 665.0
    assert solve.most_takeoff_mass(short, told, DAY).texts() == ["none"]
    assert solve.most_takeoff_mass(STRIP, told, DAY).value[0] == pytest.approx(
        solve.most_takeoff_mass(STRIP, card, DAY).value[0], abs=HAIR)  # fmt: skip


@pytest.mark.parametrize("fixed", [True, False])
def test_the_manuals_own_corrections_are_in_the_answers(fixed: bool) -> None:
    card = corrected(fixed, True)
    strip, loading = {**STRIP, "tora": 700.0 if fixed else 950.0, "lda": 620.0}, {"takeoff_mass": 880, "landing_mass": 850}
    case = prepare(strip, card, DAY, "uk-leaflet", **loading)
    for question, side in ASKED:
        answer = ask(question, side, (strip, card, DAY, "uk-leaflet"), **loading)
        assert answer.state[0] == solve.FOUND
        assert verdicts(case, question, side, answer.value) == [SUITABLE]
        assert verdicts(case, question, side, answer.value + QUESTIONS[question][3]) != [SUITABLE]
    assert solve.abort_point(STRIP, card, DAY).state[0] in (solve.FOUND, solve.OPEN)


def test_what_cannot_be_assessed_has_no_answer() -> None:
    unknown = {**STRIP, "surface": "", "fault": ""}
    for question, side in ASKED:
        answer = ask(question, side, (unknown, trial_heron(), DAY))
        assert answer.texts() == [NOT_ASSESSED] and answer.limits == ["surface or its condition not known"]
    closed = solve.most_landing_mass({**STRIP, "land_here": "no"}, trial_heron(), DAY)
    assert closed.texts() == ["none"] and closed.limits == ["one-way strip: no landing in this direction"]
    # a temperature and a wind of its own is what the question gives: the day need not have one
    windy = {"temperature": 22, "wind_from": 200, "wind_speed": 5}
    assert solve.least_headwind({**STRIP, "heading": None}, trial_heron(), windy).state[0] == solve.FOUND
    assert solve.hottest({**STRIP, "tora": 900.0}, trial_heron(), {}).state[0] == solve.FOUND


def test_a_side_that_is_none_is_refused() -> None:
    with pytest.raises(InputError, match='"in" is no side; it is one of: takeoff, landing'):
        solve.hottest(STRIP, trial_heron(), DAY, side="in")


# --- the abort point --------------------------------------------------------------------------------------------------

G0 = 9.80665


def followed(case: Result, v_abort: float, reaction: float) -> tuple[float, float]:
    """Where a take-off given up at an airspeed is then, and where it stops, by integrating the equation of motion.

    Written anew from the forces: thrust (linearised polar, or momentum theory solved by bisection), drag, rolling or
    braking friction on weight less lift, slope; take-off flap and mass throughout.
    """
    one = {key: float(np.ravel(value)[0]) for key, value in case.given.items()
           if np.size(value) == 1 and np.asarray(value).dtype.kind in "fi"}  # fmt: skip
    step = {key: float(case.si(key)[0]) for key in ("density", "sigma", "run_wind", "takeoff_slope", "rolling", "braking",
                                                    "rolling_drag", "air_temperature")}  # fmt: skip
    kelvin = step["air_temperature"]
    standard = 288.15 * (step["sigma"] * kelvin / 288.15) ** 0.190263  # at this pressure
    heat = np.sqrt(standard / kelvin)  # a piston engine: pressure, and root of the temperature
    felt = 0.12 * (1.0 - heat) + step["sigma"] / heat
    mass, wind, rho = one["mass_takeoff"], step["run_wind"], step["density"]
    gravity = G0 * np.sin(np.arctan(step["takeoff_slope"]))

    def thrust(v: float) -> float:
        if "static_thrust" in one:
            return one["static_thrust"] * (felt - 0.12) / 0.88 + one["thrust_slope"] * rho * v * v
        power, area = float(case.si("useful_power")[0]), np.pi / 4.0 * one["propeller_diameter"] ** 2
        low, high = 0.0, 1e6  # T from P = T (v + w), w from T = 2 rho A w (v + w)
        for _ in range(200):
            middle = 0.5 * (low + high)
            through = 0.5 * v + np.sqrt(0.25 * v * v + middle / (2.0 * rho * area))
            low, high = (middle, high) if middle * through < power else (low, middle)
        return low

    def motion(pull: Callable[[float], float], friction: float) -> Callable[..., list[float]]:
        def rate(_: float, state: np.ndarray) -> list[float]:
            v = state[1] + wind
            q = 0.5 * rho * v * v * one["wing_area"]
            force = pull(v) - q * step["rolling_drag"] - friction * (mass * G0 - q * one["ground_lift"])
            return [state[1], force / mass - gravity]

        return rate

    def reaches(speed: float) -> Callable[..., float]:
        def event(_: float, state: np.ndarray) -> float:
            return float(state[1] - speed)

        event.terminal = True  # type: ignore[attr-defined]
        return event

    exact = {"rtol": 1e-10, "atol": 1e-9}
    go = solve_ivp(motion(thrust, step["rolling"]), (0.0, 300.0), [0.0, 0.0], events=reaches(v_abort - wind), **exact)
    place, ground_speed = go.y[0, -1], go.y[1, -1]
    rate = motion(lambda _: 0.0, step["braking"] * one["braking_quality"])
    stop = solve_ivp(rate, (0.0, 300.0), [place + ground_speed * reaction, ground_speed], events=reaches(0.0), **exact)
    return place, float(stop.y[0, -1])


@pytest.mark.parametrize("card", [trial_heron, trial_mule], ids=["fixed pitch", "constant speed"])
@pytest.mark.parametrize(("slope", "wind", "reaction"), [(0.0, 0.0, 3.0), (3.0, 8.0, 3.0), (-4.0, -6.0, 2.0), (1.0, 0.0, 0.0)])
def test_the_abort_point_against_an_ode(card: Any, slope: float, wind: float, reaction: float) -> None:
    """Integrated to 1e-10: the aeroplane stops at the end of the strip, to 1e-5 of its length."""
    strip = {**STRIP, "tora": 420.0, "lda": 400.0, "slope_given": slope, "own_wind_speed": abs(wind),
             "own_wind_from": 90.0 if wind >= 0.0 else 270.0}  # fmt: skip
    point = solve.abort_point(strip, card(), DAY, reaction=reaction)
    assert point.state[0] == solve.FOUND and point.usable[0] == 400.0
    place, end = followed(prepare(strip, card(), DAY), float(point.tas[0]), reaction)
    assert point.distance[0] == pytest.approx(place, rel=1e-5)
    assert end == pytest.approx(400.0, rel=1e-5)
    assert point.eas[0] == pytest.approx(point.tas[0] * float(np.sqrt(assess(strip, card(), DAY).si("sigma")[0])), rel=1e-12)


def test_tables_of_the_manual_carry_the_abort_point() -> None:
    """Where the card's tables carry the rolls, at lift-off the distance is the carried take-off roll of the chain."""
    strip = {**STRIP, "tora": 1500.0, "lda": 1500.0}
    for card in CARDS.values():
        point, result = solve.abort_point(strip, card, DAY), assess(strip, card, DAY)
        assert result.si("takeoff_roll_carry")[0] != pytest.approx(1.0, abs=1e-6)
        assert point.state[0] == solve.OPEN
        assert point.distance[0] == pytest.approx(result.si("carried_takeoff_roll")[0], rel=1e-9)
        assert point.tas[0] == result.si("lift_off_tas")[0]


@EXAMPLES
@given(situations(), ladder(100.0, 1500.0, rungs=10), st.sampled_from([0.0, 2.0, 3.0, 5.0]))
def test_abort_point_laws(situation: Situation, lengths: np.ndarray, reaction: float) -> None:
    """A longer strip never moves the abort point nearer, a longer time to react never farther; it lies on the strip."""
    args, loading = asked(situation, tora=lengths, lda=lengths)
    point = solve.abort_point(*args, reaction=reaction, **loading)
    slower = solve.abort_point(*args, reaction=reaction + 1.0, **loading)
    known = np.isfinite(point.distance)
    assert known.all() or not known.any() or set(point.state[~known]) == {solve.NONE}
    assert (point.distance[known] <= lengths[known] + HAIR).all()
    check_never_more(-point.distance[known])
    check_never_more(-np.nan_to_num(point.half_share[known]))
    both = known & np.isfinite(slower.distance)
    assert (slower.distance[both] <= point.distance[both] + HAIR).all()
    assert (slower.tas[both] <= point.tas[both] + HAIR).all()


def test_where_a_run_cannot_stop_there_is_no_abort_point() -> None:
    """Braking on ice, 0.06 at the most, is less than a slope of 10 % down."""
    icy = {**STRIP, "slope_given": [-10.0, 0.0], "surface": "ice", "tora": [900.0, 2500.0], "lda": [900.0, 2500.0]}
    point = solve.abort_point(icy, trial_heron(), DAY)
    assert point.state.tolist() == [solve.NONE, solve.OPEN] and np.isnan(point.distance[0])
    assert point.texts()[0].startswith("none: once rolling it would not stop")
    assert point.texts()[1].startswith("can stop even from lift-off, ")


def test_an_abort_point_needs_both_lengths_and_a_mean_slope() -> None:
    assert solve.abort_point({**STRIP, "lda": None}, trial_heron(), DAY).texts() == [NOT_ASSESSED]
    assert solve.abort_point({**STRIP, "lda": None}, trial_heron(), DAY).check_texts() == [NOT_ASSESSED]
    bent = {**STRIP, "slope_given": None, "profile": "0:0, 300:3, 600:18"}
    assert solve.abort_point(bent, trial_heron(), DAY).texts() == [NOT_ASSESSED]
    with pytest.raises(InputError, match="a time to react of -1 s can't be right"):
        solve.abort_point(STRIP, trial_heron(), DAY, reaction=-1)


def test_an_assumed_slope_stands_against_the_run_and_against_the_stop() -> None:
    unknown = {key: value for key, value in STRIP.items() if key != "slope_given"}
    assumed = solve.abort_point(unknown, trial_heron(), {**DAY, "assumed_slope": 3}).tas[0]
    assert assumed < min(solve.abort_point({**STRIP, "slope_given": slope}, trial_heron(), DAY).tas[0]
                         for slope in (3.0, -3.0))  # fmt: skip


@EXAMPLES
@given(situations())
def test_seventy_per_cent_of_lift_off_speed(situation: Situation) -> None:
    """At constant acceleration 70 % of the speed is had after 49 % of the run (arithmetic); the run here slows down in
    its gain as it goes, so that it is had sooner, and with a headwind sooner still."""
    args, loading = asked(situation, head=max(situation["head"], 0.0), cross=0.0, lda=1800.0, tora=1800.0)
    point = solve.abort_point(*args, **loading)
    result = assess(*args, **loading)
    roll = result.si("takeoff_roll") * result.si("takeoff_roll_carry")
    square = result.si("square") if CARDS[situation["card"]].propeller == "fixed pitch" else -result.si("square")
    if np.isfinite(point.distance[0]) and np.isfinite(roll[0]) and square[0] <= 0.0:
        assert point.seventy_at[0] <= 0.49 * roll[0] + HAIR
        assert (point.half_share[0] >= 0.7) == (point.seventy_at[0] <= 0.5 * point.usable[0])


def test_the_check_at_half_length_in_words() -> None:
    short, long = (solve.abort_point({**STRIP, "tora": length, "lda": length}, trial_heron(), DAY) for length in (250.0, 900.0))
    assert short.check_texts()[0].endswith(": stop") and not short.reaches_seventy[0]
    assert long.check_texts()[0].startswith("lifts off before half, 70 % at ") and long.check_texts()[0].endswith(": go")


# --- the break-even wind ----------------------------------------------------------------------------------------------


def shares(side: str, wind: float, slope: float, card: Any) -> tuple[float, float]:
    """Required over available length: with the tailwind and the slope's help, and against both."""
    uphill = 1.0 if side == "landing" else -1.0
    strip = {**STRIP, "slope_given": [uphill * slope, -uphill * slope], "own_wind_speed": abs(wind),
             "own_wind_from": [270.0, 90.0] if wind >= 0.0 else [90.0, 270.0]}  # fmt: skip
    result = assess(strip, card, DAY, "part-cat-b")
    available = result.si("landing_available") if side == "landing" else np.full(2, 600.0)
    helped, against = result.si(f"{side}_required") / available
    return float(helped), float(against)


@pytest.mark.parametrize("card", [trial_heron, trial_mule], ids=["fixed pitch", "constant speed"])
@pytest.mark.parametrize("side", SIDES)
@pytest.mark.parametrize("slope", [0.5, 2.0])
def test_at_the_break_even_wind_both_ways_take_the_same_share(card: Any, side: str, slope: float) -> None:
    strip = solve.both_directions({**STRIP, "slope_given": slope})
    found = solve.break_even_wind(strip, card(), DAY, "part-cat-b", side)
    wind = float(from_si(found.wind[0], "kt"))
    assert found.state[0] == solve.FOUND and wind > 0.0 and found.uphill[0] == 0
    helped, against = shares(side, wind, slope, card())
    assert helped == pytest.approx(against, rel=1e-6)
    assert np.subtract(*shares(side, wind - 1.0, slope, card())) < 0.0 < np.subtract(*shares(side, wind + 1.0, slope, card()))


@pytest.mark.parametrize("side", SIDES)
def test_a_steeper_strip_breaks_even_at_more_wind(side: str) -> None:
    slopes = np.linspace(0.5, 5.0, 10)
    strip = {**STRIP, "slope_given": np.ravel(np.column_stack((slopes, -slopes)))}
    winds = solve.break_even_wind(strip, trial_heron(), DAY, "manual-only", side).wind
    assert np.isfinite(winds).all() and (np.diff(winds) > 0.0).all()
    turned = {**STRIP, "slope_given": np.ravel(np.column_stack((-slopes, slopes)))}
    back = solve.break_even_wind(turned, trial_heron(), DAY, "manual-only", side)
    np.testing.assert_allclose(back.wind, winds, atol=HAIR)
    assert back.uphill.tolist() == [1] * 10


def test_break_even_in_words() -> None:
    def words(slope: float, side: str = "landing", within: float = 30.0, **strip: Any) -> str:
        both = solve.both_directions({**STRIP, "slope_given": slope, **strip})
        return solve.break_even_wind(both, trial_heron(), DAY, side=side, within=to_si(within, "kt")).texts()[0]

    assert words(2.0).startswith("uphill takes less up to ")
    assert words(2.0, "takeoff").startswith("downhill takes less up to ")
    assert words(4.0).endswith("but the card's tailwind limit is 10 kt")
    assert words(8.0, within=3.0) == "none within 3 kt: uphill takes less of the strip throughout"
    assert words(8.0, "takeoff", within=3.0) == "none within 3 kt: downhill takes less of the strip throughout"
    assert words(0.0) == "none: no slope"
    assert words(2.0, land_here="no") == "none: one-way strip"
    assert words(2.0, surface="") == NOT_ASSESSED
    short = {**STRIP, "slope_given": [2.0, -2.0], "lda": [300.0, 600.0]}
    assert solve.break_even_wind(short, trial_heron(), DAY).texts()[0].startswith("uphill takes less only with more than ")
    with pytest.raises(InputError, match="3 rows; two for each strip are expected"):
        solve.break_even_wind({**STRIP, "tora": [500.0] * 3}, trial_heron(), DAY)


def test_both_directions_and_back() -> None:
    strip = {**STRIP, "elevation_start": 2200, "elevation_end": "700 m", "obstacle_height": 60, "obstacle_distance": 500,
             "profile": "0:0, 600:12"}  # fmt: skip
    both = solve.both_directions(strip)
    assert both["slope_given"].tolist() == [2.0, -2.0] and both["heading"].tolist() == pytest.approx([90.0, 270.0])
    np.testing.assert_allclose(both["approach_obstacle_height"], [np.nan, 60.0])
    assert [profile.heights[-1] for profile in both["profile"]] == [12.0, -12.0]
    back = solve.both_directions({key: column[1] for key, column in both.items() if key not in ("profile", "fault", "surface")})
    for key, column in back.items():
        if both[key][:1] != [""] and np.asarray(column).dtype.kind == "f":
            np.testing.assert_allclose(column, both[key][::-1], rtol=1e-12)
    with pytest.raises(InputError, match="one direction of one strip is expected, not 2 rows"):
        solve.both_directions({"tora": [1.0, 2.0]})


# --- the commit point -------------------------------------------------------------------------------------------------

HILL = {**STRIP, "slope_given": 3.0, "obstacle_height": 900.0, "obstacle_distance": 1500.0}


def by_hand(strip: dict[str, Any], seconds: float, margin: float) -> tuple[float, float, float]:
    """Distance, height and gradient by the arithmetic of two straight lines, for a go-around that climbs past the strip."""
    result = assess({**strip, "tora": strip["lda"]}, trial_heron(), DAY, takeoff_mass=1000, landing_mass=1000)
    down, climb, v_app, v_climb, wind = (float(result.si(key)[0]) for key in (
        "approach_over_ground", "climb_over_ground", "approach_tas", "screen_tas", "landing_wind"))  # fmt: skip
    length, away = strip["lda"], strip["obstacle_distance"]
    top = strip["obstacle_height"] * 0.3048 + strip["slope_given"] / 100.0 * length + margin
    paid = max(v_climb**2 - v_app**2, 0.0) / (2.0 * G0)
    # 15.24 + down d + climb (d + length + away - (v_app - wind) seconds) - paid = top
    distance = (top + paid - 15.24 - climb * (length + away - (v_app - wind) * seconds)) / (down + climb)
    return distance, 15.24 + down * distance, climb


@pytest.mark.parametrize(("seconds", "margin"), [(5.0, 15.24), (0.0, 0.0), (12.0, 60.0)])
def test_the_commit_point_by_hand(seconds: float, margin: float) -> None:
    point = solve.commit_point(HILL, trial_heron(), DAY, margin=margin, flap_seconds=seconds, landing_mass=1000)
    distance, height, climb = by_hand(HILL, seconds, margin)
    assert distance > 0.0 and point.state[0] == solve.FOUND
    assert [point.distance[0], point.height[0], point.climb[0]] == pytest.approx([distance, height, climb], rel=1e-6)
    assert point.texts() == [f"{int(np.ceil(distance)):,} m before the threshold, not below "
                             f"{int(np.ceil(height / 0.3048))} ft above it"]  # fmt: skip


def test_commit_point_laws() -> None:
    """Higher ground, a greater margin, a slower flap, more mass or heat move it out; farther ground moves it in."""
    def places(strip: dict[str, Any], day: Any = DAY, **more: Any) -> np.ndarray:
        found = solve.commit_point(strip, trial_heron(), day, **more)
        return np.where(found.state == solve.NONE, np.inf, found.distance)

    heights = np.linspace(50.0, 2500.0, 30)
    by_height = places({**HILL, "obstacle_height": heights})
    assert (np.diff(by_height) >= 0.0).all() and by_height[0] == 0.0 < by_height[15] < by_height[-1]
    assert (np.diff(places({**HILL, "obstacle_distance": np.linspace(200.0, 3000.0, 20)})) <= 0.0).all()
    assert (np.diff(places({**HILL, "own_temperature": np.linspace(-10.0, 40.0, 20)})) >= -HAIR).all()
    assert (np.diff(places({**HILL, "lda": [600.0] * 8}, landing_mass=np.linspace(750.0, 1100.0, 8).tolist())) >= -HAIR).all()
    assert places(HILL, flap_seconds=8.0) > places(HILL) > places(HILL, flap_seconds=2.0)
    assert places(HILL, margin=60.0) > places(HILL) == places(HILL, margin=to_si(50.0, "ft"))


def test_commit_point_in_words() -> None:
    low = {**HILL, "obstacle_height": 50.0}
    assert solve.commit_point(low, trial_heron(), DAY).texts() == [
        "a go-around clears even from over the threshold, not below 50 ft above it"
    ]
    thin = {**HILL, "elevation_field": 16000, "own_temperature": 35.0}
    assert not solve.commit_point(thin, trial_heron(), DAY).climb[0] > 0.0
    steep = {**HILL, "elevation_field": 11500, "own_temperature": 30.0, "obstacle_height": 3200.0}
    assert solve.commit_point(steep, trial_heron(), DAY).climb[0] > 0.0  # but not by enough within the last 5 nm
    for strip in (thin, steep):
        assert solve.commit_point(strip, trial_heron(), DAY).texts() == [
            "none: no go-around from the approach clears the ground beyond"
        ]
    for missing in ("obstacle_height", "obstacle_distance", "lda", "surface"):
        assert solve.commit_point({**HILL, missing: None}, trial_heron(), DAY).texts() == [NOT_ASSESSED], missing
    with pytest.raises(InputError, match="a time for the flap of -1 s can't be right"):
        solve.commit_point(HILL, trial_heron(), DAY, flap_seconds=-1)
    with pytest.raises(InputError, match='flap "30" is not allowed for take-off'):
        solve.commit_point(HILL, trial_heron(), DAY, climb_flap="30")


def test_the_climb_flap_and_the_rule_sets_clearance_count() -> None:
    """Less flap climbs better (common practice, no source), so that the point may lie nearer; a rule set's clearance is
    what must be cleared where no margin is given."""
    near, far = (solve.commit_point(HILL, trial_heron(), DAY, climb_flap=flap) for flap in ("10", "20"))
    assert near.climb[0] > far.climb[0] and near.distance[0] < far.distance[0]
    rules = load_rules("manual-only")
    generous = type(rules)(**{**vars(rules), "values": {**rules.values, "obstacle_margin": 100.0}})
    assert solve.commit_point(HILL, trial_heron(), DAY, generous).distance[0] == pytest.approx(
        solve.commit_point(HILL, trial_heron(), DAY, margin=100.0).distance[0], abs=HAIR
    )


def test_a_go_around_may_not_meet_a_steep_strip() -> None:
    """Level at 50 ft over the threshold for 5 s, about 170 m, meets a strip that rises 20 % after 76 m."""
    steep = {**HILL, "slope_given": 20.0, "obstacle_height": 0.0, "obstacle_distance": 5000.0}
    point = solve.commit_point(steep, trial_heron(), DAY)
    assert point.state[0] == solve.FOUND and point.distance[0] > 100.0
