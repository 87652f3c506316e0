"""Formulas as MathML: browsers set it themselves, without a script or a network."""

from __future__ import annotations

import re
from typing import Any

from docutils import nodes
from docutils.utils.math.latex2mathml import tex2mathml


def mathml(node: nodes.Element, as_block: bool) -> str:
    r"""A formula in MathML. The converter knows ``\Bigl`` and not ``\Big``, which look the same."""
    formula = re.sub(r"\\([bB]igg?)(?![a-zA-Z])", r"\\\1l", node.astext())
    return tex2mathml(formula, as_block=as_block)


def inline(writer: Any, node: nodes.Element) -> None:
    """A formula in a line of text."""
    writer.body.append(mathml(node, as_block=False))
    raise nodes.SkipNode


def display(writer: Any, node: nodes.Element) -> None:
    """A formula of its own; wide ones scroll."""
    writer.body.append(f'<div class="math-display">{mathml(node, as_block=True)}</div>')
    raise nodes.SkipNode


def setup(app: Any) -> dict[str, bool]:
    """Register the renderer with Sphinx."""
    app.add_html_math_renderer("mathml", (inline, None), (display, None))
    return {"parallel_read_safe": True, "parallel_write_safe": True}
