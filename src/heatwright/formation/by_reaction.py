"""Enthalpy of formation by one balanced reaction with reference species."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator
from math import fsum
from typing import TYPE_CHECKING

from heatwright.constants import HARTREE_KJ_MOL
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.formation.balance import account, surplus
from heatwright.formation.choices import PLAIN, EnergyChoices
from heatwright.formation.equations import resolved
from heatwright.formation.formation import (
    Formation,
    LedgerLine,
    electron_lines,
    element_increment_kJ_mol,
    with_electron,
)
from heatwright.formation.phrases import COVERAGE, LOWEST_LEVEL, element_lines, level_label, sources
from heatwright.formation.reactions import Reaction, balanced_kind, find_reactions, reaction_sd_kJ_mol
from heatwright.formation.reference_set import Reference, ReferenceSet, species_name
from heatwright.formation.usable import UsableReferences, usable_references
from heatwright.structure.bond_orders import Bonding, bonding

if TYPE_CHECKING:
    from heatwright.formation.error_model import ErrorScales
    from heatwright.formation.zero_kelvin import ZeroKelvinEnergies, ZeroKelvinEnergy
    from heatwright.partition.model import ThermoModel


def formation_by_reaction(
    model: ThermoModel,
    references: ReferenceSet,
    text: str | None = None,
    choices: EnergyChoices = PLAIN,
    *,
    name: str = "",
) -> Formation:
    """ΔfH° by a balanced reaction with reference species: the one in *text*, else the best that is found.

    Raises Refused when the reaction is not balanced (naming by what and how much), or when none is found.
    """
    usable = usable_references(model, references, choices)
    mine = bonding(model.molecule)
    called = name or species_name(model.molecule)
    if text is None:
        found = find_reactions(model, mine, usable.references, usable.scales, name=called, count=3)
        if not found:
            raise Refused([no_reaction(usable)])
        reaction = found[0]
    else:
        reaction = written_reaction(model, mine, usable, text, name=called, accept=choices.accept)
    return formation_of_reaction(model, reaction, usable, choices)


def no_reaction(usable: UsableReferences) -> Finding:
    """That no balanced reaction was found among the references."""
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


def formation_of_reaction(
    model: ThermoModel, reaction: Reaction, usable: UsableReferences, choices: EnergyChoices = PLAIN
) -> Formation:
    """ΔfH° of the model by one reaction with its references; raises Refused without an energy or an increment.

    ΔfH°(0) = [Σ ν ΔfH°(reference, 0) − Σ ν E₀(reference)]/t + E₀ for t × species + reactants -> products.
    """
    t, charge = reaction.target_coefficient, model.molecule.charge or 0
    if element_increment_kJ_mol(model.composition) is None:
        raise Refused([refuse("no-reference", "an element of the species has no reference increment to 298.15 K")])
    at_0 = (
        *(
            LedgerLine(
                _times(n, t, f"enthalpy of formation of {r.row.name} at 0 K"), n / t * r.dHf0_kJ_mol, r.row.source
            )
            for n, r in reaction.terms
        ),
        *_energy_lines(model, reaction, choices),
    )
    ledger = (
        *at_0,
        LedgerLine("H(298.15 K) - H(0) of the species", model.h298_minus_h0_kJ_mol, "partition function"),
        *element_lines(model),
        *electron_lines(charge, choices.electron),
    )
    stated = _stated(model, reaction, choices.zero_kelvin)
    source = (
        f"{reaction.text} ({reaction.kind}) at {stated[0].level if stated else level_label(model)}; "
        f"references {sources([r for _, r in reaction.terms])}"
    )
    return Formation(
        dHf298_kJ_mol=fsum(line.value_kJ_mol for line in ledger),
        dHf0_kJ_mol=fsum(line.value_kJ_mol for line in at_0),
        u95_kJ_mol=COVERAGE * reaction.sd_kJ_mol,
        method="reaction",
        source=with_electron(source, charge, choices.electron),
        ledger=ledger,
        findings=(*usable.findings, *_reaction_notes(reaction, usable.scales)),
    )


def _energy_lines(model: ThermoModel, reaction: Reaction, choices: EnergyChoices) -> Iterator[LedgerLine]:
    """The energy of the species at 0 K, less that of the references, in its parts or as it was stated."""
    t = reaction.target_coefficient
    less = "less that of the references" if t == 1 else f"less that of the references, for each of {t}"

    def apart(own: float, value: Callable[[Reference], float]) -> float:
        return own - sum(n * value(r) for n, r in reaction.terms) / t

    stated = _stated(model, reaction, choices.zero_kelvin)
    if stated is not None:
        energies = {r: e for (_, r), e in zip(reaction.terms, stated[1:], strict=True)}
        value = apart(stated[0].energy0_hartree, lambda r: energies[r].energy0_hartree) * HARTREE_KJ_MOL
        words = "; ".join(dict.fromkeys(f"{e.level}, {e.source}" for e in stated))
        yield LedgerLine(f"energy at 0 K as stated, {less}", value, words)
    else:
        if model.molecule.energy_hartree is None:
            raise Refused([refuse("no-energy", "the output has no total energy to set against the references")])
        electronic = apart(model.molecule.energy_hartree * HARTREE_KJ_MOL, lambda r: r.electronic_kJ_mol)
        kind = f" ({model.molecule.energy_kind})" if model.molecule.energy_kind else ""
        yield LedgerLine(f"electronic energy{kind}, {less}", electronic, level_label(model))
        zpe = apart(model.zpe_kJ_mol, lambda r: r.model.zpe_kJ_mol)
        yield LedgerLine(f"zero-point energy, {less}", zpe, model.zpe_text)
    lowest = apart(model.lowest_level_kJ_mol, lambda r: r.model.lowest_level_kJ_mol)
    if lowest:
        yield LedgerLine(f"lowest real level, {less}", lowest, LOWEST_LEVEL)


def _stated(
    model: ThermoModel, reaction: Reaction, table: ZeroKelvinEnergies | None
) -> tuple[ZeroKelvinEnergy, ...] | None:
    """The 0 K energies stated for the species and the references, None where none is; raises Refused for some only."""
    if table is None:
        return None
    molecules = [model.molecule, *(r.molecule for _, r in reaction.terms)]
    found = {m.source.file: table.of(m) for m in molecules}
    missing = [file for file, energy in found.items() if energy is None]
    energies = [energy for energy in map(table.of, molecules) if energy is not None]
    if not energies:
        return None
    if missing or len({energy.level for energy in energies}) > 1:
        levels = ", ".join(sorted({energy.level for energy in energies}))
        words = f"none for {', '.join(missing)}" if missing else f"at the levels {levels}"
        raise Refused(
            [
                refuse(
                    "energy0-incomplete",
                    f"{table.path} states 0 K energies for some of the species in {reaction.text}, {words}",
                    expected="a row of one level for each of them",
                    action="Add the rows, or leave the table out for this species.",
                )
            ]
        )
    return tuple(energies)


def _times(n: int, t: int, what: str) -> str:
    return f"{n:+d} x {what}" if t == 1 else f"{n:+d}/{t} x {what}"


def _reaction_notes(reaction: Reaction, scales: ErrorScales) -> tuple[Finding, ...]:
    fitted = "error scales fitted to the references" if scales.fitted else "the default scales of the error model"
    text = f"{reaction.text} ({reaction.kind}); its uncertainty uses {fitted}"
    make = note if reaction.kind != "unbalanced" else warn
    return (make("reaction", text),)
