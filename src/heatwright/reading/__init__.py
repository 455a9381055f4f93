"""Reading: from the output file of a quantum-chemistry program to a :class:`heatwright.molecule.Molecule`.

``outputs`` is the way in; ``files`` gets the text, ``detection`` names the program, ``jobs`` cuts the text at its jobs,
``parsing`` runs cclib on one of them, ``dialects`` knows what each program prints besides, ``assembly`` puts the parts
together, ``soundness`` says whether the result can be used, ``levels`` compares levels of theory.
"""
