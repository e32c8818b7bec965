"""How one value of an input file is read. The types at the end are for the fields of records.

A reader takes a piece of the tree and returns a value, or raises a complaint that carries the place.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable, Iterable
from typing import Annotated, Any, TypeVar

from pydantic import BeforeValidator, ValidationError
from pydantic_core import PydanticCustomError

from ..quantity import QuantityError, Span, a_dimension, due_words, parse_any, span_from_ends, such_as
from .record import Reads, complaint, complaints_of, describe, shorten, together
from .suggest import nearest
from .tree import Blank, Branch, Row
from .values import Quantity, Table, Text

T = TypeVar("T")
Reader = Callable[[Any], Any]
ENDS = ("min", "typ", "max")


def due(node: Any, what: str, instead: str) -> PydanticCustomError:
    """The complaint that something else stands where `what` is due."""
    return complaint(node.mark, f"{what} is due here, found {describe(node)}", instead)


def collected(reader: Reader, nodes: Iterable[Any]) -> tuple[list[Any], list[PydanticCustomError]]:
    """Every node read that can be, and the complaints about the others."""
    values: list[Any] = []
    complaints: list[PydanticCustomError] = []
    for node in nodes:
        try:
            values.append(reader(node))
        except PydanticCustomError as error:
            complaints.append(error)
        except ValidationError as error:
            complaints += complaints_of(error)
    return values, complaints


def each(reader: Reader, nodes: Iterable[Any]) -> list[Any]:
    """Every node read; raises the complaints about all of them together."""
    values, complaints = collected(reader, nodes)
    if complaints:
        raise together(complaints)
    return values


# --- words -------------------------------------------------------------------------------------------------------


def read_word(node: Any) -> Text:
    """One word or phrase on one line."""
    if not isinstance(node, Text) or isinstance(node, Blank):
        raise due(node, "a text", "write one word or phrase")
    if not node.strip() or not node.isprintable():
        raise complaint(node.mark, f"the text {shorten(node)!r} is empty or has control characters", "write plain text on one line")
    return node


def read_words(node: Any) -> tuple[Text, ...]:
    """One word or a list of them."""
    if not isinstance(node, Row):
        return (read_word(node),)
    if not node:
        raise complaint(node.mark, "an empty list", "name at least one, or leave the key out")
    return tuple(each(read_word, node))


def read_files(node: Any) -> tuple[Text, ...]:
    """One file or a list of them, which may be empty."""
    return () if isinstance(node, (Row, Blank)) and not node else read_words(node)


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
        if isinstance(node, Text) and re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", node):
            return datetime.date.fromisoformat(node)
    except ValueError:
        pass
    raise due(node, "a date", "write it as 2027-03-31")


def choice(*words: str) -> Reader:
    """The reader of one word from a fixed choice."""

    def read(node: Any) -> Text:
        word = read_word(node)
        if word not in words:
            raise complaint(word.mark, f"{shorten(word)!r} is not known here", nearest(word, words))
        return word

    return read


def one_of(*words: str) -> Reads:
    """A field that takes one word from a fixed choice."""
    return Reads(choice(*words))


# --- quantities --------------------------------------------------------------------------------------------------


def quantity_from(node: Any, *dimensions: str) -> Quantity:
    """A quantity of one of the dimensions, from text or from a {min, typ, max} mapping (which may name its source)."""
    if isinstance(node, Branch):
        return _from_ends(node, dimensions)
    if not isinstance(node, Text) or isinstance(node, Blank):
        raise due(node, due_words(dimensions), such_as(dimensions))
    try:
        dimension, span = parse_any(node, dimensions)
    except QuantityError as error:
        raise complaint(node.mark, error.found, error.instead) from None
    return Quantity(span, dimension, str(node), node.mark)


def _from_ends(branch: Branch, dimensions: tuple[str, ...]) -> Quantity:
    _refuse_other_keys(branch)
    given = [key for key in branch if key in ENDS]
    ends = dict(zip(given, each(lambda key: one_value(branch[key], dimensions), given), strict=True))
    if len({end.dimension for end in ends.values()}) > 1:
        raise complaint(branch.mark, "a span whose ends measure different things", "write every end in the same unit")
    try:
        span = span_from_ends(**{key: end.typ for key, end in ends.items()})
    except QuantityError as error:
        raise complaint(branch.mark, error.found, error.instead) from None
    text = "{" + ", ".join(f"{key}: {end.text}" for key, end in ends.items()) + "}"
    source = read_word(branch["source"]) if "source" in branch else None
    return Quantity(span, next(iter(ends.values())).dimension, text, branch.mark, source)


def _refuse_other_keys(branch: Branch) -> None:
    wrong = [key for key in branch if key not in (*ENDS, "source")]
    if wrong:
        raise together(complaint(key.mark, f"{shorten(key)!r} is not an end of a span", nearest(key, ENDS)) for key in wrong)


def one_value(node: Any, dimensions: tuple[str, ...]) -> Quantity:
    """A quantity that is one value and no span."""
    if not isinstance(node, Text):
        raise due(node, "one value", such_as(dimensions))
    end = quantity_from(node, *dimensions)
    if not end.span.is_exact:
        raise complaint(end.mark, f"{shorten(end.text)!r} is a span where one value is due", "write one value")
    return end


def reader(*dimensions: str, least: float | None = None, above: float | None = None, most: float | None = None) -> Reader:
    """The reader of a quantity. `least`, `above` and `most` bound the whole of its span, in SI units."""

    def read(node: Any) -> Quantity:
        value = quantity_from(node, *dimensions)
        problem = _out_of_range(value.span, least, above, most)
        if problem:
            raise complaint(value.mark, f"{shorten(value.text)!r} {problem}", such_as(dimensions))
        return value

    return read


def quantity(*dimensions: str, **bounds: float) -> Reads:
    """A field that takes a quantity; see `reader`."""
    return Reads(reader(*dimensions, **bounds))


def _out_of_range(span: Span, least: float | None, above: float | None, most: float | None) -> str:
    if least is not None and span.min < least:
        return "is negative, which cannot be here" if least == 0 else f"is less than {least:g}"
    if above is not None and span.min <= above:
        return "is not above zero, which it must be here" if above == 0 else f"is not above {above:g}"
    if most is not None and span.max > most:
        return "is more than 100 %" if most == 1 else f"is more than {most:g}"
    return ""


# --- tables ------------------------------------------------------------------------------------------------------


def table_reader(*columns: Reader, rising: bool = True) -> Reader:
    """The reader of a list of points, one reader per column. `rising`: the first column must rise strictly."""

    def read(node: Any) -> Table:
        if not isinstance(node, Row) or not node:
            raise due(node, "a list of points", "write [[x, y], [x, y], ...]")
        rows = each(lambda row: _point(row, columns), node)
        if rising:
            _refuse_unsorted(rows)
        dimensions = tuple(cell.dimension for cell in rows[0])
        _refuse_mixed(rows, dimensions)
        return Table(tuple(tuple(cell.typ for cell in row) for row in rows), dimensions, node.mark)

    return read


def table(*columns: Reader, rising: bool = True) -> Reads:
    """A field that takes a table; see `table_reader`."""
    return Reads(table_reader(*columns, rising=rising))


def _point(row: Any, columns: tuple[Reader, ...]) -> list[Quantity]:
    if not isinstance(row, Row) or len(row) != len(columns):
        raise due(row, f"a point of {len(columns)} values", "write [x, y]")
    cells = each(lambda pair: pair[0](pair[1]), zip(columns, row, strict=True))
    for cell in cells:
        if not cell.span.is_exact:
            raise complaint(cell.mark, f"{shorten(cell.text)!r} is a span inside a table", "write one value")
    return cells


def _refuse_unsorted(rows: list[list[Quantity]]) -> None:
    for before, after in zip(rows, rows[1:], strict=False):
        if after[0].typ <= before[0].typ:
            found = f"{shorten(after[0].text)!r} does not rise above {shorten(before[0].text)!r} before it"
            raise complaint(after[0].mark, found, "sort the points by their first value, and keep one of each")


def _refuse_mixed(rows: list[list[Quantity]], dimensions: tuple[str, ...]) -> None:
    for cell, dimension in ((cell, dimension) for row in rows for cell, dimension in zip(row, dimensions, strict=True)):
        if cell.dimension != dimension:
            raise complaint(cell.mark, f"{shorten(cell.text)!r} is {a_dimension(cell.dimension)} in a column of another kind",
                            such_as((dimension,)))


# --- collections -------------------------------------------------------------------------------------------------


def as_branch(node: Any) -> Branch:
    """A mapping of names; nothing at all is an empty one."""
    if isinstance(node, Blank):
        return Branch(node.mark)
    if not isinstance(node, Branch):
        raise due(node, "a mapping of names", "write {name: ..., name: ...}")
    return node


def as_row(node: Any) -> Row:
    """A list; nothing at all is an empty one."""
    if isinstance(node, Blank):
        return Row(node.mark)
    if not isinstance(node, Row):
        raise due(node, "a list", "write [..., ...]")
    return node


Word = Annotated[Text, Reads(read_word)]
Words = Annotated[tuple[Text, ...], Reads(read_words)]
Files = Annotated[tuple[Text, ...], Reads(read_files)]
Flag = Annotated[bool, Reads(read_flag)]
Day = Annotated[datetime.date, Reads(read_date)]
Named = Annotated[dict[Word, T], BeforeValidator(as_branch)]
Listed = Annotated[tuple[T, ...], BeforeValidator(as_row)]

Voltage = Annotated[Quantity, quantity("voltage")]
VoltageMagnitude = Annotated[Quantity, quantity("voltage", least=0)]
VoltageRating = Annotated[Quantity, quantity("voltage", above=0)]
Current = Annotated[Quantity, quantity("current", least=0)]
CurrentRating = Annotated[Quantity, quantity("current", above=0)]
Power = Annotated[Quantity, quantity("power", least=0)]
PowerRating = Annotated[Quantity, quantity("power", above=0)]
Resistance = Annotated[Quantity, quantity("resistance", least=0)]
ResistanceAboveZero = Annotated[Quantity, quantity("resistance", above=0)]
Capacitance = Annotated[Quantity, quantity("capacitance", above=0)]
Inductance = Annotated[Quantity, quantity("inductance", above=0)]
Charge = Annotated[Quantity, quantity("charge", least=0)]
Frequency = Annotated[Quantity, quantity("frequency", above=0)]
Time = Annotated[Quantity, quantity("time", above=0)]
EdgeTime = Annotated[Quantity, quantity("time", least=0)]
Slew = Annotated[Quantity, quantity("slew", above=0)]
Angle = Annotated[Quantity, quantity("angle")]
Temperature = Annotated[Quantity, quantity("temperature")]
TemperatureRise = Annotated[Quantity, quantity("temperature_difference", least=0)]
ThermalResistance = Annotated[Quantity, quantity("thermal_resistance", least=0)]
ThermalResistanceAboveZero = Annotated[Quantity, quantity("thermal_resistance", above=0)]
HeatCapacity = Annotated[Quantity, quantity("thermal_capacity", above=0)]
ThermalConductivity = Annotated[Quantity, quantity("conductivity", above=0)]
Length = Annotated[Quantity, quantity("length", above=0)]
Altitude = Annotated[Quantity, quantity("length", least=-500, most=9000)]
Area = Annotated[Quantity, quantity("area", above=0)]
Ratio = Annotated[Quantity, quantity("ratio", least=0, most=1)]
Factor = Annotated[Quantity, quantity("number", "ratio", least=0)]
Share = Annotated[Quantity, quantity("number", "ratio", least=0, most=1)]
Count = Annotated[Quantity, quantity("count", above=0)]
TemperatureCoefficient = Annotated[Quantity, quantity("tempco")]
VoltageCoefficient = Annotated[Quantity, quantity("voltage_tempco")]
