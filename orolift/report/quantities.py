"""Numbers as people read them: the only place of the report where units are changed and digits cut."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

Units = Literal["metric", "us"]
Kind = Literal[
    "temperature",
    "temperature_difference",
    "temperature_change",
    "height",
    "distance",
    "wind",
    "wind_alone",
    "knots",
    "pressure",
    "water_depth",
    "share",
    "mixing_ratio",
    "vapour_flux",
    "bearing",
    "entropy",
    "potential_temperature",
    "pressure_difference",
    "vapour_pressure",
    "stability",
    "lapse_rate",
    "rain_rate",
    "rain_limit",
    "duration",
    "hours",
    "area",
    "volume",
    "plain",
]

NO_BREAK_SPACE = "\u00a0"
THIN_SPACE = "\u202f"
MINUS = "\u2212"


@dataclass(frozen=True)
class Amount:
    """A raw number with what it measures and how finely it is shown.

    Attributes
    ----------
    value : float
        In SI; bearings in radians, water depth in kg m-2.
    kind : str
        One of `Kind`.
    digits : int
        Decimals of the metric form; -1 rounds to tens.
    bare : bool
        Whether its unit is left out, because one beside it names it.
    """

    value: float
    kind: Kind
    digits: int = 0
    bare: bool = False


@dataclass(frozen=True)
class Form:
    """How a kind of quantity is written: shown = value x factor + offset, then the unit.

    Attributes
    ----------
    unit : str
        Empty for none.
    factor, offset : float
    extra_digits : int
        Decimals beyond those of the metric form, for units that are coarser.
    signed : bool
        Whether a plus sign is written.
    beside : Form or None
        A second unit, written in brackets.
    tight : bool
        Whether the unit follows without a space, as the degree of a bearing does.
    before : str
        Written before the number: joins it to what stands there.
    silent : bool
        Whether nothing is written, where the system of units has no use for it.
    """

    unit: str
    factor: float = 1.0
    offset: float = 0.0
    extra_digits: int = 0
    signed: bool = False
    beside: Form | None = None
    tight: bool = False
    before: str = ""
    silent: bool = False


_BEARING = Form("°", 57.29577951308232, tight=True)
_MIXING_RATIO = Form("g/kg", 1e3)
_KNOTS = Form("kt", 3600.0 / 1852.0)

METRIC: dict[Kind, Form] = {
    "temperature": Form("°C", 1.0, -273.15),
    "temperature_difference": Form("°C"),
    "temperature_change": Form("°C", signed=True),
    "height": Form("m"),
    "distance": Form("km", 1e-3),
    "wind": Form("m/s", beside=_KNOTS),
    "wind_alone": Form("m/s"),
    "knots": replace(_KNOTS, before=", "),
    "pressure": Form("hPa", 0.01),
    "water_depth": Form("mm"),
    "share": Form("%", 100.0),
    "mixing_ratio": _MIXING_RATIO,
    "vapour_flux": Form("kg/m/s"),
    "bearing": _BEARING,
    "entropy": Form("J/K"),
    "potential_temperature": Form("K"),
    "pressure_difference": Form("hPa", 0.01),
    "vapour_pressure": Form("hPa", 0.01),
    "stability": Form("per second"),
    "lapse_rate": Form("°C per km", 1e3),
    "rain_rate": Form("mm/h", 3600.0),
    "rain_limit": Form("mm/h", 3600.0),
    "duration": Form("s"),
    "hours": Form("h", 1.0 / 3600.0),
    "area": Form("km²", 1e-6),
    "volume": Form("million m³", 1e-6),
    "plain": Form(""),
}
# Factors: NIST SP 811 (2008) Appendix B; inHg at 0 degrees Celsius; an acre-foot is 43 560 cubic feet.
US: dict[Kind, Form] = {
    **METRIC,
    "temperature": Form("°F", 1.8, -459.67),
    "temperature_difference": Form("°F", 1.8),
    "temperature_change": Form("°F", 1.8, signed=True),
    "height": Form("ft", 1.0 / 0.3048),
    "distance": Form("mi", 1.0 / 1609.344),
    "wind": Form("mph", 1.0 / 0.44704),
    "knots": replace(_KNOTS, silent=True),
    "wind_alone": Form("mph", 1.0 / 0.44704),
    "pressure": Form("inHg", 1.0 / 3386.389, extra_digits=1),
    "pressure_difference": Form("inHg", 1.0 / 3386.389, extra_digits=1),
    "water_depth": Form("in", 1.0 / 25.4, extra_digits=2),
    "rain_rate": Form("in/h", 3600.0 / 25.4, extra_digits=1),
    "rain_limit": Form("in/h", 3600.0 / 25.4, extra_digits=2),
    "lapse_rate": Form("°F per 1000 ft", 1.8 * 304.8),
    "area": Form("sq mi", 1.0 / 1609.344**2),
    "volume": Form("thousand acre-ft", 1e-3 / (43560.0 * 0.3048**3)),
}


def form(kind: Kind, units: Units) -> Form:
    """How a kind of quantity is written in a system of units."""
    return (US if units == "us" else METRIC)[kind]


def displayed(value: float, kind: Kind, units: Units) -> float:
    """Value in the unit it is shown in, unrounded.

    Examples
    --------
    >>> displayed(273.15, "temperature", "metric"), round(displayed(304.8, "height", "us"))
    (0.0, 1000)
    """
    shape = form(kind, units)
    return value * shape.factor + shape.offset


def from_displayed(shown: float, kind: Kind, units: Units) -> float:
    """SI value of a number in the unit it is shown in; undoes `displayed`."""
    shape = form(kind, units)
    return (shown - shape.offset) / shape.factor


def number(value: float, kind: Kind, digits: int, units: Units) -> str:
    """A number without its unit.

    Parameters
    ----------
    value : float
        In SI.
    kind : str
    digits : int
        Decimals of the metric form; negative rounds to tens, hundreds.
    units : 'metric' or 'us'

    Returns
    -------
    str
        With a true minus sign; thin spaces between thousands from 10 000 on.
        A second unit, where the kind has one, in brackets.

    Examples
    --------
    >>> number(912.0, "height", -1, "metric"), number(10.0, "wind", 0, "metric")
    ('910', '10 (19)')
    """
    shape = form(kind, units)
    text = _written(value, shape, digits)
    return text if shape.beside is None else f"{text} ({_written(value, shape.beside, digits)})"


def unit(kind: Kind, units: Units) -> str:
    """The unit for the head of a column.

    Examples
    --------
    >>> unit("wind", "metric"), unit("wind", "us")
    ('m/s (kt)', 'mph')
    """
    shape = form(kind, units)
    return shape.unit if shape.beside is None else f"{shape.unit} ({shape.beside.unit})"


def first_number(value: float, kind: Kind, digits: int, units: Units) -> str:
    """A number without its unit and without a second unit, for the marks of an axis.

    Examples
    --------
    >>> first_number(10.0, "wind", 0, "metric")
    '10'
    """
    return _written(value, form(kind, units), digits)


def first_unit(kind: Kind, units: Units) -> str:
    """The unit of an axis.

    Examples
    --------
    >>> first_unit("wind", "metric")
    'm/s'
    """
    return form(kind, units).unit


def quantity(value: float, kind: Kind, digits: int, units: Units) -> str:
    """A number with its unit, kept on one line by no-break spaces.

    Parameters
    ----------
    value : float
        In SI.
    kind : str
    digits : int
        Decimals of the metric form; negative rounds to tens, hundreds.
    units : 'metric' or 'us'

    Returns
    -------
    str

    Examples
    --------
    >>> quantity(290.45, "temperature", 1, "metric").replace(NO_BREAK_SPACE, " ")
    '17.3 °C'
    >>> quantity(17.0, "wind", 0, "metric").replace(NO_BREAK_SPACE, " ")
    '17 m/s (33 kt)'
    """
    shape = form(kind, units)
    text = _with_unit(value, shape, digits)
    if shape.beside is None:
        return text
    return f"{text}{NO_BREAK_SPACE}({_with_unit(value, shape.beside, digits)})"


def shown(amount: Amount, units: Units) -> str:
    """An amount with its unit, or without where one beside it names it."""
    if form(amount.kind, units).silent:
        return ""
    if amount.bare:
        return first_number(amount.value, amount.kind, amount.digits, units)
    return quantity(amount.value, amount.kind, amount.digits, units)


def bare(amount: Amount, units: Units) -> str:
    """An amount without its unit, for a column whose head names it."""
    return number(amount.value, amount.kind, amount.digits, units)


def _with_unit(value: float, shape: Form, digits: int) -> str:
    gap = "" if shape.tight or not shape.unit else NO_BREAK_SPACE
    return f"{shape.before}{_written(value, shape, digits)}{gap}{shape.unit}"


def _written(value: float, shape: Form, digits: int) -> str:
    places = digits + shape.extra_digits
    rounded = round(value * shape.factor + shape.offset, places)
    text = f"{abs(rounded):,.{max(places, 0)}f}"
    text = text.replace(",", THIN_SPACE if abs(rounded) >= 1e4 else "")
    if rounded == 0.0:
        return text
    if rounded < 0.0:
        return f"{MINUS}{text}"
    return f"+{text}" if shape.signed else text
