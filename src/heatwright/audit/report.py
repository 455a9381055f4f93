"""An audit and a mending as lines for people and as plain values for scripts."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from typing import Any

from heatwright.audit.audit import RANK, Audit, AuditedEntry
from heatwright.audit.joint import jumps
from heatwright.audit.mending import Mended, shown_values
from heatwright.audit.published import Comparison
from heatwright.audit.release import Residual
from heatwright.constants import GAS_CONSTANT_J_MOL_K
from heatwright.findings import Finding, Severity
from heatwright.polynomial.nasa7 import Nasa7
from heatwright.writing.numbers import significant


def audit_lines(audit: Audit, level: Severity) -> Iterator[str]:
    """The audit of one file: its counts, each finding as bad as *level* or worse, the rest counted by code, tables."""
    found = list(audit.all_findings())
    yield _head(audit, found)
    shown = [f for f in found if RANK[f.severity] >= RANK[level]]
    yield from (str(f) for f in dict.fromkeys(shown))
    if level == "warn":
        yield from _counted([f for f in found if f.severity == "note"])
    yield from residual_table([e.residual for e in audit.entries if e.residual is not None])
    yield from published_table([c for e in audit.entries for c in e.comparisons])


def _head(audit: Audit, found: list[Finding]) -> str:
    counts = Counter(f.severity for f in found)
    each = [{f.severity for f in e.findings} for e in audit.entries]
    faulty, doubtful = (sum(severity in severities for severities in each) for severity in ("refuse", "warn"))
    passed = f", {len(audit.file.passed_over)} of other models passed over" if audit.file.passed_over else ""
    return (
        f"{audit.file.path}: {len(audit.entries)} {_plural('entry', len(audit.entries))}{passed}; "
        f"{counts['refuse']} {_plural('error', counts['refuse'])} in {faulty}, "
        f"{counts['warn']} {_plural('warning', counts['warn'])} in {doubtful}, "
        f"{counts['note']} {_plural('note', counts['note'])}"
    )


def _plural(word: str, n: int) -> str:
    return word if n == 1 else f"{word[:-1]}ies" if word.endswith("y") else f"{word}s"


def _counted(notes: list[Finding]) -> Iterator[str]:
    if notes:
        counts = Counter(f.code for f in notes).most_common()
        yield f"notes (all with -v): {', '.join(f'{n} {code}' for code, n in counts)}"


def residual_table(residuals: list[Residual]) -> Iterator[str]:
    """Entries minus those of the release, one line each."""
    if not residuals:
        return
    width = max(7, *(len(r.name) for r in residuals))
    yield ""
    yield "entry minus computed"
    yield (
        f"{'species':{width}}"
        f"  {'dH(298.15)':>11}{'dS(298.15)':>12}{'dCp largest':>22}{'dG largest':>22}{'compared':>14}"
    )
    yield f"{'':{width}}  {'kJ/mol':>11}{'J/mol/K':>12}{'J/mol/K':>22}{'kJ/mol':>22}{'K':>14}"
    for r in residuals:
        cp = f"{r.dcp_R * GAS_CONSTANT_J_MOL_K:.2f} at {r.dcp_at_K:.0f} K"
        g = f"{r.dg_kJ_mol:.2f} at {r.dg_at_K:.0f} K"
        span = f"{r.range_K[0]:g}-{r.range_K[1]:g}"
        yield f"{r.name:{width}}  {r.dh298_kJ_mol:11.2f}{r.ds298_J_mol_K:12.2f}{cp:>22}{g:>22}{span:>14}"


def published_table(comparisons: list[Comparison]) -> Iterator[str]:
    """Entries beside published values, one line for each value."""
    if not comparisons:
        return
    width = max(7, *(len(c.name) for c in comparisons))
    yield ""
    yield (
        f"{'species':{width}}  {'':11}{'entry':>11}{'published':>11}{'difference':>12}  "
        "unit, source (*: beyond the usual accuracy)"
    )
    for c in comparisons:
        mark = "" if c.agrees else "  *"
        yield (
            f"{c.name:{width}}  {c.what:11}{c.ours:11.2f}{c.other:11.2f}{c.difference:+12.2f}  "
            f"{c.unit}, {c.source}{mark}"
        )


def audit_document(audit: Audit) -> dict[str, Any]:
    """The audit of one file as plain values."""
    counts = Counter(f.severity for f in audit.all_findings())
    return {
        "file": audit.file.path,
        "format": audit.file.format,
        "counts": {severity: counts[severity] for severity in ("refuse", "warn", "note")},
        "entries": [_entry_document(e) for e in audit.entries],
        "passed_over": [{"name": s.name, "model": s.model, "line": s.line} for s in audit.file.passed_over],
        "findings": [f.at(audit.file.path).as_json() for f in audit.findings],
    }


def _entry_document(audited: AuditedEntry) -> dict[str, Any]:
    e = audited.entry
    document: dict[str, Any] = {
        "name": e.name,
        "lines": list(e.lines),
        "composition": e.composition,
        "phase": e.phase or None,
        "note": e.note or None,
        "ranges": e.ranges,
    }
    if e.polynomial is not None:
        document["nasa7"] = nasa7_document(e.polynomial)
    if audited.facts is not None:
        f, R = audited.facts, GAS_CONSTANT_J_MOL_K
        document |= {
            "H298_kJ_mol": significant(f.h298_kJ_mol),
            "S298_J_mol_K": significant(f.s298_R * R),
            "Cp298_J_mol_K": significant(f.cp298_R * R),
            "jumps_R": {jump.what: significant(jump.size_R, 6) for jump in jumps(f.polynomial)},
        }
    if audited.residual is not None:
        document["against"] = _residual_document(audited.residual)
    if audited.comparisons:
        document["published"] = [
            {"what": c.what, "unit": c.unit, "entry": significant(c.ours), "published": c.other, "source": c.source}
            for c in audited.comparisons
        ]
    document["findings"] = [f.as_json() for f in audited.findings]
    return document


def _residual_document(r: Residual) -> dict[str, Any]:
    return {
        "range_K": list(r.range_K),
        "dH298_kJ_mol": significant(r.dh298_kJ_mol, 6),
        "dS298_J_mol_K": significant(r.ds298_J_mol_K, 6),
        "max_dCp_R": significant(r.dcp_R, 6),
        "max_dCp_at_K": significant(r.dcp_at_K, 6),
        "max_dG_kJ_mol": significant(r.dg_kJ_mol, 6),
        "max_dG_at_K": significant(r.dg_at_K, 6),
    }


def nasa7_document(p: Nasa7) -> dict[str, Any]:
    """A polynomial as plain values, as in the document of ``entry``."""
    return {"T_K": [p.t_low_K, p.t_common_K, p.t_high_K], "low": list(p.low), "high": list(p.high)}


def mended_lines(mended: Mended) -> Iterator[str]:
    """An entry's old beside its new values."""
    m = mended
    yield ""
    yield f"{m.entry.name} (line {m.entry.lines[0]}): {m.why}"
    old_T, new_T = m.said, m.new
    if (old_T.t_low_K, old_T.t_common_K, old_T.t_high_K) != (new_T.t_low_K, new_T.t_common_K, new_T.t_high_K):
        yield f"  temperatures {'-'.join(f'{t:g}' for t in m.entry.stated_K)} K, now {_range(new_T)}"
    if m.dcp_R:
        yield (
            f"  largest change of Cp within its ranges {m.dcp_R:+.3g} R at {m.dcp_at_K:.0f} K; no smooth polynomial "
            f"has less than {m.bound_R:.3g} R"
        )
    before, after = jumps(m.said), jumps(m.new)
    for b, a in zip(before, after, strict=True):
        yield f"  jump of {b.what.capitalize():3} {b.size_R:+12.3e} R, now {a.size_R:+10.1e} R"
    yield f"  {'T/K':>8}  {'':12}{'old':>14}{'new':>14}{'difference':>14}"
    for T, name, was, now in shown_values(m):
        yield f"  {T:8.2f}  {name:12}{was:14.4f}{now:14.4f}{now - was:+14.4f}"


def _range(p: Nasa7) -> str:
    return f"{p.t_low_K:g}-{p.t_common_K:g}-{p.t_high_K:g} K"


def mended_document(mended: Mended) -> dict[str, Any]:
    """An entry's old and new polynomial as plain values."""
    m = mended
    return {
        "name": m.entry.name,
        "lines": list(m.entry.lines),
        "why": m.why,
        "old": nasa7_document(m.said),
        "new": nasa7_document(m.new),
        "max_dCp_R": significant(abs(m.dcp_R), 6),
        "max_dCp_at_K": significant(m.dcp_at_K, 6),
        "minimax_dCp_R": significant(m.bound_R, 6),
        "anchor_K": m.anchor_K,
    }
