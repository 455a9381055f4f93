"""thermo.lock.toml: how each entry of a release was made, and the numbers by which two releases are compared."""

from __future__ import annotations

import os
import re
import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Final, NoReturn, TypeVar

from heatwright.findings import Refused, refuse
from heatwright.project.toml_text import toml_key, toml_lines

T = TypeVar("T")

LOCK_NAME: Final = "thermo.lock.toml"
LOCK_VERSION: Final = 1
"""The format; it rises when a key changes its meaning or goes, so that an older heatwright does not misread it."""
CP_TEMPERATURES_K: Final = (300.0, 400.0, 500.0, 600.0, 800.0, 1000.0, 1500.0)
"""Where Cp° is recorded, K."""
_HEAD: Final = "# How each entry of this release was made.  `heatwright build` writes and reads it, not for editing."
_ROUNDED: Final = "%.9g"


@dataclass(frozen=True, slots=True, order=True)
class LockedFile:
    """A file an entry was made from: what it is (``output``, ``energy``, ``conformer``, ``torsion``), path, SHA-256.

    path : relative to the manifest's folder.
    """

    role: str
    path: str
    sha256: str


@dataclass(frozen=True, slots=True, order=True)
class LockedReference:
    """An output (or table) on which enthalpies of formation rest: path, SHA-256, and the species it is (``C``)."""

    path: str
    sha256: str
    species: str


@dataclass(frozen=True, slots=True, kw_only=True)
class LockedFormation:
    """The enthalpy of formation, kJ/mol, its route and source; None where a value is not stated."""

    route: str
    source: str
    dHf298_kJ_mol: float
    dHf0_kJ_mol: float | None = None
    u95_kJ_mol: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class LockedSpecies:
    """The record of one entry.

    references : hash of the reference outputs it rests on, empty when there are none.
    choices : every option that is not the default, as in the manifest.
    conventions : what came of them: scale factors, low modes, rotation, masses, symmetry number, optical isomers,
        point group, electronic levels.
    S298_J_mol_K, Cp_J_mol_K (at :data:`CP_TEMPERATURES_K`), H298_minus_H0_kJ_mol : of the model, not the polynomial.
    temperatures_K : ends of the polynomial and where its halves meet (low, common, high).
    residuals : largest deviations and the proven bound.   findings : ``severity:code``.
    key : hash of all that decides about the entry.   texts : hash of its text in each file of the release.
    kept : why the entry of an earlier release stands here, empty for one that was made from the files above.
    """

    name: str
    formula: str
    composition: Mapping[str, int]
    charge: int
    multiplicity: int
    files: tuple[LockedFile, ...]
    references: str
    level: str
    program: str
    choices: Mapping[str, Any]
    conventions: Mapping[str, Any]
    formation: LockedFormation
    S298_J_mol_K: float
    H298_minus_H0_kJ_mol: float
    Cp_J_mol_K: tuple[float, ...]
    temperatures_K: tuple[float, float, float]
    residuals: Mapping[str, float]
    findings: tuple[str, ...]
    key: str
    texts: Mapping[str, str]
    kept: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Lock:
    """A whole lock file: species by name, sorted; references sorted by path.

    tool : version of heatwright.   fingerprint : hash of what of heatwright itself can move a result.
    """

    mechanism: str
    tool: str
    fingerprint: str
    standard_pressure_Pa: float
    species: Mapping[str, LockedSpecies] = field(default_factory=dict)
    references: tuple[LockedReference, ...] = ()
    cp_temperatures_K: tuple[float, ...] = CP_TEMPERATURES_K


def rounded(value: float) -> float:
    """*value* as a lock file holds it, to nine significant digits, which no machine's last bit reaches.

    >>> rounded(239.81234567891)
    239.812346
    """
    return float(_ROUNDED % value) + 0.0


def lock_text(lock: Lock) -> str:
    """The text of a lock file: one block for the head, one for the references, one for each species."""
    return document_text(lock_document(lock))


def lock_document(lock: Lock) -> dict[str, Any]:
    """What a lock file holds, as plain values: what :func:`lock_values` gives for its text."""
    document: dict[str, Any] = {
        "heatwright-lock": LOCK_VERSION,
        "mechanism": lock.mechanism,
        "tool": lock.tool,
        "fingerprint": lock.fingerprint,
        "standard_pressure_Pa": lock.standard_pressure_Pa,
        "Cp_temperatures_K": list(lock.cp_temperatures_K),
    }
    if lock.references:
        rows = sorted(lock.references)
        document["references"] = {r.path: {"species": r.species, "sha256": r.sha256} for r in rows}
    return {**document, "species": {name: species_values(lock.species[name]) for name in sorted(lock.species)}}


def document_text(document: Mapping[str, Any]) -> str:
    """The text of a lock file that holds these values."""
    head = {key: value for key, value in document.items() if key not in ("references", "species")}
    blocks = ["\n".join([_HEAD, *toml_lines(head)])]
    if document.get("references"):
        blocks.append("\n".join(["[references]", *toml_lines(document["references"])]))
    for name, values in document["species"].items():
        blocks.append("\n".join([f"[species.{toml_key(name)}]", *toml_lines(values)]))
    return "\n\n".join(blocks) + "\n"


def species_values(s: LockedSpecies) -> dict[str, Any]:
    """What the block of one species holds, as plain values by key."""
    f = s.formation
    formation: dict[str, Any] = {"route": f.route, "source": f.source, "dHf298_kJ_mol": rounded(f.dHf298_kJ_mol)}
    for name in ("dHf0_kJ_mol", "u95_kJ_mol"):
        value = getattr(f, name)
        if value is not None:
            formation[name] = rounded(value)
    values: dict[str, Any] = {
        "formula": s.formula,
        "composition": dict(s.composition),
        "charge": s.charge,
        "multiplicity": s.multiplicity,
        "files": [{"role": file.role, "path": file.path, "sha256": file.sha256} for file in s.files],
        "references": s.references,
        "level": s.level,
        "program": s.program,
        "choices": dict(sorted(s.choices.items())),
        "conventions": dict(s.conventions),
        "formation": formation,
        "S298_J_mol_K": rounded(s.S298_J_mol_K),
        "H298_minus_H0_kJ_mol": rounded(s.H298_minus_H0_kJ_mol),
        "Cp_J_mol_K": [rounded(cp) for cp in s.Cp_J_mol_K],
        "temperatures_K": list(s.temperatures_K),
        "residuals": dict(s.residuals),
        "findings": list(s.findings),
        "key": s.key,
        "texts": dict(sorted(s.texts.items())),
    }
    return {**values, "kept": s.kept} if s.kept else values


def read_lock(path: str | os.PathLike[str]) -> Lock:
    """The lock file at *path*.

    Raises Refused: ``file-missing``; ``lock-newer`` when a newer heatwright made it; ``lock-wrong`` with the line
    where it is no TOML, or with the key that is unknown, missing or of a wrong kind.
    """
    file = os.fspath(path)
    try:
        with open(file, encoding="utf-8") as stream:
            text = stream.read()
    except (OSError, UnicodeDecodeError) as error:
        words = getattr(error, "strerror", None) or "it is no UTF-8 text"
        raise Refused([refuse("file-missing", f"the lock file cannot be read ({words})", where=file)]) from error
    return parse_lock(text, file)


def parse_lock(text: str, file: str = LOCK_NAME) -> Lock:
    """The lock file with this text; *file* names it in messages.  Raises as :func:`read_lock` does."""
    return lock_of(lock_values(text, file), file)


def lock_values(text: str, file: str = LOCK_NAME) -> dict[str, Any]:
    """The values in the text of a lock file, unlooked at.  Raises Refused (``lock-wrong``) when it is no TOML."""
    try:
        return tomllib.loads(text)
    except (ValueError, RecursionError) as error:
        line = re.search(r"at line (\d+)", str(error))
        words = re.sub(r" \(at .*\)$", "", str(error))
        where = f"{file}:{line[1]}" if line else file
        raise Refused([refuse("lock-wrong", f"this is no TOML ({words})", where=where, action=_REMAKE)]) from error


def lock_of(values: Mapping[str, Any], file: str = LOCK_NAME, *, trusted: bool = False) -> Lock:
    """The lock file with these values.  Raises Refused (``lock-newer``, ``lock-wrong``).

    trusted : the species were looked at before, so that they need not be again.
    """
    head = _Reader(file, "", values)
    version = head.whole("heatwright-lock")
    if version > LOCK_VERSION:
        words = f"the lock file is of version {version}, and this heatwright knows up to version {LOCK_VERSION}"
        action = "It was made by a newer version of heatwright: use that one."
        raise Refused([refuse("lock-newer", words, where=file, action=action)])
    if version < 1:
        head.wrong(f"heatwright-lock is {version}", "1 or more")
    head.only(_LOCK_KEYS)
    species = head.table("species", {})
    references = head.table("references", {})
    return Lock(
        mechanism=head.text("mechanism"),
        tool=head.text("tool"),
        fingerprint=head.text("fingerprint"),
        standard_pressure_Pa=head.number("standard_pressure_Pa"),
        cp_temperatures_K=head.numbers("Cp_temperatures_K"),
        references=tuple(_reference(head.inside("references", path, references)) for path in sorted(references)),
        species={
            name: _as_it_is(name, species[name]) if trusted else _species(name, head.inside("species", name, species))
            for name in sorted(species)
        },
    )


def parse_lock_species(name: str, values: Mapping[str, Any]) -> LockedSpecies:
    """One species from the values of its block.  Raises Refused (``lock-wrong``)."""
    return _species(name, _Reader(LOCK_NAME, f"species.{name}", values))


_REMAKE: Final = "Restore the file from version control, or delete the release folder and run `heatwright build`."
_LOCK_KEYS: Final = (
    "heatwright-lock", "mechanism", "tool", "fingerprint", "standard_pressure_Pa", "Cp_temperatures_K", "references",
    "species",
)  # fmt: skip
_SPECIES_KEYS: Final = (
    "formula", "composition", "charge", "multiplicity", "files", "references", "level", "program", "choices",
    "conventions", "formation", "S298_J_mol_K", "H298_minus_H0_kJ_mol", "Cp_J_mol_K", "temperatures_K", "residuals",
    "findings", "key", "texts", "kept",
)  # fmt: skip
_FORMATION_KEYS: Final = ("route", "source", "dHf298_kJ_mol", "dHf0_kJ_mol", "u95_kJ_mol")


def _reference(r: _Reader) -> LockedReference:
    r.only(("species", "sha256"))
    return LockedReference(r.name.split(".", 1)[1], r.text("sha256"), r.text("species"))


def _species(name: str, r: _Reader) -> LockedSpecies:
    r.only(_SPECIES_KEYS)
    f = r.inside("", "formation", r.values)
    f.only(_FORMATION_KEYS)
    cp, ends = r.numbers("Cp_J_mol_K"), r.numbers("temperatures_K")
    if len(ends) != 3:
        r.wrong(f"temperatures_K has {len(ends)} numbers", "low, common and high temperature")
    return LockedSpecies(
        name=name,
        formula=r.text("formula"),
        composition={key: r.kind(key, n, int, "a whole number") for key, n in r.table("composition").items()},
        charge=r.whole("charge"),
        multiplicity=r.whole("multiplicity"),
        files=tuple(_file(r, item) for item in r.items("files")),
        references=r.text("references"),
        level=r.text("level"),
        program=r.text("program"),
        choices=r.table("choices"),
        conventions=r.table("conventions"),
        formation=LockedFormation(
            route=f.text("route"),
            source=f.text("source"),
            dHf298_kJ_mol=f.number("dHf298_kJ_mol"),
            dHf0_kJ_mol=f.number("dHf0_kJ_mol") if "dHf0_kJ_mol" in f.values else None,
            u95_kJ_mol=f.number("u95_kJ_mol") if "u95_kJ_mol" in f.values else None,
        ),
        S298_J_mol_K=r.number("S298_J_mol_K"),
        H298_minus_H0_kJ_mol=r.number("H298_minus_H0_kJ_mol"),
        Cp_J_mol_K=cp,
        temperatures_K=(ends[0], ends[1], ends[2]),
        residuals={key: r.as_number(key, x) for key, x in r.table("residuals").items()},
        findings=tuple(r.kind("findings", x, str, "a list of texts") for x in r.items("findings")),
        key=r.text("key"),
        texts={key: r.kind(key, x, str, "a text") for key, x in r.table("texts").items()},
        kept=r.text("kept") if "kept" in r.values else "",
    )


def _as_it_is(name: str, values: Mapping[str, Any]) -> LockedSpecies:
    """One species from values that are known to be right; in a fraction of the time."""
    fields = dict(values)
    low, common, high = values["temperatures_K"]
    fields["files"] = tuple([LockedFile(f["role"], f["path"], f["sha256"]) for f in values["files"]])
    fields["formation"] = LockedFormation(**values["formation"])
    fields["Cp_J_mol_K"] = tuple(values["Cp_J_mol_K"])
    fields["temperatures_K"] = (low, common, high)
    fields["findings"] = tuple(values["findings"])
    return LockedSpecies(name=name, **fields)


def _file(r: _Reader, item: object) -> LockedFile:
    inner = _Reader(r.file, f"{r.name}.files", r.kind("files", item, dict, "a list of tables"))
    inner.only(("role", "path", "sha256"))
    return LockedFile(inner.text("role"), inner.text("path"), inner.text("sha256"))


@dataclass(frozen=True, slots=True)
class _Reader:
    """One table of the file; every value is asked for with its kind."""

    file: str
    name: str
    values: Mapping[str, Any]

    def wrong(self, found: str, expected: str = "", action: str = _REMAKE) -> NoReturn:
        where = f"{self.file}: [{self.name}]" if self.name else self.file
        raise Refused([refuse("lock-wrong", found, where=where, expected=expected, action=action)])

    def only(self, known: Sequence[str]) -> None:
        for key in self.values:
            if key not in known:
                from difflib import get_close_matches

                near = get_close_matches(key, known, 1, 0.5)
                self.wrong(f"there is no key {key!r}", f"{near[0]!r}" if near else "")

    def kind(self, key: str, value: object, kind: type[T], words: str) -> T:
        if not isinstance(value, kind) or (kind is not bool and isinstance(value, bool)):
            self.wrong(f"{key} is {'missing' if value is None else repr(value)}", words)
        return value

    def inside(self, table: str, key: str, values: Mapping[str, Any]) -> _Reader:
        name = ".".join(part for part in (self.name, table, key) if part)
        return _Reader(self.file, name, self.kind(key, values.get(key), dict, "a table"))

    def table(self, key: str, default: Mapping[str, Any] | None = None) -> dict[str, Any]:
        return self.kind(key, self.values.get(key, default), dict, "a table")

    def text(self, key: str) -> str:
        return self.kind(key, self.values.get(key), str, "a text")

    def whole(self, key: str) -> int:
        return self.kind(key, self.values.get(key), int, "a whole number")

    def items(self, key: str) -> list[Any]:
        return self.kind(key, self.values.get(key), list, "a list")

    def as_number(self, key: str, value: object) -> float:
        number = float(value) if isinstance(value, int | float) and not isinstance(value, bool) else None
        if number is None or number != number or abs(number) == float("inf"):
            self.wrong(f"{key} is {'missing' if value is None else repr(value)}", "a finite number")
        return number

    def number(self, key: str) -> float:
        return self.as_number(key, self.values.get(key))

    def numbers(self, key: str) -> tuple[float, ...]:
        return tuple(self.as_number(key, x) for x in self.items(key))
