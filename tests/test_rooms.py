"""Imports run one way through the rooms, as DEVELOPERS.md draws them."""

from __future__ import annotations

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

import lighttime

ROOT = Path(lighttime.__file__).parent
LEVELS = (
    {"errors", "constants", "inputs", "vectors", "terms", "textfile", "version", "data"},
    {"timescales"},
    {"ephemeris"},
    {"earth", "moon"},
    {"path"},
    {"tables", "query", "gathering", "model", "answer", "worksheet", "printing"}
    | {"partials", "uncertainty", "user_terms", "sigmas"},
    {"crosscheck"},
    {"progress", "commands", "cli", "__main__"},
)
EXCEPTIONS = {("timescales/ut1.py", "earth"), ("timescales/relation.py", "ephemeris")}
"""The series that UT1 comes from, and what TDB is integrated from, when none is given."""

LEVEL = {room: level for level, rooms in enumerate(LEVELS) for room in rooms}
FILES = [
    path
    for path in sorted(ROOT.rglob("*.py"))
    if path.relative_to(ROOT).with_suffix("").parts[0] in LEVEL
]


def imported_rooms(path: Path) -> Iterator[str]:
    """Rooms that a file imports from when it runs, those inside functions included."""
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for node in ast.walk(tree):
        if isinstance(node, ast.If) and ast.unparse(node.test) == "TYPE_CHECKING":
            node.body = []
    for node in ast.walk(tree):
        if isinstance(node, ast.ImportFrom) and node.module and node.level == 0:
            parts = node.module.split(".")
            if parts[0] == "lighttime":
                yield from parts[1:2] or [alias.name for alias in node.names]
        elif isinstance(node, ast.Import):
            names = (alias.name.split(".") for alias in node.names)
            yield from (name[1] for name in names if name[0] == "lighttime" and len(name) > 1)


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(ROOT)))
def test_no_file_imports_from_a_room_above_its_own(path: Path) -> None:
    own = path.relative_to(ROOT).with_suffix("").parts[0]
    for room in imported_rooms(path):
        same_line = LEVEL[room] == LEVEL[own] and {room, own} != {"earth", "moon"}
        exception = (path.relative_to(ROOT).as_posix(), room) in EXCEPTIONS
        assert LEVEL[room] < LEVEL[own] or same_line or exception


def test_files_were_looked_at() -> None:
    assert {path.name for path in FILES} >= {"epoch.py", "station.py", "tide.py", "model.py"}
    assert set(imported_rooms(ROOT / "model.py")) >= {"answer", "earth", "moon", "path"}
