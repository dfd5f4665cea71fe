"""Parts of an airflow: some of its members or points, and several airflows put together."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from orolift.flow.airflow import Airflow
from orolift.flow.boundary import Boundary

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    Members = slice | NDArray[np.intp]

_OF_BOUNDARY = tuple(f.name for f in fields(Boundary))
_OVER_POINTS = ("heights", "breaking", "top_pressure")
_OF_FLOW = tuple(f.name for f in fields(Airflow) if f.name not in {"boundary", "trapped"})


def some_members(flow: Airflow, which: Members) -> Airflow:
    """Some members of an airflow.

    Parameters
    ----------
    flow : Airflow
        With one leading axis.
    which : slice or ndarray of int
        Numbers of the members.

    Returns
    -------
    Airflow
    """
    boundary = {name: getattr(flow.boundary, name)[which] for name in _OF_BOUNDARY}
    arrays: dict[str, Any] = {name: getattr(flow, name)[which] for name in _OF_FLOW}
    return replace(flow, boundary=replace(flow.boundary, **boundary), **arrays)


def some_points(flow: Airflow, which: NDArray[np.intp]) -> Airflow:
    """An airflow at some of its points; its boundary stays whole.

    Parameters
    ----------
    flow : Airflow
    which : ndarray of int, (n,)
        Numbers of the points.

    Returns
    -------
    Airflow
    """
    arrays: dict[str, Any] = {name: getattr(flow, name)[..., which] for name in _OVER_POINTS}
    return replace(flow, **arrays)


def together(flows: Sequence[Airflow], rows: Sequence[NDArray[np.intp]]) -> Airflow:
    """Airflows of some members each, as one.

    Parameters
    ----------
    flows : sequence of Airflow
        Over the same transect, each with one leading axis.
    rows : sequence of ndarray of int
        Numbers of the members of each.

    Returns
    -------
    Airflow
    """
    first, count = flows[0], sum(one.size for one in rows)

    def whole(parts: list[NDArray[Any]]) -> NDArray[Any]:
        out = np.empty((count, *parts[0].shape[1:]), parts[0].dtype)
        for one, part in zip(rows, parts, strict=True):
            out[one] = part
        return out

    boundary = {name: whole([getattr(flow.boundary, name) for flow in flows]) for name in _OF_BOUNDARY}
    arrays: dict[str, Any] = {name: whole([getattr(flow, name) for flow in flows]) for name in _OF_FLOW}
    return replace(first, boundary=replace(first.boundary, **boundary), **arrays)
