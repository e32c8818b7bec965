"""The device file beside the annotations: an entry for each distinct part that no file has data for."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from drc_power.draft.data_sheet import SHEETS
from drc_power.draft.devices import Library, Wanted, device_entry
from drc_power.draft.existing import Existing, device_files, read_text, target_file
from drc_power.draft.page import Page
from drc_power.draft.parts import judged_elements
from drc_power.draft.whole import block, inserted, stem
from drc_power.draft.writing import Entry
from drc_power.netlist.model import Netlist
from drc_power.survey.model import Survey
from drc_power.text import printable

_HEADER = """\
# Device data to type in from data sheets, in their order. What is blank is missing, and what needs it is unproven.
# Limits are magnitudes, for p-channel and negative parts too. Say under source: what was read."""


@dataclass(frozen=True, slots=True)
class DeviceText:
    """The device file that a draft writes: its path, its text, and how many entries are new; text is None if it stays."""

    path: str
    text: str | None
    n_new: int
    notes: tuple[str, ...] = ()


def device_text(survey: Survey, netlist: Netlist, existing: Existing, library: Library, switching: frozenset[str]) -> DeviceText:
    """What to write into the device file once `library` has been asked for the devices of all new parts."""
    unnamed = _ask_for_old_parts(survey, netlist, existing, library)
    wanted = library.wanted(survey, netlist)
    entries = [device_entry(each, survey, netlist, bool(switching & set(each.refs))) for each in wanted]
    path = target_file(existing, stem(existing.path))
    text = read_text(path)
    notes = tuple(_without_a_way(existing, unnamed, wanted))
    if text is None and (entries or not device_files(existing)):
        return DeviceText(path, f"{_HEADER}\nformat: 1\n{block('devices', _spaced(entries))}\n", len(entries), notes)
    return DeviceText(path, _with_more(Page(text, path), entries) if text is not None and entries else None, len(entries), notes)


def _ask_for_old_parts(survey: Survey, netlist: Netlist, existing: Existing, library: Library) -> dict[str, str]:
    """Parts that the user's file speaks of need data as well. Returns the device of those for which nothing names one yet."""
    unnamed = {}
    for ref in judged_elements(survey):
        if existing.covers_part(ref) and not existing.is_outside(ref) and survey.parts[ref].kind in SHEETS:
            named = existing.device_named_for(ref)
            device = library.device_of(netlist.parts[ref], survey.parts[ref], named)
            if not named and not library.finds(netlist.parts[ref]):
                unnamed[ref] = device
    return unnamed


def _spaced(entries: Iterable[Entry]) -> list[Entry]:
    """Entries with an empty line between them."""
    return [Entry(f"{entry.text}\n" if k else entry.text, entry.key, entry.names) for k, entry in enumerate(reversed(list(entries)))][::-1]


def _with_more(page: Page, entries: Sequence[Entry]) -> str:
    spaced = [Entry(f"\n{entry.text}", entry.key, entry.names) for entry in entries]
    return inserted(page, {"devices": spaced}, ()) if "devices" in page else inserted(page, {}, [block("devices", entries)])


def _without_a_way(existing: Existing, unnamed: Mapping[str, str], wanted: Iterable[Wanted]) -> Iterator[str]:
    """Devices that a part's own entry does not name, and that no match will find either."""
    found_by_match = {each.name for each in wanted if each.match}
    for device in dict.fromkeys(unnamed.values()):
        refs = [ref for ref, name in unnamed.items() if name == device and existing.has_entry(ref)]
        if refs and device not in found_by_match:
            yield f"{printable(existing.path)}: write device: {device} in the entry of {printable(', '.join(refs))}"
