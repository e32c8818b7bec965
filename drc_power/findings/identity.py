"""What a finding is about, as an identity that re-annotation and new numbers leave alone.

Waivers and `compare` hold on to a finding by its `id`, so an id is made of symbol UUIDs and of names that the user
chose, never of references, values or corners. Two different subjects never share an id short of a hash collision
(64 bits: with a million findings the odds are one in thirty million).
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable

Subject = tuple[str, ...]
"""A kind, then what tells one of that kind from another."""

NAMED_KINDS = ("sink", "load", "stage", "event", "rail", "waiver", "rule", "device", "copper")

_DIGEST_CHARS = 16


def part_subject(uuid: str, ref: str = "") -> Subject:
    """A part by its symbol's UUID path; by its reference only where the netlist gives no UUID."""
    return ("part", uuid) if uuid else ("part-by-reference", ref)


def net_subject(pins: Iterable[tuple[str, str]], name: str = "") -> Subject:
    """A net by the set of its pins, each (UUID path of the part, pin number), in any order.

    name: the net's name, which is all that identifies a net without pins.

    >>> net_subject([("b", "2"), ("a", "1")]) == net_subject([("a", "1"), ("b", "2"), ("a", "1")])
    True
    """
    distinct = sorted(set(pins))
    if not distinct:
        return "net-by-name", name
    return "net", *(text for pin in distinct for text in pin)


def named_subject(kind: str, name: str) -> Subject:
    """A sink, load, stage, event or another thing that only its name identifies."""
    if kind not in NAMED_KINDS:
        raise ValueError(f"{kind!r} is not identified by name; one of {', '.join(NAMED_KINDS)} is")
    return kind, name


def finding_id(*subjects: Subject, rule: str, stress: str | None = None, mode: str | None = None) -> str:
    """The id of the finding that `rule` makes about the subjects: 16 hexadecimal digits.

    subjects: the part, net or named thing, and the event where there is one; their order does not matter.

    >>> finding_id(part_subject("/7c1e/90ab"), rule="junction.steady", stress="tj", mode="run")
    'e62a0f522c43d4b9'
    """
    if not subjects:
        raise ValueError("a finding is about something: give at least one subject")
    about = [sorted(subjects), rule, stress, mode]
    canonical = json.dumps(about, ensure_ascii=True, separators=(",", ":"))
    return hashlib.sha256(canonical.encode("ascii")).hexdigest()[:_DIGEST_CHARS]
