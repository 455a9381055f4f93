"""From a path to text: plain or compressed, in place, never with anything but a finding when it cannot be done.

Nothing is read beyond :data:`MOST_BYTES`, packed or unpacked, nor beyond the head of a large file that no program
wrote; no byte is kept longer than it is needed, as outputs can be large.
"""

from __future__ import annotations

import bz2
import hashlib
import lzma
import os
import stat
import zipfile
import zlib
from collections.abc import Callable
from dataclasses import dataclass, field
from io import BytesIO
from typing import Any, Final

from heatwright.findings import Finding, Refused, refuse, warn
from heatwright.reading.detection import HEAD, detect

MOST_BYTES: Final = 2_000_000_000
"""The largest file that is read, and the most that one may unpack to, bytes."""
SMALL_BYTES: Final = 1_000_000
"""A file up to this size is read whole and decoded letter by letter whatever it is, bytes."""
_MAGIC: Final[dict[bytes, tuple[str, Callable[[], Any]]]] = {
    b"\x1f\x8b": ("gzip", lambda: zlib.decompressobj(wbits=31)),
    b"BZh": ("bzip2", bz2.BZ2Decompressor),
    b"\xfd7zXZ\x00": ("xz", lzma.LZMADecompressor),
}
_ZIP: Final = b"PK\x03\x04"
_PIECE: Final = 1 << 18
_MOST_AT_ONCE: Final = 1 << 20
_ASCII: Final = bytes(b if b < 128 else ord("?") for b in range(256))


@dataclass(frozen=True, slots=True)
class StoredText:
    """The text of a file, the SHA-256 of its bytes as stored, and what was noticed on the way."""

    text: str
    sha256: str
    findings: tuple[Finding, ...] = field(default=())


def read_text(path: str | os.PathLike[str], *, most_bytes: int = MOST_BYTES) -> StoredText:
    """The text of a file, decompressed by its first bytes (gzip, bzip2, xz, zip) and with plain line ends.

    Of a large file in whose head no program can be told, only the head is given.  In a large text with other letters
    than ASCII each byte of such a letter is a question mark: no value that is read is written with them.

    Raises Refused (``file-missing``, ``file-empty``, ``file-too-large``, ``several-files``, ``truncated``).
    """
    stored = _bytes_of(path, most_bytes)
    sha256 = hashlib.sha256(stored).hexdigest()
    plain, findings = _decompressed(stored, most_bytes)
    del stored
    if not plain[:_PIECE].strip(b" \t\r\n\x00") and not plain.strip(b" \t\r\n\x00"):
        raise Refused([*findings, refuse("file-empty", "the file holds nothing to read", action="Give another file.")])
    return StoredText(_decoded(plain), sha256, findings)


def _bytes_of(path: str | os.PathLike[str], most_bytes: int) -> bytes:
    try:
        found = os.stat(path)
        if stat.S_ISDIR(found.st_mode):
            raise Refused([_missing("this is a directory, not an output file")])
        if not stat.S_ISREG(found.st_mode):
            raise Refused([_missing("this is not a regular file")])
        if found.st_size > most_bytes:
            raise Refused([_too_large("is", most_bytes)])
        with open(path, "rb") as stream:
            head = stream.read(_PIECE)
            return head + stream.read(most_bytes) if _whole_is_needed(head, found.st_size) else head
    except FileNotFoundError:
        raise Refused([_missing("there is no such file")]) from None
    except PermissionError:
        raise Refused([_missing("the file may not be read (permission denied)")]) from None
    except (OSError, ValueError, TypeError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refused([_missing(f"the file cannot be read ({reason})")]) from None


def _whole_is_needed(head: bytes, size: int) -> bool:
    """Whether the rest of a file can matter: it is small, packed, a JSON document, or a program's output."""
    if size <= SMALL_BYTES or head.startswith((*_MAGIC, _ZIP)) or head.lstrip()[:1] == b"{":
        return True
    return detect(_decoded(head[: 2 * HEAD])).program is not None


def _missing(found: str) -> Finding:
    return refuse("file-missing", found, action="Give the path of an output file.")


def _too_large(verb: str, most_bytes: int) -> Finding:
    words = f"the file {verb} larger than {most_bytes / 1e9:g} GB, which is the most that is read"
    return refuse("file-too-large", words, action="Cut the part with the frequencies out of it.")


def _decompressed(stored: bytes, most_bytes: int) -> tuple[bytes, tuple[Finding, ...]]:
    if stored.startswith(_ZIP):
        return _unzipped(stored, most_bytes)
    for magic, (name, make) in _MAGIC.items():
        if stored.startswith(magic):
            return _inflate(stored, name, make, most_bytes)
    return stored, ()


def _unzipped(stored: bytes, most_bytes: int) -> tuple[bytes, tuple[Finding, ...]]:
    """The one file in a zip archive, folders not counted."""
    try:
        with zipfile.ZipFile(BytesIO(stored)) as archive:
            members = [item for item in archive.infolist() if not item.is_dir()]
            if len(members) != 1:
                shown = ", ".join(item.filename for item in members[:6]) + (", …" if len(members) > 6 else "")
                words = f"the archive holds {len(members)} files{f': {shown}' if members else ''}"
                action = "Unpack it and give the files."
                raise Refused([refuse("several-files", words, expected="one output", action=action)])
            with archive.open(members[0]) as stream:
                plain = stream.read(most_bytes + 1)
    except (zipfile.BadZipFile, zlib.error, EOFError, OSError, RuntimeError, NotImplementedError, ValueError) as error:
        words = f"the zip archive cannot be unpacked ({error})"
        raise Refused([refuse("truncated", words, action="Fetch the file again, or unpack it first.")]) from None
    if len(plain) > most_bytes:
        raise Refused([_too_large("unpacks to one", most_bytes)])
    return plain, ()


def _inflate(stored: bytes, name: str, make: Callable[[], Any], most_bytes: int) -> tuple[bytes, tuple[Finding, ...]]:
    """All members of a compressed file; a file that stops or breaks early gives what could still be read."""
    plain = bytearray()
    damage = ""
    rest = memoryview(stored)
    while rest and not damage:
        unpack = make()
        try:
            rest, whole = _one_member(unpack, rest, plain, most_bytes)
            damage = "" if whole else "stops early"
        except (zlib.error, OSError, EOFError, lzma.LZMAError, ValueError):
            damage = "" if plain and not bytes(rest[:_PIECE]).strip(b"\x00") else "is damaged"
            break
    if not damage:
        return bytes(plain), ()
    found = f"the {name} compression {damage}"
    if not plain.strip():
        raise Refused([refuse("truncated", f"{found} and nothing could be unpacked", action="Fetch the file again.")])
    return bytes(plain), (warn("truncated", f"{found}; only the part before that was read"),)


def _one_member(unpack: Any, stored: memoryview, plain: bytearray, most_bytes: int) -> tuple[memoryview, bool]:
    """Unpacks one member to *plain*, piecewise, so that what precedes a damaged byte survives and a bomb is stopped.

    Returns what follows the member, and whether the member was whole.
    """
    for first in range(0, len(stored), _PIECE):
        pending = bytes(stored[first : first + _PIECE])
        while True:
            out = unpack.decompress(pending, _MOST_AT_ONCE)
            plain += out
            if len(plain) > most_bytes:
                raise Refused([_too_large("unpacks to one", most_bytes)])
            if unpack.eof:
                return stored[min(first + _PIECE, len(stored)) - len(unpack.unused_data) :], True
            pending = getattr(unpack, "unconsumed_tail", b"")
            if not pending and len(out) < _MOST_AT_ONCE and getattr(unpack, "needs_input", True):
                break
    return stored[len(stored) :], False


def _decoded(plain: bytes) -> str:
    text = _letters(plain)
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    return text


def _letters(plain: bytes) -> str:
    wide = _utf16(plain)
    if wide:
        text = plain.decode(wide, errors="replace")
        return text if text.isascii() or len(plain) <= SMALL_BYTES else text.encode("ascii", "replace").decode("ascii")
    if plain.isascii():
        return plain.decode("ascii")
    if len(plain) <= SMALL_BYTES:
        return plain.decode("utf-8-sig", errors="replace")
    return plain.removeprefix(b"\xef\xbb\xbf").translate(_ASCII).decode("ascii")


def _utf16(plain: bytes) -> str:
    """The name of the UTF-16 encoding of a text, or nothing; some editors write it without a mark."""
    if plain.startswith((b"\xff\xfe", b"\xfe\xff")):
        return "utf-16"
    head = plain[:512]
    if len(head) > 8 and head[1::2].count(0) > 0.8 * len(head[1::2]):
        return "utf-16-le"
    return "utf-16-be" if len(head) > 8 and head[0::2].count(0) > 0.8 * len(head[0::2]) else ""
