"""The chance of needing more than the strip has: exact where it can be told, the same in every run, growing with doubt."""

from __future__ import annotations

from dataclasses import fields, replace
from statistics import NormalDist
from typing import Any

import numpy as np
import pytest

from stripcheck import assess, load_rules
from stripcheck import chance as chances
from stripcheck.chance import POINTS, Errors, _deviates, chance, in_words
from stripcheck.errors import InputError
from stripcheck.units import to_si
from tests.aircraft import trial_heron, trial_mule
from tests.test_laws import CARDS

CARD = CARDS["ridge-runner"]
DAY = {"temperature": 22, "wind_from": 70, "wind_speed": 6}
SURE = Errors(**{field.name: 0.0 for field in fields(Errors)})
NAMES = [field.name for field in fields(Errors)]
STRIP = {"tora": 600.0, "lda": 600.0, "elevation_field": 2300, "slope_given": 2.0, "surface": "grass", "heading": 90.0}
# the actual wind counts, and no factor: what the chance is about
RULES = load_rules("manual-only")
ACTUAL = replace(RULES, values={**RULES.values, "headwind_credit": 1.0, "tailwind_count": 1.0})


def many(rows: int = 60) -> dict[str, Any]:
    random = np.random.default_rng(8)
    length = random.uniform(250.0, 900.0, rows)
    return {"tora": length, "lda": length * 0.9, "elevation_field": random.uniform(0.0, 7000.0, rows),
            "slope_given": random.uniform(-8.0, 9.0, rows), "heading": random.uniform(0.0, 360.0, rows),
            "surface": random.choice(["grass", "gravel", "sand", "ice", "snow"], rows),
            "approach_obstacle_height": np.where(np.arange(rows) % 2, 40.0, np.nan),
            "approach_obstacle_distance": np.where(np.arange(rows) % 2, 200.0, np.nan)}  # fmt: skip


def lengths(share: float, side: str, card: Any = CARD, **strip: Any) -> dict[str, Any]:
    """The strip, as long as so many times the unfactored distance with the actual wind."""
    base = {**STRIP, **strip}
    needed = float(assess({**base, "tora": 5000.0, "lda": 5000.0}, card, DAY, ACTUAL).si(f"{side}_distance")[0])
    return {**base, "tora": share * needed, "lda": share * needed}


@pytest.mark.parametrize("card", [CARD, CARDS["high-mule"], trial_heron(), trial_mule()], ids=lambda card: card.name)
def test_without_errors_the_unfactored_margin_decides(card: Any) -> None:
    result = assess(many(), card, DAY, ACTUAL)
    sure = chance(many(), card, DAY, ACTUAL, errors=SURE, points=16)
    for side, found, available in (("takeoff", sure.takeoff, many()["tora"]),
                                   ("landing", sure.landing, result.si("landing_available"))):  # fmt: skip
        assessed = np.array([verdict != "not assessed" for verdict in result[f"{side}_verdict"]])
        fits = result.si(f"{side}_distance") <= available
        np.testing.assert_array_equal(np.isnan(found), ~assessed)
        np.testing.assert_array_equal(found[assessed], np.where(fits, 0.0, 1.0)[assessed])
        assert {0.0, 1.0} == set(found[assessed].tolist()) and not assessed.all()


def test_the_same_in_every_run_and_for_each_row() -> None:
    first, second = (chance(many(), CARD, DAY) for _ in range(2))
    np.testing.assert_array_equal(first.takeoff, second.takeoff)
    np.testing.assert_array_equal(first.landing, second.landing)
    row = int(np.nanargmin(np.abs(first.takeoff - 0.5)))
    alone = chance({key: column[row : row + 1] for key, column in many().items()}, CARD, DAY)
    assert alone.takeoff[0] == first.takeoff[row]
    assert np.isin([0.0, 1.0], first.takeoff).all() and ((first.takeoff > 0.1) & (first.takeoff < 0.9)).any()


def test_blocks_make_no_difference(monkeypatch: pytest.MonkeyPatch) -> None:
    whole = chance(many(), CARD, DAY, points=128)
    monkeypatch.setattr(chances, "AT_ONCE", 7 * 128)
    parts = chance(many(), CARD, DAY, points=128)
    np.testing.assert_array_equal(parts.takeoff, whole.takeoff)
    np.testing.assert_array_equal(parts.landing, whole.landing)


@pytest.mark.parametrize("side", ["takeoff", "landing"])
@pytest.mark.parametrize("share", [0.94, 0.97, 1.0, 1.03, 1.09])
def test_technique_alone_against_the_normal_distribution(side: str, share: float) -> None:
    """A relative error alone is lognormal: the chance is known. The sample is stratified: good to one point in it."""
    found = getattr(chance(lengths(share, side), CARD, DAY, ACTUAL, errors=replace(SURE, technique=0.05)), side)[0]
    assert found == pytest.approx(1.0 - NormalDist().cdf(np.log(share) / 0.05), abs=1.0 / POINTS + 1e-9)


SMALL = {"temperature": 3.0, "wind": to_si(2.0, "kt"), "slope": 0.004, "mass": 0.01}


@pytest.mark.parametrize(("name", "value"), SMALL.items())
@pytest.mark.parametrize("side", ["takeoff", "landing"])
def test_one_small_error_is_nearly_normal(name: str, value: float, side: str) -> None:
    """Where the distance is nearly straight in an error, the chance is that of a normal distribution with the distance's
    own slope, taken from two assessments. Loose by the curvature: at most 0.02."""
    strip = lengths(1.0, side)
    hair = 0.01 * value
    moved = [assess({**strip, **_moved(name, sign * hair)}, CARD, DAY, ACTUAL, **_masses(name, sign * hair))
             for sign in (-1.0, 1.0)]  # fmt: skip
    low, high = (float(one.si(f"{side}_distance")[0]) for one in moved)
    spread = abs(high - low) / (2.0 * hair) * value
    for deviates in (-0.8, 0.0, 1.2):
        available = strip["tora"] + deviates * spread
        near = chance({**strip, "tora": available, "lda": available}, CARD, DAY, ACTUAL, errors=replace(SURE, **{name: value}))
        assert getattr(near, side)[0] == pytest.approx(NormalDist().cdf(-deviates), abs=0.02)


def _moved(name: str, by: float) -> dict[str, Any]:
    if name == "temperature":
        return {"own_temperature": 22.0 + by}
    if name == "wind":  # more headwind on 090, the crosswind gone, which no distance knows
        head = to_si(6.0, "kt") * np.cos(np.radians(20.0)) + by
        return {"own_wind_from": 90.0, "own_wind_speed": head * 3600.0 / 1852.0}
    return {"slope_given": 2.0 + 100.0 * by} if name == "slope" else {}


def _masses(name: str, by: float) -> dict[str, float]:
    scale = np.exp(by) if name == "mass" else 1.0
    return {"takeoff_mass": 1050.0 * scale, "landing_mass": 1000.0 * scale}


@pytest.mark.parametrize("side", ["takeoff", "landing"])
def test_all_errors_together_against_a_random_sample(side: str) -> None:
    """40,000 pseudo-random points in place of the 1,024: within 0.015, which is three times what such a sample was off by,
    root mean square, over random planes of six errors."""
    random = np.random.default_rng(1).standard_normal((len(NAMES), 40_000))
    strips = [lengths(share, side) for share in (0.95, 1.0, 1.05, 1.12)]
    columns = {**STRIP, "tora": [s["tora"] for s in strips], "lda": [s["lda"] for s in strips]}
    found = getattr(chance(columns, CARD, DAY, ACTUAL), side)
    case = chances.prepare(columns, CARD, DAY, ACTUAL)
    fails = chances._failures(case, chances._uncertain(case.chain), slice(0, 4), random, Errors())[side]
    np.testing.assert_allclose(found, fails.reshape(4, -1).mean(axis=1), atol=0.015)
    assert (np.diff(found) < 0.0).all()


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("side", ["takeoff", "landing"])
def test_more_doubt_never_lowers_the_chance_of_a_strip_that_fits(name: str, side: str) -> None:
    """One error alone: to the point. Among the others: within the sample's error, 0.01, and in the end clearly."""
    def grown(share: float, others: Errors) -> list[float]:
        errors = [replace(others, **{name: times * getattr(Errors(), name)}) for times in (0.0, 0.5, 1.0, 2.0, 4.0)]
        return [float(getattr(chance(lengths(share, side), CARD, DAY, ACTUAL, errors=one), side)[0]) for one in errors]

    alone, among = grown(1.02, SURE), grown(1.12, Errors())
    assert alone[0] == 0.0 < alone[-1] < 0.5 and alone == sorted(alone)
    assert (np.diff(among) > -0.01).all() and among[-1] > among[0]


def test_a_longer_strip_and_a_lighter_aeroplane_have_less_to_fear() -> None:
    by_length = chance({**STRIP, "tora": np.linspace(150.0, 1250.0, 12), "lda": np.linspace(150.0, 1250.0, 12)}, CARD, DAY)
    for shares in (by_length.takeoff, by_length.landing):
        assert shares[0] == 1.0 and shares[-1] == 0.0 and (np.diff(shares) <= 0.0).all()
    masses = np.linspace(900.0, 1110.0, 8).tolist()
    by_mass = chance({**STRIP, "tora": [560.0] * 8}, CARD, DAY, takeoff_mass=masses).takeoff
    assert (np.diff(by_mass) >= 0.0).all() and by_mass[0] < by_mass[-1]


def test_no_credit_is_lost_and_no_factor_counts() -> None:
    """Safety factors and shares of the wind belong to the margin; the published corrections to the distance."""
    bare, factored = (replace(RULES, values={**RULES.values, **more}) for more in (
        {}, {"takeoff_factor": 1.33, "takeoff_factor_long": 1.33, "headwind_credit": 0.5, "tailwind_count": 1.5}))  # fmt: skip
    strip = lengths(1.01, "takeoff")
    assert chance(strip, CARD, DAY, bare).takeoff[0] == chance(strip, CARD, DAY, factored).takeoff[0] > 0.1
    published = replace(RULES, values={**RULES.values, "ground_takeoff_factor": np.full(25, 3.0), "corrections_count": True})
    assert chance(strip, CARD, DAY, published).takeoff[0] == 1.0


def test_a_slope_profile_and_an_assumed_slope_have_an_error_too() -> None:
    unknown = {key: value for key, value in lengths(1.0, "takeoff").items() if key != "slope_given"}
    bent = {**unknown, "profile": f"0:0, 100:1, {unknown['tora']:.1f}:12"}
    only = replace(SURE, slope=0.005)
    for strip, day in ((bent, DAY), (unknown, {**DAY, "assumed_slope": 2})):
        assert 0.0 < chance(strip, CARD, day, ACTUAL, errors=only).takeoff[0] < 1.0
    assert np.isnan(chance(unknown, CARD, DAY, ACTUAL).takeoff[0])


def test_the_sample_is_spread_evenly() -> None:
    """Each error takes each share of the normal distribution once; no two go together by more than a few per cent."""
    sample = _deviates(POINTS)
    expected = [NormalDist().inv_cdf((place + 0.5) / POINTS) for place in range(POINTS)]
    for row in sample:
        np.testing.assert_array_equal(np.sort(row), expected)
    assert np.abs(np.corrcoef(sample) - np.eye(6)).max() < 0.03


def test_words() -> None:
    assert [in_words(share, 4096) for share in (0.0, 1 / 4096)] == ["under 1 in 4,000", "about 1 in 4,000"]
    assert in_words(0.149) == "about 1 in 6" and in_words(0.15) == "about 2 in 10" and in_words(0.9501) == "over 9 in 10"
    found = chance({**STRIP, "surface": ["grass", ""], "tora": 300.0, "lda": 2000.0}, CARD, DAY)
    assert found.texts("takeoff") == ["nearly certain", "not assessed"]
    assert found.texts("landing") == ["under 1 in 1,000", "not assessed"]


def test_what_cannot_be_right_is_refused() -> None:
    with pytest.raises(InputError, match="standard error of wind = -1.0: 0 or more is expected"):
        Errors(wind=-1.0)
    with pytest.raises(InputError, match="standard error of mass = nan"):
        Errors(mass=float("nan"))
    with pytest.raises(InputError, match="a sample of 0 points can't be right"):
        chance(STRIP, CARD, DAY, points=0)
