"""Every link inside a built site leads to a page, a file and an anchor that exist.

Usage: ``python docs/links.py docs/_build/html``. Exits non-zero on a broken link; links to other
sites are counted and not followed.
"""

from __future__ import annotations

import sys
from functools import cache
from html.parser import HTMLParser
from pathlib import Path
from urllib.parse import unquote, urlsplit


class Page(HTMLParser):
    """Links and anchors of a page."""

    def __init__(self) -> None:
        super().__init__()
        self.links: list[str] = []
        self.anchors: set[str] = set()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        """Note what the element links to, and its name."""
        told = {name: value for name, value in attrs if value is not None}
        self.links += [told[name] for name in ("href", "src") if name in told]
        self.anchors |= {told[name] for name in ("id", "name") if name in told}


@cache
def read(path: Path) -> Page:
    """A page of the site."""
    page = Page()
    page.feed(path.read_text(encoding="utf-8"))
    return page


def broken(path: Path, link: str) -> str | None:
    """Why a link of a page leads nowhere; None if it does."""
    parts = urlsplit(link)
    if parts.scheme or parts.netloc:
        return None
    there = (path.parent / unquote(parts.path)).resolve() if parts.path else path
    if not there.is_file():
        return "no such file"
    anchor = unquote(parts.fragment)
    if anchor and there.suffix == ".html" and anchor not in read(there).anchors:
        return "no such anchor"
    return None


def main() -> int:
    site = Path(sys.argv[1]).resolve()
    pages = [p for p in sorted(site.rglob("*.html")) if "_static" not in p.parts]
    links = [(path, link) for path in pages for link in read(path).links]
    outside = sum(1 for _, link in links if urlsplit(link).netloc)
    missed = [(path, link, why) for path, link in links if (why := broken(path, link))]
    for path, link, why in missed:
        print(f"{path.relative_to(site)}: {link}: {why}")
    print(f"{len(links)} links, {outside} of them to other sites, {len(missed)} broken")
    return int(bool(missed) or not links)


if __name__ == "__main__":
    sys.exit(main())
