"""Rule files: units, the wind they mean, and what is refused."""

import pytest

from orolift.errors import CaseError, DataFileError, MissingFileError
from orolift.fire.values import QUANTITIES
from orolift.fire.winds import WindMeant
from orolift.sources.case import case_from_text
from orolift.sources.rules_file import QUANTITY_KEYS, read_rules, rules_from_text, suffix_name

TEXT = """
region = "Tarn (invented)"
authority = "nobody"
taken = 2026-05-01
[[rule]]
name = "dry and windy"
hours = 3
[[rule.condition]]
quantity = "relative_humidity_percent"
at_most = 15
[[rule.condition]]
quantity = "wind"
at_least_mph = 25
height_ft = 20
kind = "gust"
averaging_s = 3
"""


def test_reads_into_si():
    """25 mph are 11.176 m/s, 20 feet 6.096 m (NIST SP 811), 15 % a share of 0.15."""
    found = rules_from_text(TEXT, "rules.toml")
    assert (found.region, found.authority, found.taken) == ("Tarn (invented)", "nobody", "2026-05-01")
    dry, windy = found.rules[0].conditions
    assert found.rules[0].hours == 3
    assert (dry.quantity, dry.at_most, dry.at_least) == ("relative_humidity", 0.15, None)
    assert windy.at_least == pytest.approx(11.176)
    assert windy.quantity == WindMeant(pytest.approx(6.096), "gust", 3.0)


@pytest.mark.parametrize(
    ("quantity", "limit", "name", "value"),
    [
        ("temperature_f", 86.0, "temperature", 303.15),
        ("warming_f", 9.0, "warming", 5.0),
        ("vapour_pressure_deficit_hpa", 30.0, "vapour_pressure_deficit", 3000.0),
        ("source_level_ft", 5000.0, "source_level", 1524.0),
        ("rain_mm_per_h", 3.6, "rain_rate", 1e-3),
        ("fosberg_index", 50.0, "fosberg_index", 50.0),
    ],
)
def test_quantities_in_their_units(quantity, limit, name, value):
    """Any unit of its kind; differences of temperature without the zero point."""
    text = TEXT.replace('"relative_humidity_percent"\nat_most = 15', f'"{quantity}"\nat_least = {limit}')
    condition = rules_from_text(text, "rules.toml").rules[0].conditions[0]
    assert condition.quantity == name
    assert condition.at_least == pytest.approx(value)


def test_every_quantity_can_be_named():
    """The keys of the file are the quantities of the physics."""
    assert {suffix_name(key) for key in QUANTITY_KEYS} == set(QUANTITIES)


WRONG = [
    ('region = "Tarn (invented)"', "", "region is missing"),
    ('authority = "nobody"', "", "authority is missing"),
    ("taken = 2026-05-01", 'taken = "1 May"', "a date is needed, for example 2026-05-01"),
    ("height_ft = 20\n", "", "height_m is missing: a wind condition says which wind it means"),
    ('kind = "gust"\n', "", "kind is missing"),
    ("averaging_s = 3", "", "averaging_min is missing"),
    ('height_ft = 20\nkind = "gust"\n', "", "height_m and kind are missing"),
    ("averaging_s = 3", "averaging_min = 10", "averaging: .* 1 to 10 s .*gust"),
    ('kind = "gust"', 'kind = "squall"', "not one of 'sustained' or 'gust'"),
    ("at_least_mph = 25", "at_least = 25", "the limit of a wind carries its unit"),
    ("at_least_mph = 25", "at_least_mph = -5", "outside 0 to 130"),
    ("at_least_mph = 25", "", "exactly one of at_least_ms and at_most_ms is needed, and none is given"),
    ("height_ft = 20", "height_ft = 2000", r"height_m \(given as height_ft = 2000\): 609.6 is outside 2 to 50"),
    ('"relative_humidity_percent"', '"relative_humidity"', "unknown; the nearest is 'relative_humidity_percent'"),
    ('"relative_humidity_percent"', '"wind_ms"', "unknown; the nearest is 'wind'"),
    ('"relative_humidity_percent"', '"zzz"', "unknown; known are temperature_c, "),
    ("at_most = 15", "at_most = 15\nkind = 'gust'", "kind belongs to quantity = 'wind'"),
    ("at_most = 15", "at_most = 15\nat_least = 3", "both are given: write two conditions"),
    ("at_most = 15", "at_most = nan", "not a number that can be used"),
    ("hours = 3", "hours = 0", "outside 1 to 72"),
    ("hours = 3", "hurs = 3", "Did you mean hours"),
    ('region = "Tarn (invented)"', 'region = "Tarn', "not valid TOML"),
]


@pytest.mark.parametrize(("old", "new", "message"), WRONG, ids=[new[:30] or f"no {old[:12]}" for old, new, _ in WRONG])
def test_refuses_what_it_cannot_judge_by(old, new, message):
    """Each with the file, the place, and what to do."""
    text = TEXT.replace(old, new)
    assert text != TEXT
    with pytest.raises(CaseError, match=message) as caught:
        rules_from_text(text, "rules.toml")
    assert str(caught.value).startswith("rules.toml: ")


def test_refuses_two_rules_of_one_name_and_none():
    """Names tell flags apart."""
    with pytest.raises(CaseError, match="two rules are called 'dry and windy'"):
        rules_from_text(TEXT + TEXT[TEXT.index("[[rule]]") :], "rules.toml")
    with pytest.raises(CaseError, match="holds no rules"):
        rules_from_text("", "rules.toml")
    with pytest.raises(CaseError, match=r"\[rule\] is missing"):
        rules_from_text(TEXT[: TEXT.index("[[rule]]")], "rules.toml")


def test_files_are_local_and_there(tmp_path):
    """Addresses, missing and binary files."""
    with pytest.raises(DataFileError, match=r"rules_file: .* is an address"):
        read_rules("https://rules.invalid/a.toml")
    with pytest.raises(MissingFileError, match=r"rules_file: .* cannot be found"):
        read_rules("no.toml", tmp_path)
    (tmp_path / "rules.toml").write_bytes(b"\0\1\2\3\0\0\0\7")
    with pytest.raises(DataFileError, match="is a binary file"):
        read_rules("rules.toml", tmp_path)


CASE = """
[terrain]
ridge_km_m = [[0, 40], [25, 1850], [60, 210]]
[incoming]
wind_from_deg = 235
station = { elevation_m = 40, temperature_c = 14.5, dew_point_c = 11.0, pressure_hpa = 1004.0, wind_kt = 25 }
[fire]
"""


@pytest.mark.parametrize(
    ("line", "message"),
    [
        ("previous_fine_fuel_code = 102", r"\[fire\] previous_fine_fuel_code: 102 is outside 0 to 101"),
        ("previous_fine_fuel_code = -1", "outside 0 to 101"),
        ("drought_index = 801", "drought_index: 801 is outside 0 to 800"),
        ("rules = 'a.toml'", "Did you mean rules_file"),
    ],
)
def test_case_table_has_its_ranges(line, message):
    """Keys of [fire]."""
    with pytest.raises(CaseError, match=message):
        case_from_text(CASE + line, "case.toml")
