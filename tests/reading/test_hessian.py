"""Printed force constants: read where they give the printed wavenumbers, left aside where they do not."""

from __future__ import annotations

from functools import partial
from pathlib import Path

import numpy as np
import pytest

from heatwright.findings import refusals
from heatwright.molecule import Molecule
from heatwright.reading.hessians import largest_difference
from heatwright.reading.outputs import read_output
from heatwright.structure.modes import overall_motion, projected_modes, rebuilt_hessian
from kept_outputs import codes, kept, read_text, text_of
from outside import SHARED, needs_shared

read = partial(read_output, with_hessian=True)

PRINTED = (
    "nwchem702_hdo_3temps.out",
    "nwchem702_nh3_planar_ts.out",
    "gaussian16_dvb_freq.out",
    "qchem51_water_freq.out",
)
MODES = (
    *PRINTED,
    "orca50_dvb_freq.out",
    "jaguar83_dvb_freq.out",
    "psi4_132_h2o_opt_freq.out",
    "psi4_132_oh_radical_freq.out",
    "psi4_132_hcn_hnc_ts.out",
)


def own(m: Molecule) -> np.ndarray:
    assert m.hessian_hartree_bohr2 is not None
    return projected_modes(m.hessian_hartree_bohr2, m.masses_u, m.coordinates_A)[0]


@pytest.mark.parametrize("name", PRINTED)
def test_the_hessian_gives_the_printed_wavenumbers(name: str) -> None:
    m = read(kept(name))
    assert largest_difference(own(m), m.wavenumbers_cm1) < 0.02  # the digits of the printed matrix
    assert not codes(m) & {"hessian-unused", "modes-from-hessian"}


@pytest.mark.parametrize("name", MODES)
def test_force_constants_rebuilt_from_the_printed_modes(name: str) -> None:
    m = read(kept(name))
    assert m.normal_modes is not None
    H, deviation = rebuilt_hessian(m.wavenumbers_cm1, m.normal_modes, m.masses_u, m.coordinates_A)
    assert deviation < 0.03  # two decimals in Psi4
    assert largest_difference(projected_modes(H, m.masses_u, m.coordinates_A)[0], m.wavenumbers_cm1) < 1e-6
    stationary = "qchem" not in name  # its geometry is not optimised, so turning it costs energy in the printed Hessian
    if m.hessian_hartree_bohr2 is not None and stationary:
        assert np.abs(H - m.hessian_hartree_bohr2).max() < 0.001 * np.abs(H).max()


def test_modes_are_orthogonal_to_overall_motion_and_to_each_other() -> None:
    m = read(kept("nwchem702_nh3_planar_ts.out"))
    _, x = projected_modes(m.hessian_hartree_bohr2, m.masses_u, m.coordinates_A)
    L = (x * np.sqrt(m.masses_u)[None, :, None]).reshape(len(x), -1)
    L /= np.linalg.norm(L, axis=1)[:, None]
    assert np.abs(L @ L.T - np.eye(6)).max() < 1e-10
    assert np.abs(L @ overall_motion(m.masses_u, m.coordinates_A)).max() < 1e-10
    assert m.n_imaginary == 1
    assert (own(m) < 0.0).sum() == 1


def test_a_linear_molecule_has_five_overall_motions() -> None:
    m = read(kept("psi4_132_oh_radical_freq.out"))
    assert overall_motion(m.masses_u, m.coordinates_A).shape == (6, 5)


def test_a_changed_hessian_is_left_aside_with_a_note(tmp_path: Path) -> None:
    text = text_of("qchem51_water_freq.out")
    start = text.index(" Hessian of the SCF Energy")
    changed = text[:start] + text[start:].replace("0.4148874", "0.4248874", 1)
    m = read_text(tmp_path, changed, with_hessian=True)
    assert m.hessian_hartree_bohr2 is None
    assert "hessian-unused" in codes(m, "note")
    assert not refusals(m.findings)


@needs_shared
@pytest.mark.parametrize(
    "name", ["gaussian16_dvb_freq.fchk", "molpro2012_dvb_freq.out", "nwchem702_dvb_freq.out", "qchem51_water_freq.out"]
)
def test_outside_hessians(name: str) -> None:
    assert SHARED is not None
    m = read(SHARED / "outputs" / name)
    assert largest_difference(own(m), m.wavenumbers_cm1) < 0.05


@needs_shared
def test_the_modes_of_cfour_are_taken_as_mass_weighted() -> None:
    assert SHARED is not None
    m = read(SHARED / "outputs" / "cfour21_dvb_freq.c4")
    assert m.normal_modes is not None
    assert rebuilt_hessian(m.wavenumbers_cm1, m.normal_modes, m.masses_u, m.coordinates_A)[1] < 0.003


@needs_shared
def test_a_checkpoint_file_with_a_hessian_alone_gets_its_wavenumbers_from_it(tmp_path: Path) -> None:
    """As Gaussian 09 and Q-Chem write them: force constants and gradient, no modes."""
    assert SHARED is not None
    whole = SHARED / "outputs" / "gaussian16_dvb_freq.fchk"
    text = whole.read_text()
    assert text.index("Vib-") > text.index("Cartesian Force Constants")
    m, full = read_text(tmp_path, text[: text.index("Number of Normal Modes")]), read(whole)
    assert "modes-from-hessian" in codes(m, "note")
    assert m.kind == "frequency"
    assert largest_difference(m.wavenumbers_cm1, full.wavenumbers_cm1) < 0.001
    assert not refusals(m.findings)
    assert m.max_gradient_hartree_bohr == pytest.approx(4.738e-5, rel=1e-3)
    optimised = read_text(tmp_path, text[: text.index("Number of Normal Modes")].replace("Freq   ", "FOpt   ", 1))
    assert not optimised.wavenumbers_cm1.size  # the force constants may be those an optimiser estimated
