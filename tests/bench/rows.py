# SPDX-License-Identifier: Apache-2.0
"""The rows of the speed table. Each returns one Row or more; data are made here with fixed seeds, in a folder that goes again."""

from __future__ import annotations

import csv
import subprocess
import sys
import tempfile
from collections.abc import Callable
from pathlib import Path

import duckdb
import numpy as np

from .row import Row, at_least, at_most, paired, seconds

MILLION = 1_000_000


def kernel() -> list[Row]:
    """Draw, sort, interval, regression: 10,000 draws of 100 milestones."""
    import statsmodels.api as sm

    from chronos_acc.record import Record
    from chronos_acc.trend import kernels

    rng = np.random.default_rng(5)
    m, draws = 100, 10_000
    record = Record.from_dates(np.sort(rng.uniform(0, 2000, m)), present=2024, unit=rng.uniform(1, 40, m), mentions=np.ones((m, 3)))

    def ours() -> None:
        for dates in record.draws(draws, 1):
            dates.sort(axis=1)
            kernels.log_log(2024 - dates[:, :-1], np.maximum(np.diff(dates, axis=1), 0.5))

    def bare() -> None:
        u = np.random.default_rng(1).random((draws, m))
        dates = record.low[:m] + u * (record.high[:m] - record.low[:m])
        dates.sort(axis=1)
        x, y = np.log10(2024 - dates[:, :-1]), np.log10(np.maximum(np.diff(dates, axis=1), 0.5))
        dx, dy = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
        slope = (dx * dy).sum(axis=1) / (dx * dx).sum(axis=1)
        (slope * (dx * dy).sum(axis=1)) / (dy * dy).sum(axis=1)

    few = 200

    def loop() -> None:
        dates = np.sort(record.all_draws(few, 1), axis=1)
        for row in dates:
            sm.OLS(np.log10(np.maximum(np.diff(row), 0.5)), sm.add_constant(np.log10(2024 - row[:-1]))).fit().rsquared  # noqa: B018

    ratio = paired(ours, bare)
    slow = [seconds(loop) * draws / few / seconds(ours) for _ in range(3)]
    where = "half is np.log10 and the sort, which both do; the rest is the mixture draw and the row-wise means"
    return [
        at_most("draw, sort, interval, regression (10,000 × 100)", "the bare NumPy operations", ratio, 2, where),
        at_least("the same", "a loop of statsmodels OLS", (float(np.median(slow)), min(slow), max(slow)), 25, "as above"),
    ]


def _numeric(path: Path) -> None:
    rng = np.random.default_rng(7)
    years = rng.integers(-4000, 2020, MILLION)
    with path.open("w", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["title", "date"])
        writer.writerows((f"event {i} of the series", str(y)) for i, y in enumerate(years.tolist()))


def _mixed(path: Path) -> None:
    rng = np.random.default_rng(8)
    forms = (lambda y: f"c. {y}", lambda y: f"{y} ± {1 + y % 9}", lambda y: f"{y}–{y + 5}", lambda y: f"{y} BCE", lambda y: f"{1 + y % 20}th century", lambda y: f"{y}-03-12", lambda y: str(y))
    years, kinds = rng.integers(1000, 2000, MILLION), rng.integers(0, len(forms), MILLION)
    with path.open("w", newline="") as file:
        writer = csv.writer(file)
        writer.writerow(["title", "date"])
        writer.writerows((f"event {i} of the series", forms[k](y)) for i, (k, y) in enumerate(zip(kinds.tolist(), years.tolist(), strict=True)))


def loading() -> list[Row]:
    """A million rows, numeric and mixed, beside DuckDB's own reading of the same file into a table."""
    from chronos_acc.store.load import load

    out = []
    with tempfile.TemporaryDirectory() as folder:
        for name, make, target in (("numeric", _numeric, 5), ("mixed", _mixed, 20)):
            path = Path(folder) / f"{name}.csv"
            make(path)
            turn = iter(range(100))

            def ours(path: Path = path, name: str = name, turn: object = turn) -> None:
                db = Path(folder) / f"{name}{next(turn)}.duckdb"  # type: ignore[call-overload]
                load(db, [path], compiled=2024, link=False)
                db.unlink()

            def bare(path: Path = path, name: str = name, turn: object = turn) -> None:
                db = Path(folder) / f"{name}{next(turn)}.duckdb"  # type: ignore[call-overload]
                with duckdb.connect(str(db)) as con:
                    con.execute("CREATE TABLE t AS FROM read_csv(?, header = true, auto_detect = false, delim = ',', quote = '\"', columns = {'title': 'VARCHAR', 'date': 'VARCHAR'})", [str(path)])
                db.unlink()

            where = "writing wider rows (ids, bounds, notation, row number), and reading each distinct text once" if name == "mixed" else "writing wider rows: id, row number, three bounds, codes; one pass classifies the texts"
            out.append(at_most(f"load 1,000,000 rows, {name} dates", "read_csv into a table", paired(ours, bare, 3), target, where))
    return out


def interval_view() -> list[Row]:
    """The view of intervals over a million milestones, beside a bare lead()."""
    from chronos_acc.store.ledger import open_for_reading, open_for_writing

    with tempfile.TemporaryDirectory() as folder:
        db = Path(folder) / "t.duckdb"
        with open_for_writing(db) as ledger:
            names = [c for c, *_ in ledger.rows("DESCRIBE ledger.milestone")]
            wanted = {
                "milestone": "i", "title": "'event ' || i", "earliest": "best - 0.5", "best": "best", "latest": "best + 0.5", "unit": "1.0", "sd": "0.0", "support": "1",
                "entries": "1", "disjoint": "false",
            }  # fmt: skip
            select = ", ".join(f"{wanted.get(c, 'NULL')} AS {c}" for c in names)
            ledger.run(f"INSERT INTO ledger.milestone BY NAME SELECT {select} FROM (SELECT i, 2000 - random() * 1e6 AS best FROM range({MILLION}) AS r(i))")
            ledger.set_about("linked", "yes")
        with open_for_reading(db) as ledger:
            ledger.run("SET VARIABLE present = 2024")
            columns = [c for c, *_ in ledger.rows("DESCRIBE intervals")]
            carried = ", ".join(f"sum(hash({c}))" for c in columns)
            view = f"SELECT {carried} FROM intervals"
            bare_columns = [c for c in names if c in columns]
            inner = ", ".join(bare_columns)
            bare_sql = (
                f"SELECT {', '.join(f'sum(hash({c}))' for c in bare_columns)}, sum(hash(n)), sum(hash(y)), sum(hash(age)), sum(hash(iv)), sum(hash(o)) FROM (SELECT {inner}, best AS y, 2024 - best AS age,"
                " lead(milestone) OVER w AS n, coalesce(lead(best) OVER w, 2024) - best AS iv, lead(best) OVER w IS NULL AS o FROM ledger.milestone WHERE best <= 2024 WINDOW w AS (ORDER BY best, milestone))"
            )
            if ledger.rows("SELECT count(*) FROM intervals") != [(MILLION,)]:
                raise SystemExit("the view does not show every milestone; the row would mean nothing")
            found = paired(lambda: ledger.rows(view), lambda: ledger.rows(bare_sql))
    return [at_most("interval view, 1,000,000 milestones", "a bare lead() query with the same columns", found, 1.5, "the sort by date, which both do")]


def _lists(each: int, span: float, seed: int) -> object:
    """Four lists of ``each`` entries drawn from 1.4 times as many milestones over ``span`` years, titles misspelt and reworded."""
    from dataclasses import replace

    from tests.generate_gold import gold

    rng = np.random.default_rng([seed, each])
    made = gold(seed, milestones=int(1.4 * each), share=1 / 1.4, deep_share=0.0)
    entries, truth = made.entries, made.truth
    year = rng.uniform(2020 - span, 2020, int(1.4 * each))
    best = year[truth] + rng.normal(0, 2, len(truth))
    return replace(entries, earliest=best - 1, best=best, latest=best + 1)


def linking() -> list[Row]:
    """Four lists of 2,500 entries, at constant density in time and in one crowded span."""
    from chronos_acc.merge import link

    small, large, crowd = _lists(625, 625 * 4, 3), _lists(2500, 2500 * 4, 3), _lists(2500, 200, 4)
    link(small)
    times = [seconds(lambda: link(large)) for _ in range(3)]
    growth = [seconds(lambda: link(large)) / seconds(lambda: link(small)) for _ in range(3)]
    crowd_times = [seconds(lambda: link(crowd)) for _ in range(2)]
    where = "comparing titles: shared 2- and 3-grams of the words of every pair that may be the same"
    return [
        at_most("link 4 × 2,500 entries, constant density", "seconds", (float(np.median(times)), min(times), max(times)), 5, where, "s"),
        at_most("4 × 2,500 against 4 × 625 entries", "linear would be 4", (float(np.median(growth)), min(growth), max(growth)), 6, where),
        at_most("link 4 × 2,500 entries, one crowded span", "seconds", (float(np.median(crowd_times)), min(crowd_times), max(crowd_times)), 30, where, "s"),
    ]


def grid() -> list[Row]:
    """A grid of about 1,000 combinations × 1,000 draws on 100 milestones, beside as many bare regressions."""
    from chronos_acc.bias.check import Context
    from chronos_acc.bias.grid import run_grid
    from chronos_acc.record import Record
    from chronos_acc.trend import kernels

    rng = np.random.default_rng(9)
    m, draws = 100, 1_000
    mentions = rng.random((m, 4)) < 0.6
    mentions[~mentions.any(axis=1), 0] = True
    record = Record.from_dates(np.sort(rng.uniform(1000, 2020, m)), present=2024, unit=1.0, mentions=mentions)
    context = Context(record=record, draws=draws)
    count = len(run_grid(Context(record=record, draws=1), joint=0).lines)

    def bare() -> None:
        dates = np.sort(rng.random((draws, m)) * 1000, axis=1)
        for _ in range(count):
            kernels.log_log(1001 - dates[:, :-1], np.diff(dates, axis=1))

    found = paired(lambda: run_grid(context, joint=0), bare, 3)
    return [at_most(f"grid of {count:,} combinations × 1,000 draws × 100 milestones", "as many bare regressions", found, 2, "null records of each combination's own subset, and redrawing the record for each way of dating")]


def help_text() -> list[Row]:
    """``chronos-acc --help`` beside Python's own start."""

    def run(*words: str) -> Callable[[], object]:
        return lambda: subprocess.run([sys.executable, *words], check=True, capture_output=True)

    found = paired(run("-m", "chronos_acc", "--help"), run("-c", "pass"), 9)
    own = [seconds(run("-m", "chronos_acc", "--help")) - seconds(run("-c", "pass")) for _ in range(9)]
    row = at_most("chronos-acc --help", "python -c pass", found, 4, f"argparse and its registry: {1000 * float(np.median(own)):.0f} ms more than Python's own start")
    return [row]


ROWS: dict[str, Callable[[], list[Row]]] = {"kernel": kernel, "loading": loading, "interval_view": interval_view, "linking": linking, "grid": grid, "help": help_text}
