# SPDX-License-Identifier: Apache-2.0
"""Bad input: one line on stderr, the stated exit status, no traceback, nothing half-loaded."""

from __future__ import annotations

import os

import pytest


def _one_line(done, status):
    assert done.status == status, (done.status, done.err)
    lines = [line for line in done.err.splitlines() if line.startswith("chronos-acc: ")]
    assert len(lines) == 1, done.err
    assert len(lines[0]) < 600
    return lines[0]


@pytest.mark.parametrize(
    "words",
    [
        ["nonsense"],
        ["trend", "--nonsense"],
        ["load"],
        ["trend", "--present", "soon"],
        ["trend", "--seed", "-1"],
        ["trend", "--draws", "many"],
        ["trend", "--format", "yaml"],
        ["intervals", "--min-support", "0"],
        ["link", "--accept", "2"],
        ["--db"],
        ["query", "SELECT 1", "--set", "x"],
        ["milestones", "first"],
        ["--completion", "tcsh"],
        ["review", "--verdict", "same"],
    ],
)
def test_wrong_command_lines(run, words):
    line = _one_line(run(*words), 2)
    assert "usage:" not in line


def test_missing_binary_empty_and_columnless_files(run, here):
    (here / "binary.csv").write_bytes(bytes(range(256)) * 20)
    (here / "empty.csv").write_bytes(b"")
    (here / "columns.csv").write_text("name,place\na,b\n")
    (here / "folder").mkdir()
    for name in ("missing.csv", "binary.csv", "empty.csv", "columns.csv", "folder"):
        _one_line(run("load", name, "--compiled", "2020"), 1)
    assert not (here / "timeline.duckdb").exists() or run("sources", "--format", "json").json == []


def test_a_timeline_that_is_none(run, here):
    (here / "timeline.duckdb").write_text("just words " * 500)
    (here / "a.csv").write_text("title,date\nx,1900\n")
    for words in (["trend"], ["intervals"], ["query", "SELECT 1"], ["load", "a.csv", "--compiled", "2020"], ["sources"]):
        _one_line(run(*words), 1)


def test_no_timeline_yet(run):
    for words in (["trend"], ["bias"], ["intervals"], ["milestones"], ["sources"], ["rejects"], ["links"], ["review"], ["query", "SELECT 1"], ["grid"], ["unload", "a"], ["export", "x"]):
        assert "chronos-acc load" in _one_line(run(*words), 1)


@pytest.mark.parametrize("dates", [["1900"], ["1900", "1950"], ["1900"] * 9, ["1900", "1950", "1980"]])
def test_too_few_or_all_at_one_date(run, here, dates):
    (here / "a.csv").write_text("title,date\n" + "".join(f"thing {i},{d}\n" for i, d in enumerate(dates)))
    run("load", "a.csv", "--compiled", "2020")
    done = run("trend", "--draws", "50", "--format", "json")
    _one_line(done, 1)
    if len(dates) >= 3:
        assert done.json["verdict_code"] == "too_few"
    for words in (["intervals", "--draws", "50"], ["bias", "--draws", "50"]):
        assert run(*words).status in (0, 1)


def test_unknown_list_or_category(run, scenario):
    for words in (["intervals", "--sources", "nobody"], ["trend", "--category", "nothing"], ["unload", "nobody"], ["milestones", "999999"]):
        done = run(*words)
        assert done.status in (1, 2) and done.err.count("chronos-acc: ") == 1


def test_control_characters_never_reach_the_terminal(run, here):
    (here / "a.csv").write_text("title,date\n\x1b[31mred\x07 [bold]x[/bold] [/foo],1900\n‮evil,1950\nc,1980\n")
    run("load", "a.csv", "--compiled", "2020")
    for words in (["intervals", "--draws", "50"], ["milestones"], ["query", "entries"], ["trend", "--draws", "50"]):
        done = run(*words)
        assert "\x1b" not in done.out + done.err and "\x07" not in done.out and "\u202e" not in done.out
    assert "[bold]x[/bold] [/foo]" in run("milestones").out


@pytest.mark.skipif(os.geteuid() == 0, reason="root may write anywhere")
def test_read_only_folder(run, here):
    (here / "a.csv").write_text("title,date\nx,1900\n")
    here.chmod(0o555)
    try:
        _one_line(run("load", "a.csv", "--compiled", "2020"), 1)
    finally:
        here.chmod(0o755)
