"""The report of the demo raster case: seconds to make it in a fresh process, its size, and when a browser can use it."""

import subprocess
import sys
import time
from pathlib import Path

import pytest

DEMO = Path(__file__).parents[2] / "demo_terrain"
MADE = """
import sys, time
from orolift.cli.cross import report_of, work_out
worked = work_out(sys.argv[1])
began = time.perf_counter()
html = report_of(worked, "metric")
print(time.perf_counter() - began)
open(sys.argv[2], "w", encoding="utf-8").write(html)
"""
BARE = "data:text/html,<!doctype html><title>bare</title><p>Nothing here."
INTERACTIVE = "performance.getEntriesByType('navigation')[0].domContentLoadedEventEnd"


@pytest.fixture(scope="module")
def made(tmp_path_factory):
    """Shortest time [s] of some fresh processes to make the page, and the page."""
    page = tmp_path_factory.mktemp("report") / "page.html"
    taken = [
        float(
            subprocess.run(
                [sys.executable, "-c", MADE, str(DEMO / "varn_moist.toml"), str(page)],
                capture_output=True,
                text=True,
                check=True,
            ).stdout
        )
        for _ in range(3)
    ]
    return min(taken), page


@pytest.mark.speed
def test_report_is_made_quickly_and_small(made):
    """Seconds are for a quiet machine of two cores; the ratio to the import of the template engine travels better."""
    seconds, page = made
    began = time.perf_counter()
    subprocess.run([sys.executable, "-c", "import jinja2"], check=True)
    bare = time.perf_counter() - began
    size = page.stat().st_size / 1e6
    print(f"\nreport: {seconds:.2f} s, {seconds / bare:.1f} times a bare start with jinja2, {size:.2f} MB")
    assert seconds <= 0.5
    assert size <= 1.5


@pytest.mark.speed
@pytest.mark.browser
def test_page_can_be_used_at_once(made, browser):
    """From the start of loading to the end of the script, the best of some loads."""
    context = browser.new_context()
    page = context.new_page()
    page.goto(BARE)
    bare = page.evaluate(INTERACTIVE)
    loads = []
    for _ in range(5):
        page.goto(made[1].as_uri())
        loads.append(page.evaluate(INTERACTIVE))
        assert page.locator("#reading").is_visible()
    context.close()
    print(f"\npage: interactive after {min(loads):.0f} ms; a bare page after {bare:.0f} ms")
    assert min(loads) <= 300.0
