# SPDX-License-Identifier: Apache-2.0
"""A document of headings, paragraphs, tables, figures and commands, and its three writers: Markdown, HTML, LaTeX."""

from __future__ import annotations

import html
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

from .formats import _laid_out, latex_text, markdown_of, text_cell
from .plain import plain
from .tables import Table, columns_of


@dataclass(frozen=True)
class Heading:
    """A section's title."""

    text: str


@dataclass(frozen=True)
class Paragraph:
    """Plain words; ``strong`` for the verdict."""

    text: str
    strong: bool = False


@dataclass(frozen=True)
class Items:
    """A list of short paragraphs."""

    texts: tuple[str, ...]


@dataclass(frozen=True)
class Code:
    """Commands or a chart in characters, as they are."""

    text: str


@dataclass(frozen=True)
class Figure:
    """A chart with its caption: SVG text, or characters where the figures extra is not installed; pdf(path) writes it for LaTeX."""

    name: str
    caption: str
    svg: str | None
    characters: str
    pdf: Callable[[Path], None] | None = None


Block = Heading | Paragraph | Items | Code | Figure | Table


@dataclass(frozen=True)
class Document:
    """A title and its blocks in order."""

    title: str
    blocks: tuple[Block, ...]


def write_document(document: Document, path: Path) -> list[Path]:
    """Write .md, .html or .tex; figures go beside Markdown and LaTeX in a folder of the same stem. Returns what was written."""
    written: list[Path] = []
    text = {".md": _markdown, ".html": _html, ".htm": _html, ".tex": _latex}[path.suffix.lower()](document, path, written)
    path.write_text(text, encoding="utf-8", newline="\n")
    return [path, *written]


def _figure_folder(path: Path) -> Path:
    folder = path.with_name(path.stem + "_figures")
    folder.mkdir(exist_ok=True)
    return folder


def _markdown(document: Document, path: Path, written: list[Path]) -> str:
    out = [f"# {plain(document.title)}", ""]
    for b in document.blocks:
        if isinstance(b, Heading):
            out += [f"## {plain(b.text)}", ""]
        elif isinstance(b, Paragraph):
            out += [f"**{plain(b.text)}**" if b.strong else plain(b.text), ""]
        elif isinstance(b, Items):
            out += [*(f"- {plain(t)}" for t in b.texts), ""]
        elif isinstance(b, Code):
            out += ["```text", b.text.rstrip("\n"), "```", ""]
        elif isinstance(b, Figure):
            if b.svg is not None:
                target = _figure_folder(path) / f"{b.name}.svg"
                target.write_text(b.svg, encoding="utf-8", newline="\n")
                written.append(target)
                out += [f"![{plain(b.caption)}]({target.parent.name}/{target.name})", "", f"*{plain(b.caption)}*", ""]
            else:
                out += ["```text", b.characters.rstrip("\n"), "```", "", f"*{plain(b.caption)}*", ""]
        else:
            out += [markdown_of(b), ""]
    return "\n".join(out).rstrip() + "\n"


_STYLE = """
:root { --ink: #1c2321; --faint: #5c6662; --line: #c9d0cc; --tint: #f1f4f2; --mark: #8a5a00; color-scheme: light; }
* { box-sizing: border-box; }
body { margin: 0 auto; padding: 1.5rem 1.1rem 4rem; max-width: 62rem; color: var(--ink); background: #fff;
  font: 1rem/1.55 Charter, "Bitstream Charter", "Source Serif 4", Georgia, serif; }
h1 { font-size: 1.7rem; line-height: 1.2; margin: .5rem 0 1rem; }
h2 { font-size: 1.2rem; margin: 2.4rem 0 .6rem; padding-top: .6rem; border-top: 1px solid var(--line); }
p, li { max-width: 46rem; }
.verdict { border-left: .3rem solid var(--mark); padding: .6rem 0 .6rem 1rem; margin: 1rem 0 1.4rem; font-size: 1.08rem; }
.scroll { overflow-x: auto; margin: .4rem 0 1.2rem; }
table { border-collapse: collapse; font: .86rem/1.4 "Helvetica Neue", Arial, sans-serif; font-variant-numeric: tabular-nums; }
caption { text-align: left; font-weight: 600; padding: .2rem 0 .4rem; max-width: 46rem; }
th { text-align: left; font-weight: 600; color: var(--faint); border-bottom: 2px solid var(--ink); padding: .25rem .8rem .25rem 0; vertical-align: bottom; }
td { padding: .22rem .8rem .22rem 0; border-bottom: 1px solid var(--line); vertical-align: top; }
th.n, td.n { text-align: right; white-space: nowrap; }
.below { color: var(--faint); font-size: .86rem; margin: -.8rem 0 1.2rem; }
figure { margin: 1rem 0 1.6rem; } figure svg { width: 100%; height: auto; max-width: 52rem; }
figcaption { color: var(--faint); font-size: .9rem; max-width: 46rem; }
pre { background: var(--tint); padding: .7rem .9rem; overflow-x: auto; font: .8rem/1.35 ui-monospace, Menlo, Consolas, monospace; }
@media (max-width: 40rem) { td:not(.n) { min-width: 7.5rem; } }
@media print { body { max-width: none; padding: 0; font-size: 10pt; } h2 { break-after: avoid; } figure, tr { break-inside: avoid; }
  .scroll { overflow: visible; } table { font-size: 7.5pt; } pre { white-space: pre-wrap; } }
"""


def _html(document: Document, path: Path, written: list[Path]) -> str:
    def safe(text: str) -> str:
        return html.escape(plain(text))

    out = ["<!doctype html>", '<html lang="en"><head><meta charset="utf-8">', '<meta name="viewport" content="width=device-width, initial-scale=1">',
           f"<title>{safe(document.title)}</title><style>{_STYLE}</style></head><body>", f"<h1>{safe(document.title)}</h1>"]  # fmt: skip
    for b in document.blocks:
        if isinstance(b, Heading):
            out.append(f"<h2>{safe(b.text)}</h2>")
        elif isinstance(b, Paragraph):
            out.append(f'<p class="verdict">{safe(b.text)}</p>' if b.strong else f"<p>{safe(b.text)}</p>")
        elif isinstance(b, Items):
            out += ["<ul>", *(f"<li>{safe(t)}</li>" for t in b.texts), "</ul>"]
        elif isinstance(b, Code):
            out.append(f"<pre>{html.escape(b.text)}</pre>")
        elif isinstance(b, Figure):
            inner = b.svg[b.svg.index("<svg") :] if b.svg is not None else f"<pre>{html.escape(b.characters)}</pre>"
            out += ["<figure>", inner, f"<figcaption>{safe(b.caption)}</figcaption></figure>"]
        else:
            out.append(html_of(b))
    return "\n".join([*out, "</body></html>", ""])


def html_of(table: Table) -> str:
    """One table as HTML with its question as caption."""
    columns = _laid_out(table)
    head = f"<caption>{html.escape(plain(table.question))}</caption>" if table.question else ""
    if table.shown.empty:
        return f"<p><strong>{html.escape(plain(table.question))}</strong> {html.escape(table.empty)}</p>"
    out = [f'<div class="scroll"><table>{head}<thead><tr>']
    mark = [' class="n"' if c.kind not in ("text", "yes") else "" for c in columns]
    out.append("".join(f"<th{m}>{html.escape(plain(c.header))}</th>" for c, m in zip(columns, mark, strict=True)) + "</tr></thead><tbody>")
    for row in table.shown[[c.key for c in columns]].itertuples(index=False, name=None):
        out.append("<tr>" + "".join(f"<td{m}>{html.escape(text_cell(v, c))}</td>" for v, c, m in zip(row, columns, mark, strict=True)) + "</tr>")
    out.append("</tbody></table></div>")
    if table.below:
        out.append('<p class="below">' + "<br>".join(html.escape(plain(t)) for t in table.below) + "</p>")
    return "\n".join(out)


def _latex(document: Document, path: Path, written: list[Path]) -> str:
    safe = latex_text
    # other scripts than Latin in titles: compile with LuaLaTeX, which reads them all
    out = [r"\documentclass[11pt]{article}", r"\usepackage{iftex}",
           r"\ifPDFTeX\usepackage[utf8]{inputenc}\usepackage[T1]{fontenc}\else\usepackage{fontspec}\fi", r"\usepackage{graphicx,array,longtable}",
           r"\usepackage[margin=22mm]{geometry}", rf"\title{{{safe(document.title)}}}", r"\date{}", r"\begin{document}", r"\maketitle"]  # fmt: skip
    for b in document.blocks:
        if isinstance(b, Heading):
            out.append(rf"\section*{{{safe(b.text)}}}")
        elif isinstance(b, Paragraph):
            out += [rf"\textbf{{{safe(b.text)}}}" if b.strong else safe(b.text), ""]
        elif isinstance(b, Items):
            out += [r"\begin{itemize}", *(rf"\item {safe(t)}" for t in b.texts), r"\end{itemize}"]
        elif isinstance(b, Code):
            out += [r"\begin{verbatim}", b.text.rstrip("\n"), r"\end{verbatim}"]
        elif isinstance(b, Figure):
            if b.pdf is not None:
                target = _figure_folder(path) / f"{b.name}.pdf"
                b.pdf(target)
                written.append(target)
                out += [r"\begin{figure}[htbp]\centering", rf"\includegraphics[width=\linewidth]{{{target.parent.name}/{target.name}}}",
                        rf"\caption{{{safe(b.caption)}}}", r"\end{figure}"]  # fmt: skip
            else:
                out += [r"\begin{verbatim}", b.characters.rstrip("\n"), r"\end{verbatim}", safe(b.caption), ""]
        else:
            out.append(_long_table(b))
    return "\n".join([*out, r"\end{document}", ""])


PAGE = 118  # characters of a table's line at the size used below


def _long_table(table: Table) -> str:
    """A table that runs over pages; columns that do not fit the page are left out and named, as on a narrow screen."""
    from rich.cells import cell_len

    from .terminal import fitting

    if table.shown.empty:
        return rf"\textbf{{{latex_text(table.question)}}} {latex_text(table.empty)}" + "\n"
    columns, dropped, cells = fitting(replace(table, columns=tuple(c for c in table.columns or columns_of(table.shown) if c.kind != "bar")), PAGE)
    natural = {c.key: max(cell_len(t) for t in (c.header, *cells[c.key])) for c in columns}
    room = PAGE - sum(n + 2 for k, n in natural.items() if n <= 24)
    wide = [c.key for c in columns if natural[c.key] > 24]
    share = {k: max(14.0, min(natural[k], room * natural[k] / sum(natural[w] for w in wide))) / PAGE for k in wide}
    spec = "".join(rf">{{\raggedright\arraybackslash}}p{{{share[c.key]:.3f}\linewidth}}" if c.key in share else "l" if c.kind == "text" else "r" for c in columns)
    lines = [r"{\scriptsize\setlength{\tabcolsep}{3pt}", rf"\begin{{longtable}}[l]{{@{{}}{spec}@{{}}}}",
             rf"\multicolumn{{{len(columns)}}}{{@{{}}p{{\linewidth}}@{{}}}}{{\textbf{{{latex_text(table.question or table.name)}}}}}\\",
             r"\hline", " & ".join(latex_text(c.header) for c in columns) + r" \\ \hline", r"\endhead"]  # fmt: skip
    lines += [" & ".join(latex_text(cells[c.key][i]) for c in columns) + r" \\" for i in range(len(table.shown))]
    lines += [r"\hline", r"\end{longtable}"]
    below = [*table.below, *([f"not shown at this width: {', '.join(c.header for c in dropped)}"] if dropped else [])]
    return "\n".join([*lines, *(latex_text(t) + r"\\" for t in below), "}", ""])
