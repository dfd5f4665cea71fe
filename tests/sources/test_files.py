"""Files: read within limits, written whole or not at all."""

import resource
import subprocess
import sys

import pytest

from orolift.errors import CaseError, DataFileError, MissingFileError
from orolift.sources.files import csv_text, existing_file, forget_read, read_text, refuse_address, write_all


@pytest.mark.parametrize(
    "address",
    ["http://a.example/x.tif", "https://a.example/x", "s3://bucket/x", "/vsicurl/http://a/x", "/vsizip/a.zip/x.tif"],
)
def test_addresses_are_refused(address):
    """Web, object-store and virtual addresses never reach a reader."""
    with pytest.raises(DataFileError, match="orolift reads local files only"):
        refuse_address(address, "elevation_file")


def test_a_missing_file_is_named(tmp_path):
    """The message names the key and the full path."""
    with pytest.raises(MissingFileError, match=r"ridge_file: .*nowhere.csv cannot be found"):
        existing_file("nowhere.csv", "ridge_file", tmp_path)


@pytest.mark.parametrize(
    ("data", "message"),
    [(b"", "is empty"), (b"ab\0cd", "is a binary file"), (b"\xff\xfeabc", "UTF-16")],
)
def test_what_is_no_text_is_refused(tmp_path, data, message):
    """Empty, binary and broken UTF-16 files each get their own words."""
    file = tmp_path / "x.csv"
    file.write_bytes(data)
    with pytest.raises(DataFileError, match=message):
        read_text(file, "ridge_file")


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "latin-1"])
def test_usual_encodings_read_the_same(tmp_path, encoding):
    """Byte-order marks and line ends vanish."""
    file = tmp_path / "x.csv"
    file.write_bytes("höhe\r\n1\r\n".encode(encoding))
    assert read_text(file, "ridge_file") == "höhe\n1\n"


def test_a_file_over_the_limit_is_refused(tmp_path):
    """Text readers have a size limit."""
    file = tmp_path / "x.csv"
    file.write_text("a" * 1001)
    assert len(read_text(file, "ridge_file", limit=1001)) == 1001
    with pytest.raises(DataFileError, match="larger than"):
        read_text(file, "ridge_file", limit=1000)


def test_all_or_nothing(tmp_path):
    """When the second of two files cannot be written, the first does not appear and an old one stays."""
    old = tmp_path / "old.html"
    old.write_text("before")
    with pytest.raises(MissingFileError, match="is not a folder"):
        write_all({old: b"after", tmp_path / "missing" / "b.json": b"{}"})
    assert old.read_text() == "before"
    assert sorted(p.name for p in tmp_path.iterdir()) == ["old.html"]


def test_a_folder_in_the_way_is_named(tmp_path):
    """A folder where a file should be is refused."""
    with pytest.raises(MissingFileError, match="is a folder; give the name of a file in it"):
        write_all({tmp_path: b"x"})


def test_a_full_disk_leaves_nothing_behind(tmp_path):
    """A write stopped half way, here by a limit on file size, leaves neither file nor part of it."""
    program = (
        "import resource, signal, sys; from pathlib import Path;"
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN);"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (1000, 1000));"
        "from orolift.sources.files import write_all; from orolift.errors import MissingFileError\n"
        "try: write_all({Path(sys.argv[1]): b'x' * 5000})\n"
        "except MissingFileError as error: print(error)"
    )
    done = subprocess.run(
        [sys.executable, "-B", "-c", program, str(tmp_path / "a.html")], capture_output=True, text=True, check=True
    )
    assert "cannot be written (file too large)" in done.stdout
    assert list(tmp_path.iterdir()) == []
    assert resource.getrlimit(resource.RLIMIT_FSIZE)[0] != 1000


def test_formulas_in_cells_stay_text():
    """Cells that a spreadsheet would run are quoted and led by an apostrophe; numbers stay numbers."""
    rows = [["=cmd()", 1], ["+1", -2.5], ["-x", 3], ["@a", None]]
    assert csv_text(["name", "v"], rows) == ('"name","v"\n"\'=cmd()",1\n"\'+1",-2.5\n"\'-x",3\n"\'@a",""\n')


def test_what_was_read_is_not_written_over(tmp_path):
    """A table asked for under the name of the observations would end them; another spelling of the path is the same."""
    file = tmp_path / "observed.csv"
    file.write_text("a,b\n")
    forget_read()
    read_text(file, "observed")
    (tmp_path / "link").symlink_to(tmp_path)
    for name in (file, tmp_path / "link" / "observed.csv"):
        with pytest.raises(CaseError, match=r"observed\.csv has been read in this run and is not written over"):
            write_all({tmp_path / "new.csv": b"x", name: b"y"})
    assert file.read_text() == "a,b\n"
    assert not (tmp_path / "new.csv").exists()
    forget_read()
    write_all({file: b"y"})
    assert file.read_bytes() == b"y"
