"""Members of an airflow: some of them, and several airflows put together."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import TYPE_CHECKING

import numpy as np

from orolift.flow.airflow import Airflow
from orolift.flow.boundary import Boundary

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    Members = slice | NDArray[np.intp]


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
    boundary = replace(flow.boundary, **{f.name: getattr(flow.boundary, f.name)[which] for f in fields(Boundary)})
    arrays = {name: getattr(flow, name)[which] for name in _ARRAYS}
    return replace(flow, boundary=boundary, **arrays)


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
    boundary = replace(
        flows[0].boundary,
        **{f.name: np.concatenate([getattr(flow.boundary, f.name) for flow in flows]) for f in fields(Boundary)},
    )
    arrays = {name: np.concatenate([getattr(flow, name) for flow in flows]) for name in _ARRAYS}
    return replace(flows[0], boundary=boundary, **arrays)


_ARRAYS = tuple(f.name for f in fields(Airflow) if f.name not in {"boundary", "trapped"})
