"""From a path to text: plain or compressed, in place, never with anything but a finding when it cannot be done."""

from __future__ import annotations

import bz2
import hashlib
import lzma
import os
import zlib
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from heatwright.findings import Finding, Refused, refuse, warn

_MAGIC: dict[bytes, tuple[str, Callable[[], Any]]] = {
    b"\x1f\x8b": ("gzip", lambda: zlib.decompressobj(wbits=31)),
    b"BZh": ("bzip2", bz2.BZ2Decompressor),
    b"\xfd7zXZ\x00": ("xz", lzma.LZMADecompressor),
}
_PIECE = 1 << 16


@dataclass(frozen=True, slots=True)
class StoredText:
    """The text of a file, the SHA-256 of its bytes as stored, and what was noticed on the way."""

    text: str
    sha256: str
    findings: tuple[Finding, ...] = field(default=())


def read_text(path: str | os.PathLike[str]) -> StoredText:
    """The text of a file, decompressed by its first bytes (gzip, bzip2, xz) and with plain line ends.

    Raises Refused (``file-missing``, ``file-empty``, ``truncated``, ``parser-failed``).
    """
    stored = _bytes_of(path)
    sha256 = hashlib.sha256(stored).hexdigest()
    plain, findings = _decompressed(stored)
    if not plain.strip(b" \t\r\n\x00"):
        raise Refused([*findings, refuse("file-empty", "the file holds nothing to read", action="Give another file.")])
    text = _decoded(plain)
    if "\r" in text:
        text = text.replace("\r\n", "\n").replace("\r", "\n")
    return StoredText(text, sha256, findings)


def _bytes_of(path: str | os.PathLike[str]) -> bytes:
    try:
        place = Path(path)
        if place.is_dir():
            raise Refused([_missing("this is a directory, not an output file")])
        if place.exists() and not place.is_file():
            raise Refused([_missing("this is not a regular file")])
        return place.read_bytes()
    except FileNotFoundError:
        raise Refused([_missing("there is no such file")]) from None
    except PermissionError:
        raise Refused([_missing("the file may not be read (permission denied)")]) from None
    except (OSError, ValueError, TypeError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise Refused([_missing(f"the file cannot be read ({reason})")]) from None


def _missing(found: str) -> Finding:
    return refuse("file-missing", found, action="Give the path of an output file.")


def _decompressed(stored: bytes) -> tuple[bytes, tuple[Finding, ...]]:
    for magic, (name, make) in _MAGIC.items():
        if stored.startswith(magic):
            return _inflate(stored, name, make)
    return stored, ()


def _inflate(stored: bytes, name: str, make: Callable[[], Any]) -> tuple[bytes, tuple[Finding, ...]]:
    """All members of a compressed file; a file that stops or breaks early gives what could still be read."""
    pieces: list[bytes] = []
    damage = ""
    while stored and not damage:
        unpack = make()
        try:
            for first in range(0, len(stored), _PIECE):  # piecewise, so that what precedes a damaged byte survives
                pieces.append(unpack.decompress(stored[first : first + _PIECE]))
                if unpack.eof:
                    stored = unpack.unused_data + stored[first + _PIECE :]
                    break
            else:
                damage = "stops early"
        except (zlib.error, OSError, EOFError, lzma.LZMAError, ValueError):
            damage = "" if pieces and not stored.strip(b"\x00") else "is damaged"
            stored = b""
    if not damage:
        return b"".join(pieces), ()
    found = f"the {name} compression {damage}"
    if not b"".join(pieces).strip():
        raise Refused([refuse("truncated", f"{found} and nothing could be unpacked", action="Fetch the file again.")])
    return b"".join(pieces), (warn("truncated", f"{found}; only the part before that was read"),)


def _decoded(plain: bytes) -> str:
    if plain.startswith((b"\xff\xfe", b"\xfe\xff")):
        return plain.decode("utf-16", errors="replace")
    head = plain[:512]
    if len(head) > 8 and head[1::2].count(0) > 0.8 * len(head[1::2]):  # UTF-16 without a mark, as some editors write it
        return plain.decode("utf-16-le", errors="replace")
    if len(head) > 8 and head[0::2].count(0) > 0.8 * len(head[0::2]):
        return plain.decode("utf-16-be", errors="replace")
    return plain.decode("utf-8-sig", errors="replace")
