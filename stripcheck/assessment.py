"""The Python door: strips, an aircraft card, a day and a rule set in; a table of results by name out."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import repeat
from typing import Any

import numpy as np

from stripcheck.card import Card, load_card
from stripcheck.chain import FEW, Chain, Step, evaluate
from stripcheck.day import Day, read_day
from stripcheck.errors import InputError
from stripcheck.flaps import flap_setting
from stripcheck.inputs import STRIP
from stripcheck.profile import Profile, local_slopes, profile_column
from stripcheck.profile_run import profile_slopes
from stripcheck.rules import Rules, load_rules
from stripcheck.surface import CONDITIONS, SURFACES
from stripcheck.units import PRESSURE_INHG, UNITS, from_si, read_quantity
from stripcheck.verdict import FAULT

KIND_OF_UNIT = {"m": "length", "ft": "altitude", "%": "slope", "°": "angle", "°C": "temperature", "hPa": "pressure",
                "kt": "speed"}  # fmt: skip
# what nearly everybody asks for; a long list gets the other steps only when they are asked for
AT_ONCE = (
    "takeoff_finding", "takeoff_verdict", "takeoff_reason", "takeoff_roll", "takeoff_distance", "takeoff_required",
    "takeoff_margin", "landing_finding", "landing_verdict", "landing_reason", "landing_roll", "landing_distance",
    "landing_required", "landing_margin",
)  # fmt: skip
_YES_OR_NO = {None: 1, "": 1, "yes": 1, True: 1, "no": 0, False: 0}


@dataclass(frozen=True)
class Result(Mapping[str, Any]):
    """A table of results, one row for each direction: ``result["takeoff_margin"]`` and so on for each step's key.

    Numbers come in the unit that ``unit(key)`` tells, NaN where there is no value; verdicts and reasons come as
    texts; ``si(key)`` gives the plain array in SI, or the number of the words. ``given`` are the inputs in SI;
    ``found`` holds the steps computed so far, the others follow when they are asked for.
    """

    chain: Chain
    size: int
    given: Mapping[str, Any]
    found: dict[str, np.ndarray]
    faults: Sequence[str]
    profiles: Sequence[Profile | None] = ()

    def changed(self, given: Mapping[str, Any], profiles: Sequence[Profile | None] | None = None) -> Result:
        """The same with other inputs [SI], nothing computed yet; what slope profiles mean is worked out anew.

        >>> from stripcheck import assess
        >>> result = assess({"tora": 700, "elevation_field": 2300, "slope_given": 1.5, "surface": "grass"}, "ridge-runner",
        ...                 {"temperature": 22})
        >>> bool((result.changed({"mass_takeoff": 900.0}).si("takeoff_roll") < result.si("takeoff_roll")).all())
        True
        """
        values, profiles = {**self.given, **given}, self.profiles if profiles is None else profiles
        if profiles:
            values |= profile_slopes(self.chain, values, profiles)
        return Result(self.chain, self.size, values, {}, self.faults, profiles)

    def __getitem__(self, key: str) -> Any:
        step = self._step(key)
        if step.words:
            return self._texts(step)
        values: Any = self.si(key)
        return values if values.dtype == bool else np.asarray(from_si(values, step.unit))

    def __iter__(self) -> Iterator[str]:
        return (step.key for step in self.chain.steps)

    def __len__(self) -> int:
        return len(self.chain.steps)

    def si(self, key: str) -> np.ndarray:
        """Values in SI, one for each direction."""
        step = self._step(key)
        if step.key not in self.found:
            self.found.update(evaluate(self.chain, self.given, (step.key,)))
        return np.broadcast_to(self.found[step.key], self.size)

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
        texts: list[str] = np.array(step.words, object)[numbers - 1].tolist()
        if FAULT in step.words:
            for i in np.flatnonzero(numbers == step.words.index(FAULT) + 1).tolist():
                texts[i] = self.faults[i]
        return texts


def assess(strips: Mapping[str, Any], card: Card | str, day: Day | Mapping[str, Any],
           rules: Rules | str = "manual-only", *, takeoff_mass: Any = None, landing_mass: Any = None,
           takeoff_flap: str | None = None, landing_flap: str | None = None) -> Result:  # fmt: skip
    """Assess strips, one direction a row, for one aeroplane on one day under one rule set.

    Parameters
    ----------
    strips
        Columns by key of ``stripcheck.inputs.STRIP``: numbers in the units given there (lengths [m], elevations and
        obstacle heights [ft], slope [%], headings [deg], wind [kt]) or texts such as "2300 ft"; ``surface`` and
        ``condition`` as words of the ground table, or arrays of their places [0, 1, ...] in
        ``stripcheck.surface.SURFACES`` and ``CONDITIONS`` (-1: not known); whether a direction may be used as
        "yes" or "no", or truths; ``profile``: slope profiles such as "0:0, 200:3.5, 450:12", distance and height [m] from
        the end where the direction begins. Columns are equally long, or single values for all rows. Missing columns are
        "not known". Arrays of numbers are by far the fastest.
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
    result = prepare(strips, card, day, rules, takeoff_mass=takeoff_mass, landing_mass=landing_mass,
                     takeoff_flap=takeoff_flap, landing_flap=landing_flap)  # fmt: skip
    result.found.update(evaluate(result.chain, result.given, None if result.size < FEW else AT_ONCE))
    return result


def prepare(strips: Mapping[str, Any], card: Card | str, day: Day | Mapping[str, Any],
            rules: Rules | str = "manual-only", *, takeoff_mass: Any = None, landing_mass: Any = None,
            takeoff_flap: str | None = None, landing_flap: str | None = None) -> Result:  # fmt: skip
    """As ``assess``, with the inputs read and nothing computed yet.

    >>> prepare({"tora": 950.0}, "ridge-runner", {"temperature": 22}).given["mass_takeoff"]
    1050.0
    """
    card = load_card(card) if isinstance(card, str) else card
    rules = load_rules(rules) if isinstance(rules, str) else rules
    day = day if isinstance(day, Day) else read_day(day)
    masses = [mass for mass in (takeoff_mass, landing_mass) if _is_column(mass)]
    columns, faults, size = strip_columns(strips, masses)
    loading = {
        **_mass("mass_takeoff", takeoff_mass),
        **_mass("mass_landing", landing_mass),
        **_flap("takeoff_flap", takeoff_flap, card, "take-off"),
        **_flap("landing_flap", landing_flap, card, "landing"),
    }
    values = {**card.values, **rules.values, **day.values, **columns, **loading}
    profiles = _profiles(strips.get("profile"), columns, size)
    if profiles:
        values["local_slope"] = local_slopes(columns["local_slope"], profiles)
    return Result(card.chain, size, values, {}, faults).changed({}, profiles)


def strip_columns(strips: Mapping[str, Any], masses: Sequence[Any] = ()) -> tuple[dict[str, Any], Sequence[str], int]:
    """Columns for the chain from what a user gives: SI arrays, codes and truths; the faults' texts; the row count.

    ``masses`` are columns that go beside them, and so must be equally long.
    """
    known = {item.key: item for item in STRIP}
    unknown = [key for key in strips if key not in known and key != "profile"]
    if unknown:
        raise InputError(f'strips: "{unknown[0]}" is not a column; the columns are: {", ".join(known)}')
    lengths = {len(column) for column in (*strips.values(), *masses) if _is_column(column)}
    if len(lengths) > 1:
        raise InputError(f"strips: the columns are not equally long: {sorted(lengths)} rows")
    size = lengths.pop() if lengths else 1
    faults = _repeated(strips.get("fault", ""), size)
    columns: dict[str, Any] = {}
    for item in STRIP:
        column = strips.get(item.key)
        if item.kind == "fault":
            columns[item.key] = np.fromiter(map(bool, faults), bool, size) if item.key in strips else _all(False, size)
        elif item.kind == "flag":
            columns[item.key] = _flags(column, item.key, size)
        elif item.kind == "choice":
            columns[item.key] = _codes(column, SURFACES if item.key == "surface" else CONDITIONS, item.key, size)
        else:
            columns[item.key] = _numbers(column, item.unit, item.key, size)
    return columns, faults, size


def _profiles(column: Any, columns: Mapping[str, Any], size: int) -> list[Profile | None]:
    """The slope profile of each row; an empty list where no row has one."""
    if column is None:
        return []
    usable = np.fmax(columns["tora"], columns["lda"])
    profiles = profile_column(column, np.broadcast_to(columns["length"], size), np.broadcast_to(usable, size))
    return profiles if any(profile is not None for profile in profiles) else []


def _is_column(column: Any) -> bool:
    return not isinstance(column, str) and hasattr(column, "__len__") and getattr(column, "ndim", 1) > 0


def _repeated(column: Any, size: int) -> Sequence[Any]:
    return column if _is_column(column) else [column] * size


def _all(value: Any, size: int) -> np.ndarray:
    """One value for all rows, in the memory of one."""
    return np.broadcast_to(np.asarray(value), size)


def _flags(column: Any, key: str, size: int) -> np.ndarray:
    """Truth for each yes or no; what is blank is yes."""
    codes = _mapped(column, _YES_OR_NO, size)
    if codes.dtype != bool and ((codes < 0) | (codes > 1)).any():
        row = int(np.argmax((codes < 0) | (codes > 1)))
        flag = column[row] if _is_column(column) else column
        raise InputError(f'strips: {key}, row {row + 1}: "{flag}" is neither yes nor no')
    return codes.astype(bool)


def _codes(column: Any, table: tuple[str, ...], key: str, size: int) -> np.ndarray:
    """Place of each word in the table, -1 where there is none; -2 for a condition that is not in the table, so that the
    day's is not taken for it."""
    strange = -2 if table is CONDITIONS else -1
    codes = _mapped(column, {"": -1, None: -1, **{word: number for number, word in enumerate(table)}}, size, strange)
    if codes.min(initial=-1) < -2 or codes.max(initial=-1) >= len(table):
        row = int(np.argmax((codes < -2) | (codes >= len(table))))
        raise InputError(
            f"strips: {key}, row {row + 1}: {codes[row]} is not the place of a word; write one of: {', '.join(table)}"
        )
    return codes.astype(np.int8)


def _mapped(column: Any, code: Mapping[Any, int], size: int, strange: int = -1) -> np.ndarray:
    """The code of each word, ``strange`` where it has none; arrays of whole numbers or truths are codes already."""
    if not _is_column(column):
        return _all(code.get(column.item() if isinstance(column, np.ndarray) else column, strange), size)
    if isinstance(column, np.ndarray):
        if column.dtype.kind in "biu":
            return column
        column = column.tolist()
    return np.fromiter(map(code.get, column, repeat(strange)), np.int8, size)


def _numbers(column: Any, unit: str, key: str, size: int) -> np.ndarray:
    """SI values; always in an array of their own, from which results are computed later too."""
    if column is None:
        return _all(np.nan, size)
    array = np.asarray(column)
    if array.dtype.kind in "fiu":
        array = _as_hectopascals(array) if unit == "hPa" else array
        values = array * UNITS[unit].factor
        return np.broadcast_to(values + UNITS[unit].offset if UNITS[unit].offset else values, size)
    try:
        return np.array([read_quantity(value, KIND_OF_UNIT[unit], unit if unit != "hPa" else "") for value in
                         _repeated(column, size)])  # fmt: skip
    except InputError as error:
        raise InputError(f"strips: {key}: {error}") from None


def _as_hectopascals(pressures: np.ndarray) -> np.ndarray:
    """Bare pressures [hPa]; those that can only be inches of mercury are converted."""
    inches = (pressures >= PRESSURE_INHG[0]) & (pressures <= PRESSURE_INHG[1])
    return np.where(inches, pressures * (UNITS["inHg"].factor / UNITS["hPa"].factor), pressures) if inches.any() else pressures


def _mass(key: str, mass: Any) -> dict[str, Any]:
    if mass is None:
        return {}
    if _is_column(mass):
        return {key: np.array([_one_mass(key, one) for one in mass])}
    return {key: _one_mass(key, mass)}


def _one_mass(key: str, mass: Any) -> float:
    value = read_quantity(mass.item() if isinstance(mass, np.generic) else mass, "mass")
    if value <= 0.0:
        raise InputError(f"{key}: {mass} is not a mass; write for example 1050 kg")
    return value


def _flap(key: str, name: str | None, card: Card, use: str) -> dict[str, float]:
    return {} if name is None else {key: flap_setting(name, card.flaps, use, card.file)}
