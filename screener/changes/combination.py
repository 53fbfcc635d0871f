"""Combinations of pumps run as duties of a modified case, and which limit of theirs is broken first."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from screener.criteria import Observed, criteria
from screener.header.left import without_new
from screener.model.arrays import Bools, Floats
from screener.model.case import Case, Control, Duty
from screener.model.curves import Pumps
from screener.model.run import Kind, Run
from screener.screening import evaluate
from screener.screening.assess import Bench, Limits, set_up
from screener.screening.header import Header, left_of
from screener.screening.held import held

SLACK = 1e-9

Combination = tuple[tuple[int, ...], bool]
"""Rows of the installed pumps that run, and whether the new ones do."""


@dataclass(frozen=True, slots=True)
class Breach:
    """One way to be outside a limit.

    word      : for a cell
    criterion : that it breaks
    above     : its upper bound, not its lower one
    """

    word: str
    criterion: str
    above: bool = False


BREACHES = (
    Breach("past", "curve-end", above=True),
    Breach("low", "curve-end"),
    Breach("no data", "duty-flow"),
    Breach("short", "duty-flow"),
    Breach("shut", "minimum-flow"),
    Breach("low", "minimum-flow"),
    Breach("low", "region"),
    Breach("high", "region", above=True),
    Breach("NPSH", "npsh-margin"),
    Breach("motor", "motor-installed", above=True),
    Breach("motor", "motor-new", above=True),
    Breach("shaft", "shaft-power", above=True),
    Breach("start", "start"),
)
"""In the order in which they are told: what leaves no figures, what the users notice, what the pumps do."""


@dataclass(frozen=True, slots=True)
class Ran:
    """One combination at one header flow and level.

    running, new : rows of the installed pumps, number of new ones
    level     : row of the case
    header    : [m] header head;  total : [m3/s];  NaN where a pump is past its data
    power     : [W] of all pumps, divided by the efficiencies of motors and drives where those are stated
    breach    : row of `BREACHES`, the first that is broken; -1 within every limit
    pump      : that breaks it by most, 0 the new one; -1 where the whole header does
    shortfall : [-] of the limit broken by most, relative to the limit; 0 within
    unknown   : criteria that could not be judged
    """

    running: tuple[int, ...]
    new: int
    level: int
    header: float
    total: float
    power: float
    breach: int
    pump: int
    shortfall: float
    unknown: tuple[str, ...]

    @property
    def within(self) -> bool:
        """Whether it meets the flow and breaks no limit."""
        return self.breach < 0

    @property
    def met(self) -> bool:
        """Whether it gives the flow, within its limits or not."""
        return self.within or BREACHES[self.breach].criterion not in ("curve-end", "duty-flow")


@dataclass(frozen=True, slots=True)
class Plant:
    """The case, its new pump (None where none comes) and that pump's nameplate [W]."""

    case: Case
    pumps: Pumps | None
    motor: float


def key_of(alike: Sequence[int], combination: Combination) -> tuple[tuple[int, ...], bool]:
    """What combinations that only swap identical pumps have in common."""
    return tuple(sorted(alike[row] for row in combination[0])), combination[1]


def run_as(duty: Duty, combination: Combination) -> Duty:
    """The same duty, run as one combination."""
    return replace(duty, running=(combination[0],), new=(combination[1],), rated=False)


def every_run(plant: Plant, duties: Sequence[Duty]) -> list[list[Ran]]:
    """Run duties of one combination each; for each duty one `Ran` a level, in the order of its levels."""
    case = plant.case
    rated = next(duty for duty in case.duties if duty.rated)
    alone = replace(
        rated, levels=rated.levels[:1], running=((),), new=(True,), control=Control.OPEN, bypass=()
    )  # every case has a rated duty with a new pump
    bench = set_up(replace(case, duties=(*duties, alone)))
    run, outside, unknown = _read(plant, bench)
    for other in bench.others:
        _, more, open_ = _read(plant, other)
        outside, unknown = np.maximum(outside, more), unknown | open_
    broken = np.asarray((outside > SLACK).any(axis=2))
    power = _power(case, bench.header, run)
    result: list[list[Ran]] = [[] for _ in duties]
    for place, state in enumerate(bench.header.states):
        if state.kind != Kind.DUTY or state.duty == len(duties):
            continue
        breach = int(broken[:, place].argmax()) if broken[:, place].any() else -1
        of_header = breach >= 0 and BREACHES[breach].criterion == "duty-flow"
        result[state.duty].append(
            Ran(
                running=state.running,
                new=state.new,
                level=state.level,
                header=float(run.header[0, place]),
                total=float(run.total[0, place]),
                power=float(power[place]),
                breach=breach,
                pump=-1 if breach < 0 or of_header else int(outside[breach, place].argmax()),
                shortfall=float(outside[:, place].max()) if breach >= 0 else 0.0,
                unknown=tuple(
                    dict.fromkeys(b.criterion for b, u in zip(BREACHES, unknown[:, place], strict=True) if u)
                ),
            )
        )
    return result


def _read(plant: Plant, bench: Bench) -> tuple[Run, Floats, Bools]:
    """One reading of the installed pumps' wear.

    Returns the run, how far each pump is outside each breach, (b, s, 1 + p), -inf where that says nothing,
    and which breaches could not be judged, (b, s).
    """
    run = bench.today if plant.pumps is None else evaluate.run(bench.header, plant.pumps)
    runs = run.conditions.runs.copy()
    if plant.pumps is None:
        runs[:, 0] = False
    beside = runs.copy()
    beside[:, 0] = True  # criteria look at duties of the new pump only: judge all as beside one
    run = replace(
        run,
        start_header=_start_headers(bench.header, run.start_header),
        conditions=replace(run.conditions, runs=beside),
    )
    return run, *_outside(run, runs, bench.limits, plant.motor)


def _start_headers(header: Header, known: Floats) -> Floats:
    """Header head that the others hold while one pump starts, also in the duties without the new pump."""
    result = known.copy()
    for place, state in enumerate(header.states):
        if state.kind == Kind.DUTY and not state.new:
            for first in dict.fromkeys(int(header.alike[row]) for row in state.running):
                kind = [row for row in state.running if header.alike[row] == first]
                result[0, place, [1 + row for row in kind]] = _others_hold(header, place, kind[0])
    return result


def _others_hold(header: Header, place: int, row: int) -> float:
    """Header head of a state without the new pump while one of its pumps stands still."""
    state, standing = header.states[place], header.standing[place]
    if (place, row) in header.starting:
        left = header.starting[place, row]
    else:  # speed holds the flow
        rest = [other for other in state.running if other != row]
        now = held(header.case, state, standing, header.alike, running=rest)
        if not (now.short[0] or now.over[0]):
            return float(now.header[0])
        left = left_of(header.case, state, header.slowest[place][0] if now.over[0] else standing, rest)
    head = without_new(left, len(header.alike))[0]
    return float(left.header[0]) if np.isnan(head) and left.floor >= 0 else head


def _outside(run: Run, runs: Bools, limits: Limits, motor: float) -> tuple[Floats, Bools]:
    """How far outside, (b, s, 1 + p), and what is not known, (b, s). runs : (s, 1 + p) which pumps run."""
    known = {criterion.name: criterion for criterion in criteria()}
    outside = np.full((len(BREACHES), *runs.shape), -np.inf)
    unknown = np.zeros((len(BREACHES), len(runs)), bool)
    lost = np.isnan(run.total[0])
    shut = (run.flow[0] == 0) & runs
    for row, breach in enumerate(BREACHES):
        if breach.criterion == "motor-new":
            value = run.power[0, :, 0] / motor - 1
            outside[row, :, 0] = np.where(runs[:, 0] & ~np.isnan(value), value, -np.inf)
            unknown[row] = runs[:, 0] & np.isnan(value) & ~lost & ~shut[:, 0]
            continue
        observed = known[breach.criterion].observe(run, limits[breach.criterion])
        applies = np.broadcast_to(observed.applies, (1, *runs.shape))[0] & runs
        values = np.broadcast_to(_shortfall(observed, breach.above), (1, *runs.shape))[0]
        if breach.word in ("shut", "low") and breach.criterion == "minimum-flow":
            applies = applies & (shut if breach.word == "shut" else ~shut)
        if breach.word == "no data":
            values = np.where(lost & ~np.isinf(run.flow[0]).any(axis=1), 1.0, -np.inf)[:, None]
            applies = np.ones_like(applies)
        outside[row] = np.where(applies & ~np.isnan(values), values, -np.inf)
        gates = known[breach.criterion].gates
        unknown[row] = gates & (applies & np.isnan(values)).any(axis=1) & ~lost
    return outside, unknown


def _shortfall(observed: Observed, above: bool) -> Floats:
    """How far a value is above its upper or below its lower bound, relative to that; NaN not known."""
    bound = np.asarray(observed.fail_above if above else observed.fail_below, np.float64)
    size = np.abs(observed.scale or bound)
    usable = (size > 0) & np.isfinite(size)
    with np.errstate(invalid="ignore"):
        distance = (observed.value - bound) * (1.0 if above else -1.0)
    return np.asarray(distance / np.where(usable, size, 1.0))


def _power(case: Case, header: Header, run: Run) -> Floats:
    """Power of all pumps that run, (s,) [W], taken back through the efficiencies that are stated."""
    drives = [case.new_pump.drive, *(pump.drive for pump in case.installed)]
    efficiency = np.array([drive.motor_efficiency * drive.drive_efficiency for drive in drives])
    number = np.zeros((len(header.states), len(drives)))
    for place, state in enumerate(header.states):
        number[place, 0] = state.new
        number[place, [1 + row for row in state.running]] = 1
    each = np.where(number > 0, run.power[0] / efficiency * number, 0.0)
    return np.asarray(np.where(np.isnan(run.total[0]), np.nan, each.sum(axis=1)))
