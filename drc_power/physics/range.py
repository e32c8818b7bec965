"""How an equation says that it was asked for something it does not hold for."""

from __future__ import annotations

import numpy as np


class OutsideRange(ValueError):
    """An equation does not hold for what it was given: the caller's answer is unproven, not a number."""


def nan_where(outside, value):
    """`value` with NaN wherever `outside` is true: the mask of an equation that does not hold everywhere.

    outside: true where the equation does not hold [-], any shape.
    value: what the equation gives [any], broadcasts with `outside`.
    Returns an array of the common shape [any], a scalar for two scalars.
    Source: common practice, IEEE 754 quiet NaN.

    >>> nan_where([False, True], [1.0, 2.0]).tolist()
    [1.0, nan]
    """
    return np.where(outside, np.nan, value)[()]


def refuse_unless(holds, sentence):
    """A condition of an equation, with the sentence that the caller gets when it does not hold.

    holds: the condition [-], any shape.
    sentence: what was asked and what the equation holds for [text].
    Raises OutsideRange with the sentence unless the condition holds everywhere.
    Source: common practice.

    >>> refuse_unless(True, "resistance must be above 0 ohm")
    """
    if not np.all(holds):
        raise OutsideRange(sentence)
