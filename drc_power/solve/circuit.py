"""The circuit of one mode: branches, heat paths, the box of spans, and how each part is read off the solution."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from ..board import Board, BoardPart, Mode, Quantity
from ..faults import Mark
from .branches import Branch
from .events.probe import EventProbe
from .heat import HeatModel, HeatPath, Sink
from .variables import ONE, ZERO, Box, Param

if TYPE_CHECKING:
    from .tracks import TrackProbe


@dataclass(frozen=True, slots=True)
class Probe:
    """How one part is read: the nodes it lies between, its current, and what it must block.

    currents: keys of the branches whose currents add up to the part's, each with a sign.
    duty: share of the time it carries that current; mean = duty · i, rms = √duty · i.
    blocks: nodes whose difference it holds off while it does not conduct, () where that is its own voltage.
    ground: the third terminal of a regulator. gate: the gate voltage given, or the nodes it is between.
    push_pull: the class-AB stage that the part swings in. group: the converter or bridge that says what it carries.
    """

    ref: str
    kind: str
    state: str
    a: str
    b: str
    currents: tuple[tuple[str, float], ...] = ()
    duty: Param = ONE
    blocks: tuple[str, str] | tuple[()] = ()
    ground: str | None = None
    gate: Param | tuple[str, str] | None = None
    overshoot: Param | None = None
    pulsed: bool = False
    push_pull: PushPull | None = None
    group: str | None = None


@dataclass(frozen=True, slots=True)
class PushPull:
    """A part of a class-AB stage: the supply it swings in, the load, its phase; `resistor_ohm` for an emitter resistor."""

    plus: str
    minus: str
    load_ohm: Param
    phase_rad: Param
    resistor_ohm: Param | None = None


@dataclass(frozen=True, slots=True)
class LoadProbe:
    """One annotated load: its terminals, and the voltage it needs."""

    name: str
    a: str
    b: str
    key: str
    needs: tuple[Param, Param] | None
    mark: Mark


@dataclass(frozen=True, slots=True)
class SourceProbe:
    """One rail fed from outside: the current its source gives, and how much it may."""

    rail: str
    net: str
    key: str
    limit_a: Param | None
    mark: Mark


@dataclass(frozen=True, slots=True)
class Unfed:
    """A net whose voltage nobody gives: what to write is in `remedy`."""

    net: str
    text: str
    remedy: str
    mark: Mark


@dataclass(frozen=True, slots=True)
class Circuit:
    """Everything solving needs for one mode; what is missing is named, not guessed."""

    mode: Mode
    box: Box
    branches: tuple[Branch, ...]
    reference: tuple[str, ...]
    heat: HeatModel
    ambient_c: Param
    probes: Mapping[str, Probe]
    loads: tuple[LoadProbe, ...]
    sources: tuple[SourceProbe, ...]
    unfed: tuple[Unfed, ...]
    missing: Mapping[str, tuple[str, ...]]
    heat_missing: Mapping[str, str]
    events: tuple[EventProbe, ...] = ()
    tracks: tuple[TrackProbe, ...] = ()


@dataclass(slots=True)
class Builder:
    """Collects a circuit. The modules beside this one add rails, loads, parts, stages and heat paths to it."""

    mode: Mode
    box: Box = field(default_factory=Box)
    branches: list[Branch] = field(default_factory=list)
    paths: list[HeatPath] = field(default_factory=list)
    sinks: dict[str, Sink] = field(default_factory=dict)
    probes: dict[str, Probe] = field(default_factory=dict)
    loads: list[LoadProbe] = field(default_factory=list)
    sources: list[SourceProbe] = field(default_factory=list)
    unfed: dict[str, Unfed] = field(default_factory=dict)
    missing: dict[str, list[str]] = field(default_factory=dict)
    heat_missing: dict[str, str] = field(default_factory=dict)
    setpoints: dict[str, Param] = field(default_factory=dict)
    held: dict[str, str] = field(default_factory=dict)
    load_duties: dict[str, Param] = field(default_factory=dict)
    chopped: dict[str, tuple[Param, Param | None]] = field(default_factory=dict)
    ideal_diodes: set[str] = field(default_factory=set)
    driven: dict[str, Param] = field(default_factory=dict)
    switched: list[tuple[str, str, str, Param]] = field(default_factory=list)
    stage_rails: dict[str, str] = field(default_factory=dict)
    stage_setpoints: dict[str, Param] = field(default_factory=dict)
    staged: set[str] = field(default_factory=set)
    events: list[EventProbe] = field(default_factory=list)
    ambient_c: Param = ZERO
    inside: tuple[str, ...] = ()
    tracks: list[TrackProbe] = field(default_factory=list)

    @property
    def board(self) -> Board:
        return self.mode.board

    @property
    def parts(self) -> Mapping[str, BoardPart]:
        return self.mode.parts

    def span(self, name: str, quantity: Quantity | None) -> Param | None:
        """The parameter for an annotated or device quantity; None where it is not given."""
        if quantity is None:
            return None
        return self.box.param(name, quantity.span, quantity.dimension, quantity.mark)

    def constant(self, value: float) -> Param:
        """A parameter that is a number of its own, such as one end of a window."""
        return Param(value)

    def held_net(self, part: BoardPart) -> str | None:
        """The net whose voltage a regulator holds: its rail, else its output pin's."""
        return self.held.get(part.ref) or part.terminals.get("output")

    def lack(self, ref: str, datum: str) -> None:
        """Note that a part lacks a datum, by the words a user would look for."""
        self.missing.setdefault(ref, [])
        if datum not in self.missing[ref]:
            self.missing[ref].append(datum)

    def gap(self, ref: str, datum: str, at: float, probe: float, dimension: str) -> Param:
        """A parameter for a missing datum, noted on the part."""
        self.lack(ref, datum)
        mark = self.board.where(self.parts[ref]) if ref in self.parts else Mark(self.board.annotations.path)
        return self.box.gap(f"{ref} {datum}", at, probe, dimension, f"{datum} of {ref}", mark)

    def add(self, branch: Branch, probe: Probe | None = None) -> None:
        """Add one branch, and the probe of the part it belongs to."""
        self.branches.append(branch)
        if probe is not None:
            self.probes[probe.ref] = probe

    def nets(self) -> set[str]:
        """Every node a branch touches so far."""
        ends = {getattr(branch, name) for branch in self.branches for name in ("a", "b", "ground") if hasattr(branch, name)}
        return ends | {net for branch in self.branches for net in getattr(branch, "nodes", {}).values()}

    def finish(self, reference: tuple[str, ...]) -> Circuit:
        """The circuit as collected."""
        return Circuit(self.mode, self.box, tuple(self.branches), reference, HeatModel(tuple(self.paths), self.sinks, self.inside),
                       self.ambient_c, self.probes, tuple(self.loads), tuple(self.sources), tuple(self.unfed.values()),
                       {ref: tuple(data) for ref, data in self.missing.items()}, self.heat_missing,
                       tuple(self.events), tuple(self.tracks))
