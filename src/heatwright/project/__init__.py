"""project: a mechanism's thermo as a build: manifest, store, build, release, and what changed between two of them."""
