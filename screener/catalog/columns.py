"""The tested curves of one catalog file as columns: read, checked and scaled all at once."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

import numpy as np

from screener.catalog.entry import TestedCurve
from screener.files.locate import KeyPath
from screener.files.quantities import Quantities
from screener.hydraulics.constants import GRAVITY, REFERENCE_DENSITY
from screener.model.arrays import Floats, Ints, frozen

POWER_SLACK = 0.03  # power and efficiency may differ by this fraction of power ...
POWER_FROM = 0.1  # ... above this fraction of the last flow; common practice, no source

Node = Mapping[str, Any]


class Columns:
    """All curves of one file: each column as one array, so that a check is one operation for the file.

    nodes : the c curves as they were read;  places : (pump, curve) of each
    owner : (points,) curve of each point;   first : (c + 1,) its first point
    """

    def __init__(self, pumps: Sequence[Node], quantities: Quantities) -> None:
        self.quantities = quantities
        self.nodes: list[Node] = [curve for pump in pumps for curve in pump["curves"]]
        self.places = [(i, j) for i, pump in enumerate(pumps) for j in range(len(pump["curves"]))]
        counts = np.array([len(node["flow"]) for node in self.nodes])
        self.owner: Ints = np.repeat(np.arange(len(counts)), counts)
        self.first: Ints = np.concatenate([[0], np.cumsum(counts)])

    def checked(self) -> Iterator[TestedCurve]:
        """Yield the curves, in the order of the file."""
        flow = self._column("flow", "flow")
        head = self._column("head", "head")
        efficiency = self._column("efficiency", "percent")
        power = self._column("power", "power")
        npsh_required = self._column("npsh_required", "npsh")
        diameter = self._scalar("diameter", "length")
        bep_flow = self._scalar("bep_flow", "flow")
        density = self._scalar("density", "density")
        density[np.isnan(density)] = REFERENCE_DENSITY
        power = frozen(power * (REFERENCE_DENSITY / density)[self.owner])
        self._check_rising(flow)
        self._check_percent(efficiency)
        self._check_power(flow, head, efficiency, power)
        self._check_best(flow, bep_flow)
        for c, (a, b) in enumerate(zip(self.first[:-1].tolist(), self.first[1:].tolist(), strict=True)):
            yield TestedCurve(
                diameter=float(diameter[c]),
                flow=flow[a:b],
                head=head[a:b],
                efficiency=efficiency[a:b],
                power=power[a:b],
                npsh_required=npsh_required[a:b],
                bep_flow=float(bep_flow[c]),
            )

    def _path(self, curve: int, *keys: str | int) -> KeyPath:
        i, j = self.places[curve]
        return ("pumps", i, "curves", j, *keys)

    def _column(self, name: str, quantity: str) -> Floats:
        """One column of all curves [SI], NaN where it is missing or not as long as the flows."""
        flat: list[float | None] = []
        start = None
        for c, node in enumerate(self.nodes):
            values, count = node.get(name), len(node["flow"])
            if values is not None and len(values) != count:
                what = f"{name} has {len(values)} values and flow has {count}"
                self.quantities.bad(self._path(c, name), what, "one for each flow, null where not measured")
                values = None
            if values is not None and start is None:
                start = c
            flat += [None] * count if values is None else values
        if quantity == "percent":
            return frozen(self.quantities.percents(flat))
        return frozen(self.quantities.array(flat, quantity, self._path(start or 0, name)))

    def _scalar(self, name: str, quantity: str) -> Floats:
        """One value of each curve [SI], NaN where it is missing."""
        nodes = [node.get(name) for node in self.nodes]
        if str in set(map(type, nodes)):
            read = self.quantities.positive
            return np.array([read(node, quantity, self._path(c, name)) for c, node in enumerate(nodes)])
        start = next((c for c, node in enumerate(nodes) if node is not None), 0)
        return self.quantities.array(nodes, quantity, self._path(start, name))

    def _check_rising(self, flow: Floats) -> None:
        same = self.owner[1:] == self.owner[:-1]
        for point in (np.flatnonzero((np.diff(flow) <= 0) & same) + 1).tolist():
            curve = int(self.owner[point])
            k = point - int(self.first[curve])
            before, here = self.nodes[curve]["flow"][k - 1 : k + 1]
            self.quantities.bad(
                self._path(curve, "flow", k), f"flow {here} comes after {before}", "flows must rise"
            )

    def _check_percent(self, efficiency: Floats) -> None:
        """Efficiencies are percent: a curve that never reaches 1 % was given as fractions."""
        best = np.fmax.reduceat(efficiency, self.first[:-1])
        for c in np.flatnonzero((best > 0) & (best <= 0.01)):
            what = f"no efficiency is above {best[c] * 100:.2g} %"
            self.quantities.bad(self._path(int(c), "efficiency"), what, "percent: 72, not 0.72")

    def _check_power(self, flow: Floats, head: Floats, efficiency: Floats, power: Floats) -> None:
        """Power says what efficiency says: the worst point of each curve where it does not."""
        with np.errstate(divide="ignore", invalid="ignore"):
            implied = REFERENCE_DENSITY * GRAVITY * flow * head / efficiency
            off = np.abs(implied - power) / power
        counted = flow > POWER_FROM * flow[self.first[1:] - 1][self.owner]
        off = np.where(counted & ~np.isnan(off), off, 0.0)
        for curve in np.unique(self.owner[off > POWER_SLACK]).tolist():
            start = int(self.first[curve])
            k = int(off[start : int(self.first[curve + 1])].argmax())
            given = self.nodes[curve]["power"][k]
            what = (
                f"power {given} of point {k + 1} and its efficiency differ by {off[start + k]:.1%} of power"
            )
            hint = f"at most {POWER_SLACK:.0%}; look at head, power and efficiency there, and at the units"
            self.quantities.bad(self._path(curve, "power", k), what, hint)

    def _check_best(self, flow: Floats, bep_flow: Floats) -> None:
        low, high = flow[self.first[:-1]], flow[self.first[1:] - 1]
        for curve in np.flatnonzero((bep_flow < low) | (bep_flow > high)).tolist():
            flows = self.nodes[curve]["flow"]
            what = f"bep_flow {self.nodes[curve]['bep_flow']} is outside the flows, {flows[0]} to {flows[-1]}"
            self.quantities.bad(self._path(curve, "bep_flow"), what)
