"""Options that several commands share, and how their texts become values.  No heavy import at module level."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal, TypeVar

import click

from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.entry import FitOptions
    from heatwright.molecule import Molecule
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.lowmodes import LowModes
    from heatwright.partition.model import ThermoModel
    from heatwright.structure.isotopes import Isotope

F = TypeVar("F", bound=Callable[..., Any])

outputs_argument = click.argument(
    "outputs", nargs=-1, required=True, metavar="OUTPUT...", type=click.Path(exists=False, dir_okay=True)
)


def words_options(command: F) -> F:
    """``-q`` and ``-v``."""
    command = click.option("-v", "--verbose", is_flag=True, help="Say more: ledgers, files passed over.")(command)
    return click.option("-q", "--quiet", is_flag=True, help="Say only what failed.")(command)


units_option = click.option(
    "--units",
    type=click.Choice(["kJ", "kcal"]),
    default="kJ",
    show_default=True,
    help="For reading on the terminal only: kJ and J, or kcal and cal. Files, JSON and CSV are always kJ and J.",
)


_STATE_OPTIONS = (
    click.option(
        "--pressure",
        type=click.Choice(["1bar", "1atm"]),
        default="1bar",
        show_default=True,
        help="Standard pressure.",
    ),
)
_SCALING_OPTIONS = (
    click.option("--frequency-scale", type=float, metavar="X", help="Factor on the wavenumbers in Cp, H and S."),
    click.option("--zpe-scale", type=float, metavar="X", help="Factor on the zero-point energy."),
    click.option(
        "--scale",
        type=click.Choice(["published"]),
        help="Both factors from the table of published ones, by the level of theory (see `heatwright scales`).",
    ),
    click.option(
        "--anharmonic", is_flag=True, help="The output's anharmonic fundamentals and zero-point energy, unscaled."
    ),
)
_TREATMENT_OPTIONS = (
    click.option(
        "--low-modes",
        type=click.Choice(["harmonic", "floor", "interpolate"]),
        default="harmonic",
        show_default=True,
        help="Low modes: as oscillators, raised to the cut-off, or towards free rotors below it.",
    ),
    click.option("--cutoff", type=float, metavar="CM1", help="Cut-off of --low-modes.  [default: 100]"),
    click.option(
        "--averaging-moment",
        type=float,
        metavar="KG_M2",
        help="Of --low-modes interpolate, kg m².  [default: 1e-44]",
    ),
    click.option(
        "--rotation",
        type=click.Choice(["classical", "corrected", "sum"]),
        default="classical",
        show_default=True,
        help="Rigid rotor, with its first quantum correction, or a sum over the levels of a linear molecule.",
    ),
    click.option(
        "--torsion",
        "torsions",
        multiple=True,
        metavar="DIR|FILE|TEXT",
        help='A hindered rotor: folder of a scan, scan output, CSV, or "3-1-2-4 n=3 V=373 cm-1". Can be repeated.',
    ),
    click.option("--torsion-coupling", is_flag=True, help="Couple several torsions by their moments of inertia."),
    click.option("--symmetry-number", type=click.IntRange(min=1), metavar="N", help="Instead of the geometry's."),
    click.option("--optical-isomers", type=click.IntRange(min=1), metavar="N", help="Instead of the geometry's."),
    click.option(
        "--symmetry-tolerance",
        type=float,
        metavar="Å",
        default=0.05,
        show_default=True,
        help="How far an atom may be from its image.",
    ),
    click.option(
        "--electronic",
        default="table",
        show_default=True,
        metavar="table|spin|levels|LEVELS",
        help="Electronic levels: the built-in table; the spin alone; the table, with a sum over the rotational levels "
        'of doublet Π radicals; or such as "0:2,139.21:2" (1/cm : degeneracy).',
    ),
    click.option("--masses", type=click.Choice(["isotopic", "average"]), help="Instead of the output's masses."),
    click.option(
        "--isotope",
        "isotopes",
        multiple=True,
        metavar="ATOM=ISOTOPE",
        help="Another isotope: 2=2H (second atom), H=D (every H), 1=13C; wavenumbers anew. Can be repeated.",
    ),
)
_ENERGY_OPTIONS = (
    click.option(
        "--energy",
        "energies",
        multiple=True,
        type=click.Path(),
        metavar="FILE",
        help="Output of a single point at the same geometry that gives the energy; once for each output.",
    ),
)
_MIXTURE_OPTIONS = (
    click.option(
        "--conformer",
        "conformers",
        multiple=True,
        type=click.Path(),
        metavar="FILE",
        help="Output of another conformer of the one OUTPUT; the table is that of their mixture. Can be repeated.",
    ),
    click.option(
        "--uncertainty",
        metavar="default|LIST",
        help='Standard uncertainties from those of the inputs: "scale=0.02,low=0.2,cutoff=400,barrier=0.1,'
        'conformers=1" (relative; cutoff of low modes in 1/cm, conformers in kJ/mol); the others by '
        "default.",
    ),
)
_READING_OPTIONS = (
    click.option("--charge", type=int, metavar="Q", help="Instead of the output's."),
    click.option("--multiplicity", type=click.IntRange(min=1), metavar="M", help="Instead of the output's."),
    click.option("--job", type=click.IntRange(min=1), metavar="N", help="One of several jobs in a file."),
    click.option(
        "--accept",
        multiple=True,
        type=click.Choice(["solvent", "field", "constraints", "excited-state", "gradient", "energy", "bonds"]),
        help="Use an output that is refused for this; recorded as a warning. Can be repeated.",
    ),
    click.option("--accept-gradient", is_flag=True, help="The same as --accept gradient."),
    click.option(
        "--accept-imaginary",
        type=float,
        default=0.0,
        metavar="CM1",
        help="Treat imaginary modes up to CM1 (at most 50) as real wavenumbers of the same magnitude.",
    ),
)


_MODEL_OPTIONS = (
    *_STATE_OPTIONS,
    *_SCALING_OPTIONS,
    *_TREATMENT_OPTIONS,
    *_ENERGY_OPTIONS,
    *_MIXTURE_OPTIONS,
    *_READING_OPTIONS,
)


_RANGE_OPTIONS = (
    click.option(
        "--range",
        "range_text",
        default="200,6000",
        show_default=True,
        metavar="LOW,HIGH",
        help="Range of the polynomial, K.",
    ),
    click.option(
        "--common",
        default="1000",
        show_default=True,
        metavar="T|auto",
        help="Where its two halves meet, K; auto looks for the best.",
    ),
)


def range_options(command: F) -> F:
    """The options that choose the temperatures of a polynomial."""
    for option in reversed(_RANGE_OPTIONS):
        command = option(command)
    return command


def model_options(command: F) -> F:
    """The options that choose how a molecule becomes a model."""
    for option in reversed(_MODEL_OPTIONS):
        command = option(command)
    return command


def target_options(command: F) -> F:
    """The options that choose how an output becomes an energy at 0 K."""
    for option in reversed((*_SCALING_OPTIONS, *_ENERGY_OPTIONS, *_READING_OPTIONS)):
        command = option(command)
    return command


@dataclass(frozen=True, slots=True)
class Reading:
    """How an output is to be read: which job, values that replace its own, isotopes, and what is accepted.

    torsions : whether force constants are wanted, for torsions to be projected out of them.
    """

    job: int | None
    charge: int | None
    multiplicity: int | None
    isotopes: tuple[Isotope, ...] = ()
    accept: tuple[str, ...] = ()
    accept_imaginary_cm1: float = 0.0
    energy: str | None = None
    torsions: bool = False


def taken_reading(options: dict[str, Any]) -> Reading:
    """The reading options out of a command's keyword arguments."""
    from heatwright.structure.isotopes import parse_isotope

    isotopes = tuple(parse_isotope(text) for text in options.pop("isotopes"))
    accept = (*options.pop("accept"), *(["gradient"] if options.pop("accept_gradient") else []))
    imaginary = options.pop("accept_imaginary")
    return Reading(
        options.pop("job"),
        options.pop("charge"),
        options.pop("multiplicity"),
        isotopes,
        accept=accept,
        accept_imaginary_cm1=imaginary,
        torsions=bool(options["torsions"]),
    )


def reading_of_target(options: dict[str, Any]) -> tuple[Reading, ModelOptions]:
    """What target_options say: how to read the output, and the choices for its zero-point energy."""
    from heatwright.partition.choices import ModelOptions

    energies = taken_energies(options, 1)
    reading = Reading(
        options["job"],
        options["charge"],
        options["multiplicity"],
        accept=(*options["accept"], *(["gradient"] if options["accept_gradient"] else [])),
        accept_imaginary_cm1=options["accept_imaginary"],
        energy=energies[0],
    )
    chosen = {name: options[name] for name in ("scale", "frequency_scale", "zpe_scale", "anharmonic")}
    return reading, ModelOptions(**chosen)


def taken_conformers(options: dict[str, Any], n_outputs: int) -> tuple[str, ...]:
    """The files of further conformers out of a command's keyword arguments; raises UsageError with several outputs."""
    conformers: tuple[str, ...] = options.pop("conformers")
    if conformers and n_outputs != 1:
        raise UsageError(f"--conformer belongs to one OUTPUT, and there are {n_outputs}; make one species at a time")
    if conformers and options["symmetry_number"] is not None:
        raise UsageError("--symmetry-number cannot be said for several conformers at once; each has its own")
    if options["torsions"] and n_outputs != 1:
        raise UsageError(f"--torsion belongs to one OUTPUT, and there are {n_outputs}; make one species at a time")
    return conformers


def taken_energies(options: dict[str, Any], n_outputs: int) -> tuple[str | None, ...]:
    """The file of each output's energy out of a command's keyword arguments, None where that is the output itself."""
    energies: tuple[str, ...] = options.pop("energies")
    if energies and len(energies) != n_outputs:
        raise UsageError(
            f"--energy was given {len(energies)} times for {n_outputs} outputs; give it once for each output, "
            "conformers included"
        )
    return energies or (None,) * n_outputs


def taken_model_options(options: dict[str, Any]) -> ModelOptions:
    """The model options out of a command's keyword arguments."""
    from heatwright.constants import ATMOSPHERE_PA, BAR_PA
    from heatwright.partition.choices import ModelOptions
    from heatwright.partition.electronic import parse_levels
    from heatwright.partition.inputs import parse_uncertainties
    from heatwright.reading.torsion_scans import read_torsion

    electronic = options.pop("electronic")
    uncertainty = options.pop("uncertainty")
    scale = options.pop("scale")
    if scale is not None and (options["frequency_scale"] is not None or options["zpe_scale"] is not None):
        raise UsageError("--scale published chooses both factors; leave out --frequency-scale and --zpe-scale")
    return ModelOptions(
        low_modes=_low_modes(options),
        rotation=options.pop("rotation"),
        scale=scale,
        anharmonic=options.pop("anharmonic"),
        pressure_Pa={"1bar": BAR_PA, "1atm": ATMOSPHERE_PA}[options.pop("pressure")],
        frequency_scale=options.pop("frequency_scale"),
        zpe_scale=options.pop("zpe_scale"),
        symmetry_number=options.pop("symmetry_number"),
        optical_isomers=options.pop("optical_isomers"),
        symmetry_tolerance_A=options.pop("symmetry_tolerance"),
        electronic=electronic if electronic in ("table", "spin", "levels") else parse_levels(electronic),
        masses=options.pop("masses"),
        uncertainty=None if uncertainty is None else parse_uncertainties(uncertainty),
        torsions=tuple(read_torsion(text) for text in options.pop("torsions")),
        torsion_coupling=options.pop("torsion_coupling"),
    )


def _low_modes(options: dict[str, Any]) -> LowModes:
    from heatwright.partition.lowmodes import LowModes

    kind, cutoff, moment = (options.pop(name) for name in ("low_modes", "cutoff", "averaging_moment"))
    if cutoff is not None and kind == "harmonic":
        raise UsageError("--cutoff is for --low-modes floor or interpolate")
    if moment is not None and kind != "interpolate":
        raise UsageError("--averaging-moment is for --low-modes interpolate")
    given = {"cutoff_cm1": cutoff, "averaging_moment_kg_m2": moment}
    return LowModes(kind, **{name: value for name, value in given.items() if value is not None})


def usable_molecule(path: str, reading: Reading) -> Molecule:
    """The molecule of an output that a model can be built on; raises Refused with every reason why not."""
    from heatwright.findings import Refused, refusals
    from heatwright.reading.outputs import read_output
    from heatwright.reading.single_point import with_energy
    from heatwright.reading.soundness import no_thermochemistry
    from heatwright.structure.isotopes import with_isotopes

    molecule = read_output(
        path,
        job=reading.job,
        charge=reading.charge,
        multiplicity=reading.multiplicity,
        accept=reading.accept,
        accept_imaginary_cm1=reading.accept_imaginary_cm1,
        with_hessian=bool(reading.isotopes) or reading.torsions,
    )
    if refusals(molecule.findings):
        raise Refused(molecule.findings)
    missing = no_thermochemistry(molecule)
    if missing:
        raise Refused((*missing, *molecule.findings))
    if reading.energy is not None:
        other = read_output(
            reading.energy, charge=reading.charge, multiplicity=reading.multiplicity, accept=reading.accept
        )
        molecule = with_energy(molecule, other)
    return with_isotopes(molecule, reading.isotopes)


def usable_model(path: str, reading: Reading, options: ModelOptions) -> ThermoModel:
    """The model of an output; raises Refused."""
    from heatwright.partition.model import build_model

    return build_model(usable_molecule(path, reading), options)


def usable_species(
    files: tuple[tuple[str, str | None], ...],
    reading: Reading,
    options: ModelOptions,
    *,
    trust_levels: bool = False,
    for_entry: bool = False,
) -> ThermoModel:
    """The model of an output and of further conformers, each a file with that of its energy or None; raises Refused.

    for_entry : refuse what an entry must not be made of as well.
    """
    from dataclasses import replace

    from heatwright.findings import Refused
    from heatwright.reading.acceptance import unfit_for_entry

    models = []
    for path, energy in files:
        try:
            models.append(usable_model(path, replace(reading, energy=energy), options))
            if for_entry and (unfit := unfit_for_entry(models[-1].molecule, reading.accept)):
                raise Refused(unfit)
        except Refused as error:
            raise Refused(f.at(path) for f in error.findings) from error
    if len(models) == 1:
        return models[0]
    from heatwright.partition.mixing import mixture_model

    return mixture_model(models, trust_levels=trust_levels)


def temperatures(text: str) -> list[float]:
    """Temperatures in K, ``298.15,500,1000`` or ``300:3000:100`` (first, last, step) or both mixed.

    Raises UsageError naming the part that cannot be read.

    >>> temperatures("298.15,400:600:100")
    [298.15, 400.0, 500.0, 600.0]
    """
    return [t for part in text.split(",") for t in _temperature_part(part)]


def _temperature_part(part: str) -> list[float]:
    values = [_number(word, f"temperature {part.strip()!r}") for word in part.split(":")]
    if min(values) <= 0.0:
        raise UsageError(f"temperature {part.strip()!r} is not positive; temperatures are in K")
    if len(values) == 1:
        return values
    if len(values) != 3 or values[1] < values[0] or (values[1] - values[0]) / values[2] > 100_000:
        raise UsageError(f"temperatures {part.strip()!r}: expected first:last:step in K, such as 300:3000:100")
    first, last, step = values
    return [first + i * step for i in range(int((last - first) / step * (1 + 1e-12)) + 1)]


def fit_options(range_text: str, common: str) -> FitOptions:
    """The polynomial's temperatures from ``--range LOW,HIGH`` and ``--common T|auto``; raises UsageError."""
    from heatwright.entry import FitOptions

    ends = [_number(word, f"--range {range_text!r}") for word in range_text.split(",")]
    if len(ends) != 2:
        raise UsageError(f"--range {range_text!r}: expected the two ends in K, such as 200,6000")
    middle: float | Literal["auto"] = "auto" if common == "auto" else _number(common, f"--common {common!r}")
    return FitOptions(t_low_K=ends[0], t_common_K=middle, t_high_K=ends[1])


def _number(text: str, what: str) -> float:
    from math import isfinite

    try:
        value = float(text)
    except ValueError:
        value = float("nan")
    if not isfinite(value):
        raise UsageError(f"{what}: {text.strip()!r} is not a number")
    return value
