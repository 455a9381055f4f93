"""The marks of ``skipping.py`` against the source of cclib's parsers: no block that matters is without one.

A parser is a long list of ``if`` over the text of a line.  Of each that sets an attribute used here, or something that
the condition of such a block asks for, the texts in its condition must contain a mark; the lines that meet it are then
shown to the parser.  What is set without a mark on purpose is listed with the reason.
"""

from __future__ import annotations

import ast
import importlib
import inspect
from collections.abc import Iterable, Iterator

import pytest

from heatwright.reading.parsing import _WANTED
from heatwright.reading.skipping import _MARKS

OWN = "the dialect reads it from the text"
EARLIER = "set by other blocks, which are shown"
FRAGMENT = "line.split()[-1] == 'supermolecule' or ('fragment' not in line and 'model system' not in line)"
ORIENTATION = "line.find('Input orientation') > -1 or line.find('Z-Matrix orientation') > -1"
CHARGE = "line.strip().startswith(('Molecular charge', 'Total molecular charge'))"
CONTRACTION = (
    "(self.section == 'Primary Basis' or self.section == 'DFT Potential') and line.strip() == '-Contraction Scheme:'"
)
ON_PURPOSE = {
    ("Gaussian", FRAGMENT): "inside a block whose lines hold Charge = , which is a mark",
    ("Gaussian", ORIENTATION): "a colon follows in the line and the mark",
    ("NWChem", "not hasattr(self, 'natom')"): EARLIER,
    ("NWChem", "self.is_BOMD"): "molecular dynamics",
    ("GAMESS", "line.find('FINAL') == 1"): "the block needs ENERGY IS in the line, which is a mark",
    ("GAMESS", "line[11:50] == 'ATOMIC                      COORDINATES'"): "COORDINATES ( stands in the line",
    ("GAMESS", "not hasattr(self, 'natom') and 'NUMBER OF ATOMS' in line.upper()"): EARLIER,
    ("FChk", "self.start"): "the first line, which is always shown",
    ("FChk", "line[0:6] == 'Charge'"): "the mark has the blanks behind it, as charges by atom have the word too",
    ("FChk", "line[0:12] == 'Multiplicity'"): "the mark has the blanks behind it",
    ("Molcas", CHARGE): "olecular charge, the mark, stands in both",
    ("Jaguar", "line.strip() == 'Gaussian basis set information'"): EARLIER,
    ("MOPAC", "line.split() == ['NUMBER', 'SYMBOL', '(ANGSTROMS)', '(ANGSTROMS)', '(ANGSTROMS)']"): "NUMBER is a mark",
    ("MOPAC", "not hasattr(self, 'natom')"): "inside the block before",
    ("Psi4", CONTRACTION): OWN,
    ("Psi4", "self.section == 'Geometry' and 'Geometry (in' in line"): "a blank follows in the line and the mark",
    ("Psi4", "self.section == 'Geometry' and line[2:16].lower() == 'charge       ='"): OWN,
    ("Psi4", "line.strip()[:len(mp_trigger)] == mp_trigger"): OWN,
    ("Psi4", "line.lstrip().startswith(self.ccsd_trigger)"): OWN,
    ("Psi4", "line.strip().startswith(self.ccsd_t_trigger)"): OWN,
    ("Psi4", "line.strip() == 'Irrep      Harmonic Frequency'"): OWN,
    ("QChem", "any((message in line for message in self.fragment_section_headers))"): "marked one by one",
    ("QChem", "any((message in line for message in self.supersystem_section_headers))"): "marked one by one",
    ("QChem", "mtch is not None"): "Optimization Cycle is a mark",
    ("QChem", "'EHF' in line"): OWN,
}  # fmt: skip
UNSEEN = {"XTB"}
"""Parsers whose conditions are calls: their marks were chosen by reading, and outputs are read both ways."""


def self_name(node: ast.AST) -> str | None:
    """``name`` of ``self.name``, also under subscripts."""
    while isinstance(node, ast.Subscript):
        node = node.value
    if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name) and node.value.id == "self":
        return node.attr
    return None


def set_here(node: ast.AST) -> Iterator[str | None]:
    """Names of ``self`` that are assigned, set or appended to."""
    for n in ast.walk(node):
        if isinstance(n, ast.Assign):
            yield from map(self_name, n.targets)
        elif isinstance(n, ast.AugAssign | ast.AnnAssign):
            yield self_name(n.target)
        elif isinstance(n, ast.Call) and isinstance(n.func, ast.Attribute):
            if n.func.attr in ("set_attribute", "append_attribute", "extend_attribute"):
                yield n.args[0].value if isinstance(n.args[0], ast.Constant) else None
            elif n.func.attr in ("append", "extend", "insert"):
                yield self_name(n.func.value)


def sets(nodes: Iterable[ast.AST], names: set[str]) -> bool:
    return any(name in names for node in nodes for name in set_here(node))


def marked(test: ast.expr, marks: tuple[str, ...]) -> bool:
    """Whether every line that meets a condition holds a mark."""
    if isinstance(test, ast.BoolOp):
        each = [marked(value, marks) for value in test.values]
        return all(each) if isinstance(test.op, ast.Or) else any(each)
    if isinstance(test, ast.Compare) and isinstance(test.ops[0], ast.Eq | ast.In):
        texts = [n.value for n in ast.walk(test) if isinstance(n, ast.Constant) and isinstance(n.value, str)]
        found = [any(mark in text for mark in marks) for text in texts]
        several = isinstance(test.comparators[0], ast.Tuple | ast.List | ast.Set)
        return bool(found) and (all(found) if several else any(found))
    if isinstance(test, ast.Compare | ast.Call):
        texts = [n.value for n in ast.walk(test) if isinstance(n, ast.Constant) and isinstance(n.value, str)]
        return bool(texts) and all(any(mark in text for mark in marks) for text in texts)
    return False


def unmarked(statements: Iterable[ast.stmt], names: set[str], marks: tuple[str, ...]) -> Iterator[str]:
    """Conditions without a mark whose own statements set one of the names; of blocks without, those inside."""
    for statement in statements:
        if not isinstance(statement, ast.If):
            if sets([statement], names):
                yield ast.unparse(statement)
            continue
        if sets(statement.body, names) and not marked(statement.test, marks):
            if sets([s for s in statement.body if not isinstance(s, ast.If)], names):
                yield ast.unparse(statement.test)
            else:
                yield from unmarked(statement.body, names, marks)
        yield from unmarked(statement.orelse, names, marks)


def asked_for(statements: Iterable[ast.stmt], names: set[str]) -> Iterator[str]:
    """Names of ``self`` in the conditions of the blocks that set one of the names."""
    for statement in statements:
        if isinstance(statement, ast.If) and sets([statement], names):
            yield from filter(None, map(self_name, ast.walk(statement.test)))
            yield from asked_for([*statement.body, *statement.orelse], names)


def extract_of(parser: str) -> ast.FunctionDef:
    kind = getattr(importlib.import_module("cclib.parser"), parser)
    tree = ast.parse(inspect.getsource(inspect.getmodule(kind) or kind))
    body = next(n for n in tree.body if isinstance(n, ast.ClassDef) and n.name == kind.__name__).body
    return next(n for n in body if isinstance(n, ast.FunctionDef) and n.name == "extract")


@pytest.mark.parametrize("parser", sorted(_MARKS.keys() - UNSEEN))
def test_every_block_that_matters_has_a_mark(parser: str) -> None:
    body = extract_of(parser).body
    names = set(_WANTED) - {"metadata"}
    while more := set(asked_for(body, names)) - names - {"metadata"}:
        names |= more
    found = {(parser, condition) for condition in unmarked(body, names, _MARKS[parser])}
    assert found - ON_PURPOSE.keys() == set()


def test_a_block_without_a_mark_is_found() -> None:
    source = "if line[1:5] == 'Mass' and self.ready:\n self.atommasses = 1\nif 'ready' in line:\n self.ready = True"
    body = ast.parse(source).body
    assert list(unmarked(body, {"atommasses", "ready"}, ("Mass",))) == ["'ready' in line"]
    assert set(asked_for(body, {"atommasses"})) == {"ready"}
    assert list(unmarked(body, {"atommasses"}, ("mass",))) == ["line[1:5] == 'Mass' and self.ready"]
