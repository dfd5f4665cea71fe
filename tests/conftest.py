"""Settings that every test shares: property tests without a deadline, the same each time in CI; browser or not."""

import importlib.util
import os
import shutil
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

settings.register_profile(
    "orolift",
    deadline=None,
    derandomize=bool(os.environ.get("CI")),
    suppress_health_check=[HealthCheck.too_slow],  # the machine may be busy; nothing here measures time
)
settings.load_profile("orolift")

CHROMIUM = shutil.which("chromium")
DRIVER = importlib.util.find_spec("playwright") is not None
REQUIRED = bool(os.environ.get("OROLIFT_BROWSER_REQUIRED"))
ALONE = (
    "--no-sandbox",  # root in a container has no other way
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
"""Switches of a browser that talks to nobody."""


def pytest_collection_modifyitems(config, items):
    """Deselect browser tests, saying so, where the browser or what drives it is missing and not required."""
    if (CHROMIUM and DRIVER) or REQUIRED:
        return
    browser = [item for item in items if "browser" in item.keywords]
    if browser:
        items[:] = [item for item in items if "browser" not in item.keywords]
        config.hook.pytest_deselected(items=browser)


def pytest_report_header():
    """The reason, printed at the top."""
    if not CHROMIUM:
        return "browser tests: deselected, Debian's chromium is not installed (apt-get install chromium)"
    if not DRIVER:
        return "browser tests: deselected, playwright is not installed (it comes with the extra 'test')"
    return f"browser tests: run with {CHROMIUM}"


@pytest.fixture(scope="session")
def browser():
    """A headless browser with a profile of its own; tests fail without it when they are required."""
    assert CHROMIUM, "Debian's chromium is not installed"
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        opened = driver.chromium.launch(executable_path=CHROMIUM, args=list(ALONE))
        yield opened
        opened.close()


@pytest.fixture(scope="session")
def axe():
    """The accessibility engine axe-core as a script: OROLIFT_AXE names its axe.min.js."""
    path = os.environ.get("OROLIFT_AXE")
    if not path:
        reason = "OROLIFT_AXE does not name axe.min.js (npm install --prefix ../axe axe-core)"
        assert not REQUIRED, reason
        pytest.skip(reason)
    return Path(path).read_text(encoding="utf-8")
