"""Options that several commands share, and how their texts become values.  No heavy import at module level."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, Literal, TypeVar

import click

from heatwright.errors import UsageError

if TYPE_CHECKING:
    from heatwright.entry import FitOptions
    from heatwright.partition.choices import ModelOptions
    from heatwright.project.manifest_types import ReadingChoice
    from heatwright.species import Reading

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


def taken_reading(options: dict[str, Any]) -> Reading:
    """The reading options out of a command's keyword arguments."""
    from heatwright.project.conversion import reading_options

    return reading_options(
        _reading_choice(options, isotopes=options.pop("isotopes")), torsions=bool(options["torsions"])
    )


def _reading_choice(options: dict[str, Any], isotopes: tuple[str, ...] = ()) -> ReadingChoice:
    from heatwright.project.manifest_types import ReadingChoice

    accept = (*options.pop("accept"), *(["gradient"] if options.pop("accept_gradient") else []))
    job, charge, multiplicity, imaginary = (
        options.pop(name) for name in ("job", "charge", "multiplicity", "accept_imaginary")
    )
    return ReadingChoice(
        job=job,
        charge=charge,
        multiplicity=multiplicity,
        isotopes=isotopes,
        accept=accept,
        accept_imaginary_cm1=imaginary,
    )


def reading_of_target(options: dict[str, Any]) -> tuple[Reading, ModelOptions]:
    """What target_options say: how to read the output, and the choices for its zero-point energy."""
    from dataclasses import replace

    from heatwright.partition.choices import ModelOptions
    from heatwright.project.conversion import reading_options

    energies = taken_energies(options, 1)
    reading = replace(reading_options(_reading_choice(options)), energy=energies[0])
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
    from heatwright.project.conversion import model_options as of_choice
    from heatwright.project.manifest_types import ModelChoice, TorsionChoice

    taken = {keyword: options.pop(name) for keyword, name in _MODEL_CHOICES.items()}
    torsions = tuple(TorsionChoice(barrier=text) for text in options.pop("torsions"))
    return of_choice(ModelChoice(torsions=torsions, **taken))


_SAME_WORDS = (
    "pressure", "scale", "frequency_scale", "zpe_scale", "anharmonic", "low_modes", "rotation", "torsion_coupling",
    "symmetry_number", "optical_isomers", "electronic", "masses", "uncertainty",
)  # fmt: skip
_MODEL_CHOICES = {
    **dict(zip(_SAME_WORDS, _SAME_WORDS, strict=True)),
    "cutoff_cm1": "cutoff",
    "averaging_moment_kg_m2": "averaging_moment",
    "symmetry_tolerance_A": "symmetry_tolerance",
}
"""The fields of a ModelChoice and the options that set them."""


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
