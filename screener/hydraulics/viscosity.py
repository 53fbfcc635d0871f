"""Pumps in a viscous liquid: factors on whole water curves, by ANSI/HI 9.6.7 (as ISO/TR 17766:2005)."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import IntEnum

import numpy as np

from screener.hydraulics import interpolate
from screener.model.arrays import Codes, Floats, Real
from screener.model.curves import Curves, Pumps

HIGHEST_B = 40.0
"""[-] parameter B from which the method no longer holds [V]."""

HIGHEST_SPECIFIC_SPEED = 60.0
"""[rpm, m3/s, m] n_q up to which the method holds [V]."""

HIGHEST_VISCOSITY = 4000e-6
"""[m2/s] up to which the method holds [V]."""

WATER_LIKE = 4.3e-6
"""[m2/s] viscosity up to which a pump whose B is not known runs as with water: common practice, no source."""

_A = 0.5  # of the NPSH factor: side inlet; an end suction pump has 0.1, so this is on the safe side [M]
_ROUNDING = 1e-9  # relative: a best flow at the very end of the data is still inside


class Cover(IntEnum):
    """Whether the method covers a pump in a liquid, else the first reason why not."""

    COVERED = 0
    B_TOO_HIGH = 1
    """B of 40 or more, or a liquid of more than 4000 cSt."""
    SPECIFIC_SPEED = 2
    """n_q above 60."""
    NO_BEST_FLOW = 3
    """The flow of best efficiency, the head there or n_q is not known."""


@dataclass(frozen=True, slots=True)
class Factors:
    """What a viscous liquid makes of c pumps: factors on figures with water, NaN where not covered.

    parameter  : (c,) [-] B, also where it is too high; NaN where it cannot be worked out
    flow       : (c,) [-] on every flow
    efficiency : (c,) [-] on every efficiency
    head       : (c,) [-] on the head at best efficiency; `head_factor` tells the others
    npsh       : (c,) [-] on every NPSH required; NaN too where that is not known at best efficiency
    cover      : (c,) `Cover`
    """

    parameter: Floats
    flow: Floats
    efficiency: Floats
    head: Floats
    npsh: Floats
    cover: Codes


def parameter(*, viscosity: Real, flow: Real, head: Real, speed: Real) -> Floats:
    """Parameter B = 16.5 nu^0.5 H^0.0625 / (Q^0.375 n^0.25) [-], with cSt, m, m3/h and rpm.

    viscosity : [m2/s] kinematic.  speed : [rpm].
    flow      : [m3/s] with water at best efficiency, of the whole pump, also with two eyes; > 0
    head      : [m] per stage at that flow with water, > 0
    Any shapes that broadcast.  Source: ANSI/HI 9.6.7, ISO/TR 17766:2005 [V].

    >>> float(parameter(viscosity=120e-6, flow=110 / 3600, head=77.0, speed=2950.0).round(2))
    5.52
    """
    cst, hourly = np.asarray(viscosity) * 1e6, np.asarray(flow) * 3600
    return np.asarray(16.5 * cst**0.5 * head**0.0625 / (hourly**0.375 * speed**0.25))


def flow_factor(b: Real) -> Floats:
    """C_Q = 2.71^(-0.165 (log10 B)^3.15) [-]: flow in the liquid over flow with water; 1 for B <= 1.

    It is the factor on the head at best efficiency too.  Source: as `parameter` [V].

    >>> float(flow_factor(5.52).round(3))
    0.938
    """
    return np.asarray(2.71 ** (-0.165 * np.log10(np.maximum(b, 1.0)) ** 3.15))


def efficiency_factor(b: Real) -> Floats:
    """C_eta = B^(-0.0547 B^0.69) [-]: efficiency in the liquid over that with water; 1 for B <= 1.

    Source: as `parameter` [V].

    >>> float(efficiency_factor(5.52).round(3))
    0.738
    """
    b = np.maximum(b, 1.0)
    return np.asarray(b ** (-0.0547 * b**0.69))


def head_factor(*, at_best: Real, share: Real) -> Floats:
    """C_H = 1 - (1 - C_BEP-H) (Q / Q_BEP)^0.75 [-]: head in the liquid over that with water; 1 at no flow.

    at_best : [-] the factor at best efficiency.  share : [-] flow with water over that of best efficiency.
    Any shapes that broadcast.  Source: as `parameter` [V].

    >>> float(head_factor(at_best=0.938, share=0.6).round(3))
    0.958
    """
    return np.asarray(1 - (1 - at_best) * share**0.75)


def npsh_factor(*, at_best: Real, npsh_required: Real, flow: Real, speed: Real) -> Floats:
    """Factor 1 + A (1 / C_BEP-H - 1) 274000 NPSHr / (Q^0.667 n^1.33) [-] on NPSH required, with m3/h.

    A is 0.5, of pumps with a side inlet, for all: safe for the others, which have 0.1.

    at_best : [-] head factor at best efficiency; where it is 1 the result is 1
    npsh_required, flow : [m], [m3/s] of the whole pump, with water at best efficiency.  speed : [rpm].
    Any shapes that broadcast.  Source: ANSI/HI 9.6.7 from memory, not checked against a copy [M].
    """
    rise = _A * (1 / np.asarray(at_best) - 1)
    size = 274000 * npsh_required / ((np.asarray(flow) * 3600) ** 0.667 * speed**1.33)
    return np.where(rise == 0, 1.0, 1 + rise * size)


def factors(pumps: Pumps, *, viscosity: Real) -> Factors:
    """Factors of c pumps, each at its own speed; all 1 where B <= 1, whatever the pump.

    viscosity : [m2/s] one, or (c,).  Source: as `parameter` [V]; NPSH as `npsh_factor` [M].
    """
    curves, best = pumps.curves, pumps.bep_flow
    inside = (best >= curves.start * (1 - _ROUNDING)) & (best <= curves.end * (1 + _ROUNDING)) & (best > 0)
    flow = np.where(inside, best, np.nan)
    head = _at(curves.head, curves.span, flow) / pumps.stages
    b = parameter(viscosity=viscosity, flow=flow, head=np.where(head > 0, head, np.nan), speed=pumps.speed)
    as_water = (b <= 1) | (np.isnan(b) & (np.asarray(viscosity) <= WATER_LIKE))
    cover = np.select(
        [
            as_water,
            np.isnan(b) | np.isnan(pumps.specific_speed),
            pumps.specific_speed > HIGHEST_SPECIFIC_SPEED,
            (b >= HIGHEST_B) | (np.asarray(viscosity) > HIGHEST_VISCOSITY),
        ],
        [Cover.COVERED, Cover.NO_BEST_FLOW, Cover.SPECIFIC_SPEED, Cover.B_TOO_HIGH],
        Cover.COVERED,
    ).astype(np.int8)
    held = np.where(as_water, 1.0, np.where(cover == Cover.COVERED, b, np.nan))
    at_best = flow_factor(held)
    need = _at(curves.npsh_required, curves.npsh_span, flow)
    return Factors(
        parameter=b,
        flow=at_best,
        efficiency=efficiency_factor(held),
        head=at_best,
        npsh=np.where(
            as_water, 1.0, npsh_factor(at_best=at_best, npsh_required=need, flow=flow, speed=pumps.speed)
        ),
        cover=cover,
    )


def corrected(pumps: Pumps, *, viscosity: Real) -> Pumps:
    """Bring c pumps, known with water, into a viscous liquid: whole curves, each station to its own place.

    Every flow takes the flow factor, each head the factor at its flow with water. Power follows from
    rho g Q H / eta. At no flow, where that says nothing, it takes the flow factor over the efficiency
    factor: an assumption of ours. The minimum flow stays, as no published rule was found. A pump with
    B <= 1 comes out as it was; one that the method does not cover has no head, efficiency, power or NPSH.

    viscosity : [m2/s] one, or (c,).  Returns c pumps; power still at 1000 kg/m3.
    Source: as `parameter`.
    """
    factor, curves = factors(pumps, viscosity=viscosity), pumps.curves
    places = np.linspace(0, 1, curves.head.shape[1]) ** 0.75
    best = np.where(pumps.bep_flow > 0, pumps.bep_flow, np.nan)
    fall = np.where(factor.head == 1, 0.0, (1 - factor.head) * (curves.span / best) ** 0.75)
    head = np.empty_like(curves.head)
    power = np.empty_like(curves.power)
    for rows in interpolate.blocks(len(pumps)):
        part = 1 - fall[rows, None] * places  # `head_factor` at every station
        np.multiply(curves.head[rows], part, out=head[rows])
        part *= (factor.flow[rows] / factor.efficiency[rows])[:, None]
        np.multiply(curves.power[rows], part, out=power[rows])
    flow = np.where(factor.cover == Cover.COVERED, factor.flow, 1.0)
    viscous = Curves(
        start=curves.start * flow,
        end=curves.end * flow,
        span=curves.span * flow,
        head=head,
        efficiency=curves.efficiency * factor.efficiency[:, None],
        power=power,
        npsh_required=curves.npsh_required * factor.npsh[:, None],
        npsh_span=curves.npsh_span * flow,
    )
    return replace(
        pumps, curves=viscous, bep_flow=pumps.bep_flow * flow, maximum_flow=pumps.maximum_flow * flow
    )


def needed(*, flow: Real, head: Real, factors: Factors, bep_flow: Floats) -> tuple[Floats, Floats]:
    """Where c pumps must stand with water to give a flow and a head in a viscous liquid.

    flow, head : [m3/s], [m] one, or (c,), in the liquid.  bep_flow : (c,) [m3/s] with water.
    Returns flows (c,) [m3/s] and heads (c,) [m] with water: NaN where the method does not cover the pump,
    a head of +inf so far past best efficiency that the liquid leaves no head.
    """
    water = flow / factors.flow
    left = head_factor(at_best=factors.head, share=water / bep_flow)
    none = left <= 0
    return water, np.where(none, np.inf, head / np.where(none, 1.0, left))


def _at(values: Floats, span: Floats, flow: Floats) -> Floats:
    """Read stations (c, k) that reach to `span` (c,) at one flow each; NaN past them or where it is NaN."""
    last = values.shape[1] - 1
    within = flow <= span * (1 + _ROUNDING)
    place = np.where(within, flow, 0.0) / span * last
    return np.where(within, interpolate.value_once(values, place, np.arange(len(values))), np.nan)
