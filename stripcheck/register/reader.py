"""From the file of a runway list to runway directions.

One-way strips: ``Land on`` names the direction in which one lands ("09" = heading 090, beginning at the end
that is called 09), ``Leave by`` the direction of the take-off. The other direction is then closed to it.
``One-way`` alone can't say which way, and is a fault.

Slope: a column for the whole runway; positive = rising from the end that is named first to the other. A slope
is never worked out here from the elevations of the ends. A slope profile begins at the end that is named first.

Ends: what a column tells about end 1 holds for the end that is named first; TORA and LDA of end 1 are those
of the direction that begins there. A threshold displacement or an obstacle told for the whole runway holds
for both ends.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from stripcheck.errors import InputError, one_line
from stripcheck.register.airports import Airport, read_airports
from stripcheck.register.checks import allowed_directions, check_all, check_one_way
from stripcheck.register.columns import near_misses
from stripcheck.register.direction_numbers import Doubt, Pair, direction_numbers
from stripcheck.register.directions import Directions, LeftOut
from stripcheck.register.left_out import Reason, reasons_to_leave_out
from stripcheck.register.read_table import Table, read_table
from stripcheck.register.runways import Runways, runways_of
from stripcheck.register.surface_words import Surface, known_condition, read_surface, worse_condition
from stripcheck.units import KINDS

T = TypeVar("T")
Texts = dict[str, tuple[list[str], list[str]]]  # of the directions that begin at end 1, and at end 2


@dataclass(frozen=True)
class Reading:
    """All runways of a list as read, also those that are left out.

    ``known``: the airfield of each, None where there is none. ``surfaces``: what each spelling means. ``reasons``: why a
    runway is left out, None for one that is kept. ``texts``, ``numbers``: of both directions, SI, keys of ``Directions``.
    ``doubts``: about each runway. ``cell_faults``: how many of ``runways.faults``, the first ones, are about a single
    value; the others are about values that contradict each other or a way that is not told.
    """

    runways: Runways
    known: list[Airport | None]
    surfaces: list[Surface]
    reasons: list[Reason | None]
    texts: Texts
    numbers: dict[str, Pair]
    doubts: list[Doubt]
    cell_faults: int


def read_list(
    path: str | Path, *, airports: str | Path | None = None, sheet: str | None = None, strict: bool = False
) -> Directions:
    """Read a runway list as runway directions, two for each runway.

    ``path``: .csv, .txt, .tsv, .xlsx, .xlsm, .xls or .ods. ``airports``: airports file of the open data, for
    names, elevations and types; when it is not named, an ``airports.csv`` beside a list that has a column
    ``airport_ident`` is taken. ``sheet``: sheet of a workbook. ``strict``: stop at the first row that has a
    fault.

    A row with a fault stays in the result with the reason in ``texts["fault"]``. Raises InputError for a file
    or a header row that can't be used, and, when strict, for the first row with a fault.

    >>> import tempfile
    >>> folder = tempfile.TemporaryDirectory()
    >>> file = Path(folder.name) / "strips.csv"
    >>> _ = file.write_text("Strip,Runway,Length,Surface,Slope,Land on\\nCreek,09/27,2034 ft,turf,4,09\\n")
    >>> strips = read_list(file)
    >>> strips.texts["direction"], strips.texts["land_here"], strips.texts["surface"]
    (['09', '27'], ['yes', 'no'], ['grass', 'grass'])
    >>> [round(float(value), 3) for value in strips.numbers["slope_given"]]
    [0.04, -0.04]
    """
    path = Path(path)
    return directions_of(read_runways(read_table(path, sheet), path, airports), strict)


def directions_of(reading: Reading, strict: bool = False) -> Directions:
    """The runways that are kept, as directions; ``strict`` and errors as in ``read_list``."""
    runways, texts, reasons, table = reading.runways, reading.texts, reading.reasons, reading.runways.table
    kept = np.array([index for index, reason in enumerate(reasons) if reason is None], dtype=np.intp)
    faults = _fault_texts(runways, kept, strict)
    texts["fault"] = faults, faults
    return Directions(
        n=2 * len(kept),
        numbers={key: _pair_up(*pair, kept) for key, pair in reading.numbers.items()},
        texts={key: _interleave(*pair, kept) for key, pair in texts.items()},
        carried={table.headers[at]: _interleave(table.cells[at], table.cells[at], kept) for at in runways.carried},
        left_out=_list_left_out(runways, texts, reasons),
        doubts=doubts_about_headers(runways) + _list_doubts(runways, texts, reading.doubts, kept),
        source=table.source,
        rows_read=runways.count,
        profiles=_interleave(
            runways.profiles, [profile and profile.reversed() for profile in runways.profiles], kept
        ),
        positions=np.column_stack([_pair_up(*_places(reading, key), kept) for key in ("latitude", "longitude")]),
    )


def read_runways(table: Table, path: Path, airports: str | Path | None = None) -> Reading:
    """The runways of a raw list with all that is found out about them; ``path``, ``airports`` as in ``read_list``.

    Raises InputError for a header row that can't be used; mistakes in a row are in ``runways.faults``.
    """
    runways = runways_of(table)
    cell_faults = len(runways.faults)
    known = _join_airports(runways, path, airports)
    surfaces = [read_surface(text) for text in runways.spellings("surface")]
    reasons = reasons_to_leave_out(runways, surfaces, [airport.type if airport else "" for airport in known])
    texts = _texts(runways, known, surfaces)
    check_all(runways)
    field = np.array([airport.elevation if airport else np.nan for airport in known])
    numbers, doubts = direction_numbers(runways, field)
    doubts += _doubts_about_texts(runways, surfaces)
    return Reading(runways, known, surfaces, reasons, texts, numbers, doubts, cell_faults)


def _places(reading: Reading, key: str) -> Pair:
    """Latitude or longitude [rad] of both ends of each runway, else of its airfield."""
    of_field = np.array([getattr(airport, key) if airport else np.nan for airport in reading.known])
    one, other = (np.where(np.isnan(of_end), of_field, of_end) for of_end in (reading.runways.number(key, 1),
                                                                              reading.runways.number(key, 2)))  # fmt: skip
    return one, other


def _join_airports(runways: Runways, path: Path, airports: str | Path | None) -> list[Airport | None]:
    """The airfield of each runway, None where the airports file doesn't have it or there is no such file."""
    strip = runways.found.get(("strip", 0))
    if (
        airports is None
        and strip
        and strip.header.lower() == "airport_ident"
        and (path.parent / "airports.csv").exists()
    ):
        airports = path.parent / "airports.csv"
    if airports is None:
        return [None] * runways.count
    idents = runways.texts("strip")
    found = read_airports(airports, set(idents))
    return [found.get(ident) for ident in idents]


def _texts(runways: Runways, known: list[Airport | None], surfaces: list[Surface]) -> Texts:
    """Texts of both directions of each runway."""
    landing = allowed_directions(runways, "land_towards")
    leaving = allowed_directions(runways, "take_off_towards")
    check_one_way(runways, landing, leaving)
    strips = _strip_names(runways)
    names = [
        name or (airport.name if airport else "") for name, airport in zip(runways.texts("name"), known, strict=True)
    ]
    ends = [f"{first}/{second}" for first, second in zip(runways.first, runways.second, strict=True)]
    conditions = [
        worse_condition(known_condition(given), surface.condition)
        for given, surface in zip(runways.texts("condition"), surfaces, strict=True)
    ]
    same = {
        "strip": strips,
        "name": names,
        "runway": ends,
        "pair": _unique([f"{strip} {runway}" for strip, runway in zip(strips, ends, strict=True)]),
        "surface_given": runways.spellings("surface"),
        "surface": [surface.word for surface in surfaces],
        "condition": conditions,
        "survey_date": runways.texts("survey_date"),
        "notes": runways.spellings("notes"),
    }
    texts = {key: (values, values) for key, values in same.items()}
    texts["direction"] = runways.first, runways.second
    for key, allowed in (("land_here", landing), ("take_off_here", leaving)):
        texts[key] = ([_yes(pair[0]) for pair in allowed], [_yes(pair[1]) for pair in allowed])
    return texts


def _strip_names(runways: Runways) -> list[str]:
    """Identifier of each strip, else its name, else its row."""
    rows = runways.table.row_numbers
    given = zip(runways.texts("strip"), runways.texts("name"), rows, strict=True)
    return [ident or name or f"row {row}" for ident, name, row in given]


def _unique(keys: list[str]) -> list[str]:
    """The keys with "#2", "#3"... where one comes again."""
    seen: Counter[str] = Counter()
    taken = set(keys)
    unique = []
    for key in keys:
        seen[key] += 1
        new = key
        while seen[key] > 1 and new in taken:
            new = f"{key}#{seen[key]}"
            seen[key] += new in taken
        taken.add(new)
        unique.append(new)
    return unique


def _yes(allowed: bool) -> str:
    return "yes" if allowed else "no"


def _doubts_about_texts(runways: Runways, surfaces: list[Surface]) -> list[Doubt]:
    """Doubts about a surface that can't be told and a strip without identifier and name."""
    doubts = [
        Doubt(index, "surface not known", surface.why) for index, surface in enumerate(surfaces) if not surface.word
    ]
    nameless = zip(runways.texts("strip"), runways.texts("name"), strict=True)
    why = "the row has neither an identifier nor a name of the strip"
    return doubts + [Doubt(index, "strip not named", why) for index, pair in enumerate(nameless) if not any(pair)]


def doubts_about_headers(runways: Runways) -> list[LeftOut]:
    """A doubt for each header that is nearly a known one, and for each that leaves the unit to the default."""
    row = runways.table.header_row
    doubts = [
        LeftOut(row, "", "", "column not understood", f'the column "{header}" is carried but not used')
        for header in near_misses(runways.table.headers)
    ]
    for item in runways.found.values():
        if not item.unit and item.column.kind in KINDS and item.column.kind not in ("pressure", "angle"):
            reason = f'the column "{item.header}" has no unit: bare numbers are in {KINDS[item.column.kind][0]}'
            doubts.append(LeftOut(row, "", "", "unit not named", reason))
    if any(text and not any(map(str.isalpha, text)) for text in runways.texts("profile")):
        reason = f'the column "{runways.header("profile")}" has points without units: heights too are in m'
        doubts.append(LeftOut(row, "", "", "unit not named", reason))
    return doubts


def _fault_texts(runways: Runways, kept: NDArray[np.intp], strict: bool) -> list[str]:
    """The first fault of each runway as a sentence, "" where there is none; raises InputError when strict."""
    texts = [""] * runways.count
    for fault in runways.faults:
        if not texts[fault.row_index]:
            column = f'column "{fault.header}": ' if fault.header else ""
            texts[fault.row_index] = one_line(column + fault.message)
    for index in kept if strict else []:
        if texts[index]:
            raise InputError(f"{runways.table.where} row {runways.table.row_numbers[index]}, {texts[index]}")
    return texts


def _list_left_out(runways: Runways, texts: Texts, reasons: list[Reason | None]) -> list[LeftOut]:
    return [
        LeftOut(runways.table.row_numbers[index], texts["strip"][0][index], texts["runway"][0][index], *reason)
        for index, reason in enumerate(reasons)
        if reason is not None
    ]


def _list_doubts(runways: Runways, texts: Texts, doubts: list[Doubt], kept: NDArray[np.intp]) -> list[LeftOut]:
    """Doubts about the runways that are kept, in the order of the list."""
    is_kept = np.zeros(runways.count, dtype=bool)
    is_kept[kept] = True
    return [
        LeftOut(
            runways.table.row_numbers[index],
            texts["strip"][0][index],
            texts["runway"][0][index],
            what,
            reason,
        )
        for index, what, reason in sorted(doubts, key=lambda doubt: doubt.row_index)
        if is_kept[index]
    ]


def _pair_up(first: NDArray[np.float64], second: NDArray[np.float64], kept: NDArray[np.intp]) -> NDArray[np.float64]:
    """Numbers of both directions of the runways that are kept, in turn."""
    return np.column_stack((first[kept], second[kept])).ravel()


def _interleave(first: list[T], second: list[T], kept: NDArray[np.intp]) -> list[T]:
    """Values of both directions of the runways that are kept, in turn."""
    return [values[index] for index in kept for values in (first, second)]
