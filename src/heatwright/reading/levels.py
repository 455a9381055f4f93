"""Levels of theory: one spelling for each method and basis, and what differs between two levels."""

from __future__ import annotations

import re
from functools import lru_cache
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:
    from heatwright.molecule import Level

_METHODS: Final = {
    "hf": "HF", "rhf": "HF", "uhf": "HF", "rohf": "HF", "scf": "HF", "hartree-fock": "HF",
    "b3lyp": "B3LYP", "b3lyp/g": "B3LYP", "b3lyp_g": "B3LYP", "b3-lyp": "B3LYP", "b3lypg": "B3LYP", "b+hf-lyp": "B3LYP",
    "b3pw91": "B3PW91", "b3p86": "B3P86", "bp86": "BP86", "bp": "BP86", "b-p": "BP86", "blyp": "BLYP", "b-lyp": "BLYP",
    "pbe": "PBE", "pbepbe": "PBE", "pbe0": "PBE0", "pbe1pbe": "PBE0", "pbeh": "PBE0", "revpbe": "revPBE",
    "tpss": "TPSS", "tpsstpss": "TPSS", "tpssh": "TPSSh", "bhandhlyp": "BHandHLYP", "bhlyp": "BHandHLYP",
    "m062x": "M06-2X", "m06-2x": "M06-2X", "m06l": "M06-L", "m06-l": "M06-L", "m06": "M06", "m06hf": "M06-HF",
    "m052x": "M05-2X", "m05-2x": "M05-2X", "m05": "M05", "mn15": "MN15", "mn15l": "MN15-L",
    "wb97xd": "wB97X-D", "wb97x-d": "wB97X-D", "wb97x": "wB97X", "wb97x-d3": "wB97X-D3", "wb97x-v": "wB97X-V",
    "wb97m-v": "wB97M-V", "wb97m-d3bj": "wB97M-D3BJ", "wb97": "wB97", "cam-b3lyp": "CAM-B3LYP", "camb3lyp": "CAM-B3LYP",
    "lc-wpbe": "LC-wPBE", "lcwpbe": "LC-wPBE", "hse06": "HSE06", "hseh1pbe": "HSE06", "b97d": "B97-D", "b97-d": "B97-D",
    "b97d3": "B97-D3", "b97-d3": "B97-D3", "b98": "B98", "apfd": "APFD", "x3lyp": "X3LYP", "o3lyp": "O3LYP",
    "b2plyp": "B2PLYP", "b2-plyp": "B2PLYP", "b2plypd": "B2PLYP-D", "b2plypd3": "B2PLYP-D3", "mpw2plyp": "mPW2PLYP",
    "dsd-pbep86": "DSD-PBEP86", "r2scan-3c": "r2SCAN-3c", "b97-3c": "B97-3c", "pbeh-3c": "PBEh-3c", "hf-3c": "HF-3c",
    "r2scan": "r2SCAN", "svwn": "SVWN", "lsda": "SVWN", "lda": "SVWN", "svwn5": "SVWN5",
    "mp2": "MP2", "mp3": "MP3", "mp4": "MP4", "ccsd": "CCSD", "ccsd(t)": "CCSD(T)", "qcisd(t)": "QCISD(T)",
}  # fmt: skip
_LOCAL_CORRELATION_MATTERS: Final = frozenset({"B3LYP", "B3PW91", "B3P86", "X3LYP", "O3LYP", "SVWN"})
"""Functionals whose name does not say which of the Vosko-Wilk-Nusair fits they contain."""
_CORRELATED: Final = re.compile(r"MP\d|CC|QCI|CISD|BD|CEPA|2PLYP|DSD|NEVPT|CASPT|MRCI")


def normalise_method(name: str) -> str:
    """One spelling for a method; unknown ones stay as they are.

    >>> [normalise_method(name) for name in ("RB3LYP", "ub3lyp", "PBE1PBE", "CCSD(T)-FC")]
    ['B3LYP', 'B3LYP', 'PBE0', 'CCSD(T)']
    """
    plain = name.strip()
    key = (
        re.sub(r"\(?-?f(?:ull|c)\)?$", "", plain.lower()) if re.search(r"-fc$|-full$", plain.lower()) else plain.lower()
    )
    if key in _METHODS:
        return _METHODS[key]
    for prefix in ("ro", "r", "u"):
        if key.startswith(prefix) and key[len(prefix) :] in _METHODS:
            return _METHODS[key[len(prefix) :]]
    return plain


_DISPERSION: Final = re.compile(r"(.+)-(d[234](?:m?bj|m?zero|m)?)", re.IGNORECASE)


def split_dispersion(name: str) -> tuple[str, str]:
    """A method's name without its dispersion correction, and the correction; a name that is one method stays whole.

    >>> split_dispersion("B3LYP-D3BJ"), split_dispersion("wB97X-D3"), split_dispersion("M06-2X")
    (('B3LYP', 'D3BJ'), ('wB97X-D3', ''), ('M06-2X', ''))
    """
    found = None if is_method(name) else _DISPERSION.fullmatch(name.strip())
    return (found[1], found[2].upper()) if found else (name.strip(), "")


def normalise_basis(name: str) -> str:
    """One spelling for a basis set: Pople sets in capitals with stars, the others as their authors write them.

    >>> [normalise_basis(name) for name in ("6-31g(d)", "6-31G*", "6-311++g(d,p)", "CC-PVTZ", "def2tzvp", "sto-3g")]
    ['6-31G*', '6-31G*', '6-311++G**', 'cc-pVTZ', 'def2-TZVP', 'STO-3G']
    """
    key = name.strip().strip('"').lower().replace(" ", "").replace("_", "-")
    pople = re.fullmatch(r"(\d)-(\d{2,3})(\+{0,2})g(\*{0,2}|\([^)]*\))", key)
    if pople:
        return f"{pople[1]}-{pople[2]}{pople[3]}G{_polarisation(pople[4])}"
    if re.fullmatch(r"sto-?\dg", key):
        return f"STO-{key[-2]}G"
    dunning = re.fullmatch(r"((?:(?:d-)?aug|jul|jun|may)-?)?cc-?p(w?c)?v\(?([dtq56])(\+d)?\)?z(.*)", key)
    if dunning:
        prefix = (dunning[1] or "").rstrip("-") + "-" if dunning[1] else ""
        core = {"c": "C", "wc": "wC"}.get(dunning[2] or "", "")
        letter = dunning[3].upper() + (dunning[4] or "")
        return f"{prefix}cc-p{core}V{f'({letter})' if dunning[4] else letter}Z{dunning[5]}"
    karlsruhe = re.fullmatch(r"(ma-)?def2-?([a-z]+)(\([a-z]+\))?(.*)", key)
    if karlsruhe:
        return f"{karlsruhe[1] or ''}def2-{karlsruhe[2].upper()}{(karlsruhe[3] or '').upper()}{karlsruhe[4]}"
    if key.startswith(("lanl", "sdd", "sv", "tzv", "qzv", "mini", "midi", "ma-")):
        return key.upper()
    return name.strip()


def _polarisation(text: str) -> str:
    return {"(d)": "*", "(d,p)": "**", "": "", "*": "*", "**": "**"}.get(text, text)


def level_differences(a: Level, b: Level) -> tuple[str, ...]:
    """One phrase for each known difference between two levels of theory; empty when nothing known differs.

    Frozen cores are compared as policies (an atom freezes fewer orbitals than a molecule), and a dispersion correction
    or a core potential is not missed where it cannot act (a single atom, elements without a core to replace).
    """
    return _differences(a, b, a.atoms, b.atoms)


@lru_cache(maxsize=4096)
def _differences(a: Level, b: Level, *_: tuple[int, ...]) -> tuple[str, ...]:
    """Remembered by the atoms too, as levels of two molecules count as equal."""
    found: list[str] = []
    if a.method and b.method and a.method != b.method:
        found.append(f"method {a.method} and {b.method}")
    elif a.functional and b.functional and a.functional != b.functional:
        found.append(f"{a.method or 'functional'} with {a.functional} and with {b.functional} correlation")
    if a.basis and b.basis and not _same_basis(a, b):
        found.append(f"basis {a.basis} and {b.basis}")
    if a.spherical is not None and b.spherical is not None and a.spherical != b.spherical:
        words = {True: "spherical", False: "Cartesian"}
        found.append(f"{words[a.spherical]} and {words[b.spherical]} basis functions")
    if _core_policy(a) and _core_policy(b) and _core_policy(a) != _core_policy(b):
        found.append(f"{_core_policy(a)} and {_core_policy(b)}")
    if _core_potentials_differ(a, b):
        found.append(f"core potential {a.core_potential or 'none'} and {b.core_potential or 'none'}")
    if a.dispersion != b.dispersion and not (_no_dispersion_needed(a) or _no_dispersion_needed(b)):
        found.append(f"dispersion {a.dispersion or 'none'} and {b.dispersion or 'none'}")
    if a.solvent != b.solvent:
        found.append(f"solvent {a.solvent or 'none'} and {b.solvent or 'none'}")
    if a.program and b.program and a.program != b.program:
        found.append(f"program {a.program} and {b.program}")
    return tuple(found)


def level_unknowns(a: Level, b: Level) -> tuple[str, ...]:
    """The parts of a level that matter and that only one of the two outputs prints, or neither."""
    return _unknowns(a, b, a.atoms, b.atoms)


@lru_cache(maxsize=4096)
def _unknowns(a: Level, b: Level, *_: tuple[int, ...]) -> tuple[str, ...]:
    found: list[str] = []
    if not (a.method and b.method):
        found.append("method")
    if not (a.basis and b.basis):
        found.append("basis")
    if a.method == b.method and a.method in _LOCAL_CORRELATION_MATTERS and not (a.functional and b.functional):
        found.append("local correlation part of the functional")
    if a.spherical is None or b.spherical is None:
        found.append("spherical or Cartesian basis functions")
    if any(_CORRELATED.search(level.method) and not _core_policy(level) and _has_core(level) for level in (a, b)):
        found.append("frozen core")
    return tuple(found)


def _same_basis(a: Level, b: Level) -> bool:
    """Names agree; where one level names sets element by element, on the elements both hold."""
    if a.basis == b.basis:
        return True
    mine, theirs = _by_tag(a.basis), _by_tag(b.basis)
    if mine and theirs:
        return all(mine[tag] == theirs[tag] for tag in mine.keys() & theirs.keys())
    mixed, plain = (mine, b) if mine else (theirs, a)
    if not mixed or not plain.atoms:
        return False
    from heatwright.elements import symbol

    tags = {symbol(z) for z in set(plain.atoms) if z > 0}
    return all(mixed.get(tag) == plain.basis for tag in tags)


def _by_tag(basis: str) -> dict[str, str]:
    return {tag: name for name, tag in re.findall(r"([^,]+?) \((\w+)\)(?:, |$)", basis)}


def _core_policy(level: Level) -> str:
    if not level.frozen_core or not _has_core(level):
        return ""
    return "all electrons correlated" if level.frozen_core == "all" else "a frozen core"


def _has_core(level: Level) -> bool:
    return not level.atoms or any(z > 2 for z in level.atoms)


def _core_potentials_differ(a: Level, b: Level) -> bool:
    if a.core_potential == b.core_potential:
        return False
    if a.core_potential and b.core_potential:
        return True
    bare = a if not a.core_potential else b  # elements up to argon are rarely given one; heavier ones always when asked
    return not bare.atoms or any(z > 18 for z in bare.atoms)


def _no_dispersion_needed(level: Level) -> bool:
    return len(level.atoms) == 1


def is_method(word: str) -> bool:
    """Whether a word names a method that is known here."""
    return word.lower() in _METHODS
