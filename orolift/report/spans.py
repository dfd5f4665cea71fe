"""Ranges on the page: 10 to 90 % of the members, the error of the method included; the ends where there are none."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, log10
from typing import TYPE_CHECKING

from orolift.report.quantities import Amount, displayed
from orolift.report.story import dew_point_ends, drying_ends, main_site, temperature_ends
from orolift.spread.at_sites import column_of
from orolift.spread.ranges import range_of

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing, LeeAir
    from orolift.report.quantities import Kind
    from orolift.report.words import Words
    from orolift.spread.spread import Spread

Ends = tuple[float, float]
PARTS_OF_A_RANGE = 10.0
"""A number is shown so finely that its range has at least as many steps; finer digits mean nothing."""


@dataclass(frozen=True, eq=False)
class Spans:
    """What the members say of the numbers of a crossing.

    Attributes
    ----------
    crossing : Crossing
    spread : Spread or None
        None where the case has no members: then nothing but the ends of blocking is known.
    """

    crossing: Crossing
    spread: Spread | None

    def of(self, name: str, *, inputs_only: bool = False) -> Ends | None:
        """Range of a number of the whole crossing; None without."""
        if self.spread is None:
            return None
        arrays = self.spread.values if inputs_only else self.spread.full_values
        return range_of(arrays[name]) if name in arrays else None

    def at(self, site: LeeAir, name: str, *, inputs_only: bool = False) -> Ends | None:
        """Range of a number of a site; None without."""
        if self.spread is None:
            return None
        arrays = self.spread.sites if inputs_only else self.spread.full_sites
        column = column_of(self.crossing, site)
        if name not in arrays or column is None:
            return None
        return range_of(arrays[name][:, column])

    def temperature(self, site: LeeAir) -> Ends | None:
        """Range of the temperature of a site, or its ends without members."""
        return temperature_ends(site) if self.spread is None else self.at(site, "temperature")

    def dew_point(self, site: LeeAir) -> Ends | None:
        """Range of the dew point of a site, or its ends without members."""
        return dew_point_ends(site) if self.spread is None else self.at(site, "dew_point")

    def drying(self) -> Ends | None:
        """Range of the share of the vapour that falls out, or its ends without members."""
        return drying_ends(self.crossing) if self.spread is None else self.of("drying_ratio")

    @property
    def main(self) -> LeeAir:
        """The site the page leads with."""
        return main_site(self.crossing)


def ranged(amount: Amount, ends: Ends | None, *, bare: bool = False) -> Words:
    """An amount with its range in brackets, as fine as the range allows: 17.3 °C (16.1 to 18.6).

    Parameters
    ----------
    amount : Amount
        Its digits are the most that are shown.
    ends : (float, float) or None
        In SI, widened to hold the amount; None leaves the amount alone.
    bare : bool
        Whether the unit of the amount, too, is left out.

    Returns
    -------
    Words

    Examples
    --------
    >>> [part.digits for part in ranged(Amount(1234.0, "height"), (900.0, 1600.0)) if isinstance(part, Amount)]
    [-1, -1, -1]
    """
    if ends is None:
        return (Amount(amount.value, amount.kind, amount.digits, bare),)
    # where the answer is the lowest or highest of several methods, eight tenths of the members may lie beside it
    ends = min(ends[0], amount.value), max(ends[1], amount.value)
    digits = digits_for(amount, ends)
    low, high = (Amount(value, amount.kind, digits, bare=True) for value in ends)
    if round(_number(low), digits) == round(_number(high), digits):
        return (Amount(amount.value, amount.kind, digits, bare),)
    if amount.kind != "wind" or bare:
        return (Amount(amount.value, amount.kind, digits, bare), " (", low, " to ", high, ")")
    # two units and a range in brackets would be hard to read
    speed, knots = (Amount(amount.value, kind, digits) for kind in _SPEEDS)
    return (speed, " (", low, " to ", high, ")", knots)


_SPEEDS: tuple[Kind, Kind] = ("wind_alone", "knots")


def digits_for(amount: Amount, ends: Ends) -> int:
    """Decimals of the metric form that a range allows, no more than the amount has."""
    low, high = (displayed(value, amount.kind, "metric") for value in ends)
    width = abs(high - low)
    if width == 0.0:
        return amount.digits
    return min(amount.digits, ceil(-log10(width / PARTS_OF_A_RANGE)))


def second_line(like: Amount, ends: Ends | None) -> Words:
    """A range without unit for the second line of a cell; nothing without one, or where its ends read alike.

    Parameters
    ----------
    like : Amount
        Of the cell: its digits are the most that are shown.
    ends : (float, float) or None
        In SI, widened to hold the amount.

    Returns
    -------
    Words

    Examples
    --------
    >>> [part.digits for part in second_line(Amount(0.2, "share"), (0.1, 0.4)) if isinstance(part, Amount)]
    [0, 0]
    """
    if ends is None:
        return ()
    ends = min(ends[0], like.value), max(ends[1], like.value)
    digits = digits_for(like, ends)
    low, high = (Amount(value, like.kind, digits, bare=True) for value in ends)
    return () if round(_number(low), digits) == round(_number(high), digits) else (low, " to ", high)


def _number(amount: Amount) -> float:
    return displayed(amount.value, amount.kind, "metric")
