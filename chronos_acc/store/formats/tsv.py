# SPDX-License-Identifier: Apache-2.0
"""TSV: as CSV, but the tab is tried first."""

from __future__ import annotations

from functools import partial

from .. import delimited
from ..table import Format

FORMAT = Format("tsv", (".tsv", ".tab"), "text with a tab between cells", partial(delimited.read, first="\t"))
