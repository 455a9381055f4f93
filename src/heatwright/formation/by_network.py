"""Enthalpy of formation by the network of all reference species at the level of theory."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Final

from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.formation.choices import PLAIN, EnergyChoices, atomized
from heatwright.formation.error_model import DEFAULT_SCALES, FEWEST_REFERENCES, features
from heatwright.formation.formation import Formation, LedgerLine, with_electron
from heatwright.formation.network import corrections
from heatwright.formation.phrases import COVERAGE, level_label, sources
from heatwright.formation.usable import UsableReferences, usable_references
from heatwright.structure.bond_orders import Bonding, bonding

if TYPE_CHECKING:
    from heatwright.formation.reference_set import Reference, ReferenceSet
    from heatwright.molecule import FloatArray
    from heatwright.partition.model import ThermoModel

_SHOWN: Final = 0.005
"""References that move the result by less than this, kJ/mol, stand in the ledger as one line."""


def formation_by_network(model: ThermoModel, references: ReferenceSet, choices: EnergyChoices = PLAIN) -> Formation:
    """ΔfH° by atomization, less the error of the level that all references together let expect (see network).

    An atom comes out as atomization gives it, which for an atom has no error to learn.
    Raises Refused when atoms are missing or fewer than FEWEST_REFERENCES references are left.
    """
    plain = atomized(model, references.atoms, choices)
    if model.molecule.is_atom:
        return plain
    usable = usable_references(model, references, choices)
    errors = usable.errors
    if errors is None or len(errors.references) < FEWEST_REFERENCES:
        raise Refused([_too_few(usable)])
    mine = bonding(model.molecule)
    labels = sorted({*errors.features.labels, *mine.types})
    known = features([r.bonding for r in errors.references], labels)
    made = corrections(features([mine], labels), known, errors.error_kJ_mol, errors.uncertainty_kJ_mol, errors.scales)
    shift = float(made.error_kJ_mol[0])
    shares = made.weights[0] * errors.error_kJ_mol
    assert plain.dHf0_kJ_mol is not None  # atomization knows the elements
    return Formation(
        dHf298_kJ_mol=plain.dHf298_kJ_mol - shift,
        dHf0_kJ_mol=plain.dHf0_kJ_mol - shift,
        u95_kJ_mol=COVERAGE * float(made.sd_kJ_mol[0]),
        method="network",
        source=f"{len(errors.references)} reference species at {level_label(model)} ({sources(errors.references)})"
        f"{with_electron('', model.molecule.charge or 0, choices.electron)}",
        ledger=(*plain.ledger, *_network_lines(errors.references, made.weights[0], shares)),
        findings=(
            *(f for f in plain.findings if f.code != "no-uncertainty"),
            *usable.findings,
            *_coverage(mine, errors.references),
            _left_out(usable),
        ),
    )


def _too_few(usable: UsableReferences) -> Finding:
    if usable.errors is None and len(usable.references) >= FEWEST_REFERENCES:
        return refuse(
            "references-few",
            "the references hold elements whose atoms were not computed, so their errors are not known",
            action="Put the atoms at the same level into the --atoms folder.",
        )
    return refuse(
        "references-few",
        f"{len(usable.references)} reference species are left for the network",
        expected=f"at least {FEWEST_REFERENCES}, at the level of the molecule and not the molecule itself",
        action="Compute more of the species that `heatwright references` lists, or take another route.",
    )


def _network_lines(references: Sequence[Reference], weights: FloatArray, shares: FloatArray) -> tuple[LedgerLine, ...]:
    order = sorted(range(len(references)), key=lambda i: (-abs(shares[i]), references[i].name))
    shown = [i for i in order if abs(shares[i]) >= _SHOWN]
    lines = [
        LedgerLine(
            f"{-weights[i]:+.3f} x error of {references[i].row.name} (calculated - evaluated)",
            -float(shares[i]),
            references[i].row.source,
        )
        for i in shown
    ]
    rest = [i for i in order if i not in shown]
    if rest:
        total = -float(sum(shares[i] for i in rest))
        lines.append(
            LedgerLine(f"the other {len(rest)} references together", total, sources([references[i] for i in rest]))
        )
    return tuple(lines)


def _coverage(mine: Bonding, references: Sequence[Reference]) -> tuple[Finding, ...]:
    return (*_bonds_without_reference(mine, references), *_charge_without_reference(mine, references))


def _charge_without_reference(mine: Bonding, references: Sequence[Reference]) -> tuple[Finding, ...]:
    if not mine.charge or any(r.bonding.charge * mine.charge > 0 for r in references):
        return ()
    return (
        warn(
            "network-coverage",
            f"no reference carries a charge like {mine.charge:+d}; what the level does wrong for it is a guess of "
            f"{DEFAULT_SCALES.charge_kJ_mol:g} kJ/mol a charge",
            action="Add ions to the reference table and to the references, or give a value.",
        ),
    )


def _bonds_without_reference(mine: Bonding, references: Sequence[Reference]) -> tuple[Finding, ...]:
    seen = {label for r in references for label in r.bonding.types}
    missing = [label for label in mine.types if label not in seen]
    if not missing:
        return ()
    return (
        warn(
            "network-coverage",
            f"no reference has the bond {' or '.join(missing)}; the stated uncertainty says what that costs",
            action="Compute a reference species that has it.",
        ),
    )


def _left_out(usable: UsableReferences) -> Finding:
    assert usable.errors is not None
    left, scales = usable.errors.left_out, usable.scales
    return note(
        "network-check",
        f"each of the {left.residual_kJ_mol.size} references predicted from the others: rms {left.rms_kJ_mol:.1f} "
        f"kJ/mol, {left.z_rms:.2f} times what was stated; scales of the error {scales.own_kJ_mol:.1f} own, "
        f"{scales.bond_kJ_mol:.1f} a bond, {scales.spin_kJ_mol:.1f} kJ/mol an unpaired electron",
    )
