"""What `report` and `plot` are given: outputs, JSON documents, thermo files; as species to be shown."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

import click

from heatwright.cli.entry import entry_jobs, entry_request, made_entry
from heatwright.cli.formation_options import route_options
from heatwright.cli.options import model_options, range_options, words_options
from heatwright.cli.reporter import Reporter
from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.entry import Entry
    from heatwright.findings import Finding
    from heatwright.report.documents import Shown
    from heatwright.report.species import Species

F = TypeVar("F", bound=Callable[..., Any])
MANIFEST_NAME = "heatwright.toml"
_OF_OUTPUTS = "of outputs, and none of the inputs is one"

inputs_argument = click.argument("inputs", nargs=-1, metavar="[INPUT...]", type=click.Path())


def showing_options(command: F) -> F:
    """The options of ``entry``, for inputs that are outputs."""
    for decorate in (words_options, model_options, range_options, route_options):
        command = decorate(command)
    names = click.option("--name", "names", multiple=True, metavar="NAME", help="Species name; once for each output.")
    return names(command)


def shown_inputs(ctx: click.Context, inputs: tuple[str, ...], options: dict[str, Any], reporter: Reporter) -> Shown:
    """The species of all inputs, in their order; what cannot be shown is reported and listed as failed."""
    from heatwright.report.documents import Shown

    kinds = {path: kind_of_input(path) for path in inputs}
    outputs = tuple(path for path in inputs if kinds[path] == "output")
    if not outputs:
        _check_no_choices(ctx, options)
    parts = {path: _read(path, kinds[path], reporter) for path in inputs if kinds[path] != "output"}
    parts |= _made(outputs, options, reporter)
    _say_of_releases([parts[path] for path in dict.fromkeys(inputs)], reporter)
    species = [s for path in dict.fromkeys(inputs) for s in parts[path].species]
    failed = [f for path in dict.fromkeys(inputs) for f in parts[path].failed]
    titles = dict.fromkeys(parts[path].title for path in inputs)
    remarks = tuple(dict.fromkeys(r for path in inputs for r in parts[path].remarks))
    return Shown(tuple(species), tuple(failed), next(iter(titles)) if len(titles) == 1 else "", remarks)


def _say_of_releases(parts: list[Shown], reporter: Reporter) -> None:
    """What became of making releases again: of each as a whole, and (notes only with -v) of its species."""
    from heatwright.findings import Finding

    for part in parts:
        for remark in part.remarks:
            reporter.say(remark)
        for s in part.species if part.remarks else ():
            for f in s.findings:
                if f.code == "not-remade" and (f.severity == "warn" or reporter.verbose):
                    reporter.findings(s.name, [Finding(f.severity, f.code, f.text.rstrip("."))])  # type: ignore[arg-type]


def given_inputs(inputs: tuple[str, ...]) -> tuple[str, ...]:
    """The inputs, or the manifest in the current folder where none is named; raises UsageError without one."""
    from pathlib import Path

    if inputs:
        return inputs
    if not Path(MANIFEST_NAME).is_file():
        raise UsageError(f"there is no {MANIFEST_NAME} here; name outputs, a JSON document, a thermo file or a release")
    return (MANIFEST_NAME,)


def kind_of_input(path: str) -> str:
    """What an input is, by its text: ``manifest``, ``release``, ``document``, ``entries``, or else an ``output``."""
    from pathlib import Path

    from heatwright.findings import Refused
    from heatwright.project.beside import looks_like_manifest
    from heatwright.project.lockfile import LOCK_NAME
    from heatwright.reading.detection import detect
    from heatwright.reading.entries import looks_like_entries
    from heatwright.reading.files import read_text
    from heatwright.report.documents import is_document
    from heatwright.report.release import is_release

    place = Path(path)
    if place.is_dir():
        is_project = not is_release(place) and (place / MANIFEST_NAME).is_file()
        return "release" if is_release(place) else "manifest" if is_project else "entries"
    if place.name == LOCK_NAME:
        return "release"
    try:
        text = read_text(path).text
    except Refused:
        return "output"  # whose reader says what is wrong with the file
    if place.suffix.lower() == ".toml":
        return "manifest" if looks_like_manifest(text) else "output"
    if is_document(text):
        return "document"
    return "entries" if detect(text).program is None and looks_like_entries(text) else "output"


def _check_no_choices(ctx: click.Context, options: dict[str, Any]) -> None:
    """Raises UsageError when something was said about outputs and there is none."""
    from click.core import ParameterSource

    for name in options:
        if ctx.get_parameter_source(name) is ParameterSource.COMMANDLINE:
            option = next(p for p in ctx.command.params if p.name == name)
            raise UsageError(f"{option.opts[0]} is a choice {_OF_OUTPUTS}")


def _read(path: str, kind: str, reporter: Reporter) -> Shown:
    from pathlib import Path

    from heatwright.audit.release import read_release
    from heatwright.cli.build import Words
    from heatwright.findings import Refused
    from heatwright.report.documents import Shown, read_documents
    from heatwright.report.records import shown_entries
    from heatwright.report.release import shown_release

    try:
        if kind == "manifest":
            return _of_manifest(path, reporter)
        if kind == "release":
            folder = path if Path(path).is_dir() else str(Path(path).parent)
            return shown_release(folder, lambda manifest: Words(manifest, reporter))
        shown = read_documents(path) if kind == "document" else shown_entries(read_release(path))
        return _heard(path, shown, reporter)
    except Refused as error:
        reporter.fail(path, error.findings)
        return Shown((), ((path, tuple(f.text for f in error.findings)),))


def _heard(path: str, shown: Shown, reporter: Reporter) -> Shown:
    """What a file holds, with words on what of it cannot be shown; a file of nothing else has failed."""
    from heatwright.findings import refuse

    if shown.species:
        for where, sentences in shown.failed:
            reporter.say(f"not shown: {where}: {' '.join(sentences)}")
    else:
        said = [" ".join(sentences) for _, sentences in shown.failed]
        found = f"there is nothing to show ({' '.join(said).rstrip('.') or 'the file has no entries'})"
        reporter.fail(path, (refuse("no-entries", found),))
    return shown


def _of_manifest(path: str, reporter: Reporter) -> Shown:
    """The entries of a project, made with what its store remembers."""
    from heatwright.cli.build import Words
    from heatwright.project.manifest import load_manifest
    from heatwright.project.showing import entries_of_manifest
    from heatwright.report.documents import Shown

    manifest = load_manifest(path)
    made = entries_of_manifest(manifest, Words(manifest, reporter))
    for file, findings in made.failed:
        reporter.fail(file, findings)
    failed = tuple((file, tuple(f.text for f in refusals_of(findings))) for file, findings in made.failed)
    return Shown(tuple(_shown_entry(e, e.name) for e in made.entries), failed, manifest.mechanism.name)


def refusals_of(findings: tuple[Finding, ...]) -> tuple[Finding, ...]:
    """Those that say why something cannot be shown."""
    from heatwright.findings import refusals

    return refusals(findings) or findings


def _shown_entry(made: Entry, where: str) -> Species:
    """An entry as a species to be shown, by way of its JSON document."""
    from heatwright.report.documents import document_of_entry
    from heatwright.report.taking import species_of

    return species_of(document_of_entry(made), where)


def _made(outputs: tuple[str, ...], options: dict[str, Any], reporter: Reporter) -> dict[str, Shown]:
    """Entries made of outputs, each as a species to be shown."""
    if not outputs:
        return {}
    from heatwright.findings import Refused
    from heatwright.report.documents import Shown

    jobs = entry_jobs(outputs, options)
    request = entry_request(options, reporter)
    shown: dict[str, Shown] = {}
    for job in jobs:
        try:
            made = made_entry(job, request)
        except Refused as error:
            reporter.fail(job.path, error.findings)
            shown[job.path] = Shown((), ((job.path, tuple(f.text for f in error.findings)),))
        else:
            shown[job.path] = Shown((_shown_entry(made, job.path),))
            reporter.findings(job.path, [f for f in made.findings if f.severity == "warn"])
    return shown
