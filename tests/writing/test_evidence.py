"""The evidence statement: the same four things in the same order, whatever the entry is made of."""

from __future__ import annotations

import re

import pytest

from entries import entry_of, text_of
from heatwright import ModelOptions, evidence
from heatwright.entry import FitOptions
from heatwright.formation.formation import Formation
from heatwright.molecule import Level, Source
from heatwright.partition.lowmodes import LowModes
from heatwright.writing.document import species_document
from heatwright.writing.evidence import evidence_of_record, route_text
from molecules import atom, water
from shown import entries, shown

SHAPE = re.compile(r"[^;]+; [^;]+; ΔfH° [^;]+, (±[\d.]+ kJ/mol|uncertainty not known); polynomial [^;]+ K\.")


@pytest.mark.parametrize("name", list(entries()))
def test_four_parts_in_one_sentence(name: str) -> None:
    assert SHAPE.fullmatch(evidence(entries()[name])), evidence(entries()[name])
    assert shown()[name].evidence == evidence(entries()[name])


def test_what_each_part_says() -> None:
    said = evidence(entry_of(water(), "H2O", "-241.8 +/- 0.03 kJ/mol"))
    assert said == (
        "B3LYP/6-31G*, NWChem 7.0.2; harmonic oscillators unscaled (lowest 1595 cm⁻¹); ΔfH° given (made for a test), "
        "±0.03 kJ/mol; polynomial within 0.0056 R in Cp°, 200–6000 K."
    )


def treated(**options: object) -> str:
    return evidence(entry_of(water(), "H2O", model=ModelOptions(**options))).split("; ")[1]


def test_treatments_are_named() -> None:
    low = LowModes("floor", cutoff_cm1=2000.0)
    assert treated(low_modes=low) == (
        "harmonic oscillators unscaled (lowest 2000 cm⁻¹, those below 2000 cm⁻¹ raised to it)"
    )
    low = LowModes("interpolate", cutoff_cm1=150.0)
    assert "towards free rotors below 150 cm⁻¹" in treated(low_modes=low)
    assert treated(frequency_scale=0.95).startswith("harmonic oscillators scaled by 0.95 (lowest 1515 cm⁻¹")
    assert "1 hindered rotor from a barrier" in evidence(entries()["methanol"])
    assert "mixture of 2 conformers" in evidence(entries()["n-butane"])
    assert evidence(entries()["H"]).split("; ")[1] == "atom: translation and electronic levels"


def test_an_energy_from_elsewhere_is_named_with_its_program() -> None:
    better = Level(method="CCSD(T)", basis="cc-pVTZ", program="ORCA")
    molecule = water(energy_source=Source("sp.out", "1" * 64, "ORCA", "5.0.4"), energy_level=better)
    said = evidence(entry_of(molecule, "H2O"))
    assert said.startswith("CCSD(T)/cc-pVTZ//B3LYP/6-31G*, ORCA 5.0.4 and NWChem 7.0.2; ")


def test_a_hand_made_molecule_says_so() -> None:
    molecule = water(source=Source("H2O.toml", "0" * 64, "by hand", ""), level=None)
    assert evidence(entry_of(molecule, "H2O")).startswith("Molecule given by hand; harmonic")


@pytest.mark.parametrize(
    ("method", "u95", "words"),
    [
        ("given", None, "ΔfH° given (S), uncertainty not known"),
        ("atomization", 67.2, "ΔfH° by atomization, ±67 kJ/mol"),
        ("reaction", 4.25, "ΔfH° by a balanced reaction, ±4.2 kJ/mol"),
        ("network", 0.31, "ΔfH° by a network of S, ±0.31 kJ/mol"),
    ],
)
def test_routes(method: str, u95: float | None, words: str) -> None:
    made = Formation(dHf298_kJ_mol=0.0, dHf0_kJ_mol=None, u95_kJ_mol=u95, method=method, source="S")
    assert route_text(made) == words


def test_it_stands_in_comment_and_document() -> None:
    entry = entry_of(water(), "H2O", fit=FitOptions(298.15, 1000.0, 3000.0))
    text = text_of("nasa7", entry)
    joined = re.sub(r"\n!   ", " ", text)
    assert "! evidence: B3LYP/6-31G*, NWChem 7.0.2; harmonic oscillators unscaled (lowest 1595 cm^-1); " in joined
    assert "298.15-3000 K." in joined
    assert species_document("H2O", entry.model, entry.table, (), entry)["evidence"] == evidence(entry)
    table_only = species_document("H2O", entry.model, entry.table)["evidence"]
    assert table_only == "B3LYP/6-31G*, NWChem 7.0.2; harmonic oscillators unscaled (lowest 1595 cm⁻¹)."


def test_an_exact_polynomial_and_a_bare_record() -> None:
    assert "polynomial exact in Cp°" in evidence(entry_of(atom("H", 2, -0.5), "H"))
    p = entry_of(water(), "H2O").polynomial
    said = evidence_of_record("old.dat", "", p)
    assert said.endswith("nothing is known of the data and the model behind it; polynomial for 200–6000 K.")
