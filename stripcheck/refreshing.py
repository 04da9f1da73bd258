"""Refresh a filled workbook: compute it anew after its strips, day, loading or rules were edited, or with new ones.

Only cells that are stripcheck's are changed, in the worksheet parts that are its own; every other part of the file, and every
cell of the user's in those, stays byte for byte as it is. What ``stripcheck refresh`` does.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path
from typing import Any

import numpy as np
from openpyxl import Workbook
from openpyxl.utils import column_index_from_string, get_column_letter
from openpyxl.worksheet.worksheet import Worksheet

from stripcheck import interpolation
from stripcheck.assessment import Result
from stripcheck.card import Card, load_card
from stripcheck.chain import Chain, Input, evaluate
from stripcheck.chance import chance_of
from stripcheck.day import read_day
from stripcheck.doors.aircraft import Aeroplane
from stripcheck.errors import InputError
from stripcheck.filling import loading
from stripcheck.flaps import flap_setting
from stripcheck.inputs import DAY, RULES, SIDE_WORDS, STRIP
from stripcheck.profile_run import KEYS as PROFILE
from stripcheck.rules import Rules, load_rules
from stripcheck.safe_file import keeping_the_old, refuse_if_open, whole_or_not_at_all
from stripcheck.sheet import filled, manual_tables, pages, strips, summary
from stripcheck.sheet.cases import no_inputs
from stripcheck.sheet.filled import Filled, Sheet
from stripcheck.sheet.formulas import GROUND_NAMES, NOWHERE, WORDS, Place, write_formulas
from stripcheck.sheet.labels import GROUND_HEADER
from stripcheck.sheet.package import Edits, Package, Value, cell_of
from stripcheck.sheet.stream import ROW
from stripcheck.units import from_si, read_quantity, tidy
from stripcheck.verdict import VERDICTS

DOOR = "STRIP"  # what the formulas of another door hold; such cells keep their formula
SUMMARY_HEADERS = {key: header for key, header, *_ in summary.COLUMNS}


@dataclass(frozen=True)
class Request:
    """What to refresh, where to (the workbook itself where None), and what goes before the workbook's own values."""

    book: Path
    output: Path | None = None
    day: Mapping[str, Any] | None = None
    card: str | None = None
    rules: str | None = None
    takeoff_mass: str | None = None
    landing_mass: str | None = None
    takeoff_flap: str | None = None
    landing_flap: str | None = None
    force: bool = False


def refresh_book(request: Request) -> list[str]:
    """Do it and return lines to tell the user. Raises InputError for bad input; then nothing was written."""
    target = request.output or request.book
    if request.book.suffix.lower() not in (".xlsx", ".xlsm"):
        raise InputError(f"{request.book}: a workbook that stripcheck filled is expected, .xlsx or .xlsm")
    if request.output is not None and request.output.exists() and not request.force:
        raise InputError(f"{request.output}: this file exists; choose another name, or add --force to replace it")
    refuse_if_open(request.book)
    writing = keeping_the_old if request.output is None else whole_or_not_at_all
    with writing(target) as file, Package(request.book) as package:
        work = _Refresh(package, request)
        lines = work.run()
        package.save(work.changed(), file)
    return [f"{target}: {lines[0]}", *lines[1:]]


class _Refresh:
    """One refresh: the workbook as it stands, and the edits to its sheets."""

    def __init__(self, package: Package, request: Request) -> None:
        self.package, self.request = package, request
        self.pages, strip_sheet, summary_sheet = filled.open_filled(package)
        self.edits = {title: Edits(raw) for title, raw in self.pages.items()}
        self.edits |= {sheet.title: Edits(sheet.raw) for sheet in (strip_sheet, summary_sheet)}
        self.typed: dict[str, dict[tuple[int, int], Value]] = {title: {} for title in filled.PAGES}
        self.rules = None if request.rules is None else load_rules(request.rules)
        self.card = None if request.card is None else load_card(request.card)
        self._take_over()
        loaded = None
        if self.card is not None:
            chosen, flap_names = loading(self.card, request)
            loaded = Aeroplane(self.card.file, self.card.chain, self.card.values, self.card.flaps), chosen
            self._take_card(self.card, chosen, flap_names)
        self.book: Filled = filled.read_filled(package, self.pages, strip_sheet, summary_sheet, self.typed, loaded)
        self.found = evaluate(self.book.chain, self.book.inputs)
        self.shown = {
            step.key: strips.shown(step, self.found[step.key], self.book.faults) for step in self.book.chain.steps
        }

    def changed(self) -> dict[str, Any]:
        """The parts to be written, by name."""
        return {self.package.sheets[title]: edits.pieces() for title, edits in self.edits.items() if edits.cells}

    def run(self) -> list[str]:
        """All edits; returns what to tell, the counts first."""
        self._named_values()
        if "Manual" in self.pages and self.card is None and self._loading_given():
            self._tables_of_the_day()
        keys = self._keys()
        self._strips(keys)
        best = self._summary(keys)
        self._facts()
        counts = self._counts(best)
        self._note()
        return [f"{len(self.book.rows)} directions refreshed", *self.book.doubts, *counts]

    # --- what was given with the command goes into the cells where a user would type it

    def _take_over(self) -> None:
        self._take_day()
        if self.card is None:
            self._take_loading()
        if self.rules is not None:
            self._take_rules(self.rules)

    def _put(self, title: str, label: str, value: Value) -> None:
        """A value into column B beside a label of a page."""
        row = self._row_of(title, label)
        self.edits[title].set(row, 2, value)
        self.typed[title][row, 2] = value

    def _row_of(self, title: str, label: str) -> int:
        for number in sorted(self.pages[title].by_number):
            if self.pages[title].value(number, 1) == label:
                return number
        raise InputError(f'{self.package.path}: the sheet "{title}" has lost its row "{label}"')

    def _take_day(self) -> None:
        given = {key: value for key, value in (self.request.day or {}).items() if value not in (None, "")}
        if not given:
            return
        labels = {item.key: item for item in DAY}
        for one, other in (("temperature", "isa_deviation"), ("humidity", "dew_point")):
            if one in given or other in given:
                self._put("Day", labels[other if one in given else one].label, None)
        if "isa_deviation" in given:
            self._put("Day", labels["temperature_elevation"].label, None)
        checked = read_day(_with_wind(given))
        for key in given:
            item = labels[key]
            value = checked.condition if item.kind == "choice" else tidy(from_si(checked.values[key], item.unit))
            self._put("Day", item.label, value)

    def _loading_given(self) -> bool:
        own = self.request
        return any(value is not None for value in (own.takeoff_mass, own.landing_mass, own.takeoff_flap, own.landing_flap))

    def _take_loading(self) -> None:
        labels = {"mass_takeoff": "Take-off mass", "mass_landing": "Landing mass", "takeoff_flap": "Take-off flap",
                  "landing_flap": "Landing flap"}  # fmt: skip
        own = self.request
        given = {"mass_takeoff": own.takeoff_mass, "mass_landing": own.landing_mass}
        for key, typed in given.items():
            if typed is None:
                continue
            mass = read_quantity(typed, "mass")
            greatest = self.pages["Aircraft"].value(self._row_of("Aircraft", f"Greatest {labels[key].lower()}"), 2)
            if not isinstance(greatest, float) or not 0.1 * greatest <= mass <= greatest:
                raise InputError(f"{labels[key].lower()} of {typed}: the workbook allows up to {greatest:,.0f} kg")
            self._put("Aircraft", labels[key], tidy(mass))
        for key, name in (("takeoff_flap", own.takeoff_flap), ("landing_flap", own.landing_flap)):
            if name is not None:
                self._put("Aircraft", labels[key], self._flap_name(name, key))

    def _flap_name(self, name: str, key: str) -> str:
        rows = filled.page_rows(self.pages, "Aircraft", {})
        aeroplane = filled.aeroplane_in(self.pages["Aircraft"], rows)
        use = "take-off" if key == "takeoff_flap" else "landing"
        deflection = flap_setting(name, tuple(aeroplane.flaps), use, f"--{key.replace('_', '-')}")
        return str(next(flap.name for flap in aeroplane.flaps if flap.deflection == deflection))

    def _take_rules(self, rules: Rules) -> None:
        self.edits["Rules"].set(1, 1, rules.title)
        for row, text in enumerate(pages.rule_facts(rules), 3):
            self.edits["Rules"].set(row, 1, text)
        for item in RULES:
            if item.kind == "range" or item.key.startswith("reference_"):
                continue
            value: Any = rules.values[item.key]
            if item.kind == "flag":
                self._put("Rules", item.label, "yes" if value else "no")
            else:
                self._put("Rules", item.label, None if np.isnan(value) else tidy(from_si(value, item.unit)))
        first = self._row_of("Rules", GROUND_HEADER[0]) + 1
        for key, letter in pages.GROUND_COLUMNS.items():
            column = column_index_from_string(letter)
            for at, value in enumerate(np.asarray(rules.values[key], dtype=float).tolist(), first):
                shown: Value = pages.NO_FIGURE if np.isnan(value) else value
                self.edits["Rules"].set(at, column, shown)
                self.typed["Rules"][at, column] = shown

    def _take_card(self, card: Card, chosen: Mapping[str, float], flap_names: Mapping[str, str]) -> None:
        """Another aeroplane of the same kind: the cells of the sheets Aircraft and Manual, as they would be filled."""
        made = pages.Pages(Workbook())
        aircraft = pages.write_aircraft(made, card, chosen, flap_names, tables_follow=True)
        once = [step for step in card.chain.steps if step.key not in card.chain.depends_on_strip()]
        page_values = {**no_inputs(), **card.values, **chosen}
        inputs = {item.key: page_values.get(item.key, np.nan) for item in card.chain.inputs if item.where != "rules"}
        inputs |= self.rules.values if self.rules is not None else filled.rules_in(self.pages)
        values = evaluate(card.chain, inputs, [step.key for step in once])
        manual_tables.write_manual(made, card, values)
        row = pages.write_book_points(aircraft, aircraft.max_row + 3, card)
        pages.write_steps(made, aircraft, row, once)
        formulas = write_formulas(card.chain, self._page_places(card.chain) | made.places)
        pages.fill_steps(made, aircraft, row, once, formulas, values)
        manual_tables.write_as_rows(made, aircraft, card, values)
        names = {name: defined.attr_text for name, defined in made.book.defined_names.items()}
        if any(self.package.names.get(name) != text for name, text in names.items()):
            raise InputError(
                f"{self.package.path}: this workbook was filled for an aeroplane of another make (propeller, engine, number of "
                f"flap settings, tables or figures of the manual), so {card.name} does not fit its sheets; fill a new one"
            )
        for sheet in (made.book[title] for title in ("Aircraft", "Manual") if title in made.book.sheetnames):
            self._copy(sheet, made.cached.get(sheet.title, {}))
        self.typed["Aircraft"][1, 1] = card.name
        self.edits[strips.SHEET].set(1, 2, f"{card.name}: every direction")

    def _copy(self, sheet: Worksheet, cached: Mapping[str, Any]) -> None:
        """The contents of a page as filled anew, into the cells where they stand; the formats stay."""
        for cell in (cell for row in sheet.iter_rows() for cell in row if cell.value is not None or cell.has_style):
            text = str(cell.value)[1:] if cell.data_type == "f" else None
            value = cached.get(cell.coordinate, "") if text is not None else cell.value
            if text is not None or value is not None or self.pages[sheet.title].value(cell.row, cell.column) is not None:
                plain = value if value is None or isinstance(value, str | bool) else _plain(value)
                self.edits[sheet.title].set(cell.row, cell.column, plain, text)

    # --- what follows from it

    def _named_values(self) -> None:
        """The results beside the formulas of the pages: values in SI, and steps that are the same for all strips."""
        for key, item in self.book.chain.by_key.items():
            place = cell_of(self.package.names.get(key, ""))
            if place is None or place[0] not in self.edits or (isinstance(item, Input) and item.kind != "number"):
                continue
            title, row, column = place
            value = np.ravel(self.book.inputs[key] if isinstance(item, Input) else self.found[key])[0]
            self._result(title, row, column, _plain(value))
            if not isinstance(item, Input):
                shown = _plain(np.ravel(self.shown[key])[0])
                self._result(title, row, 2, ("yes" if value else "no") if item.truth else shown)

    def _result(self, title: str, row: int, column: int, value: Value) -> None:
        cell = self._formula_cell(title, row, column)
        if cell:
            self.edits[title].result(row, column, value)

    def _formula_cell(self, title: str, row: int, column: int) -> bool:
        raw = self.pages[title] if title in self.pages else self._sheet(title).raw
        found = raw.by_number.get(row)
        cell = found.cells.get(column) if found else None
        return cell is not None and cell.formula is not None

    def _sheet(self, title: str) -> Sheet:
        return self.book.strips if title == strips.SHEET else self.book.summary

    def _tables_of_the_day(self) -> None:
        """The manual's tables for another mass or flap; what hangs on them and has no name is left to the next program."""
        for row in self.pages["Manual"].rows:
            for column, cell in row.cells.items():
                if cell.formula is not None:
                    self.edits["Manual"].result(row.number, column, None)
        for side in SIDE_WORDS:
            if f"{side}_page_mass" not in self.book.inputs:
                continue
            values = {key.removeprefix(f"{side}_"): value for key, value in self.book.inputs.items() if key.startswith(side)}
            loaded = (float(np.ravel(self.found[f"{side}_book_{part}"])[0]) for part in ("mass", "flap"))
            book_pages = (values[f"page_{part}"] for part in ("mass", "flap", "below", "above"))
            weights = interpolation.page_weight(*loaded, *book_pages)
            grids = {key: np.tensordot(weights, value, 1) for key, value in values.items() if key.endswith("_table")}
            counts = weights > interpolation.HAIR
            if counts.any():
                grids |= {"hottest": values["hottest"][counts].min(axis=0)[:, None],
                          "coldest": values["coldest"][counts].max(axis=0)[:, None],
                          "highest": np.array([[values["highest"][counts].min()]])}  # fmt: skip
            for key, grid in grids.items():
                self._grid(f"{side}_{key}", grid)
            for key in ("altitudes", "temperatures"):
                self._grid(f"{side}_{key}", values[key][None, :] if key == "temperatures" else values[key][:, None])

    def _grid(self, name: str, grid: np.ndarray) -> None:
        place = cell_of(self.package.names.get(name, "").split(":")[0])
        if place is None or place[0] != "Manual":
            return
        for i, line in enumerate(np.asarray(grid).tolist()):
            for j, value in enumerate(line):
                self._result("Manual", place[1] + i, place[2] + j, _plain(value))

    # --- the sheet Strips

    def _keys(self) -> list[str]:
        """Keys of the directions; rows without one, or with one that stands twice, get another, two by two."""
        sheet = self.book.strips
        found = [str(sheet.value(row, "Key") or "") for row in self.book.rows]
        names = [tuple(str(sheet.value(row, title) or "") for title in ("Strip", "Name")) for row in self.book.rows]
        taken: set[str] = set()
        for at, key in enumerate(found):
            if key in taken:
                found[at] = ""
            taken.add(found[at])
        number = 0
        for at, key in enumerate(found):
            if key:
                continue
            mate = at - 1 if at and found[at - 1].endswith(" 1") and names[at - 1] == names[at] else -1
            wanted = found[mate][:-1] + "2" if mate >= 0 else ""
            if wanted and wanted not in taken:
                found[at] = wanted
            else:
                while f"row {number} 1" in taken or not number:
                    number += 1
                found[at] = f"row {number} 1"
            taken.add(found[at])
        return found

    def _strips(self, keys: Sequence[str]) -> None:
        """The computed columns, each row with its formulas at the places where the columns stand now."""
        sheet, rows, edits = self.book.strips, self.book.rows, self.edits[strips.SHEET]
        columns = filled.step_columns(sheet, self.book.chain)
        native = self._native(columns)
        formulas = write_formulas(self.book.chain, self._places(columns)) if native else {}
        styles = _styles_above(sheet, rows)
        for at, row in enumerate(rows):
            if "Key" in sheet.columns and sheet.value(row, "Key") != keys[at]:
                edits.set(row, sheet.columns["Key"], keys[at], style=styles[at].get(sheet.columns["Key"], ""))
            for key, column in columns.items():
                value = _plain(self.shown[key][at])
                cell = sheet.raw.by_number[row].cells.get(column)
                style = cell.style if cell is not None and cell.style else styles[at].get(column, "")
                if cell is not None and DOOR in (cell.formula or ""):
                    edits.result(row, column, value)
                else:
                    text = formulas[key].replace(ROW, str(row)) if native else None
                    edits.set(row, column, value, text, style)
        self._profile_columns()
        self._chance_columns()

    def _native(self, columns: Mapping[str, int]) -> bool:
        """Whether the sheet has native formulas at all; one that was filled with values keeps values."""
        cells = (self.book.strips.raw.by_number[row].cells.get(column) for row in self.book.rows for column in columns.values())
        return any(cell is not None and cell.formula is not None for cell in cells)

    def _page_places(self, chain: Chain) -> dict[str, Place]:
        """Where the chain's values stand on the pages: under their names."""
        names = self.package.names
        places = {step.key + WORDS: Place(step.key + WORDS) for step in chain.steps if step.words}
        places[GROUND_NAMES] = Place(GROUND_NAMES)
        for item in chain.inputs:
            name = next((name for name in (item.key, f"{item.key}s") if name in names), "")
            places[item.key] = Place(name) if name and item.where != "strip" else NOWHERE
        return places

    def _places(self, columns: Mapping[str, int]) -> dict[str, Place]:
        chain, names, sheet = self.book.chain, self.package.names, self.book.strips
        places = self._page_places(chain)
        for item in STRIP:
            column = sheet.columns.get(strips.input_column(item).header)
            if column:
                unit = item.unit if item.kind == "number" else ""
                places[item.key] = Place(f"${get_column_letter(column)}{ROW}", unit)
        places |= {step.key: Place(step.key) for step in chain.steps if step.key in names}
        for key, column in columns.items():
            step = chain.by_key[key]
            places[key] = Place(f"${get_column_letter(column)}{ROW}", step.unit)
        return places

    def _profile_columns(self) -> None:
        if all(profile is None for profile in self.book.profiles):
            return
        sheet, edits = self.book.strips, self.edits[strips.SHEET]
        for item in STRIP:
            if item.key not in PROFILE and item.key != "local_slope":
                continue
            column = sheet.columns.get(strips.input_column(item).header)
            for at, row in enumerate(self.book.rows):
                if column and self.book.profiles[at] is not None:
                    value = float(np.round(from_si(self.book.inputs[item.key][at], item.unit), 6))
                    edits.set(row, column, value)

    def _chance_columns(self) -> None:
        """The chances of needing more, where the workbook has them."""
        sheet, edits = self.book.strips, self.edits[strips.SHEET]
        headers = {column.key: column.header for column in strips.chance_columns()}
        if not all(header in sheet.columns for header in headers.values()):
            return
        size = len(self.book.rows)
        found = chance_of(Result(self.book.chain, size, self.book.inputs, {}, self.book.faults, self.book.profiles))
        values = {"takeoff_chance": found.takeoff, "landing_chance": found.landing}
        values |= {f"{side}_margin": self.shown[f"{side}_margin"] for side in ("takeoff", "landing")}
        for key, header in headers.items():
            column = sheet.columns[header]
            shown = 100.0 * values[key] if key in strips.CHANCES else strips.as_filled(key, values)
            for at, row in enumerate(self.book.rows):
                if key in strips.CHANCES:
                    edits.result(row, column, _plain(shown[at]))
                else:
                    edits.set(row, column, _plain(shown[at]))

    # --- the sheet Summary

    def _summary(self, keys: Sequence[str]) -> dict[str, np.ndarray]:
        """The rows of the summary, of strips gone and new ones too; returns the ranks and words, one for each strip."""
        sheet, edits = self.book.summary, self.edits[summary.SHEET]
        columns = {key: sheet.columns[header] for key, header in SUMMARY_HEADERS.items() if header in sheet.columns}
        lost = next((header for key, header in SUMMARY_HEADERS.items() if key not in columns), None)
        if lost:
            raise InputError(f'{self.package.path}: the sheet "{summary.SHEET}" has lost its column "{lost}"')
        place = {key: at for at, key in enumerate(keys)}
        listed = [row for row in sorted(sheet.raw.by_number) if row > sheet.header_row and sheet.value(row, "Key 1")]
        pairs = {row: (str(sheet.value(row, "Key 1")), str(sheet.value(row, "Key 2") or "")) for row in listed}
        told = {key for pair in pairs.values() for key in pair}
        last = max(listed, default=sheet.header_row)
        for key in keys:
            if key not in told and key.endswith(" 1"):
                last += 1
                while last in sheet.raw.by_number and sheet.raw.by_number[last].cells:
                    last += 1
                pairs[last] = (key, key[:-1] + "2")
        formulas = summary.row_formulas(self._ranges(), {key: get_column_letter(n) for key, n in columns.items()},
                                        sheet.header_row + 1) if self._has_formulas(listed) else {}  # fmt: skip
        styles = _styles_above(sheet, list(pairs))
        found: dict[str, list[int]] = {"in_rank": [], "out_rank": [], "both": []}
        for at, (row, pair) in enumerate(pairs.items()):
            values = self._pair(pair, place)
            for key in found:
                found[key].append(int(values.pop(f"_{key}")))
            if row not in listed:
                values |= self._identity(pair, place)
            for key, value in values.items():
                style = styles[at].get(columns[key], "")
                text = formulas.get(key)
                edits.set(row, columns[key], value, text.replace(ROW, str(row)) if text else None, style)
        return {key: np.array(numbers, dtype=int) for key, numbers in found.items()}

    def _has_formulas(self, listed: Sequence[int]) -> bool:
        column = self.book.summary.columns[SUMMARY_HEADERS["both"]]
        cells = (self.book.summary.raw.by_number[row].cells.get(column) for row in listed)
        return any(cell is not None and cell.formula is not None for cell in cells)

    def _ranges(self) -> dict[str, str]:
        """Ranges of the Strips sheet's columns by key, from the first direction to the last."""
        first, last = self.book.rows[0], self.book.rows[-1]
        sheet = self.book.strips
        numbers = filled.step_columns(sheet, self.book.chain)
        numbers |= {"key": sheet.columns["Key"], "direction": sheet.columns["Direction"]}
        numbers |= {item.key: sheet.columns[header] for item in STRIP
                    if (header := strips.input_column(item).header) in sheet.columns}  # fmt: skip
        return {key: f"Strips!${(letter := get_column_letter(n))}${first}:${letter}${last}" for key, n in numbers.items()}

    def _pair(self, pair: tuple[str, str], place: Mapping[str, int]) -> dict[str, Any]:
        """What the summary shows of a strip, by key; the ranks and the number of the words under keys of their own."""
        rows = [place.get(key, -1) for key in pair]
        first = self.book.rows[0]
        values: dict[str, Any] = {f"row_{i}": float(self.book.rows[at] - first + 1) if at >= 0 else 0.0
                                  for i, at in enumerate(rows, 1)}  # fmt: skip
        values |= {f"_{side}_rank": 0 for side, _, _ in summary.SIDES}
        for side, step, _ in summary.SIDES:
            at = self._better(rows, step)
            values[f"{side}_row"] = float(self.book.rows[at] - first + 1) if at >= 0 else 0.0
            for name in ("verdict", "margin", "reason"):
                values[f"{side}_{name}"] = _plain(self.shown[f"{step}_{name}"][at]) if at >= 0 else ""
            values[f"{side}_direction"] = str(self.book.strips.value(self.book.rows[at], "Direction") or "") if at >= 0 else ""
            length = self.book.inputs["tora" if step == "takeoff" else "lda"][at] if at >= 0 else np.nan
            margin = float(self.found[f"{step}_margin"][at]) if at >= 0 else np.nan
            values[f"{side}_share"] = _plain(margin / length * 100.0)
            if at >= 0:
                values[f"_{side}_rank"] = int(self._ranks(step, [at])[0])
        ranks = values["_in_rank"], values["_out_rank"]
        number = int(summary.in_and_out(*ranks)) if all(ranks) else len(summary.BOTH)
        return {**values, "_both": number, "both": summary.BOTH[number - 1]}

    def _better(self, rows: Sequence[int], step: str) -> int:
        """Index of the better direction's row; -1 where there is neither."""
        known = [at for at in rows if at >= 0]
        if len(known) < 2:
            return known[0] if known else -1
        order = np.where(self.found[f"{step}_finding"][known] == summary.FORBIDDEN, 0, self._ranks(step, known))
        margin = self.found[f"{step}_margin"][known]
        return known[0] if summary.first_is_better(order[0], margin[0], order[1], margin[1]) else known[1]

    def _ranks(self, step: str, rows: Sequence[int]) -> np.ndarray:
        return np.array([summary.RANKS.index(self.shown[f"{step}_verdict"][at]) + 1 for at in rows])

    def _identity(self, pair: tuple[str, str], place: Mapping[str, int]) -> dict[str, Value]:
        """Name and designators of a strip that is new on the summary."""
        rows = [self.book.rows[place[key]] for key in pair if key in place]
        sheet = self.book.strips
        ways = "/".join(str(sheet.value(row, "Direction") or "?") for row in rows)
        own = {key: str(sheet.value(rows[0], SUMMARY_HEADERS[key]) or "") for key in ("strip", "name")}
        return {"key_1": pair[0], "key_2": pair[1], **own, "runway": ways}

    def _facts(self) -> None:
        """The results above the summary that repeat the loading and the day."""
        for row in self.book.summary.raw.rows:
            if row.number >= self.book.summary.header_row:
                return
            for column, cell in row.cells.items():
                value = self._repeated(cell.formula or "")
                if value is not None:
                    self.edits[summary.SHEET].result(row.number, column, value)

    def _repeated(self, text: str) -> Value:
        """What a formula shows that repeats a cell of a page; None for another formula."""
        source = text.removeprefix("IF(ISNUMBER(").split(")")[0]
        place = cell_of(source)
        if place is None or place[0] not in self.pages or (text != source and not text.startswith("IF(ISNUMBER(")):
            return None
        title, row, column = place
        value = self.typed.get(title, {}).get((row, column), self.pages[title].value(row, column))
        if title == "Rules" and (row, column) == (1, 1) and self.rules is not None:
            value = self.rules.title
        if text == source:
            return "" if value is None else value
        return value if isinstance(value, float) else "" if text.endswith('"")') else "not given"

    def _counts(self, best: Mapping[str, np.ndarray]) -> list[str]:
        """The counts above the summary, which are found by their words; returns them as lines."""
        sheet = self.book.summary
        for row in [row for row in sheet.raw.rows if row.number < sheet.header_row]:
            for column, cell in sorted(row.cells.items()):
                if cell.value in VERDICTS:
                    rank = summary.RANKS.index(str(cell.value)) + 1
                    for beside, (side, _, _) in enumerate(summary.SIDES, 1):
                        self._result(summary.SHEET, row.number, column + beside, float((best[f"{side}_rank"] == rank).sum()))
                elif cell.value in summary.BOTH:
                    number = summary.BOTH.index(str(cell.value)) + 1
                    self._result(summary.SHEET, row.number, column + 1, float((best["both"] == number).sum()))
        lines = []
        for side, label in (("in", "Landing"), ("out", "Take-off")):
            ranks = best[f"{side}_rank"]
            numbers = ((ranks == summary.RANKS.index(word) + 1).sum() for word in VERDICTS)
            lines.append(f"{label}: " + ", ".join(f"{number} {word}" for number, word in zip(numbers, VERDICTS, strict=True)))
        return lines

    def _note(self) -> None:
        """When it was refreshed, on the sheet Method, in the line that tells when it was filled."""
        for number, row in self.pages["Method"].by_number.items():
            cell = row.cells.get(1)
            if cell is not None and isinstance(cell.value, str) and cell.value.startswith(("Filled: ", "Refreshed: ")):
                now = datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %Z")
                told = cell.value.split("; first filled ")[-1].removeprefix("Filled: ")
                self.edits["Method"].set(number, 1, f"Refreshed: {now}; first filled {told}")
                return


def _with_wind(given: Mapping[str, Any]) -> dict[str, Any]:
    """The values given, made whole for the check: a wind's speed may be given alone, its direction stands in the workbook."""
    made = dict(given)
    if "wind_speed" in made and "wind_from" not in made:
        made["wind_from"] = 0.0
    if "temperature_elevation" in made and "temperature" not in made:
        made["temperature"] = 15.0
    return made


def _plain(value: Any) -> Value:
    """A value as a cell keeps it: text, truth or number; "" for none."""
    if isinstance(value, str | bool):
        return value
    if isinstance(value, np.bool_):
        return bool(value)
    number = float(value)
    return number if np.isfinite(number) else ""


def _styles_above(sheet: Sheet, rows: Sequence[int]) -> list[dict[int, str]]:
    """For each row its own styles by column, and where it has none those of the row before it, or of the one after."""
    made: list[dict[int, str]] = []
    known = {column: cell.style for row in reversed(rows) if row in sheet.raw.by_number
             for column, cell in sheet.raw.by_number[row].cells.items() if cell.style}  # fmt: skip
    for row in rows:
        cells = sheet.raw.by_number[row].cells if row in sheet.raw.by_number else {}
        known = {**known, **{column: cell.style for column, cell in cells.items() if cell.style}}
        made.append(known)
    return made
