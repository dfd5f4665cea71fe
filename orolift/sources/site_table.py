"""The sites of the results as flat rows: one value a name, for tables and for points on a map."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from orolift.sources.fire_results import flat_fire

if TYPE_CHECKING:
    from orolift.sources.fire_results import FireBlock
    from orolift.sources.results import FailedSiteBlock, LeeBlock, Results

NOT_A_VALUE = {"profile", "range", "input_range", "chance", "warming_parts_c", "source_level_range_m"}
"""Parts of a block that are no single value; those with names are flattened."""
PARTS = ("descent", "latent", "going_round", "mixing", "surface_heating", "pressure")
CHANCES = ("in_pool", "cloud", "rain")
RANGES = ("source_level_m", "wind_ms", "gust_ms")
"""Ranges that every table has columns for; others are added where they are known."""


def flat_site(site: LeeBlock, fire: FireBlock | None = None) -> dict[str, Any]:
    """Every value of a site under a name of its own.

    Parameters
    ----------
    site : LeeBlock
    fire : FireBlock, optional
        Its fire weather.

    Returns
    -------
    dict
        Keys of `lee` in the results file; parts of the warming as ``warming_by_descent_c``, ends of ranges as
        ``wind_ms_low`` and ``wind_ms_high``, those by the inputs alone as ``wind_ms_inputs_low``; chances as
        ``chance_rain``; then those of fire weather (`fire_results.flat_fire`); last `reason`,
        None for a site that was worked out.
    """
    values = site.model_dump()
    flat = {key: value for key, value in values.items() if key not in NOT_A_VALUE}
    parts = values["warming_parts_c"] or {}
    flat |= {f"warming_by_{part}_c": parts.get(part) for part in PARTS}
    flat |= {f"chance_{name}": values["chance"].get(name) for name in CHANCES}
    spans = dict.fromkeys(RANGES, (None, None)) | {_named(key): ends for key, ends in values["range"].items()}
    spans["source_level_m"] = (None, None)  # that of the median between members, and one name cannot have two ranges
    if values["source_level_range_m"] is not None:
        spans["source_level_m"] = values["source_level_range_m"]
    spans |= {f"{_named(key)}_inputs": ends for key, ends in values["input_range"].items()}
    for key, (low, high) in spans.items():
        flat[f"{key}_low"], flat[f"{key}_high"] = low, high
    return {**flat, **({} if fire is None else flat_fire(fire)), "reason": None}


def _named(key: str) -> str:
    """Column of a key of a range: parts of the warming are called as their own columns are."""
    group, _, part = key.partition(".")
    return f"warming_by_{part}_c" if group == "warming_parts_c" else key


def flat_sites(results: Results) -> list[dict[str, Any]]:
    """Every site that was worked out, with its fire weather."""
    fire = {block.number: block for block in results.fire}
    return [flat_site(site, fire.get(site.number)) for site in results.lee]


def flat_failed(site: FailedSiteBlock) -> dict[str, Any]:
    """A site that could not be worked out: where it is, and why."""
    return {"number": site.number, "name": site.name, "reason": site.reason}


def site_rows(results: Results) -> tuple[list[str], list[list[object]]]:
    """Header and one row a site for the CSV table, unrounded, in the order of the case.

    Parameters
    ----------
    results : Results

    Returns
    -------
    header : list of str
    rows : list of lists
        Failed sites have their number, name and reason, and nothing else.
    """
    rows = flat_sites(results)
    header = list(dict.fromkeys(key for row in rows for key in row if key != "reason"))
    header.append("reason")
    rows = sorted([*rows, *(flat_failed(site) for site in results.failed_sites)], key=lambda row: int(row["number"]))
    return header, [[row.get(key) for key in header] for row in rows]
