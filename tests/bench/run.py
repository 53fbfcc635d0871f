"""Benchmark, by hand: `python -m tests.bench.run [help] [intersection] [screen] [workbook] [full] [size]`.

Every ratio is taken between two things timed in this one process or its children, the median of some
repeats of each in turn, since the speed of a machine varies more than what is measured here.
"""

from __future__ import annotations

import resource
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path

import numpy as np

from screener.case.read import read_case
from screener.catalog.compile import compile_table
from screener.catalog.read import read
from screener.changes.near import look_nearer
from screener.export import xlsx
from screener.files.document import load
from screener.header.branch import BranchCurves, branch_curves, take
from screener.header.left import Left
from screener.header.meet import Mark, meet
from screener.hydraulics.similarity import take as take_pumps
from screener.hydraulics.similarity import trimmed
from screener.hydraulics.wear import uniform
from screener.model.case import Case, Control, Drive, Liquid
from screener.model.curves import Pumps, PumpTable
from screener.screening.assess import CHUNK, Bench, set_up
from screener.screening.evaluate import fit
from screener.screening.shortlist import shortlist
from screener.view.blocks import Cell, Column, Heading, Screen, Table, Tone
from tests.bench import loop, synthetic

DEMO = Path(__file__).parents[2] / "catalogs" / "osier-bank"
MODELS = 100_000
SAMPLE = 300


def demo() -> Case:
    """The case of the demo."""
    table = compile_table(read([DEMO / "pumps"])[0])
    return read_case(load(DEMO / "case.toml"), table)


def everything() -> Case:
    """The demo with two liquids, two levels, a worn pump, and a pump that holds one duty by its speed."""
    plain = demo()
    thick = Liquid("silt water", np.nan, 1050.0, 20e-6, 1500.0, 4000.0, viscous=True)
    first, second = plain.installed
    loss = 0.03
    return replace(
        plain,
        liquids=(*plain.liquids, thick),
        levels=plain.levels[:2],
        duties=tuple(
            replace(duty, levels=(0,) if duty.rated else (1,), liquid=liquid, control=control)
            for duty, liquid, control in zip(
                plain.duties, (0, 0, 1), (Control.THROTTLED, Control.SPEED, Control.THROTTLED), strict=True
            )
        ),
        installed=(
            replace(first, drive=Drive(0.7, 1.0)),
            replace(second, head_loss=loss),
        ),
        as_new=plain.pumps,
        pumps=uniform(plain.pumps, loss=np.array([0.0, loss])),
    )


def seconds(work: Callable[[], object], repeats: int = 5) -> float:
    """Median time of some work."""
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def show(what: str, value: str, target: str = "", met: bool | None = None) -> None:
    """One line of the table."""
    print(
        f"{what:64} {value:>14}  {target:16} {'' if met is None else 'met' if met else 'MISSED'}", flush=True
    )


def start_up() -> None:
    """`screener --help`, and the demo's shortlist, as whole processes."""
    screener = str(Path(sys.executable).parent / "screener")
    shortlisted = [screener, "shortlist", str(DEMO / "case.toml")]
    pairs = (
        ("screener --help / import typer", [screener, "--help"], "import typer", 1.6),
        (
            "screener shortlist on the demo / import numpy, typer, rich",
            shortlisted,
            "import numpy, typer, rich",
            4.0,
        ),
    )
    for what, command, imports, most in pairs:
        base = [sys.executable, "-c", imports]
        turns = [(process(command), process(base)) for _ in range(15)]  # in turn: both meet the same machine
        ours, theirs = (statistics.median(times) for times in zip(*turns, strict=True))
        show(what, f"{ours / theirs:.2f}", f"at most {most}", ours / theirs <= most)


def process(command: list[str]) -> float:
    """Time of a whole process."""
    return seconds(lambda: subprocess.run(command, capture_output=True, check=True), 1)


def largest(table: PumpTable) -> Pumps:
    """Every model at its largest diameter."""
    count = len(table)
    return trimmed(table, model=np.arange(count), diameter=table.maximum, speed_ratio=np.ones(count))


def meet_all(chunks: list[BranchCurves], left: Left, installed: BranchCurves) -> None:
    """Meet one state with all curves."""
    for chunk in chunks:
        meet(chunk, left, installed)


def intersection(bench: Bench) -> float:
    """All curves with each state against the loop. Returns seconds for one curve and state.

    The loop reads the very same cubics (stations and slopes are given to it), as the usual monotone cubic
    of scipy differs from ours between stations; so the flows can be compared.
    """
    header = bench.header
    table = synthetic.table(MODELS, flow=(700.0, 2500.0), head=(36.0, 70.0))
    pumps = largest(table)
    curves = branch_curves(pumps.curves, [header.case.new_pump.branch])
    chunks = [take(curves, np.arange(at, min(at + CHUNK, MODELS))) for at in range(0, MODELS, CHUNK)]
    rows = np.arange(0, MODELS, MODELS // SAMPLE)
    sample = take(curves, rows)
    fast, slow, difference, compared = [], [], 0.0, 0
    for left in header.left:
        state = loop.network(header.branches, left)
        fast.append(seconds(partial(meet_all, chunks, left, header.branches), 3) / MODELS)
        start = time.perf_counter()
        flow = loop.meetings(sample, range(len(rows)), state)
        slow.append((time.perf_counter() - start) / len(rows))
        met = meet(sample, left, header.branches)
        both = (met.mark == Mark.RUNS) & ~np.isnan(flow)
        compared += int(both.sum())
        difference = max(difference, float(np.abs((met.flow - flow) / sample.end)[both].max()))
    ours, theirs = statistics.median(fast), statistics.median(slow)
    show("intersection of one curve with one state [us]", f"{ours * 1e6:.2f}")
    show("the loop [us]", f"{theirs * 1e6:.0f}")
    show("loop / intersection", f"{theirs / ours:.0f}", "at least 300", theirs / ours >= 300)
    show(
        f"largest difference of flow, of curve end ({compared} points)",
        f"{difference:.1e}",
        "below 1e-6",
        difference < 1e-6,
    )
    return ours


def screen(bench: Bench, case: Case, alone: float) -> None:
    """The whole screen against the loop, and against the intersection alone."""
    table = synthetic.table(MODELS)
    results = []
    whole = seconds(lambda: results.append(shortlist(case, table)), 3)
    result = results[-1]
    states = len(bench.header.states)
    pairs = result.screened * states
    reaching = len(result.best) / MODELS
    show("models that can reach the duty [%]", f"{100 * reaching:.1f}", "4 to 6", 0.04 <= reaching <= 0.06)
    show("candidates, pairs of candidate and state", f"{result.screened}, {pairs}")
    show("whole screen [s], of one pair [us]", f"{whole:.2f}, {whole / pairs * 1e6:.2f}")
    rows = np.linspace(0, len(result.best) - 1, SAMPLE).astype(np.int64)
    pumps = trimmed(
        table,
        model=result.best.model[rows],
        diameter=result.best.diameter[rows],
        speed_ratio=np.ones(len(rows)),
    )
    theirs = by_loop(bench, pumps) / len(rows) / states
    show("the loop, one pair [us]", f"{theirs * 1e6:.0f}")
    ratio = theirs / (whole / pairs)
    show("loop / screen", f"{ratio:.0f}", "at least 100", ratio >= 100)
    ratio = whole / pairs / alone
    show("screen / intersection alone", f"{ratio:.1f}", "at most 4", ratio <= 4)


def by_loop(bench: Bench, pumps: Pumps) -> float:
    """Seconds that the loop takes for some pumps in every state; curves and networks are made before."""
    header = bench.header
    known: dict[int, loop.Like] = {}
    for standing in header.standing:
        if id(standing) not in known:
            there = fit(header, pumps, standing.setting)
            known[id(standing)] = loop.Like(there.pumps, there.branches, standing.pumps)
    likes = [known[id(standing)] for standing in header.standing]
    networks = [
        loop.network(standing.branches, left)
        for standing, left in zip(header.standing, header.left, strict=True)
    ]
    start = time.perf_counter()
    loop.screen(header, likes, networks)
    return time.perf_counter() - start


def full(plain: Case) -> None:
    """Liquids, levels, speed and wear beside the plain case, corners of what is shown included."""
    table, case = synthetic.table(MODELS), everything()
    corners = []

    def closer() -> None:
        corners.append(look_nearer(shortlist(case, table), top=10))

    turns = [
        (
            seconds(lambda: shortlist(plain, table), 1),
            seconds(lambda: shortlist(case, table), 1),
            seconds(closer, 1),
        )
        for _ in range(3)
    ]
    simple, whole, near = (statistics.median(times) for times in zip(*turns, strict=True))
    show("two liquids, levels, wear, one variable speed / plain", f"{whole / simple:.1f}")
    result, bench = shortlist(case, table), set_up(case)
    readings = (bench, *bench.others)
    pairs = result.screened * len(bench.header.states) * len(readings)
    rows = np.linspace(0, len(result.best) - 1, SAMPLE).astype(np.int64)
    pumps = trimmed(
        table,
        model=result.best.model[rows],
        diameter=result.best.diameter[rows],
        speed_ratio=np.ones(len(rows)),
    )
    covered = [
        fit(bench.header, pumps, standing.setting).branches.low_head for standing in bench.header.standing
    ]
    pumps = take_pumps(pumps, np.flatnonzero(np.isfinite(covered).all(axis=0)))
    theirs = sum(by_loop(one, pumps) for one in readings) / len(pumps)
    theirs /= len(bench.header.states) * len(readings)
    ratio = theirs / (whole / pairs)
    show("the loop, one pair [us]", f"{theirs * 1e6:.0f}")
    show("loop / screen, all that included", f"{ratio:.0f}", "at least 80", ratio >= 80)
    show(
        "the same with corners of what is shown / plain",
        f"{near / simple:.1f}",
        "at most 6",
        near <= 6 * simple,
    )


def size() -> None:
    """Time and memory from 1,000 to 100,000 models, each in a process of its own."""
    for models in (1_000, 3_000, 10_000, 30_000, 100_000):
        command = [sys.executable, "-m", "tests.bench.run", "child", str(models)]
        answer = subprocess.run(command, capture_output=True, check=True, text=True).stdout.split()
        taken, memory = float(answer[0]), float(answer[1])
        show(
            f"{models} models: per model [us], peak memory [GB]",
            f"{taken / models * 1e6:.0f}, {memory:.2f}",
            "at most 1.5 GB",
            memory <= 1.5,
        )


def workbook() -> None:
    """A workbook of a ranked table with 5,000 rows, against xlsxwriter writing the bare numbers of it."""
    import io

    import xlsxwriter

    rows = np.random.default_rng(5).uniform(-100, 2000, (5_000, 20)).round(4).tolist()
    tones = [list(Tone)[number % len(Tone)] for number in range(20)]
    columns = [Column("pump", "pump", left=True)]
    columns += [Column(f"figure_{number}", f"figure {number}", "m") for number in range(20)]
    cells = [
        [
            Cell(f"pump {number}", f"pump {number}"),
            *(Cell(f"{value:.{place % 3}f}", value, tones[place]) for place, value in enumerate(row)),
        ]
        for number, row in enumerate(rows)
    ]
    table = Table(columns, cells)
    ranked = Screen([Heading("RANKED"), table], table, {})

    def bare() -> None:
        book = xlsxwriter.Workbook(io.BytesIO(), {"in_memory": True})
        sheet = book.add_worksheet()
        for number, row in enumerate(rows):
            for place, value in enumerate(row):
                sheet.write_number(number, place, value)
        book.close()

    turns = [(seconds(lambda: xlsx.render(ranked), 1), seconds(bare, 1)) for _ in range(5)]
    ours, theirs = (statistics.median(times) for times in zip(*turns, strict=True))
    what = "workbook of 5,000 rows / bare xlsxwriter numbers"
    show(what, f"{ours / theirs:.2f}", "at most 2", ours / theirs <= 2)


def child(models: int) -> None:
    """Screen a catalog of some size; prints seconds and peak memory in GB."""
    case, table = demo(), synthetic.table(models)
    taken = seconds(lambda: shortlist(case, table), 3)
    print(taken, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 2**20)


def main(wanted: list[str]) -> None:
    """Run what is wanted, or everything."""
    np.seterr(all="ignore")
    every = not wanted
    if wanted[:1] == ["child"]:
        child(int(wanted[1]))
        return
    case = demo()
    bench = set_up(case)
    if every or "help" in wanted:
        start_up()
    alone = intersection(bench) if every or {"intersection", "screen"} & set(wanted) else np.nan
    if every or "screen" in wanted:
        screen(bench, case, alone)
    if every or "workbook" in wanted:
        workbook()
    if every or "full" in wanted:
        full(case)
    if every or "size" in wanted:
        size()


if __name__ == "__main__":
    main(sys.argv[1:])
