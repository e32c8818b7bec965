"""What every rule reads: one solution of one mode, with the parts, their points and the house rules at hand."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..board import Board, BoardPart, Limit, Mode, Quantity
from ..findings.identity import Subject, part_subject
from ..solve.circuit import Probe
from ..solve.heat import AIR
from ..solve.solution import PartPoint, Solution
from .house import Conditions, House, Target, allowed, required


@dataclass(frozen=True)
class View:
    """One mode's solution as the rules see it."""

    solution: Solution
    house: House
    only: str | None = None
    """Judge this part alone; None for every part."""

    @property
    def mode(self) -> Mode:
        return self.solution.circuit.mode

    @property
    def board(self) -> Board:
        return self.mode.board

    @cached_property
    def solved(self) -> np.ndarray:
        """Where there is an operating point, shape (sample,)."""
        return ~self.solution.unsolved()

    def elements(self) -> Iterator[ElementView]:
        """Every part that needs a verdict and has been solved."""
        for ref in self.board.elements:
            if ref in self.solution.circuit.probes and self.only in (None, ref):
                yield ElementView(self, self.mode.parts[ref], self.solution.parts[ref], self.solution.circuit.probes[ref])

    def unknown(self) -> np.ndarray:
        return np.full(self.solution.n_samples, np.nan)

    def constant(self, value: float | None) -> np.ndarray:
        return np.full(self.solution.n_samples, np.nan if value is None else value)


@dataclass(frozen=True)
class ElementView:
    """One part in one mode: its data, its operating points, and what the house allows."""

    view: View
    part: BoardPart
    point: PartPoint
    probe: Probe

    @property
    def ref(self) -> str:
        return self.part.ref

    @property
    def kind(self) -> str:
        return self.part.kind

    @property
    def subject(self) -> Subject:
        return part_subject(self.part.part.uuid, self.ref)

    @cached_property
    def missing(self) -> tuple[str, ...]:
        """Data of its own conduction that the solver had to do without."""
        return self.view.solution.circuit.missing.get(self.ref, ())

    @cached_property
    def heat_missing(self) -> tuple[str, ...]:
        lacking = self.view.solution.circuit.heat_missing.get(self.ref)
        return (lacking,) if lacking else ()

    @cached_property
    def solved(self) -> np.ndarray:
        """Where the part has an operating point of its own: it exists, and neither it nor a neighbour on its sink runs away."""
        solution = self.view.solution
        running = [flags for ref, flags in solution.runaway.items()
                   if ref in solution.circuit.heat.coupled_with((self.ref,)) or ref == self.ref]
        solved = self.view.solved & ~np.any(running, axis=0) if running else self.view.solved
        return solved & solution.in_range(self._stands_on)

    @cached_property
    def _stands_on(self) -> tuple[str, ...]:
        """The sinks and patches on its ways of heat."""
        return next((path.sinks for path in self.view.solution.circuit.heat.paths if path.part == self.ref), ())

    @property
    def beyond(self) -> str:
        """The sentence for a part whose sink leaves the range of its laws somewhere; empty where none does."""
        return beyond_text(self.view.solution, self._stands_on)

    @cached_property
    def crest_v(self) -> np.ndarray:
        """What a rectifier's ripple adds to the mean voltage across the part [V], shape (sample,).

        Nothing where both ends swing together; for a switch of a converter or bridge what swings anywhere in it.
        """
        solution, probe = self.view.solution, self.probe
        group = next((b for b in solution.circuit.branches if b.key == probe.group and hasattr(b, "nodes")), None) if probe.pulsed else None
        if group is not None:
            return self.above_v(*group.nodes.values())
        ends = [net for net in (probe.a, probe.b) if net in solution.ripple_voltages]
        return self.above_v(*ends) if len(ends) == 1 else np.zeros(solution.n_samples)

    def above_v(self, *nets: str) -> np.ndarray:
        """How far the highest of the nets rises above its mean [V], shape (sample,)."""
        found = self.view.solution.ripple_voltages
        rises = [found[net][1] for net in nets if net in found]
        return np.max(rises, axis=0) if rises else np.zeros(self.view.solution.n_samples)

    def leaves_blank(self, stress: str) -> bool:
        """Whether the device data names the rating and leaves it to be filled in."""
        return self.part.device is not None and stress in self.part.device.blank_limits

    def rating(self, stress: str) -> np.ndarray:
        """The device's own limit at every sample; NaN where it is not given. A span counts by its lower end."""
        limit = self.part.limit(stress)
        return self.view.constant(limit.min if isinstance(limit, Quantity) else None)

    @cached_property
    def conditions(self) -> Conditions:
        return Conditions(self.view.solution.ambient_c, self.point.case_c, self.point.tj_c)

    def allowed(self, stress: str, rated: np.ndarray) -> tuple[np.ndarray, Limit | None]:
        """What the house allows of a rating, and the limit that decides."""
        return allowed(self._limits(stress), rated, self.conditions)

    def required(self, stress: str, rated: np.ndarray) -> tuple[np.ndarray, Limit | None]:
        """The minimum that the house asks for, never below the rating."""
        return required(self._limits(stress), rated, self.conditions)

    def _limits(self, stress: str) -> tuple[Limit, ...]:
        return self.view.house.limits_on(Target(self.kind, stress, self.view.mode.name, self.part))

    def sources(self, *paths: str) -> tuple[tuple[str, str, str], ...]:
        """Inputs of a finding: (name, value, where) for entries of the device data that exist."""
        found = []
        for path in paths:
            section, _, key = path.partition(".")
            value = self.part.limit(key) if section == "limits" else self._entry(section, key)
            device = self.part.device
            if value is not None and device is not None and (section != "limits" or key in device.limits):
                said = self.part.device.source_text(path)
                where = self.view.board.place(self.part.device.entry(path)) + (f" ({said})" if said else "")
                found.append((f"{self.part.device.name} {path}", getattr(value, "text", "table"), where))
            elif value is not None:
                found.append((f"{self.ref} {path}", value.text, self.view.board.place(value.mark)))
        return tuple(found)

    def _entry(self, section: str, key: str):
        record = getattr(self.part.device, section, None) if self.part.device else None
        return getattr(record, key, None) or None


def beyond_text(solution: Solution, names: Iterable[str]) -> str:
    """The sentence for sinks that leave the range of their laws somewhere; empty where they stay."""
    gone = [name for name in dict.fromkeys((*names, AIR)) if name in solution.temperatures.beyond and not solution.in_range([name]).all()]
    return f"{' and '.join(map(key_text, gone))} is hotter, or in other air, than the laws of its surface hold for" if gone else ""


def key_text(key: str) -> str:
    """A sink, patch or enclosure in words."""
    return key if key == AIR or key.startswith("copper ") else f"sink {key}"
