"""Quantities at the edges: read what people write, show what people read. SI inside."""

from screener.units.definitions import UNITS, dimensions_of, find_unit, from_unit, same_quantity, show, to_unit, unit_label
from screener.units.numbers import Separators, is_missing_word, number_of, separators_in, tidy
from screener.units.quantities import Read, accepted, read_quantity

__all__ = [
    "UNITS",
    "Read",
    "Separators",
    "accepted",
    "dimensions_of",
    "find_unit",
    "from_unit",
    "is_missing_word",
    "number_of",
    "read_quantity",
    "same_quantity",
    "separators_in",
    "show",
    "tidy",
    "to_unit",
    "unit_label",
]
