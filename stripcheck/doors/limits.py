"""How far it goes: the inverse questions as spreadsheet functions. Each gives values in SI, or texts, and sentences."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import Any

import numpy as np

from stripcheck import solve
from stripcheck.doors.aircraft import Aeroplane
from stripcheck.verdict import MARGINAL, SUITABLE

Found = tuple[Any, dict[int, str]]
Ask = Callable[[Aeroplane, Mapping[str, np.ndarray], Any, int], Found]


def most_mass(side: str) -> Ask:
    """Function for the greatest mass [kg] at which a side is suitable."""

    def ask(aeroplane: Aeroplane, values: Mapping[str, np.ndarray], rules: Any, size: int) -> Found:
        return _of_answer(solve.most_mass(aeroplane.case(values, rules, size), side))

    return ask


def hottest(side: str) -> Ask:
    """Function for the hottest air [K] in which a side is suitable."""

    def ask(aeroplane: Aeroplane, values: Mapping[str, np.ndarray], rules: Any, size: int) -> Found:
        return _of_answer(solve.hottest_air(aeroplane.case(values, rules, size), side))

    return ask


def abort_distance(aeroplane: Aeroplane, values: Mapping[str, np.ndarray], rules: Any, size: int) -> Found:
    """Distance [m] along the strip of the last place from which a rejected take-off still stops."""
    point = solve.abort_point_of(aeroplane.case(values, rules, size), solve.REACTION)
    return point.distance, _words(point.distance, point.texts())


def abort_speed(aeroplane: Aeroplane, values: Mapping[str, np.ndarray], rules: Any, size: int) -> Found:
    """Equivalent airspeed [m/s] at that place."""
    point = solve.abort_point_of(aeroplane.case(values, rules, size), solve.REACTION)
    return point.eas, _words(point.eas, point.texts())


def best_flap(side: str) -> Ask:
    """Function for the name of the allowed flap setting that leaves the most margin, among the best verdicts."""
    use = {"takeoff": "take-off", "landing": "landing"}[side]

    def ask(aeroplane: Aeroplane, values: Mapping[str, np.ndarray], rules: Any, size: int) -> Found:
        names, ranks, margins = [], [], []
        for flap in aeroplane.flaps:
            if use in flap.uses:
                case = aeroplane.case({**values, "flap": np.full(size, flap.deflection)}, rules, size)
                verdicts = case[f"{side}_verdict"]
                names.append(flap.name)
                ranks.append([{SUITABLE: 2, MARGINAL: 1}.get(verdict, 0) for verdict in verdicts])
                margins.append(np.nan_to_num(case.si(f"{side}_margin"), nan=-np.inf))
        rank, margin = np.array(ranks), np.array(margins)
        best = np.where(rank == rank.max(axis=0), margin, -np.inf).argmax(axis=0)
        fits = rank.max(axis=0) > 0
        return [names[i] if fit else "none" for i, fit in zip(best.tolist(), fits.tolist(), strict=True)], {}

    return ask


def _of_answer(answer: solve.Answer) -> Found:
    return answer.value, _words(answer.value, answer.texts())


def _words(values: np.ndarray, texts: list[str]) -> dict[int, str]:
    return {place: texts[place] for place in np.flatnonzero(~np.isfinite(values)).tolist()}
