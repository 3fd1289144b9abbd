"""A console that never exceeds 100 columns, never shows control characters, and is plain where nobody watches."""

from __future__ import annotations

import io
import os
import shutil
from typing import IO

from rich import box
from rich.console import Console
from rich.table import Table
from rich.text import Text

from yieldosc.sheets.text_guard import printable

WIDEST = 100
NARROWEST = 40


def make_console(stream: IO[str]) -> Console:
    """No colour and no animation when the stream is no terminal or NO_COLOR is set (any value but the empty one)."""
    if isinstance(stream, io.TextIOWrapper):
        stream.reconfigure(errors="replace")  # a terminal that has no "Ω" shows "?" instead of ending the program
    watched = stream.isatty()
    plain = not watched or bool(os.environ.get("NO_COLOR")) or os.environ.get("TERM") == "dumb"
    width = min(shutil.get_terminal_size((WIDEST, 24)).columns, WIDEST) if watched else WIDEST
    return Console(
        file=stream,
        width=max(width, NARROWEST),
        color_system=None if plain else "auto",
        force_terminal=watched,
        markup=False,
        emoji=False,
        highlight=False,
        soft_wrap=False,
        no_color=plain or None,
    )


def line(text: str, style: str = "") -> Text:
    """Text from anywhere, made printable."""
    return Text(printable(text), style=style)


def one_line(text: str) -> str:
    """Printable, with single blanks."""
    return " ".join(printable(text).split())


def hanging(console: Console, mark: str, text: str, *, style: str = "", indent: int = 2) -> None:
    """A paragraph behind a mark, wrapped with its lines aligned behind the mark."""
    room = max(console.width - indent - len(mark) - 1, 20)
    body = line(text)
    for i, part in enumerate(body.wrap(console, room)):
        head = " " * indent + (mark if i == 0 else " " * len(mark)) + " "
        part.rstrip()
        console.print(Text(head, style=style).append_text(part), soft_wrap=True)


def heading(console: Console, text: str, note: str = "") -> None:
    """A section's title, with what its figures are beside or below it."""
    console.print()
    title = line(text, "bold")
    if note and len(text) + len(note) + 3 <= console.width:
        console.print(title.append(f"   {printable(note)}", style="not bold dim"), soft_wrap=True)
        return
    console.print(title)
    if note:
        console.print(line(note, "dim"))


def plain_table(*columns: tuple[str, str]) -> Table:
    """A table with a ruled heading; columns: heading and "right", or "" for left."""
    table = Table(box=box.SIMPLE_HEAD, pad_edge=False, padding=(0, 1, 0, 0), show_edge=False, header_style="bold")
    for name, justify in columns:
        table.add_column(name, justify="right" if justify == "right" else "left", overflow="fold")
    return table
