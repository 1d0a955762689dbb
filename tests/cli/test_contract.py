# SPDX-License-Identifier: Apache-2.0
"""The contract: documents, columns, exit statuses, options before and after the command."""

from __future__ import annotations

import csv
import io
import json

import numpy as np
import pytest
import scipy.stats

TREND_KEYS = {"record", "tests", "rate_laws", "age_exponent", "regressions", "nulls", "lists", "verdict", "verdict_code", "verdict_clauses", "weakest_null", "notes", "made"}
RECORD_KEYS = {"milestones", "n", "intervals", "joined", "start", "start_from", "present", "present_from", "outside", "tied_with_start", "finest_unit"}
CHECKS = ["summary", "recall_decay", "completeness", "support", "importance", "granularity", "leave_out", "depth", "recent_end", "dating", "merging", "false_splits",
          "equal_effort", "covariates", "lists", "exposure"]  # fmt: skip


def _list(path, dates, titles=None):
    titles = titles or [f"thing {i}" for i in range(len(dates))]
    path.write_text("title,date\n" + "".join(f"{t},{d}\n" for t, d in zip(titles, dates, strict=True)))
    return path


def test_version_and_help(run):
    done = run("--version")
    assert (done.status, done.out) == (0, "chronos-acc 0.1.0\n")
    assert run("--help").status == 0


def test_load_document(run, here):
    _list(here / "a.csv", ["1500", "44 BCE", "not a date"])
    done = run("load", "a.csv", "--compiled", "2020", "--format", "json")
    assert done.status == 0
    (row,) = done.json
    assert (row["source"], row["rows_read"], row["rows_loaded"], row["rows_rejected"]) == ("a", 3, 2, 1)
    assert isinstance(row["notes"], list)
    (reject,) = run("rejects", "--format", "json").json
    assert set(reject) >= {"source", "row", "raw", "reason"}
    assert run("load", "a.csv", "--compiled", "2020", "--strict").status == 1


def test_options_stand_before_or_after(run, here):
    _list(here / "a.csv", ["1500", "1600", "1700"])
    run("load", "a.csv", "--compiled", "2020")
    after = run("intervals", "--format", "csv", "--present", "2000", "--draws", "50")
    before = run("--format", "csv", "--present", "2000", "--draws", "50", "intervals")
    assert after.out == before.out and after.status == before.status == 0
    assert run("--format", "json", "intervals", "--format", "csv", "--present", "2000", "--draws", "50").out == after.out


def test_database_from_option_then_environment(run, here, monkeypatch):
    _list(here / "a.csv", ["1500", "1600"])
    monkeypatch.setenv("CHRONOS_ACC_DB", str(here / "env.duckdb"))
    run("load", "a.csv", "--compiled", "2020")
    assert (here / "env.duckdb").exists() and not (here / "timeline.duckdb").exists()
    run("load", "a.csv", "--compiled", "2020", "--db", "option.duckdb")
    assert (here / "option.duckdb").exists()


def test_date_documents(run):
    done = run("date", "450–400 BCE", "66.0 ± 0.05 Ma", "-500", "no date", "--compiled", "2019", "--format", "json")
    assert done.status == 1
    a, b, c, d = done.json
    assert (a["earliest"], a["latest"], a["shape"]) == (-449, -398, "uniform")
    # E09: 66.0 ± 0.05 Ma at one sigma has 95 % bounds ± 0.098 Ma
    assert b["shape"] == "normal" and b["latest"] - b["best"] == pytest.approx(98_000, rel=1e-3)
    assert (c["earliest"], c["best"], c["latest"]) == (-500, -499.5, -499)
    assert set(d) == {"text", "error"}
    assert run("date", "1850").status == 0


def test_link_links_milestones_and_intervals(run, scenario):
    link = run("link", "--format", "json").json
    assert set(link) == {"entries", "pairs_scored", "linked", "to_review", "milestones"}
    links = run("links", "--format", "json").json
    assert set(links[0]) >= {"source_a", "title_a", "source_b", "title_b", "score", "state"}
    assert {row["state"] for row in links} <= {"linked", "implied", "review", "blocked", "same", "different"}
    milestones = run("milestones", "--format", "json").json
    assert len(milestones) == link["milestones"]
    assert set(milestones[0]) >= {"milestone", "title", "earliest", "best", "latest", "support"}
    rows = run("intervals", "--format", "json", "--draws", "100").json
    assert set(rows[0]) >= {"milestone", "title", "year", "age", "interval", "interval_low", "interval_high", "next_milestone", "open"}
    assert [row["open"] for row in rows] == [False] * (len(rows) - 1) + [True]
    assert all(row["interval"] >= 0 for row in rows)
    table = list(csv.DictReader(io.StringIO(run("intervals", "--format", "csv", "--draws", "100").out)))
    assert [row["open"] for row in table][-2:] == ["false", "true"]
    assert [float(row["year"]) for row in table] == [row["year"] for row in rows]


def test_trend_document_against_scipy(run, here):
    rng = np.random.default_rng(11)
    years = np.sort(np.round(rng.uniform(1000, 2000, 40), 3))
    _list(here / "a.csv", [f"{y:.3f}" for y in years])
    run("load", "a.csv", "--compiled", "2020")
    done = run("trend", "--present", "2010", "--draws", "100", "--format", "json")
    assert done.status == 0
    trend = done.json
    assert set(trend) >= TREND_KEYS and set(trend["record"]) >= RECORD_KEYS
    record = trend["record"]
    assert (record["milestones"], record["n"], record["intervals"], record["start_from"]) == (40, 39, 39, "first milestone")
    x, start, present = years[1:], years[0], 2010.0
    tests = {row["test"]: row for row in trend["tests"]}
    assert set(tests) == {"laplace", "mil_hdbk_189", "anderson_darling", "reverse_arrangements", "lewis_robinson"}
    span = present - start
    assert tests["laplace"]["statistic"] == pytest.approx(np.sqrt(12 * 39) * np.mean((x - start) / span - 0.5), rel=1e-9)
    assert tests["mil_hdbk_189"]["statistic"] == pytest.approx(2 * np.sum(np.log(span / (x - start))), rel=1e-9)
    steady = next(row for row in trend["rate_laws"] if row["law"] == "steady")
    assert steady["log_likelihood"] == pytest.approx(39 * np.log(39 / span) - 39, rel=1e-12)
    fit = scipy.stats.linregress(np.log10(present - years[:-1]), np.log10(np.diff(years)))
    row = next(r for r in trend["regressions"] if (r["response"], r["predictor"], r["estimator"]) == ("log10_interval", "log10_age", "ols_hc3"))
    assert row["slope"] == pytest.approx(fit.slope, rel=1e-9)
    assert row["r_squared"] == pytest.approx(fit.rvalue**2, rel=1e-9)
    # a record that does not speed up needs no forgetting, so recall_decay fitted may be missing
    assert {"steady", "shuffled", "log_uniform"} <= {r["null"] for r in trend["nulls"]} <= {"steady", "shuffled", "log_uniform", "recall_decay"}
    again = run("trend", "--present", "2010", "--draws", "100", "--format", "json")
    assert again.out == done.out


def test_trend_window_of_ten_billion_years(run, here):
    rng = np.random.default_rng(3)
    years = sorted(2000 - 10 ** rng.uniform(0, 6, 30))
    _list(here / "a.csv", [f"{y:.2f}" for y in years])
    run("load", "a.csv", "--compiled", "2010")
    trend = run("trend", "--start", "-1e10", "--present", "2010", "--draws", "50", "--format", "json").json
    laws = {row["law"]: row for row in trend["rate_laws"]}
    assert laws["log_linear"]["log_likelihood"] > laws["power_law"]["log_likelihood"] > laws["steady"]["log_likelihood"]
    # for all events in the last millionth of the window the growth is the inverse of the mean age
    mean_age = np.mean(2010 - np.round(years, 2))
    assert laws["log_linear"]["parameters"]["growth"] == pytest.approx(1 / mean_age, rel=1e-6)
    assert laws["log_linear"]["log_likelihood"] == pytest.approx(30 * (np.log(30 / mean_age)) - 30 - 30, rel=1e-6)


def test_bias_document(run, scenario):
    done = run("bias", "--format", "json", "--draws", "200")
    assert done.status == 0
    bias = done.json
    assert set(bias) >= {*CHECKS, "notes"}
    for check in CHECKS[1:]:
        for row in bias[check]:
            assert list(row)[:10] == ["check", "setting", "n", "estimate", "null", "null_low", "null_median", "null_high", "p_value", "stands"]
            assert row["stands"] in ("yes", "too few", "weaker", "no")
    assert all(isinstance(row["setting"], int | float) for row in bias["support"])
    assert bias["exposure"] == [] and any("exposure" in n for n in bias["notes"])


@pytest.mark.parametrize("form", ["csv", "markdown", "latex", "table"])
def test_other_formats_print_one_table(run, scenario, form):
    done = run("trend", "--format", form, "--table", "rate_laws", "--draws", "50")
    assert done.status == 0 and "hyperbolic" in done.out and "VERDICT:" not in done.out
    wrong = run("trend", "--format", form, "--table", "nothing", "--draws", "50")
    assert wrong.status == 2 and "--table takes" in wrong.err


def test_query_named_own_and_wrong(run, scenario):
    names = [row["name"] for row in run("query", "--format", "json").json]
    assert len(names) >= 15
    done = run("query", "SELECT count(*) AS n FROM entries", "--format", "json")
    assert done.json[0]["n"] > 100
    assert run("query", "DROP TABLE ledger.entry").status == 1
    assert run("query", "nothing_of_that_name").status in (1, 2)
    assert run("query", names[0], "--set", "nonsense").status == 2


def test_demo_in_an_empty_folder(run, here):
    done = run("demo")
    assert done.status == 0
    assert [p.name for p in here.iterdir()] == ["demo.duckdb"]
    assert "VERDICT" in done.out
    tail = done.out[done.out.rindex("VERDICT") :]
    assert len(tail.splitlines()) < 15
    assert done.out.count("▸") >= 8  # each table under its question
    document = run("demo", "--format", "json").json
    assert set(document) >= {"load", "rejects", "milestones", "intervals", "bias", "trend"}


@pytest.mark.parametrize("width", [40, 80, 140])
def test_tables_fit_the_screen(run, scenario, monkeypatch, width):
    from rich.cells import cell_len

    monkeypatch.setenv("COLUMNS", str(width))
    for words in (["intervals", "--draws", "50"], ["trend", "--draws", "50"], ["milestones"], ["links"], ["rejects"], ["sources"], ["query"]):
        done = run(*words)
        assert max(cell_len(line) for line in done.out.splitlines()) <= width, words


def test_json_is_one_document_everywhere(run, scenario):
    for words in (["sources"], ["rejects"], ["links"], ["milestones"], ["intervals"], ["query"], ["date", "1850"], ["power", "--events", "20"], ["review", "--list"]):
        done = run(*words, "--format", "json", "--draws", "50")
        assert done.status == 0, done.err
        json.loads(done.out)
