"""Class-AB stages as heat: a loss that the averaged network does not carry, but whose sinks other parts may stand on."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from ..physics.push_pull import class_b_worst_loss_w
from .circuit import Probe, PushPull
from .layout import Layout
from .variables import values_of


def swing_loss_w(swing: PushPull, side_v: np.ndarray, points: np.ndarray) -> np.ndarray:
    """Loss of one transistor at its worst output, or of an emitter resistor at full output [W], shape (sample,).

    side_v: half of the supply [V], shape (sample,).
    """
    load_ohm, phase_rad = values_of((swing.load_ohm, swing.phase_rad), points)
    if swing.resistor_ohm is not None:
        return (side_v / load_ohm / 2.0) ** 2 * values_of((swing.resistor_ohm,), points)[0]
    return class_b_worst_loss_w(side_v, load_ohm, phase_rad)


class Swings:
    """The push-pull parts of a circuit; their losses go by the square of the supply. Arrays are (part, sample)."""

    def __init__(self, probes: Mapping[str, Probe], layout: Layout) -> None:
        found = {ref: probe.push_pull for ref, probe in probes.items() if probe.push_pull is not None}
        self.parts, self.swings = tuple(found), tuple(found.values())
        self.plus = layout.places("node", [swing.plus for swing in self.swings])
        self.minus = layout.places("node", [swing.minus for swing in self.swings])

    def parameters(self, points: np.ndarray) -> Mapping[str, np.ndarray]:
        """Loss per square of the whole supply [W/V²]."""
        half = np.full(points.shape[0], 0.5)
        rows = [swing_loss_w(swing, half, points) for swing in self.swings]
        return {"per v2": np.array(rows).reshape(len(rows), points.shape[0])}

    def heats(self, x: np.ndarray, p: Mapping[str, np.ndarray]):
        """As the families of the network."""
        supply_v = x[self.plus] - x[self.minus]
        slope = 2.0 * p["per v2"] * supply_v
        return [(self.parts, p["per v2"] * supply_v**2, [(self.plus, slope), (self.minus, -slope)])]
