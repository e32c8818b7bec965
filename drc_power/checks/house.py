"""House rules on one part: which limits apply to a stress, and what they leave of the rating."""

from __future__ import annotations

import fnmatch
from collections.abc import Callable, Iterable
from dataclasses import dataclass, field

import numpy as np

from ..board import BoardPart, Limit, Quantity, RulePack
from ..physics.tables import interpolate_linear


@dataclass(frozen=True, slots=True)
class Conditions:
    """The temperatures that a limit may be read against [°C], shape (sample,) each; NaN where unknown."""

    ambient: np.ndarray
    case: np.ndarray
    junction: np.ndarray


@dataclass(frozen=True, slots=True)
class Target:
    """What a limit is asked for: a part or a thing of some kind, one stress, one mode."""

    kind: str
    stress: str
    mode: str
    part: BoardPart | None = None
    nets: tuple[str, ...] = ()
    event: str | None = None

    def words(self, key: str) -> tuple[str, ...]:
        """What the target is, for one key of `applies_to`."""
        if key == "kind":
            return (self.kind,)
        if key == "device":
            return (self.part.device.name,) if self.part and self.part.device else ()
        if key == "parts":
            return (self.part.ref,) if self.part else ()
        if key == "nets":
            return self.nets or (self.part.part.nets_of() if self.part else ())
        return {"modes": (self.mode,), "events": (self.event,) if self.event else ()}[key]


def applies(limit: Limit, target: Target) -> bool:
    """Whether a limit speaks of the target: its stress, and every key of its `applies_to`."""
    if str(limit.stress) != target.stress:
        return False
    return all(_fits(patterns, target.words(key)) for key, patterns in limit.applies_to.items())


def _fits(patterns: Iterable[str], words: Iterable[str]) -> bool:
    return any(fnmatch.fnmatchcase(word, str(pattern)) for word in words for pattern in patterns)


@dataclass(frozen=True)
class House:
    """The rules in force, each target's limits looked up once."""

    rules: RulePack
    found: dict[tuple, tuple[Limit, ...]] = field(default_factory=dict)
    kept: dict[tuple[str, int], tuple[object, object]] = field(default_factory=dict)

    def once(self, what: str, of: object, work: Callable[[], object]) -> object:
        """What does not change while one thing is judged again and again, worked out the first time."""
        key = (what, id(of))
        if key not in self.kept:
            # The thing itself is kept with it, so that no other can ever bear its id.
            self.kept[key] = of, work()
        return self.kept[key][1]

    def limits_on(self, target: Target) -> tuple[Limit, ...]:
        """The limits in force: those of the last pack that has any, and every locked one below it."""
        key = (target.kind, target.stress, target.mode, target.part.ref if target.part else None, target.nets, target.event)
        if key not in self.found:
            self.found[key] = _limits_on(self.rules, target)
        return self.found[key]


def _limits_on(rules: RulePack, target: Target) -> tuple[Limit, ...]:
    fitting = [limit for limit in rules.limits.values() if applies(limit, target)]
    if not fitting:
        return ()
    last = max(rules.packs.index(limit.pack) for limit in fitting)
    return tuple(limit for limit in fitting if limit.locked or rules.packs.index(limit.pack) == last)


def allowed(limits: Iterable[Limit], rated: np.ndarray, conditions: Conditions) -> tuple[np.ndarray, Limit | None]:
    """The lowest value that the limits allow at each point, shape (sample,), and the limit that gives it.

    rated: the device's own limit, shape (sample,). Without a limit the rating itself is allowed.
    """
    found = [(_value(limit, rated, conditions), limit) for limit in limits]
    if not found:
        return rated, None
    if len(found) == 1:
        return found[0]
    lowest = np.minimum.reduce([value for value, _ in found])
    return lowest, min(found, key=lambda row: np.nan_to_num(row[0], nan=-np.inf).min(initial=np.inf))[1]


def required(limits: Iterable[Limit], rated: np.ndarray, conditions: Conditions) -> tuple[np.ndarray, Limit | None]:
    """The highest minimum that the limits ask for, never below the rating."""
    best, chosen = np.asarray(rated, dtype=float), None
    for limit in limits:
        if limit.at_least is not None:
            value = _share(limit.at_least, rated, limit, conditions)
            chosen = limit if (value > best).any() else chosen
            best = np.maximum(best, value)
    return best, chosen


def _value(limit, rated: np.ndarray, conditions: Conditions) -> np.ndarray:
    found = [_value(part, rated, conditions) for part in getattr(limit, "lowest_of", ())]
    if limit.below_rating_by is not None:
        found.append(rated - limit.below_rating_by.typ)
    if limit.at_most is not None:
        found.append(_share(limit.at_most, rated, limit, conditions))
    value = np.minimum.reduce(found) if found else rated
    return value * _derating(limit, conditions)


def _share(amount, rated: np.ndarray, limit, conditions: Conditions) -> np.ndarray:
    """A share of the rating or an absolute value, constant or read from a table over temperature."""
    if isinstance(amount, Quantity):
        return rated * amount.typ if amount.dimension == "ratio" else np.full_like(rated, amount.typ)
    at = _temperature(limit, conditions)
    # Past the last point of a table nobody has said what holds: NaN, which is unproven.
    value = interpolate_linear(at, amount.column(0), amount.column(1), above="nan")
    return rated * value if amount.dimensions[1] == "ratio" else value


def _derating(limit, conditions: Conditions) -> np.ndarray | float:
    """1 up to `full_until`, then a straight line to 0 at `zero_at`."""
    if limit.full_until is None or limit.zero_at is None:
        return 1.0
    full, zero = limit.full_until.typ, limit.zero_at.typ
    return np.clip((zero - _temperature(limit, conditions)) / (zero - full), 0.0, 1.0)


def _temperature(limit, conditions: Conditions) -> np.ndarray:
    return getattr(conditions, str(limit.against) if limit.against else "ambient")


def describe(limit: Limit | None) -> str:
    """The limit in words, for a text: what it leaves of the rating."""
    if limit is None:
        return "the rating itself"
    if limit.below_rating_by is not None:
        return f"{limit.below_rating_by.text} below the rating"
    if isinstance(limit.at_most, Quantity):
        of = " of the rating" if limit.at_most.dimension == "ratio" else ""
        cooled = f", none at {limit.zero_at.text}" if limit.zero_at is not None else ""
        return f"{limit.at_most.text}{of}{cooled}"
    if isinstance(limit.at_least, Quantity):
        return f"at least {limit.at_least.text}"
    return f"house rule {limit.name}"
