# SPDX-License-Identifier: Apache-2.0
"""The settings table agrees with the dataclass, and wrong values are named."""

from __future__ import annotations

from dataclasses import fields

import pytest

from chronos_acc.dating import SETTINGS, Settings, settings_from
from chronos_acc.dating.settings import as_mapping, problem
from chronos_acc.errors import SheetRefused


def test_the_table_lists_every_field_with_its_default() -> None:
    table = {setting.name: setting.default for setting in SETTINGS}
    defaults = Settings()
    names = [item.name for item in fields(Settings) if item.name not in ("given", "periods")]
    assert names == list(table)
    assert {name: getattr(defaults, name) for name in names} == table
    assert all(setting.meaning and setting.source and setting.allowed for setting in SETTINGS)


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("compiled", 2024),
        ("unit", "Ma"),
        ("unit", "cal. yr BP"),
        ("unit", "B.C.E."),
        ("counted", "ago"),
        ("calendar", "julian"),
        ("decimal", ","),
        ("day_order", "dmy"),
        ("sigma", 2),
        ("sigma", 1.96),
        ("circa", "digit"),
        ("circa", 10),
        ("digits", "all"),
        ("digits", 1),
        ("hundreds", "century"),
        ("radiocarbon", "cal"),
        ("earliest_limit", -1e10),
        ("latest_limit", 2000),
        ("reach", 100),
        ("parts", "halves"),
        ("seasons", "south"),
        ("backwards", "swap"),
    ],
)
def test_allowed_values(name: str, value: object) -> None:
    assert problem(name, value) is None
    assert as_mapping(settings_from({name: value})) == {name: value}


@pytest.mark.parametrize(
    ("name", "value", "says"),
    [
        ("compiled", 2024.5, "whole year"),
        ("compiled", True, "whole year"),
        ("compiled", "2024", "whole year"),
        ("unit", "furlong", "such as"),
        ("counted", "years", '"calendar" or "ago"'),
        ("decimal", ";", '"." or ","'),
        ("sigma", 0, "above 0"),
        ("sigma", "two", "above 0"),
        ("sigma", float("nan"), "above 0"),
        ("circa", "wide", '"digit" or'),
        ("digits", 0, '"all" or'),
        ("hundreds", "", '"century" or "decade"'),
        ("earliest_limit", float("inf"), "decimal year"),
        ("day_order", 3, '"dmy" or'),
        ("colour", "red", "is no setting"),
    ],
)
def test_refused_values(name: str, value: object, says: str) -> None:
    with pytest.raises(SheetRefused, match=f"dating. {name} .*") as refusal:
        settings_from({name: value})
    assert says in str(refusal.value)


def test_limits_in_order() -> None:
    with pytest.raises(SheetRefused, match="does not come before"):
        settings_from({"earliest_limit": 2000.0, "latest_limit": 1000.0})
