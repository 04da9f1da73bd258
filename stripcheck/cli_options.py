"""What the commands of the command line share: the options of loading and day, and how lines are told."""

from __future__ import annotations

import argparse

from stripcheck.caution import CAUTION
from stripcheck.errors import InputError, one_line

EPILOG = f"Exit codes: 0 done, 2 bad input (one sentence, nothing written), 130 interrupted. {CAUTION}"


def add_loading(parser: argparse.ArgumentParser) -> None:
    """Mass and flap."""
    group = parser.add_argument_group("loading (the card's usual values where not given)")
    group.add_argument("--takeoff-mass", metavar="KG")
    group.add_argument("--landing-mass", metavar="KG")
    group.add_argument("--takeoff-flap", metavar="SETTING", help="name of a setting in the card")
    group.add_argument("--landing-flap", metavar="SETTING", help="name of a setting in the card")


def add_strip_values(parser: argparse.ArgumentParser, required: bool) -> None:
    """One strip; ``required``: what no strip can be without must be given."""
    group = parser.add_argument_group("strip")
    group.add_argument("--length", metavar="M", help="length, usable both ways unless --tora or --lda says otherwise")
    group.add_argument("--tora", metavar="M", help="length usable for take-off")
    group.add_argument("--lda", metavar="M", help="length usable for landing")
    group.add_argument("--width", metavar="M", help="width, where the rule set asks for one")
    group.add_argument("--elev", required=required, metavar="FT", dest="elevation_field", help="elevation of its highest point")
    group.add_argument("--surface", required=required, help="surface, such as grass, gravel, 'wet grass'")
    group.add_argument("--slope", metavar="PCT", dest="slope_given", help="mean slope in the direction given, uphill positive")
    group.add_argument("--heading", metavar="DEG", help="true heading of the direction given; needed in any wind")
    group.add_argument("--obstacle", metavar="FT/M", help="height above and distance beyond the far end")
    group.add_argument("--obstacle-behind", metavar="FT/M", help="height above and distance before the near end")
    group.add_argument("--one-way", action="store_true", help="land in the direction given only, take off in the other only")


def strip_of(options: argparse.Namespace) -> dict[str, str | None]:
    """One strip as typed, by key of ``one_strip.typed_strip``."""
    names = ("length", "tora", "lda", "width", "elevation_field", "surface", "slope_given", "heading", "obstacle",
             "obstacle_behind")  # fmt: skip
    return {name: getattr(options, name) for name in names}


def loading_of(options: argparse.Namespace) -> dict[str, str | None]:
    """Mass and flap as typed."""
    return {name: getattr(options, name) for name in ("takeoff_mass", "landing_mass", "takeoff_flap", "landing_flap")}


def add_day(parser: argparse.ArgumentParser) -> None:
    """QNH, temperature, humidity, wind and ground."""
    group = parser.add_argument_group("day (for strips that have no values of their own in the list)")
    group.add_argument("--temp", metavar="C", dest="temperature", help="air temperature")
    group.add_argument("--temp-at", metavar="FT", dest="temperature_elevation",
                       help="elevation where it was taken; else the same temperature at every strip")  # fmt: skip
    group.add_argument("--isa-dev", metavar="K", dest="isa_deviation", help="ISA deviation at every strip")
    group.add_argument("--qnh", metavar="HPA", help="altimeter setting (usual: 1013.25)")
    group.add_argument("--humidity", metavar="PCT", help="relative humidity (usual: dry air)")
    group.add_argument("--dew-point", metavar="C", help="dew point, instead of the humidity")
    group.add_argument("--wind", metavar="DIR/KT", help="true direction it comes from, and knots, such as 270/10 (usual: calm)")
    group.add_argument("--ground", choices=("dry", "wet", "soft"), dest="day_condition",
                       help="condition of the ground where the list says none (usual: dry)")  # fmt: skip
    group.add_argument("--assume-slope", metavar="PCT", dest="assumed_slope",
                       help="slope against you, both ways, where none is known (usual: not assessed)")  # fmt: skip


def say(lines: list[str], quiet: bool) -> int:
    """Print lines, and the caution after them; returns the exit code."""
    if not quiet:
        print("\n".join((*map(one_line, lines), CAUTION)))
    return 0


def day_of(options: argparse.Namespace) -> dict[str, str | None]:
    """The day as typed, by key of ``inputs.DAY``."""
    names = ("temperature", "temperature_elevation", "isa_deviation", "qnh", "humidity", "dew_point", "day_condition",
             "assumed_slope")  # fmt: skip
    return {name: getattr(options, name) for name in names} | _wind(options.wind)


def _wind(text: str | None) -> dict[str, str | None]:
    """Direction and speed of a wind such as "270/10"."""
    if text is None:
        return {}
    if text.strip().lower() == "calm":
        return {"wind_speed": "0"}
    direction, slash, speed = text.partition("/")
    if not slash or not direction.strip() or not speed.strip():
        raise InputError(f'--wind {text}: a direction and a speed such as 270/10 are expected, or "calm"')
    return {"wind_from": direction, "wind_speed": speed}
