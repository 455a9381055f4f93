"""The text files of a release: one block for each species, taken apart and put together again without a change."""

from __future__ import annotations

import hashlib
import re
from collections.abc import Iterable, Mapping, Sequence
from typing import TYPE_CHECKING, Any, Final

from heatwright.project.release import DAT_NAME, YAML_NAME

if TYPE_CHECKING:
    from heatwright.entry import Entry

FILES: Final[tuple[str, ...]] = (DAT_NAME, YAML_NAME)
"""The files of a release that hold entries."""
_TEMPLATES: Final = {DAT_NAME: "nasa7.j2", YAML_NAME: "yaml.j2"}
_MARKS: Final = {DAT_NAME: "!", YAML_NAME: "#"}
_DAT_BLOCK: Final = re.compile(r"^!\n(?:! .*\n)+(?P<name>\S+).*\n(?:(?!!\n|END\n).*\n)+", re.MULTILINE)
_YAML_BLOCK: Final = re.compile(r"^(?:# .*\n)+- name: (?P<name>.*)\n(?: .*\n)+", re.MULTILINE)
_BLOCKS: Final = {DAT_NAME: _DAT_BLOCK, YAML_NAME: _YAML_BLOCK}
Texts = Mapping[str, str]
"""The block of one species by the name of the file it is in."""


def plain_text(data: bytes) -> str:
    """The text of a release's file; version control may have changed its line ends."""
    plain = data.replace(b"\r\n", b"\n") if b"\r" in data else data
    return plain.decode("utf-8", "replace")


def entry_texts(entries: Sequence[Entry]) -> list[dict[str, str]]:
    """The blocks of entries, by file, from the templates of the formats.  Raises Refused when a value does not fit."""
    from heatwright.writing.context import records_context
    from heatwright.writing.render import render_format

    context = records_context(entries, (200.0, 1000.0, 6000.0), ())
    columns = {file: _blocks(file, render_format(_TEMPLATES[file], context), len(entries)) for file in FILES}
    return [{file: columns[file][i] for file in FILES} for i in range(len(entries))]


def _blocks(file: str, text: str, count: int) -> list[str]:
    found = [match.group() for match in _BLOCKS[file].finditer(text)]
    if len(found) != count:
        raise ValueError(f"the template of {file} gave {len(found)} blocks for {count} entries")
    return found


def blocks_by_species(file: str, text: str) -> dict[str, str]:
    """The blocks in the text of a release's file by the name of the species; those twice there are left out."""
    found: dict[str, str] = {}
    twice = set()
    for match in _BLOCKS[file].finditer(text):
        name = _yaml_name(match["name"]) if file == YAML_NAME else match["name"]
        twice.update({name} & found.keys())
        found[name] = match.group()
    return {name: block for name, block in found.items() if name not in twice}


def _yaml_name(written: str) -> str:
    import json

    return str(json.loads(written)) if written.startswith('"') else written


def text_hash(block: str) -> str:
    """What a lock file says of a block."""
    return hashlib.sha256(block.encode()).hexdigest()[:16]


def with_remark(file: str, block: str, remark: str, known: str) -> str:
    """The block with a line of comment more, in the place of an earlier one that starts with *known*."""
    from heatwright.writing.comment import wrapped

    mark = _MARKS[file]
    lines = block.splitlines(keepends=True)
    head = [line for line in lines if line.startswith(mark)]
    rest = lines[len(head) :]
    start = next((i for i, line in enumerate(head) if line.startswith(f"{mark} {known}")), len(head))
    return "".join([*head[:start], *(f"{mark} {line}\n" for line in wrapped(remark)), *rest])


def whole_texts(blocks: Iterable[Texts], temperatures_K: Sequence[Sequence[float]], elements: Sequence[str]) -> Texts:
    """The files of a release from the blocks of its species, in their order.

    temperatures_K : low, common and high temperature of each species.   elements : all symbols, for the head.
    """
    from heatwright.writing.render import render_format

    defaults = [min(t[0] for t in temperatures_K), 1000.0, max(t[2] for t in temperatures_K)]
    from heatwright.writing.comment import CAUTION

    context: dict[str, Any] = {"species": [], "defaults": defaults, "elements": list(elements), "caution": CAUTION}
    several = list(blocks)
    made = {}
    for file in FILES:
        frame = render_format(_TEMPLATES[file], context)
        body = ("\n" if file == YAML_NAME else "").join(block[file] for block in several)
        head, end = (frame.removesuffix("END\n"), "END\n") if file == DAT_NAME else (frame, "")
        made[file] = head + body + end
    return made
