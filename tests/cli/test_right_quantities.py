"""``--isotope`` and ``--energy`` as a user meets them: exit codes, texts, JSON.

The outputs are ours (NWChem 7.0.2, HF/6-31G* and MP2/6-31G*); their README says what each is.
"""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest

from kept_outputs import kept

H2O, HDO = kept("nwchem702_h2o_freq.out"), kept("nwchem702_hdo_3temps.out")
MP2 = kept("nwchem702_water_mp2_energy.out")
GIVEN = ("--dHf298", "-245.4 kJ/mol", "--source", "made up for this test")


def test_isotope_against_the_job_that_was_run_with_it(run) -> None:
    made = run("table", H2O, "--isotope", "2=2H", "--temperatures", "298.15,1000", "--json")
    own = run("table", HDO, "--temperatures", "298.15,1000", "--json")
    assert (made.code, own.code) == (0, 0)
    (a,), (b,) = (json.loads(r.out)["species"] for r in (made, own))
    assert (a["formula"], a["symmetry_number"], a["composition"]) == ("HDO", 1, {"H": 1, "D": 1, "O": 1})
    assert b["formula"] == "HDO"
    assert a["wavenumbers_cm-1"] == pytest.approx(b["wavenumbers_cm-1"], abs=0.05)
    assert a["table"]["S_J_mol_K"] == pytest.approx(b["table"]["S_J_mol_K"], abs=0.002)
    assert a["name"] == "HDO"  # not the name of the file, which is that of H2O
    assert "[isotopes]" in made.err


def test_deuterium_in_the_entry(run) -> None:
    done = run("entry", H2O, "--isotope", "H=D", *GIVEN, "--name", "D2O")
    assert done.code == 0
    (first,) = [line for line in done.out.splitlines() if line.startswith("D2O ")]
    assert first[24:44] == "D   2O   1          "
    assert "isotopes were exchanged: 2H (2.014102 u) at atoms 2, 3" in " ".join(done.out.replace("!", " ").split())


def test_cantera_knows_the_element_of_a_deuterated_entry(run, tmp_path: Path) -> None:
    cantera = pytest.importorskip("cantera")
    file = tmp_path / "hdo.yaml"
    assert run("entry", H2O, "--isotope", "2=D", *GIVEN, "--name", "HDO", "--format", "yaml", "-o", file).code == 0
    gas = cantera.Solution(str(file))
    assert gas.species("HDO").composition == {"H": 1.0, "D": 1.0, "O": 1.0}
    assert gas.molecular_weights[0] == pytest.approx(19.02, abs=0.01)


def test_wrong_isotopes_are_wrong_usage_and_absent_atoms_are_refused(run) -> None:
    assert run("table", H2O, "--isotope", "2=5H").code == 2
    assert run("table", H2O, "--isotope", "2:D").code == 2
    for wish, words in (("7=D", "the molecule has 3 atoms"), ("C=13C", "no C in the molecule")):
        refused = run("table", H2O, "--isotope", wish)
        assert refused.code == 3
        assert words in refused.err


def test_atomization_of_a_deuterated_species_is_refused_with_a_sentence(run, tmp_path: Path) -> None:
    for name in ("o", "h"):
        shutil.copy(kept(f"nwchem702_{name}_atom_mp2.out"), tmp_path)
    done = run("entry", H2O, "--isotope", "2=D", "--energy", MP2, "--atoms", tmp_path)
    assert done.code == 3
    assert "deuterium has no reference enthalpy" in done.err
    assert "[atom-missing]" not in done.err


def test_energy_of_another_file(run, tmp_path: Path) -> None:
    for name in ("o", "h"):
        shutil.copy(kept(f"nwchem702_{name}_atom_mp2.out"), tmp_path)
    done = run("entry", H2O, "--energy", MP2, "--atoms", tmp_path, "--name", "H2O", "--format", "nasa7")
    assert done.code == 0
    assert "MP2/6-31G*//HF/6-31G*" in done.out
    assert "energy from" in done.out
    (species,) = json.loads(run("entry", H2O, "--energy", MP2, "--atoms", tmp_path, "--json").out)["species"]
    assert species["energy_hartree"] == pytest.approx(-76.193065146883)
    assert species["energy_kind"] == "MP2"
    assert species["source"]["level"] == "HF/6-31G*"
    assert species["source"]["energy_level"] == "MP2/6-31G*"
    assert species["source"]["energy_file"] == str(MP2)
    plain = run("entry", H2O, "--atoms", tmp_path)
    assert plain.code == 3
    assert "[level-differs]" in plain.err


def test_energy_once_for_each_output(run) -> None:
    assert run("table", H2O, HDO, "--energy", MP2).code == 2
    other = kept("nwchem702_water_stretched_mp2_energy.out")
    mixed = run("table", H2O, HDO, "--energy", MP2, "--energy", other, "--json")
    assert mixed.code == 3
    document = json.loads(mixed.out)
    assert len(document["species"]) == len(document["failed"]) == 1
    assert "RMSD" in mixed.err
    assert run("table", H2O, "--energy", "missing.out").code == 3


VPT2 = kept("qchem54_water_vpt2.out")


def test_anharmonic_values_on_request(run) -> None:
    done = run("entry", VPT2, "--anharmonic", *GIVEN, "--name", "H2O")
    assert done.code == 0
    assert "oscillators with anharmonic fundamentals" in done.out
    assert "[anharmonic]" in done.err
    (species,) = json.loads(run("table", VPT2, "--anharmonic", "--json").out)["species"]
    assert species["anharmonic"] is True
    assert species["fundamentals_cm-1"] == [1789.71, 3839.74, 4125.21]
    assert species["zpe_kJ_mol"] == pytest.approx(13.945 * 4.184)
    plain = run("table", VPT2, "--json")
    assert json.loads(plain.out)["species"][0]["anharmonic"] is False
    assert "[anharmonic-unused]" in plain.err


def test_anharmonic_refusals(run) -> None:
    assert run("table", VPT2, "--anharmonic", "--frequency-scale", 0.96).code == 2
    assert run("table", VPT2, "--anharmonic", "--scale", "published").code == 2
    absent = run("table", H2O, "--anharmonic")
    assert absent.code == 3
    assert "[no-anharmonic]" in absent.err
