"""How one value of an input file is read. Each name is a type for a record's field, with its reader inside."""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable, Iterable
from types import MappingProxyType
from typing import Annotated, Any, TypeVar

from pydantic import AfterValidator, BeforeValidator, PlainValidator
from pydantic_core import PydanticCustomError

from ..quantity import QuantityError, Span, example_of, parse_any, parse_span, span_from_ends
from .record import complaint, describe, shorten, together
from .suggest import nearest
from .tree import Blank, Branch, Row
from .values import NOWHERE, Quantity, Table, Text

T = TypeVar("T")
_ENDS = ("min", "typ", "max")


def due(node: Any, what: str, instead: str) -> PydanticCustomError:
    """The complaint that something else stands where `what` is due."""
    return complaint(node.mark, f"{what} is due here, found {describe(node)}", instead)


# --- words ---------------------------------------------------------------------------------------


def read_word(node: Any) -> Text:
    """One word or phrase."""
    if not isinstance(node, Text) or isinstance(node, Blank):
        raise due(node, "a text", "write one word or phrase")
    if not node.strip() or not node.isprintable():
        raise complaint(node.mark, "a text without visible content, or with control characters", "write plain text")
    return node


def read_words(node: Any) -> tuple[Text, ...]:
    """One word or a list of them."""
    if not isinstance(node, Row):
        return (read_word(node),)
    if not node:
        raise complaint(node.mark, "an empty list", "name at least one, or leave the key out")
    return tuple(read_word(each) for each in node)


def read_flag(node: Any) -> bool:
    """True or false."""
    answers = {"true": True, "yes": True, "false": False, "no": False}
    word = str(node).casefold() if isinstance(node, Text) else ""
    if word not in answers:
        raise due(node, "true or false", "write true or false")
    return answers[word]


def read_date(node: Any) -> datetime.date:
    """A calendar day, YYYY-MM-DD."""
    try:
        if re.fullmatch(r"\d{4}-\d\d-\d\d", str(read_word(node)), re.ASCII):
            return datetime.date.fromisoformat(node)
    except ValueError:
        pass
    raise due(node, "a date", "write it as 2027-03-31")


def one_of(*words: str) -> PlainValidator:
    """The reader of a word from a fixed choice."""

    def read(node: Any) -> Text:
        word = read_word(node)
        if word not in words:
            raise complaint(word.mark, f"{shorten(word)!r} is not known here", nearest(word, words))
        return word

    return PlainValidator(read)


# --- quantities ----------------------------------------------------------------------------------


def quantity_from(node: Any, *dimensions: str) -> Quantity:
    """A quantity of one of the dimensions, from text or from a {min, typ, max} mapping."""
    if isinstance(node, Branch):
        return _from_ends(node, dimensions)
    if not isinstance(node, Text) or isinstance(node, Blank):
        raise due(node, f"a {dimensions[0].replace('_', ' ')}", f"write it as {example_of(dimensions[0])}")
    try:
        dimension, span = parse_any(node, dimensions)
    except QuantityError as error:
        raise complaint(node.mark, error.found, error.instead) from None
    return Quantity(span, dimension, str(node), node.mark)


def _from_ends(branch: Branch, dimensions: tuple[str, ...]) -> Quantity:
    wrong = [complaint(key.mark, f"{shorten(key)!r} is not an end of a span", nearest(key, _ENDS))
             for key in branch if key not in _ENDS]
    if wrong or not branch:
        raise together(wrong) if wrong else complaint(branch.mark, "an empty span", "write {min: ..., typ: ..., max: ...}")
    ends = {key: quantity_from(branch[key], *dimensions) for key in branch}
    named = {end.dimension for end in ends.values()}
    if len(named) > 1:
        raise complaint(branch.mark, "a span whose ends have different units", "write every end in the same unit")
    for key, end in ends.items():
        if not end.span.is_exact:
            raise complaint(end.mark, f"the end {key!r} is itself a span", "write one value for each end")
    try:
        span = span_from_ends(**{key: end.typ for key, end in ends.items()})
    except QuantityError as error:
        raise complaint(branch.mark, error.found, error.instead) from None
    text = "{" + ", ".join(f"{key}: {end.text}" for key, end in ends.items()) + "}"
    return Quantity(span, named.pop(), text, branch.mark)


def quantity(*dimensions: str, least: float | None = None, above: float | None = None, most: float | None = None) -> PlainValidator:
    """The reader of a quantity. `least`, `above` and `most` bound both ends of its span, in SI units."""

    def read(node: Any) -> Quantity:
        read_one = quantity_from(node, *dimensions)
        problem = out_of_range(read_one.span, least, above, most)
        if problem:
            raise complaint(read_one.mark, f"{shorten(read_one.text)!r} {problem}", f"write it as {example_of(dimensions[0])}")
        return read_one

    return PlainValidator(read)


def out_of_range(span: Span, least: float | None, above: float | None, most: float | None) -> str:
    """Why a span is impossible for what it stands for, or ""."""
    if least is not None and span.min < least:
        return "is negative where that cannot be" if least == 0 else "is below what is possible"
    if above is not None and span.min <= above:
        return "is not above zero where it must be" if above == 0 else "is below what is possible"
    if most is not None and span.max > most:
        return "is above what is possible"
    return ""


def as_branch(node: Any) -> Branch:
    """A mapping of names; nothing at all is an empty one."""
    if isinstance(node, Blank):
        return Branch(node.mark)
    if not isinstance(node, Branch):
        raise due(node, "a mapping of names", "write {name: ..., name: ...}")
    return node


def as_row(node: Any) -> Row:
    """A list."""
    if not isinstance(node, Row):
        raise due(node, "a list", "write [..., ...]")
    return node


Word = Annotated[Text, PlainValidator(read_word)]
Words = Annotated[tuple[Text, ...], PlainValidator(read_words)]
Flag = Annotated[bool, PlainValidator(read_flag)]
Day = Annotated[datetime.date, PlainValidator(read_date)]
Named = Annotated[dict[Word, T], BeforeValidator(as_branch)]
Listed = Annotated[tuple[T, ...], BeforeValidator(as_row)]

Voltage = Annotated[Quantity, quantity("voltage")]
Overvoltage = Annotated[Quantity, quantity("voltage", least=0)]
Current = Annotated[Quantity, quantity("current", least=0)]
CurrentLimit = Annotated[Quantity, quantity("current", above=0)]
Power = Annotated[Quantity, quantity("power", least=0)]
Energy = Annotated[Quantity, quantity("energy", least=0)]
Resistance = Annotated[Quantity, quantity("resistance", least=0)]
LoadResistance = Annotated[Quantity, quantity("resistance", above=0)]
Capacitance = Annotated[Quantity, quantity("capacitance", above=0)]
Inductance = Annotated[Quantity, quantity("inductance", above=0)]
Charge = Annotated[Quantity, quantity("charge", least=0)]
Frequency = Annotated[Quantity, quantity("frequency", above=0)]
Time = Annotated[Quantity, quantity("time", above=0)]
Slew = Annotated[Quantity, quantity("slew", above=0)]
Angle = Annotated[Quantity, quantity("angle")]
Temperature = Annotated[Quantity, quantity("temperature")]
TemperatureRise = Annotated[Quantity, quantity("temperature_difference", least=0)]
ThermalResistance = Annotated[Quantity, quantity("thermal_resistance", least=0)]
HeatCapacity = Annotated[Quantity, quantity("thermal_capacity", above=0)]
ThermalConductivity = Annotated[Quantity, quantity("conductivity", above=0)]
Length = Annotated[Quantity, quantity("length", above=0)]
Altitude = Annotated[Quantity, quantity("length")]
Area = Annotated[Quantity, quantity("area", above=0)]
Ratio = Annotated[Quantity, quantity("ratio", least=0, most=1)]
Factor = Annotated[Quantity, quantity("number", "ratio", least=0)]
Count = Annotated[Quantity, quantity("count", above=0)]
