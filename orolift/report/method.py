"""How it was worked out, and every constant with its source."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from orolift.constants import table

if TYPE_CHECKING:
    from orolift.report.words import Words


@dataclass(frozen=True)
class ConstantRow:
    """One constant as the code holds it."""

    name: str
    value: float
    digits: str
    unit: str
    source: str


@dataclass(frozen=True)
class Method:
    """A conclusion, the steps in order, and the constants they use."""

    heading: Words
    steps: tuple[str, ...]
    constants: tuple[ConstantRow, ...]


STEPS = (
    (
        "The incoming air is a column in hydrostatic balance, with virtual temperature, from the upwind ground to at "
        "least 16 km. Flow is worked out across the range, along the normal of its ground."
    ),
    (
        "Stability is dry, or that of saturated air where lifting saturates it (Durran and Klemp 1982). The blocked "
        "top is the highest level below the crest from which air lacks the energy to get over, with the critical "
        "value of N h/U given above (Sheppard 1956 with 1). Calm and counter-flow below the crest count as blocked."
    ),
    (
        "The lowest 500 m of air above the blocked top are mixed and cross. Of the lee air below the blocked top a "
        "share went round through gaps and ends, at its own height, not lifted."
    ),
    (
        "Streamlines are steady linear waves of the layered column over the ground, or over the blocked air and the "
        "cold pool; the part of the boundary that ends lower or higher than it starts is carried as a body. Waves that "
        "would overturn are cut off and flagged. Moist and dry solutions are joined where the cloud ends."
    ),
    (
        "Air is marched along all streamlines; each step keeps moist entropy and total water. Cloud turns to falling "
        "water with the cloud time, which drifts downwind as it falls, snow slower than rain, melts, evaporates in the "
        "air below cloud and cools it; or a prescribed share leaves at once. Remaining cloud evaporates on the way "
        "down before the air warms at the dry rate. Cloud turns from water to ice evenly between "
        "0 and −20 °C. Pressure is that of the crossed column."
    ),
    (
        "Cold air known to lie in the lee stays where the crossing air is lighter; its virtual potential temperature "
        "falls 10 K per km downward. The ground heats the lee air by day and cools it at night, less "
        "under the raining cloud of the crossing; elsewhere the sky counts as clear."
    ),
    (
        "At a site the air of the mixing depth is mixed by mass, with what went round. The parts of its warming are "
        "worked out one by one and add up to the total without a remainder."
    ),
    (
        "Wind near the ground follows from the spacing of the streamlines and from continuity; other methods give its "
        "range. Wind at 10 m is by the logarithmic law."
    ),
    (
        "For the ranges, the same is worked out in members, each with a draw of its own of every uncertain input; to "
        "temperature, humidity and wind at the sites the error of the method is added. A range is from 10 to 90 % of "
        "them, widened to the answer where that lies outside."
    ),
    (
        "Saturation pressure follows from constant heat capacities and latent heats linear in temperature "
        "(Rankine–Kirchhoff form), so that it agrees exactly with the latent heats, the entropy and the condensation "
        "level. Relative humidity and dew point are over liquid water at all temperatures, as the WMO reports them."
    ),
)
"""The computation in words, for readers who want to check it."""


def method() -> Method:
    """How it was worked out.

    Returns
    -------
    Method
    """
    rows = tuple(
        ConstantRow(name, float(value), f"{float(value):.9g}", value.unit, value.source) for name, value in table()
    )
    return Method(
        heading=("The air is followed along streamlines; every constant names its source",),
        steps=STEPS,
        constants=rows,
    )
