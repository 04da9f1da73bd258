"""The chain cut in levels gives what the whole chain gives, and a profile's steepest part never promises too much."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from stripcheck.assessment import Result
from stripcheck.books.register_levels import (
    WANTED,
    boundary,
    inside_of,
    landing_length,
    register_chain,
    steepest_part,
    take_off_length,
)
from stripcheck.card import Card, load_card
from stripcheck.chain import evaluate
from stripcheck.day import read_day
from stripcheck.links import highest_elevation
from stripcheck.profile import Profile
from stripcheck.profile_run import profile_slopes
from stripcheck.rules import load_rules
from stripcheck.sheet.cases import no_inputs, score
from stripcheck.sheet.summary import FORBIDDEN, RANKS
from tests.aircraft import heavy_tables, trial_heron, trial_mule
from tests.manual_cards import everything
from tests.messy_strips import messy_columns

CARDS = {
    "ridge-runner": lambda: load_card("ridge-runner"),
    "high-mule": lambda: load_card("high-mule"),
    "heron": trial_heron,
    "mule": trial_mule,
    "heavy tables": heavy_tables,
    "everything": everything,
    "everything, constant speed": lambda: everything(fixed=False),
}


@pytest.mark.parametrize("name", CARDS)
def test_the_register_s_chain_finds_what_the_chain_finds(name: str) -> None:
    card: Card = CARDS[name]()
    columns = messy_columns(1500, seed=11)
    day = read_day({"temperature": 27, "temperature_elevation": 1000, "wind_speed": 7, "wind_from": 200})
    values = {**card.values, **load_rules("part-cat-b").values, **day.values, **columns}
    with np.errstate(all="ignore"):
        elevation = highest_elevation(columns["elevation_field"], columns["elevation_start"], columns["elevation_end"])
    whole = evaluate(card.chain, values, WANTED)
    levels = evaluate(register_chain(card.chain), {**values, "elevation": elevation}, WANTED)
    for key in WANTED:
        assert np.array_equal(whole[key], levels[key], equal_nan=True), key
    assert len(np.unique(whole["takeoff_finding"])) > 15


@pytest.mark.parametrize("name", CARDS)
def test_no_level_holds_what_hangs_on_another(name: str) -> None:
    chain = register_chain(CARDS[name]().chain)
    of_end, of_air = inside_of(chain, "end"), inside_of(chain, "air")
    assert not of_end & of_air
    assert {"headwind", "takeoff_slope"} <= set(boundary(chain, of_end))
    assert {"density", "rolling"} <= set(boundary(chain, of_air))
    assert not of_air & chain.depends_on(["heading", "tora", "slope_given"])


def test_lengths_are_what_the_directions_leave() -> None:
    nan = np.nan
    assert [float(take_off_length(*pair)) for pair in ((500.0, 600.0), (700.0, 600.0), (nan, 600.0), (500.0, nan))] == [
        500,
        600,
        600,
        500,
    ]
    assert [
        float(landing_length(*three))
        for three in ((nan, 600.0, 50.0), (500.0, 600.0, nan), (580.0, 600.0, 50.0), (500.0, nan, 50.0))
    ] == [550, 500, 550, 500]
    assert np.isnan(take_off_length(nan, nan)) and np.isnan(landing_length(nan, nan, 50.0))
    assert [
        float(steepest_part(*three)) for three in ((1.0, 2.0, -3.0), (5.0, 2.0, -3.0), (nan, 2.0, 1.0), (4.0, nan, nan))
    ] == [3, 5, 2, 4]


SLOPES = st.lists(st.floats(-0.12, 0.12), min_size=2, max_size=5)


def _verdicts(card: Card, profile: Profile, usable: float, bound: bool) -> list[tuple[float, float]]:
    """Order and margin, take-off and landing, of a strip with a profile: along it, or on its steepest part all along."""
    day, rules = read_day({"isa_deviation": 10, "wind_speed": 3, "wind_from": 40}), load_rules("part-cat-b")
    values = {
        **no_inputs(),
        **card.values,
        **rules.values,
        **day.values,
        "tora": np.array([usable]),
        "lda": np.array([usable]),
        "length": profile.length,
        "elevation_field": 600.0,
        "slope_given": profile.mean_slope,
        "heading": 0.5,
        "surface": 3,
        "local_slope": profile.steepest,
        "width": 20.0,
    }
    if bound:
        slopes = profile.slopes
        values |= {
            "profile_takeoff_slope": max(slopes),
            "profile_climb_slope": max(slopes),
            "profile_landing_slope": min(slopes),
            "profile_approach_slope": min(slopes),
        }
    else:
        values |= profile_slopes(card.chain, values, [profile])
    result = Result(card.chain, 1, values, {}, [""])
    found = []
    for side in ("takeoff", "landing"):
        order = 0 if result.si(f"{side}_finding")[0] == FORBIDDEN else RANKS.index(result[f"{side}_verdict"][0]) + 1
        found.append((float(order), float(result.si(f"{side}_margin")[0])))
    return found


@settings(max_examples=30)
@given(SLOPES, st.floats(350.0, 1500.0), st.floats(0.6, 1.0), st.sampled_from(["ridge-runner", "high-mule"]))
def test_a_profile_s_steepest_part_never_promises_more_than_the_profile(
    slopes: list[float], length: float, share: float, name: str
) -> None:
    part = length / len(slopes)
    distances = tuple(part * number for number in range(len(slopes) + 1))
    heights = (0.0, *np.cumsum([slope * part for slope in slopes]).tolist())
    profile = Profile(distances, heights)
    card = load_card(name)
    along, bound = (_verdicts(card, profile, share * length, steepest) for steepest in (False, True))
    for (order, margin), (bound_order, bound_margin) in zip(along, bound, strict=True):
        assert bound_order <= order
        if np.isfinite(margin) and np.isfinite(bound_margin):
            assert bound_margin <= margin + 0.02  # m: the slope that stands for a roll is found to a few millimetres


def test_the_score_tells_a_forbidden_direction_from_an_unsuitable_one() -> None:
    assert float(score(0.0, 500.0)) < float(score(1.0, -500.0))
