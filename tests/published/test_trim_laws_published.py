"""Trim laws against published and independently derived figures.

[V] two sources or recomputed here, [M] from memory, [D] derived here by independent arithmetic.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from screener.catalog.compile import compile_table
from screener.catalog.entry import Entry, TestedCurve, with_law
from screener.hydraulics.similarity import head_at, trimmed
from screener.hydraulics.trim_laws import trim_head_uncertainty
from screener.model.arrays import frozen
from screener.model.curves import Pumps

NAN = np.nan
INCH = 0.0254


def cut(law: str, *, tested: float, to: float, inlet: float = NAN, exponent: float | None = None) -> Pumps:
    """A pump of 100 m at shutoff and a curve that ends at 0.1 m3/s, cut by a law."""
    flow = np.linspace(0, 0.1, 9)
    unknown = frozen(np.full(9, NAN))
    test = TestedCurve(tested, frozen(flow), frozen(100 - 4000 * flow**2), unknown, unknown, unknown, NAN)
    entry = with_law(Entry("p", "", "", "", 1450.0, (test,), inlet_diameter=inlet), law)
    if exponent is not None:
        entry = replace(entry, flow_exponent=exponent, head_exponent=exponent)
    table = compile_table([entry])
    return trimmed(table, model=np.array([0]), diameter=np.array([to]), speed_ratio=np.ones(1))


@pytest.mark.parametrize(
    ("inlet", "flow", "head"),
    [
        (0.150, 0.93274, 0.87000),  # [D] sqrt((81225 - 22500) / (90000 - 22500)) and its square
        (0.120, 0.94017, 0.88393),  # [D] sqrt((81225 - 14400) / (90000 - 14400)) and its square
    ],
)
def test_iso_9906_with_the_inlet_diameter(inlet: float, flow: float, head: float) -> None:
    # 300 to 285 mm by ISO 9906:2012, trim rule [M]: Q ~ R, H ~ R^2, R = sqrt((Dr^2-D1^2)/(Dt^2-D1^2))
    pumps = cut("ISO 9906 inlet diameter", tested=0.300, to=0.285, inlet=inlet)
    assert pumps.curves.end[0] == pytest.approx(0.1 * flow, abs=5e-7)
    assert pumps.curves.head[0, 0] == pytest.approx(100 * head, abs=5e-4)


@pytest.mark.parametrize(
    ("diameter", "exponent", "ratio"),
    [  # (D'/D)^m [D]
        (0.95, 2.0, 0.9025),
        (0.95, 2.5, 0.8796),
        (0.95, 3.0, 0.8574),
        (0.90, 2.0, 0.8100),
        (0.90, 2.5, 0.7684),
        (0.90, 3.0, 0.7290),
    ],
)
def test_equal_exponents(diameter: float, exponent: float, ratio: float) -> None:
    # Q ~ D^m and H ~ D^m, m from 2 to 3 [M: Guelich, Centrifugal Pumps]
    pumps = cut("equal exponents", tested=1.0, to=diameter, exponent=exponent)
    assert pumps.curves.end[0] == pytest.approx(0.1 * ratio, abs=5e-6)
    assert pumps.curves.head[0, 0] == pytest.approx(100 * ratio, abs=5e-3)


def test_affinity_cuts_too_deep() -> None:
    # 7 in, 135 ft to 90 ft: affinity 5.72 in, the real impeller 5.88 in [V: Lobanoff and Ross, Centrifugal
    # Pumps, 2nd ed., p. 19]
    assert 135 * 0.01 * cut("affinity", tested=7 * INCH, to=5.72 * INCH).curves.head[0, 0] == pytest.approx(
        90, abs=0.2
    )
    at_real = cut("affinity", tested=7 * INCH, to=5.88 * INCH)
    says = 1.35 * at_real.curves.head[0, 0]
    assert says == pytest.approx(95.3, abs=0.1)  # [D] 135 (5.88 / 7)^2
    assert says * (1 - at_real.trim_uncertainty[0]) == pytest.approx(90, abs=0.2)


def test_what_the_fit_says_of_smaller_cuts() -> None:
    # 1 - (D'/D)^0.33: 1.7 % at a cut of 5 %, 3.4 % at 10 % [D]
    ratio = np.array([1.0, 0.95, 0.90])
    found = trim_head_uncertainty(ratio=ratio, law_head=ratio**2)
    assert found == pytest.approx([0, 0.01678, 0.03417], abs=5e-6)


def test_no_inlet_is_the_affinity_law() -> None:
    # D1 = 0 gives R = Dr / Dt [D]
    by_rule = cut("ISO 9906 inlet diameter", tested=0.3, to=0.285, inlet=0.0)
    assert by_rule.curves.end[0] == pytest.approx(0.095, rel=1e-12)
    assert by_rule.curves.head[0, 0] == pytest.approx(90.25, rel=1e-12)


@pytest.mark.parametrize(("head", "expected"), [(90.0, 5.7155), (95.25, 5.88)])
def test_the_diameter_for_a_head_by_affinity(head: float, expected: float) -> None:
    # [D] 7 sqrt(90 / 135) and 7 sqrt(95.256 / 135), in
    flow = np.linspace(0, 0.1, 3)
    unknown = frozen(np.full(3, NAN))
    test = TestedCurve(7.0, frozen(flow), frozen(135 - 40 * flow), unknown, unknown, unknown, NAN)
    table = compile_table([Entry("p", "", "", "", 1450.0, (test,), trim_law="affinity")])
    asked = {"model": np.zeros(2, np.int64), "speed_ratio": np.ones(2), "flow": np.zeros(2)}
    below, above = head_at(table, **asked, diameter=np.array([expected - 1e-3, expected + 1e-3]))
    assert below < head < above
