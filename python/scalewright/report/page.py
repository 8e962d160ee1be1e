"""A page of HTML in one file: headings, words, tables, pictures; no script, nothing from outside."""

from __future__ import annotations

import base64
import html
from collections.abc import Sequence
from typing import Any

from ..plot import png_of, svg_of

__all__ = ["Page"]

# Black on white, and told apart by weight and line alone: it prints in grey.
_STYLE = """
body { font: 15px/1.45 Georgia, serif; color: #111; background: #fff; max-width: 64em; margin: 2em auto;
       padding: 0 1em; }
h1, h2, h3 { font-family: Helvetica, Arial, sans-serif; line-height: 1.2; }
h1 { font-size: 1.7em; } h2 { font-size: 1.25em; border-bottom: 1px solid #888; margin-top: 2em; }
nav { font: 13px Helvetica, Arial, sans-serif; } nav a { margin-right: 1em; white-space: nowrap; }
a { color: #111; }
table { border-collapse: collapse; font: 13px Helvetica, Arial, sans-serif; margin: 1em 0; }
caption { text-align: left; font-style: italic; padding-bottom: .3em; }
th, td { padding: .15em .8em; text-align: right; border-bottom: 1px solid #ccc; }
th { border-bottom: 1px solid #333; } th:first-child, td:first-child, .words td { text-align: left; }
pre { font: 12px/1.35 Menlo, Consolas, monospace; background: #f4f4f4; padding: .7em; overflow-x: auto; }
figure { margin: 1em 0; } img { max-width: 100%; } figcaption { font-style: italic; }
.warning { border: 2px solid #111; padding: .4em .8em; font-weight: bold; }
@media print { nav { display: none; } body { margin: 0; max-width: none; } }
""".strip()


class Page:
    """What becomes one HTML file.

    Parameters
    ----------
    title : str
    """

    def __init__(self, title: str) -> None:
        self.title = title
        self._parts: list[str] = []
        self._places: list[tuple[str, str]] = []

    def section(self, title: str) -> None:
        """Begin a section."""
        place = f"s{len(self._places) + 1}"
        self._places.append((place, title))
        self._parts.append(f'<h2 id="{place}">{html.escape(title)}</h2>')

    def heading(self, title: str) -> None:
        """Begin a part of a section."""
        self._parts.append(f"<h3>{html.escape(title)}</h3>")

    def say(self, text: str) -> None:
        """Add a paragraph."""
        self._parts.append(f"<p>{html.escape(text)}</p>")

    def warn(self, text: str) -> None:
        """Add a paragraph in a frame."""
        self._parts.append(f'<p class="warning">{html.escape(text)}</p>')

    def lines(self, items: Sequence[str]) -> None:
        """Add a list."""
        self._parts.append(f"<ul>{''.join(f'<li>{html.escape(item)}</li>' for item in items)}</ul>")

    def verbatim(self, text: str) -> None:
        """Add text as it stands."""
        self._parts.append(f"<pre>{html.escape(text)}</pre>")

    def table(
        self, head: Sequence[str], rows: Sequence[Sequence[str]], caption: str = "", *, words: bool = False
    ) -> None:
        """Add a table: the first column to the left, the others, of numbers, to the right; or `words`."""
        above = f"<caption>{html.escape(caption)}</caption>" if caption else ""
        top = "".join(f"<th>{html.escape(word)}</th>" for word in head)
        body = "".join(f"<tr>{''.join(f'<td>{html.escape(word)}</td>' for word in row)}</tr>" for row in rows)
        kind = ' class="words"' if words else ""
        self._parts.append(f"<table{kind}>{above}<tr>{top}</tr>{body}</table>")

    def figure(self, figure: Any, caption: str, *, dots: bool = False) -> None:
        """Add a picture made by matplotlib: lines, or dots (PNG) where there are very many of them."""
        kind, data = ("png", png_of(figure)) if dots else ("svg+xml", svg_of(figure))
        source = f"data:image/{kind};base64,{base64.b64encode(data).decode()}"
        words = html.escape(caption)
        picture = f'<img alt="{words}" src="{source}">'
        self._parts.append(f"<figure>{picture}<figcaption>{words}</figcaption></figure>")

    def text(self) -> str:
        """Return the page."""
        links = "\n".join(f'<a href="#{place}">{html.escape(title)}</a>' for place, title in self._places)
        title = html.escape(self.title)
        head = f'<meta charset="utf-8"><title>{title}</title><style>{_STYLE}</style>'
        body = "\n".join([f"<h1>{title}</h1>", f"<nav>{links}</nav>", *self._parts])
        return f'<!DOCTYPE html>\n<html lang="en"><head>{head}</head>\n<body>\n{body}\n</body></html>\n'
