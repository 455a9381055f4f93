"""Findings: what was noticed about an input, in one form for people and for scripts.

A finding names *where* (file, line, atom or mode), *what was found*, *what was expected* and *what to do*.  Its code is
registered in :data:`CODES`, the one table of everything heatwright can say about an input.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Final, Literal

from heatwright.errors import HeatwrightError

Severity = Literal["refuse", "warn", "note"]

SEVERITY_WORD: Final[dict[str, str]] = {"refuse": "error", "warn": "warning", "note": "note"}
"""How each severity opens its line on the terminal."""

CODES: Final[dict[str, str]] = {
    # --- the file -------------------------------------------------------------------------------------------------
    "file-missing": "The path names no readable file.",
    "file-empty": "The file holds no bytes.",
    "not-an-output": "The text is not the output of a quantum-chemistry program that heatwright reads.",
    "parser-failed": "The output was recognised, but its text could not be read through to the end.",
    "file-too-large": "The file is larger than what is read, as it stands or unpacked.",
    "several-files": "The archive holds more than one file.",
    "truncated": "The output ends before the data that are needed.",
    "no-normal-termination": "The program's own closing line is missing, although the data needed are all there.",
    "job-failed": "The program itself says that the job failed.",
    "several-molecules": "The file holds jobs for more than one molecule; one of them has to be chosen.",
    "isomers": "The file holds vibrational analyses of two isomers; one of them has to be chosen.",
    "several-jobs": "The file holds several jobs; which of them was read is said.",
    "not-a-number": "A value that is needed is NaN or infinite.",
    "molecule-file-wrong": "A molecule file holds an unknown key, a value of a wrong kind or a contradiction.",
    "manifest-wrong": "A manifest holds an unknown key, a value of a wrong kind or a contradiction.",
    "glob-empty": "A glob in a manifest finds no file.",
    "include-cycle": "Manifests include each other in a circle.",
    "file-twice": "One file is used for two species, or twice for one.",
    "outside-project": "A path leads out of the project, which is confined to its folder.",
    "table-wrong": "A table written by the user lacks a column, or a row of it holds what cannot be used.",
    "smiles-wrong": "A SMILES text cannot be read.",
    "qcschema-wrong": "A QCSchema result lacks a part that is needed, or a part has a wrong shape.",
    # --- what the job gives ---------------------------------------------------------------------------------------
    "no-frequencies": "There are no vibrational modes in the output, so there is no thermochemistry to compute.",
    "no-geometry": "There is no geometry in the output.",
    "no-energy": "There is no total energy in the output.",
    "no-charge": "The output does not state the molecule's charge.",
    "no-multiplicity": "The output does not state the spin multiplicity.",
    "energy-not-total": "The printed energy is not a total energy (but a heat of formation or a bond energy).",
    "masses-from-table": "The output does not print the atomic masses; those of the most abundant isotopes were taken.",
    "average-masses": "The output used average atomic weights instead of isotopic masses.",
    "non-default-isotope": "An atom has a mass that is neither its most abundant isotope's nor its average weight.",
    "ghost-atoms": "The output holds ghost or dummy atoms.",
    "atoms-disagree": "Geometry, atoms, masses and modes in the output do not describe the same molecule.",
    "multiplicity-impossible": "The spin multiplicity cannot belong to this number of electrons.",
    "hessian-unused": "The printed Hessian does not give the printed wavenumbers, so it was left aside.",
    "modes-from-hessian": "No wavenumbers are printed; they were computed from the printed Hessian.",
    # --- is it a minimum ------------------------------------------------------------------------------------------
    "imaginary-modes": "The structure is not a minimum: there are imaginary modes.",
    "mode-count": "The number of vibrational modes is not 3N−6 (3N−5 for a linear molecule).",
    "not-stationary": "The geometry of the frequencies is not a stationary point.",
    "printed-values-differ": "The output's own zero-point energy, enthalpy or entropy does not follow from its modes.",
    "geometry-differs": "The geometry of the frequencies is not the one of the energy.",
    "nearly-linear": "The molecule is almost but not quite linear.",
    "fragments": "The structure consists of parts that are not bonded to each other.",
    "high-wavenumber": "A vibrational mode has a higher wavenumber than any molecule's.",
    "zero-wavenumber": "A vibrational mode has no or nearly no wavenumber.",
    # --- is it a free molecule in its ground state ----------------------------------------------------------------
    "solvent": "The molecule was computed in a continuum solvent.",
    "external-field": "The molecule was computed in an external field or among point charges.",
    "constraints": "Atoms were frozen or coordinates constrained.",
    "excited-state": "Geometry and modes are those of an excited electronic state.",
    "spin-contamination": "The expectation value of S² is not that of the spin state.",
    "job-conditions": "The job's own thermochemistry is for another temperature or pressure.",
    "program-scale": "The program multiplied the wavenumbers by a scale factor of its own.",
    # --- scans ----------------------------------------------------------------------------------------------------
    "rigid-scan": "The scan was done without relaxing the rest of the molecule; it is no torsional potential.",
    "scan-unreadable": "A file or folder does not hold the scan of a torsion in a form that can be read.",
    "scan-unfit": "The points of a scan are too few, not periodic, or do not have the symmetry of the top.",
    "scan-of-another": "A scan belongs to another molecule, charge, multiplicity or level of theory.",
    "scan-lower-minimum": "A scan finds a lower minimum than the geometry of the frequencies.",
    # --- torsions -------------------------------------------------------------------------------------------------
    "torsion": "A torsion was treated as a hindered rotor; its potential and what it changes are said.",
    "torsion-impossible": "A torsion was asked for where nothing can turn, or more of them than there are low modes.",
    "torsion-overlap": "The projected torsion is not what the low modes of the molecule do.",
    "torsion-equivalent": "A torsion was treated, and another one that is equivalent to it was not.",
    "torsion-counted-twice": "A torsional potential holds configurations that are, or would be, counted otherwise too.",
    "torsion-classical": "A heavy top was treated classically (Pitzer and Gwinn), without its levels.",
    "torsion-check": "The sum over torsional levels and the form of Pitzer and Gwinn differ more than they should.",
    # --- choices made for the user --------------------------------------------------------------------------------
    "symmetry-ambiguous": "The geometry is close to a symmetry not accepted, or only just fits the accepted one.",
    "given-by-hand": "A part of the molecule was written down by hand; its source is said.",
    "user-value": "A value was given by the user and replaces what the output or the geometry says.",
    "spin-degeneracy": "No electronic levels are known for the species; the spin degeneracy 2S+1 was taken.",
    "linear-radical": "A linear open-shell molecule outside the table: its spatial degeneracy is not known.",
    "atom-not-ground-state": "An atom is not in the multiplicity of its ground state.",
    "published-scale": "Published scale factors were taken; which, and what another choice would change, is said.",
    "no-published-scale": "No scale factors are published for the level of theory.",
    "unscaled": "Wavenumbers and zero-point energy were used as computed, without a scale factor.",
    "conformer-differs": "An output given as a conformer is of another composition, charge, multiplicity or isomer.",
    "conformer-merged": "Two outputs are one and the same conformer; it counts once.",
    "conformer-mirror": "Mirror images were given one by one, and optical isomers count them already.",
    "conformers-and-torsion": "Conformers were given beside a torsion whose whole turn may hold them already.",
    "conformers-alike": "Two conformers have nearly the same geometry, but not the same energy.",
    "conformer-not-lowest": "The first output is not the lowest conformer.",
    "uncertainty-nonlinear": "The stated input uncertainties are too large for linear propagation.",
    "name-from-formula": "The file's name cannot serve as a species name, so the formula was taken.",
    "source-not-stated": "An enthalpy of formation was given without its source.",
    "isotopes": "Isotopes were exchanged; the wavenumbers were computed anew from the force constants.",
    "energy-from-file": "The electronic energy was taken from a separate output at the same geometry.",
    "energy-of-another": "A separate energy does not belong to the molecule or geometry of the frequencies.",
    "anharmonic-unused": "Anharmonic fundamentals are printed; the harmonic wavenumbers were used.",
    "anharmonic": "Anharmonic fundamentals and zero-point energy were used, as asked for.",
    "no-anharmonic": "Anharmonic values were asked for, and the output has none that can be used.",
    "low-modes": "Low modes were not treated as harmonic oscillators; what that moves is said mode by mode.",
    "rotation": "Rotation was corrected or summed up over its levels, or was to be and cannot be.",
    "level-sum": "Degrees of freedom were summed up together over real levels, or were to be and cannot be.",
    "no-such-atom": "An isotope was asked for at an atom that is not there or is another element.",
    "no-force-constants": "The output cannot give the force constants that another isotope needs.",
    # --- formation ------------------------------------------------------------------------------------------------
    "no-formation": "An entry needs an enthalpy of formation and there is no way to it.",
    "level-differs": "Energies that have to be combined were not computed at the same level of theory.",
    "level-trusted": "Energies of different programs or levels were combined because the user said so.",
    "level-unknown": "A part of the level of theory is not printed, so it could not be compared.",
    "atom-missing": "There is no atom output for an element of the molecule.",
    "atom-twice": "Two outputs hold the same atom, and they disagree.",
    "no-uncertainty": "The route to the enthalpy of formation has an error that it cannot state.",
    "no-output": "An entry has no output in the folder that it could be compared by.",
    "reference-unknown": "An output in the folder of references is none of the species with an evaluated enthalpy.",
    "reference-not-ground-state": "A reference output is not in the state that its evaluated enthalpy belongs to.",
    "own-reference": "The species is itself among the references and was left out of them.",
    "conformer-passed-over": "A reference species is there as several conformers; the lowest one is the reference.",
    "references-few": "There are too few reference species for the route.",
    "network-coverage": "The species has a bond that no reference has.",
    "network-check": "Each reference was predicted from all the others; how well that went is said.",
    "reaction": "The reaction that the enthalpy of formation comes from.",
    "reaction-wrong": "A reaction names a species that is not there or is ambiguous, or the species on both sides.",
    "reaction-unbalanced": "A reaction does not balance elements, bonds by type or unpaired electrons.",
    "no-reaction": "No balanced reaction of the species with the references was found.",
    "route": "Which routes to the enthalpy of formation could be gone, and what each of them gives.",
    "routes-disagree": "Two routes to one enthalpy of formation differ by more than their joint uncertainty.",
    "energy-implausible": "An energy is off by more than a bond.",
    "no-reference": "There is no reference enthalpy for an element or species.",
    "energy0-incomplete": "Stated 0 K energies do not cover a molecule and all its atoms at one level.",
    "reference-replaced": "A reference enthalpy of the user stands in the place of the built-in one.",
    "bonding-unclear": "The geometry does not say which bonds the molecule has, or no Lewis structure fits it.",
    # --- fitting and writing --------------------------------------------------------------------------------------
    "temperature-range": "The temperatures asked for cannot carry a two-range polynomial anchored at 298.15 K.",
    "cp-not-positive": "The fitted heat capacity is zero or negative somewhere in the range.",
    "cp-above-classical": "The fitted heat capacity exceeds the classical limit by more than the fit error.",
    "fit-coarse": "The polynomial cannot follow the heat capacity, whichever coefficients it has.",
    "fit-not-closest": "The fit is farther from the heat capacity than the best polynomial of this kind needs to be.",
    "name-unfit": "The species name does not fit the format's field or cannot be read back from it.",
    "value-unfit": "A number does not fit its fixed field.",
    "duplicate-name": "Two species of one output file would carry the same name.",
    "target-exists": "The file to be written exists already.",
    "target-unwritable": "The file to be written cannot be written.",
    "template-failed": "The user's template could not be rendered.",
    "no-matplotlib": "Figures as PNG or PDF need matplotlib, which is not installed.",
    "document-wrong": "A JSON document of entries lacks a key, or a value of it is not what it should be.",
    # --- a mechanism as a build -----------------------------------------------------------------------------------
    "lock-wrong": "A lock file is no TOML, or holds an unknown, missing or wrong value.",
    "lock-newer": "A lock file was made by a newer version of heatwright.",
    "store-set-aside": "The store of a build is damaged or of another version; it was renamed and is made anew.",
    "store-off": "The store of a build cannot be read or written; the build goes on without it.",
    "pressures-mixed": "The species of one mechanism have different standard pressures.",
    "scheduler-unfit": "The scheduler that was to do the work cannot be used.",
    "worker-lost": "The process that read a file died, each time it was tried.",
    "file-changed": "A file changed while it was being read.",
    "task-broke": "Reading a file or making an entry ended in an error that should not happen.",
    # --- existing entries: reading --------------------------------------------------------------------------------
    "no-entries": "The file holds no thermo entry.",
    "no-such-entry": "The file has no entry of a name, or several.",
    "yaml-unreadable": "A part of a YAML file is not YAML, or a part of YAML that thermo files do not use.",
    "yaml-entry-wrong": "A species of a YAML file lacks a part that is needed, or a part has a wrong shape.",
    "record-lines": "A line of a fixed record is missing, out of order, or has not its digit in column 80.",
    "record-columns": "Something stands in columns of a fixed record where it does not belong.",
    "record-ascii": "A fixed record holds a character outside ASCII.",
    "coefficient-wrong": "A coefficient cannot be read: blank, shifted, cut off or not a number.",
    "exponent-form": "The exponent of a coefficient has three digits or no letter; some readers cut it or stop.",
    "name-ambiguous": "Readers differ in the name they take from an entry.",
    "name-case": "A mechanism and its thermo entry write a species in different case.",
    "composition-wrong": "The elements or counts of an entry cannot be read, contradict each other, or are not there.",
    "composition-form": "Elements are written in a form that other readers stop at or leave out.",
    "fifth-element": "A fifth element stands in columns that many readers do not look at.",
    "fractional-count": "The count of an element is not a whole number; many readers cut the fraction off.",
    "temperature-default": "An end of the range is blank, and the file's default was taken.",
    "common-temperature-blank": "The record has no common temperature, and the file's default was taken.",
    "molar-mass-field": "The molar mass stands where the common temperature belongs.",
    "temperature-order": "The temperatures of an entry are not ascending.",
    "defaults-missing": "The THERMO section has no line of default temperatures.",
    "range-missing": "One of the two ranges has no coefficients.",
    "ranges-swapped": "The coefficients of the low and of the high range have changed places.",
    "all-zero": "All coefficients of an entry are zero.",
    "one-range": "One set of coefficients serves the whole range.",
    "other-model": "A species has another thermo model, or none; it was passed over.",
    # --- existing entries: auditing -------------------------------------------------------------------------------
    "composition-mismatch": "Composition, name, molar mass or charge of an entry contradict each other.",
    "jump-cp": "The heat capacity jumps at the common temperature.",
    "jump-h": "The enthalpy jumps at the common temperature.",
    "jump-s": "The entropy jumps at the common temperature.",
    "jump-slope": "The heat capacity has a kink at the common temperature.",
    "meets-elsewhere": "The two ranges meet at another temperature than the common one.",
    "range-start": "The range starts above 298.15 K.",
    "range-end": "The range ends below the temperatures of flames.",
    "cp-below-least": "The heat capacity is below that of translation and rotation.",
    "cp-falls": "The heat capacity falls with temperature by more than vibrations can do.",
    "entropy-implausible": "The entropy at 298.15 K is out of what mass and number of atoms allow.",
    "cp-implausible": "The heat capacity at 298.15 K is out of what the number of atoms allows.",
    "enthalpy-implausible": "The enthalpy of formation binds the atoms more or less than any molecule's.",
    "element-enthalpy": "An element in its reference state has an enthalpy of formation.",
    "stated-enthalpy": "The enthalpy printed after the coefficients is not theirs.",
    "unit-mistake": "Values are right but for a factor between units.",
    "one-atmosphere": "The entropy looks like one at 1 atm.",
    "pressure-not-stated": "Entries state no standard pressure, or different ones.",
    "duplicate-entry": "A species is there twice, or in different case.",
    "same-coefficients": "Two species have the same coefficients.",
    "differs-from-published": "A value differs from a published one by more than the usual accuracy.",
    "differs-from-release": "An entry differs from the computed one by more than the usual accuracy.",
    "mended": "An entry was refitted; what changed is said.",
    "not-mendable": "An entry is faulty, and mending cannot put it right.",
    "not-in-release": "Entries have no partner in the release they are compared with.",
    # --- what changed, and back into the mechanism ----------------------------------------------------------------
    "no-release": "A folder holds no release, or the files of a release contradict each other.",
    "pressure-differs": "Entries for different standard pressures were compared, or were to be put into one file.",
    "entry-edited": "An entry of a release is not the one that the lock file records.",
    "not-remade": "A species of a release could not be made again, or not the same; only the release is shown.",
    "made-from-others": "A species of a release comes out the same, but not from the same files or choices.",
    "enthalpy-scale": "Two files count enthalpies from different zeros for the elements; no reaction notices.",
    "mechanism-wrong": "The phases, sections or equations of a mechanism cannot be read, or contradict each other.",
    "mechanism-choice": "Which reactions of a mechanism were taken is said.",
    "not-in-mechanism": "A species whose entry changed is in no reaction of the mechanism.",
    "no-flame": "The flame temperature cannot be computed; why is said.",
    "other-species": "Two entries of one name have different elements or counts.",
    "comment-kept": "Comment lines above a replaced entry were kept; they may speak of the old one.",
    "splice-failed": "A file with new entries did not read back as it should, so it was not written.",
    "not-declared": "A species was added to a file whose mechanism does not declare it.",
}
"""Every code a finding may carry, and what it means."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing noticed about an input.

    severity : ``refuse`` (cannot be used), ``warn`` (used, but look at it) or ``note`` (a choice that was made).
    code : a key of :data:`CODES`.
    found : what was found, as the start of a sentence without a full stop.
    where : file, line, atom or mode; empty when the file as a whole is meant and is named by the caller.
    expected : what was expected, or empty.
    action : what to do, a whole sentence, or empty.
    excerpt : the line that is meant with carets below it, or empty; the terminal shows it under the sentence.
    """

    severity: Severity
    code: str
    found: str
    where: str = ""
    expected: str = ""
    action: str = ""
    excerpt: str = ""

    def __post_init__(self) -> None:
        if self.code not in CODES:
            raise ValueError(f"finding code {self.code!r} is not registered in heatwright.findings.CODES")

    @property
    def text(self) -> str:
        """The finding as one or two sentences, without severity and code."""
        head = f"{self.where}: {self.found}" if self.where else self.found
        if self.expected:
            head = f"{head}; expected {self.expected}"
        return f"{head}. {self.action}".rstrip() if self.action else f"{head}."

    def __str__(self) -> str:
        sentence = f"{SEVERITY_WORD[self.severity]}: {self.text} [{self.code}]"
        return "\n    | ".join([sentence, *self.excerpt.split("\n")]) if self.excerpt else sentence

    def shown(self, excerpt: str) -> Finding:
        """The same finding with the line that is meant."""
        return replace(self, excerpt=excerpt)

    def at(self, file: str) -> Finding:
        """The same finding with its file: ``line 12`` becomes ``FILE:12``, other places follow the file's name."""
        if self.where == file or self.where.startswith(f"{file}:"):
            return self
        line = self.where.removeprefix("line ")
        place = file if not self.where else f"{file}:{line}" if line != self.where else f"{file}: {self.where}"
        return replace(self, where=place)

    def as_json(self) -> dict[str, str]:
        """Severity, code and text, as ``--json`` shows them."""
        return {"severity": self.severity, "code": self.code, "text": self.text}


def refuse(code: str, found: str, *, where: str = "", expected: str = "", action: str = "") -> Finding:
    """A finding that makes the input unusable."""
    return Finding("refuse", code, found, where, expected, action)


def warn(code: str, found: str, *, where: str = "", expected: str = "", action: str = "") -> Finding:
    """A finding the user should look at; the input is used."""
    return Finding("warn", code, found, where, expected, action)


def note(code: str, found: str, *, where: str = "", expected: str = "", action: str = "") -> Finding:
    """A choice that was made and is said."""
    return Finding("note", code, found, where, expected, action)


class Refused(HeatwrightError):
    """One input cannot be used; ``findings`` says why (at least one of them has severity ``refuse``)."""

    def __init__(self, findings: Iterable[Finding]) -> None:
        self.findings = tuple(findings)
        super().__init__(self.findings)

    def __str__(self) -> str:
        return "\n".join(str(f) for f in self.findings)


def refusals(findings: Iterable[Finding]) -> tuple[Finding, ...]:
    """Those findings that make an input unusable."""
    return tuple(f for f in findings if f.severity == "refuse")
