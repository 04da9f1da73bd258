"""Facts of the trade: common practice, no source. They hold for both shipped (invented) aeroplanes."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from stripcheck import airborne, assess, ground_run, links, load_card
from stripcheck.card import Card, shipped_cards
from stripcheck.units import from_si

STRIP = {"tora": 1500.0, "lda": 1500.0, "elevation_field": 0.0, "slope_given": 0.0, "surface": "paved"}


@pytest.fixture(params=shipped_cards(), scope="module")
def card(request: pytest.FixtureRequest) -> Card:
    return load_card(request.param)


def stalls(card: Card) -> list[float]:
    """Stall speed at the card's stall mass, which is the greatest take-off mass, by flap setting [kt EAS]."""
    values = card.values
    return [
        float(assess(STRIP, card, {"temperature": 15}, takeoff_mass=values["max_takeoff_mass"],
                     landing_mass=values["max_takeoff_mass"], landing_flap=flap.name)["stall_landing"][0])
        for flap in card.flaps
    ]  # fmt: skip


def test_white_and_green_arc(card: Card) -> None:
    """The bottom of the white arc is the stall in the landing configuration, the bottom of the green arc the clean one."""
    by_flap = stalls(card)
    printed = [from_si(flap.stall_speed, "kt") for flap in card.flaps]
    white, green = min(by_flap), max(by_flap)
    assert by_flap[-1] == white and by_flap[0] == green
    # at the speeds of a short strip CAS, which is printed, and EAS differ by less than 0.1 kt
    assert by_flap == pytest.approx(printed, abs=0.1)


def lift_and_drag(card: Card, flap: int, speed: float) -> tuple[float, float]:
    values = card.values
    lift = airborne.lift_coefficient(values["mass_landing"], 1.225, values["wing_area"], speed)
    parasite = links.drag_with_flap(values["parasite_drag"], card.flaps[flap].deflection, values["flap_deflection"],
                                    values["flap_drag"])  # fmt: skip
    aspect = links.aspect_ratio_of(values["span"], values["wing_area"])
    return lift, ground_run.drag_coefficient(parasite, lift, aspect, values["efficiency"])


def test_flaps_make_the_descent_steeper_and_the_landing_shorter_at_one_speed(card: Card) -> None:
    speed = 1.3 * card.flaps[0].stall_speed
    paths, distances = [], []
    for flap in (0, -1):
        lift, drag = lift_and_drag(card, flap, speed)
        path = airborne.approach_gradient(drag, lift, 0.0, 1.0)
        square = ground_run.air_acceleration(1.225, card.values["wing_area"], card.values["mass_landing"], drag,
                                             card.values["ground_lift"], 0.3)  # fmt: skip
        roll = ground_run.speed_run(ground_run.resistance(0.3, 0.0), square, 0.0, speed)
        paths.append(path)
        distances.append(airborne.landing_air_distance(speed, speed, path, 0.0, 1.0) + roll)
    assert paths[1] > paths[0]
    assert distances[1] < distances[0]


def test_flaps_down_the_whole_landing_is_shorter(card: Card) -> None:
    """Through the assessment, each setting at its own speeds."""
    distances = [float(assess(STRIP, card, {"temperature": 15}, landing_flap=flap.name)["landing_distance"][0])
                 for flap in card.flaps]  # fmt: skip
    assert distances == sorted(distances, reverse=True)
    assert distances[-1] < distances[0]


def test_flaps_lower_the_speed_needed_and_leave_more_above_the_stall(card: Card) -> None:
    by_flap = stalls(card)
    assert all(more < less for less, more in itertools.pairwise(by_flap))
    level_speed = 1.2 * by_flap[0]
    margins = [level_speed / stall for stall in by_flap]
    assert margins == sorted(margins) and margins[0] == pytest.approx(1.2)


def test_seventy_per_cent_of_the_speed_by_half_way() -> None:
    """Not there: stop. 70 % of the speed is about half of the energy; at a steady acceleration half of the run (0.49)."""
    whole, part = (ground_run.speed_run(2.0, 0.0, 0.0, speed) for speed in (30.0, 0.7 * 30.0))
    assert part / whole == pytest.approx(0.7**2, rel=1e-12)
    assert part / whole == pytest.approx(0.5, abs=0.011)


def test_seventy_per_cent_is_on_the_safe_side_where_the_acceleration_falls(card: Card) -> None:
    """As thrust falls with speed, 70 % is reached before half of the run: who has it by half-way has a normal run."""
    half = ground_run.speed_run(2.0, -0.0008, 0.0, 0.7 * 30.0) / ground_run.speed_run(2.0, -0.0008, 0.0, 30.0)
    assert half < 0.49


def test_wind_ratio_in_an_assessment(card: Card) -> None:
    """A headwind shortens a roll by no less than (1 - Vw/V)^2 and by no more than in proportion: arithmetic."""
    strip = {**STRIP, "heading": 0.0, "own_wind_from": 0.0, "own_wind_speed": [0.0, 10.0]}
    result = assess(strip, card, {"temperature": 15}, "manual-only")
    calm, windy = result.si("takeoff_roll")
    share = 1.0 - result.si("wind")[1] / result.si("lift_off_tas")[1]
    assert share**2 < windy / calm < share


def test_one_way_uphill_landing_and_downhill_takeoff(card: Card) -> None:
    """In by the uphill way, out by the downhill one: both shorter than the other way round on a calm day."""
    result = assess({**STRIP, "slope_given": [4.0, -4.0]}, card, {"temperature": 15})
    assert np.diff(result.si("landing_distance"))[0] > 0.0
    assert np.diff(result.si("takeoff_distance"))[0] < 0.0
