"""Filled workbooks for the tests of a refresh: kinds of them, edits as a user makes them, and what they must come to."""

from __future__ import annotations

import math
import random
import re
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache
from importlib.resources import files
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

import openpyxl

from stripcheck import assess
from stripcheck.card import load_card
from stripcheck.cli import main
from stripcheck.inputs import STRIP
from stripcheck.profile_run import KEYS as PROFILE
from stripcheck.sheet.strips import PROFILE_TEXT, input_column
from tests.aircraft import FOLDER, HERON
from tests.book_parts import Parts, SheetText, hide, reorder, shift, unshare
from tests.user_content import HEADER_ROWS, MINE, add_everything

LIST = str(files("stripcheck") / "scenario" / "lantern-range.csv")
CHOSEN = (1, 3, 6, 8, 17, 28)  # rows of that list: obstacles, one-way, nothing but lengths, a fault
PROFILES = {"XTLF": '"0:0, 500:1, 1050:3"', "XFLC": '"0:0, 300:-8, 820:-18.3"'}
DAY: dict[str, Any] = {"isa_deviation": 15, "qnh": 1015, "wind_from": 310, "wind_speed": 8}
KINDS = {
    "full": (), "short": ("--detail", "short"), "chance": ("--chance",), "profile": (), "plain": (), "many tables": (),
    "none": ("--formulas", "none"), "many tables none": ("--formulas", "none"), "excel": ("--formulas", "excel"),
    "calc": ("--formulas", "calc"), "lambda": ("--formulas", "lambda"), "small": ("--detail", "short"),
}  # fmt: skip
_CARDS = {"lambda": "heron", "plain": "heron", "small": "heron", "many tables": "high-mule", "many tables none": "high-mule"}
HEADERS = {item.key: input_column(item).header for item in STRIP}
_FOLDER = TemporaryDirectory()


def card_of(kind: str) -> str:
    """Name or path of the card that a kind is filled for."""
    name = _CARDS.get(kind, "ridge-runner")
    if name != "heron":
        return name
    path = Path(_FOLDER.name) / "heron.toml"
    path.write_text(HERON, encoding="utf-8")
    return str(path)


def sister_of(kind: str, folder: Path) -> str:
    """A card of the same make as that of a kind, with another wing and, where they stand on the card, other figures."""
    if _CARDS.get(kind) == "heron":
        text = HERON
    else:
        text = (FOLDER / f"{card_of(kind)}.toml").read_text(encoding="utf-8")
        for table in FOLDER.glob(f"{card_of(kind)}*.csv"):
            (folder / table.name).write_bytes(table.read_bytes())
    text = re.sub(r'(?m)^area = "([\d.]+)', lambda found: f'area = "{float(found[1]) * 1.03:.2f}', text)
    text = re.sub(r"(?m)^    \[.*$", lambda row: re.sub(r"\d+", lambda figure: str(round(int(figure[0]) * 1.03)), row[0]), text)
    path = folder / "sister.toml"
    path.write_text(text.replace('name = "', 'name = "Sister of ', 1), encoding="utf-8")
    return str(path)


@cache
def filled(kind: str) -> Path:
    """A workbook of a kind, not to be written to."""
    lines = Path(LIST).read_text(encoding="utf-8").splitlines()
    kept = [lines[at] for at in (0, *CHOSEN)]
    if kind == "profile":
        kept = [f"{line},{PROFILES.get(line.split(',')[0], '') if at else 'Profile'}" for at, line in enumerate(kept)]
    stem = kind.replace(" ", "-")
    listed, path = Path(_FOLDER.name) / f"{stem}.csv", Path(_FOLDER.name) / f"{stem}.xlsx"
    listed.write_text("\n".join(kept), encoding="utf-8")
    day = ("--isa-dev", "15", "--qnh", "1015", "--wind", "310/8")
    arguments = ["fill", str(listed), "--card", card_of(kind), "--rules", "part-cat-b", *day, "--quiet", *KINDS[kind]]
    assert main([*arguments, "-o", str(path)]) == 0
    return path


@cache
def _with_everything(kind: str, macros: bool) -> Parts:
    parts = Parts.read(filled(kind))
    add_everything(parts, macros)
    return parts


def with_everything(kind: str, macros: bool = False) -> Parts:
    """The parts of a workbook of a kind with everything of a user's in it."""
    return Parts(_with_everything(kind, macros))


# --- edits as a user makes them


@dataclass
class State:
    """What a workbook stands for, as far as the edits told."""

    card: str
    day: dict[str, Any] = field(default_factory=lambda: dict(DAY))
    rules: str = "part-cat-b"
    loading: dict[str, Any] = field(default_factory=dict)


def type_on_page(parts: Parts, title: str, label: str, value: float | str | None) -> None:
    """Type a value beside a label of a page; what follows from it keeps the result that it had."""
    part = parts.sheet(title)
    sheet = SheetText.of(parts.text(part))
    row = next(row for row in sorted(sheet.rows) if sheet.shown(row, 1) == label)
    sheet.type(row, 2, value)
    parts.put(part, str(sheet))


def type_on_strips(parts: Parts, row: int, key: str, value: float | str | None) -> None:
    """Type an input of a direction, where the workbook has its column."""
    part = parts.sheet("Strips")
    sheet = SheetText.of(parts.text(part))
    column = sheet.headers(3).get(HEADERS.get(key, key))
    if column:
        sheet.type(row, column, value)
        parts.put(part, str(sheet))


def rows_of(parts: Parts, title: str) -> list[int]:
    """The rows with a key, which are those that were filled."""
    sheet = SheetText.of(parts.text(parts.sheet(title)))
    header = HEADER_ROWS[title]
    key = sheet.headers(header)["Key" if title == "Strips" else "Key 1"]
    return [row for row in sorted(sheet.rows) if row > header and sheet.shown(row, key)]


def move_rows(parts: Parts, chance: random.Random) -> None:
    """Sort, hide, insert, delete and append rows of the sheets Strips and Summary."""
    unshare(parts, "Strips")
    unshare(parts, "Summary")
    for title in ("Strips", "Summary"):
        rows = rows_of(parts, title)
        if chance.random() < 0.5:
            reorder(parts, title, rows, chance.sample(rows, len(rows)))
        if chance.random() < 0.4:
            hide(parts, title, chance.sample(rows, 3))
    if chance.random() < 0.4:
        shift(parts, "Strips", chance.choice(rows_of(parts, "Strips")[:-1]), -chance.randint(1, 2))
    if chance.random() < 0.3:
        shift(parts, "Summary", chance.choice(rows_of(parts, "Summary")[:-1]), -1)
    if chance.random() < 0.4:
        first, *others = rows_of(parts, "Strips")
        place = chance.choice(others)
        shift(parts, "Strips", place, 1)
        copy_direction(parts, first, place, "XNEW", chance)
    if chance.random() < 0.4:
        last = rows_of(parts, "Strips")[-1]
        shift(parts, "Strips", last + 1, 2)
        for row, way in ((last + 1, "17"), (last + 2, "35")):
            copy_direction(parts, last, row, "XADD", chance, way)


def copy_direction(parts: Parts, source: int, row: int, strip: str, chance: random.Random, way: str = "05") -> None:
    """Type a direction into a row, with the values of another but a length of its own; no key, and nothing of ours."""
    part = parts.sheet("Strips")
    sheet = SheetText.of(parts.text(part))
    columns = sheet.headers(3)
    for key, header in HEADERS.items():
        if header in columns and key not in PROFILE and key not in ("fault", "local_slope"):
            sheet.put(row, columns[header], *_copied(sheet.rows[source].get(columns[header], "")))
    for key in ("tora", "lda", "length"):
        sheet.type(row, columns[HEADERS[key]], float(chance.randint(350, 1500)))
    for header, text in (("Strip", strip), ("Name", strip.title()), ("Direction", way)):
        sheet.type(row, columns[header], text)
    parts.put(part, str(sheet))


def _copied(cell: str) -> tuple[str, str]:
    kind = cell.split(">")[0].rpartition(' t="')[2].rstrip('"/') if ' t="' in cell.split(">")[0] else ""
    inside = cell[cell.index(">") + 1 : cell.rindex("</c>")] if "</c>" in cell else ""
    return inside, kind


def type_at_random(parts: Parts, state: State, chance: random.Random) -> None:
    """Type over inputs of strips, of the day and of the loading."""
    for row in rows_of(parts, "Strips"):
        if chance.random() < 0.3:
            key, value = chance.choice((
                ("tora", float(chance.randint(250, 1600))), ("lda", float(chance.randint(250, 1600))), ("surface", "gravel"),
                ("surface", "moss"), ("condition", "wet"), ("slope_given", chance.randint(-60, 60) / 10.0), ("tora", None),
                ("elevation_field", float(chance.randint(0, 9000))), ("obstacle_height", 60.0), ("own_qnh", 1003.0),
                ("take_off_here", "no"), ("fault", "length: paced, not measured"), ("own_temperature", 31.0),
            ))  # fmt: skip
            type_on_strips(parts, row, key, value)
    day = (("QNH", "qnh", float(chance.randint(990, 1030))), ("Wind", "wind_speed", float(chance.randint(0, 14))),
           ("Ground condition", "day_condition", chance.choice(("dry", "wet", "soft"))),
           ("Slope assumed", "assumed_slope", 2.5))  # fmt: skip
    for label, key, value in day:
        if chance.random() < 0.3:
            type_on_page(parts, "Day", label, value)
            state.day[key] = value
    if chance.random() < 0.3:
        heavy = 2.6 if state.card == "high-mule" else 1.0
        state.loading["takeoff_mass"] = chance.choice((880.0, 930.0, 1000.0)) * heavy
        type_on_page(parts, "Aircraft", "Take-off mass", state.loading["takeoff_mass"])


def options_at_random(kind: str, state: State, chance: random.Random, folder: Path) -> list[str]:
    """Options of a refresh; the state follows."""
    options: list[str] = []
    heavy = 2.6 if "many" in kind else 1.0
    if chance.random() < 0.3:
        state.card, state.loading = sister_of(kind, folder), {}
        options += ["--card", state.card]
    if chance.random() < 0.3:
        state.rules = chance.choice(("us-private", "uk-leaflet", "us-135"))
        options += ["--rules", state.rules]
    if chance.random() < 0.3:
        state.day.pop("isa_deviation", None)
        state.day["temperature"] = chance.randint(0, 38)
        options += ["--temp", str(state.day["temperature"])]
    if chance.random() < 0.2:
        state.day["humidity"] = 70
        options += ["--humidity", "70"]
    if chance.random() < 0.3:
        state.loading["landing_flap"] = chance.choice(flaps_of(state.card))
        options += ["--landing-flap", state.loading["landing_flap"]]
    if chance.random() < 0.3:
        state.loading["landing_mass"] = 900.0 * heavy
        options += ["--landing-mass", f"{state.loading['landing_mass']} kg"]
    return options


@cache
def flaps_of(card: str) -> tuple[str, ...]:
    """Names of the settings that a card has for landing."""
    return tuple(flap.name for flap in load_card(card).flaps if "landing" in flap.uses)


# --- what a workbook must come to


def rows_shown(path: Path) -> list[dict[str, Any]]:
    """The directions of the sheet Strips as a reader without formulas sees them, by header; the first column of each counts."""
    sheet = openpyxl.load_workbook(path, data_only=True, read_only=True)["Strips"]
    headers = [cell.value for cell in next(sheet.iter_rows(min_row=3, max_row=3))]
    rows = []
    for row in sheet.iter_rows(min_row=4):
        shown = {header: cell.value for header, cell in reversed(list(zip(headers, row, strict=True)))}
        if shown["Key"]:
            rows.append(shown)
    return rows


def verdicts_must_be(path: Path, state: State) -> list[str]:
    """A sentence for each verdict, reason and margin of a workbook that is not what `assess` gives for its inputs."""
    rows = rows_shown(path)
    columns: dict[str, Any] = {}
    for key, header in HEADERS.items():
        if header in rows[0] and key not in PROFILE:
            columns[key] = [math.nan if row[header] is None and _is_number(key) else row[header] or "" for row in rows]
    if PROFILE_TEXT[1] in rows[0]:
        columns["profile"] = [row[PROFILE_TEXT[1]] or "" for row in rows]
    result = assess(columns, state.card, state.day, state.rules, **state.loading)
    wrong = []
    for side, word in (("takeoff", "Take-off"), ("landing", "Landing")):
        parts = ("verdict", f"{word} verdict"), ("reason", f"{word}: limiting reason"), ("margin", f"{word} margin [m]")
        for key, header in parts:
            for row, expected in zip(rows, result[f"{side}_{key}"], strict=True):
                if not _same(row[header], expected, 1e-7 if row.get(PROFILE_TEXT[1]) else 1e-9):
                    wrong.append(f"{row['Key']}, {header}: {row[header]!r}, not {expected!r}")
    return wrong


def _is_number(key: str) -> bool:
    return next(item for item in STRIP if item.key == key).kind == "number"


def _same(shown: Any, expected: Any, tolerance: float) -> bool:
    """Equal texts, and numbers relative to a kilometre at the least; a door's sentence may stand for no number.

    A workbook keeps the slopes that stand for a profile to a millionth of a per cent.
    """
    if isinstance(expected, str):
        return bool(shown == expected)
    if math.isnan(expected):
        return shown in (None, "") or isinstance(shown, str)
    return isinstance(shown, float | int) and abs(shown - expected) <= tolerance * max(abs(expected), 1000.0)


def is_own(parts: Parts) -> Callable[[str, int, int], bool]:
    """Tells whether a cell of our sheets is a user's, in a workbook as it is before a refresh."""
    sheets = {title: SheetText.of(parts.text(parts.sheet(title))) for title in HEADER_ROWS}
    mine = {title: {column for header, column in sheet.headers(HEADER_ROWS[title]).items() if header.startswith(MINE)}
            for title, sheet in sheets.items()}  # fmt: skip
    strips = sheets["Strips"]
    strip = strips.headers(3)["Strip"]
    total = next((row for row in sorted(strips.rows) if strips.shown(row, strip) == "Mean"), 10**7)

    def own(title: str, row: int, column: int) -> bool:
        if title in mine:
            return column in mine[title] or (title == "Strips" and row >= total)
        return column >= 15 and title not in ("Manual", "Left out")

    return own
