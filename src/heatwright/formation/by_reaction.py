"""Enthalpy of formation by one balanced reaction with reference species."""

from __future__ import annotations

from collections.abc import Collection

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.formation.balance import account, surplus
from heatwright.formation.equations import resolved
from heatwright.formation.error_model import ErrorScales
from heatwright.formation.formation import Formation, LedgerLine, dHf298_from_dHf0, element_increment_kJ_mol
from heatwright.formation.phrases import COVERAGE, element_lines, level_label, sources
from heatwright.formation.reactions import Reaction, balanced_kind, find_reactions, reaction_sd_kJ_mol
from heatwright.formation.reference_set import ReferenceSet, species_name
from heatwright.formation.usable import UsableReferences, usable_references
from heatwright.partition.model import ThermoModel
from heatwright.structure.bond_orders import Bonding, bonding


def formation_by_reaction(
    model: ThermoModel,
    references: ReferenceSet,
    text: str | None = None,
    *,
    name: str = "",
    trust_levels: bool = False,
    accept: Collection[str] = (),
) -> Formation:
    """ΔfH° by a balanced reaction with reference species: the one in *text*, else the best that is found.

    Raises Refused when the reaction is not balanced (naming by what and how much), or when none is found.
    """
    usable = usable_references(model, references, trust_levels=trust_levels, accept=accept)
    mine = bonding(model.molecule)
    called = name or species_name(model.molecule)
    if text is None:
        found = find_reactions(model, mine, usable.references, usable.scales, name=called, count=3)
        if not found:
            raise Refused([no_reaction(usable)])
        reaction = found[0]
    else:
        reaction = written_reaction(model, mine, usable, text, name=called, accept=accept)
    return formation_of_reaction(model, reaction, usable)


def no_reaction(usable: UsableReferences) -> Finding:
    return refuse(
        "no-reaction",
        f"no reaction with the {len(usable.references)} references balances elements, bond types and unpaired "
        "electrons",
        action="Compute reference species with the molecule's bonds, or take another route.",
    )


def written_reaction(
    model: ThermoModel,
    mine: Bonding,
    usable: UsableReferences,
    text: str,
    *,
    name: str,
    accept: Collection[str] = (),
) -> Reaction:
    """The user's reaction; raises Refused where it is not balanced, unless bond types were accepted (``bonds``)."""
    coefficient, terms = resolved(text, model, usable.references, name=name)
    own = account(model, mine)
    accounts = [account(r.model, r.bonding) for _, r in terms]
    for part in ("elements", "bonds"):
        rows = [(-coefficient, getattr(own, part))]
        rows += [(n, getattr(a, part)) for (n, _), a in zip(terms, accounts, strict=True)]
        left = surplus(rows)
        if left and not (part == "bonds" and "bonds" in accept):
            raise Refused([_unbalanced(text, left)])
    kind = balanced_kind(own, accounts, coefficient, [n for n, _ in terms])
    return Reaction(name, coefficient, terms, kind, reaction_sd_kJ_mol(mine, coefficient, terms, usable.scales))


def _unbalanced(text: str, left: dict[str, int]) -> Finding:
    words = "; ".join(f"{what}: {abs(n)} {'more' if n > 0 else 'fewer'} on the right" for what, n in left.items())
    return refuse(
        "reaction-unbalanced",
        f"the reaction {text!r} is not balanced ({words}, the species itself standing on the left)",
        expected="elements, bonds of each type and unpaired electrons balanced",
        action="`heatwright reactions` finds balanced ones.",
    )


def formation_of_reaction(model: ThermoModel, reaction: Reaction, usable: UsableReferences) -> Formation:
    t = reaction.target_coefficient
    energy = model.molecule.energy_hartree
    if energy is None:
        raise Refused([refuse("no-energy", "the output has no total energy to set against the references")])
    evaluated = [
        LedgerLine(_times(n, t, f"enthalpy of formation of {r.row.name} at 0 K"), n / t * r.dHf0_kJ_mol, r.row.source)
        for n, r in reaction.terms
    ]
    electronic = energy * HARTREE_KJ_MOL - sum(n * r.electronic_kJ_mol for n, r in reaction.terms) / t
    zpe = model.zpe_kJ_mol - sum(n * r.model.zpe_kJ_mol for n, r in reaction.terms) / t
    dHf0 = sum(line.value_kJ_mol for line in evaluated) + electronic + zpe
    increment = element_increment_kJ_mol(model.composition)
    if increment is None:
        raise Refused([refuse("no-reference", "an element of the species has no reference increment to 298.15 K")])
    each = "" if t == 1 else f", for each of {t}"
    ledger = (
        *evaluated,
        LedgerLine(f"electronic energy, less that of the references{each}", electronic, level_label(model)),
        LedgerLine(f"zero-point energy, less that of the references{each}", zpe, model.zpe_text),
        LedgerLine("H(298.15 K) - H(0) of the species", model.h298_minus_h0_kJ_mol, "partition function"),
        *element_lines(model),
    )
    return Formation(
        dHf298_kJ_mol=dHf298_from_dHf0(dHf0, model.h298_minus_h0_kJ_mol, increment),
        dHf0_kJ_mol=dHf0,
        u95_kJ_mol=COVERAGE * reaction.sd_kJ_mol,
        method="reaction",
        source=f"{reaction.text} ({reaction.kind}) at {level_label(model)}; "
        f"references {sources([r for _, r in reaction.terms])}",
        ledger=ledger,
        findings=(*usable.findings, *_reaction_notes(reaction, usable.scales)),
    )


def _times(n: int, t: int, what: str) -> str:
    return f"{n:+d} x {what}" if t == 1 else f"{n:+d}/{t} x {what}"


def _reaction_notes(reaction: Reaction, scales: ErrorScales) -> tuple[Finding, ...]:
    fitted = "error scales fitted to the references" if scales.fitted else "the default scales of the error model"
    text = f"{reaction.text} ({reaction.kind}); its uncertainty uses {fitted}"
    make = note if reaction.kind != "unbalanced" else warn
    return (make("reaction", text),)
