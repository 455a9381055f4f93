"""An object of the JSON document taken apart, checked, into what the report shows of a species.

A part that is there and cannot be used is refused with its key; parts may be missing.
"""

from __future__ import annotations

from collections.abc import Mapping
from itertools import pairwise
from typing import Any, Final

from heatwright.constants import GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
from heatwright.polynomial.nasa7 import Coefficients, Nasa7
from heatwright.report.species import Conformer, Geometry, Residuals, Route, Said, Species, Table, Torsion
from heatwright.report.values import Values


def species_of(document: Mapping[str, Any], where: str = "") -> Species:
    """One species object of a JSON document (version 1).

    where : how to name it in a refusal, ``entries.json: species 3``.
    Raises Refused (``document-wrong``) for a missing name, or a part that is not what it should be.
    """
    v = Values(document, where)
    name = v.text("name")
    v = Values(document, f"{where} ({name})" if where else name)
    table, polynomial, routes = _table(v), _polynomial(v), _routes(v)
    s298, cp298, h298 = _at_298(table, polynomial, routes)
    composition = v.table("composition")
    return Species(
        name=name,
        formula=v.text("formula"),
        composition={key: composition.number(key) for key in composition.keys},
        charge=v.whole_or_none("charge"),
        multiplicity=v.whole_or_none("multiplicity"),
        evidence=v.text("evidence", ""),
        dHf298_kJ_mol=h298,
        u95_kJ_mol=routes[0].u95_kJ_mol if routes else None,
        s298_J_mol_K=s298,
        cp298_J_mol_K=cp298,
        largest_dcp_R=v.inside("residuals").number_or_none("max_dCp_R"),
        classical_limit_R=v.number_or_none("classical_limit_R"),
        pressure_bar=v.number_or_none("standard_pressure_bar"),
        geometry=_geometry(v),
        point_group=v.text("point_group", ""),
        wavenumbers_cm1=v.numbers("wavenumbers_cm-1", ()),
        table=table,
        polynomial=polynomial,
        residuals=_residuals(v),
        routes=routes,
        torsions=tuple(_torsion(t) for t in v.tables("torsions")),
        conformers=tuple(_conformer(c, table) for c in v.tables("conformers")),
        facts=_facts(v),
        findings=tuple(Said(f.text("severity"), f.text("code"), f.text("text")) for f in v.tables("findings")),
    )


def _at_298(
    table: Table | None, polynomial: Nasa7 | None, routes: tuple[Route, ...]
) -> tuple[float | None, float | None, float | None]:
    """S°, Cp° and ΔfH° at 298.15 K, the polynomial's where there is nothing nearer to the source."""
    R, T = GAS_CONSTANT_J_MOL_K, STANDARD_TEMPERATURE_K
    s = table.at_298(table.s_J_mol_K) if table else None
    cp = table.at_298(table.cp_J_mol_K) if table else None
    h = routes[0].dHf298_kJ_mol if routes else None
    if polynomial is not None:
        s = R * polynomial.s_R(T) if s is None else s
        cp = R * polynomial.cp_R(T) if cp is None else cp
        h = R * polynomial.h_R(T) / 1000.0 if h is None else h
    return s, cp, h


def _table(v: Values) -> Table | None:
    if not v.has("table"):
        return None
    t = v.inside("table")
    T = t.numbers("T_K")
    if not T or min(T) <= 0.0 or any(b <= a for a, b in pairwise(T)):
        t.wrong("T_K is not a list of ascending temperatures")
    n = len(T)
    shares = t.inside("contributions")
    return Table(
        T_K=T,
        cp_J_mol_K=t.numbers("Cp_J_mol_K", length=n),
        h_minus_h298_kJ_mol=t.numbers("H_minus_H298_kJ_mol", (), length=n),
        s_J_mol_K=t.numbers("S_J_mol_K", (), length=n),
        shares=tuple(
            (name, share.numbers("Cp_J_mol_K", length=n), share.numbers("S_J_mol_K", length=n))
            for name, share in ((name, shares.inside(name)) for name in shares.keys)
        ),
        u_cp_J_mol_K=v.inside("uncertainty").numbers("Cp_J_mol_K", (), length=n),
    )


def _polynomial(v: Values) -> Nasa7 | None:
    if not v.has("nasa7"):
        return None
    p = v.inside("nasa7")
    low, common, high = p.numbers("T_K", length=3)
    if not 0.0 < low < common < high:
        p.wrong(f"T_K is {low:g}, {common:g}, {high:g}", "low, common and high temperature, ascending")
    return Nasa7(low, common, high, _coefficients(p, "low"), _coefficients(p, "high"))


def _coefficients(p: Values, key: str) -> Coefficients:
    a1, a2, a3, a4, a5, a6, a7 = p.numbers(key, length=7)
    return a1, a2, a3, a4, a5, a6, a7


def _residuals(v: Values) -> Residuals | None:
    if not v.has("residual_curve"):
        return None
    r = v.inside("residual_curve")
    T = r.numbers("T_K")
    cp, h, s = (r.numbers(key, length=len(T)) for key in ("dCp_R", "dH_RT", "dS_R"))
    return Residuals(T, cp, h, s, v.inside("residuals").number_or_none("minimax_dCp_R"))


def _routes(v: Values) -> tuple[Route, ...]:
    if not v.has("formation"):
        return ()
    first = v.inside("formation")
    return tuple(_route(f) for f in (first, *first.tables("other_routes")))


def _route(f: Values) -> Route:
    return Route(
        method=f.text("method"),
        source=f.text("source", ""),
        dHf298_kJ_mol=f.number("dHf298_kJ_mol"),
        dHf0_kJ_mol=f.number_or_none("dHf0_kJ_mol"),
        u95_kJ_mol=f.number_or_none("u95_kJ_mol"),
        ledger=tuple((x.text("what"), x.number("value_kJ_mol"), x.text("source", "")) for x in f.tables("ledger")),
    )


def _geometry(v: Values) -> Geometry | None:
    if not v.has("geometry"):
        return None
    g = v.inside("geometry")
    elements, atoms = g.texts("elements"), g.rows("coordinates_A", 3)
    if not elements or len(atoms) != len(elements):
        g.wrong(f"there are {len(elements)} elements and {len(atoms)} coordinates", "one of each for every atom")
    bonds = tuple(_bond(g, i, row, len(elements)) for i, row in enumerate(g.raw_rows("bonds", 3)))
    return Geometry(elements, tuple((x, y, z) for x, y, z in atoms), bonds)


def _bond(g: Values, i: int, row: list[Any], n: int) -> tuple[int, int, float | None]:
    first, second, order = row
    inside = all(isinstance(a, int) and 1 <= a <= n for a in (first, second))
    known = order is None or (isinstance(order, int | float) and not isinstance(order, bool) and 0.0 < order <= 6.0)
    if not inside or first == second or not known:
        g.wrong(f"bonds[{i}] is {row}", f"two of the {n} atoms, counted from 1, and an order or null")
    return first - 1, second - 1, None if order is None else float(order)


def _torsion(t: Values) -> Torsion:
    p = t.inside("potential")
    cosine, scan = p.numbers("cosine_cm-1", ()), p.numbers("scan_deg", ())
    return Torsion(
        atoms=tuple(int(a) for a in t.numbers("atoms", length=4)),
        barrier_cm1=t.number("barrier_cm-1"),
        F_cm1=t.number("F_cm-1"),
        symmetry=int(t.number("symmetry")),
        overlap=t.number_or_none("overlap"),
        ground_cm1=t.number_or_none("ground_cm-1") or 0.0,
        angle_deg=t.number_or_none("angle_deg") or 0.0,
        levels_cm1=t.numbers("levels_cm-1", ()),
        constant_cm1=p.number_or_none("constant_cm-1") or 0.0,
        cosine_cm1=cosine,
        sine_cm1=p.numbers("sine_cm-1", (), length=len(cosine)),
        scan_deg=scan,
        scan_cm1=p.numbers("scan_cm-1", (), length=len(scan)),
        source=t.text("source", ""),
    )


def _conformer(c: Values, table: Table | None) -> Conformer:
    if table is None:
        c.wrong("there are conformers and no table", "populations at the temperatures of a table")
    return Conformer(
        c.text("file"),
        c.number("relative_energy_kJ_mol"),
        int(c.number("degeneracy")),
        c.numbers("populations", length=len(table.T_K)),
    )


_FACTS: Final = (
    ("file", "file"), ("sha256", "sha256"), ("program", "program"), ("level", "level"), ("note", "note"),
    ("energy file", "energy_file"), ("energy sha256", "energy_sha256"), ("energy program", "energy_program"),
    ("energy level", "energy_level"),
)  # fmt: skip


def _facts(v: Values) -> tuple[tuple[str, str], ...]:
    """Provenance and conventions in words."""
    source = v.inside("source")
    facts = [(words, source.text(key, "")) for words, key in _FACTS]
    facts += [(key, v.shown(key)) for key in ("masses", "rotation", "anharmonic") if v.has(key)]
    low = v.text("low_modes", "")
    cutoff = v.number_or_none("low_modes_cutoff_cm-1")
    facts.append(("low modes", f"{low}, cut-off {cutoff:g} cm⁻¹" if cutoff else low))
    scale = " and ".join(
        f"{v.number(key):g} ({what})"
        for key, what in (("frequency_scale", "wavenumbers"), ("zpe_scale", "zero-point energy"))
        if v.has(key)
    )
    facts += [("scale factors", scale), ("their source", v.text("scale_source", ""))]
    symmetry = [v.text("point_group", ""), f"σ = {v.shown('symmetry_number')}" if v.has("symmetry_number") else ""]
    if v.has("optical_isomers") and v.number("optical_isomers") > 1:
        symmetry.append(f"{v.shown('optical_isomers')} optical isomers")
    facts.append(("symmetry", ", ".join(part for part in symmetry if part)))
    constants = v.numbers("rotational_constants_cm-1", ())
    facts.append(("rotational constants", f"{', '.join(f'{b:.5g}' for b in constants)} cm⁻¹" if constants else ""))
    levels = v.rows("electronic_levels_cm-1", 2)
    facts.append(("electronic levels", ", ".join(f"{nu:g} cm⁻¹ × {g:g}" for nu, g in levels)))
    for key, words, form in (
        ("zpe_kJ_mol", "zero-point energy", "{:.2f} kJ/mol"),
        ("energy_hartree", "energy", "{:.6f} hartree"),
        ("H298_minus_H0_kJ_mol", "H°(298.15 K) − H°(0)", "{:.3f} kJ/mol"),
        ("standard_pressure_bar", "standard pressure", "{:g} bar"),
    ):
        value = v.number_or_none(key)
        facts.append((words, "" if value is None else form.format(value).replace("-", "−")))
    return tuple((what, value) for what, value in facts if value)
