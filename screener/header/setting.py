"""What pumps are like in a state: the liquid, the speed, and what is taken back by a bypass."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from screener.header.branch import BranchCurves, branch_curves
from screener.hydraulics.losses import loss_head
from screener.hydraulics.speed import at_speed
from screener.hydraulics.viscosity import corrected
from screener.hydraulics.wear import leaking
from screener.model.arrays import STATIONS, Floats
from screener.model.case import Branch, Case, Drive
from screener.model.curves import Pumps
from screener.model.run import Speed, State


@dataclass(frozen=True, slots=True)
class Setting:
    """What several states have in common.

    viscosity : [m2/s] that curves are corrected for, 0 where they hold as measured
    speed     : `Speed` of the pumps that vary it, never HELD
    bypass    : [m3/s] taken back at each pump, new pump first; empty where none is
    """

    viscosity: float
    speed: Speed
    bypass: tuple[float, ...] = ()


def setting_of(case: Case, state: State, speed: Speed | None = None) -> Setting:
    """The setting of a state, or of the same state with its pumps at another speed."""
    liquid = case.liquids[state.liquid]
    return Setting(
        liquid.viscosity if liquid.viscous else 0.0, state.speed if speed is None else speed, state.bypass
    )


def speed_limits(pumps: Pumps, drives: Sequence[Drive]) -> tuple[Floats, Floats]:
    """Lowest and highest speed of c pumps over that at load, (c,) each; 1 and 1 at fixed speed.

    drives : of each pump, or one for all. A range of the model itself narrows that of the drive.
    """
    lowest = np.array([drive.lowest for drive in drives])
    highest = np.array([drive.highest for drive in drives])
    varies = lowest < highest
    low = np.fmax(lowest, np.where(varies, pumps.lowest_speed / pumps.speed, np.nan))
    high = np.fmin(highest, np.where(varies, pumps.highest_speed / pumps.speed, np.nan))
    return np.minimum(low, 1.0), np.maximum(high, 1.0)


def ratio_at(pumps: Pumps, drives: Sequence[Drive], speed: Speed) -> Floats:
    """Speed of c pumps over that at load, (c,)."""
    low, high = speed_limits(pumps, drives)
    return {Speed.AT_LOAD: np.ones(len(pumps)), Speed.LOWEST: low, Speed.HIGHEST: high}[speed]


def pumps_at(pumps: Pumps, *, ratio: Floats, viscosity: float) -> Pumps:
    """Bring c pumps, or one row for all, to speeds (c,) over that at load, and into a viscous liquid."""
    if len(ratio) > len(pumps) or (ratio != 1).any():
        pumps = at_speed(pumps, ratio=ratio)
    return corrected(pumps, viscosity=viscosity) if viscosity else pumps


def branches_at(pumps: Pumps, branches: Sequence[Branch], bypass: Floats) -> BranchCurves:
    """Branch curves of c pumps over what they deliver; a bypass takes its flow before the check valve.

    branches : c of them, or one for all;  bypass : (c,) [m3/s] or one for all
    """
    if not bypass.any():
        return branch_curves(pumps.curves, branches)
    taken = np.minimum(np.broadcast_to(bypass, len(pumps)), 0.99 * pumps.curves.end)
    curves = leaking(pumps, leak=taken).curves
    through = np.linspace(0, 1, STATIONS) * curves.span[:, None] + taken[:, None]
    losses = [b.suction for b in branches]
    lost = (
        loss_head(losses[0], flow=through)
        if len(losses) == 1
        else np.stack([loss_head(loss, flow=flow) for loss, flow in zip(losses, through, strict=True)])
    )
    rest = [Branch(discharge=b.discharge, suction_head=b.suction_head) for b in branches]
    return branch_curves(replace(curves, head=curves.head - lost), rest)
