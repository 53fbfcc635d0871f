"""How likely a candidate is to hold: curves, trim and system drawn within their tolerances, all at once.

Each curve has one factor over its whole flow range; the friction of the system and the diameter of the new
impeller are off as well. A limit is taken as plus or minus two standard deviations of a normal distribution,
cut off there; all are independent. Draws are quasi-random: several Sobol sequences, each scrambled by itself,
whose means differ by the sampling error.
"""

from __future__ import annotations

from dataclasses import dataclass, fields, replace

import numpy as np

from screener.changes.drawn import flows_of, run_each
from screener.changes.tolerance import scaled
from screener.criteria import criteria
from screener.hydraulics.similarity import take, trimmed
from screener.model.arrays import Bools, Floats, Ints
from screener.model.case import Case
from screener.model.curves import Pumps, PumpTable
from screener.model.finding import Outcome
from screener.model.run import Run
from screener.screening.assess import Bench, set_up
from screener.screening.judge import judge

SETS = 8
"""Sequences scrambled independently; their spread gives the sampling error."""

SAMPLES = 2048
CHUNK = 4096
"""Rows run at a time: few enough that whole curves of every pump in them take some 100 MB."""


@dataclass(frozen=True, slots=True)
class Draws:
    """n draws, each as a share of its limit: -1 to 1, but `trim`, which only lowers a head, 0 to 1.

    new, trim, friction, diameter : (n,);  installed : (n, p)
    """

    new: Floats
    trim: Floats
    friction: Floats
    diameter: Floats
    installed: Floats

    def __len__(self) -> int:
        return len(self.new)

    def take(self, rows: Ints) -> Draws:
        """Some of the draws."""
        return Draws(**{f.name: getattr(self, f.name)[rows] for f in fields(Draws)})


@dataclass(frozen=True, slots=True)
class Sampled:
    """Of c candidates, the probability under these assumptions that they pass.

    probability : (c,) [-] that no criterion fails
    error       : (c,) [-] standard error of that, from sampling alone
    open        : (c,) [-] share of draws in which none fails, but one that has to be judged could not be
    criterion   : (c,) column in `criteria()` of what fails most often, -1 where nothing does
    share       : (c,) [-] share of draws in which that fails
    samples     : draws for each candidate;  seed : of the draws
    """

    probability: Floats
    error: Floats
    open: Floats
    criterion: Ints
    share: Floats
    samples: int
    seed: int

    def __len__(self) -> int:
        return len(self.probability)


def probability(
    bench: Bench, table: PumpTable, pumps: Pumps, *, samples: int = SAMPLES, seed: int = 1
) -> Sampled:
    """Sample how likely c candidates are to pass every criterion.

    pumps   : c candidates of the table at their diameters and speeds, as given to `judged`
    samples : wanted for each; `SETS` times a power of two are taken, as many or more.
    Same seed, same result, whatever the other candidates. The assumptions are those of `outcomes`.
    """
    power = max(int(np.ceil(np.log2(max(samples, 1) / SETS))), 0)
    draws = draw(len(bench.header.case.installed), power=power, seed=seed)
    failed, unknown = outcomes(bench, table, pumps, draws)
    holds = ~failed.any(axis=2)
    means = holds.reshape(len(pumps), SETS, 2**power).mean(axis=2)
    shares = failed.mean(axis=1)
    most = shares.argmax(axis=1)
    share = shares[np.arange(len(pumps)), most]
    return Sampled(
        probability=means.mean(axis=1),
        error=means.std(axis=1, ddof=1) / np.sqrt(SETS),
        open=(holds & unknown).mean(axis=1),
        criterion=np.where(share > 0, most, -1),
        share=share,
        samples=len(draws),
        seed=seed,
    )


def draw(installed: int, *, power: int, seed: int) -> Draws:
    """Draw `SETS` sequences of 2 ** power, one behind the other. installed : number of installed pumps."""
    from scipy.special import ndtr, ndtri
    from scipy.stats import qmc

    seeds = np.random.SeedSequence(seed).generate_state(SETS)
    sets = [qmc.Sobol(4 + installed, seed=int(one)).random_base2(power) for one in seeds]
    share = np.concatenate(sets).T
    inside = ndtr(2.0) - ndtr(-2.0)  # of a normal distribution, what lies within the limits
    both = ndtri(ndtr(-2.0) + share * inside) / 2
    below = ndtri(0.5 + share[1] * inside / 2) / 2
    return Draws(new=both[0], trim=below, friction=both[2], diameter=both[3], installed=both[4:].T)


def outcomes(bench: Bench, table: PumpTable, pumps: Pumps, draws: Draws) -> tuple[Bools, Bools]:
    """Judge c candidates in n draws, in each reading of the installed pumps' wear.

    Identical installed pumps are drawn apart. What is 'already so today' is held against the header as given,
    not against the one drawn. States without the new pump do not count, as they are none of its doing. The
    trim is off, but judged as the one that was ordered; where a test does not vouch for it, it may also be
    low. Where no tolerance is stated, the one that the criterion `start` takes then holds.

    Returns which of k criteria fail, (c, n, k), and where one that has to be judged could not be, (c, n).
    """
    count, every = len(pumps) * len(draws), criteria()
    gates = np.array([criterion.gates for criterion in every])
    failed, unknown = np.zeros((count, len(every)), bool), np.zeros(count, bool)
    for one in (bench, *bench.others) if count else ():
        alone = set_up(_apart(one.header.case))
        case, today = alone.header.case, _whichever(alone.today, one.header.alike)
        nominal = (pumps, *(take(case.pumps, np.array([row])) for row in range(len(case.pumps))))
        starts = flows_of(alone.header, nominal, np.ones(len(pumps)))
        for first in range(0, count, CHUNK):
            rows = np.arange(first, min(first + CHUNK, count))
            who, which = np.divmod(rows, len(draws))
            some = draws.take(which)
            run = run_each(
                alone.header,
                (_new(alone, table, take(pumps, who), some), *_installed(alone, some)),
                1 + some.friction * case.tolerance.system_curve,
                {key: flows[who] for key, flows in starts.items()},
            )
            outcome = judge(run, today, alone.limits).outcome
            failed[rows] |= outcome == Outcome.FAIL
            unknown[rows] |= ((outcome == Outcome.NOT_ASSESSED) & gates).any(axis=1)
    shape = (len(pumps), len(draws))
    return failed.reshape(*shape, len(every)), unknown.reshape(shape)


def _new(bench: Bench, table: PumpTable, pumps: Pumps, draws: Draws) -> Pumps:
    """The candidate of each draw, r rows, as it would come."""
    made = trimmed(
        table,
        model=pumps.model,
        diameter=pumps.diameter + draws.diameter * bench.header.case.tolerance.trim,
        speed_ratio=pumps.speed / table.speed[pumps.model],
    )
    ordered = replace(
        made, diameter=pumps.diameter, from_test=pumps.from_test, trim_uncertainty=pumps.trim_uncertainty
    )
    return scaled(ordered, 1 + draws.new * _tolerance(bench, pumps) - draws.trim * pumps.trim_uncertainty)


def _installed(bench: Bench, draws: Draws) -> list[Pumps]:
    """The installed pumps, r rows each."""
    pumps = bench.header.case.pumps
    factors = 1 + draws.installed * _tolerance(bench, pumps)
    return [scaled(take(pumps, np.full(len(draws), row)), factor) for row, factor in enumerate(factors.T)]


def _tolerance(bench: Bench, pumps: Pumps) -> Floats:
    unknown = bench.limits["start"]["unknown_tolerance"]
    return np.where(np.isnan(pumps.head_tolerance), unknown, pumps.head_tolerance)


def _whichever(today: Run, alike: Ints) -> Run:
    """Of identical pumps that are outside their data today only the first is marked: mark them all."""
    flow, runs = today.flow.copy(), today.conditions.runs
    for first in np.unique(alike):
        columns = 1 + np.flatnonzero(alike == first)
        own = flow[0][:, columns]
        mark = np.fmax.reduce(np.where(np.isinf(own), own, np.nan), axis=1)[:, None]
        flow[0][:, columns] = np.where(runs[:, columns] & np.isinf(mark), mark, own)
    return replace(today, flow=flow)


def _apart(case: Case) -> Case:
    """The same case where identical installed pumps are not one, the new one runs, and wear is read once.

    The inlet of the trim law is no figure of a pump that runs: it only tells them apart.
    """
    pumps = replace(case.pumps, law_inlet=np.arange(len(case.pumps), dtype=np.float64))
    duties = []
    for duty in case.duties:
        kept = [running for running, new in zip(duty.running, duty.new, strict=True) if new]
        if kept:
            duties.append(replace(duty, running=tuple(kept), new=(True,) * len(kept)))
    return replace(case, pumps=pumps, duties=tuple(duties), as_new=None)
