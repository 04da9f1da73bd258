"""Calibration: coefficients that made the book figures are found again, and figures out of reach are refused."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest

from stripcheck import assess
from stripcheck.calibrate import least_squares
from stripcheck.card import Card, load_card
from stripcheck.errors import InputError
from tests.aircraft import HERON, changed, load_text, shipped_text

Point = tuple[float, float, float]  # pressure altitude [ft], temperature [degC], mass [kg]


def book(card: Card, values: dict[str, float], side: str, flap: str, points: list[Point]) -> str:
    """Book points that the model itself gives with these coefficients, on level dry pavement in still air."""
    text = ""
    truth = Card(**{**vars(card), "values": {**card.values, **values}})
    whole = "to_50ft" if side == "takeoff" else "from_50ft"
    for feet, celsius, mass in points:
        strip = {"surface": "paved", "elevation_field": feet, "slope_given": 0.0, "tora": 5000.0, "lda": 5000.0}
        result = assess(strip, truth, {"temperature": celsius}, takeoff_mass=mass, landing_mass=mass,
                        **{f"{side}_flap": flap})  # type: ignore[arg-type]  # fmt: skip
        roll, distance = result[f"{side}_roll"][0], result[f"physics_{side}"][0]
        text += (f'[[book.{side}]]\npressure_altitude = "{feet} ft"\ntemperature = "{celsius} °C"\nmass = "{mass} kg"\n'
                 f'flap = "{flap}"\nroll = "{roll:.9f} m"\n{whole} = "{distance:.9f} m"\n\n')  # fmt: skip
    return text


def calibrated(name: str, values: dict[str, float], takeoff: list[Point], landing: list[Point], folder: Path) -> Card:
    """A shipped card whose book points are made from given coefficients, calibrated on them."""
    card = load_card(name)
    flaps = {"ridge-runner": ("10", "30"), "high-mule": ("28", "40")}[name]
    head = shipped_text(name).split("[[book.takeoff]]")[0]
    text = head + book(card, values, "takeoff", flaps[0], takeoff) + book(card, values, "landing", flaps[1], landing)
    return load_text(text, folder)


COMMON = {"takeoff_technique": 0.83, "landing_technique": 1.11, "braking_quality": 0.81}


@pytest.mark.parametrize(("static", "slope"), [(2300.0, -0.25), (2600.0, -0.5), (2100.0, -0.12)])
def test_fixed_pitch_from_two_points(tmp_path: Path, static: float, slope: float) -> None:
    """Low and cool, high and hot: both numbers of the polar come back within 1e-3, and all the rest."""
    truth = {"static_thrust": static, "thrust_slope": slope, **COMMON}
    card = calibrated("ridge-runner", truth, [(0.0, 5.0, 1110.0), (5500.0, 25.0, 1050.0)], [(0.0, 15.0, 1110.0)],
                      tmp_path)  # fmt: skip
    assert card.fit.values == pytest.approx(truth, rel=1e-3)
    assert card.fit.remarks == []
    for label, printed, model in card.fit.residuals:
        assert model == pytest.approx(printed, rel=1e-6), label


@pytest.mark.parametrize("quality", [0.5, 0.66, 0.8])
def test_constant_speed_from_one_point(tmp_path: Path, quality: float) -> None:
    truth = {"propulsive_quality": quality, **COMMON}
    card = calibrated("high-mule", truth, [(2000.0, 20.0, 2700.0)], [(2000.0, 20.0, 2500.0)], tmp_path)
    assert card.fit.values == pytest.approx(truth, rel=1e-3)


def test_fixed_pitch_from_one_point_says_so(tmp_path: Path) -> None:
    """The loss with speed is then a typical value, b = -1.5e-4 a; the point itself is met."""
    truth = {"static_thrust": 2400.0, "thrust_slope": -1.5e-4 * 2400.0, **COMMON}
    card = calibrated("ridge-runner", truth, [(0.0, 15.0, 1110.0)], [(0.0, 15.0, 1110.0)], tmp_path)
    assert card.fit.values == pytest.approx(truth, rel=1e-3)
    assert len(card.fit.remarks) == 1 and card.fit.remarks[0].startswith("one take-off point, or points close together")


def test_without_50_ft_figures_the_airborne_part_is_the_models_own(tmp_path: Path) -> None:
    text = re.sub(r"^(to|from)_50ft = .*\n", "", HERON, flags=re.MULTILINE)
    card = load_text(text, tmp_path)
    assert card.fit.values["takeoff_technique"] == card.fit.values["landing_technique"] == 1.0
    assert card.fit.remarks == [f"no {side} distance over 50 ft in the book: the airborne part is the model's own"
                                for side in ("takeoff", "landing")]  # fmt: skip
    assert not any("50 ft" in label for label, _, _ in card.fit.residuals)


def test_book_points_are_met_by_an_assessment_at_their_conditions() -> None:
    """The residuals are no promise of their own: an assessment at the book's conditions gives the same distance."""
    card = load_card("high-mule")
    label, _, model = card.fit.residuals[0]
    result = assess({"surface": "paved", "elevation_field": 0.0, "slope_given": 0.0, "tora": 900.0}, card,
                    {"temperature": 15}, takeoff_mass=2800.0, takeoff_flap="28")  # fmt: skip
    assert label == "take-off 1: roll"
    assert result["takeoff_roll"][0] == pytest.approx(model, rel=1e-9)


@pytest.mark.parametrize(
    ("name", "changes", "sentence"),
    [
        ("high-mule", [('rated_power = "410 kW"', 'rated_power = "150 kW"')],
         r"the take-off rolls of the book need 1\d\d% of the shaft power as useful power, which is not credible"),
        ("high-mule", [('rated_power = "410 kW"', 'rated_power = "1900 kW"')],
         r"the take-off rolls of the book need 1\d% of the shaft power as useful power, which is not credible"),
        ("heron", [('roll = "265 m"', 'roll = "42 m"'), ('roll = "500 m"', 'roll = "45 m"')],
         r"the take-off rolls of the book need a static thrust of [\d,]+ N for a weight of [\d,]+ N, which is not"),
        ("heron", [('to_50ft = "475 m"', 'to_50ft = "2400 m"'), ('to_50ft = "945 m"', 'to_50ft = "4900 m"')],
         r"from the takeoff roll to the distance over 50 ft the book is \d\.\d\d times the model, which is not"),
        ("heron", [('roll = "180 m"', 'roll = "900 m"'), ('from_50ft = "410 m"', 'from_50ft = "1200 m"'),
                          ('roll = "225 m"', 'roll = "950 m"'), ('from_50ft = "480 m"', 'from_50ft = "1250 m"')],
         r"the landing rolls of the book need \d\.\d\d times the braking of dry pavement, which is not credible"),
        ("heron", [('from_50ft = "410 m"', 'from_50ft = "200 m"'), ('from_50ft = "480 m"', 'from_50ft = "245 m"')],
         r"from the landing roll to the distance over 50 ft the book is 0\.\d\d times the model, which is not"),
    ],
)  # fmt: skip
def test_figures_that_do_not_belong_together(
    tmp_path: Path, name: str, changes: list[tuple[str, str]], sentence: str
) -> None:
    with pytest.raises(InputError, match=rf"^trial\.toml: {sentence}"):
        load_text(changed(HERON if name == "heron" else shipped_text(name), *changes), tmp_path)


def test_least_squares_by_a_plane() -> None:
    """A linear problem, whose answer the normal equations give: numpy's lstsq."""
    rng = np.random.default_rng(7)
    matrix, right = rng.normal(size=(6, 2)), rng.normal(size=6)
    truth = np.linalg.lstsq(matrix, right, rcond=None)[0]
    start, wide = np.zeros(2) + 0.1, np.full(2, 50.0)
    found = least_squares(lambda p: matrix @ p - right, start, -wide, wide)
    np.testing.assert_allclose(found, truth, rtol=1e-6, atol=1e-6)


def test_least_squares_by_scipy() -> None:
    """A curved problem against scipy.optimize.least_squares, from the same start, with and without a bound in the way."""
    from scipy import optimize

    x = np.linspace(0.0, 2.0, 9)
    data = 3.0 * np.exp(-1.3 * x) + 0.05 * np.sin(9.0 * x)

    def residuals(p: np.ndarray) -> np.ndarray:
        return p[0] * np.exp(-p[1] * x) - data

    for high in ([9.0, 9.0], [2.5, 9.0]):
        truth = optimize.least_squares(residuals, [1.0, 1.0], bounds=([0.1, 0.1], high), xtol=1e-12).x
        found = least_squares(residuals, np.array([1.0, 1.0]), np.array([0.1, 0.1]), np.array(high))
        np.testing.assert_allclose(residuals(found) @ residuals(found), residuals(truth) @ residuals(truth), rtol=1e-6)
