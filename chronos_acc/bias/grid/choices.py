# SPDX-License-Identifier: Apache-2.0
"""The choices a grid runs over, declared in one place: the defaults, or a TOML file of the user's own.

Arbitrary choices are equally defensible answers to one question; shares are given over them alone. Choices that change the
question (what responds, and which milestones are asked) only say which question the shares belong to. A file's hash is printed,
so that choices can be shown to have been made before looking.
"""

from __future__ import annotations

import difflib
import hashlib
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from ...errors import WrongUse

ARBITRARY, QUESTION = "arbitrary", "question"
RESPONSES = ("log10_interval", "rate")
EACH_OUT = "each left out"
Option = str | float


@dataclass(frozen=True)
class Choice:
    """One choice: its group, the responses it applies to, what is allowed (words, or numbers from a least value on), and the
    default options.
    """

    name: str
    group: str
    responses: tuple[str, ...]
    words: tuple[str, ...]
    least: float | None
    default: tuple[Option, ...]
    meaning: str


CHOICES: tuple[Choice, ...] = (
    Choice(
        "response",
        QUESTION,
        RESPONSES,
        RESPONSES,
        None,
        RESPONSES,
        "log10_interval: log interval regressed; rate: growth of the log-linear rate",
    ),
    Choice("lists", QUESTION, RESPONSES, ("all", EACH_OUT), None, ("all", EACH_OUT), "lists that speak: all, or all but one, each in turn"),
    Choice("min_support", QUESTION, RESPONSES, (), 1.0, (1.0, 2.0), "independent lists that must name a milestone"),
    Choice("min_importance", QUESTION, RESPONSES, ("any",), float("-inf"), ("any",), "least importance of a milestone"),
    Choice("category", QUESTION, RESPONSES, ("any", "each"), None, ("any",), "one category: any, each in turn, or names"),
    Choice(
        "dates", ARBITRARY, RESPONSES, ("pooled", "earliest", "latest"), None, ("pooled", "earliest", "latest"), "dating where lists differ"
    ),
    Choice(
        "young_end",
        ARBITRARY,
        RESPONSES,
        ("open", "counted", "last"),
        None,
        ("open", "counted", "last"),
        "the interval up to the present: open (left out), counted as if closed, or the last milestone is the present",
    ),
    Choice(
        "short_intervals",
        ARBITRARY,
        ("log10_interval",),
        ("joined", "floored"),
        None,
        ("joined", "floored"),
        "intervals under half the finest dating unit: milestones joined, or interval raised to it",
    ),
    Choice(
        "predictor",
        ARBITRARY,
        ("log10_interval",),
        ("log10_age", "order", "log10_time"),
        None,
        ("log10_age", "order", "log10_time"),
        "what log10 interval is regressed on; a positive slope is speeding",
    ),
    Choice(
        "estimator",
        ARBITRARY,
        ("log10_interval",),
        ("ols", "theil_pairs", "theil_sen"),
        None,
        ("ols", "theil_pairs"),
        "least squares, Theil's median of slopes between halves (1950), or of all pairs (slow)",
    ),
)
BY_NAME = {c.name: c for c in CHOICES}
RATE_ENDS = ("open", "last")  # a rate knows no interval that could be counted


@dataclass(frozen=True)
class Choices:
    """Options of each choice, the user's own combination (the first option where not said), and what declared them."""

    options: Mapping[str, tuple[Option, ...]]
    own: Mapping[str, Option] = field(default_factory=dict)
    origin: str = "defaults"
    hash: str = ""

    def to_toml(self) -> str:
        """A file to start from; reads back to the same choices."""
        lines = [
            "# Choices of a grid. Arbitrary: equally defensible answers to one question. Question: each option asks another question.",
            "",
        ]
        for group in (ARBITRARY, QUESTION):
            lines.append(f"[{group}]")
            for c in CHOICES:
                if c.group == group:
                    lines += [f"# {c.meaning}", f"{c.name} = [{', '.join(_toml(o) for o in self.options[c.name])}]"]
            lines.append("")
        lines += ["# Your own combination; the first option of each choice where it is not said.", "[own]"]
        lines += [f"{k} = {_toml(v)}" for k, v in self.own.items()]
        return "\n".join(lines) + "\n"


def default_choices() -> Choices:
    """The declared defaults."""
    plain = Choices({c.name: c.default for c in CHOICES})
    return Choices(plain.options, {}, "defaults", _digest(plain.to_toml().encode()))


def read_choices(path: str | Path) -> Choices:
    """Choices from a TOML file with tables ``arbitrary``, ``question`` and ``own``; a choice not named keeps its first default only.

    Raises WrongUse for a file that cannot be read and for unknown tables, choices or options, with what is allowed.
    """
    path = Path(path)
    try:
        raw = path.read_bytes()
        given = tomllib.loads(raw.decode("utf-8"))
    except OSError as error:
        raise WrongUse(
            f"{path}: cannot be read ({error.strerror}); give the path of a TOML file, or none for the default choices"
        ) from None
    except (UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise WrongUse(f"{path}: is not TOML in UTF-8 ({error})") from None
    return choices_of(given, str(path.name), _digest(raw))


def choices_of(given: Mapping[str, Any], origin: str, digest: str) -> Choices:
    """Choices from the tables of a file, validated."""
    tables = (ARBITRARY, QUESTION, "own")
    for table in given:
        if table not in tables:
            raise WrongUse(f"{origin}: there is no table [{table}]{_nearest(table, tables)}; allowed are {', '.join(tables)}")
        if not isinstance(given[table], Mapping):
            raise WrongUse(f"{origin}: {table} must be a table, [{table}]")
    options: dict[str, tuple[Option, ...]] = {}
    for c in CHOICES:
        wrong = QUESTION if c.group == ARBITRARY else ARBITRARY
        if c.name in given.get(wrong, {}):
            raise WrongUse(f"{origin}: {c.name} belongs in [{c.group}], not in [{wrong}]")
        listed = given.get(c.group, {}).get(c.name, [c.default[0]])
        if not isinstance(listed, list) or not listed:
            raise WrongUse(f"{origin}: {c.name} must be a list of options, such as [{', '.join(_toml(o) for o in c.default)}]")
        options[c.name] = tuple(dict.fromkeys(_option(c, o, origin) for o in listed))
    for group in (ARBITRARY, QUESTION):
        for name in given.get(group, {}):
            if name not in BY_NAME:
                raise WrongUse(f"{origin}: there is no choice {name!r}{_nearest(name, BY_NAME)}; the choices are {', '.join(BY_NAME)}")
    own: dict[str, Option] = {}
    for name, value in given.get("own", {}).items():
        if name not in BY_NAME:
            raise WrongUse(f"{origin}: there is no choice {name!r}{_nearest(name, BY_NAME)}; the choices are {', '.join(BY_NAME)}")
        own[name] = _option(BY_NAME[name], value, origin)
        if name not in ("lists", "category") and own[name] not in options[name]:
            raise WrongUse(
                f"{origin}: your own {name}, {value!r}, is not among its options {', '.join(map(str, options[name]))}; add it there"
            )
    return Choices(options, own, origin, digest)


def _option(choice: Choice, value: Any, origin: str) -> Option:
    number = isinstance(value, (int, float)) and not isinstance(value, bool)
    if number and choice.least is not None and value >= choice.least:
        return float(value)
    if isinstance(value, str) and (value in choice.words or choice.name in ("category", "lists")):
        return value
    allowed = [*choice.words]
    if choice.least is not None:
        allowed.append("a number" if choice.least == float("-inf") else f"a number from {choice.least:g} on")
    if choice.name == "category":
        allowed.append("the name of a category")
    raise WrongUse(f"{origin}: {choice.name} cannot be {value!r}{_nearest(str(value), choice.words)}; allowed are {', '.join(allowed)}")


def _nearest(word: str, known: Any) -> str:
    near = difflib.get_close_matches(word, list(known), n=1)
    return f" (did you mean {near[0]!r}?)" if near else ""


def _toml(value: Option) -> str:
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return f'"{escaped}"'
    return f"{value:g}" if value == int(value) else repr(value)


def _digest(raw: bytes) -> str:
    return hashlib.sha256(raw).hexdigest()[:16]
