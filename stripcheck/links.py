"""The links of the chain: small functions that choose between given values and join the equations.

They are written like the equations, pure and without branches, so that both evaluators can walk them. SI; NaN is
"not known".
"""

from __future__ import annotations

import numpy as np

from stripcheck import airborne, atmosphere, ground_run, speeds, thrust
from stripcheck.numeric import Number
from stripcheck.surface import CONDITIONS, GROUND_NAMES, GROUNDS

ELEVATIONS = (-450.0, 5500.0)  # m: the lowest and the highest land with strips, with a margin
TEMPERATURES = (213.15, 333.15)  # K: -60 to +60 degC
PRESSURES = (85000.0, 108500.0)  # Pa: beyond any QNH on record
LENGTHS = (1.0, 10000.0)  # m: any length that could be meant
SLOPES = (-0.30, 0.30)  # fraction: beyond any strip in use
LEAST_CLIMB = airborne.LEAST_PATH  # excess gradient below which the airborne part has no meaningful length
LEAST_DESCENT = 0.03  # towards falling ground; below it the distance would hang on the wind alone
GROUND_UNKNOWN = len(GROUNDS) + 1  # row of the ground table for a surface or condition that is not known
# A run "barely accelerates" when its least acceleration is below this share of the first one. Falling with the square
# of speed, that is a little before the last acceleration is a quarter of the mean one.
BARELY = 0.2
# rows of the ground table
GRASS_DRY, GRASS_WET, GRASS_SOFT = (GROUND_NAMES.index(f"grass, {condition}") + 1 for condition in CONDITIONS)
SAME_ROLL = 0.01  # of a roll, by which it may differ from the one that a profile's slope was worked out for
SAME_USABLE = 0.5  # m, of a usable length that counts as unchanged
LEAST_MANUAL_SHARE = 0.5  # of a distance that a manual's headwind correction may leave, however strong the wind


def known(value: Number, limits: tuple[float, float]) -> Number:
    """Whether a value is a number between two limits; what is no number is never compared."""
    return np.where(np.isfinite(value), (value >= limits[0]) & (value <= limits[1]), False)


def first_known(own: Number, general: Number) -> Number:
    """The strip's own value where it has one, else the one given for the day."""
    return np.where(np.isfinite(own), own, np.where(np.isfinite(general), general, np.nan))


def highest_elevation(field_elevation: Number, start: Number, end: Number) -> Number:
    """Highest known point of the strip [m], which is what an aerodrome's elevation means."""
    ends = np.maximum(start, end)
    both = np.isfinite(start) & np.isfinite(end)
    of_field = np.isfinite(field_elevation)
    lone = np.where(of_field, field_elevation, np.nan)
    return np.where(both, np.where(of_field, np.maximum(ends, field_elevation), ends), lone)


def mean_slope(given: Number, start: Number, end: Number, length: Number) -> Number:
    """The slope given, else rise between the end elevations over the length [m]."""
    surveyed = np.isfinite(start) & np.isfinite(end) & np.isfinite(length)
    return np.where(np.isfinite(given), given, np.where(surveyed, (end - start) / length, np.nan))


def adverse_uphill(slope: Number, assumed: Number, of_profile: Number) -> Number:
    """Slope for the take-off: the one that stands for the strip's profile, else its mean, else one assumed uphill."""
    mean = np.where(np.isfinite(slope), slope, np.where(np.isfinite(assumed), np.abs(assumed), np.nan))
    return first_of(of_profile, mean)


def adverse_downhill(slope: Number, assumed: Number, of_profile: Number) -> Number:
    """The same for the landing, one assumed being downhill."""
    mean = np.where(np.isfinite(slope), slope, np.where(np.isfinite(assumed), -np.abs(assumed), np.nan))
    return first_of(of_profile, mean)


def first_of(of_profile: Number, otherwise: Number) -> Number:
    """What the profile tells where there is one, else what stands without it."""
    return np.where(np.isfinite(of_profile), of_profile, otherwise)


def profile_moved(of_profile: Number, roll: Number, of_usable: Number, usable: Number) -> Number:
    """Whether a roll, or the usable length, is no longer the one for which the slope that stands for the profile was worked
    out [m all]; what is usable tells where along the profile a run may begin."""
    there, known = np.isfinite(of_profile) & np.isfinite(roll), np.isfinite(of_usable) & np.isfinite(usable)
    rolls_on = np.where(there, np.abs(roll - of_profile) > SAME_ROLL * of_profile, False)
    return rolls_on | np.where(known, np.abs(usable - of_usable) > SAME_USABLE, False)


def air_temperature(own: Number, day: Number, day_elevation: Number, deviation: Number, elevation: Number,
                    pressure_altitude: Number) -> Number:  # fmt: skip
    """The strip's own temperature; else the standard one plus the day's deviation; else the day's temperature,
    carried at the standard lapse rate from the elevation where it was taken, if one is given."""
    lapsed = np.where(np.isfinite(day_elevation), day - atmosphere.LAPSE * (elevation - day_elevation), day)
    standard = atmosphere.isa_temperature(pressure_altitude) + deviation
    of_day = np.where(np.isfinite(day), lapsed, np.nan)
    return np.where(np.isfinite(own), own, np.where(np.isfinite(deviation), standard, of_day))


def vapour_pressure_of_day(temperature: Number, humidity: Number, dew_point: Number) -> Number:
    """Vapour pressure from the dew point, else from the relative humidity, else nil; never above saturation."""
    from_dew = np.where(np.isfinite(dew_point), atmosphere.saturation_vapour_pressure(dew_point), np.nan)
    saturated = atmosphere.saturation_vapour_pressure(temperature)
    relative = np.where(np.isfinite(humidity), saturated * humidity, 0.0)
    return np.where(np.isfinite(dew_point), np.minimum(from_dew, saturated), relative)


def wind_known_of(speed: Number, direction: Number, heading: Number) -> Number:
    directed = np.isfinite(direction) & np.isfinite(heading)
    return np.where(np.isfinite(speed), (speed == 0.0) | ((speed > 0.0) & directed), False)


def wind_of(own_speed: Number, own: Number, general: Number) -> Number:
    """The strip's own wind value where it has a wind speed of its own, else the day's."""
    of_day = np.where(np.isfinite(general), general, np.nan)
    return np.where(np.isfinite(own_speed), np.where(np.isfinite(own), own, np.nan), of_day)


def head_of(speed: Number, direction: Number, heading: Number) -> Number:
    return np.where(speed == 0.0, 0.0, speeds.headwind(speed, direction, heading))


def cross_of(speed: Number, direction: Number, heading: Number) -> Number:
    return np.where(speed == 0.0, 0.0, speeds.crosswind(speed, direction, heading))


def counted_wind_of(wind: Number, flying_speed: Number) -> Number:
    """Headwind counted: at most half of the speed at which the wheels leave or touch the ground, however strong it is."""
    return np.minimum(wind, 0.5 * flying_speed)


def first_acceleration_of(start: Number, square: Number, wind: Number) -> Number:
    """Acceleration where a run begins; in a tailwind where it passes zero airspeed, so that it never looks worse."""
    return ground_run.acceleration_at(start, square, np.maximum(wind, 0.0))


def rule_correction(surface_factor: Number, per_percent: Number, against: Number) -> Number:
    """Published correction: surface factor times so much for each per cent of slope against you."""
    return surface_factor * (1.0 + per_percent * 100.0 * np.maximum(against, 0.0))


def takeoff_correction(surface_factor: Number, per_percent: Number, slope: Number) -> Number:
    return rule_correction(surface_factor, per_percent, slope)


def landing_correction(surface_factor: Number, per_percent: Number, slope: Number) -> Number:
    return rule_correction(surface_factor, per_percent, -slope)


def governing(physics: Number, book: Number, correction: Number, physics_counts: Number, rules_count: Number) -> Number:
    """The longer of what physics and what the published corrections say, or the one that the rule set counts."""
    return np.maximum(physics * physics_counts, book * correction * rules_count)


def product(one: Number, other: Number) -> Number:
    return one * other


def total(one: Number, other: Number) -> Number:
    return one + other


def difference(one: Number, other: Number) -> Number:
    return one - other


def share_of(part: Number, whole: Number) -> Number:
    return part / whole


def three_summed(one: Number, other: Number, third: Number) -> Number:
    return one + other + third


def barely_of(least: Number, first: Number) -> Number:
    return least < BARELY * first


def climbs_of(excess: Number, slope: Number, tas: Number, wind: Number, over_ground: Number) -> Number:
    """Whether the climb gains on the ground that rises under it, to 50 ft and after it."""
    gains = excess - airborne.rise_under(slope, airborne.drift_factor(tas, wind)) >= LEAST_CLIMB
    return gains & (over_ground >= np.maximum(slope, 0.0))


def obstacle_known_of(height: Number, distance: Number) -> Number:
    return np.isfinite(height) & np.isfinite(distance)


def aspect_ratio_of(span: Number, area: Number) -> Number:
    return np.square(span) / area


def disk_area_of(diameter: Number) -> Number:
    return 0.25 * np.pi * np.square(diameter)


def hot_sigma_of(sigma: Number, temperature: Number) -> Number:
    """Density ratio over temperature ratio, on which the hot end of a turboprop's rating hangs."""
    return sigma * atmosphere.T0 / temperature


def heat_of(sigma: Number, temperature: Number) -> Number:
    """Heat factor of a piston engine; the pressure is that of dry air of this density, so that moist air is not helped."""
    standard = atmosphere.T0 * (sigma * temperature / atmosphere.T0) ** atmosphere.BARO
    return thrust.heat_factor(temperature, standard)


def fixed_pitch_start(static: Number, sigma: Number, mass: Number, friction: Number, slope: Number) -> Number:
    """Acceleration at rest with a fixed-pitch propeller."""
    return static * thrust.drop_off_factor(sigma) / mass - ground_run.resistance(friction, slope)


def fixed_pitch_square(thrust_slope: Number, rho: Number, wing_area: Number, mass: Number, drag: Number, lift: Number,
                       friction: Number) -> Number:  # fmt: skip
    """Acceleration per square of airspeed with a fixed-pitch propeller."""
    lost_to_air = ground_run.air_acceleration(rho, wing_area, mass, drag, lift, friction)
    return thrust_slope * rho / mass - lost_to_air


def disk_thrust_at(static: Number, speed_of_disk: Number, tas: Number) -> Number:
    return static / thrust.disk_root(tas / speed_of_disk)


def disk_root_of(speed: Number, speed_of_disk: Number) -> Number:
    return thrust.disk_root(speed / speed_of_disk)


def braked_square(rho: Number, area: Number, mass: Number, drag: Number, lift: Number, braking: Number,
                  quality: Number) -> Number:  # fmt: skip
    """Deceleration of a braked roll per square of airspeed."""
    return ground_run.air_acceleration(rho, area, mass, drag, lift, braking * quality)


def ground_row(surface: Number, condition: Number, day_condition: Number) -> Number:
    """Row [1, 2, ...] in the ground table of the codes [0, 1, ...] of a surface and a condition.

    A surface of -1 is not known; a condition of -1 was not given, and the day's stands for it; one of -2 is not
    understood. What is not known has the row after the last, GROUND_UNKNOWN.
    """
    used: Number = np.where(condition == -1, day_condition, condition)
    return np.where((surface >= 0) & (used >= 0), surface * len(CONDITIONS) + used + 1, GROUND_UNKNOWN)


def from_table(column: Number, row: Number) -> Number:
    """Value of a column of the ground table, which ends with the row of the unknown ground, at a row [1, 2, ...]."""
    return np.choose(row - 1, column)


def place_known_of(elevation: Number, qnh: Number) -> Number:
    return known(elevation, ELEVATIONS) & known(qnh, PRESSURES)


def air_known_of(temperature: Number) -> Number:
    return known(temperature, TEMPERATURES)


def loading_known(mass: Number, flap: Number, least: Number, most: Number) -> Number:
    """Whether a mass is given and a flap setting lies within the card's flap table."""
    given = np.isfinite(mass) & np.isfinite(flap)
    return np.where(given, (mass > 0.0) & (flap >= least) & (flap <= most), False)


def side_known_of(fault: Number, density: Number, headwind: Number, slope: Number, friction: Number, factor: Number,
                  length: Number, loading: Number, physics_counts: Number, corrections_count: Number,
                  obstacle_whole: Number) -> Number:  # fmt: skip
    """Whether all is known that one side, take-off or landing, needs."""
    figures = np.isfinite(density) & np.isfinite(headwind) & np.isfinite(friction) & np.isfinite(factor)
    rules = physics_counts | corrections_count
    return np.logical_not(fault) & figures & known(slope, SLOPES) & known(length, LENGTHS) & loading & rules & obstacle_whole


def interpolated(at: Number, nodes: Number, values: Number) -> Number:
    return np.interp(at, nodes, values)


def drag_with_flap(parasite: Number, flap: Number, deflections: Number, added: Number) -> Number:
    return parasite + np.interp(flap, deflections, added)


def lift_at(mass: Number, wing_area: Number, eas: Number) -> Number:
    """Lift coefficient in level flight at an equivalent airspeed."""
    return airborne.lift_coefficient(mass, atmosphere.RHO0, wing_area, eas)


def width_asked_of(max_mass: Number, light_mass: Number, width_light: Number, width: Number) -> Number:
    """Least width that the rule set asks for this aeroplane, if it asks for one."""
    asked = np.where(np.isfinite(width), width, np.nan)
    has_light = np.isfinite(light_mass) & np.isfinite(width_light)
    return np.where(has_light, np.where(max_mass <= light_mass, width_light, asked), asked)


def lifts_off_of(least: Number, reference_least: Number) -> Number:
    """Whether the run accelerates all along, here and, for the published corrections, on level dry pavement."""
    return (least >= ground_run.LEAST_ACCELERATION) & (reference_least >= ground_run.LEAST_ACCELERATION)


def fixed_pitch_level_start(static: Number, sigma: Number, mass: Number, friction: Number) -> Number:
    return fixed_pitch_start(static, sigma, mass, friction, 0.0)


def level_resistance(friction: Number) -> Number:
    return ground_run.resistance(friction, 0.0)


def level_screen_distance(kinetic: Number, radius: Number, sigma: Number, speed: Number, excess: Number, wind: Number,
                          technique: Number) -> Number:  # fmt: skip
    return airborne.screen_distance(kinetic, radius, sigma, speed, excess, 0.0, wind, technique)


def factored(distance: Number, short: Number, short_to: Number, long: Number, long_from: Number) -> Number:
    """Distance times its safety factor: one for short distances, another for long ones, straight between the two."""
    share = np.minimum(np.maximum((distance - short_to) / (long_from - short_to), 0.0), 1.0)
    return distance * (short + (long - short) * share)


def obstacle_cleared_by(present: Number, available: Number, needed: Number, distance: Number, gradient: Number,
                        height: Number, slope: Number) -> Number:  # fmt: skip
    """Height over the obstacle ahead, less the ground that rises from the 50 ft point to the end of the strip."""
    rise = np.maximum(slope, 0.0) * np.maximum(available - needed, 0.0)
    over = airborne.height_over_obstacle(available, needed, distance, gradient, height)
    return np.where(present, over - rise, np.nan)


def landing_length_of(usable: Number, present: Number, height: Number, distance: Number, path: Number) -> Number:
    """Usable length less what an obstacle on the approach takes."""
    return np.where(present, usable - airborne.threshold_shift(height, distance, path), usable)


def slowest_touchdown_of(lift: Number, max_mass: Number, area: Number, factor: Number) -> Number:
    """Touchdown speed at half the greatest landing mass, which is less than any aeroplane lands at."""
    return factor * speeds.stall_speed_of_lift(lift, 0.5 * max_mass, area)


def path_closes_of(path: Number) -> Number:
    """Whether the approach path meets the ground that falls away under it."""
    return path >= LEAST_DESCENT


def obstacle_whole_of(height: Number, distance: Number) -> Number:
    """Whether an obstacle has both its figures, or neither."""
    return np.equal(np.isfinite(height), np.isfinite(distance))


def braked_start(braking: Number, quality: Number, slope: Number) -> Number:
    """Deceleration of a braked roll at zero airspeed."""
    return ground_run.resistance(braking * quality, slope)


def level_braked_start(braking: Number, quality: Number) -> Number:
    return braked_start(braking, quality, 0.0)


def stops_of(least: Number, closes: Number) -> Number:
    return closes & (least >= ground_run.LEAST_ACCELERATION)


def rating_limit(altitude: float, deviation: float, turbine: bool) -> float:
    """Where a rating ends, at a pressure altitude and so much warmer than standard, as the engine feels it there."""
    temperature = atmosphere.isa_temperature(altitude) + deviation
    sigma = atmosphere.density_ratio(atmosphere.density(atmosphere.isa_pressure(altitude), temperature))
    piston = thrust.engine_sigma(sigma, heat_of(sigma, temperature))
    return float(hot_sigma_of(sigma, temperature) if turbine else piston)


def book_mass_of(mass: Number, flap: Number, deflections: Number, least: Number, most: Number) -> Number:
    """Mass nearest to the one given for which the manual's tables for a flap setting have figures."""
    return np.minimum(np.maximum(mass, np.interp(flap, deflections, least)), np.interp(flap, deflections, most))


def held_between(value: Number, nodes: Number) -> Number:
    """The value, held at the first and last of some rising nodes."""
    return np.interp(value, nodes, nodes)


def standard_air_density(altitude: Number, temperature: Number) -> Number:
    """Density of dry air at a pressure altitude and temperature, as a manual's table means it."""
    return atmosphere.density(atmosphere.isa_pressure(altitude), temperature)


def still_run(start: Number, square: Number, speed: Number) -> Number:
    return ground_run.speed_run(start, square, 0.0, speed)


def still_least(start: Number, square: Number, speed: Number) -> Number:
    return ground_run.least_speed_run_acceleration(start, square, 0.0, speed)


def still_disk_run(static: Number, lost: Number, square: Number, speed_of_disk: Number, fast: Number) -> Number:
    return ground_run.disk_run_between(static, lost, square, speed_of_disk, 0.0, 1.0, fast)


def still_screen_distance(kinetic: Number, radius: Number, sigma: Number, speed: Number, excess: Number,
                          technique: Number) -> Number:  # fmt: skip
    return airborne.screen_distance(kinetic, radius, sigma, speed, excess, 0.0, 0.0, technique)


def still_landing_air(approach: Number, touchdown: Number, path: Number, technique: Number) -> Number:
    return airborne.landing_air_distance(approach, touchdown, path, 0.0, technique)


def still_free_roll(touchdown: Number, seconds: Number) -> Number:
    return airborne.free_roll(touchdown, 0.0, seconds)


def flies_of(least: Number, excess: Number) -> Number:
    """Whether a take-off run accelerates all along and the climb after it gains height."""
    return (least >= ground_run.LEAST_ACCELERATION) & (excess >= LEAST_CLIMB)


def brakes_of(least: Number, path: Number) -> Number:
    """Whether a braked run slows down all along, after an approach that comes down."""
    return (least >= ground_run.LEAST_ACCELERATION) & (path >= LEAST_DESCENT)


def beyond_of(altitude: Number, temperature: Number, mass: Number) -> Number:
    """Whether conditions lie on the hard side of the manual's figures: higher, hotter or heavier, by more than rounding."""
    return (altitude > 0.1) | (temperature > 0.001) | (mass > 0.001)


def beyond_with_climb(tables: Number, climb: Number, obstacle: Number) -> Number:
    """Whether a take-off is beyond the book: its distances, or its climb where an obstacle has to be cleared."""
    return tables | (climb & obstacle)


def over_reach(altitude: Number, reach: Number) -> Number:
    """Density altitude above the one that a card's single figures reach to; none where that is not known."""
    return np.where(np.isfinite(reach), altitude - reach, np.nan)


def beyond_reach_of(over: Number) -> Number:
    """Whether that is on the hard side of the figures; where it is not known how far they reach it counts as beyond."""
    return np.logical_not(over <= 0.1)


def rate_gradient(rate: Number, tas: Number) -> Number:
    """Gradient of climb from a rate of climb and a true airspeed."""
    return rate / tas


def unchanged() -> Number:
    return np.float64(1.0)


def carried_from(figure: Number, carry: Number) -> Number:
    """The model's figure times the manual's over the model's; none where the model has none at the manual's conditions."""
    return np.where(np.isfinite(carry), figure * carry, np.nan)


def manual_wind_factor(wind: Number, head: Number, tail: Number) -> Number:
    """The manual's own correction for wind: so much off for a headwind, so much added for a tailwind; 1 where it has none."""
    against = np.where(np.isfinite(head), 1.0 - head * np.maximum(wind, 0.0), 1.0)
    behind = np.where(np.isfinite(tail), 1.0 - tail * np.minimum(wind, 0.0), 1.0)
    return np.maximum(against, LEAST_MANUAL_SHARE) * behind


def wind_left_of(wind: Number, head: Number, tail: Number) -> Number:
    """The wind that is left to the physics: none where the manual has its own correction."""
    return np.where(wind >= 0.0, np.where(np.isfinite(head), 0.0, wind), np.where(np.isfinite(tail), 0.0, wind))


def manual_grass_of(ground: Number, dry: Number, wet: Number) -> Number:
    """The manual's own addition for grass, where the ground is grass: the one for wet grass if that is wet or soft and the
    manual has one, else the one for dry grass."""
    for_dry = np.where(np.isfinite(dry), dry, np.nan)
    for_wet = np.where(np.isfinite(wet), wet, for_dry)
    added = np.where((ground == GRASS_WET) | (ground == GRASS_SOFT), for_wet, np.nan)
    return np.where(ground == GRASS_DRY, for_dry, added)


def manual_grass_row(ground: Number, wet: Number) -> Number:
    """Row of the ground table of the grass that such an addition is for."""
    return np.where(np.isfinite(wet), np.where(ground == GRASS_DRY, GRASS_DRY, GRASS_WET), GRASS_DRY)


def friction_left_of(added: Number, level: Number, own: Number, of_addition: Number) -> Number:
    """The friction that is left to the physics where the manual has its own addition: that of pavement, and what the ground
    is worse than the grass that the addition is for, so that wet or soft grass is never shorter than dry."""
    return np.where(np.isfinite(added), level + (own - of_addition), own)


def manual_distance_of(roll: Number, air: Number, carry: Number, roll_carry: Number, added: Number, wind: Number,
                       ground: Number, physics: Number) -> Number:  # fmt: skip
    """Distance with the manual's own corrections: its addition for grass is a share of the roll, wind counts for the whole.

    On soft grass, which manuals don't mean, it is no shorter than by physics alone.
    """
    grass = np.where(np.isfinite(added), added, 0.0)
    whole = ((roll + air) * carry + grass * roll * roll_carry) * wind
    least = np.where(ground == GRASS_SOFT, physics * carry, 0.0)
    return np.where(np.isfinite(carry), np.maximum(whole, least), np.nan)


def governing_carried(physics: Number, book: Number, correction: Number, physics_counts: Number, rules_count: Number,
                      carry: Number) -> Number:  # fmt: skip
    """As ``governing``, carried from the manual's figure."""
    return carried_from(governing(physics, book, correction, physics_counts, rules_count), carry)


def governing_manual(manual: Number, book: Number, correction: Number, physics_counts: Number, rules_count: Number,
                     carry: Number, wind: Number) -> Number:  # fmt: skip
    """As ``governing``, where the manual's own corrections stand for the physics."""
    governs = governing(manual, book * carry * wind, correction, physics_counts, rules_count)
    return np.where(np.isfinite(carry), governs, np.nan)
