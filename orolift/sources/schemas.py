"""JSON Schemas of the case file, the rule file and the results file, made from their models.

Run ``python -m orolift.sources.schemas docs`` to write them into a folder.
"""

from __future__ import annotations

import json
import sys
from itertools import combinations
from pathlib import Path
from typing import TYPE_CHECKING, Any

from orolift.errors import CaseError
from orolift.sources.bearings_results import BEARINGS_VERSION, BearingsResults
from orolift.sources.case_model import Case
from orolift.sources.compare_blocks import CompareResults
from orolift.sources.compare_results import SCHEMA_VERSION as COMPARE_VERSION
from orolift.sources.files import write_all
from orolift.sources.hours_blocks import HoursResults
from orolift.sources.hours_results import HOURS_VERSION
from orolift.sources.results import SCHEMA_VERSION, Results
from orolift.sources.rules_file import RulesFile
from orolift.sources.spread_model import SpreadTable
from orolift.sources.units import alternatives, converted, suffix_of

if TYPE_CHECKING:
    from pydantic import BaseModel

DIALECT = "https://json-schema.org/draft/2020-12/schema"
CASE_FILE, RESULTS_FILE, RULES_FILE = "case.schema.json", "results.schema.json", "rules.schema.json"
COMPARE_FILE = "compare.schema.json"
HOURS_FILE, BEARINGS_FILE = "hours.schema.json", "bearings.schema.json"
LIMIT_DIGITS = 6
"""Decimals of a limit converted to another unit: finer than anybody writes, coarser than rounding of the factors."""
UNIT_WORDS = {
    "c": "degrees Celsius",
    "f": "degrees Fahrenheit",
    "m": "metres",
    "ft": "feet",
    "km": "kilometres",
    "mi": "miles",
    "ms": "metres per second",
    "kt": "knots",
    "kmh": "kilometres per hour",
    "mph": "miles per hour",
    "hpa": "hectopascals",
    "inhg": "inches of mercury",
    "deg": "degrees clockwise from north",
    "percent": "per cent",
    "g_per_kg": "grams per kilogram of dry air",
    "c_per_km": "degrees Celsius per kilometre",
    "mm": "millimetres of water",
    "in": "inches of water",
    "f_per_1000ft": "degrees Fahrenheit per 1000 feet",
    "mm_per_h": "millimetres per hour",
    "in_per_h": "inches per hour",
    "s": "seconds",
    "h": "hours",
}

Schema = dict[str, Any]


def case_schema() -> Schema:
    """JSON Schema of a case file, every key in every unit it may be given in.

    Returns
    -------
    dict
        For editors that complete and check TOML. It knows names, types,
        ranges and that a quantity is given in one unit only; which keys
        exclude or need each other only the reader knows.

    Notes
    -----
    A TOML date and time counts as the text JSON would carry.

    Examples
    --------
    >>> sorted(key for key in case_schema()["$defs"]["Station"]["properties"] if key.startswith("temperature"))
    ['temperature_c', 'temperature_f']
    """
    schema = _plain(Case.model_json_schema())
    _add_other_units(schema)
    for name, table in schema["$defs"].items():
        _add_other_units(table, difference=name == SpreadTable.__name__)
    return {"$schema": DIALECT, **schema, "title": "orolift case file"}


def rules_schema() -> Schema:
    """JSON Schema of a rule file, every limit of a wind in every unit it may be given in.

    Returns
    -------
    dict

    Examples
    --------
    >>> sorted(key for key in rules_schema()["$defs"]["RuleCondition"]["properties"] if key.startswith("height"))
    ['height_ft', 'height_m']
    """
    schema = _plain(RulesFile.model_json_schema())
    for table in schema["$defs"].values():
        _add_other_units(table)
    return {"$schema": DIALECT, **schema, "title": "orolift rule file"}


def results_schema() -> Schema:
    """JSON Schema of a results file: every key is there, null where nothing was worked out.

    Returns
    -------
    dict

    Examples
    --------
    >>> results_schema()["properties"]["schema_version"]["const"]
    '1'
    """
    return _written_schema(Results, SCHEMA_VERSION, "orolift results file")


def compare_schema() -> Schema:
    """JSON Schema of the results of a comparison, as `results_schema`.

    Returns
    -------
    dict

    Examples
    --------
    >>> "explanation" in compare_schema()["required"]
    True
    """
    return _written_schema(CompareResults, COMPARE_VERSION, "orolift comparison file")


def hours_schema() -> Schema:
    """JSON Schema of the results file of hours, as `results_schema`."""
    return _written_schema(HoursResults, HOURS_VERSION, "orolift results file of hours")


def bearings_schema() -> Schema:
    """JSON Schema of the results file of wind directions, as `results_schema`."""
    return _written_schema(BearingsResults, BEARINGS_VERSION, "orolift results file of wind directions")


def _written_schema(model: type[BaseModel], version: str, title: str) -> Schema:
    schema = _plain(model.model_json_schema(mode="serialization"), keep_null=True)
    for block in [schema, *schema["$defs"].values()]:
        block["required"] = list(block["properties"])
    schema["properties"]["schema_version"]["const"] = version
    return {"$schema": DIALECT, **schema, "title": title}


def schema_texts() -> dict[str, str]:
    """Text of each published schema by the name of its file.

    Returns
    -------
    dict of str to str
    """
    schemas = {CASE_FILE: case_schema(), RESULTS_FILE: results_schema(), RULES_FILE: rules_schema()}
    schemas[COMPARE_FILE] = compare_schema()
    schemas |= {HOURS_FILE: hours_schema(), BEARINGS_FILE: bearings_schema()}
    return {name: json.dumps(schema, indent=2, ensure_ascii=False) + "\n" for name, schema in schemas.items()}


def _plain(node: Any, *, keep_null: bool = False) -> Any:
    """The schema without generated titles and, unless kept, without null: TOML has none."""
    if isinstance(node, list):
        return [_plain(item, keep_null=keep_null) for item in node]
    if not isinstance(node, dict):
        return node
    out: Schema = {}
    for key, value in node.items():
        if key in {"properties", "$defs"}:  # names of our own: one of them is 'title'
            out[key] = {name: _plain(part, keep_null=keep_null) for name, part in value.items()}
        elif key != "title":
            out[key] = _plain(value, keep_null=keep_null)
    if keep_null or {"type": "null"} not in out.get("anyOf", []):
        return out
    choices = [choice for choice in out.pop("anyOf") if choice != {"type": "null"}]
    out.pop("default", None)
    only: Schema = choices[0] if len(choices) == 1 else {"anyOf": choices}
    return {**out, **only}


def _add_other_units(table: Schema, *, difference: bool = False) -> None:
    """Add to a table the same quantities in other units, one of which may be given."""
    rules: list[Schema] = []
    for key, field in list(table["properties"].items()):
        if suffix_of(key) is None or field.get("type") != "number":
            continue
        names = [key, *alternatives(key)]
        table["properties"] |= {name: _in_unit(field, key, name, difference=difference) for name in names}
        if len(names) == 1:
            continue
        if key in table.get("required", []):
            table["required"].remove(key)
            rules.append({"oneOf": [{"required": [name]} for name in names]})
        else:
            rules.append({"not": {"anyOf": [{"required": list(pair)} for pair in combinations(names, 2)]}})
    if rules:
        table["allOf"] = rules


def _in_unit(field: Schema, key: str, name: str, *, difference: bool = False) -> Schema:
    """A number field described and limited in the unit of `name`."""
    own, wanted = (suffix_of(key) or ("", ""))[1], (suffix_of(name) or ("", ""))[1]
    text = f"{field.get('description', '')} [{UNIT_WORDS[wanted]}]".strip()
    out = {"description": text, **{name: value for name, value in field.items() if name != "description"}}
    for limit in ("minimum", "maximum", "exclusiveMinimum", "exclusiveMaximum", "default"):
        if limit in out and own != wanted:
            out[limit] = round(converted(float(out[limit]), own, wanted, difference=difference), LIMIT_DIGITS)
    return out


def main(arguments: list[str]) -> None:
    """Write the schemas into the folder named by the one argument."""
    if len(arguments) != 1:
        raise CaseError("name the folder to write the schemas into: python -m orolift.sources.schemas docs")
    folder = Path(arguments[0])
    write_all({folder / name: text.encode() for name, text in schema_texts().items()})
    sys.stdout.write(f"Written: {', '.join(str(folder / name) for name in schema_texts())}\n")


if __name__ == "__main__":
    main(sys.argv[1:])
