"""What a crossing gives, as plain data."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from orolift.air.column import IncomingAir
    from orolift.crossing.lee_wind import LeeWinds
    from orolift.crossing.march import March
    from orolift.crossing.pool import Pool
    from orolift.crossing.settings import Settings
    from orolift.crossing.wind import SiteWind
    from orolift.terrain.features import Features
    from orolift.terrain.transect import Transect

    Array = NDArray[np.float64]

Side = Literal["windward", "crest", "lee"]


@dataclass(frozen=True)
class Site:
    """A named place on the transect.

    Attributes
    ----------
    name : str
    distance : float [m]
        From the upwind end of the transect.
    elevation : float or None [m]
        Above sea level; None takes the terrain's.
    """

    name: str
    distance: float
    elevation: float | None = None


@dataclass(frozen=True)
class When:
    """Time and place, for the sun and for rotation; each may be unknown.

    Attributes
    ----------
    time : float or None [s]
        Seconds since 1970-01-01T00:00:00 UTC.
    longitude, latitude : float or None [degrees east, degrees north]
    """

    time: float | None = None
    longitude: float | None = None
    latitude: float | None = None


@dataclass(frozen=True)
class WarmingParts:
    """Temperature of a site minus that of the incoming air at its height, split [K].

    Attributes
    ----------
    descent, latent, going_round, mixing, surface_heating, pressure : float
        As in `orolift.crossing.arrival.Warming`.
    """

    descent: float
    latent: float
    going_round: float
    mixing: float
    surface_heating: float
    pressure: float


@dataclass(frozen=True, eq=False)
class LeeProfile:
    """Air over a site, from its ground up.

    Attributes
    ----------
    height_above_ground : ndarray (n,) [m]
    temperature : ndarray (n,) [K]
    vapour : ndarray (n,) [kg per kg of dry air]
    wind : ndarray (n,) [m s-1]
        Of the crossing air, across the range; a calm below it where the site lies in a pool or in blocked air.
    warming : ndarray (n,) [K], optional
        What the ground changed; it is in the temperature.
    """

    height_above_ground: Array
    temperature: Array
    vapour: Array
    wind: Array
    warming: Array | None = None


@dataclass(frozen=True)
class SimpleAir:
    """Temperature and dew point of one answer at a site [K]."""

    temperature: float
    dew_point: float


@dataclass(frozen=True)
class SiteLine:
    """The line of a site that does not lie on the crossing's own.

    Attributes
    ----------
    offset : float [m]
        Distance of the site across the crossing's own line, positive to the right of the wind.
    base, crest, blocked_top : float [m above sea level]
        Of the site's line.
    beyond_crest : float [m]
        Distance of the site downwind of that crest.
    crest_wind : float [m s-1]
        Component across the range there.
    cloud_base : float or None [m above sea level]
    cautions : tuple of str
        What is doubtful on its line.
    """

    offset: float
    base: float
    crest: float
    blocked_top: float
    beyond_crest: float
    crest_wind: float
    cloud_base: float | None
    cautions: tuple[str, ...] = ()


@dataclass(frozen=True)
class FailedSite:
    """A site that could not be worked out, and why."""

    number: int
    name: str
    reason: str


@dataclass(frozen=True, eq=False)
class LeeAir:
    """The air at one site.

    Attributes
    ----------
    name : str
    side : 'windward', 'crest' or 'lee'
    distance, elevation : float [m]
    pressure : float [Pa]
    temperature, dew_point : float [K]
    relative_humidity : float [1]
        Over liquid water.
    mixing_ratio : float [kg per kg of dry air]
    upwind_temperature, upwind_dew_point : float [K]
        Of the incoming air at the height of the site; below the upwind ground
        the column is continued down.
    in_pool : bool
        Whether the site lies in cold air that stays; then the values are the pool's.
    in_blocked_air : bool
        Whether it lies in blocked air on the windward side; then they are the incoming air's.
    source_level, source_level_low, source_level_high : float or None [m above sea level]
        Median, 10 % and 90 % by mass of the heights the air comes from; None in a pool.
    went_round : float [1]
        Share of the air that went round.
    parts : WarmingParts or None
        None in a pool.
    popular_picture : float [K]
        Temperature of the surface air lifted over the crest, all condensate
        removed, brought down dry.
    descent_only : float or None [K]
        Temperature of the source air brought down dry, without condensation.
    no_blocking, full_blocking : SimpleAir
        With all air crossing; with everything below Sheppard's dividing height stopped.
    wind : SiteWind or None
        None in a pool and in blocked air.
    profile : LeeProfile
    rain : float [kg m-2 s-1]
        Rain and snow there, the background included.
    number : int
        Of the site in the case, from 1: its pin.
    own : SiteLine or None
        Its line, where it does not lie on the crossing's own; `distance` is then that abreast of it on the
        crossing's own line, and may lie beyond its ends.
    """

    name: str
    side: Side
    distance: float
    elevation: float
    pressure: float
    temperature: float
    dew_point: float
    relative_humidity: float
    mixing_ratio: float
    upwind_temperature: float
    upwind_dew_point: float
    in_pool: bool
    in_blocked_air: bool
    source_level: float | None
    source_level_low: float | None
    source_level_high: float | None
    went_round: float
    parts: WarmingParts | None
    popular_picture: float
    descent_only: float | None
    no_blocking: SimpleAir
    full_blocking: SimpleAir
    wind: SiteWind | None
    profile: LeeProfile
    rain: float = 0.0
    number: int = 0
    own: SiteLine | None = None

    @property
    def warming(self) -> float:
        """Temperature at the site minus that of the incoming air at its height [K]."""
        return self.temperature - self.upwind_temperature


@dataclass(frozen=True)
class Flow:
    """How the air meets the range.

    Attributes
    ----------
    normal : float [rad]
        Bearing across the range, downwind.
    crest_wind : float [m s-1]
        Component along it, mean over the lowest 500 m above the crest.
    stability : float [s-1]
        Mean buoyancy frequency from base to crest, saturated parts of the lift as such.
    nondimensional_height : float [1]
    regime : str
        In words.
    possible_regimes : tuple of str
        Those the uncertainty of the thresholds leaves open.
    dividing_height, blocked_top, blocked_top_low, blocked_top_high : float [m above sea level]
        Critical values 1, the setting's, 3 and 0.75; the base when nothing is blocked.
    counterflow_top : float [m above sea level]
        Highest calm or counter-flowing air below the crest; the base when there is none.
    going_round_share : float [1]
    going_round_source : str
        Where that share comes from, in words.
    rossby_number, deformation_radius : float or None [1], [m]
        None where the latitude is unknown.
    breaks_through : bool or None
        Whether the crossing air reaches the lee foot; None when nothing is known of the lee.
    break_through_chance : float [1]
    wave_breaking : bool
    trapped_wavelength : float or None [m]
        Of the longest wave the column traps in the lee.
    critical_level : float or None [m above sea level]
    pressure_difference : float [Pa]
        Incoming air minus lee air, at the height of the lee foot.
    """

    normal: float
    crest_wind: float
    stability: float
    nondimensional_height: float
    regime: str
    possible_regimes: tuple[str, ...]
    dividing_height: float
    blocked_top: float
    blocked_top_low: float
    blocked_top_high: float
    counterflow_top: float
    going_round_share: float
    going_round_source: str
    rossby_number: float | None
    deformation_radius: float | None
    breaks_through: bool | None
    break_through_chance: float
    wave_breaking: bool
    trapped_wavelength: float | None
    critical_level: float | None
    pressure_difference: float


@dataclass(frozen=True)
class Cloud:
    """Cloud of the crossing air; heights above sea level, distances from the upwind end [m], None without cloud.

    Attributes
    ----------
    base, base_distance : float or None
        Lowest place on the windward side at which crossing air is saturated.
    end, end_distance : float or None
        Where, in the lee, the lowest streamline with cloud over the crest loses it.
    """

    base: float | None
    base_distance: float | None
    end: float | None
    end_distance: float | None


@dataclass(frozen=True)
class Water:
    """Water of the crossing air, each metre along the range [kg m-1 s-1].

    Attributes
    ----------
    vapour_in : float
        Vapour flux of the crossing air before the range.
    condensed, removed : float
        What condensed on the way, and what of it reached the ground as rain or snow.
    evaporated, beyond : float
        What evaporated while falling, and what left the transect before it landed.
    column_vapour_flux : float
        Vapour flux of the whole incoming column, blocked part included.
    """

    vapour_in: float
    condensed: float
    removed: float
    evaporated: float
    beyond: float
    column_vapour_flux: float


@dataclass(frozen=True, eq=False)
class Rain:
    """Rain and snow of the crossing air along the transect; the background rate apart.

    Attributes
    ----------
    rate, snow_rate : ndarray (nk,) [kg m-2 s-1]
        What reaches the ground at the places of the crossing, and of it the snow.
    background : float [kg m-2 s-1]
        Rate that falls anyway; not part of the shares and sums.
    total : float [kg m-1 s-1]
        All of it, for each metre of the range.
    windward_share : float or None [1]
        Of it, what falls upwind of the crest; None without rain.
    snow_share : float or None [1]
    peak_rate : float [kg m-2 s-1]
        With the background.
    peak_distance : float or None [m]
    lee_bands : tuple of (float, float, float)
        Distance from and to beyond the crest [m], and the share of all rain that falls there.
    drying_ratio_low, drying_ratio_high : float [1]
        Of the crossing air: over the answer and the ends without and with full blocking.
    """

    rate: Array
    snow_rate: Array
    background: float
    total: float
    windward_share: float | None
    snow_share: float | None
    peak_rate: float
    peak_distance: float | None
    lee_bands: tuple[tuple[float, float, float], ...]
    drying_ratio_low: float
    drying_ratio_high: float


@dataclass(frozen=True, eq=False)
class Crossing:
    """What a crossing gives. Places (nk,) along the transect, streamlines (nz,) upward.

    Attributes
    ----------
    incoming : IncomingAir
    transect : Transect
    features : Features
    sites : tuple of Site
    settings : Settings
    distance : ndarray (nk,) [m]
        Places from the upwind end of the transect.
    start_height : ndarray (nz,) [m above sea level]
        Of the streamlines, upwind.
    height : ndarray (nk, nz) [m above sea level]
    air : March, arrays (nk, nz)
    dew_point : ndarray (nk, nz) [K]
    wind : ndarray (nk, nz) [m s-1]
        Across the range.
    breaking : ndarray of bool, (nk, nz)
    flow : Flow
    cloud : Cloud
    water : Water
    rain : Rain
    pool : Pool or None
    winds : LeeWinds
    lee : tuple of LeeAir
        One for every site that was worked out, in their order, whatever line they are on.
    notes, cautions : tuple of str
    on_line : tuple of LeeAir or None
        Those on the crossing's own line, or its lee foot, where others have lines of their own; None when
        all of `lee` is on it.
    failed : tuple of FailedSite
    """

    incoming: IncomingAir
    transect: Transect
    features: Features
    sites: tuple[Site, ...]
    settings: Settings
    distance: Array
    start_height: Array
    height: Array
    air: March
    dew_point: Array
    wind: Array
    breaking: NDArray[np.bool_]
    flow: Flow
    cloud: Cloud
    water: Water
    rain: Rain
    pool: Pool | None
    winds: LeeWinds
    lee: tuple[LeeAir, ...]
    notes: tuple[str, ...]
    cautions: tuple[str, ...]
    on_line: tuple[LeeAir, ...] | None = None
    failed: tuple[FailedSite, ...] = ()
