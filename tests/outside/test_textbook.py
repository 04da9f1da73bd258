"""Textbook examples and published tables. "Read" and "from memory" say how each figure was taken.

J. D. Anderson, Aircraft Performance and Design, works in feet, slugs and g = 32.2 ft/s2. Functions without a constant
of their own are fed in feet; the others in metres, and then differ by g (0.08 %) besides the book's rounding.
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from stripcheck import airborne, ground_run, speeds, thrust
from stripcheck.airborne import SCREEN
from stripcheck.rules import load_rules
from stripcheck.surface import CONDITIONS, GROUNDS, ground

FOOT = 0.3048
POUND_FORCE = 4.4482216152605  # N, by definition
THREE_DEGREES = math.tan(math.radians(3.0))


def test_anderson_6_6_ground_run() -> None:
    """Example 6.6 (read): K_T 0.301, K_A -4.525e-7 (ft/s)^-2, lift-off 1.1 x 186.4 ft/s: 2,242 ft and 615 ft, 2,857 ft.

    Half a foot is the book's rounding; K_A has four digits, which is 0.1 ft.
    """
    g, lift_off = 32.2, 205.1
    roll = ground_run.speed_run(g * 0.301, g * -4.525e-7, 0.0, lift_off)
    rotation = airborne.free_roll(lift_off, 0.0, 3.0)
    assert roll == pytest.approx(2242.0, abs=0.6)
    assert rotation == pytest.approx(615.0, abs=0.5)
    assert roll + rotation == pytest.approx(2857.0, abs=1.0)


def test_anderson_6_6_ground_effect() -> None:
    """Same example (read): wing 5.6 ft above ground, span 75 ft, G = 0.588."""
    assert ground_run.ground_effect_factor(5.6, 75.0) == pytest.approx(0.588, abs=0.0005)


def test_anderson_6_6_arc_to_35_ft() -> None:
    """Same example (read): on a pull-up arc of radius 7,510 ft, 35 ft is reached at 5.534 deg and 724 ft.

    A flare is that arc flown downward: its height at that angle is 35 ft.
    """
    angle = math.radians(5.534)
    assert airborne.flare_height(7510.0, math.tan(angle)) == pytest.approx(35.0, abs=0.01)
    assert 7510.0 * math.sin(angle) == pytest.approx(724.0, abs=0.5)


def test_anderson_6_7_stall() -> None:
    """Example 6.7 (read): wing loading 76.84 lb/ft2, CLmax 2.39, sea level: 164.5 ft/s."""
    loading = 76.84 * POUND_FORCE / FOOT**2 / 9.80665  # kg/m2
    assert speeds.stall_speed_of_lift(2.39, loading, 1.0) == pytest.approx(164.5 * FOOT, rel=5e-4)
    back = speeds.greatest_lift_coefficient(164.5 * FOOT, loading, 1.0)
    assert back == pytest.approx(2.39, rel=1e-3)


def test_anderson_6_7_flare_and_air_distance() -> None:
    """Same example (read): flare at 202.3 ft/s, radius 6,355 ft, height 8.71 ft; 788 ft from 50 ft, flare 333 ft."""
    flare_speed = 202.3 * FOOT
    radius = airborne.flare_radius(flare_speed)
    assert radius == pytest.approx(6355.0 * FOOT, rel=1e-3)
    assert airborne.flare_height(6355.0, THREE_DEGREES) == pytest.approx(8.71, abs=0.01)
    assert airborne.flare_height(radius, THREE_DEGREES) == pytest.approx(8.71 * FOOT, rel=2e-3)
    assert pytest.approx(50.0 * FOOT, rel=1e-12) == SCREEN
    # 1.3 and 1.15 Vstall are the book's approach and touchdown; it rounds the mean, 1.225, to 1.23: the same here
    whole = airborne.landing_air_distance(flare_speed, flare_speed, THREE_DEGREES, 0.0, 1.0)
    assert whole == pytest.approx((788.0 + 333.0) * FOOT, rel=1e-3)


def test_load_factor() -> None:
    """1 / cos(bank); at 60 deg the stall speed is sqrt(2) times the wings-level one (arithmetic)."""
    assert speeds.load_factor(math.radians(60.0)) == pytest.approx(2.0, rel=1e-14)
    turning = speeds.stall_speed(25.0, 1000.0, 1000.0, speeds.load_factor(math.radians(60.0)))
    assert turning == pytest.approx(25.0 * math.sqrt(2.0), rel=1e-14)


@pytest.mark.parametrize("sigma", [0.5, 0.7, 0.85, 1.0, 1.05])
def test_gagg_and_farrar(sigma: float) -> None:
    """The other usual writing of Gagg and Farrar, sigma - (1 - sigma)/7.55 (from memory); 1.132 is rounded: 0.05 %."""
    other = sigma - (1.0 - sigma) / 7.55
    assert thrust.aspirated_power(1.0, sigma) == pytest.approx(other, abs=5e-4)


def test_drop_off_factor() -> None:
    """Lowry's Phi = (sigma - C)/(1 - C) with C about 0.12 (from memory): nil where only friction is left."""
    assert thrust.drop_off_factor(1.0) == 1.0
    assert thrust.drop_off_factor(0.12) == 0.0
    assert thrust.drop_off_factor(0.8) == pytest.approx(0.68 / 0.88, rel=1e-14)


@pytest.mark.parametrize(
    ("surface", "condition", "least", "most"),
    [
        ("paved", "dry", 0.02, 0.05),  # [M] dry concrete or asphalt 0.02, [R] dry concrete 0.03 to 0.05
        ("paved", "wet", 0.05, 0.05),  # [R] wet concrete
        ("gravel", "dry", 0.04, 0.05),  # [M] hard turf or gravel 0.04
        ("dirt", "dry", 0.04, 0.04),  # [R] firm dirt
        ("grass", "dry", 0.05, 0.05),  # [M] short dry grass, [R] hard turf
        ("grass", "wet", 0.08, 0.08),  # [R] wet grass
        ("long grass", "dry", 0.10, 0.10),  # [M] long grass
        ("gravel", "soft", 0.10, 0.30),  # [M] soft ground 0.10 to 0.30, here and below
        ("dirt", "soft", 0.10, 0.30),
        ("grass", "soft", 0.10, 0.30),
        ("long grass", "soft", 0.10, 0.30),
        ("sand", "soft", 0.10, 0.30),
        ("ice", "dry", 0.02, 0.02),  # [R] ice
    ],
)
def test_rolling_friction(surface: str, condition: str, least: float, most: float) -> None:
    """[M] W. H. Mason, notes to his take-off program, Virginia Tech (read); [R] Raymer and Anderson (from memory)."""
    assert least <= ground(surface, condition).rolling <= most


@pytest.mark.parametrize(
    ("surface", "condition", "most"),
    [
        ("paved", "dry", 0.50),  # [R] dry concrete 0.3 to 0.5; [M] good assumptions 0.30 to 0.35
        ("paved", "wet", 0.30),  # [R] wet concrete 0.15 to 0.3
        ("dirt", "dry", 0.30),  # [R] firm dirt
        ("grass", "dry", 0.40),  # [R] hard turf
        ("grass", "wet", 0.20),  # [R] wet grass
        ("grass", "soft", 0.20),  # [R] soft turf
        ("ice", "dry", 0.10),  # [R] ice 0.06 to 0.10
    ],
)
def test_braking_friction_is_not_above_the_tables(surface: str, condition: str, most: float) -> None:
    """Sources as above. Low is careful here."""
    assert 0.0 < ground(surface, condition).braking <= most


def test_braking_of_dry_firm_ground_is_a_usual_one() -> None:
    """[M] (read): braking 0.20 to 0.40, good assumptions 0.30 to 0.35."""
    for surface in ("paved", "gravel", "dirt", "grass"):
        assert 0.30 <= ground(surface, "dry").braking <= 0.35


def test_the_ground_table_is_in_the_order_of_its_names() -> None:
    assert [row.name for row in GROUNDS] == [f"{s.surface}, {c}" for s in GROUNDS[::3] for c in CONDITIONS]


@pytest.mark.parametrize(
    ("rules", "takeoff", "landing"),
    [
        ("part-cat-b", 1.25, 1.0 / 0.70),  # CAT.POL.A.305 and 330 (read): 70 % of the landing distance available
        ("uk-leaflet", 1.33, 1.43),  # UK leaflet, issue 7c (from memory)
        ("us-private", 1.15, 1.15),  # AC 91-79: 15 % (from memory)
        ("us-135", 1.0, 1.0 / 0.60),  # 14 CFR 135.385: 60 % of the effective length (from memory)
        ("manual-only", 1.0, 1.0),  # no factor, by its name
    ],
)
def test_safety_factors(rules: str, takeoff: float, landing: float) -> None:
    values = load_rules(rules).values
    assert values["takeoff_factor"] == pytest.approx(takeoff, abs=1e-4)
    assert values["landing_factor"] == pytest.approx(landing, abs=1e-4)


def test_safety_factor_between_two_lengths() -> None:
    """Former Australian order 20.7.4 (from memory): 1.15 to 800 m, take-off 1.25 and landing 1.43 from 1,500 m."""
    from stripcheck.links import factored

    values = load_rules("au-small").values
    for side, long in (("takeoff", 1.25), ("landing", 1.43)):
        limits = [values[f"{side}_factor{end}"] for end in ("", "_to", "_long", "_from")]
        assert factored(600.0, *limits) == pytest.approx(600.0 * 1.15, rel=1e-12)
        assert factored(1150.0, *limits) == pytest.approx(1150.0 * 0.5 * (1.15 + long), rel=1e-12)
        assert factored(1800.0, *limits) == pytest.approx(1800.0 * long, rel=1e-12)


@pytest.mark.parametrize(
    ("rules", "side", "surface", "condition", "factor"),
    [
        ("part-cat-b", "takeoff", "grass", "dry", 1.20),  # AMC to CAT.POL.A.305 (read), to 20 cm on firm soil
        ("part-cat-b", "takeoff", "grass", "wet", 1.30),
        ("part-cat-b", "landing", "grass", "dry", 1.15),  # AMC to CAT.POL.A.330/335 (read)
        ("part-cat-b", "landing", "paved", "wet", 1.15),
        ("part-cat-b", "landing", "grass", "wet", 1.15 * 1.15),
        ("uk-leaflet", "takeoff", "grass", "dry", 1.20),  # leaflet, issue 7c (from memory), to the end
        ("uk-leaflet", "takeoff", "grass", "wet", 1.30),
        ("uk-leaflet", "takeoff", "dirt", "soft", 1.25),
        ("uk-leaflet", "takeoff", "grass", "soft", 1.30 * 1.25),  # factors multiply
        ("uk-leaflet", "landing", "grass", "dry", 1.15),
        ("uk-leaflet", "landing", "grass", "wet", 1.35),
        ("uk-leaflet", "landing", "paved", "wet", 1.15),
        ("uk-leaflet", "landing", "grass", "soft", 1.35 * 1.25),
    ],
)
def test_published_surface_factors(rules: str, side: str, surface: str, condition: str, factor: float) -> None:
    column = load_rules(rules).values[f"ground_{side}_factor"]
    assert isinstance(column, np.ndarray)
    row = [ground.name for ground in GROUNDS].index(f"{surface}, {condition}")
    assert column[row] == pytest.approx(factor, rel=1e-9)


def test_published_slope_and_wind_figures() -> None:
    """Part-CAT (read): +5 % for each 1 % uphill or downhill, beyond 2 % only with demonstrated data, 50 and 150 % of wind.

    Leaflet (from memory): 1.10 for 2 % either way. Guideline CAAP 92-1(1) (from memory): slopes, widths, 1:20 to 900 m.
    """
    part_cat, leaflet, guideline = (load_rules(name).values for name in ("part-cat-b", "uk-leaflet", "au-small"))
    assert [part_cat[key] for key in ("upslope_takeoff", "downslope_landing", "slope_limit")] == [0.05, 0.05, 0.02]
    assert [part_cat[key] for key in ("headwind_credit", "tailwind_count")] == [0.5, 1.5]
    assert 1.0 + 2.0 * leaflet["upslope_takeoff"] == pytest.approx(1.10)
    assert 1.0 + 2.0 * leaflet["downslope_landing"] == pytest.approx(1.10)
    keys = ("least_width", "least_width_light", "light_mass", "greatest_slope", "greatest_local_slope",
            "free_gradient", "free_distance")  # fmt: skip
    assert [guideline[key] for key in keys] == pytest.approx([15.0, 10.0, 2000.0, 0.02, 0.0286, 0.05, 900.0])
