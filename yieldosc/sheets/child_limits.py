"""What a file may hold before it is refused, and the limits of the process that reads it."""

from __future__ import annotations

MEMORY_BYTES = 384 * 2**20
CPU_SECONDS = 5
OUTPUT_BYTES = 48 * 2**20
UNPACKED_BYTES = 64 * 2**20
ENTRIES = 2_000
SHEETS = 100
ROWS = 10_000
COLUMNS = 512
CELLS = 100_000  # filled ones; a sheet may list twice as many with the empty ones that carry a format
CELL_LENGTH = 10_000
SHARED_STRINGS = 200_000


class Refusal(Exception):  # noqa: N818 - the parent makes an error of it
    """A file that this reader will not read: stable code and one sentence."""

    def __init__(self, code: str, text: str) -> None:
        super().__init__(text)
        self.code = code
        self.text = text


def limit_resources() -> None:
    """Memory, time, output and core size of this process, where the system knows such limits."""
    try:
        import resource  # noqa: PLC0415 - absent on some systems
    except ImportError:
        return
    for which, amount in (
        (resource.RLIMIT_AS, MEMORY_BYTES),
        (resource.RLIMIT_CPU, CPU_SECONDS),
        (resource.RLIMIT_FSIZE, OUTPUT_BYTES),
        (resource.RLIMIT_CORE, 0),
    ):
        try:
            resource.setrlimit(which, (amount, amount))
        except (ValueError, OSError):
            continue


def too_large(row: int, column: int) -> Refusal:
    return Refusal(
        "file-limit",
        f"a sheet reaches row {row + 1} and column {column + 1}; at most {ROWS} rows and {COLUMNS} columns are read",
    )
