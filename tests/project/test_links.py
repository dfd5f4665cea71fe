"""Links between the Markdown files lead somewhere."""

import re
from pathlib import Path

import pytest

TOP = Path(__file__).resolve().parents[2]
PAGES = sorted({*TOP.glob("*.md"), *(TOP / "docs").rglob("*.md"), *(TOP / "tests" / "data").rglob("*.md")})
LINK = re.compile(r"!?\[[^\]]*\]\(([^)\s]+)\)")


def without_code(text):
    """Markdown without blocks and spans of code."""
    return re.sub(r"`[^`\n]*`", "", re.sub(r"^```.*?^```", "", text, flags=re.MULTILINE | re.DOTALL))


def anchors(page):
    """Names that headings can be linked by: small letters, no punctuation, hyphens for spaces."""
    headings = re.findall(r"^#+ (.*)$", page.read_text(), re.MULTILINE)
    return {re.sub(r"[^\w\- ]", "", heading.lower()).strip().replace(" ", "-") for heading in headings}


@pytest.mark.parametrize("page", PAGES, ids=lambda page: str(page.relative_to(TOP)))
def test_relative_links_resolve(page):
    """The file is there, and so is the heading after the hash."""
    for target in LINK.findall(without_code(page.read_text())):
        if re.match(r"[a-z]+:", target):
            continue
        name, _, anchor = target.partition("#")
        file = (page.parent / name).resolve() if name else page
        assert file.exists(), f"{page.name}: {target} leads nowhere"
        assert file.is_relative_to(TOP), f"{page.name}: {target} leads out of the project"
        if anchor:
            assert anchor in anchors(file), f"{page.name}: {target} has no such heading"


def test_a_wrong_link_would_be_seen():
    """The pattern finds links and pictures, and leaves code alone."""
    text = "see [it](docs/it.md#here) ![a](b.png) `[no](link)`\n```\n[nor](this)\n```\n"
    assert LINK.findall(without_code(text)) == ["docs/it.md#here", "b.png"]
    assert "sounding-csv" in anchors(TOP / "docs" / "case.md")


def test_pages_name_no_place_of_one_machine():
    """No page holds a path of the machine it was written on, or says how the work is organised."""
    for page in PAGES:
        assert not re.search(r"/(?:home|work|root|tmp)/", page.read_text()), page


def test_developers_page_renews_the_sample_report_as_its_test_does():
    """One command, not two."""
    lines = (TOP / "DEVELOPERS.md").read_text().splitlines()
    command = next(line for line in lines if line.startswith("SOURCE_DATE_EPOCH="))
    source = (TOP / "tests" / "project" / "test_sample_report.py").read_text()
    assert command.split()[0].partition("=")[2] in source
    assert "orolift cross demo_terrain/varn_moist.toml --report reports/varn_moist.html" in command
