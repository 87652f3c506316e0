"""The examples of the README run as they are printed there."""

from __future__ import annotations

import doctest
from pathlib import Path


def test_examples_of_the_readme() -> None:
    readme = Path(__file__).parent.parent / "README.md"
    failed, tried = doctest.testfile(str(readme), module_relative=False)
    assert tried > 8
    assert failed == 0
