"""Signatures of dataclasses without the long texts that some of their defaults are."""

from __future__ import annotations

import re
from typing import Any

LONGEST = 30


def shortened(
    app: Any, what: str, name: str, obj: Any, options: Any, signature: str, returned: str
) -> tuple[str, str] | None:
    """A default that is an object with arguments is told by its class alone."""
    if not signature or len(signature) < LONGEST:
        return None
    pattern = rf"=(\w+)\((?:[^()]|\([^()]*\)){{{LONGEST},}}\)"
    return re.sub(pattern, r"=\1()", signature), returned


def setup(app: Any) -> dict[str, bool]:
    """Listen to autodoc."""
    app.connect("autodoc-process-signature", shortened)
    return {"parallel_read_safe": True, "parallel_write_safe": True}
