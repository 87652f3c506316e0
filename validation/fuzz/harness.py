"""What the fuzzers of the readers share: how a file is mangled, and what counts as a fault.

A reader gets mangled files for some minutes. It may answer or raise `LighttimeError`; any other
exception, a warning, an input that takes longer than 10 s or 500 MB of memory is a fault, ends
the run with a non-zero status and leaves the input in the folder of faults.

    python validation/fuzz/blq_file.py 600 faults/

Needs `atheris`. Inputs are kept short, so that many are tried; files as large as the readers
take are tried in `large_files.py`.
"""

from __future__ import annotations

import os
import random
import re
import resource
import signal
import sys
import time
import warnings
from collections.abc import Callable, Mapping, Sequence
from importlib import import_module
from pathlib import Path
from shutil import rmtree
from tempfile import mkdtemp

import atheris

READERS = (
    *(f"lighttime.earth.{name}" for name in ("blq", "site_file", "residual_file", "series_files")),
    *(f"lighttime.earth.{name}" for name in ("sinex", "sinex_blocks", "sinex_site", "sinex_text")),
    *(f"lighttime.timescales.{name}" for name in ("text", "reading", "epoch", "leapseconds")),
    "lighttime.commands.epoch_file",
    *(f"lighttime.crosscheck.{name}" for name in ("tables", "decimals", "ranges", "columns")),
    *(f"lighttime.ephemeris.{name}" for name in ("files", "time_file")),
)
with atheris.instrument_imports(include=[*READERS, "tomllib", "csv"]):
    for reader in READERS:  # the fuzzer sees the branches of what is imported here
        import_module(reader)

from lighttime.errors import LighttimeError  # noqa: E402 (not before)

LONGEST_INPUT = 8000
SLOWEST_S = 10
MOST_MB = 500

STRANGE = (
    *(b"", b" ", b"\t", b"\0", b"\r", b"\n", b"\x0b", b"\x1c", b"\x85", b"\xff", b"\xb2", b"\xb9"),
    *(b"0", b"-0", b"-1", b"1", b"1_0", b"99999", b"9" * 400, b"1e308", b"-1e308", b"1e999"),
    *(b"1e-320", b"nan", b"inf", b"-inf", b"0x" + b"f" * 5000, b"None", b"true", b"%s", b"{}"),
    *("\u0663".encode(), "\u2028".encode(), "\ufeff".encode(), "\U0001d7d9".encode()),
    *(b'"', b"'", b"#", b",", b";", b":", b"=", b"[", b"]", b"[" * 3000, b"a." * 1500, b"\\u0000"),
    *(b"..", b"/", b"\\", b"*", b"+", b"-", b"%", b"$$"),
)
"""What is put where a word was: numbers that are none, digits of other scripts, line ends."""

_WORD = re.compile(rb"[^\s,;=\[\]\"':]+")


def fuzz(
    read: Callable[[Path], object],
    seeds: Sequence[bytes],
    beside: Mapping[str, bytes] | None = None,
) -> None:
    """Give a reader mangled files; does not return.

    Parameters
    ----------
    read : callable
        Takes a file; the reader, and what is usually done with the answer.
    seeds : sequence of bytes
        Good files to begin with.
    beside : mapping of str to bytes, optional
        Good files in the same folder, for readers of files that name others.
    """
    warnings.simplefilter("error")
    signal.signal(signal.SIGVTALRM, _too_slow)
    seconds = float(sys.argv[1]) if len(sys.argv) > 1 else 60.0
    faults = Path(sys.argv[2] if len(sys.argv) > 2 else "faults")
    faults.mkdir(parents=True, exist_ok=True)
    folder = Path(mkdtemp())
    corpus, path = folder / "corpus", folder / "input"
    corpus.mkdir()
    for name, content in (beside or {}).items():
        (folder / name).write_bytes(content)
    for number, seed in enumerate(seeds):
        (corpus / f"seed{number}").write_bytes(seed)
        path.write_bytes(seed)
        read(path)  # fills caches, and shows a seed that is no good file
    clock = _Clock(seconds)

    def one(data: bytes) -> None:
        path.unlink(missing_ok=True)  # a reader may still have the one before mapped
        path.write_bytes(data)
        signal.setitimer(signal.ITIMER_VIRTUAL, SLOWEST_S)
        try:
            read(path)
        except LighttimeError as error:
            str(error)
        finally:
            signal.setitimer(signal.ITIMER_VIRTUAL, 0.0)
        if clock.over():
            rmtree(folder)
            print(f"\n{Path(sys.argv[0]).stem}: no fault, {clock}", flush=True)
            os._exit(0)

    options = {
        "max_len": LONGEST_INPUT,
        "rss_limit_mb": MOST_MB,
        "seed": 1,
        "timeout": 86400,  # pauses would count; see `_too_slow`
        "artifact_prefix": f"{faults}/{Path(sys.argv[0]).stem}-",
    }
    arguments = [sys.argv[0], *(f"-{key}={value}" for key, value in options.items()), str(corpus)]
    atheris.Setup(arguments, one, custom_mutator=mangled)
    atheris.Fuzz()


class Slow(BaseException):
    """A file that took too long: no `Exception`, so that no reader takes it for a broken file."""


def _too_slow(*_: object) -> None:
    raise Slow(f"more than {SLOWEST_S} s for one file")


class _Clock:
    """How long files were read. Pauses, as of a process that is stopped, do not count."""

    def __init__(self, seconds: float) -> None:
        self.seconds, self.worked, self.inputs = seconds, 0.0, 0
        self.last = time.monotonic()

    def over(self) -> bool:
        """Count one file more; whether time is up."""
        now = time.monotonic()
        self.worked += min(now - self.last, 1.0)
        self.last = now
        self.inputs += 1
        return self.worked > self.seconds

    def __str__(self) -> str:
        memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0
        cpu = time.process_time()
        return (
            f"{self.inputs} files in {self.worked:.0f} s (processor {cpu:.0f} s), {memory:.0f} MB"
        )


def mangled(data: bytes, longest: int, seed: int) -> bytes:
    """An input with some of its lines, words or bytes changed."""
    chance = random.Random(seed)
    for _ in range(chance.choice((1, 1, 2, 4))):
        kind = chance.randrange(4)
        if kind == 0:
            data = bytes(atheris.Mutate(data, longest))
        elif kind == 1:
            data = _other_lines(data, chance)
        else:
            data = _other_word(data, chance)
    return data[:longest]


def _other_lines(data: bytes, chance: random.Random) -> bytes:
    lines = data.splitlines(keepends=True)
    if not lines:
        return data
    a, b = chance.randrange(len(lines)), chance.randrange(len(lines))
    kind = chance.randrange(4)
    if kind == 0:
        del lines[a : a + chance.choice((1, 1, 2, 5))]
    elif kind == 1:
        lines.insert(b, lines[a])
    elif kind == 2:
        lines[a], lines[b] = lines[b], lines[a]
    else:
        lines[a] = lines[a][: chance.randrange(len(lines[a]))] + lines[b]
    return b"".join(lines)


def _other_word(data: bytes, chance: random.Random) -> bytes:
    words = list(_WORD.finditer(data))
    if not words:
        return data + chance.choice(STRANGE)
    place = chance.choice(words)
    new = chance.choice(STRANGE) if chance.random() < 0.6 else chance.choice(words)[0]
    if chance.random() < 0.5:  # columns stay where they are
        new = new[: len(place[0])].rjust(len(place[0]))
    return data[: place.start()] + new + data[place.end() :]
