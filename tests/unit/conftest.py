"""Runs made of plain numbers, for criteria, judge and ranking: well inside every limit unless changed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import fields
from typing import Any

import numpy as np
import pytest

from screener.criteria import default_limits
from screener.model.arrays import frozen
from screener.model.curves import Curves, Pumps
from screener.model.run import Bounds, Conditions, Kind, Ratings, Run

KINDS = (Kind.DUTY, Kind.DUTY, Kind.WIDE_OPEN, Kind.TRIP)
"""States by default: the rated duty, another duty, wide open, a trip."""

RUN = {
    "header": 38.0,
    "total": 0.3,
    "flow": 0.1,
    "head": 40.0,
    "power": 40e3,
    "efficiency": 0.8,
    "npsh_available": 6.0,
    "npsh_required": 3.0,
    "start_header": 40.0,
    "spare_head": 10.0,
    "shutoff_match": 0.01,
    "load_share": 0.05,
    "opening_speed": np.nan,
    "least_speed": np.nan,
}
CONDITIONS = {
    "duty": 0,
    "kind": KINDS,
    "rated": (True, False, False, False),
    "lowest": (False, True, False, False),
    "usual": True,
    "open": (False, False, True, True),
    "held": False,
    "asked": 0.3,
    "wanted_head": 37.5,
    "density": 1000.0,
    "heat_capacity": 4180.0,
    "suction_pressure": 20e3,
    "share_of_hours": 1.0,
    "hours": 1000.0,
    "runs": True,
}
BOTH = {
    "bep_flow": 0.1,
    "minimum_flow": 0.03,
    "maximum_flow": 0.15,
    "specific_speed": 40.0,
    "suction_specific_speed": 140.0,
    "region_low": 0.4,
    "region_high": 1.4,
    "allowable_pressure": 1.6e6,
    "maximum_power": 100e3,
    "head_tolerance": 0.03,
}
RATINGS = BOTH | {
    "shutoff": 50.0,
    "summit": 50.0,
    "droop": 0.0,
    "header_shutoff": 50.0,
    "header_summit": 50.0,
    "motor": 55e3,
}
BOUNDS = {
    "speed": 1.0,
    "start": 0.0,
    "end": 0.2,
    "best": RATINGS["bep_flow"],
    "minimum": RATINGS["minimum_flow"],
    "largest": RATINGS["maximum_flow"],
    "summit": RATINGS["summit"],
    "opening": RATINGS["header_shutoff"],
    "thermal_power": 30e3,
}
RATED = {"bep_flow": "best", "minimum_flow": "minimum", "summit": "summit", "header_shutoff": "opening"}
"""Ratings of which a test means what holds in every state, too."""
PUMPS = BOTH | {
    "model": 0,
    "diameter": 0.39,
    "maximum": 0.41,
    "minimum": 0.33,
    "from_test": 0.0,
    "trim_uncertainty": 0.0,
    "law_inlet": 0.15,
    "speed": 1450.0,
    "casing_volume": 0.1,
    "lowest_speed": np.nan,
    "highest_speed": np.nan,
    "stages": 1.0,
    "npsh_speed_exponent": 2.0,
}
TABLES = {"run": RUN, "conditions": CONDITIONS, "ratings": RATINGS, "bounds": BOUNDS, "pumps": PUMPS}
_TYPES = {
    "duty": np.int64,
    "model": np.int64,
    "kind": np.int8,
    "rated": np.bool_,
    "lowest": np.bool_,
    "usual": np.bool_,
    "held": np.bool_,
    "open": np.bool_,
    "runs": np.bool_,
}


def _run(*, candidates: int = 1, states: int = 4, installed: int = 2, **changes: dict[str, Any]) -> Run:
    """Make a run whose arrays refuse to be written.

    changes : "run", "conditions", "ratings", "bounds" or "pumps" = {column: values that broadcast to its
              shape}; bounds and ratings are (c, 1 + p), the same in every state
    """
    c, s, width = candidates, states, 1 + installed
    shapes = {"header": (c, s), "total": (c, s), "spare_head": (c, width)}
    shapes |= {"shutoff_match": (c, installed), "load_share": (c, installed), "runs": (s, width)}
    shapes |= {"suction_pressure": (s, width), "opening_speed": (c, s), "least_speed": (c, s)}
    usual = {"run": (c, s, width), "conditions": (s,), "ratings": (c, width), "bounds": (c, width)}
    usual["pumps"] = (c,)
    rated = {RATED[name]: value for name, value in changes.get("ratings", {}).items() if name in RATED}
    changes["bounds"] = rated | changes.get("bounds", {})

    def columns(table: str) -> dict[str, Any]:
        values = TABLES[table] | changes.get(table, {})
        assert values.keys() == TABLES[table].keys()
        return {
            name: frozen(np.broadcast_to(value, shapes.get(name, usual[table])), _TYPES.get(name, np.float64))
            for name, value in values.items()
        }

    nothing = {f.name: frozen(np.full((c, 2), np.nan)) for f in fields(Curves)}
    return Run(
        pumps=Pumps(curves=Curves(**nothing), **columns("pumps")),
        ratings=Ratings(**columns("ratings")),
        bounds=Bounds(**{name: frozen(values[:, None]) for name, values in columns("bounds").items()}),
        conditions=Conditions(**columns("conditions")),
        **columns("run"),
    )


def _today(**shape: int) -> Run:
    """Make the same states today, with nothing known: then nothing is 'already so'."""
    return _run(
        **shape | {"candidates": 1},
        run=dict.fromkeys(RUN, np.nan),
        ratings=dict.fromkeys(RATINGS, np.nan),
        bounds=dict.fromkeys(BOUNDS, np.nan),
        pumps=dict.fromkeys(PUMPS.keys() - {"model"}, np.nan),
    )


@pytest.fixture(scope="session")
def make_run() -> Callable[..., Run]:
    """Runs, by default of one candidate in four states beside two installed pumps."""
    return _run


@pytest.fixture(scope="session")
def make_today() -> Callable[..., Run]:
    """The same states without the new pump, with nothing known of them."""
    return _today


@pytest.fixture
def limits() -> dict[str, dict[str, float]]:
    """The default limits, and what a case adds: a header rated for 10 bar, motors up to 100 kW."""
    found = default_limits()
    found["motor-new"]["fail_above"] = 100e3
    found["shutoff-pressure"]["header"] = 1e6
    return found
