# SPDX-License-Identifier: Apache-2.0
"""Where the travelling files are found."""

from __future__ import annotations

from pathlib import Path

import pytest

from chronos_acc import files
from chronos_acc.errors import ChronosError


def test_checkout_has_both_folders() -> None:
    assert (files.queries() / "intervals.sql").is_file()
    assert files.datasets().is_dir()


def test_the_packed_place_comes_first(tmp_path: Path) -> None:
    package = tmp_path / "chronos_acc"
    (package / "_files" / "queries").mkdir(parents=True)
    (tmp_path / "queries").mkdir()
    (tmp_path / "pyproject.toml").write_text("")
    assert files.folder("queries", package) == package / "_files" / "queries"


def test_beside_the_package_only_with_pyproject(tmp_path: Path) -> None:
    package = tmp_path / "chronos_acc"
    package.mkdir()
    (tmp_path / "datasets").mkdir()
    with pytest.raises(ChronosError, match="datasets/ is missing.*install the package again"):
        files.folder("datasets", package)
    (tmp_path / "pyproject.toml").write_text("")
    assert files.folder("datasets", package) == tmp_path / "datasets"
