"""Files are written whole to a temporary name and then renamed; nothing of somebody else's is overwritten unasked."""

from __future__ import annotations

import contextlib
import json
import os
import re
import tempfile
from collections.abc import Callable
from pathlib import Path

from yieldosc.errors import refusal

WORKBOOK_SUFFIX = "-result.xlsx"
RECORD = "result.json"


def write_through(path: Path, write: Callable[[Path], None]) -> None:
    """Let `write` fill a temporary file beside `path`, then rename it; a failure leaves `path` as it was."""
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, name = tempfile.mkstemp(prefix=".", suffix=path.suffix, dir=path.parent)
    except OSError as error:
        raise refusal(
            "cannot-write", f"{path} cannot be written ({error.strerror}); choose another place with -o/--output"
        ) from None
    os.close(handle)
    temporary = Path(name)
    try:
        write(temporary)
        temporary.chmod(0o666 & ~_umask())
        temporary.replace(path)
    except OSError as error:
        raise refusal(
            "cannot-write", f"{path} cannot be written ({error.strerror}); choose another place with -o/--output"
        ) from None
    finally:
        with contextlib.suppress(FileNotFoundError):
            temporary.unlink()


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def write_whole(path: Path, content: bytes, *, force: bool) -> None:
    """Write a file that does not exist yet, or any file with force."""
    if path.exists() and not force:
        raise refusal("exists", f"{path} exists and is not overwritten; choose another name, or add --force")
    write_through(path, lambda temporary: _fill(temporary, content))


def _fill(path: Path, content: bytes) -> None:
    path.write_bytes(content)


def result_directory(chosen: str | None, *, study_name: str, digest: str) -> Path:
    """Where a result goes: the user's choice, or output/<study name>-<first 8 of the digest>."""
    return Path(chosen) if chosen else Path("output") / f"{plain_name(study_name)}-{digest[:8]}"


def plain_name(text: str) -> str:
    """A file name without blanks, separators or surprises."""
    return re.sub(r"[^A-Za-z0-9._-]+", "-", text).strip("-.") or "study"


def claim_directory(directory: Path, *, digest: str, force: bool) -> None:
    """Refuse a directory that holds another input's result, or somebody's other files, unless --force."""
    if not directory.exists() or force:
        return
    if not directory.is_dir():
        raise refusal("exists", f"{directory} is a file, not a directory; choose another place with -o/--output")
    if not any(directory.iterdir()):
        return
    digests = (_digest_in(path) for path in sorted(directory.glob("*.json")))
    known = next((found for found in digests if found is not None), None)
    if known is None:
        raise refusal(
            "exists",
            f"{directory} is not empty and holds no result of this program; choose another place with -o/--output, "
            "or add --force to write beside what is there",
        )
    if known != digest:
        raise refusal(
            "exists",
            f"{directory} holds the result of another input ({known[:8]}, this one is {digest[:8]}); choose another "
            "place with -o/--output, or add --force to replace it",
        )


def _digest_in(path: Path) -> str | None:
    """Whose result a record is; None where it is no record of ours."""
    try:
        found = json.loads(path.read_text(encoding="utf-8"))["provenance"]["input_sha256"]
    except (OSError, ValueError, KeyError, TypeError):
        return None
    return found if isinstance(found, str) else None


def write_record(path: Path, content: dict[str, object]) -> None:
    """The JSON record beside a result workbook; its digest says later whose result the directory holds."""
    text = json.dumps(content, ensure_ascii=False, indent=2, allow_nan=False) + "\n"
    write_through(path, lambda temporary: _fill(temporary, text.encode()))
