"""heatwright: from quantum-chemistry outputs to NASA polynomial thermo entries with residuals that can be checked.

>>> from heatwright import read_output, build_model
>>> from heatwright.resources import sample_outputs
>>> model = build_model(read_output(str(sample_outputs() / "H2O.out")))
>>> round(float(model.s_R(298.15)) * 8.31446261815324, 1)
189.0
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from heatwright.audit.audit import Audit, audit_entries
    from heatwright.audit.mend import mend_entries
    from heatwright.entry import Entry, FitOptions, make_entry
    from heatwright.errors import HeatwrightError, UsageError
    from heatwright.findings import Finding, Refused
    from heatwright.formation.atomization import collect_atoms, formation_by_atomization
    from heatwright.formation.choices import EnergyChoices
    from heatwright.formation.formation import Formation, formation_given, parse_enthalpy
    from heatwright.formation.reactions import find_reactions
    from heatwright.formation.reference_set import ReferenceSet, collect_references
    from heatwright.formation.routes import RouteRequest, formation_of
    from heatwright.formation.species_references import reference_species
    from heatwright.molecule import DiatomicConstants, Level, Molecule
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.contribution import Contribution, LnQ
    from heatwright.partition.inputs import InputUncertainties, parse_uncertainties
    from heatwright.partition.lowmodes import LowModes
    from heatwright.partition.mixing import mixture_model
    from heatwright.partition.model import ThermoModel, build_model
    from heatwright.partition.table import ThermoTable
    from heatwright.polynomial.fit import fit_nasa7
    from heatwright.polynomial.nasa7 import Nasa7
    from heatwright.polynomial.quality import FitQuality, fit_quality
    from heatwright.project.changes import Change, Comparison, compare_sets
    from heatwright.project.effects import mechanism_effect
    from heatwright.project.manifest import load_manifest
    from heatwright.project.manifest_types import Manifest, SpeciesRequest
    from heatwright.project.mechanism import read_mechanism
    from heatwright.project.splice import splice
    from heatwright.project.thermo_set import read_thermo_set
    from heatwright.reading.entries import parse_entries, read_entries, replace_entries
    from heatwright.reading.entry_file import EntryFile, ThermoEntry
    from heatwright.reading.outputs import read_output
    from heatwright.reading.single_point import with_energy
    from heatwright.reading.torsion_scans import read_torsion
    from heatwright.report.documents import shown_documents
    from heatwright.report.figures import figures_of
    from heatwright.report.page import Page, page_html
    from heatwright.report.svg import standalone_svg
    from heatwright.scales import PublishedFactor, ScaleChoice, choose_published, published_factors
    from heatwright.structure.bond_orders import bonding
    from heatwright.structure.isotopes import parse_isotope, with_isotopes
    from heatwright.structure.modes import projected_modes
    from heatwright.structure.symmetry import Symmetry, symmetry
    from heatwright.writing.context import entries_context
    from heatwright.writing.evidence import evidence
    from heatwright.writing.render import render_format

_HOME = {
    "Audit": "audit.audit",
    "Change": "project.changes",
    "Comparison": "project.changes",
    "Contribution": "partition.contribution",
    "DiatomicConstants": "molecule",
    "EnergyChoices": "formation.choices",
    "Entry": "entry",
    "EntryFile": "reading.entry_file",
    "Finding": "findings",
    "FitOptions": "entry",
    "FitQuality": "polynomial.quality",
    "Formation": "formation.formation",
    "HeatwrightError": "errors",
    "InputUncertainties": "partition.inputs",
    "Level": "molecule",
    "LnQ": "partition.contribution",
    "LowModes": "partition.lowmodes",
    "Manifest": "project.manifest_types",
    "ModelOptions": "partition.choices",
    "Molecule": "molecule",
    "Nasa7": "polynomial.nasa7",
    "Page": "report.page",
    "PublishedFactor": "scales",
    "ReferenceSet": "formation.reference_set",
    "Refused": "findings",
    "RouteRequest": "formation.routes",
    "ScaleChoice": "scales",
    "SpeciesRequest": "project.manifest_types",
    "Symmetry": "structure.symmetry",
    "ThermoEntry": "reading.entry_file",
    "ThermoModel": "partition.model",
    "ThermoTable": "partition.table",
    "UsageError": "errors",
    "audit_entries": "audit.audit",
    "bonding": "structure.bond_orders",
    "build_model": "partition.model",
    "choose_published": "scales",
    "collect_atoms": "formation.atomization",
    "collect_references": "formation.reference_set",
    "compare_sets": "project.changes",
    "entries_context": "writing.context",
    "evidence": "writing.evidence",
    "figures_of": "report.figures",
    "find_reactions": "formation.reactions",
    "fit_nasa7": "polynomial.fit",
    "fit_quality": "polynomial.quality",
    "formation_by_atomization": "formation.atomization",
    "formation_given": "formation.formation",
    "formation_of": "formation.routes",
    "load_manifest": "project.manifest",
    "make_entry": "entry",
    "mechanism_effect": "project.effects",
    "mend_entries": "audit.mend",
    "mixture_model": "partition.mixing",
    "page_html": "report.page",
    "parse_enthalpy": "formation.formation",
    "parse_entries": "reading.entries",
    "parse_isotope": "structure.isotopes",
    "parse_uncertainties": "partition.inputs",
    "projected_modes": "structure.modes",
    "published_factors": "scales",
    "read_entries": "reading.entries",
    "read_mechanism": "project.mechanism",
    "read_output": "reading.outputs",
    "read_thermo_set": "project.thermo_set",
    "read_torsion": "reading.torsion_scans",
    "reference_species": "formation.species_references",
    "render_format": "writing.render",
    "replace_entries": "reading.entries",
    "shown_documents": "report.documents",
    "splice": "project.splice",
    "standalone_svg": "report.svg",
    "symmetry": "structure.symmetry",
    "with_energy": "reading.single_point",
    "with_isotopes": "structure.isotopes",
}
"""Where each public name lives; it is imported when first asked for, so that a command starts quickly."""

__all__ = [
    "Audit",
    "Change",
    "Comparison",
    "Contribution",
    "DiatomicConstants",
    "EnergyChoices",
    "Entry",
    "EntryFile",
    "Finding",
    "FitOptions",
    "FitQuality",
    "Formation",
    "HeatwrightError",
    "InputUncertainties",
    "Level",
    "LnQ",
    "LowModes",
    "Manifest",
    "ModelOptions",
    "Molecule",
    "Nasa7",
    "Page",
    "PublishedFactor",
    "ReferenceSet",
    "Refused",
    "RouteRequest",
    "ScaleChoice",
    "SpeciesRequest",
    "Symmetry",
    "ThermoEntry",
    "ThermoModel",
    "ThermoTable",
    "UsageError",
    "__version__",
    "audit_entries",
    "bonding",
    "build_model",
    "choose_published",
    "collect_atoms",
    "collect_references",
    "compare_sets",
    "entries_context",
    "evidence",
    "figures_of",
    "find_reactions",
    "fit_nasa7",
    "fit_quality",
    "formation_by_atomization",
    "formation_given",
    "formation_of",
    "load_manifest",
    "make_entry",
    "mechanism_effect",
    "mend_entries",
    "mixture_model",
    "page_html",
    "parse_enthalpy",
    "parse_entries",
    "parse_isotope",
    "parse_uncertainties",
    "projected_modes",
    "published_factors",
    "read_entries",
    "read_mechanism",
    "read_output",
    "read_thermo_set",
    "read_torsion",
    "reference_species",
    "render_format",
    "replace_entries",
    "shown_documents",
    "splice",
    "standalone_svg",
    "symmetry",
    "with_energy",
    "with_isotopes",
]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    value = getattr(import_module(f"{__name__}.{_HOME[name]}"), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted(__all__)
