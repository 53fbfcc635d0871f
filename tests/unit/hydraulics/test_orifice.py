from __future__ import annotations

import math
import sys

import pytest

from screener.errors import ExitCode, ScreenerError
from screener.hydraulics.orifice import MissingExtra, bore

USUAL = {"flow": 0.02, "head": 40.0, "density": 1000.0, "viscosity": 1e-6, "pipe_diameter": 0.1}


def test_more_head_takes_a_smaller_bore_and_more_flow_a_larger_one() -> None:
    usual = bore(**USUAL)
    assert bore(**USUAL | {"head": 80.0}) < usual < bore(**USUAL | {"flow": 0.03})


def test_burning_sixteen_times_the_head_takes_about_half_the_bore() -> None:
    """Far below the pipe's own size nothing is recovered: bore ~ head ^ -1/4."""
    large = {"pipe_diameter": 0.3, "flow": 0.05}
    ratio = bore(**USUAL | large | {"head": 20.0}) / bore(**USUAL | large | {"head": 320.0})
    assert ratio == pytest.approx(2.0, rel=0.05)


@pytest.mark.parametrize(
    "changed",
    [
        {"pipe_diameter": 0.049},
        {"pipe_diameter": 1.01},
        {"head": 0.1},  # a ratio above 0.75
        {"head": 1e6},  # below 0.10
        {"head": 0.0},
        {"head": math.nan},
        {"flow": 0.0},
        {"flow": math.nan},
        {"viscosity": 1e-4},  # Reynolds number 2546
        {"flow": 0.0012, "pipe_diameter": 0.05, "head": 60.0},  # a bore of 9 mm
        # Reynolds number 6366, and 16000 x 0.71^2 = 8066 for that ratio
        {"flow": 0.02, "viscosity": 4e-5, "head": 1.4},
    ],
)
def test_nothing_outside_the_standard(changed: dict[str, float]) -> None:
    assert math.isnan(bore(**USUAL | changed))


def test_the_last_one_is_within_the_standard_at_a_smaller_ratio() -> None:
    assert 0.4 < bore(**USUAL | {"viscosity": 4e-5, "head": 10.0}) / 0.1 < 0.56


def test_without_the_library_it_says_how_to_get_it(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "fluids.flow_meter", None)
    with pytest.raises(MissingExtra, match=r"fluids.*\[orifice\]") as caught:
        bore(**USUAL)
    assert isinstance(caught.value, ScreenerError)
    assert caught.value.exit_code == ExitCode.COMMAND_LINE
