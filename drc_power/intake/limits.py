"""One house rule: how far a stress may go, for what, and in which unit."""

from collections.abc import Iterable, Iterator, Mapping
from typing import Annotated, Any, ClassVar

from pydantic import PrivateAttr
from pydantic_core import PydanticCustomError

from ..quantity import a_dimension, such_as
from .device_kinds import KINDS, STRESSES
from .fields import Flag, Listed, Temperature, Word, as_branch, collected, one_of, read_words, reader, table_reader
from .record import Reads, Record, complaint, shorten, together, unknown_keys
from .suggest import nearest
from .tree import Row
from .values import Quantity, Table, Text

VERDICTS_THAT_FAIL = ("close", "unproven", "exceeded")
THINGS = ("track", "via", "patch", "sink", "load", "rail")
"""What a limit may apply to besides kinds of devices."""

APPLIES_TO = ("kind", "device", "parts", "nets", "modes", "events")

_DIFFERENCE_OF = {"temperature": "temperature_difference"}
_ABSOLUTE = tuple(dict.fromkeys(dimension for dimensions in STRESSES.values() for dimension in dimensions))
_DIFFERENCES = tuple(dict.fromkeys(_DIFFERENCE_OF.get(dimension, dimension) for dimension in _ABSOLUTE))
_AMOUNT = reader("ratio", *_ABSOLUTE)
_TABLE = table_reader(reader("temperature"), _AMOUNT)


def _amount(node: Any) -> Quantity | Table:
    return _TABLE(node) if isinstance(node, Row) else _AMOUNT(node)


def _applies_to(node: Any) -> dict[str, tuple[Text, ...]]:
    branch = as_branch(node)
    known = [key for key in branch if key in APPLIES_TO]
    words, complaints = collected(lambda key: read_words(branch[key]), known)
    complaints += unknown_keys(branch, APPLIES_TO, "applies_to")
    read = dict(zip(map(str, known), words, strict=False))
    complaints += _unknown_kinds(read.get("kind", ()))
    if complaints:
        raise together(complaints)
    return read


def _unknown_kinds(kinds: Iterable[Text]) -> list[PydanticCustomError]:
    known = (*KINDS, *THINGS)
    return [complaint(kind.mark, f"there is no kind {shorten(kind)!r}", nearest(kind, known)) for kind in kinds if kind not in known]


Amount = Annotated[Quantity | Table, Reads(_amount)]
"""A share of the rating, an absolute value, or either as a table over temperature."""


class LimitPart(Record):
    """How far a stress may go: one of `at_most`, `at_least`, `below_rating_by`.

    An amount of dimension "ratio" is a share of the rating; a `Table` has the temperature first.
    """

    IS: ClassVar[str] = "a limit"
    at_most: Amount | None = None
    at_least: Amount | None = None
    below_rating_by: Annotated[Quantity, Reads(reader(*_DIFFERENCES, least=0))] | None = None
    against: Annotated[Text, one_of("ambient", "case", "junction")] | None = None
    full_until: Temperature | None = None
    zero_at: Temperature | None = None

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        given = [key for key in ("at_most", "at_least", "below_rating_by", "lowest_of") if key in self.written]
        if len(given) != 1:
            found = f"a limit with {' and '.join(given)}" if given else "a limit that sets none"
            yield complaint(self.mark, found, "give one of at_most, at_least, below_rating_by, lowest_of")
        yield from self._complaints_about_derating()

    def _complaints_about_derating(self) -> Iterator[PydanticCustomError]:
        if bool(self.full_until) != bool(self.zero_at):
            given, other = ("full_until", "zero_at") if self.full_until else ("zero_at", "full_until")
            yield complaint(self.source_of(given), f"{given} without {other}", f"add {other}: ...")
        elif self.full_until and self.full_until.max >= self.zero_at.min:
            yield complaint(self.source_of("zero_at"), "zero_at is not above full_until", "write the higher temperature as zero_at")
        if self.full_until and not isinstance(self.at_most, Quantity):
            yield complaint(self.source_of("full_until"), "full_until without one value of at_most", "add at_most: 100 %")

    def complaints_for(self, stress: str) -> Iterator[PydanticCustomError]:
        """Amounts in a unit that the stress does not have."""
        own = STRESSES[stress]
        differences = tuple(_DIFFERENCE_OF.get(each, each) for each in own)
        for key, due in (("at_most", ("ratio", *own)), ("at_least", ("ratio", *own)), ("below_rating_by", differences)):
            amount = getattr(self, key)
            dimension = amount.dimensions[1] if isinstance(amount, Table) else amount.dimension if amount else due[0]
            if dimension not in due:
                yield complaint(amount.mark, f"{a_dimension(dimension)} as {key} of {stress}", such_as(due))


class Limit(LimitPart):
    """One house rule. `applies_to` maps its keys to words or globs; every key given must hold, any of its words may."""

    NEEDS: ClassVar[tuple[str, ...]] = ("stress",)
    applies_to: Annotated[Mapping[str, tuple[Text, ...]], Reads(_applies_to)] = {}
    stress: Annotated[Text, one_of(*STRESSES)] | None = None
    lowest_of: Listed[LimitPart] = ()
    locked: Flag = False
    fails_from: Annotated[Text, one_of(*VERDICTS_THAT_FAIL)] | None = None
    source: Word | None = None
    _name: str = PrivateAttr("")
    _pack: str = PrivateAttr("")

    @property
    def name(self) -> str:
        """The name that the pack gives it."""
        return self._name

    @property
    def pack(self) -> str:
        """The name of the pack that it stands in."""
        return self._pack

    def complaints_between_keys(self) -> Iterable[PydanticCustomError]:
        yield from super().complaints_between_keys()
        for part in (self, *self.lowest_of):
            yield from part.complaints_for(self.stress)
        if "lowest_of" in self.written and len(self.lowest_of) < 2:
            yield complaint(self.source_of("lowest_of"), "lowest_of with fewer than two limits", "give two or more")
