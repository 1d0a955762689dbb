# SPDX-License-Identifier: Apache-2.0
"""Runs command lines in this process, in an empty folder, and gives what came of them."""

from __future__ import annotations

import json
import shutil
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from chronos_acc import files
from chronos_acc.cli import main


@dataclass
class Done:
    """Exit status, stdout and stderr of one command line."""

    status: int
    out: str
    err: str

    @property
    def json(self) -> Any:
        return json.loads(self.out, parse_constant=_no_constant)


def _no_constant(name: str) -> Any:
    raise AssertionError(f"{name} is not JSON")


@pytest.fixture
def here(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """An empty folder to stand in; no settings from outside."""
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv("CHRONOS_ACC_DEBUG", "1")  # a fault of our own is a traceback here, not a polite line
    for name in ("CHRONOS_ACC_DB", "COLUMNS", "NO_COLOR"):
        monkeypatch.delenv(name, raising=False)
    return tmp_path


@pytest.fixture
def run(here: Path, capsys: pytest.CaptureFixture[str]):
    """run("load", "a.csv") -> Done."""

    def _run(*words: str) -> Done:
        capsys.readouterr()
        status = main([str(w) for w in words])
        out, err = capsys.readouterr()
        assert "Traceback" not in err and "a fault of chronos-acc" not in err
        return Done(status, out, err)

    return _run


@pytest.fixture(scope="session")
def loaded_scenario(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The scenario in a timeline, made once."""
    db = tmp_path_factory.mktemp("scenario") / "timeline.duckdb"
    folder = files.datasets() / "ondrel"
    status = main(["load", "--quiet", "--format", "json", "--db", str(db), *(str(folder / f"{n}.csv") for n in ("survey", "museum", "yearbook", "school"))])
    assert status == 0
    return db


@pytest.fixture
def scenario(loaded_scenario: Path, here: Path) -> Path:
    """A copy of the scenario's timeline in this folder, under its usual name."""
    return Path(shutil.copy(loaded_scenario, here / "timeline.duckdb"))
