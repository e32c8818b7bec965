"""Power networks of every shape, drawn by hypothesis: each is healthy by construction, so each has an operating point.

A network grows from one or two sources, net by net; loads are drawn next; then every resistance is chosen so that at
nominal currents it drops a small share of its net's voltage, and every thermal resistance so that it gives a few
tens of kelvin. So currents, voltages and loop gains stay sane at any depth, while values span decades.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field

import numpy as np
from circuits import RDS_SCALE, P
from hypothesis import strategies as st

from drc_power.solve.branches import (
    CurrentLoad, Curve, Drop, Efficiency, Linear, OneWay, PowerLoad, Resistive, Source, Switching,
)
from drc_power.solve.heat import HeatModel, HeatPath, Sink

AMBIENT_C = 40.0
COPPER_SCALE = Curve(np.array([-300.0, 2000.0]), 1.0 + 0.0039 * (np.array([-300.0, 2000.0]) - 25.0))
"""A coil's resistance over temperature: copper, 0.39 %/K (common practice)."""

FEEDS = ("resistor", "fet", "parallel fets", "coil", "diode", "linear", "switching")
LOADS = ("current", "power", "resistive", "chopped", "low side")
KEEPS_DOMAIN = ("resistor", "fet", "parallel fets", "coil")
"""Feeds that current may pass in both directions: nets they join may be meshed."""


@dataclass(frozen=True)
class Network:
    """Branches and heat paths ready for the solver; the reference is net "0"."""

    branches: tuple
    heat: HeatModel


@dataclass
class Net:
    """A net, what feeds it from which net, its nominal voltage and its loads as (kind, nominal ampere, return)."""

    name: str
    feed: str
    parent: int
    volts: float
    domain: int
    loads: list[tuple[str, float, str]] = field(default_factory=list)
    amps: float = 0.0


@st.composite
def networks(draw, max_nets: int = 9, feeds=FEEDS, loads=LOADS) -> Network:
    """A random power tree with meshes, parallel parts, split grounds and shared sinks."""
    nets = _grow(draw, max_nets, feeds)
    _load(draw, nets, loads)
    _sum_currents(nets)
    return _Build(draw, nets).network()


def _share(draw, low: float, high: float) -> float:
    """A number spread evenly over decades."""
    return float(10.0 ** draw(st.floats(np.log10(low), np.log10(high))))


def _grow(draw, max_nets: int, feeds) -> list[Net]:
    volts = draw(st.floats(10.0, 60.0))
    nets = [Net("n0", draw(st.sampled_from(("source", "or-ed sources"))), -1, volts, 0)]
    for k in range(1, draw(st.integers(2, max_nets))):
        at = draw(st.integers(0, k - 1))
        parent, feed = nets[at], draw(st.sampled_from(feeds))
        volts, domain = parent.volts, parent.domain if feed in KEEPS_DOMAIN else k
        if feed == "diode":
            volts -= 0.7
        elif feed == "linear":
            volts *= draw(st.floats(0.4, 0.95))
        elif feed == "switching":
            volts = draw(st.floats(3.0, 60.0))
        if volts < 3.0:
            feed, volts, domain = "resistor", parent.volts, parent.domain
        nets.append(Net(f"n{k}", feed, at, volts, domain))
    return nets


def _load(draw, nets: list[Net], loads) -> None:
    for net in nets:
        for _ in range(draw(st.integers(0, 2))):
            back = draw(st.sampled_from(("0", "0", "gnd2")))
            net.loads.append((draw(st.sampled_from(loads)), _share(draw, 1e-3, 5.0), back))


def _sum_currents(nets: list[Net]) -> None:
    """Nominal currents, from the last net to the first."""
    for net in reversed(nets):
        net.amps += sum(amps for _, amps, _ in net.loads)
        if net.parent >= 0:
            parent = nets[net.parent]
            parent.amps += net.amps * net.volts / (0.8 * parent.volts) if net.feed == "switching" else net.amps


class _Build:
    """From nets with nominal currents to records."""

    def __init__(self, draw, nets: list[Net]) -> None:
        self.draw, self.nets = draw, nets
        self.branches: list = []
        self.warm: list[tuple[str, float]] = []

    def network(self) -> Network:
        self._sources()
        for net in self.nets[1:]:
            getattr(self, f"_{net.feed.replace(' ', '_')}")(net, self.nets[net.parent])
        for net in self.nets:
            for k, (kind, amps, back) in enumerate(net.loads):
                getattr(self, f"_{kind.replace(' ', '_')}_load")(f"{net.name} load {k}", net, amps, back)
        self._meshes()
        self.branches.append(Resistive("shunt", "gnd2", "0", P(self._ohms(3.0, sum(net.amps for net in self.nets), 0.05))))
        return Network(tuple(self.branches), self._heat())

    def _ohms(self, volts: float, amps: float, most: float = 0.03) -> float:
        """A resistance that drops up to `most` of the voltage at the nominal current; between 0.1 mohm and 10 kohm."""
        return float(np.clip(_share(self.draw, 1e-4, most) * volts / max(amps, 1e-3), 1e-4, 1e4))

    def _warm(self, part: str, nominal_w: float) -> str:
        self.warm.append((part, max(nominal_w, 1e-3)))
        return part

    def _sources(self) -> None:
        first = self.nets[0]
        if first.feed == "source":
            self.branches.append(Source("V0", "n0", "0", P(first.volts), P(self._ohms(first.volts, first.amps))))
            return
        for k in range(2):
            volts = first.volts * self.draw(st.sampled_from((1.0, 0.999, 0.97, 0.7)) if k else st.just(1.0))
            part = f"D in{k}"
            self.branches += [Source(f"V{k}", f"in{k}", "0", P(volts), P(self._ohms(first.volts, first.amps))),
                              OneWay(part, f"in{k}", "n0", self._drop(first), self._warm(part, 0.5 * first.amps))]

    def _drop(self, net: Net) -> Drop:
        """A forward law by line or by points measured from 0 A on; what is flat is in `test_measured_diodes`.

        A tempco that the slope does not make up for lets one of two diodes take all: two operating points, none wrong.
        """
        kind = self.draw(st.sampled_from(("line", "tempco", "measured", "one line")))
        if kind in ("line", "tempco"):
            slope = self._ohms(net.volts, net.amps)
            knee_v_per_k = -min(1e-3, 0.2 * slope * net.amps / 60.0) if kind == "tempco" else 0.0
            return Drop(P(self.draw(st.floats(0.2, 0.9))), P(slope), knee_v_per_k)
        amps = np.array([0.0, 1.0, 10.0, 50.0]) * _share(self.draw, 0.02, 2.0) * max(net.amps, 1e-3)
        lines = ((25.0, Curve(amps, np.array([0.30, 0.42, 0.55, 0.8]))), (125.0, Curve(amps, np.array([0.12, 0.25, 0.42, 0.72]))))
        return Drop(lines=lines if kind == "measured" else lines[:1])

    def _resistor(self, net: Net, parent: Net) -> None:
        self.branches.append(Resistive(f"R {net.name}", parent.name, net.name, P(self._ohms(net.volts, net.amps))))

    def _coil(self, net: Net, parent: Net) -> None:
        key, ohms = f"L {net.name}", self._ohms(net.volts, net.amps)
        self.branches.append(Resistive(key, parent.name, net.name, P(ohms), self._warm(key, ohms * net.amps**2), COPPER_SCALE))

    def _fet(self, net: Net, parent: Net, n: int = 1) -> None:
        ohms = self._ohms(net.volts, net.amps)
        for k in range(n):
            key, own = f"Q {net.name} {k}", n * ohms * self.draw(st.floats(0.8, 1.25) if n > 1 else st.just(1.0))
            part = self._warm(key, own * (net.amps / n) ** 2)
            self.branches.append(Resistive(key, parent.name, net.name, P(own), part, RDS_SCALE))

    def _parallel_fets(self, net: Net, parent: Net) -> None:
        self._fet(net, parent, self.draw(st.integers(2, 4)))

    def _diode(self, net: Net, parent: Net) -> None:
        key = f"D {net.name}"
        self.branches.append(OneWay(key, parent.name, net.name, self._drop(net), self._warm(key, 0.6 * net.amps)))

    def _linear(self, net: Net, parent: Net) -> None:
        key, ground = f"U {net.name}", self.draw(st.sampled_from(("0", "gnd2")))
        dropout, quiescent = self.draw(st.floats(0.0, 0.1)) * parent.volts, _share(self.draw, 1e-5, 1e-2)
        self.branches.append(Linear(key, parent.name, net.name, ground, P(net.volts), P(dropout), P(quiescent), key))

    def _switching(self, net: Net, parent: Net) -> None:
        key, ground = f"U {net.name}", self.draw(st.sampled_from(("0", "gnd2")))
        at = np.array([0.1, 0.5, 1.0, 2.0]) * max(net.amps, 1e-3)
        low, high = (Curve(at, np.array(self.draw(st.lists(st.floats(0.75, 1.0), min_size=4, max_size=4)))) for _ in range(2))
        flat = self.draw(st.booleans())
        eta = Efficiency((0.0,), (low,)) if flat else Efficiency((0.7 * parent.volts, parent.volts), (low, high))
        quiescent = _share(self.draw, 1e-6, 1e-3)
        self.branches.append(Switching(key, parent.name, net.name, ground, P(net.volts), eta, P(quiescent), key))

    def _current_load(self, key: str, net: Net, amps: float, back: str) -> None:
        self.branches.append(CurrentLoad(key, net.name, back, P(amps)))

    def _power_load(self, key: str, net: Net, amps: float, back: str) -> None:
        self.branches.append(PowerLoad(key, net.name, back, P(amps * net.volts), 0.05 * net.volts))

    def _resistive_load(self, key: str, net: Net, amps: float, back: str) -> None:
        self.branches.append(Resistive(key, net.name, back, P(net.volts / amps)))

    def _chopped_load(self, key: str, net: Net, amps: float, back: str) -> None:
        duty = self.draw(st.floats(0.05, 1.0))
        self.branches.append(Resistive(key, net.name, back, P(duty * net.volts / amps), duty=P(duty)))

    def _low_side_load(self, key: str, net: Net, amps: float, back: str) -> None:
        """A heater, a FET on the low side and a shunt."""
        ohms, part = self._ohms(net.volts, amps), f"Q {key}"
        self.branches += [Resistive(key, net.name, f"{key} lo", P(net.volts / amps)),
                          Resistive(part, f"{key} lo", f"{key} sh", P(ohms), self._warm(part, ohms * amps**2), RDS_SCALE),
                          Resistive(f"{key} shunt", f"{key} sh", back, P(self._ohms(net.volts, amps, 0.01)))]

    def _meshes(self) -> None:
        """Links between nets of one domain."""
        domains = defaultdict(list)
        for net in self.nets:
            domains[net.domain].append(net)
        meshable = [members for members in domains.values() if len(members) > 1]
        for k in range(self.draw(st.integers(0, 3)) if meshable else 0):
            members = self.draw(st.sampled_from(meshable))
            a, b = self.draw(st.permutations(members))[:2]
            self.branches.append(Resistive(f"M{k}", a.name, b.name, P(self._ohms(a.volts, max(a.amps, b.amps)))))

    def _heat(self) -> HeatModel:
        """Every warm part alone or on one of two sinks; each resistance for a few kelvin to a few tens."""
        on = {part: self.draw(st.sampled_from((None, "sink a", "sink b"))) for part, _ in self.warm}
        paths = tuple(HeatPath(part, P(AMBIENT_C), (P(self._kelvin(watts)),), sink=on[part]) for part, watts in self.warm)
        total = {name: sum(w for part, w in self.warm if on[part] == name) for name in set(on.values()) - {None}}
        return HeatModel(paths, {name: Sink(name, P(self._kelvin(total[name])), P(AMBIENT_C)) for name in sorted(total)})

    def _kelvin(self, watts: float) -> float:
        return min(_share(self.draw, 1.0, 30.0) / watts, 300.0)
