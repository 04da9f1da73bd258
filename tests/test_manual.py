"""The manual on a card: its figures to the metre at its own conditions, carried from there by physics, its own corrections.

What is worked out "by hand" here takes the card's model without tables or corrections, and the manual's figures as they
are typed, and joins them outside the chain.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import RegularGridInterpolator

from stripcheck import assess, load_card, load_rules
from stripcheck import chain as chains
from stripcheck.assessment import Result, prepare
from stripcheck.book_tables import BookTables
from stripcheck.card import Card, shipped_cards
from stripcheck.chain import evaluate
from stripcheck.day import read_day
from stripcheck.errors import InputError
from stripcheck.links import LEAST_MANUAL_SHARE
from stripcheck.surface import CONDITIONS, GROUND_NAMES, ground
from stripcheck.verdict import BEYOND, MARGINAL, SUITABLE
from tests.aircraft import HEAVY_TABLES, HERON, changed, load_text, trial_heron, trial_mule
from tests.manual_cards import (
    BARE,
    CLIMB,
    CORRECTIONS,
    LANDING_POINTS,
    MULE,
    MULE_POINTS,
    STILL,
    TAKEOFF_POINTS,
    everything,
    everything_text,
    figures,
    load,
    printed,
    table,
)
from tests.messy_strips import messy_columns

FOOT, KNOT, ZERO = 0.3048, 1852.0 / 3600.0, 273.15
EXACT = 1e-9  # m
BOTH = ("takeoff", "landing")
CARDS = {
    **{name: load_card(name) for name in shipped_cards()},
    "fixed pitch": everything(True, False),
    "constant speed": everything(False, False),
}
POINTS = TAKEOFF_POINTS + LANDING_POINTS


@cache
def corrected(fixed: bool, tables: bool) -> Card:
    """A card with the manual's corrections, with tables or with single figures."""
    return everything(fixed) if tables else load((BARE + POINTS if fixed else MULE + MULE_POINTS) + CORRECTIONS)


def model_of(card: Card) -> Card:
    """The card's calibrated model alone."""
    return without(card, *card.tables)


def without(card: Card, *sides: str) -> Card:
    """The card without the tables of some sides and without the manual's corrections."""
    tables = {side: tables for side, tables in card.tables.items() if side not in sides}
    bare = replace(card, tables=tables, corrections=frozenset())
    return replace(bare, values={key: value for key, value in card.values.items() if key in bare.chain.by_key})


def flap_name(card: Card, deflection: float) -> str:
    return next(flap.name for flap in card.flaps if flap.deflection == deflection)


def assessed(card: Card, side: str, flap: str, mass: Any, altitude: Any, temperature: Any, **strip: Any) -> Result:
    """Level dry pavement in still dry air, unless told otherwise; ``altitude`` [ft] is the pressure altitude too."""
    strips = {**STILL, "elevation_field": altitude, "own_temperature": temperature, **strip}
    rows = max(np.size(value) for value in (mass, *strips.values()) if not isinstance(value, str))
    strips = {key: value if isinstance(value, str) else np.broadcast_to(value, rows) for key, value in strips.items()}
    return assess(strips, card, {}, **{f"{side}_mass": np.broadcast_to(mass, rows), f"{side}_flap": flap})


def pages(card: Card, side: str) -> dict[float, list[int]]:
    """Numbers of the pages for each flap setting."""
    found: dict[float, list[int]] = {}
    for number, (flap, _) in enumerate(card.tables[side].pages):
        found.setdefault(flap, []).append(number)
    return found


# -- the manual's figures where they are printed -----------------------------------------------------------------------


@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize("name", CARDS)
def test_every_printed_figure_comes_out_to_the_metre(name: str, side: str) -> None:
    """To 1e-9 m, roll and distance, and none of them is beyond the book."""
    card, tables = CARDS[name], CARDS[name].tables[side]
    count = 0
    for number, (flap, mass) in enumerate(tables.pages):
        line, column = np.nonzero(tables.known[number])
        result = assessed(card, side, flap_name(card, flap), mass, tables.altitudes[line] / FOOT,
                          tables.temperatures[column] - ZERO)  # fmt: skip
        for key, figure in ((f"{side}_distance", "distance"), (f"carried_{side}_roll", "roll")):
            np.testing.assert_allclose(result.si(key), tables.printed[figure][number][line, column], rtol=0.0, atol=EXACT)
        assert not result.si(f"{side}_beyond").any()
        count += len(line)
    assert count == tables.known.sum() > 20


def test_the_shipped_figures_are_those_in_the_files() -> None:
    """A few read by eye: Ridge Runner, 1,000 kg, 4,000 ft and 30 deg C; High Mule, 2,500 kg, 8,000 ft and 20 deg C."""
    runner = assessed(load_card("ridge-runner"), "takeoff", "10", 1000.0, 4000.0, 30.0)
    assert (runner.si("takeoff_distance")[0], runner.si("carried_takeoff_roll")[0]) == pytest.approx((530.0, 260.0), abs=EXACT)
    mule = load_card("high-mule")
    assert assessed(mule, "takeoff", "28", 2500.0, 8000.0, 20.0).si("takeoff_distance")[0] == pytest.approx(555.0, abs=EXACT)
    assert assessed(mule, "landing", "40", 2660.0, 8000.0, 20.0).si("landing_distance")[0] == pytest.approx(430.0, abs=EXACT)


def test_single_values_do_too() -> None:
    """Without a column, so that nothing is broadcast."""
    strip = {**STILL, "elevation_field": 2000.0, "own_temperature": 20.0}
    result = assess(strip, "ridge-runner", {}, takeoff_mass=890, takeoff_flap="10")
    assert result.si("takeoff_distance")[0] == pytest.approx(310.0, abs=EXACT)


def whole_cells(tables: BookTables, numbers: list[int]) -> np.ndarray:
    """Lines and columns [n, 2] between which every page has all four figures."""
    known = tables.known[numbers].all(axis=0)
    return np.argwhere(known[:-1, :-1] & known[1:, :-1] & known[:-1, 1:] & known[1:, 1:])


@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize("name", CARDS)
def test_between_the_figures_it_is_linear_in_mass_height_and_heat(name: str, side: str) -> None:
    """Source: SciPy's RegularGridInterpolator. The model cancels where nothing but these three is asked of it."""
    card, tables, rng = CARDS[name], CARDS[name].tables[side], np.random.default_rng(5)
    compared = 0
    for flap, numbers in pages(card, side).items():
        masses = np.array([tables.pages[number][1] for number in numbers])
        cells = whole_cells(tables, numbers)
        if not len(cells):
            continue
        corner = cells[rng.integers(0, len(cells), 300)]
        share = rng.random((len(corner), 3))
        axes = tables.altitudes, tables.temperatures
        height, heat = (axis[low] + part * (axis[low + 1] - axis[low])
                        for axis, low, part in zip(axes, corner.T, share.T[1:], strict=True))  # fmt: skip
        mass = masses[0] + share[:, 0] * (masses[-1] - masses[0])
        result = assessed(card, side, flap_name(card, flap), mass, height / FOOT, heat - ZERO)
        grid = tables.printed["distance"][numbers]
        if len(masses) == 1:  # SciPy wants two
            masses, grid = np.array([masses[0], masses[0] + 1.0]), np.concatenate([grid, grid])
        expected = RegularGridInterpolator((masses, *axes), np.nan_to_num(grid))(np.stack([mass, height, heat], axis=1))
        np.testing.assert_allclose(result.si(f"{side}_distance"), expected, rtol=1e-10)
        assert not result.si(f"{side}_beyond").any()
        compared += len(corner)
    assert compared >= 300


def test_lines_and_columns_of_another_flap_s_table_change_nothing() -> None:
    """One table alone, and beside one of another flap setting on axes of its own that are finer and reach farther."""
    axes = ((0, 3000, 6000), (0, 15, 25)), ((-500, 1000, 4000, 6500), (-20, 5, 10, 20, 26))
    one, other = (table("take-off roll and to 50 ft", *own, *printed(trial_heron(), "takeoff", flap, mass, *own), flap=flap,
                        mass=f"{mass} kg") for own, flap, mass in zip(axes, ("10", "20"), (1110.0, 900.0), strict=True))
    rng = np.random.default_rng(1)
    height, heat = rng.uniform(0.0, 6000.0, 500), rng.uniform(0.0, 25.0, 500)
    alone, beside = (assessed(load(BARE + text + LANDING_POINTS), "takeoff", "10", 1110.0, height, heat)
                     for text in (one, one + other))  # fmt: skip
    for key in ("takeoff_distance", "carried_takeoff_roll", "takeoff_beyond"):
        np.testing.assert_allclose(beside.si(key), alone.si(key), rtol=1e-10)


# -- beyond the book ---------------------------------------------------------------------------------------------------

RUNNER, HIGH_MULE = load_card("ridge-runner"), load_card("high-mule")
# card, side, flap, mass, altitude, temperature -> farther by ft, K, kg
FAR = [
    (RUNNER, "takeoff", "10", 1000.0, 4000.0, 20.0, (0.0, 0.0, 0.0)),
    (RUNNER, "takeoff", "10", 1000.0, 8700.0, 20.0, (700.0, 0.0, 0.0)),
    (RUNNER, "takeoff", "10", 1000.0, -400.0, 20.0, (-400.0, 0.0, 0.0)),
    (RUNNER, "takeoff", "10", 1000.0, 4000.0, 43.0, (0.0, 3.0, 0.0)),
    (RUNNER, "takeoff", "10", 1000.0, 4000.0, -12.0, (0.0, -12.0, 0.0)),
    (RUNNER, "takeoff", "10", 850.0, 4000.0, 20.0, (0.0, 0.0, -40.0)),
    # holes: at 1,110 kg there is nothing above 30 deg C at 6,000 ft, nor above 10 deg C at 8,000 ft
    (RUNNER, "takeoff", "10", 1110.0, 6000.0, 35.0, (0.0, 5.0, 0.0)),
    (RUNNER, "takeoff", "10", 1110.0, 8000.0, 35.0, (0.0, 25.0, 0.0)),
    (RUNNER, "takeoff", "10", 1110.0, 7000.0, 35.0, (0.0, 25.0, 0.0)),
    (RUNNER, "takeoff", "10", 1110.0, 5000.0, 31.0, (0.0, 1.0, 0.0)),
    (RUNNER, "takeoff", "10", 1110.0, 4000.0, 35.0, (0.0, 0.0, 0.0)),
    (RUNNER, "takeoff", "10", 1110.0, 9000.0, 12.0, (1000.0, 2.0, 0.0)),
    # the heaviest page counts as soon as it has any weight, and not before
    (RUNNER, "takeoff", "10", 1000.1, 8000.0, 35.0, (0.0, 25.0, 0.0)),
    (RUNNER, "takeoff", "10", 1000.0, 8000.0, 35.0, (0.0, 0.0, 0.0)),
    # another flap takes the nearest with tables
    (RUNNER, "takeoff", "20", 1000.0, 8700.0, 43.0, (700.0, 3.0, 0.0)),
    (RUNNER, "landing", "30", 1000.0, 4000.0, 20.0, (0.0, 0.0, -110.0)),
    (HIGH_MULE, "landing", "40", 2700.0, 10500.0, 41.0, (500.0, 1.0, 40.0)),
    (HIGH_MULE, "landing", "28", 2100.0, 5000.0, -14.0, (0.0, -4.0, -100.0)),
    (HIGH_MULE, "takeoff", "28", 2650.0, 10000.0, 34.0, (0.0, 4.0, 0.0)),
]  # fmt: skip


@pytest.mark.parametrize("case", FAR)
def test_the_distance_to_the_edge_of_the_book(case: tuple[Any, ...]) -> None:
    card, side, flap, mass, altitude, temperature, expected = case
    result = assessed(card, side, flap, mass, altitude, temperature)
    found = [float(result[f"{side}_beyond_{axis}"][0]) for axis in ("altitude", "temperature", "mass")]
    assert found == pytest.approx(expected, abs=1e-8)
    assert result[f"{side}_beyond"][0] == (max(expected) > 0.0)


@pytest.mark.parametrize("case", [case for case in FAR if case[3] <= case[0].values[f"max_{case[1]}_mass"]])
def test_beyond_the_hard_edges_the_verdict_is_at_best_marginal(case: tuple[Any, ...]) -> None:
    """On 9 km of strip. On the easy side, lower, colder or lighter, it stays what it is: otherwise a colder day could make a
    verdict worse, and more heat better."""
    card, side, flap, mass, altitude, temperature, expected = case
    result = assessed(card, side, flap, mass, altitude, temperature)
    if max(expected) > 0.0:
        assert (result[f"{side}_verdict"], result[f"{side}_reason"]) == ([MARGINAL], [BEYOND])
    else:
        assert result[f"{side}_verdict"] == [SUITABLE]
    assert np.isfinite(result.si(f"{side}_distance")).all()


SHORT_PAGE = [[200, 220], [280, 310]]


@pytest.mark.parametrize("temperature", [-40.0, -1.0, 10.0, 20.0])
def test_a_page_that_ends_below_another_s_is_left_at_its_own_last_line(temperature: float) -> None:
    """Flap 20 is printed up to 4,000 ft and flap 10 up to 8,000 ft: higher is beyond, however cold it is."""
    text = (
        table("take-off roll", (0, 4000), (0, 20), SHORT_PAGE, flap="20", mass="1110 kg")
        + table("take-off roll", (0, 8000), (0, 20), [[210, 230], [390, 440]], flap="10", mass="1110 kg")
    )  # fmt: skip
    card = load(BARE + TAKEOFF_POINTS + text + LANDING_POINTS)
    higher = assessed(card, "takeoff", "20", 1000.0, 6000.0, temperature)
    assert higher["takeoff_beyond_altitude"] == pytest.approx([2000.0], abs=1e-8)
    assert higher["takeoff_reason"] == [BEYOND]
    other = assessed(card, "takeoff", "10", 1000.0, 6000.0, temperature)
    assert other["takeoff_beyond_altitude"] == [0.0] and other["takeoff_verdict"] == [SUITABLE]


def test_a_line_that_is_all_holes_is_beyond_however_cold() -> None:
    text = table("take-off roll", (0, 4000, 8000), (0, 20), [*SHORT_PAGE, [np.nan] * 2], flap="10", mass="1110 kg")
    card = load(BARE + TAKEOFF_POINTS + text + LANDING_POINTS)
    result = assessed(card, "takeoff", "10", 1000.0, 5000.0, np.array([-50.0, -1.0, 10.0]))
    assert result["takeoff_reason"] == [BEYOND] * 3
    assert result["takeoff_beyond_altitude"] == pytest.approx([1000.0] * 3, abs=1e-8)


def test_pages_without_a_temperature_in_common_are_beyond() -> None:
    """One page has nothing cold and the next nothing warm: between their masses no temperature is in the book."""
    text = (
        table("take-off roll", (0, 4000), (0, 20, 40), [[np.nan, 200, 220], [np.nan, 260, 300]], flap="10", mass="900 kg")
        + table("take-off roll", (0, 4000), (0, 20, 40), [[240, np.nan, np.nan], [290, np.nan, np.nan]], flap="10",
                mass="1110 kg")
    )  # fmt: skip
    card = load(BARE + TAKEOFF_POINTS + text + LANDING_POINTS)
    result = assessed(card, "takeoff", "10", 1000.0, 2000.0, np.array([5.0, 10.0, 30.0]))
    assert result["takeoff_reason"] == [BEYOND] * 3
    assert result["takeoff_beyond_temperature"] == pytest.approx([5.0, 10.0, 30.0], abs=1e-9)


@pytest.mark.parametrize("axis", ["height", "mass"])
def test_a_hole_that_harder_figures_fill_is_not_beyond(axis: str) -> None:
    """A light page that starts higher and ends sooner than a heavy one: else more height or mass would better a verdict."""
    heavy = table("take-off roll", (0, 4000, 8000), (0, 20, 40), [[220, 240, 270], [300, 330, 370], [400, 450, 510]], flap="10",
                  mass="1110 kg")  # fmt: skip
    light = table("take-off roll", (2000, 4000), (0, 20), [[170, 190], [200, 230]], flap="10", mass="900 kg")
    card = load(BARE + light + heavy + LANDING_POINTS)
    rungs = np.linspace(0.0, 1.0, 21)
    if axis == "height":
        result = assessed(card, "takeoff", "10", 900.0, 8000.0 * rungs, 40.0)
    else:
        result = assessed(card, "takeoff", "10", 900.0 + 210.0 * rungs, 8000.0, 35.0)
    assert result["takeoff_verdict"] == [SUITABLE] * 21
    assert (np.diff(result.si("takeoff_distance")) > 0.0).all()


def test_beyond_the_edge_it_goes_on_without_a_step() -> None:
    """A hair over each edge, and over the edge of a hole, changes a distance by a hair."""
    for temperature, altitude in ((40.0, 4000.0), (20.0, 8000.0), (30.0, 6000.0), (0.0, 4000.0), (20.0, 0.0)):
        heat = temperature + np.array([-1e-6, 0.0, 1e-6])
        height = altitude + np.array([-1e-4, 0.0, 1e-4])
        for result in (assessed(RUNNER, "takeoff", "10", 1110.0, altitude, heat),
                       assessed(RUNNER, "takeoff", "10", 1110.0, height, temperature)):  # fmt: skip
            distance = result.si("takeoff_distance")
            assert np.ptp(distance) < 1e-6 * distance[0] and distance[0] > 300.0


def test_beyond_the_table_the_model_goes_on_from_its_edge() -> None:
    """9,500 ft and 45 deg C, from 8,000 ft and 40 deg C: the figure there times what the model makes of the difference."""
    beyond, edge = (assessed(model_of(RUNNER), "takeoff", "10", 890.0, *where).si("physics_takeoff")[0]
                    for where in ((9500.0, 45.0), (8000.0, 40.0)))  # fmt: skip
    found = assessed(RUNNER, "takeoff", "10", 890.0, 9500.0, 45.0).si("takeoff_distance")[0]
    printed = assessed(RUNNER, "takeoff", "10", 890.0, 8000.0, 40.0).si("takeoff_distance")[0]
    assert printed % 5.0 == pytest.approx(0.0, abs=EXACT) and found == pytest.approx(printed * beyond / edge, rel=1e-10)
    assert found > 1.05 * printed


# -- carried to the strip ----------------------------------------------------------------------------------------------

# key -> strip columns, and the mass and flap if others than the page's
STRANGE: dict[str, dict[str, Any]] = {
    "uphill": {"slope_given": 2.0},
    "downhill": {"slope_given": -3.0},
    "headwind": {"own_wind_speed": 14.0, "own_wind_from": 20.0},
    "tailwind": {"own_wind_speed": 5.0, "own_wind_from": 170.0},
    "grass": {"surface": "grass"},
    "wet grass": {"surface": "grass", "condition": "wet"},
    "all": {"slope_given": 0.5, "own_wind_speed": 9.0, "own_wind_from": 60.0, "surface": "gravel", "condition": "wet"},
    "no standard pressure": {"own_qnh": 987.0},
}


@pytest.mark.parametrize("what", STRANGE)
@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize("name", CARDS)
def test_carried_to_the_strip_by_what_the_model_makes_of_it(name: str, side: str, what: str) -> None:
    """Book times model here over model at the book's conditions, of the card's model without any table, at a place that is
    not a node; and the chain's own values multiply alike."""
    card = CARDS[name]
    tables = card.tables[side]
    flap, mass = tables.pages[-1]
    place = (side, flap_name(card, flap), mass, 1500.0, 12.0)
    book = assessed(card, *place).si(f"{side}_distance")[0]
    here = assessed(card, *place, **STRANGE[what])
    model, model_here = (assessed(model_of(card), *place, **strip).si(f"physics_{side}")[0] for strip in ({}, STRANGE[what]))
    if what == "no standard pressure":  # then the book is read at another pressure altitude
        altitude = float(here["pressure_altitude"][0])
        assert altitude > 2100.0
        moved = (*place[:3], altitude, 12.0)
        book = assessed(card, *moved).si(f"{side}_distance")[0]
        model = assessed(model_of(card), *moved).si(f"physics_{side}")[0]
    assert here.si(f"{side}_distance")[0] == pytest.approx(book * model_here / model, rel=1e-10)
    assert np.isfinite(model_here)
    assert abs(model_here / model - 1.0) > 0.001 or what == "no standard pressure"
    own = [here.si(key)[0] for key in (f"{side}_book_distance", f"physics_{side}", f"{side}_model_distance")]
    assert here.si(f"{side}_distance")[0] == pytest.approx(own[0] * own[1] / own[2], rel=1e-12)
    roll = [here.si(key)[0] for key in (f"{side}_book_roll", f"{side}_roll", f"{side}_model_roll")]
    assert here.si(f"carried_{side}_roll")[0] == pytest.approx(roll[0] * roll[1] / roll[2], rel=1e-12)


def test_moist_air_is_thinner_than_the_book_s() -> None:
    """The book is read in dry air, and the difference carried."""
    strip = {**STILL, "elevation_field": 2000.0, "own_temperature": 30.0}
    dry, moist = (assess(strip, RUNNER, {"humidity": humidity}, takeoff_mass=1000, landing_mass=1000) for humidity in (0, 100))
    bare = [assess(strip, model_of(RUNNER), {"humidity": humidity}, takeoff_mass=1000, landing_mass=1000)
            for humidity in (0, 100)]  # fmt: skip
    for side in BOTH:
        ratio = bare[1].si(f"physics_{side}")[0] / bare[0].si(f"physics_{side}")[0]
        assert moist.si(f"{side}_distance")[0] == pytest.approx(dry.si(f"{side}_distance")[0] * ratio, rel=1e-10)
        assert ratio > 1.005


@pytest.mark.parametrize(
    ("name", "side", "flap", "book_flap"),
    [("ridge-runner", "takeoff", "20", "10"), ("ridge-runner", "takeoff", "up", "10"), ("ridge-runner", "landing", "20", "30"),
     ("high-mule", "takeoff", "15", "28"), ("high-mule", "landing", "up", "40"), ("fixed pitch", "takeoff", "up", "10"),
     ("fixed pitch", "landing", "10", "20"), ("constant speed", "takeoff", "up", "10"), ("fixed pitch", "landing", "up", "20")],
)  # fmt: skip
def test_another_flap_is_carried_from_the_nearest_with_tables(name: str, side: str, flap: str, book_flap: str) -> None:
    card = CARDS[name]
    mass, where = card.tables[side].pages[-1][1] * 0.97, (1500.0, 12.0)
    other, book = (assessed(card, side, setting, mass, *where).si(f"{side}_distance")[0] for setting in (flap, book_flap))
    models = [assessed(model_of(card), side, setting, mass, *where).si(f"physics_{side}")[0] for setting in (flap, book_flap)]
    assert other == pytest.approx(book * models[0] / models[1], rel=1e-10)
    assert other != pytest.approx(book, rel=0.002)


@pytest.mark.parametrize(("name", "side"), [("ridge-runner", "takeoff"), ("ridge-runner", "landing"), ("high-mule", "landing")])
def test_a_mass_outside_the_pages_is_carried_from_the_nearest(name: str, side: str) -> None:
    card = CARDS[name]
    flap, least = card.tables[side].pages[0]
    mass, place = 0.9 * least, (side, flap_name(card, flap))
    light, book = (assessed(card, *place, kg, 1500.0, 12.0).si(f"{side}_distance")[0] for kg in (mass, least))
    models = [assessed(model_of(card), *place, kg, 1500.0, 12.0).si(f"physics_{side}")[0] for kg in (mass, least)]
    assert light == pytest.approx(book * models[0] / models[1], rel=1e-10)
    assert light < 0.99 * book


# -- tables of one figure ----------------------------------------------------------------------------------------------

AXES = ((0, 3000, 6000), (0, 15, 25))
ROLLS, WHOLES = printed(trial_heron(), "takeoff", "10", 1110.0, *AXES)


@pytest.mark.parametrize("fixed", [True, False], ids=["fixed pitch", "constant speed"])
def test_a_table_of_rolls_alone(fixed: bool) -> None:
    """The roll comes out at each node; the rest of the way is the model's share of it."""
    rolls = printed(trial_heron() if fixed else trial_mule(), "takeoff", "10", 1110.0, *AXES)[0]
    card = load((BARE if fixed else MULE) + table("take-off roll", *AXES, rolls, flap="10", mass="1110 kg") + LANDING_POINTS)
    height, heat = (axis.ravel() for axis in np.meshgrid(*AXES, indexing="ij"))
    known = np.isfinite(rolls.ravel())
    height, heat, rolls = height[known], heat[known], rolls.ravel()[known]
    result = assessed(card, "takeoff", "10", 1110.0, height, heat)
    np.testing.assert_allclose(result.si("carried_takeoff_roll"), rolls, atol=EXACT)
    model = assessed(model_of(card), "takeoff", "10", 1110.0, height, heat)
    share = model.si("physics_takeoff") / model.si("takeoff_roll")
    np.testing.assert_allclose(result.si("takeoff_distance"), rolls * share, rtol=1e-10)
    assert "no takeoff distance over 50 ft in the book: the airborne part is the model's own" in card.fit.remarks


def test_a_table_of_distances_alone() -> None:
    """It calibrates nothing, so that points are needed; each node comes out."""
    text = BARE + table("take-off to 50 ft", *AXES, WHOLES, flap="10", mass="1110 kg") + LANDING_POINTS
    with pytest.raises(InputError, match=r"nothing to calibrate the take-off on"):
        load(text)
    card = load(text + TAKEOFF_POINTS)
    assert card.fit.values == load(BARE + POINTS).fit.values
    height, heat = (axis.ravel() for axis in np.meshgrid(*AXES, indexing="ij"))
    result = assessed(card, "takeoff", "10", 1110.0, height, heat)
    np.testing.assert_allclose(result.si("takeoff_distance"), np.ravel(WHOLES), atol=EXACT)
    model = assessed(model_of(card), "takeoff", "10", 1110.0, height, heat)
    share = model.si("takeoff_roll") / model.si("physics_takeoff")
    np.testing.assert_allclose(result.si("carried_takeoff_roll"), np.ravel(WHOLES) * share, rtol=1e-10)


def test_points_and_tables_calibrate_together() -> None:
    """Six figures of a table and two points are the same to the calibration as eight points."""
    alone = load(BARE + POINTS)
    with_table = load(BARE + POINTS + table("take-off roll and to 50 ft", *AXES, ROLLS, WHOLES, flap="10", mass="1110 kg"))
    assert len(with_table.takeoff.roll) == len(alone.takeoff.roll) + 9
    np.testing.assert_array_equal(with_table.landing.roll, alone.landing.roll)
    assert with_table.fit.values["static_thrust"] != alone.fit.values["static_thrust"]
    assert with_table.fit.values["braking_quality"] == alone.fit.values["braking_quality"]


# -- rates of climb ----------------------------------------------------------------------------------------------------

CLIMB_SPEED = 72.0 * KNOT


def at_climb_speed(fixed: bool) -> Card:
    """Flaps up for the take-off, and 50 ft at the manual's climb speed at 1,110 kg."""
    stall = 53.0
    text = changed(BARE if fixed else MULE, ("screen = 1.20", f"screen = {72.0 / stall!r}"),
                   ('takeoff_flap = "10"', 'takeoff_flap = "up"'))  # fmt: skip
    return load(text + CLIMB + MULE_POINTS)  # at that speed the trial card's 50 ft distances make no sense


@pytest.mark.parametrize("fixed", [True, False], ids=["fixed pitch", "constant speed"])
def test_at_the_manual_s_flap_and_speed_the_gradient_is_rate_over_speed(fixed: bool) -> None:
    """At every node of the heaviest page, and between two pages: then the model's own climb cancels."""
    card = at_climb_speed(fixed)
    tables = card.tables["climb"]
    number = tables.pages.index((0.0, 1110.0))
    line, column = np.nonzero(np.isfinite(tables.printed["rate"][number]))
    result = assessed(card, "takeoff", "up", 1110.0, tables.altitudes[line] / FOOT, tables.temperatures[column] - ZERO)
    speed = CLIMB_SPEED / np.sqrt(result.si("sigma"))
    expected = tables.printed["rate"][number][line, column] / speed
    known = np.isfinite(result.si("climb_gradient"))
    assert known.sum() > 8
    np.testing.assert_allclose(result.si("carried_climb")[known], expected[known], rtol=0.0, atol=1e-12)
    np.testing.assert_allclose(result.si("climb_over_ground")[known], expected[known], rtol=0.0, atol=1e-12)


def test_what_a_flap_and_another_speed_take_from_the_climb_is_the_model_s_difference() -> None:
    """carried = rate / speed + (model here - model in the manual's climb), the latter by the lift and drag equations and the
    linearised propeller polar, by hand."""
    card = everything(True, False)
    it, values = assessed(card, "takeoff", "10", 1110.0, 4000.0, 20.0), card.values
    sigma, weight = it.si("sigma")[0], 1110.0 * 9.80665
    speed = CLIMB_SPEED / np.sqrt(sigma)
    rho = 1.225 * sigma
    heat = np.sqrt((288.15 - 0.0065 * 4000.0 * FOOT) / 293.15)  # a piston engine: pressure, and root of the temperature
    felt = 0.12 * (1.0 - heat) + sigma / heat
    thrust = values["static_thrust"] * (felt - 0.12) / 0.88 + values["thrust_slope"] * rho * speed**2
    pressure = 0.5 * rho * speed**2 * values["wing_area"]
    lift = weight / pressure
    aspect = values["span"] ** 2 / values["wing_area"]
    drag = values["parasite_drag"] + lift**2 / (np.pi * aspect * values["efficiency"])
    in_manual = (thrust - drag * pressure) / weight
    expected = 470.0 * FOOT / 60.0 / speed + it.si("climb_gradient")[0] - in_manual
    assert it.si("carried_climb")[0] == pytest.approx(expected, abs=2e-6)  # C and rho0 have more digits than here
    assert it.si("climb_gradient")[0] == assessed(model_of(card), "takeoff", "10", 1110.0, 4000.0, 20.0).si("climb_gradient")[0]


def test_the_climb_counts_where_an_obstacle_stands() -> None:
    """Height over it = 50 ft + gradient x way beyond the 50 ft point - its own; and nothing else changes."""
    strip = {"tora": 900.0, "lda": 900.0, "obstacle_height": 100.0, "obstacle_distance": 1000.0}
    card = everything(True, False)
    one, other = (assessed(each, "takeoff", "10", 1110.0, 2000.0, 20.0, **strip) for each in (card, without(card, "climb")))
    assert one.si("takeoff_distance")[0] == other.si("takeoff_distance")[0]
    way = 900.0 + 1000.0 - one.si("takeoff_distance")[0]
    assert one.si("over_obstacle")[0] == pytest.approx(15.24 + one.si("carried_climb")[0] * way - 100.0 * FOOT, rel=1e-12)
    assert one.si("over_obstacle")[0] != pytest.approx(other.si("over_obstacle")[0], abs=0.1)


def test_a_climb_that_the_manual_says_is_none_is_none() -> None:
    """A rate below nothing is taken as it is, and the aeroplane does not climb away."""
    falling = changed(CLIMB, ("[200.0, 70.0", "[-200.0, -300.0"),
                      ("[460.0, 340.0, 220.0, 110.0]", "[-50.0, -90.0, -120.0, -150.0]"),
                      ("[720.0, 590.0, 470.0, 360.0]", "[720.0, 590.0, -70.0, -100.0]"))  # fmt: skip
    card = load(BARE + falling + POINTS)
    result = assessed(card, "takeoff", "up", 1110.0, 4000.0, 20.0)
    assert result.si("carried_climb")[0] < 0.0
    assert result["takeoff_reason"] == ["does not climb away"]


# -- the manual's own corrections --------------------------------------------------------------------------------------

GRASS = {("takeoff", "dry"): 0.15, ("takeoff", "wet"): 0.30, ("landing", "dry"): 0.40, ("landing", "wet"): 0.60}
NODES = {"takeoff": ("10", 1110.0), "landing": ("30", 1110.0)}
KINDS = pytest.mark.parametrize("fixed", [True, False], ids=["fixed pitch", "constant speed"])
WITH = pytest.mark.parametrize("tables", [True, False], ids=["tables", "points"])


def node(fixed: bool, tables: bool, side: str, **strip: Any) -> Result:
    """2,000 ft and 20 deg C at the flap and mass of a page; or 0 ft and 15 deg C, which is one of the points."""
    where = (0.0, 20.0) if tables else (0.0, 15.0)
    return assessed(corrected(fixed, tables), side, *NODES[side], *where, **strip)


def printed_there(fixed: bool, tables: bool, side: str) -> tuple[float, float]:
    """Roll and distance there: the manual's own, or those of the model where there is no table."""
    card = corrected(fixed, tables)
    if not tables:
        still = node(fixed, tables, side)
        return still.si(f"{side}_roll")[0], still.si(f"physics_{side}")[0]
    book = card.tables[side]
    flap = next(flap.deflection for flap in card.flaps if flap.name == NODES[side][0])
    page = book.pages.index((flap, NODES[side][1]))
    column = int(np.flatnonzero(np.isclose(book.temperatures, ZERO + 20.0))[0])
    return tuple(float(book.printed[figure][page, 0, column]) for figure in ("roll", "distance"))


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_without_wind_on_pavement_the_manual_s_figure_stands(fixed: bool, tables: bool, side: str) -> None:
    distance = printed_there(fixed, tables, side)[1]
    assert node(fixed, tables, side).si(f"{side}_distance")[0] == pytest.approx(distance, abs=EXACT)


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize(
    ("wind", "factor"), [(9.0, 0.90), (4.5, 0.95), (18.0, 0.80), (-2.0, 1.10), (-5.0, 1.25), (0.0, 1.0)]
)
def test_wind_by_the_manual_s_rule(fixed: bool, tables: bool, side: str, wind: float, factor: float) -> None:
    """10 % less for each 9 kt of headwind, 10 % more for each 2 kt of tailwind, of the whole distance."""
    it = node(fixed, tables, side, own_wind_speed=abs(wind), own_wind_from=0.0 if wind >= 0.0 else 180.0)
    assert it.si(f"{side}_distance")[0] == pytest.approx(factor * printed_there(fixed, tables, side)[1], rel=1e-10)


@KINDS
@WITH
@pytest.mark.parametrize(("side", "condition"), GRASS)
def test_grass_by_the_manual_s_rule(fixed: bool, tables: bool, side: str, condition: str) -> None:
    """So many per cent of the roll are added to the distance."""
    it = node(fixed, tables, side, surface="grass", condition=condition)
    roll, distance = printed_there(fixed, tables, side)
    assert it.si(f"{side}_distance")[0] == pytest.approx(distance + GRASS[side, condition] * roll, rel=1e-10)


def on_grass(card: Card, side: str, condition: str, friction: float | None = None) -> Result:
    """A node on grass; with another friction coefficient of that grass, if one is given."""
    rules = load_rules("manual-only")
    if friction is not None:
        key = {"takeoff": "ground_rolling", "landing": "ground_braking"}[side]
        column = np.array(rules.values[key])
        column[GROUND_NAMES.index(f"grass, {condition}")] = friction
        rules = replace(rules, values={**rules.values, key: column})
    strip = {**STILL, "surface": "grass", "condition": condition, "elevation_field": 0.0, "own_temperature": 15.0}
    return assess(strip, card, {}, rules, **{f"{side}_mass": 1000.0, f"{side}_flap": NODES[side][0]})


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize(("condition", "wet"), [("wet", False), ("soft", False), ("soft", True)])
def test_grass_worse_than_the_manual_s_is_carried_by_physics(
    fixed: bool, tables: bool, side: str, condition: str, wet: bool
) -> None:
    """Wet or soft grass of which the manual says nothing: its addition for dry, or wet, grass, on the run with pavement's
    friction and what the ground is worse than that grass. Soft ground is no shorter than by physics alone."""
    card = corrected(fixed, tables)
    if not wet:
        values = {**card.values, **{f"{one}_manual_wet": np.nan for one in BOTH}}
        card = replace(card, values=values)
    of_side = {"takeoff": "rolling", "landing": "braking"}[side]
    own, known, level = (getattr(ground(*where), of_side)
                         for where in (("grass", condition), ("grass", "wet" if wet else "dry"), ("paved", "dry")))  # fmt: skip
    bare = replace(card, corrections=frozenset())
    left = on_grass(bare, side, condition, level + own - known)
    roll_carry = left.si(f"carried_{side}_roll")[0] / left.si(f"{side}_roll")[0] if tables else 1.0
    share = GRASS[side, "wet" if wet else "dry"]
    by_hand = left.si(f"{side}_distance")[0] + share * left.si(f"{side}_roll")[0] * roll_carry
    if condition == "soft":
        by_hand = max(by_hand, on_grass(bare, side, condition).si(f"{side}_distance")[0])
    assert on_grass(card, side, condition).si(f"{side}_distance")[0] == pytest.approx(by_hand, rel=1e-10)


@settings(max_examples=40)
@given(st.floats(0.01, 0.5), st.none() | st.floats(0.0, 0.5), st.booleans(), st.floats(0.6, 1.0))
def test_softer_grass_is_never_shorter(dry: float, more: float | None, fixed: bool, share: float) -> None:
    """Whatever shares the manual gives, for dry grass alone or for both; with no figure counting as the longest."""
    card = corrected(fixed, False)
    wet = np.nan if more is None else dry + more
    shares = {f"{side}_manual_{key}": value for side in BOTH for key, value in (("dry", dry), ("wet", wet))}
    strip = {**STILL, "surface": "grass", "condition": list(CONDITIONS), "elevation_field": 1000.0, "own_temperature": 20.0}
    result = assess(strip, replace(card, values={**card.values, **shares}), {}, takeoff_mass=1110.0 * share,
                    landing_mass=1110.0 * share)  # fmt: skip
    for side in BOTH:
        distances = np.nan_to_num(result.si(f"{side}_distance"), nan=np.inf)
        assert (distances[1:] >= distances[:-1] * (1.0 - 1e-12)).all()


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_wind_and_grass_together(fixed: bool, tables: bool, side: str) -> None:
    it = node(fixed, tables, side, surface="grass", own_wind_speed=9.0, own_wind_from=0.0)
    roll, distance = printed_there(fixed, tables, side)
    assert it.si(f"{side}_distance")[0] == pytest.approx(0.9 * (distance + GRASS[side, "dry"] * roll), rel=1e-10)


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_the_physics_stands_beside(fixed: bool, tables: bool, side: str) -> None:
    """The same number as of the model alone, whatever the manual's corrections say."""
    strip = {"surface": "grass", "condition": "wet", "own_wind_speed": 8.0, "own_wind_from": 30.0, "slope_given": 1.0}
    card = corrected(fixed, tables)
    place = (side, *NODES[side], 3000.0, 25.0)
    found, alone = (assessed(one, *place, **strip).si(f"physics_{side}")[0] for one in (card, model_of(card)))
    assert found == alone
    assert assessed(card, *place, **strip).si(f"{side}_distance")[0] != pytest.approx(found, rel=0.004)


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_what_the_manual_does_not_correct_is_left_to_physics(fixed: bool, tables: bool, side: str) -> None:
    """Slope, gravel and soft grass: with the manual's corrections and without, the same. With grass and a slope the physics
    takes the slope on pavement, in still air, and the manual the rest."""
    card, other = corrected(fixed, tables), replace(corrected(fixed, tables), corrections=frozenset())
    place = (side, *NODES[side], 1000.0, 15.0)
    for strip in ({"slope_given": 1.0}, {"surface": "gravel"}, {"surface": "long grass", "slope_given": -2.0}):
        with_them, without_them = (assessed(one, *place, **strip).si(f"{side}_distance")[0] for one in (card, other))
        assert with_them == pytest.approx(without_them, rel=1e-12) and np.isfinite(with_them)
    sloping, level = (assessed(other, *place, slope_given=slope) for slope in (1.0, 0.0))
    roll_carry = level.si(f"carried_{side}_roll")[0] / level.si(f"{side}_roll")[0] if tables else 1.0
    both = assessed(card, *place, slope_given=1.0, surface="grass", own_wind_speed=9.0, own_wind_from=0.0)
    by_hand = 0.9 * (sloping.si(f"{side}_distance")[0] + GRASS[side, "dry"] * sloping.si(f"{side}_roll")[0] * roll_carry)
    assert both.si(f"{side}_distance")[0] == pytest.approx(by_hand, rel=1e-10)


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_a_strong_headwind_takes_half_at_the_most(fixed: bool, tables: bool, side: str) -> None:
    """Half of lift-off or touchdown speed counts at most, by the manual's rule some 30 %; never more than half in any case."""
    still, strong = (node(fixed, tables, side, own_wind_speed=wind, own_wind_from=0.0) for wind in (0.0, 80.0))
    speed = strong.si({"takeoff": "lift_off_tas", "landing": "touchdown_tas"}[side])[0]
    expected = max(1.0 - 0.1 * (0.5 * speed / KNOT) / 9.0, LEAST_MANUAL_SHARE)
    assert strong.si(f"{side}_distance")[0] == pytest.approx(expected * still.si(f"{side}_distance")[0], rel=1e-10)
    harsh = load(BARE + POINTS + CORRECTIONS.replace('["10 %", "9 kt"]', '["10 %", "2 kt"]'))
    still, strong = (assessed(harsh, side, *NODES[side], 0.0, 15.0, own_wind_speed=wind, own_wind_from=0.0)
                     for wind in (0.0, 80.0))  # fmt: skip
    assert strong.si(f"{side}_distance")[0] == pytest.approx(0.5 * still.si(f"{side}_distance")[0], rel=1e-10)


@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize("given_", ["headwind", "tailwind"])
def test_one_wind_correction_alone_leaves_the_other_to_physics(side: str, given_: str) -> None:
    text = BARE + POINTS + f'\n[book.corrections.{side}]\n{given_} = ["10 %", "4 kt"]\n'
    card = load(text)
    for wind in (-6.0, 6.0):
        strip = {"own_wind_speed": 6.0, "own_wind_from": 0.0 if wind > 0.0 else 180.0}
        found, physics, still = (assessed(one, side, *NODES[side], 0.0, 15.0, **more).si(f"{side}_distance")[0]
                                 for one, more in ((card, strip), (model_of(card), strip), (card, {})))  # fmt: skip
        by_manual = (wind > 0.0) == (given_ == "headwind")
        assert found == pytest.approx(still * (1.0 - 0.1 * wind / 4.0) if by_manual else physics, rel=1e-10)


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
@pytest.mark.parametrize("surface", ["paved", "grass", "gravel"])
def test_calm_is_no_step_by_the_manual_s_rule(fixed: bool, tables: bool, side: str, surface: str) -> None:
    wind = np.array([-1e-7, 0.0, 1e-7])
    it = node(fixed, tables, side, surface=surface, own_wind_speed=np.abs(wind), own_wind_from=np.where(wind < 0.0, 180.0, 0.0))
    distance = it.si(f"{side}_distance")
    assert np.ptp(distance) < 1e-7 * distance[1]
    assert distance[0] > distance[1] > distance[2]


@KINDS
@WITH
@pytest.mark.parametrize("side", BOTH)
def test_more_tailwind_never_shortens_by_the_manual_s_rule(fixed: bool, tables: bool, side: str) -> None:
    wind = np.linspace(60.0, -9.0, 139)
    it = node(fixed, tables, side, surface="grass", own_wind_speed=np.abs(wind), own_wind_from=np.where(wind < 0.0, 180.0, 0.0))
    assert (np.diff(it.si(f"{side}_distance")) >= 0.0).all()


@KINDS
@WITH
def test_the_published_corrections_still_count_where_they_are_longer(fixed: bool, tables: bool) -> None:
    """A rule set that counts both: the greater of the manual's corrected figure and the published factors on its plain one."""
    card, strip = corrected(fixed, tables), {**STILL, "elevation_field": 0.0, "own_temperature": 20.0, "surface": "grass",
                                             "condition": "wet"}  # fmt: skip
    rules = load_rules("uk-leaflet")
    for side in BOTH:
        loading = {f"{side}_mass": 1110.0, f"{side}_flap": NODES[side][0]}
        result, plain = (assess({**strip, **more}, card, {}, rules, **loading) for more in ({}, {"surface": "paved",
                                                                                                 "condition": "dry"}))
        published = result.si(f"{side}_corrections")[0] * plain.si(f"{side}_distance")[0] / plain.si(f"{side}_corrections")[0]
        manual = result.si(f"manual_{side}")[0]
        assert result.si(f"{side}_distance")[0] == pytest.approx(max(manual, published), rel=1e-10)


# -- what is refused ---------------------------------------------------------------------------------------------------

TAKES = 'takes a share and the wind that it stands for, such as ["10 %", "9 kt"]'
TAKEOFF = "trial.toml [book] [corrections] [takeoff]"
BARE_FIGURE = "a bare figure below 0.3 could be a share or a percentage; write it with its sign, as 5 %"
CORRECTION_REFUSALS = [
    ("", f'{TAKEOFF}: no correction is given; write for example headwind = ["10 %", "9 kt"]'),
    ("headwind = 10", f"{TAKEOFF}: headwind {TAKES}"),
    ('headwind = ["10 %"]', f"{TAKEOFF}: headwind {TAKES}"),
    ('headwind = ["10 %", "9 kt", "2 kt"]', f"{TAKEOFF}: headwind {TAKES}"),
    ('tailwind = ["10 %", "9 kg"]', f'{TAKEOFF}: tailwind {TAKES}: "kg" is not a unit of speed; write for example "12 kt"'),
    ('tailwind = ["ten", "9 kt"]', f'{TAKEOFF}: tailwind {TAKES}: "ten" is not a number; write for example "12 %"'),
    ('headwind = ["-10 %", "9 kt"]', f"{TAKEOFF}: headwind {TAKES}"),
    ('headwind = ["", ""]', f"{TAKEOFF}: headwind {TAKES}"),
    ('headwind = ["120 %", "9 kt"]', f"{TAKEOFF}: headwind {TAKES}"),
    ('headwind = ["10 %", "0 kt"]', f"{TAKEOFF}: headwind {TAKES}"),
    ("tailwind = [0.1, 2]", f"{TAKEOFF}: tailwind {TAKES}: {BARE_FIGURE}"),
    ("dry_grass = 0.15", f"{TAKEOFF}: dry_grass: {BARE_FIGURE}"),
    ('dry_grass = "150 %"', f"{TAKEOFF}: dry_grass = 150 % can't be right for a slope; 0 % to 100 % is expected"),
    ('wet_grass = "-5 %"', f"{TAKEOFF}: wet_grass = -5 % can't be right for a slope; 0 % to 100 % is expected"),
    ('dry_grass = "30 %"\nwet_grass = "20 %"',
     f"{TAKEOFF}: wet_grass adds less than dry_grass; wet grass is never easier: check "
     "both"),
    ('wet_grass = "20 %"', f"{TAKEOFF}: wet_grass is given without dry_grass; give both, or dry_grass alone"),
    ('headwind = ["10 %", "2 kt"]\ntailwind = ["10 %", "9 kt"]',
     f"{TAKEOFF}: a knot of tailwind adds less than a knot of headwind "
     "takes off, which no aeroplane does; check whether the two are exchanged"),
    ('dry_grass = "15 %"\nsand = "50 %"',
     f'{TAKEOFF}: "sand" is not an entry here; the entries are: dry_grass, headwind, tailwind, '
     "wet_grass"),
]  # fmt: skip


@pytest.mark.parametrize(("entries", "sentence"), CORRECTION_REFUSALS)
def test_corrections_that_are_refused(entries: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}$"):
        load(f"{HERON}\n[book.corrections.takeoff]\n{entries}\n")


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        ('[book.corrections.take-off]\ndry_grass = "15 %"\n',
         'trial.toml [book] [corrections]: "take-off" is not an entry here; the entries are: landing, takeoff'),
        ('[book.corrections.climb]\nheadwind = ["10 %", "9 kt"]\n',
         'trial.toml [book] [corrections]: "climb" is not an entry here; the entries are: landing, takeoff'),
        ("[book.corrections]\ntakeoff = 3\n",
         "trial.toml [book] [corrections]: [takeoff] must be a part of the file, not a value"),
        (table("rate of climb", (0, 4000), (0, 20), [[700, 600], [400, 300]], flap="up"),
         "trial.toml [book]: climb_speed is missing; it takes a speed"),
    ],
)  # fmt: skip
def test_parts_that_are_refused(text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}$"):
        load(f"{HERON}\n{text}")


HIGH_AXES = ((0, 4000, 8000), (0, 20, 40))


def growing(first: float) -> np.ndarray:
    """Figures of an imagined aeroplane that hardly minds height and heat."""
    height, heat = np.meshgrid(*HIGH_AXES, indexing="ij")
    return np.round(first * np.exp(height / 9000.0 + heat / 80.0))


@pytest.mark.parametrize(
    ("text", "sentence"),
    [
        (BARE + table("take-off to 50 ft", (0, 8000, 17000), (0, 20, 40), growing(480.0), flap="10") + POINTS,
         "trial.toml [book]: the card gives no take-off distance at 17,000 ft and 0 °C, where the manual's table has one: "
         "check power, drag and stall speeds of the card, and that figure"),
        (BARE + table("take-off roll and to 50 ft", *HIGH_AXES, growing(26.0), growing(48.0), flap="10") + LANDING_POINTS,
         "trial.toml: the take-off rolls of the book "),
        (BARE + table("take-off to 50 ft", *HIGH_AXES, growing(480.0), flap="10") + LANDING_POINTS,
         "trial.toml [book]: nothing to calibrate the take-off on: a [[book.table]] with its rolls, or one [[book.takeoff]] "
         "point or more, is needed"),
        (BARE + TAKEOFF_POINTS + table("landing from 50 ft", *HIGH_AXES, growing(480.0), flap="30"),
         "trial.toml [book]: nothing to calibrate the landing on: a [[book.table]] with its rolls, or one [[book.landing]] "
         "point or more, is needed"),
    ],
)  # fmt: skip
def test_cards_that_do_not_go_with_their_tables(text: str, sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}"):
        load(text)


def test_a_table_at_an_estimated_stall_speed_is_refused_for_the_take_off() -> None:
    """As a point would be: thrust and climb could come out too strong."""
    flaps = '\n[flaps]\nkind = "slotted"\nchord = "25 %"\nspan = "60 %"\n'
    text = BARE.replace('stall_speed = "48 kt"\n', "") + flaps
    with pytest.raises(InputError, match="the take-off points at flap 20 need its stall speed on the card"):
        load(text + table("take-off roll", *AXES, ROLLS, flap="20") + POINTS)


# -- any table at all --------------------------------------------------------------------------------------------------

Grids = tuple[np.ndarray, np.ndarray, np.ndarray]


@st.composite
def any_tables(draw: st.DrawFn) -> tuple[Card, int]:
    """One of the cards with its figures exchanged for random ones that rise with mass, height and heat, and a seed.

    Loading would calibrate on them; here they only take the places of the card's own, as typing over the sheet does.
    """
    card = CARDS[draw(st.sampled_from(sorted(CARDS)))]
    seed = draw(st.integers(0, 10**6))
    rng = np.random.default_rng(seed)
    values = dict(card.values)
    for side in BOTH:
        tables = card.tables[side]
        roll = 100.0 + sum(np.cumsum(rng.uniform(0.1, 40.0, tables.known.shape), axis=axis) for axis in range(3))
        for flap in {flap for flap, _ in tables.pages}:
            own = [number for number, page in enumerate(tables.pages) if page[0] == flap]
            roll[own] = np.maximum.accumulate(np.maximum.accumulate(np.maximum.accumulate(roll[own], 0), 1), 2)
        values[f"{side}_roll_table"] = roll
        values[f"{side}_distance_table"] = roll * 1.4 + np.cumsum(rng.uniform(0.0, 20.0, roll.shape), axis=2).cumsum(axis=1)
        order = values[f"{side}_distance_table"]
        for flap in {flap for flap, _ in tables.pages}:
            own = [number for number, page in enumerate(tables.pages) if page[0] == flap]
            order[own] = np.maximum.accumulate(order[own], 0)
    return replace(card, values=values), seed


def inside(card: Card, side: str, rng: np.random.Generator, rows: int) -> dict[str, Any]:
    """Random flap, mass, altitude [ft] and temperature [deg C] within the tables of a side."""
    tables = card.tables[side]
    flap = sorted({flap for flap, _ in tables.pages})[int(rng.integers(0, len({flap for flap, _ in tables.pages})))]
    masses = tables.masses(flap)
    return {"flap": flap_name(card, flap), "mass": rng.uniform(masses[0], masses[-1], rows),
            "altitude": rng.uniform(tables.altitudes[0], tables.altitudes[-1], rows) / FOOT,
            "temperature": rng.uniform(tables.temperatures[0], tables.temperatures[-1], rows) - ZERO}  # fmt: skip


@settings(max_examples=60)
@given(any_tables())
def test_whatever_the_figures_distances_rise_with_height_heat_and_mass(case: tuple[Card, int]) -> None:
    """Within the tables, on level dry pavement in still air; every value is there or has a reason why not."""
    card, seed = case
    rng = np.random.default_rng(seed)
    for side in BOTH:
        at = inside(card, side, rng, 100)
        base = assessed(card, side, **at)
        tables = card.tables[side]
        limits = {"altitude": tables.altitudes[-1] / FOOT, "temperature": tables.temperatures[-1] - ZERO,
                  "mass": max(tables.masses(next(flap.deflection for flap in card.flaps if flap.name == at["flap"])))}
        for axis, most in limits.items():
            more = np.minimum(at[axis] + rng.uniform(0.0, 0.5, 100) * (most - np.min(at[axis])), most)
            harder = assessed(card, side, **{**at, axis: more})
            before, after = base.si(f"{side}_distance"), harder.si(f"{side}_distance")
            known = np.isfinite(before)
            assert (np.nan_to_num(after, nan=np.inf)[known] >= before[known] * (1.0 - 1e-10)).all(), (side, axis)
            assert not (np.isfinite(after) & ~known).any()


@settings(max_examples=40)
@given(any_tables(), st.booleans())
def test_any_table_and_any_strip_as_it_is_walked_and_as_it_is_recorded(case: tuple[Card, int], corrections: bool) -> None:
    """Messy strips over cards of random tables: assess never raises, and the recorded program gives what the walk gives."""
    card, seed = case
    if corrections:
        own = everything(card.propeller == "fixed pitch")
        added = {key: value for key, value in own.values.items() if "_manual_" in key}
        card = replace(card, values={**card.values, **added}, corrections=own.corrections)
    values = {**card.values, **load_rules("uk-leaflet").values, **read_day({"isa_deviation": 10, "humidity": 50}).values,
              **messy_columns(400, seed % 1000)}  # fmt: skip
    rng = np.random.default_rng(seed)
    values["mass_takeoff"] = values["max_takeoff_mass"] * rng.uniform(0.6, 1.02, 400)
    values["mass_landing"] = values["max_landing_mass"] * rng.uniform(0.6, 1.02, 400)
    deflections = np.array([flap.deflection for flap in card.flaps])
    values["takeoff_flap"], values["landing_flap"] = (deflections[rng.integers(0, len(deflections), 400)] for _ in BOTH)
    plain = evaluate(card.chain, values)
    few, chains.FEW = chains.FEW, 0
    try:
        check_same(evaluate(card.chain, values), plain)
    finally:
        chains.FEW = few


def check_same(found: Mapping[str, np.ndarray], expected: Mapping[str, np.ndarray]) -> None:
    for key, values in expected.items():
        if values.dtype.kind == "f":
            np.testing.assert_allclose(found[key], values, rtol=1e-11, atol=1e-9, err_msg=key)
        else:
            np.testing.assert_array_equal(found[key], values, err_msg=key)


@pytest.mark.parametrize("seed", range(4))
def test_a_loaded_card_with_random_tables_gives_them_back(seed: int) -> None:
    """Through the card's file and its calibration: random axes, masses and holes, the trial card's figures scattered."""
    rng = np.random.default_rng(seed)
    altitudes = [0.0, *np.round(np.cumsum(rng.uniform(800.0, 2500.0, 3))).tolist()]
    temperatures = np.round(np.cumsum(rng.uniform(5.0, 14.0, 4)) - 15.0).tolist()
    text, given_ = BARE, []
    for mass in sorted(rng.choice([850.0, 920.0, 1000.0, 1080.0], 2, replace=False)):
        grids = figures(trial_heron(), "takeoff", "10", mass, altitudes, temperatures)
        holes = rng.random(grids[0].shape) < 0.1
        scatter = 1.0 + rng.uniform(0.0, 0.004, holes.shape)
        grids = [np.where(holes, np.nan, np.round(scatter * grid, 1)) for grid in grids]
        given_.append((mass, *grids))
        text += table("take-off roll and to 50 ft", altitudes, temperatures, *grids, flap="10", mass=f"{mass:g} kg")
    card = load(text + LANDING_POINTS)
    height, heat = np.meshgrid(altitudes, temperatures, indexing="ij")
    for mass, roll, distance in given_:
        known = np.isfinite(roll)
        result = assessed(card, "takeoff", "10", mass, height[known], heat[known])
        np.testing.assert_allclose(result.si("carried_takeoff_roll"), roll[known], atol=EXACT)
        np.testing.assert_allclose(result.si("takeoff_distance"), distance[known], atol=EXACT)


@pytest.mark.parametrize("fixed", [True, False], ids=["fixed pitch", "constant speed"])
def test_a_flap_between_two_with_tables_has_no_distance(fixed: bool) -> None:
    """Which only the chain can be asked for; nought would be the shortest distance of all."""
    card = everything(fixed)
    given_ = prepare({**STILL, "elevation_field": 1000.0, "own_temperature": 15.0}, card, {}).given
    found = evaluate(card.chain, {**given_, "takeoff_flap": np.radians(15.0), "landing_flap": np.radians(25.0)})
    for side in BOTH:
        assert np.isnan(found[f"{side}_distance"]).all()
        assert np.isfinite(found[f"{side}_roll"]).all()


def test_the_card_with_everything_says_what_it_took_for_granted() -> None:
    card = load(everything_text())
    assert sorted(card.tables) == ["climb", "landing", "takeoff"] and card.corrections == {"takeoff", "landing"}
    assert len(card.assumed) == 4 and all("missing between others put between them" in line for line in card.assumed)
    assert len(CARDS["fixed pitch"].chain.steps) < len(card.chain.steps)


@pytest.mark.parametrize("place", ["point", "table"])
def test_lift_off_speeds_of_the_manual_make_the_lift_off_factor(tmp_path, place: str) -> None:
    """50 kt stall at 1,110 kg with flap 10, 56 kt at lift-off: 1.12, whatever the card's own factor."""
    if place == "point":
        text = HERON.replace('roll = "265 m"', 'roll = "265 m"\nlift_off_speed = "56 kt"')
    else:
        text = HERON + HEAVY_TABLES.replace('flap = "10"', 'flap = "10"\nlift_off_speed = "56 kt"')
    card = load_text(text, tmp_path)
    assert card.values["lift_off_factor"] == pytest.approx(1.12, rel=1e-9)
    assert trial_heron().values["lift_off_factor"] == 1.08
