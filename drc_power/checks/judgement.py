"""`Judgement`: one rule on one subject in one mode, as arrays over corners, before anyone picks the worst."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np

from ..board import Limit
from ..faults import Mark
from ..findings.identity import Subject
from ..findings.model import Step
from ..findings.verdict import margin, margin_between


@dataclass(frozen=True, slots=True)
class Judgement:
    """What a rule found: value, rated and allowed of shape (sample,), in `unit`; NaN where a number is missing.

    sense: "at_most", "at_least", or "between" with `low` and `allowed` as the two ends.
    lacking: the data that the check needs and nobody gave, as a user would look for them: not empty is unproven.
    only_if_exceeded: a check that has nothing to say while it holds.
    steps: the workings at one sample; sentence: what happens at that sample, without the numbers' judgement.
    """

    rule: str
    subject: Subject
    quantity: str
    unit: str
    value: np.ndarray
    rated: np.ndarray
    allowed: np.ndarray
    mark: Mark
    stress: str | None = None
    ref: str | None = None
    net: str | None = None
    mode: str | None = None
    event: str | None = None
    sense: str = "at_most"
    low: np.ndarray | None = None
    ambient_c: np.ndarray | None = None
    proven: np.ndarray | bool = True
    limit: Limit | None = None
    lacking: tuple[str, ...] = ()
    why: str = ""
    remedy: str = ""
    only_if_exceeded: bool = False
    steps: Callable[[int], tuple[Step, ...]] = field(default=lambda sample: ())
    inputs: Callable[[], tuple[tuple[str, str, str], ...]] = tuple

    def margins(self) -> np.ndarray:
        """The margin at every sample; NaN where it is unproven there."""
        if self.lacking:
            return np.full(self.value.shape, np.nan)
        if self.sense == "between":
            found = margin_between(self.value, self.low, self.allowed)
        else:
            found = margin(self.value, self.allowed, at_least=self.sense == "at_least", ambient_c=self.ambient_c,
                           unit=self.unit)
        return np.where(self.proven, found, np.nan)
