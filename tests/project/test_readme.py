"""What the README says is true: its commands, their output, and its Python lines."""

import contextlib
import io
import re
import shlex
import tomllib
from pathlib import Path

import pytest

from orolift.cli.main import exit_code

TOP = Path(__file__).resolve().parents[2]
README = (TOP / "README.md").read_text()
FIRST = "python3 -m venv .venv && .venv/bin/pip install . && .venv/bin/orolift cross demo_terrain/varn_moist.toml"
TESTS = "python3 -m venv .venv && .venv/bin/pip install -e '.[test]' && .venv/bin/python -m pytest"
TOUR = re.compile(r"^<!-- tour -->\n```console\n(.*?)^```$", re.MULTILINE | re.DOTALL)


def test_first_screen():
    """The job in one paragraph, a picture, then the two commands."""
    title, job, picture, *_ = README.split("\n\n")
    assert title == "# orolift"
    assert 60 < len(job.split()) < 140
    assert re.fullmatch(r"!\[[^\]]{20,}\]\(docs/report\.png\)", picture)
    assert README.index(picture) < README.index(FIRST) < README.index(TESTS)
    assert "python3-venv" in README[: README.index(FIRST)]


def test_test_command_is_the_one_that_is_checked():
    """README and .ci/run install and test with the same line."""
    assert f"```\n{TESTS}\n```" in README
    assert f"\n{TESTS}\n" in (TOP / ".ci" / "run").read_text()


def test_first_command_names_what_is_there():
    """The case exists, and the extra the other command installs does too."""
    assert f"```\n{FIRST}\n```" in README
    assert (TOP / FIRST.rsplit(maxsplit=1)[-1]).is_file()
    extras = tomllib.loads((TOP / "pyproject.toml").read_text())["project"]["optional-dependencies"]
    assert "test" in extras


def test_picture_is_small():
    """It loads at once."""
    data = (TOP / "docs" / "report.png").read_bytes()
    assert data.startswith(b"\x89PNG")
    assert len(data) <= 250_000


def test_python_lines_print_what_is_shown():
    """The block under 'As a library' runs, about ten lines, and its output is the text after it."""
    block = re.search(r"^```python\n(.*?)^```\n\n```text\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)
    assert block is not None
    assert len([line for line in block[1].splitlines() if line]) <= 12
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        exec(compile(block[1], "README.md", "exec"), {})  # noqa: S102 (our own page)
    assert out.getvalue() == block[2]


def test_tour(tmp_path, monkeypatch, capsys):
    """Each command of the tour, run in order in an empty folder, prints what the page shows."""
    monkeypatch.chdir(tmp_path)
    steps = TOUR.findall(README)
    assert len(steps) >= 4
    for number, step in enumerate(steps, start=1):
        if number == len(steps):  # the slip of the pen that the page speaks of
            case = tmp_path / "mine" / "case.toml"
            case.write_text(case.read_text().replace(" temperature_c", " temprature_c"))
        command, shown = re.fullmatch(r"\$ orolift ([^\n]*)\n(.*)", step, re.DOTALL).groups()
        code = exit_code(shlex.split(command))
        printed = capsys.readouterr()
        assert code == (2 if printed.err else 0)
        assert printed.out + printed.err == shown, f"README: 'orolift {command}' prints something else now"
    assert (tmp_path / "case.html").is_file()


@pytest.mark.parametrize("page", ["README.md", "DEVELOPERS.md"])
def test_pages_are_plain(page):
    """No badges, no markup but the marks of this test, and no host to install from but the usual one."""
    text = (TOP / page).read_text()
    assert "img.shields" not in text
    assert re.sub(r"<!-- tour -->", "", text).count("<!--") == 0
    assert not re.search(r"https?://", text)
    assert "--index-url" not in text
