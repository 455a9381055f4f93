"""Which of the jobs in a file is read: jobs of one molecule belong together, two molecules have to be told apart."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from heatwright.elements import composition, formula
from heatwright.findings import Finding, Refused, note, refuse, warn
from heatwright.reading.dialects.base import Dialect, Identity
from heatwright.reading.text import Text

_MOST_NAMED = 12
"""Molecules that the refusal of a file with several of them names."""


@dataclass(frozen=True, slots=True)
class Choice:
    """The job to read, the pieces of text it needs, its number and what has to be said about the choice.

    related : the job, and the last optimisation of the same molecule before it, whose constraints are the job's too.
    other_analyses : gives the other jobs with modes of the same formula, when no job was asked for; each with a text of
        its own, so that reading all of them takes no longer than the file is long.
    """

    job: Text
    identity: Identity
    pieces: tuple[Text, ...]
    number: int
    n_jobs: int
    findings: tuple[Finding, ...]
    related: tuple[Text, ...] = ()
    other_analyses: Callable[[], Iterator[Choice]] = lambda: iter(())


def choose(dialect: Dialect, whole: Text, wanted: int | None) -> Choice:
    """The job that gives the molecule: the last with modes, else the last.

    Raises Refused when the file holds several molecules and no job was asked for, or has no job of that number.
    """
    jobs = dialect.jobs(whole)
    identities = dialect.identities(jobs)
    groups = _groups(identities)
    if wanted is not None:
        index = _asked_for(wanted, len(jobs))
        group = next(g for g in groups if index in g)
    elif len(groups) > 1:
        raise Refused([_several(jobs, identities, groups)])
    else:
        group = groups[0]
        with_modes = [i for i in group if identities[i].has_modes]
        index = with_modes[-1] if with_modes else _last_telling(group, identities)
    shared = _completed(Identity(), [identities[i] for i in group])
    before = [identities[i] for i in reversed(group) if i < index]
    return Choice(
        jobs[index],
        _completed(identities[index], [*before, shared]),
        _pieces(dialect, jobs, [*(i for i in group if i < index and not identities[i].has_modes), index], 0 in group),
        index + 1,
        len(jobs),
        _remarks(identities, group, index, wanted),
        _related(jobs, identities, group, index),
        lambda: iter(()) if wanted is not None else _others(dialect, jobs, identities, group, index, shared),
    )


def _others(
    dialect: Dialect, jobs: list[Text], identities: list[Identity], group: list[int], index: int, shared: Identity
) -> Iterator[Choice]:
    """The other analyses of the group; of cumulative outputs with the head and the jobs since the analysis before."""
    since: list[int] = []
    known = Identity()
    for i in group:
        known = _completed(identities[i], [known])
        if not identities[i].has_modes:
            since.append(i)
            continue
        if i != index:
            pieces = _pieces(dialect, jobs, [*since, i], 0 in group)
            before = "".join(str(piece) for piece in pieces[:-1])
            whole = Text.of(f"{before}{pieces[-1]}")
            parts = (whole.part(0, len(before)), whole.part(len(before)))
            yield Choice(parts[1], _completed(known, [shared]), parts, i + 1, len(jobs), ())
        since = []


def _asked_for(wanted: int, n_jobs: int) -> int:
    if not 1 <= wanted <= n_jobs:
        words = f"the file holds {n_jobs} job{'s' if n_jobs > 1 else ''}, job {wanted} is not among them"
        raise Refused([refuse("several-jobs", words, action=f"Give --job with a number from 1 to {n_jobs}.")])
    return wanted - 1


def _groups(identities: list[Identity]) -> list[list[int]]:
    """Neighbouring jobs that can be one molecule, by index; a job that names no atoms stays with its neighbour."""
    groups: list[list[int]] = []
    known = Identity()
    for index, identity in enumerate(identities):
        if groups and known.same_molecule(identity):
            groups[-1].append(index)
            known = _completed(identity, [known])
        else:
            groups.append([index])
            known = identity
    return groups


def _completed(identity: Identity, others: list[Identity]) -> Identity:
    """An identity with what it does not print taken from the other jobs of the same molecule."""
    atoms, charge, multiplicity = identity.atoms, identity.charge, identity.multiplicity
    for other in others:
        atoms = atoms or other.atoms
        charge = other.charge if charge is None else charge
        multiplicity = other.multiplicity if multiplicity is None else multiplicity
    return Identity(atoms, charge, multiplicity, identity.has_modes, identity.optimises)


def _last_telling(group: list[int], identities: list[Identity]) -> int:
    return next((i for i in reversed(group) if identities[i].atoms), group[-1])


def _pieces(dialect: Dialect, jobs: list[Text], needed: list[int], same_molecule: bool) -> tuple[Text, ...]:
    """The text of the last of these jobs; for programs that print things only once, also the head and the others."""
    index = needed[-1]
    if not dialect.cumulative or index == 0:
        return (jobs[index],)
    pieces = [jobs[i] for i in needed]
    if needed[0] != 0:
        pieces.insert(0, dialect.prologue(jobs[0], same_molecule))
    return tuple(pieces)


def _related(jobs: list[Text], identities: list[Identity], group: list[int], index: int) -> tuple[Text, ...]:
    optimised = [i for i in group if i < index and identities[i].optimises]
    return (jobs[index], *(jobs[i] for i in optimised[-1:]))


def _name(identity: Identity) -> str:
    real = [z for z in identity.atoms if z > 0]
    name = formula(composition(real), identity.charge or 0) if real else "?"
    return f"{name} (multiplicity {identity.multiplicity})" if (identity.multiplicity or 1) > 1 else name


def _several(jobs: list[Text], identities: list[Identity], groups: list[list[int]]) -> Finding:
    parts = []
    for group in groups[:_MOST_NAMED]:
        numbers = f"job {group[0] + 1}" if len(group) == 1 else f"jobs {group[0] + 1} to {group[-1] + 1}"
        parts.append(f"{_name(_completed(Identity(), [identities[i] for i in group]))} in {numbers}")
    parts += ["…"] if len(groups) > _MOST_NAMED else []
    return refuse(
        "several-molecules",
        f"the file holds {len(jobs)} jobs for {len(groups)} molecules: {', '.join(parts)}",
        where=jobs[groups[1][0]].where(jobs[groups[1][0]].start),
        expected="one molecule",
        action="Choose a job with --job N.",
    )


def _remarks(identities: list[Identity], group: list[int], index: int, wanted: int | None) -> tuple[Finding, ...]:
    """Nothing for the usual optimisation followed by the frequencies; else which job was read."""
    usual = index == group[-1] and all(identities[i].optimises and not identities[i].has_modes for i in group[:-1])
    if wanted is None and usual:
        return ()
    if len(identities) == 1:
        return ()
    what = "vibrational modes, geometry and energy" if identities[index].has_modes else "geometry and energy"
    words = f"the file holds {len(identities)} jobs; {what} were read from job {index + 1}"
    several_analyses = wanted is None and sum(identities[i].has_modes for i in group) > 1
    say = warn if several_analyses else note  # two analyses may be of two structures of the same formula
    return (say("several-jobs", words, action="Another one can be chosen with --job N."),)
