"""Ranges within which the parcel functions hold, checked in one place."""

from __future__ import annotations

from typing import TYPE_CHECKING

from orolift.checks import within

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

LOWEST_TEMPERATURE, HIGHEST_TEMPERATURE = 120.0, 340.0


def checked_pressure(values: ArrayLike, name: str = "pressure") -> NDArray[np.float64]:
    """Pressure between 100 Pa and 120 kPa."""
    return within(name, values, 100.0, 1.2e5, "Pa", "orolift works in pascal; multiply hectopascal by 100.")


def checked_temperature(values: ArrayLike, name: str = "temperature") -> NDArray[np.float64]:
    """Temperature between 120 K and 340 K."""
    hint = "orolift works in kelvin; add 273.15 to degrees Celsius."
    return within(name, values, LOWEST_TEMPERATURE, HIGHEST_TEMPERATURE, "K", hint)


def checked_mixing_ratio(values: ArrayLike, name: str = "mixing_ratio", lowest: float = 0.0) -> NDArray[np.float64]:
    """Mixing ratio up to 0.2 kg per kg."""
    hint = "Give kg of water per kg of dry air; divide g per kg by 1000."
    return within(name, values, lowest, 0.2, "kg/kg", hint)
