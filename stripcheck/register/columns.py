"""Which column of a runway list holds what: headers in any order, case and spelling, with or without a unit.

``COLUMNS`` is the whole vocabulary. A header is read in small letters without accents; underscores, hyphens
and dots count as spaces. A unit may follow, in brackets or not: ``Length [m]``, ``Length (ft)``,
``length_ft``, ``Elev ft``. A column about one end of the runway says which: ``Elevation end 1``, ``End 2
elevation``, ``elevation 1``, or ``le_elevation_ft`` and ``he_elevation_ft`` as in open runway data. End 1 is
the end that is named first: in 09/27 it is the end where a landing towards 090 begins.
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator, Sequence
from typing import NamedTuple

from stripcheck.errors import InputError
from stripcheck.units import KINDS, unit_scale


class Column(NamedTuple):
    """One thing that a runway list can tell.

    ``kind``: kind of quantity (see ``stripcheck.units.KINDS``), or "text", "yes or no", "date". ``scope``:
    "strip" = one column for the whole runway, "end" = one column for each end, "both" = either way.
    ``words``: headers that mean it, as they look without case, accents and underscores.
    """

    key: str
    kind: str
    scope: str
    words: tuple[str, ...]


class Found(NamedTuple):
    """A column of a list that was understood: its position [0 = first], its header, and the unit in the header."""

    position: int
    header: str
    column: Column
    unit: str


def _column(key: str, kind: str, scope: str, words: str) -> Column:
    return Column(key, kind, scope, tuple(word.strip() for word in words.split(",")))


COLUMNS = (
    _column("strip", "text", "strip",
            "strip, strip id, strip ident, strip identifier, strip code, ident, identifier, airport "
            "ident, airport, aerodrome, airfield, airstrip, platz, flugplatz, terrain, aerodromo"),
    _column("code", "text", "strip",
            "code, icao, icao code, location indicator, airport code, aerodrome code"),
    _column("name", "text", "strip",
            "name, strip name, airport name, aerodrome name, airfield name, nom, nombre"),
    _column("runway", "text", "strip",
            "runway, rwy, runways, runway designator, runway designators, runway ident, designator, "
            "designators, rwy ident, piste, bahn, pista"),
    _column("designator", "text", "end", "ident, designator, runway, rwy, runway designator, name,"),
    _column("length", "length", "strip",
            "length, runway length, strip length, rwy length, physical length, longueur, lange, laenge, "
            "longitud, largo"),
    _column("usable", "length", "strip", "usable length, available length, length available, length usable"),
    _column("tora", "length", "both",
            "tora, take off run available, take off length, usable take off length, take off length "
            "available"),
    _column("lda", "length", "both",
            "lda, landing distance available, landing length, usable landing length, landing length "
            "available"),
    _column("width", "length", "strip",
            "width, runway width, strip width, rwy width, breite, largeur, ancho, anchura"),
    _column("surface", "text", "strip",
            "surface, sfc, surf, runway surface, strip surface, surface type, belag, oberflache, "
            "oberflaeche, revetement, superficie"),
    _column("condition", "text", "strip",
            "condition, surface condition, runway condition, state, zustand, etat, estado"),
    _column("closed", "yes or no", "strip", "closed, runway closed, geschlossen, ferme, cerrado, cerrada"),
    _column("elevation", "altitude", "both",
            "elevation, elev, field elevation, strip elevation, airport elevation, runway elevation, "
            "threshold elevation, altitude, hohe, hoehe, elevacion, altitud"),
    _column("slope", "slope", "strip",
            "slope, gradient, runway slope, mean slope, average slope, longitudinal slope, pente, "
            "neigung, pendiente"),
    _column("local_slope", "slope", "strip",
            "local slope, greatest local slope, greatest slope, maximum slope, max slope, steepest slope, "
            "max local slope, maximum local slope"),
    _column("profile", "text", "strip",
            "profile, slope profile, strip profile, runway profile, height profile, longitudinal profile, profil, "
            "langsprofil, laengsprofil, perfil"),
    _column("heading", "angle", "both",
            "heading, true heading, heading true, runway heading, bearing, true bearing, direction true, "
            "kurs, rumbo"),
    _column("displaced", "length", "both",
            "displaced threshold, threshold displacement, displaced thr, displaced, dthr"),
    _column("latitude", "angle", "end", "latitude, lat"),
    _column("longitude", "angle", "end", "longitude, long, lon, lng"),
    _column("obstacle_height", "length", "both",
            "obstacle height, obst height, height of obstacle, obstacle"),
    _column("obstacle_distance", "length", "both",
            "obstacle distance, obst distance, distance to obstacle, distance of obstacle"),
    _column("temperature", "temperature", "strip",
            "temperature, temp, oat, air temperature, temperatur, temperatura"),
    _column("qnh", "pressure", "strip", "qnh, altimeter setting, altimeter"),
    _column("wind_from", "angle", "strip", "wind from, wind direction, wind dir, windrichtung"),
    _column("wind_speed", "speed", "strip", "wind speed, wind, wind strength, windstarke, viento, vent"),
    _column("land_towards", "text", "strip",
            "land on, land towards, landing direction, landing runway, land direction, landing on, "
            "landing towards"),
    _column("take_off_towards", "text", "strip",
            "leave by, take off towards, take off direction, take off on, take off runway, depart by, "
            "departure direction, take off by"),
    _column("one_way", "yes or no", "strip", "one way, oneway, one way strip, single direction"),
    _column("survey_date", "date", "strip",
            "survey date, surveyed, date surveyed, surveyed on, date of survey, last survey, last "
            "surveyed, inspection date, last inspected"),
    _column("notes", "text", "strip",
            "notes, note, remarks, remark, comments, comment, bemerkung, bemerkungen, remarque, "
            "remarques, notas, observaciones"),
)  # fmt: skip

_STRIP_WORDS = {word: column for column in COLUMNS if column.scope != "end" for word in column.words}
_END_WORDS = {word: column for column in COLUMNS if column.scope != "strip" for word in column.words}

# Units that may follow a header without brackets, and how stripcheck.units spells them.
_TRAILING_UNITS = {
    "m": "m", "metre": "m", "metres": "m", "meter": "m", "meters": "m", "ft": "ft", "feet": "ft",
    "foot": "ft", "km": "km", "nm": "nm", "yd": "yard", "yards": "yard", "kt": "kt", "kts": "kt",
    "knots": "kt", "km/h": "km/h", "kmh": "km/h", "m/s": "m/s", "mph": "mph", "c": "°C", "°c": "°C",
    "degc": "°C", "deg c": "°C", "celsius": "°C", "f": "degF", "°f": "degF", "degf": "degF", "k": "K",
    "hpa": "hPa", "mb": "hPa", "mbar": "hPa", "pa": "Pa", "inhg": "inHg", "in hg": "inHg", "%": "%",
    "pct": "%", "percent": "%", "per cent": "%", "°": "°", "deg": "°", "degrees": "°", "degt": "°",
    "°t": "°", "deg t": "°", "deg true": "°", "° true": "°", "degrees true": "°",
}  # fmt: skip

LONGEST_HEADER = 200  # [characters]: no header that is understood is nearly as long, and brackets without an end take ages

_REMARKS = frozenset(("amsl", "msl", "asl", "above sea level", "true", "optional"))

_LEADING_END = re.compile(r"(?:(le|end ?1|first end|1st end)|(he|end ?2|second end|2nd end))(?: (.*))?$")
_TRAILING_END = re.compile(r"(.+?) (?:(end ?1|first end|1st end|1)|(end ?2|second end|2nd end|2))$")
_BRACKETS = re.compile(r"[\[(]([^\])]*)[\])]")


def find_columns(headers: Sequence[str], where: str) -> tuple[dict[tuple[str, int], Found], list[int]]:
    """Columns that are understood and positions of those that are not.

    ``headers``: the header row. ``where``: file and sheet, for the sentence of an error. Result: ``{(key,
    end): Found}`` with end 0 for the whole runway and 1 or 2 for an end; and the positions of the other
    columns, which are carried. Raises InputError for a header that comes twice, two headers that mean the
    same, a unit that is unknown or of the wrong kind, and a list with no column for the strip or none for the
    length.

    >>> found, carried = find_columns(["Strip", "le_elevation_ft", "Length (ft)", "Owner"], "list.csv")
    >>> [(*key, item.unit) for key, item in found.items()], carried
    ([('strip', 0, ''), ('elevation', 1, 'ft'), ('length', 0, 'ft')], [3])
    """
    found: dict[tuple[str, int], Found] = {}
    carried = []
    _refuse_repeats(headers, where)
    for position, header in enumerate(headers):
        match = match_header(header)
        if match is None:
            carried.append(position)
            continue
        column, end, unit = match
        if (column.key, end) in found:
            other = found[column.key, end].header
            raise InputError(f'{where}: the columns "{other}" and "{header}" mean the same; keep or rename one of them')
        _check_unit(header, column, unit, where)
        found[column.key, end] = Found(position, header, column, unit)
    if ("strip", 0) not in found and ("code", 0) in found:
        found["strip", 0] = found["code", 0]
    elif ("code", 0) in found:
        carried = sorted([*carried, found["code", 0].position])
    found.pop(("code", 0), None)
    _require(found, where)
    return found, carried


def near_misses(headers: Sequence[str]) -> list[str]:
    """Headers that hold a word of the vocabulary and are not understood all the same.

    They are carried like any other, but the user should hear of them: a displaced threshold that nobody reads
    makes a runway look longer, and a profile that nobody reads may hide a steep end.

    >>> near_misses(["Strip", "Displaced threshold of 09", "Owner"])
    ['Displaced threshold of 09']
    """
    signs = {word for column in COLUMNS if column.kind in KINDS or column.key == "closed" for word in column.words}
    signs = {word for word in signs if " " not in word} | {"threshold", "profile"}
    unknown = (header for header in headers if match_header(header) is None)
    return [header for header in unknown if signs.intersection(_tidy(header).split())]


def known_headers(cells: Sequence[object]) -> int:
    """How many cells of a row are headers that are understood; the header row is told from title lines by
    this.

    >>> known_headers(["Strip", "Length [m]", "Owner"])
    2
    """
    return sum(isinstance(cell, str) and match_header(cell) is not None for cell in cells)


def match_header(header: str) -> tuple[Column, int, str] | None:
    """Column, end [0, 1, 2] and unit text that a header stands for, or None when it is not known.

    >>> match_header("he_displaced_threshold_ft")[1:]
    (2, 'ft')
    >>> match_header("Heading (magnetic)") is None
    True
    """
    if len(header) > LONGEST_HEADER:
        return None
    bare = _tidy(_BRACKETS.sub(" ", header))
    bracketed = [content for content in (_tidy(text) for text in _BRACKETS.findall(header)) if content not in _REMARKS]
    if any(content.startswith("mag") for content in bracketed):
        return None  # headings are true inside; a magnetic one is carried, not misread
    for content in [content for content in bracketed if _LEADING_END.match(content)]:
        bare, bracketed = f"{bare} {content}", [other for other in bracketed if other != content]
    for name, end, unit in _readings(bare):
        column = (_END_WORDS if end else _STRIP_WORDS).get(name)
        if column is None or (unit and bracketed) or (_is_words(column) and (unit or bracketed)):
            continue
        shown = " ".join(bracketed)
        return column, end, unit or _TRAILING_UNITS.get(shown, shown)
    return None


def _readings(bare: str) -> Iterator[tuple[str, int, str]]:
    """Ways to cut a header into name, end and unit, the plainest first."""
    yield bare, 0, ""
    yield from ((name, end, "") for name, end in _ends(bare))
    words = bare.split()
    for count in (2, 1):
        unit = _TRAILING_UNITS.get(" ".join(words[-count:]))
        if unit and len(words) > count:
            name = " ".join(words[:-count])
            yield name, 0, unit
            yield from ((part, end, unit) for part, end in _ends(name))
    for name, end in _ends(bare):
        words = name.split()
        if len(words) > 1 and words[-1] in _TRAILING_UNITS:
            yield " ".join(words[:-1]), end, _TRAILING_UNITS[words[-1]]


def _ends(name: str) -> Iterator[tuple[str, int]]:
    leading = _LEADING_END.match(name)
    if leading:
        yield leading[3] or "", 1 if leading[1] else 2
    trailing = _TRAILING_END.match(name)
    if trailing:
        yield trailing[1], 1 if trailing[2] else 2


def _tidy(text: str) -> str:
    """Small letters, no accents, one space between words; % ° and / stay because units need them."""
    plain = unicodedata.normalize("NFKD", text.replace("°", "\0")).replace("\0", "°")
    plain = "".join(c for c in plain if not unicodedata.combining(c)).lower()
    plain = re.sub(r"(?<=\w)(?=[%°])", " ", plain)
    return " ".join(re.sub(r"[^\w%°/]|_", " ", plain).split())


def _is_words(column: Column) -> bool:
    return column.kind in ("text", "yes or no", "date")


def _check_unit(header: str, column: Column, unit: str, where: str) -> None:
    if unit:
        try:
            unit_scale(unit, column.kind)
        except InputError as error:
            raise InputError(f'{where}: column "{header}": {error}') from error


def _refuse_repeats(headers: Sequence[str], where: str) -> None:
    seen: set[str] = set()
    for header in headers:
        tidy = " ".join(header.lower().split())
        if tidy and tidy in seen:
            raise InputError(f'{where}: the header "{header}" comes twice; give each column its own header')
        seen.add(tidy)


def _require(found: dict[tuple[str, int], Found], where: str) -> None:
    if ("strip", 0) not in found and ("name", 0) not in found:
        raise InputError(f'{where}: no usable column for the strip; a header such as "Strip" or "Name" would be right')
    if not {("length", 0), ("usable", 0), ("tora", 0), ("tora", 1), ("lda", 0), ("lda", 1)} & found.keys():
        raise InputError(f'{where}: no usable column for the length; a header such as "Length [m]" would be right')
