"""Where each parameter of the equations of motion stands in the kernel's flat arrays (the only contract with `plant`).

State vector X: [θ, θ̇, then two entries per unit in file order]; wheel: (Ω, motor current i); gimballed: (γ, γ̇).
θ is measured from the pose of the stance (not from the balanced lean).
"""

# body parameters
INERTIA = 0        # kg·m²: about the line, wheels locked, without the gimballed rotors' own rotational inertia
STIFF_SIN = 1      # N·m: G_s = m g h cos β
STIFF_COS = 2      # N·m: G_c = m g δ cos β
BODY_DRAG = 3      # N·m·s/rad
MASS = 4           # kg
HEIGHT = 5         # m
OFFSET = 6         # m
GRAVITY = 7        # m/s²: g cos β, the part square to the line
FOOT_RADIUS = 8    # m
BALANCED = 9       # rad: θ_b
TOUCH_DOWN = 10    # rad: inward θ of touch-down as a positive number; inf where nothing catches it
FELL = 11          # rad: |lean| beyond which it fell
PRODUCT_U = 12     # kg·m²: u·(I_com e) at θ = 0, without what varies with the gimbals' angles; only the feet feel it
PRODUCT_W = 13     # kg·m²: w·(I_com e)
COM_ALONG = 14     # m: the centre of mass from foot a, along e
LENGTH = 15        # m: from foot a to foot b; 0: nothing is known of the feet, they are looked at together
GRAVITY_ALONG = 16 # m/s²: the part of gravity along e (negative where the line rises)
FRICTION = 17      # coefficient of the feet on the ground
LANDS_OUTWARD = 18 # rad: outward θ at which a foot lifted on that side lands; inf where nothing catches it
GROUND_RISES = 19  # rad: how the ground under the feet rises toward w
BODY_SIZE = 20

# unit parameters, common
KIND = 0           # one of the kinds below
WHEEL = 0
GIMBAL_TORQUE = 1  # gimballed, torque motor: input is the gimbal torque (N·m per gimbal)
GIMBAL_SERVO = 2   # gimballed, position servo: input is the commanded gimbal rate (rad/s)

# reaction wheel
COUPLING = 1       # kg·m²: α (I + s N J_r)
OWN_INERTIA = 2    # kg·m²: I + N² J_r
AXIS_SHARE = 3     # α = a·e
COULOMB = 4        # N·m
VISCOUS = 5        # N·m·s/rad
TORQUE_PER_AMP = 6 # N·m/A at the wheel: η s N K_t  (sign s: same or reversed sense)
BACK_EMF = 7       # V·s/rad of wheel speed: s N K_e
RESISTANCE = 8     # ohm, line
BUS_VOLTAGE = 9    # V
CURRENT_LIMIT = 10 # A
CURRENT_LAG = 11   # rad/s: bandwidth of the current loop
SPEED_LIMIT = 12   # rad/s, relative to the body
TORQUE_LIMIT = 13  # N·m at the wheel
STICTION = 14      # N·m: what breaks a standing wheel loose; 0: no more than its Coulomb drag
BEHIND_PLAY = 15   # kg·m²: turns with the wheel behind the play of its gear, not part of OWN_INERTIA
COUPLING_U = 16    # kg·m²: (a·u)(I + s N J_r) at θ = 0
COUPLING_W = 17    # kg·m²: (a·w)(I + s N J_r)
PLAY = 18          # rad at the wheel, from flank to flank; 0: motor and wheel turn as one
TOOTH_STIFFNESS = 19  # N·m/rad at the wheel
TOOTH_DAMPING = 20    # N·m·s/rad
ROTOR_INERTIA = 21    # kg·m²: N² J_r, the part of OWN_INERTIA on the motor's side of the play
ROTOR_PART = 22       # s N J_r/(I + s N J_r): the part of COUPLING on the motor's side
ROLE = 23          # one of the roles below

# roles of a row of kind WHEEL; all but the first are not stabilisers but stand behind them (`simulate.setup.kernel_units`)
MOTOR = 0          # a wheel with its motor; states (Ω, i)
TOOTHED = 1        # a wheel behind a gear with play; states (Ω, gap: how far its motor is ahead)
BUS = 2            # the supply; states (energy above the open-circuit voltage in J, energy burnt in the brake resistor)
LEGS = 3           # legs that give; states (rate of their lean, their lean from the pose of the stance)

# a toothed wheel beside what a wheel has (its row has no motor: 0 at TORQUE_PER_AMP)
PARTNER = 12       # row of its motor

# the supply: COUPLING 0, OWN_INERTIA 1, so that the equations of motion pass it by; BUS_VOLTAGE is its open-circuit voltage
SOURCE_POWER = 10  # W, the most it gives at its present voltage (`supply.most_power`); inf: no limit
SOURCE_OHMS = 12
SOURCE_AMPS = 13   # inf: no limit
TAKES_BACK = 18    # 1: takes current back
CAPACITANCE = 19   # F
OVERVOLTAGE = 20   # V: the drives stop pumping; inf: they never do
BRAKE_OHMS = 21    # 0: none

# legs that give (`kernel.legs`); COUPLING 0, OWN_INERTIA 1 as the supply has
HINGE = 10         # m above the line
HINGE_STIFFNESS = 12  # N·m/rad
HINGE_DAMPING = 13    # N·m·s/rad
HINGE_MODE = 18       # rad/s: the fastest rate of trunk and legs against each other, for the sub-step

# gimballed flywheel; `COUNT` 1: single, 2: mirrored pair (one coordinate γ, second gimbal at -γ with -H)
E_S0 = 1           # e·s₀
E_GXS0 = 2         # e·(g × s₀)
KAPPA = 3          # e·g
MOMENTUM = 4       # N·m·s: H per rotor
TRANSVERSE = 5     # kg·m²: I_t per rotor
SPIN_HELD = 6      # kg·m²: adds this × σ²: I_s where the spin *speed* is held; a frame's moment about s less across
GIMBAL_INERTIA = 7 # kg·m²: I_γ per gimbal, rotor's I_t included
GIMBAL_DAMPING = 8
GIMBAL_SPRING = 9
ANGLE_STOP = 10    # rad
RATE_LIMIT = 11    # rad/s
DRIVE_TORQUE = 12  # N·m per gimbal
RATE_LAG = 13      # rad/s: bandwidth of the servo's rate loop
COUNT = 14
SPIN = 15          # kg·m²: I_s per rotor
S0_U = 16          # u·s₀ at θ = 0, and so on
S0_W = 17
GXS0_U = 18        # u·(g × s₀)
GXS0_W = 19
AXIS_U = 20        # u·g
AXIS_W = 21
RESOLUTION = 22    # rad: step of a servo's commanded angle
DEAD_BAND = 23     # rad: a servo rests while its commanded angle is nearer than this
UNIT_SIZE = 24
