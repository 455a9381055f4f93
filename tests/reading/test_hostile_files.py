"""Files that want to do harm: pipes, loops, bombs, archives, endless lines, gigabytes of the same."""

from __future__ import annotations

import bz2
import gzip
import lzma
import os
import subprocess
import sys
import time
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest

from heatwright.findings import Finding, Refused
from heatwright.reading.files import SMALL_BYTES, read_text
from heatwright.reading.outputs import read_output
from kept_outputs import kept, text_of

WATER = "qchem51_water_freq.out"


def refusal(path: str | Path) -> Finding:
    with pytest.raises(Refused) as caught:
        read_output(path)
    return caught.value.findings[-1]


def zipped(path: Path, **members: str) -> Path:
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, text in members.items():
            archive.writestr(name, text)
    return path


def test_a_zip_of_one_output_is_read_in_place(tmp_path: Path) -> None:
    m = read_output(zipped(tmp_path / "run.zip", water=text_of(WATER)))
    assert (m.findings, m.energy_hartree) == ((), read_output(kept(WATER)).energy_hartree)
    with zipfile.ZipFile(tmp_path / "folder.zip", "w") as archive:
        archive.mkdir("runs")
        archive.writestr("runs/water.out", text_of(WATER))
    assert read_output(tmp_path / "folder.zip").findings == ()


def test_a_zip_of_several_files_names_them(tmp_path: Path) -> None:
    found = refusal(zipped(tmp_path / "two.zip", first="a", second="b"))
    assert (found.code, "holds 2 files: first, second" in found.text) == ("several-files", True)
    assert refusal(zipped(tmp_path / "none.zip")).code in {"several-files", "not-an-output"}
    many = refusal(zipped(tmp_path / "many.zip", **{f"f{i}": "x" for i in range(9)}))
    assert many.text.count("f") < 30
    assert "f5, …" in many.text


@pytest.mark.parametrize("cut", [40, 400, 3000])
def test_a_damaged_zip(tmp_path: Path, cut: int) -> None:
    whole = zipped(tmp_path / "run.zip", water=text_of(WATER)).read_bytes()
    (tmp_path / "cut.zip").write_bytes(whole[:cut])
    assert refusal(tmp_path / "cut.zip").code == "truncated"
    torn = bytearray(whole)
    torn[200:240] = bytes(40)
    (tmp_path / "torn.zip").write_bytes(bytes(torn))
    assert refusal(tmp_path / "torn.zip").code == "truncated"


@pytest.mark.parametrize("pack", [gzip.compress, bz2.compress, lzma.compress])
def test_a_bomb_is_stopped(tmp_path: Path, pack: Callable[[bytes], bytes]) -> None:
    (tmp_path / "bomb").write_bytes(pack(bytes(30_000_000)))
    with pytest.raises(Refused, match="unpacks to one larger than") as caught:
        read_text(tmp_path / "bomb", most_bytes=5_000_000)
    assert caught.value.findings[-1].code == "file-too-large"


def test_a_zip_bomb_is_stopped(tmp_path: Path) -> None:
    with pytest.raises(Refused, match="unpacks to one larger than"):
        read_text(zipped(tmp_path / "bomb.zip", zeros="0" * 30_000_000), most_bytes=5_000_000)


@pytest.mark.parametrize("pack", [gzip.compress, bz2.compress, lzma.compress])
def test_what_unpacks_to_much_more_is_whole(tmp_path: Path, pack: Callable[[bytes], bytes]) -> None:
    """The pieces in which a file is unpacked are joined without loss."""
    plain = "".join(f"line {i} of a text that repeats itself\n" for i in range(60_000))
    (tmp_path / "packed").write_bytes(pack(plain.encode()) + pack(b"and another member\n"))
    assert read_text(tmp_path / "packed").text == f"{plain}and another member\n"


def test_a_file_beyond_the_limit_is_not_opened(tmp_path: Path) -> None:
    path = tmp_path / "holes"
    with path.open("wb") as stream:
        stream.truncate(2_000_000_001)  # a file of holes takes no place
    found = refusal(path)
    assert (found.code, "larger than 2 GB" in found.text) == ("file-too-large", True)


def test_of_a_large_file_without_a_banner_only_the_head_is_read(tmp_path: Path) -> None:
    path = tmp_path / "noise"
    with path.open("wb") as stream:
        stream.write(b"nothing to see\n")
        stream.truncate(1_500_000_000)
    start = time.perf_counter()
    assert refusal(path).code == "not-an-output"
    assert time.perf_counter() - start < 5.0
    assert len(read_text(path).text) < SMALL_BYTES


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="this system has no named pipes")
def test_a_pipe_does_not_hang(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    assert "not a regular file" in refusal(tmp_path / "pipe").text


def test_devices_and_loops(tmp_path: Path) -> None:
    if Path("/dev/null").exists():
        assert "not a regular file" in refusal("/dev/null").text
    (tmp_path / "loop").symlink_to(tmp_path / "loop")
    assert refusal(tmp_path / "loop").code == "file-missing"
    (tmp_path / "link").symlink_to(kept(WATER))
    assert read_output(tmp_path / "link").findings == ()


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may read everything")
def test_no_permission(tmp_path: Path) -> None:
    (tmp_path / "secret").write_text(text_of(WATER))
    (tmp_path / "secret").chmod(0)
    assert "permission denied" in refusal(tmp_path / "secret").text


def test_permission_error_is_a_finding(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "secret").write_text(text_of(WATER))

    def denied(*_: object, **__: object) -> None:
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr("builtins.open", denied)
    assert "permission denied" in refusal(tmp_path / "secret").text


# --- size -------------------------------------------------------------------------------------------------------------

CHILD = """
import resource, sys, time
from heatwright.reading.outputs import read_output
start = time.process_time()
m = read_output(sys.argv[1])
print(m.wavenumbers_cm1.size, time.process_time() - start, resource.getrusage(resource.RUSAGE_SELF).ru_maxrss)
"""


def grown(name: str, first: str, last: str, size: int) -> str:
    """An output in which the lines from one text to another are repeated until it has a size."""
    text = text_of(name)
    a, b = (text.rindex("\n", 0, text.index(word)) + 1 for word in (first, last))
    return text[:a] + text[a:b] * max((size - len(text)) // (b - a), 1) + text[b:]


REPEATED = [
    ("gaussian16_dvb_freq.out", "Standard orientation:", "Harmonic frequencies (cm**-1)"),
    (WATER, "Standard Nuclear Orientation", "VIBRATIONAL ANALYSIS"),
    ("orca50_dvb_freq.out", "CARTESIAN COORDINATES (ANGSTROEM)", "VIBRATIONAL FREQUENCIES"),
    ("psi4_132_oh_radical_freq.out", "==> Iterations <==", "==> Harmonic Vibrational Analysis <=="),
]


def cost(path: Path, text: str) -> tuple[float, float]:
    """Seconds of computing and megabytes at most, in a process of its own."""
    path.write_text(text)
    # a shell between: the memory of a process that starts another counts as the other's at first
    shell = ["/bin/sh", "-c", '"$0" -c "$1" "$2"; exit $?', sys.executable, CHILD, str(path)]
    done = subprocess.run(shell, capture_output=True, text=True, check=True)
    modes, seconds, kilobytes = done.stdout.split()
    assert int(modes) > 0
    return float(seconds), float(kilobytes) / 1000.0


def small_and_large(folder: Path, case: tuple[str, str, str], size: int) -> None:
    third_s, _ = cost(folder / "third", grown(*case, size // 3))
    text = grown(*case, size)
    seconds, megabytes = cost(folder / "whole", text)
    assert megabytes < 100.0 + 4.0 * len(text) / 1e6
    assert seconds < 5.0 * third_s + 2.0


@pytest.mark.parametrize("case", REPEATED, ids=lambda c: c[0])
def test_memory_and_time(tmp_path: Path, case: tuple[str, str, str]) -> None:
    small_and_large(tmp_path, case, 3_000_000)


@pytest.mark.long
@pytest.mark.parametrize("case", REPEATED, ids=lambda c: c[0])
def test_memory_and_time_of_sixty_megabytes(tmp_path: Path, case: tuple[str, str, str]) -> None:
    small_and_large(tmp_path, case, 60_000_000)


WHOLE = ["gaussian16_dvb_freq.out", "orca60_dvb_freq.out", WATER, "nwchem702_methanol_freq.out",
         "psi4_132_h2o_opt_freq.out", "mopac2206_methanol_force_thermo.out"]  # fmt: skip
"""Outputs of which many are joined to one: as many jobs of one molecule, the last of which is read."""
TITLES = [
    ("nwchem702_water_cosmo_freq.out", "ENERGY GRADIENTS"),
    ("psi4_132_h2o_opt_freq.out", "Geometry (in Angstrom), charge = 0, multiplicity = 1:\n\n       Center  "),
    ("psi4_132_h2o_opt_freq.out", "-Total Gradient:"),
    ("nwchem702_d2o_freq.out", "NWChem Input Module\n NWChem SCF Module"),
    ("mopac2206_methanol_force_thermo.out", "  298   VIB.  "),
]
"""Titles of tables, repeated without any table."""


def seconds_to_read(path: Path, text: str) -> float:
    path.write_text(text)
    start = time.process_time()
    assert read_output(path).wavenumbers_cm1.size > 0
    return time.process_time() - start


def four_times_as_long(path: Path, begin: str, part: str, end: str, size: int) -> None:
    """Four times as much text takes not much more than four times as long."""
    n = max(size // len(part), 2)
    short = seconds_to_read(path, begin + part * n + end)
    assert seconds_to_read(path, begin + part * (4 * n) + end) < 6.0 * short + 0.5


@pytest.mark.parametrize("name", WHOLE)
def test_many_jobs_in_one_file(tmp_path: Path, name: str) -> None:
    four_times_as_long(tmp_path / "many", "", text_of(name), "", 800_000)


@pytest.mark.parametrize(("name", "title"), TITLES)
def test_titles_without_tables(tmp_path: Path, name: str, title: str) -> None:
    text = text_of(name)
    edge = text.index("\n", len(text) // 3) + 1
    part = f" {title}\n" + "some words\n" * 20
    four_times_as_long(tmp_path / "titles", text[:edge], part, text[edge:], 400_000)


@pytest.mark.long
@pytest.mark.parametrize("name", WHOLE)
def test_a_file_of_many_jobs_and_twenty_megabytes(tmp_path: Path, name: str) -> None:
    third_s, _ = cost(tmp_path / "third", text_of(name) * (7_000_000 // len(text_of(name))))
    text = text_of(name) * (20_000_000 // len(text_of(name)))
    seconds, megabytes = cost(tmp_path / "whole", text)
    assert megabytes < 100.0 + 4.0 * len(text) / 1e6
    assert seconds < 5.0 * third_s + 2.0


@pytest.mark.parametrize("filling", ["x" * 3_000_000, "SCF Done:  E(" * 200_000, " \n" * 1_000_000, "9.9 " * 700_000])
def test_endless_lines(tmp_path: Path, filling: str) -> None:
    for name, word in (("gaussian16_dvb_freq.out", " Standard orientation:"), (WATER, " Standard Nuclear Orientation")):
        text = text_of(name)
        (tmp_path / "made").write_text(text.replace(word, f"{filling}\n{word}", 1))
        start = time.perf_counter()
        m = read_output(tmp_path / "made")
        assert time.perf_counter() - start < 10.0
        assert m.wavenumbers_cm1.size == read_output(kept(name)).wavenumbers_cm1.size
