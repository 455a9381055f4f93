"""Energies that a file names twice, or by a method: never the one of another method without a word."""

from __future__ import annotations

from pathlib import Path

import pytest

from heatwright.constants import CCLIB_EV_PER_HARTREE
from heatwright.molecule import Molecule
from heatwright.reading.dialects import dialect_of
from heatwright.reading.dialects.gaussian_archive import archived_energies
from heatwright.reading.dialects.plain import Plain
from heatwright.reading.parsing import Parsed, parse
from heatwright.reading.text import Text
from kept_outputs import codes, kept, read_output, read_text, text_of
from outside import SHARED, needs_shared

CCSDT = "gaussian16_water_ccsdt_energy.log"


def test_the_archive_of_gaussian_names_each_energy() -> None:
    """As the archive at the end of the output has them, seven decimals."""
    assert archived_energies(Text.of(text_of(CCSDT))) == {
        "SCF": -74.9643288, "MP2": -75.0022821, "MP3": -75.0128009, "MP4(DQ)": -75.0159011, "MP4(SDQ)": -75.0160137,
        "CCSD": -75.0176836, "CCSD(T)": -75.0177604,
    }  # fmt: skip
    assert archived_energies(Text.of(text_of("gaussian16_dvb_freq.out"))) == {"SCF": -382.3082666}
    assert archived_energies(Text.of("no archive")) == {}
    scan = "\n 1\\1\\GINC\\Scan\\\\#p\\\\t\\\\0,1\\H\\\\Version=1\\HF=-1.5,-1.6\\RMSD=0.\\\\@"
    assert archived_energies(Text.of(scan)) == {}
    assert archived_energies(Text.of(scan.replace(",-1.6", ""))) == {"SCF": -1.5}


def test_an_energy_that_only_the_archive_has_is_missed(tmp_path: Path) -> None:
    text = text_of(CCSDT)
    edge = text.index(" CCSD(T)= -0.75017760422D+02")
    m = read_text(tmp_path, text[:edge] + text[text.index("\n", edge) + 1 :])
    assert "CCSD(T)" not in m.energies_hartree
    (found,) = (f for f in m.findings if f.code == "parser-failed")
    assert (found.severity, "CCSD(T) energy (-75.0177604 hartree)" in found.text) == ("refuse", True)


def test_a_changed_energy_is_noticed_by_the_archive(tmp_path: Path) -> None:
    text = text_of(CCSDT)
    assert "parser-failed" in codes(
        read_text(tmp_path, text.replace("-0.75017760422D+02", "-0.75018760422D+02")), "warn"
    )
    assert codes(read_output(kept(CCSDT))) == set()


FREQ = "Freq      RB3LYP                  "
TOTAL = "Total Energy                               R     -3.823082666020143E+02"


def checkpoint(folder: Path, method: str, total: float | None) -> Molecule:
    """The checkpoint file with another method and total energy."""
    assert SHARED is not None
    text = (SHARED / "outputs" / "gaussian16_dvb_freq.fchk").read_text()
    assert FREQ in text
    assert TOTAL in text
    line = TOTAL if total is None else f"Total Energy                               R     {total:.15E}"
    return read_text(folder, text.replace(FREQ, f"Freq      {method:24}").replace(TOTAL, line))


@needs_shared
@pytest.mark.parametrize(
    ("method", "kind", "label", "core"),
    [
        ("RMP2-FC", "MP2", "MP2/STO-3G", "frozen"),
        ("UCCSD(T)-FU", "CCSD(T)", "CCSD(T)/STO-3G", "all"),
        ("ROMP4SDQ-FC", "MP4(SDQ)", "MP4(SDQ)/STO-3G", "frozen"),
        ("RB2PLYP", "double-hybrid", "B2PLYP/STO-3G", ""),
    ],
)
def test_the_total_energy_of_a_checkpoint_is_that_of_its_method(
    tmp_path: Path, method: str, kind: str, label: str, core: str
) -> None:
    """Methods as Gaussian abbreviates them in the second line (from memory)."""
    m = checkpoint(tmp_path, method, -383.0)
    assert m.level is not None
    assert (m.energy_kind, m.energy_hartree, m.level.label, m.level.frozen_core) == (kind, -383.0, label, core)
    assert codes(m) == {"no-normal-termination"}


@needs_shared
def test_an_energy_of_no_known_method_is_not_used(tmp_path: Path) -> None:
    for method in ("RB3LYP", "RXYZ"):
        m = checkpoint(tmp_path, method, -383.0)
        assert (m.energy_hartree, codes(m, "warn") >= {"parser-failed", "no-energy"}) == (None, True)
    bare = checkpoint(tmp_path, "RMP2-FC", None)
    assert bare.level is not None
    assert (bare.energy_kind, bare.level.label, "no-energy" in codes(bare, "warn")) == ("SCF", "HF/STO-3G", True)
    assert codes(checkpoint(tmp_path, "RHF", None)) == {"no-normal-termination"}


GAMESS_MP2 = """
      SCHWARZ INEQUALITY TEST SKIPPED          0 INTEGRAL BLOCKS
                     E(SCF)=       -76.0088477471
                       E(2)=        -0.1403745370
                     E(MP2)=       -76.1492222841
 ..... DONE WITH MP2 ENERGY .....
"""
GAMESS_CC = """
        MBPT(2) ENERGY:    -76.1492222841
           CCSD    ENERGY:    -76.1600000000
        CCSD[T] ENERGY:    -76.1610000000
        CCSD(T) ENERGY:    -76.1620000000
"""
DALTON_CC = """
 ,----------------------------------------------------.
 Starting in Coupled Cluster Section (CC)
 *SUMMARY OF COUPLED CLUSTER CALCULATION*
            Total CCSD  energy:                  -75.0152363616
            Total energy CCSD(T):                -75.0153120000
 *END OF COUPLED CLUSTER CALCULATION*
"""


@pytest.mark.parametrize(
    ("parser", "name", "text", "expected"),
    [
        ("GAMESS", "mpenergies", GAMESS_MP2, -76.1492222841),
        ("GAMESS", "ccenergies", GAMESS_CC, -76.162),
        ("DALTON", "ccenergies", DALTON_CC, -75.015312),
    ],
)
def test_blocks_that_no_kept_output_has_are_shown(parser: str, name: str, text: str, expected: float) -> None:
    """Blocks in the form that the comments of cclib's parsers show."""
    pieces = [Text.of(f"head\n{text}tail\n")]
    some, every = (parse(parser, pieces, skip=skip).array(name) for skip in (True, False))
    assert every is not None
    assert some is not None
    assert some.tolist() == every.tolist()
    assert every.ravel()[-1] == pytest.approx(expected * CCLIB_EV_PER_HARTREE, rel=1e-12)


@pytest.mark.parametrize(
    ("program", "line", "kind"),
    [
        ("GAMESS", "        CCSD(T) ENERGY:    -76.2", "CCSD(T)"),
        ("GAMESS", "           CCSD    ENERGY:    -76.1", "CCSD"),
        ("Molpro", " !CCSD(T) total energy   -76.2", "CCSD(T)"),
        ("Molpro", " !CCSD total energy   -76.1", "CCSD"),
        ("Turbomole", " *   Final CC2 energy                        :    -75.0 *", "CC2"),
        ("DALTON", " Total energy CCSD(T):   -75.0", "CCSD(T)"),
        ("Molcas", " Total energy (diff) :     -75.0", "CCSD"),
        ("CFOUR", "       CALCLEVEL            ICLLVL         CCSD(T)     [ 22]    ***", "CCSD(T)"),
        ("CFOUR", "       CALCLEVEL            ICLLVL         MBPT(2)     [  1]    ***", "MP2"),
    ],
)
def test_a_coupled_cluster_energy_has_the_name_of_its_method(program: str, line: str, kind: str) -> None:
    """cclib gives one list of coupled-cluster energies; which method's it is, the output says."""
    text = Text.of(f"{line}\n  The final electronic energy is       -76.240000000000000 a.u.\n")
    values = {"scfenergies": [-76.0 * CCLIB_EV_PER_HARTREE], "ccenergies": [-76.24 * CCLIB_EV_PER_HARTREE]}
    dialect = dialect_of(program)
    assert isinstance(dialect, Plain)
    energies, used = dialect.energies(text, Parsed(values), False)
    assert (used, sorted(energies)) == (kind, sorted(["SCF", kind]))
    assert energies[kind] == pytest.approx(-76.24, abs=1e-12)


def test_a_correlated_module_without_its_energy_is_no_scf_job(tmp_path: Path) -> None:
    name = "nwchem702_water_mp2_energy.out"
    m = read_text(tmp_path, text_of(name).replace("MP2 energy", "MP2 e"))
    (found,) = (f for f in m.findings if f.code == "parser-failed")
    assert (found.severity, "MP2 Semi-direct" in found.text) == ("refuse", True)
    assert codes(read_output(kept(name))) == set()
