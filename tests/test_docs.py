"""The documentation is true: its examples run, its links lead somewhere, its sizes are found.

Blocks of ```python with ``>>>`` are run by doctest, blocks of ```console by the command line, both
in a copy of docs/examples. Printed numbers may differ by a few units of their last digit, and by
3e-12 of their size: Earth orientation of past days is still improved by that much.
"""

from __future__ import annotations

import doctest
import json
import re
import shlex
import shutil
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

import lighttime as lt
from lighttime.cli import main

DOCS = Path(__file__).parent.parent / "docs"
PAGES = sorted(p for p in DOCS.rglob("*.md") if "_build" not in p.parts)
FENCE = re.compile(
    r"^(?P<fence>```+|:::+)(?P<kind>[^\n`]*)\n(?P<body>.*?)^(?P=fence)[ ]*$", re.M | re.S
)
FLAGS = doctest.ELLIPSIS | doctest.NORMALIZE_WHITESPACE

NUMBER = re.compile(r"[+-]?\d+(?:\.\d*)?(?:e[+-]?\d+)?")
UNITS_OF_LAST_DIGIT, OF_THE_SIZE = 5.0, 3e-12


class Checker(doctest.OutputChecker):
    """Texts are to be equal but for the last digits of their numbers."""

    def check_output(self, want: str, got: str, optionflags: int) -> bool:
        """See doctest; ``...`` stands for anything."""
        if super().check_output(want, got, optionflags):
            return True
        want, got = (plain(text) for text in (want, got))
        words = re.split(rf"({NUMBER.pattern}|\.\.\.)", want)
        patterns = [
            ".*?" if w == "..." else f"({NUMBER.pattern})" if NUMBER.fullmatch(w) else re.escape(w)
            for w in words
        ]
        found = re.fullmatch("".join(patterns), got)
        numbers = filter(NUMBER.fullmatch, words)
        return found is not None and all(map(close, numbers, found.groups()))


def plain(text: str) -> str:
    """Digits in one group, and single blanks."""
    text = re.sub(r"(?<=\d) (?=\d{3}\b)", "", text.replace("<BLANKLINE>", ""))
    return " ".join(text.split())


def close(want: str, got: str) -> bool:
    """Whether two numbers are the same but for their last digits."""
    mantissa, _, exponent = want.partition("e")
    unit = 10.0 ** (int(exponent or 0) - len(mantissa.partition(".")[2]))
    whole = "." not in want and not exponent
    margin = 0.0 if whole else UNITS_OF_LAST_DIGIT * unit + OF_THE_SIZE * abs(float(want))
    return abs(float(want) - float(got)) <= margin


def blocks(page: Path, kind: str) -> Iterator[tuple[int, str]]:
    """Fenced blocks of one kind, with the number of the line before each."""
    text = page.read_text(encoding="utf-8")
    for found in FENCE.finditer(text):
        if found["kind"].strip() == kind:
            yield text.count("\n", 0, found.start("body")), found["body"]


def named(page: Path) -> str:
    return page.relative_to(DOCS).as_posix()


@pytest.fixture
def examples(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A folder with the files of the examples."""
    shutil.copytree(DOCS / "examples", tmp_path, dirs_exist_ok=True)
    monkeypatch.chdir(tmp_path)


@pytest.mark.usefixtures("examples")
@pytest.mark.parametrize("page", PAGES, ids=named)
def test_python_examples(page: Path) -> None:
    parser = doctest.DocTestParser()
    runner = doctest.DocTestRunner(Checker(), optionflags=FLAGS, verbose=False)
    names: dict[str, object] = {"__name__": "__main__"}
    told: list[str] = []
    pieces = list(blocks(page, "python"))
    assert all(body.startswith(">>>") for _, body in pieces), "an example that is not run"
    for module in re.findall(r"^>>> (?:import|from) (\w+)", "".join(b for _, b in pieces), re.M):
        pytest.importorskip(module)
    for line, body in pieces:
        test = parser.get_doctest(body, names, named(page), str(page), line)
        runner.run(test, out=told.append, clear_globs=False)
        names = test.globs
    assert not told, "".join(told)


@pytest.mark.usefixtures("examples")
@pytest.mark.parametrize("page", PAGES, ids=named)
def test_console_examples(page: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for line, body in blocks(page, "console"):
        for command, want in sessions(body):
            words = shlex.split(command)
            assert words[0] == "lighttime", f"{page}, line {line}: {command}"
            main(words[1:])
            got = capsys.readouterr()
            text = got.out + got.err
            assert Checker().check_output(want or "...", text, FLAGS), f"line {line}:\n{text}"


def sessions(body: str) -> Iterator[tuple[str, str]]:
    """Commands, which a backslash carries on, and what they print."""
    for part in re.split(r"^\$ ", body, flags=re.M)[1:]:
        command, _, output = re.sub(r"\\\n\s*", "", part).partition("\n")
        yield command, output


def test_there_are_examples() -> None:
    assert sum(1 for page in PAGES for _ in blocks(page, "python")) > 20
    assert sum(1 for page in PAGES for _ in blocks(page, "console")) > 3


# -- links and figures ---------------------------------------------------------------------------


def slug(heading: str) -> str:
    """The anchor of a heading."""
    text = re.sub(r"[`*$]", "", heading.strip().lower())
    return re.sub(r"[^\w\- ]", "", text).replace(" ", "-")


@pytest.mark.parametrize("page", PAGES, ids=named)
def test_links_lead_somewhere(page: Path) -> None:
    text = FENCE.sub("", page.read_text(encoding="utf-8"))
    for target in re.findall(r"\]\(([^)\s]+)\)", text):
        if re.match(r"https?://", target):
            continue
        path, _, anchor = target.partition("#")
        there = page.parent / path if path else page
        assert there.is_file(), f"{target} does not exist"
        if anchor:
            headings = re.findall(r"^#+ (.+)$", there.read_text(encoding="utf-8"), re.M)
            labels = re.findall(r"^\(([\w-]+)\)=$", there.read_text(encoding="utf-8"), re.M)
            assert anchor in {*map(slug, headings), *labels}, f"{target}: no such heading"


@pytest.mark.parametrize("page", PAGES, ids=named)
def test_images_and_files_exist(page: Path) -> None:
    text = page.read_text(encoding="utf-8")
    named_files = re.findall(r"\{(?:image|figure|literalinclude|include)\} (\S+)", text)
    for name in named_files:
        assert (page.parent / name).is_file(), name


def test_every_figure_is_used_and_small() -> None:
    text = "".join(page.read_text(encoding="utf-8") for page in PAGES)
    for figure in (DOCS / "figures").glob("*.svg"):
        assert f"figures/{figure.name}" in text, f"{figure.name} is on no page"
        assert figure.stat().st_size < 150_000


# -- sizes ---------------------------------------------------------------------------------------


def test_sizes_are_those_of_the_library() -> None:
    """A smaller sample of the same stations stays within the sizes, and fills half of them."""
    sys.path.insert(0, str(DOCS / "figures"))
    try:
        import sizes
    finally:
        sys.path.pop(0)
    limits = json.loads(sizes.FILE.read_text(encoding="utf-8"))["limits_mm"]
    found = sizes.extremes(each=60)
    assert set(found) == set(limits)
    for name, (least, most) in found.items():
        low, high = limits[name]
        margin = 0.02 * (high - low)
        assert low - margin <= least <= most <= high + margin, name
        assert most - least > 0.5 * (high - low), name


def test_every_term_has_a_page_with_its_size() -> None:
    theory = "".join(p.read_text(encoding="utf-8") for p in (DOCS / "theory").glob("*.md"))
    for term in lt.TERMS:
        assert f"`{term}`" in theory, f"no page of the theory speaks of {term}"
        if term != "residual_motion":
            assert f"size_{term}" in theory
