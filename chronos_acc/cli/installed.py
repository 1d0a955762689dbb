# SPDX-License-Identifier: Apache-2.0
"""``--check-install``: what is installed, which extras are missing, and how to get them."""

from __future__ import annotations

import platform
from importlib import metadata

from .. import __version__
from .output import Output

NEEDED = ("numpy", "pandas", "duckdb", "scipy", "statsmodels", "rich")
EXTRAS = {"excel": ("openpyxl",), "figures": ("matplotlib",)}


def _version(name: str) -> str | None:
    try:
        return metadata.version(name)
    except metadata.PackageNotFoundError:
        return None


def check(out: Output) -> int:
    """Print the table; exit status 1 where something needed is missing."""
    import pandas as pd

    from .. import files
    from ..errors import ChronosError
    from ..report.tables import Column, Page, Table

    rows = [("chronos_acc", "itself", __version__, ""), ("Python", "itself", platform.python_version(), "")]
    for name in NEEDED:
        found = _version(name)
        rows.append((name, "needed", found or "missing", "" if found else f"pip install {name}"))
    for extra, names in EXTRAS.items():
        for name in names:
            found = _version(name)
            rows.append((name, f"extra: {extra}", found or "missing", "" if found else f"pip install 'chronos-acc[{extra}]'"))
    for folder in ("queries", "datasets"):
        try:
            where = str(files.folder(folder))
        except ChronosError:
            where = ""
        rows.append((f"{folder}/", "shipped files", "found" if where else "missing", "" if where else "install chronos-acc again"))
    frame = pd.DataFrame(rows, columns=["part", "role", "version", "to_get_it"])
    columns = (Column("part", "part"), Column("role", "role"), Column("version", "version"), Column("to_get_it", "to get it"))
    out.page(Page(frame.to_dict("records"), (Table("install", frame, "What is installed, and what is missing?", columns),)))
    return int(any(r[2] == "missing" and not r[1].startswith("extra") for r in rows))
