# SPDX-License-Identifier: Apache-2.0
"""Finds the files that travel with the program, queries/ and datasets/, in a wheel, an editable install and a checkout alike."""

from __future__ import annotations

from pathlib import Path

from .errors import ChronosError

PACKAGE = Path(__file__).resolve().parent


def folder(name: str, package: Path = PACKAGE) -> Path:
    """The folder ``name`` ("queries" or "datasets"): inside the package where a wheel put it, else beside the package.

    Beside the package it counts only when pyproject.toml stands there too; otherwise a stranger's folder of the same name in
    site-packages would be taken for ours. Raises ChronosError when neither is there.
    """
    packed = package / "_files" / name
    if packed.is_dir():
        return packed
    beside = package.parent / name
    if beside.is_dir() and (package.parent / "pyproject.toml").is_file():
        return beside
    raise ChronosError(f"the folder {name}/ is missing from this installation; looked in {packed} and {beside}; install the package again")


def queries() -> Path:
    """Folder of the named queries."""
    return folder("queries")


def datasets() -> Path:
    """Folder of the shipped lists."""
    return folder("datasets")
