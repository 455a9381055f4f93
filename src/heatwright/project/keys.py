"""Every key of a manifest, defined once: reading, errors, JSON Schema and the list in the README come from it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal

from heatwright.project import kinds
from heatwright.project.kinds import Kind, choice, number_between, several, whole

Place = Literal["mechanism", "levels", "species", "outputs"]
"""The tables: [mechanism], [levels.NAME], [species.NAME], [[outputs]]."""

EVERYWHERE: Final[tuple[Place, ...]] = ("mechanism", "species", "outputs")
AT_A_LEVEL: Final[tuple[Place, ...]] = ("mechanism", "levels", "species", "outputs")
OF_MANY: Final[tuple[Place, ...]] = ("species", "outputs")
ONE: Final[tuple[Place, ...]] = ("species",)
WHOLE: Final[tuple[Place, ...]] = ("mechanism",)


@dataclass(frozen=True, slots=True)
class Key:
    """A key: its name, the tables it may stand in, its kind, what it means, and its default in words.

    field : of the frozen types it fills, ``model.cutoff_cm1``; empty where it is used otherwise.
    """

    name: str
    places: tuple[Place, ...]
    kind: Kind
    meaning: str
    field: str = ""
    default: str = ""


_ACCEPTABLE: Final = choice("solvent", "field", "constraints", "excited-state", "gradient", "energy", "bonds")

KEYS: Final[tuple[Key, ...]] = (
    # --- the mechanism ------------------------------------------------------------------------------------------
    Key("name", WHOLE, kinds.TEXT, "What the mechanism is called.", default="mechanism"),
    Key("release", WHOLE, kinds.PATH, "Folder of the written entries.", default="release"),
    Key("store", WHOLE, kinds.PATH, "File of what was read and computed.", default=".heatwright.sqlite"),
    Key("units", WHOLE, choice("kJ", "kcal"), "Of the words on the terminal.", default="kJ"),
    Key("include", WHOLE, kinds.GLOBS, "Further manifests, whose species belong to this mechanism."),
    Key("pressure", WHOLE, choice("1bar", "1atm"), "Standard pressure.", "model.pressure", "1bar"),
    # --- which files --------------------------------------------------------------------------------------------
    Key("output", ONE, kinds.PATH, "Output of the frequencies."),
    Key("energy", ONE, kinds.PATH, "Output of a single point at the same geometry that gives the energy."),
    Key("conformers", ONE, kinds.CONFORMERS, "Outputs of further conformers, as paths, globs or with an energy."),
    Key("glob", ("outputs",), kinds.GLOBS, "Outputs that are one species each, named after the file."),
    Key("except", ("outputs",), kinds.NAMES, "Files of the glob to leave out (their name, or path, as a pattern)."),
    Key("level", EVERYWHERE, kinds.TEXT, "Name of the [levels.NAME] that says where atoms and references are."),
    # --- the enthalpy of formation ------------------------------------------------------------------------------
    Key("atoms", AT_A_LEVEL, kinds.PATH, "Folder of atom outputs.", "folders.atoms"),
    Key("references", AT_A_LEVEL, kinds.PATH, "Folder of outputs of reference species.", "folders.references"),
    Key("reference-table", AT_A_LEVEL, kinds.PATH, "CSV of your own reference enthalpies.", "folders.reference_table"),
    Key("zero-kelvin", AT_A_LEVEL, kinds.PATH, "CSV of 0 K energies of a composite scheme.", "folders.zero_kelvin"),
    Key("corrections", AT_A_LEVEL, kinds.PATH, "CSV of your corrections for atoms, bonds.", "folders.corrections"),
    Key(
        "route",
        EVERYWHERE,
        choice("given", "atomization", "reaction", "network", "best"),
        "Way to the enthalpy of formation.",
        "formation.route",
        "by what is there",
    ),
    Key("dHf298", ONE, kinds.ENTHALPY, "Enthalpy of formation at 298.15 K with its unit.", "formation.dHf298"),
    Key("source", ONE, kinds.TEXT, "Where dHf298 is from.", "formation.source"),
    Key("reaction", ONE, kinds.REACTION, "Balanced reaction with reference species.", "formation.reaction"),
    Key(
        "trust-levels",
        EVERYWHERE,
        kinds.FLAG,
        "Combine energies of different levels.",
        "formation.trust_levels",
        "false",
    ),
    Key("spin-orbit", EVERYWHERE, kinds.FLAG, "Take atoms to their lowest levels.", "formation.spin_orbit", "false"),
    Key(
        "electron",
        EVERYWHERE,
        choice("thermal", "stationary"),
        "Convention for the electron of an ion.",
        "formation.electron",
        "thermal",
    ),
    # --- how outputs are read -----------------------------------------------------------------------------------
    Key("job", OF_MANY, whole(1), "Which of several jobs in the output.", "reading.job"),
    Key("charge", OF_MANY, whole(), "Instead of the output's.", "reading.charge"),
    Key("multiplicity", OF_MANY, whole(1), "Instead of the output's.", "reading.multiplicity"),
    Key("isotopes", ONE, kinds.ISOTOPES, "Other isotopes, with wavenumbers anew.", "reading.isotopes"),
    Key(
        "accept",
        EVERYWHERE,
        several(_ACCEPTABLE, f"a list of {_ACCEPTABLE.expected.removeprefix('one of ')}"),
        "What outputs are otherwise refused for.",
        "reading.accept",
        "nothing",
    ),
    Key(
        "accept-imaginary",
        EVERYWHERE,
        number_between(0.0, 50.0),
        "Imaginary modes up to this (1/cm) are taken as real ones.",
        "reading.accept_imaginary_cm1",
        "0",
    ),
    # --- from molecule to functions -----------------------------------------------------------------------------
    Key("scale", EVERYWHERE, choice("published"), "Both factors from the published ones.", "model.scale"),
    Key("frequency-scale", EVERYWHERE, kinds.POSITIVE, "Factor on wavenumbers.", "model.frequency_scale", "1"),
    Key("zpe-scale", EVERYWHERE, kinds.POSITIVE, "Factor on the zero-point energy.", "model.zpe_scale", "1"),
    Key("anharmonic", EVERYWHERE, kinds.FLAG, "Fundamentals as printed, unscaled.", "model.anharmonic", "false"),
    Key(
        "low-modes",
        EVERYWHERE,
        choice("harmonic", "floor", "interpolate"),
        "Treatment of low modes.",
        "model.low_modes",
        "harmonic",
    ),
    Key("cutoff", EVERYWHERE, kinds.POSITIVE, "Of low-modes floor or interpolate, 1/cm.", "model.cutoff_cm1", "100"),
    Key(
        "averaging-moment",
        EVERYWHERE,
        kinds.POSITIVE,
        "Of low-modes interpolate, kg m².",
        "model.averaging_moment_kg_m2",
        "1e-44",
    ),
    Key(
        "rotation",
        EVERYWHERE,
        choice("classical", "corrected", "sum"),
        "Rigid rotor, with its quantum correction, or summed.",
        "model.rotation",
        "classical",
    ),
    Key("torsions", ONE, kinds.TORSIONS, "Hindered rotors: scans (folder, file) or barriers.", "model.torsions"),
    Key("torsion-coupling", EVERYWHERE, kinds.FLAG, "Couple several torsions.", "model.torsion_coupling", "false"),
    Key("symmetry-number", ONE, whole(1), "Instead of the geometry's.", "model.symmetry_number"),
    Key("optical-isomers", ONE, whole(1), "Instead of the geometry's.", "model.optical_isomers"),
    Key("symmetry-reason", ONE, kinds.TEXT, "Why the geometry is overruled.", "model.symmetry_reason"),
    Key(
        "symmetry-tolerance",
        EVERYWHERE,
        number_between(0.0, 0.35, open_below=True),
        "How far (Å) an atom may be from its image.",
        "model.symmetry_tolerance_A",
        "0.05",
    ),
    Key("electronic", EVERYWHERE, kinds.ELECTRONIC, "Electronic levels.", "model.electronic", "table"),
    Key("masses", EVERYWHERE, choice("isotopic", "average"), "Instead of the output's.", "model.masses"),
    Key("uncertainty", EVERYWHERE, kinds.UNCERTAINTY, "Standard uncertainties of the inputs.", "model.uncertainty"),
    # --- the polynomial and the entry ---------------------------------------------------------------------------
    Key("range", EVERYWHERE, kinds.TEMPERATURES, "Range of the polynomial, K.", "fit.range", "[200, 6000]"),
    Key("common", EVERYWHERE, kinds.COMMON, "Where its two halves meet, K.", "fit.t_common_K", "1000"),
    Key("note", OF_MANY, kinds.TEXT, "A short text in the entry itself.", "note"),
    Key("comments", OF_MANY, kinds.LINES, "Lines before the entry.", "comments"),
)
"""All keys, in the order in which they are shown."""

TABLES: Final[dict[Place, str]] = {
    "mechanism": "What holds for the whole mechanism, and defaults for its species.",
    "levels": "Where the outputs of atoms and reference species of a level of theory are.",
    "species": "One species; its own values come before those of [mechanism].",
    "outputs": "Many species at once: one for each output that a glob finds.",
}
"""The tables of a manifest and what they are for."""


def keys_of(place: Place) -> dict[str, Key]:
    """The keys that may stand in a table, by name."""
    return _BY_PLACE[place]


_BY_PLACE: Final = {place: {key.name: key for key in KEYS if place in key.places} for place in TABLES}
