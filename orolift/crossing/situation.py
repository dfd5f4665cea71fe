"""Everything a crossing takes, as one piece of data that can be copied, changed and sent to another process."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.crossing.crossing import cross

if TYPE_CHECKING:
    from orolift.air.column import IncomingAir
    from orolift.crossing.pool import Lee
    from orolift.crossing.result import Crossing, Site, When
    from orolift.crossing.settings import Settings
    from orolift.crossing.solve import CrestLine
    from orolift.terrain.range_normal import RangeNormal
    from orolift.terrain.transect import Transect


@dataclass(frozen=True, eq=False)
class Situation:
    """Terrain, incoming air and options of one crossing.

    Attributes
    ----------
    transect, incoming, sites, settings, lee, when, normal, lowest_pass, crest_line, stagnant_top, background,
    in_full
        As the arguments of `orolift.crossing.crossing.cross`.
    """

    transect: Transect
    incoming: IncomingAir
    sites: tuple[Site, ...] = ()
    settings: Settings | None = None
    lee: Lee | None = None
    when: When | None = None
    normal: RangeNormal | None = None
    lowest_pass: float | None = None
    crest_line: CrestLine | None = None
    stagnant_top: float | None = None
    background: float = 0.0
    in_full: bool = True


def crossing_of(situation: Situation) -> Crossing:
    """The crossing of a situation.

    Raises
    ------
    NoCrossingError, TerrainError, OutOfRangeError
        As `orolift.crossing.crossing.cross`.
    """
    return cross(
        situation.transect,
        situation.incoming,
        situation.sites,
        situation.settings,
        lee=situation.lee,
        when=situation.when,
        normal=situation.normal,
        lowest_pass=situation.lowest_pass,
        crest_line=situation.crest_line,
        stagnant_top=situation.stagnant_top,
        background=situation.background,
        in_full=situation.in_full,
    )
