# SPDX-License-Identifier: Apache-2.0
"""The family of nulls, in the order in which a verdict asks them. recall_decay is a maker: it takes a half-life or a scale."""

from __future__ import annotations

from . import log_uniform, shuffled, steady
from .recall_decay import recall_decay

STEADY = steady.NULL
SHUFFLED = shuffled.NULL
LOG_UNIFORM = log_uniform.NULL

NAMES = ("steady", "shuffled", "recall_decay", "log_uniform")  # one file each
NULLS = (STEADY, SHUFFLED, LOG_UNIFORM)  # those that need no parameter

__all__ = ["LOG_UNIFORM", "NAMES", "NULLS", "SHUFFLED", "STEADY", "recall_decay"]
