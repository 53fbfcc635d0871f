"""Sampled probabilities in words: what a reader sees of each figure, in the demo's units."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

import screener
from screener.changes.sampling import Sampled
from screener.criteria import criteria
from screener.model.case import Tolerance
from screener.screening.assess import Bench, set_up
from screener.view import sampling as view
from screener.view.blocks import Heading, Lines
from screener.view.display import Display

NAMES = [criterion.name for criterion in criteria()]
START = NAMES.index("start")
RESULT = Sampled(
    probability=np.array([0.73584, 1.0, 0.0]),
    error=np.array([0.00296, 0.0, 0.0]),
    open=np.array([0.0, 0.25, 0.0]),
    criterion=np.array([START, -1, START]),
    share=np.array([0.16016, 0.0, 1.0]),
    samples=2048,
    seed=1,
)


@pytest.fixture(scope="module")
def bench() -> Bench:
    found = set_up(screener.load(screener.demo("osier-bank", "case.toml")).case)
    case = replace(found.header.case, tolerance=Tolerance(system_curve=0.08, trim=0.0007))
    return replace(found, header=replace(found.header, case=case))


@pytest.fixture(scope="module")
def display(bench: Bench) -> Display:
    return Display(bench.header.case.display)


def told(bench: Bench, display: Display, row: int) -> list[str]:
    heading, lines, note = view.sampling(bench, display, RESULT, row)
    assert isinstance(heading, Heading)
    assert heading.aside == "probability under these assumptions"
    assert isinstance(lines, Lines)
    assert isinstance(note, Lines)
    assert list(note.lines) == [view.assumptions(bench, display, RESULT)]
    return list(lines.lines)


def test_the_probability_with_its_sampling_error(bench: Bench, display: Display) -> None:
    assert told(bench, display, 0) == [
        "It passes every criterion in 73.6 ± 0.3 % of 2048 draws.",
        "What fails most often is start, in 16.0 % of them.",
    ]


def test_all_draws_and_none(bench: Bench, display: Display) -> None:
    assert told(bench, display, 1) == [
        "It passes every criterion in all of 2048 draws.",
        "In 25.0 % nothing fails, but something could not be judged; those count as passed.",
    ]
    assert told(bench, display, 2)[0] == "It passes every criterion in none of 2048 draws."


@pytest.mark.parametrize(
    ("row", "text", "value"), [(0, "73.6 ± 0.3", 73.584), (1, "all", 100.0), (2, "none", 0.0)]
)
def test_a_cell(row: int, text: str, value: float) -> None:
    cell = view.likely(RESULT, row)
    assert (cell.text, cell.value) == (text, value)


def test_what_was_assumed_is_one_line_with_the_figures_of_the_case(bench: Bench, display: Display) -> None:
    line = view.assumptions(bench, display, RESULT)
    assert "\n" not in line
    for words in (
        "Probability under these assumptions",
        "sampling error of 2048 draws",
        "whole flow range",
        "5.0 % where none is stated",
        "friction of the system within 8.0 %",
        "impeller within 0.7 mm",
        "two standard deviations",
        "cut off there",
        "independent",
    ):
        assert words in line


def test_the_same_as_data(bench: Bench, display: Display) -> None:
    data = view.sampling_data(bench, display, RESULT, 0)
    assert data.pop("assumptions") == view.assumptions(bench, display, RESULT)
    assert data == {
        "probability": 73.584,
        "sampling_error": 0.296,
        "not_judged": 0.0,
        "fails_most_often": "start",
        "fails_in": 16.016,
        "draws": 2048,
        "seed": 1,
    }
    assert view.sampling_data(bench, display, RESULT, 1)["fails_most_often"] is None
