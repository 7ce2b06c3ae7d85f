"""The hand-written registry of families against the folder that holds them."""

import importlib
import pkgutil

from screener.stats import families
from screener.stats.families import FAMILIES, Family, family_named

DEFINES_WHAT_A_FAMILY_IS = "family"


def modules_of_families() -> dict[str, Family]:
    """The family that each module of the folder holds, by module name."""
    names = {module.name for module in pkgutil.iter_modules(families.__path__)} - {DEFINES_WHAT_A_FAMILY_IS}
    return {name: importlib.import_module(f"{families.__name__}.{name}").FAMILY for name in names}


def test_the_registry_holds_every_family_of_the_folder_once() -> None:
    listed = sorted(family.name for family in FAMILIES)
    assert listed == sorted(family.name for family in modules_of_families().values())


def test_a_module_is_named_like_its_family() -> None:
    for module, family in modules_of_families().items():
        assert module == family.name.lower().replace(" ", "_").replace("-", "_")


def test_every_family_is_found_by_its_name() -> None:
    assert all(family_named(family.name) is family for family in FAMILIES)


def test_a_borrowed_null_is_that_of_a_family_in_the_registry() -> None:
    names = {family.name for family in FAMILIES}
    assert {family.null_name for family in FAMILIES} <= names
