"""Every real pair of soundings with a range between them is worked out (origin and licence beside the data)."""

import importlib.util
import re
import sys
from pathlib import Path

import numpy as np
import pytest

ROOT = Path(__file__).parents[2]
DATA = ROOT / "tests" / "data" / "real_crossings"
PAIRS = sorted(path.name for path in DATA.glob("pair_*"))
RENEW = "Renew docs/accuracy.md with: python docs/make_accuracy.py"
_SPEC = importlib.util.spec_from_file_location("make_accuracy", ROOT / "docs" / "make_accuracy.py")
accuracy = importlib.util.module_from_spec(_SPEC)
sys.modules[_SPEC.name] = accuracy
_SPEC.loader.exec_module(accuracy)
INDEX, worked = accuracy.INDEX, accuracy.worked


@pytest.fixture(scope="module")
def told():
    """Errors that docs/accuracy.md gives for every pair."""
    text = (ROOT / "docs" / "accuracy.md").read_text(encoding="utf-8").replace("−", "-")
    rows = re.findall(r"^\| (\d\d) \| \w \| \d+ \| [\d.]+ \| (.+?) \|$", text, re.MULTILINE)
    return {f"pair_{name}": [float(x) for x in cells.split("|")] for name, cells in rows}


@pytest.mark.regression
@pytest.mark.parametrize("pair", ["pair_10", "pair_41", "pair_58"])
def test_the_accuracy_page_is_what_the_code_gives(told, pair):
    """Frozen: three pairs worked out now have the errors on the page."""
    means = accuracy.layer_means(pair)
    found = dict.fromkeys(INDEX, means)
    number = list(INDEX).index(pair)
    errors = accuracy.errors(found)
    fresh = [*errors[accuracy.LOW, "orolift"][number], *errors[accuracy.DEEP, "orolift"][number]]
    assert fresh == pytest.approx(told[pair], abs=0.05), RENEW


def test_the_scores_of_the_page_are_those_of_its_pairs(told):
    """Bias and mean absolute error at the top of the tables follow from the rows pair by pair."""
    assert len(told) == 66
    text = (ROOT / "docs" / "accuracy.md").read_text(encoding="utf-8").replace("−", "-")
    rows = [row.split("|")[4:10] for row in re.findall(r"^\| all \| 66 \| \*\*orolift\*\* .+$", text, re.MULTILINE)]
    values = np.array(list(told.values()))
    for row, part in zip(rows, (values[:, :2], values[:, 2:]), strict=True):
        given = [float(cell) for cell in row]
        for column, cells in ((0, given[:3]), (1, given[3:])):
            e = part[:, column]
            assert cells == pytest.approx([e.mean(), np.abs(e).mean(), np.sqrt(np.mean(e**2))], abs=0.011)


def test_simple_estimates_on_the_page_are_those_of_the_data():
    """The scores of lifted surface air that came with the data: 3.18 K, 1.21 g/kg over all pairs (README of the data)."""
    text = (ROOT / "docs" / "accuracy.md").read_text(encoding="utf-8")
    assert "| all | 66 | surface air lifted, all rain out | +0.22 | 3.18 | 4.02 | −0.38 | 1.21 | 1.61 |" in text, RENEW


def test_there_are_66_pairs():
    """The whole set is there."""
    assert len(PAIRS) == len(INDEX) == 66


@pytest.mark.parametrize("pair", PAIRS)
def test_the_pair_computes(pair):
    """No error, no NaN, no streamline under ground or across another, a closed budget, a plausible lee."""
    done = worked(pair)
    site = done.lee[0]
    ground = np.interp(done.distance, done.transect.distance, done.transect.elevation)
    assert (done.height[:, 0] >= ground - 1e-6).all()
    assert (np.diff(done.height, axis=1) > 0.0).all()
    for values in (done.air.temperature, done.air.vapour, done.air.cloud, done.wind):
        assert np.isfinite(values).all()
    parts = site.parts
    total = parts.descent + parts.latent + parts.going_round + parts.mixing + parts.surface_heating + parts.pressure
    assert total == pytest.approx(site.warming, abs=1e-6)
    assert abs(site.warming) < 25.0
    assert 0.0 < site.relative_humidity <= 1.001
    assert done.features.base <= done.flow.blocked_top < done.features.crest
    assert site.source_level_low <= site.source_level <= site.source_level_high
