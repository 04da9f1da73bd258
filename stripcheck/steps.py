"""The steps of an assessment, in order, for each kind of engine and propeller.

References that the steps name are those at the head of the module of each function.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from dataclasses import replace
from functools import cache

from stripcheck import airborne, atmosphere, book_steps, ground_run, inputs, links, speeds, thrust
from stripcheck.chain import Chain, Step
from stripcheck.numeric import Number
from stripcheck.verdict import LANDING_STEPS, TAKEOFF_STEPS

PROPELLERS = ("fixed pitch", "constant speed")
POWERS = ("normally aspirated", "turbo-normalised", "flat rated")
SIDES = ("takeoff", "landing", "climb")
Steps = tuple[Step, ...]

ISA = "ISO 2533"
LIFT = "Lift equation"
ARITHMETIC = "Arithmetic"
FRICTION = "Ground table"
RULE = "Rule set"
CARD = "Aircraft card"
RUN = "Anderson, Aircraft Performance and Design, 6.7; Gauss-Legendre sum"
AIR = "Energy method"
DISK = "Actuator-disk momentum theory"
POLAR = "Lowry, linearised propeller polar"

AIRCRAFT_STEPS = (
    Step("aspect_ratio", "A", "", "Aspect ratio", ARITHMETIC, links.aspect_ratio_of, ("span", "wing_area")),
    Step("ground_effect", "G", "", "Share of induced drag near the ground", "Anderson 6.7",
         ground_run.ground_effect_factor, ("wing_height", "span")),
    Step("takeoff_set", "", "", "Take-off mass and flap given", CARD, links.loading_known,
         ("mass_takeoff", "takeoff_flap", "flap_least", "flap_most"), truth=True),
    Step("landing_set", "", "", "Landing mass and flap given", CARD, links.loading_known,
         ("mass_landing", "landing_flap", "flap_least", "flap_most"), truth=True),
    Step("takeoff_lift", "CLmax", "", "Greatest lift coefficient, take-off flap", LIFT, links.interpolated,
         ("takeoff_flap", "flap_deflection", "flap_lift"), "takeoff_set"),
    Step("takeoff_flap_drag", "CD0", "", "Parasite drag with take-off flap", CARD, links.drag_with_flap,
         ("parasite_drag", "takeoff_flap", "flap_deflection", "flap_drag"), "takeoff_set"),
    Step("stall_takeoff", "Vs1", "kt", "Stall speed, take-off flap, EAS", LIFT, speeds.stall_speed_of_lift,
         ("takeoff_lift", "mass_takeoff", "wing_area"), "takeoff_set"),
    Step("lift_off_eas", "VLOF", "kt", "Lift-off speed, EAS", CARD, links.product,
         ("stall_takeoff", "lift_off_factor"), "takeoff_set"),
    Step("screen_eas", "V50", "kt", "Speed at 50 ft after take-off, EAS", CARD, links.product,
         ("stall_takeoff", "screen_factor"), "takeoff_set"),
    Step("rolling_drag", "CD", "", "Drag coefficient in the take-off run", "Anderson 6.7", ground_run.drag_coefficient,
         ("takeoff_flap_drag", "ground_lift", "aspect_ratio", "efficiency", "ground_effect"), "takeoff_set"),
    Step("airborne_eas", "Vm", "kt", "Mean speed from lift-off to 50 ft, EAS", ARITHMETIC, airborne.mean_square_speed,
         ("lift_off_eas", "screen_eas"), "takeoff_set"),
    Step("kinetic_head", "", "m", "Height that the speed gained to 50 ft is worth, sea level", AIR, airborne.kinetic_head,
         ("lift_off_eas", "screen_eas"), "takeoff_set"),
    Step("pull_up_radius", "R", "m", "Radius of the pull-up, sea level", "Anderson 6.7", airborne.pull_up_radius,
         ("airborne_eas",), "takeoff_set"),
    Step("airborne_lift", "CL", "", "Lift coefficient from lift-off to 50 ft", LIFT, links.lift_at,
         ("mass_takeoff", "wing_area", "airborne_eas"), "takeoff_set"),
    Step("airborne_drag", "CD", "", "Drag coefficient from lift-off to 50 ft", "Drag polar", ground_run.drag_coefficient,
         ("takeoff_flap_drag", "airborne_lift", "aspect_ratio", "efficiency"), "takeoff_set"),
    Step("climb_lift", "CL", "", "Lift coefficient in the climb", LIFT, links.lift_at,
         ("mass_takeoff", "wing_area", "screen_eas"), "takeoff_set"),
    Step("climb_drag", "CD", "", "Drag coefficient in the climb", "Drag polar", ground_run.drag_coefficient,
         ("takeoff_flap_drag", "climb_lift", "aspect_ratio", "efficiency"), "takeoff_set"),
    Step("landing_lift", "CLmax", "", "Greatest lift coefficient, landing flap", LIFT, links.interpolated,
         ("landing_flap", "flap_deflection", "flap_lift"), "landing_set"),
    Step("landing_flap_drag", "CD0", "", "Parasite drag with landing flap", CARD, links.drag_with_flap,
         ("parasite_drag", "landing_flap", "flap_deflection", "flap_drag"), "landing_set"),
    Step("stall_landing", "Vs0", "kt", "Stall speed, landing flap, EAS", LIFT, speeds.stall_speed_of_lift,
         ("landing_lift", "mass_landing", "wing_area"), "landing_set"),
    Step("approach_eas", "VREF", "kt", "Approach speed at 50 ft, EAS", CARD, links.product,
         ("stall_landing", "approach_factor"), "landing_set"),
    Step("touchdown_eas", "VTD", "kt", "Touchdown speed, EAS", CARD, links.product,
         ("stall_landing", "touchdown_factor"), "landing_set"),
    Step("approach_lift", "CL", "", "Lift coefficient on the approach", LIFT, links.lift_at,
         ("mass_landing", "wing_area", "approach_eas"), "landing_set"),
    Step("approach_drag", "CD", "", "Drag coefficient on the approach", "Drag polar", ground_run.drag_coefficient,
         ("landing_flap_drag", "approach_lift", "aspect_ratio", "efficiency"), "landing_set"),
    Step("approach_path", "", "%", "Gradient of descent on the approach", "Anderson 6.8, idle thrust nil",
         airborne.approach_gradient, ("approach_drag", "approach_lift", "approach_shallowest", "approach_steepest"),
         "landing_set"),
    Step("braked_drag", "CD", "", "Drag coefficient in the landing roll", "Anderson 6.7", ground_run.drag_coefficient,
         ("landing_flap_drag", "ground_lift", "aspect_ratio", "efficiency", "ground_effect"), "landing_set"),
    Step("width_asked", "", "m", "Least width for this aeroplane", RULE, links.width_asked_of,
         ("max_takeoff_mass", "light_mass", "least_width_light", "least_width")),
)  # fmt: skip

AIR_STEPS = (
    Step("elevation", "", "ft", "Highest known elevation of the strip", "ICAO Annex 14: highest point",
         links.highest_elevation, ("elevation_field", "elevation_start", "elevation_end"), short=True),
    Step("qnh_used", "QNH", "hPa", "QNH used", "Strip, else day", links.first_known, ("own_qnh", "qnh")),
    Step("place_known", "", "", "Elevation and QNH known and credible", ARITHMETIC, links.place_known_of,
         ("elevation", "qnh_used"), truth=True),
    Step("pressure", "p", "hPa", "Air pressure at the strip", ISA, atmosphere.station_pressure,
         ("qnh_used", "elevation"), "place_known"),
    Step("pressure_altitude", "PA", "ft", "Pressure altitude", ISA, atmosphere.pressure_altitude, ("pressure",),
         "pressure"),
    Step("air_temperature", "OAT", "°C", "Air temperature at the strip", "Strip, else day", links.air_temperature,
         ("own_temperature", "temperature", "temperature_elevation", "isa_deviation", "elevation",
          "pressure_altitude"), "pressure", short=True),
    Step("air_known", "", "", "Air known and credible", ARITHMETIC, links.air_known_of, ("air_temperature",),
         "pressure", truth=True),
    Step("vapour", "e", "hPa", "Vapour pressure", "WMO-No. 8, Magnus form", links.vapour_pressure_of_day,
         ("air_temperature", "humidity", "dew_point"), "air_known"),
    Step("virtual_temperature", "Tv", "°C", "Virtual temperature", "WMO-No. 8", atmosphere.virtual_temperature,
         ("air_temperature", "pressure", "vapour"), "air_known"),
    Step("density", "ρ", "kg/m³", "Air density", ISA, atmosphere.density, ("pressure", "virtual_temperature"),
         "air_known", short=True),
    Step("sigma", "σ", "", "Density ratio", ISA, atmosphere.density_ratio, ("density",), "density"),
    Step("density_altitude", "DA", "ft", "Density altitude", ISA, atmosphere.density_altitude, ("density",),
         "density"),
    Step("wind_used", "", "kt", "Wind used", "Strip, else day", links.wind_of,
         ("own_wind_speed", "own_wind_speed", "wind_speed")),
    Step("wind_from_used", "", "°", "Wind direction used", "Strip, else day", links.wind_of,
         ("own_wind_speed", "own_wind_from", "wind_from")),
    Step("wind_known", "", "", "Wind known", ARITHMETIC, links.wind_known_of,
         ("wind_used", "wind_from_used", "heading"), truth=True),
    Step("headwind", "", "kt", "Headwind (tailwind negative)", "Trigonometry", links.head_of,
         ("wind_used", "wind_from_used", "heading"), "wind_known", short=True),
    Step("crosswind", "", "kt", "Crosswind", "Trigonometry", links.cross_of,
         ("wind_used", "wind_from_used", "heading"), "headwind"),
    Step("wind", "Vw", "kt", "Headwind counted by the rule", RULE, speeds.credited_headwind,
         ("headwind", "headwind_credit", "tailwind_count"), "headwind"),
    Step("slope", "", "%", "Mean slope, uphill positive", "Rise over length", links.mean_slope,
         ("slope_given", "elevation_start", "elevation_end", "length")),
    Step("takeoff_slope", "", "%", "Slope used for the take-off", "Profile, else mean, else assumed uphill",
         links.adverse_uphill, ("slope", "assumed_slope", "profile_takeoff_slope"), short=True),
    Step("landing_slope", "", "%", "Slope used for the landing", "Profile, else mean, else assumed downhill",
         links.adverse_downhill, ("slope", "assumed_slope", "profile_landing_slope"), short=True),
    Step("climb_slope", "", "%", "Slope of the ground under the climb", "Profile, else that of the take-off",
         links.first_of, ("profile_climb_slope", "takeoff_slope")),
    Step("approach_slope", "", "%", "Slope of the ground under the approach", "Profile, else that of the landing",
         links.first_of, ("profile_approach_slope", "landing_slope")),
    Step("ground", "", "", "Ground: surface and condition", FRICTION, links.ground_row,
         ("surface", "condition", "day_condition"), lookup="name", short=True),
    Step("rolling", "μr", "", "Rolling friction coefficient", FRICTION, links.from_table,
         ("ground_rolling", "ground"), lookup="ground_rolling"),
    Step("braking", "μb", "", "Braking friction coefficient", FRICTION, links.from_table,
         ("ground_braking", "ground"), lookup="ground_braking"),
    Step("takeoff_surface_factor", "", "", "Published surface factor, take-off", RULE, links.from_table,
         ("ground_takeoff_factor", "ground"), lookup="ground_takeoff_factor"),
    Step("landing_surface_factor", "", "", "Published surface factor, landing", RULE, links.from_table,
         ("ground_landing_factor", "ground"), lookup="ground_landing_factor"),
    Step("obstacle_ahead", "", "", "Obstacle on the climb-out known", ARITHMETIC, links.obstacle_known_of,
         ("obstacle_height", "obstacle_distance"), truth=True),
    Step("ahead_whole", "", "", "Obstacle on the climb-out: both figures or none", ARITHMETIC, links.obstacle_whole_of,
         ("obstacle_height", "obstacle_distance"), truth=True),
    Step("behind_whole", "", "", "Obstacle on the approach: both figures or none", ARITHMETIC, links.obstacle_whole_of,
         ("approach_obstacle_height", "approach_obstacle_distance"), truth=True),
    Step("obstacle_behind", "", "", "Obstacle on the approach known", ARITHMETIC, links.obstacle_known_of,
         ("approach_obstacle_height", "approach_obstacle_distance"), truth=True),
)  # fmt: skip

TAKEOFF_KNOWN = (
    Step("takeoff_known", "", "", "Take-off can be assessed", ARITHMETIC, links.side_known_of,
         ("fault", "density", "headwind", "takeoff_slope", "rolling", "takeoff_surface_factor", "tora", "takeoff_set",
          "physics_counts", "corrections_count", "ahead_whole"),
         truth=True, implies=("density", "headwind", "takeoff_set")),
    Step("lift_off_tas", "", "kt", "Lift-off speed, TAS", ISA, speeds.true_airspeed, ("lift_off_eas", "sigma"),
         "takeoff_known"),
    Step("screen_tas", "", "kt", "Speed at 50 ft after take-off, TAS", ISA, speeds.true_airspeed,
         ("screen_eas", "sigma"), "takeoff_known"),
    Step("airborne_tas", "", "kt", "Mean speed from lift-off to 50 ft, TAS", ISA, speeds.true_airspeed,
         ("airborne_eas", "sigma"), "takeoff_known"),
    Step("run_wind", "", "kt", "Headwind counted for the take-off", "At most half of lift-off speed", links.counted_wind_of,
         ("wind", "lift_off_tas"), "takeoff_known"),
)  # fmt: skip

_BALANCE = ("density", "wing_area", "mass_takeoff", "rolling_drag", "ground_lift")

FIXED_PITCH_STEPS = (
    Step("start", "a0", "m/s²", "Acceleration at rest", POLAR, links.fixed_pitch_start,
         ("static_thrust", "engine_sigma", "mass_takeoff", "rolling", "takeoff_slope"), "takeoff_known", short=True),
    Step("square", "", "", "Acceleration per V², 1/m", POLAR, links.fixed_pitch_square,
         ("thrust_slope", *_BALANCE, "rolling"), "takeoff_known", short=True),
    Step("reference_start", "", "m/s²", "Acceleration at rest, level dry pavement", POLAR, links.fixed_pitch_level_start,
         ("static_thrust", "engine_sigma", "mass_takeoff", "reference_rolling"), "takeoff_known"),
    Step("reference_square", "", "", "Acceleration per V², level dry pavement, 1/m", POLAR, links.fixed_pitch_square,
         ("thrust_slope", *_BALANCE, "reference_rolling"), "takeoff_known"),
    Step("least_acceleration", "", "m/s²", "Least acceleration of the run", RUN,
         ground_run.least_speed_run_acceleration, ("start", "square", "run_wind", "lift_off_tas"), "takeoff_known",
         short=True),
    Step("first_acceleration", "", "m/s²", "Acceleration when the run begins", RUN, links.first_acceleration_of,
         ("start", "square", "run_wind"), "takeoff_known"),
    Step("reference_least", "", "m/s²", "Least acceleration, level dry pavement", RUN,
         ground_run.least_speed_run_acceleration, ("reference_start", "reference_square", "run_wind", "lift_off_tas"),
         "takeoff_known"),
    Step("lifts_off", "", "", "Lifts off", "Least acceleration 2 % of g", links.lifts_off_of,
         ("least_acceleration", "reference_least"), "takeoff_known", truth=True),
    Step("takeoff_roll", "", "m", "Take-off roll by physics", RUN, ground_run.speed_run,
         ("start", "square", "run_wind", "lift_off_tas"), "lifts_off", short=True),
    Step("reference_roll", "", "m", "Take-off roll, level dry pavement", RUN, ground_run.speed_run,
         ("reference_start", "reference_square", "run_wind", "lift_off_tas"), "lifts_off"),
    Step("airborne_thrust", "T", "N", "Thrust from lift-off to 50 ft", POLAR, thrust.fixed_pitch_thrust,
         ("static_thrust", "thrust_slope", "engine_sigma", "density", "airborne_tas"), "takeoff_known"),
    Step("climb_thrust", "T", "N", "Thrust in the climb", POLAR, thrust.fixed_pitch_thrust,
         ("static_thrust", "thrust_slope", "engine_sigma", "density", "screen_tas"), "takeoff_known"),
)  # fmt: skip

PRACTICE = "Flight-test practice: root of the temperature"
_PISTON_AIR = (
    Step("heat", "", "", "Heat factor of a piston engine", PRACTICE, links.heat_of, ("sigma", "air_temperature"),
         "density"),
    Step("engine_sigma", "\u03c3e", "", "Density ratio that a piston engine feels", PRACTICE, thrust.engine_sigma,
         ("sigma", "heat"), "density"),
)  # fmt: skip
_TURBINE_AIR = (
    Step("hot_sigma", "", "", "Density ratio over temperature ratio", "Common practice", links.hot_sigma_of,
         ("sigma", "air_temperature"), "density"),
)  # fmt: skip
# what an engine feels of the air, by its kind
ENGINE_AIR = {"normally aspirated": _PISTON_AIR, "turbo-normalised": _PISTON_AIR, "flat rated": _TURBINE_AIR}
_POWER_STEPS = {
    "normally aspirated": Step("power", "P", "kW", "Shaft power", "Gagg and Farrar", thrust.aspirated_power,
                               ("rated_power", "engine_sigma"), "takeoff_known"),
    "turbo-normalised": Step("power", "P", "kW", "Shaft power", "Gagg and Farrar above the critical altitude",
                             thrust.turbo_normalised_power,
                             ("rated_power", "engine_sigma", "limit_sigma", "heat"), "takeoff_known"),
    "flat rated": Step("power", "P", "kW", "Shaft power", "Flat rating, then density over temperature", thrust.flat_rated_power,
                       ("rated_power", "hot_sigma", "limit_sigma"), "takeoff_known"),
}  # fmt: skip

_DISK = ("thrust_acceleration", "lost", "square", "disk_speed")
_LEVEL_DISK = ("thrust_acceleration", "reference_lost", "reference_square", "disk_speed")

CONSTANT_SPEED_STEPS = (
    Step("disk_area", "A", "m²", "Propeller disk area", ARITHMETIC, links.disk_area_of, ("propeller_diameter",)),
    Step("useful_power", "", "kW", "Useful power", "Propulsive quality times shaft power", links.product,
         ("power", "propulsive_quality"), "takeoff_known"),
    Step("disk_speed", "w0", "kt", "Static induced speed", DISK, thrust.disk_speed,
         ("useful_power", "density", "disk_area"), "takeoff_known", short=True),
    Step("disk_thrust", "T0", "N", "Static thrust", DISK, thrust.static_disk_thrust,
         ("useful_power", "density", "disk_area"), "takeoff_known"),
    Step("thrust_acceleration", "", "m/s²", "Static thrust over mass", ARITHMETIC, links.share_of,
         ("disk_thrust", "mass_takeoff"), "takeoff_known"),
    Step("slow_root", "y", "", "Disk root at the start of the run", DISK, links.disk_root_of, ("run_wind", "disk_speed"),
         "takeoff_known", short=True),
    Step("fast_root", "y", "", "Disk root at lift-off", DISK, links.disk_root_of, ("lift_off_tas", "disk_speed"),
         "takeoff_known", short=True),
    Step("lost", "", "m/s²", "Lost at rest to friction and slope", RUN, ground_run.resistance,
         ("rolling", "takeoff_slope"), "takeoff_known"),
    Step("square", "", "", "Lost per V² to drag less lift, 1/m", RUN, ground_run.air_acceleration,
         (*_BALANCE, "rolling"), "takeoff_known"),
    Step("reference_lost", "", "m/s²", "Lost at rest, level dry pavement", RUN, links.level_resistance,
         ("reference_rolling",), "takeoff_known"),
    Step("reference_square", "", "", "Lost per V², level dry pavement, 1/m", RUN, ground_run.air_acceleration,
         (*_BALANCE, "reference_rolling"), "takeoff_known"),
    Step("least_acceleration", "", "m/s²", "Least acceleration of the run", RUN, ground_run.least_disk_acceleration,
         (*_DISK, "slow_root", "fast_root"), "takeoff_known", short=True),
    Step("first_acceleration", "", "m/s²", "Acceleration when the run begins", RUN, ground_run.disk_acceleration,
         (*_DISK, "slow_root"), "takeoff_known"),
    Step("reference_least", "", "m/s²", "Acceleration at lift-off, level dry pavement", RUN,
         ground_run.disk_acceleration, (*_LEVEL_DISK, "fast_root"), "takeoff_known"),
    Step("lifts_off", "", "", "Lifts off", "Least acceleration 2 % of g", links.lifts_off_of,
         ("least_acceleration", "reference_least"), "takeoff_known", truth=True),
    Step("takeoff_roll", "", "m", "Take-off roll by physics", RUN, ground_run.disk_run_between,
         (*_DISK, "run_wind", "slow_root", "fast_root"), "lifts_off", short=True),
    Step("reference_roll", "", "m", "Take-off roll, level dry pavement", RUN, ground_run.disk_run_between,
         (*_LEVEL_DISK, "run_wind", "slow_root", "fast_root"), "lifts_off"),
    Step("airborne_thrust", "T", "N", "Thrust from lift-off to 50 ft", DISK, links.disk_thrust_at,
         ("disk_thrust", "disk_speed", "airborne_tas"), "takeoff_known"),
    Step("climb_thrust", "T", "N", "Thrust in the climb", DISK, links.disk_thrust_at,
         ("disk_thrust", "disk_speed", "screen_tas"), "takeoff_known"),
)  # fmt: skip

TAKEOFF_DISTANCE_STEPS = (
    Step("excess", "", "%", "Excess thrust from lift-off to 50 ft", AIR, airborne.excess_gradient,
         ("airborne_thrust", "mass_takeoff", "airborne_drag", "airborne_lift"), "takeoff_known", short=True),
    Step("climb_gradient", "", "%", "Climb gradient in still air at the screen speed", AIR, airborne.excess_gradient,
         ("climb_thrust", "mass_takeoff", "climb_drag", "climb_lift"), "takeoff_known"),
    Step("climb_over_ground", "", "%", "Climb gradient over the ground", ARITHMETIC, airborne.ground_gradient,
         ("climb_gradient", "screen_tas", "run_wind"), "takeoff_known", short=True),
    Step("climbs", "", "", "Climbs away", "Excess of 0.5 % or more", links.climbs_of,
         ("excess", "climb_slope", "airborne_tas", "run_wind", "climb_over_ground"), "lifts_off", truth=True),
    Step("airborne_distance", "", "m", "Lift-off to 50 ft", AIR, airborne.screen_distance,
         ("kinetic_head", "pull_up_radius", "sigma", "airborne_tas", "excess", "climb_slope", "run_wind",
          "takeoff_technique"), "climbs"),
    Step("reference_airborne", "", "m", "Lift-off to 50 ft, level", AIR, links.level_screen_distance,
         ("kinetic_head", "pull_up_radius", "sigma", "airborne_tas", "excess", "run_wind", "takeoff_technique"), "climbs"),
    Step("physics_takeoff", "", "m", "Take-off to 50 ft by physics", ARITHMETIC, links.total,
         ("takeoff_roll", "airborne_distance"), "climbs"),
    Step("reference_takeoff", "", "m", "Take-off to 50 ft, level dry pavement", ARITHMETIC, links.total,
         ("reference_roll", "reference_airborne"), "climbs"),
    Step("takeoff_corrections", "", "", "Published corrections, take-off", RULE, links.takeoff_correction,
         ("takeoff_surface_factor", "upslope_takeoff", "takeoff_slope"), "takeoff_known"),
    Step("takeoff_distance", "TOD", "m", "Take-off distance to 50 ft, unfactored", "The longer governs",
         links.governing, ("physics_takeoff", "reference_takeoff", "takeoff_corrections", "physics_counts",
                           "corrections_count"), "climbs", short=True),
    Step("takeoff_required", "TODR", "m", "Take-off distance required", RULE, links.factored,
         ("takeoff_distance", "takeoff_factor", "takeoff_factor_to", "takeoff_factor_long", "takeoff_factor_from"),
         "takeoff_distance"),
    Step("takeoff_margin", "", "m", "Take-off margin", ARITHMETIC, links.difference, ("tora", "takeoff_required"),
         "takeoff_required", short=True),
    Step("takeoff_margin_share", "", "%", "Take-off margin, share of the length", ARITHMETIC, links.share_of,
         ("takeoff_margin", "tora"), "takeoff_required"),
    Step("over_obstacle", "", "ft", "Height over the obstacle on the climb-out, unfactored", "Geometry",
         links.obstacle_cleared_by,
         ("obstacle_ahead", "tora", "takeoff_distance", "obstacle_distance", "climb_over_ground", "obstacle_height",
          "climb_slope"), "takeoff_required"),
    Step("over_obstacle_factored", "", "ft", "Height over the obstacle on the climb-out, factored", "Geometry",
         links.obstacle_cleared_by,
         ("obstacle_ahead", "tora", "takeoff_required", "obstacle_distance", "climb_over_ground", "obstacle_height",
          "climb_slope"), "takeoff_required"),
)  # fmt: skip

LANDING_DISTANCE_STEPS = (
    Step("landing_known", "", "", "Landing can be assessed", ARITHMETIC, links.side_known_of,
         ("fault", "density", "headwind", "landing_slope", "braking", "landing_surface_factor", "lda", "landing_set",
          "physics_counts", "corrections_count", "behind_whole"),
         truth=True, implies=("density", "headwind", "landing_set")),
    Step("approach_tas", "", "kt", "Approach speed, TAS", ISA, speeds.true_airspeed, ("approach_eas", "sigma"),
         "landing_known"),
    Step("touchdown_tas", "", "kt", "Touchdown speed, TAS", ISA, speeds.true_airspeed, ("touchdown_eas", "sigma"),
         "landing_known"),
    Step("landing_wind", "", "kt", "Headwind counted for the landing", "At most half of touchdown speed",
         links.counted_wind_of, ("wind", "touchdown_tas"), "landing_known"),
    Step("approach_over_ground", "", "%", "Gradient of descent over the ground", ARITHMETIC, airborne.ground_gradient,
         ("approach_path", "approach_tas", "landing_wind"), "landing_known"),
    Step("landing_available", "", "m", "Landing length left by the obstacle on the approach", "Geometry",
         links.landing_length_of,
         ("lda", "obstacle_behind", "approach_obstacle_height", "approach_obstacle_distance", "approach_over_ground"),
         "landing_known"),
    Step("slowest_touchdown", "", "kt", "Touchdown speed at half the greatest landing mass, EAS", LIFT,
         links.slowest_touchdown_of, ("landing_lift", "max_landing_mass", "wing_area", "touchdown_factor"), "landing_set"),
    Step("descent_path", "", "%", "Gradient of descent towards the ground", "Geometry", airborne.descent_path,
         ("approach_path", "approach_slope", "landing_wind", "slowest_touchdown"), "landing_known"),
    Step("path_closes", "", "", "Approach can reach the strip", "Descent of 3 % or more", links.path_closes_of,
         ("descent_path",), "landing_known", truth=True),
    Step("landing_air", "", "m", "50 ft to touchdown", "Anderson 6.8", airborne.landing_air_distance,
         ("approach_tas", "touchdown_tas", "descent_path", "landing_wind", "landing_technique"),
         "path_closes"),
    Step("reference_air", "", "m", "50 ft to touchdown, level", "Anderson 6.8", airborne.landing_air_distance,
         ("approach_tas", "touchdown_tas", "approach_path", "landing_wind", "landing_technique"), "path_closes"),
    Step("free_roll", "", "m", "Roll before braking", ARITHMETIC, airborne.free_roll,
         ("touchdown_tas", "landing_wind", "free_roll_seconds"), "landing_known"),
    Step("braked_start", "", "m/s²", "Deceleration at zero airspeed", RUN, links.braked_start,
         ("braking", "braking_quality", "landing_slope"), "landing_known"),
    Step("braked_square", "", "", "Deceleration per V², 1/m", RUN, links.braked_square,
         ("density", "wing_area", "mass_landing", "braked_drag", "ground_lift", "braking", "braking_quality"),
         "landing_known"),
    Step("reference_braked_start", "", "m/s²", "Deceleration at zero airspeed, level dry pavement", RUN,
         links.level_braked_start, ("reference_braking", "braking_quality"), "landing_known"),
    Step("reference_braked_square", "", "", "Deceleration per V², level dry pavement, 1/m", RUN, links.braked_square,
         ("density", "wing_area", "mass_landing", "braked_drag", "ground_lift", "reference_braking",
          "braking_quality"), "landing_known"),
    Step("least_deceleration", "", "m/s²", "Least deceleration of the landing roll", RUN,
         ground_run.least_speed_run_acceleration, ("braked_start", "braked_square", "landing_wind", "touchdown_tas"),
         "landing_known"),
    Step("stops", "", "", "Stops", "Least deceleration 2 % of g", links.stops_of,
         ("least_deceleration", "path_closes"), "landing_known", truth=True),
    Step("braked_roll", "", "m", "Braked roll", RUN, ground_run.speed_run,
         ("braked_start", "braked_square", "landing_wind", "touchdown_tas"), "stops"),
    Step("reference_braked_roll", "", "m", "Braked roll, level dry pavement", RUN, ground_run.speed_run,
         ("reference_braked_start", "reference_braked_square", "landing_wind", "touchdown_tas"), "stops"),
    Step("landing_roll", "", "m", "Landing roll by physics", ARITHMETIC, links.total, ("free_roll", "braked_roll"),
         "stops"),
    Step("physics_landing", "", "m", "Landing from 50 ft by physics", ARITHMETIC, links.three_summed,
         ("landing_air", "free_roll", "braked_roll"), "stops"),
    Step("reference_landing", "", "m", "Landing from 50 ft, level dry pavement", ARITHMETIC, links.three_summed,
         ("reference_air", "free_roll", "reference_braked_roll"), "stops"),
    Step("landing_corrections", "", "", "Published corrections, landing", RULE, links.landing_correction,
         ("landing_surface_factor", "downslope_landing", "landing_slope"), "landing_known"),
    Step("landing_distance", "LD", "m", "Landing distance from 50 ft, unfactored", "The longer governs",
         links.governing, ("physics_landing", "reference_landing", "landing_corrections", "physics_counts",
                           "corrections_count"), "stops", short=True),
    Step("landing_required", "LDR", "m", "Landing distance required", RULE, links.factored,
         ("landing_distance", "landing_factor", "landing_factor_to", "landing_factor_long", "landing_factor_from"),
         "landing_distance"),
    Step("landing_margin", "", "m", "Landing margin", ARITHMETIC, links.difference,
         ("landing_available", "landing_required"), "landing_required", short=True),
    Step("landing_margin_share", "", "%", "Landing margin, share of the length", ARITHMETIC, links.share_of,
         ("landing_margin", "lda"), "landing_required"),
)  # fmt: skip


@cache
def build_chain(propeller: str, power: str = "normally aspirated", tables: frozenset[str] = frozenset(),
                corrections: frozenset[str] = frozenset()) -> Chain:  # fmt: skip
    """The chain for a kind of propeller and of engine power.

    ``tables``: the sides, of takeoff, landing and climb, for which the card has tables of the manual; ``corrections``:
    those, of takeoff and landing, for which it has the manual's own corrections.
    Raises KeyError for a kind that is not in PROPELLERS or POWERS.

    >>> len(build_chain("fixed pitch").steps) > 80
    True
    """
    fixed = {"fixed pitch": True, "constant speed": False}[propeller]
    shaft = None if fixed else _POWER_STEPS[power]
    limited = () if fixed or power == "normally aspirated" else (inputs.POWER_LIMIT,)
    given = (
        *inputs.STRIP, *inputs.DAY, *inputs.CARD, *(inputs.FIXED_PITCH if fixed else inputs.CONSTANT_SPEED), *limited,
        *(item for side in SIDES if side in tables for item in inputs.table_inputs(side)),
        *(inputs.REACH[side] for side in ("takeoff", "landing") if side not in tables),
        *(item for side in SIDES if side in corrections for item in inputs.manual_inputs(side)), *inputs.RULES,
    )  # fmt: skip
    steps = (
        *AIRCRAFT_STEPS, *AIR_STEPS, *_takeoff_steps(shaft, ENGINE_AIR[power], tables, "takeoff" in corrections),
        *TAKEOFF_STEPS, *_landing_steps("landing" in tables, "landing" in corrections), *LANDING_STEPS,
    )  # fmt: skip
    return Chain(given, steps)


def _takeoff_steps(shaft: Step | None, air: Steps, tables: Collection[str], manual: bool) -> Steps:
    """``shaft``: the step of shaft power, None for a fixed-pitch propeller; ``air``: what the engine feels of the air."""
    known: Steps = TAKEOFF_KNOWN
    engine: Steps = FIXED_PITCH_STEPS if shaft is None else (shaft, *CONSTANT_SPEED_STEPS)
    engine = (*air, *engine)
    distance: Steps = TAKEOFF_DISTANCE_STEPS
    beyond = book_steps.takeoff_table_steps(shaft, air) if "takeoff" in tables else _beyond_reach("takeoff", "takeoff_known")
    if tables:
        known = _as_column(known, "takeoff_known")
    if "climb" in tables:
        beyond = tuple(replace(step, key="tables_beyond", short=False) if step.key == "takeoff_beyond" else step
                       for step in beyond)  # fmt: skip
        distance = _with(distance, "climb_over_ground", {"climb_gradient": "carried_climb"},
                         before=(*book_steps.climb_table_steps(shaft, air), book_steps.BEYOND_WITH_CLIMB))  # fmt: skip
    if manual:
        known = (*known, *book_steps.manual_takeoff_left())
        wind = {"run_wind": "takeoff_wind_left", "slow_root": "manual_root"}
        engine = _with(engine, "reference_roll", wind, before=() if shaft is None else (book_steps.MANUAL_ROOT,))
        distance = _with(distance, "reference_airborne", wind)
        ratios = () if "takeoff" in tables else book_steps.no_tables("takeoff", "takeoff_known")
        distance = _with(distance, "takeoff_distance", {"physics_takeoff": "manual_takeoff"}, links.governing_manual,
                         ("takeoff_carry", "takeoff_wind_factor"),
                         (*ratios, *book_steps.manual_takeoff_steps(shaft is None)))  # fmt: skip
    elif "takeoff" in tables:
        distance = _with(distance, "takeoff_distance", {}, links.governing_carried, ("takeoff_carry",))
    return (*known, *engine, *beyond, *distance)


def _landing_steps(tables: bool, manual: bool) -> Steps:
    beyond = book_steps.landing_table_steps() if tables else _beyond_reach("landing", "landing_known")
    steps = _with(LANDING_DISTANCE_STEPS, "landing_corrections", before=beyond)
    if tables:
        steps = _as_column(steps, "landing_known")
    if manual:
        steps = _with(steps, "landing_air", before=book_steps.manual_landing_left())
        for key in ("reference_air", "reference_braked_roll", "reference_landing"):
            steps = _with(steps, key, {"landing_wind": "landing_wind_left", "free_roll": "manual_free_roll"})
        ratios = () if tables else book_steps.no_tables("landing", "landing_known")
        return _with(steps, "landing_distance", {"physics_landing": "manual_landing"}, links.governing_manual,
                     ("landing_carry", "landing_wind_factor"),
                     (*ratios, *book_steps.manual_landing_steps()))  # fmt: skip
    return _with(steps, "landing_distance", {}, links.governing_carried, ("landing_carry",)) if tables else steps


def _as_column(steps: Steps, key: str) -> Steps:
    """The steps with one a column of long lists too: so many more formulas read it that it spares more than it takes."""
    return tuple(replace(step, short=True) if step.key == key else step for step in steps)


def _beyond_reach(side: str, guard: str) -> Steps:
    """Whether the air is thinner than any of the card's single figures."""
    word = inputs.SIDE_WORDS[side]
    return (
        Step(f"{side}_beyond_reach", "", "ft", f"{word}: density altitude beyond the book (within: negative)",
             book_steps.EDGE, links.over_reach, ("density_altitude", f"{side}_reach"), guard),
        Step(f"{side}_beyond", "", "", f"{word}: beyond the book", book_steps.EDGE, links.beyond_reach_of,
             (f"{side}_beyond_reach",), guard, truth=True),
    )  # fmt: skip


def _with(steps: Steps, key: str, instead: Mapping[str, str] | None = None, function: Callable[..., Number] | None = None,
          further: tuple[str, ...] = (), before: Steps = ()) -> Steps:  # fmt: skip
    """The steps with one changed: other inputs ``instead`` of some, another function, ``further`` inputs; and with more
    of them ``before`` it."""
    place = next(i for i, step in enumerate(steps) if step.key == key)
    step = steps[place]
    read = (*((instead or {}).get(name, name) for name in step.inputs), *further)
    changed = replace(step, function=function or step.function, inputs=read)
    return (*steps[:place], *before, changed, *steps[place + 1 :])
