"""Rendering templates and putting the result on disk whole or not at all."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Mapping, Sequence
from functools import cache
from pathlib import Path
from typing import Any, Final

from jinja2 import FileSystemLoader, StrictUndefined, TemplateError
from jinja2.sandbox import ImmutableSandboxedEnvironment

from heatwright.findings import Refused, refuse
from heatwright.resources import templates
from heatwright.writing import numbers


class _Environment(ImmutableSandboxedEnvironment):
    """Sandboxed, and what it sees stays as it is.

    What stands in a plain dict, as nearly all that templates ask for does, is found without detours.
    """

    def getattr(self, obj: Any, attribute: str) -> Any:
        if type(obj) is dict and attribute in obj and attribute not in _OF_DICTS:
            return obj[attribute]
        return super().getattr(obj, attribute)


_OF_DICTS: Final = frozenset(dir(dict))


@cache
def _environment(folder: str) -> ImmutableSandboxedEnvironment:
    environment = _Environment(
        loader=FileSystemLoader(folder),
        undefined=StrictUndefined,
        keep_trailing_newline=True,
        trim_blocks=True,
        lstrip_blocks=True,
        autoescape=False,
    )
    environment.filters.update(
        left=numbers.left,
        fixed=numbers.fixed,
        coefficient=numbers.coefficient,
        coefficients=numbers.coefficients,
        columns=numbers.columns,
        marked=numbers.marked,
        element_fields=numbers.element_fields,
        continuation=numbers.continuation,
        yaml=numbers.yaml_text,
        yaml_map=numbers.yaml_map,
        comma=numbers.comma,
        json=numbers.json_text,
        csv=numbers.csv_text,
    )
    return environment


def render_format(template: str, context: Mapping[str, Any]) -> str:
    """The text of one of the shipped templates."""
    return _environment(str(templates())).get_template(template).render(context)


_FAULTS: Final = (
    TemplateError, ArithmeticError, LookupError, TypeError, ValueError, OSError, RecursionError, MemoryError,
)  # fmt: skip
"""What a template can come to, other than a refusal of one of our filters."""


def render_user_template(path: str, context: Mapping[str, Any]) -> str:
    """The text of the user's own template.

    Raises Refused with file and line when it cannot be read, is not a template, or asks for an unknown variable.
    """
    file = Path(path)
    if file.is_dir():
        raise Refused([refuse("template-failed", "this is a folder", where=path, expected="the file of a template")])
    try:
        return _environment(str(file.parent)).get_template(file.name).render(context)
    except Refused:
        raise
    except _FAULTS as error:
        line = getattr(error, "lineno", None) or _line_in_template(error, file)
        raise Refused(
            [
                refuse(
                    "template-failed",
                    f"the template could not be rendered ({type(error).__name__}: {error})",
                    where=f"{path}:{line}" if line else path,
                    action="See README.md for the variables a template can use.",
                )
            ]
        ) from error


def _line_in_template(error: BaseException, file: Path) -> int | None:
    """The line of *file* in which the error arose; jinja2 maps its code back to template lines in the traceback."""
    line, trace = None, error.__traceback__
    while trace is not None:
        if Path(trace.tb_frame.f_code.co_filename).name == file.name:
            line = trace.tb_lineno
        trace = trace.tb_next
    return line


def check_target(path: str, force: bool) -> None:
    """Raises Refused when *path* cannot be written, or exists and *force* is not given."""
    target = Path(path)
    if target.is_dir():
        raise Refused([refuse("target-unwritable", "the output file is a folder", where=path)])
    if target.exists() and not force:
        raise Refused(
            [
                refuse(
                    "target-exists",
                    "the file exists already",
                    where=path,
                    action="Choose another name, or say --force to replace it.",
                )
            ]
        )
    folder = target.parent
    if not folder.is_dir() or not os.access(folder, os.W_OK) or (target.exists() and not os.access(target, os.W_OK)):
        raise _unwritable(path, "the folder is missing or must not be written to")


def write_text(path: str, text: str) -> None:
    """Writes *text* to *path* (UTF-8, ``\\n``) as :func:`write_bytes` does."""
    write_bytes(path, text.encode("utf-8"))


def write_bytes(path: str, data: bytes) -> None:
    """Writes *data* to *path*, whole or not at all: a temporary file beside it is renamed.

    Raises Refused when that fails; whatever was at *path* before is then still there.
    """
    target = Path(path)
    temporary = None
    try:
        with tempfile.NamedTemporaryFile(dir=target.parent, prefix=f".{target.name}.", delete=False) as stream:
            temporary = stream.name
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, target)
    except OSError as error:
        if temporary is not None:
            Path(temporary).unlink(missing_ok=True)
        raise _unwritable(path, error.strerror or str(error)) from error


def _umask() -> int:
    """The process's file mode mask, which can only be read by setting it."""
    mask = os.umask(0)
    os.umask(mask)
    return mask


def _unwritable(path: str, reason: str) -> Refused:
    return Refused(
        [
            refuse(
                "target-unwritable",
                f"the file cannot be written ({reason})",
                where=path,
                action="Choose a folder that exists and may be written to.",
            )
        ]
    )


def table_context(documents: Sequence[Mapping[str, Any]]) -> dict[str, Any]:
    """What the table template sees: the species and the names of all their contributions, in order of appearance.

    uncertain : whether the species carry uncertainties (a run states them for all species or for none).
    """
    names = dict.fromkeys(name for species in documents for name in species["table"]["contributions"])
    uncertain = any("uncertainty" in species for species in documents)
    return {"species": documents, "contribution_names": list(names), "uncertain": uncertain}
