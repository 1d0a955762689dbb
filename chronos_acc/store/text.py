# SPDX-License-Identifier: Apache-2.0
"""Bytes to text: encodings, byte order marks, line ends, and what cannot be decoded."""

from __future__ import annotations

import codecs
import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from functools import cached_property
from pathlib import Path

from ..errors import ListRefused, WrongUse
from .table import Asked, clip

BLOCK = 1 << 23
BINARY_SHARE = 0.05  # of the first 64 KiB that may be control characters
_MARKS = (
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF8, "utf-8"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_KINDS = (
    (b"PK\x03\x04", "a zip archive or an Excel workbook"),
    (b"PAR1", "a Parquet file"),
    (b"\x1f\x8b", "gzip data"),
    (b"%PDF", "a PDF"),
    (b"\xd0\xcf\x11\xe0", "an old Office file"),
    (b"\x89PNG", "a picture"),
    (b"\xff\xd8\xff", "a picture"),
    (b"SQLite format 3", "an SQLite database"),
)
_CONTROLS = bytes(b for b in range(32) if b not in b"\t\n\r\x0b\x0c\x1a\x1b")
_STRAY = re.compile("[\udc00-\udcff]")


def _keep_bytes(error: UnicodeError) -> tuple[str, int]:
    """An error handler that keeps each byte that cannot be decoded as a lone low surrogate, so that its row can be refused by itself."""
    if not isinstance(error, UnicodeDecodeError):
        raise error
    return "".join(chr(0xDC00 + byte) for byte in error.object[error.start : error.end]), error.end


codecs.register_error("chronos_acc.keep_bytes", _keep_bytes)


def known_encoding(name: str) -> str:
    """The codec's own name of a text encoding. Raises WrongUse."""
    try:
        "".encode(name)
        return codecs.lookup(name).name
    except (LookupError, ValueError, TypeError, UnicodeError):
        raise WrongUse(f"encoding {name!r} is not known; name one such as utf-8, cp1252, latin-1, mac-roman, utf-16 or shift_jis") from None


@dataclass
class Text:
    """A text file as UTF-8. ``plain``: sound UTF-8, no NUL, one kind of line end; ``count`` lines. ``head`` holds the first of them."""

    path: Path
    encoding: str
    plain: bool
    newline: str
    count: int
    head: Sequence[str]
    whole: str | None = None  # decoded text, where the file had to be decoded as a whole
    notes: list[str] = field(default_factory=list)

    @cached_property
    def lines(self) -> list[str]:
        """All lines, without their ends."""
        text = self.whole
        if text is None:
            text = self.path.read_bytes().decode("utf-8", "chronos_acc.keep_bytes")
        return split(text.removeprefix("\ufeff"), self.newline)

    def fault(self, raw: str) -> str:
        """Why a row cannot be decoded, or nothing."""
        if self.plain or raw.isascii():
            return ""
        stray = _STRAY.search(raw)
        if stray is None:
            return ""
        byte = ord(stray[0]) - 0xDC00
        return f'byte 0x{byte:02X} is not {self.encoding}; name the file\'s encoding in its sheet, for example encoding = "cp1252"'

    def raw_lines(self, rows: Sequence[int]) -> dict[int, str]:
        """The text of lines by number (sorted, from 1), in one pass over the file."""
        found: dict[int, str] = {}
        wanted = iter(rows)
        row = next(wanted, None)
        with self.path.open("rb") as file:
            for number, line in enumerate(file, 1):
                if number == row:
                    found[number] = clip(line.decode("utf-8", "replace").rstrip("\r\n").removeprefix("\ufeff"))
                    row = next(wanted, None)
                    if row is None:
                        break
        return found


def split(text: str, newline: str) -> list[str]:
    """The lines of a text. A lone carriage return ends a line only where the file has no line feed at all."""
    if newline == "\r":
        lines = text.split("\r")
    else:
        lines = text.split("\n")
        if newline != "\n":
            lines = [line.removesuffix("\r") for line in lines]
    if lines and not lines[-1]:
        lines.pop()
    return lines


def text_of(path: Path, asked: Asked) -> Text:
    """The text of a file: its encoding is the one named, or told by a byte order mark, or UTF-8. Raises ListRefused."""
    with path.open("rb") as file:
        start = file.read(65536)
    marked = next((name for mark, name in _MARKS if start.startswith(mark)), None)
    encoding = known_encoding(asked.encoding) if asked.encoding else marked or "utf-8"
    if encoding in ("utf-8", "utf-8-sig", "ascii") and (marked in (None, "utf-8")):
        refuse_binary(start, asked.name)
        return _utf8(path, start)
    if not encoding.startswith(("utf-16", "utf-32")):
        refuse_binary(start, asked.name)
    whole = path.read_bytes().decode(encoding, "chronos_acc.keep_bytes").removeprefix("\ufeff")
    newline = _newline(whole.count("\n"), whole.count("\r"), whole.count("\r\n"))
    lines = split(whole, newline)
    if _STRAY.search(whole) or "\0" in whole or newline not in ("\n", "\r\n"):
        return Text(path, encoding, False, newline, len(lines), lines, whole)
    copy = asked.scratch / "decoded.txt"
    copy.write_text(whole, encoding="utf-8", newline="")
    return Text(copy, encoding, True, newline, len(lines), lines, whole)


def refuse_binary(start: bytes, name: str) -> None:
    """Refuses what is no text. Raises ListRefused."""
    kind = next((kind for magic, kind in _KINDS if start.startswith(magic)), None)
    if kind:
        raise ListRefused(f"{name}: not text but {kind}; give the file the ending of its format, or name the format with --as")
    if start and (len(start) - len(start.translate(None, _CONTROLS))) > BINARY_SHARE * len(start):
        raise ListRefused(f'{name}: looks like binary data, not text; if it is UTF-16, write encoding = "utf-16-le" into its sheet')


def _newline(feeds: int, returns: int, pairs: int) -> str:
    if returns == 0:
        return "\n"
    if feeds == 0:
        return "\r"
    return "\r\n" if feeds == returns == pairs else "mixed"


def _utf8(path: Path, start: bytes) -> Text:
    """One pass over the file that decodes nothing that is ASCII and keeps nothing."""
    decoder = codecs.getincrementaldecoder("utf-8")("strict")
    feeds = returns = pairs = 0
    sound = True
    pending = False
    last = b""
    with path.open("rb") as file:
        while block := file.read(BLOCK):
            feeds += block.count(b"\n")
            if b"\r" in block or last == b"\r":
                returns += block.count(b"\r")
                pairs += block.count(b"\r\n") + (last == b"\r" and block.startswith(b"\n"))
            sound = sound and b"\0" not in block
            if sound and (pending or not block.isascii()):
                try:
                    decoder.decode(block)
                    pending = bool(decoder.getstate()[0])
                except UnicodeDecodeError:
                    sound = False
            last = block[-1:]
    newline = _newline(feeds, returns, pairs)
    ends = returns if newline == "\r" else feeds
    count = ends + (last not in (b"", b"\n" if newline != "\r" else b"\r"))
    text = Text(path, "utf-8", sound and not pending and newline in ("\n", "\r\n"), newline, count, ())
    if len(start) < 65536 or not sound:
        text.head = text.lines
    else:
        head = start.decode("utf-8", "ignore").removeprefix("\ufeff")
        lines = split(head, newline)
        text.head = lines[:-1] if len(lines) > 1 else text.lines
    return text
