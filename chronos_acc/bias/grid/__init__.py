# SPDX-License-Identifier: Apache-2.0
"""The grid: every combination of defensible choices on one record, and how often a steady record would give as much."""

from .choices import CHOICES, Choice, Choices, choices_of, default_choices, read_choices
from .result import TABLES, Grid, Line
from .run import run_grid

__all__ = ["CHOICES", "TABLES", "Choice", "Choices", "Grid", "Line", "choices_of", "default_choices", "read_choices", "run_grid"]
