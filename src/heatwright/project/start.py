"""A first manifest from a folder of outputs, with what was guessed as comments beside it."""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from heatwright.findings import Refused, refuse
from heatwright.project.inventory import Found, files_in, take_inventory
from heatwright.project.manifest import MANIFEST_NAME
from heatwright.project.planning import Plan, PlannedSpecies, planned
from heatwright.project.toml_text import toml_key, toml_value

WIDTH = 44
"""Comments beside a line start here where the line leaves room."""


@dataclass(frozen=True, slots=True)
class FirstManifest:
    """The text of a first manifest, and what was guessed, in words.

    guesses : (species, sentence) pairs.   unused : (path, reason).   passed_over : files that are no outputs.
    """

    text: str
    n_outputs: int
    n_species: int
    guesses: tuple[tuple[str, str], ...]
    broken: tuple[tuple[str, str], ...]
    unused: tuple[tuple[str, str], ...]
    passed_over: tuple[str, ...]


def first_manifest(
    folder: str, *, beside: str | None = None, seen: Callable[[str], None] = lambda name: None
) -> FirstManifest:
    """Reads every output below a folder, groups them by molecule, and writes a manifest for them.

    beside : the folder of the manifest, which paths count from; the searched one unless given.
    seen : is told each file that has been read.
    Raises Refused when the folder is none or holds no output of a species.
    """
    if not os.path.isdir(folder):
        found = "this is a file" if os.path.exists(folder) else "there is no such folder"
        raise Refused([refuse("file-missing", found, where=folder, expected="a folder of outputs")])
    inventory = take_inventory(folder, files_in(folder), seen, (MANIFEST_NAME,))
    plan = planned(folder, inventory)
    if not plan.species:
        found = f"none of {inventory.n_outputs} outputs" if inventory.n_outputs else "no file"
        words = f"{found} in the folder can be a species"
        action = "`heatwright survey` says what each output is."
        raise Refused(
            [refuse("no-frequencies", words, where=folder, expected="outputs with frequencies", action=action)]
        )
    prefix = os.path.relpath(folder, beside).replace(os.sep, "/") if beside is not None else "."
    kept = [s for s in plan.species if not s.broken]
    return FirstManifest(
        text=_text(plan, _Paths(prefix), os.path.basename(os.path.abspath(folder))),
        n_outputs=inventory.n_outputs,
        n_species=len(kept),
        guesses=tuple((s.group.name, remark) for s in kept for remark in s.group.remarks),
        broken=tuple((s.group.main.path, s.broken) for s in plan.species if s.broken),
        unused=tuple(sorted(plan.unused)),
        passed_over=tuple(inventory.passed_over),
    )


@dataclass(frozen=True, slots=True)
class _Paths:
    """Paths from the searched folder as they are written in the manifest."""

    prefix: str

    def __call__(self, path: str) -> str:
        if self.prefix == ".":
            return path
        return self.prefix if path == "." else f"{self.prefix}/{path}"


def _text(plan: Plan, at: _Paths, name: str) -> str:
    lines = [
        "# Written by `heatwright start` from the outputs in a folder.  What was guessed is said beside it.",
        "",
        *_mechanism(plan, at, name),
    ]
    for level, folder in sorted(plan.levels.items()):
        lines += ["", f"[levels.{toml_key(level)}]"]
        lines.append(_line("atoms", at(folder), plan.about_atoms[folder]))
    for species in plan.species:
        lines += ["", *_species(species, plan, at)]
    lines += _atoms_as_species(plan, at)
    if plan.unused:
        lines += ["", "# Not used:"]
        lines += [f"#   {_plain(at(path))}: {_plain(why)}" for path, why in sorted(plan.unused)]
    return "\n".join(lines) + "\n"


def _mechanism(plan: Plan, at: _Paths, name: str) -> list[str]:
    lines = ["[mechanism]", _line("name", _plain(name).strip() or "mechanism", "the folder's")]
    if plan.scaled:
        but = f"; none are published for {', '.join(plan.unpublished)}" if plan.unpublished else ""
        lines.append(_line("scale", "published", f"factors by level of theory, see `heatwright scales`{but}"))
    else:
        lines.append(f"# no scale factors are published for {', '.join(plan.unpublished) or 'these outputs'}")
    if plan.atoms:
        lines.append(_line("atoms", at(plan.atoms), plan.about_atoms[plan.atoms]))
        if any(s.group.main.folder == plan.atoms for s in plan.species):
            lines.append(
                "# The atoms would better lie in a folder of their own: all outputs beside them are read with them."
            )
    if plan.references:
        lines.append(_line("references", at(plan.references), "a folder called after references"))
        lines.append(_line("route", "best", "of all routes that atoms and references allow"))
    elif plan.atoms:
        lines.append(_line("route", "atomization", "as there are atoms"))
    elif plan.about_atoms:
        lines.append("# No species has all its atoms at its level: every species needs its dHf298 with its source.")
    else:
        lines.append("# There are no outputs of atoms: every species needs its dHf298 with its source.")
    if plan.n_known:
        known = f'{plan.n_known} of the species have an evaluated enthalpy; with them as references, route = "best"'
        lines.append(f"# references = {toml_value(at('.'))}  # {known} uses them for the others.")
    return lines


def _species(species: PlannedSpecies, plan: Plan, at: _Paths) -> list[str]:
    group, values = species.group, _values(species, plan, at)
    lines = [f"[species.{toml_key(group.name)}]"]
    about = {"output": _about(group.main)}
    lines += [_line(key, value, about.get(key, "")) for key, value in values.items()]
    if species.broken:
        heading = f"# {_plain(at(group.main.path))} is left out: {_plain(species.broken)}."
        return [heading, *(f"# {line}" for line in lines)]
    lines += [f"# {_plain(remark)}" for remark in group.remarks]
    lines += [f"# not used: {_plain(what)}, {_plain(why)}" for what, why in group.left_out]
    if not (plan.atoms or plan.references):
        lines += ['# dHf298 = "VALUE kJ/mol"', '# source = "..."']
    return lines


def _values(species: PlannedSpecies, plan: Plan, at: _Paths) -> dict[str, object]:
    """The keys of a species' table."""
    group = species.group
    values: dict[str, object] = {"output": at(group.main.path)}
    if group.main.path in species.energies:
        values["energy"] = at(species.energies[group.main.path].path)
    if group.conformers:
        values["conformers"] = [_conformer(one, species.energies.get(one.path), at) for one in group.conformers]
    if species.scans:
        values["torsions"] = [at(path) for path in species.scans]
    if species.level:
        values["level"] = species.level
    if plan.scaled and not species.published:
        values |= {"frequency-scale": 1.0, "zpe-scale": 1.0}
    return values


def _conformer(one: Found, energy: Found | None, at: _Paths) -> str | Mapping[str, str]:
    return at(one.path) if energy is None else {"output": at(one.path), "energy": at(energy.path)}


def _about(one: Found) -> str:
    from heatwright.elements import composition, formula
    from heatwright.project.grouping import level_label

    m = one.molecule
    spin = f", multiplicity {m.multiplicity}" if m.multiplicity != 1 else ""
    name = formula(composition(m.atomic_numbers, m.masses_u), m.charge or 0)
    return f"{name}{spin}, {level_label(m)}, {m.source.program_version}"


def _atoms_as_species(plan: Plan, at: _Paths) -> list[str]:
    """The atoms of [mechanism] as species, in comments: mechanisms with atoms as species are common."""
    mine = {symbol: path for symbol, path in plan.atom_files if (os.path.dirname(path) or ".") == plan.atoms}
    if not mine:
        return []
    lines = ["", "# Atoms as species, where the mechanism has them:"]
    for symbol, path in sorted(mine.items()):
        lines += [f"# [species.{toml_key(symbol)}]", f"# output = {toml_value(at(path))}"]
    return lines


def _line(key: str, value: object, comment: str = "") -> str:
    text = f"{key} = {toml_value(value)}"
    return f"{text.ljust(WIDTH)}  # {_plain(comment)}" if comment else text


def _plain(text: str) -> str:
    """A text that can stand in a comment: on one line, without control characters."""
    return "".join(c if c.isprintable() else "?" for c in " ".join(text.split()))
