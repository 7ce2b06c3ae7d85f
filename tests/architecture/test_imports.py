"""Who may import whom: the contracts of pyproject.toml, and what they cannot say."""

import ast
import subprocess
import sys
import sysconfig
import tomllib
from collections.abc import Iterator
from pathlib import Path

ROOT = Path(__file__).parents[2]
PRODUCT = ROOT / "screener"
BROUGHT_ALONG = {"rich": "textual", "distributed": "dask"}
CALLED_OTHERWISE = {"npTDMS": "nptdms"}
"""Libraries whose import has another name."""
"""Libraries that a declared one always installs, and which one that is."""


def imports() -> Iterator[tuple[Path, str]]:
    """Every module of the product with each dotted name that it imports."""
    for path in sorted(PRODUCT.rglob("*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Import):
                yield from ((path.relative_to(PRODUCT), alias.name) for alias in node.names)
            elif isinstance(node, ast.ImportFrom) and node.module and not node.level:
                yield from ((path.relative_to(PRODUCT), f"{node.module}.{alias.name}") for alias in node.names)


def declared_libraries() -> set[str]:
    """Libraries that the project says it needs, required or as an extra for its users."""
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    extras = (needs for extra, needs in project["optional-dependencies"].items() if extra != "test")
    needs = [*project["dependencies"], *(need for extra in extras for need in extra)]
    names = ("".join(c if c.isalnum() or c in "-_" else " " for c in need).split()[0] for need in needs)
    return {CALLED_OTHERWISE.get(name, name).replace("-", "_") for name in names} - {"screener"}


def test_the_import_contracts_hold() -> None:
    program = Path(sysconfig.get_path("scripts")) / "lint-imports"
    done = subprocess.run([program, "--no-cache"], cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr


BEYOND_SPECIAL_FUNCTIONS = {
    ("tables/instruments.py", "scipy.io"),
    ("stats/null/matched.py", "scipy.signal.lfilter"),
}
"""Imported where they are needed, since they take long."""


def test_of_scipy_little_but_special_functions_is_used() -> None:
    used = {(str(path), name) for path, name in imports() if name.split(".")[0] == "scipy"}
    assert used, "no import of scipy was found, so this test looks in the wrong place"
    assert {(path, name) for path, name in used if not name.startswith("scipy.special")} <= BEYOND_SPECIAL_FUNCTIONS


def test_every_outside_library_is_declared() -> None:
    outside = {name.split(".")[0] for _, name in imports()} - set(sys.stdlib_module_names) - {"screener"}
    assert {BROUGHT_ALONG.get(name, name) for name in outside} <= declared_libraries()


def test_every_declared_library_is_used() -> None:
    assert declared_libraries() <= {name.split(".")[0] for _, name in imports()}
