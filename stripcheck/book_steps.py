"""The steps that a card's tables of the manual add to the chain.

The manual's figure is used as it stands at the manual's own conditions; the physics carries it from there to the
conditions of the strip: answer = book x model(actual) / model(book). The book's conditions are those of the strip held
within the tables: pressure altitude, temperature and mass, the nearest flap setting that has tables, level dry pavement,
still air, dry air.
"""

from __future__ import annotations

from dataclasses import replace

from stripcheck import airborne, atmosphere, ground_run, interpolation, links, speeds, thrust
from stripcheck.chain import Step

ISA = "ISO 2533"
LIFT = "Lift equation"
CARD = "Aircraft card"
RUN = "Anderson, Aircraft Performance and Design, 6.7; Gauss-Legendre sum"
AIR = "Energy method"
ANDERSON = "Anderson 6.8"
BOOK = "Manual, linear between its figures"
CARRY = "Manual over model"
EDGE = "Edge of the manual's figures"
MANUAL = "The manual's own correction"
ARITHMETIC = "Arithmetic"
POLAR = "Lowry, linearised propeller polar"
DISK = "Actuator-disk momentum theory"


def _pages(side: str) -> tuple[str, ...]:
    return tuple(f"{side}_page_{part}" for part in ("mass", "flap", "below", "above"))


def _place_in_tables(side: str, word: str, mass: str, flap: str, guard: str, given: str) -> tuple[Step, ...]:
    """Where the strip's conditions lie in the tables of a side, and how far beyond them."""
    book = (f"{side}_book_mass", f"{side}_book_flap", *_pages(side))
    row = f"{side}_table_row"
    return (
        Step(f"{side}_book_flap", "", "°", f"{word} flap of the tables used", BOOK, links.interpolated,
             (flap, "flap_deflection", f"{side}_book_flaps"), given),
        Step(f"{side}_book_mass", "", "kg", f"{word} mass of the tables used", BOOK, links.book_mass_of,
             (mass, flap, "flap_deflection", f"{side}_least_masses", f"{side}_most_masses"), given),
        Step(row, "", "", f"{word} tables: place between the lines", BOOK, interpolation.position,
             ("pressure_altitude", f"{side}_altitudes"), "density", lookup="position", short=True),
        Step(f"{side}_table_column", "", "", f"{word} tables: place between the columns", BOOK, interpolation.position,
             ("air_temperature", f"{side}_temperatures"), "density", lookup="position", short=True),
        Step(f"{side}_altitude_held", "", "ft", f"{word} tables: pressure altitude used", BOOK, links.held_between,
             ("pressure_altitude", f"{side}_altitudes"), "density"),
        Step(f"{side}_temperature_held", "", "°C", f"{word} tables: temperature used", BOOK, links.held_between,
             ("air_temperature", f"{side}_temperatures"), "density"),
        Step(f"{side}_hot_edge", "", "°C", f"{word} tables: hottest figure at this height", EDGE, interpolation.hot_edge,
             (f"{side}_hottest", row, *book), guard, lookup="hot edge"),
        Step(f"{side}_cold_edge", "", "°C", f"{word} tables: coldest figure at this height", EDGE, interpolation.cold_edge,
             (f"{side}_coldest", row, *book), guard, lookup="cold edge"),
        Step(f"{side}_top_edge", "", "ft", f"{word} tables: highest figure", EDGE, interpolation.top_edge,
             (f"{side}_highest", *book), given, lookup="top edge"),
        Step(f"{side}_beyond_altitude", "", "ft", f"{word}: higher than the tables (lower: negative)", EDGE,
             interpolation.outside, ("pressure_altitude", f"{side}_altitude_held", f"{side}_top_edge"), guard),
        Step(f"{side}_beyond_temperature", "", "K", f"{word}: hotter than the tables (colder: negative)", EDGE,
             interpolation.outside, ("air_temperature", f"{side}_cold_edge", f"{side}_hot_edge"), guard),
        Step(f"{side}_beyond_mass", "", "kg", f"{word}: heavier than the tables (lighter: negative)", EDGE,
             links.difference, (mass, f"{side}_book_mass"), given),
        Step(f"{side}_beyond", "", "", f"{word}: beyond the book", EDGE, links.beyond_of,
             (f"{side}_beyond_altitude", f"{side}_beyond_temperature", f"{side}_beyond_mass"), guard, truth=True,
             short=side != "climb"),
        Step(f"{side}_book_density", "ρ", "kg/m³", f"{word}: air density at the book's conditions", ISA,
             links.standard_air_density, (f"{side}_altitude_held", f"{side}_temperature_held"), "density", short=True),
        Step(f"{side}_book_sigma", "σ", "", f"{word}: density ratio at the book's conditions", ISA,
             atmosphere.density_ratio, (f"{side}_book_density",), "density"),
    )  # fmt: skip


def _figure(side: str, figure: str, word: str, unit: str, guard: str) -> Step:
    return Step(f"{side}_book_{figure}", "", unit, f"{word} of the manual at its own conditions", BOOK,
                interpolation.in_pages,
                (f"{side}_{figure}_table", f"{side}_table_row", f"{side}_table_column", f"{side}_book_mass",
                 f"{side}_book_flap", *_pages(side)), guard, lookup="table")  # fmt: skip


_BALANCE = ("takeoff_book_density", "wing_area", "takeoff_book_mass", "takeoff_book_drag", "ground_lift",
            "reference_rolling")  # fmt: skip
_SET = "takeoff_set"
_KNOWN = "takeoff_known"

_TAKEOFF_SPEEDS = (
    Step("takeoff_book_lift", "CLmax", "", "Greatest lift coefficient at the book's take-off flap", LIFT, links.interpolated,
         ("takeoff_book_flap", "flap_deflection", "flap_lift"), _SET),
    Step("takeoff_book_parasite", "CD0", "", "Parasite drag at the book's take-off flap", CARD, links.drag_with_flap,
         ("parasite_drag", "takeoff_book_flap", "flap_deflection", "flap_drag"), _SET),
    Step("takeoff_book_stall", "Vs1", "kt", "Stall speed at the book's take-off flap and mass, EAS", LIFT,
         speeds.stall_speed_of_lift, ("takeoff_book_lift", "takeoff_book_mass", "wing_area"), _SET),
    Step("book_lift_off_eas", "VLOF", "kt", "Lift-off speed of the book, EAS", CARD, links.product,
         ("takeoff_book_stall", "lift_off_factor"), _SET),
    Step("book_screen_eas", "V50", "kt", "Speed at 50 ft of the book, EAS", CARD, links.product,
         ("takeoff_book_stall", "screen_factor"), _SET),
    Step("takeoff_book_drag", "CD", "", "Drag coefficient in the book's run", "Anderson 6.7", ground_run.drag_coefficient,
         ("takeoff_book_parasite", "ground_lift", "aspect_ratio", "efficiency", "ground_effect"), _SET),
    Step("book_airborne_eas", "Vm", "kt", "Mean speed to 50 ft of the book, EAS", ARITHMETIC, airborne.mean_square_speed,
         ("book_lift_off_eas", "book_screen_eas"), _SET),
    Step("book_kinetic_head", "", "m", "Height that the speed gained to 50 ft is worth, book", AIR, airborne.kinetic_head,
         ("book_lift_off_eas", "book_screen_eas"), _SET),
    Step("book_pull_up_radius", "R", "m", "Radius of the pull-up, book", "Anderson 6.7", airborne.pull_up_radius,
         ("book_airborne_eas",), _SET),
    Step("book_airborne_lift", "CL", "", "Lift coefficient to 50 ft of the book", LIFT, links.lift_at,
         ("takeoff_book_mass", "wing_area", "book_airborne_eas"), _SET),
    Step("book_airborne_drag", "CD", "", "Drag coefficient to 50 ft of the book", "Drag polar", ground_run.drag_coefficient,
         ("takeoff_book_parasite", "book_airborne_lift", "aspect_ratio", "efficiency"), _SET),
)  # fmt: skip
_TAKEOFF_TAS = (
    Step("book_lift_off_tas", "", "kt", "Lift-off speed of the book, TAS", ISA, speeds.true_airspeed,
         ("book_lift_off_eas", "takeoff_book_sigma"), _KNOWN),
    Step("book_airborne_tas", "", "kt", "Mean speed to 50 ft of the book, TAS", ISA, speeds.true_airspeed,
         ("book_airborne_eas", "takeoff_book_sigma"), _KNOWN),
)  # fmt: skip
_FIXED_PITCH = (
    Step("book_start", "a0", "m/s²", "Acceleration at rest, book", POLAR, links.fixed_pitch_level_start,
         ("static_thrust", "takeoff_book_engine_sigma", "takeoff_book_mass", "reference_rolling"), _KNOWN),
    Step("book_square", "", "", "Acceleration per V², book, 1/m", POLAR, links.fixed_pitch_square,
         ("thrust_slope", *_BALANCE), _KNOWN),
    Step("book_least", "", "m/s²", "Least acceleration, book", RUN, links.still_least,
         ("book_start", "book_square", "book_lift_off_tas"), _KNOWN),
    Step("book_thrust", "T", "N", "Thrust to 50 ft, book", POLAR, thrust.fixed_pitch_thrust,
         ("static_thrust", "thrust_slope", "takeoff_book_engine_sigma", "takeoff_book_density", "book_airborne_tas"), _KNOWN),
)  # fmt: skip
_FIXED_PITCH_ROLL = Step("takeoff_model_roll", "", "m", "Take-off roll of the model at the book's conditions", RUN,
                         links.still_run, ("book_start", "book_square", "book_lift_off_tas"), "book_flies")  # fmt: skip
_CONSTANT_SPEED = (
    Step("book_useful_power", "", "kW", "Useful power, book", "Propulsive quality times shaft power", links.product,
         ("book_power", "propulsive_quality"), _KNOWN),
    Step("book_disk_speed", "w0", "kt", "Static induced speed, book", DISK, thrust.disk_speed,
         ("book_useful_power", "takeoff_book_density", "disk_area"), _KNOWN, short=True),
    Step("book_disk_thrust", "T0", "N", "Static thrust, book", DISK, thrust.static_disk_thrust,
         ("book_useful_power", "takeoff_book_density", "disk_area"), _KNOWN),
    Step("book_thrust_acceleration", "", "m/s²", "Static thrust over mass, book", ARITHMETIC, links.share_of,
         ("book_disk_thrust", "takeoff_book_mass"), _KNOWN),
    Step("book_root", "y", "", "Disk root at lift-off, book", DISK, links.disk_root_of,
         ("book_lift_off_tas", "book_disk_speed"), _KNOWN, short=True),
    Step("book_square", "", "", "Lost per V² to drag less lift, book, 1/m", RUN, ground_run.air_acceleration, _BALANCE,
         _KNOWN),
    Step("book_least", "", "m/s²", "Acceleration at lift-off, book", RUN, ground_run.disk_acceleration,
         ("book_thrust_acceleration", "reference_lost", "book_square", "book_disk_speed", "book_root"), _KNOWN),
    Step("book_thrust", "T", "N", "Thrust to 50 ft, book", DISK, links.disk_thrust_at,
         ("book_disk_thrust", "book_disk_speed", "book_airborne_tas"), _KNOWN),
)  # fmt: skip
_CONSTANT_SPEED_ROLL = Step(
    "takeoff_model_roll", "", "m", "Take-off roll of the model at the book's conditions", RUN, links.still_disk_run,
    ("book_thrust_acceleration", "reference_lost", "book_square", "book_disk_speed", "book_root"), "book_flies",
)  # fmt: skip
_TAKEOFF_EXCESS = (
    Step("book_excess", "", "%", "Excess thrust to 50 ft, book", AIR, airborne.excess_gradient,
         ("book_thrust", "takeoff_book_mass", "book_airborne_drag", "book_airborne_lift"), _KNOWN),
    Step("book_flies", "", "", "The model takes off at the book's conditions", RUN, links.flies_of,
         ("book_least", "book_excess"), _KNOWN, truth=True),
)  # fmt: skip
_TAKEOFF_CARRY = (
    Step("book_air", "", "m", "Lift-off to 50 ft of the model at the book's conditions", AIR, links.still_screen_distance,
         ("book_kinetic_head", "book_pull_up_radius", "takeoff_book_sigma", "book_airborne_tas", "book_excess",
          "takeoff_technique"), "book_flies"),
    Step("takeoff_model_distance", "", "m", "Take-off to 50 ft of the model at the book's conditions", ARITHMETIC,
         links.total, ("takeoff_model_roll", "book_air"), "book_flies"),
    _figure("takeoff", "roll", "Take-off roll", "m", _KNOWN),
    _figure("takeoff", "distance", "Take-off to 50 ft", "m", _KNOWN),
    Step("takeoff_roll_carry", "", "", "Take-off roll, manual over model", CARRY, links.share_of,
         ("takeoff_book_roll", "takeoff_model_roll"), "book_flies"),
    Step("takeoff_carry", "", "", "Take-off to 50 ft, manual over model", CARRY, links.share_of,
         ("takeoff_book_distance", "takeoff_model_distance"), "book_flies", short=True),
    Step("carried_takeoff_roll", "", "m", "Take-off roll, from the manual's", CARRY, links.carried_from,
         ("takeoff_roll", "takeoff_roll_carry"), "lifts_off"),
)  # fmt: skip

_LANDING_SPEEDS = (
    Step("landing_book_lift", "CLmax", "", "Greatest lift coefficient at the book's landing flap", LIFT, links.interpolated,
         ("landing_book_flap", "flap_deflection", "flap_lift"), "landing_set"),
    Step("landing_book_parasite", "CD0", "", "Parasite drag at the book's landing flap", CARD, links.drag_with_flap,
         ("parasite_drag", "landing_book_flap", "flap_deflection", "flap_drag"), "landing_set"),
    Step("landing_book_stall", "Vs0", "kt", "Stall speed at the book's landing flap and mass, EAS", LIFT,
         speeds.stall_speed_of_lift, ("landing_book_lift", "landing_book_mass", "wing_area"), "landing_set"),
    Step("book_approach_eas", "VREF", "kt", "Approach speed of the book, EAS", CARD, links.product,
         ("landing_book_stall", "approach_factor"), "landing_set"),
    Step("book_touchdown_eas", "VTD", "kt", "Touchdown speed of the book, EAS", CARD, links.product,
         ("landing_book_stall", "touchdown_factor"), "landing_set"),
    Step("book_approach_lift", "CL", "", "Lift coefficient on the book's approach", LIFT, links.lift_at,
         ("landing_book_mass", "wing_area", "book_approach_eas"), "landing_set"),
    Step("book_approach_drag", "CD", "", "Drag coefficient on the book's approach", "Drag polar",
         ground_run.drag_coefficient, ("landing_book_parasite", "book_approach_lift", "aspect_ratio", "efficiency"),
         "landing_set"),
    Step("book_path", "", "%", "Gradient of descent on the book's approach", ANDERSON, airborne.approach_gradient,
         ("book_approach_drag", "book_approach_lift", "approach_shallowest", "approach_steepest"), "landing_set"),
    Step("book_braked_drag", "CD", "", "Drag coefficient in the book's landing roll", "Anderson 6.7",
         ground_run.drag_coefficient,
         ("landing_book_parasite", "ground_lift", "aspect_ratio", "efficiency", "ground_effect"), "landing_set"),
)  # fmt: skip
_LANDING_CARRY = (
    Step("book_approach_tas", "", "kt", "Approach speed of the book, TAS", ISA, speeds.true_airspeed,
         ("book_approach_eas", "landing_book_sigma"), "landing_known"),
    Step("book_touchdown_tas", "", "kt", "Touchdown speed of the book, TAS", ISA, speeds.true_airspeed,
         ("book_touchdown_eas", "landing_book_sigma"), "landing_known"),
    Step("book_landing_air", "", "m", "50 ft to touchdown of the model at the book's conditions", ANDERSON,
         links.still_landing_air, ("book_approach_tas", "book_touchdown_tas", "book_path", "landing_technique"),
         "landing_known"),
    Step("book_free_roll", "", "m", "Roll before braking, book", ARITHMETIC, links.still_free_roll,
         ("book_touchdown_tas", "free_roll_seconds"), "landing_known"),
    Step("book_braked_square", "", "", "Deceleration per V², book, 1/m", RUN, links.braked_square,
         ("landing_book_density", "wing_area", "landing_book_mass", "book_braked_drag", "ground_lift",
          "reference_braking", "braking_quality"), "landing_known"),
    Step("book_least_deceleration", "", "m/s²", "Least deceleration, book", RUN, links.still_least,
         ("reference_braked_start", "book_braked_square", "book_touchdown_tas"), "landing_known"),
    Step("book_stops", "", "", "The model stops at the book's conditions", RUN, links.brakes_of,
         ("book_least_deceleration", "book_path"), "landing_known", truth=True),
    Step("book_braked_roll", "", "m", "Braked roll of the model at the book's conditions", RUN, links.still_run,
         ("reference_braked_start", "book_braked_square", "book_touchdown_tas"), "book_stops"),
    Step("landing_model_roll", "", "m", "Landing roll of the model at the book's conditions", ARITHMETIC, links.total,
         ("book_free_roll", "book_braked_roll"), "book_stops"),
    Step("landing_model_distance", "", "m", "Landing from 50 ft of the model at the book's conditions", ARITHMETIC,
         links.total, ("book_landing_air", "landing_model_roll"), "book_stops"),
    _figure("landing", "roll", "Landing roll", "m", "landing_known"),
    _figure("landing", "distance", "Landing from 50 ft", "m", "landing_known"),
    Step("landing_roll_carry", "", "", "Landing roll, manual over model", CARRY, links.share_of,
         ("landing_book_roll", "landing_model_roll"), "book_stops"),
    Step("landing_carry", "", "", "Landing from 50 ft, manual over model", CARRY, links.share_of,
         ("landing_book_distance", "landing_model_distance"), "book_stops", short=True),
    Step("carried_landing_roll", "", "m", "Landing roll, from the manual's", CARRY, links.carried_from,
         ("landing_roll", "landing_roll_carry"), "stops"),
)  # fmt: skip

_CLIMB_SET = (
    Step("climb_book_lift", "CL", "", "Lift coefficient in the manual's climb", LIFT, links.lift_at,
         ("climb_book_mass", "wing_area", "climb_speed"), _SET),
    Step("climb_book_parasite", "CD0", "", "Parasite drag in the manual's climb", CARD, links.drag_with_flap,
         ("parasite_drag", "climb_book_flap", "flap_deflection", "flap_drag"), _SET),
    Step("climb_book_drag", "CD", "", "Drag coefficient in the manual's climb", "Drag polar", ground_run.drag_coefficient,
         ("climb_book_parasite", "climb_book_lift", "aspect_ratio", "efficiency"), _SET),
)  # fmt: skip
_CLIMB_THRUST = {
    True: (
        Step("climb_book_thrust", "T", "N", "Thrust in the manual's climb", POLAR, thrust.fixed_pitch_thrust,
             ("static_thrust", "thrust_slope", "climb_book_engine_sigma", "climb_book_density", "climb_book_tas"), _KNOWN),
    ),
    False: (
        Step("climb_useful_power", "", "kW", "Useful power in the manual's climb", "Propulsive quality times shaft power",
             links.product, ("climb_book_power", "propulsive_quality"), _KNOWN),
        Step("climb_disk_speed", "w0", "kt", "Static induced speed, manual's climb", DISK, thrust.disk_speed,
             ("climb_useful_power", "climb_book_density", "disk_area"), _KNOWN),
        Step("climb_disk_thrust", "T0", "N", "Static thrust, manual's climb", DISK, thrust.static_disk_thrust,
             ("climb_useful_power", "climb_book_density", "disk_area"), _KNOWN),
        Step("climb_book_thrust", "T", "N", "Thrust in the manual's climb", DISK, links.disk_thrust_at,
             ("climb_disk_thrust", "climb_disk_speed", "climb_book_tas"), _KNOWN),
    ),
}  # fmt: skip
_CLIMB_CARRY = (
    Step("climb_model_gradient", "", "%", "Climb gradient of the model in the manual's climb", AIR,
         airborne.excess_gradient, ("climb_book_thrust", "climb_book_mass", "climb_book_drag", "climb_book_lift"), _KNOWN),
    _figure("climb", "rate", "Rate of climb", "ft/min", _KNOWN),
    Step("climb_book_gradient", "", "%", "Climb gradient of the manual at its own conditions", ARITHMETIC,
         links.rate_gradient, ("climb_book_rate", "climb_book_tas"), _KNOWN),
    Step("climb_carry", "", "%", "Climb gradient, manual less model", CARRY, links.difference,
         ("climb_book_gradient", "climb_model_gradient"), _KNOWN, short=True),
    Step("carried_climb", "", "%", "Climb gradient in still air, from the manual's", CARRY, links.total,
         ("climb_gradient", "climb_carry"), _KNOWN),
)  # fmt: skip


# how high an obstacle is cleared hangs on the rates of climb too
BEYOND_WITH_CLIMB = Step("takeoff_beyond", "", "", "Take-off: beyond the book, its climb too where an obstacle counts", EDGE,
                         links.beyond_with_climb, ("tables_beyond", "climb_beyond", "obstacle_ahead"), _KNOWN, truth=True,
                         short=True)  # fmt: skip


def no_tables(side: str, guard: str) -> tuple[Step, ...]:
    """The two ratios of manual over model where there are no tables: the calibrated model stands for the manual."""
    word = {"takeoff": "Take-off", "landing": "Landing"}[side]
    return tuple(
        Step(key, "", "", f"{word}, manual over model", "No tables: the calibrated model", links.unchanged, (), guard)
        for key in (f"{side}_roll_carry", f"{side}_carry")
    )


def takeoff_table_steps(power: Step | None, air: tuple[Step, ...]) -> tuple[Step, ...]:
    """Steps from the strip's conditions to the ratio of manual over model. ``power`` is the chain's step of shaft power."""
    engine: tuple[Step, ...] = (*_FIXED_PITCH, *_TAKEOFF_EXCESS, _FIXED_PITCH_ROLL)
    if power is not None:
        engine = (_power_at(power, "book_power", "book", "takeoff"), *_CONSTANT_SPEED, *_TAKEOFF_EXCESS,
                  _CONSTANT_SPEED_ROLL)  # fmt: skip
    place = _place_in_tables("takeoff", "Take-off", "mass_takeoff", "takeoff_flap", _KNOWN, _SET)
    return (*place, *_air_at("takeoff", air), *_TAKEOFF_SPEEDS, *_TAKEOFF_TAS, *engine, *_TAKEOFF_CARRY)


def landing_table_steps() -> tuple[Step, ...]:
    """The same for the landing."""
    place = _place_in_tables("landing", "Landing", "mass_landing", "landing_flap", "landing_known", "landing_set")
    return (*place, *_LANDING_SPEEDS, *_LANDING_CARRY)


def climb_table_steps(power: Step | None, air: tuple[Step, ...]) -> tuple[Step, ...]:
    """Steps from the manual's rate of climb to the climb gradient used."""
    tas = Step("climb_book_tas", "", "kt", "Speed of the manual's climb, TAS", ISA, speeds.true_airspeed,
               ("climb_speed", "climb_book_sigma"), _KNOWN)  # fmt: skip
    at = () if power is None else (_power_at(power, "climb_book_power", "manual's climb", "climb"),)
    place = _place_in_tables("climb", "Climb", "mass_takeoff", "takeoff_flap", _KNOWN, _SET)
    return (*place, *_air_at("climb", air), *_CLIMB_SET, tas, *at, *_CLIMB_THRUST[power is None], *_CLIMB_CARRY)


_BOOK_OF = {"takeoff": "book's conditions", "climb": "manual's climb"}


def _air_at(side: str, air: tuple[Step, ...]) -> tuple[Step, ...]:
    """The chain's own steps of what the engine feels, in the air of the book's conditions."""
    there = {"sigma": f"{side}_book_sigma", "air_temperature": f"{side}_temperature_held", "heat": f"{side}_book_heat"}
    return tuple(
        replace(step, key=f"{side}_book_{step.key}", label=f"{step.label}, {_BOOK_OF[side]}",
                inputs=tuple(there.get(name, name) for name in step.inputs))
        for step in air
    )  # fmt: skip


def _power_at(power: Step, key: str, label: str, side: str) -> Step:
    """The chain's own step of shaft power, in the air of the book's conditions."""
    felt = {name: f"{side}_book_{name}" for name in ("heat", "engine_sigma", "hot_sigma")}
    inputs = tuple(felt.get(name, name) for name in power.inputs)
    return replace(power, key=key, label=f"Shaft power, {label}", inputs=inputs)


def manual_takeoff_left() -> tuple[Step, ...]:
    """What the manual's own corrections leave to the physics of the take-off."""
    return (
        Step("takeoff_wind_factor", "", "", "Manual's wind correction, take-off", MANUAL, links.manual_wind_factor,
             ("run_wind", "takeoff_manual_head", "takeoff_manual_tail"), _KNOWN, short=True),
        Step("takeoff_wind_left", "", "kt", "Wind left to the physics, take-off", MANUAL, links.wind_left_of,
             ("run_wind", "takeoff_manual_head", "takeoff_manual_tail"), _KNOWN, short=True),
        Step("takeoff_grass", "", "%", "Manual's addition for grass, take-off", MANUAL, links.manual_grass_of,
             ("ground", "takeoff_manual_dry", "takeoff_manual_wet"), _KNOWN),
        Step("takeoff_grass_row", "", "", "Grass that the manual's addition is for, take-off: row", MANUAL,
             links.manual_grass_row, ("ground", "takeoff_manual_wet")),
        Step("grass_rolling", "μr", "", "Rolling friction of that grass", "Ground table", links.from_table,
             ("ground_rolling", "takeoff_grass_row"), lookup="ground_rolling"),
        Step("rolling_left", "", "", "Rolling friction left to the physics", MANUAL, links.friction_left_of,
             ("takeoff_grass", "reference_rolling", "rolling", "grass_rolling"), _KNOWN, short=True),
    )  # fmt: skip


def manual_takeoff_steps(fixed: bool) -> tuple[Step, ...]:
    """Take-off distance with the manual's own corrections."""
    balance = ("density", "wing_area", "mass_takeoff", "rolling_drag", "ground_lift", "rolling_left")
    if fixed:
        run = (
            Step("manual_start", "", "m/s²", "Acceleration at rest, friction left", POLAR, links.fixed_pitch_start,
                 ("static_thrust", "engine_sigma", "mass_takeoff", "rolling_left", "takeoff_slope"), _KNOWN),
            Step("manual_square", "", "", "Acceleration per V², friction left, 1/m", POLAR, links.fixed_pitch_square,
                 ("thrust_slope", *balance), _KNOWN),
            Step("manual_roll", "", "m", "Take-off roll, wind and friction left", RUN, ground_run.speed_run,
                 ("manual_start", "manual_square", "takeoff_wind_left", "lift_off_tas"), "lifts_off"),
        )  # fmt: skip
    else:
        disk = ("thrust_acceleration", "manual_lost", "manual_square", "disk_speed")
        run = (
            Step("manual_lost", "", "m/s²", "Lost at rest, friction left", RUN, ground_run.resistance,
                 ("rolling_left", "takeoff_slope"), _KNOWN),
            Step("manual_square", "", "", "Lost per V², friction left, 1/m", RUN, ground_run.air_acceleration, balance,
                 _KNOWN),
            Step("manual_roll", "", "m", "Take-off roll, wind and friction left", RUN, ground_run.disk_run_between,
                 (*disk, "takeoff_wind_left", "manual_root", "fast_root"), "lifts_off", short=True),
        )  # fmt: skip
    return (
        *run,
        Step("manual_air", "", "m", "Lift-off to 50 ft, wind left", AIR, airborne.screen_distance,
             ("kinetic_head", "pull_up_radius", "sigma", "airborne_tas", "excess", "climb_slope", "takeoff_wind_left",
              "takeoff_technique"), "climbs", short=True),
        Step("manual_takeoff", "", "m", "Take-off to 50 ft with the manual's corrections", MANUAL, links.manual_distance_of,
             ("manual_roll", "manual_air", "takeoff_carry", "takeoff_roll_carry", "takeoff_grass", "takeoff_wind_factor",
              "ground", "physics_takeoff"), "climbs", short=True),
    )  # fmt: skip


MANUAL_ROOT = Step("manual_root", "y", "", "Disk root at the start, wind left", DISK, links.disk_root_of,
                   ("takeoff_wind_left", "disk_speed"), _KNOWN, short=True)  # fmt: skip


def manual_landing_left() -> tuple[Step, ...]:
    """What the manual's own corrections leave to the physics of the landing."""
    known = "landing_known"
    return (
        Step("landing_wind_factor", "", "", "Manual's wind correction, landing", MANUAL, links.manual_wind_factor,
             ("landing_wind", "landing_manual_head", "landing_manual_tail"), known, short=True),
        Step("landing_wind_left", "", "kt", "Wind left to the physics, landing", MANUAL, links.wind_left_of,
             ("landing_wind", "landing_manual_head", "landing_manual_tail"), known, short=True),
        Step("landing_grass", "", "%", "Manual's addition for grass, landing", MANUAL, links.manual_grass_of,
             ("ground", "landing_manual_dry", "landing_manual_wet"), known),
        Step("landing_grass_row", "", "", "Grass that the manual's addition is for, landing: row", MANUAL,
             links.manual_grass_row, ("ground", "landing_manual_wet")),
        Step("grass_braking", "μb", "", "Braking friction of that grass", "Ground table", links.from_table,
             ("ground_braking", "landing_grass_row"), lookup="ground_braking"),
        Step("braking_left", "", "", "Braking left to the physics", MANUAL, links.friction_left_of,
             ("landing_grass", "reference_braking", "braking", "grass_braking"), known, short=True),
        Step("manual_free_roll", "", "m", "Roll before braking, wind left", ARITHMETIC, airborne.free_roll,
             ("touchdown_tas", "landing_wind_left", "free_roll_seconds"), known),
    )  # fmt: skip


def manual_landing_steps() -> tuple[Step, ...]:
    """Landing distance with the manual's own corrections."""
    known = "landing_known"
    return (
        Step("manual_landing_air", "", "m", "50 ft to touchdown, wind left", ANDERSON, airborne.landing_air_distance,
             ("approach_tas", "touchdown_tas", "descent_path", "landing_wind_left", "landing_technique"), "path_closes",
             short=True),
        Step("manual_braked_start", "", "m/s²", "Deceleration at zero airspeed, braking left", RUN, links.braked_start,
             ("braking_left", "braking_quality", "landing_slope"), known),
        Step("manual_braked_square", "", "", "Deceleration per V², braking left, 1/m", RUN, links.braked_square,
             ("density", "wing_area", "mass_landing", "braked_drag", "ground_lift", "braking_left", "braking_quality"),
             known),
        Step("manual_braked_roll", "", "m", "Braked roll, wind and braking left", RUN, ground_run.speed_run,
             ("manual_braked_start", "manual_braked_square", "landing_wind_left", "touchdown_tas"), "stops"),
        Step("manual_landing_roll", "", "m", "Landing roll, wind and braking left", ARITHMETIC, links.total,
             ("manual_free_roll", "manual_braked_roll"), "stops"),
        Step("manual_landing", "", "m", "Landing from 50 ft with the manual's corrections", MANUAL,
             links.manual_distance_of,
             ("manual_landing_roll", "manual_landing_air", "landing_carry", "landing_roll_carry", "landing_grass",
              "landing_wind_factor", "ground", "physics_landing"), "stops", short=True),
    )  # fmt: skip
