"""Score and order: what a header with the candidate on it costs to run, and how well the curves match."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np

from screener.hydraulics.constants import GRAVITY
from screener.model.arrays import Floats
from screener.model.case import Drive
from screener.model.finding import Figures
from screener.model.run import Conditions, Kind, Run

SECONDS_PER_HOUR = 3600.0


def figures(
    run: Run, without: Run, *, count: int, drives: Sequence[Drive], weights: Mapping[str, float]
) -> Figures:
    """Energy, match and score of c candidates.

    without : the same states with the new pump lost
    count   : identical new pumps
    drives  : of the pumps, new pump first; energy is at the shafts, or before motor and drive where their
              efficiencies are stated
    weights : "efficiency", "shutoff_match", "load_share" [points for each percent or point]

    score = w_eta eta - w_0 |shutoff mismatch| - w_s load-share difference, in percent and points; the
    useful head is the system's, so head burned at the valves of the users counts as lost. Where the new
    pump runs at one demand only there is no load share to compare, and that term is left out for all.
    """
    conditions = run.conditions
    duty = conditions.kind == Kind.DUTY
    hours = conditions.hours
    known_hours = not np.isnan(hours[duty]).any()
    weight = np.where(duty, conditions.share_of_hours * (hours if known_hours else 1.0), 0.0)
    pumps = np.ones(run.flow.shape[2])
    pumps[0] = count
    losses = np.array([drive.motor_efficiency * drive.drive_efficiency for drive in drives])
    power = (np.where(conditions.runs, run.power, 0.0) * (pumps / losses)).sum(axis=2)
    delivered = np.minimum(run.total, conditions.asked)
    useful = conditions.density * GRAVITY * conditions.asked * conditions.wanted_head
    weighted_power = _weighted(power, weight)
    efficiency = (useful * weight).sum() / weighted_power
    mismatch = np.where(np.isnan(run.shutoff_match), 0.0, run.shutoff_match)
    worst = mismatch[np.arange(len(mismatch)), np.abs(mismatch).argmax(axis=1)]
    worst = np.where(np.isnan(run.shutoff_match).all(axis=1), np.nan, worst)
    share = np.fmax.reduce(run.load_share, axis=1)
    year = SECONDS_PER_HOUR if known_hours else np.nan
    shared = conditions.runs[:, 0] & duty & conditions.usual
    usual = conditions.usual[conditions.rated].all()
    comparable = usual and len(np.unique(conditions.asked[shared])) > 1
    return Figures(
        efficiency=efficiency,
        power=weighted_power / weight.sum(),
        energy=weighted_power * year,
        volume=_weighted(delivered, weight) * year,
        shutoff=worst,
        share=share,
        score=100
        * (
            weights["efficiency"] * efficiency
            - weights["shutoff_match"] * np.abs(worst)
            - weights["load_share"] * (share if comparable else 0.0)
        ),
        firm=_firm(run, without),
    )


def _weighted(values: Floats, weight: Floats) -> Floats:
    return np.asarray((values[:, weight > 0] * weight[weight > 0]).sum(axis=1))


def trips(conditions: Conditions) -> list[tuple[int, bool]]:
    """States after each single-pump trip, in order, and whether it is the new pump that is lost."""
    after = conditions.kind == Kind.TRIP
    whole = conditions.open & ~after & conditions.runs[:, 0]
    return [(int(place), False) for place in np.flatnonzero(after)] + [
        (int(place), True) for place in np.flatnonzero(whole)
    ]


def _firm(run: Run, without: Run) -> Floats:
    """Share of the duty that is delivered after each trip, (c, t); `trips` says which.

    Losing the new pump leaves the installed ones, wide open.
    """
    columns = [
        np.broadcast_to((without if lost else run).total[:, place], len(run.total))
        / run.conditions.asked[place]
        for place, lost in trips(run.conditions)
    ]
    return np.minimum(np.stack(columns, axis=1), 1.0) if columns else np.empty((len(run.total), 0))
