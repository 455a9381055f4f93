"""Several jobs in one file: which one is read, and what is said about it."""

from __future__ import annotations

from pathlib import Path

import pytest

from heatwright.findings import Refused, refusals
from heatwright.reading.outputs import read_output
from kept_outputs import codes, kept, read_text, text_of


def test_optimisation_then_frequencies_is_one_molecule_without_a_word() -> None:
    m = read_output(kept("psi4_132_h2o_opt_freq.out"))
    assert (m.job, m.n_jobs) == (2, 2)
    assert m.findings == ()


def test_single_point_after_the_frequencies_does_not_replace_their_energy() -> None:
    m = read_output(kept("nwchem702_water_freq_then_ccsdt.out"))
    assert (m.job, m.n_jobs, m.energy_kind) == (2, 3, "SCF")
    assert m.energy_hartree == -74.965901191748
    assert codes(m) == {"several-jobs"}
    last = read_output(kept("nwchem702_water_freq_then_ccsdt.out"), job=3)
    assert (last.kind, last.energy_kind, last.level and last.level.label) == ("energy", "CCSD(T)", "CCSD(T)/cc-pVDZ")
    assert last.energy_hartree == -76.242397359462302


def test_each_molecule_of_a_file_by_its_number() -> None:
    water, nitrogen = (read_output(kept("nwchem702_water_and_n2.out"), job=job) for job in (2, 4))
    assert (water.atomic_numbers.tolist(), nitrogen.atomic_numbers.tolist()) == ([8, 1, 1], [7, 7])
    assert (water.wavenumbers_cm1.size, nitrogen.wavenumbers_cm1.size) == (3, 1)
    assert nitrogen.energy_hartree == -107.500654262948
    assert nitrogen.coordinates_A.shape == (2, 3)
    dvb = read_output(kept("multijob_qchem54_water_then_dvb.out"), job=2)
    assert (dvb.n_atoms, dvb.wavenumbers_cm1.size) == (20, 54)


def test_the_refusal_names_formulas_and_jobs() -> None:
    with pytest.raises(Refused, match="H2O in jobs 1 to 2, N2 in jobs 3 to 4"):
        read_output(kept("nwchem702_water_and_n2.out"))


@pytest.mark.parametrize("job", [0, -1, 5])
def test_a_job_that_is_not_there(job: int) -> None:
    with pytest.raises(Refused, match="the file holds 4 jobs") as caught:
        read_output(kept("nwchem702_water_and_n2.out"), job=job)
    assert caught.value.findings[0].code == "several-jobs"


def test_a_second_molecule_that_failed_does_not_spoil_the_first() -> None:
    hydrogen = read_output(kept("psi4_132_h2_then_hf_failed.out"), job=2)
    assert hydrogen.energy_hartree == pytest.approx(-1.1175301889597646, abs=1e-12)
    assert hydrogen.wavenumbers_cm1.tolist() == [5481.1660]
    assert refusals(hydrogen.findings) == ()
    fluoride = read_output(kept("psi4_132_h2_then_hf_failed.out"), job=3)
    assert codes(fluoride, "refuse") >= {"job-failed"}


@pytest.mark.parametrize(
    ("first", "second"),
    [
        ("gaussian16_dvb_freq.out", "gaussian16_water_ccsdt_energy.log"),
        ("qchem51_water_freq.out", "qchem51_c_atom.out"),
        ("orca50_dvb_freq.out", "nothing"),
    ],
)
def test_outputs_joined_to_one_file(tmp_path: Path, first: str, second: str) -> None:
    if second == "nothing":  # the same molecule twice
        m = read_text(tmp_path, text_of(first) + text_of(first))
        assert (m.job, m.n_jobs, m.wavenumbers_cm1.size) == (2, 2, 54)
        return
    joined = text_of(first) + text_of(second)
    with pytest.raises(Refused) as caught:
        read_text(tmp_path, joined)
    assert caught.value.findings[0].code == "several-molecules"
    alone, chosen = read_output(kept(first)), read_text(tmp_path, joined, job=1)
    assert chosen.energy_hartree == alone.energy_hartree
    assert chosen.wavenumbers_cm1.tolist() == alone.wavenumbers_cm1.tolist()
    assert read_text(tmp_path, joined, job=2).energy_hartree == read_output(kept(second)).energy_hartree


def test_another_charge_is_another_molecule(tmp_path: Path) -> None:
    text = text_of("gaussian16_water_ccsdt_energy.log")
    cation = text.replace(" Charge =  0 Multiplicity = 1", " Charge =  1 Multiplicity = 2")
    with pytest.raises(Refused, match="H2O in job 1, H2O\\+ \\(multiplicity 2\\) in job 2"):
        read_text(tmp_path, text + cation)


def test_values_given_by_the_user_replace_those_read() -> None:
    m = read_output(kept("qchem51_water_freq.out"), charge=1, multiplicity=2)
    assert (m.charge, m.multiplicity) == (1, 2)
    assert [f.code for f in m.findings] == ["user-value", "user-value"]
    assert "the output says 0" in m.findings[0].text
