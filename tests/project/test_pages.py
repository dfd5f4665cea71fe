"""The pages in docs/ name every key, with the ranges and defaults of the models."""

import re
from pathlib import Path

import pytest

from orolift.sources import compare_blocks, gauges_csv, observed, ridge_csv, sounding_csv
from orolift.sources.case_model import (
    Case,
    FlowTable,
    HeatTable,
    Incoming,
    LeeTable,
    Place,
    SiteTable,
    SpreadTable,
    Station,
    Terrain,
    TransectTable,
)
from orolift.sources.fire_model import Fire
from orolift.sources.fire_results import ConditionBlock, FireBlock, MoverBlock, NightBlock, RuleBlock
from orolift.sources.incoming_model import LadderRung, MetarTable, ModelAt, SoundingAt
from orolift.sources.rain_model import Catchments, GaugesTable, Rain
from orolift.sources.rain_results import (
    BandBlock,
    CatchmentBlock,
    EstimatesBlock,
    FitBlock,
    FittedBlock,
    GaugeBlock,
    GaugesBlock,
    MapBlock,
    OnLineBlock,
    ParametersBlock,
)
from orolift.sources.results import (
    CaseBlock,
    FailedSiteBlock,
    FlowBlock,
    IncomingBlock,
    LeeBlock,
    Profile,
    Program,
    RainBlock,
    Results,
    TerrainBlock,
    WarmingParts,
)
from orolift.sources.rules_file import QUANTITY_KEYS, RuleCondition, RulesFile, RuleTable
from orolift.sources.schemas import case_schema, compare_schema, results_schema, rules_schema
from orolift.sources.spread_results import InfluenceBlock, InfluencesBlock, SpreadBlock
from orolift.sources.units import alternatives
from orolift.sources.wind_results import LeeWindBlock, WindEstimateBlock, WindstormConditionBlock

DOCS = Path(__file__).resolve().parents[2] / "docs"
CASE_TABLES = {
    "Top level": Case,
    "[terrain]": Terrain,
    "[transect]": TransectTable,
    "A place": Place,
    "[incoming]": Incoming,
    "station": Station,
    "stations": LadderRung,
    "metar": MetarTable,
    "sounding_at": SoundingAt,
    "model_at": ModelAt,
    "[flow]": FlowTable,
    "[rain]": Rain,
    "[catchments]": Catchments,
    "[gauges]": GaugesTable,
    "[fire]": Fire,
    "[lee]": LeeTable,
    "[heat]": HeatTable,
    "[spread]": SpreadTable,
    "[[site]]": SiteTable,
}
RESULTS_TABLES = {
    "Top level": Results,
    "orolift": Program,
    "case": CaseBlock,
    "incoming": IncomingBlock,
    "terrain": TerrainBlock,
    "flow": FlowBlock,
    "rain": RainBlock,
    "map": MapBlock,
    "parameters": ParametersBlock,
    "on_line": OnLineBlock,
    "estimates": EstimatesBlock,
    "bands": BandBlock,
    "lee_wind": LeeWindBlock,
    "methods of the lee wind": WindEstimateBlock,
    "conditions of a windstorm": WindstormConditionBlock,
    "lee": LeeBlock,
    "warming_parts_c": WarmingParts,
    "profile": Profile,
    "failed_sites": FailedSiteBlock,
    "spread": SpreadBlock,
    "influences": InfluencesBlock,
    "influence": InfluenceBlock,
    "fire": FireBlock,
    "night": NightBlock,
    "rules": RuleBlock,
    "conditions": ConditionBlock,
    "movers": MoverBlock,
    "catchments": CatchmentBlock,
    "gauges": GaugesBlock,
    "places": GaugeBlock,
    "fit": FitBlock,
    "fitted value": FittedBlock,
}
RULE_TABLES = {"Rule file": RulesFile, "rule": RuleTable, "condition": RuleCondition}
COMPARE_TABLES = {
    "Top level": compare_blocks.CompareResults,
    "scores": compare_blocks.QuantityBlock,
    "score": compare_blocks.ScoreBlock,
    "simple answer": compare_blocks.ReferenceBlock,
    "events": compare_blocks.EventBlock,
    "table": compare_blocks.ContingencyBlock,
    "rule": compare_blocks.RuleBlock,
    "onset": compare_blocks.OnsetBlock,
    "spell": compare_blocks.SpellBlock,
    "explanation": compare_blocks.ExplanationBlock,
    "valleys": compare_blocks.ValleyBlock,
    "way": compare_blocks.WayBlock,
    "upwind": compare_blocks.UpwindErrorBlock,
    "profile": compare_blocks.ProfileBlock,
    "layers": compare_blocks.LayerBlock,
    "values": compare_blocks.ValueBlock,
}
CSV_TABLES = {
    "Ridge CSV": ridge_csv.COLUMNS,
    "Sounding CSV": sounding_csv.COLUMNS,
    "Gauges CSV": gauges_csv.COLUMNS,
    "Observed CSV": observed.COLUMNS,
}


def rows_under(page, heading):
    """Rows of the first table under a heading, by key; backticks and bars taken off."""
    text = (DOCS / page).read_text()
    found = re.search(rf"^#+ `?{re.escape(heading)}`?$(.*?)(?=^#+ |\Z)", text, re.MULTILINE | re.DOTALL)
    assert found, f"docs/{page} has no heading '{heading}'"
    lines = [line for line in found.group(1).splitlines() if line.startswith("|")]
    cells = [[cell.strip() for cell in line.strip("|").split("|")] for line in lines]
    return {row[0].strip("`"): dict(zip(cells[0], row, strict=True)) for row in cells[2:]}


def listed(cell):
    """Keys in a cell."""
    return re.findall(r"`([^`]+)`", cell)


def range_words(field):
    """Range of a JSON Schema field as the pages write it."""
    kind = field.get("type")
    if "enum" in field:
        return " or ".join(f'`"{choice}"`' for choice in field["enum"])
    if kind == "number" and "maximum" in field:
        low = f"above {field['exclusiveMinimum']:g}" if "exclusiveMinimum" in field else f"{field['minimum']:g}"
        return f"{low} to {field['maximum']:g}"
    if kind == "integer":
        return f"whole number, {field['minimum']} to {field['maximum']}"
    if kind == "string" and "maxLength" in field:
        return f"text, up to {field['maxLength']} letters"
    if kind == "array":
        return "list of tables" if "$ref" in field["items"] else "list of pairs"
    known = {"number": "any number", "string": "date and time with zone", "boolean": "true or false"}
    return known.get(kind, "table")


@pytest.mark.parametrize(("heading", "model"), CASE_TABLES.items(), ids=CASE_TABLES)
def test_case_page_lists_the_keys_of_the_table(heading, model):
    """Every key of the model has a row, and every row is a key."""
    assert set(rows_under("case.md", heading)) == set(model.model_fields)


@pytest.mark.parametrize(("heading", "model"), CASE_TABLES.items(), ids=CASE_TABLES)
def test_case_page_has_units_ranges_and_defaults(heading, model):
    """Other spellings, range and default stand as in the model."""
    schema = case_schema()
    fields = (schema if model is Case else schema["$defs"][model.__name__])["properties"]
    for key, row in rows_under("case.md", heading).items():
        info, field = model.model_fields[key], fields[key]
        also = [name for name in alternatives(key) if name in fields]
        assert listed(row["also"]) == also, key
        assert row["range"] == range_words(field), key
        assert (row["default"] == "needed") == info.is_required(), key
        if isinstance(info.default, bool):
            assert row["default"] == str(info.default).lower(), key
        elif isinstance(info.default, str):
            assert row["default"] == f'`"{info.default}"`', key
        elif isinstance(info.default, float):
            assert row["default"] == f"{info.default:g}", key
        assert row["meaning"], key


@pytest.mark.parametrize(("heading", "model"), RULE_TABLES.items(), ids=RULE_TABLES)
def test_case_page_lists_the_keys_of_rule_files(heading, model):
    """Names, other spellings, and which are needed; every quantity is named."""
    schema = rules_schema()
    fields = (schema if model is RulesFile else schema["$defs"][model.__name__])["properties"]
    rows = rows_under("case.md", heading)
    assert list(rows) == list(model.model_fields)
    for key, row in rows.items():
        assert listed(row["also"]) == [name for name in alternatives(key) if name in fields], key
        assert (row["default"] == "needed") == model.model_fields[key].is_required(), key
        field = fields[key]
        if "maximum" in field:
            assert row["range"] == f"{field['minimum']:g} to {field['maximum']:g}", key
    text = (DOCS / "case.md").read_text()
    assert all(f"`{key}`" in text for key in QUANTITY_KEYS)


@pytest.mark.parametrize(("heading", "columns"), CSV_TABLES.items(), ids=CSV_TABLES)
def test_case_page_lists_the_columns_of_csv_files(heading, columns):
    """Names, other spellings and ranges of the columns."""
    rows = rows_under("case.md", heading)
    assert list(rows) == [column.name for column in columns]
    for column in columns:
        assert listed(rows[column.name]["also"]) == alternatives(column.name)
        assert rows[column.name]["range"] == ("text" if column.text else f"{column.low:g} to {column.high:g}")


def test_case_page_forgets_no_table():
    """A new table of the models needs its own heading."""
    assert {model.__name__ for model in CASE_TABLES.values()} == {"Case", *case_schema()["$defs"]}


@pytest.mark.parametrize(("heading", "model"), RESULTS_TABLES.items(), ids=RESULTS_TABLES)
def test_results_page_lists_the_keys_of_the_block(heading, model):
    """Every key of the model has a row in the order of the file, and every row is a key."""
    assert list(rows_under("results.md", heading)) == list(model.model_fields)


@pytest.mark.parametrize(("heading", "model"), RESULTS_TABLES.items(), ids=RESULTS_TABLES)
def test_results_page_says_what_may_be_null(heading, model):
    """The column 'null' is filled exactly where null is allowed."""
    schema = results_schema()
    fields = (schema if model is Results else schema["$defs"][model.__name__])["properties"]
    for key, row in rows_under("results.md", heading).items():
        assert bool(row["null"]) == ({"type": "null"} in fields[key].get("anyOf", [])), key
        assert row["meaning"], key


def test_results_page_forgets_no_block():
    """A new block of the models needs its own heading."""
    assert {model.__name__ for model in RESULTS_TABLES.values()} == {"Results", *results_schema()["$defs"]}


@pytest.mark.parametrize(("heading", "model"), COMPARE_TABLES.items(), ids=COMPARE_TABLES)
def test_compare_page_lists_the_keys_of_the_block(heading, model):
    """Every key of a comparison has a row, in the order of the file, and says where it may be null."""
    schema = compare_schema()
    fields = (schema if heading == "Top level" else schema["$defs"][model.__name__])["properties"]
    rows = rows_under("compare.md", heading)
    assert list(rows) == list(model.model_fields)
    for key, row in rows.items():
        assert bool(row["null"]) == ({"type": "null"} in fields[key].get("anyOf", [])), key
        assert row["meaning"], key


def test_compare_page_forgets_no_block():
    """A new block needs its own heading."""
    named = {model.__name__ for model in COMPARE_TABLES.values()}
    assert named == {"CompareResults", *compare_schema()["$defs"]} - {"Program"}
