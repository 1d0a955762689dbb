# SPDX-License-Identifier: Apache-2.0
"""The report: same bytes but for the time stamp, self-contained HTML, text from anybody's list escaped in every format."""

from __future__ import annotations

import re

import pytest

from chronos_acc.cli import main
from chronos_acc.report.formats import latex_text

NASTY = "<script>alert('x')</script> & 50 % of _all_ | \\textbf{x} `y` €"


@pytest.fixture(scope="module")
def timeline(tmp_path_factory):
    folder = tmp_path_factory.mktemp("report")
    titles = [NASTY, *(f"thing {i}" for i in range(14))]
    rows = "".join('"{}",{}\n'.format(t.replace('"', '""'), 1500 + 30 * i) for i, t in enumerate(titles))
    (folder / "a.csv").write_text("title,date\n" + rows, encoding="utf-8")
    assert main(["load", "--quiet", "--db", str(folder / "t.duckdb"), str(folder / "a.csv"), "--compiled", "2000"]) == 0
    return folder


def _write(folder, name):
    assert main(["report", "--quiet", "--no-grid", "--draws", "50", "--db", str(folder / "t.duckdb"), str(folder / name)]) == 0
    return (folder / name).read_text(encoding="utf-8")


def test_html_needs_no_network_and_escapes(timeline):
    text = _write(timeline, "a.html")
    assert "<script" not in text.lower() and "&lt;script&gt;" in text
    assert not re.search(r'(src|href)\s*=\s*"(?!#)', text.replace("xlink:href", "href"))
    assert not re.search(r"url\((?!#)", text) and "@import" not in text
    assert "How this was made" in text and "Cautions" in text and "Cox, D. R. and Lewis" in text


def test_made_again_it_is_the_same_but_for_the_time(timeline):
    stamp = re.compile(r"Made at [^.]*\.")
    first, second = (stamp.sub("", _write(timeline, name)) for name in ("b.html", "b.html"))
    assert first == second


def test_markdown_and_latex_escape_and_bring_their_figures(timeline):
    text = _write(timeline, "c.md")
    assert "&lt;script>" in text or "&lt;script&gt;" in text
    for name in re.findall(r"\]\((c_figures/[^)]*)\)", text):
        assert (timeline / name).read_text(encoding="utf-8").lstrip().startswith("<?xml")
    text = _write(timeline, "c.tex")
    assert r"\textbackslash{}textbf\{x\}" in text and r"50 \%" in text
    for name in re.findall(r"\{(c_figures/[^}]*)\}", text):
        assert (timeline / name).read_bytes().startswith(b"%PDF")


def test_signs_in_latex():
    assert latex_text("2.1×10⁻⁹ − 5") == r"2.1$\times$10$^{-9}$ $-$ 5"


def test_other_endings_are_refused(timeline, capsys):
    assert main(["report", str(timeline / "a.docx"), "--db", str(timeline / "t.duckdb")]) == 2
    assert ".html" in capsys.readouterr().err
