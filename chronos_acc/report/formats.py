# SPDX-License-Identifier: Apache-2.0
"""The formats of a page: table, json, csv, markdown, latex. One function each, ``write(page, only, width, colour) -> str``."""

from __future__ import annotations

import json
import math
import re
from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any

from ..errors import WrongUse
from . import numbers
from .plain import plain
from .tables import KINDS, Column, Page, Table, columns_of

if TYPE_CHECKING:
    import pandas as pd


def write(page: Page, *, form: str, only: str | None, width: int, colour: bool, for_spreadsheet: bool = False) -> str:
    """The page in one format. ``only`` names one table; raises WrongUse where the page has none of that name.

    ``for_spreadsheet`` keeps a spreadsheet from running cells of a CSV as formulas; such a file does not load back unchanged.
    """
    if only is not None and only not in [t.name for t in page.tables]:
        raise WrongUse(f"no table {only!r} here; --table takes {', '.join(t.name for t in page.tables) or 'nothing: this command has one table'}")
    if form == "csv" and for_spreadsheet:
        chosen = page.chosen(only)[0] if only else page.main_table()
        return "" if chosen is None else csv_of(chosen.frame, for_spreadsheet=True)
    return FORMATS[form](page, only, width, colour)


def to_json(page: Page, only: str | None, width: int, colour: bool) -> str:
    """One JSON document, full precision, null for what was not computed."""
    document = page.document
    if only is not None:
        document = document[only] if isinstance(document, Mapping) and only in document else _records(page.chosen(only)[0].frame)
    return json.dumps(jsonable(document), ensure_ascii=False, indent=1, allow_nan=False) + "\n"


def to_csv(page: Page, only: str | None, width: int, colour: bool) -> str:
    """The chosen table, else the main one: full precision, true/false, empty where not computed."""
    table = page.chosen(only)[0] if only else page.main_table()
    return "" if table is None else csv_of(table.frame)


def to_markdown(page: Page, only: str | None, width: int, colour: bool) -> str:
    """The chosen table, else the main one, as a pipe table under its question."""
    table = page.chosen(only)[0] if only else page.main_table()
    return "" if table is None else markdown_of(table)


def to_latex(page: Page, only: str | None, width: int, colour: bool) -> str:
    """The chosen table, else the main one, as a tabular with its question as caption."""
    table = page.chosen(only)[0] if only else page.main_table()
    return "" if table is None else latex_of(table)


def to_table(page: Page, only: str | None, width: int, colour: bool) -> str:
    """Terminal tables."""
    from .terminal import draw

    return draw(page, width, colour, only)


FORMATS: dict[str, Callable[[Page, str | None, int, bool], str]] = {
    "table": to_table,
    "json": to_json,
    "csv": to_csv,
    "markdown": to_markdown,
    "latex": to_latex,
}


def jsonable(value: Any) -> Any:
    """Native types only; NaN, inf and missing become None."""
    if value is None or isinstance(value, str | bool):
        return value
    if isinstance(value, Mapping):
        return {str(k): jsonable(v) for k, v in value.items()}
    if isinstance(value, list | tuple | set | frozenset):
        return [jsonable(v) for v in value]
    if isinstance(value, int):
        return value
    if isinstance(value, float):
        return float(value) if math.isfinite(value) else None
    if hasattr(value, "tolist"):  # numpy scalars and arrays
        return jsonable(value.tolist())
    if hasattr(value, "to_dict") and hasattr(value, "columns"):
        return _records(value)
    if numbers.is_missing(value):
        return None
    return str(value)


def _records(frame: pd.DataFrame) -> list[dict[str, Any]]:
    columns = [str(c) for c in frame.columns]
    return [dict(zip(columns, map(jsonable, row), strict=True)) for row in frame.itertuples(index=False, name=None)]


def csv_of(frame: pd.DataFrame, for_spreadsheet: bool = False) -> str:
    """A frame as CSV, RFC 4180 quoting, LF line ends."""
    import csv
    import io

    buffer = io.StringIO()
    writer = csv.writer(buffer, lineterminator="\n")
    writer.writerow([str(c) for c in frame.columns])
    for row in frame.itertuples(index=False, name=None):
        cells = [_csv_cell(v) for v in row]
        writer.writerow([_no_formula(c, v) for c, v in zip(cells, row, strict=True)] if for_spreadsheet else cells)
    return buffer.getvalue()


def _no_formula(cell: str, value: Any) -> str:
    """An apostrophe before text that starts like a formula; numbers stay numbers."""
    return f"'{cell}" if isinstance(value, str) and cell[:1] in ("=", "+", "-", "@", "\t", "\r") else cell


def _csv_cell(value: Any) -> str:
    value = jsonable(value)
    if value is None:
        return ""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float):
        return repr(int(value)) if value.is_integer() and abs(value) < 1e15 else repr(value)
    if isinstance(value, list | dict):
        return json.dumps(value, ensure_ascii=False)
    return str(value)


def text_cell(value: Any, column: Column) -> str:
    """One cell as a person reads it."""
    if column.kind == "bar":
        return numbers.span(value)
    form = KINDS[column.kind]
    if form is not None and not isinstance(value, str):
        return form(value)
    value = jsonable(value)
    if value is None:
        return ""
    if isinstance(value, bool):
        return numbers.truth(value)
    if isinstance(value, float):
        return str(int(value)) if value.is_integer() and abs(value) < 1e15 else numbers.number(value)
    if isinstance(value, list):
        return ", ".join(str(v) for v in value)
    if isinstance(value, dict):
        return ", ".join(f"{k} {text_cell(v, Column(k, k))}" for k, v in value.items())
    return plain(value)


def _laid_out(table: Table) -> tuple[Column, ...]:
    columns = table.columns if table.columns is not None else columns_of(table.shown)
    return tuple(c for c in columns if c.key in table.shown.columns and c.kind != "bar")


def markdown_of(table: Table) -> str:
    """A pipe table with its question above and its remarks below."""
    columns = _laid_out(table)
    lines = [f"**{plain(table.question)}**", ""] if table.question else []
    if table.shown.empty:
        return "\n".join([*lines, table.empty, ""])

    def safe(text: str) -> str:
        return text.replace("\\", "\\\\").replace("|", "\\|").replace("<", "&lt;").replace("`", "\\`").replace("*", "\\*").replace("_", "\\_")

    lines.append("| " + " | ".join(safe(c.header) for c in columns) + " |")
    lines.append("| " + " | ".join("---" if c.kind == "text" else "---:" for c in columns) + " |")
    for row in table.shown[[c.key for c in columns]].itertuples(index=False, name=None):
        lines.append("| " + " | ".join(safe(text_cell(v, c)) for v, c in zip(row, columns, strict=True)) + " |")
    lines += ["", *(safe(b) + "  " for b in table.below)]
    return "\n".join(lines).rstrip() + "\n"


_LATEX = {
    "\\": r"\textbackslash{}", "&": r"\&", "%": r"\%", "$": r"\$", "#": r"\#", "_": r"\_", "{": r"\{", "}": r"\}", "~": r"\textasciitilde{}",
    "^": r"\textasciicircum{}", "<": r"\textless{}", ">": r"\textgreater{}", "−": "$-$", "×": r"$\times$", "±": r"$\pm$", "·": r"$\cdot$", "≥": r"$\geq$", "≤": r"$\leq$",
    "→": r"$\to$", "∞": r"$\infty$", "τ": r"$\tau$", "λ": r"$\lambda$", "Λ": r"$\Lambda$", "σ": r"$\sigma$", "χ": r"$\chi$", "½": r"$\frac12$", "…": r"\dots{}", "▸": "",
}  # fmt: skip
_SUPERSCRIPTS = str.maketrans("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-")


def latex_text(text: str) -> str:
    """Text with LaTeX's own characters escaped and superscripts set as such."""
    out = "".join(_LATEX.get(ch, ch) for ch in plain(text))
    return re.sub("[⁰¹²³⁴⁵⁶⁷⁸⁹⁻]+", lambda m: f"$^{{{m.group().translate(_SUPERSCRIPTS)}}}$", out)


def latex_of(table: Table) -> str:
    """A table environment with tabular and caption; plain LaTeX, no packages needed."""

    safe = latex_text
    columns = _laid_out(table)
    lines = [r"\begin{table}", rf"\caption{{{safe(table.question or table.name)}}}"]
    lines.append(r"\begin{tabular}{" + "".join("l" if c.kind == "text" else "r" for c in columns) + "}")
    lines += [r"\hline", " & ".join(safe(c.header) for c in columns) + r" \\", r"\hline"]
    for row in table.shown[[c.key for c in columns]].itertuples(index=False, name=None):
        lines.append(" & ".join(safe(text_cell(v, c)) for v, c in zip(row, columns, strict=True)) + r" \\")
    lines += [r"\hline", r"\end{tabular}", *(rf"\par {safe(b)}" for b in table.below), r"\end{table}"]
    return "\n".join(lines) + "\n"
