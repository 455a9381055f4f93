"""Lines that cclib's parsers need to be shown, so that they are not asked about every other one.

A parser compares each line with some hundred texts, which is nearly all of the time that reading takes.  Here a line
is shown to it only when it holds one of the program's marks: those that open a block with an attribute used here, and
those that set what such a block depends on.  All other lines are passed over by one search through the text; lines
inside a block are read by the block itself, whatever they hold.  When the attributes that a job promises are then
missing, :mod:`heatwright.reading.parsing` parses all lines after all; a test compares both ways on every output at
hand.

A mark is as long as it can be and does not begin with a blank, a digit or a dot, at which a search would stop all the
time.
"""

from __future__ import annotations

import re
from typing import Final

_MARKS: Final[dict[str, tuple[str, ...]]] = {
    "Gaussian": (
        "orientation:", "SCF Done", "Energy=", "Step number", "Optimization completed", "Optimization stopped",
        "Symbolic Z-", "Charge = ", "NAtoms=", "Nuclear Properties", "Harmonic freq", "Initial Parameters", "EUMP",
        "MP4(", "MP5 =", "DE(Corr)=", "T5(CCSD)=", "internal job step", "optimizations in scan", "potential surface",
        "Potential Surface", "Counterpoise:", "ONIOM:", "INPUT DATA FOR L", "Summary information for step",
        "Delta-x Convergence",
    ),
    "NWChem": (
        "Northwest Comp", 'Geometry "', "XYZ format geometry", "Atomic Mass", "Total SCF energy", "Total DFT energy",
        "Total MP2 energy", "Total CCSD", "total energy / hartree", "Projected ", "NWChem SCF Module",
        "General Information", "Optimization converged", "Failed to converge", "Atom information", "Step ", "@",
        "Charge  ", "multiplicity", "wavefunction", "Effective nuclear repulsion", "NWChem ",
    ),
    "ORCA": (
        "Program Version", "CARTESIAN COORDINATES", "INPUT FILE", "Total Charge", "Multiplicity", "SCF CONVERGED",
        "FINAL SINGLE POINT", "VIBRATIONAL FREQUENCIES", "NORMAL MODES", "Parameter Scan", "TRAJECTORY",
        "OPTIMIZATION", "SURFACE SCAN", "Surface Scan", "GEOMETRY", "HURRAY", "Number of atoms", "THERMOCHEMISTRY",
        "E(MP2)", "MP2 TOTAL", "E(CCSD", "Geometry convergence", "Total Energy  ", "COUPLED CLUSTER ENERGY",
        "SCF NOT CONVERGED", "optimization did not converge", "Density Functional",
    ),
    "QChem": (
        "Q-Chem", "User input", "Standard Nuclear Orientation", "Total energy in the final", "VIBRATIONAL ANALYSIS",
        "VIBRATIONAL FREQUENCIES", "Nuclear Repulsion Energy", "$molecule", "$rem", "total energy", "OPTIMIZATION",
        "PES scan", "STANDARD THERMODYNAMIC", "Coordinates (Angstroms)", "alpha and", "Job ", "Running Job",
        "MP2 energy", "from converged MOs on fragments", "CP correction for fragment", "SCF on isolated fragments",
        "correction on fragments", "Optimization Cycle",
    ),
    "Psi4": (
        "Geometry (in ", "Psi4 ", "PSI4", "Git", "==>", "Final Energy", "Total Energy", "total energy",
        "Vibrational Analysis", "Final optimized geometry", "Convergence Check", "Molecular point group",
        "Nuclear repulsion", "DF-MP2", "Convergence", "optimization", "Optimization", "multiplicity", "tstart",
        "finite difference", "finite-difference", "Finite Difference", "FINDIF", "Open-Source", "Optimizer:",
        "Number of atoms",
    ),
    "GAMESS": (
        "GAMESS", "Firefly", "ENERGY IS", "NORMAL COORDINATE ANALYSIS", "COORDINATES (", "CHARGE OF MOLECULE",
        "TOTAL NUMBER OF ATOMS", "SPIN MULTIPLICITY", "EQUILIBRIUM GEOMETRY", "GEOMETRY SEARCH", "MP2 CORRELATION",
        "RESULTS", "E(MP2)",
        "CCSD", "NSERCH", "OPTTOL", "RUNTYP", "COORDINATES OF ALL ATOMS", "MODES ", "SCHWARZ INEQUALITY TEST SKIPPED",
        "CCD ENERGY:", "MBPT(2) ENERGY:", "MAXIMUM GRADIENT", "RMS GRADIENT", "MOMENTS",
    ),
    "FChk": (
        "Info1-9", "Charge  ", "Multiplicity  ", "Atomic numbers", "Current cartesian coordinates", "SCF Energy",
        "Job Status", "Number of inde", "QEq coupling tensors", "Real atomic weights", "Cartesian Forces",
        "Number of Normal Modes", "Vib-E2", "Vib-Modes",
    ),
    "Molpro": (
        "ATOMIC COORDINATES", "NUMBER OF ELECTRONS", "Normal Modes", "!RHF", "!UHF", "!RKS", "!MP2", "MP2:",
        "MP3(D):", "PROGRAM * CCSD",
    ),
    "GAMESSUK": (
        "total number of", "molecular geometry", "nuclear coordinates", "normal mode",
        "normalised normal coordinates", "total energy", "mp2 correlation energy", "order perturbation energy",
    ),
    "CFOUR": (
        "CHARGE               ICHRGE", "MULTIPLICTY          IMULTP", "SCF_CONV             ISCFCV",
        "A miracle has come to pass", "1 entries found in Z-matrix", "NUCLEAR CHARGE:",
        "NUCLEAR COORDINATES (IN A.U.)", "Coordinates used in calculation (QCOMP)", "Iteration         Total Energy",
        "Normal Coordinate", "Total MP2 energy", "D-MBPT(3)", "Total MBPT(4)",
    ),
    "Molcas": (
        "Start Module: gateway", "Start Module: ccsdt", "Cartesian Coordinates / Bohr", "olecular charge ",
        "Total SCF energy", "Total KS-DFT energy", "Harmonic frequencies in cm-1",
        "Nuclear coordinates for the next iteration", "Nuclear coordinates of the final structure",
        "Total MBPT2 energy", "Basis set information:",
    ),
    "Jaguar": (
        "net molecular charge", "Geometry scan step", "new geometry", "Symmetrized geometry", "Input geometry",
        "SCFE: SCF energy:", "Total LMP2 Energy", "Geometry optimization complete", "eometry optimization step",
        "start of program freq",
    ),
    "XTB": (
        "program call", "coordinate file", "total charge", "CYCLE", "final structure:", "covCN", "Mulliken/CM5",
        "TOTAL ENERGY", "Frequency Printout",
    ),
    "MOPAC": (
        "NUMBER", "CHARGE ON SYSTEM", "SPIN STATE DEFINED", "FINAL HEAT OF FORMATION", "VIBRATION",
    ),
    "DALTON": (
        "Isotopic Masses", "Wave function", "Vibrational Freq", "Atoms and basis", "Final", "eometry",
        "number of atoms", "harge", "ultiplicity", "Normal Coord", "Dalton", "DALTON", "nergy", "oordinates",
        "Starting in ", "SUMMARY OF COUPLED CLUSTER", "Optimization Control Center", "INTGRL", "ATOMBASIS",
    ),
    "ADF": (
        "Coordinates (Cartesian)", "ATOMS", "List of All Freq", "Net Charge", "Vibrations and Normal", "CONVERGED",
        "CREATE", "Create", "Total Bonding Energy", "G E O M E T R Y", "Coordinates in ", "Amsterdam", "A D F",
        "Geometry", "GEOMETRY", "Symmetry", "S F O s", "Fragment", "Spin polar",
    ),
}  # fmt: skip


def shown_lines(parser: str) -> re.Pattern[str] | None:
    """A pattern that the lines worth showing to a parser class contain; None when it is to see all of them."""
    marks = _MARKS.get(parser)
    return re.compile("|".join(re.escape(mark) for mark in marks)) if marks else None
