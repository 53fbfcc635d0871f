"""Results as plain data, field by field: what the json, the csv and the data frame hold."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from screener import ranking, units
from screener.criteria import criteria
from screener.model.case import Case, WearFit
from screener.model.curves import PumpTable
from screener.model.finding import Candidates, Outcome, Verdict
from screener.model.run import Kind, Run, in_state
from screener.model.tables.trim_laws import ISO_9906
from screener.screening.assess import Bench
from screener.screening.reach import Reason
from screener.screening.shortlist import Shortlist
from screener.version import __version__
from screener.view import names
from screener.view.display import Display, tidy
from screener.view.findings import Found, found, unit_of

VERDICTS = {Verdict.ACCEPTED: "accepted", Verdict.CONDITIONAL: "conditional", Verdict.REJECTED: "rejected"}

CANDIDATE_KEYS = (
    "pump",
    "title",
    "construction",
    "source",
    "verdict",
    "diameter",
    "wanted_diameter",
    "speed",
    "efficiency_at_duty",
    "restored_verdict",
    "restored_score",
    "restored_shutoff_match",
    "restored_load_share",
    "score",
    "efficiency",
    "power",
    "energy_mwh_per_year",
    "energy_kwh_per_m3",
    "shutoff_match",
    "load_share",
    "lowest_flow_of_best",
    "npsh_ratio",
    "motor",
)
"""Figures of a candidate that stand in one row of a table."""

REASONS = {
    Reason.HEAD_TOO_LOW: "head too low",
    Reason.CURVE_TOO_SHORT: "flow past the end of the curve",
    Reason.TOO_LARGE: "too large at the smallest impeller",
    Reason.WRONG_SPEED: "speed that this supply does not give",
    Reason.TOO_VISCOUS: "outside the viscosity method",
}

WEAR_READINGS = {
    WearFit.Reading.NEITHER: "neither",
    WearFit.Reading.LOSS: "lower curve",
    WearFit.Reading.LEAK: "leakage",
}

WEAR_CAUTIONS = {
    WearFit.Caution.FEW_POINTS: "fewer than three points: an error in one of them goes unseen",
    WearFit.Caution.SHUTOFF_INFERRED: "shutoff was not measured: the head there, which decides whether the "
    "pump is held shut, is inferred",
    WearFit.Caution.NARROW: "the points span less than 20 % of the curve: they hardly tell a lower curve "
    "from leakage",
    WearFit.Caution.ABOVE_NEW: "a point lies above the curve as new by more than the error of reading",
    WearFit.Caution.CURVE_ENDS: "the curve ends before leakage could explain the points: it is taken as "
    "large as the curve allows",
}

CAUTIONS = (
    "Screening only: confirm every figure with the manufacturer's certified curve.",
    "Local codes and licensed practice govern. No surge, vibration, relief or electrical study is made.",
)


@dataclass(frozen=True, slots=True)
class Origin:
    """Where a result came from: files read, as (name, sha256)."""

    files: Sequence[tuple[str, str]] = ()


def head(bench: Bench, kind: str, origin: Origin) -> dict[str, Any]:
    """What every json begins with."""
    case = bench.header.case
    return {
        "format": f"{kind}/1",
        "tool": {"name": "screener", "version": __version__},
        "title": case.title,
        "date": case.date or None,
        "inputs": [{"file": file, "sha256": digest} for file, digest in origin.files],
        "units": dict(case.display),
        "cautions": list(CAUTIONS),
    }


def candidate(result: Shortlist, display: Display, row: int) -> dict[str, Any]:
    """One candidate of the shortlist, with its findings."""
    table, best = result.table, result.best
    model = int(best.model[row])
    return {
        "pump": table.ids[model],
        "title": table.titles[model],
        "construction": table.constructions[model],
        "source": table.sources[model],
        "verdict": VERDICTS[Verdict(int(best.verdict[row]))],
        "diameter": display.number("length", best.diameter[row]),
        "wanted_diameter": display.number("length", result.reach.wanted[model]),
        "speed": tidy(float(table.speed[model] * result.reach.speed_ratio[model])),
        "efficiency_at_duty": _percent(result.duty_efficiency[row]),
        **_restored(result, row),
        **figures(result.bench, display, best, row),
        "findings": [finding(item, display) for item in found(result.bench, display, best.findings, row)],
    }


def _restored(result: Shortlist, row: int) -> dict[str, Any]:
    """The same candidate beside installed pumps as new; None where none is worn."""
    if result.restored is None:
        return dict.fromkeys(
            ("restored_verdict", "restored_score", "restored_shutoff_match", "restored_load_share")
        )
    figures = result.restored.figures
    return {
        "restored_verdict": VERDICTS[Verdict(int(result.restored.verdict[row]))],
        "restored_score": tidy(float(figures.score[row])),
        "restored_shutoff_match": _percent(figures.shutoff[row]),
        "restored_load_share": _percent(figures.share[row]),
    }


def figures(bench: Bench, display: Display, candidates: Candidates, row: int) -> dict[str, Any]:
    """What one candidate costs and gives."""
    f = candidates.figures
    trips = ranking.trips(bench.header.conditions)
    volume, energy = float(f.volume[row]), float(f.energy[row])
    return {
        "score": tidy(float(f.score[row])),
        "efficiency": _percent(f.efficiency[row]),
        "power": display.number("power", f.power[row]),
        "energy_mwh_per_year": tidy(energy / 3.6e9),
        "energy_kwh_per_m3": tidy(kwh_per_m3(energy, volume)),
        "shutoff_match": _percent(f.shutoff[row]),
        "load_share": _percent(f.share[row]),
        "lowest_flow_of_best": _percent(candidates.lowest_share[row]),
        "npsh_ratio": tidy(float(candidates.npsh[row])),
        "motor": display.number("power", candidates.motor[row]),
        "firm_flow": [
            {
                "state": names.after_trip(bench.header.case, bench.header.states[state], new=lost),
                "delivered": _percent(f.firm[row, place]),
            }
            for place, (state, lost) in enumerate(trips)
        ],
    }


def kwh_per_m3(energy: float, volume: float) -> float:
    """Energy [J] for each cubic metre, NaN where nothing is delivered."""
    return energy / 3.6e6 / volume if volume > 0 else np.nan


def finding(item: Found, display: Display) -> dict[str, Any]:
    """One finding."""
    return {
        "criterion": item.criterion.name,
        "outcome": item.verdict.value,
        "observed": item.value.value,
        "limit": item.limit.value,
        "unit": unit_of(item.criterion, display),
        "shortfall": tidy(item.shortfall) if item.outcome == Outcome.FAIL else None,
        "pump": item.pump,
        "where": item.where,
        "already_so_today": item.already,
        "missing": item.needs if item.outcome == Outcome.NOT_ASSESSED else None,
    }


def limits(bench: Bench, display: Display) -> list[dict[str, Any]]:
    """Every limit used, with its source."""
    rows = []
    for criterion in criteria():
        for name, limit in criterion.limits.items():
            used = bench.limits[criterion.name][name]
            shown = Limited(criterion.unit, limit.unit)
            rows.append(
                {
                    "criterion": criterion.name,
                    "limit": name,
                    "value": shown.number(display, used),
                    "unit": shown.unit(display),
                    "source": limit.source if used == limit.default else "set in the case",
                }
            )
    return rows


@dataclass(frozen=True, slots=True)
class Limited:
    """The unit of a limit: its own, else that of its criterion."""

    criterion: str
    own: str

    def unit(self, display: Display) -> str:
        """Name of the unit to show it in."""
        name = self.own or self.criterion
        quantity = _quantity(name)
        return display.unit(quantity) if quantity in display.names() else ("" if name == "-" else name)

    def number(self, display: Display, value: float) -> float | None:
        """The limit in that unit."""
        name = self.own or self.criterion
        quantity = _quantity(name)
        if quantity in display.names():
            return display.number(quantity, value)
        return tidy(value * 100 if name == "%" else value)


def installed(case: Case, display: Display) -> list[dict[str, Any]]:
    """The installed pumps, each with the head that it lost and how that was found."""
    return [
        {
            "pump": pump.tag,
            "title": pump.title,
            "head_loss": _percent(pump.head_loss),
            "wear": None if pump.wear is None else _wear(pump.wear, display),
        }
        for pump in case.installed
    ]


def _wear(fit: WearFit, display: Display) -> dict[str, Any]:
    return {
        "points": fit.points,
        "reading_error": _percent(fit.reading),
        "head_loss": _percent(fit.loss),
        "head_loss_uncertainty": _percent(fit.loss_error),
        "head_loss_residual": display.number("head", round(fit.loss_residual, 9)),
        "leakage": display.number("flow", fit.leak),
        "leakage_uncertainty": display.number("flow", fit.leak_error),
        "leakage_residual": display.number("head", round(fit.leak_residual, 9)),
        "nearer": WEAR_READINGS[fit.prefers],
        "cautions": wear_cautions(fit),
    }


def wear_cautions(fit: WearFit) -> list[str]:
    """What the points of a fit leave open, in words."""
    return [words for caution, words in WEAR_CAUTIONS.items() if caution in fit.cautions]


def _quantity(unit: str) -> str:
    """Quantity of a unit, "" where it is shown as it is: kelvin stands for a difference of temperature."""
    if unit == "K":
        return ""
    return units.dimension_of(unit) or ""


def states(bench: Bench, display: Display, run: Run, *, today: bool = False) -> list[dict[str, Any]]:
    """What one candidate, or today's header without one, does in every state."""
    row = 0
    case = bench.header.case
    result = []
    for place, state in enumerate(bench.header.states):
        pumps = [
            {
                "pump": names.pump(case, column),
                "runs": bool(run.conditions.runs[place, column]) and not (today and column == 0),
                "flow": display.number("flow", run.flow[row, place, column]),
                "flow_of_best": _percent(
                    run.flow[row, place, column] / in_state(run.bounds.best, place)[row, column]
                ),
                "speed": tidy(_speed(bench, run, place, column)),
                "past_end": bool(np.isposinf(run.flow[row, place, column])),
                "not_measured": bool(np.isneginf(run.flow[row, place, column])),
                "head": display.number("head", run.head[row, place, column]),
                "power": display.number("power", run.power[row, place, column]),
                "efficiency": _percent(run.efficiency[row, place, column]),
                "npsh_available": display.number("npsh", run.npsh_available[row, place, column]),
                "npsh_required": display.number("npsh", run.npsh_required[row, place, column]),
            }
            for column in range(run.flow.shape[2])
        ]
        result.append(
            {
                "state": names.where(case, state),
                "duty": case.duties[state.duty].name,
                "level": names.level(case, state),
                "liquid": names.liquid(case, state),
                "kind": Kind(state.kind).name.lower().replace("_", " "),
                "running": names.combination(case, state.running, 0 if today else state.new),
                "asked": display.number("flow", state.asked),
                "header_head": display.number("head", run.header[row, place]),
                "total_flow": display.number("flow", run.total[row, place]),
                "pumps": pumps,
            }
        )
    return result


def _speed(bench: Bench, run: Run, place: int, column: int) -> float:
    """Speed of one pump in one state of the first candidate [rpm], NaN where it does not run."""
    if np.isnan(run.flow[0, place, column]):
        return np.nan
    at_load = run.pumps.speed[0] if column == 0 else bench.header.case.pumps.speed[column - 1]
    return float(at_load * in_state(run.bounds.speed, place)[0, column])


def _percent(value: float) -> float | None:
    return tidy(100 * float(value)) if np.isfinite(value) else None


def power_is(case: Case, *, new: bool = True) -> str:
    """What powers are: "shaft", or "supply" where efficiencies of motor and drive are stated, or "mixed".

    new : whether the new pump is among those that run
    """
    drives = [*([case.new_pump.drive] if new else []), *(pump.drive for pump in case.installed)]
    stated = [drive.motor_efficiency * drive.drive_efficiency != 1 for drive in drives]
    return "supply" if all(stated) else "mixed" if any(stated) else "shaft"


def energy_words(case: Case) -> str:
    """What energies are: at the shafts, or drawn where the efficiency of a motor or drive is stated."""
    return "shaft energy" if power_is(case) == "shaft" else "energy drawn"


def trim_law_in_force(table: PumpTable) -> list[str]:
    """What must be said of a catalog that the case puts under one trim law; nothing where it does not."""
    if not table.trim_law:
        return []
    lines = [f"Every pump is trimmed by the law of the case: {table.trim_law}."]
    keep = int(np.sum(table.law_inlet == 0))
    if table.trim_law == ISO_9906 and keep:
        lines.append(f"{keep} of {len(table)} state no inlet diameter for it and keep their own law.")
    return lines


def rows(items: Sequence[Mapping[str, Any]]) -> list[dict[str, Any]]:
    """The same rows without what is nested in them."""
    return [
        {key: value for key, value in item.items() if not isinstance(value, list | dict)} for item in items
    ]
