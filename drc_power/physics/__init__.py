"""Equations of power electronics and heat, as pure functions on floats and numpy arrays.

Nothing here knows files, parts, rules or findings. Numbers that cross a function carry their unit in the
name; `units.py` is the glossary of the suffixes. An equation asked for something that it does not hold for
raises `OutsideRange` when the question as a whole makes no sense, and gives NaN for those elements of an
array that lie outside when the others are sound. NaN compares false with every limit, so a caller must ask
for it by `numpy.isnan` before any comparison: it means unproven, never met.
"""

from drc_power.physics.range import OutsideRange

__all__ = ["OutsideRange"]
