# SPDX-License-Identifier: Apache-2.0
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from bias_records import listed, plain

import chronos_acc.bias as bias
from chronos_acc.bias import CHECKS, Context, run_checks
from chronos_acc.bias.check import COLUMNS
from chronos_acc.bias.growth import growth
from chronos_acc.errors import RecordRefused, WrongUse
from chronos_acc.record import Record

NOT_CHECKS = {"__init__", "check", "growth", "rows", "result", "offset", "capture_curve", "drawn", "heaping", "rebuilt"}


@pytest.fixture(scope="module")
def record():
    rng = np.random.default_rng(8)
    found = listed(rng, truth=120, growth=2.0, chance=0.5)
    names = np.array(["stone", "wood", "glass"])
    return replace(found, category=tuple(names[rng.integers(0, 3, len(found))]), importance=rng.exponential(1.0, len(found)))


@pytest.fixture(scope="module")
def result(record):
    return run_checks(Context(record, replicates=499, draws=200))


def test_folder_and_tuple_agree():
    files = {p.stem for p in Path(bias.__file__).parent.glob("*.py")} - NOT_CHECKS
    assert files == {c.name for c in CHECKS}
    assert all(c.question.endswith("?") and c.needs for c in CHECKS)


def test_contract_of_the_rows(result):
    page = result.to_dict()
    json.dumps(page, allow_nan=False)
    assert list(page)[0] == "summary" and list(page)[-2:] == ["notes", "made"]
    for name in ["summary", *(c.name for c in CHECKS)]:
        for row in page[name]:
            assert tuple(row)[: len(COLUMNS)] == COLUMNS
            assert row["check"] == name or name == "summary"
            assert row["stands"] in ("yes", "too few", "weaker", "no")
    assert page["notes"][0] == result.sentence and page["made"]["command"] == "bias"
    assert all(isinstance(r["setting"], float) for name in ("support", "importance") for r in page.get(name, []))


def test_every_check_has_rows_or_a_note(result):
    for check in CHECKS:
        assert result.rows(check.name) or any(n.startswith(check.name) for n in result.notes)


def test_same_seed_same_bytes(record, result):
    again = run_checks(Context(record, replicates=499, draws=200))
    assert json.dumps(again.to_dict()) == json.dumps(result.to_dict())


def test_frames(result):
    frames = result.tables()
    assert list(frames)[0] == "summary"
    assert tuple(frames["depth"].columns[: len(COLUMNS)]) == COLUMNS


def test_the_summary_has_one_row_a_check_with_the_published_estimate(record, result):
    page = result.rows("summary")
    assert [r["check"] for r in page] == [n for n in result.answers if result.answers[n].rows]
    assert all(r["published"] == growth(record.window).estimate for r in page)


def test_names_and_small_records_are_refused(record):
    with pytest.raises(WrongUse, match="no check; choose from"):
        run_checks(Context(record), ["height"])
    with pytest.raises(RecordRefused, match="2 milestones"):
        run_checks(Context(Record.from_dates([1.0, 2.0], present=3.0)))


@pytest.mark.parametrize("dates", [[1.0, 2.0, 3.0], [5.0] * 6, [1.0, 1.0, 1.0, 4.0], list(range(9))])
@pytest.mark.parametrize("start", [None, 0.5])
def test_degenerate_records_have_an_answer(dates, start):
    found = run_checks(Context(Record.from_dates(dates, present=9.0, start=start), replicates=99, draws=20))
    json.dumps(found.to_dict(), allow_nan=False)


def test_no_trend_as_published_is_said():
    dates = np.linspace(1000.0, 1999.0, 40)
    found = run_checks(Context(Record.from_dates(dates, present=2000.0, start=1000.0), replicates=99, draws=50), ["depth"])
    assert found.rows("summary")[0]["finding"].startswith("nothing to overturn")
    assert found.sentence.endswith("nothing to overturn")


def test_unit_of_time_and_origin_do_not_matter():
    record = plain(np.random.default_rng(2), 40, growth=2.0)
    a = run_checks(Context(record, replicates=99), ["depth", "leave_out"])
    moved = Record.from_dates(record.best * 10 - 3000, present=17000.0, start=7000.0, unit=10.0)
    b = run_checks(Context(moved, replicates=99), ["depth", "leave_out"])
    for name in ("depth", "leave_out"):
        for x, y in zip(a.rows(name), b.rows(name), strict=True):
            if x.get("cut") != "present":
                assert x["estimate"] == pytest.approx(10 * y["estimate"], rel=1e-6, abs=1e-9)
                assert x["p_value"] == pytest.approx(y["p_value"], rel=1e-6)
