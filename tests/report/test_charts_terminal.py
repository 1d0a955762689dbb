# SPDX-License-Identifier: Apache-2.0
"""Charts in a terminal: widths, no colour needed, no colour leaking, ASCII, hostile names."""

from __future__ import annotations

import re
import unicodedata

import pytest

from chart_records import log_uniform, several_lists
from chronos_acc.report.charts import Axis, ChartData, Panel, Series, chart, to_terminal
from chronos_acc.report.charts.canvas import Canvas, to_ascii

KINDS = ("interval_age", "cumulative", "recall", "completeness", "lists", "support")


@pytest.fixture(scope="module")
def drawn():
    record = several_lists()
    return {kind: chart(kind, record=record, draws=100) for kind in KINDS}


def _cells(line: str) -> int:
    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in line)


@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("width", [40, 80, 140])
def test_no_line_is_wider_than_the_screen(drawn, kind, width):
    text = to_terminal(drawn[kind], width, 30)
    assert all(_cells(line) <= width for line in text.splitlines())
    assert all(line == line.rstrip() for line in text.splitlines()) and text.endswith("\n")
    assert "\x1b" not in text
    if width > 60:
        assert len(text.splitlines()) <= 30


@pytest.mark.parametrize("kind", KINDS)
def test_colour_adds_only_escapes_and_says_nothing_else(drawn, kind):
    plain, coloured = to_terminal(drawn[kind], 100, 28), to_terminal(drawn[kind], 100, 28, colour=True)
    assert "\x1b[" in coloured
    assert re.sub(r"\x1b\[[0-9;]*m", "", coloured) == plain


@pytest.mark.parametrize("kind", KINDS)
def test_ascii_is_ascii(drawn, kind):
    text = to_terminal(drawn[kind], 80, 24, ascii_only=True)
    body = text.splitlines()
    assert all(line.isascii() for line in body) and "?" not in "".join(body[1:]).replace("agree?", "").replace("list do that?", "")


def test_axes_name_their_units_and_the_question_comes_first(drawn):
    text = to_terminal(drawn["interval_age"], 80, 24)
    assert text.startswith("▸ Do intervals shrink")
    assert "interval to the next (years)" in text and "age (years before 2020)" in text
    assert text.count("◇") == 2  # once in the plot, once in the legend


def test_names_from_a_list_cannot_disturb_the_screen():
    names = ("\x1b[31mred\x1b[0m", "القائمة", "年表" * 30, "a\nb", "")
    y = Axis("list", "", -0.5, 4.5, "names", names=names)
    s = Series("x\x07y", "dots", "data", (1.0, 2.0, 3.0, 4.0, 5.0), (0.0, 1.0, 2.0, 3.0, 4.0))
    data = ChartData("t", "What \x1b]0;now\x07?", Axis("x", "", 0.0, 6.0), (Panel(y, (s,)),))
    text = to_terminal(data, 60, 24)
    assert "\x1b" not in text and "\x07" not in text
    assert all(_cells(line) <= 60 for line in text.splitlines())


def test_a_point_stands_where_it_belongs():
    y = Axis("y", "", 0.0, 1.0)
    s = Series("p", "dots", "data", (0.0, 1.0), (0.0, 1.0))
    lines = to_terminal(ChartData("t", "Where?", Axis("x", "", 0.0, 1.0), (Panel(y, (s,)),)), 60, 24).splitlines()
    rows = [i for i, line in enumerate(lines[:-1]) if "●" in line]
    assert len(rows) == 2
    assert lines[rows[0]].endswith("●") and len(lines[rows[0]]) == 60 and re.match(r".*┤●", lines[rows[1]])


def test_canvas_keeps_to_its_area():
    canvas = Canvas(10, 4)
    canvas.stroke([(-1.0, -1.0), (2.0, 2.0)], "data")
    canvas.glyph(1.5, 0.5, "X", "data")
    canvas.bar(-3.0, 3.0, 0.5, 0.5, "data")
    canvas.shade(0, 0.9, 0.1, 1)
    assert not canvas.words(0, 8, "too long", "data")
    rows = ["".join(ch for ch, _ in row) for row in canvas.lines()]
    assert [len(r) for r in rows] == [10] * 4 and "X" not in "".join(rows) and "──────────" in rows


def test_two_bands_show_where_they_overlap():
    y, x = Axis("y", "", 0.0, 1.0), Axis("x", "", 0.0, 1.0)
    a = Series("a", "band", "null", (0.0, 1.0), y_low=(0.0, 0.0), y_high=(0.6, 0.6))
    b = Series("b", "band", "null", (0.0, 1.0), y_low=(0.4, 0.4), y_high=(1.0, 1.0))
    text = to_terminal(ChartData("t", "Both?", x, (Panel(y, (a, b)),)), 60, 20)
    assert "░░░" in text and "▒▒▒" in text and "▓▓▓" in text and "both bands" in text


def test_ascii_of_braille_counts_its_dots():
    assert to_ascii("\u2800\u2801\u28ff●░é") == " .:*.?"


def test_deep_record_is_legible_at_80_columns():
    text = to_terminal(chart("interval_age", record=log_uniform(), draws=100), 80, 24)
    assert "1 Ma" in text and "Myr" in text and text.count("●") > 15
