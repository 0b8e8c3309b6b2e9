"""Where everything of 64 trials that run side by side stands: `X[row * LANES + lane]`, one flat array per thread.

One row holds one number of all lanes, so that the innermost loops run over lanes and the compiler makes vectors of them.
Rows are constants: only then does the compiler see that no two of them overlap.
"""

from __future__ import annotations

LANES = 64
"""Eight vectors of eight doubles: enough independent work to hide the latency of each, few enough to stay in the cache."""

# what moves
THETA = 0
RATE = 1
SPEED = 2            # wheel a; b: WHEEL_STATES further
CURRENT = 3
WHEEL_STATES = 2

# how it goes
ALIVE = 6            # 1; 0: the trial has ended, its state stands still
END = 7              # `outcome`
END_TIME = 8
CLIPPED = 9          # 1: the law's own limits were met at this sample
SATURATED_BEFORE = 10
PEAK_LEAN = 11
PEAK_RATE = 12
PEAK_TORQUE = 13
PEAK_MOMENTUM = 14
PEAK_CURRENT = 15
PEAK_POWER = 16
SATURATED = 17
TORQUE_SQUARED = 18
END_LEAN = 19
END_MOMENTUM = 20
SETTLED = 21         # s, by `settle`; inf: never
EARLIER = 22         # N·m·s stored at the instant from which a growth of the momentum is told
RESULTS = 23         # rows below it are what a trial answers

# the machine and what happens to it
MACHINE = 24
STIFFNESS = 24       # N·m: the size of (G_s, G_c)
UPRIGHT = 25         # rad: θ at which gravity has no lever
BODY_DRAG = 26
PER_MASS = 27        # 1/(kg·m²), wheels eliminated
BALANCED = 28
TOUCH_DOWN = 29
LANDS_OUTWARD = 30
FELL = 31
GRAVITY = 32
SCALE = 33           # of every torque and blow of the trial
SEED = 34            # whole number below 2^53
TARGET = 35          # rad: where the lean settles
MOTOR = 36           # wheel a; b: MOTOR_SIZE further
MOTOR_SIZE = 18
MACHINE_END = 72

# of one motor
COUPLING = 0
PER_OWN = 1
SHARE = 2            # coupling/own
MOMENT = 3           # coupling²/own
COULOMB = 4
VISCOUS = 5
TORQUE_LIMIT = 6
SPEED_LIMIT = 7
SPEED_GAIN = 8       # kg·m²/s of the speed limiter
PER_TORQUE = 9       # A/(N·m)
PER_AMP = 10
EMF = 11
OHMS = 12
PER_OHM = 13
VOLTS = 14
AMPS = 15
LAG = 16

# the law
MEASURED = 72        # at most MOST_MEASURED
MOST_MEASURED = 8
MEMORY = 80          # at most MOST_MEMORY
MOST_MEMORY = 8
NEXT_MEMORY = 88
LINE = 96            # v, then its limited value
ACCELERATION = 97
ASKED = 98           # wheel a, wheel b: inputs that act now
NOISE = 100          # of the accelerometer along w and u, m/s²; zeros without
SHOWN = 102          # what the sensor at hand shows
INPUT = 104          # wheel a, wheel b: inputs computed at this sample
QUEUE = 106          # two rows per command that is on its way, newest first
