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
        "least 16 km."
    ),
    (
        "The air at the upwind ground follows the ground along the line. Its pressure at each place is that of the "
        "undisturbed column at the height of the ground there."
    ),
    (
        "Each step along the line keeps moist entropy and total water: vapour, cloud water and ice are in "
        "equilibrium, and the latent heat of what condenses or evaporates stays in the air. Cloud turns from water to "
        "ice evenly between 0 and −20 °C."
    ),
    (
        "Of the water newly condensed on a step the prescribed share leaves at once, at constant pressure and "
        "temperature, and takes its own entropy along. The rest stays as cloud and evaporates on the way down before "
        "the air warms at the dry rate."
    ),
    (
        "At a site the air is moved to the height of the site without further loss. It is set beside the undisturbed "
        "column at that height and beside the popular picture."
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
        heading=("The lowest air is followed step by step; every constant names its source",),
        steps=STEPS,
        constants=rows,
    )
