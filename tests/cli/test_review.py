# SPDX-License-Identifier: Apache-2.0
"""Review at the terminal: keys, undo, the spreadsheet way, and decisions that survive reloading."""

from __future__ import annotations

import io

import pytest

PAIRS = {
    "a.csv": "title,date\nHarbour chain of Vessik raised,1344\nGreat granary of Selkett,1691\nBell tower in Orrin,1502\nSalt road over the pass,1210\n",
    "b.csv": "title,date\nChain across the harbour of Vessik,1345\nSelkett granary,1691\nBridge in Orrin,1503\nSilver mine at the ford,1211\n",
}


@pytest.fixture
def two_lists(run, here):
    for name, text in PAIRS.items():
        (here / name).write_text(text)
    assert run("load", *PAIRS, "--compiled", "2020").status == 0
    return run


def _milestones(run):
    return len(run("milestones", "--format", "json").json)


def _ids(run):
    return {row["title"]: row["entry"] for row in run("query", "SELECT entry, title FROM entries", "--format", "json").json}


def test_pair_by_ids_joins_and_withdrawing_parts(two_lists):
    run = two_lists
    before, ids = _milestones(run), _ids(run)
    a, b = str(ids["Salt road over the pass"]), str(ids["Silver mine at the ford"])
    assert run("review", "--pair", a, b, "--verdict", "same", "--who", "tester", "--why", "one road").status == 0
    assert _milestones(run) == before - 1
    (row,) = run("review", "--list", "--format", "json").json
    assert (row["verdict"], row["who"], row["why"], row["status"]) == ("same", "tester", "one road", "holds")
    assert run("review", "--withdraw", str(row["decision"])).status == 0
    assert _milestones(run) == before


def test_decision_survives_reloading(two_lists, here):
    run = two_lists
    ids = _ids(run)
    run("review", "--pair", str(ids["Salt road over the pass"]), str(ids["Silver mine at the ford"]), "--verdict", "same", "--who", "t")
    joined = _milestones(run)
    (here / "b.csv").write_text(PAIRS["b.csv"] + "Windmill on the flats,1600\n")
    run("load", "b.csv", "--compiled", "2020")
    assert _milestones(run) == joined + 1
    assert run("review", "--list", "--format", "json").json[0]["status"] == "holds"


def test_keys_and_undo(two_lists, monkeypatch):
    run = two_lists
    ids = _ids(run)
    pair = [str(ids["Salt road over the pass"]), str(ids["Silver mine at the ford"])]
    monkeypatch.setattr("sys.stdin", io.StringIO("x\nu\ns\n"))
    done = run("review", "--pair", *pair, "--who", "t")
    assert done.status == 0 and "1 decided" in done.out and "nothing to undo" in done.out
    monkeypatch.setattr("sys.stdin", io.StringIO("k\n"))
    assert run("review", "--pair", *pair).status == 0
    assert len(run("review", "--list", "--format", "json").json) == 1


def test_spreadsheet_there_and_back(two_lists, here):
    run = two_lists
    table = run("links", "--format", "csv").out
    lines = table.splitlines()
    state = lines[0].split(",").index("state")
    assert len(lines) > 1
    (here / "decided.csv").write_text(table.replace(",linked,", ",different,") if ",linked," in table else table)
    done = run("review", "decided.csv", "--who", "t", "--format", "json")
    assert done.status == 0, done.err
    assert state >= 0 and done.json[0]["rows"] == len(lines) - 1
