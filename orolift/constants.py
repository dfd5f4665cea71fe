"""Physical constants, each with its unit and its source.

A constant without a source raises at import. The set is chosen so that
saturation pressure, latent heat, condensation level and equivalent potential
temperature agree exactly: heat capacities are constant, latent heats linear.
"""

from __future__ import annotations


class Sourced(float):
    """A number that carries its unit and where it was published.

    Parameters
    ----------
    value : float
        The number, in SI.
    unit : str
        Its unit, ``"1"`` for none.
    source : str
        Publication, or ``"derived: ..."``. Must not be empty.

    Raises
    ------
    ValueError
        If `source` or `unit` is empty.

    Examples
    --------
    >>> Sourced(9.80665, "m s-2", "3rd CGPM (1901)").unit
    'm s-2'
    """

    unit: str
    source: str

    def __new__(cls, value: float, unit: str, source: str) -> Sourced:  # noqa: PYI034 (Self hides the attributes)
        """Build the number; refuse one without unit or source."""
        if not source.strip() or not unit.strip():
            raise ValueError(f"constant {value!r} has no unit or no source; give both")
        number = super().__new__(cls, value)
        number.unit = unit
        number.source = source
        return number


GRAVITY = Sourced(9.80665, "m s-2", "3rd CGPM (1901), standard acceleration, exact by definition")
EARTH_ROTATION_RATE = Sourced(7.292115e-5, "rad s-1", "WGS 84 (NIMA TR8350.2, 2000), angular velocity of the earth")
GAS_CONSTANT = Sourced(8.314462618, "J mol-1 K-1", "CODATA 2018, exact by definition")
MOLAR_MASS_WATER = Sourced(18.015268e-3, "kg mol-1", "IAPWS R6-95(2018)")
MOLAR_MASS_DRY_AIR = Sourced(28.9644e-3, "kg mol-1", "US Standard Atmosphere 1976")
R_DRY = Sourced(GAS_CONSTANT / MOLAR_MASS_DRY_AIR, "J kg-1 K-1", "derived: GAS_CONSTANT / MOLAR_MASS_DRY_AIR")
R_VAPOUR = Sourced(GAS_CONSTANT / MOLAR_MASS_WATER, "J kg-1 K-1", "derived: GAS_CONSTANT / MOLAR_MASS_WATER")
EPSILON = Sourced(R_DRY / R_VAPOUR, "1", "derived: R_DRY / R_VAPOUR")

HEAT_CAPACITY_DRY_AIR = Sourced(1005.7, "J kg-1 K-1", "Bolton (1980), Mon. Weather Rev. 108, 1046-1053")
HEAT_CAPACITY_VAPOUR = Sourced(1879.0, "J kg-1 K-1", "Romps (2017), J. Atmos. Sci. 74, 3891-3900: 1418 + 461")
HEAT_CAPACITY_LIQUID = Sourced(4119.0, "J kg-1 K-1", "Romps (2017), J. Atmos. Sci. 74, 3891-3900")
HEAT_CAPACITY_ICE = Sourced(2097.0, "J kg-1 K-1", "IAPWS R10-06(2009) at the triple point, rounded")
KAPPA = Sourced(R_DRY / HEAT_CAPACITY_DRY_AIR, "1", "derived: R_DRY / HEAT_CAPACITY_DRY_AIR")

TRIPLE_POINT_TEMPERATURE = Sourced(273.16, "K", "IAPWS R14-08(2011)")
TRIPLE_POINT_PRESSURE = Sourced(611.657, "Pa", "IAPWS R14-08(2011), Guildner et al. (1976)")
LATENT_HEAT_VAPORISATION_TRIPLE = Sourced(2.5009e6, "J kg-1", "IAPWS R6-95(2018) at the triple point, rounded")
LATENT_HEAT_SUBLIMATION_TRIPLE = Sourced(2.8344e6, "J kg-1", "IAPWS R10-06(2009) at the triple point, rounded")
MELTING_POINT = Sourced(273.15, "K", "0 degrees Celsius, 10th CGPM (1954)")
ALL_ICE_TEMPERATURE = Sourced(
    253.15,
    "K",
    "-20 degrees Celsius: design choice, condensate is all ice below it; common practice, no published source",
)
REFERENCE_PRESSURE = Sourced(1.0e5, "Pa", "WMO-No. 8: reference pressure of potential temperature, 1000 hPa")

STANDARD_TEMPERATURE = Sourced(288.15, "K", "ICAO Doc 7488, US Standard Atmosphere 1976: sea level")
STANDARD_PRESSURE = Sourced(101325.0, "Pa", "ICAO Doc 7488, US Standard Atmosphere 1976: sea level")
STANDARD_LAPSE_RATE = Sourced(6.5e-3, "K m-1", "ICAO Doc 7488, US Standard Atmosphere 1976: troposphere")
STANDARD_GAS_CONSTANT = Sourced(8.31432, "J mol-1 K-1", "US Standard Atmosphere 1976 (differs from CODATA 2018)")
STANDARD_TROPOPAUSE = Sourced(11000.0, "m", "ICAO Doc 7488, US Standard Atmosphere 1976: geopotential")
EARTH_RADIUS_STANDARD = Sourced(6356766.0, "m", "US Standard Atmosphere 1976: for geometric and geopotential height")


def table() -> list[tuple[str, Sourced]]:
    """Name and value of every constant, in the order they are defined.

    Returns
    -------
    list of (str, Sourced)

    Examples
    --------
    >>> table()[0][0]
    'GRAVITY'
    """
    return [(name, value) for name, value in globals().items() if isinstance(value, Sourced)]
