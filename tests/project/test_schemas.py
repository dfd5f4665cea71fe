"""The published schemas are those of the models, and say what the reader says."""

import json
import tomllib
from importlib import resources
from pathlib import Path

import jsonschema
import pytest

from orolift.crossing.crossing import cross
from orolift.errors import CaseError, MissingFileError
from orolift.sources.case import case_from_text
from orolift.sources.inputs import read_inputs
from orolift.sources.results import results_of
from orolift.sources.rules_file import rules_from_text
from orolift.sources.schemas import UNIT_WORDS, case_schema, main, results_schema, rules_schema, schema_texts
from orolift.sources.units import UNITS, alternatives, converted, suffix_of

TOP = Path(__file__).resolve().parents[2]
RENEW = "python -m orolift.sources.schemas docs"
STARTER = Path(str(resources.files("orolift.cli") / "starter_case" / "case.toml"))
RULES = TOP / "demo_terrain" / "varn_rules.toml"
CASES = [STARTER, *(file for file in sorted((TOP / "demo_terrain").glob("*.toml")) if file != RULES)]
TABLES = """
[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
crest_wind_kt = 38
lapse_rate_c_per_km = 6.0
[[site]]
name = "Lower Tarn"
distance_km = 52
elevation_m = 310
"""


def as_json(text):
    """Case text as JSON carries it: a date and time becomes text."""
    return json.loads(json.dumps(tomllib.loads(text), default=lambda value: value.isoformat()))


def faults(schema, data):
    """What a schema finds wrong."""
    return [error.message for error in jsonschema.Draft202012Validator(schema).iter_errors(data)]


def reads(text):
    """Whether the reader takes a case."""
    try:
        case_from_text(text, "case.toml")
    except CaseError:
        return False
    return True


@pytest.mark.parametrize("name", schema_texts())
def test_published_schema_is_that_of_the_models(name):
    """docs/ holds what the models give today."""
    file = TOP / "docs" / name
    same = file.is_file() and file.read_text() == schema_texts()[name]
    assert same, f"docs/{name} is stale: the models have changed. Renew it with: {RENEW}"


@pytest.mark.parametrize("schema", [case_schema(), results_schema(), rules_schema()], ids=["case", "results", "rules"])
def test_is_a_json_schema(schema):
    """Both keep to the dialect they name."""
    jsonschema.Draft202012Validator.check_schema(schema)
    assert schema["$schema"] == jsonschema.Draft202012Validator.META_SCHEMA["$id"]


@pytest.mark.parametrize("file", CASES, ids=lambda file: file.name)
def test_shipped_cases_are_valid(file):
    """The starter and every demo case."""
    assert faults(case_schema(), as_json(file.read_text())) == []


def test_shipped_rules_are_valid():
    """By schema and reader; a misspelt key by neither."""
    text = RULES.read_text()
    assert faults(rules_schema(), as_json(text)) == []
    assert rules_from_text(text, "rules.toml").rules
    wrong = text.replace("height_m", "hight_m")
    assert faults(rules_schema(), as_json(wrong)) != []
    with pytest.raises(CaseError, match="Did you mean height_m"):
        rules_from_text(wrong, "rules.toml")


def test_a_results_file_is_valid():
    """What the starter case gives, as it is written; and each way of spoiling it is seen."""
    inputs = read_inputs(STARTER)
    results = results_of(cross(inputs.transect, inputs.incoming, inputs.sites), inputs.case)
    data = json.loads(results.model_dump_json())
    assert faults(results_schema(), data) == []
    assert faults(results_schema(), {**data, "schema_version": "0"})
    assert faults(results_schema(), {**data, "wind": 3.0})
    missing = {**data, "flow": {key: value for key, value in data["flow"].items() if key != "regime"}}
    assert faults(results_schema(), missing) == ["'regime' is a required property"]
    words = {**data, "terrain": {**data["terrain"], "crest_m": "high"}}
    assert faults(results_schema(), words) == ["'high' is not of type 'number'"]


def test_the_tables_of_these_tests_are_valid():
    """What the next tests change is right to begin with."""
    assert reads(TABLES)
    assert faults(case_schema(), as_json(TABLES)) == []


OTHER_UNITS = [
    (line_key, other, value)
    for line_key, value in [
        ("temperature_c", 14.5),
        ("dew_point_c", 11.0),
        ("pressure_hpa", 1004.0),
        ("wind_kt", 25),
        ("crest_wind_kt", 38),
        ("lapse_rate_c_per_km", 6.0),
        ("distance_km", 52),
    ]
    for other in alternatives(line_key)
]


@pytest.mark.parametrize(("key", "other", "value"), OTHER_UNITS, ids=str)
def test_other_units_are_valid_one_at_a_time(key, other, value):
    """A key in another unit is taken by reader and schema; two keys for one quantity by neither."""
    number = converted(float(value), suffix_of(key)[1], suffix_of(other)[1])
    old = f"\n{key} = {value}" if f"\n{key} = {value}" in TABLES else f" {key} = {value}"
    separator = old[0]
    one = TABLES.replace(old, f"{separator}{other} = {number!r}")
    both = TABLES.replace(old, f"{old}{',' if separator == ' ' else ''}{separator}{other} = {number!r}")
    assert one != TABLES
    assert reads(one)
    assert faults(case_schema(), as_json(one)) == []
    assert not reads(both)
    assert faults(case_schema(), as_json(both)) != []


WRONG = [
    ("temperature_c = 14.5", "temprature_c = 14.5"),
    ("temperature_c = 14.5, ", ""),
    ("temperature_c = 14.5", "temperature_c = '14.5'"),
    ("temperature_c = 14.5", "temperature_c = true"),
    ("temperature_c = 14.5", "temperature_c = 145"),
    ("temperature_c = 14.5", "temperature_f = 141"),
    ("temperature_c = 14.5", "temperature_f = -113"),
    ("wind_kt = 25", "wind_kmh = 464"),
    ("pressure_hpa = 1004.0", "pressure_inhg = 8.8"),
    ("dew_point_c = 11.0", "relative_humidity_percent = 0"),
    ("wind_from_deg = 235", "wind_from_deg = 361"),
    ("ridge_km_m = [[0, 40], [25, 1850], [60, 210]]", "ridge_km_m = [['a', 40], [25, 1850], [60, 210]]"),
    ("ridge_km_m = [[0, 40], [25, 1850], [60, 210]]", "elevation_file = 'varn.tif'\nelevation_unit = 'yd'"),
    ("[[site]]", "[rain]\nremoved_share = 1.4\n[[site]]"),
]


@pytest.mark.parametrize(("old", "new"), WRONG, ids=[new.replace("\n", " ")[:40] or "missing" for _, new in WRONG])
def test_schema_refuses_what_the_reader_refuses(old, new):
    """Names, types, ranges and units are the same in both."""
    text = TABLES.replace(old, new)
    assert text != TABLES
    assert not reads(text)
    assert faults(case_schema(), as_json(text)) != []


def test_every_unit_has_words():
    """A new unit suffix needs words for the schema."""
    assert set(UNIT_WORDS) == set(UNITS)


def test_command_writes_both_files(tmp_path, capsys):
    """The one-liner that renews the schemas."""
    main([str(tmp_path)])
    assert {file.name: file.read_text() for file in tmp_path.iterdir()} == schema_texts()
    assert "Written: " in capsys.readouterr().out


def test_command_needs_a_folder(tmp_path):
    """No folder, or one that is not there, is said in words."""
    with pytest.raises(CaseError, match="name the folder to write the schemas into"):
        main([])
    with pytest.raises(MissingFileError, match="is not a folder"):
        main([str(tmp_path / "nowhere")])
