# SPDX-License-Identifier: Apache-2.0
"""How an engine function tells what it is doing, without knowing who listens."""

from __future__ import annotations

from collections.abc import Callable

Tell = Callable[[str, float], None]
"""``tell(what, share)``: what is being done, and the share done from 0 to 1."""


def silent(what: str, share: float) -> None:
    """The listener that says nothing."""
