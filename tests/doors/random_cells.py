"""Random arguments for the spreadsheet functions, as a user could type them: numbers, texts with units, left out."""

from __future__ import annotations

import random
from collections.abc import Callable
from typing import Any

from stripcheck.card import shipped_cards
from stripcheck.doors.aircraft import aeroplane_of
from stripcheck.doors.functions import Argument, Function
from stripcheck.rules import shipped_rules
from stripcheck.surface import CONDITIONS, SURFACES

# kind -> least and greatest of the usual unit, and another unit with its own
SPANS: dict[str, tuple[float, float, str, float, float]] = {
    "altitude": (-200.0, 11000.0, "m", -60.0, 3300.0),
    "length": (150.0, 1600.0, "ft", 500.0, 5200.0),
    "speed": (0.0, 25.0, "m/s", 0.0, 12.0),
    "mass": (700.0, 1300.0, "lb", 1500.0, 2900.0),
    "temperature": (-25.0, 45.0, "°F", -10.0, 110.0),
    "pressure": (960.0, 1045.0, "inHg", 28.4, 30.8),
    "slope": (-8.0, 8.0, "%", -8.0, 8.0),
    "humidity": (0.0, 100.0, "%", 0.0, 100.0),
    "angle": (0.0, 360.0, "°", 0.0, 360.0),
    "number": (-500.0, 500.0, "", -500.0, 500.0),
}
SPANS_OF_KEY = {"headwind": (-12.0, 25.0, "kt", -12.0, 25.0), "bank": (0.0, 60.0, "°", 0.0, 60.0),
                "height": (0.0, 250.0, "m", 0.0, 80.0), "beyond": (0.0, 2500.0, "ft", 0.0, 8000.0)}  # fmt: skip
ASKED = {"m": "ft", "ft": "m", "kt": "km/h", "kg": "lb", "°C": "°F", "%": "%"}  # unit of the result -> another
SAME_KIND = (("ft", "m"), ("lb", "kg"), ("kt", "km/h"), ("degC", "degF"), ("gallon", "liter"))
SETS, SLOW_SETS = 40, 4  # of each function; an inverse question takes a tenth of a second


def random_sets(function: Function) -> list[list[Any]]:
    """The sets of arguments with which every door is tried."""
    dice = random.Random(function.name)
    return [random_arguments(function, dice) for _ in range(SLOW_SETS if function.ask else SETS)]


def random_arguments(function: Function, dice: random.Random) -> list[Any]:
    """Arguments of a function as scalars; None stands for one that is left out, at the end or between."""
    card = dice.choice(shipped_cards())
    pair = dice.choice(SAME_KIND)
    texts = {"from_unit": pair[0], "to_unit": pair[1], "unit": ASKED.get(function.unit or "", "")}
    return [None if not argument.required and dice.random() < 0.5
            else texts[argument.key] if argument.kind == "text"
            else random_cell(argument, dice, function, card)() for argument in function.all_arguments]  # fmt: skip


def random_cell(argument: Argument, dice: random.Random, function: Function, card: str) -> Callable[[], Any]:
    """Function that gives a cell for an argument."""
    if argument.kind == "aircraft":
        return lambda: card
    if argument.kind == "rules":
        return lambda: dice.choice(shipped_rules())
    if argument.kind == "surface":
        return lambda: dice.choice(SURFACES)
    if argument.kind == "condition":
        return lambda: dice.choice(CONDITIONS)
    if argument.kind == "flap":
        return lambda: _flap(dice, function, card)
    return lambda: _quantity(argument, dice, 2.2 if card == "high-mule" and argument.kind == "mass" else 1.0)


def _flap(dice: random.Random, function: Function, card: str) -> Any:
    side = "landing" if "LANDING" in function.name or "APPROACH" in function.name else "take-off"
    name = dice.choice([flap.name for flap in aeroplane_of(card).flaps if side in flap.uses])
    return float(name) if name.isdigit() and dice.random() < 0.5 else name


def _quantity(argument: Argument, dice: random.Random, times: float) -> float | str:
    low, high, other, other_low, other_high = SPANS_OF_KEY.get(argument.key) or SPANS[argument.kind]
    if dice.random() < 0.3:
        return f"{times * dice.uniform(other_low, other_high):.3f} {other}".strip()
    return times * dice.uniform(low, high)
