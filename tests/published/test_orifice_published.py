"""Orifice plates, by ISO 5167-2:2003. [M] from memory, [D] derived here by independent arithmetic.

[M] The Reader-Harris/Gallagher equation (clause 5.3.2.1, corner taps, so its two terms for the place of the
taps take L1 = L2 = 0) and the permanent loss (clause 5.4.1) as written out below.
"""

from __future__ import annotations

import math

import pytest

from screener.hydraulics.orifice import bore

GRAVITY = 9.80665


def coefficient(ratio: float, reynolds: float, pipe: float) -> float:
    """Reader-Harris/Gallagher, corner taps; `pipe` [m]."""
    a = (19000 * ratio / reynolds) ** 0.8
    c = 0.5961 + 0.0261 * ratio**2 - 0.216 * ratio**8 + 0.000521 * (1e6 * ratio / reynolds) ** 0.7
    c += (0.0188 + 0.0063 * a) * ratio**3.5 * (1e6 / reynolds) ** 0.3
    c += (0.043 + 0.080 - 0.123) * (1 - 0.11 * a) * ratio**4 / (1 - ratio**4)
    if pipe < 0.07112:
        c += 0.011 * (0.75 - ratio) * (2.8 - pipe / 0.0254)
    return c


def burned(*, flow: float, density: float, viscosity: float, pipe: float, hole: float) -> float:
    """Permanent loss [m]."""
    ratio, reynolds = hole / pipe, 4 * flow / (math.pi * pipe * viscosity)
    c = coefficient(ratio, reynolds, pipe)
    speed = flow / (math.pi / 4 * hole**2)
    measured = density / 2 * (speed / c) ** 2 * (1 - ratio**4)
    root = math.sqrt(1 - ratio**4 * (1 - c**2))
    return measured * (root - c * ratio**2) / (root + c * ratio**2) / (density * GRAVITY)


@pytest.mark.parametrize(
    ("ratio", "reynolds", "published"),
    # for pipes over 71.12 mm, term by term by hand [D]:
    # 0.2, 1e5: 0.5961 + 0.001044 - 0.0000006 + 0.0008464 + (0.0188 + 0.0063 x 0.07309) 0.0035777 x 1.99526;
    # without viscosity only the first three: 0.5961 + 0.006525 - 0.000844 and 0.5961 + 0.009396 - 0.003628
    [(0.2, 1e5, 0.598127), (0.5, 1e20, 0.601781), (0.6, 1e20, 0.601868)],
)
def test_the_equation_as_written_here(ratio: float, reynolds: float, published: float) -> None:
    assert coefficient(ratio, reynolds, 0.1) == pytest.approx(published, abs=2e-6)


@pytest.mark.parametrize("head", [15.0, 60.0, 200.0])
@pytest.mark.parametrize("flow", [0.008, 0.02, 0.06])
@pytest.mark.parametrize(("density", "viscosity"), [(998.2, 1.0e-6), (850.0, 8e-6)])
def test_the_bore_burns_the_head(flow: float, head: float, density: float, viscosity: float) -> None:
    """[D] by the equations above, in a pipe of 3 m/s."""
    pipe = max(0.05, math.sqrt(4 * flow / (math.pi * 3)))
    hole = bore(flow=flow, head=head, density=density, viscosity=viscosity, pipe_diameter=pipe)
    assert 0.1 < hole / pipe < 0.75
    again = burned(flow=flow, density=density, viscosity=viscosity, pipe=pipe, hole=hole)
    assert again == pytest.approx(head, rel=1e-6)


def test_the_measured_difference_is_not_what_is_burned() -> None:
    """At a ratio near 0.6 about two thirds of the difference between the taps are lost for good [M]."""
    hole = bore(flow=0.02, head=4.0, density=998.2, viscosity=1e-6, pipe_diameter=0.1)
    assert hole / 0.1 == pytest.approx(0.6, abs=0.05)
    c, speed = 0.605, 0.02 / (math.pi / 4 * hole**2)
    measured = (speed / c) ** 2 * (1 - (hole / 0.1) ** 4) / (2 * GRAVITY)
    assert 4.0 / measured == pytest.approx(1 - (hole / 0.1) ** 1.9, abs=0.03)
