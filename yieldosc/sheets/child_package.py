"""A zip file that claims to be a spreadsheet: every part unpacked once under limits and looked at before use."""

from __future__ import annotations

import io
import zipfile
import zlib

from yieldosc.sheets.child_limits import ENTRIES, SHARED_STRINGS, UNPACKED_BYTES, Refusal


class Package:
    """A zip file whose every part was unpacked once, counted and looked at."""

    def __init__(self, data: bytes) -> None:
        try:
            self.archive = zipfile.ZipFile(io.BytesIO(data))
        except (zipfile.BadZipFile, ValueError, OSError, NotImplementedError, RuntimeError) as error:
            raise Refusal("file-broken", "the file begins like a zip archive but is damaged") from error
        entries = self.archive.infolist()
        if len(entries) > ENTRIES:
            raise Refusal("file-limit", f"the file holds {len(entries)} packed parts, more than {ENTRIES}")
        if any(entry.flag_bits & 1 for entry in entries):
            raise Refusal("file-encrypted", "the file is encrypted")
        declared = sum(entry.file_size for entry in entries)
        if declared > UNPACKED_BYTES:
            raise Refusal(
                "file-limit", f"the file unpacks to {declared / 1e6:.0f} MB, more than {UNPACKED_BYTES / 1e6:.0f} MB"
            )
        self.parts: dict[str, bytes] = {}
        total = 0
        for entry in entries:
            if entry.is_dir():
                continue
            content = self._unpack(entry)
            total += len(content)
            if total > UNPACKED_BYTES:
                raise Refusal("file-limit", f"the file unpacks to more than {UNPACKED_BYTES / 1e6:.0f} MB")
            self.parts[entry.filename.lstrip("/")] = content
        for name, content in self.parts.items():
            _look_at(name, content)

    def _unpack(self, entry: zipfile.ZipInfo) -> bytes:
        try:
            with self.archive.open(entry) as stream:
                return stream.read(entry.file_size + 1)
        except (zipfile.BadZipFile, EOFError, OSError, ValueError, NotImplementedError, RuntimeError, zlib.error) as e:
            raise Refusal("file-broken", f"part {entry.filename[:60]!r} of the file is damaged") from e

    def without(self, name: str) -> bytes:
        """The package as bytes with one part left out."""
        buffer = io.BytesIO()
        with zipfile.ZipFile(buffer, "w") as archive:
            for part, content in self.parts.items():
                if part != name:
                    archive.writestr(part, content)
        return buffer.getvalue()


def _look_at(name: str, content: bytes) -> None:
    """Refuses archives inside the archive, document types (entities), and too many shared strings."""
    if content[:4] in (b"PK\x03\x04", b"PK\x05\x06") or content[:3] == b"\x1f\x8b\x08":
        raise Refusal("file-nested", f"part {name[:60]!r} of the file is an archive itself")
    if name.lower().endswith((".xml", ".rels", ".vml")):
        for mark in ("<!DOCTYPE", "<!ENTITY"):
            if any(mark.encode(code) in content for code in ("ascii", "utf-16-le", "utf-16-be")):
                raise Refusal("file-entities", f"part {name[:60]!r} of the file declares a document type or entities")
    if name.lower().endswith("sharedstrings.xml") and content.count(b"<si") > SHARED_STRINGS:
        raise Refusal("file-limit", f"the file holds more than {SHARED_STRINGS} shared strings")


def kind_of(package: Package) -> str:
    """xlsx, xlsb or ods; a zip file that is none is refused."""
    if "encryption-data" in package.parts.get("META-INF/manifest.xml", b"").decode("utf-8", "replace"):
        raise Refusal("file-encrypted", "the file is encrypted")
    if "xl/workbook.xml" in package.parts:
        return "xlsx"
    if "xl/workbook.bin" in package.parts:
        return "xlsb"
    if "content.xml" in package.parts and b"spreadsheet" in package.parts.get("mimetype", b"spreadsheet"):
        return "ods"
    raise Refusal("file-type", "the file is a zip archive that holds no spreadsheet")
