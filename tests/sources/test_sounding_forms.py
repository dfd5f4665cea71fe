"""Sounding CSV as people save it: commas, encodings, delimiters, gaps, winds of their own, endless files."""

import time
import tracemalloc
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from orolift.errors import DataFileError, OroliftError
from orolift.sources.sounding_csv import read_sounding, sounding_from_text
from orolift.sources.sounding_file import read_sounding_levels
from orolift.sources.table import MOST_ROWS, Column, number_table

HEADER = "pressure_hpa,height_m,temperature_c,dew_point_c,wind_from_deg,wind_ms\n"
ROWS = [
    "1000,100,15,10,240,8",
    "900,990,9.5,6,245,12",
    "800,1950,3,0,250,15",
    "700,3010,-4,-9,255,20",
    "500,5570,-19,-30,260,28",
]
GOOD = HEADER + "\n".join(ROWS) + "\n"


def same(one, other):
    """Two soundings with the same numbers."""
    for key in ("pressure", "temperature", "dew_point", "eastward_wind", "northward_wind"):
        np.testing.assert_allclose(getattr(one, key), getattr(other, key), rtol=1e-12)


def test_decimal_commas_are_read_with_a_note():
    """Semicolons and decimal commas, as spreadsheets of half of Europe save."""
    text = GOOD.replace(",", ";").replace(".", ",")
    sounding = sounding_from_text(text, "s.csv")
    same(sounding, sounding_from_text(GOOD, "s.csv"))
    said = [finding for finding in sounding.findings if finding.what == "unusual cells"]
    assert "decimal commas are read as decimal points (first on line 3)" in said[0].value


def test_decimal_commas_in_quotes():
    """A comma table whose numbers with commas are quoted."""
    same(sounding_from_text(GOOD.replace("9.5", '"9,5"'), "s.csv"), sounding_from_text(GOOD, "s.csv"))


def test_commas_before_three_figures_may_be_thousands():
    """'1,950' is either; refused, unless another cell of the column shows what its commas are."""
    text = GOOD.replace(",", ";").replace("1950", "1,950")
    with pytest.raises(DataFileError, match=r"line 4: the commas of height_m may separate decimals or thousands"):
        sounding_from_text(text, "s.csv")
    clear = text.replace("1,950", "1950,000").replace(";990;", ";990,5;")
    assert sounding_from_text(clear, "s.csv").height is not None


@pytest.mark.parametrize(
    ("encoding", "mark"),
    [
        ("utf-8", b""),
        ("utf-8-sig", b""),
        ("utf-16", b""),
        ("utf-16-le", b""),
        ("utf-16-be", b""),
        ("utf-16-be", b"\xfe\xff"),
    ],
)
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_encodings_and_line_ends(tmp_path, encoding, mark, end):
    """With and without a byte-order mark."""
    file = tmp_path / "s.csv"
    file.write_bytes(mark + GOOD.replace("\n", end).encode(encoding))
    same(read_sounding(file), sounding_from_text(GOOD, "s.csv"))


def test_utf_32_and_binary_are_refused(tmp_path):
    """Neither is text that can be read."""
    file = tmp_path / "s.csv"
    for raw in (
        GOOD.encode("utf-32"),
        bytes(range(256)) * 4,
        b"\x89HDF\r\n\x1a\n" + bytes(600),
        b"CDF\x01" + bytes(80),
    ):
        file.write_bytes(raw)
        with pytest.raises(DataFileError, match=r"binary file|UTF-32|NetCDF. Give it as model_file|starts like UTF-16"):
            read_sounding_levels(file)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (GOOD.replace(",", " "), r"line 1: 'pressure_hpa height_m.*' is one column. Separate columns by commas"),
        (GOOD.replace(",", "|"), r"is one column. Separate columns by commas"),
        (HEADER + "\n".join(ROWS).replace(",", ";"), r"line 2: 1 cells.*header is separated by commas, this line by semicolons"),
        (HEADER, "has a header and no rows"),
        (HEADER + ",,,,,\n" * 5, "column temperature is empty"),
        (HEADER + "\n".join(",,5,3,240,8" for _ in range(5)), "no level has a pressure"),
        (GOOD.replace("15,10", "1_5,10"), "temperature '1_5' is not a number"),
        (GOOD.replace("15,10", "inf,10"), "temperature_c inf is outside"),
        (GOOD.replace("15,10", "１５,10"), "temperature '１５' is not a number"),  # full-width figures
        (GOOD.replace("15,10", "1e999,10"), "temperature_c inf is outside"),
        (GOOD.replace("15,10", "59,44").replace("9.5,6", "49,43").replace("3,0", "37.4,32").replace("-4,-9", "24.8,15.8")
         .replace("-19,-30", "-2.2,-22"), "Fahrenheit"),
        (GOOD.replace("990", "3248").replace("1950", "6398").replace("3010", "9875").replace("5570", "18274")
         .replace(",100,", ",328,"), "The heights seem to be in feet: call the column height_ft"),
    ],
)  # fmt: skip
def test_bad_tables_are_refused_with_the_cause(text, message):
    """Wrong delimiter, header only, nothing but gaps, odd numbers, other units."""
    with pytest.raises(DataFileError, match=message):
        sounding_from_text(text, "s.csv")


def test_codes_for_missing_values():
    """Solidi, words and -9999 anywhere; 9999 where no such value can be, with a note."""
    text = GOOD.replace("250,15", "9999,999.9").replace("255,20", "///,-9999.0")
    sounding = sounding_from_text(text, "s.csv")
    x = -np.log(sounding.pressure)
    expected = np.interp(x[2:4], x[[1, 4]], sounding.eastward_wind[[1, 4]])
    np.testing.assert_allclose(sounding.eastward_wind[2:4], expected)
    assert any("read as no value" in finding.value for finding in sounding.findings)


def test_winds_on_levels_of_their_own():
    """Rows with height and wind only, anywhere in the file: they become levels, with pressure, temperature and humidity between."""
    text = GOOD + ",550,,,300,22\n,1500,,,180,5\n"
    sounding = sounding_from_text(text, "s.csv")
    assert sounding.pressure.size == 7
    at = int(np.argmin(np.abs(np.hypot(sounding.eastward_wind, sounding.northward_wind) - 22.0)))
    assert at == 1
    assert 900e2 < sounding.pressure[at] < 1000e2
    assert 282.65 < sounding.temperature[at] < 288.15
    assert any("without a temperature of their own" in finding.what for finding in sounding.findings)
    # height runs linearly in ln p between 100 m at 1000 hPa and 990 m at 900 hPa
    assert np.log(1000e2 / sounding.pressure[at]) == pytest.approx(np.log(1000 / 900) * 450 / 890)


def test_missing_pressure_comes_from_height():
    """A level with height but no pressure between two that have both; one with neither is left out, with a finding."""
    text = GOOD.replace("800,1950", ",1950").replace("900,990", ",")
    sounding = sounding_from_text(text, "s.csv")
    assert sounding.pressure.size == 4
    assert sounding.pressure[1] == pytest.approx(80000.0, rel=0.01)
    assert any(finding.what.startswith("no pressure, and no height") for finding in sounding.findings)


def test_heights_are_worked_out_when_missing():
    """Only one height, of any level: the ground follows hydrostatically; none at all: the key that gives it is used."""
    whole = sounding_from_text(GOOD, "s.csv")
    cells = [row.split(",") for row in ROWS]
    for cell in cells[:2] + cells[3:]:
        cell[1] = ""
    one = sounding_from_text(HEADER + "\n".join(",".join(row) for row in cells), "s.csv")
    assert one.ground == pytest.approx(100.0, abs=15.0)  # the invented heights are hydrostatic to that
    assert one.height is None
    cells[2][1] = ""
    none = HEADER + "\n".join(",".join(row) for row in cells)
    assert sounding_from_text(none, "s.csv").ground is None
    assert sounding_from_text(none, "s.csv", elevation=250.0).ground == 250.0
    assert whole.ground == 100.0


def test_humidity_gaps():
    """Between levels the depression is interpolated; above the last it dries to 10 % at 200 hPa; below the first it is kept."""
    rows = [*ROWS[:2], "800,1950,3,,250,15", *ROWS[3:], "300,9160,-45,,260,40", "150,13600,-57,,260,30"]
    sounding = sounding_from_text(HEADER + "\n".join(rows), "s.csv")
    share = np.log(900 / 800) / np.log(900 / 700)
    assert sounding.temperature[2] - sounding.dew_point[2] == pytest.approx(3.5 + share * 1.5)
    from orolift.air.humidity import relative_humidity_from_dew_point

    humidity = relative_humidity_from_dew_point(sounding.temperature[4:], sounding.dew_point[4:])
    assert humidity[2] == pytest.approx(0.1)
    assert humidity[1] == pytest.approx(humidity[0] + (0.1 - humidity[0]) * 2 / 3)
    assert any(finding.what == "no humidity aloft" for finding in sounding.findings)
    low = sounding_from_text(HEADER + "\n".join([ROWS[0].replace(",10,", ",,"), *ROWS[1:]]), "s.csv")
    assert low.temperature[0] - low.dew_point[0] == pytest.approx(3.5)
    assert [finding.severity for finding in low.findings if "lowest levels" in finding.what] == ["doubtful"]


def test_a_million_lines_end_soon(tmp_path):
    """Refused after the hundred thousandth row, in seconds, with the line."""
    file = tmp_path / "s.csv"
    with file.open("w") as stream:
        stream.write(HEADER)
        stream.writelines(f"{1000 - i * 9e-4:.3f},,1,0,1,1\n" for i in range(1_000_000))
    start = time.perf_counter()
    with pytest.raises(DataFileError, match=f"line {MOST_ROWS + 2}: more than {MOST_ROWS} rows"):
        read_sounding(file)
    assert time.perf_counter() - start < 60.0  # takes one or two


def test_memory_stays_within_ten_times_the_file(tmp_path):
    """Of a long high-resolution file, by the interpreter's own count of what it allocates."""
    file = tmp_path / "s.csv"
    count = 60_000
    small = tmp_path / "small.csv"
    small.write_text(GOOD)
    pressure = np.geomspace(1000, 100, count)
    with file.open("w") as stream:
        stream.write(HEADER)
        stream.writelines(
            f"{p:.4f},,{15 + 70 * np.log(p / 1000) / 2:.2f},{-5 + 35 * np.log(p / 1000):.2f},240,8.0\n"
            for p in pressure
        )
    read_sounding_levels(small)  # imports are not counted
    tracemalloc.start()
    levels = read_sounding_levels(file)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert levels.pressure.size == count
    assert peak <= 10 * file.stat().st_size


def test_rows_may_be_as_long_as_they_like():
    """One line of a million cells is one wrong row, not a wait."""
    with pytest.raises(DataFileError, match="line 2: 1000001 cells, but the header has 6"):
        sounding_from_text(HEADER + "1," * 1_000_000, "s.csv")


CELLS = st.one_of(
    st.sampled_from(["", "-", "/", "nan", "9999", "-999", "1,5", "1.5e2", "x", '"', "1,000"]),
    st.floats(-120, 1100).map(lambda value: f"{value:.1f}"),
)


@settings(max_examples=200)
@given(st.lists(st.lists(CELLS, min_size=6, max_size=6), max_size=12), st.sampled_from([",", ";", "\t"]))
def test_tables_of_odd_cells_never_crash(rows, separator):
    """Whatever stands in the cells: a sounding with finite numbers, or a message with the file's name."""
    text = HEADER.replace(",", separator) + "\n".join(separator.join(row) for row in rows)
    try:
        sounding = sounding_from_text(text, "fuzz.csv", elevation=0.0)
    except OroliftError as error:
        assert "fuzz.csv" in str(error)
        return
    assert np.isfinite(sounding.temperature).all()
    assert np.isfinite(sounding.dew_point).all()
    assert np.isfinite(sounding.eastward_wind).all()
    assert np.all(np.diff(sounding.pressure) < 0)


@settings(max_examples=100)
@given(
    st.lists(
        st.tuples(st.floats(-1, 1), st.floats(0, 30), st.floats(0, 360), st.floats(0, 12)), min_size=6, max_size=12
    ),
    st.sampled_from([("hpa", 1.0), ("inhg", 1 / 33.86389)]),
    st.sampled_from([",", ";"]),
    st.booleans(),
)
def test_written_soundings_come_back(values, pressure_unit, separator, upside_down):
    """Round trip: any plausible column in other units, order and separators is read to the digits written."""
    unit, factor = pressure_unit
    p = np.linspace(1000, 420, len(values))
    t = 15 + 50 * np.log(p / 1000) + np.array([value[0] for value in values])
    lines = [
        separator.join([f"{a * factor:.9f}", f"{b:.6f}", f"{b - v[1]:.6f}", f"{v[2]:.6f}", f"{v[3] * 3600 / 1852:.9f}"])
        for a, b, v in zip(p, t, values, strict=True)
    ]
    head = separator.join([f"pressure_{unit}", "temperature_c", "dew_point_c", "wind_from_deg", "wind_kt"])
    text = "\n".join([head, *(lines[::-1] if upside_down else lines)])
    if separator == ";":
        text = text.replace(".", ",")
    sounding = sounding_from_text(text, "s.csv", elevation=0.0)
    np.testing.assert_allclose(sounding.pressure, p * 100, rtol=1e-7)
    np.testing.assert_allclose(sounding.temperature, t + 273.15, atol=2e-6)
    speed = np.array([value[3] for value in values])
    np.testing.assert_allclose(np.hypot(sounding.eastward_wind, sounding.northward_wind), speed, atol=1e-6)


def test_real_file_with_its_measured_winds():
    """A real sounding with the measured winds of its second file as rows of their own: every measured wind is met.

    Origin and licence: tests/data/real_crossings/README.md.
    """
    folder = Path(__file__).parents[1] / "data" / "real_crossings" / "pair_01"
    levels = (folder / "upwind.csv").read_text().splitlines()
    winds = np.genfromtxt(folder / "upwind_winds.csv", delimiter=",", skip_header=1)
    bare = [levels[0], *(",".join([*row.split(",")[:4], "", ""]) for row in levels[1:])]
    rows = [f",{z:.0f},,,{direction:.0f},{speed}" for z, direction, speed in winds]
    sounding = sounding_from_text("\n".join([*bare, *rows]), "real.csv")
    z_known = np.array([float(row.split(",")[1]) for row in levels[1:]])
    low = (winds[:, 0] > z_known[0]) & (winds[:, 0] < 5000)
    p_at = np.exp(np.interp(winds[low, 0], z_known, np.log([float(row.split(",")[0]) for row in levels[1:]]))) * 100
    nearest = np.abs(sounding.pressure[:, None] - p_at).argmin(axis=0)
    toward = np.radians(winds[low, 1]) + np.pi
    np.testing.assert_allclose(sounding.eastward_wind[nearest], winds[low, 2] * np.sin(toward), atol=1e-6)
    np.testing.assert_allclose(sounding.northward_wind[nearest], winds[low, 2] * np.cos(toward), atol=1e-6)


def test_table_notes_are_kept():
    """The table says what it read unusually, for any kind of file."""
    table = number_table(
        "height_m;wind_ms\n100;7,5\n", "tower.csv", [Column("height_m", 0, 900), Column("wind_ms", 0, 90)]
    )
    assert table.notes == ("tower.csv: decimal commas are read as decimal points (first on line 2).",)
