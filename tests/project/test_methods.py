"""docs/methods.md names every module and formula of the physics, and the constants as they are."""

import ast
import re
from pathlib import Path

import pytest

import orolift
from orolift.constants import table

PACKAGE = Path(orolift.__file__).parent
PAGE = (Path(__file__).resolve().parents[2] / "docs" / "methods.md").read_text()
PHYSICS = [layer for layer in ("air", "terrain", "flow", "crossing", "rain", "fire") if (PACKAGE / layer).is_dir()]
MODULES = sorted(file for layer in PHYSICS for file in (PACKAGE / layer).glob("*.py") if file.name != "__init__.py")


def formulas(module):
    """Public functions whose docstring has notes: where an equation or assumption stands."""
    for node in ast.parse(module.read_text()).body:
        public = isinstance(node, ast.FunctionDef) and not node.name.startswith("_")
        if public and "\nNotes\n-----\n" in (ast.get_docstring(node) or ""):
            yield node.name


@pytest.mark.parametrize("module", MODULES, ids=lambda module: str(module.relative_to(PACKAGE)))
def test_page_names_the_module_and_its_formulas(module):
    """Add a line to docs/methods.md: equation, source, what is assumed."""
    assert f"`{module.relative_to(PACKAGE)}`" in PAGE
    missing = [name for name in formulas(module) if f"`{name}`" not in PAGE]
    assert not missing, f"docs/methods.md says nothing of {', '.join(missing)}"


def test_page_names_nothing_that_is_gone():
    """Every module it names is there."""
    for name in re.findall(r"`((?:air|terrain|crossing|flow|rain|fire|sources|report)/\w+\.py)`", PAGE):
        assert (PACKAGE / name).is_file(), name


def test_constants_are_those_of_the_code():
    """Name, value, unit and source of each, in the order of the code."""
    rows = [line.strip("| ").split(" | ") for line in PAGE.splitlines() if re.match(r"\| `[A-Z_]+` \|", line)]
    assert rows == [[f"`{name}`", f"{float(value):.9g}", value.unit, value.source] for name, value in table()]


def test_sources_are_listed():
    """Every author and year in the text stands in the list at the end."""
    text, _, sources = PAGE.partition("## Constants")
    cited = set(re.findall(r"([A-Z][\w\-]+)(?: et al\.| and [A-Z][\w\-]+)? \((\d{4})", text))
    assert len(cited) > 5
    for author, year in cited:
        assert re.search(rf"^- .*{author}.*\({year}\)", sources, re.MULTILINE), f"{author} ({year}) is not listed"
