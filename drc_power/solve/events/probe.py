"""`EventProbe`: one annotated event on one part in one mode, as the circuit carries it."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from ...board import EventNote
from ..variables import Param
from .paths import Path


@dataclass(frozen=True)
class EventProbe:
    """One event as one part sees it.

    inputs: the event's numbers by key, as sides of the box. supplied_by: nets whose highest voltage stands across the
    part, where the network decides. path: from the numbers to the path. lacking: what the event needs and nobody gave.
    share: of the current that this part takes. every: the period of an event that returns.
    """

    name: str
    kind: str
    ref: str
    note: EventNote
    inputs: Mapping[str, Param]
    path: Callable[[Mapping[str, np.ndarray]], Path] | None
    supplied_by: tuple[str, ...] = ()
    lacking: tuple[str, ...] = ()
    share: float = 1.0
    every: Param | None = None
    role: str = "part"
    network: Any = None
    """The network in the other condition, of a stall or an overload."""
    memo: dict = field(default_factory=dict, compare=False, repr=False)
