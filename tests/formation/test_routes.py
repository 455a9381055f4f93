"""Routes through reference species: exact when the energies are, and every way in which they must not be gone."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from itertools import combinations, product

import numpy as np
import pytest

from heatwright import ModelOptions, build_model, read_output
from heatwright.constants import HARTREE_KJ_MOL
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.formation.atomization import collect_atoms
from heatwright.formation.by_network import formation_by_network
from heatwright.formation.by_reaction import formation_by_reaction
from heatwright.formation.choices import EnergyChoices
from heatwright.formation.equations import parse_reaction
from heatwright.formation.error_model import DEFAULT_SCALES
from heatwright.formation.formation import parse_enthalpy
from heatwright.formation.reactions import find_reactions
from heatwright.formation.reference_set import Reference, ReferenceSet, collect_references
from heatwright.formation.references import atom_reference
from heatwright.formation.routes import RouteRequest, formation_of
from heatwright.formation.species_references import reference_for, reference_species
from heatwright.formation.usable import usable_references
from heatwright.molecule import Molecule
from heatwright.partition.model import ThermoModel
from heatwright.resources import sample_outputs
from heatwright.structure.bond_orders import bonding

MOLECULES = ("CH2O", "CH3", "CH3OCH3", "CH3OH", "CO", "CO2", "H2", "H2O", "HCO", "N2", "O2", "OH")
ATOMS = {"H": -0.5, "C": -37.8, "N": -54.6, "O": -75.1}


@cache
def sample(name: str) -> Molecule:
    return read_output(str(sample_outputs() / f"{name}.out"))


@cache
def atoms():
    found = [read_output(str(sample_outputs() / "atoms" / f"{s}.out")) for s in ATOMS]
    return collect_atoms(tuple(a.but(energies_hartree={"SCF": ATOMS[s]}) for s, a in zip(ATOMS, found, strict=True)))


@cache
def exact(name: str) -> Molecule:
    """A sample whose energy gives by atomization the enthalpy of formation at 0 K of ATcT 1.112."""
    molecule = sample(name)
    row = reference_for(molecule, reference_species())
    counts = build_model(molecule).composition
    bound = sum(n * atom_reference(s).dHf0_kJ_mol for s, n in counts.items()) - row.dHf0_kJ_mol
    energy = sum(n * ATOMS[s] for s, n in counts.items())
    energy -= (bound + build_model(molecule).zpe_kJ_mol) / HARTREE_KJ_MOL
    return molecule.but(energies_hartree={"SCF": energy})


def shifted(molecule: Molecule, kJ_mol: float) -> Molecule:
    return molecule.but(energies_hartree={"SCF": molecule.energy_hartree + kJ_mol / HARTREE_KJ_MOL})


def reference_set(*molecules: Molecule, **changes) -> ReferenceSet:
    chosen = molecules or tuple(exact(name) for name in MOLECULES)
    return replace(collect_references(chosen, atoms(), reference_species(), ModelOptions()), **changes)


def reference(found: ReferenceSet, name: str) -> Reference:
    return next(r for r in found.references if r.name == name)


def refused(function, *arguments, **options) -> list[str]:
    with pytest.raises(Refused) as caught:
        function(*arguments, **options)
    assert all(f.text for f in caught.value.findings)
    return [f.code for f in caught.value.findings]


# --- arithmetic -----------------------------------------------------------------------------------------------------


@pytest.mark.parametrize("name", ["CH3OH", "CH3OCH3", "CH2O", "CO2", "H2O"])
def test_exact_energies_give_evaluated_enthalpies_by_every_route(name: str) -> None:
    model, references = build_model(exact(name)), reference_set()
    row = reference_for(model.molecule, reference_species())
    for route in ("atomization", "network", "best", "reaction"):
        request = RouteRequest(route=route, references=references, atoms=atoms(), name=name)
        made = formation_of(model, request)
        assert made.dHf0_kJ_mol == pytest.approx(row.dHf0_kJ_mol, abs=1e-6)
        assert sum(line.value_kJ_mol for line in made.ledger) == pytest.approx(made.dHf298_kJ_mol, abs=1e-9)
        assert all(line.source for line in made.ledger)


def test_a_written_reaction_adds_up_by_hand() -> None:
    """CH3OCH3 + H2O -> 2 CH3OH with the energies as computed, term by term from the outputs' own numbers."""
    molecules = {n: sample(n) for n in ("CH3OCH3", "H2O", "CH3OH")}
    references = reference_set(*molecules.values())
    model = build_model(molecules["CH3OCH3"])
    made = formation_by_reaction(model, references, "CH3OCH3 + H2O -> 2 CH3OH")
    e = {n: m.energy_hartree * HARTREE_KJ_MOL + build_model(m).zpe_kJ_mol for n, m in molecules.items()}
    heat = 2 * e["CH3OH"] - e["CH3OCH3"] - e["H2O"]
    # ATcT 1.112 at 0 K: CH3OH -189.82, H2O -238.919 kJ/mol
    assert made.dHf0_kJ_mol == pytest.approx(2 * -189.82 - -238.919 - heat, abs=1e-9)
    increments = model.h298_minus_h0_kJ_mol - (2 * 1.051 + 6 * 4.233 + 4.340)
    assert made.dHf298_kJ_mol == pytest.approx(made.dHf0_kJ_mol + increments, abs=1e-9)
    assert made.method == "reaction"
    reverse = formation_by_reaction(model, references, "2 CH3OH = CH3OCH3 + H2O")
    assert reverse.dHf0_kJ_mol == pytest.approx(made.dHf0_kJ_mol, abs=1e-9)
    assert made.u95_kJ_mol == pytest.approx(reverse.u95_kJ_mol)


def test_bond_errors_cancel_in_a_balanced_reaction_and_are_learnt_by_the_network() -> None:
    """Energies that are wrong by so much for each bond of a kind: a balanced reaction does not see it."""
    wrong = {"C-H": 7.0, "H-O": 25.0, "C-O": -10.0, "C=O": 5.0}

    def spoilt(name: str) -> Molecule:
        types = bonding(sample(name)).types
        return shifted(exact(name), sum(wrong.get(label, 0.0) * n for label, n in types.items()))

    references = reference_set(*(spoilt(name) for name in MOLECULES))
    model = build_model(spoilt("CH3OCH3"))
    off = 6 * 7.0 - 2 * 10.0
    plain = formation_of(model, RouteRequest(route="atomization", references=references))
    assert plain.dHf0_kJ_mol - -166.51 == pytest.approx(off, abs=1e-6)
    by_reaction = formation_by_reaction(model, references, "CH3OCH3 + H2O -> 2 CH3OH")
    assert by_reaction.dHf0_kJ_mol == pytest.approx(-166.51, abs=1e-6)  # ATcT 1.112
    by_network = formation_by_network(model, references)
    assert abs(by_network.dHf0_kJ_mol - -166.51) < 3.0
    assert by_network.u95_kJ_mol < plain.u95_kJ_mol
    assert abs(by_network.dHf0_kJ_mol - -166.51) < by_network.u95_kJ_mol


# --- finding reactions ----------------------------------------------------------------------------------------------


def balance(r: Reference) -> dict[str, int]:
    return {**{f"el {k}": v for k, v in r.model.composition.items()}, **r.bonding.types, "U": r.bonding.unpaired}


@pytest.mark.parametrize("name", ["CH3OCH3", "CH3OH", "HCO", "CH2O"])
def test_the_integer_programme_against_all_reactions(name: str) -> None:
    """Every reaction with coefficients up to 2 and at most three references, tried out one by one."""
    references = reference_set()
    usable = usable_references(build_model(exact(name)), references)
    target = reference(references, name)
    others = [r for r in usable.references if set(r.model.composition) <= {"C", "H", "O"}]
    keys = sorted({k for r in (target, *others) for k in balance(r)})
    matrix = np.array([[balance(r).get(k, 0) for k in keys] for r in others])
    wanted = np.array([balance(target).get(k, 0) for k in keys])
    known = set()
    for size in (1, 2, 3):
        for chosen in combinations(range(len(others)), size):
            for numbers in product((-2, -1, 1, 2), repeat=size):
                if np.array_equal(np.array(numbers) @ matrix[list(chosen)], wanted):
                    known.add(frozenset((n, others[i].name) for n, i in zip(numbers, chosen, strict=True)))
    found = find_reactions(target.model, target.bonding, others, DEFAULT_SCALES, name=name, count=20)
    single = [f for f in found if f.target_coefficient == 1]
    small = [f for f in single if len(f.terms) <= 3 and max(abs(n) for n, _ in f.terms) <= 2]
    assert {frozenset((n, r.name) for n, r in f.terms) for f in small} <= known
    assert bool(known) <= bool(found)
    if known and found:
        fewest = min(len(k) for k in known)
        assert min(len(f.terms) for f in found) <= fewest


@pytest.mark.parametrize("name", MOLECULES)
def test_what_is_found_is_balanced(name: str) -> None:
    references = reference_set()
    target = reference(references, name)
    usable = usable_references(target.model, references)
    for reaction in find_reactions(target.model, target.bonding, usable.references, DEFAULT_SCALES, name=name):
        total: dict[str, int] = {}
        for n, r in ((-reaction.target_coefficient, target), *reaction.terms):
            for key, count in balance(r).items():
                total[key] = total.get(key, 0) + n * count
        assert not any(total.values()), reaction.text
        assert name not in [r.name for _, r in reaction.terms]
        assert reaction.kind in ("isodesmic", "homodesmotic")
        assert parse_reaction(reaction.text)


def test_dimethyl_ether_and_methanol() -> None:
    """The reaction a chemist would write first: methanol and water against dimethyl ether."""
    references = reference_set(*(exact(n) for n in ("CH3OCH3", "CH3OH", "H2O")))
    target = reference(references, "CH3OCH3")
    others = [r for r in references.references if r.name != "CH3OCH3"]
    found = find_reactions(target.model, target.bonding, others, DEFAULT_SCALES, name="CH3OCH3")
    assert [r.text for r in found] == ["CH3OCH3 + H2O -> 2 CH3OH"]


# --- what is refused ------------------------------------------------------------------------------------------------


def methanol() -> ThermoModel:
    return build_model(exact("CH3OH"))


@pytest.mark.parametrize(
    ("text", "names"),
    [
        ("CH3OH + H2 -> CH2O + H2O", "element H"),
        ("CH3OH -> CH2O + H2", "bond C-O"),
        ("CH3OH -> CH3 + OH", "unpaired electrons: 2 more on the right"),
        ("CH3OH + CO2 -> 2 CH2O", "element O: 1 fewer on the right"),
    ],
)
def test_an_unbalanced_reaction_says_by_what_and_how_much(text: str, names: str) -> None:
    with pytest.raises(Refused) as caught:
        formation_by_reaction(methanol(), reference_set(), text)
    assert [f.code for f in caught.value.findings] == ["reaction-unbalanced"]
    assert names in caught.value.findings[0].text


def test_bond_types_can_be_accepted_and_cost_uncertainty() -> None:
    text = "CH3OH -> CH2O + H2"
    made = formation_by_reaction(methanol(), reference_set(), text, EnergyChoices(accept=("bonds",)))
    assert made.dHf0_kJ_mol == pytest.approx(-189.82, abs=1e-6)
    balanced = formation_by_reaction(methanol(), reference_set(), "2 CH3OH -> CH3OCH3 + H2O")
    assert made.u95_kJ_mol > balanced.u95_kJ_mol
    assert [f.severity for f in made.findings if f.code == "reaction"] == ["warn"]
    choices = EnergyChoices(accept=("bonds",))
    assert refused(formation_by_reaction, methanol(), reference_set(), "CH3OH -> CH2O", choices) == [
        "reaction-unbalanced"
    ]


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("CH2O + H2 -> CH3 + OH", "on neither side"),
        ("CH3OH + H2O -> CH3OH + H2O", "on both sides"),
        ("CH3OH + C2H6 -> CH2O", "there is no reference output for 'C2H6'"),
        ("CH3OH + H2 -> CH20 + H2O", "Did you mean CH2O?"),
    ],
)
def test_names_that_mean_nothing(text: str, words: str) -> None:
    with pytest.raises(Refused) as caught:
        formation_by_reaction(methanol(), reference_set(), text)
    assert [f.code for f in caught.value.findings] == ["reaction-wrong"]
    assert words in caught.value.findings[0].text


@pytest.mark.parametrize("text", ["CH3OH", "A -> B -> C", "CH3OH -> ", "0 CH3OH -> H2O", "CH3 OH -> H2O"])
def test_texts_that_are_no_reactions(text: str) -> None:
    with pytest.raises(UsageError):
        parse_reaction(text)


def test_the_target_is_never_its_own_reference() -> None:
    references = reference_set()
    spoilt = [exact(n) if n != "CH3OH" else shifted(exact(n), 150.0) for n in MOLECULES]
    a, b = (formation_by_network(methanol(), r) for r in (references, reference_set(*spoilt)))
    assert a.dHf298_kJ_mol == b.dHf298_kJ_mol  # what its own reference says, wrong or right, does not count
    assert [f.code for f in a.findings if f.code == "own-reference"] == ["own-reference"]
    turned = exact("CH3OH").coordinates_A[:, ::-1]  # a mirror image and another file are the same species
    other = exact("CH3OH").but(coordinates_A=turned, source=replace(exact("CH3OH").source, file="copy.out"))
    c = formation_by_network(methanol(), reference_set(*(exact(n) for n in MOLECULES), other))
    assert c.dHf298_kJ_mol == pytest.approx(a.dHf298_kJ_mol, abs=1e-9)


def test_a_reference_at_another_level_is_refused() -> None:
    level = exact("H2O").level
    for changed in (
        {"basis": "6-311G*"},
        {"method": "PBE0", "functional": ""},
        {"program": "Gaussian"},
        {"spherical": False},
        {"dispersion": "D3BJ"},
    ):
        other = exact("H2O").but(level=replace(level, **changed))
        references = reference_set(*(exact(n) for n in MOLECULES if n != "H2O"), other)
        assert refused(formation_by_network, methanol(), references) == ["level-differs"]
        trusted = formation_by_network(methanol(), references, EnergyChoices(trust_levels=True))
        assert "level-trusted" in [f.code for f in trusted.findings]
        request = RouteRequest(route="best", references=references, atoms=atoms())
        assert refused(formation_of, methanol(), request) == ["level-differs"]


def test_the_right_level_is_taken_where_both_are_there() -> None:
    level = exact("H2O").level
    other = shifted(exact("H2O"), -900.0).but(level=replace(level, basis="6-311G*"))
    references = reference_set(*(exact(n) for n in MOLECULES), other)
    made = formation_by_network(methanol(), references)
    assert made.dHf0_kJ_mol == pytest.approx(-189.82, abs=1e-6)


def test_a_reference_in_another_state_is_refused() -> None:
    singlet = exact("O2").but(multiplicity=1)
    assert refused(reference_set, singlet) == ["reference-not-ground-state"]


def test_an_energy_that_is_off_by_more_than_a_bond() -> None:
    spoilt = shifted(exact("H2O"), 0.2 * HARTREE_KJ_MOL)
    references = reference_set(*(exact(n) for n in MOLECULES if n != "H2O"), spoilt)
    with pytest.raises(Refused) as caught:
        formation_by_network(methanol(), references)
    found = caught.value.findings
    assert [f.code for f in found] == ["energy-implausible"]
    assert "H2O" in found[0].text
    assert formation_by_network(methanol(), references, EnergyChoices(accept=("energy",)))


def test_too_few_references() -> None:
    few = reference_set(*(exact(n) for n in ("H2O", "CH2O", "CO2")))
    assert refused(formation_by_network, methanol(), few) == ["references-few"]
    assert refused(formation_by_network, methanol(), replace(reference_set(), atoms={})) == ["atom-missing"] * 1


def test_best_takes_the_smallest_uncertainty_and_shows_the_others() -> None:
    enthalpy = parse_enthalpy("-200.7 +/- 0.2 kJ/mol")
    request = RouteRequest(route="best", given=(enthalpy, "ATcT 1.112"), references=reference_set(), atoms=atoms())
    made = formation_of(methanol(), request)
    assert made.method == "given"
    assert {f.method for f in made.alternatives} >= {"atomization", "network", "reaction"}
    without = formation_of(methanol(), replace(request, given=None))
    spreads = [f.u95_kJ_mol for f in (without, *without.alternatives)]
    assert without.u95_kJ_mol == min(spreads)
    assert [f.code for f in without.findings if f.code == "route"]


def test_routes_that_disagree_are_named() -> None:
    enthalpy = parse_enthalpy("-100.0 +/- 0.2 kJ/mol")
    request = RouteRequest(route="best", given=(enthalpy, "wrong"), references=reference_set(), atoms=atoms())
    made = formation_of(methanol(), request)
    assert {f.severity for f in made.findings if f.code == "routes-disagree"} == {"warn"}


def test_an_atom_is_its_reference() -> None:
    model = build_model(atoms()["O"][0])
    for route in ("best", "network", "atomization"):
        made = formation_of(model, RouteRequest(route=route, references=reference_set(), atoms=atoms()))
        assert made.dHf0_kJ_mol == pytest.approx(246.844)  # ATcT 1.112
        assert made.method == "atomization"


def test_a_user_value_at_298_K_only_is_taken_to_0_K() -> None:
    row = next(r for r in reference_species() if r.name == "H2O")
    own = replace(row, dHf0_kJ_mol=None, dHf298_kJ_mol=-241.822, own=True)
    found = collect_references([exact("H2O")], atoms(), [own], ModelOptions()).references[0]
    # harmonic H(298.15) - H(0) of water differs from ATcT's 9.903 by 0.03 kJ/mol at most
    assert found.dHf0_kJ_mol == pytest.approx(-238.919, abs=0.04)


def test_conformers_of_a_reference_are_one_species() -> None:
    lower = shifted(exact("CH3OCH3"), -5.0).but(source=replace(exact("CH3OCH3").source, file="lower.out"))
    references = reference_set(*(exact(n) for n in MOLECULES), lower)
    usable = usable_references(methanol(), references)
    assert [r.file for r in usable.references if r.row.name == "CH3OCH3"] == ["lower.out"]
    assert [f.code for f in references.findings if f.code == "conformer-passed-over"] == ["conformer-passed-over"]
