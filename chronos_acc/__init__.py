# SPDX-License-Identifier: Apache-2.0
"""chronos_acc: is a list of milestones speeding up, and would the making of the list produce that by itself?

The steps of the main job are functions of this module; see ``chronos_acc.steps``. Everything heavy loads when it is first used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from .errors import ChronosError as ChronosError
    from .errors import DateRefused as DateRefused
    from .errors import ListRefused as ListRefused
    from .errors import QueryRefused as QueryRefused
    from .errors import RecordRefused as RecordRefused
    from .errors import Refused as Refused
    from .errors import SheetRefused as SheetRefused
    from .errors import TimelineRefused as TimelineRefused
    from .errors import WrongUse as WrongUse
    from .record import Record as Record
    from .steps import analyse as analyse
    from .steps import check_bias as check_bias
    from .steps import interval_series as interval_series
    from .steps import link as link
    from .steps import load as load
    from .steps import query as query
    from .steps import read_date as read_date
    from .steps import read_record as read_record
    from .steps import run_grid as run_grid

_ERRORS = ("ChronosError", "DateRefused", "ListRefused", "QueryRefused", "RecordRefused", "Refused", "SheetRefused", "TimelineRefused", "WrongUse")
_STEPS = ("analyse", "check_bias", "interval_series", "link", "load", "query", "read_date", "read_record", "run_grid")

__all__ = sorted(["Record", "__version__", *_ERRORS, *_STEPS])


def __getattr__(name: str) -> Any:
    from importlib import import_module

    if name in _STEPS:
        value = getattr(import_module(".steps", __name__), name)
    elif name in _ERRORS:
        value = getattr(import_module(".errors", __name__), name)
    elif name == "Record":
        value = import_module(".record", __name__).Record
    else:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return value


def __dir__() -> list[str]:
    return list(__all__)
