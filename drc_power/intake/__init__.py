"""The four input files: annotations, device data, house rules and waivers, each value with the place it stands at."""

from .annotations import Annotations, read_annotations
from .modes import ModeView
from .parts import lay_file_over_fields, part_note_from_fields
from .values import Quantity, SourceFile, Table, Text

__all__ = [
    "Annotations", "ModeView", "Quantity", "SourceFile", "Table", "Text",
    "lay_file_over_fields", "part_note_from_fields", "read_annotations",
]
