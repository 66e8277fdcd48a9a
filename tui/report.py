"""The printed sheet as text, and as one HTML page that needs nothing but itself."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

from tui.columns import WIDTH, columns, paragraph
from tui.harmless import UNSEEN
from tui.pictures import chart_svg, curve_svg, legend, scale_svg

if TYPE_CHECKING:
    from tui.curve_pictures import Picture
    from tui.page_parts import Block, Page

POLICY = "default-src 'none'; style-src 'unsafe-inline'"
STYLE = """
body{font:11pt/1.35 sans-serif;color:#111;background:#fff;margin:1.5em auto;max-width:52em;padding:0 1em}
h1{font-size:1.35em;border-bottom:2px solid #111;margin:0 0 .5em}
h2{font-size:1em;margin:1em 0 .2em;border-bottom:1px solid #999}
table{border-collapse:collapse;width:100%}
th,td{text-align:left;vertical-align:top;padding:.1em .6em .1em 0;border-bottom:1px solid #ddd}
th{font-weight:normal;color:#555}
dl{display:grid;grid-template-columns:8em 1fr;margin:0}
dt{color:#555}dd{margin:0}
ul{margin:.2em 0;padding-left:1.2em}
.stop{border:3px solid #111;padding:.4em .6em;font-weight:bold;margin:.6em 0}
footer{margin-top:1.5em;font-size:.85em;border-top:1px solid #999}
@media print{body{margin:0;max-width:none}}
"""


def as_text(page: Page) -> list[str]:
    """Return the sheet as lines of eighty columns."""
    lines = [*paragraph(page.title), "=" * min(WIDTH, len(page.title))]
    lines += paragraph(page.warning, first="! ") if page.warning else []
    for label, value in page.facts:
        lines += paragraph(value, first=f"{label + ':':<12}")
    for block in page.blocks:
        if block.pictures:  # drawn on the HTML page only
            continue
        lines += ["", block.title, "-" * len(block.title), *_block_text(block)]
    return [*lines, "", *paragraph(page.deferral)]


def as_html(page: Page) -> str:
    """Return the sheet as one HTML page: no scripts, no linked fonts, pictures inline."""
    facts = "".join(f"<dt>{_html(label)}</dt><dd>{_html(value)}</dd>" for label, value in page.facts)
    warning = f'<p class="stop">{_html(page.warning)}</p>' if page.warning else ""
    blocks = "\n".join(
        f"<section><h2>{_html(block.title)}</h2>{_block_html(block)}</section>" for block in page.blocks
    )
    return (
        '<!DOCTYPE html>\n<html lang="en"><head><meta charset="utf-8">'
        f'<meta http-equiv="Content-Security-Policy" content="{POLICY}">'
        f"<title>{_html(page.title)}</title><style>{STYLE}</style></head>\n<body><h1>{_html(page.title)}</h1>"
        f"{warning}<dl>{facts}</dl>\n{blocks}\n<footer>{_html(page.deferral)}</footer></body></html>\n"
    )


def _block_text(block: Block) -> list[str]:
    """Return a block as lines: a table where it fits, else each row as a paragraph."""
    table = columns([row.cells for row in block.rows], head=block.head) if block.rows else []
    if any(len(line) > WIDTH for line in table):
        table = [line for row in block.rows for line in _stacked(block.head, row.cells)]
    return table + [line for sentence in block.sentences for line in paragraph(sentence, rest="    ")]


def _stacked(head: tuple[str, ...], cells: tuple[str, ...]) -> list[str]:
    """Return a row that is too wide for a line: the first cell, and the others below it with their heads."""
    said = "; ".join(f"{name} {cell}" for name, cell in zip(head[1:], cells[1:], strict=True) if cell)
    return [*paragraph(cells[0]), *paragraph(said, first="    ")]


def _block_html(block: Block) -> str:
    """Return a block as a table, a list or pictures."""
    if block.pictures:
        return "".join(_curve_html(picture) for picture in block.pictures)
    if block.charts:
        pictures = (
            f"<p>{_html(chart.title)}, {_html(chart.unit)}<br/>{chart_svg(chart)}</p>"
            for chart in block.charts
        )
        return _list_html(block.sentences) + "".join(pictures)
    if not block.rows:
        return _list_html(block.sentences)
    drawn = any(row.scale for row in block.rows)
    head = "".join(f"<th>{_html(cell)}</th>" for cell in block.head) + ("<th></th>" if drawn else "")
    body = "".join(
        "<tr>"
        + "".join(f"<td>{_html(cell)}</td>" for cell in row.cells)
        + (f"<td>{scale_svg(row.scale) if row.scale else ''}</td>" if drawn else "")
        + "</tr>"
        for row in block.rows
    )
    return f"<table><thead><tr>{head}</tr></thead><tbody>{body}</tbody></table>"


def _curve_html(picture: Picture) -> str:
    """Return one curve with its title and what its marks mean."""
    title = f"{picture.title}, {picture.y_label} ({legend(picture)})"
    return f"<p>{_html(title)}<br/>{curve_svg(picture)}</p>"


def _list_html(sentences: tuple[str, ...]) -> str:
    """Return sentences as a list."""
    items = "".join(f"<li>{_html(sentence)}</li>" for sentence in sentences)
    return f"<ul>{items}</ul>" if items else ""


def _html(text: str) -> str:
    """Return text as HTML text."""
    return escape(UNSEEN.sub(" ", text))
