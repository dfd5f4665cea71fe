"""The pages for the three readers say what the commands print and the reports show."""

import importlib.util
import re
import shutil
import sys
from importlib import import_module
from pathlib import Path

import pytest

DOCS = Path(__file__).resolve().parents[2] / "docs"
RENEW = "Renew it with: python docs/make_reader_pages.py, and read whether its words still hold"
NAMES = ("forecaster", "fire_analyst", "hydrologist")
NUMBER = re.compile(r"[+−-]?\d+(?:\.\d+)?")


@pytest.fixture(scope="module")
def made():
    """The script that renews the pages."""
    spec = importlib.util.spec_from_file_location("make_reader_pages", DOCS / "make_reader_pages.py")
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """Where the commands run."""
    return tmp_path_factory.mktemp("readers")


@pytest.fixture(scope="module")
def found(made, folder):
    """What each command prints; each is run once for all three pages."""
    assert made.PAGES == NAMES
    return made.outputs(folder)


@pytest.mark.parametrize("name", NAMES)
def test_commands_print_what_the_page_shows(made, found, name):
    """Every block marked as part of the tour, letter by letter."""
    text = made.text_of(name)
    assert len(made.TOUR.findall(text)) == text.count("<!-- tour -->") >= 2
    for command, shown in made.TOUR.findall(text):
        assert found[command] == shown, f"docs/{name}.md: 'orolift {command}' prints something else now. {RENEW}"


@pytest.mark.parametrize("name", NAMES)
def test_quoted_numbers_stand_in_outputs_and_reports(made, found, folder, name):
    """And a number that does not would be seen."""
    text = made.text_of(name)
    assert len(made.quoted_numbers(text)) >= 5
    assert made.loose_numbers(text, found, folder) == [], f"docs/{name}.md. {RENEW}"
    quoted = made.quoted_numbers(text)[0]
    assert made.loose_numbers(text.replace(f"`{quoted}`", f"`9{quoted}`", 1), found, folder) == [f"9{quoted}"]


def test_renewing_moves_output_and_quotations_together(made):
    """Numbers that the text quotes follow their output; other words stay for a person to read."""
    block = "<!-- tour -->\n```console\n$ orolift check a.toml\nair from {} m ({} to {})\n```\n"
    text = block.format(860, 580, 1060) + "It comes from `860 m (580 to 1060)`, not `0.6` or 860 m.\n"
    fresh = made.renewed(text, {"check a.toml": "air from 900 m (610 to 1100)\n"})
    assert fresh == block.format(900, 610, 1100) + "It comes from `900 m (610 to 1100)`, not `0.6` or 860 m.\n"


@pytest.mark.usefixtures("found")
def test_figures_are_those_of_the_reports(made, folder):
    """Their words, with numbers within one unit of the last digit; named, small, nothing loaded from elsewhere."""
    used = {file for name in NAMES for file in re.findall(r"\]\(readers/(\w+)\.svg\)", made.text_of(name))}
    assert used == set(made.FIGURES) == {file.stem for file in (DOCS / "readers").iterdir()}
    for name, (report, inside) in made.FIGURES.items():
        kept = (DOCS / "readers" / f"{name}.svg").read_text()
        old, new = (made.labels(drawing) for drawing in (kept, made.figure(folder / report, inside)))
        assert NUMBER.sub("#", old) == NUMBER.sub("#", new), f"{name}.svg has other words. {RENEW}"
        for before, now in zip(NUMBER.findall(old), NUMBER.findall(new), strict=True):
            apart = abs(float(before.replace("−", "-")) - float(now.replace("−", "-")))
            unit = 10.0 ** -len(before.partition(".")[2]) * (
                10.0 if before.endswith("0") and "." not in before else 1.0
            )
            assert apart <= 1.001 * unit, f"{name}.svg: {before} is {now} now. {RENEW}"
        assert re.search(r"<title[^>]*>[^<]{10,}</title>", kept)
        assert not re.search(r'href="(?!data:image/png|#)', kept)
        assert "var(" not in kept
        assert len(kept) < 110_000


@pytest.mark.parametrize("name", NAMES)
def test_a_page_is_one_page_and_cautious(made, name):
    """Its length, at most two figures, what to doubt, and who decides."""
    text = made.text_of(name)
    assert 100 <= len(text.splitlines()) <= 175
    assert 1 <= text.count("![") <= 2
    assert "## What to doubt" in text
    assert "estimate for trained people, not a warning" in " ".join(text.split())
    assert sum(f"({other}.md)" in text for other in NAMES) == 2  # the other two


@pytest.mark.parametrize("name", NAMES)
def test_commands_that_are_not_run_have_the_options_they_name(made, name):
    """Blocks without the mark show no output, and no option that is not there."""
    blocks = re.findall(r"(?<!<!-- tour -->\n)```console\n(.*?)^```$", made.text_of(name), re.MULTILINE | re.DOTALL)
    for line in "".join(blocks).splitlines():
        assert line.startswith("$ "), f"docs/{name}.md shows output that no test compares: {line}"
        words = line.split()
        if words[1] == "orolift":
            known = {option for one in import_module(f"orolift.cli.{words[2]}").command.params for option in one.opts}
            assert {word for word in words if word.startswith("--")} <= known, line


def test_a_command_that_fails_is_named(made, tmp_path, monkeypatch):
    """Renewing stops at it, with its message, and back in the folder it started from."""
    pages = tmp_path / "docs"
    pages.mkdir()
    shutil.copytree(DOCS.parent / "demo_terrain", tmp_path / "demo_terrain", ignore=shutil.ignore_patterns("*.tif"))
    (pages / "one.md").write_text("<!-- tour -->\n```console\n$ orolift check none.toml\n```\n")
    monkeypatch.setattr(made, "HERE", pages)
    monkeypatch.setattr(made, "PAGES", ("one",))
    before = Path.cwd()
    with pytest.raises(SystemExit, match=r"'orolift check none\.toml' ends with 2: .*none\.toml cannot be found"):
        made.outputs(tmp_path / "run")
    assert Path.cwd() == before
