"""Aircraft cards with tables and corrections of a manual, for tests. All aeroplanes are invented.

Their figures are those of the trial cards' own models, a little off and rounded to 5 m as a manual would print them, so
that they belong together without being the model's.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np

from stripcheck import assess
from stripcheck.card import Card
from tests.aircraft import HERON, load_text, trial_heron, trial_mule

NAMES = {"takeoff": "take-off roll and to 50 ft", "landing": "landing roll and from 50 ft"}
POINTS = re.compile(r"\[\[book\.(?:takeoff|landing)\]\]\n(?:(?!\[).*\n)*")
BARE = POINTS.sub("", HERON)  # the trial card without figures of a manual
TAKEOFF_POINTS, LANDING_POINTS = ("".join(POINTS.findall(HERON)[part]) for part in (slice(0, 2), slice(2, 4)))
MULE = BARE.replace('kind = "fixed pitch"', 'kind = "constant speed"')
MULE_POINTS = re.sub(r"to_50ft = .*\n", "", TAKEOFF_POINTS) + LANDING_POINTS  # whose rest of the way is its own
STILL = {"surface": "paved", "condition": "dry", "slope_given": 0.0, "heading": 0.0, "own_wind_speed": 0.0, "tora": 9000.0,
         "lda": 9000.0, "own_qnh": 1013.25}  # fmt: skip
LEAST_CLIMB = 0.03  # gradient below which the manual prints no take-off

CORRECTIONS = """
[book.corrections.takeoff]
headwind = ["10 %", "9 kt"]
tailwind = ["10 %", "2 kt"]
dry_grass = "15 %"
wet_grass = "30 %"

[book.corrections.landing]
headwind = ["10 %", "9 kt"]
tailwind = ["10 %", "2 kt"]
dry_grass = "40 %"
wet_grass = "60 %"
"""


def table(gives: str, altitudes: Sequence[float], temperatures: Sequence[float], *grids: Sequence[Sequence[float]],
          **entries: str) -> str:  # fmt: skip
    """Text of a [[book.table]]; ``grids`` of figures by altitude and temperature, one or two, NaN for a hole."""
    cells = np.stack([np.asarray(grid, float) for grid in grids], axis=2).reshape(len(altitudes), -1)
    rows = ["[" + ", ".join('"-"' if np.isnan(cell) else repr(float(cell)) for cell in row) + "]" for row in cells]
    named = [f'{name} = "{entry}"' for name, entry in {"gives": gives, **entries}.items()]
    lists = [f"pressure_altitudes = {list(altitudes)}", f"temperatures = {list(temperatures)}"]
    return "\n".join(["", "[[book.table]]", *named, *lists, "values = [", *(f"    {row}," for row in rows), "]", ""])


def figures(card: Card, side: str, flap: str, mass: float, altitudes: Sequence[float],
            temperatures: Sequence[float]) -> tuple[np.ndarray, np.ndarray]:  # fmt: skip
    """Roll and distance over 50 ft [m] of a card's model, level dry pavement, still air, by altitude [ft] and deg C."""
    height, heat = np.meshgrid(altitudes, temperatures, indexing="ij")
    result = assess({**STILL, "elevation_field": height.ravel(), "own_temperature": heat.ravel()}, card, {},
                    **{f"{side}_mass": mass, f"{side}_flap": flap})  # fmt: skip
    climbs = result.si("excess") >= LEAST_CLIMB if side == "takeoff" else True
    return tuple(np.where(climbs, result.si(key), np.nan).reshape(height.shape)
                 for key in (f"{side}_roll", f"physics_{side}"))  # fmt: skip


def printed(card: Card, side: str, flap: str, mass: float, altitudes: Sequence[float],
            temperatures: Sequence[float]) -> list[np.ndarray]:  # fmt: skip
    """The same as a manual would print them: up to 4 % more, with height and heat, and rounded to 5 m."""
    height, heat = np.meshgrid(altitudes, temperatures, indexing="ij")
    off = 1.01 + 0.02 * height / 8000.0 + 0.01 * (heat - 15.0) / 25.0
    return [np.round(figure * off / 5.0) * 5.0 for figure in figures(card, side, flap, mass, altitudes, temperatures)]


def distance_tables(card: Card) -> str:
    """Take-off tables of two flap settings with holes, and landing tables of two; all on axes of their own."""
    takeoff = [
        ("10", 1110.0, (0, 2000, 4000, 6000, 8000), (0, 10, 20, 30, 40)),
        ("10", 1000.0, (0, 2000, 4000, 6000, 8000), (0, 10, 20, 30, 40)),
        ("10", 890.0, (0, 4000, 8000), (0, 20, 40)),
        ("20", 1110.0, (0, 3000, 6000), (-10, 15, 40)),
        ("20", 950.0, (0, 3000, 6000, 9000), (-10, 15, 40)),
    ]
    landing = [
        ("30", 1110.0, (0, 4000, 8000), (0, 20, 40)),
        ("30", 900.0, (0, 4000, 8000), (0, 20, 40)),
        ("20", 1000.0, (0, 2500, 5000), (-5, 15, 35)),
    ]
    parts = []
    for side, pages in (("takeoff", takeoff), ("landing", landing)):
        for flap, mass, altitudes, temperatures in pages:
            grids = printed(card, side, flap, mass, altitudes, temperatures)
            if mass == 1000.0:  # a hole inside, and two at the cold edge
                for grid in grids:
                    grid[1, 1], grid[-1, 0] = np.nan, np.nan
            parts.append(table(NAMES[side], altitudes, temperatures, *grids, flap=flap, mass=f"{mass:g} kg"))
    return "".join(parts)


CLIMB = '\n[book]\nclimb_speed = "72 kt"\n' + "".join([
    table("rate of climb", (0, 4000, 8000, 12000), (-20, 0, 20, 40),
          [[980, 840, 720, 610], [720, 590, 470, 360], [460, 340, 220, 110], [200, 70, np.nan, np.nan]],
          flap="up", mass="1110 kg"),
    table("rate of climb", (0, 4000, 8000, 12000), (-20, 0, 20, 40),
          [[1360, 1200, 1050, 920], [1050, 900, 750, 620], [740, 590, 450, 310], [430, 280, 130, np.nan]],
          flap="up", mass="890 kg"),
    table("rate of climb", (0, 6000), (0, 30), [[700, 560], [380, 240]], flap="20", mass="1110 kg"),
])  # fmt: skip


@cache
def load(text: str) -> Card:
    """The card of a text."""
    with TemporaryDirectory() as folder:
        return load_text(text, Path(folder))


def everything_text(fixed: bool = True, corrections: bool = True) -> str:
    """A card with take-off and landing tables of two flap settings, climb tables, holes, and the manual's corrections."""
    tables = CLIMB + distance_tables(trial_heron() if fixed else trial_mule())
    return (BARE if fixed else MULE) + tables + (CORRECTIONS if corrections else "")


@cache
def everything(fixed: bool = True, corrections: bool = True) -> Card:
    """The card of that text, with a fixed-pitch or a constant-speed propeller."""
    return load(everything_text(fixed, corrections))
