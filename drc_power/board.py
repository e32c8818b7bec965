"""`Board`: the netlist, the survey and the annotations bound together. Solving and checking read only this."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from functools import cached_property

from .faults import Fault, InputError, Mark
from .intake.annotations import Annotations, ModeView, lay_file_over_fields, part_note_from_fields
from .intake.captures import Capture
from .intake.devices import Device, DeviceLibrary
from .intake.notes import (
    EnclosureNote, EventNote, InterfaceNote, LoadNote, PartNote, PatchNote, RailNote, SinkNote, StageNote, Surroundings, TrackNote,
)
from .intake.rules import Limit, RulePack
from .intake.suggest import nearest
from .intake.values import Quantity, Table, Text
from .quantity import QuantityError, Span, parse_span, parse_value_field
from .netlist.model import Netlist, Part
from .netlist.natural import natural_key
from .survey.model import Element, Identity, Survey

JUDGED_GROUPS = frozenset({"pass", "switch", "clamp"})
"""Survey groups whose parts always need a verdict; sources and loads only when the user names them."""

TWO_TERMINAL = frozenset({"resistor", "thermistor", "potentiometer", "inductor", "ferrite", "fuse", "relay", "switch",
                          "capacitor", "net-tie", "load-switch"})
"""Kinds whose two nets may stand in for terminals that no evidence named."""


@dataclass(frozen=True, slots=True)
class BoardPart:
    """One part with all that is known of it: netlist, survey, device data; `note` is what the annotations say."""

    part: Part
    identity: Identity
    element: Element | None
    device: Device | None
    note: PartNote
    written_ratings: Mapping[str, Quantity] = field(default_factory=dict)
    named: bool = False

    @property
    def ref(self) -> str:
        return self.part.ref

    @property
    def kind(self) -> str:
        """The device data's kind where there is a device, else what the survey took the part for."""
        return str(self.device.kind) if self.device else self.identity.kind

    @property
    def channel(self) -> str:
        return str(self.device.channel) if self.device and self.device.channel else self.identity.channel

    @property
    def terminals(self) -> Mapping[str, str]:
        """The net at each terminal: the annotated pins first, else the survey's."""
        pins = {**self.identity.terminals, **{name: tuple(p) for name, p in self.note.pins.items()}}
        found = {name: nets[0] for name, numbers in pins.items() if (nets := self.part.nets_of(*numbers))}
        nets = self.part.nets_of()
        if self.kind in TWO_TERMINAL and len(nets) == 2 and not {"a", "b"} <= found.keys():
            found |= {"a": nets[0], "b": nets[1]}
        return found

    def limit(self, stress: str):
        """The rating for a stress: the device data's, else what the schematic's fields or value say, else None."""
        given = self.device.limits.get(stress) if self.device else None
        return given if given is not None else self.written_ratings.get(stress)


@dataclass(frozen=True, slots=True)
class Mode:
    """One steady operating condition of the board, everything merged."""

    name: str
    board: Board
    view: ModeView
    parts: Mapping[str, BoardPart]

    @property
    def rails(self) -> Mapping[str, RailNote]:
        return self.view.rails

    @property
    def loads(self) -> Mapping[str, LoadNote]:
        return self.view.loads


@dataclass(frozen=True)
class Board:
    """What is on the board, what is known of it, and what is to be judged."""

    annotations: Annotations
    netlist: Netlist
    survey: Survey
    library: DeviceLibrary
    rules: RulePack
    notes: list[str] = field(default_factory=list)
    captures: Mapping[str, Capture] = field(default_factory=dict)

    @cached_property
    def grounds(self) -> tuple[str, ...]:
        """The ground nets, annotated or found, by the netlist's own names."""
        names = self.annotations.grounds if self.annotations.grounds is not None else self.survey.grounds
        names = names or [rail.return_ for rail in self.annotations.rails.values() if rail.return_]
        if not names:
            raise InputError(Fault(Mark(self.annotations.path), "no ground was found in the netlist",
                                   "write grounds: [NET], or return: NET at a rail"))
        return tuple(dict.fromkeys(self.net(name) for name in names))

    def net(self, name: str) -> str:
        """The netlist's own name of a net given by name or alias. Raises InputError for a net that is not there."""
        net = self.netlist.net_named(str(name))
        if net is None:
            mark = getattr(name, "mark", Mark(self.annotations.path))
            raise InputError(Fault(mark, f"the netlist has no net {str(name)!r}", nearest(str(name), self.netlist.nets)))
        return net.name

    @cached_property
    def parts(self) -> Mapping[str, BoardPart]:
        """Every part of the netlist with its base annotations."""
        return self._bind(self.annotations.resolve_parts(self.netlist.parts))

    def in_mode(self, name: str) -> Mode:
        """The board in one mode."""
        view = self.annotations.in_mode(name)
        return Mode(name, self, view, self._bind(_in_linear_mode(view, view.resolve_parts(self.netlist.parts))))

    @cached_property
    def modes(self) -> tuple[Mode, ...]:
        return tuple(self.in_mode(name) for name in self.annotations.mode_names)

    def _bind(self, notes: Mapping[str, PartNote]) -> dict[str, BoardPart]:
        elements = {element.ref: element for element in self.survey.elements}
        bound, faults = {}, []
        for ref, part in self.netlist.parts.items():
            note = self._note_of(ref, part, notes.get(ref))
            try:
                device = self._device_of(part, note)
            except InputError as error:
                faults += error.faults
                continue
            bound[ref] = BoardPart(part, self.survey.parts[ref], elements.get(ref), device, note, self._written(part),
                                   ref in notes or bool(note.written))
        if faults:
            raise InputError(*dict.fromkeys(faults))
        return bound

    def _note_of(self, ref: str, part: Part, note: PartNote | None) -> PartNote:
        if not any(name.startswith("Pwr.") for name in part.fields):
            return note if note is not None else PartNote.of()
        fields = part_note_from_fields(part.fields, Mark(self.netlist_name, part.line))
        merged, conflicts = lay_file_over_fields(ref, note, fields)
        self.notes.extend(text for text in conflicts if text not in self.notes)
        return merged

    def _device_of(self, part: Part, note: PartNote) -> Device | None:
        if note.device is not None:
            device = self.library.devices.get(str(note.device))
            if device is None:
                raise InputError(Fault(note.source_of("device"), f"there is no device {str(note.device)!r}",
                                       nearest(str(note.device), self.library.devices)))
            return device
        fitting = self.library.matching(part.value, part.fields)
        if len(fitting) > 1:
            names = " and ".join(device.name for device in fitting)
            raise InputError(Fault(Mark(self.netlist_name, part.line), f"{part.ref} matches the devices {names}",
                                   f"name one of them: parts: {{{part.ref}: {{device: {fitting[0].name}}}}}"))
        return fitting[0] if fitting else None

    def _written(self, part: Part) -> dict[str, Quantity]:
        """Ratings that the schematic gives: in fields that the house maps, and behind the value as in 10uF/25V."""
        mark, found = Mark(self.netlist_name, part.line), {}
        for stress in ("voltage", "current", "power", "temperature"):
            for name in getattr(self.rules.fields, stress):
                text = part.fields.get(str(name))
                if text and stress not in found and (span := _span_or_none(text, stress)) is not None:
                    found[stress] = Quantity(span, stress, text, mark)
        for dimension in VALUE_DIMENSIONS.get(self.survey.parts[part.ref].kind, ()):
            read = parse_value_field(part.value, dimension)
            for stress, rating in (read.ratings.items() if read else ()):
                found.setdefault(stress, Quantity(Span.exact(rating), stress, part.value, mark))
        return found

    @cached_property
    def netlist_name(self) -> str:
        """The netlist as the annotations name it, for messages."""
        return os.path.normpath(os.path.join(os.path.dirname(self.annotations.path), str(self.annotations.netlist)))

    @cached_property
    def not_fitted(self) -> frozenset[str]:
        """Parts that are drawn but not on the board."""
        return frozenset(ref for ref, part in self.parts.items() if not self._is_fitted(part))

    def _is_fitted(self, part: BoardPart) -> bool:
        if part.note.fitted is not None:
            return part.note.fitted
        marks = self.rules.fields.not_fitted or {}
        marked = any(part.part.fields.get(name) == value for name, value in marks.items())
        return not (marked or part.part.dnp or part.ref in self.survey.not_fitted)

    @cached_property
    def outside(self) -> Mapping[str, str]:
        """Parts that the user leaves out, each with the reason."""
        found: dict[str, str] = {}
        for entry in self.annotations.outside:
            for pattern in entry.parts:
                found |= dict.fromkeys(self._matching(pattern), str(entry.because))
        return {ref: found[ref] for ref in sorted(found, key=natural_key)}

    def _matching(self, pattern: Text) -> list[str]:
        import fnmatch

        refs = [ref for ref in self.netlist.parts if fnmatch.fnmatchcase(ref, str(pattern))]
        if not refs:
            raise InputError(Fault(pattern.mark, f"{str(pattern)!r} fits no part of the netlist",
                                   nearest(str(pattern), self.netlist.parts)))
        return refs

    @cached_property
    def named(self) -> frozenset[str]:
        """Parts that the annotations or the schematic's own fields speak of: solved and judged, whatever the survey thought."""
        refs = {ref for mode in self.modes for ref, part in mode.parts.items() if part.named}
        refs |= {ref for mode in self.modes for stage in mode.view.stages.values() for ref in stage_parts(stage)}
        refs |= {ref for event in self.annotations.events.values() for ref in event_parts(event)}
        refs |= {str(load.heats) for mode in self.modes for load in mode.loads.values() if load.heats}
        return frozenset(refs & self.netlist.parts.keys())

    @cached_property
    def elements(self) -> tuple[str, ...]:
        """The parts that need a verdict, in natural order."""
        found = {e.ref for e in self.survey.elements if e.group in JUDGED_GROUPS or self._burns(e)}
        wanted = (found | self.named) - self.outside.keys() - self.not_fitted
        return tuple(sorted(wanted, key=natural_key))

    def _burns(self, element: Element) -> bool:
        """A resistor across a supply is a load that heats up on the board itself."""
        return element.group == "load" and self.parts[element.ref].kind == "resistor"

    @cached_property
    def _marks(self) -> dict[str, Mark]:
        return {}

    def where(self, part: BoardPart) -> Mark:
        """The line a reader should look at for a part: its annotation, else its netlist entry."""
        if part.ref not in self._marks:
            written = part.note.written
            self._marks[part.ref] = part.note.source_of(written[0]) if written else Mark(self.netlist_name, part.part.line)
        return self._marks[part.ref]

    def shown(self, path: str) -> str:
        """A file as a report names it: from the project folder, so that a checkout elsewhere gives the same bytes."""
        if not path or path.startswith("shipped/"):
            return path
        return os.path.relpath(path, self.annotations.folder or ".").replace(os.sep, "/")

    def place(self, mark: Mark) -> str:
        """A place as a report names it: file and line, seen from the project folder."""
        return str(Mark(self.shown(mark.file), mark.line))

    def check_names(self) -> None:
        """Raise InputError with every net, part or sink that the annotations name and that is not there."""
        faults = list(dict.fromkeys(fault for mode in self.modes for fault in self._wrong_names(mode)))
        if faults:
            raise InputError(*faults)
        self.grounds, self.outside  # noqa: B018  their own names are checked as they are resolved

    def _wrong_names(self, mode: Mode) -> Iterator[Fault]:
        nets, parts, sinks = self.netlist.nets, self.netlist.parts, self.annotations.sinks
        for what, name, known in self._names(mode, nets, parts, sinks):
            missing = self.netlist.net_named(str(name)) is None if known is nets else str(name) not in known
            if missing:
                mark = getattr(name, "mark", Mark(self.annotations.path))
                where = "the file" if known is sinks else "the netlist"
                yield Fault(mark, f"{where} has no {what} {str(name)!r}", nearest(str(name), known))

    def _names(self, mode: Mode, nets, parts, sinks) -> Iterator[tuple[str, str, Iterable[str]]]:
        for name, rail in mode.rails.items():
            yield "net", Text(name, rail.mark), nets
            yield from (("part", ref, parts) for ref in rail.source)
            yield from (("net", net, nets) for net in (rail.return_,) if net)
            yield from (("part", ref, parts) for ref in (rail.held_by,) if ref)
        for load in mode.loads.values():
            yield from (("net", net, nets) for net in (load.net, load.return_, *load.between) if net)
            yield from (("part", ref, parts) for ref in (load.heats,) if ref)
        for stage in mode.view.stages.values():
            yield from (("part", ref, parts) for ref in stage_parts(stage))
        for event in self.annotations.events.values():
            yield from (("part", ref, parts) for ref in event_parts(event))
            yield from (("net", net, nets) for net in (event.net,) if net)
        for part in mode.parts.values():
            if part.note.heat is not None and part.note.heat.sink:
                yield "sink", part.note.heat.sink, sinks


def _in_linear_mode(view: ModeView, notes: Mapping[str, PartNote]) -> dict[str, PartNote]:
    """The notes with the pass elements of linear-pass stages in state linear, unless a state is written."""
    passing = {str(ref): stage.mark for stage in view.stages.values() if str(stage.kind) == "linear-pass" for ref in stage.parts}
    plain = PartNote.of()
    return dict(notes) | {ref: notes.get(ref, plain).model_copy(update={"state": Text("linear", mark)})
                          for ref, mark in passing.items() if notes.get(ref, plain).state is None}


VALUE_DIMENSIONS = {"capacitor": ("capacitance",), "resistor": ("resistance",), "inductor": ("inductance",),
                    "ferrite": ("impedance",), "fuse": ("current",)}
"""What the main value of a kind is, for reading the ratings written behind it."""


def _span_or_none(text: str, dimension: str) -> Span | None:
    """A rating as a schematic field has it; text that is not understood in full gives no value."""
    try:
        return parse_span(text, dimension)
    except QuantityError:
        return None


STAGE_PART_KEYS = ("chip", "high", "low", "switch", "pair", "parts", "controller", "inductor", "shunts", "clamp",
                   "bridge", "reservoir")


def stage_parts(stage) -> tuple[Text, ...]:
    """The references that a stage names."""
    return tuple(ref for key in STAGE_PART_KEYS for ref in getattr(stage, key))


def event_parts(event: EventNote) -> tuple[Text, ...]:
    """The references that an event names: its parts, and the part that clamps."""
    clamp = (event.clamp,) if isinstance(event.clamp, Text) else ()
    return (*event.parts, *((event.part,) if event.part else ()), *clamp)
