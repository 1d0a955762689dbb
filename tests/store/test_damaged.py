# SPDX-License-Identifier: Apache-2.0
"""Two hundred damaged files, made with a fixed seed: every row is loaded or refused, and nothing raises but a refusal."""

from __future__ import annotations

import gzip
import io
import json
import random
from collections.abc import Callable
from pathlib import Path

import pytest

from chronos_acc.errors import ListRefused, Refused
from chronos_acc.store.ledger import open_for_reading
from chronos_acc.store.load import load
from chronos_acc.store.propose import propose_sheet

SEED = 20_240
COUNT = 200
DATES = [
    "1850",
    "c. 1700",
    "44 BCE",
    "66.0 Ma",
    "1850–60",
    "19th century",
    "no date",
    "-500",
    "1850-06-05",
    "",
    "12,000 years ago",
    "1.5e3",
]
TITLES = ["Kiln", 'The "old" mill', "Harbour, lower", "Été", "Canal\nsecond cut", "Loom 3", "", "Bridge = 5", "名前"]
Damage = Callable[[bytes, random.Random], bytes]


def text(rng: random.Random, delimiter: str = ",", end: str = "\n") -> bytes:
    """A list in delimited text."""
    import csv

    out = io.StringIO()
    writer = csv.writer(out, delimiter=delimiter, lineterminator=end)
    writer.writerow(["title", "date", "category", "extra"])
    for i in range(rng.randint(1, 30)):
        writer.writerow(
            [
                f"{rng.choice(TITLES)} {i}" if rng.random() < 0.95 else "",
                rng.choice(DATES),
                rng.choice(["a", ""]),
                rng.choice(["x", "", "14C"]),
            ]
        )
    return out.getvalue().encode()


def cut(data: bytes, rng: random.Random) -> bytes:
    """The file breaks off."""
    return data[: rng.randrange(len(data) + 1)]


def other_encoding(data: bytes, rng: random.Random) -> bytes:
    """Another encoding than it should be."""
    return data.decode().encode(rng.choice(["utf-16-le", "utf-16", "cp1252", "shift_jis", "utf-8-sig", "utf-32"]), "replace")


def nuls(data: bytes, rng: random.Random) -> bytes:
    """NUL bytes here and there."""
    for _ in range(rng.randint(1, 5)):
        place = rng.randrange(len(data) + 1)
        data = data[:place] + b"\0" + data[place:]
    return data


def ragged(data: bytes, rng: random.Random) -> bytes:
    """Delimiters too many or too few."""
    lines = data.split(b"\n")
    for _ in range(3):
        i = rng.randrange(len(lines))
        lines[i] = lines[i] + b",,x" if rng.random() < 0.5 else lines[i].replace(b",", b"", 1)
    return b"\n".join(lines)


def wrong_delimiter(data: bytes, rng: random.Random) -> bytes:
    """Another delimiter in part of the file."""
    half = rng.randrange(len(data))
    return data[:half] + data[half:].replace(b",", rng.choice([b";", b"\t", b"|", b":"]))


def twice(data: bytes, rng: random.Random) -> bytes:
    """Duplicate headers."""
    return data.replace(
        b"title,date,category,extra",
        rng.choice([b"title,date,Title,extra", b"title,date,extra,extra", b"date,date,title,x", b",,,", b"title"]),
        1,
    )


def huge(data: bytes, rng: random.Random) -> bytes:
    """A huge field."""
    return data + (b'"' if rng.random() < 0.3 else b"") + b"y" * rng.choice([140_000, 2_300_000]) + b",1850,,\nlast,1,,\n"


def markup(data: bytes, rng: random.Random) -> bytes:
    """Markup, formulas and escape codes."""
    return data + b"<script>x</script>,1850,[/bold],\x1b]0;x\x07\n=cmd|' /C',1850,,\n\x1b[2J,\x1b[31m1850,,\n"


def quotes(data: bytes, rng: random.Random) -> bytes:
    """Stray quotes."""
    for _ in range(rng.randint(1, 6)):
        place = rng.randrange(len(data) + 1)
        data = data[:place] + b'"' + data[place:]
    return data


def ends(data: bytes, rng: random.Random) -> bytes:
    """Mixed line ends."""
    return b"".join(line + rng.choice([b"\n", b"\r\n", b"\r", b"\n\n"]) for line in data.split(b"\n"))


def noise(data: bytes, rng: random.Random) -> bytes:
    """Bytes changed at random."""
    changed = bytearray(data)
    for _ in range(rng.randint(1, 20)):
        if changed:
            changed[rng.randrange(len(changed))] = rng.randrange(256)
    return bytes(changed)


DAMAGES: tuple[Damage, ...] = (cut, other_encoding, nuls, ragged, wrong_delimiter, twice, huge, markup, quotes, ends, noise)


def objects(rng: random.Random, lines: bool) -> bytes:
    """A list in JSON."""
    rows = [{"title": rng.choice(TITLES), "date": rng.choice([*DATES, 1850, 1.5, None, True, [1]])} for _ in range(rng.randint(1, 20))]
    return "\n".join(map(json.dumps, rows)).encode() if lines else json.dumps(rows).encode()


def binary(ending: str) -> bytes:
    """A list in Parquet or Excel."""
    import pandas as pd

    frame = pd.DataFrame({"title": [f"kiln {i}" for i in range(40)], "date": [str(1800 + i) for i in range(40)]})
    out = io.BytesIO()
    if ending == "parquet":
        frame.to_parquet(out)
    else:
        frame.to_excel(out, index=False)
    return out.getvalue()


def damaged_files(folder: Path, count: int = COUNT) -> list[Path]:
    """Damaged files of every format; the same for the same seed."""
    rng = random.Random(SEED)
    bases = {ending: binary(ending) for ending in ("parquet", "xlsx")}
    made = []
    for i in range(count):
        damage = DAMAGES[i % len(DAMAGES)]
        ending = rng.choice(["csv", "csv", "csv", "csv", "tsv", "json", "ndjson", "csv.gz", "parquet", "xlsx"])
        if ending in bases:
            data = (cut if i % 2 else noise)(bases[ending], rng)
        elif ending in ("json", "ndjson"):
            data = rng.choice([cut, nuls, noise, quotes, other_encoding])(objects(rng, ending == "ndjson"), rng)
        elif ending == "csv.gz":
            data = damage(text(rng), rng)
            data = gzip.compress(data) if i % 3 else cut(gzip.compress(data), rng)
        else:
            data = damage(text(rng, "\t" if ending == "tsv" else rng.choice(",,;"), rng.choice(["\n", "\r\n"])), rng)
        path = folder / f"damaged {i:03d} {damage.__name__}.{ending}"
        path.write_bytes(data)
        made.append(path)
    return made


def test_two_hundred_damaged_files(tmp_path: Path) -> None:
    files = damaged_files(tmp_path)
    db = tmp_path / "t.duckdb"
    with pytest.raises(ListRefused) as caught:
        load(db, files, link=False)
    loaded = {one.source: one for one in caught.value.loaded}  # type: ignore[attr-defined]
    assert len(loaded) > COUNT / 3
    assert "\n" not in str(caught.value) and "\x1b" not in str(caught.value)
    with open_for_reading(db) as ledger:
        counted = {
            name: (read, entries, rejects)
            for name, read, entries, rejects in ledger.rows(
                "SELECT name, rows_read, (SELECT count(*) FROM ledger.entry e WHERE e.source = s.source), "
                "(SELECT count(*) FROM ledger.reject r WHERE r.source = s.source) FROM ledger.source s"
            )
        }
        assert set(loaded) == {name for name, (_, entries, _) in counted.items() if entries}
        for name, (read, entries, rejects) in counted.items():
            assert read == entries + rejects, name
            if name in loaded:
                one = loaded[name]
                assert (one.rows_read, one.rows_loaded, one.rows_rejected) == (read, entries, rejects)
        assert ledger.value("SELECT count(*) FROM ledger.reject WHERE reason = '' OR raw IS NULL") == 0
        # No row stands twice: an entry and a reject never have the same row of the same list.
        both = "SELECT source, row FROM ledger.entry UNION ALL SELECT source, row FROM ledger.reject"
        assert ledger.value(f"SELECT count(*) FROM (SELECT 1 FROM ({both}) GROUP BY source, row HAVING count(*) > 1)") == 0


def test_a_sheet_can_be_proposed_for_damaged_files_or_they_are_refused(tmp_path: Path) -> None:
    import tomllib

    for path in damaged_files(tmp_path, 44):
        try:
            proposed = propose_sheet(path)
        except Refused as refused:
            assert "\n" not in str(refused)
        else:
            tomllib.loads(proposed)
