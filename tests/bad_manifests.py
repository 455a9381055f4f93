"""Manifests with one fault each, and how the sentence begins that says so."""

# ruff: noqa: E501 - a sentence is on one line here, as it is told

from __future__ import annotations

A = '[species.A]\noutput = "a.out"\n'

BAD = {
    "key": (
        '[species.A]\noutput = "a.out"\nsymetry_number = 2\n',
        "heatwright.toml:3: there is no key 'symetry_number' in [species.A]. Did you mean symmetry-number?",
    ),
    "no near key": (
        '[species.A]\noutput = "a.out"\nzzzzz = 2\n',
        "heatwright.toml:3: there is no key 'zzzzz' in [species.A]; expected one of output, energy",
    ),
    "key of the mechanism": (
        '[species.A]\noutput = "a.out"\npressure = "1atm"\n',
        "heatwright.toml:3: there is no key 'pressure' in [species.A]. It can stand in [mechanism].",
    ),
    "key of a species": (
        "[mechanism]\n\noutput = 1\n",
        "heatwright.toml:3: there is no key 'output' in [mechanism]. It can stand in [species.NAME].",
    ),
    "key of a level": (
        "[levels.x]\natom = 'a'\n",
        "heatwright.toml:2: there is no key 'atom' in [levels.x]. Did you mean atoms?",
    ),
    "key of outputs": (
        "[[outputs]]\nglobb = '*'\n",
        "heatwright.toml:2: there is no key 'globb' in [[outputs]]. Did you mean glob?",
    ),
    "table": (
        "[specis.A]\n",
        "heatwright.toml:1: there is no table or key 'specis'; expected [mechanism], [levels.NAME], [species.NAME], [[outputs]]. Did you mean [species.NAME]?",
    ),
    "top key": (
        "include = 'x'\n",
        "heatwright.toml:1: there is no table or key 'include'; expected [mechanism], [levels.NAME], [species.NAME], [[outputs]]. It belongs into [mechanism].",
    ),
    "dotted name": (
        "[species.C2H5.x]\noutput = 'a'\n",
        "heatwright.toml:1: there is no key 'x' in [species.C2H5]. A name with dots is written in quotes, [species.\"A.B\"].",
    ),
    "no toml": (
        "[mechanism]\nname = \n",
        "heatwright.toml:2: this is no TOML (Invalid value)",
    ),
    "same name twice": (
        '[species.A]\noutput = "a.out"\n\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml:4: species.A is set twice, the first time on line 1; expected each key and table once.",
    ),
    "key twice": (
        '[species.A]\noutput = "a.out"\njob = 1\njob = 2\n',
        "heatwright.toml:4: species.A.job is set twice, the first time on line 3",
    ),
    "species no table": (
        '[species]\nA = "a.out"\n',
        "heatwright.toml:2: species.A is 'a.out'; expected a table, [species.NAME].",
    ),
    "species in a list": (
        '[[species]]\nname = "A"\noutput = "a.out"\n',
        "heatwright.toml:1: species is a list of tables, [[species]]; expected [species.NAME].",
    ),
    "mechanism in a list": (
        "[[mechanism]]\n",
        "heatwright.toml:1: mechanism is a list of tables, [[mechanism]]; expected [mechanism].",
    ),
    "mechanism no table": (
        "mechanism = 1\n",
        "heatwright.toml:1: mechanism is 1; expected a table, [mechanism].",
    ),
    "outputs single": (
        "[outputs]\nglob = '*'\n",
        "heatwright.toml:1: outputs is a single table; expected [[outputs]]",
    ),
    "enthalpy": (
        '[species.A]\noutput = "a.out"\ndHf298 = "-200"\n',
        "heatwright.toml:3: enthalpy of formation '-200': expected a number and one of the units kJ/mol",
    ),
    "enthalpy no text": (
        '[species.A]\noutput = "a.out"\ndHf298 = -200\n',
        "heatwright.toml:3: dHf298 is -200; expected a text with the unit.",
    ),
    "item": (
        '[species.A]\noutput = "a.out"\naccept = [\n  "field",\n  "nonsense",\n]\n',
        "heatwright.toml:5: item 2 is 'nonsense'; expected one of",
    ),
    "isotope": (
        '[species.A]\noutput = "a.out"\nisotopes = "2=9H"\n',
        "heatwright.toml:3: isotope '2=9H': there is no mass of 9H in the table",
    ),
    "levels": (
        '[species.A]\noutput = "a.out"\nelectronic = "1:2"\n',
        "heatwright.toml:3: electronic levels are counted from the ground level",
    ),
    "level without end": (
        '[species.A]\noutput = "a.out"\nelectronic = "0:2,1e400:2"\n',
        "heatwright.toml:3: an electronic level has no finite wavenumber",
    ),
    "tolerance": (
        '[species.A]\noutput = "a.out"\nsymmetry-tolerance = 3\n',
        "heatwright.toml:3: symmetry-tolerance is 3; expected a positive number of at most 0.35.",
    ),
    "barrier": (
        '[species.A]\noutput = "a.out"\ntorsions = "3-1-2-4 n=3 V=1 mile"\n',
        "heatwright.toml:3: torsion '3-1-2-4 n=3 V=1 mile'",
    ),
    "uncertainty": (
        '[species.A]\noutput = "a.out"\nuncertainty = "scle=0.02"\n',
        "heatwright.toml:3: ",
    ),
    "reaction": (
        '[species.A]\noutput = "a.out"\nreaction = "A + B"\n',
        "heatwright.toml:3: reaction 'A + B': expected two sides",
    ),
    "imaginary": (
        '[species.A]\noutput = "a.out"\naccept-imaginary = 51\n',
        "heatwright.toml:3: accept-imaginary is 51; expected a number from 0 to 50.",
    ),
    "range": (
        '[species.A]\noutput = "a.out"\nrange = [6000, 200]\n',
        "heatwright.toml:3: range is [6000, 200]; expected two temperatures in K",
    ),
    "range of the fit": (
        '[species.A]\noutput = "a.out"\nrange = [400, 6000]\n',
        "heatwright.toml:3: a range of 400 to 1000 to 6000 K was asked for",
    ),
    "common": (
        "[mechanism]\ncommon = 250\n",
        "heatwright.toml:2: a range of 200 to 250 to 6000 K was asked for",
    ),
    "conformer key": (
        '[species.A]\noutput = "a.out"\nconformers = [{ output = "b", enery = "c" }]\n',
        "heatwright.toml:3: there is no key 'enery' in a conformer; expected output and energy.",
    ),
    "conformer without": (
        '[species.A]\noutput = "a.out"\nconformers = [{ energy = "c" }]\n',
        "heatwright.toml:3: a conformer has no output; expected a path or glob",
    ),
    "path": (
        '[species.A]\noutput = "a\\u0000b"\n',
        "heatwright.toml:2: the path 'a\\x00b' holds characters that are not printable",
    ),
    "no output": (
        "[species.A]\njob = 1\n",
        'heatwright.toml:1: species A has no output; expected output = "FILE".',
    ),
    "scale": (
        '[species.A]\noutput = "a.out"\nscale = "published"\nzpe-scale = 1\n',
        'heatwright.toml:4: scale = "published" chooses both factors',
    ),
    "scale above": (
        '[species.A]\noutput = "a.out"\nzpe-scale = 1\n[mechanism]\nscale = "published"\n',
        "heatwright.toml:3: zpe-scale takes the place of scale in [mechanism], and frequency-scale is not stated; expected both factors",
    ),
    "anharmonic": (
        '[species.A]\noutput = "a.out"\nanharmonic = true\nzpe-scale = 1\n',
        "heatwright.toml:3: scale factors are for harmonic wavenumbers, and anharmonic is true",
    ),
    "anharmonic torsion": (
        '[species.A]\noutput = "a.out"\nanharmonic = true\ntorsions = "s"\n',
        "heatwright.toml:4: a torsion is projected out of harmonic modes",
    ),
    "cutoff": (
        '[species.A]\noutput = "a.out"\ncutoff = 50\n',
        "heatwright.toml:3: cutoff is for low-modes floor or interpolate, and low-modes is harmonic.",
    ),
    "moment": (
        '[mechanism]\nlow-modes = "floor"\naveraging-moment = 1e-44\n',
        "heatwright.toml:3: averaging-moment is for low-modes interpolate, and low-modes is floor.",
    ),
    "reason": (
        '[species.A]\noutput = "a.out"\nsymmetry-reason = "so"\n',
        "heatwright.toml:3: symmetry-reason is given without symmetry-number or optical-isomers.",
    ),
    "several numbers": (
        '[species.A]\noutput = "a.out"\nsymmetry-number = 2\nconformers = "b.out"\n',
        "heatwright.toml:3: symmetry-number cannot be said for several conformers at once",
    ),
    "source": (
        '[species.A]\noutput = "a.out"\nsource = "s"\n',
        "heatwright.toml:3: source is where dHf298 is from, and there is no dHf298.",
    ),
    "route given": (
        '[species.A]\noutput = "a.out"\nroute = "given"\n',
        'heatwright.toml:1: species A has no dHf298, and its route is given (heatwright.toml:3); expected dHf298 = "VALUE kJ/mol".',
    ),
    "atomization": (
        '[species.A]\noutput = "a.out"\n[mechanism]\nroute = "atomization"\n',
        'heatwright.toml:4: route atomization needs the atoms\' outputs; expected atoms = "FOLDER".',
    ),
    "best": (
        '[species.A]\noutput = "a.out"\n[mechanism]\natoms = "a"\nroute = "best"\n',
        'heatwright.toml:5: route best needs outputs of reference species; expected references = "FOLDER".',
    ),
    "reaction alone": (
        '[species.A]\noutput = "a.out"\nreaction = "A -> B"\n',
        "heatwright.toml:3: the reaction needs outputs of its reference species",
    ),
    "reaction and given": (
        '[species.A]\noutput = "a.out"\nreferences = "r"\nreaction = "A -> B"\ndHf298 = "1 kJ/mol"\n',
        "heatwright.toml:4: dHf298 and reaction are two ways to one value. Choose by route.",
    ),
    "reaction by network": (
        '[species.A]\noutput = "a.out"\nreferences = "r"\nreaction = "A -> B"\nroute = "network"\n',
        "heatwright.toml:4: a reaction is for route reaction or best, and route is network.",
    ),
    "level": (
        '[species.A]\noutput = "a.out"\nlevel = "x"\n',
        "heatwright.toml:3: there is no level 'x'; expected a table [levels.x].",
    ),
    "level and folder": (
        '[species.A]\noutput = "a.out"\nlevel = "x"\natoms = "a"\n[levels.x]\natoms = "b"\n',
        "heatwright.toml:4: level x says where atoms and references are, and this table says it as well; expected one of them.",
    ),
    "name": (
        '[species."a b"]\noutput = "a"\n',
        "heatwright.toml:1: the species name 'a b' holds ' '; expected printable ASCII characters without blanks, '!' and '&'. Write a table [species.NAME] with output = 'a' and a name that fits.",
    ),
    "no name": (
        '[species.""]\noutput = "a"\n',
        "heatwright.toml:1: the species has no name. Write a table [species.NAME] with output = 'a'",
    ),
    "a keyword as a name": (
        '[species.end]\noutput = "a"\n',
        "heatwright.toml:1: the species name 'end' reads as the keyword of a section at the start of a record.",
    ),
    "store in the place of an output": (
        '[mechanism]\nstore = "a.out"\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml:2: the store would take the place of a.out. Give the store a file of its own.",
    ),
    "store in the place of the manifest": (
        '[mechanism]\nstore = "./heatwright.toml"\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml:2: the store would take the place of heatwright.toml.",
    ),
    "store in the release": (
        '[mechanism]\nstore = "release/store"\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml:2: the store would lie in the release, release. Give the store another place.",
    ),
    "release in the place of the store": (
        '[mechanism]\nrelease = ".heatwright.sqlite"\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml: the store would lie in the release, .heatwright.sqlite.",
    ),
    "release among outputs": (
        '[mechanism]\nrelease = "runs"\n[species.A]\noutput = "runs/a.out"\n',
        "heatwright.toml:2: the release would lie where runs/a.out is. Give the release a folder of its own.",
    ),
    "release among atoms": (
        '[mechanism]\natoms = "atoms"\nrelease = "atoms"\n[species.A]\noutput = "a.out"\n',
        "heatwright.toml:3: the release would lie where atoms is.",
    ),
    "release in a scan": (
        '[mechanism]\nrelease = "scan"\n[species.A]\noutput = "a.out"\ntorsions = "scan"\n',
        "heatwright.toml:2: the release would lie where scan is.",
    ),
    "empty glob": (
        '[[outputs]]\n\nglob = "*.out"\n',
        "heatwright.toml:3: the glob '*.out' matches no file in ",
    ),
    "no glob": (
        "[[outputs]]\njob = 1\n",
        'heatwright.toml:1: [[outputs]] has no glob; expected glob = "*.out".',
    ),
    "empty include": (
        '[mechanism]\ninclude = [\n  "x/*.toml",\n]\n',
        "heatwright.toml:3: the glob 'x/*.toml' matches no",
    ),
    "missing include": (
        '[mechanism]\ninclude = "x.toml"\n',
        "heatwright.toml:2: 'x.toml' matches no file in ",
    ),
    "all excepted": (
        '[[outputs]]\nglob = "*.toml"\nexcept = "heat*"\n',
        "heatwright.toml:2: the glob '*.toml' matches no file that except does not leave out.",
    ),
    "empty conformers": (
        '[species.A]\noutput = "a.out"\nconformers = "c*.out"\n',
        "heatwright.toml:3: the glob 'c*.out' matches no file in ",
    ),
    "file twice": (
        '[species.A]\noutput = "a.out"\n[species.B]\noutput = "./a.out"\n',
        "heatwright.toml:3: a.out is used for B and for A (heatwright.toml:1). Correct one of them; say job or isotopes where one file holds both.",
    ),
    "energy twice": (
        '[species.A]\noutput = "a.out"\nenergy = "e"\n[species.B]\noutput = "b"\nenergy = "e"\n',
        "heatwright.toml:4: e is used for B and for A (heatwright.toml:1).",
    ),
    "output as conformer": (
        '[species.A]\noutput = "a.out"\nconformers = "a.out"\n',
        "heatwright.toml:1: a.out is used twice for A; expected each output and energy once.",
    ),
    "output as energy": (
        '[species.A]\noutput = "a.out"\nenergy = "a.out"\n',
        "heatwright.toml:1: a.out is used twice for A",
    ),
}
"""Name of the case: text of the manifest, beginning of the sentence."""
