"""Floors import downwards only, and a command-line answer loads no user interface."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
FLOORS = {"chemistry": 1, "treatment": 2, "scenario": 3, "studies": 4, "report": 5, "app": 6, "cli": 7}
"""Report and command line may not import the app at module level; the app may use the report."""

MODULES = sorted((ROOT / "explorer").rglob("*.py"))


def floor_of(path: Path) -> int | None:
    name = path.relative_to(ROOT / "explorer").parts[0].removesuffix(".py")
    return FLOORS.get(name)


def imported(path: Path) -> list[str]:
    """Dotted names a module imports anywhere in it, relative ones made absolute."""
    package = ["explorer", *path.relative_to(ROOT / "explorer").parent.parts]
    names = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = package[: len(package) - node.level + 1] if node.level else []
            stem = ".".join([*base, *([node.module] if node.module else [])])
            names += [stem, *(f"{stem}.{alias.name}" for alias in node.names)]
    return names


ON_FLOORS = [path for path in MODULES if floor_of(path) is not None and path.name != "cli.py"]


@pytest.mark.parametrize("path", ON_FLOORS, ids=lambda p: str(p.relative_to(ROOT)))
def test_a_module_imports_only_from_its_own_floor_and_below(path):
    """The table of floors in DEVELOPERS.md."""
    own = floor_of(path)
    for name in imported(path):
        if name.startswith("explorer."):
            below = FLOORS.get(name.split(".")[1])
            assert below is None or below <= own, f"{path.name} imports {name}"
        if own < 3:
            assert name.split(".")[0] != "param", path
        if own < 5:
            assert name.split(".")[0] not in {"panel", "bokeh"}, path


def test_the_floors_of_chemistry_and_treatment_need_only_numpy_and_scipy():
    """Nothing else is imported at run time besides the standard library."""
    for path in MODULES:
        if (floor_of(path) or 9) < 3:
            for name in imported(path):
                top = name.split(".")[0]
                assert top in sys.stdlib_module_names | {"numpy", "scipy", "explorer"}, (path, name)


@pytest.mark.parametrize("module", ["explorer.cli", "explorer.scenario.evaluate", "explorer.studies.sweep"])
def test_no_user_interface_is_loaded_below_the_app(module):
    """In a fresh interpreter, for within this one anything may be loaded already."""
    code = f"import sys, {module}; print([m for m in ('panel', 'bokeh', 'pandas') if m in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, cwd=ROOT, check=True, timeout=120
    )
    assert done.stdout.strip() == "[]"
