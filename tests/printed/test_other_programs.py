"""The remaining programs' own thermochemistry: what they print, from our model under their conventions.

Values printed by the programs stand in the table beside the outside outputs; each row names masses, pressure and
symmetry number the program used.  Where a program does something else than a rigid rotor with harmonic oscillators,
that is done here once more with numpy.
"""

from __future__ import annotations

import csv
from functools import cache

import numpy as np
import pytest
import scipy.constants as codata

from heatwright import ModelOptions, Molecule, ThermoModel, build_model, read_output
from heatwright.constants import GAS_CONSTANT_J_MOL_K as R
from heatwright.constants import HARTREE_KJ_MOL
from outside import SHARED, needs_shared

# Largest differences that the programs' printed digits leave: ZPE and H (microhartree), S (J/mol/K).
TOLERANCE = {
    "GAMESS-UK": (0.05, 0.1, 0.004),
    "Molpro": (0.1, None, None),
    "Turbomole": (0.1, None, None),
    "MOPAC": (0.5, 0.5, 0.001),
    "OpenMolcas": (0.3, 0.75, 0.004),
    "Jaguar": (0.5, 0.6, 0.001),
    "xTB": (0.03, 0.5, 0.006),
}
FILES = {
    "gamessuk70_dvb_freq.out": {},
    "molpro2012_dvb_freq.out": {},
    "turbomole59_dvb_freq/aoforce.out": {"charge": 0, "multiplicity": 1},
    "mopac2016_h2o_force.out": {},
    "mopac2206_methanol_force_thermo.out": {},
    "openmolcas18_dvb_freq_2imag.out": {},
    "jaguar70_dvb_cation_freq_2imag.out": {},
    "xtb651_methanol_ohess/meoh_ohess.out": {},
}
AVERAGE = {"Turbomole", "MOPAC", "xTB"}  # their default masses, not printed


@cache
def rows(file: str) -> list[dict[str, str]]:
    assert SHARED is not None
    with (SHARED / "printed_thermo.csv").open(encoding="utf-8") as stream:
        return [row for row in csv.DictReader(stream) if row["file"] == file]


@cache
def real_modes(file: str) -> Molecule:
    """The molecule with its imaginary modes left out, as these programs leave them out of ZPE, H and S."""
    assert SHARED is not None
    molecule = read_output(SHARED / "outputs" / file, **FILES[file])
    return molecule.but(wavenumbers_cm1=molecule.wavenumbers_cm1[molecule.wavenumbers_cm1 > 0.0])


def model_of(row: dict[str, str]) -> ThermoModel:
    options = ModelOptions(
        pressure_Pa=float(row["p_Pa_used"]),
        symmetry_number=int(row["symmetry_number"] or 1),
        optical_isomers=1,
        electronic="spin",
        masses="average" if row["program"] in AVERAGE else None,
    )
    return build_model(real_modes(row["file"]), options)


def interpolated_entropy_change(model: ThermoModel, T: float) -> float:
    """What the free-rotor interpolation below 50 1/cm (mean moment) changes in S, J/mol/K: xTB's vibrational entropy.

    The interpolation is that of S. Grimme, Chem. Eur. J. 18, 9955 (2012).
    """
    nu = model.molecule.wavenumbers_cm1 * 100.0 * codata.c
    x = codata.h * nu / (codata.k * T)
    harmonic = x / np.expm1(x) - np.log1p(-np.exp(-x))
    mu = codata.h / (8.0 * np.pi**2 * nu)
    mean = model.inertia.principal_moments_u_A2.mean() * codata.atomic_mass * 1e-20
    mu = mu * mean / (mu + mean)
    rotor = 0.5 + np.log(np.sqrt(8.0 * np.pi**3 * mu * codata.k * T / codata.h**2))
    weight = 1.0 / (1.0 + (50.0 / model.molecule.wavenumbers_cm1) ** 4)
    return float(R * ((1.0 - weight) * (rotor - harmonic)).sum())


def sackur_tetrode_change(model: ThermoModel, T: float) -> float:
    """What the rounded constants of xTB's translational entropy change, J/mol/K."""
    rounded = (2.2868 * (5.0 * np.log10(T) + 3.0 * np.log10(model.masses_u.sum())) - 2.3135) * 4.184
    exact = float(model.contributions[0].ln_q(np.array([T])).s_R[0]) * R
    return rounded - exact


@needs_shared
@pytest.mark.parametrize("file", FILES)
def test_printed_thermochemistry(file: str) -> None:
    checked = 0
    for row in rows(file):
        zpe_tolerance, h_tolerance, s_tolerance = TOLERANCE[row["program"]]
        model, T = model_of(row), float(row["T_K"] or 298.15)
        zpe = model.zpe_kJ_mol / HARTREE_KJ_MOL
        h = zpe + float(model.h_minus_h0_R(T)) * R / 1000.0 / HARTREE_KJ_MOL
        s = float(model.s_R(T)) * R
        if row["program"] == "xTB":
            s += interpolated_entropy_change(model, T) + sackur_tetrode_change(model, T)
        if row["program"] == "MOPAC":
            s -= R * np.log(model.molecule.multiplicity or 1)
        for got, printed, tolerance, unit in (
            (zpe, row["printed_zpe_hartree"], zpe_tolerance, 1e6),
            (h, row["printed_H_minus_E_hartree"], h_tolerance, 1e6),
            (s, row["printed_S_J_mol_K"], s_tolerance, 1.0),
        ):
            if printed and tolerance is not None and not (row["program"] == "OpenMolcas" and T > 473.2 and unit > 1.0):
                assert abs(got - float(printed)) * unit <= tolerance, (T, got, printed)
                checked += 1
    assert checked
