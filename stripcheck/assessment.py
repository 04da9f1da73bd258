"""The Python door: strips, an aircraft card, a day and a rule set in; a table of results by name out."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck.card import Card, flap_setting, load_card
from stripcheck.chain import Chain, Step, evaluate
from stripcheck.day import Day, read_day
from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.rules import Rules, load_rules
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import from_si, read_quantity, to_si
from stripcheck.verdict import FAULT

KIND_OF_UNIT = {"m": "length", "ft": "altitude", "%": "slope", "°": "angle", "°C": "temperature", "hPa": "pressure",
                "kt": "speed"}  # fmt: skip


@dataclass(frozen=True)
class Result(Mapping[str, Any]):
    """A table of results, one row for each direction: ``result["takeoff_margin"]`` and so on for each step's key.

    Numbers come in the unit that ``unit(key)`` tells, NaN where there is no value; verdicts and reasons come as
    texts; ``si(key)`` gives the plain array in SI, or the number of the words.
    """

    chain: Chain
    size: int
    found: dict[str, np.ndarray]
    faults: Sequence[str]

    def __getitem__(self, key: str) -> Any:
        step = self._step(key)
        if step.words:
            return self._texts(step)
        values = self.si(key)
        return values if values.dtype == bool else np.asarray(from_si(values, step.unit))

    def __iter__(self) -> Iterator[str]:
        return (step.key for step in self.chain.steps)

    def __len__(self) -> int:
        return len(self.chain.steps)

    def si(self, key: str) -> np.ndarray:
        """Values in SI, one for each direction."""
        return np.broadcast_to(self.found[self._step(key).key], self.size)

    def unit(self, key: str) -> str:
        """Unit in which ``result[key]`` comes."""
        return self._step(key).unit

    def _step(self, key: str) -> Step:
        item = self.chain.by_key.get(key)
        if not isinstance(item, Step):
            raise KeyError(f"{key} is not a result; results are: {', '.join(self)}")
        return item

    def _texts(self, step: Step) -> list[str]:
        numbers = self.si(step.key)
        texts = [step.words[int(number) - 1] for number in numbers]
        return [self.faults[i] if text == FAULT else text for i, text in enumerate(texts)]


def assess(strips: Mapping[str, Any], card: Card | str, day: Day | Mapping[str, Any], rules: Rules | str = "manual-only",
           *, takeoff_mass: Any = None, landing_mass: Any = None, takeoff_flap: str | None = None,
           landing_flap: str | None = None) -> Result:  # fmt: skip
    """Assess strips, one direction a row, for one aeroplane on one day under one rule set.

    Parameters
    ----------
    strips
        Columns by key of ``stripcheck.inputs.STRIP``: numbers in the units given there (lengths [m], elevations and
        obstacle heights [ft], slope [%], headings [deg], wind [kt]) or texts such as "2300 ft"; ``surface`` and
        ``condition`` as words of the ground table. Columns are equally long, or single values for all rows.
        Missing columns are "not known".
    card, rules
        As loaded, or the name of a shipped one, or the path of a file.
    day
        As read, or values by key of ``stripcheck.inputs.DAY``.
    takeoff_mass, landing_mass
        [kg], or texts with a unit; the card's usual ones where not given. Single values or columns.
    takeoff_flap, landing_flap
        Names of the card's settings; its usual ones where not given.

    Returns the `Result`. Raises InputError for what can't be right.

    >>> from stripcheck import assess
    >>> result = assess({"tora": [950.0, 450.0], "lda": [950.0, 450.0], "elevation_field": 2300, "slope_given": 1.5,
    ...                  "surface": "grass"}, "ridge-runner", {"temperature": 22}, "uk-leaflet")
    >>> result["takeoff_verdict"]
    ['suitable', 'unsuitable']
    """
    card = load_card(card) if isinstance(card, str) else card
    rules = load_rules(rules) if isinstance(rules, str) else rules
    day = day if isinstance(day, Day) else read_day(day)
    columns, faults, size = strip_columns(strips)
    loading = {
        **_mass("mass_takeoff", takeoff_mass),
        **_mass("mass_landing", landing_mass),
        **_flap("takeoff_flap", takeoff_flap, card, "take-off"),
        **_flap("landing_flap", landing_flap, card, "landing"),
    }
    chain = card.chain
    values = evaluate(chain, {**card.values, **rules.values, **day.values, **columns, **loading})
    return Result(chain, size, values, faults)


def strip_columns(strips: Mapping[str, Any]) -> tuple[dict[str, Any], Sequence[str], int]:
    """Columns for the chain from what a user gives: SI arrays, codes and truths; the faults' texts; the row count."""
    known = {item.key: item for item in STRIP}
    unknown = [key for key in strips if key not in known]
    if unknown:
        raise InputError(f'strips: "{unknown[0]}" is not a column; the columns are: {", ".join(known)}')
    lengths = {len(column) for column in strips.values() if _is_column(column)}
    if len(lengths) > 1:
        raise InputError(f"strips: the columns are not equally long: {sorted(lengths)} rows")
    size = lengths.pop() if lengths else 1
    faults = _repeated(strips.get("fault", ""), size)
    columns: dict[str, Any] = {}
    for item in STRIP:
        column = strips.get(item.key)
        if item.kind == "fault":
            columns[item.key] = np.array([bool(text) for text in faults])
        elif item.kind == "flag":
            columns[item.key] = np.array([_is_yes(flag, item.key) for flag in _repeated(column, size)])
        elif item.kind == "choice":
            words = SURFACES if item.key == "surface" else CONDITIONS
            columns[item.key] = _codes(_repeated(column, size), words)
        else:
            columns[item.key] = _numbers(column, item.unit, item.key, size)
    return columns, faults, size


def _is_column(column: Any) -> bool:
    return not isinstance(column, str) and hasattr(column, "__len__")


def _repeated(column: Any, size: int) -> Sequence[Any]:
    return column if _is_column(column) else [column] * size


def _is_yes(flag: Any, key: str) -> bool:
    if flag in (None, "", "yes", True, 1):
        return True
    if flag in ("no", False, 0):
        return False
    raise InputError(f'strips: {key} = "{flag}" is neither yes nor no')


def _codes(words: Sequence[Any], table: tuple[str, ...]) -> np.ndarray:
    """Place of each word in the table, -1 where it is not there."""
    code = {word: number for number, word in enumerate(table)}
    return np.array([code.get(word, -1) for word in words])


def _numbers(column: Any, unit: str, key: str, size: int) -> np.ndarray:
    if column is None:
        return np.full(size, np.nan)
    array = np.asarray(column)
    if array.dtype.kind in "fiu":
        return np.broadcast_to(np.asarray(to_si(array.astype(float), unit), float), size)
    try:
        values = [read_quantity(value, KIND_OF_UNIT[unit], unit if unit != "hPa" else "") for value in
                  _repeated(column, size)]  # fmt: skip
    except InputError as error:
        raise InputError(f"strips: {key}: {error}") from None
    return np.array(values)


def _mass(key: str, mass: Any) -> dict[str, Any]:
    if mass is None:
        return {}
    if _is_column(mass):
        return {key: np.asarray(mass, float)}
    value = read_quantity(mass, "mass")
    if not value > 0.0:
        raise InputError(f"{key}: {mass} is not a mass; write for example 1050 kg")
    return {key: value}


def _flap(key: str, name: str | None, card: Card, use: str) -> dict[str, float]:
    return {} if name is None else {key: flap_setting(name, card.flaps, use, card.file)}


