"""QCSchema: the open JSON standard of the Molecular Sciences Software Institute for results of quantum chemistry.

Read are results of one calculation (``AtomicResult``): Hessians, gradients and energies.
"""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from typing import Any, Final, NoReturn

import numpy as np

from heatwright.constants import BOHR_ANGSTROM
from heatwright.elements import atomic_number, element
from heatwright.findings import Finding, Refused, note, refuse
from heatwright.molecule import FloatArray, IntArray, Kind, Level, Molecule, Source
from heatwright.reading.levels import normalise_basis, normalise_method, split_dispersion
from heatwright.reading.masses import mass_kind
from heatwright.structure.modes import projected_modes

ENERGIES: Final = {
    "scf_total_energy": "SCF",
    "mp2_total_energy": "MP2",
    "ccsd_total_energy": "CCSD",
    "ccsd_prt_pr_total_energy": "CCSD(T)",
    "ccsdt_total_energy": "CCSDT",
}
"""The total energies among a result's properties, from the simplest to the most correlated, by their names here."""

_SCHEMA: Final = re.compile(r"qc_?schema", re.IGNORECASE)
_ASYMMETRIC_HARTREE_BOHR2: Final = 1.0e-3
"""A Hessian whose halves differ by more than this is none; finite differences leave some 1e-6."""


def qcschema_document(text: str) -> dict[str, Any] | None:
    """The document in a text when it is QCSchema, None when it is something else.

    Raises Refused (``parser-failed``) for JSON that names the schema and cannot be read to its end.
    """
    if not text.lstrip().startswith("{"):
        return None
    try:
        document = json.loads(text)
    except (ValueError, RecursionError) as error:
        if not re.search(r'"schema_name"\s*:\s*"qc_?schema', text):
            return None
        where = f"line {error.lineno}" if isinstance(error, json.JSONDecodeError) else ""
        words = f"the QCSchema document is no JSON ({getattr(error, 'msg', type(error).__name__)})"
        raise Refused([refuse("parser-failed", words, where=where, action="Fetch the whole file again.")]) from error
    name = str(document.get("schema_name", "")) if isinstance(document, dict) else ""
    failed = isinstance(document, dict) and {"success", "error", "input_data"} <= document.keys()
    return document if _SCHEMA.match(name) or failed else None


def creator(document: Mapping[str, Any]) -> tuple[str, str]:
    """The program that made a result and its version."""
    provenance = document.get("provenance")
    said = provenance if isinstance(provenance, dict) else {}
    return str(said.get("creator") or "QCSchema"), str(said.get("version") or "")


def molecule_from_qcschema(document: Mapping[str, Any], source: Source) -> Molecule:
    """The molecule in a QCSchema result, not yet checked; a Hessian is diagonalised without overall motion.

    Raises Refused: ``not-an-output`` (an input), ``job-failed``, ``ghost-atoms``, ``not-a-number``, ``qcschema-wrong``
    (a part that is missing or of a wrong shape; the finding names it).
    """
    _check_success(document)
    said = _part(document, "molecule")
    numbers = _numbers(said)
    coordinates = _array(said.get("geometry"), "molecule.geometry", (numbers.size, 3)) * BOHR_ANGSTROM
    masses, remarks = _masses(said, numbers)
    driver = document.get("driver")
    if driver not in ("hessian", "gradient", "energy", "properties"):
        _wrong("driver", f"the driver is {driver!r}", "hessian, gradient, energy or properties")
    hessian = _hessian(document, driver, numbers.size)
    wavenumbers, modes = (np.empty(0), None) if hessian is None else projected_modes(hessian, masses, coordinates)
    level = _level(document, source.program, numbers)
    energies, in_use = _energies(document, driver, level)
    return Molecule(
        source=source,
        kind=_kind(numbers.size, hessian is not None),
        atomic_numbers=numbers,
        masses_u=masses,
        mass_kind=mass_kind(masses, [int(z) for z in numbers]),
        masses_printed=not remarks,
        coordinates_A=coordinates,
        wavenumbers_cm1=wavenumbers,
        normal_modes=modes,
        hessian_hartree_bohr2=hessian,
        energies_hartree=energies,
        energy_kind=in_use,
        charge=_whole(said.get("molecular_charge", 0), "molecule.molecular_charge"),
        multiplicity=_whole(said.get("molecular_multiplicity", 1), "molecule.molecular_multiplicity"),
        level=level,
        max_gradient_hartree_bohr=_largest_gradient(document, driver, numbers.size),
        findings=remarks,
    )


def _wrong(where: str, found: str, expected: str = "") -> NoReturn:
    raise Refused([refuse("qcschema-wrong", found, where=where, expected=expected)])


def _check_success(document: Mapping[str, Any]) -> None:
    if "input" in str(document.get("schema_name", "")).lower() and "return_result" not in document:
        words = "this is a QCSchema input, not a result"
        raise Refused([refuse("not-an-output", words, action="Give the result that was computed from it.")])
    before = document.get("input_data")
    if isinstance(before, dict) and "specification" in before:
        _wrong("input_data", "this result has the layout of QCSchema's schema_version 2", "schema_version 1")
    if document.get("success") is True:
        return
    if "success" not in document:
        _wrong("success", "it is not said whether the calculation succeeded", "success: true")
    error = document.get("error")
    message = str(error.get("error_message", "")) if isinstance(error, dict) else ""
    last = message.strip().splitlines()[-1].strip() if message.strip() else "without a reason"
    words = f"the program says that the calculation failed ({last[:200]})"
    raise Refused([refuse("job-failed", words, where="error", action="Repair the job and run it again.")])


def _part(document: Mapping[str, Any], key: str, *, needed: bool = True) -> Mapping[str, Any]:
    value = document.get(key)
    if isinstance(value, dict):
        return value
    if value is None and not needed:
        return {}
    _wrong(key, f"{key} is {_shown(value)}", "an object")


def _shown(value: object) -> str:
    if value is None:
        return "missing"
    text = repr(value)
    return text if len(text) <= 40 else f"{text[:37]}..."


def _array(value: object, where: str, shape: tuple[int, ...]) -> FloatArray:
    """The numbers of a flat or nested list in the given shape; raises Refused."""
    size = int(np.prod(shape))
    try:
        found = np.array(value, dtype=float)
    except (TypeError, ValueError, OverflowError):
        _wrong(where, f"{where} is {_shown(value)}", f"{size} numbers")
    if value is None or found.size != size or found.shape not in ((size,), shape):
        count = "missing" if value is None else f"of shape {' × '.join(map(str, found.shape)) or '1'}"
        _wrong(where, f"{where} is {count}", f"{size} numbers, flat or {' × '.join(map(str, shape))}")
    if not np.isfinite(found).all():
        item = int(np.flatnonzero(~np.isfinite(found.ravel()))[0]) + 1
        raise Refused([refuse("not-a-number", f"number {item} of {where} is {found.ravel()[item - 1]}", where=where)])
    return found.reshape(shape)


def _number(value: object, where: str) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float):
        _wrong(where, f"{where} is {_shown(value)}", "a number")
    return float(_array([value], where, (1,))[0])


def _whole(value: object, where: str) -> int:
    number = _number(value, where)
    if number != round(number):
        _wrong(where, f"{where} is {number:g}", "a whole number")
    return round(number)


def _numbers(said: Mapping[str, Any]) -> IntArray:
    symbols = said.get("symbols")
    if not isinstance(symbols, list) or not symbols:
        _wrong("molecule.symbols", f"molecule.symbols is {_shown(symbols)}", "a list of element symbols")
    real = said.get("real")
    if isinstance(real, list) and not all(real):
        words = f"{sum(not r for r in real)} of {len(symbols)} atoms carry no nucleus (ghost atoms)"
        raise Refused([refuse("ghost-atoms", words, where="molecule.real", action="Run the molecule without them.")])
    numbers = []
    for index, sym in enumerate(symbols, start=1):
        try:
            numbers.append(atomic_number(str(sym)))
        except KeyError:
            _wrong("molecule.symbols", f"atom {index} is {_shown(sym)}", "an element's symbol")
    return np.array(numbers)


def _masses(said: Mapping[str, Any], numbers: IntArray) -> tuple[FloatArray, tuple[Finding, ...]]:
    if said.get("masses") is not None:
        return _array(said["masses"], "molecule.masses", (numbers.size,)), ()
    given = said.get("mass_numbers")
    wanted = [-1] * numbers.size if given is None else _array(given, "molecule.mass_numbers", (numbers.size,)).tolist()
    masses = [_isotope(int(z), int(a), i) for i, (z, a) in enumerate(zip(numbers, wanted, strict=True), start=1)]
    words = "the result carries no atomic masses; those of the table were taken"
    return np.array(masses), (note("masses-from-table", words),)


def _isotope(number: int, mass_number: int, atom: int) -> float:
    if mass_number < 0:
        return element(number).common_mass_u
    found = [mass for a, mass, _ in element(number).isotopes if a == mass_number]
    if not found:
        _wrong("molecule.mass_numbers", f"atom {atom} is {mass_number}-{element(number).symbol}", "a known isotope")
    return found[0]


def _hessian(document: Mapping[str, Any], driver: str, n: int) -> FloatArray | None:
    value, where = document.get("return_result"), "return_result"
    if driver != "hessian":
        value, where = _part(document, "properties", needed=False).get("return_hessian"), "properties.return_hessian"
        if value is None:
            return None
    hessian = _array(value, where, (3 * n, 3 * n))
    uneven = float(np.abs(hessian - hessian.T).max())
    if uneven > _ASYMMETRIC_HARTREE_BOHR2:
        _wrong(where, f"the Hessian is not symmetric (halves differ by up to {uneven:.2g} hartree/bohr²)")
    return hessian


def _largest_gradient(document: Mapping[str, Any], driver: str, n: int) -> float | None:
    value, where = document.get("return_result"), "return_result"
    if driver != "gradient":
        value, where = _part(document, "properties", needed=False).get("return_gradient"), "properties.return_gradient"
        if value is None:
            return None
    return float(np.abs(_array(value, where, (n, 3))).max())


def _kind(n_atoms: int, has_hessian: bool) -> Kind:
    return "atom" if n_atoms == 1 else "frequency" if has_hessian else "energy"


def _level(document: Mapping[str, Any], program: str, numbers: IntArray) -> Level | None:
    model = _part(document, "model", needed=False)
    basis = model.get("basis") or ""
    basis = basis.get("name", "") if isinstance(basis, dict) else basis
    if not isinstance(model.get("method"), str):
        return None
    method, dispersion = split_dispersion(model["method"])
    keywords = _part(document, "keywords", needed=False)
    pure = {key.lower(): value for key, value in keywords.items()}.get("puream")
    return Level(
        method=normalise_method(method),
        basis=normalise_basis(str(basis)),
        dispersion=dispersion,
        spherical=pure if isinstance(pure, bool) else None,
        program=program,
        atoms=tuple(int(z) for z in numbers),
    )


def _energies(document: Mapping[str, Any], driver: str, level: Level | None) -> tuple[dict[str, float], str]:
    """Every total energy by name, and the one in use: the energy returned, else that of the method."""
    properties = _part(document, "properties", needed=False)
    energies = {
        name: _number(properties[key], f"properties.{key}")
        for key, name in ENERGIES.items()
        if properties.get(key) is not None
    }
    returned = properties.get("return_energy")
    where = "properties.return_energy"
    if driver == "energy":
        returned, where = document.get("return_result"), "return_result"
        if returned is None:
            _wrong(where, "return_result is missing", "the energy")
    if returned is None:
        method = level.method if level else ""
        return energies, method if method in energies else "SCF" if set(energies) == {"SCF"} else ""
    value = _number(returned, where)
    same = [name for name, energy in energies.items() if abs(energy - value) < 1.0e-9]
    if same:
        return energies, same[0]
    name = level.method if level and level.method and level.method not in energies else "returned"
    return {**energies, name: value}, name
