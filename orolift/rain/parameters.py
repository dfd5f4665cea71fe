"""What the linear theory of orographic rain is run with, and how it follows from the incoming air."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from orolift.air.column import AirAtHeights, IncomingAir, interpolated
from orolift.air.condensation import lifting_condensation_level
from orolift.air.lapse import saturated_lapse_rate
from orolift.air.saturation import latent_heat_of_vaporisation
from orolift.air.vapour import vapour_pressure_from_mixing_ratio
from orolift.checks import within
from orolift.constants import R_DRY, R_VAPOUR
from orolift.errors import IncomingAirError
from orolift.rain.moisture import moist_stability_squared, saturated_vapour_density

if TYPE_CHECKING:
    from numpy.typing import NDArray

LEAST_STABILITY = 1.0e-3  # [s-1] for unstable air: waves then hardly matter (a judgement within the usual 0 to 0.01)
LEAST_WIND = 1.0  # [m s-1] below it "downwind" means nothing: a judgement
_SPACING = 50.0  # [m] of the levels the column is read at
_DEPTH = 12.0e3  # [m] there is no vapour to speak of above
_DRIEST = 1.0e-8  # [kg/kg] keeps the condensation level of very dry air finite


@dataclass(frozen=True)
class RainParameters:
    """One uniform flow of saturated air, as the linear theory sees it.

    Attributes
    ----------
    eastward_wind, northward_wind : float [m s-1]
        Along x and y of the grid (grid north, not true north).
    stability : float [s-1]
        Moist buoyancy frequency, 0 to 0.03.
    vapour_height : float [m]
        Scale height of the vapour, 0 to 10 km; 0 lets all vapour rise with the ground.
    uplift_sensitivity : float [kg m-3]
        Condensation above a square metre for each metre of uplift, 0 to 0.05.
    cloud_time, fall_time : float [s]
        Time from condensation to drops that fall, and time these need to the ground, 0 to 10 000 s.
    background : float [kg m-2 s-1]
        Rain that would fall without the terrain, 0 to 0.03.

    Raises
    ------
    OutOfRangeError
        If any value is NaN or out of range.
    """

    eastward_wind: float
    northward_wind: float
    stability: float
    vapour_height: float
    uplift_sensitivity: float
    cloud_time: float = 1000.0
    fall_time: float = 1000.0
    background: float = 0.0

    def __post_init__(self) -> None:
        """Check every value."""
        for name, low, high, unit, hint in (
            ("eastward_wind", -120.0, 120.0, "m/s", ""),
            ("northward_wind", -120.0, 120.0, "m/s", ""),
            ("stability", 0.0, 0.03, "s-1", "Unstable air: use a small positive value, and say so."),
            ("vapour_height", 0.0, 1.0e4, "m", ""),
            ("uplift_sensitivity", 0.0, 0.05, "kg m-3", ""),
            ("cloud_time", 0.0, 1.0e4, "s", ""),
            ("fall_time", 0.0, 1.0e4, "s", ""),
            ("background", 0.0, 0.03, "kg m-2 s-1", "Divide mm per hour by 3600."),
        ):
            within(name, getattr(self, name), low, high, unit, hint)
        within(
            "wind speed", self.wind_speed, LEAST_WIND, 200.0, "m/s", "In calm air there is no windward and no lee side."
        )

    @property
    def wind_speed(self) -> float:
        """Speed of the wind [m s-1]."""
        return float(np.hypot(self.eastward_wind, self.northward_wind))

    @property
    def bearing(self) -> float:
        """Direction the air goes to, clockwise from grid north [rad]."""
        return float(np.arctan2(self.eastward_wind, self.northward_wind))


@dataclass(frozen=True)
class ColumnRain:
    """What the incoming air means for rain over the map.

    Attributes
    ----------
    parameters : RainParameters
    dry_lift : float [m]
        How far the air, on average over its vapour, has to be lifted before anything condenses.
    column_vapour : float [kg m-2]
        Vapour above the reference height.
    reference_temperature : float [K]
        Of the air at the reference height where it becomes saturated.
    stability_squared : float [s-2]
        As it is in the column; negative for air that is unstable when saturated.
    turning : float [rad]
        Angle between the wind at the reference height and 3 km above it, 0 to pi.
    notes : tuple of str
    """

    parameters: RainParameters
    dry_lift: float
    column_vapour: float
    reference_temperature: float
    stability_squared: float
    turning: float
    notes: tuple[str, ...]


def column_rain(
    air: IncomingAir,
    reference: float,
    *,
    cloud_time: float = 1000.0,
    fall_time: float = 1000.0,
    background: float = 0.0,
    stability_squared: float | None = None,
    grid_turn: float = 0.0,
    freezing: bool = True,
) -> ColumnRain:
    """Parameters of the linear theory from the incoming air.

    Parameters
    ----------
    air : IncomingAir
        One column, fields of shape (nz,).
    reference : float [m above sea level]
        Height of the lowest air that crosses: the ground upwind, or the top of the blocked layer.
    cloud_time, fall_time : float [s]
    background : float [kg m-2 s-1]
    stability_squared : float, optional [s-2]
        Moist buoyancy frequency squared, if known better than from the simple form.
    grid_turn : float [rad]
        Bearing of true north on the grid, clockwise from grid north; turns the wind to the grid.
    freezing : bool
        Whether cloud freezes between 0 and -20 degrees Celsius, for the saturated lapse rate.

    Returns
    -------
    ColumnRain

    Raises
    ------
    IncomingAirError
        If the air has several columns or holds no vapour.
    OutOfRangeError
        If the mean wind is below 1 m/s or a value is out of range.

    Notes
    -----
    The theory has one wind, one stability and vapour that falls exponentially
    with height. All are means over the vapour above `reference`, so that they
    describe the air that holds the water: the wind carries the true vapour flux,
    Hw = (column vapour) / (vapour density at the reference), and with the lapse rate that
    goes with it, Rv T^2 / (L Hw), the sensitivity is
    Cw = (vapour density) (saturated lapse rate) L Hw / (Rv T^2), the equation of
    Smith and Barstad (2004) [1]_. Temperature and vapour density are those of
    the reference air lifted to saturation. For saturated air with a constant
    lapse rate these are the published forms within the 10 % that their constant
    temperature costs.

    The theory takes air that is saturated from the start. Unsaturated air
    condenses only after `dry_lift`: take it off the terrain, as `rain_map` does
    with `floor`. Without stable saturated air the stability is set to 0.001 s-1, and said.

    References
    ----------
    .. [1] R. B. Smith and I. Barstad (2004), "A linear theory of orographic
       precipitation", J. Atmos. Sci. 61, 1377-1391.

    Examples
    --------
    >>> from orolift.air.column_build import air_from_station
    >>> air = air_from_station(0.0, 1.0e5, 283.15, 0.0077, 15.0, 4.7, lapse_rate=0.005)
    >>> found = column_rain(air, 0.0)
    >>> print(round(found.parameters.vapour_height, -2), round(found.column_vapour, 0), round(found.dry_lift, -1))
    2700.0 25.0 70.0
    """
    if air.temperature.ndim != 1:
        raise IncomingAirError(
            f"the rain map takes one column of air, not an array of shape {air.temperature.shape[:-1]} of them; "
            "call it for each"
        )
    top = min(reference + _DEPTH, float(air.height[-1]))
    level = np.linspace(reference, top, int(np.ceil((top - reference) / _SPACING)) + 1)
    here = interpolated(air, level)
    density = _vapour_density(here)
    water = float(np.trapezoid(density, level))
    if water <= 0.0:
        raise IncomingAirError("the incoming air holds no vapour, so there is no rain to map; check its dew points")

    def mean(values: NDArray[np.float64]) -> float:
        return float(np.trapezoid(values * density, level)) / water

    lifted = lifting_condensation_level(here.pressure, here.temperature, np.maximum(here.vapour, _DRIEST))
    t = float(np.minimum(lifted.temperature[0], here.temperature[0]))
    saturated = saturated_lapse_rate(here.pressure, here.temperature, freezing=freezing)
    if stability_squared is None:
        lapse = -np.gradient(here.temperature, level)
        stability_squared = mean(moist_stability_squared(here.temperature, np.clip(lapse, -0.05, 0.05), saturated))
    depth = water / float(density[0])
    per_metre = mean(saturated) * float(latent_heat_of_vaporisation(t)) / (R_VAPOUR * t**2)
    east, north = mean(here.eastward_wind), mean(here.northward_wind)
    parameters = RainParameters(
        eastward_wind=float(east * np.cos(grid_turn) + north * np.sin(grid_turn)),
        northward_wind=float(north * np.cos(grid_turn) - east * np.sin(grid_turn)),
        stability=max(float(np.sqrt(max(stability_squared, 0.0))), LEAST_STABILITY),
        vapour_height=depth,
        uplift_sensitivity=float(saturated_vapour_density(t)) * per_metre * depth,
        cloud_time=cloud_time,
        fall_time=fall_time,
        background=background,
    )
    return ColumnRain(
        parameters=parameters,
        dry_lift=mean(np.maximum(lifted.height_above, 0.0)),
        column_vapour=water,
        reference_temperature=t,
        stability_squared=float(stability_squared),
        turning=_turning(here, level),
        notes=_notes(parameters, stability_squared),
    )


def _vapour_density(here: AirAtHeights) -> NDArray[np.float64]:
    """Mass of vapour in a cubic metre [kg m-3]."""
    dry = here.pressure - vapour_pressure_from_mixing_ratio(here.pressure, here.vapour)
    return np.asarray(here.vapour * dry / (R_DRY * here.temperature))


def _turning(here: AirAtHeights, level: NDArray[np.float64]) -> float:
    """Angle between the lowest wind and that 3 km higher [rad]; 0 when either is calm."""
    aloft = int(np.argmin(np.abs(level - level[0] - 3000.0)))
    low = complex(here.northward_wind[0], here.eastward_wind[0])
    high = complex(here.northward_wind[aloft], here.eastward_wind[aloft])
    return float(abs(np.angle(high * low.conjugate()))) if abs(low) >= LEAST_WIND and abs(high) >= LEAST_WIND else 0.0


def _notes(parameters: RainParameters, stability_squared: float) -> tuple[str, ...]:
    flow = (
        f"Rain over the map: one wind of {parameters.wind_speed:.0f} m/s (mean over the vapour), vapour "
        f"{parameters.vapour_height / 1000.0:.1f} km deep, cloud time {parameters.cloud_time:.0f} s, fall time "
        f"{parameters.fall_time:.0f} s."
    )
    if stability_squared >= LEAST_STABILITY**2:
        return (flow,)
    return (
        flow,
        f"Saturated air is not stable in this column; the map is computed with {LEAST_STABILITY:g} s⁻¹ instead.",
    )
