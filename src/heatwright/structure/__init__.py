"""What the geometry alone says of a molecule: moments of inertia, point group and symmetry number."""
