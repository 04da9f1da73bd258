"""Laws of the trade over random strips, days, masses, cards and all shipped rule sets.

The cards are the shipped ones, and two with tables of several flap settings, holes and the manual's own corrections.

Common practice, no source, and plain physics: more mass, heat, elevation or tailwind, a softer or steeper uphill
take-off run, a more slippery or steeper downhill landing run never shorten a distance and never better a verdict. In
each example one value climbs a ladder and all else stays. "Not assessed" is never better than any other verdict, so
that a rung may leave for it but none may come from it. The ladders stay within what is credible, for a value that is
not credible is not assessed at either end.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck import assess, load_card, load_rules
from stripcheck.assessment import Result
from stripcheck.card import shipped_cards
from stripcheck.rules import Rules, shipped_rules
from stripcheck.surface import CONDITIONS, GROUNDS, SURFACES, ground
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE, UNSUITABLE
from tests.manual_cards import everything

RANK = {SUITABLE: 0, MARGINAL: 1, UNSUITABLE: 2}
DISTANCES = {
    "takeoff": ("takeoff_roll", "physics_takeoff", "takeoff_distance", "takeoff_required"),
    "landing": ("landing_roll", "physics_landing", "landing_distance", "landing_required"),
}
BOTH = ("takeoff", "landing")
# The same for cards whose tables are printed to 5 m at wide steps: a figure that hardly grows, carried downhill or with a
# tailwind, may fall by some 2e-4 where the air gets thinner.
COARSE = 5e-4
ROUNDING = 1e-10  # relative: two sums of the same run may differ by this much from rounding alone
CARDS = {
    **{name: load_card(name) for name in shipped_cards()},
    "everything, fixed pitch": everything(True),
    "everything, constant speed": everything(False),
}
RULES = {name: load_rules(name) for name in shipped_rules()}
# Mean slope as a site criterion counts uphill and downhill alike: a steeper uphill strip can come from a downhill one
# that was too steep. The two laws of slope are about runs, and are tested with that one criterion taken away, and as
# it stands on the side where it counts the same way.
Situation = dict[str, Any]


def number(low: float, high: float) -> st.SearchStrategy[float]:
    return st.floats(low, high, allow_nan=False).map(lambda value: round(value, 6))


@st.composite
def situations(draw: st.DrawFn) -> Situation:
    """A strip, a day and a loading; the wind as a headwind (tailwind negative) and a crosswind [kt]."""
    maybe = st.none() | number(0.0, 150.0)
    strip = {
        "tora": draw(number(150.0, 1800.0)),
        "lda": draw(number(150.0, 1800.0)),
        "width": draw(st.none() | number(5.0, 40.0)),
        "elevation_field": draw(number(-1000.0, 12000.0)),
        "slope_given": draw(number(-12.0, 15.0)),
        "local_slope": draw(st.none() | number(0.0, 12.0)),
        "surface": draw(st.sampled_from(SURFACES)),
        "condition": draw(st.sampled_from(CONDITIONS)),
        "own_temperature": draw(number(-30.0, 45.0)),
        "obstacle_height": draw(maybe),
        "obstacle_distance": draw(number(0.0, 1500.0)),
        "approach_obstacle_height": draw(maybe),
        "approach_obstacle_distance": draw(number(0.0, 1500.0)),
    }
    for side in ("", "approach_"):
        if strip[f"{side}obstacle_height"] is None:
            strip[f"{side}obstacle_distance"] = None
    name = draw(st.sampled_from(sorted(CARDS)))
    card = CARDS[name]
    return {
        "strip": strip,
        "card": name,
        "rules": draw(st.sampled_from(sorted(RULES))),
        "head": draw(number(-15.0, 40.0)),
        "cross": draw(st.just(0.0) | number(0.0, 25.0)),
        "humidity": draw(st.sampled_from([None, 0, 60, 100])),
        "qnh": draw(number(980.0, 1040.0)),
        "share": draw(number(0.65, 1.0)),
        "takeoff_flap": draw(st.sampled_from([f.name for f in card.flaps if "take-off" in f.uses])),
        "landing_flap": draw(st.sampled_from([f.name for f in card.flaps if "landing" in f.uses])),
    }


def ladder(low: float, high: float, rungs: int = 24) -> st.SearchStrategy[np.ndarray]:
    """Rising values over a random part of a range, close together or far apart."""
    ends = st.tuples(number(low, high), number(low, high)).map(sorted)
    return ends.map(lambda pair: np.linspace(pair[0], pair[1], rungs))


def assessed(situation: Situation, rules: Rules | None = None, **changed: Any) -> Result:
    """The situation with some values changed: single ones or columns."""
    it = {**situation, **changed}
    head, cross = np.asarray(it["head"]), np.asarray(it["cross"])
    strip = {key: value for key, value in it["strip"].items() if value is not None}
    strip |= {key: value for key, value in changed.items() if key in it["strip"] and value is not None}
    strip |= {"heading": 0.0, "own_wind_speed": np.hypot(head, cross),
              "own_wind_from": np.degrees(np.arctan2(cross, head)) % 360.0}  # fmt: skip
    rows = max((len(value) for value in strip.values() if np.ndim(value)), default=1)
    rows = max(rows, np.size(it["share"]))
    strip["tora"] = np.broadcast_to(np.asarray(strip["tora"], float), rows)
    card = CARDS[it["card"]]
    share = np.broadcast_to(np.asarray(it["share"], float), rows)
    day = {"humidity": it["humidity"], "qnh": it["qnh"]}
    return assess(strip, card, day, rules or RULES[it["rules"]], takeoff_mass=share * card.values["max_takeoff_mass"],
                  landing_mass=share * card.values["max_landing_mass"], takeoff_flap=it["takeoff_flap"],
                  landing_flap=it["landing_flap"])  # fmt: skip


def check_both_never_better(result: Result) -> None:
    for side in BOTH:
        check_never_better(result, side)


def check_never_better(result: Result, side: str) -> None:
    """No rung has a shorter distance or a better verdict than any rung before it."""
    for key in DISTANCES[side]:
        check_never_shorter(result.si(key), key)
    worst = -1
    verdicts, reasons = result[f"{side}_verdict"], result[f"{side}_reason"]
    left = False
    for rung, verdict in enumerate(verdicts):
        if verdict == NOT_ASSESSED:
            left = True
            continue
        story = f"{side}, rung {rung}: {reasons[rung - 1]} -> {reasons[rung]}"
        assert not left, story
        assert RANK[verdict] >= worst, story
        worst = RANK[verdict]


def check_never_shorter(distances: np.ndarray, key: str) -> None:
    """NaN stands for "no distance at all", which counts as the longest."""
    lengths = np.where(np.isnan(distances), np.inf, distances)
    before = np.maximum.accumulate(lengths)[:-1]
    finite = np.isfinite(before)
    assert (lengths[1:][finite] >= before[finite] * (1.0 - ROUNDING)).all(), (key, lengths)
    assert np.isinf(lengths[1:][~finite]).all(), (key, lengths)


@given(situations(), ladder(0.6, 1.1))
def test_mass_never_helps(situation: Situation, shares: np.ndarray) -> None:
    check_both_never_better(assessed(situation, share=shares))


@given(situations(), ladder(-40.0, 55.0))
def test_heat_never_helps(situation: Situation, temperatures: np.ndarray) -> None:
    check_both_never_better(assessed(situation, own_temperature=temperatures))


@given(situations(), ladder(-1000.0, 16000.0))
def test_elevation_never_helps(situation: Situation, elevations: np.ndarray) -> None:
    check_both_never_better(assessed(situation, elevation_field=elevations))


@given(situations(), ladder(-20.0, 100.0))
def test_tailwind_never_helps(situation: Situation, heads: np.ndarray) -> None:
    """From the strongest headwind that the day takes, 100 kt, to a tailwind; the crosswind stays."""
    check_both_never_better(assessed(situation, head=heads[::-1]))


def grounds_by(figure: str) -> Callable[[str], list[str]]:
    def of_surface(surface: str) -> list[str]:
        """The conditions for which the surface has figures, from the easiest; one figure twice stays in table order."""
        known = [c for c in CONDITIONS if np.isfinite(getattr(ground(surface, c), figure))]
        return sorted(known, key=lambda c: getattr(ground(surface, c), figure) * (1 if figure == "rolling" else -1))

    return of_surface


@given(situations())
def test_softness_never_helps_a_takeoff(situation: Situation) -> None:
    """Dry, wet and soft ground of one surface, in the order of rolling friction; ice and snow have too few figures."""
    conditions = grounds_by("rolling")(situation["strip"]["surface"])
    assert conditions == [c for c in CONDITIONS if c in conditions]
    if conditions:
        check_never_better(assessed(situation, condition=conditions), "takeoff")


@given(situations())
def test_slipperiness_never_helps_a_landing(situation: Situation) -> None:
    conditions = grounds_by("braking")(situation["strip"]["surface"])
    assert conditions == [c for c in CONDITIONS if c in conditions]
    if conditions:
        check_never_better(assessed(situation, condition=conditions), "landing")


def with_ground(rules: Rules, key: str, value: float) -> Rules:
    """The rule set with one coefficient for every ground."""
    return Rules(**{**vars(rules), "values": {**rules.values, key: np.full(len(GROUNDS) + 1, value)}})


@given(situations(), ladder(0.0, 0.35, rungs=4))
def test_rolling_friction_never_helps_a_takeoff(situation: Situation, coefficients: np.ndarray) -> None:
    rows = [one_row(assessed(situation, with_ground(RULES[situation["rules"]], "ground_rolling", value)), "takeoff")
            for value in coefficients]  # fmt: skip
    check_rows(rows, "takeoff")


@given(situations(), ladder(0.02, 0.6, rungs=4))
def test_less_braking_never_helps_a_landing(situation: Situation, coefficients: np.ndarray) -> None:
    rows = [one_row(assessed(situation, with_ground(RULES[situation["rules"]], "ground_braking", value)), "landing")
            for value in coefficients[::-1]]  # fmt: skip
    check_rows(rows, "landing")


def one_row(result: Result, side: str) -> tuple[dict[str, float], str]:
    return {key: float(result.si(key)[0]) for key in DISTANCES[side]}, result[f"{side}_verdict"][0]


def check_rows(rows: list[tuple[dict[str, float], str]], side: str) -> None:
    for key in DISTANCES[side]:
        check_never_shorter(np.array([distances[key] for distances, _ in rows]), key)
    ranks = [RANK.get(verdict, 3) for _, verdict in rows]
    assert ranks == sorted(ranks), ranks


def without_mean_slope_criterion(rules: Rules) -> Rules:
    return Rules(**{**vars(rules), "values": {**rules.values, "greatest_slope": np.nan}})


@given(situations(), ladder(-20.0, 25.0))
def test_upslope_never_helps_a_takeoff(situation: Situation, slopes: np.ndarray) -> None:
    rules = without_mean_slope_criterion(RULES[situation["rules"]])
    check_never_better(assessed(situation, rules, slope_given=slopes), "takeoff")


@given(situations(), ladder(-20.0, 25.0))
def test_downslope_never_helps_a_landing(situation: Situation, slopes: np.ndarray) -> None:
    rules = without_mean_slope_criterion(RULES[situation["rules"]])
    check_never_better(assessed(situation, rules, slope_given=slopes[::-1]), "landing")


@given(situations(), ladder(0.0, 25.0))
def test_the_laws_of_slope_hold_with_the_site_criterion_on_its_own_side(
    situation: Situation, slopes: np.ndarray
) -> None:
    check_never_better(assessed(situation, slope_given=slopes), "takeoff")
    check_never_better(assessed(situation, slope_given=-slopes), "landing")


@given(situations(), ladder(150.0, 2500.0))
def test_a_longer_strip_never_hurts(situation: Situation, lengths: np.ndarray) -> None:
    check_both_never_better(assessed(situation, tora=lengths[::-1], lda=lengths[::-1]))


STRIPS = {True: 12000, False: 3000}  # for each aeroplane, shipped or not, rule set and law
SETS = ("manual-only", "part-cat-b", "uk-leaflet", "au-small")
# Height over an obstacle [m] that may be gained by rounding; with a table of climb rates a little more, since the
# manual is read linearly over 4,000 ft in the middle of which a flat rating ends.
CLEARANCE = {False: 1e-6, True: 0.05}


def many_strips(rng: np.random.Generator, count: int) -> Situation:
    """Columns of random strips, denser than single examples can be, for what only a narrow window would show.

    Half have a tailwind, and uphill and downhill are steep: there the airborne parts come close to their limits.
    """
    surfaces = [surface for surface in SURFACES if surface != "snow"]
    some = rng.random((2, count)) < 0.5
    ahead, behind = (np.where(here, rng.uniform(0.0, 150.0, count), np.nan) for here in some)
    length = rng.uniform(200.0, 2500.0, count)
    return {
        "strip": {
            "tora": length, "lda": length, "width": rng.uniform(8.0, 40.0, count),
            "elevation_field": rng.uniform(-1000.0, 14000.0, count),
            "slope_given": rng.uniform(-12.0, 18.0, count), "local_slope": rng.uniform(0.0, 10.0, count),
            "surface": list(rng.choice(surfaces, count)), "condition": list(rng.choice(CONDITIONS, count)),
            "own_temperature": rng.uniform(-30.0, 45.0, count),
            "obstacle_height": ahead,
            "obstacle_distance": np.where(some[0], rng.uniform(0.0, 1500.0, count), np.nan),
            "approach_obstacle_height": behind,
            "approach_obstacle_distance": np.where(some[1], rng.uniform(0.0, 1500.0, count), np.nan),
        },
        "head": np.where(rng.random(count) < 0.5, rng.uniform(-10.0, 0.0, count), rng.uniform(0.0, 60.0, count)),
        "cross": rng.uniform(0.0, 15.0, count),
        "share": rng.uniform(0.6, 1.02, count), "humidity": 40, "qnh": 1013.25,
    }  # fmt: skip


def harder(law: str, base: Situation, rng: np.random.Generator) -> dict[str, Any]:
    """Each strip's value moved the hard way, by a hair or by much."""
    strip = base["strip"]
    move = 10.0 ** rng.uniform(-4.0, 0.0, len(base["share"]))
    return {
        "mass": lambda: {"share": base["share"] + 0.1 * move},
        "heat": lambda: {"own_temperature": strip["own_temperature"] + 12.0 * move},
        "elevation": lambda: {"elevation_field": strip["elevation_field"] + 3000.0 * move},
        "tailwind": lambda: {"head": base["head"] - 20.0 * move},
        "upslope": lambda: {"slope_given": strip["slope_given"] + 6.0 * move},
        "downslope": lambda: {"slope_given": strip["slope_given"] - 6.0 * move},
    }[law]()


LAWS = {"mass": BOTH, "heat": BOTH, "elevation": BOTH, "tailwind": BOTH, "upslope": ("takeoff",),
        "downslope": ("landing",)}  # fmt: skip


@pytest.mark.parametrize("law", LAWS)
@pytest.mark.parametrize("name", sorted(CARDS))
def test_laws_over_many_strips(name: str, law: str) -> None:
    rng = np.random.default_rng(11)
    flaps = {"takeoff_flap": "28" if name == "high-mule" else "10", "landing_flap": CARDS[name].flaps[-1].name}
    base = {**many_strips(rng, STRIPS[name in shipped_cards()]), "card": name, **flaps}
    broken = []
    rounding = ROUNDING if name in shipped_cards() else COARSE
    for rules in (without_mean_slope_criterion(RULES[one]) for one in SETS):
        easy, hard = assessed(base, rules), assessed(base, rules, **harder(law, base, rng))
        for side in LAWS[law]:
            keys = (f"{side}_reason", f"{side}_distance")
            broken += [(rules.name, side, int(row), *((easy[key][row], hard[key][row]) for key in keys))
                       for row in np.flatnonzero(better(easy, hard, side, rounding))[:2]]  # fmt: skip
    assert broken == []


def better(easy: Result, hard: Result, side: str, rounding: float = ROUNDING) -> np.ndarray:
    """Rows that the harder case shortens, or whose verdict, or clearance over an obstacle ahead, it betters."""
    broken = np.array([RANK.get(verdict, 3) for verdict in hard[f"{side}_verdict"]]) < np.array(
        [RANK.get(verdict, 3) for verdict in easy[f"{side}_verdict"]]
    )
    for key in DISTANCES[side]:
        before, after = (np.nan_to_num(result.si(key), nan=np.inf) for result in (easy, hard))
        shorter = np.where(np.isinf(before), np.isfinite(after), after < before * (1.0 - rounding))
        # beyond a coarse table, near the ceiling, a line between carried figures grows less than the model: no verdict
        # there is better than marginal, and that it never gets better is asked all the same
        broken |= shorter & ~hard.si(f"{side}_beyond") if rounding == COARSE else shorter
    if side == "takeoff":
        # where 50 ft is not reached on the strip, the distance has decided, and the height means nothing
        fits = hard.si("takeoff_distance") <= hard.si("takeoff_margin") + hard.si("takeoff_required")
        rounding = CLEARANCE["climb_carry" in easy.chain.by_key]
        broken |= fits & (hard.si("over_obstacle") > easy.si("over_obstacle") + rounding)
    return broken


@given(st.floats(0.0, 20.0), st.floats(-1000.0, 12000.0), st.floats(0.7, 1.0))
def test_tailwind_never_makes_a_run_look_brisker(tailwind: float, elevation: float, share: float) -> None:
    """The share of the first acceleration that is left at the end decides "barely accelerates near lift-off"."""
    card = CARDS["ridge-runner"]
    strip = {"tora": 2000.0, "elevation_field": elevation, "slope_given": 1.0, "surface": "grass", "heading": 0.0,
             "own_wind_from": 180.0, "own_wind_speed": [0.0, tailwind]}  # fmt: skip
    result = assess(strip, card, {"temperature": 25}, takeoff_mass=share * card.values["max_takeoff_mass"])
    calm, windy = result.si("least_acceleration") / result.si("first_acceleration")
    assert windy <= calm + 1e-12


TINY = 1e-9
CONTINUOUS = ("takeoff_roll", "takeoff_distance", "landing_roll", "landing_distance", "landing_available")


def check_continuous(result: Result) -> None:
    """Three rows, a hair below, at, and a hair above: each distance differs by less than 1e-6 of itself."""
    for key in CONTINUOUS:
        values = result.si(key)
        assert np.isnan(values).all() or np.ptp(values) <= 1e-6 * np.abs(values).max(), (key, values)


@given(situations())
def test_no_slope_is_no_step(situation: Situation) -> None:
    """Slopes of -1e-9, 0 and 1e-9 as fractions."""
    check_continuous(assessed(situation, slope_given=[-TINY * 100.0, 0.0, TINY * 100.0]))


@given(situations())
def test_calm_is_no_step(situation: Situation) -> None:
    """Headwinds of -1e-9, 0 and 1e-9 kt, without a crosswind."""
    check_continuous(assessed(situation, head=[-TINY, 0.0, TINY], cross=0.0))


@given(situations())
def test_calm_needs_no_direction(situation: Situation) -> None:
    """A wind of 0 kt gives the same distances with a direction and without."""
    directed = assessed(situation, head=0.0, cross=0.0)
    strip = {key: value for key, value in situation["strip"].items() if value is not None}
    card = CARDS[situation["card"]]
    bare = assess(strip, card, {"humidity": situation["humidity"], "qnh": situation["qnh"]},
                  RULES[situation["rules"]],
                  takeoff_mass=situation["share"] * card.values["max_takeoff_mass"],
                  landing_mass=situation["share"] * card.values["max_landing_mass"],
                  takeoff_flap=situation["takeoff_flap"], landing_flap=situation["landing_flap"])  # fmt: skip
    for key in CONTINUOUS:
        np.testing.assert_array_equal(bare.si(key), directed.si(key), key)
    assert bare["takeoff_reason"] == directed["takeoff_reason"]


@given(situations())
def test_more_flap_never_raises_the_stall_speed(situation: Situation) -> None:
    card = CARDS[situation["card"]]
    settings = [flap.name for flap in card.flaps if {"take-off", "landing"} <= set(flap.uses)]
    results = [assessed(situation, takeoff_flap=name, landing_flap=name) for name in settings]
    for key in ("stall_takeoff", "stall_landing"):
        stalls = [float(result.si(key)[0]) for result in results]
        assert stalls == sorted(stalls, reverse=True)


@given(situations(), st.floats(0.6, 1.1))
def test_the_landing_stall_is_never_above_the_clean_one(situation: Situation, share: float) -> None:
    """Vs0 <= Vs1, at one and the same mass, whatever the flap settings chosen for the two."""
    card = CARDS[situation["card"]]
    mass = share * card.values["max_landing_mass"]
    most = next(flap.name for flap in reversed(card.flaps) if "landing" in flap.uses)
    result = assess(situation["strip"] | {"surface": "grass"}, card, {"temperature": 15}, takeoff_mass=mass,
                    landing_mass=mass, takeoff_flap=situation["takeoff_flap"], landing_flap=most)  # fmt: skip
    assert result.si("stall_landing")[0] <= result.si("stall_takeoff")[0]


@given(situations(), ladder(0.5, 1.1))
def test_a_lower_mass_lowers_the_stall_speed(situation: Situation, shares: np.ndarray) -> None:
    result = assessed(situation, share=shares)
    for key in ("stall_takeoff", "stall_landing"):
        steps = np.diff(result.si(key))
        assert (steps[np.diff(shares) > 0.0] > 0.0).all()
