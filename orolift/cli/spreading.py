"""The members of a case, worked out here or wherever --jobs and --scheduler say, with a bar that says how far."""

from __future__ import annotations

import logging
from contextlib import nullcontext
from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.cli.executors import executor_of, progress, usable_cores
from orolift.errors import OroliftError

if TYPE_CHECKING:
    from orolift.crossing.result import Crossing
    from orolift.crossing.situation import Situation
    from orolift.sources.inputs import Inputs
    from orolift.spread.spread import Spread

log = logging.getLogger(__name__)


@dataclass(frozen=True)
class Workers:
    """Where many crossings are worked out.

    Attributes
    ----------
    jobs : int or None
        Processes; None takes the usable cores.
    scheduler : str or None
        Address of a dask scheduler.
    quiet : bool
        Whether no bar is shown.
    """

    jobs: int | None = None
    scheduler: str | None = None
    quiet: bool = False


def spread_for(inputs: Inputs, situation: Situation, crossing: Crossing, workers: Workers) -> Spread | None:
    """Members of a case; None where it switches them off.

    Parameters
    ----------
    inputs : Inputs
    situation : Situation
    crossing : Crossing
    workers : Workers

    Returns
    -------
    Spread or None

    Raises
    ------
    OroliftError
        That names the case file.
    """
    members, seed = inputs.case.spread.members, inputs.case.spread.seed
    if members == 0:
        return None
    from orolift.sources.spread_model import uncertainty_of
    from orolift.spread.spread import CHUNK, spread_of

    groups = -(-members // CHUNK)
    # a few members are done before a process has started
    jobs = min(workers.jobs or usable_cores(), groups) if workers.scheduler is None else workers.jobs
    here = groups == 1 and workers.scheduler is None
    try:
        with (
            nullcontext() if here else executor_of(jobs, workers.scheduler) as executor,
            progress(members, "Members", quiet=workers.quiet or here) as bar,
        ):
            found = spread_of(
                situation,
                crossing,
                uncertainty_of(inputs.case),
                members=members,
                seed=seed,
                executor=executor,
                told=bar.update,
            )
    except OroliftError as error:
        if not str(error).startswith("--"):
            error.args = (f"{inputs.path}: {error}",)
        raise
    log.debug("%d members worked out, %d of them cross", members, int(found.crosses.sum()))
    return found
