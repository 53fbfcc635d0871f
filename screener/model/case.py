"""The case: the header, what runs on it today, and what is asked of it. SI, frozen."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import IntEnum, IntFlag

from screener.model.arrays import Floats
from screener.model.curves import Pumps


@dataclass(frozen=True, slots=True)
class Liquid:
    """A liquid at the temperature it is pumped.

    density [kg/m3], viscosity [m2/s] kinematic, vapour_pressure [Pa absolute], heat_capacity [J/(kg K)];
    temperature [degC], NaN where the liquid was given by its numbers alone;
    viscous: pump curves are corrected for its viscosity, where that matters.
    """

    name: str
    temperature: float
    density: float
    viscosity: float
    vapour_pressure: float
    heat_capacity: float
    viscous: bool = False


@dataclass(frozen=True, slots=True)
class Loss:
    """A head loss as a sum of terms: sum of coefficient * Q ** exponent [m], Q in m3/s."""

    coefficient: tuple[float, ...] = ()
    exponent: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class System:
    """The system curve from the suction vessel to the destination, without its static part.

    friction            : terms; used where `table_flow` is empty
    table_flow          : (t,) [m3/s] rising from 0, or empty
    table_head          : (t,) [m] friction at those flows, rising from 0; no value beyond the last point
    fit_deviation       : [m] largest distance of the measured points from a fitted curve; NaN if not fitted
    destination_pressure : [Pa gauge] on the destination's surface
    allowable_pressure  : [Pa gauge] of the header and its users, NaN where not stated
    """

    friction: Loss
    table_flow: Floats
    table_head: Floats
    fit_deviation: float
    destination_pressure: float
    allowable_pressure: float


@dataclass(frozen=True, slots=True)
class Level:
    """One level of the suction side.

    static_head     : [m] rise from the suction surface to the destination surface
    suction_head    : [m] suction surface above the pumps' datum; negative for a suction lift
    vessel_pressure : [Pa gauge] on the suction surface
    """

    name: str
    static_head: float
    suction_head: float
    vessel_pressure: float


class Control(IntEnum):
    """Who holds the flow of a duty: the users' valves, nobody, or the pumps that vary their speed."""

    THROTTLED = 0
    OPEN = 1
    SPEED = 2


@dataclass(frozen=True, slots=True)
class Duty:
    """What is asked of the header.

    flow   : [m3/s] total
    levels : rows in `Case.levels`
    liquid : row in `Case.liquids`
    running : the combinations in which it is run, each a tuple of rows in `Case.installed`
    new    : whether the new pump runs, for each combination
    hours  : per year, NaN where not stated
    rated  : the duty on which the data sheet is written; exactly one in a case
    bypass : [m3/s] taken back at each pump upstream of its check valve, new pump first; empty where none is
    """

    name: str
    flow: float
    levels: tuple[int, ...]
    liquid: int
    running: tuple[tuple[int, ...], ...]
    new: tuple[bool, ...]
    control: Control
    hours: float
    rated: bool
    bypass: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Branch:
    """The way of one pump from the common suction to the header.

    suction, discharge : losses [m]
    suction_head       : [m] of this pump above the common suction datum; 0 on a common suction header
    """

    suction: Loss = field(default_factory=Loss)
    discharge: Loss = field(default_factory=Loss)
    suction_head: float = 0.0


@dataclass(frozen=True, slots=True)
class Drive:
    """What drives a pump.

    lowest, highest  : [-] speeds that it may take, relative to its speed at load; 1 and 1 at fixed speed
    motor_efficiency, drive_efficiency : [-], 1 where not stated: then energy is that of the shaft
    """

    lowest: float = 1.0
    highest: float = 1.0
    motor_efficiency: float = 1.0
    drive_efficiency: float = 1.0

    @property
    def varies(self) -> bool:
        """Whether its speed can be changed."""
        return self.lowest < self.highest


@dataclass(frozen=True, slots=True)
class WearFit:
    """How worn a pump is by points measured in the field, in both ways that wear works.

    points        : how many there are
    reading       : [-] standard error of a head as read; no uncertainty is smaller than it allows
    loss          : [-] share of its head that is lost at every flow, 0 to 0.6
    leak          : [m3/s] that goes round inside it, 0 or more
    loss_error, leak_error : their standard uncertainties; infinite where the points do not tell
    loss_residual, leak_residual : [m] root mean square distance of the points from the curve so worn
    prefers       : the reading that comes nearer to the points
    cautions      : what the points leave open
    """

    class Reading(IntEnum):
        """Which way of wearing the points speak for."""

        NEITHER = 0
        LOSS = 1
        LEAK = 2

    class Caution(IntFlag):
        """Why a fit may mislead."""

        NONE = 0
        FEW_POINTS = 1
        SHUTOFF_INFERRED = 2
        NARROW = 4
        ABOVE_NEW = 8
        CURVE_ENDS = 16

    points: int
    reading: float
    loss: float
    loss_error: float
    loss_residual: float
    leak: float
    leak_error: float
    leak_residual: float
    prefers: Reading
    cautions: Caution


@dataclass(frozen=True, slots=True)
class Installed:
    """One installed pump; its curve and figures are the row of the same number in `Case.pumps`.

    title      : what it is, for readers ("200-400-4 P, 390 mm")
    rated_flow : [m3/s], the flow of best efficiency where not stated (then NaN if that is unknown)
    motor      : [W] nameplate, NaN where not stated
    head_loss  : [-] share of its head that it has lost since new, at its rated flow; 0 as new
    wear       : how that share was found, None where it was stated
    """

    tag: str
    title: str
    branch: Branch
    rated_flow: float
    motor: float
    head_loss: float = 0.0
    drive: Drive = field(default_factory=Drive)
    wear: WearFit | None = None


@dataclass(frozen=True, slots=True)
class NewPump:
    """The free place on the header.

    count     : identical new pumps
    frequency : [Hz] of the supply, NaN where not stated: then no model is refused for its speed
    slip      : [-] of the motor at load, NaN where not stated: then the curve's own speed is kept
    trim_step : [m] diameters are rounded up to whole steps
    motor_series : name in `tables.motors`
    drive     : speed range and efficiencies; a model's own speed range narrows it
    replaces  : row of the installed pump that leaves the header when the new one comes, -1 where none does
    trim_law  : name in `tables.trim_laws` of the law that replaces those of the models; empty where none does
    """

    count: int
    frequency: float
    slip: float
    branch: Branch
    trim_step: float
    motor_series: str
    drive: Drive = field(default_factory=Drive)
    replaces: int = -1
    trim_law: str = ""


@dataclass(frozen=True, slots=True)
class Tolerance:
    """How far what was stated may be off.

    system_curve : [-] of the friction head, plus or minus
    trim         : [m] of the impeller diameter, plus or minus
    reading      : [-] of the head of digitised points, plus or minus
    """

    system_curve: float = 0.05
    trim: float = 0.0005
    reading: float = 0.01


@dataclass(frozen=True, slots=True)
class Case:
    """Everything about one header. `pumps` holds the installed pumps, row for row with `installed`.

    atmospheric_pressure : [Pa absolute]
    suction_friction     : common suction loss as a function of the total flow; already inside the system
                           curve, used for NPSH and pressure only
    limits               : what the case says about limits, {criterion: {limit: value in SI}}
    weights              : of the score: "efficiency", "shutoff_match", "load_share"
    as_new               : the installed pumps before they lost head, None where none has; `pumps` then holds
                           them with the whole curve lower
    display              : unit names to show figures in, by quantity ("flow", "head", "length", ...)
    tolerance            : of what the case says
    """

    title: str
    date: str
    liquids: tuple[Liquid, ...]
    atmospheric_pressure: float
    system: System
    levels: tuple[Level, ...]
    suction_friction: Loss
    installed: tuple[Installed, ...]
    pumps: Pumps
    new_pump: NewPump
    duties: tuple[Duty, ...]
    limits: Mapping[str, Mapping[str, float]]
    weights: Mapping[str, float]
    display: Mapping[str, str]
    as_new: Pumps | None = None
    tolerance: Tolerance = field(default_factory=Tolerance)
