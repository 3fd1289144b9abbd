"""Bytes → text for files that do not say how they are encoded."""

from __future__ import annotations

import codecs
import re

_MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"), (codecs.BOM_UTF32_LE, "utf-32"), (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF16_LE, "utf-16"), (codecs.BOM_UTF16_BE, "utf-16"),
)  # fmt: skip


def decode(data: bytes) -> tuple[str, str, bool] | None:
    """Text, name of the encoding, and whether that was a guess; None for bytes that are no text."""
    for mark, name in _MARKS:
        if data.startswith(mark):
            text = _try(data, name)
            return None if text is None else (text, name.removesuffix("-sig"), False)
    wide = _wide(data)
    if wide is not None:
        text = _try(data, wide)
        return None if text is None else (text, wide, True)
    if b"\0" in data:
        return None
    text = _try(data, "utf-8")
    if text is not None:
        return text, "utf-8", False
    name = _eight_bit(data)
    return data.decode(name, "replace"), name, True


def _try(data: bytes, name: str) -> str | None:
    try:
        return data.decode(name)
    except UnicodeError:
        return None


def _wide(data: bytes) -> str | None:
    """UTF-16 without a mark: every other byte of mostly Latin text is zero."""
    sample = data[:4000]
    if len(sample) < 8 or len(data) % 2:
        return None
    half = len(sample) / 2
    even, odd = sample[0::2].count(0) / half, sample[1::2].count(0) / half
    if odd > 0.6 and even < 0.1:
        return "utf-16-le"
    if even > 0.6 and odd < 0.1:
        return "utf-16-be"
    return None


def _eight_bit(data: bytes) -> str:
    """Cyrillic, Chinese, Japanese or Western, by how high bytes stand together.

    Cyrillic words are runs of bytes from 0xC0; double-byte scripts decode to ideographs or kana without a fault;
    Western text has single high bytes (µ, ±, ä) between letters.
    """
    runs = re.findall(rb"[\x80-\xff]+", data)
    long_runs = [run for run in runs if len(run) > 1]
    if len(long_runs) < max(1, len(runs) * 0.3):
        return "cp1252"
    joined = b"".join(long_runs)
    cyrillic = sum(byte >= 0xC0 or byte in (0xA8, 0xB8, 0xB9) for byte in joined) / len(joined)
    if cyrillic > 0.97 and any(len(run) % 2 for run in long_runs):
        return "cp1251"
    for name, wanted in (("cp932", r"[\u3040-\u30ff]"), ("gb18030", r"[\u4e00-\u9fff]")):
        text = _try(data, name)
        if text is not None and len(re.findall(wanted, text)) > 0.2 * sum(ord(c) > 0x7F for c in text):
            return name
    return "cp1251" if cyrillic > 0.9 else "cp1252"
