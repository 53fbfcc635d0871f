"""How likely candidates are to pass, to blocks, a cell and data."""

from __future__ import annotations

from typing import Any

from screener.changes.sampling import Sampled
from screener.criteria import criteria
from screener.screening.assess import Bench
from screener.view.blocks import Block, Cell, Heading, Lines
from screener.view.display import Display, percent, tidy

LABEL = "probability under these assumptions"


def sampling(bench: Bench, display: Display, result: Sampled, row: int = 0) -> list[Block]:
    """The probability that one candidate passes, what fails most often, and what was assumed."""
    lines = [f"It passes every criterion in {_share(result, row)} of {result.samples} draws."]
    if result.criterion[row] >= 0:
        share = percent(result.share[row], 1).text
        lines.append(f"What fails most often is {_criterion(result, row)}, in {share} % of them.")
    if result.open[row] > 0:
        lines.append(
            f"In {percent(result.open[row], 1).text} % nothing fails, but something could not be judged; "
            "those count as passed."
        )
    heading = Heading("HOW LIKELY IT IS TO PASS", LABEL)
    return [heading, Lines(lines), Lines([assumptions(bench, display, result)])]


def likely(result: Sampled, row: int) -> Cell:
    """The probability that a candidate passes, in percent with its sampling error."""
    text = {0.0: "none", 1.0: "all"}.get(float(result.probability[row]), _percent(result, row))
    return Cell(text, tidy(100 * float(result.probability[row])))


def assumptions(bench: Bench, display: Display, result: Sampled) -> str:
    """What the probability rests on, in one line."""
    tolerance = bench.header.case.tolerance
    unknown = percent(bench.limits["start"]["unknown_tolerance"], 1).text
    friction = percent(tolerance.system_curve, 1).text
    return (
        f"{LABEL.capitalize()}, ± the sampling error of {result.samples} draws: one factor on each head "
        f"curve, over its whole flow range, within its tolerance ({unknown} % where none is stated), lower "
        f"still where no test vouches for a trim; friction of the system within {friction} %, new impeller "
        f"within {display.full('length', tolerance.trim)}; each limit taken as two standard deviations of a "
        "normal distribution, cut off there; all independent."
    )


def sampling_data(bench: Bench, display: Display, result: Sampled, row: int) -> dict[str, Any]:
    """The same as data, in percent."""
    return {
        "probability": tidy(100 * float(result.probability[row])),
        "sampling_error": tidy(100 * float(result.error[row])),
        "not_judged": tidy(100 * float(result.open[row])),
        "fails_most_often": _criterion(result, row) or None,
        "fails_in": tidy(100 * float(result.share[row])),
        "draws": result.samples,
        "seed": result.seed,
        "assumptions": assumptions(bench, display, result),
    }


def _criterion(result: Sampled, row: int) -> str:
    column = int(result.criterion[row])
    return criteria()[column].name if column >= 0 else ""


def _share(result: Sampled, row: int) -> str:
    share = float(result.probability[row])
    return {0.0: "none", 1.0: "all"}.get(share, f"{_percent(result, row)} %")


def _percent(result: Sampled, row: int) -> str:
    return f"{percent(result.probability[row], 1).text} ± {percent(result.error[row], 1).text}"
