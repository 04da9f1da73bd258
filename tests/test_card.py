"""The aircraft card: what it reads, what it assumes, and one sentence for everything that can't be right."""

from __future__ import annotations

import math
import re
from pathlib import Path

import numpy as np
import pytest

from stripcheck.card import TYPICAL, flap_setting, load_card, shipped_cards
from stripcheck.errors import InputError
from stripcheck.inputs import CARD, CONSTANT_SPEED, FIXED_PITCH, POWER_LIMIT, REACH, table_inputs
from tests.aircraft import HERON, changed, load_text

KNOT, FOOT = 1852.0 / 3600.0, 0.3048
OF_TABLES = (*REACH.values(), *(item for side in ("takeoff", "landing", "climb") for item in table_inputs(side)))


@pytest.mark.parametrize("name", shipped_cards())
def test_shipped_cards(name: str) -> None:
    """Each says that it is invented, needs no typical value, and its model comes to the figures of its tables within 3 % rms
    and 10 %; near the ceiling, where the climb to 50 ft is long, it is farthest out."""
    card = load_card(name)
    assert "nvented" in card.note and card.assumed == [] and card.fit.remarks == []
    assert set(card.tables) == {"takeoff", "landing", "climb"} and card.corrections == frozenset()
    for side in ("take-off", "landing"):
        for figure in ("roll", "50 ft"):
            off = [model / book - 1.0 for label, book, model in card.fit.residuals
                   if label.startswith(side) and label.endswith(figure)]  # fmt: skip
            assert len(off) > 20 and math.sqrt(np.mean(np.square(off))) < 0.03 and max(map(abs, off)) < 0.1, (side, figure)


def test_a_fixed_pitch_card() -> None:
    card = load_card("ridge-runner")
    assert (card.name, card.propeller, card.power) == ("Ridge Runner 180", "fixed pitch", "normally aspirated")
    assert set(card.values) == {item.key for item in (*CARD, *FIXED_PITCH, *OF_TABLES)} | {"empty_mass"}
    assert card.values["mass_takeoff"] == 1050.0 and card.values["max_takeoff_mass"] == 1110.0
    assert card.values["crosswind_limit"] == pytest.approx(15.0 * KNOT)
    assert card.values["takeoff_flap"] == pytest.approx(math.radians(10.0))
    assert [flap.name for flap in card.flaps] == ["up", "10", "20", "30"]
    assert card.flaps[3].uses == ("landing",)
    # CLmax = 2 m g / (rho0 S Vs^2), lift equation, by hand for 50 kt
    lift = 2.0 * 1110.0 * 9.80665 / (1.225 * 16.3 * (50.0 * KNOT) ** 2)
    assert card.values["flap_lift"][1] == pytest.approx(lift, rel=1e-6)


def test_a_flat_rated_card() -> None:
    """The rating ends at 10,000 ft in the standard atmosphere: density ratio 0.7385 (ISO 2533)."""
    card = load_card("high-mule")
    assert set(card.values) == {item.key for item in (*CARD, *CONSTANT_SPEED, POWER_LIMIT, *OF_TABLES)} | {"empty_mass"}
    # 10,000 ft in standard air: density ratio 0.7385 over temperature ratio 268.34 / 288.15
    assert card.values["limit_sigma"] == pytest.approx(0.7385 / 0.93125, abs=1e-4)
    assert card.values["rated_power"] == 410e3 and card.values["propeller_diameter"] == 2.6


def test_a_turbo_normalised_card(tmp_path: Path) -> None:
    text = changed(HERON, ('kind = "normally aspirated"', 'kind = "turbo-normalised"\ncritical_altitude = "8000 ft"'),
                   ('kind = "fixed pitch"', 'kind = "constant speed"'), ('roll = "500 m"', 'roll = "330 m"'),
                   ('to_50ft = "945 m"', 'to_50ft = "610 m"'))  # fmt: skip
    card = load_text(text, tmp_path)
    assert card.power == "turbo-normalised" and "limit_sigma" in card.values


def test_typical_values_are_told(tmp_path: Path) -> None:
    """Every entry that a manual seldom prints may be left out; the card lists what stood in."""
    text = HERON
    for _, entry in TYPICAL:
        text = re.sub(rf"^{entry} = .*\n", "", text, flags=re.MULTILINE)
    text = re.sub(r"^height_above_ground = .*\n", "", text, flags=re.MULTILINE)
    card = load_text(text, tmp_path)
    told = "\n".join(card.assumed)
    assert len(card.assumed) == len(TYPICAL) + 1
    for (part, entry), value in TYPICAL.items():
        assert f"trial.toml [{part}]: {entry} not given, {value} used" in told
    assert card.values["wing_height"] == pytest.approx(0.15 * 11.0)
    assert card.values["efficiency"] == 0.75 and card.values["free_roll_seconds"] == 2.0


def test_masses_and_usual_loading_may_be_left_out(tmp_path: Path) -> None:
    text = changed(HERON, ('max_landing = "1110 kg"\n', ""), ('stall_speeds_at = "1110 kg"\n', ""),
                   ('takeoff_mass = "1050 kg"\n', ""), ('landing_mass = "1000 kg"\n', ""))  # fmt: skip
    values = load_text(text, tmp_path).values
    assert [values[key] for key in ("max_landing_mass", "mass_takeoff", "mass_landing")] == [1110.0] * 3
    np.testing.assert_allclose(values["flap_lift"], load_text(HERON, tmp_path).values["flap_lift"])


def test_flap_settings() -> None:
    card = load_card("ridge-runner")
    assert flap_setting("20", card.flaps, "landing", "here") == pytest.approx(math.radians(20.0))
    with pytest.raises(InputError, match='^here: flap "30" is not allowed for take-off by the card$'):
        flap_setting("30", card.flaps, "take-off", "here")
    with pytest.raises(InputError, match='^here: there is no flap setting "15"; the card has: up, 10, 20, 30$'):
        flap_setting("15", card.flaps, "take-off", "here")


def without(part: str) -> tuple[str, str]:
    """A part of the card taken away, up to the next one."""
    match = re.search(rf"^\[{re.escape(part)}\]\n(?:(?!\[).*\n)*", HERON, flags=re.MULTILINE)
    assert match is not None
    return match[0], ""


BOOK_TAKEOFF = re.findall(r"\[\[book\.takeoff\]\]\n(?:(?!\[).*\n)*", HERON)
BOOK_LANDING = re.findall(r"\[\[book\.landing\]\]\n(?:(?!\[).*\n)*", HERON)
REFUSALS = [
    ([without("aeroplane")], "trial.toml: the part [aeroplane] is missing"),
    ([without("mass")], "trial.toml: the part [mass] is missing"),
    ([without("wing")], "trial.toml: the part [wing] is missing"),
    ([without("engine")], "trial.toml: the part [engine] is missing"),
    ([without("propeller")], "trial.toml: the part [propeller] is missing"),
    ([without("limits")], "trial.toml: the part [limits] is missing"),
    ([without("usual")], "trial.toml: the part [usual] is missing"),
    ([(text, "") for text in BOOK_TAKEOFF + BOOK_LANDING], "trial.toml: the part [book] is missing"),
    ([(text, "") for text in BOOK_TAKEOFF],
     "trial.toml [book]: nothing to calibrate the take-off on: a [[book.table]] with its rolls, or one [[book.takeoff]] "
     "point or more, is needed"),
    ([(text, "") for text in BOOK_LANDING],
     "trial.toml [book]: nothing to calibrate the landing on: a [[book.table]] with its rolls, or one [[book.landing]] "
     "point or more, is needed"),
    ([('name = "Trial Heron"\n', "")], "trial.toml [aeroplane]: name is missing; it takes a text"),
    ([('"fixed pitch"', '"paddle"')],
     'trial.toml [propeller]: kind = "paddle" is none of: fixed pitch, constant speed'),
    ([('"normally aspirated"', '"steam"')],
     'trial.toml [engine]: kind = "steam" is none of: normally aspirated, turbo-normalised, flat rated'),
    ([('"normally aspirated"', '"flat rated"')], "trial.toml [engine]: flat_rated_to is missing; it takes a altitude"),
    ([('"normally aspirated"', '"flat rated"\nflat_rated_to = "8000 ft"')],
     "trial.toml [engine]: a flat rated engine goes with a constant-speed propeller"),
    ([('"normally aspirated"', '"turbo-normalised"\ncritical_altitude = "8000 ft"')],
     "trial.toml [engine]: a turbo-normalised engine goes with a constant-speed propeller"),
    ([('empty = "665 kg"', 'empty = "1200 kg"')],
     "trial.toml [mass]: empty = 1200 kg must be below max_landing = 1110 kg"),
    ([('max_landing = "1110 kg"', 'max_landing = "1150 kg"')],
     "trial.toml [mass]: max_landing = 1150 kg must not be above max_takeoff = 1110 kg"),
    ([('stall_speeds_at = "1110 kg"', 'stall_speeds_at = "1150 kg"')],
     "trial.toml [mass]: stall_speeds_at = 1150 kg is expected above the empty mass, 665 kg, and up to max_takeoff, 1110 kg; "
     "a wrong one makes every stall speed wrong"),
    ([('stall_speeds_at = "1110 kg"', 'stall_speeds_at = "600 kg"')],
     "trial.toml [mass]: stall_speeds_at = 600 kg is expected above the empty mass, 665 kg, and up to max_takeoff, 1110 kg"),
    ([('area = "16.3 m²"', 'area = "16.3 m"')],
     'trial.toml [wing]: area: "m" is not a unit of area; write for example "12 m²"'),
    ([('span = "11.0 m"', 'span = "110 m"')], "trial.toml [wing]: span = 110 m can't be right for a length"),
    ([('rated_power = "134 kW"', 'rated_power = "134 W"')],
     "trial.toml [engine]: rated_power = 134 W can't be right for a power"),
    ([('height_above_ground = "2.0 m"', 'height_over_ground = "2.0 m"')],
     'trial.toml [wing]: "height_over_ground" is not an entry here; the entries are: area, height_above_ground, span'),
    ([("[usual]", "[tail]\narea = 3\n[usual]")], 'trial.toml: "tail" is not an entry here; the entries are: '),
    ([('deflection = "10°"', 'deflection = "35°"')],
     "trial.toml: flap settings must be listed from up to down, by deflection"),
    ([('stall_speed = "50 kt"', 'stall_speed = "54 kt"')],
     "trial.toml: the stall speed with flap 10 is above the one with flap up; more flap never raises it"),
    ([('stall_speed = "46 kt"', 'stall_speed = "46"'), ('stall_speed = "46"', 'stall_speed = "25 kt"')],
     "trial.toml: the stall speeds mean lift coefficients of 1.47 to 6.59, which is not credible (0.8 to 4.5): check "
     "the stall speeds, the mass and the wing area"),
    ([('drag = 0.022', 'drag = 0.005')],
     "trial.toml: the drag of flap 20 is below that of flap 10; more flap never lowers it (0.005 and 0.008)"),
    ([('setting = "20"', 'setting = "10"')],
     'trial.toml: there is more than one flap setting "10"; each needs a name of its own'),
    ([('uses = ["landing"]', 'uses = ["taxi"]')],
     "trial.toml [[flap]] number 4: uses must be a list out of: take-off, landing"),
    ([("lift_off = 1.08", "lift_off = 1.25")],
     "trial.toml [speeds]: screen = 1.2 must not be below lift_off = 1.25"),
    ([("touchdown = 1.10", "touchdown = 1.35")],
     "trial.toml [speeds]: approach = 1.3 must not be below touchdown = 1.35"),
    ([('steepest_approach = "8 %"', 'steepest_approach = "4 %"')],
     "trial.toml [landing]: steepest_approach = 4 % can't be right for a slope"),
    ([('takeoff_flap = "10"', 'takeoff_flap = "30"')],
     'trial.toml [usual]: flap "30" is not allowed for take-off by the card'),
    ([('landing_flap = "30"', 'landing_flap = "45"')],
     'trial.toml [usual]: there is no flap setting "45"; the card has: up, 10, 20, 30'),
    ([('takeoff_mass = "1050 kg"', 'takeoff_mass = "1200 kg"')],
     "trial.toml [usual]: takeoff_mass = 1200 kg is expected above the empty mass, 665 kg, and up to max_takeoff, 1110 kg"),
    ([('landing_mass = "1000 kg"', 'landing_mass = "600 kg"')],
     "trial.toml [usual]: landing_mass = 600 kg is expected above the empty mass, 665 kg, and up to max_landing, 1110 kg"),
    ([('to_50ft = "475 m"', 'to_50ft = "265 m"')],
     "trial.toml [book] [[takeoff]] number 1: to_50ft must be longer than roll"),
    ([('from_50ft = "480 m"', 'from_50ft = "225 m"')],
     "trial.toml [book] [[landing]] number 2: from_50ft must be longer than roll"),
    ([('roll = "265 m"', 'roll = "2.65 m"')],
     "trial.toml [book] [[takeoff]] number 1: roll = 2.65 m can't be right for a length"),
]  # fmt: skip


@pytest.mark.parametrize(("changes", "sentence"), REFUSALS)
def test_what_can_not_be_right(tmp_path: Path, changes: list[tuple[str, str]], sentence: str) -> None:
    with pytest.raises(InputError, match=f"^{re.escape(sentence)}") as refused:
        load_text(changed(HERON, *changes), tmp_path)
    assert "\n" not in str(refused.value)


def test_thin_margins_over_the_stall_are_told(tmp_path: Path) -> None:
    """They are not refused: manuals of short-field aeroplanes state such speeds, and their distances belong to them."""
    text = changed(HERON, ("lift_off = 1.08", "lift_off = 1.04"), ("approach = 1.30", "approach = 1.19"))
    assert load_text(text, tmp_path).assumed == [
        "trial.toml [speeds]: lift_off = 1.04 is less than 1.05 times the stall speed, which leaves little for gusts; taken as "
        "meant",
        "trial.toml [speeds]: approach = 1.19 is less than 1.2 times the stall speed, which leaves little for gusts; taken as "
        "meant",
    ]


def test_stall_mass_rounded_on_the_way_from_pounds(tmp_path: Path) -> None:
    """2,447 lb is 1,109.95 kg; a manual may print 1,110 kg beside it."""
    text = changed(HERON, ('max_takeoff = "1110 kg"', 'max_takeoff = "2447 lb"'), ('max_landing = "1110 kg"\n', ""),
                   ('mass = "1110 kg"\nflap = "30"', 'mass = "1109 kg"\nflap = "30"'))  # fmt: skip
    assert load_text(text, tmp_path).stall_mass == 1110.0


def test_one_flap_setting_is_too_few(tmp_path: Path) -> None:
    text = re.sub(r"\[\[flap\]\]\nsetting = \"(?:10|20|30)\"\n(?:[^\[\n].*\n)*", "", HERON)
    with pytest.raises(InputError, match=r"two \[\[flap\]\] parts or more are expected, with flaps up and down"):
        load_text(text, tmp_path)


def test_neither_file_nor_shipped() -> None:
    with pytest.raises(InputError, match='^"heron" is neither a file nor one of the shipped cards: high-mule, '):
        load_card("heron")
