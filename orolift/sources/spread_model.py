"""The table [spread] of the case file: how many members, and how uncertain each input is, by kind of source."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Annotated, ClassVar

from pydantic import Field, field_validator

from orolift.errors import CaseError
from orolift.sources.case_table import Table
from orolift.sources.units import UNITS, suffix_of
from orolift.spread.spread import LEAST_MEMBERS, MOST_MEMBERS, USUAL_MEMBERS, Drawn
from orolift.spread.uncertainty import Uncertainty

if TYPE_CHECKING:
    from orolift.sources.case_model import Case

Difference = Annotated[float, Field(ge=0.0, le=15.0)]
Percent = Annotated[float, Field(ge=0.0, le=200.0)]


class SpreadTable(Table):
    """Members, and one standard deviation of each input; what is left out depends on the kind of source."""

    differences: ClassVar[bool] = True

    members: Annotated[int, Field(ge=0, le=MOST_MEMBERS)] = Field(
        default=USUAL_MEMBERS, description="how often the crossing is worked out; 0 leaves the ranges out"
    )
    seed: Annotated[int, Field(ge=0, le=2**31 - 1)] = Field(
        default=1, description="of the random numbers; the same seed gives the same numbers"
    )
    temperature_c: Difference | None = Field(default=None, description="of the whole incoming column")
    dew_point_c: Difference | None = Field(default=None, description="of the whole incoming column")
    pressure_hpa: Annotated[float, Field(ge=0.0, le=50.0)] | None = Field(
        default=None, description="at the ground of the incoming column"
    )
    wind_percent: Percent | None = Field(default=None, description="of the wind speed at all heights")
    wind_from_deg: Annotated[float, Field(ge=0.0, le=90.0)] | None = Field(
        default=None, description="of the wind direction at all heights; the line stays"
    )
    lapse_rate_c_per_km: Annotated[float, Field(ge=0.0, le=5.0)] | None = Field(
        default=None, description="of the lapse rate of the lowest 5 km"
    )
    going_round_share: Annotated[float, Field(ge=0.0, le=1.0)] | None = Field(
        default=None, description="of the share of low lee air that went round"
    )
    critical_value: Annotated[float, Field(ge=0.0, le=3.0)] | None = Field(
        default=None, description="of the non-dimensional height at which blocking starts, 1.5"
    )
    cloud_time_percent: Percent | None = Field(default=None, description="of cloud_time_s")
    fall_time_percent: Percent | None = Field(default=None, description="of fall_time_s")
    removed_share: Annotated[float, Field(ge=0.0, le=1.0)] | None = Field(
        default=None, description="of removed_share in [rain], where it is given"
    )
    mixing_depth_percent: Percent | None = Field(default=None, description="of mixing_depth_m")
    surface_heat_percent: Percent | None = Field(default=None, description="of the heat from the ground of the lee")
    liquid_cloud_percent: Annotated[float, Field(ge=0.0, le=100.0)] | None = Field(
        default=None, description="share of the members in which cloud stays liquid below 0 degC"
    )
    lee_temperature_c: Difference | None = Field(
        default=None, description="of what [lee] says; a pool top moves by 100 m for each degree"
    )
    model_temperature_c: Difference | None = Field(
        default=None, description="error of the method; default: growing with distance"
    )
    model_vapour_g_per_kg: Annotated[float, Field(ge=0.0, le=20.0)] | None = Field(
        default=None, description="error of the method; default: growing with distance"
    )

    @field_validator("members")
    @classmethod
    def _enough(cls, members: int) -> int:
        if 0 < members < LEAST_MEMBERS:
            raise ValueError(
                f"{members} is too few for a range of 10 to 90 %; give {LEAST_MEMBERS} or more, or 0 for no ranges"
            )
        return members


STATION = Uncertainty(dew_point=1.5, pressure=100.0, wind=0.35, wind_from=0.35, lapse_rate=1.0e-3)
"""One station: a valley wind says little of the wind at the crest, and the lapse rate is a guess (real ones lie between
5 and 8 K/km on most days of wind across a range). Judgements, no published source."""
CREST_WIND = replace(STATION, wind=0.2, wind_from=0.26)
"""The same with the wind at the crest: what decides blocking is known better."""
STATIONS = Uncertainty(dew_point=1.5, pressure=100.0, wind=0.3, wind_from=0.35, lapse_rate=0.7e-3)
"""Stations at several heights: the lapse rate is measured, near the ground."""
SOUNDING = Uncertainty()
"""A sounding: its sensors are good to 0.5 K; that it rose some hours and some ten kilometres away is most of it."""
MODEL = Uncertainty(temperature=1.5, dew_point=2.0, pressure=100.0, wind=0.2, wind_from=0.26, lapse_rate=0.5e-3)
"""A model's column: its error a day ahead, in the lowest kilometres; larger than a sounding's."""
GIVEN_LAPSE_RATE = 0.5e-3
"""Of a lapse rate that somebody gave [K m-1]; a judgement."""
GIVEN_TIME = 0.3
"""Of a cloud time or fall time that somebody gave; a judgement."""
GIVEN_SHARE = 0.1
"""Of a share that somebody gave or that follows from the lowest pass; a judgement."""


def drawn_of(case: Case, members: int | None = None) -> Drawn | None:
    """What the members of many crossings of a case are drawn from.

    Parameters
    ----------
    case : Case
    members : int, optional
        Instead of the number in [spread], as --members gives it; 0 is none.

    Returns
    -------
    Drawn or None
        None without members.

    Raises
    ------
    CaseError
        If the number is out of range.
    """
    wanted = case.spread.members if members is None else members
    if wanted == 0:
        return None
    if not LEAST_MEMBERS <= wanted <= MOST_MEMBERS:
        raise CaseError(
            f"--members {wanted}: fewer than {LEAST_MEMBERS} have no range of 10 to 90 %, more than {MOST_MEMBERS} do "
            f"not fit into memory. Give {LEAST_MEMBERS} or more, as 32, or 0 for no ranges."
        )
    return Drawn(uncertainty_of(case), wanted, case.spread.seed)


def uncertainty_of(case: Case) -> Uncertainty:
    """How uncertain the inputs of a case are: as it says, else by the kind of source.

    Parameters
    ----------
    case : Case

    Returns
    -------
    Uncertainty
    """
    found, table = _by_source(case), case.spread
    if case.incoming.lapse_rate_c_per_km is not None:
        found = replace(found, lapse_rate=min(found.lapse_rate, GIVEN_LAPSE_RATE))
    if "cloud_time_s" in case.rain.model_fields_set:
        found = replace(found, cloud_time=GIVEN_TIME)
    if "fall_time_s" in case.rain.model_fields_set:
        found = replace(found, fall_time=GIVEN_TIME)
    if case.flow.going_round_share is not None or case.terrain.pass_m is not None:
        found = replace(found, going_round_share=GIVEN_SHARE)
    given = {}
    for key in SpreadTable.model_fields:
        value = getattr(table, key)
        if value is None or key in {"members", "seed"}:
            continue
        stem, suffix = suffix_of(key) or (key, "")
        given[stem] = value * (UNITS[suffix].factor if suffix else 1.0)
    return replace(found, **given)


def _by_source(case: Case) -> Uncertainty:
    """Uncertainty by the kind of source."""
    incoming = case.incoming
    if incoming.sounding_file is not None:
        return SOUNDING
    if incoming.model_file is not None:
        return MODEL
    if incoming.stations is not None:
        return CREST_WIND if incoming.crest_wind_kt is not None else STATIONS
    return STATION if incoming.crest_wind_kt is None else CREST_WIND
