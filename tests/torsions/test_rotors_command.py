"""``heatwright rotors``: what it lists, with and without a potential."""

from __future__ import annotations

import json

import pytest

from heatwright.cli.main import main
from heatwright.resources import sample_outputs


def run(capfd, *words: str) -> tuple[int, str, str]:
    with pytest.raises(SystemExit) as stopped:
        main(["rotors", *words])
    captured = capfd.readouterr()
    return int(stopped.value.code or 0), captured.out, captured.err


def path(name: str) -> str:
    return str(sample_outputs() / f"{name}.out")


def test_without_a_potential(capfd) -> None:
    code, out, err = run(capfd, path("CH3OH"))
    assert (code, err) == (0, "")
    assert "CH4O, 1 rotatable bond" in out
    assert "torsion 3-1-2-4 about C1-O2: symmetry 3, reduced moment 0.6310 u Å²" in out
    assert "estimated from it" in out
    assert "no potential given" in out


def test_with_a_potential_as_json(capfd) -> None:
    code, out, _ = run(capfd, path("CH3OH"), "--torsion", "3-1-2-4 n=3 V=373.55 cm-1", "--json")
    assert code == 0
    document = json.loads(out)
    (torsion,) = document["outputs"][0]["torsions"]
    assert (document["heatwright"], document["failed"]) == (1, [])
    assert torsion["barrier_estimated"] is False
    s = {name: values["S_J_mol_K"] for name, values in torsion["treatments"].items()}
    assert s["hindered"][0] == pytest.approx(s["Pitzer-Gwinn"][0], abs=0.3)
    assert s["hindered"][0] - s["harmonic"][0] > 1.0
    assert torsion["levels_cm-1"][1] == pytest.approx(9.1, abs=1.0)  # R. M. Lees, J. G. Baker (1968): 9.12


def test_two_tops_and_none(capfd) -> None:
    code, out, _ = run(capfd, path("CH3OCH3"), "--json")
    assert code == 0
    torsions = json.loads(out)["outputs"][0]["torsions"]
    assert [t["symmetry"] for t in torsions] == [3, 3]
    assert torsions[0]["treatments"]["hindered"] is None
    assert torsions[0]["barrier_cm-1"] == pytest.approx(900.0, abs=150.0)  # the scan's is 963
    code, out, _ = run(capfd, path("CO2"))
    assert (code, "no rotatable bonds" in out) == (0, True)


def test_refusals(capfd) -> None:
    code, out, err = run(capfd, path("CH3OH"), "--torsion", "3-1-2-4 n=2 V=373 cm-1")
    assert (code, out) == (3, "")
    assert "[torsion-impossible]" in err
    code, out, _ = run(capfd, path("nothing"), "--json")
    assert code == 3
    assert json.loads(out)["failed"][0]["findings"][0]["code"] == "file-missing"
    assert run(capfd, path("CH3OH"), "--frequency-scale", "-1")[0] == 2
