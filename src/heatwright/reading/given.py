"""Molecules that no output's text has to be searched for: molecule files (TOML) and QCSchema results (JSON)."""

from __future__ import annotations

import os
from pathlib import PurePath
from typing import TYPE_CHECKING

from heatwright.findings import Finding, Refused, note, refuse
from heatwright.molecule import Molecule, Source
from heatwright.reading.soundness import soundness

if TYPE_CHECKING:
    from heatwright.reading.files import StoredText

_PACKED = {".gz", ".bz2", ".xz"}


def given_molecule(
    path: str | os.PathLike[str], stored: StoredText, job: int | None, charge: int | None, multiplicity: int | None
) -> Molecule | None:
    """The molecule of a molecule file or of a QCSchema result with all its findings; None for any other file.

    A molecule file is known by its ending, ``.toml`` (packed or not), a QCSchema result by its schema_name.
    """
    file = os.fspath(path)
    if _ending(file) == ".toml":
        from heatwright.reading.moleculefile import molecule_from_toml

        molecule = molecule_from_toml(stored.text, Source(file, stored.sha256, "by hand", ""))
    else:
        from_schema = _of_qcschema(file, stored)
        if from_schema is None:
            return None
        molecule = from_schema
    if job not in (None, 1):
        words = f"job {job} was asked for, and this file holds one molecule"
        raise Refused([refuse("several-jobs", words, action="Leave --job out.")])
    molecule, said = _as_the_user_says(molecule, charge, multiplicity)
    return molecule.but(findings=(*stored.findings, *molecule.findings, *said, *soundness(molecule)))


def _of_qcschema(file: str, stored: StoredText) -> Molecule | None:
    if not stored.text[:4096].lstrip().startswith("{"):
        return None
    from heatwright.reading.qcschema import creator, molecule_from_qcschema, qcschema_document

    document = qcschema_document(stored.text)
    if document is None:
        return None
    return molecule_from_qcschema(document, Source(file, stored.sha256, *creator(document)))


def _ending(file: str) -> str:
    place = PurePath(file)
    return PurePath(place.stem).suffix.lower() if place.suffix.lower() in _PACKED else place.suffix.lower()


def _as_the_user_says(
    molecule: Molecule, charge: int | None, multiplicity: int | None
) -> tuple[Molecule, tuple[Finding, ...]]:
    values = {"charge": charge, "multiplicity": multiplicity}
    given = {name: value for name, value in values.items() if value is not None}
    said = tuple(
        note("user-value", f"{name} {value} was given by the user; the file says {getattr(molecule, name)}")
        for name, value in given.items()
    )
    return molecule.but(**given), said
