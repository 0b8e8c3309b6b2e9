"""Where the trial loop puts what it measured: places in its flat arrays, and its small integers.

`metrics` (METRIC_SIZE,), `first` (units + 1, LIMITS, 2): time and stored line momentum when unit i first met a limit,
inf where it never did; the last row belongs to the law. `trace` rows: TRACE_SIZE columns, then the units' states.
"""

# how a trial ended
RAN = 0
FELL_OUTWARD = 1
FELL_INWARD = 2
TOUCHED_DOWN = 3

# metrics
PEAK_LEAN = 0        # rad
PEAK_TORQUE = 1      # N·m about the line
SATURATED = 2        # s
PEAK_MOMENTUM = 3    # N·m·s about the line
TORQUE_SQUARED = 4   # N²·m²·s: ∫T²dt
PEAK_CURRENT = 5     # A
PEAK_POWER = 6       # W, from the bus
END_TIME = 7         # s
END_LEAN = 8         # rad
END_MOMENTUM = 9     # N·m·s
SAMPLES = 10         # samples taken, the start included
PEAK_BUS = 11        # V, highest bus voltage
DEEPEST_SAG = 12     # V, most by which the bus stood below the open-circuit voltage
PEAK_SUPPLY = 13     # A, from the supply
PEAK_RATE = 14       # rad/s, largest lean rate
FEET = 15            # foot a, then foot b, each with the four below; feet that are looked at together: the first
METRIC_SIZE = 23

# of one foot
LEAST_LOAD = 0       # N, least normal force
GRIP = 1             # largest |tangential| / normal while it carries load
LIFT_OFF = 2         # s when the normal force first reached zero; inf: never
SLIP = 3             # s when |tangential| / normal was first above the feet's friction; inf: never
FOOT_SIZE = 4

# limits
NO_LIMIT = 0
TORQUE = 1           # stated torque of the unit, or the law's own limit
CURRENT = 2          # motor or driver current
VOLTAGE = 3          # back-EMF leaves too little voltage
SPEED = 4            # wheel speed limit
RATE = 5             # gimbal rate limit
DRIVE = 6            # gimbal drive's strength
STOP = 7             # gimbal stop
OUTPUT = 8           # the law's limit of its line command (last row)
SUPPLY = 9           # the supply gives no more current
OVERVOLTAGE = 10     # the bus takes no more of what braking gives back
FORCED = 11          # back-EMF above the bus voltage: the wheel is braked, whatever is asked
UNREGULATED = 12     # back-EMF above bus voltage and R i_max: the current is out of the driver's control
SENSOR = 13          # gyro or accelerometer beyond its range (last row)
LIMITS = 14

# columns of a recorded sample
TIME = 0
LEAN = 1
LEAN_RATE = 2
LINE_TORQUE = 3
LINE_TORQUE_LIMIT = 4
LINE_MOMENTUM = 5
COMMAND = 6
DISTURBANCE = 7
TRACE_SIZE = 8

# a torque about the line over time: START <= t < END: LEVEL + SLOPE (t - START) + SWING sin(TURN (t - START)); beside it
# what is added meanwhile to J, G_s and G_c, each a level and a slope, and how high a force acts that makes the torque
START = 0
END = 1
LEVEL = 2
SLOPE = 3
SWING = 4
TURN = 5
OF_INERTIA = 6       # kg·m², next column: per s
OF_STIFF_SIN = 8     # N·m
OF_STIFF_COS = 10    # N·m
LEVER = 12           # m above the line where a force acts; inf: a couple on the trunk, no force
TORQUE_SIZE = 13

# a sudden change
AT = 0               # s
KICK = 1             # N·m·s of angular impulse about the line
SHIFT = 2            # m of the centre of mass along w
HEIGHT = 3           # m: LEVER of the kick
JUMP_SIZE = 4

# the body changes (a load is put on, a foot sinks): what is added to each of its parameters
# AT = 0 as above
AT_REST = 1          # kg·m² that come without speed: what moves shares its momentum with them
CHANGED = 2          # from here on BODY_SIZE columns

# a spell of trouble: START <= t < END
WHAT = 2             # one of the three below
VALUE = 3
SUPPLY_LEFT = 0      # VALUE: share of the supply's voltage that is left
MISSED = 1           # VALUE: probability that a sample is not taken
LATE = 2             # VALUE: s, largest extra latency of a command
SPELL_SIZE = 4
