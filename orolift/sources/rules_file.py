"""The thresholds of a region read from a TOML file: region, authority, and rules over the values of a site."""

from __future__ import annotations

from datetime import date  # noqa: TC003 (pydantic reads the annotation at run time)
from typing import TYPE_CHECKING, Annotated, Literal

from pydantic import Field, model_validator

from orolift.errors import CaseError, OutOfRangeError
from orolift.fire.rules import Condition, Rule, RuleSet
from orolift.fire.winds import WindMeant, checked_wind_meant
from orolift.sources.case import toml_data, validated
from orolift.sources.case_table import Name, Table
from orolift.sources.files import read_text
from orolift.sources.units import alternatives, nearest, suffix_of, to_si

if TYPE_CHECKING:
    from pathlib import Path

QUANTITY_KEYS = (
    "temperature_c",
    "dew_point_c",
    "relative_humidity_percent",
    "vapour_pressure_deficit_hpa",
    "equilibrium_fuel_moisture_percent",
    "fosberg_index",
    "fosberg_index_raw",
    "fosberg_index_with_drought",
    "hot_dry_windy",
    "fine_fuel_code",
    "initial_spread_index",
    "angstroem_index",
    "rain_mm_per_h",
    "drought_index",
    "mixing_height_m",
    "source_level_m",
    "warming_c",
)
"""Quantities a condition may name, the wind apart, each with its unit."""
DIFFERENCES = ("warming_c",)
"""Of them those that are differences of temperature."""
MOST_RULES = 100
WIND_LIMITS = ("at_least_ms", "at_most_ms")
WIND_KEYS = ("height_m", "kind", "averaging_min", "averaging_s")
_WIND_HELP = (
    "a wind condition says which wind it means: height_m (10, or height_ft = 20), kind ('sustained' or 'gust') and "
    "averaging_min or averaging_s"
)


class RuleCondition(Table):
    """One condition of a rule."""

    quantity: Name = Field(description="a quantity with its unit, or wind")
    at_least: float | None = Field(default=None, description="the limit, in the unit of the quantity")
    at_most: float | None = Field(default=None, description="the limit, in the unit of the quantity")
    at_least_ms: Annotated[float, Field(ge=0.0, le=130.0)] | None = Field(default=None, description="of a wind")
    at_most_ms: Annotated[float, Field(ge=0.0, le=130.0)] | None = Field(default=None, description="of a wind")
    height_m: Annotated[float, Field(ge=2.0, le=50.0)] | None = Field(
        default=None, description="of a wind, above the ground"
    )
    kind: Literal["sustained", "gust"] | None = Field(default=None, description="of a wind")
    averaging_min: Annotated[float, Field(ge=1.0, le=60.0)] | None = Field(
        default=None, description="averaging time of a sustained wind, minutes"
    )
    averaging_s: Annotated[float, Field(ge=1.0, le=3600.0)] | None = Field(
        default=None, description="averaging time of a wind, seconds: 1 to 10 of a gust"
    )

    @model_validator(mode="after")
    def _wind_or_not(self) -> RuleCondition:
        if self.quantity == "wind":
            _check_wind(self)
        else:
            _check_other(self)
        return self


class RuleTable(Table):
    """One rule: conditions that must all be met."""

    name: Name
    hours: Annotated[int, Field(ge=1, le=72)] = Field(
        default=1, description="how many hours in a row it must be met; 1 asks for no duration"
    )
    condition: list[RuleCondition] = Field(min_length=1, max_length=20)


class RulesFile(Table):
    """The whole file."""

    region: Name = Field(description="for where the thresholds hold")
    authority: Name = Field(description="who set them")
    taken: date = Field(description="when they were taken over from there")
    rule: list[RuleTable] = Field(min_length=1, max_length=MOST_RULES)

    @model_validator(mode="after")
    def _names(self) -> RulesFile:
        names = [rule.name for rule in self.rule]
        twice = next((name for name in names if names.count(name) > 1), None)
        if twice is not None:
            raise ValueError(f"two rules are called '{twice}'; give each its own name")
        return self


def read_rules(path: str | Path, folder: Path | None = None) -> RuleSet:
    """Thresholds of a region from a TOML file.

    Parameters
    ----------
    path : str or Path
    folder : Path, optional
        That relative paths start from.

    Returns
    -------
    RuleSet
        In SI.

    Raises
    ------
    CaseError
        If a key is missing, unknown or out of range, a quantity is unknown, or a wind does not say which it is.
    MissingFileError, DataFileError
        If the file cannot be read as text.
    """
    return rules_from_text(read_text(path, "rules_file", folder), str(path))


def rules_from_text(text: str, name: str) -> RuleSet:
    """Thresholds of TOML text; `name` stands for the file in messages.

    Raises
    ------
    CaseError
        As `read_rules`.

    Examples
    --------
    >>> rules_from_text("authority = 'Fire office (invented)'", "rules.toml")
    Traceback (most recent call last):
        ...
    orolift.errors.CaseError: rules.toml: region is missing. docs/case.md lists every key. (2 more to mend after this one.)
    """  # noqa: E501 (a doctest shows the whole message)
    data = toml_data(text, name)
    if not data:
        raise CaseError(f"{name}: holds no rules; it needs region, authority, taken and at least one [[rule]].")
    file = validated(RulesFile, data, name)
    rules = tuple(
        Rule(rule.name, tuple(_condition(one) for one in rule.condition), hours=rule.hours) for rule in file.rule
    )
    return RuleSet(region=file.region, authority=file.authority, taken=file.taken.isoformat(), rules=rules)


def _check_wind(table: RuleCondition) -> None:
    """Refuse a wind without its limit, height, kind or averaging time."""
    if table.at_least is not None or table.at_most is not None:
        raise ValueError("the limit of a wind carries its unit: at_least_ms, at_least_kt, at_least_kmh or at_least_mph")
    _one_limit(table, WIND_LIMITS)
    missing = [key for key in ("height_m", "kind") if getattr(table, key) is None]
    if table.averaging_min is None and table.averaging_s is None:
        missing.append("averaging_min")
    if missing:
        raise ValueError(f"{' and '.join(missing)} {'is' if len(missing) == 1 else 'are'} missing: {_WIND_HELP}")
    if table.averaging_min is not None and table.averaging_s is not None:
        raise ValueError("averaging_min and averaging_s say the same thing; keep one of them")
    try:
        checked_wind_meant(_meant(table))
    except OutOfRangeError as error:
        raise ValueError(str(error).rstrip(".")) from error


def _check_other(table: RuleCondition) -> None:
    """Refuse an unknown quantity, and keys of a wind where none is meant."""
    known = [*QUANTITY_KEYS, *(other for key in QUANTITY_KEYS for other in alternatives(key)), "wind"]
    if table.quantity not in known:
        close = nearest(table.quantity, known)
        hint = f"the nearest is '{close}'" if close else f"known are {', '.join([*QUANTITY_KEYS, 'wind'])}"
        raise ValueError(f"quantity '{table.quantity}' is unknown; {hint}")
    wrong = next((key for key in (*WIND_LIMITS, *WIND_KEYS) if getattr(table, key) is not None), None)
    if wrong is not None:
        raise ValueError(f"{wrong} belongs to quantity = 'wind'; the limit of {table.quantity} is at_least or at_most")
    _one_limit(table, ("at_least", "at_most"))


def _one_limit(table: RuleCondition, keys: tuple[str, str]) -> None:
    given = [key for key in keys if getattr(table, key) is not None]
    if len(given) != 1:
        have = "none is given" if not given else "both are given: write two conditions"
        raise ValueError(f"exactly one of {' and '.join(keys)} is needed, and {have}")


def _meant(table: RuleCondition) -> WindMeant:
    averaging = 60.0 * table.averaging_min if table.averaging_min is not None else table.averaging_s
    return WindMeant(table.height_m or 0.0, table.kind or "sustained", averaging or 0.0)


def _condition(table: RuleCondition) -> Condition:
    """A condition in SI."""
    if table.quantity == "wind":
        return Condition(_meant(table), table.at_least_ms, table.at_most_ms)
    usual = next(key for key in QUANTITY_KEYS if table.quantity in {key, *alternatives(key)})
    own = suffix_of(table.quantity)
    name = usual if own is None else suffix_name(usual)
    limits = (table.at_least, table.at_most)
    if own is None:
        return Condition(name, *limits)
    zero = to_si(0.0, own[1]) if usual in DIFFERENCES else 0.0
    low, high = (None if limit is None else to_si(limit, own[1]) - zero for limit in limits)
    return Condition(name, low, high)


def suffix_name(key: str) -> str:
    """Name inside of a quantity that carries a unit at the edge.

    Examples
    --------
    >>> suffix_name("relative_humidity_percent"), suffix_name("rain_mm_per_h")
    ('relative_humidity', 'rain_rate')
    """
    parts = suffix_of(key)
    stem = key if parts is None else parts[0]
    return "rain_rate" if stem == "rain" else stem
