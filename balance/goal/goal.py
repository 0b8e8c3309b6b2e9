"""The design file as records: loop, law, estimator, requirements (trials are in `goal.trials`)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from balance.files.fields import Shape, choice, flag, number, place, quantity, section, table, text, variant
from balance.goal.sizing import Sizing
from balance.goal.trials import Trial

Marks = Mapping[str, tuple[int, int]]


@dataclass(frozen=True)
class Loop:
    """The sampled loop. `latency` runs from the sampling instant to the torque command.

    `jitter` makes each command later still, by up to that much, in every trial.  Margins are those of `latency`; their
    worst case is searched over latency ± `latency_tolerance` and the jitter.
    `command_bits`: the input of each unit is rounded to one of 2^bits levels over its whole range, ± its limit.
    """

    rate: float = quantity("frequency", above=0)
    latency: float = quantity("time", least=0, default=0.0)
    latency_tolerance: float = quantity("time", least=0, default=0.0, says="either way")
    jitter: float = quantity("time", least=0, default=0.0, says="largest extra latency of a command")
    command_bits: int | None = place(Shape("whole", least=2, most=32, says="bits of a unit's command"), None)


@dataclass(frozen=True)
class Allow:
    """The largest acceptable excursions (Bryson's rule). Momentum and torque are about the line."""

    lean: float = quantity("angle", above=0)
    lean_rate: float = quantity("angular speed", above=0)
    momentum: float = quantity("momentum", above=0)
    torque: float | None = quantity("torque", above=0, default=None, says="wheels and torque motors")
    gimbal_rate: float | None = quantity("angular speed", above=0, default=None, says="position servos")


@dataclass(frozen=True)
class Weights:
    """Explicit diagonal weights in SI on the model's states and input: Σ(xᵀQx + uᵀRu)."""

    states: tuple[float, ...] = place(Shape("list", items=Shape("number", least=0)))
    input: float = number(above=0)


@dataclass(frozen=True)
class LqrControl:
    """`law: lqr` with either `allow` or `weights`."""

    allow: Allow | None = section(Allow, default=None)
    weights: Weights | None = section(Weights, default=None)
    trim_time: float | None = quantity("time", above=0, default=None,
                                       says="feed back the integral of stored momentum: trims it to zero in about that time")
    retune: str = choice(("as given", "robust"), default="as given",
                         says="robust: the weights' proportions that keep the largest disk margin in the worst case")
    one_gain_set: bool = flag(default=False, says="the same gains on every stance")


@dataclass(frozen=True)
class PidGains:
    """A user's own gains (SI, parallel form, per second): judged instead of computed."""

    kp: float = number()
    ki: float = number()
    kd: float = number()
    momentum: float = number(default=0.0, says="lean asked for per stored momentum, rad per N·m·s")


@dataclass(frozen=True)
class PidControl:
    """`law: pid`: computed for the largest allowed peak sensitivity, or the user's own `gains`."""

    peak_sensitivity: float = number(above=1, default=1.7, says="largest Ms the computed gains may show")
    derivative_filter: float | None = quantity("frequency", above=0, default=None)
    desaturation_time: float | None = quantity(
        "time", above=0, default=None, says="in which stored momentum is brought back")
    gains: PidGains | None = section(PidGains, default=None)
    one_gain_set: bool = flag(default=False, says="the same gains on every stance")


@dataclass(frozen=True)
class NoEstimator:
    """`kind: none`: lean and lean rate are measured as they are."""


@dataclass(frozen=True)
class Complementary:
    """`kind: complementary`: gyro above the crossover, accelerometer below it."""

    crossover: float = quantity("frequency", above=0)


@dataclass(frozen=True)
class Kalman:
    """`kind: kalman`: lean, lean rate, gyro bias and balance offset from the model and the sensors' noise.

    Drifts are standard deviations after one second.
    """

    unknown_torque: float | None = quantity("torque noise", above=0, default=None,
                                            says="on the body; default 1 % of the torque limit per √Hz")
    bias_drift: float = quantity("rate drift", above=0, default=3.490658503988659e-04, says="of the gyro's bias")
    offset_drift: float = quantity("angle drift", above=0, default=8.726646259971648e-04, says="of the balance offset")


@dataclass(frozen=True)
class Requirements:
    """What the design must meet; what is left out is not judged."""

    phase_margin: float | None = quantity("angle", above=0, default=None)
    gain_margin_lower: float | None = number(above=0, below=1, default=None, says="a factor, met at or below")
    gain_margin_upper: float | None = number(above=1, default=None)
    delay_margin: float | None = quantity("time", above=0, default=None)
    modulus_margin: float | None = number(above=0, below=1, default=None)
    disk_margin: float | None = number(above=0, below=2, default=None)
    peak_sensitivity: float | None = number(above=1, default=None)
    momentum_used: float | None = number(above=0, most=1, default=None, says="share of capacity in any trial")
    peak_lean: float | None = quantity("angle", above=0, default=None)
    settling_time: float | None = quantity("time", above=0, default=None)
    friction_needed: float | None = number(above=0, default=None)
    bus_voltage: float | None = quantity("voltage", above=0, default=None, says="highest in any trial")
    standing_swing: float | None = quantity("angle", above=0, default=None,
                                            says="amplitude of a lean that never dies out")
    offset_error: float | None = quantity("length", above=0, default=None,
                                          says="steady centre-of-mass error that must be tolerable for ever")
    worst_phase_margin: float | None = quantity("angle", above=0, default=None, says="within the tolerances")
    worst_gain_margin_lower: float | None = number(above=0, below=1, default=None, says="within the tolerances")
    worst_gain_margin_upper: float | None = number(above=1, default=None, says="within the tolerances")
    worst_delay_margin: float | None = quantity("time", above=0, default=None, says="within the tolerances")
    worst_modulus_margin: float | None = number(above=0, below=1, default=None, says="within the tolerances")
    worst_disk_margin: float | None = number(above=0, below=2, default=None, says="within the tolerances")


@dataclass(frozen=True)
class Goal:
    """A whole design file."""

    format: int = place(Shape("whole", least=1, most=1, says="1"))
    design: str = text(says="the design's name")
    machine: str = text(says="path of the machine file, from this file's folder")
    loop: Loop = section(Loop)
    control: LqrControl | PidControl = variant({"lqr": LqrControl, "pid": PidControl}, by="law")
    trials: dict[str, Trial] = table(Trial)
    stance: str = text(default="every", says="a stance's name, or `every`")
    estimator: NoEstimator | Complementary | Kalman = variant(
        {"none": NoEstimator, "complementary": Complementary, "kalman": Kalman}, default=NoEstimator())
    require: Requirements = section(Requirements, default=Requirements())
    fell: float = quantity("angle", above=0, default=0.5235987755982988, says="lean beyond which it fell")
    size: Sizing | None = section(Sizing, default=None)
    # neither is a key of the file: its path, and dotted key -> (line, column) in it
    source: str = field(default="", metadata={"shape": None})
    marks: Marks = field(default_factory=dict, metadata={"shape": None}, compare=False)
