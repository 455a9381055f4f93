"""What has to be made, and why: the manifest and the files on disk against what the last release was made from."""

from __future__ import annotations

import hashlib
import os
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TYPE_CHECKING, Any, Final, Literal

from heatwright import __version__
from heatwright.findings import Refused, refuse
from heatwright.project.fingerprint import tool_fingerprint
from heatwright.project.keys import KEYS
from heatwright.project.lockfile import Lock, LockedFile, LockedReference, LockedSpecies
from heatwright.project.manifest_types import (
    FitChoice,
    FormationChoice,
    Manifest,
    ModelChoice,
    ProjectPath,
    ReadingChoice,
    ReferenceFolders,
    SpeciesRequest,
    TorsionChoice,
    canonical,
)
from heatwright.project.shelf import references_hash
from heatwright.project.tasks import points_beside
from heatwright.project.texts import FILES, Texts, blocks_by_species, text_hash

if TYPE_CHECKING:
    from heatwright.project.library import Library
    from heatwright.project.shelf import Shelf

Kind = Literal["new", "output changed", "options changed", "reference changed", "tool changed", "missing"]
KINDS: Final[tuple[Kind, ...]] = (
    "new", "output changed", "options changed", "reference changed", "tool changed", "missing",
)  # fmt: skip
"""Every reason for making an entry, in the order in which reasons are given."""


@dataclass(frozen=True, slots=True)
class Reason:
    """Why an entry has to be made: one of :data:`KINDS`, and what exactly."""

    kind: Kind
    detail: str = ""

    @property
    def text(self) -> str:
        """In words."""
        return f"{self.kind} ({self.detail})" if self.detail else self.kind


@dataclass(frozen=True, slots=True)
class Decision:
    """What is to be done about one species: nothing when there are no reasons.

    files : what it is made from, as a lock file says it.   choices : the options that are not the default.
    identity : a text that is the same only when options and contents of files are.
    """

    request: SpeciesRequest
    files: tuple[LockedFile, ...]
    choices: Mapping[str, Any]
    identity: str
    reasons: tuple[Reason, ...] = ()

    @property
    def name(self) -> str:
        """Of the species."""
        return self.request.name

    @property
    def text(self) -> str:
        """One line: the species and the reasons."""
        return f"{self.name}: {', '.join(reason.text for reason in self.reasons) or 'up to date'}"


@dataclass(frozen=True, slots=True)
class Plan:
    """The decisions for all species, sorted by name, and what is there already.

    removed : species of the last release that the manifest does not have any more.
    blocks : the texts of the last release, by species.
    """

    decisions: tuple[Decision, ...]
    removed: tuple[str, ...] = ()
    lock: Lock | None = None
    blocks: Mapping[str, Texts] = field(default_factory=dict)
    rewrite: bool = False

    @property
    def stale(self) -> tuple[Decision, ...]:
        """Those that have to be made."""
        return tuple(decision for decision in self.decisions if decision.reasons)

    @property
    def is_done(self) -> bool:
        """Whether there is nothing to do."""
        return not (self.stale or self.removed or self.rewrite)

    @property
    def tally(self) -> str:
        """How many species for which reason, in one sentence.

        >>> Plan((), ("CH4",)).tally
        '0 of 0 species to be made; 1 no longer in the manifest.'
        """
        counts = Counter(decision.reasons[0].kind for decision in self.stale)
        why = ", ".join(f"{counts[kind]} {kind}" for kind in KINDS if counts[kind])
        gone = f"; {len(self.removed)} no longer in the manifest" if self.removed else ""
        return f"{len(self.stale)} of {len(self.decisions)} species to be made{f': {why}' if why else ''}{gone}."


def check_pressure(species: Iterable[SpeciesRequest]) -> None:
    """Raises Refused (``pressures-mixed``) when species have different standard pressures."""
    by_pressure: dict[str, list[str]] = {}
    for request in species:
        by_pressure.setdefault(request.model.pressure, []).append(request.name)
    if len(by_pressure) > 1:
        each = "; ".join(f"{pressure}: {_some(names)}" for pressure, names in sorted(by_pressure.items()))
        action = "Say one pressure for the whole mechanism."
        raise Refused(
            [refuse("pressures-mixed", f"the species have different standard pressures ({each})", action=action)]
        )


def _some(names: list[str]) -> str:
    return ", ".join(names[:5]) + (f" and {len(names) - 5} more" if len(names) > 5 else "")


def make_plan(
    manifest: Manifest, library: Library, shelves: Mapping[ReferenceFolders, Shelf], lock: Lock | None, texts: Texts
) -> Plan:
    """The plan for a manifest, given the lock file of the last release and the texts of its files (those there are).

    shelves : the references by :class:`~heatwright.project.manifest_types.ReferenceFolders`, their files labelled.
    """
    blocks = _blocks(texts)
    library.hashes(path.path for request in manifest.species for path in used_paths(request))
    decisions = []
    for request in manifest.species:
        files = locked_files(request, library)
        identity = f"{canonical(request)} {[(file.role, file.path, file.sha256) for file in files]}"
        decision = Decision(request, files, choices_of(request), identity)
        old = lock.species.get(request.name) if lock is not None else None
        reasons: tuple[Reason, ...] = (Reason("new"),)
        if lock is not None and old is not None:
            rests_on = shelves[request.formation.folders].relevant(request.formation, old.composition)
            reasons = _reasons(decision, rests_on, old, lock, blocks.get(request.name, {}))
        decisions.append(replace(decision, reasons=reasons))
    names = {request.name for request in manifest.species}
    removed = tuple(name for name in lock.species if name not in names) if lock is not None else ()
    renamed = lock is not None and lock.mechanism != manifest.mechanism.name
    return Plan(tuple(decisions), removed, lock, blocks, rewrite=renamed)


def _blocks(texts: Texts) -> dict[str, dict[str, str]]:
    found: dict[str, dict[str, str]] = {}
    for file, text in texts.items():
        for name, block in blocks_by_species(file, text).items():
            found.setdefault(name, {})[file] = block
    return found


def used_paths(request: SpeciesRequest) -> tuple[ProjectPath, ...]:
    """Every file and folder that the entry of a species is made from, references apart."""
    scans = tuple(torsion.scan for torsion in request.model.torsions if torsion.scan is not None)
    return (*request.outputs, *scans)


def locked_files(request: SpeciesRequest, library: Library) -> tuple[LockedFile, ...]:
    """What a species is made from, with the hashes of now: output, energy, conformers, torsions."""
    found = []
    for i, files in enumerate(request.files):
        found.append(("conformer" if i else "output", files.output))
        if files.energy is not None:
            found.append(("energy", files.energy))
    for torsion in request.model.torsions:
        if torsion.scan is not None:
            found += [("torsion", path) for path in (torsion.scan, *_beside(torsion.scan))]
    return tuple(LockedFile(role, path.shown, library.sha256(path.path)) for role, path in found)


def _beside(scan: ProjectPath) -> tuple[ProjectPath, ...]:
    path = points_beside(scan.path)
    shown = f"{scan.shown.rpartition('/')[0]}/{os.path.basename(path)}".lstrip("/")
    return (ProjectPath(shown, path),) if path else ()


def entry_key(decision: Decision, rests_on: Iterable[LockedReference]) -> str:
    """One hash of everything that decides about an entry: options, contents of files, references, and heatwright."""
    words = f"{decision.identity} {references_hash(tuple(rests_on))} {tool_fingerprint()}"
    return hashlib.sha256(words.encode()).hexdigest()


_FIELDS: Final = tuple((key.name, key.field) for key in KEYS if key.field)
_PLAIN: Final = SpeciesRequest(name="", files=())
_OWN: Final = ("note", "comments")


def choices_of(request: SpeciesRequest) -> dict[str, Any]:
    """Every option of a species that is not the default, by its key in the manifest, as plain values.

    >>> choices_of(_PLAIN)
    {}
    """
    shared = _shared_choices(request.reading, request.model, request.fit, request.formation)
    return {**shared, **{name: _plain(value) for name in _OWN if (value := getattr(request, name))}}


@lru_cache(maxsize=1024)
def _shared_choices(
    reading: ReadingChoice, model: ModelChoice, fit: FitChoice, formation: FormationChoice
) -> dict[str, Any]:
    """The same of the parts that species have in common."""
    request = SpeciesRequest(name="", files=(), reading=reading, model=model, fit=fit, formation=formation)
    pairs = ((name, _option(request, field), _option(_PLAIN, field)) for name, field in _FIELDS)
    return {name: _plain(value) for name, value, default in pairs if value != default}


def _option(request: SpeciesRequest, field: str) -> Any:
    if field == "fit.range":
        return (request.fit.t_low_K, request.fit.t_high_K)
    value: Any = request.formation if field.startswith("folders.") else request
    for part in field.split("."):
        value = getattr(value, part)
    return value


def _plain(value: Any) -> Any:
    """A value as a lock file can hold it."""
    if isinstance(value, ProjectPath):
        return value.shown
    if isinstance(value, TorsionChoice):
        return value.barrier or f"{value.atoms} {value.scan.shown if value.scan else ''}".strip()
    if isinstance(value, tuple):
        return [_plain(item) for item in value]
    return value


def _reasons(
    decision: Decision,
    rests_on: tuple[LockedReference, ...],
    old: LockedSpecies,
    lock: Lock,
    block: Texts,
) -> tuple[Reason, ...]:
    missing = _missing(old, block)
    if entry_key(decision, rests_on) == old.key:
        return missing
    found = (
        *_output_reasons(decision.files, old),
        *_option_reasons(decision.choices, old),
        *_reference_reasons(rests_on, old, lock),
        *_tool_reasons(lock),
    )
    return (*(found or (Reason("options changed"),)), *missing)


def _missing(old: LockedSpecies, block: Texts) -> tuple[Reason, ...]:
    if old.kept:
        return (Reason("missing", "an earlier entry stands in its place"),)
    gone = [file for file in FILES if file not in block]
    if gone:
        return (Reason("missing", f"not in {' and '.join(gone)}"),)
    other = [file for file in FILES if text_hash(block[file]) != old.texts.get(file)]
    return (Reason("missing", f"not in {' and '.join(other)} as it was made"),) if other else ()


def _output_reasons(files: tuple[LockedFile, ...], old: LockedSpecies) -> tuple[Reason, ...]:
    if files == old.files:
        return ()
    before, now = ({(f.role, f.path): f.sha256 for f in each} for each in (old.files, files))
    words = [path if now[role, path] else f"{path} is gone" for role, path in now if (role, path) in before
             and now[role, path] != before[role, path]]  # fmt: skip
    words += [f"now with {path}" for role, path in now if (role, path) not in before]
    words += [f"without {path}" for role, path in before if (role, path) not in now]
    return (Reason("output changed", ", ".join(words or ["their order"])),)


def _option_reasons(choices: Mapping[str, Any], old: LockedSpecies) -> tuple[Reason, ...]:
    moved = {name for name in choices.keys() | old.choices.keys() if choices.get(name) != old.choices.get(name)}
    names = [name for name, _ in _FIELDS if name in moved]
    words = [f"{name} {_word(old.choices.get(name))} -> {_word(choices.get(name))}" for name in names]
    return (Reason("options changed", ", ".join(words)),) if words else ()


def _word(value: Any) -> str:
    if value is None:
        return "as by default"
    text = f"{value:g}" if isinstance(value, float) else str(value)
    return text if len(text) <= 40 else f"{text[:37]}..."


def _reference_reasons(rests_on: tuple[LockedReference, ...], old: LockedSpecies, lock: Lock) -> tuple[Reason, ...]:
    if references_hash(rests_on) == old.references:
        return ()
    known = {r.path: r for r in lock.references}
    changed = [r.path for r in rests_on if known.get(r.path) != r]
    current = {r.path for r in rests_on}
    relevant = {f"{element} atom" for element in old.composition}
    gone = [f"without {r.path}" for r in lock.references if r.path not in current and r.species in relevant]
    words = changed + gone
    shown = ", ".join(words[:3]) + (f" and {len(words) - 3} more" if len(words) > 3 else "")
    return (Reason("reference changed", shown),)


def _tool_reasons(lock: Lock) -> tuple[Reason, ...]:
    if lock.fingerprint == tool_fingerprint():
        return ()
    same = lock.tool == __version__
    return (Reason("tool changed", f"heatwright {__version__}, changed" if same else f"{lock.tool} -> {__version__}"),)
