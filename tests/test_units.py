"""Units at the edges. Factors are the exact ones of the international definitions where there are such."""

from __future__ import annotations

import math
import subprocess
import sys

import pytest
from hypothesis import given
from hypothesis import strategies as st

from stripcheck.errors import InputError
from stripcheck.units import KINDS, UNITS, from_si, read_quantity, tidy, to_si, unit_scale

# International yard and pound agreement, 1959; nautical mile, 1929; SI brochure; inch of mercury at 0 degC, ISO 31-3
EXACT = [
    (1.0, "ft", 0.3048), (1.0, "nm", 1852.0), (1.0, "km", 1000.0), (3600.0, "kt", 1852.0), (3.6, "km/h", 1.0),
    (1.0, "lb", 0.45359237), (15.0, "°C", 288.15), (-273.15, "°C", 0.0), (1013.25, "hPa", 101325.0),
    (29.92, "inHg", 101320.7481), (5.0, "%", 0.05), (180.0, "°", math.pi), (134.0, "kW", 134000.0),
]  # fmt: skip


@pytest.mark.parametrize(("value", "unit", "si"), EXACT)
def test_to_and_from_si(value: float, unit: str, si: float) -> None:
    assert to_si(value, unit) == pytest.approx(si, rel=1e-9, abs=1e-12)
    assert from_si(si, unit) == pytest.approx(value, rel=1e-8, abs=1e-9)


@pytest.mark.parametrize(
    ("typed", "kind", "si"),
    [
        ("2300 ft", "length", 701.04),
        ("2300ft", "altitude", 701.04),
        ("2,300 ft", "altitude", 701.04),
        ("2 300 ft", "altitude", 701.04),
        ("2300'", "altitude", 701.04),
        (2300, "altitude", 701.04),
        ("620", "length", 620.0),
        ("0,62 km", "length", 620.0),
        ("0,620 km", "length", 620.0),
        ("3 nm", "length", 5556.0),
        ("12", "speed", 12.0 * 1852.0 / 3600.0),
        ("12 kts", "speed", 12.0 * 1852.0 / 3600.0),
        ("36 km/h", "speed", 10.0),
        ("10 m/s", "speed", 10.0),
        ("1050 kg", "mass", 1050.0),
        ("2314 lb", "mass", 2314 * 0.45359237),
        ("2314 lbs", "mass", 2314 * 0.45359237),
        ("22", "temperature", 295.15),
        ("-5 °C", "temperature", 268.15),
        ("\u22125 °C", "temperature", 268.15),
        ("86 °F", "temperature", 303.15),
        ("86 degF", "temperature", 303.15),
        ("20 K", "temperature difference", 20.0),
        ("20 °C", "temperature difference", 20.0),
        ("9 °F", "temperature difference", 5.0),
        ("1013.25", "pressure", 101325.0),
        ("1013 mb", "pressure", 101300.0),
        (29.92, "pressure", 101320.748),
        ("30.10 inHg", "pressure", 101930.298),
        ("1.5", "slope", 0.015),
        ("1,5 %", "slope", 0.015),
        ("60", "humidity", 0.6),
        ("60 percent", "humidity", 0.6),
        ("90", "angle", math.pi / 2.0),
        ("90 deg", "angle", math.pi / 2.0),
        ("180 hp", "power", 180.0 * 745.69987),  # mechanical horsepower, 550 ft lbf/s
        ("174 sq ft", "area", 174.0 * 0.3048**2),
        ("16.2", "area", 16.2),
        ("1.5 s", "time", 1.5),
        ("1.08", "number", 1.08),
        (".5", "number", 0.5),
        ("1e3", "length", 1000.0),
    ],
)
def test_as_typed(typed: object, kind: str, si: float) -> None:
    assert read_quantity(typed, kind) == pytest.approx(si, rel=1e-8)


def test_a_bare_number_takes_the_unit_asked_for() -> None:
    assert read_quantity("700", "length", "ft") == pytest.approx(213.36, rel=1e-12)
    assert read_quantity("700 m", "length", "ft") == pytest.approx(700.0, rel=1e-12)


@pytest.mark.parametrize("blank", [None, "", "  ", math.nan])
def test_blanks_are_missing(blank: object) -> None:
    assert math.isnan(read_quantity(blank, "length"))


@pytest.mark.parametrize(
    ("typed", "kind", "sentence"),
    [
        ("twelve", "length", '"twelve" is not a number; write for example "620 m"'),
        (True, "speed", '"True" is not a number; write for example "12 kt"'),
        ("inf", "mass", '"inf" is not a number; write for example "1150 kg"'),
        (math.inf, "mass", '"inf" is not a number; write for example "1150 kg"'),
        ("12 kt", "length", '"kt" is not a unit of length; write for example "620 m"'),
        ("12 furlong_ish", "length", '"furlong_ish" is not a unit of length; write for example "620 m"'),
        ("1:20", "slope", '":20" is not a unit of slope; write for example "12 %"'),
        ("12 m m", "length", '"m m" is not a unit of length; write for example "620 m"'),
        ("12 m**2", "length", '"m**2" is not a unit of length; write for example "620 m"'),
        ("5", "pressure", "5 is neither a pressure in hPa (800 to 1100) nor in inHg (24 to 32.5)"),
        (500.0, "pressure", "500 is neither a pressure in hPa (800 to 1100) nor in inHg (24 to 32.5)"),
        (10**400, "length", 'a whole number that long is no length; write for example "620 m"'),
        ([1], "length", '"[1]" is not a number; write for example "620 m"'),
    ],
)
def test_what_is_wrong_and_what_would_be_right(typed: object, kind: str, sentence: str) -> None:
    with pytest.raises(InputError) as refused:
        read_quantity(typed, kind)
    assert str(refused.value) == sentence


def test_arithmetic_in_a_unit_is_refused_at_once() -> None:
    """A cell's text is never worked out: this one would keep a machine busy for ever."""
    for unit in ("9**9**9**9 m", "m**9**9**9", "m^99999999", "(m)"):
        with pytest.raises(InputError, match="is not a unit of length"):
            read_quantity(f"5 {unit}", "length")


@pytest.mark.parametrize("number", [800.0, 1100.0, 24.0, 32.5])
def test_the_two_ranges_of_a_bare_pressure(number: float) -> None:
    assert 78000.0 < read_quantity(number, "pressure") < 112000.0


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_kind_has_its_default_unit(kind: str) -> None:
    default = KINDS[kind][0]
    assert default in UNITS
    assert unit_scale("", kind) == unit_scale(default, kind)


@pytest.mark.parametrize(("unit", "kind"), [("ft", "length"), ("km", "altitude"), ("km/h", "speed"), ("lb", "mass"),
                                            ("inHg", "pressure"), ("K", "temperature"), ("W", "power")])  # fmt: skip
def test_the_sheet_units_agree_with_pint(unit: str, kind: str) -> None:
    """The two roads to SI, our table and pint's, agree to 1e-9 for the units that both know."""
    import pint

    names = {"ft": "foot", "km": "kilometer", "km/h": "kilometer/hour", "lb": "pound", "inHg": "inch_Hg_32F",
             "K": "kelvin", "W": "watt"}  # fmt: skip
    truth = pint.UnitRegistry().Quantity(7.0, names[unit]).to(KINDS[kind][1]).magnitude
    factor, offset = unit_scale(unit, kind)
    assert 7.0 * factor + offset == pytest.approx(truth, rel=1e-7)


@given(st.floats(-1e6, 1e6), st.sampled_from(sorted(UNITS)))
def test_there_and_back(value: float, unit: str) -> None:
    assert from_si(to_si(value, unit), unit) == pytest.approx(value, rel=1e-12, abs=1e-9)


@given(st.text(max_size=20), st.sampled_from(sorted(KINDS)))
def test_any_text_is_a_number_a_blank_or_one_sentence(text: str, kind: str) -> None:
    try:
        value = read_quantity(text, kind)
    except InputError as error:
        assert 'write for example "' in str(error) or "is neither a pressure" in str(error)
    else:
        assert math.isfinite(value) or not text.strip()


def test_tidy() -> None:
    assert tidy(2300 * 0.3048 / 0.3048 + 1e-10) == 2300.0


def test_without_pint_usual_units_are_read_and_for_others_it_says_what_is_missing():
    """In a process of its own, where pint can't be imported; the spelling "feet" is one that only pint would be asked for."""
    lines = ["import sys", "sys.modules['pint'] = None", "from stripcheck.errors import InputError",
             "from stripcheck.units import base_unit, read_quantity", "print(read_quantity('2300 ft', 'altitude'))",
             "for ask in (lambda: read_quantity('2300 feet', 'altitude'), lambda: base_unit('ft')):",
             "    try: ask()", "    except InputError as error: print(error)"]  # fmt: skip
    said = subprocess.run([sys.executable, "-c", "\n".join(lines)], capture_output=True, text=True, check=True).stdout
    number, *sentences = said.splitlines()
    assert float(number) == pytest.approx(2300 * 0.3048, rel=1e-15)
    assert len(sentences) == 2
    assert all("needs the Python package pint, which is not installed" in sentence for sentence in sentences)
