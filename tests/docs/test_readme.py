# SPDX-License-Identifier: Apache-2.0
"""The README's commands and its Python run as they stand, on two lists made here; every example in a command's help runs too."""

from __future__ import annotations

import io
import re
import shlex
import shutil

import pytest

import chronos_acc
from chronos_acc import files
from chronos_acc.cli import main
from chronos_acc.cli.registry import COMMANDS
from tests.test_house import ROOT

README = ROOT / "README.md"
pytestmark = pytest.mark.skipif(not README.exists(), reason="no README beside the package")


def _blocks(language):
    return re.findall(rf"```{language}\n(.*?)```", README.read_text(encoding="utf-8"), re.S)


@pytest.fixture
def two_lists(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("CHRONOS_ACC_DB", raising=False)
    monkeypatch.setattr("sys.stdin", io.StringIO(""))
    works = ["Water wheel at the ford", "Bell tower of the hill town", "Salt road", "Stone bridge", "Glass works", "Canal lock", "Rope ferry", "Paper mill", "Lime kiln", "Sluice gate",
             "Harbour crane", "Tile factory", "Gas lamps", "Railway halt", "Telegraph line", "Power house"]  # fmt: skip
    years = [812, 1005, 1130, 1244, 1367, 1488, 1530, 1604, 1688, 1722, 1779, 1803, 1841, 1866, 1870, 1899]
    (tmp_path / "mine.csv").write_text("title,date\n" + "".join(f"{w},c. {y}\n" for w, y in zip(works, years, strict=True)))
    (tmp_path / "theirs.csv").write_text("Work,Year,Stars\n" + "".join(f"The {w.lower()},{y + i % 3},{i % 4 + 1}\n" for i, (w, y) in enumerate(zip(works, years, strict=True)) if i % 3))
    return tmp_path


def test_shell_blocks_run(two_lists, capsys):
    commands = [line.split("#")[0].strip() for block in _blocks("sh") for line in block.splitlines() if line.startswith("chronos-acc")]
    assert len(commands) >= 11
    for command in commands:
        status = main(shlex.split(command)[1:])
        assert status == 0, (command, capsys.readouterr().err)
    assert (two_lists / "result.html").exists()


def test_sheet_block_is_a_sheet(two_lists, capsys):
    (sheet,) = _blocks("toml")
    (two_lists / "theirs.toml").write_text(sheet)
    assert main(["load", "mine.csv", "theirs.csv", "--compiled", "2021", "--quiet"]) == 0, capsys.readouterr().err


def test_python_block_runs(two_lists, capsys):
    (code,) = _blocks("python")
    (two_lists / "theirs.csv").write_text((two_lists / "theirs.csv").read_text().replace("Work,Year,Stars", "title,date,importance"))
    exec(compile(code, "README.md", "exec"), {})  # noqa: S102
    assert "n = " in capsys.readouterr().out


def test_results_show_in_a_notebook():
    record = chronos_acc.Record.from_dates([1000, 1200.5, 1300, 1390, 1450, 1500, 1550, 1600, 1640.25], present=1700, unit=1)
    shown = chronos_acc.analyse(record, draws=50)._repr_html_()
    assert "<table" in shown and "laplace" in shown
    assert "<table" in chronos_acc.interval_series(record, draws=50)._repr_html_()


@pytest.mark.parametrize("name", [c.name for c in COMMANDS])
def test_each_example_in_the_help_runs(name, tmp_path, monkeypatch, capsys):
    monkeypatch.chdir(tmp_path)
    monkeypatch.delenv("CHRONOS_ACC_DB", raising=False)
    monkeypatch.setattr("sys.stdin", io.StringIO(""))
    folder = files.datasets() / "ondrel"
    for short in ("museum", "survey", "school"):
        shutil.copy(folder / f"{short}.csv", tmp_path)
        if name != "sheet":
            shutil.copy(folder / f"{short}.toml", tmp_path)
    if name != "demo":
        assert main(["load", "--quiet", str(folder / "museum.csv"), str(folder / "survey.csv"), str(folder / "school.csv")]) == 0
    command = next(c for c in COMMANDS if c.name == name).load()
    status = main(shlex.split(command.example)[1:])
    assert status == 0, capsys.readouterr().err
