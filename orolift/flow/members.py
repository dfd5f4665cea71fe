"""Members of an airflow: some of them, and several airflows put together."""

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


def together(flows: Sequence[Airflow]) -> Airflow:
    """Airflows of some members each, as one.

    Parameters
    ----------
    flows : sequence of Airflow
        Over the same transect, each with one leading axis.

    Returns
    -------
    Airflow
    """
    if len(flows) == 1:
        return flows[0]
    first = flows[0]
    boundary = {name: np.concatenate([getattr(flow.boundary, name) for flow in flows]) for name in _OF_BOUNDARY}
    arrays: dict[str, Any] = {name: np.concatenate([getattr(flow, name) for flow in flows]) for name in _OF_FLOW}
    return replace(first, boundary=replace(first.boundary, **boundary), **arrays)
