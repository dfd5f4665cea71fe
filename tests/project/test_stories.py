"""docs/stories.md says what the code gives, and the four stories are four."""

import importlib.util
import re
import sys
import xml.etree.ElementTree as ET
from pathlib import Path

import pytest

DOCS = Path(__file__).resolve().parents[2] / "docs"
RENEW = "Renew it with: python docs/make_stories.py, and read whether its words still hold"
NUMBER = re.compile(r"[+−-]?\d+(?:\.\d+)?")


@pytest.fixture(scope="module")
def made():
    """The script that writes the page."""
    spec = importlib.util.spec_from_file_location("make_stories", DOCS / "make_stories.py")
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module  # its dataclasses look themselves up there
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="module")
def told(made):
    """The four stories by name, worked out now."""
    return {story.key: story for story in made.stories()}


def same_within_rounding(kept, fresh, name):
    """The same words, and numbers no more than one unit of their last digit apart."""
    assert NUMBER.sub("#", kept).split() == NUMBER.sub("#", fresh).split(), f"{name} has other words. {RENEW}"
    for old, new in zip(NUMBER.findall(kept), NUMBER.findall(fresh), strict=True):
        digits = len(old.partition(".")[2])
        step = 10.0 if old.endswith("0") and not digits and len(old) > 2 else 10.0**-digits  # heights are in tens
        apart = abs(float(old.replace("−", "-")) - float(new.replace("−", "-")))
        assert apart <= 1.001 * step, f"{name}: {old} is {new} now. {RENEW}"


def test_page_is_what_the_code_gives(made, told):
    """Every number of docs/stories.md, within rounding."""
    same_within_rounding((DOCS / "stories.md").read_text(), made.page(list(told.values())), "docs/stories.md")


def test_figures_are_what_the_code_gives(made, told):
    """Labels of the figures, within rounding; well-formed, described, nothing loaded from elsewhere, small."""
    for story in told.values():
        file = DOCS / "stories" / f"{story.key}.svg"
        kept, fresh = (ET.fromstring(text) for text in (file.read_text(), made.drawing(story)))  # noqa: S314 (our own)
        labels = [
            " ".join(text.text for text in tree.iter("{http://www.w3.org/2000/svg}text")) for tree in (kept, fresh)
        ]
        same_within_rounding(*labels, file.name)
        assert len(kept.get("aria-label")) > 20
        assert "href" not in file.read_text()
        assert file.stat().st_size < 100_000


def test_the_four_differ(told):
    """Whether low air is blocked and whether it rains: each story has its own pair."""
    pairs = set()
    for story in told.values():
        over = story.crossing
        blocked = over.flow.blocked_top > over.features.base + 100.0
        pairs.add((blocked, over.water.removed > 0.02 * over.water.vapour_in))
    assert len(pairs) == 4


def test_weak_and_dry_is_warm_by_descent(told):
    """No rain, most of the warming from descent, and the popular picture far too cold."""
    site, over = told["weak_dry"].site, told["weak_dry"].crossing
    assert over.water.removed == pytest.approx(0.0, abs=1e-6)
    assert site.warming > 1.0
    assert site.parts.descent > 5.0 * abs(site.parts.latent)
    assert site.temperature - site.popular_picture > 2.0
    assert site.no_blocking.temperature < site.temperature < site.full_blocking.temperature


def test_weak_and_moist_has_two_causes(told):
    """Descent and latent heat both count, and moisture lowers the blocked layer and the source level."""
    moist, dry = told["weak_moist"], told["weak_dry"]
    assert min(moist.site.parts.descent, moist.site.parts.latent) > 1.0
    assert moist.crossing.flow.blocked_top < dry.crossing.flow.blocked_top
    assert moist.site.source_level < dry.site.source_level


def test_strong_and_dry_has_wind_and_no_warmth(told):
    """All air crosses and returns as it was; the lee wind is far stronger than with the weak flow."""
    dry = told["strong_dry"]
    assert abs(dry.site.warming) < 0.7
    assert dry.crossing.winds.strongest > 1.4 * told["weak_dry"].crossing.winds.strongest
    assert abs(dry.site.warming) == min(abs(story.site.warming) for story in told.values())


def test_strong_and_moist_is_the_textbook(told):
    """Latent heat makes nearly all of the warming, and the popular picture is near and above."""
    site = told["strong_moist"].site
    assert site.parts.latent > 0.8 * site.warming
    assert 0.0 < site.popular_picture - site.temperature < 1.5


@pytest.mark.parametrize(("kept", "fresh"), [("at 690 m", "at 720 m"), ("+3.6 K", "+3.8 K"), ("two", "three")])
def test_a_stale_number_or_word_would_be_seen(kept, fresh):
    """Two units of the last digit, or another word."""
    with pytest.raises(AssertionError, match="Renew it"):
        same_within_rounding(kept, fresh, "page")
