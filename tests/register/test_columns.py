"""Headers as people write them."""

from __future__ import annotations

import pytest

from stripcheck.errors import InputError
from stripcheck.register.columns import COLUMNS, find_columns, known_headers, match_header, near_misses
from stripcheck.units import KINDS


@pytest.mark.parametrize(
    ("header", "key", "end", "unit"),
    [
        ("Length [m]", "length", 0, "m"),
        ("LENGTH  (FT)", "length", 0, "ft"),
        ("length_ft", "length", 0, "ft"),
        ("Länge [m]", "length", 0, "m"),
        ("Elev ft", "elevation", 0, "ft"),
        ("Höhe (m)", "elevation", 0, "m"),
        ("airport_ident", "strip", 0, ""),
        ("le_ident", "designator", 1, ""),
        ("he_ident", "designator", 2, ""),
        ("End 2", "designator", 2, ""),
        ("le_heading_degT", "heading", 1, "°"),
        ("he_displaced_threshold_ft", "displaced", 2, "ft"),
        ("he_latitude_deg", "latitude", 2, "°"),
        ("Elevation end 1 [ft]", "elevation", 1, "ft"),
        ("End 2 elevation", "elevation", 2, ""),
        ("Elev. 1 ft", "elevation", 1, "ft"),
        ("elevation ft end 2", "elevation", 2, "ft"),
        ("Obstacle height (end 2) [m]", "obstacle_height", 2, "m"),
        ("Slope %", "slope", 0, "%"),
        ("Temp °C", "temperature", 0, "°C"),
        ("QNH [inHg]", "qnh", 0, "inHg"),
        ("Wind from °T", "wind_from", 0, "°"),
        ("Wind (km/h)", "wind_speed", 0, "km/h"),
        ("Take-off towards", "take_off_towards", 0, ""),
        ("Heading (true)", "heading", 0, ""),
        ("ONE_WAY", "one_way", 0, ""),
        ("Elevation (AMSL)", "elevation", 0, ""),
        ("Slope profile", "profile", 0, ""),
        ("Längsprofil", "profile", 0, ""),
    ],
)
def test_headers_that_are_known(header: str, key: str, end: int, unit: str) -> None:
    match = match_header(header)
    assert match is not None
    assert (match[0].key, *match[1:]) == (key, end, unit)


@pytest.mark.parametrize(
    "header", ["Owner", "", "Length category", "Heading (magnetic)", "Notes (pilot)", "Elevation 3"]
)
def test_headers_that_are_carried(header: str) -> None:
    assert match_header(header) is None


def test_every_word_of_the_table_is_found_as_itself() -> None:
    for column in COLUMNS:
        assert column.kind in KINDS or column.kind in ("text", "yes or no", "date")
        for word in column.words:
            header = f"le_{word}" if column.scope == "end" else word
            match = match_header(header)
            assert match is not None, header
            assert match[0] == column, header


@pytest.mark.parametrize(
    ("headers", "says"),
    [
        (["Strip", "Length", "length [m]"], '"Length" and "length [m]" mean the same'),
        (["Strip", "Length", "Owner", "owner "], 'the header "owner " comes twice'),
        (
            ["Strip", "Length [furlong of x]"],
            'column "Length [furlong of x]": "furlong of x" is not a unit of length',
        ),
        (["Strip", "Length [kg]"], 'column "Length [kg]": "kg" is not a unit of length'),
        (["Strip", "Surface"], "no usable column for the length"),
        (["Length", "Surface"], "no usable column for the strip"),
    ],
)
def test_headers_that_can_not_be_used(headers: list[str], says: str) -> None:
    with pytest.raises(InputError) as error:
        find_columns(headers, "list.csv")
    assert says in str(error.value)
    assert str(error.value).startswith("list.csv: ")


def test_a_code_names_the_strip_only_where_nothing_better_does() -> None:
    found, carried = find_columns(["ICAO", "Length"], "")
    assert found["strip", 0].header == "ICAO" and carried == []
    found, carried = find_columns(["ICAO", "Strip", "Length"], "")
    assert found["strip", 0].header == "Strip" and carried == [0]


def test_near_misses_are_told_and_other_headers_are_not() -> None:
    headers = ["Strip", "Length [m]", "Displaced threshold of 09", "Owner", "Slope towards 27", "Fuel", "Profile [m]"]
    assert near_misses(headers) == ["Displaced threshold of 09", "Slope towards 27", "Profile [m]"]
    assert known_headers(["My strips", "", 3.0, "Length"]) == 1
