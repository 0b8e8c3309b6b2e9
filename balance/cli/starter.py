"""The two files `balance new` writes. They run as they are; the comments say what to put in their place."""

from __future__ import annotations

MACHINE = """\
# NAME: a machine for `balance`. Every value carries its unit.
# `balance schema machine` prints a JSON Schema that editors use to complete and check this file.
format: 1
machine: NAME

# The quickest start: the body by three numbers about its contact line (the line through the two feet it
# stands on).
# The wheel's mass belongs in all three; its own spin inertia does not.
# Later, replace `lumped` by `body`, `legs`, `feet` and `stances`: the numbers are then worked out for every
# pair of feet.
lumped:
  mass: 4.2 kg
  height: 310 mm            # of the centre of mass above the line
  inertia: 0.47 kg*m^2      # about the line, with the wheel free to spin
  offset: 0 mm              # of the centre of mass from above the line, positive outward
  drag: 0 N*m*s/rad         # of bench bearings, if it hangs in any

stabilisers:
  wheel:
    kind: reaction wheel    # or: scissored pair, gimballed flywheel
    axis: [1, 0, 0]         # along the line: for a lumped body the line is x
    at: [0 mm, 0 mm, 0 mm]
    rotor: {spin: 5.5e-3 kg*m^2}
    motor: drive            # a name under `motors`
    speed_limit: 3500 rpm
    drag: {coulomb: 4 mN*m, viscous: 2e-5 N*m*s/rad}

motors:
  drive:
    torque_constant: 55 mN*m/A
    resistance: 0.25 ohm
    peak_current: 24 A
    continuous_current: 8 A
    rotor_inertia: 120 g*cm^2
    bandwidth: 300 Hz       # of the driver's current loop

supply: {voltage: 22.2 V, resistance: 50 mohm, peak_current: 40 A, regenerates: true}

# How far the machine as built may differ, either way (0.05: 5 %); the margins must bear all of it at once.
tolerances: {mass: 0.03, height: 5 mm, inertia: 0.05, torque_constant: 0.08}
"""

DESIGN = """\
# NAME: what the loop, the law and the trials are, and what must come out.
# Run:  balance check designs/NAME.yaml
format: 1
design: NAME
machine: ../plants/NAME.yaml     # from this file's folder
stance: every                    # or the name of one stance

loop: {rate: 500 Hz, latency: 2 ms}   # latency: from the sampling instant to the torque command

control:
  law: lqr                       # or: pid
  # The largest excursions you would accept in normal running; momentum and torque are about the line.
  allow: {lean: 3 deg, lean_rate: 30 deg/s, momentum: 0.6 N*m*s, torque: 1.2 N*m}

# What is left out here is not judged.
require:
  phase_margin: 30 deg
  gain_margin_lower: 0.7         # stability is lost no sooner than at this factor of the gain
  gain_margin_upper: 2
  delay_margin: 5 ms
  peak_sensitivity: 2
  worst_disk_margin: 0.4         # within the machine's tolerances
  momentum_used: 0.9             # share of what the wheel can store, in any trial

# Each trial is run outward and inward unless it says `toward:`.
trials:
  shove: {push: {impulse: 0.3 N*s, height: 310 mm}}        # height above the contact line
  gust: {torque: {step: 0.2 N*m, from: 0.1 s, for: 0.3 s}}
  late-start: {start: {lean: 1 deg}}
"""
