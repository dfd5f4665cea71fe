"""Soundings in BUFR: two real files, and what is said when the library or the sounding is missing."""

import sys
from datetime import UTC, datetime
from pathlib import Path

import numpy as np
import pytest

from orolift.errors import DataFileError, MissingExtraError, MissingFileError
from orolift.sources.bufr import is_bufr, read_bufr_sounding
from orolift.sources.sounding import sounding_from_levels
from orolift.sources.sounding_file import read_sounding_levels

DATA = Path(__file__).parents[1] / "data"  # origin and licence in the READMEs beside the files
SMALL, HIRES = DATA / "bufr" / "temp_small.bufr", DATA / "bufr" / "temp_hires.bufr"


def direct(path):
    """Messages as the decoder of the library's maker gives them, without pdbufr: station, pressure, temperature, ..."""
    import eccodes

    found = []
    with path.open("rb") as stream:
        while (message := eccodes.codes_bufr_new_from_file(stream)) is not None:
            eccodes.codes_set(message, "unpack", 1)
            block = eccodes.codes_get(message, "blockNumber")
            number = eccodes.codes_get(message, "stationNumber")
            arrays = [
                eccodes.codes_get_array(message, key)
                for key in ("pressure", "airTemperature", "windSpeed", "nonCoordinateGeopotential")
            ]
            eccodes.codes_release(message)
            found.append((f"{block:02d}{number:03d}", *(np.where(one < -1e99, np.nan, one) for one in arrays)))
    return found


def test_levels_are_those_of_the_decoder():
    """Every station of the small file: pressures, temperatures and winds as decoded without pdbufr."""
    messages = direct(SMALL)
    assert len(messages) > 1
    for station, pressure, temperature, speed, geopotential in messages:
        levels = read_bufr_sounding(SMALL, station=station)
        assert levels.station == station
        np.testing.assert_allclose(levels.pressure, pressure)
        np.testing.assert_allclose(levels.temperature, temperature)
        np.testing.assert_allclose(levels.wind_speed, speed)
        np.testing.assert_allclose(levels.height, geopotential / 9.80665)  # standard gravity, 3rd CGPM


def test_small_file_becomes_columns():
    """Every station reads, starts at its ground and knows where and when it was."""
    for station, *_ in direct(SMALL):
        sounding = sounding_from_levels(read_bufr_sounding(SMALL, station=station))
        assert sounding.observed == datetime(2008, 12, 8, 12, tzinfo=UTC)
        assert -90.01 < sounding.latitude < 90.01  # one is the South Pole
        assert sounding.ground is not None
        assert np.all(np.diff(sounding.pressure) < 0)
        assert np.isfinite(sounding.eastward_wind).all()


def test_high_resolution_file():
    """A level each two seconds; the ground is the flagged surface level, 1000 hPa below it is left out."""
    levels = read_sounding_levels(HIRES, near=None)
    sounding = sounding_from_levels(levels)
    assert sounding.pressure.size > 400
    assert sounding.pressure[0] == pytest.approx(94051.0)
    assert sounding.ground == pytest.approx(760.0)
    assert sounding.pressure[-1] == pytest.approx(50000.0, rel=0.02)
    assert sounding.observed.date().isoformat() == "2025-02-23"
    assert not any(finding.severity == "wrong" for finding in sounding.findings)


def test_several_stations_need_a_name():
    """The message lists what there is."""
    with pytest.raises(DataFileError, match=r"holds soundings of \d+ stations \(.*71907.*Name one"):
        read_bufr_sounding(SMALL)
    with pytest.raises(DataFileError, match="station 11111 is not in it"):
        read_bufr_sounding(SMALL, station="11111")


def test_without_the_library_the_extra_is_named(monkeypatch):
    """The base installation has no pdbufr."""
    monkeypatch.setitem(sys.modules, "pdbufr", None)
    with pytest.raises(
        MissingExtraError, match=r"needs pdbufr. Install the extra 'bufr': pip install 'orolift\[bufr\]'"
    ):
        read_bufr_sounding(SMALL)


@pytest.mark.parametrize("keep", [4, 60, 500, 2000])
def test_cut_files_are_refused(tmp_path, keep):
    """A download that broke off."""
    cut = tmp_path / "cut.bufr"
    cut.write_bytes(HIRES.read_bytes()[:keep])
    assert is_bufr(cut.read_bytes())
    with pytest.raises(DataFileError, match=r"cut.bufr (cannot be read as BUFR|holds no level)"):
        read_bufr_sounding(cut)


@pytest.mark.parametrize("seed", range(6))
def test_spoilt_files_never_crash(tmp_path, seed):
    """Random bytes inside: read, or refused with the file's name."""
    raw = bytearray(HIRES.read_bytes())
    generator = np.random.default_rng(seed)
    for place in generator.integers(8, len(raw), 40):
        raw[place] = generator.integers(0, 256)
    spoilt = tmp_path / "spoilt.bufr"
    spoilt.write_bytes(bytes(raw))
    try:
        sounding_from_levels(read_bufr_sounding(spoilt))
    except DataFileError as error:
        assert "spoilt.bufr" in str(error)


def test_missing_and_huge_files(tmp_path):
    """Nothing there; more than two megabytes."""
    with pytest.raises(MissingFileError, match="cannot be found"):
        read_bufr_sounding(tmp_path / "no.bufr")
    huge = tmp_path / "huge.bufr"
    huge.write_bytes(b"BUFR" + bytes(2**21))
    with pytest.raises(DataFileError, match="larger than 2 MB"):
        read_bufr_sounding(huge)
