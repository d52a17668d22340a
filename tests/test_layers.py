"""Imports go one way: terrain <- propagation <- app."""

import ast
from pathlib import Path

ROOT = Path(__file__).parent.parent
MAY_IMPORT = {
    "terrain": {"terrain"},
    "propagation": {"terrain", "propagation"},
    "app": {"terrain", "propagation", "app"},
}


def imported_packages(source: str) -> set[str]:
    names: set[str] = set()
    for node in ast.walk(ast.parse(source)):
        if isinstance(node, ast.Import):
            names |= {alias.name.split(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module:
            names.add(node.module.split(".")[0])
    return names & set(MAY_IMPORT)


def test_imports_go_one_way():
    files = [path for package in MAY_IMPORT for path in (ROOT / package).rglob("*.py")]
    assert len(files) > 10
    wrong = [
        f"{path.relative_to(ROOT)} imports {', '.join(sorted(extra))}"
        for path in files
        if (extra := imported_packages(path.read_text()) - MAY_IMPORT[path.relative_to(ROOT).parts[0]])
    ]
    assert wrong == []


def test_the_walk_sees_a_forbidden_import():
    assert imported_packages("import app.cli\nfrom terrain.profile import Profile") == {"app", "terrain"}
