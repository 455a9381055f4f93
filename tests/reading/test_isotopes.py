"""Other isotopologues from one frequency job, against jobs that were run with the other masses.

The reference outputs are ours (NWChem 7.0.2): H2O, HDO and D2O at HF/6-31G*, CH3OH and CH3OD at HF/3-21G, each with its
own optimisation, so they agree to the noise of two optimisations.
"""

from __future__ import annotations

from functools import partial

import numpy as np
import pytest

from heatwright import build_model
from heatwright.elements import composition
from heatwright.errors import UsageError
from heatwright.findings import Refused
from heatwright.molecule import Molecule
from heatwright.reading.outputs import read_output
from heatwright.structure.inertia import inertia
from heatwright.structure.isotopes import parse_isotope, with_isotopes
from kept_outputs import codes, kept
from molecules import water
from outside import SHARED, needs_shared

read = partial(read_output, with_hessian=True)

H2O, HDO, D2O = "nwchem702_h2o_freq.out", "nwchem702_hdo_3temps.out", "nwchem702_d2o_freq.out"
CH3OH, CH3OD = "nwchem702_methanol_freq.out", "nwchem702_methanol_od_freq.out"


def exchanged(m: Molecule, *wishes: str) -> Molecule:
    return with_isotopes(m, [parse_isotope(w) for w in wishes])


@pytest.mark.parametrize("hessian", [True, False], ids=["printed Hessian", "rebuilt from modes"])
@pytest.mark.parametrize(
    ("name", "wish", "reference"),
    [
        (H2O, "2=2H", HDO),
        (H2O, "H=D", D2O),
        (D2O, "H=1H", H2O),
        (HDO, "2=1H", H2O),
        (CH3OH, "3=D", CH3OD),
        (CH3OD, "3=1H", CH3OH),
    ],
)
def test_against_a_job_of_the_isotopologue(name: str, wish: str, reference: str, hessian: bool) -> None:
    m, due = read(kept(name)), read(kept(reference))
    assert m.hessian_hartree_bohr2 is not None
    made = exchanged(m if hessian else m.but(hessian_hartree_bohr2=None), wish)
    assert made.wavenumbers_cm1 == pytest.approx(due.wavenumbers_cm1, abs=0.05)
    assert made.masses_u == pytest.approx(due.masses_u, abs=2e-6)
    assert made.energy_hartree == m.energy_hartree
    a, b = build_model(made), build_model(due)
    assert (a.symmetry_number, a.composition) == (b.symmetry_number, b.composition)
    assert float(a.s_R(298.15)) == pytest.approx(float(b.s_R(298.15)), abs=2e-4)


def test_symmetry_follows_the_masses() -> None:
    m = read(kept(H2O))
    assert [build_model(exchanged(m, *w)).symmetry_number for w in ([], ["2=D"], ["H=D"], ["2=D", "3=T"])] == [
        2,
        1,
        2,
        1,
    ]


@pytest.mark.parametrize(
    ("name", "wishes"),
    [
        (H2O, ["2=D"]),
        (H2O, ["1=18O"]),
        (CH3OH, ["3=D"]),
        (CH3OH, ["H=D", "C=13C"]),
        ("psi4_132_h2o_opt_freq.out", ["H=T"]),
        ("psi4_132_oh_radical_freq.out", ["H=D"]),
        ("orca50_dvb_freq.out", ["H=D"]),
        ("gaussian16_dvb_freq.out", ["C=13C"]),
    ],
)
def test_product_rule(name: str, wishes: list[str]) -> None:
    """O. Redlich, Z. phys. Chem. B 28, 371 (1935), as in G. Herzberg, Infrared and Raman Spectra (1945), II,6 (from
    memory): the product of all wavenumbers changes by the masses and moments of inertia alone."""
    m = read(kept(name))
    made = exchanged(m, *wishes)
    moments = [inertia(x.masses_u, x.coordinates_A).principal_moments_u_A2 for x in (m, made)]
    turns = [np.unique(i[i > 0]) if len(i[i > 0]) == 2 else i for i in moments]  # one moment twice when linear
    exponent = 2.0 if len(turns[0]) == 1 else 1.0
    rule = (
        np.prod((m.masses_u / made.masses_u) ** 1.5)
        * (made.mass_u / m.mass_u) ** 1.5
        * (np.prod(turns[1]) / np.prod(turns[0])) ** (0.5 * exponent)
    )
    assert np.prod(made.wavenumbers_cm1 / m.wavenumbers_cm1) == pytest.approx(rule, rel=1e-4)


def test_what_was_done_is_said_and_the_program_s_own_numbers_no_longer_belong() -> None:
    made = exchanged(read(kept(CH3OH)), "3=D", "C=13C")
    (said,) = [f for f in made.findings if f.code == "isotopes"]
    assert (
        "2H (2.014102 u) at atom 3; 13C (13.003355 u) at atom 1; wavenumbers anew from the printed Hessian" in said.text
    )
    assert made.printed == ()
    assert composition(made.atomic_numbers, made.masses_u) == {"C": 1, "H": 3, "D": 1, "O": 1}


def test_a_job_that_used_deuterium_itself_is_counted_so() -> None:
    m = read(kept(HDO))
    assert build_model(m).composition == {"H": 1, "D": 1, "O": 1}
    assert "non-default-isotope" in codes(m)
    assert "non-default-isotope" not in {f.code for f in exchanged(m, "2=1H").findings}


def test_two_decimals_are_warned_about_and_enough_for_a_few_wavenumbers() -> None:
    """Divinylbenzene of Gaussian 16, its displacements rounded as Gaussian prints them without hpmodes."""
    m = read(kept("gaussian16_dvb_freq.out"))
    assert m.normal_modes is not None
    coarse = exchanged(m.but(hessian_hartree_bohr2=None, normal_modes=np.round(m.normal_modes, 2)), "H=D")
    fine = exchanged(m, "H=D")
    assert [f.severity for f in coarse.findings if f.code == "isotopes"] == ["note", "warn"]
    assert [f.severity for f in fine.findings if f.code == "isotopes"] == ["note"]
    assert coarse.wavenumbers_cm1 == pytest.approx(fine.wavenumbers_cm1, abs=8.0)
    assert coarse.wavenumbers_cm1.sum() == pytest.approx(fine.wavenumbers_cm1.sum(), rel=2e-4)


def test_an_atom_only_changes_its_mass() -> None:
    atom = read(kept("nwchem702_o_atom_rohf.out"))
    assert exchanged(atom, "O=18O").mass_u == pytest.approx(17.999159613)


@pytest.mark.parametrize("text", ["2", "2=", "=D", "2=5H", "0=D", "X1=D", "H=13C", "Q=D", "2=2Xx", "2=H", "2=D=D"])
def test_what_is_no_isotope_is_wrong_usage(text: str) -> None:
    with pytest.raises(UsageError, match="--isotope"):
        parse_isotope(text)


@pytest.mark.parametrize(
    ("wish", "words"), [("4=D", "has 3 atoms"), ("1=D", "atom 1, which is O"), ("C=13C", "no C in the molecule")]
)
def test_an_atom_that_is_not_there_is_refused(wish: str, words: str) -> None:
    with pytest.raises(Refused, match=words) as stopped:
        exchanged(read(kept(H2O)), wish)
    assert {f.code for f in stopped.value.findings} == {"no-such-atom"}


def test_without_force_constants_it_is_refused() -> None:
    m = read(kept(H2O)).but(hessian_hartree_bohr2=None)
    assert m.normal_modes is not None
    weighted = m.normal_modes * np.sqrt(m.masses_u)[None, :, None]
    for without, words in (
        (water(), "neither a Hessian nor normal modes"),
        (
            m.but(normal_modes=m.normal_modes[1:], wavenumbers_cm1=m.wavenumbers_cm1[1:]),
            "2 normal modes where 3 belong",
        ),
        (m.but(normal_modes=weighted), "no Cartesian displacements"),
    ):
        with pytest.raises(Refused, match=words) as stopped:
            exchanged(without, "2=D")
        assert {f.code for f in stopped.value.findings} == {"no-force-constants"}


@needs_shared
def test_log_and_checkpoint_file_agree_on_a_deuterated_molecule() -> None:
    """Divinylbenzene, B3LYP/STO-3G, Gaussian 16: force constants of the archive entry and of the checkpoint file."""
    assert SHARED is not None
    log, fchk = (read(SHARED / "outputs" / f"gaussian16_dvb_freq.{e}") for e in ("out", "fchk"))
    assert exchanged(log, "H=D").wavenumbers_cm1 == pytest.approx(exchanged(fchk, "H=D").wavenumbers_cm1, abs=2.0)
