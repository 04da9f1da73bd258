"""One strip on one page: verdicts both ways, what limits them, how far it could go, and the flaps compared, as plain text."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from stripcheck import solve
from stripcheck.assessment import Result, assess
from stripcheck.card import Card
from stripcheck.caution import CAUTION
from stripcheck.chance import Chance, chance
from stripcheck.compare import NONE, Comparison, compare_flaps
from stripcheck.day import Day
from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.profile import read_profile
from stripcheck.register.limits import LIMITS, outside
from stripcheck.register.runway_ends import names_from_heading
from stripcheck.register.surface_words import read_surface
from stripcheck.rules import Rules
from stripcheck.surface import GROUND_NAMES, SURFACES
from stripcheck.units import from_si, read_quantity
from stripcheck.verdict import MARGINAL, NOT_ASSESSED, SUITABLE

Array = NDArray[Any]
Asked = tuple[Mapping[str, Any], Card, Day, Rules]

WIDTH = 100  # characters
BLANK = "-"  # stands in a table where there is no value
_SIDES = (("landing", "Landing"), ("takeoff", "Take-off"))
_UNITS = {item.key: item.unit for item in STRIP}
# what is typed for one strip: key -> (kind of quantity, its entry in LIMITS)
_TYPED = {
    "length": ("length", "length"), "tora": ("length", "tora"), "lda": ("length", "lda"), "width": ("length", "width"),
    "elevation_field": ("altitude", "elevation"), "slope_given": ("slope", "slope"), "heading": ("angle", "heading"),
    "obstacle_height": ("altitude", "obstacle_height"), "obstacle_distance": ("length", "obstacle_distance"),
    "approach_obstacle_height": ("altitude", "obstacle_height"),
    "approach_obstacle_distance": ("length", "obstacle_distance"),
}  # fmt: skip


def typed_strip(typed: Mapping[str, str | None]) -> dict[str, Any]:
    """Columns for ``assess`` of one direction from what a user typed: keys of ``inputs.STRIP``, texts or None.

    ``tora`` and ``lda`` are ``length`` where they are not given; the surface may be spelt as in a list. Raises
    InputError for what can't be right.

    >>> typed_strip({"length": "620", "surface": "short turf", "elevation_field": "700 m", "obstacle": "30 m/400"})["tora"]
    620.0
    """
    texts = {key: text for key, text in typed.items() if text not in (None, "")}
    for option, prefix in (("obstacle", ""), ("obstacle_behind", "approach_")):
        if option in texts:
            texts |= _obstacle(str(texts.pop(option)), f"--{option.replace('_', '-')}", prefix)
    strip: dict[str, Any] = {key: _number(str(texts[key]), key) for key in _TYPED if key in texts}
    for key in ("tora", "lda"):
        strip.setdefault(key, strip.get("length", np.nan))
        if np.isnan(strip[key]):
            raise InputError("the strip needs its length: give --length, or both --tora and --lda")
    surface = read_surface(str(texts.get("surface", "")))
    if surface.word not in SURFACES:
        raise InputError(f"--surface: {surface.why}; write one of: {', '.join(SURFACES)}")
    strip |= {"surface": surface.word, "condition": surface.condition}
    if "profile" in texts:
        strip["profile"] = str(read_profile(str(texts["profile"])))
    return strip


def _obstacle(text: str, option: str, prefix: str) -> dict[str, str]:
    height, stroke, distance = text.partition("/")
    if not stroke or not height.strip() or not distance.strip():
        raise InputError(f'{option} {text}: a height and a distance such as "60/400" (ft, m) or "20 m/400 m" are expected')
    return {f"{prefix}obstacle_height": height, f"{prefix}obstacle_distance": distance}


def _number(text: str, key: str) -> float:
    """A typed number in the unit that ``assess`` takes."""
    kind, limit = _TYPED[key]
    label = next(item.label for item in STRIP if item.key == key)
    try:
        value = read_quantity(text, kind)
    except InputError as error:
        raise InputError(f"{label}: {error}") from None
    if outside(limit, np.array([value]))[0]:
        raise InputError(f"{label} of {text}: {LIMITS[limit].sentence}")
    return float(from_si(value, _UNITS[key]))


def one_strip(strip: Mapping[str, Any], card: Card, day: Day, rules: Rules, *, one_way: bool = False,
              **loading: Any) -> list[str]:  # fmt: skip
    """The page on one strip, in lines of 100 characters or fewer.

    ``strip``: columns for ``assess`` of one direction, numbers or texts, no columns; the other direction follows from it.
    ``one_way``: one lands in the direction given and takes off in the other. ``loading`` as for ``assess``. Raises
    InputError as ``assess`` does.

    >>> from stripcheck import load_card, load_rules, read_day
    >>> strip = {"tora": 700, "lda": 700, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass", "heading": 90}
    >>> lines = one_strip(strip, load_card("ridge-runner"), read_day({"temperature": 22}), load_rules("manual-only"))
    >>> lines[0]
    'Strip 09/27: 700 m, grass, dry, elevation 2,300 ft, 1.5 % uphill on 09'
    """
    both = solve.both_directions(strip)
    if one_way:
        both |= {"land_here": ["yes", "no"], "take_off_here": ["no", "yes"]}
    asked: Asked = (both, card, day, rules)
    result = assess(*asked, **loading)
    names = names_from_heading(float(result.given["heading"][0]))
    used = {"landing": result.given["land_here"], "takeoff": result.given["take_off_here"]}
    return [
        *_wrapped(_heading(result, names, card, day, rules, one_way)),
        *_verdicts(result, names, used, chance(*asked, **loading)),
        *_limits(asked, names, used, loading),
        *_aborts(asked, names, used, loading),
        *_break_even(asked, used, loading),
        *_commits(asked, names, used, loading, result),
        *_flaps(both, result, names, used, card, day, rules, loading),
        "",
        *_wrapped([*(f"Taken for granted: {text}" for text in (*day.defaults, *card.assumed)), CAUTION]),
    ]


def _heading(result: Result, names: tuple[str, str], card: Card, day: Day, rules: Rules, one_way: bool) -> list[str]:
    given = result.given
    settings = {flap.deflection: flap.name for flap in card.flaps}
    mass = {side: f"{given[f'mass_{side}']:,.0f} kg, flap {settings[given[f'{side}_flap']]}" for side, _ in _SIDES}
    air = "air not known"
    if np.isfinite(result.si("density")[0]):
        air = (f"{result['air_temperature'][0]:.0f} °C at the strip, QNH {result['qnh_used'][0]:.0f} hPa, "
               f"density altitude {result['density_altitude'][0]:,.0f} ft")  # fmt: skip
    head = from_si(result.si("headwind"), "kt")
    winds = (f"{'headwind' if knots >= 0.0 else 'tailwind'} {abs(knots):.0f} kt on {name}"
             for knots, name in zip(head.tolist(), names, strict=True))  # fmt: skip
    wind = "wind not known" if np.isnan(head[0]) else "calm" if not head.any() else ", ".join(winds)
    return [
        f"Strip {names[0]}/{names[1]}: {_place(result, names, one_way)}",
        f"Aeroplane: {card.name}; take-off {mass['takeoff']}; landing {mass['landing']}",
        f"Day: {air}; {wind}",
        f"Rules: {rules.title}",
    ]


def _place(result: Result, names: tuple[str, str], one_way: bool) -> str:
    given = result.given
    tora, lda = given["tora"][0], given["lda"][0]
    length = f"{tora:,.0f} m" if tora == lda else f"{tora:,.0f} m for take-off, {lda:,.0f} m for landing"
    ground = int(result.si("ground")[0])
    slope = float(result.si("slope")[0])
    uphill = names[0] if slope > 0.0 else names[1]
    mean = "slope not known" if np.isnan(slope) else f"{abs(slope) * 100.0:.1f} % uphill on {uphill}" if slope else "level"
    profile = ", slope profile" if result.profiles else ""
    height = float(result["elevation"][0])
    elevation = "elevation not known" if np.isnan(height) else f"elevation {height:,.0f} ft"
    ways = f"; land on {names[0]} only, take off on {names[1]} only" if one_way else ""
    return (f"{length}, {GROUND_NAMES[ground - 1] if ground <= len(GROUND_NAMES) else 'ground not known'}, "
            f"{elevation}, {mean}{profile}{ways}")  # fmt: skip


def _verdicts(result: Result, names: tuple[str, str], used: Mapping[str, Array], chances: Chance) -> list[str]:
    lines = []
    for side, label in _SIDES:
        available = result.si("landing_available") if side == "landing" else result.given["tora"]
        lines += ["", label.upper()]
        for i, name in enumerate(names):
            lines.append(f"  {name:3} {result[f'{side}_verdict'][i]}: {result[f'{side}_reason'][i]}")
            if not used[side][i]:
                continue
            required = result.si(f"{side}_required")[i]
            if np.isfinite(required):
                lines.append(f"      {result.si(f'{side}_distance')[i]:,.0f} m, with factors {required:,.0f} m of "
                             f"{available[i]:,.0f} m: margin {result.si(f'{side}_margin')[i]:,.0f} m")  # fmt: skip
            lines.append(f"      chance of needing more than the strip has: {chances.texts(side)[i]}")
    return lines


def _limits(asked: Asked, names: tuple[str, str], used: Mapping[str, Array], loading: Mapping[str, Any]) -> list[str]:
    questions = (
        ("Most landing mass", "landing", solve.most_landing_mass(*asked, **loading)),
        ("Most take-off mass", "takeoff", solve.most_takeoff_mass(*asked, **loading)),
        ("Hottest air, landing", "landing", solve.hottest(*asked, side="landing", **loading)),
        ("Hottest air, take-off", "takeoff", solve.hottest(*asked, side="takeoff", **loading)),
        ("Wind along, landing", "landing", solve.least_headwind(*asked, side="landing", **loading)),
        ("Wind along, take-off", "takeoff", solve.least_headwind(*asked, side="takeoff", **loading)),
    )
    rows = [[label, *(text if here else BLANK for text, here in zip(answer.texts(), used[side], strict=True))]
            for label, side, answer in questions]  # fmt: skip
    return ["", "STILL SUITABLE, ALL ELSE AS IT IS", *_table([["", *names], *rows], [22, 36, 36])]


def _aborts(asked: Asked, names: tuple[str, str], used: Mapping[str, Array], loading: Mapping[str, Any]) -> list[str]:
    abort = solve.abort_point(*asked, **loading)
    lines = ["", f"LAST PLACE TO GIVE UP A TAKE-OFF ({solve.REACTION:.0f} s to react, then brakes, no factor)"]
    for name, here, text, check in zip(names, used["takeoff"], abort.texts(), abort.check_texts(), strict=True):
        if here:
            lines += [f"  {name:3} {text}", *([f"      {check}"] if check != NOT_ASSESSED else [])]
    return lines


def _break_even(asked: Asked, used: Mapping[str, Array], loading: Mapping[str, Any]) -> list[str]:
    lines = [f"  {label}: {solve.break_even_wind(*asked, side=side, **loading).texts()[0]}"
             for side, label in _SIDES if used[side].all()]  # fmt: skip
    return ["", "WIND AT WHICH THE OTHER WAY BECOMES BETTER", *lines] if lines else []


def _commits(asked: Asked, names: tuple[str, str], used: Mapping[str, Array], loading: Mapping[str, Any],
             result: Result) -> list[str]:  # fmt: skip
    height, distance = result.given["obstacle_height"], result.given["obstacle_distance"]
    rows = np.flatnonzero(used["landing"] & np.isfinite(height) & np.isfinite(distance)).tolist()
    if not rows:
        return []
    texts = solve.commit_point(*asked, **loading).texts()
    margin = from_si(solve.go_around_margin(result), "ft")
    lines = [f"  {names[i]:3} {texts[i]}" for i in rows]
    return ["", f"LAST PLACE TO GO AROUND AND CLEAR THE GROUND BEYOND BY {margin:.0f} FT "
            f"({solve.FLAP_SECONDS:.0f} s level, take-off flap)", *lines]  # fmt: skip


def _flaps(both: Mapping[str, Any], result: Result, names: tuple[str, str], used: Mapping[str, Array], card: Card, day: Day,
           rules: Rules, loading: Mapping[str, Any]) -> list[str]:  # fmt: skip
    kept = {key: value for key, value in loading.items() if key != "takeoff_flap"}
    tables = {}
    ways = {side: _better_way(result, side, used[side]) for side, _ in _SIDES}
    for way in sorted(set(ways.values())):
        strip = {key: column[way : way + 1] for key, column in both.items()}
        tables[way] = compare_flaps(strip, card, day, rules, **kept)
    landing, takeoff = tables[ways["landing"]], tables[ways["takeoff"]]
    return [
        "", f"FLAPS COMPARED, LANDING ON {names[ways['landing']]} (speeds in kt EAS)", *_landing_table(landing),
        f"  Most margin: {_best(landing.best_landing)}",
        "", f"FLAPS COMPARED, TAKE-OFF ON {names[ways['takeoff']]} (speeds in kt EAS)", *_takeoff_table(takeoff),
        f"  Most margin: {_best(takeoff.best_takeoff)}",
    ]  # fmt: skip


def _better_way(result: Result, side: str, used: Array) -> int:
    """The direction with the better verdict, or then the greater margin."""
    order = {SUITABLE: 0, MARGINAL: 1}
    verdicts, margins = result[f"{side}_verdict"], np.nan_to_num(result.si(f"{side}_margin"), nan=-np.inf)
    return min((0, 1), key=lambda i: (not used[i], order.get(verdicts[i], 2), -margins[i]))


def _best(name: str) -> str:
    return "none of the settings allowed is suitable or marginal" if name == NONE else f"flap {name}"


def _landing_table(table: Comparison) -> list[str]:
    common, touchdown = (from_si(speed, "kt") for speed in (table.common_speed, table.touchdown_speed))
    head = [["Flap", "Stall", "Approach", "Above stall", "Descent,", "Stop from", "From 50 ft", "Margin", "Verdict"],
            ["", "", "", f"at {common:.0f} kt", "idle", f"{touchdown:.0f} kt", "", "", ""]]  # fmt: skip
    verdicts = _allowed(table.landing_verdict, table.landing_allowed)
    columns = (
        _shown(from_si(table.stall_landing, "kt")), _shown(from_si(table.approach, "kt")),
        _shown(from_si(table.above_stall, "kt")), _shown(np.degrees(table.descent_angle), ".1f", "°"),
        _shown(table.stopping_distance, ",.0f", " m"), _shown(table.landing_distance, ",.0f", " m"),
        _shown(table.landing_margin, ",.0f", " m"), verdicts,
    )  # fmt: skip
    return _table([*head, *map(list, zip(table.flaps, *columns, strict=True))], [8, 7, 10, 13, 10, 11, 12, 10, 15])


def _takeoff_table(table: Comparison) -> list[str]:
    head = [["Flap", "Stall", "Lift-off", "Roll", "To 50 ft", "Climb", "Margin", "Verdict"]]
    verdicts = _allowed(table.takeoff_verdict, table.takeoff_allowed)
    columns = (
        _shown(from_si(table.stall_takeoff, "kt")), _shown(from_si(table.lift_off, "kt")),
        _shown(table.takeoff_roll, ",.0f", " m"), _shown(table.takeoff_distance, ",.0f", " m"),
        _shown(100.0 * table.climb_gradient, ".1f", " %"), _shown(table.takeoff_margin, ",.0f", " m"), verdicts,
    )  # fmt: skip
    return _table([*head, *map(list, zip(table.flaps, *columns, strict=True))], [8, 7, 10, 13, 10, 11, 12, 25])


def _allowed(verdicts: Iterable[str], allowed: Array) -> list[str]:
    return [verdict if here else "not allowed" for verdict, here in zip(verdicts, allowed, strict=True)]


def _shown(values: Array, form: str = ".0f", unit: str = "") -> list[str]:
    return [BLANK if np.isnan(value) else f"{value:{form}}{unit}" for value in values.tolist()]


def _table(rows: list[list[str]], widths: list[int]) -> list[str]:
    """Rows with their cells aligned on the left, two blanks before the first."""
    return ["  " + "".join(f"{cell:{width}}" for cell, width in zip(row, widths, strict=True)).rstrip() for row in rows]


def _wrapped(paragraphs: Iterable[str]) -> list[str]:
    return [line for text in paragraphs for line in textwrap.wrap(text, WIDTH, subsequent_indent="  ")]
