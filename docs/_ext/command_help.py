"""The directive ``command-help``: what ``lighttime COMMAND --help`` prints, asked for at build."""

from __future__ import annotations

import os
from argparse import _SubParsersAction
from typing import Any

from docutils import nodes
from docutils.parsers.rst import Directive

from lighttime.cli import parser

COLUMNS = "84"


class CommandHelp(Directive):
    """Help of one command, or of the whole command line without an argument."""

    optional_arguments = 1

    def run(self) -> list[nodes.Node]:
        """A block of text."""
        before = os.environ.get("COLUMNS")
        os.environ["COLUMNS"] = COLUMNS
        try:
            text = help_of(self.arguments[0] if self.arguments else None)
        finally:
            os.environ.pop("COLUMNS")
            if before is not None:
                os.environ["COLUMNS"] = before
        block = nodes.literal_block(text, text)
        block["language"] = "text"
        return [block]


def help_of(command: str | None) -> str:
    """The text of the help."""
    top = parser()
    if command is None:
        return top.format_help()
    (commands,) = (a for a in top._actions if isinstance(a, _SubParsersAction))
    text: str = commands.choices[command].format_help()
    return text


def setup(app: Any) -> dict[str, bool]:
    """Register the directive with Sphinx."""
    app.add_directive("command-help", CommandHelp)
    return {"parallel_read_safe": True, "parallel_write_safe": True}
