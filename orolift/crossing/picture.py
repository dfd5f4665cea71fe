"""Beside the crossing: the textbook picture of it, and which side of the range a place is on."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.air.parcel import Parcel, ascent, moved_to, without_condensate

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from orolift.air.column import IncomingAir
    from orolift.crossing.result import Side
    from orolift.terrain.features import Features

CREST_BAND = 0.1
"""A site within this share of the half width of the crest counts as on it; a judgement."""


def upwind_ground_air(incoming: IncomingAir) -> Parcel:
    """Air at the ground of the upwind column.

    Parameters
    ----------
    incoming : IncomingAir

    Returns
    -------
    Parcel, shape of the leading axes
    """
    return Parcel(
        pressure=incoming.pressure[..., 0],
        temperature=incoming.temperature[..., 0],
        vapour=incoming.vapour[..., 0],
        cloud=incoming.cloud[..., 0],
    )


def popular_picture(start: Parcel, crest_pressure: ArrayLike, pressure: ArrayLike, *, freezing: bool = True) -> Parcel:
    """Surface air lifted to the crest, all condensate removed, brought to a pressure: the textbook picture.

    Parameters
    ----------
    start : Parcel
        Air at the upwind ground.
    crest_pressure, pressure : array_like, shape of the parcel [Pa]
    freezing : bool

    Returns
    -------
    Parcel

    Notes
    -----
    Cloud the air starts with is removed too. What it lifts over is the
    highest ground, whatever the flow; shown beside the crossing for comparison.
    """
    top, _ = ascent(start, crest_pressure, removed_share=1.0, freezing=freezing)
    dry, _ = without_condensate(top, 1.0)
    return moved_to(dry, pressure, freezing=freezing)


def side_of(distance: float, shape: Features) -> Side:
    """Side of the crest a place is on; within a tenth of the half width it is on the crest."""
    offset = distance - shape.crest_distance
    if abs(offset) <= CREST_BAND * shape.half_width:
        return "crest"
    return "lee" if offset > 0.0 else "windward"
