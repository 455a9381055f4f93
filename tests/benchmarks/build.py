"""Builds of many species as whole processes; run on demand.

    python tests/benchmarks/build.py [--species 1000] [--outputs FOLDER] [--processes]

Copies of the sample outputs (or of the outputs in FOLDER, packed or not), each with a line of its own, are built from
nothing, again with nothing to do, and again after a change of the scale factors; then the fit-and-tabulate stage is
timed alone, and the start of a build of one species against `import numpy, click`.  With --processes the first build
is also done by two processes.  Wall seconds, the largest memory, and ratios are printed.
"""

from __future__ import annotations

import argparse
import gzip
import os
import re
import resource
import shutil
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from heatwright.entry import EntryRequest, evaluation_grid, make_entries
from heatwright.findings import Refused, refusals
from heatwright.formation.formation import formation_given, parse_enthalpy
from heatwright.partition.choices import ModelOptions
from heatwright.partition.model import build_model
from heatwright.reading.outputs import read_output
from heatwright.resources import sample_outputs

SAMPLES = Path(str(sample_outputs()))
HEAD = '[mechanism]\nname = "many"\nfrequency-scale = 0.9600\nzpe-scale = 0.98\n'
COMMAND = [sys.executable, "-m", "heatwright", "build", "-q"]


def texts(outputs: Path | None) -> list[tuple[str, str]]:
    """Name and text of each output that an entry can be made of."""
    found = []
    for path in sorted((outputs or SAMPLES).glob("*.out*")):
        try:
            molecule = read_output(path)
        except Refused:
            continue
        if refusals(molecule.findings) or not molecule.has_thermochemistry or molecule.is_atom:
            continue
        data = gzip.decompress(path.read_bytes()) if path.suffix == ".gz" else path.read_bytes()
        found.append((path.name.split(".")[0], data.decode("latin-1")))
    return found


def project(folder: Path, species: int, outputs: Path | None) -> None:
    """A manifest with so many species, each with an output of its own."""
    folder.mkdir()
    rows = [HEAD]
    sources = texts(outputs)
    if outputs is None:
        shutil.copytree(SAMPLES / "atoms", folder / "atoms")
        rows.append('atoms = "atoms"\n')
    (folder / "outs").mkdir()
    for i in range(species):
        name, text = sources[i % len(sources)]
        (folder / "outs" / f"{name[:10]}_{i}.out").write_text(f"{text}\n# copy {i}\n", encoding="latin-1")
    if outputs is None:
        rows.append('[[outputs]]\nglob = "outs/*.out"\n')
    else:
        for path in sorted((folder / "outs").iterdir()):
            rows.append(f'[species."{path.stem}"]\noutput = "outs/{path.name}"\ndHf298 = "0 kJ/mol"\nsource = "none"\n')
    (folder / "heatwright.toml").write_text("".join(rows), encoding="utf-8")


def timed(folder: Path, *more: str) -> tuple[float, float]:
    """Wall seconds and the most memory (MB) of one build."""
    start = time.perf_counter()
    process = subprocess.Popen([*COMMAND, str(folder), *more], stderr=subprocess.DEVNULL)
    _, status, usage = os.wait4(process.pid, 0)
    process.returncode = os.waitstatus_to_exitcode(status)
    assert process.returncode == 0, process.returncode
    return time.perf_counter() - start, usage.ru_maxrss / 1024.0


def rescale(folder: Path) -> None:
    """Another scale factor in the manifest."""
    manifest = folder / "heatwright.toml"
    text = manifest.read_text(encoding="utf-8")
    old = re.search(r"frequency-scale = ([\d.]+)", text)
    assert old is not None
    manifest.write_text(text.replace(old[0], f"frequency-scale = {float(old[1]) + 0.0001:.4f}"), encoding="utf-8")


def whole_builds(species: int, outputs: Path | None, processes: bool) -> None:
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place) / "many"
        project(folder, species, outputs)
        first, memory = timed(folder)
        print(f"first build of {species:5d} species {first:8.2f} s  {memory:5.0f} MB")
        print(f"nothing to do              {timed(folder)[0]:8.2f} s")
        again = []
        for _ in range(3):
            rescale(folder)
            again.append(timed(folder))
        seconds, most = min(again)[0], max(memory for _, memory in again)
        print(f"after a change of scale    {seconds:8.2f} s  {most:5.0f} MB   first / this {first / seconds:5.1f}")
        if processes:
            for name in ("release", ".heatwright.sqlite"):
                path = folder / name
                shutil.rmtree(path) if path.is_dir() else path.unlink()
            two, _ = timed(folder, "-j", "2")
            print(f"first build, -j 2          {two:8.2f} s   -j 1 / -j 2 {first / two:5.2f}")


def stage(species: int, outputs: Path | None) -> None:
    """Species per second from models to entries: functions, table, fit, residuals."""
    with tempfile.TemporaryDirectory() as place:
        molecules = []
        for name, text in texts(outputs):
            path = Path(place) / f"{name}.out"
            path.write_text(text, encoding="latin-1")
            molecules.append(read_output(path))
    enthalpy = parse_enthalpy("-100 kJ/mol")

    def requests(n: int) -> list[EntryRequest]:
        models = [build_model(molecules[i % len(molecules)], ModelOptions(frequency_scale=0.96)) for i in range(n)]
        return [
            EntryRequest(f"X{i}", m, formation_given(enthalpy, "none", m.composition, 10.0))
            for i, m in enumerate(models)
        ]

    make_entries(requests(8))
    rates = []
    for _ in range(3):
        several = requests(min(species, 500))
        grid = evaluation_grid(several[0].options)
        start = time.process_time()
        for request in several:
            assert grid is not None
            request.model.evaluate_ahead(grid)
        make_entries(several)
        rates.append(len(several) / (time.process_time() - start))
    modes = statistics.mean(m.wavenumbers_cm1.size for m in molecules)
    print(f"fit and tabulate           {max(rates):8.0f} species/s of processor time ({modes:.0f} modes on average)")


def start_up(runs: int = 15) -> None:
    """Interleaved medians: a build with nothing to do and one after a change, of one species, and two imports."""
    with tempfile.TemporaryDirectory() as place:
        folder = Path(place) / "one"
        project(folder, 1, None)
        timed(folder)
        bare, idle, changed = [], [], []
        for _ in range(runs):
            start = time.perf_counter()
            subprocess.run([sys.executable, "-c", "import numpy, click"], check=True)
            bare.append(time.perf_counter() - start)
            idle.append(timed(folder)[0])
            rescale(folder)
            changed.append(timed(folder)[0])
    a, b, c = (statistics.median(column) for column in (bare, idle, changed))
    print(f"import numpy, click        {a:8.3f} s")
    print(f"one species, nothing to do {b:8.3f} s   ratio {b / a:4.2f}")
    print(f"one species, new scale     {c:8.3f} s   ratio {c / a:4.2f}")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--species", type=int, default=1000)
    parser.add_argument("--outputs", type=Path, default=None)
    parser.add_argument("--processes", action="store_true")
    options = parser.parse_args()
    print(f"Python {sys.version.split()[0]}, {os.cpu_count()} cores, load {os.getloadavg()[0]:.1f}")
    whole_builds(options.species, options.outputs, options.processes)
    stage(options.species, options.outputs)
    start_up()
    print(f"this process: {resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024:.0f} MB")


if __name__ == "__main__":
    main()
