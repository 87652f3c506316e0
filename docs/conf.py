"""Sphinx configuration: MyST pages, numpydoc reference; `sphinx-build -W docs docs/_build/html`."""

from __future__ import annotations

import json
import sys
from pathlib import Path

HERE = Path(__file__).parent
sys.path.insert(0, str(HERE / "_ext"))

from lighttime.version import __version__  # noqa: E402

project = "lighttime"
author = "the lighttime contributors"
copyright = "the lighttime contributors"
release = version = __version__

extensions = [
    "myst_parser",
    "numpydoc",
    "sphinx.ext.autodoc",
    "sphinx.ext.autosummary",
    "command_help",
    "mathml",
    "signatures",
]
exclude_patterns = ["_build", "examples", "figures/*.md"]
default_role = "py:obj"

# -- pages -----------------------------------------------------------------------------------------

myst_enable_extensions = ["dollarmath", "colon_fence", "deflist", "substitution"]
myst_heading_anchors = 3
myst_substitutions = json.loads((HERE / "figures" / "sizes.json").read_text())["told"]
"""How large each term is, as `figures/sizes.py` found it."""

# -- reference -------------------------------------------------------------------------------------

autodoc_typehints = "none"  # types are in the docstrings
autodoc_member_order = "bysource"
autodoc_default_options = {"members": True}
autosummary_generate = False
numpydoc_show_class_members = False
numpydoc_xref_param_type = False

# -- html ------------------------------------------------------------------------------------------

html_theme = "pydata_sphinx_theme"
html_title = f"lighttime {release}"
html_static_path = ["_static"]
html_css_files = ["lighttime.css"]
html_math_renderer = "mathml"
html_show_sourcelink = False
html_copy_source = False
html_theme_options = {
    "logo": {"text": "lighttime"},
    "show_prev_next": True,
    "secondary_sidebar_items": ["page-toc"],
    "navbar_end": ["theme-switcher"],
    "footer_start": ["copyright"],
    "footer_end": [],
    "show_nav_level": 2,
}
html_sidebars = {page: [] for page in ("index", "start", "timescales", "accuracy")}
