"""The starter robot file that `gaitlab new` writes."""

from __future__ import annotations

from gaitlab.errors import InputError, must

LEGS_MIN, LEGS_MAX = 3, 15
PUMP_PER_LEG_L_MIN = 1.8  # keeps the ring near 45 kPa, as `gaitlab ring` on the starter shows; chosen by us
TRUNK_G_PER_MM = 0.4  # a printed trunk with the ring block in it; chosen by us
PITCH_MM = (
    34  # distance between neighbouring legs: their length, so that a full bend just misses the next leg; chosen by us
)


def starter_text(name: str, legs: int) -> str:
    """A commented robot file: `legs` bending bellows in a row on a ring of as many stages.

    Raises InputError for an even number of legs (their ring would latch) or one out of range.
    """
    if legs % 2 == 0 or not LEGS_MIN <= legs <= LEGS_MAX:
        rule = f"an odd number from {LEGS_MIN} to {LEGS_MAX}, because an even ring latches"
        raise InputError(must("legs", rule, legs))
    rows = "".join(_leg(i, legs) for i in range(legs))
    trunk_mm = PITCH_MM * (legs - 1) + 24
    return _TEMPLATE.format(
        name=name,
        legs=legs,
        pump_L_min=round(PUMP_PER_LEG_L_MIN * legs, 1),
        trunk_mm=trunk_mm,
        trunk_g=round(TRUNK_G_PER_MM * trunk_mm, 1),
        rows=rows,
    )


def _leg(index: int, legs: int) -> str:
    at_mm = PITCH_MM * (legs - 1) / 2 - PITCH_MM * index
    return _LEG.format(name=f"leg{index + 1}", at_mm=f"{at_mm:g}")


_LEG = """
[[body.leg]]
name = "{name}"
block = "trunk"
at_mm = [{at_mm}, 0, -6]
foot = "pad"
bellows = "leg"
"""

_TEMPLATE = """\
# Robot file of gaitlab: one robot, its pneumatic ring and its ground.
# Every figure here is invented: replace it by what you measured. The unit is in the key. Frame: x forward, y left, z up.
# Pressures are gauge vacuum, positive numbers, unless the key says otherwise.
# Cautions: vacuum vessels implode, hoses whip, pumps run hot, uncured silicone and solvents harm. Figures that come out
# of this file are estimates; local codes and licensed practice have the last word.

name = "{name}"
notes = ["starter file, {legs} legs in a row"]

[ambient]
pressure_kPa = 101.325         # absolute; or altitude_m = 500 in its place
temperature_C = 20

[ground]
slope_deg = 0                  # positive: uphill forward
friction_factor = 1.0          # times each foot's friction

# One of: pump (below) | table_vacuum_kPa + table_flow_L_min + buffer_mL | fixed_vacuum_kPa | dead_mL + schedule_s + schedule_mL
[supply]
dead_end_vacuum_kPa = 60
free_flow_L_min = {pump_L_min}
law = "mass"                   # mass or volume: which flow falls in a straight line with vacuum
buffer_mL = 40

[ring]
stages = {legs}                     # odd, or the ring latches
port_mL = 0.6                  # air in port, channel and tube end of one output
control_mL = 0.05              # air in the control chamber of the next valve

# One of: square_mm | width_mm + height_mm | bore_mm (each with length_mm), sonic_conductance_dm3_s_bar + critical_ratio,
# or a bench reading: dead_end_kPa + reading_kPa + free_flow_L_min + law
[ring.resistor]
square_mm = 0.3
length_mm = 10

[ring.valve]
threshold_kPa = 18             # control vacuum at which it starts to open
opening_span_kPa = 6           # and is fully open this much later
sealing = 0.15                 # kPa of threshold per kPa of flow-side vacuum
leak_fraction = 1e-4
hysteresis_kPa = 2
travel_ms = 8
open = {{ square_mm = 0.45, length_mm = 6 }}   # vents about twice as fast as the resistor evacuates

# As-built parts of one stage:
# [[ring.stage]]
# number = 2
# resistor = {{ square_mm = 0.32, length_mm = 10 }}

[tubes]
bore_mm = 2
manifold_mm = [0, 0, 12]       # where the ring block sits on the trunk
slack = 1.3                    # tube length over straight distance
extra_mm = 15

[bellows.leg]
action = "bend"                # or contract, with measured_stroke
length_mm = 32
mass_g = 5.5
segments = 4
rest_mL = 2.4
swept_mL = 1.4
diameter_mm = 12
axial_stiffness_N_m = 400      # of the whole bellows; it decides the sign of the travel: measure it
bend_damping_ms = 40
axial_damping_ms = 10
solid_bend_deg = 85            # where the convolutions touch
measured_bend = {{ free_bend_deg = 60, at_vacuum_kPa = 50, bend_stiffness_N_m_rad = 0.014 }}

[foot.pad]
radius_mm = 4
friction = 0.6
mass_g = 0.5
spacing_mm = 30                # two spheres across keep a row of legs from rolling
spacing_axis = "across"

[wiring]
inlets_per_output_max = 1      # inlets that one output may feed
every_output_used = true
# tied = [["leg1", "leg3"]]    # always on the same output
# fixed = {{ leg2 = 4 }}         # decided beforehand

[[body.block]]
name = "trunk"
size_mm = [{trunk_mm}, 30, 12]
mass_g = {trunk_g}
{rows}
[[body.payload]]
mass_g = 8
block = "trunk"
at_mm = [0, 0, 10]

# How far a number may be off, for `gaitlab spread`:
# [[tolerance]]
# key = "ring.resistor.square_mm"
# plus_minus = 0.05
# each = "stage"
"""
