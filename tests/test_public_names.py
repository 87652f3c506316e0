"""The names that are exported, the names that the reference documents, and no others."""

from __future__ import annotations

import dataclasses
import inspect
import re
from collections import Counter
from pathlib import Path

import pytest

import lighttime
from lighttime.cli import COMMANDS

REFERENCE = Path(__file__).parent.parent / "docs" / "reference"
ON_DEMAND = {"exact"}
"""Rooms that are imported when they are asked for; they have pages of their own."""


def text() -> str:
    return "\n".join(page.read_text(encoding="utf-8") for page in sorted(REFERENCE.glob("*.md")))


def documented() -> list[str]:
    """Names of the first level that have an entry with their docstring."""
    kinds = "class|function|exception|data|module"
    return re.findall(rf"^\.\. auto(?:{kinds}):: lighttime\.(\w+)$", text(), re.M)


def listed() -> list[str]:
    """Names in the tables of the index, and at the beginning of a line."""
    index = (REFERENCE / "index.md").read_text(encoding="utf-8")
    return re.findall(r"^(?:   |`)lighttime\.(\w+)(?:$|` is )", index, re.M)


def test_every_exported_name_is_documented_once_and_nothing_else() -> None:
    counts = Counter(documented())
    assert set(counts) - ON_DEMAND == set(lighttime.__all__)
    assert {name for name, count in counts.items() if count > 1} == set()


def test_the_index_lists_every_documented_name_once() -> None:
    counts = Counter(listed())
    assert set(counts) == set(lighttime.__all__) - {"__version__"}
    assert max(counts.values()) == 1


@pytest.mark.parametrize("name", sorted(set(lighttime.__all__) - {"TERMS", "__version__"}))
def test_every_exported_name_has_a_docstring_of_its_own(name: str) -> None:
    thing = getattr(lighttime, name)
    doc = inspect.getdoc(thing)
    assert doc
    assert not doc.startswith(f"{name}("), "the signature that a dataclass makes is no docstring"


@pytest.mark.parametrize("name", sorted(set(lighttime.__all__) - {"TERMS", "__version__"}))
def test_public_methods_have_docstrings(name: str) -> None:
    thing = getattr(lighttime, name)
    if not inspect.isclass(thing):
        return
    for member, value in vars(thing).items():
        function = getattr(value, "__func__", value)
        if not member.startswith("_") and (
            inspect.isfunction(function) or isinstance(value, property)
        ):
            assert inspect.getdoc(value), f"{name}.{member}"


def sections(doc: str, name: str) -> list[str]:
    """Names that a section of a numpydoc docstring describes."""
    found = re.search(rf"^{name}\n-+\n(.*?)(?=^\S[^\n]*\n-+$|\Z)", doc, re.M | re.S)
    heads = re.findall(r"^(\w[\w, ]*?)(?: :.*)?$", found[1], re.M) if found else []
    return [name.strip() for head in heads for name in head.split(",")]


@pytest.mark.parametrize("name", sorted(lighttime.__all__))
def test_documented_attributes_and_parameters_exist(name: str) -> None:
    thing = getattr(lighttime, name)
    if not dataclasses.is_dataclass(thing):
        return
    doc = inspect.getdoc(thing) or ""
    fields = {field.name for field in dataclasses.fields(thing)}
    assert set(sections(doc, "Parameters")) <= fields
    for attribute in sections(doc, "Attributes"):
        assert attribute in fields or hasattr(thing, attribute), attribute


def test_sections_are_found() -> None:
    doc = inspect.getdoc(lighttime.Station) or ""
    assert {"name", "xyz_m", "residual_motion", "source"} <= set(sections(doc, "Parameters"))
    assert "downlink" in sections(inspect.getdoc(lighttime.RoundTrip) or "", "Attributes")


def test_exported_names_are_in_order() -> None:
    assert sorted(set(lighttime.__all__)) == sorted(lighttime.__all__)
    assert set(lighttime.__all__) <= set(dir(lighttime))


def test_help_of_every_command_is_on_its_page() -> None:
    page = (REFERENCE / "command-line.md").read_text(encoding="utf-8")
    names = [command.__name__.rpartition(".")[2] for command in COMMANDS]
    shown = re.findall(r"^```\{command-help\} (\w+)$", page, re.M)
    assert sorted(shown) == sorted(names)
    assert [name for name in names if f"## lighttime {name}\n" not in page] == []


def test_names_of_terms_have_an_entry() -> None:
    table = (REFERENCE / "terms.md").read_text(encoding="utf-8")
    assert re.findall(r"^\| `(\w+)` \|", table, re.M) == list(lighttime.TERMS)
