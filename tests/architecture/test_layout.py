"""What lies where in the checkout, and how long a module may be."""

from fnmatch import fnmatch
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "screener", "tests", "sample_runs"}
LONGEST = 400


def modules() -> list[Path]:
    """Every Python module of the product, its tests and its sample runs."""
    return [path for folder in ("screener", "tests", "sample_runs") for path in sorted((ROOT / folder).rglob("*.py"))]


def is_ignored(name: str) -> bool:
    """True for a name that the version history leaves out."""
    patterns = (ROOT / ".gitignore").read_text(encoding="utf-8").split()
    return any(fnmatch(name, pattern.rstrip("/")) for pattern in patterns)


def test_the_top_level_holds_only_what_is_allowed() -> None:
    found = {entry.name for entry in ROOT.iterdir() if not entry.name.startswith(".") and not is_ignored(entry.name)}
    assert found == TOP_LEVEL


@pytest.mark.parametrize("module", modules(), ids=lambda path: str(path.relative_to(ROOT)))
def test_a_module_is_at_most_400_lines_long(module: Path) -> None:
    assert len(module.read_text(encoding="utf-8").splitlines()) <= LONGEST
