"""The fields of a data sheet by group, in the order in which a reader checks them."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from screener.header.setting import speed_limits
from screener.hydraulics.viscosity import Cover, factors
from screener.model.case import Liquid
from screener.model.curves import PumpTable
from screener.model.finding import Outcome, Verdict
from screener.model.run import in_state
from screener.model.tables.trim_laws import EQUAL_EXPONENTS, ISO_9906, NAMES, exponents
from screener.units import from_si
from screener.version import __version__
from screener.view import data, names, speeds
from screener.view.blocks import Cell
from screener.view.datasheet_fields import CASE, CATALOG, HI, NO_SHUTOFF, RATED, Field, Writer, at
from screener.view.display import percent, plain, tidy
from screener.view.findings import found, unit_of
from screener.view.liquids import COVERS

BESIDE = "pumps beside it"


@dataclass(frozen=True, slots=True)
class Group:
    """Fields that are checked together."""

    name: str
    fields: tuple[Field, ...]


def groups(w: Writer) -> list[Group]:
    """Every field of a sheet."""
    return [Group(name, tuple(fields(w))) for name, fields in GROUPS.items()]


def duty(w: Writer) -> Iterator[Field]:
    """What it is asked to do, and what it does."""
    sheet, places, conditions = w.sheet, w.sheet.places, w.run.conditions
    yield w.word("rated_duty", "rated duty", names.where(w.case, w.state), CASE, long=True)
    yield w.word("count", "identical new pumps", w.case.new_pump.count, CASE)
    flow = sheet.need.flow
    head = sheet.need.head if np.isfinite(flow) else np.nan
    yield w.amount("capacity_asked", "capacity asked of each", "flow", flow, "left by the others")
    yield w.amount("head_asked", "head asked of each", "head", head, "system and its branch")
    yield from _point(w, "rated", "rated", w.rated, RATED)
    difference = sheet.discharge - sheet.suction
    yield w.amount("differential_pressure", "differential pressure, rated", "pressure", difference, RATED)
    usual = w.place(places.normal, "not every duty states hours", before="most hours: ")
    yield from _point(w, "normal", "normal", places.normal, usual)
    yield from _point(w, "peak", "peak", places.peak, w.place(places.peak))
    yield from _point(w, "minimum", "minimum", places.lowest, w.place(places.lowest))
    yield from _point(w, "runout", "run-out", places.runout, w.place(places.runout))
    share = np.where(conditions.runs[:, 0], conditions.share_of_hours, 0.0)
    hours = float((share * conditions.hours)[share > 0].sum())
    yield w.number("hours", "hours of the year", plain(hours, 0), "h", CASE)


def _point(w: Writer, key: str, title: str, place: int, source: str) -> Iterator[Field]:
    yield w.amount(f"capacity_{key}", f"capacity, {title}", "flow", at(w.run.flow, place), source)
    yield w.amount(f"head_{key}", f"head, {title}", "head", at(w.run.head, place), source)


def header(w: Writer) -> Iterator[Field]:
    """What it runs on, and beside whom."""
    start, f = w.sheet.places.start, w.explained.judged.candidates.figures
    wanted, stands = float(w.run.conditions.wanted_head[w.rated]), float(w.run.header[0, w.rated])
    shutoff = float(w.run.ratings.header_shutoff[0, 0])
    mismatch, share = percent(float(f.shutoff[0]), 1, sign=True), percent(float(f.share[0]), 1)
    yield w.word("beside", "runs beside", names.combination(w.case, w.state.running), RATED, long=True)
    yield w.amount("header_flow", "header flow asked", "flow", w.state.asked, RATED)
    yield w.amount("header_head", "header head", "head", stands, RATED)
    yield w.amount("system_head", "head that the system takes", "head", wanted, RATED)
    yield w.amount("static_head", "static head", "head", w.state.static, RATED)
    yield w.amount(
        "header_shutoff_head", "shutoff head at the header", "head", shutoff, w.curve(), NO_SHUTOFF
    )
    opens = at(w.run.start_header, start)
    yield w.amount("start_head", "header head at its start", "head", opens, w.place(start))
    yield w.number("shutoff_match", "shutoff match, worst", mismatch, "%", BESIDE)
    yield w.number("load_share", "load share, worst", share, "points", BESIDE)
    allowed = w.case.system.allowable_pressure
    yield w.pressure("header_allowable_pressure", "allowable pressure, header", allowed, CASE)


def suction(w: Writer) -> Iterator[Field]:
    """Pressures and NPSH."""
    sheet, places, level = w.sheet, w.sheet.places, w.case.levels[w.state.level]
    air, above = w.case.atmospheric_pressure, level.suction_head + w.case.new_pump.branch.suction_head
    yield w.pressure("atmospheric_pressure", "atmosphere", air, CASE, kind="absolute")
    yield w.amount("suction_head", "suction surface over datum", "head", above, f"case, {level.name}")
    yield w.word("npsh_datum", "datum of NPSH", "", "", "not stated; as the suction heads")
    inlet = w.place(places.suction, before="no flow: ")
    outlet = w.place(places.discharge, before="shutoff: ")
    low, high = sheet.highest_suction, sheet.highest_discharge
    yield w.pressure("suction_pressure_rated", "suction pressure, rated", sheet.suction, RATED)
    yield w.pressure("suction_pressure_highest", "suction pressure, highest", low, inlet)
    yield w.pressure("discharge_pressure_rated", "discharge pressure, rated", sheet.discharge, RATED)
    yield w.pressure("discharge_pressure_highest", "discharge pressure, highest", high, outlet, NO_SHUTOFF)
    yield from _npsh(w, "rated", "rated", w.rated, RATED)
    yield from _npsh(w, "lowest", "tightest", places.tightest, w.place(places.tightest))


def _npsh(w: Writer, key: str, title: str, place: int, source: str) -> Iterator[Field]:
    given, taken = at(w.run.npsh_available, place), at(w.run.npsh_required, place)
    yield w.amount(f"npsh_available_{key}", f"NPSH available, {title}", "npsh", given, source)
    yield w.amount(f"npsh_required_{key}", f"NPSH required, {title}", "npsh", taken, source)
    yield w.amount(f"npsh_margin_{key}", f"NPSH margin, {title}", "npsh", given - taken, source)
    yield w.number(f"npsh_ratio_{key}", f"NPSHa/NPSHr, {title}", plain(given / taken, 2), "", source)


def machine(w: Writer) -> Iterator[Field]:
    """The pump and its curve."""
    table, model, ratings, curve = w.explained.table, w.explained.model, w.run.ratings, w.curve()
    place = w.case.new_pump
    yield w.word("pump", "pump", table.ids[model], CATALOG, long=True)
    yield w.word("construction", "construction", table.constructions[model], CATALOG, long=True)
    yield w.word("stages", "stages", int(table.stages[model]), CATALOG)
    yield w.word("eyes", "impeller eyes", int(table.eyes[model]), CATALOG)
    at_load = float(w.pumps.speed[0])
    told = "case, supply and slip" if np.isfinite(place.frequency + place.slip) else CATALOG
    rpm = at_load * float(in_state(w.run.bounds.speed, w.rated)[0, 0])
    yield w.number("speed", "speed at load", plain(at_load, 0), "rpm", told)
    yield w.number("speed_rated", "speed, rated", plain(rpm, 0), "rpm", RATED)
    yield w.amount("diameter", "impeller, rated", "length", w.pumps.diameter[0], w.trim())
    yield w.amount("diameter_maximum", "impeller, maximum", "length", w.pumps.maximum[0], CATALOG)
    yield w.amount("diameter_minimum", "impeller, minimum", "length", w.pumps.minimum[0], CATALOG)
    shutoff, summit = float(ratings.shutoff[0, 0]), float(ratings.summit[0, 0])
    turned = float(in_state(w.run.bounds.speed, w.rated)[0, 0])
    rise = percent(shutoff * turned**2 / at(w.run.head, w.rated) - 1, 1)
    yield w.amount("shutoff_head", "shutoff head", "head", shutoff, curve, NO_SHUTOFF)
    yield w.amount("highest_head", "highest head of the curve", "head", summit, curve, NO_SHUTOFF)
    unknown = NO_SHUTOFF if np.isnan(shutoff) else ""
    yield w.number("rise_to_shutoff", "rise to shutoff", rise, "%", RATED, unknown)
    efficiency = percent(at(w.run.efficiency, w.rated), 1)
    yield w.number("efficiency_rated", "efficiency, rated", efficiency, "%", RATED)
    yield from _regions(w, curve)
    for key, title, value, per in (
        ("specific_speed", "specific speed", w.pumps.specific_speed, "stage and eye"),
        ("suction_specific_speed", "suction specific speed", w.pumps.suction_specific_speed, "eye"),
    ):
        cell = plain(float(value[0]), 1)
        yield w.number(key, title, cell, "rpm, m3/s, m", f"largest, per {per}")
    allowed = float(ratings.allowable_pressure[0, 0])
    yield w.pressure("allowable_pressure", "allowable pressure, pump", allowed, CATALOG)


def _regions(w: Writer, curve: str) -> Iterator[Field]:
    """Flows between which it may run."""
    sheet, ratings = w.sheet, w.run.ratings
    best = float(ratings.bep_flow[0, 0])
    share = percent(at(w.run.flow, w.rated) / float(in_state(w.run.bounds.best, w.rated)[0, 0]), 1)
    yield w.amount("bep_flow", "flow of best efficiency", "flow", best, curve, "not in the catalog")
    yield w.number("share_of_bep", "share of best efficiency", share, "%", RATED)
    for key, ends, source in (
        ("preferred", sheet.preferred, "limits of region"),
        ("allowable", sheet.allowable, CATALOG),
    ):
        for side, end in zip(("low", "high"), ends, strict=True):
            told = f"{source}, {100 * end:.0f} % of best" if np.isfinite(end * best) else source
            yield w.amount(f"{key}_{side}", f"{key} region, {side}", "flow", end * best, told)
    yield w.amount("curve_end", "end of the curve", "flow", sheet.base.curves.end[0], curve)
    kelvin = w.bench.limits["minimum-flow"]["temperature_rise"]
    stable, thermal = float(ratings.minimum_flow[0, 0]), sheet.thermal_minimum
    heat = f"curve at load, rise of {kelvin:g} K"
    yield w.amount("minimum_flow_stable", "minimum flow, stable", "flow", stable, CATALOG)
    yield w.amount("minimum_flow_thermal", "minimum flow, thermal", "flow", thermal, heat)
    flows = [float(need.bypass) for need in sheet.bypasses]
    largest = max(flows, key=np.nan_to_num) if flows else 0.0 if sheet.bypass is False else np.nan
    where = w.place(sheet.bypasses[flows.index(largest)].state) if flows else "every duty"
    known = "" if sheet.bypass is None else "yes" if sheet.bypass else "no"
    yield w.word("bypass_needed", "bypass needed", known, where)
    yield w.amount("bypass_flow", "bypass flow needed", "flow", largest, where)
    set_ = max((item.bypass[0] for item in w.case.duties if item.bypass), default=0.0)
    yield w.amount("bypass_set", "bypass flow set", "flow", set_, CASE)


def driver(w: Writer) -> Iterator[Field]:
    """Power, motor and speeds."""
    sheet, place, drive = w.sheet, w.sheet.places.strongest, w.case.new_pump.drive
    power, largest, motor = (
        at(w.run.power, w.rated),
        at(w.run.power, place),
        float(w.run.ratings.motor[0, 0]),
    )
    series, allowed = w.case.new_pump.motor_series, float(w.pumps.maximum_power[0])
    yield w.amount("power_rated", "shaft power, rated", "power", power, RATED)
    yield w.amount("power_largest", "shaft power, largest", "power", largest, w.place(place))
    yield w.amount("power_shutoff", "shaft power at shutoff", "power", sheet.shutoff_power, CATALOG)
    yield w.amount("power_allowed", "shaft power allowed", "power", allowed, CATALOG)
    rule = f"ISO 13709 bands, {series} series"
    none = f"none of the {series} series is large enough" if np.isposinf(motor) else ""
    stamped = w.display.nameplate(motor)
    yield w.number("motor", "motor nameplate", stamped, w.display.unit("power"), rule, none)
    size = motor if np.isfinite(motor) else np.nan
    yield w.number("motor_load_rated", "motor load, rated", percent(power / size, 1), "%", RATED)
    yield w.number(
        "motor_load_largest", "motor load, largest", percent(largest / size, 1), "%", w.place(place)
    )
    for key, value in (("motor", drive.motor_efficiency), ("drive", drive.drive_efficiency)):
        stated = percent(value, 1) if value != 1 else Cell("")
        yield w.number(f"{key}_efficiency", f"efficiency of {key}", stated, "%", CASE)
    yield w.number("frequency", "supply frequency", plain(w.case.new_pump.frequency, 1), "Hz", CASE)
    for key, ratio in zip(("lowest", "highest"), speed_limits(w.pumps, [drive]), strict=True):
        cell = plain(float(ratio[0] * w.pumps.speed[0]) if drive.varies else np.nan, 0)
        told = "case and catalog"
        yield w.number(f"speed_{key}", f"speed range, {key}", cell, "rpm", told, "fixed speed")
    for item in speeds.of_new(w.bench, w.run):
        where = w.place(item.state)
        for key, title, value in (
            ("speed_held", "that holds", item.now),
            ("speed_opening", "to open its valve", item.opening),
            ("speed_least", "of minimum flow", item.least),
        ):
            cell = plain(value * item.speed, 0)
            yield w.number(key, f"speed {title}", cell, "rpm", where, of=where)


def liquid(w: Writer) -> Iterator[Field]:
    """Properties of every liquid that it pumps, and what viscosity makes of it."""
    states, runs = w.bench.header.states, w.run.conditions.runs[:, 0]
    for row in sorted({state.liquid for state, new in zip(states, runs, strict=True) if new}):
        yield from _properties(w, w.case.liquids[row])


def _properties(w: Writer, pumped: Liquid) -> Iterator[Field]:
    display, name = w.display, pumped.name
    warm = display.number("temperature", pumped.temperature + 273.15)
    vapour = display.number("pressure", pumped.vapour_pressure)
    for key, cell, unit in (
        ("temperature", _short(warm), display.unit("temperature")),
        ("density", plain(pumped.density, 1), "kg/m3"),
        ("viscosity", plain(float(from_si(pumped.viscosity, "cSt")), 2), "cSt"),
        ("vapour_pressure", _short(vapour), f"{display.unit('pressure')} absolute"),
        ("heat_capacity", plain(pumped.heat_capacity / 1000, 3), "kJ/(kg K)"),
    ):
        yield w.number(key, f"{key.replace('_', ' ')}, {name}", cell, unit, CASE, of=name)
    if not pumped.viscous:
        return
    factor = factors(w.pumps, viscosity=pumped.viscosity)
    why = COVERS[Cover(int(factor.cover[0]))]
    for key, title, values in (
        ("viscosity_b", "B", factor.parameter),
        ("viscosity_c_q", "C_Q", factor.flow),
        ("viscosity_c_h", "C_H at best", factor.head),
        ("viscosity_c_eta", "C_eta", factor.efficiency),
        ("viscosity_c_npsh", "C_NPSH at best", factor.npsh),
    ):
        yield w.number(key, f"{title}, {name}", plain(float(values[0]), 3), "", HI, why, of=name)


def _short(value: float | None) -> Cell:
    """Four digits of a number that may be of any size."""
    return Cell("") if value is None else Cell(f"{value:.4g}", tidy(value))


def sources(w: Writer) -> Iterator[Field]:
    """How far figures may be off, and where they are from."""
    table, model, given = w.explained.table, w.explained.model, w.case.tolerance
    lower, fit = float(w.pumps.trim_uncertainty[0]), w.case.system.fit_deviation
    grade = percent(float(w.pumps.head_tolerance[0]), 1)
    yield w.word("curve_source", "source of the curve", table.sources[model], CATALOG, long=True)
    own = law(table, model) if np.isfinite(w.nearest()[0]) else ""
    by_case = table.trim_law and own.startswith(table.trim_law)
    yield w.word("trim_law", "trim law", own, CASE if by_case else CATALOG, long=True)
    yield w.amount("tested_diameter", "nearest tested impeller", "length", w.nearest()[0], CATALOG)
    yield w.number("from_test", "distance from a test", percent(w.nearest()[1], 1), "%", CATALOG)
    yield w.number("head_tolerance", "head tolerance, plus or minus", grade, "%", CATALOG)
    yield w.number("trim_uncertainty", "head lower by the trim, up to", percent(lower, 1), "%", "trim law")
    yield w.number("reading_error", "reading error, plus or minus", percent(given.reading, 1), "%", CASE)
    yield w.amount("trim_tolerance", "impeller error, plus or minus", "length", given.trim, CASE)
    yield w.number(
        "system_tolerance", "friction error, plus or minus", percent(given.system_curve, 1), "%", CASE
    )
    yield w.amount("system_fit", "system curve off its points", "head", fit, CASE, "no points measured")


def law(table: PumpTable, model: int) -> str:
    """The trim law of one model in words."""
    flow, head = float(table.flow_exponent[model]), float(table.head_exponent[model])
    if table.law_inlet[model] > 0:
        return ISO_9906
    if flow == head:
        return f"{EQUAL_EXPONENTS}, {head:g}"
    named = [name for name in NAMES if name != ISO_9906 and exponents(name) == (flow, head)]
    return named[0] if named else f"exponents {flow:g} and {head:g}"


def findings(w: Writer) -> Iterator[Field]:
    """The verdict, and every criterion that does not simply pass."""
    candidates = w.explained.judged.candidates
    verdict = data.VERDICTS[Verdict(int(candidates.verdict[0]))]
    yield w.word("verdict", "verdict", verdict, "every state and trip")
    items = found(w.bench, w.display, candidates.findings, 0)
    for item in sorted(items, key=lambda item: -item.outcome):
        if item.outcome == Outcome.PASS:
            continue
        said = "" if item.value.value is not None else item.value.text
        told = ", ".join(text for text in (said, item.limit.text, item.pump, item.where) if text)
        missing = f"needs {item.needs}" if item.outcome == Outcome.NOT_ASSESSED else told
        words = item.verdict.text
        yield w.number(
            words.lower().replace(" ", "_"),
            f"{words}: {item.criterion.name}",
            item.value,
            unit_of(item.criterion, w.display),
            told,
            missing,
            of=item.criterion.name,
        )


def revision(w: Writer) -> Iterator[Field]:
    """To be filled in by hand."""
    yield w.word("revision", "revision", "", "")
    yield w.word("revision_date", "date", w.case.date, CASE)
    yield w.word("revision_by", "by", f"screener {__version__}", "this tool")
    yield w.word("revision_checked", "checked", "", "")
    yield w.word("revision_description", "description", "", "")


GROUPS: dict[str, Callable[[Writer], Iterator[Field]]] = {
    "duty": duty,
    "header": header,
    "suction": suction,
    "machine": machine,
    "driver": driver,
    "liquid": liquid,
    "tolerance and sources": sources,
    "findings": findings,
    "revision": revision,
}
