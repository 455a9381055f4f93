"""Which outputs are one molecule: frequency job, single point, scans and conformers, with a word on every guess."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Hashable, Iterable
from dataclasses import dataclass, field
from typing import Final

import numpy as np

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.elements import composition, formula
from heatwright.molecule import Molecule
from heatwright.partition.vibration import zero_point_energy_kJ_mol
from heatwright.project.inventory import Found, Inventory, by_folder
from heatwright.project.naming import names_of
from heatwright.reading.levels import level_differences
from heatwright.reading.single_point import SAME_GEOMETRY_A, geometry_distance_A
from heatwright.structure.cis_trans import shown_sides
from heatwright.structure.identity import identity_of
from heatwright.structure.likeness import SAME_CONFORMER_A, likeness
from heatwright.structure.symmetry import atom_kinds

LEAST_POINTS: Final = 4
"""A folder with fewer outputs of one molecule is not taken for a scan."""
ON_SCAN_A: Final = 0.3
"""A conformer this near (RMSD, Å) to a point of a scan lies on its path: points are at most 30° apart."""
SAME_ENERGY_KJ_MOL: Final = 0.1


@dataclass(frozen=True, eq=False, slots=True)
class Scan:
    """A torsional scan: a folder of outputs or one output, with the geometries of its points (one where unknown)."""

    path: str
    points: tuple[Found, ...]

    @property
    def molecule(self) -> Molecule:
        """Any of the points: they are one molecule."""
        return self.points[0].molecule


@dataclass(eq=False)
class Group:
    """The outputs of one species.

    main : the lowest conformer.   energies : single points of each output at other levels than the modes.
    conformers : further ones that count.   scans : of its torsions.
    left_out : key of the manifest, value, reason: what was found and is not used.   remarks : what was guessed.
    members : all minima of it, those left out as well.
    """

    main: Found
    conformers: list[Found] = field(default_factory=list)
    energies: dict[str, list[Found]] = field(default_factory=dict)
    scans: list[Scan] = field(default_factory=list)
    left_out: list[tuple[str, str]] = field(default_factory=list)
    remarks: list[str] = field(default_factory=list)
    name: str = ""
    members: list[Found] = field(default_factory=list)

    @property
    def outputs(self) -> list[Found]:
        """The main output and the conformers."""
        return [self.main, *self.conformers]


@dataclass(eq=False)
class Grouping:
    """All species of a folder, and what belongs to none of them: path and reason."""

    groups: list[Group]
    unused: list[tuple[str, str]]


def grouped(inventory: Inventory) -> Grouping:
    """The species in an inventory."""
    unused: list[tuple[str, str]] = list(inventory.unusable)
    minima = _each_once(inventory.minima, unused)
    groups = [_conformers(members) for members in _by(minima, species_key)]
    groups = _at_one_level(groups, unused)
    scans, loose = _scans(inventory, unused)
    _attach_scans(groups, scans, unused)
    _attach_energies(groups, loose, unused)
    for group, (name, remark) in zip(groups, names_of([(g.main, g.members) for g in groups]), strict=True):
        group.name = name
        group.remarks += [remark] if remark else []
    return Grouping(sorted(groups, key=lambda group: group.main.path), sorted(unused))


def level_label(molecule: Molecule) -> str:
    """The level of theory of the modes in words."""
    return molecule.level.label if molecule.level else "level not printed"


def species_key(found: Found) -> Hashable:
    """What the conformers of one species at one level share; a key of its own for what cannot be compared."""
    molecule = found.molecule
    identity = identity_of(molecule)
    if identity is None or molecule.is_atom:
        return found.path
    sides = shown_sides(molecule) if molecule.has_geometry else ()
    return identity, molecule.multiplicity, sides, level_label(molecule), molecule.energy_kind


def _by(found: Iterable[Found], key: Callable[[Found], Hashable]) -> list[list[Found]]:
    groups: dict[Hashable, list[Found]] = {}
    for one in found:
        groups.setdefault(key(one), []).append(one)
    return list(groups.values())


def _each_once(minima: list[Found], unused: list[tuple[str, str]]) -> list[Found]:
    """Without files that hold the same bytes as another one."""
    first: dict[str, Found] = {}
    for one in minima:
        other = first.setdefault(one.molecule.source.sha256, one)
        if other is not one:
            unused.append((one.path, f"the same bytes as {other.path}"))
    return list(first.values())


def lowest_kJ_mol(molecule: Molecule) -> float:
    """Electronic and zero-point energy; +inf without an energy."""
    if molecule.energy_hartree is None:
        return np.inf
    modes = molecule.wavenumbers_cm1
    return molecule.energy_hartree * HARTREE_KJ_MOL + zero_point_energy_kJ_mol(modes[modes > 0.0])


def _conformers(members: list[Found]) -> Group:
    """One species of its minima: the lowest first, doubles and mirror images left out."""
    ordered = sorted(members, key=lambda one: (lowest_kJ_mol(one.molecule), one.path))
    alike = [one for one in ordered if one is ordered[0] or _is_again(one, ordered[0])]
    group = Group(min(alike, key=lambda one: (len(one.path), one.path)), members=ordered)
    for one in (one for one in ordered if one is not group.main):
        why = _not_another(one, group.outputs)
        if why:
            group.left_out.append((f'"{one.path}"', why))
        else:
            group.conformers.append(one)
    for one in group.conformers:
        above = lowest_kJ_mol(one.molecule) - lowest_kJ_mol(group.main.molecule)
        group.remarks.append(f"{one.path} is another conformer, {above:.1f} kJ/mol above {group.main.path}")
    return group


def _is_again(one: Found, other: Found) -> bool:
    """Whether an output is another one's conformer once more, or its mirror image, at the same energy."""
    a, b = one.molecule, other.molecule
    if not (a.has_geometry and b.has_geometry) or None in (a.energy_hartree, b.energy_hartree):
        return False
    near = abs(lowest_kJ_mol(a) - lowest_kJ_mol(b)) <= SAME_ENERGY_KJ_MOL
    return near and min(_distances_A(a, b)) <= SAME_CONFORMER_A


def _not_another(one: Found, kept: list[Found]) -> str:
    """Why an output is no conformer besides those that count; empty when it is one."""
    if one.molecule.energy_hartree is None:
        return "no energy to weigh it by as a conformer"
    for other in kept:
        a, b = one.molecule, other.molecule
        if not (a.has_geometry and b.has_geometry):
            return f"without a geometry it cannot be told from {other.path}"
        gap = abs(lowest_kJ_mol(a) - lowest_kJ_mol(b))
        distance, mirror = _distances_A(a, b)
        if distance <= SAME_CONFORMER_A:
            beside = "" if gap <= SAME_ENERGY_KJ_MOL else f", although {gap:.1f} kJ/mol above"
            return f"the same conformer as {other.path}{beside}"
        if mirror <= SAME_CONFORMER_A and gap <= SAME_ENERGY_KJ_MOL:
            return f"the mirror image of {other.path}, which optical isomers count already"
    return ""


def _distances_A(a: Molecule, b: Molecule) -> tuple[float, float]:
    kinds = atom_kinds(np.concatenate([a.atomic_numbers, b.atomic_numbers]), np.concatenate([a.masses_u, b.masses_u]))
    found = likeness(kinds[: a.n_atoms], a.coordinates_A, kinds[a.n_atoms :], b.coordinates_A)
    return found.rmsd_A, found.mirror_rmsd_A


def _at_one_level(groups: list[Group], unused: list[tuple[str, str]]) -> list[Group]:
    """Of a species at several levels the one at the level that most species have; the others are not used."""
    count = Counter(level_label(group.main.molecule) for group in groups)

    def rank(group: Group) -> tuple[bool, bool, int, str]:
        m = group.main.molecule
        return m.energy_hartree is None, m.level is None, -count[level_label(m)], group.main.path

    def same(group: Group) -> Hashable:
        key = species_key(group.main)
        return key[:3] if isinstance(key, tuple) else key

    kept: dict[Hashable, Group] = {}
    for group in sorted(groups, key=rank):
        other = kept.setdefault(same(group), group)
        if other is not group:
            here, there = level_label(group.main.molecule), level_label(other.main.molecule)
            at = f", at {here} and not {there}" if here != there else ""
            unused += [(one.path, f"the same molecule as {other.main.path}{at}") for one in group.outputs]
    return list(kept.values())


def _scans(inventory: Inventory, unused: list[tuple[str, str]]) -> tuple[list[Scan], list[Found]]:
    """The scans, and the energies that are no points of one."""
    scans = [Scan(one.path, (one,)) for one in inventory.scans]
    loose: list[Found] = []
    with_minima = {one.folder for one in (*inventory.minima, *inventory.atoms)}
    for folder, members in by_folder([*inventory.energies, *inventory.points]):
        if folder not in with_minima and is_scan(members):
            scans.append(Scan(folder, tuple(members)))
            continue
        for alike in _by(members, _scan_key):
            if is_scan(alike):
                unused.append(
                    (_from_to(alike), "the points of a scan, it seems; torsions needs them in a folder alone")
                )
            else:
                loose += [one for one in alike if one not in inventory.points]
                unused += [(one.path, _POINT) for one in alike if one in inventory.points]
    return scans, loose


_POINT: Final = "an optimisation with constraints or one that did not end at a stationary point"


def _scan_key(one: Found) -> Hashable:
    m = one.molecule
    return tuple(m.atomic_numbers.tolist()), m.charge, m.multiplicity, level_label(m), m.energy_kind


def _from_to(found: list[Found]) -> str:
    """Several files in one folder as a phrase."""
    paths = sorted(one.path for one in found)
    return f"{paths[0]} to {paths[-1].rpartition('/')[2]} ({len(paths)} files)"


def is_scan(members: list[Found]) -> bool:
    """Whether the outputs of a folder are one molecule at different geometries: the points of a scan."""
    if len(members) < LEAST_POINTS:
        return False
    first = members[0].molecule
    alike = all(_same_atoms(one.molecule, first) for one in members)
    energies = [one.molecule.energy_hartree for one in members]
    if not alike or None in energies or not first.has_geometry:
        return False
    return any(geometry_distance_A(first, one.molecule) > SAME_GEOMETRY_A for one in members[1:])


def _same_atoms(a: Molecule, b: Molecule) -> bool:
    """Whether two outputs are of one molecule, atoms in the same order, at one level."""
    if not np.array_equal(a.atomic_numbers, b.atomic_numbers):
        return False
    same = (a.charge, a.multiplicity, a.energy_kind) == (b.charge, b.multiplicity, b.energy_kind)
    return same and not _levels_differ(a, b)


def _levels_differ(a: Molecule, b: Molecule) -> bool:
    if a.level is None or b.level is None:
        return a.level is not b.level
    return bool(level_differences(a.level, b.level))


def _attach_scans(groups: list[Group], scans: list[Scan], unused: list[tuple[str, str]]) -> None:
    """Each scan to the species it is of, where that has the atoms in the same order and the same level."""
    for scan in scans:
        graph = identity_of(scan.molecule)
        fitting = [g for g in groups if graph is not None and graph == identity_of(g.main.molecule)]
        matching = [g for g in fitting if _same_atoms(g.main.molecule, scan.molecule)]
        if not matching:
            name = formula(composition(scan.molecule.atomic_numbers), scan.molecule.charge or 0)
            if fitting:
                words = f"a scan of {fitting[0].main.path} with another order of atoms or at another level"
            else:
                words = f"a scan of {name}, of which there is no frequency job"
            unused.append((scan.path, words))
            continue
        group = matching[0]
        group.scans.append(scan)
        points = f"{len(scan.points)} outputs" if len(scan.points) > 1 else "one output"
        group.remarks.append(f"{scan.path} ({points}) is a scan of one of its torsions")
    for group in groups:
        for one in [c for c in group.conformers if _on_scan(c, group.scans)]:
            group.conformers.remove(one)
            group.left_out.append((f'"{one.path}"', "on the path of a scan, whose levels count it already"))
            group.remarks = [r for r in group.remarks if not r.startswith(f"{one.path} is another conformer")]


def _on_scan(one: Found, scans: list[Scan]) -> bool:
    """Whether a conformer, or its mirror image, is near to a point of a scan."""
    return any(
        min(_distances_A(point.molecule, one.molecule)) <= ON_SCAN_A
        for scan in scans
        for point in scan.points
        if len(scan.points) > 1
    )


def _attach_energies(groups: list[Group], loose: list[Found], unused: list[tuple[str, str]]) -> None:
    """Each single point to the output whose geometry it has."""
    outputs = [(group, one) for group in groups for one in group.outputs]
    by_formula: dict[Hashable, list[tuple[Group, Found]]] = {}
    for group, one in outputs:
        by_formula.setdefault(_state(one.molecule), []).append((group, one))
    for energy in loose:
        same = by_formula.get(_state(energy.molecule), [])
        near = [(geometry_distance_A(one.molecule, energy.molecule), i) for i, (_, one) in enumerate(same)]
        best, index = min(near, default=(np.inf, -1))
        if best > SAME_GEOMETRY_A:
            unused.append((energy.path, _alone(energy, same, best)))
            continue
        group, one = same[index]
        labels = {(level_label(m), m.energy_kind) for m in (one.molecule, energy.molecule)}
        if len(labels) == 1:
            unused.append((energy.path, f"the energy that {one.path} has itself, at the same level"))
            continue
        group.energies.setdefault(one.path, []).append(energy)


def _state(molecule: Molecule) -> Hashable:
    return tuple(sorted(molecule.atomic_numbers.tolist())), molecule.charge, molecule.multiplicity


def _alone(energy: Found, same: list[tuple[Group, Found]], distance_A: float) -> str:
    what = "an optimisation without frequencies" if energy.molecule.kind == "optimisation" else "a single point"
    name = formula(composition(energy.molecule.atomic_numbers), energy.molecule.charge or 0)
    if not same:
        return f"{what} of {name}, of which there is no frequency job"
    if not np.isfinite(distance_A):
        return f"{what} of {name} with the geometry of no frequency job"
    nearest = min(same, key=lambda pair: geometry_distance_A(pair[1].molecule, energy.molecule))[1]
    return f"{what}, {distance_A:.3f} Å from the geometry of {nearest.path}; at most {SAME_GEOMETRY_A:g} Å count as one"
