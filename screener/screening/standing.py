"""The installed pumps as they stand at one setting: liquid, speed, bypass."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from screener.header.branch import BranchCurves
from screener.header.setting import Setting, branches_at, pumps_at, ratio_at
from screener.model.arrays import Floats
from screener.model.case import Case
from screener.model.curves import Pumps
from screener.screening.ratings import smallest_flow, thermal_power


@dataclass(frozen=True, slots=True)
class Standing:
    """The installed pumps at one setting.

    pumps    : p rows;  branches : p, over what they deliver
    ratio    : (p,) [-] speed over that at load;  bypass : (p,) [m3/s]
    thermal_power : (p,) [W] see `Ratings`
    minimum  : (p,) [m3/s] smallest flow, stable or thermal; 0 where not known
    """

    setting: Setting
    pumps: Pumps
    branches: BranchCurves
    ratio: Floats
    bypass: Floats
    thermal_power: Floats
    minimum: Floats


def stand(case: Case, setting: Setting, *, heat_capacity: float, temperature_rise: float) -> Standing:
    """Bring the installed pumps to a setting.

    heat_capacity : [J/(kg K)];  temperature_rise : [K] allowed in a pump, for its thermal minimum flow
    """
    drives = [pump.drive for pump in case.installed]
    ratio = ratio_at(case.pumps, drives, setting.speed)
    pumps = pumps_at(case.pumps, ratio=ratio, viscosity=setting.viscosity)
    bypass = np.array(setting.bypass[1:] or np.zeros(len(pumps)))
    power = thermal_power(pumps)
    return Standing(
        setting=setting,
        pumps=pumps,
        branches=branches_at(pumps, [pump.branch for pump in case.installed], bypass),
        ratio=ratio,
        bypass=bypass,
        thermal_power=power,
        minimum=smallest_flow(
            pumps, heat_capacity=heat_capacity, temperature_rise=temperature_rise, power=power
        ),
    )
