# SPDX-License-Identifier: Apache-2.0
"""The exceptions of chronos_acc.

    ChronosError                   whatever a person can cause and mend; one line, no traceback
     ├─ Refused                    the input or the data was refused (exit status 1)
     │   ├─ DateRefused            a date text that cannot be read, or reads in two ways
     │   ├─ ListRefused            a compiler's file
     │   ├─ SheetRefused           a sheet: its file, key and allowed values are named
     │   ├─ TimelineRefused        a timeline file: foreign, older, held by another process, read-only, full
     │   ├─ RecordRefused          the record is too small or empty for what was asked, or it contradicts itself
     │   └─ QueryRefused           a person's SQL, or a named query's parameter
     └─ WrongUse                   a wrong command line or a wrong argument (exit status 2)

A message says what was given, what is allowed, and what to do next.
"""

from __future__ import annotations


class ChronosError(Exception):
    """Base of everything the tool raises on purpose."""

    exit_status = 1


class Refused(ChronosError):
    """The input or the data was refused."""


class DateRefused(Refused):
    """A date text that no notation reads, or that several read to different bounds."""


class ListRefused(Refused):
    """A compiler's file that cannot be read as a list. ``loaded`` holds what was loaded of other files in the same call."""

    loaded: tuple[object, ...] = ()


class SheetRefused(Refused):
    """A sheet with a wrong key or value."""


class TimelineRefused(Refused):
    """A timeline file that cannot be opened, read or written."""


class RecordRefused(Refused):
    """A record that is empty, too small, or at odds with itself."""


class QueryRefused(Refused):
    """SQL or a named query that is not allowed."""


class WrongUse(ChronosError):
    """A wrong command line, or a wrong argument to a function."""

    exit_status = 2
