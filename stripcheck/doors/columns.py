"""Columns of a filled workbook as formulas of a door: verdict, reason and margin of each direction by the functions.

A function knows less of a strip than an assessment: no obstacle, profile, width, part of a slope, one-way strip or fault, and
of the wind only the component along the strip. A direction for which any of that counts keeps the assessment's values, so
that no formula can give a better verdict than the assessment.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck.doors.functions import BY_NAME, Argument
from stripcheck.doors.lambdas import library
from stripcheck.errors import InputError
from stripcheck.sheet.book import Filling, Layout
from stripcheck.sheet.stream import ROW, FormulaColumn

NATIVE, EXCEL, CALC, LAMBDA, NONE = FORMULAS = ("native", "excel", "calc", "lambda", "none")
SIDES = ("takeoff", "landing")
PARTS = ("verdict", "reason", "margin")
# what a function does not know of a strip: where any of these is given, the assessment's values stay
UNKNOWN = ("local_slope", "obstacle_height", "obstacle_distance", "approach_obstacle_height", "approach_obstacle_distance",
           "profile_takeoff_slope", "profile_landing_slope")  # fmt: skip
KNOWN_BY = ("takeoff_known", "landing_known", "crosswind", "width_asked")


@dataclass(frozen=True)
class DoorColumns:
    """The columns as formulas of one door: what ``stripcheck.sheet.book.write_workbook`` puts in place of the native ones."""

    kind: str
    filling: Filling

    @property
    def names(self) -> tuple[tuple[str, str, str], ...]:
        """Defined names that the workbook needs: name, text, comment."""
        return tuple((n.name, n.text, n.comment) for n in library().names) if self.kind == LAMBDA else ()

    def columns(self, layout: Layout) -> dict[str, FormulaColumn]:
        if self.kind == NONE:
            return {}
        return {f"{side}_{part}": self._column(side, part, layout) for side in SIDES for part in PARTS}

    def _column(self, side: str, part: str, layout: Layout) -> FormulaColumn:
        function = BY_NAME[f"{side}_{part}".upper()]
        given = ",".join(self._reference(argument, side, layout) for argument in function.arguments)
        name = f"STRIP.{function.name}" if self.kind == CALC else function.full_name
        rows = known_rows(self.filling, side)
        steps = self.filling.chain.by_key
        values = [self.filling.shown(steps[f"{side}_{what}"]) for what in (part, "reason")]  # type: ignore[arg-type]
        shown = [value if isinstance(value, str) or np.isfinite(value) else reason if known else ""
                 for value, reason, known in zip(*values, rows, strict=True)]  # fmt: skip
        formulas = [f"{name}({given})" if known else None for known in rows]
        return FormulaColumn(formulas, shown, dynamic=self.kind == LAMBDA)

    def _reference(self, argument: Argument, side: str, layout: Layout) -> str:
        own = {"length": {"takeoff": "tora", "landing": "lda"}[side], "qnh": "qnh_used", "temperature": "air_temperature",
               "slope": f"{side}_slope"}  # fmt: skip
        if argument.kind in ("aircraft", "rules"):
            return layout.ranges[argument.kind]
        if argument.key in ("mass", "flap"):
            return layout.value_cells[{"mass": f"mass_{side}", "flap": f"{side}_flap"}[argument.key]]
        cell = f"${layout.letters[own.get(argument.key, argument.key)]}{ROW}"
        return f'IF({cell}="",{layout.value_cells["day_condition"]},{cell})' if argument.kind == "condition" else cell


def known_rows(filling: Filling, side: str) -> list[bool]:
    """For which directions a function gives what the assessment gives, whatever mass and flap."""
    values = {**filling.card.values, **filling.day.values, **filling.given, **filling.values}
    return [bool(one) for one in known_among(values, side, filling.directions.n)]


def known_among(values: Mapping[str, Any], side: str, size: int) -> np.ndarray:
    """The same as an array, by the inputs and steps of an assessment; of the latter those of `KNOWN_BY` are needed."""
    free = {"takeoff": "take_off_here", "landing": "land_here"}[side]
    known = np.broadcast_to(values[f"{side}_known"], size) & np.asarray(values[free]) & ~np.asarray(values["fault"])
    for key in UNKNOWN:
        known = known & ~np.isfinite(values[key])
    known = known & bool(np.isnan(values["humidity"]) & np.isnan(values["dew_point"]))
    crosswind = np.broadcast_to(values["crosswind"], size) <= values["crosswind_limit"]
    return np.asarray(known & crosswind & ~np.isfinite(np.broadcast_to(values["width_asked"], size)))


def door_columns(kind: str, filling: Filling) -> DoorColumns:
    """The columns for a choice of ``FORMULAS`` but native. Raises InputError where the door can't give the verdicts."""
    if kind != NONE:
        _check(kind, filling)
    return DoorColumns(kind, filling)


def told(columns: DoorColumns) -> list[str]:
    """How many directions have formulas, for the user."""
    if columns.kind == NONE:
        return []
    n = columns.filling.directions.n
    words = {"takeoff": "take-offs", "landing": "landings"}
    counts = " and ".join(f"{sum(known_rows(columns.filling, side))} of {n} {words[side]}" for side in SIDES)
    return [f"Formulas of the {columns.kind} door: {counts}; the others hold values, as the functions do not take all that "
            "counts there"]  # fmt: skip


def _check(kind: str, filling: Filling) -> None:
    moist = [key for key in ("humidity", "dew_point") if np.isfinite(filling.day.values[key])]
    if moist:
        raise InputError(f"--formulas {kind}: the functions take no humidity; leave it out, or use native formulas")
    if kind == LAMBDA and (filling.card.tables or _corrections(filling)):
        raise InputError(f"--formulas {kind}: the LAMBDA functions do not read the manual's tables and corrections of this "
                         "card, so their verdicts would not be the workbook's; use native, excel or calc")  # fmt: skip


def _corrections(filling: Filling) -> bool:
    keys: Mapping[str, object] = filling.chain.by_key
    return any(f"{side}_manual_head" in keys for side in SIDES)
