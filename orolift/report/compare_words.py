"""Names of quantities and of simple answers, and how differences are written."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

from orolift.report.quantities import Amount, displayed

if TYPE_CHECKING:
    from orolift.report.quantities import Kind
    from orolift.report.words import Words
    from orolift.spread.estimates import Quantity, Reference


class Kinds(NamedTuple):
    """How a quantity and a difference of it are written: kind and decimals."""

    value: tuple[Kind, int]
    difference: tuple[Kind, int]


QUANTITY_NAMES: dict[Quantity, str] = {
    "temperature": "Temperature",
    "dew_point": "Dew point",
    "mixing_ratio": "Mixing ratio",
    "relative_humidity": "Relative humidity",
    "wind": "Wind at 10 m",
    "gust": "Gust",
    "pressure": "Pressure",
    "rain_rate": "Rain rate",
}
QUANTITY_KINDS: dict[Quantity, Kinds] = {
    "temperature": Kinds(("temperature", 1), ("temperature_change", 1)),
    "dew_point": Kinds(("temperature", 1), ("temperature_change", 1)),
    "mixing_ratio": Kinds(("mixing_ratio", 1), ("mixing_ratio", 1)),
    "relative_humidity": Kinds(("share", 0), ("share", 0)),
    "wind": Kinds(("wind", 0), ("wind", 1)),
    "gust": Kinds(("wind", 0), ("wind", 1)),
    "pressure": Kinds(("pressure", 1), ("pressure_difference", 1)),
    "rain_rate": Kinds(("rain_rate", 1), ("rain_rate", 1)),
}
ANSWER_NAMES: dict[Reference, str] = {
    "unchanged": "unchanged air",
    "popular_picture": "the popular picture",
    "crest_air": "crest air brought down dry",
}


def magnitude(kind: Kind) -> Kind:
    """The kind that writes a difference without its sign."""
    return "temperature_difference" if kind == "temperature_change" else kind


def signed(value: float, kind: Kind, digits: int) -> Words:
    """A difference with its sign, a plus too."""
    amount = Amount(value, kind, digits)
    plus = kind != "temperature_change" and round(displayed(value, kind, "metric"), digits) > 0.0
    return ("+", amount) if plus else (amount,)
