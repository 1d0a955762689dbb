# SPDX-License-Identifier: Apache-2.0
"""Figures: the three formats, the same bytes twice, no dates, no global state, legible in grey."""

from __future__ import annotations

import sys

import matplotlib
import pytest
from matplotlib.colors import to_rgb

from chart_records import log_uniform, several_lists
from chronos_acc.errors import WrongUse
from chronos_acc.report.charts import Axis, ChartData, Panel, Series, chart, palette, to_figure

START = {"png": b"\x89PNG\r\n\x1a\n", "svg": b"<?xml", "pdf": b"%PDF-"}


@pytest.fixture(scope="module")
def data():
    return chart("interval_age", record=log_uniform(), draws=100)


@pytest.mark.parametrize("ending", ["png", "svg", "pdf"])
def test_same_data_same_bytes_without_a_date(data, ending, tmp_path):
    before = dict(matplotlib.rcParams)
    one, two = (to_figure(data, tmp_path / f"{name}.{ending}") for name in ("one", "two"))
    first = one.read_bytes()
    assert first == two.read_bytes() and first.startswith(START[ending])
    assert b"CreationDate" not in first and b"<dc:date>" not in first and b"tIME" not in first
    assert dict(matplotlib.rcParams) == before


@pytest.mark.parametrize("kind", ["cumulative", "recall", "completeness", "lists", "support"])
def test_every_kind_becomes_a_figure(kind, tmp_path):
    path = to_figure(chart(kind, record=several_lists(), draws=100), tmp_path / f"{kind}.svg")
    assert path.stat().st_size > 5_000


def test_names_with_signs_of_formulas_are_drawn_as_they_are(tmp_path):
    y = Axis("list", "", -0.5, 1.5, "names", names=("cost in $", "a_b^c \\frac{1}{2} 50 %"))
    s = Series("$x", "dots", "data", (1.0, 2.0), (0.0, 1.0))
    to_figure(ChartData("t", "Is $ safe?", Axis("x $", "", 0.0, 3.0), (Panel(y, (s,)),)), tmp_path / "signs.svg")


def test_wrong_endings_and_places_are_one_line(data, tmp_path):
    for name in ("chart.gif", "chart"):
        with pytest.raises(WrongUse, match="png, svg or pdf") as caught:
            to_figure(data, tmp_path / name)
        assert "\n" not in str(caught.value)
    with pytest.raises(WrongUse, match="cannot be written"):
        to_figure(data, tmp_path / "missing" / "chart.png")


def test_missing_library_names_the_extra(data, tmp_path, monkeypatch):
    monkeypatch.setitem(sys.modules, "matplotlib", None)
    with pytest.raises(WrongUse, match=r"chronos-acc\[figures\]") as caught:
        to_figure(data, tmp_path / "chart.png")
    assert "\n" not in str(caught.value)


def _lightness(colour: str) -> float:
    """CIE L* of an sRGB colour."""
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in to_rgb(colour)]
    y = 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]
    return 116 * y ** (1 / 3) - 16 if y > 0.008856 else 903.3 * y


def test_data_laws_and_bands_differ_in_grey():
    paper, ink = _lightness(palette.PAPER), _lightness(palette.INK)
    bands = [_lightness(c) for c in palette.BANDS]
    laws = [_lightness(c) for c in palette.LAWS]
    assert all(paper - b > 10 for b in bands) and all(min(bands) - law > 10 for law in laws)
    assert all(law - ink > 15 for law in laws)
    # lines of like lightness are told apart by their strokes, bands by their hatching
    assert len(set(palette.STROKES)) == len(palette.LAWS) == 4 and len(set(palette.HATCHES)) == len(palette.BANDS) == 2
