"""Designator cells: lists, ranges, sets, glued counts."""

from __future__ import annotations

import re
from dataclasses import dataclass

from yieldosc.quantities import normal

MOST = 2000  # more designators in one cell are a mistake or an attack
_PREFIXED = re.compile(r"(?P<prefix>(?:[\w$]+:)?[A-Za-zА-Яа-я_$]+)(?P<number>\d{1,6})(?P<tail>[A-Za-z]?)")
_STRICT = re.compile(r"(?:[\w$]+:)?[A-Za-z]{1,5}\$?\d{1,5}[A-Za-z]?")
_NOTHING = re.compile(r"[-–—~*./?]*|n/?a|none", re.IGNORECASE)
_RANGE = re.compile(r"(?P<first>.+?)\s?(?:-|~|…|÷)\s?(?P<last>.+)")


@dataclass(frozen=True, slots=True)
class DesignatorList:
    """Names in the order written; what could not be read; a count that was glued on ("R1,x5")."""

    names: tuple[str, ...]
    junk: tuple[str, ...] = ()
    count: int | None = None


def parse_designators(text: str) -> DesignatorList:
    """All designators of a cell: ``C1 C2``, ``C7-8``, ``R21…R31``, ``Q101,102``, ``C[2,9-12]``, ``R1, R11,…, R81``."""
    plain = _sets_opened(re.sub(r"\.{2,}|…\.|(?<=\d) (?:to|bis|through|à) (?=[A-Z]*\d)", "…", normal(text)))
    plain = re.sub(r"\s?\((\d{1,4})\)|(?<=\d)\*(\d{1,4})", r",x\1\2", plain)
    plain = re.sub(r"(?<=[A-Za-z\d])\s?(-|…|~|÷)\s?(?=[A-Za-zА-Яа-я]*\d)", r"\1", plain)
    plain = re.sub(r"(?<=\d)/(?=[A-Za-z]{1,4}\d)", ",", plain)
    if not re.search(r"[\d,;]", plain) and 2 < len(plain) <= 40:
        return DesignatorList(()) if _NOTHING.fullmatch(plain) else DesignatorList((plain,))  # words, such as a title
    reader = _Reader()
    for token in re.split(r"[\s,;+&、，；]+", plain):
        reader.take(token.strip("()[]{}'\""))
    return DesignatorList(tuple(reader.names), tuple(reader.junk), reader.count)


def looks_like_designators(text: str) -> bool:
    """True for a cell that holds nothing but plain designators (for columns without a heading)."""
    found = parse_designators(text)
    return bool(found.names) and not found.junk and all(_STRICT.fullmatch(name) for name in found.names)


def _sets_opened(text: str) -> str:
    """C[2,9-12,15] → C2,C9-C12,C15."""

    def opened(match: re.Match[str]) -> str:
        prefix, parts = match[1], re.split(r"[,;\s]+", match[2].strip())
        return ",".join(prefix + re.sub(r"-", f"-{prefix}", part) for part in parts if part)

    return re.sub(r"(?<![A-Za-z])([A-Za-z]{1,8})\[([\d,;\s-]{1,400})\]", opened, text)


class _Reader:
    """Takes tokens from left to right; a bare number continues the last prefix, an ellipsis the last step."""

    def __init__(self) -> None:
        self.names: list[str] = []
        self.junk: list[str] = []
        self.count: int | None = None
        self.waiting = False
        self.prefix = ""

    def take(self, token: str) -> None:
        leading = token.startswith("…")
        token = token.strip("…")
        if leading or (not token and self.names):
            self.waiting = self.waiting or leading
        if not token or _NOTHING.fullmatch(token):
            return
        glued = re.fullmatch(r"[xX×](\d{1,4})", token)
        if glued is not None and self.names and self._prefix_of(self.names[-1]) not in ("x", "X"):
            self.count = int(glued[1])
        elif self.waiting and self.names:
            self.waiting = False
            self._stretch(token)
        else:
            self._plain(token)

    def _plain(self, token: str) -> None:
        match = _RANGE.fullmatch(token)
        if match is not None and self._range(match["first"], match["last"]):
            return
        if match is not None and _PREFIXED.fullmatch(match["first"]) and _PREFIXED.fullmatch(match["last"]):
            self.junk.append(token[:40])  # a range that falls, changes its letter or has no end
            return
        if token.isdigit():
            if self.prefix:
                self._add(self.prefix + token)
            else:
                self.junk.append(token)
            return
        if len(token) > 40 or not re.search(r"\w", token):
            self.junk.append(token[:40])
            return
        self._add(token)

    def _add(self, name: str) -> None:
        if len(self.names) >= MOST:
            self.junk.append(name)
            return
        self.names.append(name)
        match = _PREFIXED.fullmatch(name)
        self.prefix = match["prefix"] if match is not None else self.prefix

    def _range(self, first: str, last: str) -> bool:
        """C7-8, R27-R30; False where it is no rising range of one prefix."""
        if first.isdigit() and self.prefix:
            first = self.prefix + first
        start, end = _PREFIXED.fullmatch(first), _PREFIXED.fullmatch(last)
        if start is None or start["tail"]:
            return False
        if end is not None and end["prefix"] != start["prefix"]:
            return False
        high = int(end["number"]) if end is not None else int(last) if last.isdigit() and len(last) <= 6 else -1
        low = int(start["number"])
        if not low < high <= low + MOST:
            return False
        for number in range(low, high + 1):
            self._add(f"{start['prefix']}{number}")
        return True

    def _stretch(self, token: str) -> None:
        """R101, R201,…, R801: the step of the last two, or 1 where that does not fit."""
        before, end = _PREFIXED.fullmatch(self.names[-1]), _PREFIXED.fullmatch(token)
        if before is None or end is None or before["prefix"] != end["prefix"]:
            self._plain(token)
            return
        low, high, step = int(before["number"]), int(end["number"]), 1
        earlier = _PREFIXED.fullmatch(self.names[-2]) if len(self.names) > 1 else None
        if earlier is not None and earlier["prefix"] == before["prefix"]:
            gap = low - int(earlier["number"])
            step = gap if gap > 0 and (high - low) % gap == 0 else 1
        if not low < high <= low + MOST * step:
            self._plain(token)
            return
        for number in range(low + step, high + 1, step):
            self._add(f"{before['prefix']}{number}")

    @staticmethod
    def _prefix_of(name: str) -> str:
        match = _PREFIXED.fullmatch(name)
        return match["prefix"] if match is not None else ""
