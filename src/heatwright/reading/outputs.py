"""The way in: one output file, one molecule, and a finding for everything that was noticed."""

from __future__ import annotations

import os
from collections.abc import Collection
from dataclasses import replace

import numpy as np

from heatwright.findings import Finding, Refused, refusals, refuse, warn
from heatwright.molecule import Molecule, Source
from heatwright.reading.acceptance import check_accepted, with_accepted
from heatwright.reading.assembly import assemble
from heatwright.reading.conditions import conditions, stated_scale
from heatwright.reading.detection import Program, detect
from heatwright.reading.dialects import Dialect, Facts, dialect_of
from heatwright.reading.files import StoredText, read_text
from heatwright.reading.given import given_molecule
from heatwright.reading.hessians import with_checked_hessian
from heatwright.reading.jobs import Choice, choose
from heatwright.reading.parsing import Mishap, Parsed, parse
from heatwright.reading.scaling import unscaled
from heatwright.reading.soundness import expected_modes, soundness
from heatwright.reading.structures import bonded_differently, geometry_differs, isomers
from heatwright.reading.text import Text


def read_output(
    path: str | os.PathLike[str],
    *,
    job: int | None = None,
    charge: int | None = None,
    multiplicity: int | None = None,
    accept: Collection[str] = (),
    accept_imaginary_cm1: float = 0.0,
    with_hessian: bool = False,
) -> Molecule:
    """The molecule in the output of a quantum-chemistry program, in a molecule file or in a QCSchema result.

    path : the file, plain or compressed with gzip, bzip2, xz or zip.
    job : which job of the file, counted from 1; needed when the file holds more than one molecule.
    charge, multiplicity : take the place of what the output says (noted among the findings).
    accept : words of :data:`heatwright.reading.acceptance.ACCEPTABLE`; what they name is a warning and no refusal.
    with_hessian : whether a printed Hessian is read too, which other isotopes need; without wavenumbers it always is.
    accept_imaginary_cm1 : imaginary modes up to this (at most 50 1/cm) are taken as real ones of the same magnitude.

    Returns the molecule with every finding about it, those of severity ``refuse`` included: a transition state or a
    truncated file is returned, and it is for the caller to use it or not (:func:`heatwright.findings.refusals`).

    Raises Refused when no molecule can be made at all: ``file-missing``, ``file-empty``, ``not-an-output``,
    ``file-too-large``, ``several-files``, ``several-molecules``, ``several-jobs`` (no such job), ``truncated``,
    ``job-failed``, ``no-geometry``; UsageError for what cannot be accepted.
    """
    check_accepted(accept, accept_imaginary_cm1)
    stored = read_text(path)
    given = given_molecule(path, stored, job, charge, multiplicity)
    if given is not None:
        return with_accepted(given.but(findings=_once(given.findings)), accept, accept_imaginary_cm1)
    program = _program(stored)
    dialect = dialect_of(program.name)
    text = Text.of(dialect.repaired(_whole_lines(stored.text, dialect)))
    choice = choose(dialect, text, job)
    name = os.fspath(path) if not isinstance(path, bytes) else os.fsdecode(path)
    source = Source(name, stored.sha256, program.name, "")
    user = (charge, multiplicity)
    molecule = _molecule(source, program, dialect, choice, user, stored.findings, with_hessian)
    other = next((o.number for o in choice.other_analyses() if _is_isomer(molecule, program, dialect, o)), None)
    if other is not None:
        molecule = molecule.but(findings=(isomers(other, choice.number), *molecule.findings))
    return with_accepted(molecule, accept, accept_imaginary_cm1)


def _molecule(
    source: Source,
    program: Program,
    dialect: Dialect,
    choice: Choice,
    user: tuple[int | None, int | None],
    before: tuple[Finding, ...],
    with_hessian: bool,
) -> Molecule:
    """The molecule of one job with its findings, those *before* first; raises Refused when there is none."""
    parsed = parse(program.parser, choice.pieces, due=_due(dialect, choice))
    facts = _facts(dialect, choice, parsed)
    source = replace(source, version=facts.version)
    with np.errstate(all="ignore"):  # what is not finite is refused by name, not warned about
        molecule, remarks = assemble(source, choice.identity, parsed, facts, user)
        if molecule is None:
            raise Refused([*before, *remarks, _no_molecule(dialect, choice, parsed, source)])
        molecule = molecule.but(job=choice.number, n_jobs=choice.n_jobs)
        molecule = _whole_modes(molecule, dialect, choice, parsed)
        molecule, of_scale = unscaled(molecule, stated_scale(program.name, choice.job))
        of_hessian: tuple[Finding, ...] = ()
        if with_hessian or not molecule.wavenumbers_cm1.size:
            molecule, of_hessian = with_checked_hessian(molecule, *facts.hessian(), alone=not dialect.endings)
        ends = _endings(molecule, dialect, choice, parsed, damaged=bool(refusals(remarks)))
        noticed = (*conditions(molecule, choice), *geometry_differs(molecule, parsed), *soundness(molecule))
        findings = (*before, *choice.findings, *remarks, *of_scale, *of_hessian, *ends, *noticed)
    return molecule.but(findings=_once(findings))


def _is_isomer(molecule: Molecule, program: Program, dialect: Dialect, other: Choice) -> bool:
    """Whether another analysis is of a structure with other bonds, as far as it can be read."""
    parsed = parse(program.parser, other.pieces, due=_due(dialect, other))
    with np.errstate(all="ignore"):
        found, _ = assemble(molecule.source, other.identity, parsed, _facts(dialect, other, parsed), (None, None))
    return found is not None and bonded_differently(molecule, found)


def _due(dialect: Dialect, choice: Choice) -> list[str]:
    """What cclib has to find in a job, as the dialect knows no better."""
    due = ["atomnos", "atomcoords"]
    if any(anchor in choice.job for anchor in dialect.mode_anchors):
        due += ["vibfreqs", "vibdisps"]
    if choice.identity.charge is None:
        due.append("charge")
    if choice.identity.multiplicity is None:
        due.append("mult")
    return [name for name in due if name not in dialect.own]


def _whole_lines(text: str, dialect: Dialect) -> str:
    """The text without a last line that the end of the file cuts off: half a number looks like a number."""
    end = text.rfind("\n") + 1
    if any(anchor.strip() in text[end:] for anchor in dialect.endings):
        return text
    return f"{text[:end]}~" if end < len(text) else text  # so that the number of the last line stays true


def _program(stored: StoredText) -> Program:
    detected = detect(stored.text)
    if detected.program is not None and detected.program.parser:
        return detected.program
    if detected.program is not None:
        found = f"this is an output of {detected.program.name}, which heatwright does not read"
    elif detected.look_alike:
        found = f"this is {detected.look_alike}, not the output of the program it imitates"
    else:
        found = "no banner of a quantum-chemistry program is in the head of the file"
    words = "the output of NWChem, Gaussian, ORCA, Q-Chem, Psi4 or another program that cclib reads"
    raise Refused([*stored.findings, refuse("not-an-output", found, expected=words)])


def _facts(dialect: Dialect, choice: Choice, parsed: Parsed) -> Facts:
    """What the dialect reads; text that breaks its reader is a finding, and cclib's values stand."""
    try:
        return dialect.read(choice.job, parsed)
    except Exception as error:  # hostile text must not end in a traceback
        words = f"the text of the {dialect.name} job could not be read to its end ({type(error).__name__}: {error})"
        return Facts(findings=(refuse("parser-failed", words, action="Check the file."),))


def _line_of(choice: Choice, mishap: Mishap) -> str:
    """The line in the file of a place in the text that the parser was given."""
    rest = mishap.spot
    for piece in choice.pieces:
        length = piece.end - piece.start
        if rest <= length:
            return piece.where(max(piece.start + rest - 1, 0))
        rest -= length
    return f"line {choice.job.last_line}"


def _no_molecule(dialect: Dialect, choice: Choice, parsed: Parsed, source: Source) -> Finding:
    failed = _failure(dialect, choice)
    if failed is not None:
        return failed
    who = source.program_version
    if not dialect.terminated(choice.job):
        last = choice.job.last_line
        found = f"the {who} output ends before there is a geometry"
        return refuse("truncated", found, where=f"line {last}", action="Fetch the whole file or run the job again.")
    if parsed.mishaps:
        first = parsed.mishaps[0]
        found = f"the {who} output could not be read ({first.words})"
        return refuse(
            "parser-failed", found, where=_line_of(choice, first), action="Report the file if it is complete."
        )
    return refuse(
        "no-geometry", f"the {who} output holds no atoms with coordinates", action="Give the output that has them."
    )


def _failure(dialect: Dialect, choice: Choice) -> Finding | None:
    """What the program itself says of a failure, in the job that was read."""
    for failure in dialect.failures:  # the telling ones stand first
        spot = choice.job.rfind(failure.anchor)
        if spot >= 0:
            action = "Repair the job and run it again."
            return refuse("job-failed", failure.words, where=choice.job.where(spot), action=action)
    return None


def _whole_modes(molecule: Molecule, dialect: Dialect, choice: Choice, parsed: Parsed) -> Molecule:
    """Modes that were cut off with the end of the file are no modes: fewer than the molecule has, and nothing after."""
    m = molecule.wavenumbers_cm1.size
    short = 0 < m < expected_modes(molecule)
    if short and not dialect.terminated(choice.job) and (parsed.mishaps or parsed.ended_inside or _cut(choice)):
        return molecule.but(wavenumbers_cm1=molecule.wavenumbers_cm1[:0], normal_modes=None)
    return molecule


def _cut(choice: Choice) -> bool:
    return choice.job.is_last


def _endings(
    molecule: Molecule, dialect: Dialect, choice: Choice, parsed: Parsed, *, damaged: bool
) -> tuple[Finding, ...]:
    """How the job ended: well, failed, cut off with everything there, or cut off before that."""
    complete = molecule.energy_hartree is not None and (
        molecule.wavenumbers_cm1.size > 0 or not choice.identity.has_modes or molecule.is_atom
    )
    failed = _failure(dialect, choice)
    if failed is not None:
        softer = warn(failed.code, failed.found, where=failed.where, action="Look at the output.")
        return (softer if complete and molecule.wavenumbers_cm1.size else failed,)
    if dialect.terminated(choice.job) or not dialect.endings:
        return () if complete else _incomplete(choice, parsed, molecule)
    where = f"line {choice.job.last_line}" if _cut(choice) else choice.job.where(choice.job.end - 1)
    if (
        complete and molecule.wavenumbers_cm1.size and not damaged
    ):  # without modes nobody knows which energy was still to come
        words = f"{molecule.source.program}'s closing line is missing; geometry, energy and modes are all there"
        return (warn("no-normal-termination", words, where=where, expected=repr(dialect.endings[0].strip())),)
    words = f"the {molecule.source.program} output ends before the job is done"
    return (refuse("truncated", words, where=where, action="Fetch the whole file or run the job again."),)


def _incomplete(choice: Choice, parsed: Parsed, molecule: Molecule) -> tuple[Finding, ...]:
    """A job that ended well and lacks what it was run for: the block that could not be read, if there was one."""
    no_modes = choice.identity.has_modes and not molecule.wavenumbers_cm1.size
    if parsed.mishaps:
        first = parsed.mishaps[0]
        words = f"a block of the {molecule.source.program_version} output could not be read ({first.words})"
        make = refuse if no_modes else warn
        return (
            make("parser-failed", words, where=_line_of(choice, first), action="Report the file if it is complete."),
        )
    if no_modes:
        words = f"the {molecule.source.program} job computed a Hessian, but its wavenumbers are not in the output"
        return (refuse("no-frequencies", words, action="Look at the output."),)
    return ()


def _once(findings: tuple[Finding, ...]) -> tuple[Finding, ...]:
    return tuple(dict.fromkeys(findings))
