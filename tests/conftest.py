"""Settings that every test shares: property tests without a deadline, the same each time in CI; browser or not."""

import os
import shutil

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


def pytest_collection_modifyitems(config, items):
    """Deselect browser tests, saying so, where Debian's chromium is missing and not required."""
    if CHROMIUM or os.environ.get("OROLIFT_BROWSER_REQUIRED"):
        return
    browser = [item for item in items if "browser" in item.keywords]
    if browser:
        items[:] = [item for item in items if "browser" not in item.keywords]
        config.hook.pytest_deselected(items=browser)


def pytest_report_header():
    """The reason, printed at the top."""
    if CHROMIUM:
        return f"browser tests: run with {CHROMIUM}"
    return "browser tests: deselected, Debian's chromium is not installed (apt-get install chromium)"


@pytest.fixture(scope="session")
def chromium():
    """Path of the browser; browser tests fail without it when they are required."""
    assert CHROMIUM, "Debian's chromium is not installed"
    return CHROMIUM
