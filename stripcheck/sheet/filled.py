"""A workbook that stripcheck filled, read as it stands now: what was typed over, inserted, sorted or deleted counts.

Columns are found by their headers, and values by the names of their cells, wherever a user's own rows and columns have moved
them. What a cell's formula could not read, as a text where a number belongs, is not known here either.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from stripcheck.chain import Chain
from stripcheck.doors.aircraft import Aeroplane
from stripcheck.errors import InputError
from stripcheck.inputs import STRIP
from stripcheck.profile import Profile, local_slopes
from stripcheck.profile_run import profile_slopes
from stripcheck.sheet import method, strips, summary
from stripcheck.sheet.filled_pages import TITLES, ValuePages
from stripcheck.sheet.filled_strips import Sheet, StripSheet, with_headers
from stripcheck.sheet.package import Package
from stripcheck.units import from_si, to_si

SHEETS = (*TITLES.values(), strips.SHEET, summary.SHEET, method.SHEET)


@dataclass(frozen=True)
class Filled:
    """A filled workbook as it stands. ``inputs`` are all inputs of the chain in SI, those of the strips as arrays with one
    entry for each row of ``strips``; ``faults`` the texts of the rows' faults; ``doubts`` tells in a sentence each what is
    typed but can't be read, or can't be right."""

    pages: ValuePages
    strips: StripSheet
    summary: Sheet
    aeroplane: Aeroplane
    inputs: Mapping[str, Any]
    faults: Sequence[str]
    profiles: Sequence[Profile | None]
    doubts: Sequence[str]

    @property
    def chain(self) -> Chain:
        return self.aeroplane.chain


def is_filled(package: Package) -> bool:
    """Whether a workbook has the sheets that stripcheck fills."""
    return set(SHEETS) <= set(package.sheets)


def check_filled(package: Package) -> None:
    """Raise InputError for a workbook that stripcheck did not fill, or that has lost sheets."""
    missing = [title for title in SHEETS if title not in package.sheets]
    if len(missing) > 2:
        raise InputError(f"{package.path}: this is no workbook that `stripcheck fill` made, as a refresh needs one")
    if missing:
        names = " and ".join(f'"{title}"' for title in missing)
        raise InputError(f"{package.path}: the workbook has no sheet {names}, as each that `stripcheck fill` made; put it back")


def read_filled(package: Package, pages: ValuePages) -> Filled:
    """Read a workbook's inputs. Raises InputError for what can't be read."""
    aeroplane = pages.aeroplane()
    values = {**aeroplane.values, **pages.rules(), **pages.day(), **pages.loading(aeroplane)}
    sheet = StripSheet(with_headers(package, strips.SHEET, "Direction"), aeroplane.chain)
    given, faults = sheet.given()
    profiles = sheet.profiles(given)
    values |= given
    if any(profile is not None for profile in profiles):
        values["local_slope"] = local_slopes(values["local_slope"], profiles)
        values |= _rounded(profile_slopes(aeroplane.chain, values, profiles))
    doubts = list(dict.fromkeys((*pages.doubts, *sheet.doubts)))
    return Filled(pages, sheet, with_headers(package, summary.SHEET, "In and out"), aeroplane, values, faults, profiles, doubts)


def _rounded(found: Mapping[str, np.ndarray]) -> dict[str, np.ndarray]:
    """Slopes and rolls as the sheet shows them, so that its formulas give the same."""
    units = {item.key: item.unit for item in STRIP}
    return {key: np.asarray(to_si(np.round(from_si(values, units[key]), 6), units[key])) for key, values in found.items()}
