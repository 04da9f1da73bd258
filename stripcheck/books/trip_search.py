"""The greatest suitable mass of each landing and take-off of a trip, found by further cases in the workbook itself.

In the direction and with the flap that are best at the trip's own mass. First the card's greatest mass is tried; where it
does not suit, rounds of false position on whole kilograms follow, from the trip's own mass or from the empty mass with crew,
and the verdict of a case decides each of them. What is told is the heaviest mass tried that suits; the sheet also tells the
lightest tried that does not, which is a kilogram more unless the rounds ran out.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from typing import Any

import numpy as np
from openpyxl.utils import get_column_letter

from stripcheck.books import rounds
from stripcheck.books.trip_cases import OF_BEST, Best, Book
from stripcheck.books.trip_layout import READING, cell, fixed
from stripcheck.chain import Chain, Input, Step, evaluate
from stripcheck.numeric import Number
from stripcheck.sheet.cases import FIRST_ROW, About, Cases, Elsewhere, Given, no_inputs, write_cases
from stripcheck.sheet.stream import FormulaColumn, TextColumn
from stripcheck.verdict import NOT_ASSESSED, SUITABLE

SEARCH = "Greatest mass"
TRIALS = {"landing": "Trials in", "takeoff": "Trials out"}
ROUNDS = 12  # cases for each landing and take-off: the card's greatest mass first
CLOSED = 1.0 + 1e-9  # kg between a mass that suits and one that does not: no nearer on whole kilograms
SOURCE = "Search"


def _try_first(assessed: Number, most: Number) -> Number:
    """The card's greatest mass, where there is something to look for."""
    return np.where(assessed, most, np.nan)


def _open_after_first(assessed: Number, fits: Number) -> Number:
    return assessed & np.logical_not(fits)


def _starts(suits: Number, start: Number, most: Number) -> Number:
    """Whether the trip's own mass is where the search starts from below."""
    return np.where(np.isfinite(start), suits & (start <= most), False)


def _first_low(starts: Number, start: Number, least: Number) -> Number:
    """Low end: the trip's own mass; else a kilogram below the empty mass with crew, which is then tried next."""
    return np.where(starts, np.floor(start), np.where(np.isfinite(least), -np.floor(-least) - 1.0, np.nan))


def _value_there(starts: Number, slack: Number) -> Number:
    return np.where(starts, slack, np.nan)


def _first_high(starts: Number, start: Number, most: Number) -> Number:
    """High end: the card's greatest mass, or the trip's own where that does not suit and is less."""
    own = np.where(np.isfinite(start), np.logical_not(starts) & (start < most), False)
    return np.where(own, -np.floor(-start), -np.floor(-most))


def _first_high_value(starts: Number, start: Number, most: Number, start_slack: Number, top_slack: Number) -> Number:
    own = np.where(np.isfinite(start), np.logical_not(starts) & (start < most), False)
    return np.where(own, start_slack, top_slack)


def _try_second(starts: Number, low: Number, of_low: Number, high: Number, of_high: Number, edge: Number) -> Number:
    return np.where(starts, next_mass(low, of_low, high, of_high, edge), np.where(high - low > CLOSED, low + 1.0, np.nan))


def next_mass(low: Number, of_low: Number, high: Number, of_high: Number, edge: Number) -> Number:
    """The whole mass to try next [kg]; NaN where the ends are a kilogram apart.

    ``of_low``, ``of_high``: the slack there; ``edge``: greatest mass between the ends at which a table of the manual ends
    [kg], 0 for none. Where all that changes smoothly would suit at the high end too, it must be a table that ends.

    >>> [float(next_mass(900.0, 0.1, 1000.0, *case)) for case in ((-0.1, 0.0), (0.2, 940.0), (0.2, 0.0))]
    [950.0, 940.0, 901.0]
    """
    ended = np.where(np.isfinite(of_high), of_high >= 0.0, False)
    target = np.where(ended, np.where(edge > 0.0, edge, low + 1.0), rounds.between(low, of_low, high, of_high))
    return np.where(high - low > CLOSED, np.minimum(np.maximum(np.floor(target), low + 1.0), high - 1.0), np.nan)


def _edge_between(low: Number, high: Number, *edges: Number) -> Number:
    """The greatest of some masses between two others, 0 where none is."""
    greatest: Number = 0.0
    for edge in edges:
        greatest = np.maximum(greatest, np.where((edge > low) & (edge < high), edge, 0.0))
    return greatest


def _moves(tried: Number, fits: Number) -> Number:
    return np.isfinite(tried) & fits


def _moves_not(tried: Number, fits: Number) -> Number:
    return np.isfinite(tried) & np.logical_not(fits)


def _was(end: float, last: Number) -> Number:
    return last == end


def _greatest(assessed: Number, fits: Number, most: Number, low: Number, first_low: Number, starts: Number) -> Number:
    """The heaviest mass tried that suits [kg]."""
    found = np.where(np.isfinite(low), np.where(starts | (low > first_low), low, np.nan), np.nan)
    return np.where(assessed, np.where(fits, np.floor(most), found), np.nan)


def _beyond(is_open: Number, high: Number) -> Number:
    return np.where(is_open, high, np.nan)


def search_chain(edges: Sequence[float]) -> Chain:
    """The rounds as a chain. ``edges``: masses [kg] at which a table of the manual ends."""
    inputs = [Input("suits", "The trip's own mass suits", "", "day", kind="flag"),
              Input("assessed", "Assessed", "", "day", kind="flag")]  # fmt: skip
    inputs += [Input(key, label, "", "day") for key, label in (
        ("start_mass", "Mass of the trip [kg]"), ("start_slack", "Slack there"), ("most", "Greatest allowed [kg]"),
        ("least", "Empty mass with crew [kg]"))]  # fmt: skip
    inputs += [Input(f"fits_{n}", f"Round {n}: suits", "", "day", kind="flag") for n in range(ROUNDS)]
    inputs += [Input(f"slack_{n}", f"Round {n}: slack", "", "day") for n in range(ROUNDS)]
    between = partial(_edges_of, edges)
    steps = [
        _step("try_0", "Round 0: mass tried [kg]", _try_first, ("assessed", "most")),
        _step("open", "To be searched", _open_after_first, ("assessed", "fits_0"), truth=True),
        _step("starts", "Starts from the trip's own mass", _starts, ("suits", "start_mass", "most"), truth=True),
        _step("low_1", "Low [kg]", _first_low, ("starts", "start_mass", "least"), "open"),
        _step("of_low_1", "Slack there", _value_there, ("starts", "start_slack"), "open"),
        _step("high_1", "High [kg]", _first_high, ("starts", "start_mass", "most"), "open"),
        _step("of_high_1", "Slack there", _first_high_value, ("starts", "start_mass", "most", "start_slack", "slack_0"),
              "open"),
        _step("last_1", "Moved last", _neither, (), "open"),
    ]
    for n in range(1, ROUNDS):
        ends = (f"low_{n}", f"of_low_{n}", f"high_{n}", f"of_high_{n}", f"edge_{n}")
        steps.append(_step(f"edge_{n}", "Table ends at [kg]", between, (f"low_{n}", f"high_{n}"), f"low_{n}"))
        if n == 1:
            steps.append(_step("try_1", "Round 1: mass tried [kg]", _try_second, ("starts", *ends), "low_1"))
        else:
            steps.append(_step(f"try_{n}", f"Round {n}: mass tried [kg]", next_mass, ends, f"low_{n}"))
        steps += _round(n)
    end = ROUNDS
    steps += [
        _step("greatest", "Greatest suitable mass [kg]", _greatest,
              ("assessed", "fits_0", "most", f"low_{end}", "low_1", "starts")),
        _step("beyond", "Lightest tried that does not suit [kg]", _beyond, ("open", f"high_{end}")),
    ]  # fmt: skip
    return Chain(tuple(inputs), tuple(steps))


def _neither() -> Number:
    return np.float64(rounds.NEITHER)


def _edges_of(edges: Sequence[float], low: Number, high: Number) -> Number:
    return _edge_between(low, high, *edges)


def _step(key: str, label: str, function: Any, inputs: tuple[str, ...], guard: str = "", truth: bool = False) -> Step:
    return Step(key, "", "", label, SOURCE, function, inputs, guard, truth=truth)


def _round(n: int) -> list[Step]:
    """Both ends after round n."""
    tried, fits, slack, last = f"try_{n}", f"fits_{n}", f"slack_{n}", f"last_{n}"
    low, high = (f"lifts_{n}", f"lowers_{n}")
    again = {"low": f"high_again_{n}", "high": f"low_again_{n}"}
    return [
        _step(low, "Low end moves", _moves, (tried, fits), f"low_{n}", truth=True),
        _step(high, "High end moves", _moves_not, (tried, fits), f"low_{n}", truth=True),
        _step(again["low"], "High end moved before", partial(_was, rounds.HIGH), (last,), f"low_{n}", truth=True),
        _step(again["high"], "Low end moved before", partial(_was, rounds.LOW), (last,), f"low_{n}", truth=True),
        _step(f"low_{n + 1}", "Low [kg]", rounds.end_after, (low, tried, f"low_{n}"), f"low_{n}"),
        _step(f"of_low_{n + 1}", "Slack there", rounds.value_after, (low, slack, high, again["low"], f"of_low_{n}"),
              f"low_{n}"),
        _step(f"high_{n + 1}", "High [kg]", rounds.end_after, (high, tried, f"high_{n}"), f"low_{n}"),
        _step(f"of_high_{n + 1}", "Slack there", rounds.value_after, (high, slack, low, again["high"], f"of_high_{n}"),
              f"low_{n}"),
        _step(f"last_{n + 1}", "Moved last", rounds.last_after, (low, high, last), f"low_{n}"),
    ]  # fmt: skip


@dataclass(frozen=True)
class Search:
    """The sheet of the search, and the two sheets of its cases."""

    cases: Cases
    trials: tuple[Cases, Cases]

    def address(self, key: str, row: int) -> str:
        """Reference of a key's cell in a row of Best [from 0]."""
        return self.cases.cell(key, row)


def edges_of(book: Book) -> list[float]:
    """Masses [kg] at which the card's tables of the manual end, from light to heavy."""
    return sorted({float(mass) for tables in book.card.tables.values() for _, mass in tables.pages})


def write_search(book: Book, best: Best, least: float) -> Search:
    """The three sheets. ``least``: the empty mass with crew [kg], NaN where it is not known."""
    chain = search_chain(edges_of(book))
    start = {
        "suits": best.si["suits"],
        "assessed": best.si["assessed"],
        "start_mass": np.array([_number(mass) for mass in best.values["mass"]]),
        "start_slack": np.array([_number(best.values[f"{side}_slack"][row]) for row, (side, _) in enumerate(best.ops)]),
        "most": np.array([float(book.values[f"max_{side}_mass"]) for side, _ in best.ops]),
        "least": np.full(len(best.ops), least),
    }
    tried, fits, slack = run(book, chain, best, start)
    letters = _letters(chain)
    trials = tuple(_write_trials(book, best, side, tried, letters) for side in ("landing", "takeoff"))
    cases = _write_rounds(book, chain, best, start, fits, slack, {"landing": trials[0], "takeoff": trials[1]})
    if any(cases.letters[f"try_{n}"] != letters[f"try_{n}"] for n in range(ROUNDS)):
        raise ValueError("the columns of the search are not where its cases look for them")
    return Search(cases, (trials[0], trials[1]))


def _number(value: Any) -> float:
    return float(value) if isinstance(value, int | float) else float("nan")


def run(book: Book, chain: Chain, best: Best, start: Mapping[str, np.ndarray]) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Masses tried, whether they suit, and their slacks: each with a row for each of Best's and a column for each round."""
    count = len(best.ops)
    tried, slack = np.full((count, ROUNDS), np.nan), np.full((count, ROUNDS), np.nan)
    fits = np.zeros((count, ROUNDS), dtype=bool)
    for n in range(ROUNDS):
        so_far = {f"fits_{m}": fits[:, m] for m in range(ROUNDS)} | {f"slack_{m}": slack[:, m] for m in range(ROUNDS)}
        given = {**start, **so_far}
        tried[:, n] = evaluate(chain, given, [f"try_{n}"])[f"try_{n}"]
        for side in ("landing", "takeoff"):
            rows = np.array(best.rows(side), dtype=np.intp)
            found = evaluate(book.chain, _inputs(book, best, side, rows, tried[rows, n]), [f"{side}_slack", f"{side}_verdict"])
            words = np.array(book.chain.by_key[f"{side}_verdict"].words)  # type: ignore[union-attr]
            fits[rows, n] = words[found[f"{side}_verdict"] - 1] == SUITABLE
            slack[rows, n] = found[f"{side}_slack"]
    fits &= np.isfinite(tried)
    slack[~np.isfinite(tried)] = np.nan
    return tried, fits, slack


def _inputs(book: Book, best: Best, side: str, rows: np.ndarray, mass: np.ndarray) -> dict[str, Any]:
    """The chain's inputs [SI] of some rows of Best at other masses [kg]."""
    chosen = {key: column[rows] for key, column in best.si.items()}
    return {**no_inputs(), **book.values, **chosen, f"mass_{side}": mass}


def _letters(chain: Chain) -> dict[str, str]:
    """Letters of the sheet's columns, before it is written: what it tells of each row, the inputs, the steps."""
    keys = ["case", *(item.key for item in chain.inputs), *(step.key for step in chain.steps)]
    return {key: get_column_letter(number) for number, key in enumerate(keys, 1)}


def _write_trials(book: Book, best: Best, side: str, tried: np.ndarray, letters: Mapping[str, str]) -> Cases:
    """The cases of a side: for each of its rows of Best one for each round, at the mass that the search asks for."""
    rows = np.repeat(np.array(best.rows(side)), ROUNDS)
    numbers = list(range(ROUNDS)) * len(best.rows(side))
    mass = f"mass_{side}"
    formulas = [f"'{SEARCH}'!${letters[f'try_{n}']}${FIRST_ROW + row}" for row, n in zip(rows.tolist(), numbers, strict=True)]
    about = {
        "stop": About("Stop", 6, FormulaColumn([best.address("stop", row) for row in rows.tolist()],
                                               [best.values["stop"][row] for row in rows.tolist()])),
        "round": About("Round", 7, TextColumn(list(numbers))),
    }  # fmt: skip
    wanted = (f"{side}_slack", f"{side}_verdict")
    masses = tried[rows, numbers]
    given = {mass: Given(masses, formulas)}
    faults = [str(best.values["fault"][row]) for row in rows.tolist()]
    elsewhere = Elsewhere(best.places, {OF_BEST: (FIRST_ROW + rows).tolist()}, faults)
    values = _inputs(book, best, side, rows, masses)
    word = "landing" if side == "landing" else "take-off"
    return write_cases(book.pages, TRIALS[side], f"Masses tried for each {word}", book.chain, about, given, values, wanted,
                       elsewhere)  # fmt: skip


def _write_rounds(book: Book, chain: Chain, best: Best, start: Mapping[str, np.ndarray], fits: np.ndarray, slack: np.ndarray,
                  trials: Mapping[str, Cases]) -> Cases:  # fmt: skip
    """The sheet of the search: a row for each of Best's."""
    rows = range(len(best.ops))
    names = [f"{'Landing' if side == 'landing' else 'Take-off'}, stop {stop}" for side, stop in best.ops]
    about = {"case": About("Search", 18, FormulaColumn(
        [f'{best.address("side", row)}&", stop "&{best.address("stop", row)}' for row in rows], names))}  # fmt: skip
    verdicts = [best.address(f"{side}_verdict", row) for row, (side, _) in enumerate(best.ops)]
    on = [f'{best.address("active", row)}="yes"' for row in rows]
    formulas: dict[str, list[str]] = {
        "suits": [f'IF(AND({one},{verdict}="{SUITABLE}"),"yes","no")' for one, verdict in zip(on, verdicts, strict=True)],
        "assessed": [f'IF(AND({one},{verdict}<>"{NOT_ASSESSED}"),"yes","no")'
                     for one, verdict in zip(on, verdicts, strict=True)],
        "start_mass": [best.address("mass", row) for row in rows],
        "start_slack": [best.address(f"{side}_slack", row) for row, (side, _) in enumerate(best.ops)],
        "most": [book.pages.places[f"max_{side}_mass"].reference for side, _ in best.ops],
        "least": [fixed(cell("operating_mass"), READING)] * len(best.ops),
    }
    for n in range(ROUNDS):
        at = [(trials[side], ROUNDS * best.rows(side).index(row) + n) for row, (side, _) in enumerate(best.ops)]
        sides = [side for side, _ in best.ops]
        formulas[f"fits_{n}"] = [f'IF({one.cell(f"{side}_verdict", where)}="{SUITABLE}","yes","no")'
                                 for (one, where), side in zip(at, sides, strict=True)]  # fmt: skip
        formulas[f"slack_{n}"] = [
            f'IF(ISNUMBER({one.cell(f"mass_{side}", where)}),{one.cell(f"{side}_slack", where)},"")'
            for (one, where), side in zip(at, sides, strict=True)
        ]
    shown: dict[str, Any] = {key: _yes_or_no(start[key]) if start[key].dtype == bool else start[key] for key in start}
    shown |= {f"fits_{n}": _yes_or_no(fits[:, n]) for n in range(ROUNDS)} | {f"slack_{n}": slack[:, n] for n in range(ROUNDS)}
    given = {item.key: Given(shown[item.key], formulas[item.key]) for item in chain.inputs}
    return write_cases(book.pages, SEARCH, "The greatest suitable mass, round by round", chain, about, given, {},
                       [step.key for step in chain.steps])  # fmt: skip


def _yes_or_no(truths: np.ndarray) -> list[str]:
    return ["yes" if truth else "no" for truth in truths.tolist()]
