"""From a survey to files: what is new in it, where it goes, and what to tell the user."""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field

from drc_power.draft.device_file import device_text
from drc_power.draft.devices import Library
from drc_power.draft.existing import Existing, device_files, known_devices, read_text
from drc_power.draft.gone import gone
from drc_power.draft.loads import Consumer, consumers, load_entries, load_names
from drc_power.draft.page import Page
from drc_power.draft.parts import judged_elements, part_entries
from drc_power.draft.rails import rail_entries
from drc_power.draft.stages import stage_entries, switched_parts
from drc_power.draft.whole import Sections, added_text, whole_text
from drc_power.draft.writing import Entry, free_name
from drc_power.intake.tree import tree_of
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Survey
from drc_power.text import printable, shorten


@dataclass(slots=True)
class Draft:
    """The files that change, with their text by path, and what to tell the user, a line each."""

    files: dict[str, str] = field(default_factory=dict)
    notes: list[str] = field(default_factory=list)


def make_draft(survey: Survey, netlist: Netlist, path: str) -> Draft:
    """The annotation file at `path` and a device file in its folder, new or with what is new added.

    Nothing is written. Raises InputError where a file that is there cannot be read or has no place for more.
    """
    text = read_text(path)
    aliases = {name: net.aliases for name, net in netlist.nets.items() if net.aliases}
    existing = Existing(path, Page(text, path) if text is not None else None, aliases)
    library = Library(known_devices(device_files(existing), existing.folder))
    found, switching = _sections(survey, netlist, existing, library)
    sections = {name: [entry for entry in entries if entry.can_be_written] for name, entries in found.items()}
    new = added_text(survey, netlist, existing, sections) if existing.page else whole_text(survey, netlist, path, sections)
    devices = device_text(survey, netlist, existing, library, switching)
    files = {path: new} if new != text else {}
    files |= {devices.path: devices.text} if devices.text is not None else {}
    notes = [_counted(path, sections), f"{printable(devices.path)}: {_amount(devices.n_new, 'device')} to type in"]
    return Draft(files, [*notes, *devices.notes, *_nameless(path, found), *_remarks(survey, netlist, existing)])


def draft_files(survey: Survey, netlist: Netlist, path: str) -> dict[str, str]:
    """The files that a draft changes, by path; see `make_draft`."""
    return make_draft(survey, netlist, path).files


def draft_notes(survey: Survey, netlist: Netlist, path: str) -> list[str]:
    """What a draft has to tell: how much is new, what the file names that is gone, what its comments keep out."""
    return make_draft(survey, netlist, path).notes


def _sections(survey: Survey, netlist: Netlist, existing: Existing, library: Library) -> tuple[Sections, frozenset[str]]:
    """What is new, section by section, and the parts of stages that switch."""
    names, new_loads = _loads(survey, netlist, existing)
    load_of = {bearer: name for consumer, name in names.items() for bearer in (consumer.ref, consumer.between) if bearer}
    stages = [entry for entry in stage_entries(survey, netlist, load_of) if not existing.in_a_stage(entry.names)]
    switching = switched_parts(survey) & _in_stages(existing, stages)
    new_parts = [e for ref, e in judged_elements(survey).items() if not existing.covers_part(ref)]
    return {
        "rails": list(rail_entries(survey, netlist, existing.has_rail, with_hints=existing.page is None)),
        "loads": list(load_entries(survey, netlist, new_loads)),
        "stages": stages,
        "parts": list(part_entries(survey, netlist, new_parts, library, switching)),
    }, switching


def _loads(survey: Survey, netlist: Netlist, existing: Existing) -> tuple[Mapping[Consumer, str], Mapping[Consumer, str]]:
    """The load that stands for each consumer, and those of them that the file does not have."""
    usual = load_names(consumers(survey, netlist))
    names, new = existing.loads_of(usual), {}
    taken = {statement.key for statement in existing.statements("loads")}
    for consumer in [each for each in usual if each not in names]:
        if not existing.keeps_out("loads", (consumer.ref, *consumer.nets)):
            names[consumer] = new[consumer] = free_name(usual[consumer], taken)
    return names, new


def _in_stages(existing: Existing, new: Sequence[Entry]) -> frozenset[str]:
    """The parts of stages, the user's and the new ones that are no comments."""
    own = (statement.scalars for statement in existing.statements("stages"))
    return frozenset().union(*own, *(entry.names for entry in new if not entry.is_comment))


def _counted(path: str, sections: Sections) -> str:
    counts = {name: sum(not entry.is_comment for entry in entries) for name, entries in sections.items()}
    new = [_amount(count, name[:-1]) for name, count in counts.items() if count]
    return f"{printable(path)}: " + (f"{', '.join(new)} to fill in" if new else "nothing new")


def _nameless(path: str, sections: Sections) -> Iterator[str]:
    """What could not be written."""
    lost = dict.fromkeys(name for entries in sections.values() for entry in entries if not entry.can_be_written for name in sorted(entry.names))
    if lost:
        shown = ", ".join(shorten(printable(name), 40) or '""' for name in lost)
        yield f"{printable(path)}: a file cannot hold every name, rename what is about {shown}"


def _amount(count: int, what: str) -> str:
    return f"{count} {what}{'' if count == 1 else 's'}"


def _remarks(survey: Survey, netlist: Netlist, existing: Existing) -> Iterator[str]:
    """What the file says that does not fit the netlist, and what its comments keep out."""
    if existing.page is None:
        return
    yield from _about_netlist(netlist, existing)
    if existing.has("grounds"):
        known = existing.page.words("grounds")
        yield from (f"{printable(existing.path)}: {printable(net)} looks like a ground and is not under grounds" for net in survey.grounds
                    if net not in known)
    root, _ = tree_of(existing.page.text.encode(), existing.path)
    yield from (f"{mark}: {said}" for mark, said in gone(root, netlist))
    usual = load_names(consumers(survey, netlist))
    there = existing.loads_of(usual)
    kept = [f"{c.ref} on {c.net}" for c in usual if c not in there and existing.keeps_out("loads", (c.ref, *c.nets))]
    if kept:
        yield f"{printable(existing.path)}: loads that only a comment speaks of, and that count nowhere: {shorten(printable(', '.join(kept)), 200)}"


def _about_netlist(netlist: Netlist, existing: Existing) -> Iterator[str]:
    named = "".join(existing.page.words("netlist"))
    if named and os.path.realpath(os.path.join(existing.folder, named)) != os.path.realpath(netlist.path):
        yield f"{printable(existing.path)}: it is about {printable(named)}, and this draft about {printable(netlist.path)}; the name stays as it is"
