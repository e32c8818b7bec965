"""The four input files: annotations, device data, house rules and waivers, each value with the place it stands at."""

from .annotations import Annotations, read_annotations
from .devices import Device, DeviceLibrary, read_devices
from .modes import ModeView
from .parts import lay_file_over_fields, part_note_from_fields
from .rules import Limit, RulePack, read_rules
from .values import Quantity, SourceFile, Table, Text
from .waivers import Waiver, Waivers, read_waivers

__all__ = [
    "Annotations", "Device", "DeviceLibrary", "Limit", "ModeView", "Quantity", "RulePack", "SourceFile", "Table", "Text",
    "Waiver", "Waivers", "lay_file_over_fields", "part_note_from_fields", "read_annotations", "read_devices", "read_rules",
    "read_waivers",
]
