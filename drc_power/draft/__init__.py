"""First annotation and device files from a survey, merged into what the user already wrote.

    survey ─► rails, loads, stages, parts, devices (what to say) ─► page (where it goes) ─► whole, device_file ─► first

What is blank is for the user to fill in; a guess is a comment, never a value.
"""

from drc_power.draft.first import Draft, draft_files, draft_notes, make_draft

__all__ = ["Draft", "draft_files", "draft_notes", "make_draft"]
