# SPDX-License-Identifier: Apache-2.0
"""Merging: which entries of several lists name one milestone, and one dating for each. Plain arrays in and out, no database."""

from .entries import Decision, Entries, Linked, LinkOptions
from .linking import link
from .pool import RULES, Combined, Pooled, combine, list_groups, pool

__all__ = ["RULES", "Combined", "Decision", "Entries", "LinkOptions", "Linked", "Pooled", "combine", "link", "list_groups", "pool"]
