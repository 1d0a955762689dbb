# SPDX-License-Identifier: Apache-2.0
"""Every rule that turns the words of a date into bounds, as one named setting with its default and source.

A list's sheet may set each of them under ``[dating]``; SETTINGS is the table that the sheet is checked against and that the
documents print. Years are decimal, proleptic Gregorian, astronomical (1 BCE is 0).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Any, Literal

from ..errors import SheetRefused

if TYPE_CHECKING:
    from .periods import Periods


@dataclass(frozen=True, slots=True)
class Settings:
    """How the dates of one list are to be read; see SETTINGS for the meaning of each field.

    ``given`` names the fields that a person set, so that a reading can tell which defaults it rested on.
    """

    compiled: int | None = None
    unit: str | None = None
    counted: Literal["calendar", "ago"] = "calendar"
    calendar: Literal["gregorian", "julian"] = "gregorian"
    decimal: Literal[".", ","] = "."
    day_order: Literal["dmy", "mdy", "ymd"] | None = None
    sigma: float = 1.0
    circa: Literal["digit"] | float = "digit"
    digits: Literal["all"] | int = 2
    hundreds: Literal["century", "decade"] | None = None
    radiocarbon: Literal["cal"] | None = None
    earliest_limit: float | None = None
    latest_limit: float | None = None
    reach: float | None = None
    parts: Literal["thirds", "halves"] = "thirds"
    seasons: Literal["north", "south"] = "north"
    backwards: Literal["refuse", "swap"] = "refuse"
    periods: Periods | None = None
    given: frozenset[str] = field(default=frozenset(), repr=False)


@dataclass(frozen=True, slots=True)
class Setting:
    """One row of the table of settings: its name, the type and values allowed, its default, what it means, and where the rule comes from.

    ``words`` are the values allowed of a setting that takes words; ``number`` says what number it may be ("" when none may be given).
    """

    name: str
    type: str
    words: tuple[str, ...]
    number: str
    default: object
    meaning: str
    source: str

    @property
    def allowed(self) -> str:
        """The allowed values in words, for a message or a document."""
        return " or ".join([*(f'"{word}"' for word in self.words), *([self.number] if self.number else [])])


HOUSE = "choice of this tool"
SETTINGS: tuple[Setting, ...] = (
    Setting(
        "compiled",
        "integer",
        (),
        "a whole year from -9999 to 9999",
        None,
        "the year the list was compiled; ages (a, ka, Ma, Ga, ago) count back from its start, and no date may lie after its end",
        HOUSE,
    ),
    Setting(
        "unit", "text", (), 'a unit or era such as "Ma", "ka BP", "BCE"', None, "the unit or era of a number that names none itself", HOUSE
    ),
    Setting(
        "counted",
        "text",
        ("calendar", "ago"),
        "",
        "calendar",
        "what a number without unit or era is: a calendar year, or years before the compile year",
        "ISO 8601-1 for the calendar year",
    ),
    Setting(
        "calendar",
        "text",
        ("gregorian", "julian"),
        "",
        "gregorian",
        "the calendar of dates that name a month or day; years by themselves are not moved",
        "ISO 8601-1: proleptic Gregorian",
    ),
    Setting(
        "decimal",
        "text",
        (".", ","),
        "",
        ".",
        "the decimal mark; the other one groups thousands when exactly three digits follow",
        "ISO 80000-1 allows both",
    ),
    Setting(
        "day_order",
        "text",
        ("dmy", "mdy", "ymd"),
        "",
        None,
        "the order of the numbers in 03/04/1848; without it such a date is refused unless one order alone is possible",
        HOUSE,
    ),
    Setting(
        "sigma",
        "number",
        (),
        "a number above 0",
        1.0,
        "how many standard deviations a plus-minus states when the text does not say",
        "JCGM 100:2008 (standard uncertainty)",
    ),
    Setting(
        "circa",
        "text or number",
        ("digit",),
        "a number of years above 0",
        "digit",
        "how far circa reaches each side: one unit of the last significant digit and five years at least (half its width for a decade, "
        "century or period), or this many years",
        "choice of this tool; 5 in Cataloging Cultural Objects 4.2.3.2, 10 in the Object ID guide (ICOM/Getty)",
    ),
    Setting(
        "digits",
        "text or integer",
        ("all",),
        "a whole number of at least 1",
        2,
        'how many leading digits count at least, when trailing zeros are rounding (ages, BP, BCE, circa); "all": every digit counts',
        HOUSE,
    ),
    Setting(
        "hundreds",
        "text",
        ("century", "decade"),
        "",
        None,
        "what 1500s means: 1500-1599 or 1500-1509; without it such a date is refused",
        HOUSE,
    ),
    Setting(
        "radiocarbon",
        "text",
        ("cal",),
        "",
        None,
        '"cal": numbers marked 14C BP are calibrated already; without it they are refused, since uncalibrated years are no calendar years',
        "Stuiver & Polach 1977, Radiocarbon 19:355-363",
    ),
    Setting("earliest_limit", "number", (), "a decimal year", None, "the bound that an open early end takes (before 1850, ../1985)", HOUSE),
    Setting(
        "latest_limit",
        "number",
        (),
        "a decimal year",
        None,
        "the bound that an open late end takes (after 1850, 1985/..); without it the end of the compile year",
        HOUSE,
    ),
    Setting(
        "reach",
        "number",
        (),
        "a number of years above 0",
        None,
        "how many years an open end reaches from the date it opens at, when no limit is set",
        "100 in the Object ID guide (ICOM/Getty)",
    ),
    Setting(
        "parts",
        "text",
        ("thirds", "halves"),
        "",
        "thirds",
        "early, mid and late: thirds in whole years; or first half, middle half, second half",
        "one convention among several",
    ),
    Setting(
        "seasons",
        "text",
        ("north", "south"),
        "",
        "north",
        "the hemisphere of a season that names none; winter runs over the new year in the north, summer in the south",
        "ISO 8601-2:2019 leaves the months open",
    ),
    Setting(
        "backwards",
        "text",
        ("refuse", "swap"),
        "",
        "refuse",
        "a range whose second end is the earlier one: refused, or read the other way round",
        HOUSE,
    ),
)
BY_NAME = {setting.name: setting for setting in SETTINGS}
DEFAULTS: dict[str, object] = {setting.name: setting.default for setting in SETTINGS}


def problem(name: str, value: Any) -> str | None:
    """Why a value may not be given to a setting, in words that follow its name, or None when it may."""
    if name not in BY_NAME:
        return f"is no setting; there are {', '.join(BY_NAME)}"
    setting = BY_NAME[name]
    number = isinstance(value, (int, float)) and not isinstance(value, bool) and math.isfinite(value)
    if name == "unit":
        from .units import find_unit

        good = isinstance(value, str) and find_unit(value) is not None
    elif name == "compiled":
        good = number and isinstance(value, int) and -9999 <= value <= 9999
    elif name == "digits":
        good = value == "all" or (number and isinstance(value, int) and value >= 1)
    elif name in ("earliest_limit", "latest_limit"):
        good = number and abs(value) <= 1e15
    elif isinstance(value, str):
        good = value in setting.words
    else:
        good = number and bool(setting.number) and value > 0
    return None if good else f"is {value!r}; allowed: {setting.allowed}"


def settings_from(mapping: Mapping[str, Any], *, periods: Periods | None = None) -> Settings:
    """Settings from a sheet's ``[dating]`` keys, checked one by one; raises SheetRefused that names the key and what is allowed."""
    for name, value in mapping.items():
        wrong = problem(name, value)
        if wrong:
            raise SheetRefused(f"[dating] {name} {wrong}")
    low, high = mapping.get("earliest_limit"), mapping.get("latest_limit")
    if low is not None and high is not None and low >= high:
        raise SheetRefused(f"[dating] earliest_limit {low} does not come before latest_limit {high}")
    return Settings(**mapping, periods=periods, given=frozenset(mapping))


def as_mapping(settings: Settings) -> dict[str, Any]:
    """The settings that differ from their default or were given, as a sheet would hold them."""
    names = [item.name for item in fields(settings) if item.name in BY_NAME]
    return {name: getattr(settings, name) for name in names if name in settings.given or getattr(settings, name) != DEFAULTS[name]}
