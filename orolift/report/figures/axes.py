"""Scales, ticks and frames; figures along the wind share the horizontal one."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, overload

from orolift.report.quantities import (
    Kind,
    Units,
    displayed,
    first_number,
    first_unit,
    form,
    from_displayed,
    number,
    quantity,
)

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

_STEPS = (1.0, 2.0, 5.0, 10.0)


@dataclass(frozen=True)
class Scale:
    """A straight scale from values to drawing units.

    Attributes
    ----------
    low, high : float [SI]
    start, end : float
        Drawing coordinates of `low` and `high`.
    """

    low: float
    high: float
    start: float
    end: float

    @property
    def units_per_value(self) -> float:
        """Drawing units a unit of the value takes, without sign."""
        return abs(self.end - self.start) / (self.high - self.low)


@dataclass(frozen=True)
class Tick:
    """A mark on an axis.

    Attributes
    ----------
    at : float
    text : str
    unit : str
        Written above the number at the upper end of a vertical axis, else empty.
    unit_at : float
    """

    at: float
    text: str
    unit: str = ""
    unit_at: float = 0.0


@dataclass(frozen=True)
class Layout:
    """Size and margins of one form of a figure.

    Attributes
    ----------
    name : str
        ``"wide"`` or ``"narrow"``; part of the ids.
    width, height, left, right, top, bottom : float
        Outer size, and the edges of the frame in drawing units.
    letter : float
        Height of the lettering.
    ticks : int
        About how many ticks the horizontal axis carries.
    """

    name: str
    width: float
    height: float
    left: float
    right: float
    top: float
    bottom: float
    letter: float
    ticks: int

    @property
    def level_words(self) -> float:
        """Where the words of the vertical axis end."""
        return self.left - 8.0

    @property
    def foot_words(self) -> float:
        """Baseline of the words under the horizontal axis."""
        return round(self.bottom + 7.0 + self.letter, 1)


@overload
def place(scale: Scale, value: float) -> float: ...
@overload
def place(scale: Scale, value: NDArray[np.float64]) -> NDArray[np.float64]: ...
def place(scale: Scale, value: float | NDArray[np.float64]) -> float | NDArray[np.float64]:
    """Drawing coordinate of a value.

    Examples
    --------
    >>> place(Scale(0.0, 100.0, 50.0, 250.0), 25.0)
    100.0
    """
    return scale.start + (value - scale.low) * ((scale.end - scale.start) / (scale.high - scale.low))


def round_step(span: float, about: int) -> float:
    """A step of 1, 2 or 5 times a power of ten that divides a span into about so many parts.

    Examples
    --------
    >>> round_step(60.0, 6), round_step(1850.0, 5)
    (10.0, 500.0)
    """
    rough = span / max(about, 1)
    power = 10.0 ** math.floor(math.log10(rough))
    return float(power * min(_STEPS, key=lambda step: abs(math.log(step * power / rough))))


def ticks(scale: Scale, kind: Kind, units: Units, about: int, *, shift: float = 0.0) -> tuple[Tick, ...]:
    """Round ticks of a horizontal axis in the shown unit; the last one carries it.

    Parameters
    ----------
    scale : Scale
    kind : str
    units : 'metric' or 'us'
    about : int
    shift : float [SI]
        Added to the values before they are shown: the user's own zero.

    Returns
    -------
    tuple of Tick
    """
    values, digits = _round_values(scale, kind, units, about, shift)
    return tuple(
        Tick(
            round(place(scale, value - shift), 1),
            (quantity if value == values[-1] else number)(value, kind, digits, units),
        )
        for value in values
    )


def level_ticks(scale: Scale, units: Units, about: int, letter: float, kind: Kind = "height") -> tuple[Tick, ...]:
    """Round values of a vertical axis; the unit stands above the last one.

    Parameters
    ----------
    scale : Scale
    units : 'metric' or 'us'
    about : int
    letter : float
        Height of the lettering.
    kind : str

    Returns
    -------
    tuple of Tick
    """
    values, digits = _round_values(scale, kind, units, about, 0.0)
    out = []
    for value in values:
        at = round(place(scale, value), 1)
        last = first_unit(kind, units) if value == values[-1] else ""
        out.append(Tick(at, first_number(value, kind, digits, units), last, round(at - 1.2 * letter, 1)))
    return tuple(out)


def _round_values(scale: Scale, kind: Kind, units: Units, about: int, shift: float) -> tuple[list[float], int]:
    """Values [SI] that are round in the shown unit, and the decimals they need."""
    low, high = (displayed(value + shift, kind, units) for value in (scale.low, scale.high))
    step = round_step(high - low, about)
    digits = max(0, -math.floor(math.log10(step) + 1e-9)) - form(kind, units).extra_digits
    first, last = math.ceil(low / step - 1e-6), math.floor(high / step + 1e-6)
    return [from_displayed(count * step, kind, units) for count in range(first, last + 1)], digits


def distance_scale(distance: NDArray[np.float64], layout: Layout) -> Scale:
    """The horizontal scale of every figure along the wind."""
    return Scale(float(distance[0]), float(distance[-1]), layout.left, layout.right)
