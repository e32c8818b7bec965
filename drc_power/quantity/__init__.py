"""Text with units to spans of SI floats, and back.

Strict on purpose: text is understood in full or refused with advice. A span is minimum, typical and maximum;
temperatures are in °C, ratios are shares (80 % is 0.8), angles are in rad.
"""

from .spans import QuantityError, Span, a_dimension, due_words, example_of, parse_any, parse_span, span_from_ends, such_as
from .printing import format_quantity
from .units import DIMENSIONS, Dimension
from .value_field import ValueField, parse_value_field

__all__ = [
    "DIMENSIONS", "Dimension", "QuantityError", "Span", "ValueField", "a_dimension", "due_words", "example_of", "format_quantity",
    "parse_any", "parse_span", "parse_value_field", "span_from_ends", "such_as",
]
