"""What every table of the case file has in common: strictness, units in the keys, ranges used more than once."""

from __future__ import annotations

from typing import Annotated, Any, ClassVar

from pydantic import BaseModel, ConfigDict, Field, ValidationInfo, model_validator

from orolift.sources.units import alternatives, converted, suffix_of

Share = Annotated[float, Field(ge=0.0, le=1.0)]
Bearing = Annotated[float, Field(ge=0.0, le=360.0)]
Longitude = Annotated[float, Field(ge=-180.0, le=360.0)]
Latitude = Annotated[float, Field(ge=-89.9, le=89.9)]
Elevation = Annotated[float, Field(ge=-430.0, le=9000.0)]
Name = Annotated[str, Field(min_length=1, max_length=200)]


def is_number(value: object) -> bool:
    """Whether a TOML value is a number (true and false are not)."""
    return isinstance(value, int | float) and not isinstance(value, bool)


class Table(BaseModel):
    """One table of the case file."""

    differences: ClassVar[bool] = False
    """Whether its numbers are differences: a degree Fahrenheit is then 5/9 of a degree Celsius, without an offset."""

    model_config = ConfigDict(strict=True, extra="forbid", allow_inf_nan=False, frozen=True)

    @model_validator(mode="before")
    @classmethod
    def _other_units(cls, data: Any, info: ValidationInfo) -> Any:
        """Convert keys given in another unit to the one this table is written in."""
        if not isinstance(data, dict):
            return data
        out = {key: value for key, value in data.items() if key in cls.model_fields}
        for key, value in data.items():
            if key in out:
                continue
            wanted = next((name for name in alternatives(key) if name in cls.model_fields), None)
            if wanted is None:
                out[key] = value
                continue
            if wanted in out:
                raise ValueError(f"{wanted} and {key} say the same thing; keep one of them")
            out[wanted] = _converted(value, key, wanted, difference=cls.differences)
            if is_number(value) and isinstance(info.context, dict):
                info.context[(cls.__name__, wanted)] = f"{key} = {value}"
        return out


def _converted(value: Any, key: str, wanted: str, *, difference: bool = False) -> Any:
    """Value given under `key` in the unit of `wanted`; of pairs, as a ridge has, the second number."""
    given, usual = suffix_of(key), suffix_of(wanted)
    if given is None or usual is None:
        return value
    if is_number(value):
        return converted(float(value), given[1], usual[1], difference=difference)
    if isinstance(value, list):
        return [[*pair[:-1], _converted(pair[-1], key, wanted)] if _is_pair(pair) else pair for pair in value]
    return value


def _is_pair(value: object) -> bool:
    return isinstance(value, list) and len(value) == 2


def exactly_one(table: Table, keys: tuple[str, ...], what: str) -> None:
    """Refuse a table with none or several of the keys that say one thing."""
    given = [key for key in keys if getattr(table, key) is not None]
    if len(given) != 1:
        have = "none is given" if not given else f"{' and '.join(given)} are given"
        raise ValueError(f"{what}: exactly one of {', '.join(keys)} is needed, and {have}")


def together(table: Table, keys: tuple[str, ...]) -> None:
    """Refuse a table in which only some of the keys that belong together are given."""
    given = [key for key in keys if getattr(table, key) is not None]
    if given and len(given) < len(keys):
        missing = [key for key in keys if key not in given]
        raise ValueError(f"{given[0]} needs {' and '.join(missing)} beside it")
