"""Aircraft cards for tests: the text of one with entries changed. All aeroplanes are invented."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import stripcheck
from stripcheck.card import Card, load_card

FOLDER = Path(stripcheck.__file__).parent / "cards"


HERON = """\
[aeroplane]
name = "Trial Heron"
note = "Invented, for tests."

[mass]
empty = "665 kg"
max_takeoff = "1110 kg"
max_landing = "1110 kg"
stall_speeds_at = "1110 kg"

[wing]
area = "16.3 m²"
span = "11.0 m"
height_above_ground = "2.0 m"

[engine]
kind = "normally aspirated"
rated_power = "134 kW"

[propeller]
kind = "fixed pitch"
diameter = "1.95 m"

[drag]
parasite = 0.036
span_efficiency = 0.75
lift_in_the_run = 0.45

# stall speeds are calibrated airspeeds
[[flap]]
setting = "up"
deflection = "0°"
stall_speed = "53 kt"
drag = 0.0

[[flap]]
setting = "10"
deflection = "10°"
stall_speed = "50 kt"
drag = 0.008
uses = ["take-off", "landing"]

[[flap]]
setting = "20"
deflection = "20°"
stall_speed = "48 kt"
drag = 0.022
uses = ["take-off", "landing"]

[[flap]]
setting = "30"
deflection = "30°"
stall_speed = "46 kt"
drag = 0.045
uses = ["landing"]

[speeds]
lift_off = 1.08
screen = 1.20
approach = 1.30
touchdown = 1.10

[landing]
shallowest_approach = "5.2 %"
steepest_approach = "8 %"
time_before_braking = "1.5 s"

[limits]
crosswind = "15 kt"
tailwind = "10 kt"

[usual]
takeoff_mass = "1050 kg"
landing_mass = "1000 kg"
takeoff_flap = "10"
landing_flap = "30"

[[book.takeoff]]
pressure_altitude = "0 ft"
temperature = "15 °C"
mass = "1110 kg"
flap = "10"
roll = "265 m"
to_50ft = "475 m"

[[book.takeoff]]
pressure_altitude = "6000 ft"
temperature = "20 °C"
mass = "1110 kg"
flap = "10"
roll = "500 m"
to_50ft = "945 m"

[[book.landing]]
pressure_altitude = "0 ft"
temperature = "15 °C"
mass = "1110 kg"
flap = "30"
roll = "180 m"
from_50ft = "410 m"

[[book.landing]]
pressure_altitude = "6000 ft"
temperature = "20 °C"
mass = "1110 kg"
flap = "30"
roll = "225 m"
from_50ft = "480 m"
"""


def shipped_text(name: str) -> str:
    """Text of a shipped card, to be loaded from anywhere: the files of its tables are named with their folder."""
    return (FOLDER / f"{name}.toml").read_text(encoding="utf-8").replace('file = "', f'file = "{FOLDER.as_posix()}/')


def changed(text: str, *changes: tuple[str, str]) -> str:
    """The text with each first part put in place of by the second; every first part must be there."""
    for old, new in changes:
        assert old in text, f"{old!r} is not in the card"
        text = text.replace(old, new, 1)
    return text


def load_text(text: str, folder: Path) -> Card:
    """The card of a text, through a file of its own."""
    path = folder / "trial.toml"
    path.write_text(text, encoding="utf-8")
    return load_card(str(path))


@cache
def trial_heron() -> Card:
    """The trial card above, loaded."""
    with TemporaryDirectory() as folder:
        return load_text(HERON, Path(folder))


@cache
def trial_mule() -> Card:
    """The same aeroplane with a constant-speed propeller and no figures to 50 ft."""
    text = changed(HERON, ('kind = "fixed pitch"', 'kind = "constant speed"'), ('to_50ft = "475 m"\n', ""),
                   ('to_50ft = "945 m"\n', ""))  # fmt: skip
    with TemporaryDirectory() as folder:
        return load_text(text, Path(folder))


HEAVY_TABLES = """
[[book.table]]
gives = "take-off roll and to 50 ft"
flap = "10"
pressure_altitudes = [0, 6000, 12000]
temperatures = [0, 20, 40]
values = [
    [235, 420, 275, 490, 320, 565],
    [425, 790, 500, 945, "-", "-"],
    ["-", "-", "-", "-", "-", "-"],
]
"""


@cache
def heavy_tables() -> Card:
    """The trial card with a table of the take-off at its greatest mass, whose last line is all holes."""
    with TemporaryDirectory() as folder:
        return load_text(HERON + HEAVY_TABLES, Path(folder))
