"""Where a build writes: no glob means what lies there, and nothing that has to stay as it is may lie there."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from functools import cached_property

from heatwright.findings import Finding, refuse
from heatwright.project.manifest_types import ProjectPath, SpeciesRequest


@dataclass(frozen=True)
class Places:
    """The store and the release of a mechanism, and its manifests (what is shown of each by its real path)."""

    store: ProjectPath
    release: ProjectPath
    manifests: Mapping[str, str]

    @cached_property
    def _real(self) -> tuple[str, str]:
        return os.path.realpath(self.store.path), os.path.realpath(self.release.path)

    def holds(self, real: str) -> bool:
        """Whether a real path is a manifest, the store or a file of the release: no output, whatever a glob says."""
        store, release = self._real
        return real in self.manifests or real == store or os.path.dirname(real) == release

    def faults(self, species: Iterable[SpeciesRequest], stated: Mapping[str, str], shown: str) -> Iterator[Finding]:
        """What a build would write over or move (``manifest-wrong``).

        stated : where the manifest states store and release, by the name of the key.   shown : the manifest.
        """
        store, release = self._real
        used = {os.path.realpath(path.path): path.shown for one in species for path in read_paths(one)}
        known = {**used, **self.manifests}
        if store in known:
            words = f"the store would take the place of {known[store]}"
            yield _misplaced(words, stated.get("store", shown), "Give the store a file of its own.")
        elif store == release or os.path.dirname(store) == release:
            words = f"the store would lie in the release, {self.release.shown}"
            yield _misplaced(words, stated.get("store", shown), "Give the store another place.")
        inside = next((path for real, path in used.items() if release in (real, os.path.dirname(real))), None)
        if inside is not None:
            words = f"the release would lie where {inside} is"
            yield _misplaced(words, stated.get("release", shown), "Give the release a folder of its own.")


def _misplaced(words: str, where: str, action: str) -> Finding:
    return refuse("manifest-wrong", words, where=where, action=action)


def read_paths(one: SpeciesRequest) -> list[ProjectPath]:
    """Every file and folder that a species is made from."""
    f = one.formation.folders
    outputs = [path for files in one.files for path in (files.output, files.energy)]
    others = [*(torsion.scan for torsion in one.model.torsions), f.atoms, f.references]
    tables = [f.reference_table, f.zero_kelvin, f.corrections]
    return [path for path in (*outputs, *others, *tables) if path is not None]
