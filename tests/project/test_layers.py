"""Imports point down the layers only."""

import ast
from pathlib import Path

import pytest

import orolift

PACKAGE = Path(orolift.__file__).parent
# Lowest first; modules of one entry are on one level and may not import each other's layer, save terrain and air,
# which stand side by side, and the leaves.
LEVELS = [
    {"constants", "errors"},
    {"checks"},
    {"air", "terrain"},
    {"flow"},
    {"crossing"},
    {"rain", "fire"},
    {"spread"},
    {"sources"},
    {"report"},
    {"cli"},
]
LEVEL = {layer: number for number, layers in enumerate(LEVELS) for layer in layers}
MODULES = sorted(PACKAGE.rglob("*.py"))


def imported_layers(path: Path) -> set[str]:
    """Layers of orolift that a module imports, anywhere in it."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text())):
        names = []
        if isinstance(node, ast.ImportFrom) and node.module:
            names = [node.module] + [f"{node.module}.{alias.name}" for alias in node.names if node.module == "orolift"]
        elif isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        found |= {name.split(".")[1] for name in names if name.startswith("orolift.")}
    return found & set(LEVEL)


@pytest.mark.parametrize("path", MODULES, ids=lambda path: str(path.relative_to(PACKAGE)))
def test_imports_point_down(path):
    """A module imports only from its own layer and the ones below it."""
    layer = path.relative_to(PACKAGE).parts[0].removesuffix(".py")
    if layer == "__main__":
        return
    if layer == "__init__":
        assert imported_layers(path) == set()
        return
    for other in imported_layers(path) - {layer}:
        assert LEVEL[other] < LEVEL[layer], f"{layer} must not import {other}"


def test_every_layer_has_a_level():
    """A new folder must be given its place."""
    here = {path.relative_to(PACKAGE).parts[0].removesuffix(".py") for path in MODULES} - {"__init__", "__main__"}
    assert here <= set(LEVEL)


@pytest.mark.parametrize("layer", ["air", "terrain", "flow", "crossing", "rain", "fire", "spread"])
def test_physics_opens_no_file(layer):
    """Only the edge opens files."""
    for path in (PACKAGE / layer).rglob("*.py"):
        for node in ast.walk(ast.parse(path.read_text())):
            if isinstance(node, ast.Call):
                called = getattr(node.func, "id", getattr(node.func, "attr", ""))
                assert called not in {"open", "read_text", "read_bytes", "write_text", "write_bytes"}, path


def test_only_render_imports_jinja2():
    """Templates are known in one place."""
    users = [p for p in MODULES if "jinja2" in p.read_text() and "import" in p.read_text() and _imports(p, "jinja2")]
    assert [str(p.relative_to(PACKAGE)) for p in users] == ["report/render.py"]


def _imports(path: Path, library: str) -> bool:
    for node in ast.walk(ast.parse(path.read_text())):
        names = [node.module or ""] if isinstance(node, ast.ImportFrom) else []
        names = [alias.name for alias in node.names] if isinstance(node, ast.Import) else names
        if any(name.split(".")[0] == library for name in names):
            return True
    return False
