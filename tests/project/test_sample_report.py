"""The sample report in reports/ is what the first demo case gives today."""

import os
import subprocess
import sys
from html.parser import HTMLParser
from pathlib import Path

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "reports" / "varn_moist.html"
MADE_AT = "1793739600"  # 2026-11-03T21:00:00Z, the valid time of the case


class _Text(HTMLParser):
    """Everything a reader sees, white space folded; the drawing's own coordinates do not count."""

    def __init__(self):
        super().__init__()
        self.words = []
        self.skip = 0

    def handle_starttag(self, tag, attrs):
        self.skip += tag in {"style", "script"}

    def handle_endtag(self, tag):
        self.skip -= tag in {"style", "script"}

    def handle_data(self, data):
        if not self.skip:
            self.words += data.split()


def visible(html: str) -> list[str]:
    """Words a reader sees."""
    parser = _Text()
    parser.feed(html)
    return parser.words


def test_sample_report_is_fresh(tmp_path):
    """Stale? Renew it: SOURCE_DATE_EPOCH=1793739600 orolift cross demo_terrain/varn_moist.toml --report reports/..."""
    out = tmp_path / "fresh.html"
    subprocess.run(
        [sys.executable, "-m", "orolift", "cross", "demo_terrain/varn_moist.toml", "--quiet", "--report", str(out)],
        cwd=ROOT,
        env={**os.environ, "SOURCE_DATE_EPOCH": MADE_AT},
        check=True,
    )
    fresh, kept = visible(out.read_text()), visible(SAMPLE.read_text())
    first = next((pair for pair in zip(kept, fresh, strict=False) if pair[0] != pair[1]), None)
    assert fresh == kept, (
        f"reports/varn_moist.html is stale (first difference: {first}). Renew it: SOURCE_DATE_EPOCH={MADE_AT} "
        "orolift cross demo_terrain/varn_moist.toml --report reports/varn_moist.html"
    )
