"""A molecule written down by hand in a TOML file: from spectroscopy, from a paper, or from a program not read here."""

from __future__ import annotations

import re
from typing import Any, Final

import numpy as np

from heatwright.elements import atomic_number, composition, element, formula
from heatwright.findings import Finding, Refused, note, refuse
from heatwright.molecule import FloatArray, IntArray, Kind, Level, MassKind, Molecule, Source, Stated
from heatwright.reading.diatomic import DIATOMIC_KEYS, diatomic_constants, with_diatomic
from heatwright.reading.levels import normalise_basis, normalise_method, split_dispersion
from heatwright.reading.strict import Block, parsed
from heatwright.structure.isotopes import parse_isotope

KEYS: Final[dict[str, tuple[str, ...]]] = {
    "molecule": ("name", "formula", "charge", "multiplicity", "masses", "source"),
    "geometry": ("atoms", "source"),
    "rotation": ("constants_cm1", "linear", "source"),
    "symmetry": ("number", "point_group", "optical_isomers", "source"),
    "vibrations": ("wavenumbers_cm1", "source"),
    "diatomic": DIATOMIC_KEYS,
    "electronic": ("levels_cm1", "source"),
    "energies": ("hartree", "in_use", "source"),
    "level": ("method", "basis", "functional", "spherical", "frozen_core", "core_potential", "dispersion", "solvent",
              "program", "source"),
}  # fmt: skip
"""Every table of a molecule file and its keys."""

_SOURCED: Final = ("geometry", "rotation", "vibrations", "diatomic", "electronic", "energies")
"""The tables with numbers in them, which have to say where they are from."""

_FORMULA_PART: Final = re.compile(r"([A-Z][a-z]?)(\d*)")

_DATA: Final = {
    "geometry": "geometry",
    "rotation": "rotational constants",
    "symmetry": "symmetry",
    "vibrations": "wavenumbers",
    "diatomic": "diatomic constants",
    "electronic": "electronic levels",
    "energies": "energies",
    "level": "level of theory",
    "molecule": "molecule",
}


def molecule_from_toml(text: str, source: Source) -> Molecule:
    """The molecule in the text of a molecule file (keys: :data:`KEYS`; the README shows one), not yet checked.

    Raises Refused with the line: ``not-an-output`` when there is no ``[molecule]`` table, ``molecule-file-wrong`` for
    unknown or missing keys, values of a wrong kind, and tables that contradict each other.
    """
    file = parsed(text)
    if "molecule" not in file:
        words = "this TOML file has no [molecule] table, so it is no molecule file"
        raise Refused([refuse("not-an-output", words, action="The README shows how a molecule is written down.")])
    file.only(KEYS)
    blocks = {name: file.block(name) for name in KEYS}
    for name, block in blocks.items():
        block.only(KEYS[name])
        if name in _SOURCED and name in file:
            block.needs("source")
    head = blocks["molecule"]
    numbers, coordinates = _atoms(file, blocks)
    masses_kind = _masses(head)
    masses_u = _masses_u(file, blocks, numbers, masses_kind)
    wavenumbers = _wavenumbers(blocks["vibrations"]) if "vibrations" in file else np.empty(0)
    energies, in_use = _energies(blocks["energies"]) if "energies" in file else ({}, "")
    head.needs("multiplicity")
    multiplicity = head.whole("multiplicity", least=1)
    stated = _stated(file, blocks, numbers.size, len(coordinates) > 0)
    if "diatomic" in file:
        constants = diatomic_constants(file, blocks["diatomic"], numbers, multiplicity)
        stated = with_diatomic(stated, constants, numbers, masses_u)
        wavenumbers = np.array([constants.we_cm1 - 2.0 * constants.wexe_cm1])
    return Molecule(
        source=source,
        kind=_kind(numbers.size, wavenumbers.size, len(energies)),
        atomic_numbers=numbers,
        masses_u=masses_u,
        mass_kind=masses_kind,
        masses_printed=False,
        coordinates_A=coordinates,
        wavenumbers_cm1=wavenumbers,
        energies_hartree=energies,
        energy_kind=in_use,
        charge=head.whole("charge") or 0,
        multiplicity=multiplicity,
        level=_level(blocks["level"], numbers) if "level" in file else None,
        findings=tuple(_sources(blocks)),
        stated=stated,
    )


def _sources(blocks: dict[str, Block]) -> list[Finding]:
    said = [(name, block.word("source")) for name, block in blocks.items() if "source" in block]
    return [note("given-by-hand", f"given by hand: {_DATA[name]}, from {source}") for name, source in said]


def _kind(n_atoms: int, n_modes: int, n_energies: int) -> Kind:
    if n_atoms == 1:
        return "atom"
    return "frequency" if n_modes else "energy" if n_energies else "unknown"


def _masses(head: Block) -> MassKind:
    word = head.word("masses", "isotopic")
    if word == "isotopic":
        return "isotopic"
    if word != "average":
        head.wrong("masses", f"masses is {word!r}", "isotopic (of the most abundant isotopes) or average")
    return "average"


def _mass(number: int, kind: MassKind) -> float:
    return element(number).average_weight_u if kind == "average" else element(number).common_mass_u


def _masses_u(file: Block, blocks: dict[str, Block], numbers: IntArray, kind: MassKind) -> FloatArray:
    """The masses, u; an atom written D is deuterium."""
    if "geometry" in file:
        symbols = [row[0] for row in blocks["geometry"].items("atoms")]
    else:
        found = _FORMULA_PART.findall(blocks["molecule"].word("formula"))
        symbols = [symbol for symbol, count in found for _ in range(int(count or 1))]
    deuterium = parse_isotope("H=D").mass_u
    masses = [deuterium if s == "D" else _mass(int(z), kind) for s, z in zip(symbols, numbers, strict=True)]
    return np.array(masses)


def _atoms(file: Block, blocks: dict[str, Block]) -> tuple[IntArray, FloatArray]:
    """Atomic numbers and the coordinates that go with them: those of a geometry, of an atom, or none."""
    head = blocks["molecule"]
    by_formula = _formula(head) if "formula" in head else None
    if "geometry" in file:
        numbers, coordinates = _geometry(blocks["geometry"])
        if by_formula is not None and sorted(by_formula) != sorted(numbers):
            mine = formula(composition(numbers))
            head.wrong(
                "formula", f"the formula is {head.word('formula')}, and the geometry holds {mine}", "the same atoms"
            )
        return np.array(numbers), coordinates
    if by_formula is None:
        head.wrong("formula", "there is neither a formula nor a geometry", "one of them")
    if len(by_formula) == 1:
        return np.array(by_formula), np.zeros((1, 3))
    if "rotation" not in file and "diatomic" not in file:
        head.wrong("formula", "the molecule has neither a [geometry] nor a [rotation] table", "one of them")
    return np.array(by_formula), np.empty((0, 3))


def _formula(head: Block) -> list[int]:
    text = head.word("formula")
    if not re.fullmatch(r"([A-Z][a-z]?\d*)+", text):
        head.wrong(
            "formula",
            f"the formula is {text!r}",
            "element symbols and counts such as CH4O",
            "A charge has a key of its own, charge.",
        )
    numbers: list[int] = []
    for sym, count in _FORMULA_PART.findall(text):
        if count and not 0 < int(count[:5]) < 1000:
            head.wrong("formula", f"the formula counts {count} atoms of {sym}", "between 1 and 999")
        numbers += [_number_of(head, "formula", sym)] * int(count or 1)
    return numbers


def _number_of(block: Block, key: str, sym: object) -> int:
    try:
        return (
            atomic_number("H" if sym == "D" else str(sym))
            if isinstance(sym, str)
            else int(element(_as_int(sym)).number)
        )
    except KeyError:
        block.wrong(key, f"{sym!r} is no element's symbol", "a symbol such as Cl")


def _as_int(value: object) -> int:
    if isinstance(value, bool) or not isinstance(value, int):
        raise KeyError(value)
    return value


def _geometry(block: Block) -> tuple[list[int], FloatArray]:
    numbers, rows = [], []
    for index, row in enumerate(block.items("atoms"), start=1):
        if not isinstance(row, list) or len(row) != 4:
            block.wrong("atoms", f"atom {index} is {row!r}", 'a symbol and x, y, z in Å, such as ["O", 0.0, 0.0, 0.12]')
        numbers.append(_number_of(block, "atoms", row[0]))
        rows.append([block.number("atoms", value, f"a coordinate of atom {index}") for value in row[1:]])
    return numbers, np.array(rows)


def _wavenumbers(block: Block) -> FloatArray:
    """The wavenumbers, ascending, each as often as it is degenerate."""
    pairs = _pairs(block, "wavenumbers_cm1")
    for value, _ in pairs:
        if value == 0.0:
            block.wrong("wavenumbers_cm1", "a wavenumber is 0", "vibrations only, without translations and rotations")
    return np.array(sorted(value for value, count in pairs for _ in range(count)))


def _pairs(block: Block, key: str) -> list[tuple[float, int]]:
    """Numbers, each alone or in a list with its degeneracy."""
    found = []
    for index, item in enumerate(block.items(key), start=1):
        pair = item if isinstance(item, list) else [item, 1]
        count = pair[1] if len(pair) == 2 else None
        if isinstance(count, bool) or not isinstance(count, int) or not 0 < count < 1000:
            block.wrong(key, f"item {index} is {item!r}", "a number, or a number and its degeneracy as in [667.0, 2]")
        found.append((block.number(key, pair[0], f"item {index}"), count))
    return found


def _energies(block: Block) -> tuple[dict[str, float], str]:
    block.needs("hartree")
    inner = block.block("hartree")
    energies = {name: inner.number(name, value, f"the {name} energy") for name, value in inner.values.items()}
    if not energies:
        block.wrong("hartree", "there is no energy", "one by its name, such as hartree = { SCF = -76.0107 }")
    in_use = block.word("in_use", next(iter(energies)) if len(energies) == 1 else "")
    if in_use not in energies:
        found = f"in_use is {in_use!r}" if in_use else "it is not said which energy is in use"
        block.wrong("in_use", found, f"one of {', '.join(energies)}")
    return energies, in_use


def _level(block: Block, numbers: IntArray) -> Level:
    block.needs("method")
    words = {key: block.word(key) for key in KEYS["level"] if key not in ("spherical", "source", "method", "basis")}
    method, dispersion = split_dispersion(block.word("method"))
    words["dispersion"] = words["dispersion"] or dispersion
    return Level(
        method=normalise_method(method),
        basis=normalise_basis(block.word("basis")),
        spherical=block.flag("spherical"),
        atoms=tuple(int(z) for z in numbers),
        **words,
    )


def _stated(file: Block, blocks: dict[str, Block], n_atoms: int, has_geometry: bool) -> Stated:
    symmetry, electronic = blocks["symmetry"], blocks["electronic"]
    if has_geometry:
        for name, key, says in (
            ("rotation", "constants_cm1", "moments of inertia"),
            ("symmetry", "point_group", "group"),
        ):
            if key in blocks[name]:
                blocks[name].wrong(
                    key, f"there is {key} although the {_where(n_atoms)} says the {says}", "only one of them"
                )
    elif "rotation" in file and "number" not in symmetry:
        symmetry.wrong("number", "rotational constants are given without a symmetry number", "number in [symmetry]")
    levels = tuple(sorted(_pairs(electronic, "levels_cm1"))) if "electronic" in file else ()
    if levels and levels[0][0] != 0.0:
        electronic.wrong("levels_cm1", f"the lowest level is at {levels[0][0]:g}", "the ground level at 0")
    return Stated(
        name=blocks["molecule"].word("name"),
        rotational_constants_cm1=_constants(blocks["rotation"]) if "rotation" in file else (),
        symmetry_number=symmetry.whole("number", least=1),
        point_group=symmetry.word("point_group"),
        optical_isomers=symmetry.whole("optical_isomers", least=1),
        electronic_levels=levels,
        electronic_source=electronic.word("source"),
    )


def _where(n_atoms: int) -> str:
    return "geometry" if n_atoms > 1 else "atom"


def _constants(block: Block) -> tuple[float, ...]:
    block.needs("constants_cm1", "linear")
    values: list[Any] = block.items("constants_cm1")
    constants = tuple(block.number("constants_cm1", value, "a rotational constant") for value in values)
    due = 1 if block.flag("linear") else 3
    if len(constants) != due or min(constants) <= 0.0:
        shape = "linear" if due == 1 else "non-linear"
        block.wrong("constants_cm1", f"the constants are {list(constants)}", f"{due} positive for a {shape} molecule")
    return tuple(sorted(constants, reverse=True))
