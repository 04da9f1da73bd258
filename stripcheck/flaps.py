"""The flaps of an aircraft card: settings with stall speeds and drag, typed or estimated, and the airspeed calibration."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass

import numpy as np

from stripcheck.errors import InputError
from stripcheck.flap_lift import FLAP_KINDS, drag_increment, greatest_lift_increment
from stripcheck.numeric import Number
from stripcheck.speeds import greatest_lift_coefficient, stall_speed_of_lift
from stripcheck.toml_fields import Section
from stripcheck.units import from_si, to_si

USES = ("take-off", "landing")
LIFT_CREDIT = 0.8  # share of an estimated lift increment that is credited; common practice, no source
GREATEST_ERROR = to_si(15.0, "kt")  # position error beyond which a row was mistyped
FLAP_CHORDS, FLAP_SPANS, EXTENDED_CHORDS = (0.10, 0.40), (0.20, 1.00), (1.0, 1.4)
ANY_FLAP = ""  # key of the airspeed calibration for settings that have none of their own


@dataclass(frozen=True)
class Flap:
    """A flap setting: deflection [rad], stall speed [m/s EAS] at the card's stall mass, drag added [-], uses.

    ``estimated`` names which of "stall speed" and "drag" do not come from the manual.
    """

    name: str
    deflection: float
    stall_speed: float
    drag: float
    uses: tuple[str, ...]
    estimated: tuple[str, ...] = ()


@dataclass(frozen=True)
class Geometry:
    """The flaps themselves: kind, chord over wing chord [-], length of both over wing span [-], extended chord [-]."""

    kind: str
    chord: float
    span: float
    extended_chord: float

    def lift(self, deflection: float) -> float:
        """Rise of the greatest lift coefficient that is credited at a deflection [rad]: on the careful side.

        >>> round(Geometry("slotted", 0.30, 0.5, 1.0).lift(math.radians(40.0)), 3)
        0.468
        """
        kind = FLAP_KINDS[self.kind]
        rise = greatest_lift_increment(kind.lift, kind.landing_deflection, self.chord, self.span, self.extended_chord,
                                       deflection)  # fmt: skip
        return LIFT_CREDIT * float(rise)

    def drag(self, deflection: float) -> float:
        """Drag coefficient added at a deflection [rad].

        As published: more would be safer for the take-off and less for the landing.

        >>> round(Geometry("slotted", 0.30, 0.5, 1.0).drag(math.radians(40.0)), 4)
        0.0353
        """
        return float(drag_increment(FLAP_KINDS[self.kind].drag, self.chord, self.span, deflection))

    def __str__(self) -> str:
        out = f", chord extended to {_percent(self.extended_chord)}" if self.extended_chord > 1.0 else ""
        return f"{self.kind} flaps of {_percent(self.chord)} chord over {_percent(self.span)} of the span{out}"


# Stands in for drag where a card tells nothing of its flaps; never for a stall speed. Common practice, no source.
TYPICAL_FLAPS = Geometry("plain", 0.25, 0.60, 1.0)


@dataclass(frozen=True)
class PositionError:
    """The airspeed calibration: rising indicated and calibrated airspeeds [m/s] by flap setting, linear between."""

    tables: Mapping[str, tuple[np.ndarray, np.ndarray]]

    def table(self, flap: str) -> tuple[np.ndarray, np.ndarray]:
        """Indicated and calibrated airspeeds for a setting: its own, else those for any flap; without rows if neither."""
        nothing = np.array([np.nan])
        return self.tables.get(flap, self.tables.get(ANY_FLAP, (nothing, nothing)))

    def calibrated(self, ias: Number, flap: str) -> Number:
        """Calibrated airspeed [m/s] of an indicated one [m/s] at a flap setting; NaN outside the table or without one.

        >>> error = PositionError({ANY_FLAP: (np.array([20.0, 40.0]), np.array([23.0, 41.0]))})
        >>> float(error.calibrated(30.0, "10")), float(error.calibrated(50.0, "10"))
        (32.0, nan)
        """
        indicated, calibrated = self.table(flap)
        return np.interp(ias, indicated, calibrated, left=np.nan, right=np.nan)

    def indicated(self, cas: Number, flap: str) -> Number:
        """Indicated airspeed [m/s] of a calibrated one [m/s] at a flap setting; NaN outside the table or without one.

        >>> error = PositionError({ANY_FLAP: (np.array([20.0, 40.0]), np.array([23.0, 41.0]))})
        >>> float(error.indicated(32.0, "10")), float(error.indicated(22.0, "10"))
        (30.0, nan)
        """
        indicated, calibrated = self.table(flap)
        return np.interp(cas, calibrated, indicated, left=np.nan, right=np.nan)


def read_position_error(top: Section) -> PositionError:
    """The parts [[position_error]] of a card, by flap setting.

    Raises InputError for rows that do not rise, are too few, belong to no setting, or are too far apart to be true.
    """
    names = [part.text("setting") for part in top.sections("flap")]
    rows: dict[str, list[tuple[float, float]]] = {}
    for part in top.sections("position_error"):
        flap = part.text("flap", ANY_FLAP)
        if part.has("flap") and flap not in names:
            raise InputError(f'{part.where}: there is no flap setting "{flap}"; the card has: {", ".join(names)}')
        ias, cas = (part.number(name, "speed", low=5.0, high=150.0) for name in ("ias", "cas"))
        if abs(cas - ias) > GREATEST_ERROR:
            raise InputError(
                f"{part.where}: ias = {_knots(ias)} and cas = {_knots(cas)} differ by more than {_knots(GREATEST_ERROR)}, "
                "which no airspeed system does"
            )
        before = rows.setdefault(flap, [])
        if before and not (ias > before[-1][0] and cas > before[-1][1]):
            raise InputError(f"{part.where}: ias and cas must both be above those of the row before ({_of(flap)})")
        before.append((ias, cas))
    for flap, pairs in rows.items():
        if len(pairs) < 2:
            raise InputError(f"{top.where}: two [[position_error]] rows or more are expected for {_of(flap)}")
    return PositionError({flap: (np.array([ias for ias, _ in pairs]), np.array([cas for _, cas in pairs]))
                          for flap, pairs in rows.items()})  # fmt: skip


def read_flaps(top: Section, position_error: PositionError, stall_mass: float, wing_area: float,
               assumed: list[str]) -> tuple[Flap, ...]:  # fmt: skip
    """The parts [[flap]] and [flaps] of a card.

    Stall speeds are for ``stall_mass`` [kg] on ``wing_area`` [m2]. They are calibrated airspeeds and taken as equivalent
    ones: at sea level they are the same, elsewhere they differ by less than 0.1 kt at such speeds. What is estimated is
    added to ``assumed`` in words. Raises InputError where a value can't be right, or is missing and can't be estimated.
    """
    parts = top.sections("flap")
    names = [part.text("setting") for part in parts]
    deflections = [part.number("deflection", "angle", low=0.0, high=to_si(60.0, "°")) for part in parts]
    stalls = [_typed_stall(part, name, position_error) for part, name in zip(parts, names, strict=True)]
    drags = [part.number("drag", "number", 0.0 if deflection == 0.0 else math.nan, 0.0, 0.3)
             for part, deflection in zip(parts, deflections, strict=True)]  # fmt: skip
    uses = [part.texts("uses", USES) for part in parts]
    geometry = _geometry(top)
    _check_settings(top, names, deflections, uses)
    _check_order(top, names, stalls, drags)
    _check_can_be_estimated(parts, stalls, geometry)
    shape = geometry or TYPICAL_FLAPS  # of which no lift is asked then
    lifts = _filled([float(greatest_lift_coefficient(stall, stall_mass, wing_area)) for stall in stalls], deflections,
                    shape.lift)  # fmt: skip
    speeds = [float(stall_speed_of_lift(lift, stall_mass, wing_area)) if math.isnan(stall) else stall
              for lift, stall in zip(lifts, stalls, strict=True)]  # fmt: skip
    added = _filled(drags, deflections, shape.drag)
    estimated = [tuple(what for what, typed in (("stall speed", stall), ("drag", drag)) if math.isnan(typed))
                 for stall, drag in zip(stalls, drags, strict=True)]  # fmt: skip
    flaps = tuple(Flap(*row) for row in zip(names, deflections, speeds, added, uses, estimated, strict=True))
    source = f"from {shape}" if geometry else f"from {shape}, taken for granted as there is no part [flaps]"
    assumed += [f"{part.where}: {words}, {source}" for part, flap in zip(parts, flaps, strict=True) for words in _told(flap)]
    return flaps


def _typed_stall(part: Section, name: str, position_error: PositionError) -> float:
    """Calibrated stall speed [m/s] of a setting, typed as such or as indicated; NaN where it is neither."""
    calibrated = part.number("stall_speed", "speed", math.nan, 10.0, 100.0)
    indicated = part.number("stall_speed_ias", "speed", math.nan, 10.0, 100.0)
    if math.isnan(indicated):
        return calibrated
    if math.isfinite(calibrated):
        raise InputError(f"{part.where}: stall_speed and stall_speed_ias are both given; one of them is expected")
    rows = position_error.table(name)[0]
    if np.isnan(rows[0]):
        raise InputError(
            f"{part.where}: stall_speed_ias needs [[position_error]] rows that hold for flap {name}; without them give the "
            "calibrated speed as stall_speed"
        )
    converted = float(position_error.calibrated(indicated, name))
    if math.isnan(converted):
        raise InputError(
            f"{part.where}: stall_speed_ias = {_knots(indicated)} is outside the [[position_error]] rows that hold for flap "
            f"{name}, {_knots(rows[0])} to {_knots(rows[-1])}; give the calibrated speed as stall_speed"
        )
    return converted


def _geometry(top: Section) -> Geometry | None:
    """The part [flaps], if the card has one."""
    part = top.section("flaps")
    if not top.has("flaps"):
        return None
    kind = part.text("kind", choices=tuple(FLAP_KINDS))
    chord = _share(part, "chord", FLAP_CHORDS, "flap chord over wing chord")
    span = _share(part, "span", FLAP_SPANS, "length of both flaps together over the span of the wing")
    if part.has("extended_chord") and kind != "Fowler":
        raise InputError(f"{part.where}: extended_chord goes with Fowler flaps, and these are {kind}; leave it out")
    extended = _share(part, "extended_chord", EXTENDED_CHORDS, "wing chord with the flap right out over that with it in", 1.0)
    return Geometry(kind, chord, span, extended)


def _share(part: Section, name: str, limits: tuple[float, float], meaning: str, *default: float) -> float:
    """A share, which a bare number can tell too, since none of a hundredth of it could be meant."""
    value = part.number(name, "number", *default)
    if not limits[0] <= value <= limits[1]:
        raise InputError(
            f'{part.where}: {name} = {part.entries[name]} can\'t be right for the {meaning}; '
            f'{_percent(limits[0])} to {_percent(limits[1])} is expected, written as "{_percent(sum(limits) / 2.0)}"'
        )
    return value


def _check_settings(top: Section, names: list[str], deflections: list[float], uses: list[tuple[str, ...]]) -> None:
    if len(names) < 2:
        raise InputError(f"{top.where}: two [[flap]] parts or more are expected, with flaps up and down")
    plain = [name.strip().casefold() for name in names]  # a spreadsheet tells names apart no better
    if "" in plain:
        raise InputError(f"{top.where}: a flap setting has no name; write setting as the manual calls it")
    twice = [name for name, key in zip(names, plain, strict=True) if plain.count(key) > 1]
    if twice:
        raise InputError(f'{top.where}: there is more than one flap setting "{twice[0]}"; each needs a name of its own')
    for i, (less, more) in enumerate(itertools.pairwise(deflections)):
        if more <= less:
            raise InputError(
                f"{top.where}: flap settings must be listed from up to down, by deflection; {names[i + 1]} with "
                f"{from_si(more, '°'):g}° comes after {names[i]} with {from_si(less, '°'):g}°"
            )
    for use in USES:
        if not any(use in allowed for allowed in uses):
            raise InputError(f"{top.where}: no flap setting is allowed for {use}; name it in the uses of a [[flap]] part")


def _check_order(top: Section, names: list[str], stalls: list[float], drags: list[float]) -> None:
    """More flap never raises the stall speed, nor lowers the drag; what is not typed is passed over."""
    for less, more in itertools.pairwise(i for i, stall in enumerate(stalls) if math.isfinite(stall)):
        if stalls[more] > stalls[less]:
            raise InputError(
                f"{top.where}: the stall speed with flap {names[more]} is above the one with flap {names[less]}; more flap "
                f"never raises it ({_knots(stalls[more])} and {_knots(stalls[less])} calibrated)"
            )
    for less, more in itertools.pairwise(i for i, drag in enumerate(drags) if math.isfinite(drag)):
        if drags[more] < drags[less]:
            raise InputError(
                f"{top.where}: the drag of flap {names[more]} is below that of flap {names[less]}; more flap never lowers it "
                f"({drags[more]:g} and {drags[less]:g})"
            )


def _check_can_be_estimated(parts: list[Section], stalls: list[float], geometry: Geometry | None) -> None:
    for i, (part, stall) in enumerate(zip(parts, stalls, strict=True)):
        if math.isnan(stall) and i == 0:
            raise InputError(f"{part.where}: stall_speed is missing; the first setting needs one, as estimates start from it")
        if math.isnan(stall) and geometry is None:
            raise InputError(
                f"{part.where}: stall_speed is missing; it takes a speed; else give stall_speed_ias, or a part [flaps] with "
                "kind, chord and span, from which it is estimated"
            )


def _filled(typed: list[float], deflections: list[float], rise: Callable[[float], float]) -> list[float]:
    """What is typed, and between it what follows from the setting before by ``rise``, but never beyond the next typed one."""
    filled: list[float] = []
    last, last_deflection = 0.0, 0.0
    for i, (value, deflection) in enumerate(zip(typed, deflections, strict=True)):
        if math.isnan(value):
            ahead = next((later for later in typed[i:] if math.isfinite(later)), math.inf)
            value = min(last + rise(deflection) - rise(last_deflection), ahead)
        filled.append(value)
        last, last_deflection = value, deflection
    return filled


def _told(flap: Flap) -> list[str]:
    words = {
        "stall speed": f"estimated as {_knots(flap.stall_speed)} calibrated, on the careful side",
        "drag": f"estimated as {flap.drag:.4f}",
    }
    return [f"{what} of flap {flap.name} {words[what]}" for what in flap.estimated]


def flap_setting(name: str, flaps: tuple[Flap, ...], use: str, where: str) -> float:
    """Deflection [rad] of a setting by its name. Raises InputError for one that the card lacks or does not allow."""
    for flap in flaps:
        if flap.name == name:
            if use not in flap.uses:
                raise InputError(f'{where}: flap "{name}" is not allowed for {use} by the card')
            return flap.deflection
    raise InputError(f'{where}: there is no flap setting "{name}"; the card has: {", ".join(f.name for f in flaps)}')


def usual_flaps_in_order(flaps: tuple[Flap, ...], takeoff: float, landing: float, where: str) -> list[str]:
    """A word on usual settings, by deflection [rad], of which the landing one stalls faster than the take-off one."""
    by_deflection = {flap.deflection: flap for flap in flaps}
    up, down = by_deflection[takeoff], by_deflection[landing]
    if down.stall_speed <= up.stall_speed:
        return []
    return [f"{where}: landing_flap {down.name} stalls at {_knots(down.stall_speed)}, above takeoff_flap {up.name} at "
            f"{_knots(up.stall_speed)}; taken as meant, and unusual"]  # fmt: skip


def check_book_flaps(flaps: tuple[Flap, ...], takeoff: Iterable[float], landing: Iterable[float], where: str) -> list[str]:
    """A word for each setting of the landing points, by deflection [rad], whose stall speed is estimated.

    Raises InputError for one of the take-off points: from a stall speed that is too high, and so careful anywhere else,
    the same roll needs more thrust, and with that thrust the climb would be flattered. In a landing faster wheels and
    stronger brakes nearly cancel.
    """
    estimated = {flap.deflection: flap.name for flap in flaps if "stall speed" in flap.estimated}
    at_takeoff = [estimated[deflection] for deflection in takeoff if deflection in estimated]
    if at_takeoff:
        raise InputError(
            f"{where}: the take-off points at flap {at_takeoff[0]} need its stall speed on the card; calibrated at an "
            "estimated one, thrust and climb could come out too strong"
        )
    at_landing = dict.fromkeys(estimated[deflection] for deflection in landing if deflection in estimated)
    return [f"{where}: the landing points at flap {name} are calibrated at an estimated stall speed; where it is too high, "
            "the brakes come out too strong" for name in at_landing]  # fmt: skip


def _knots(speed: float) -> str:
    return f"{from_si(speed, 'kt'):.3g} kt"


def _percent(share: float) -> str:
    return f"{100.0 * share:.3g} %"


def _of(flap: str) -> str:
    return f"flap {flap}" if flap else "any flap"
