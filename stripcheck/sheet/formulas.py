"""The worksheet evaluator: walks the chain with cell expressions and gives each step's native formula.

A step is either kept as a cell of its own, and then later steps refer to that cell, or written into the formulas of
the steps that use it.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from typing import Any, NamedTuple

import numpy as np

from stripcheck import ground_run
from stripcheck.chain import Chain, Input, Step
from stripcheck.interpolation import HAIR, SAME_FLAP
from stripcheck.links import GROUND_UNKNOWN
from stripcheck.sheet.cell import ADD, ATOM, BLANK, COMPARE, Cell, as_cell, call, formula, reference, shown, where
from stripcheck.verdict import FAULT

# the nodes and weights of the quadrature stand once in the workbook, under these defined names
RUN_TABLE = {
    "run_nodes": ground_run.NODES,
    "run_weights": ground_run.WEIGHTS,
    "run_speed_weights": ground_run.SPEED_WEIGHTS,
}
_LITERALS = {as_cell(values).text: name for name, values in RUN_TABLE.items()}
WORDS = "_words"  # added to a step's key: place of the words that its number stands for
GROUND_NAMES = "ground_names"  # place of the ground table's first column, beside the chain's own range inputs


class Place(NamedTuple):
    """Where a value stands: a reference such as ``$E7`` or ``Aircraft!$D$4``, and the unit that the cell shows."""

    reference: str
    unit: str = ""


NOWHERE = Place("")  # of an input that is blank in every row


def write_formulas(chain: Chain, places: Mapping[str, Place], keys: Collection[str] | None = None) -> dict[str, str]:
    """Formula text, without equals sign, of every step that has a place, or of those with the ``keys``.

    ``places`` tells where each input of the chain stands and each step that is kept as a cell. A step without a place
    is written into those that use it. Besides, `GROUND_NAMES` and, for each step of words, its key and `WORDS`, give
    the ranges of those tables.
    Raises KeyError for an input without a place and ValueError for a formula beyond a spreadsheet's limits.
    """
    writer = _Writer(chain, places)
    wanted = places if keys is None else keys
    return {step.key: writer.formula_of(step) for step in chain.steps if step.key in wanted}


class _Writer:
    """Finds the expression of each value under what is sure to hold where it is read."""

    def __init__(self, chain: Chain, places: Mapping[str, Place]) -> None:
        self.chain, self.places = chain, places
        self.names = Cell(places[GROUND_NAMES].reference, many=True)
        self.fault = Cell(places["fault"].reference or BLANK)

    def formula_of(self, step: Step) -> str:
        expression = self.expression(step, self.held(step))
        in_unit = expression if step.words else shown(expression, self.places[step.key].unit)
        whole = self.guarded(step, in_unit, frozenset())
        for literal, name in _LITERALS.items():
            whole.text = whole.text.replace(literal, name)
        return formula(whole)

    def held(self, step: Step) -> frozenset[str]:
        return self.chain.held_with(step.guard) if step.guard else frozenset(step.late)

    def value(self, key: str, holding: frozenset[str]) -> Cell:
        """A reference where the value has a place, else its whole expression, guarded unless its guard holds."""
        item = self.chain.by_key[key]
        if isinstance(item, Input):
            return _input_cell(item, self.places[key])
        if key in self.places:
            return reference(*self.places[key])
        return self.guarded(item, self.expression(item, holding | self.held(item)), holding)

    def expression(self, step: Step, holding: frozenset[str]) -> Cell:
        side = step.key.split("_")[0]
        if step.lookup in _IN_STACK and f"{side}_lines" in self.places:
            lines, columns = (Cell(self.places[f"{side}_{part}"].reference, many=True) for part in ("lines", "columns"))
            return _IN_STACK[step.lookup](lines, columns, *(self.value(key, holding) for key in step.inputs))
        if step.lookup in _IN_TABLES:
            function, count = _IN_TABLES[step.lookup]
            return function(*(self.value(key, holding) for key in step.inputs[:count]))
        values = [self.value(key, holding) for key in step.inputs]
        if step.lookup == "name":
            surface, condition, day_condition = values
            return _row_in_table(surface, condition, day_condition, self.names)
        if step.lookup:
            return _looked_up(*values)
        if step.words:
            return _in_words(step, values[0], self.fault, Cell(self.places[step.key + WORDS].reference))
        return as_cell(step.function(*values))

    def guarded(self, step: Step, expression: Cell, holding: frozenset[str]) -> Cell:
        if not step.guard or step.guard in holding:
            return expression
        guard = self.value(step.guard, holding)
        guarding = self.chain.by_key[step.guard]
        holds: Any = guard if isinstance(guarding, Step) and guarding.truth else np.isfinite(guard)
        return where(holds, expression, False if step.truth else np.nan)


def _input_cell(item: Input, place: Place) -> Cell:
    if not place.reference:
        return as_cell({"flag": True, "fault": False}.get(item.kind, np.nan))
    if item.kind == "flag":
        return Cell(f'{place.reference}<>"no"', COMPARE, raw=place.reference)
    if item.kind == "fault":
        return Cell(f'{place.reference}<>""', COMPARE, raw=place.reference)
    if item.kind == "range":
        return Cell(place.reference, many=True)
    return reference(*place)


def _row_in_table(surface: Cell, condition: Cell, day_condition: Cell, names: Cell) -> Cell:
    """Row [1, 2, ...] of "surface, condition" among the names, or the row after the last."""
    own = condition.text != BLANK
    used = f'IF({condition.raw}="",{day_condition.raw},{condition.raw})' if own else day_condition.raw
    # not MATCH, which takes an asterisk or a question mark in the cell for any text
    place = f"ROW({names.text})-MIN(ROW({names.text}))-{GROUND_UNKNOWN - 1}"
    found = f'{GROUND_UNKNOWN}+SUMPRODUCT(({names.text}={surface.raw}&", "&{used})*({place}))'
    return Cell(f"IFERROR({found},{GROUND_UNKNOWN})", ATOM, 4)


def _looked_up(column: Cell, row: Cell) -> Cell:
    return Cell(f"INDEX({column.text},{row.text})", ATOM, row.depth + 1)


def _position(at: Cell, nodes: Cell) -> Cell:
    """Place among rising nodes, from 0, held at the ends; what `stripcheck.interpolation.position` gives."""
    last = f"COUNT({nodes.text})-1"
    left = f"MIN(IFERROR(MATCH({at.text},{nodes.text},1),1),{last})"
    node, following = f"INDEX({nodes.text},{left})", f"INDEX({nodes.text},{left}+1)"
    place = f"{left}-1+({at.text}-{node})/({following}-{node})"
    return Cell(f"MIN(MAX({place},0),{last})", ATOM, at.depth + 6)


def _figure(table: Cell, row: Cell, column: Cell) -> Cell:
    """Figure of the grid for today's mass and flap, linear between its four neighbours; what ``in_pages`` gives."""
    u, v = row.within(ATOM), column.within(ATOM)
    down, across = f"({u}-INT({u}))", f"({v}-INT({v}))"
    lower, upper = f"INT({u})+1", f"MIN(INT({u})+2,ROWS({table.text}))"
    left, right = f"INT({v})+1", f"MIN(INT({v})+2,COLUMNS({table.text}))"

    def line(at: str) -> str:
        one, other = f"INDEX({table.text},{at},{left})", f"INDEX({table.text},{at},{right})"
        return f"((1-{across})*{one}+{across}*{other})"

    return Cell(f"(1-{down})*{line(lower)}+{down}*{line(upper)}", ADD, max(row.depth, column.depth) + 4)


def _edge(least: str) -> Callable[..., Cell]:
    """The edge of the lines that count at a place down the table; what ``hot_edge`` and ``cold_edge`` give."""

    def edge(lines: Cell, row: Cell) -> Cell:
        upper = f"INDEX({lines.text},INT({row.text}+{HAIR:.6f})+1)"
        lower = f"INDEX({lines.text},ROUNDUP(MAX({row.text}-{HAIR:.6f},0),0)+1)"
        return Cell(f"{least}({upper},{lower})", ATOM, row.depth + 4)

    return edge


# steps that read the manual's tables: how they are written, and how many of their inputs that takes, since the grid
# that stands on the sheet Manual is made for the mass and flap of the day
_IN_TABLES: dict[str, tuple[Callable[..., Cell], int]] = {
    "position": (_position, 2),
    "table": (_figure, 3),
    "hot edge": (_edge("MIN"), 2),
    "cold edge": (_edge("MAX"), 2),
    "top edge": (lambda top: Cell(top.text), 1),
}


def _page_share(mass: Cell, flap: Cell, page_mass: Cell, page_flap: Cell, below: Cell, above: Cell) -> str:
    """Weight of each line's page, as an array; what ``interpolation.page_weight`` gives."""
    m, page, low, high = mass.within(ATOM), page_mass.text, below.text, above.text
    rising = f"({m}<={page})*({m}>{low})*({m}-{low})/({page}-{low})"
    falling = f"({m}>{page})*({m}<{high})*({high}-{m})/({high}-{page})"
    return f"(ABS({flap.text}-{page_flap.text})<{SAME_FLAP})*({rising}+{falling})"


def _near(place: Cell, nodes: Cell) -> str:
    """Weight of each node at a position, as an array; what ``interpolation.near`` gives."""
    apart = f"ABS({place.text}-{nodes.text})"
    return f"({apart}<1)*(1-{apart})"


def _stacked_figure(lines: Cell, columns: Cell, table: Cell, row: Cell, column: Cell, *page: Cell) -> Cell:
    text = f"{_page_share(*page)}*{_near(row, lines)}*{_near(column, columns)}*{table.text}"
    return Cell(f"SUMPRODUCT({text})", ATOM, 3 + max(row.depth, column.depth))


def _stacked_edge(hot: bool) -> Callable[..., Cell]:
    """The nearest edge of the lines that count, of all pages that count; what ``hot_edge`` and ``cold_edge`` give.

    MAX swallows the whole array here, as it must; SUMPRODUCT around it makes every program take it as one.
    """

    def edge(lines: Cell, columns: Cell, at: Cell, row: Cell, *page: Cell) -> Cell:
        counts = f"({_page_share(*page)}>{HAIR:.6f})*({_near(row, lines)}>{HAIR:.6f})"
        farthest = f"SUMPRODUCT(MAX({counts}*({_FAR_OFF:.0f}{'-' if hot else '+'}{at.text})))"
        return Cell(f"{_FAR_OFF:.0f}-{farthest}" if hot else f"{farthest}-{_FAR_OFF:.0f}", ADD, row.depth + 4)

    return edge


def _stacked_top(lines: Cell, columns: Cell, highest: Cell, *page: Cell) -> Cell:
    counts = f"({_page_share(*page)}>{HAIR:.6f})"
    return Cell(f"{_FAR_UP:.0f}-SUMPRODUCT(MAX({counts}*({_FAR_UP:.0f}-{highest.text})))", ADD, 4)


_FAR_OFF, _FAR_UP = 1000.0, 100000.0  # K and m: beyond any edge, and near enough to leave an edge its digits
# the same where every row has a mass and flap of its own: over the stack of all pages (`sheet.manual_stack`)
_IN_STACK: dict[str, Callable[..., Cell]] = {
    "table": _stacked_figure,
    "hot edge": _stacked_edge(hot=True),
    "cold edge": _stacked_edge(hot=False),
    "top edge": _stacked_top,
}


def _in_words(step: Step, number: Cell, fault: Cell, words: Cell) -> Cell:
    """Words of a finding's number, from the table of findings; the fault of the row stands for itself."""
    found = _looked_up(words, number)
    if FAULT not in step.words:
        return found
    return call("IF", number == float(step.words.index(FAULT) + 1), fault, found)
