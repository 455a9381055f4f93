"""Relaxed scans that are one output of ORCA or xTB.

No ORCA output of a relaxed scan is at hand.  The one here is written in the layout of ORCA 5 that cclib's parser
documents in its comments (scan head, step boxes, optimisation cycles, final evaluation, table of results), with the
blocks of a real rigid scan for the rest, around the torsion of H2O2 with the published potential 993 cos φ + 636 cos 2φ
+ 44 cos 3φ (J. M. Hunt et al., J. Chem. Phys. 42, 1931 (1965), from memory).  The xTB scan is a real one.
"""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from heatwright.constants import HARTREE_CM1
from heatwright.findings import Refused
from heatwright.partition.scans import wished
from heatwright.reading.outputs import read_output
from heatwright.reading.parsing import parse
from heatwright.reading.text import Text
from heatwright.reading.torsion_scans import TorsionScan, read_torsion
from outside import SHARED, needs_shared

ANGLES = np.arange(0.0, 361.0, 30.0)
SYMBOLS = ("H", "O", "O", "H")
BOHR_A = 0.529177210903

HEAD = """
                                        *****************
                                        * O   R   C   A *
                                        *****************

                         Program Version 5.0.1 -  RELEASE  -

----- Orbital basis set information -----
Your calculation utilizes the basis: def2-SVP

================================================================================
                                       INPUT FILE
================================================================================
NAME = h2o2.inp
|  1> ! B3LYP def2-SVP Opt
|  2> %geom Scan D 0 1 2 3 = 0, 360, {points} end end
|  3> * xyz 0 1
|  4>                          ****END OF INPUT****
================================================================================

                       ******************************
                       *    Relaxed Surface Scan    *
                       ******************************

        Dihedral (  3,   2,   1,   0):   range=   0.00000000 .. 360.00000000  steps =   {points}

There is 1 parameter to be scanned.
There will be   {points} constrained geometry optimizations.


"""
STEP = """
         *************************************************************
         *               RELAXED SURFACE SCAN STEP {step:3d}               *
         *                                                           *
         *   Dihedral (  3,   2,   1,   0)  : {angle:12.8f}           *
         *************************************************************

Geometry optimization settings:
Update method            Update   .... BFGS
Choice of coordinates    CoordSys .... Z-matrix Internals
Initial Hessian          InHess   .... Almoef's Model

Convergence Tolerances:
Energy Change            TolE     ....  5.0000e-06 Eh
Max. Gradient            TolMAXG  ....  3.0000e-04 Eh/bohr
RMS Gradient             TolRMSG  ....  1.0000e-04 Eh/bohr
Max. Displacement        TolMAXD  ....  4.0000e-03 bohr
RMS Displacement         TolRMSD  ....  2.0000e-03 bohr
"""
CYCLE = """
         *************************************************************
         *                GEOMETRY OPTIMIZATION CYCLE {cycle:3d}            *
         *************************************************************
"""
CONVERGENCE = """
          ----------------------|Geometry convergence|-------------------------
          Item                value                   Tolerance       Converged
          ---------------------------------------------------------------------
          RMS gradient        0.0000313000            0.0001000000      {yes}
          MAX gradient        0.0000553000            0.0003000000      {yes}
          RMS step            0.0005961000            0.0020000000      {yes}
          MAX step            0.0013245000            0.0040000000      {yes}
          ........................................................
          Max(Bonds)      0.0001      Max(Angles)    0.02
          Max(Dihed)        0.00      Max(Improp)    0.00
          ---------------------------------------------------------------------
"""
CONVERGED = """
                    ***********************HURRAY********************
                    ***        THE OPTIMIZATION HAS CONVERGED     ***
                    *************************************************
"""
FINAL = """
                 *******************************************************
                 *** FINAL ENERGY EVALUATION AT THE STATIONARY POINT ***
                 ***               (AFTER    2 CYCLES)               ***
                 *******************************************************
"""
ENERGY = """
Hamiltonian:
 Density Functional     Method          .... DFT(GTOs)
 LDA part of GGA corr.  LDAOpt          .... VWN-5

General Settings:
 Hartree-Fock type      HFTyp           .... RHF
 Total Charge           Charge          ....    0
 Multiplicity           Mult            ....    1

               *****************************************************
               *                     SUCCESS                       *
               *           SCF CONVERGED AFTER   9 CYCLES          *
               *****************************************************

----------------
TOTAL SCF ENERGY
----------------

Total Energy       :         {scf:.8f} Eh           {ev:.5f} eV

---------------
SCF CONVERGENCE
---------------

  Last Energy change         ...    3.8623e-09  Tolerance :   1.0000e-06
  Last MAX-Density change    ...    2.6645e-15  Tolerance :   1.0000e-05
  Last RMS-Density change    ...    1.3614e-16  Tolerance :   1.0000e-06

-------------------------------------------------------------------------------
                          DFT DISPERSION CORRECTION
Dispersion correction           {dispersion:.9f}

-------------------------   --------------------
FINAL SINGLE POINT ENERGY      {final:.12f}
-------------------------   --------------------
"""
TAIL = """
                         SUMMARY OF THE CALCULATED SURFACE

----------------------------
RELAXED SURFACE SCAN RESULTS
----------------------------

Column   1: NONAME

The Calculated Surface using the 'Actual Energy'
{rows}

The Calculated Surface using the SCF energy
{rows}

                             ****ORCA TERMINATED NORMALLY****
TOTAL RUN TIME: 0 days 0 hours 3 minutes 45 seconds 367 msec
"""


def geometry(angle: float, off: float) -> np.ndarray:
    """H2O2; the O-O-H angle follows the dihedral angle, and *off* (Å) moves the hydrogen atoms out on their bonds."""
    phi, bend, r = np.radians(angle), np.radians(100.0 + 3.0 * np.cos(np.radians(angle))), 0.967 + off
    s, c = r * np.sin(bend), r * np.cos(bend)
    return np.array([[s, 0, c], [0, 0, 0], [0, 0, 1.456], [s * np.cos(phi), s * np.sin(phi), 1.456 - c]])


def energy(angle: float) -> float:
    x = np.radians(angle)
    return -151.5 + (993.0 * np.cos(x) + 636.0 * np.cos(2 * x) + 44.0 * np.cos(3 * x)) / HARTREE_CM1


def evaluation(angle: float, off: float) -> str:
    x, dispersion = geometry(angle, off), -0.0003 - 0.0001 * np.cos(np.radians(angle))
    total = energy(angle) + 5.0 * off
    angstroem = "\n".join(f"  {s} {a:13.6f} {b:11.6f} {c:11.6f}" for s, (a, b, c) in zip(SYMBOLS, x, strict=True))
    masses = {"O": (8.0, 15.999), "H": (1.0, 1.008)}
    bohr = "\n".join(
        "{:4d} {} {:10.4f}    0 {:9.3f}{:12.6f}{:12.6f}{:12.6f}".format(i, s, *masses[s], a, b, c)
        for i, (s, (a, b, c)) in enumerate(zip(SYMBOLS, x / BOHR_A, strict=True))
    )
    dashes = 33 * "-"
    tables = (
        f"{dashes}\nCARTESIAN COORDINATES (ANGSTROEM)\n{dashes}\n{angstroem}\n\n"
        f"{dashes[:28]}\nCARTESIAN COORDINATES (A.U.)\n{dashes[:28]}\n"
        f"  NO LB      ZA    FRAG     MASS         X           Y           Z\n{bohr}\n"
    )
    scf = total - dispersion
    return tables + ENERGY.format(scf=scf, ev=scf * 27.2113834, dispersion=dispersion, final=total)


def orca_scan(change: Callable[[int, str], str] = lambda _, text: text, steps: int = len(ANGLES)) -> str:
    """The output, each step after *change* with its number."""
    parts = [HEAD.format(points=len(ANGLES))]
    for step, angle in enumerate(ANGLES[:steps], start=1):
        cycles = "".join(
            CYCLE.format(cycle=cycle) + evaluation(angle, off) + CONVERGENCE.format(yes="YES" if off == 0.0 else "NO ")
            for cycle, off in ((1, 0.02), (2, 0.0))
        )
        text = STEP.format(step=step, angle=angle) + cycles + CONVERGED + FINAL + evaluation(angle, 0.0)
        parts.append(change(step, text))
    rows = "\n".join(f" {angle:12.8f} {energy(angle):.8f}" for angle in ANGLES)
    return "".join([*parts, TAIL.format(rows=rows)])


def written(folder: Path, text: str) -> str:
    path = folder / "h2o2_scan.out"
    path.write_text(text)
    return str(path)


def test_what_orca_prints_is_taken_for_a_relaxed_scan(tmp_path: Path) -> None:
    molecule = read_output(written(tmp_path, orca_scan()))
    assert molecule.kind == "relaxed scan"
    assert (molecule.charge, molecule.multiplicity, molecule.source.program) == (0, 1, "ORCA")
    assert molecule.level is not None
    assert molecule.level.label == "B3LYP/def2-SVP"
    assert not [f for f in molecule.findings if f.severity == "refuse"]


def test_cclib_knows_the_layout() -> None:
    parsed = parse("ORCA", [Text.of(orca_scan())], skip=False)
    assert parsed.mishaps == ()
    assert [words.split("(")[0].strip() for words in parsed.values["scannames"]] == ["Dihedral"]
    assert np.ravel(parsed.values["scanparm"]).tolist() == ANGLES.tolist()
    assert len(parsed.values["scanenergies"]) == len(ANGLES)
    assert len(parsed.values["atomcoords"]) == 3 * len(ANGLES)


def test_points_of_an_orca_scan(tmp_path: Path) -> None:
    path = written(tmp_path, orca_scan())
    scan = read_torsion(path)
    assert isinstance(scan, TorsionScan)
    assert len(scan.molecules) == len(ANGLES)
    for point, angle in zip(scan.molecules, ANGLES, strict=True):
        # the end of the optimisation, and the energy with dispersion
        np.testing.assert_allclose(point.coordinates_A, geometry(angle, 0.0), atol=1e-6)
        assert point.energy_hartree == pytest.approx(energy(angle), abs=1e-11)
    made = wished(scan.molecules[0], scan)
    assert made.bond.label == "1-2-3-4"
    assert made.potential.cosine_cm1[:3] == pytest.approx((993.0, 636.0, 44.0), abs=0.01)
    assert made.fit is not None
    assert made.fit.rms_cm1 < 0.01
    named = wished(scan.molecules[0], read_torsion(f"4-3-2-1 {path}"))
    assert named.potential.barrier_cm1 == pytest.approx(made.potential.barrier_cm1)
    assert read_torsion(str(tmp_path)).energies_cm1.tolist() == scan.energies_cm1.tolist()  # a folder with one scan


def fault(path: str) -> str:
    with pytest.raises(Refused) as stopped:
        read_torsion(path)
    return "; ".join(f.text for f in stopped.value.findings)


def test_orca_scans_with_faults(tmp_path: Path) -> None:
    def unconverged(step: int, text: str) -> str:
        return text.replace(CONVERGED + FINAL, "") if step == 5 else text

    words = fault(written(tmp_path, orca_scan(unconverged)))
    assert "point 5 of the scan is not converged" in words
    line = next(i for i, row in enumerate(orca_scan(unconverged).splitlines(), 1) if "SCAN STEP   5" in row)
    assert f"h2o2_scan.out:{line}" in words
    words = fault(written(tmp_path, orca_scan(steps=9)))
    assert "the scan has 9 points; expected the 13 that it announces" in words

    def without_energies(step: int, text: str) -> str:
        return text.replace("FINAL SINGLE POINT ENERGY", "NO ENERGY") if step == 3 else text

    assert "point 3 of the scan has no energy with a geometry" in fault(written(tmp_path, orca_scan(without_energies)))
    several = orca_scan().replace("There is 1 parameter to be", "There are 2 parameters to be")
    assert "turns several coordinates" in fault(written(tmp_path, several))


@needs_shared
def test_an_xtb_scan(tmp_path: Path) -> None:
    # GFN2-xTB, 0 to 180 degrees; the cis barrier is the first point's.
    assert SHARED is not None
    folder = SHARED / "outputs" / "xtb651_h2o2_relaxed_torsion_scan"
    output, points = folder / "h2o2_scan.out", folder / "xtbscan.log"
    for path in (output, folder):
        scan = read_torsion(str(path))
        assert isinstance(scan, TorsionScan)
        assert len(scan.molecules) == 13
        assert scan.molecules[0].energy_hartree == pytest.approx(-9.041208773352, abs=1e-12)
        made = wished(scan.molecules[0], scan)
        assert made.potential.barrier_cm1 == pytest.approx(2954.3, abs=1.0)
    assert "Give the output of the run" in fault(str(points))
    alone = shutil.copy(output, tmp_path)
    assert "there is none beside" in fault(str(alone))
    lines = points.read_text().splitlines(keepends=True)
    log = tmp_path / "xtbscan.log"
    log.write_text("".join(lines[:-6]))
    assert "the energies of its 12 frames are not the 13 of the scan" in fault(str(alone))
    log.write_text("".join(lines).replace("H    ", "F    "))
    assert "frame 1 does not hold an energy and the atoms of the output" in fault(str(alone))
    log.write_text("".join(lines).replace("-9.0412", "-9.0512"))
    assert "are not the 13 of the scan" in fault(str(alone))
