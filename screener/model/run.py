"""States of the header, and what candidates do in them."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum

import numpy as np

from screener.model.arrays import Bools, Codes, Floats, Ints
from screener.model.curves import Pumps


class Kind(IntEnum):
    """What a state stands for."""

    DUTY = 0
    WIDE_OPEN = 1
    TRIP = 2


class Speed(IntEnum):
    """Who sets the speed of the pumps that can vary it."""

    AT_LOAD = 0
    LOWEST = 1
    HIGHEST = 2
    HELD = 3


@dataclass(frozen=True, slots=True)
class State:
    """One way the header is run: who runs, at which level, who holds the flow.

    duty, level : rows of the case
    kind        : a duty as asked; the same combination wide open; or that with one pump lost
    running     : rows of the installed pumps that run
    new         : new pumps that run; 0 in states that a candidate inherits
    lost        : row of the installed pump lost, -1 for a new pump lost, None where none is
    asked       : [m3/s] flow of the duty
    throttled   : the users hold that flow
    static      : [m] of the liquid pumped
    share       : [-] share of the duty's hours
    liquid      : row of the case
    speed       : `Speed`; HELD where the pumps that vary their speed give the flow asked between them
    bypass      : [m3/s] taken back at each pump, new pump first; empty where none is
    """

    duty: int
    level: int
    kind: Kind
    running: tuple[int, ...]
    new: int
    lost: int | None
    asked: float
    throttled: bool
    static: float
    share: float
    liquid: int
    speed: Speed = Speed.AT_LOAD
    bypass: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Ratings:
    """Figures of each pump at its speed at load in the liquid of the rated duty, new pump first.

    All (c, 1 + p), NaN where not known.

    shutoff, summit      : [m] head of the pump at zero flow; largest head of its curve
    droop                : [-] largest rise of the curve towards more flow, as a share of its shutoff head
    header_shutoff, header_summit : [m] the same two at the header, through the branch
    bep_flow, minimum_flow, maximum_flow : [m3/s]
    region_low, region_high : [-] allowable region as a fraction of `bep_flow`
    specific_speed, suction_specific_speed : [rpm, m3/s, m]
    allowable_pressure   : [Pa gauge];  maximum_power, motor : [W];  head_tolerance : [-]
    """

    shutoff: Floats
    summit: Floats
    droop: Floats
    header_shutoff: Floats
    header_summit: Floats
    bep_flow: Floats
    minimum_flow: Floats
    maximum_flow: Floats
    region_low: Floats
    region_high: Floats
    specific_speed: Floats
    suction_specific_speed: Floats
    allowable_pressure: Floats
    maximum_power: Floats
    motor: Floats
    head_tolerance: Floats


@dataclass(frozen=True, slots=True)
class Bounds:
    """What bounds each pump at the speed and in the liquid of a state, new pump first.

    All (c, s, 1 + p), NaN where not known; s is 1 where all states are alike.

    speed          : [-] relative to the speed at load
    start, end     : [m3/s] first and last measured flow
    best, minimum, largest : [m3/s] best efficiency; stable minimum; largest allowed
    summit         : [m] largest head of the curve, NaN where shutoff was not measured
    opening        : [m] head at the header with the check valve shut, at the highest speed it may take there
    thermal_power  : [W] largest shaft power at 1000 kg/m3 between shutoff and best efficiency
    """

    speed: Floats
    start: Floats
    end: Floats
    best: Floats
    minimum: Floats
    largest: Floats
    summit: Floats
    opening: Floats
    thermal_power: Floats


@dataclass(frozen=True, slots=True)
class Conditions:
    """What holds in each state whatever the candidate, (s,) but where said.

    duty, kind : int, `Kind`
    rated, lowest : whether it is the state of the rated duty, and of the lowest duty that the new pump shares
    usual     : at load, in the liquid of the rated duty, without a bypass
    open      : nothing is throttled, as wide open and after trips
    held      : pumps that vary their speed hold the flow
    asked     : [m3/s] flow of the duty
    wanted_head : [m] header head at which the system takes that flow
    density   : [kg/m3];  heat_capacity : [J/(kg K)];  vapour_pressure : [Pa]
    suction_pressure : (s, 1 + p) [Pa gauge] at each pump, no flow
    share_of_hours : [-] share of the duty's hours; hours : [h] per year of the duty, NaN where not stated
    runs      : (s, 1 + p) whether each pump runs, new pump first
    """

    duty: Ints
    kind: Codes
    rated: Bools
    lowest: Bools
    usual: Bools
    open: Bools
    held: Bools
    asked: Floats
    wanted_head: Floats
    density: Floats
    heat_capacity: Floats
    suction_pressure: Floats
    share_of_hours: Floats
    hours: Floats
    runs: Bools


@dataclass(frozen=True, slots=True)
class Run:
    """c candidates in s states beside p installed pumps. Pump columns: new pump first.

    A flow is NaN where the pump does not run or the state has no figures, 0 where it is held shut, +inf
    past its last measured point, -inf left of its first one. Where one pump is past its data, the state
    has no figures for any pump.

    pumps        : the c candidates
    ratings      : (c, 1 + p)
    bounds       : (c, s, 1 + p) or (c, 1, 1 + p)
    conditions   : (s,)
    header       : (c, s) [m] header head
    total        : (c, s) [m3/s] taken by the users
    flow, head, power, efficiency, npsh_available, npsh_required : (c, s, 1 + p)
                   [m3/s, m, W, -, m, m], of one pump each; flow through the pump, its bypass included
    start_header : (c, s, 1 + p) [m] header head that the others hold when this pump is to start
    spare_head   : (c, 1 + p) [m] head that each pump may lose before it falls under its minimum flow at
                   the lowest common duty
    shutoff_match : (c, p) [-] signed;  load_share : (c, p) [-]
    opening_speed, least_speed : (c, s) [-] of the new pump with the system open, the others at their speed at
                   load: at which its check valve opens, at which it reaches its minimum flow; relative to
                   its speed at load, NaN where it does not vary
    """

    pumps: Pumps
    ratings: Ratings
    bounds: Bounds
    conditions: Conditions
    header: Floats
    total: Floats
    flow: Floats
    head: Floats
    power: Floats
    efficiency: Floats
    npsh_available: Floats
    npsh_required: Floats
    start_header: Floats
    spare_head: Floats
    shutoff_match: Floats
    load_share: Floats
    opening_speed: Floats
    least_speed: Floats


def in_state(values: Floats, place: int) -> Floats:
    """One of `Bounds` in one state, (c, 1 + p)."""
    return np.asarray(values[:, place if values.shape[1] > 1 else 0])
