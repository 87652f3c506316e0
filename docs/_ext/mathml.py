"""Formulas as MathML: browsers set it themselves, without a script or a network."""

from __future__ import annotations

from typing import Any

from docutils import nodes
from docutils.utils.math.latex2mathml import tex2mathml


def inline(writer: Any, node: nodes.Element) -> None:
    """A formula in a line of text."""
    writer.body.append(tex2mathml(node.astext(), as_block=False))
    raise nodes.SkipNode


def display(writer: Any, node: nodes.Element) -> None:
    """A formula of its own; wide ones scroll."""
    writer.body.append(
        f'<div class="math-display">{tex2mathml(node.astext(), as_block=True)}</div>'
    )
    raise nodes.SkipNode


def setup(app: Any) -> dict[str, bool]:
    """Register the renderer with Sphinx."""
    app.add_html_math_renderer("mathml", (inline, None), (display, None))
    return {"parallel_read_safe": True, "parallel_write_safe": True}
