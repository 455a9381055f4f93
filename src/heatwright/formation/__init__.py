"""formation: from electronic energies and references to enthalpies of formation."""
