"""The main job: read a list, compute, and write a workbook or a result table. What ``stripcheck fill`` does."""

from __future__ import annotations

import csv
import io
import sys
from collections import Counter
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager
from dataclasses import dataclass
from importlib.resources import files
from math import isnan
from pathlib import Path
from typing import Any, Protocol

import numpy as np

from stripcheck.card import Card, load_card
from stripcheck.caution import CAUTION
from stripcheck.day import Day, read_day
from stripcheck.doors.columns import NATIVE, door_columns, told
from stripcheck.errors import InputError
from stripcheck.flaps import flap_setting
from stripcheck.register import Directions, read_list
from stripcheck.register.values import harmless
from stripcheck.rules import load_rules
from stripcheck.safe_file import refuse_if_open, whole_or_not_at_all
from stripcheck.sheet import strips
from stripcheck.sheet.book import SHORT_ABOVE, Filling, fill, write_workbook
from stripcheck.units import read_quantity
from stripcheck.verdict import VERDICTS

LONG = 5000  # directions from which a progress bar is worth its line
DEMO_LIST = "lantern-range.csv"
DEMO_CARD, DEMO_RULES = "ridge-runner", "part-cat-b"
DEMO_DAY = {"isa_deviation": 15, "qnh": 1015, "wind_from": 310, "wind_speed": 8}


@dataclass(frozen=True)
class Request:
    """What to fill: the list, the file to write, card and rule set by name or path, the day as typed, and options."""

    list: Path
    output: Path
    card: str
    rules: str
    day: Mapping[str, Any]
    takeoff_mass: str | None = None
    landing_mass: str | None = None
    takeoff_flap: str | None = None
    landing_flap: str | None = None
    airports: str | None = None
    sheet: str | None = None
    strict: bool = False
    detail: str | None = None
    formulas: str = "native"
    chance: bool = False
    force: bool = False
    quiet: bool = False


def demo_request(output: Path, force: bool, quiet: bool) -> Request:
    """The request that fills a workbook from the shipped scenario, all of it invented."""
    scenario = Path(str(files("stripcheck") / "scenario" / DEMO_LIST))
    return Request(scenario, output, DEMO_CARD, DEMO_RULES, DEMO_DAY, force=force, quiet=quiet)


def fill_list(request: Request) -> list[str]:
    """Do the job and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    _check_output(request)
    card, rules = load_card(request.card), load_rules(request.rules)
    chosen, flap_names = loading(card, request)
    day = read_day(request.day)
    directions = read_list(request.list, airports=request.airports, sheet=request.sheet, strict=request.strict)
    _check_any(directions)
    check_air(day, directions)
    is_table = request.output.suffix == ".csv"
    full = request.detail == "full" or (request.detail is None and directions.n <= SHORT_ABOVE)
    other = not is_table and request.formulas != NATIVE
    filling = fill(directions, card, day, rules, chosen, flap_names, short=not (is_table or full or other),
                   chances=request.chance)  # fmt: skip
    instead = door_columns(request.formulas, filling) if other else None
    if is_table:
        write_csv(filling, request.output)
        cuts: list[str] = []
    else:
        with _progress(filling, request.quiet) as progress:
            cuts = write_workbook(filling, request.output, full or other, progress, instead)
        cuts += told(instead) if instead else []
    return [*cuts, *summary_lines(filling, request.output)]


class Loading(Protocol):
    """What a user may say of mass and flap."""

    @property
    def takeoff_mass(self) -> str | None: ...
    @property
    def landing_mass(self) -> str | None: ...
    @property
    def takeoff_flap(self) -> str | None: ...
    @property
    def landing_flap(self) -> str | None: ...


def loading(card: Card, request: Loading) -> tuple[dict[str, float], dict[str, str]]:
    """Mass and flap by chain key in SI, and the names of the two flap settings."""
    chosen = {key: float(card.values[key]) for key in ("mass_takeoff", "mass_landing", "takeoff_flap", "landing_flap")}
    for key, typed, greatest in (("mass_takeoff", request.takeoff_mass, "max_takeoff_mass"),
                                 ("mass_landing", request.landing_mass, "max_landing_mass")):  # fmt: skip
        if typed is not None:
            chosen[key] = _mass(typed, "take-off" if "takeoff" in key else "landing", card.values[greatest])
    for key, name, use in (("takeoff_flap", request.takeoff_flap, "take-off"),
                           ("landing_flap", request.landing_flap, "landing")):  # fmt: skip
        if name is not None:
            chosen[key] = flap_setting(name, card.flaps, use, f"--{key.replace('_', '-')}")
    names = {key: next(flap.name for flap in card.flaps if flap.deflection == chosen[key])
             for key in ("takeoff_flap", "landing_flap")}  # fmt: skip
    return chosen, names


def _mass(typed: str, which: str, greatest: float) -> float:
    mass = read_quantity(typed, "mass")
    if not 0.1 * greatest <= mass <= greatest:
        raise InputError(f"{which} mass of {typed}: the card allows up to {greatest:,.0f} kg")
    return mass


def _check_output(request: Request) -> None:
    if request.output.suffix not in (".xlsx", ".csv"):
        raise InputError(f"{request.output}: the name of the file to write must end in .xlsx or .csv")
    for given in (request.list, Path(request.airports or request.list)):
        if request.output.exists() and given.exists() and request.output.samefile(given):
            raise InputError(f"{request.output}: this is the list itself; choose another name for what is written")
    if request.output.exists() and not request.force:
        raise InputError(f"{request.output}: this file exists; choose another name, or add --force to replace it")
    refuse_if_open(request.output)  # now, and not after a long list was worked out
    if not request.output.resolve().parent.is_dir():
        raise InputError(f"{request.output}: the folder does not exist")


def _check_any(directions: Directions) -> None:
    """A list of which nothing is left makes no workbook."""
    if directions.n == 0:
        kinds = Counter(item.what for item in directions.left_out).most_common()
        told = ", ".join(f"{number} {what}" for what, number in kinds) or "it has no rows"
        raise InputError(f"{directions.source}: none of its runways can be assessed ({told}); open strips are expected")


def check_air(day: Day, directions: Directions) -> None:
    """A day without any temperature would leave every strip unassessed: say so at once."""
    if isnan(day.values["temperature"]) and isnan(day.values["isa_deviation"]):
        own = directions.numbers["temperature"]
        if not np.isfinite(own).any():
            raise InputError("no temperature: add --temp or --isa-dev, or give the list a Temperature column")


@contextmanager
def _progress(filling: Filling, quiet: bool) -> Iterator[Callable[[int], None] | None]:
    """A bar on a terminal for long lists; nothing when piped, quiet or short."""
    if quiet or filling.directions.n < LONG or not sys.stderr.isatty():
        yield None
        return
    from tqdm import tqdm

    rows = filling.directions.n + filling.directions.n // 2 + len(filling.directions.left_out) + len(filling.directions.doubts)
    with tqdm(total=rows, unit=" rows", desc="Writing", file=sys.stderr) as bar:
        yield bar.update


def summary_lines(filling: Filling, output: Path) -> list[str]:
    """Counts of verdicts, and what was left out, in a few lines."""
    counts, directions = filling.counts(), filling.directions
    guessed = [f"Taken for granted: {doubt.reason}" for doubt in directions.doubts if doubt.what == "unit not named"]
    kept = f"{directions.n // 2} {'runway' if directions.n == 2 else 'runways'}"
    lines = [f"{output}: {kept}, {len(directions.left_out)} of {directions.rows_read} left out"]
    for side, label in (("in", "Landing"), ("out", "Take-off")):
        lines.append(f"{label}: " + ", ".join(f"{counts[side][verdict]} {verdict}" for verdict in VERDICTS))
    lines.append("In and out: " + "; ".join(f"{number} {words}" for words, number in counts["both"].items() if number))
    return [*guessed, *lines]


def write_csv(filling: Filling, path: Path) -> None:
    """The result table, one row for each direction, whole or not at all. Text that a spreadsheet would take for a
    formula gets an apostrophe before it."""
    varying = filling.chain.depends_on_strip()
    shown = {step.key: filling.shown(step) for step in filling.chain.steps if step.key in varying}
    shown |= filling.chances
    layout = strips.layout(filling.chain, filling.directions, True, bool(filling.chances))
    table = strips.table_of(layout, filling.directions, filling.given, dict.fromkeys(shown, ""), shown)
    kept = [(column.header, made.values) for column, made in zip(layout, table.columns, strict=True)
            if column.key != "key" and column.group != strips.AS_FILLED]  # fmt: skip
    columns = [_plain(values) for _, values in kept]
    with whole_or_not_at_all(path) as file:
        text = io.TextIOWrapper(file, encoding="utf-8-sig", newline="")
        writer = csv.writer(text)
        writer.writerow([*(harmless(header) for header, _ in kept), "Caution"])
        writer.writerows((*row, CAUTION) for row in zip(*columns, strict=True))
        text.detach()  # which empties the buffer; the file itself is closed by who opened it


def _plain(values: Any) -> list[Any]:
    if not isinstance(values, np.ndarray):
        return [harmless(value) if isinstance(value, str) else value for value in values]
    if values.dtype == bool:
        return ["yes" if value else "no" for value in values.tolist()]
    return ["" if isnan(value) else repr(round(value, 9)) for value in values.tolist()]
