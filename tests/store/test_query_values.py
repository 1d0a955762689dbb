# SPDX-License-Identifier: Apache-2.0
"""Values of a query's parameters: what does not convert, and lists that are not there, are one line that names both."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc.errors import QueryRefused
from chronos_acc.store import query as Q
from tests.store.timelines import make, two_lists


@pytest.fixture(scope="module")
def db(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A timeline of the lists alpha and beta."""
    return two_lists(tmp_path_factory.mktemp("values") / "t.duckdb")


@pytest.mark.parametrize(
    ("query", "name", "value", "takes"),
    [
        ("gaps", "rows", "abc", "a whole number"), ("gaps", "rows", "2.5", "a whole number"), ("gaps", "rows", "-1", "0 or more"),
        ("gaps", "present", "soon", "a number"), ("milestones", "min_support", "x", "a number"),
        ("disagreement", "at_least", "1e999", "a number"), ("SELECT getvariable('k')::BIGINT AS k", "k", "y", "a whole number"),
        ("FROM intervals", "start", "early", "a number"),
    ],
)  # fmt: skip
def test_a_value_that_does_not_convert_is_named(db: Path, query: str, name: str, value: str, takes: str) -> None:
    with pytest.raises(QueryRefused) as caught:
        Q.run(db, query, {name: value})
    said = str(caught.value)
    assert said.startswith(f"the parameter {name} takes ") and takes in said and "\n" not in said and "Error" not in said


def test_values_that_convert_pass(db: Path) -> None:
    assert len(Q.run(db, "gaps", {"rows": "3", "present": "2000.5"})) == 3
    assert len(Q.run(db, "gaps", {"rows": 2.0, "start": None})) == 2
    assert len(Q.run(db, "milestones", {"category": "1e3"})) == 0


def test_a_list_that_is_not_there_is_said(db: Path, tmp_path: Path) -> None:
    with pytest.raises(QueryRefused, match="list is 'alfa', but there is no such list .*did you mean 'alpha'. it has alpha, beta"):
        Q.run(db, "entries", {"list": "alfa"})
    with pytest.raises(QueryRefused, match="it has none yet"):
        Q.run(make(tmp_path / "e.duckdb", {}), "entries", {"list": "alpha"})
    assert set(Q.run(db, "entries", {"list": "alpha"})["source"]) == {"alpha"}


def test_a_list_whose_name_looks_like_a_number(tmp_path: Path) -> None:
    db = make(tmp_path / "t.duckdb", {"1e3": [("gate", 1900.5)], "2020": [("mill", 1800.5)]})
    for name in ("1e3", "2020"):
        assert Q.run(db, "entries", {"list": name})["source"].tolist() == [name]


def test_every_parameter_that_is_a_list_is_checked(db: Path) -> None:
    asked = [(query.name, name) for query in Q.named() for name, words in query.parameters.items() if "list" in name]
    assert len(asked) >= 6
    for query, name in asked:
        with pytest.raises(QueryRefused, match="no such list"):
            Q.run(db, query, {name: "nolist"})
