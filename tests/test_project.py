"""What holds for the project as a whole: layers, documents, the shape of the tree."""

from __future__ import annotations

import ast
import re
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]

LAYERS = ["source", "diagram", "text", "algebra", "claims", "passes", "schedule", "emit", "run", "draw", "cli"]
"""A folder imports only from itself and from those before it."""

MODULES = sorted((ROOT / "flowgraph").rglob("*.py"))


def imported_folders(module: Path) -> set[str]:
    """The folders of the package that a module imports from, anywhere in it."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(module.read_text("utf-8"))):
        names = [node.module or ""] if isinstance(node, ast.ImportFrom) else []
        if isinstance(node, ast.Import):
            names = [alias.name for alias in node.names]
        found.update(name.split(".")[1] for name in names if name.startswith("flowgraph.") and name.count("."))
    return found


@pytest.mark.parametrize("module", MODULES, ids=lambda path: str(path.relative_to(ROOT)))
def test_imports_only_go_one_way(module: Path) -> None:
    """Data flows one way through the folders, and so do imports."""
    folder = module.relative_to(ROOT / "flowgraph").parts[0]
    if folder in LAYERS:
        allowed = LAYERS[: LAYERS.index(folder) + 1]
        assert imported_folders(module) <= set(allowed)


def test_every_folder_of_the_package_has_its_place() -> None:
    """No folder stands outside the order of the layers."""
    folders = {path.parent.name for path in MODULES if path.parent != ROOT / "flowgraph"}
    assert folders == set(LAYERS)


@pytest.mark.parametrize("document", ["README.md", "DEVELOPERS.md"])
def test_every_path_a_document_names_exists(document: str) -> None:
    """Documents do not speak of files that are gone."""
    text = (ROOT / document).read_text("utf-8")
    named = set(re.findall(r"`((?:flowgraph|grammar|tests|samples|\.ci)/[A-Za-z0-9_./-]*)`", text))
    assert named
    assert not [path for path in sorted(named) if not (ROOT / path).exists()]


def test_there_is_one_grammar() -> None:
    """The language is stated once."""
    stated = [path for folder in ("flowgraph", "grammar", "tests") for path in (ROOT / folder).rglob("*.lark")]
    assert stated == [ROOT / "grammar" / "flowgraph.lark"]


def test_every_test_says_what_it_promises() -> None:
    """Each test function opens with a sentence."""
    for path in sorted((ROOT / "tests").rglob("test_*.py")):
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            if isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
                assert ast.get_docstring(node), f"{path}: {node.name}"
