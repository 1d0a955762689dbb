# SPDX-License-Identifier: Apache-2.0
"""Options that the contract does not name: series by list, known orders, counts, spreadsheets, completion, installation, terminals."""

from __future__ import annotations

import csv
import io
import shutil
import subprocess

import duckdb
import pytest

from chronos_acc.cli.output import Output
from chronos_acc.cli.registry import COMMANDS


def test_series_by_list_support_and_category(run, scenario):
    for by, one in (("list", "museum"), ("support", "2"), ("category", "land")):
        done = run("intervals", "--by", by, "--format", "csv", "--draws", "20")
        rows = list(csv.DictReader(io.StringIO(done.out)))
        assert done.status == 0 and one in {row[by] for row in rows}
    alone = run("intervals", "--sources", "museum", "--format", "csv", "--draws", "20").out.splitlines()
    rows = [r for r in csv.DictReader(io.StringIO(run("intervals", "--by", "list", "--format", "csv", "--draws", "20").out)) if r["list"] == "museum"]
    assert len(rows) == len(alone) - 1


def test_known_orders_hold_in_every_draw_and_circles_are_named(run, here):
    (here / "a.csv").write_text("title,date\nfirst kiln,c. 1500\nsecond kiln,c. 1500\nmill,1700\nbridge,1800\n")
    run("load", "a.csv", "--compiled", "2000")
    swap = {row["title"]: row["swap_chance"] for row in run("intervals", "--format", "json").json}
    assert swap["first kiln"] > 0.3
    (here / "orders.csv").write_text("earlier,later\nfirst kiln,second kiln\n")
    assert run("link", "--orders", "orders.csv").status == 0
    swap = {row["title"]: row["swap_chance"] for row in run("intervals", "--format", "json").json}
    assert swap["first kiln"] == 0
    (here / "circle.csv").write_text("earlier,later\nsecond kiln,mill\nmill,first kiln\n")
    done = run("link", "--orders", "circle.csv")
    assert done.status == 1 and "mill" in done.err and done.err.count("chronos-acc: ") == 1


def test_counts(run, here):
    (here / "c.csv").write_text("from,to,count\n1800,1850,3\n1850,1900,9\n1900,1950,14\n1950,2000,40\n")
    rows = run("trend", "--counts", "c.csv", "--format", "json").json["rows"]
    growth = next(r for r in rows if r["parameter"] == "growth")
    assert 0.01 < growth["low"] < growth["estimate"] < growth["high"] < 0.03
    (here / "gap.csv").write_text("from,to,count\n1800,1850,3\n1860,1900,9\n")
    done = run("trend", "--counts", "gap.csv")
    assert done.status == 1 and "bins must join" in done.err


def test_formulas_are_neutral_only_when_asked(run, here):
    (here / "a.csv").write_text('title,date\n"=1+1",1500\n"@x",1600\n"-5 things",1700\n')
    run("load", "a.csv", "--compiled", "2000")
    plain = [row["title"] for row in csv.DictReader(io.StringIO(run("milestones", "--format", "csv").out))]
    safe = [row["title"] for row in csv.DictReader(io.StringIO(run("milestones", "--format", "csv", "--for-spreadsheet").out))]
    assert plain == ["=1+1", "@x", "-5 things"] and safe == ["'=1+1", "'@x", "'-5 things"]


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_completion_names_every_command_and_parses(run, shell):
    done = run("--completion", shell)
    assert done.status == 0 and all(c.name in done.out for c in COMMANDS) and "min-support" in done.out
    if shutil.which(shell):
        checked = subprocess.run([shell, "-n"], input=done.out, text=True, capture_output=True, check=False)
        assert checked.returncode == 0, checked.stderr


def test_check_install_tells_extras_from_needs(run):
    parts = {row["part"]: row["version"] for row in run("--check-install", "--format", "json").json}
    assert parts["duckdb"] == duckdb.__version__
    shown = run("--check-install")
    assert shown.status == 0 and "extra: figures" in shown.out and "duckdb" in shown.out


def test_help_words(run):
    assert run("help").status == 0 and run("help", "trend").status == 0
    for entry in COMMANDS:
        done = run(entry.name, "--help")
        assert done.status == 0 and "example:" in done.out and entry.load().example in done.out


class _Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


def test_progress_only_on_a_terminal_and_only_when_it_takes_long():
    for stream, quiet, begun, shown in ((_Terminal(), False, -10.0, True), (_Terminal(), False, 0.0, False), (io.StringIO(), False, -10.0, False), (_Terminal(), True, -10.0, False)):
        out = Output(quiet=quiet, stdout=io.StringIO(), stderr=stream)
        out._begun += begun
        out.tell("drawing", 0.5)
        assert bool(stream.getvalue()) is shown
    out = Output(stdout=io.StringIO(), stderr=(stream := _Terminal()))
    out._begun -= 10
    out.tell("drawing", 0.5)
    assert "50%" in stream.getvalue() and "s left" in stream.getvalue()
    out.remark("done")
    assert stream.getvalue().endswith("done\n")


def test_no_colour_when_asked(monkeypatch):
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm")
    assert Output(stdout=_Terminal()).colour
    monkeypatch.setenv("NO_COLOR", "1")
    assert not Output(stdout=_Terminal()).colour
    assert not Output(stdout=io.StringIO()).colour
