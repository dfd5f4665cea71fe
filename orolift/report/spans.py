"""Ranges on the page: 10 to 90 % of the members, the error of the method included; the ends where there are none."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from math import ceil, log10
from typing import TYPE_CHECKING

import numpy as np

from orolift.report.quantities import Amount, displayed
from orolift.report.story import (
    SAME,
    dew_point_ends,
    difference,
    drying_ends,
    main_site,
    temperature_ends,
)
from orolift.spread.at_sites import columns_of, on_its_line
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
    whole : Crossing, optional
        What the members are of, where `crossing` shows only some of its sites.
    """

    crossing: Crossing
    spread: Spread | None
    whole: Crossing | None = None

    def of(self, name: str, *, inputs_only: bool = False) -> Ends | None:
        """Range of a number of the whole crossing; None without."""
        if self.spread is None:
            return None
        arrays = self.spread.values if inputs_only else self.spread.full_values
        return range_of(arrays[name]) if name in arrays else None

    def ratio(self, name: str, over: str) -> Ends | None:
        """Range of one number of the crossing over another, where that is above zero, by members; None without."""
        if self.spread is None or not {name, over} <= self.spread.values.keys():
            return None
        one, other = self.spread.values[name], self.spread.values[over]
        return range_of(one / np.where(other > 0.0, other, np.nan))

    def at(self, site: LeeAir, name: str, *, inputs_only: bool = False) -> Ends | None:
        """Range of a number of a site; None without."""
        if self.spread is None:
            return None
        arrays = self.spread.sites if inputs_only else self.spread.full_sites
        column = self.column(site)
        if name not in arrays or column is None:
            return None
        return range_of(arrays[name][:, column])

    def column(self, site: LeeAir) -> int | None:
        """Column of a site in the arrays of the members; None when it has none."""
        return self._columns.get(site.number)

    @cached_property
    def _columns(self) -> dict[int, int]:
        """Columns by the numbers of the sites; sites may be thousands."""
        return {air.number: i for i, air in enumerate(columns_of(self.whole or self.crossing))}

    def gap(self, site: LeeAir, name: str, other: str) -> Ends | None:
        """Range of the difference of two numbers of a site, member by member; None without."""
        column = self.column(site)
        if self.spread is None or column is None or not {name, other} <= self.spread.full_sites.keys():
            return None
        one, two = (self.spread.full_sites[key][:, column] for key in (name, other))
        return range_of(one - two)

    def own_line(self, site: LeeAir, name: str) -> Ends | None:
        """Range of a number of the line a site is on, as `orolift.spread.at_sites.on_its_line` has it; None without."""
        if self.spread is None:
            return None
        found = on_its_line(self.spread, self.crossing, site)
        return range_of(found[name]) if name in found else None

    def warming(self, site: LeeAir) -> Ends | None:
        """Range of the warming of a site, or that of its ends without members."""
        if self.spread is not None:
            return self.at(site, "warming")
        ends = temperature_ends(site)
        return None if ends is None else (ends[0] - site.upwind_temperature, ends[1] - site.upwind_temperature)

    def part(self, site: LeeAir, key: str) -> Ends | None:
        """Range of a part of the warming of a site, by the inputs: the method states its error of the sum only."""
        return self.at(site, f"warming_{key}")

    def blocked_top(self) -> Ends | None:
        """Range of the blocked top, or that of the thresholds without members."""
        flow = self.crossing.flow
        return (flow.blocked_top_low, flow.blocked_top_high) if self.spread is None else self.of("blocked_top")

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
        return (replace(amount, bare=bare or amount.bare),)
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


def inside(amount: Amount, ends: Ends | None) -> Words:
    """An amount that stands in brackets already: its range follows a comma.

    Examples
    --------
    >>> inside(Amount(0.04, "share"), (0.01, 0.06))[1:4:2]
    (', ', ' to ')
    """
    first, *rest = ranged(amount, ends)
    if len(rest) < len((" (", "low", " to ", "high", ")")):
        return (first, *rest)
    return (first, ", ", rest[1], " to ", rest[3])


def sized(change: float, ends: Ends | None) -> Words:
    """Size of a temperature difference [K] with its range, counted in the direction of the difference.

    Examples
    --------
    >>> [round(part.value, 1) for part in sized(-2.0, (-3.0, 0.5)) if isinstance(part, Amount)]
    [2.0, -0.5, 3.0]
    """
    if ends is not None and change < 0.0:
        ends = -ends[1], -ends[0]
    return ranged(Amount(abs(change), "temperature_difference", 1), ends)


def changed(change: float, ends: Ends | None, more: str, less: str, same: str) -> Words:
    """A temperature difference in words, with its range: how much, and which way.

    Parameters
    ----------
    change : float [K]
    ends : (float, float) or None [K]
        Its range, with its sign.
    more, less, same : str
        As for `orolift.report.story.difference`.

    Returns
    -------
    Words

    Examples
    --------
    >>> changed(-2.0, None, "warmer", "cooler", "as warm")[1]
    ' cooler'
    """
    if ends is None:
        return difference(change, more, less, same)
    if abs(change) >= SAME:
        return (*sized(change, ends), f" {more if change > 0.0 else less}")
    like = Amount(change, "temperature_change", 1)
    digits = digits_for(like, ends)
    return (f"{same} (", Amount(ends[0], like.kind, digits, bare=True), " to ", Amount(ends[1], like.kind, digits), ")")


def span_of(amount: Amount | None, ends: Ends | None) -> Words:
    """The range of an amount for the second line of a cell; nothing where there is none or it reads as one number."""
    if amount is None:
        return ()
    rest = ranged(amount, ends, bare=True)[1:]
    return tuple(rest[1:4]) if rest else ()


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
